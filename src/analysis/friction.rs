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
const IMBALANCE_SHARE: f64 = 0.18;
const IMBALANCE_M_S: f64 = 2.5;
/// Lowest latitude at which a wind is used for the pressure, degrees.
const LATITUDE_MIN_DEG: f64 = 8.0;

/// What is known of friction and curvature.
#[derive(Clone, PartialEq, Debug, Default)]
pub(super) struct Friction {
    /// For each report, the curvature of the isobars there, 1/m, cyclonic positive in both
    /// hemispheres; 0 where it is not known.
    pub(super) curvature_per_m: Vec<f64>,
    /// What was learnt from how well the winds fit.
    pub(super) learnt: Learnt,
}

/// What the hour's winds say against the pressures, beyond the drag law.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Learnt {
    /// Geostrophic equivalents are this complex factor too large, turned the northern way.
    pub(super) factor: [f64; 2],
    /// Factor on their errors.
    pub(super) error: f64,
}

impl Default for Learnt {
    fn default() -> Self {
        Self { factor: [1.0, 0.0], error: 1.0 }
    }
}

/// A sea wind against the rest.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct WindFit {
    /// Its geostrophic equivalent towards east and north, m/s.
    pub(super) found: [f64; 2],
    /// What is expected without it.
    pub(super) expected: [f64; 2],
    /// Expected variance of the difference of a component.
    pub(super) variance: f64,
    /// Error of a component as it was taken.
    pub(super) error: f64,
    /// -1 in the southern hemisphere.
    pub(super) sign: f64,
}

/// How much wind, m/s squared, must speak before the drag law is moved half way.
const DRAG_WEIGHT: f64 = 3000.0;
/// How many winds must speak before the errors are moved half way.
const ERROR_WEIGHT: f64 = 30.0;

impl Learnt {
    /// From how the winds fit. The expectation is the mean of the truth given the rest, so that plain regression on it is
    /// without bias.
    pub(super) fn from_winds(winds: &[WindFit]) -> Self {
        let (mut sum, mut weight) = ([DRAG_WEIGHT, 0.0], DRAG_WEIGHT);
        for WindFit { found, expected, variance, sign, .. } in winds {
            // Well expected winds count more; a wild one not at all.
            let gap = [found[0] - expected[0], found[1] - expected[1]];
            if gap.iter().any(|part| part * part > 16.0 * variance) {
                continue;
            }
            let share = 20.0 / (20.0 + variance);
            sum[0] += share * (found[0] * expected[0] + found[1] * expected[1]);
            sum[1] += share * sign * (found[1] * expected[0] - found[0] * expected[1]);
            weight += share * (expected[0].powi(2) + expected[1].powi(2));
        }
        let factor = [sum[0] / weight, (sum[1] / weight).clamp(-0.3, 0.3)];
        let factor = [factor[0].clamp(0.75, 1.35), factor[1]];
        let (mut excess, mut errors, mut count) = (0.0, 0.0, 0.0);
        for WindFit { found, expected, variance, error, sign } in winds {
            let [x, y] = divided(*found, factor, *sign);
            for gap in [x - expected[0], y - expected[1]] {
                excess += (gap * gap).min(12.0 * variance) - variance;
                errors += error * error;
                count += 0.5;
            }
        }
        if count < 1.0 {
            return Self { factor, error: 1.0 };
        }
        // What the differences have too much of belongs to the errors.
        let square: f64 = 1.0 + excess / errors * (count / (count + ERROR_WEIGHT));
        Self { factor, error: square.clamp(0.7, 9.0).sqrt() }
    }
}

/// A wind divided by a complex factor that is turned the northern way.
fn divided([u, v]: [f64; 2], factor: [f64; 2], sign: f64) -> [f64; 2] {
    let (a, b) = (factor[0], sign * factor[1]);
    let square = a * a + b * b;
    [(u * a + v * b) / square, (v * a - u * b) / square]
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
        let value = divided(value, self.learnt.factor, latitude_deg.signum());
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
        Some((value, self.learnt.error * parts.iter().map(|part| part * part).sum::<f64>().sqrt()))
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
