//! The atmospheric tide (METHODS TEN-3): what the barometer does twice a day without any weather.
//!
//! The semidiurnal wave S2 of Haurwitz (1956), as quoted by Chapman and Lindzen (1970). The diurnal
//! wave is left alone: over land it is not to be relied on.

use crate::instant::{HOUR_S, Instant};
use crate::sphere::Position;

/// Latitude, degrees, up to which the tide is taken out in full: poleward the weather drowns it.
const FULL_LATITUDE_DEG: f64 = 40.0;
/// Latitude from which it is left in; between the two it fades, so that neighbours agree (own rule).
const NONE_LATITUDE_DEG: f64 = 45.0;

/// Amplitude of the travelling wave, hPa.
pub fn travelling_amplitude_hpa(latitude_deg: f64) -> f64 {
    1.16 * latitude_deg.to_radians().cos().powi(3)
}

/// The travelling part of S2, hPa: it follows the sun.
pub fn travelling_hpa(position: Position, time: Instant) -> f64 {
    let local_deg = 15.0 * time.hour_of_day() + position.longitude_deg();
    travelling_amplitude_hpa(position.latitude_deg()) * (2.0 * local_deg + 158.0).to_radians().sin()
}

/// S2 whole: the travelling part and the small standing one, hPa.
pub fn semidiurnal_hpa(position: Position, time: Instant) -> f64 {
    let sine = position.latitude_deg().to_radians().sin();
    let legendre = f64::midpoint(3.0 * sine * sine, -1.0);
    let standing = 0.085 * legendre * (30.0 * time.hour_of_day() + 118.0).to_radians().sin();
    travelling_hpa(position, time) + standing
}

/// Part of a change over the last `hours` that is the tide's, hPa, faded out between 40 and 45
/// degrees of latitude.
pub fn change_hpa(position: Position, time: Instant, hours: i64) -> f64 {
    let latitude_deg = position.latitude_deg().abs();
    let share = (NONE_LATITUDE_DEG - latitude_deg) / (NONE_LATITUDE_DEG - FULL_LATITUDE_DEG);
    let then = time.plus_s(-hours * HOUR_S);
    share.clamp(0.0, 1.0) * (semidiurnal_hpa(position, time) - semidiurnal_hpa(position, then))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    fn at(hour: u32) -> Instant {
        Instant::from_calendar(2026, 3, 20, hour, 0).expect("a time")
    }

    /// METHODS CHK-081 to CHK-085 (Haurwitz 1956; observed at Copenhagen 0.225 hPa, Chapman 1969).
    #[test]
    fn the_tide_has_the_published_size_and_hour() {
        for (latitude, expected) in [(0.0, 1.16), (30.0, 0.7534), (50.0, 0.3081), (60.0, 0.1450)] {
            near(travelling_amplitude_hpa(latitude), expected, 1e-4);
            let root_two = std::f64::consts::SQRT_2;
            let greatest = (0..1440)
                .map(|minute| {
                    let now = at(0).plus_s(minute * 60);
                    let place = Position::clamped(latitude, 0.0);
                    travelling_hpa(place, now) - travelling_hpa(place, now.plus_s(-3 * HOUR_S))
                })
                .fold(f64::MIN, f64::max);
            near(greatest, root_two * expected, 2e-4);
        }
        // The greatest value comes at 9.733 h local time.
        let place = Position::clamped(10.0, 0.0);
        let highest = (0..720_i64).max_by(|a, b| {
            let value = |minute: i64| travelling_hpa(place, at(0).plus_s(minute * 60));
            value(*a).total_cmp(&value(*b))
        });
        assert_eq!(highest, Some(584), "9 h 44 min");
        for (latitude, longitude, hour, expected) in
            [(50.0, -10.0, 12, 0.234_68), (-20.0, 120.0, 3, 0.771_44), (20.0, 60.0, 18, 0.977_52)]
        {
            near(semidiurnal_hpa(Position::clamped(latitude, longitude), at(hour)), expected, 1e-4);
        }
        let change = travelling_hpa(Position::clamped(15.0, -60.0), at(12))
            - travelling_hpa(Position::clamped(15.0, -60.0), at(9));
        near(change, 1.4674, 1e-4);
        // Copenhagen: amplitude and phase of the whole wave in local time, by two values a quarter
        // of its period apart; 12.6 degrees east are 3,024 s ahead of UTC.
        let copenhagen = Position::clamped(55.7, 12.6);
        let local_midnight = at(12).plus_s(-3024);
        let sine = semidiurnal_hpa(copenhagen, local_midnight);
        let cosine = semidiurnal_hpa(copenhagen, local_midnight.plus_s(3 * HOUR_S));
        near(sine.hypot(cosine), 0.2299, 1e-3);
        near(sine.atan2(cosine).to_degrees(), 147.88, 0.05);
    }

    #[test]
    fn is_taken_out_in_the_tropics_and_left_in_at_mid_latitudes() {
        let place = |latitude| Position::clamped(latitude, -60.0);
        near(change_hpa(place(15.0), at(12), 3), 1.45, 0.1);
        near(change_hpa(place(45.0), at(12), 3), 0.0, 0.0);
        near(change_hpa(place(-60.0), at(12), 3), 0.0, 0.0);
    }
}
