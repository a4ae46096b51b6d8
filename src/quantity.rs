//! Units, the constants of the trade, and the only conversions in the house.

use serde::{Deserialize, Serialize};

/// Standard gravity, m/s2, exact by definition (METHODS K-1).
pub const GRAVITY_M_S2: f64 = 9.806_65;
/// Gas constant of dry air, J/(kg K), the value of the WMO-No. 8 reduction (METHODS K-1).
pub const GAS_CONSTANT_DRY_AIR: f64 = 287.05;
/// The IUGG mean radius of the earth, m: the radius of every distance here (METHODS K-1).
pub const EARTH_RADIUS_M: f64 = 6_371_008.8;
/// Rotation rate of the earth, rad/s.
pub const EARTH_ROTATION_RAD_S: f64 = 7.292_115e-5;
/// Metres in a nautical mile, exact.
pub const NAUTICAL_MILE_M: f64 = 1852.0;
/// Absolute zero, degrees Celsius.
pub const ZERO_CELSIUS_K: f64 = 273.15;

/// Height of a station's ground above mean sea level.
#[derive(Clone, Copy, PartialEq, PartialOrd, Debug, Serialize, Deserialize)]
#[serde(transparent)]
pub struct StationHeight {
    /// Metres above mean sea level.
    pub metres: f64,
}

/// Height of a barometer above mean sea level.
#[derive(Clone, Copy, PartialEq, PartialOrd, Debug, Serialize, Deserialize)]
#[serde(transparent)]
pub struct BarometerHeight {
    /// Metres above mean sea level.
    pub metres: f64,
}

/// Metres a second from knots.
pub fn m_s_from_kt(speed_kt: f64) -> f64 {
    speed_kt * NAUTICAL_MILE_M / 3600.0
}

/// Knots from metres a second.
pub fn kt_from_m_s(speed_m_s: f64) -> f64 {
    speed_m_s * 3600.0 / NAUTICAL_MILE_M
}

/// Metres a second from kilometres an hour.
pub fn m_s_from_km_h(speed_km_h: f64) -> f64 {
    speed_km_h / 3.6
}

/// Metres from feet.
pub fn m_from_feet(height_ft: f64) -> f64 {
    height_ft * 0.3048
}

/// Nautical miles from kilometres.
pub fn nm_from_km(distance_km: f64) -> f64 {
    distance_km * 1000.0 / NAUTICAL_MILE_M
}

/// Kilometres from nautical miles.
pub fn km_from_nm(distance_nm: f64) -> f64 {
    distance_nm * NAUTICAL_MILE_M / 1000.0
}

/// Hectopascals from inches of mercury at 0 degrees Celsius and standard gravity.
///
/// 25.4 mm of mercury at 1.33322387415 hPa/mm.
pub fn hpa_from_inches_of_mercury(pressure_inhg: f64) -> f64 {
    pressure_inhg * 25.4 * 1.333_223_874_15
}

/// Degrees Celsius from kelvins.
pub fn celsius_from_kelvin(temperature_k: f64) -> f64 {
    temperature_k - ZERO_CELSIUS_K
}

/// Kelvins from degrees Celsius.
pub fn kelvin_from_celsius(temperature_c: f64) -> f64 {
    temperature_c + ZERO_CELSIUS_K
}

/// The Coriolis parameter f = 2 omega sin(latitude), 1/s; negative in the southern hemisphere.
pub fn coriolis_per_s(latitude_deg: f64) -> f64 {
    2.0 * EARTH_ROTATION_RAD_S * latitude_deg.to_radians().sin()
}

/// An angle brought into [0, 360).
pub fn wrap_360_deg(angle_deg: f64) -> f64 {
    let wrapped = angle_deg.rem_euclid(360.0);
    // The remainder of a tiny negative angle rounds up to 360 itself.
    if wrapped >= 360.0 { 0.0 } else { wrapped }
}

/// An angle brought into (-180, 180].
pub fn wrap_180_deg(angle_deg: f64) -> f64 {
    // An angle that needs no turning keeps every digit it was coded with.
    if angle_deg > -180.0 && angle_deg <= 180.0 {
        return angle_deg;
    }
    let wrapped = wrap_360_deg(angle_deg);
    if wrapped > 180.0 { wrapped - 360.0 } else { wrapped }
}

/// Wind components (u towards east, v towards north) from where it blows from and its speed.
///
/// METHODS WND-13.
pub fn wind_components(from_deg: f64, speed: f64) -> (f64, f64) {
    let (sine, cosine) = from_deg.to_radians().sin_cos();
    (-speed * sine, -speed * cosine)
}

/// Where a wind blows from, degrees in (0, 360], and its speed; 0 is kept for calm.
///
/// METHODS WND-13.
pub fn wind_from_components(u: f64, v: f64) -> (f64, f64) {
    let speed = u.hypot(v);
    if speed == 0.0 {
        return (0.0, 0.0);
    }
    let from_deg = wrap_360_deg((-u).atan2(-v).to_degrees());
    (if from_deg == 0.0 { 360.0 } else { from_deg }, speed)
}

/// `x` as an index rounded to the nearest, saturating at the ends of `usize`; NaN becomes 0.
#[expect(
    clippy::cast_possible_truncation,
    clippy::cast_sign_loss,
    reason = "the one place where a float becomes an index; the cast saturates"
)]
pub fn index_nearest(x: f64) -> usize {
    x.round() as usize
}

/// `x` rounded to the nearest whole number, saturating at the ends of `i64`; NaN becomes 0.
#[expect(clippy::cast_possible_truncation, reason = "the cast saturates")]
pub fn whole_nearest(x: f64) -> i64 {
    x.round() as i64
}

/// `x` rounded down, saturating at the ends of `i64`; NaN becomes 0.
#[expect(clippy::cast_possible_truncation, reason = "the cast saturates")]
pub fn whole_below(x: f64) -> i64 {
    x.floor() as i64
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    /// METHODS CHK-001 to CHK-006, CHK-021, CHK-124 (definitions; MetPy 1.7.1; pint 0.25.3).
    #[test]
    fn conversions_agree_with_their_definitions() {
        near(m_s_from_kt(1.0), 0.514_444_4, 1e-7);
        near(kt_from_m_s(m_s_from_kt(34.0)), 34.0, 1e-12);
        near(hpa_from_inches_of_mercury(1.0), 33.863_886, 1e-5);
        near(hpa_from_inches_of_mercury(29.92), 1013.207, 0.001);
        near(hpa_from_inches_of_mercury(30.06), 1017.948, 0.001);
        near(hpa_from_inches_of_mercury(28.50), 965.121, 0.001);
        for (latitude_deg, expected) in
            [(10.0, 2.532_525e-5), (30.0, 7.292_115e-5), (50.0, 1.117_217e-4), (60.0, 1.263_031e-4)]
        {
            near(coriolis_per_s(latitude_deg), expected, 1e-10);
            near(coriolis_per_s(-latitude_deg), -expected, 1e-10);
        }
        let (u, v) = wind_components(230.0, 12.3);
        near(u, 9.422_35, 1e-5);
        near(v, 7.906_29, 1e-5);
    }

    /// Common practice, no source: a wind is named by where it comes from; 14.7 lb/in2 and about
    /// 1 kg/cm2 are the same thing as 1013 hPa.
    #[test]
    fn facts_of_the_trade() {
        let (from_deg, _) = wind_from_components(0.0, -10.0);
        near(from_deg, 360.0, 0.0);
        let (from_deg, _) = wind_from_components(10.0, 0.0);
        near(from_deg, 270.0, 1e-12);
        let pounds_a_square_inch = 101_325.0 / (0.453_592_37 * GRAVITY_M_S2 / 0.0254_f64.powi(2));
        near(pounds_a_square_inch, 14.7, 0.01);
        near(101_325.0 / (GRAVITY_M_S2 * 1e4), 1.03, 0.01);
    }

    #[test]
    fn angles_wrap_at_both_ends() {
        near(wrap_180_deg(180.0), 180.0, 0.0);
        near(wrap_180_deg(-180.0), 180.0, 0.0);
        near(wrap_180_deg(190.0), -170.0, 1e-12);
        assert!(wrap_360_deg(-1e-300) < 360.0);
    }
}
