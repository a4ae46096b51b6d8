//! Station pressure from sea-level pressure, and altimeter settings: written for the instruments of
//! the invented stations, apart from the reduction that the watch uses.

use crate::quantity::{GAS_CONSTANT_DRY_AIR, GRAVITY_M_S2, ZERO_CELSIUS_K};

/// Vapour pressure over water at a dew point, hPa (Magnus form, WMO-No. 8 Annex 4.B; METHODS RED-1).
fn vapour_pressure_hpa(dew_point_c: f64) -> f64 {
    6.112 * (17.62 * dew_point_c / (243.12 + dew_point_c)).exp()
}

/// Sea-level over station pressure (WMO-No. 8, Part I ch. 3; METHODS RED-1).
pub(super) fn sea_level_ratio(barometer_height_m: f64, air_c: f64, dew_point_c: f64) -> f64 {
    let column_k = ZERO_CELSIUS_K
        + air_c
        + 0.0065 * barometer_height_m / 2.0
        + 0.12 * vapour_pressure_hpa(dew_point_c);
    (GRAVITY_M_S2 / GAS_CONSTANT_DRY_AIR * barometer_height_m / column_k).exp()
}

/// Altimeter setting of a station pressure, hPa (ICAO Doc 7488; METHODS COD-10).
pub(super) fn altimeter_hpa(pressure_station_hpa: f64, height_m: f64) -> f64 {
    let n: f64 = 0.190_263_1;
    (pressure_station_hpa.powf(n) + 8.417_279e-5 * height_m).powf(1.0 / n)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-036 and CHK-039 (formula and hydrostatic integral there), CHK-057.
    #[test]
    fn reduction_agrees_with_its_checks() {
        let dew_of = |e: f64| {
            let x = (e / 6.112).ln();
            243.12 * x / (17.62 - x)
        };
        assert!((950.0 * sea_level_ratio(500.0, 15.0, dew_of(12.0)) - 1007.3908).abs() < 5e-4);
        assert!((850.0 * sea_level_ratio(1500.0, 25.0, dew_of(15.0)) - 1005.6107).abs() < 5e-4);
        assert!((altimeter_hpa(950.0, 500.0) - 1008.4136).abs() < 1e-3);
    }
}
