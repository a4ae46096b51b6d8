//! From the wind at 10 m over the sea to the geostrophic wind that the pressure would give it.
//!
//! The geostrophic drag law over a sea roughened by its own wind says how much slower the surface
//! wind is than the wind above and how far it is turned towards low pressure (METHODS WND-7: Troen
//! and Petersen 1989; Charnock 1955; Smith 1988). The wind above is a gradient wind: where the
//! isobars are curved, the geostrophic wind is V + K V^2 / f (WND-3).

use super::covariance::coupling;
use crate::obs::Observation;
use crate::quantity::{GRAVITY_M_S2, coriolis_per_s};

/// Von Karman's constant, the drag law's A and B, Charnock's number, viscosity of the air m2/s.
const KARMAN: f64 = 0.4;
const A: f64 = 1.8;
const B: f64 = 4.5;
const CHARNOCK: f64 = 0.0144;
const VISCOSITY_M2_S: f64 = 1.5e-5;
/// Error of a component that is not coupled to the pressure at all, m/s (METHODS ANA-3 e).
const UNCOUPLED_M_S: f64 = 3.0;
/// What the balance itself leaves unexplained: a share of the speed, and m/s.
const IMBALANCE_SHARE: f64 = 0.12;
const IMBALANCE_M_S: f64 = 1.5;
/// Lowest latitude at which a wind is used for the pressure, degrees.
const LATITUDE_MIN_DEG: f64 = 8.0;

/// What is known of friction and curvature.
#[derive(Clone, PartialEq, Debug, Default)]
pub(super) struct Friction {
    /// For each report, the curvature of the isobars there, 1/m, cyclonic positive in both
    /// hemispheres; 0 where it is not known.
    pub(super) curvature_per_m: Vec<f64>,
    /// Factor on the errors, learnt from how well the winds fit; 0 counts as 1.
    pub(super) error_factor: f64,
}

/// The wind above from a 10 m wind at sea: speed ratio 10 m over above, and angle towards low
/// pressure, radians. Valid for 0.3 to 60 m/s.
pub(super) fn sea_drag(speed_10m_m_s: f64, latitude_deg: f64) -> (f64, f64) {
    let speed = speed_10m_m_s.clamp(0.3, 60.0);
    let coriolis = coriolis_per_s(latitude_deg.abs().max(15.0));
    let mut friction = 0.04 * speed;
    let mut roughness_m = 1e-4;
    // A contraction: 12 rounds leave less than 1e-6 of the change.
    for _ in 0..12 {
        roughness_m =
            CHARNOCK * friction * friction / GRAVITY_M_S2 + 0.11 * VISCOSITY_M2_S / friction;
        friction = KARMAN * speed / (10.0 / roughness_m).ln();
    }
    let depth = (friction / (coriolis * roughness_m)).ln() - A;
    let above = friction / KARMAN * depth.hypot(B);
    (speed / above, (B * friction / (KARMAN * above)).clamp(0.0, 1.0).asin())
}

impl Friction {
    /// The geostrophic equivalent of a report's wind towards east and north, m/s, and its error.
    /// `None` near the equator.
    pub(super) fn geostrophic(
        &self,
        index: usize,
        observation: &Observation,
        (u, v): (f64, f64),
    ) -> Option<([f64; 2], f64)> {
        let latitude_deg = observation.position.latitude_deg();
        if latitude_deg.abs() < LATITUDE_MIN_DEG {
            return None;
        }
        let (ratio, towards_low) = sea_drag(u.hypot(v), latitude_deg);
        let (sine, cosine) = (towards_low * latitude_deg.signum()).sin_cos();
        let above = u.hypot(v) / ratio;
        let curvature = self.curvature_per_m.get(index).copied().unwrap_or(0.0);
        let bend = curvature * above / coriolis_per_s(latitude_deg).abs();
        let factor = (1.0 + bend).clamp(0.55, 2.5);
        // Back from the low: clockwise in the north.
        let value = [u * cosine + v * sine, v * cosine - u * sine].map(|c| c * factor / ratio);
        let uncoupled = (1.0 - coupling(latitude_deg).powi(2)).max(0.0).sqrt() * UNCOUPLED_M_S;
        // The formula's factor on the speed also works on its error; the curvature's own error
        // grows with what it changes.
        let parts = [
            observation.wind_error_m_s / ratio * (1.0 + 2.0 * bend).clamp(0.7, 2.5),
            IMBALANCE_SHARE * above,
            IMBALANCE_M_S,
            0.3 * above * (factor - 1.0),
            uncoupled,
        ];
        let scale = if self.error_factor > 0.0 { self.error_factor } else { 1.0 };
        Some((value, scale * parts.iter().map(|part| part * part).sum::<f64>().sqrt()))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS WND-7, rows "sea 0.0144" at latitude 50 (fixed point; brentq), read backwards.
    #[test]
    fn the_drag_law_over_the_sea_is_undone() {
        for (above, ten, angle_deg) in [
            (5.0, 3.8956, 16.241),
            (10.0, 7.2889, 16.565),
            (15.0, 10.4042, 16.968),
            (20.0, 13.3364, 17.294),
            (30.0, 18.8064, 17.788),
            (40.0, 23.8802, 18.159),
        ] {
            let (ratio, angle) = sea_drag(ten, -50.0);
            assert!((ten / ratio - above).abs() < 2e-3, "{} {above}", ten / ratio);
            assert!((angle.to_degrees() - angle_deg).abs() < 2e-3, "{}", angle.to_degrees());
        }
    }
}
