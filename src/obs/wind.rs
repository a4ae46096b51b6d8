//! The observed wind carried to 10 m (METHODS WND-9).

use crate::quantity::GRAVITY_M_S2;
use crate::report::{Platform, Report, WindSource};

/// Von Karman's constant.
const KARMAN: f64 = 0.4;
/// Charnock's constant over the sea (Charnock 1955; METHODS WND-7).
const CHARNOCK: f64 = 0.0144;
/// Kinematic viscosity of air, m2/s.
const VISCOSITY_M2_S: f64 = 1.5e-5;
/// Roughness of open land, m (Troen and Petersen 1989; METHODS WND-7).
const LAND_ROUGHNESS_M: f64 = 0.03;
/// Anemometer heights that are believed, m.
const HEIGHT_RANGE_M: std::ops::RangeInclusive<f64> = 2.0..=150.0;
/// Rounds of the fixed point for the sea's roughness: it converges by a factor of ten a round.
const ROUNDS: usize = 20;

/// Factor from a wind at `height_m` to that at 10 m by the power law over the sea
/// (Hsu, Meindl and Gilhousen 1994).
pub fn sea_power_factor(height_m: f64) -> f64 {
    (10.0 / height_m).powf(0.11)
}

/// Roughness of the sea, m, under a wind of `speed_m_s` at `height_m` (Charnock 1955 with the
/// smooth-flow term; METHODS WND-8). The rounds are fixed, so the result is the same everywhere.
pub fn sea_roughness_m(speed_m_s: f64, height_m: f64) -> f64 {
    let mut roughness_m = 1e-4;
    for _ in 0..ROUNDS {
        let friction = KARMAN * speed_m_s / (height_m / roughness_m).ln();
        roughness_m = CHARNOCK * friction * friction / GRAVITY_M_S2
            + 0.11 * VISCOSITY_M2_S / friction.max(1e-4);
        roughness_m = roughness_m.clamp(1e-7, 0.1);
    }
    roughness_m
}

/// Factor from a wind at `height_m` to that at 10 m by the logarithmic law.
pub fn log_factor(height_m: f64, roughness_m: f64) -> f64 {
    (10.0 / roughness_m).ln() / (height_m / roughness_m).ln()
}

/// The 10 m mean speed of a report, m/s, and whether its height was known. Estimated winds are 10 m
/// winds; a measured one without a height is taken as it is (METHODS WND-9).
pub fn at_ten_metres(report: &Report) -> Option<(f64, bool)> {
    let speed_m_s = report.wind_speed_m_s?;
    let height_m = report
        .anemometer_height_m
        .filter(|height| HEIGHT_RANGE_M.contains(height))
        .filter(|_| report.wind_source != WindSource::Estimated);
    let Some(height_m) = height_m else {
        return Some((speed_m_s, false));
    };
    if speed_m_s <= 0.0 {
        return Some((0.0, true));
    }
    let roughness_m = match report.platform {
        Platform::Ship | Platform::Buoy => sea_roughness_m(speed_m_s, height_m),
        Platform::Land | Platform::Aerodrome => LAND_ROUGHNESS_M,
    };
    Some((speed_m_s * log_factor(height_m, roughness_m), true))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    /// METHODS CHK-120, CHK-121 and the further cases of WND-9; CHK-119 through the roughness.
    #[test]
    fn carries_a_wind_to_ten_metres() {
        let log = |height, speed| speed * log_factor(height, sea_roughness_m(speed, height));
        near(20.0 * sea_power_factor(25.0), 18.0824, 1e-3);
        near(log(25.0, 20.0), 18.2090, 1e-3);
        near(8.0 * sea_power_factor(4.0), 8.8484, 1e-3);
        near(log(4.0, 8.0), 8.7193, 1e-3);
        near(log(40.0, 30.0), 25.760, 2e-3);
        near(10.0 * log_factor(20.0, LAND_ROUGHNESS_M), 8.934, 1e-3);
        for (speed, friction) in [(10.0, 0.370_76), (20.0, 0.881_33)] {
            near(KARMAN * speed / (10.0 / sea_roughness_m(speed, 10.0)).ln(), friction, 1e-4);
        }
    }
}
