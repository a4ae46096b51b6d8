//! Change, deepening rate and phase along a track.

use super::motion::{LASTING_PRESSURE_H, likeness};
use super::{Kind, Measured, Phase, TrackPoint};
use crate::instant::Hour;

/// Pressure rate, hPa/h, beyond which a system deepens or fills, and below which it stops doing so.
const PHASE_ON_HPA_H: f64 = 0.35;
const PHASE_OFF_HPA_H: f64 = 0.15;
/// Hours over which the rate for the phase is taken.
const PHASE_H: i64 = 6;
/// Latitude below which a bergeron is not given: its measure loses meaning near the equator.
const BERGERON_LATITUDE_MIN_DEG: f64 = 15.0;

/// Change of central pressure over the last `hours` of a track, with its error; `None` where the
/// track does not reach back so far.
///
/// Hours that are missing are interpolated between their neighbours.
pub fn change(track: &[TrackPoint], hours: i64) -> Option<Measured> {
    let last = track.last()?;
    let (then, error_hpa) = pressure_at(track, last.hour.plus(-hours))?;
    // What lasts of the error of one is in the other too, and cancels.
    let alike = likeness(hours as f64, LASTING_PRESSURE_H);
    let square = last.pressure_error_hpa.powi(2) + error_hpa.powi(2)
        - 2.0 * alike * last.pressure_error_hpa * error_hpa;
    Some(Measured { value: last.pressure_hpa - then, error: square.max(0.0).sqrt() })
}

fn pressure_at(track: &[TrackPoint], hour: Hour) -> Option<(f64, f64)> {
    let after = track.iter().position(|point| point.hour >= hour)?;
    let next = track.get(after)?;
    if next.hour == hour {
        return Some((next.pressure_hpa, next.pressure_error_hpa));
    }
    let before = track.get(after.checked_sub(1)?)?;
    let span = (next.hour.unix_h() - before.hour.unix_h()) as f64;
    let share = (hour.unix_h() - before.hour.unix_h()) as f64 / span;
    Some((
        before.pressure_hpa + share * (next.pressure_hpa - before.pressure_hpa),
        before.pressure_error_hpa.max(next.pressure_error_hpa),
    ))
}

/// Deepening in bergerons: the fall a day, scaled to latitude 60 by the sine of the mean latitude.
///
/// B = (fall/24 hPa) sin 60/sin|latitude| over 24 h; over 12 h the fall counts against 12 hPa.
/// Sanders and Gyakum (1980); the 12 h form after Yoshida and Asuma (2004). METHODS TRK-8.
pub fn bergeron(fall_hpa: f64, hours: f64, mean_latitude_deg: f64) -> f64 {
    fall_hpa / hours * 60.0_f64.to_radians().sin() / mean_latitude_deg.abs().to_radians().sin()
}

/// The bergeron of a low's track over its last `hours`, with its error.
pub fn bergeron_of(kind: Kind, track: &[TrackPoint], hours: i64) -> Option<Measured> {
    if kind == Kind::High {
        return None;
    }
    let change = change(track, hours)?;
    let last = track.last()?;
    let first = track.iter().find(|point| point.hour >= last.hour.plus(-hours))?;
    let latitude_deg =
        f64::midpoint(first.position.latitude_deg().abs(), last.position.latitude_deg().abs());
    if latitude_deg < BERGERON_LATITUDE_MIN_DEG {
        return None;
    }
    let scale = |hpa: f64| bergeron(hpa, hours as f64, latitude_deg);
    Some(Measured { value: scale(-change.value), error: scale(change.error) })
}

/// What a system is doing at the end of its track. The phase is run along the whole track, and
/// leaves deepening or filling only when the rate has fallen well below where it began.
pub fn phase(kind: Kind, track: &[TrackPoint], confirmed: bool, coasted_h: i64) -> Phase {
    if coasted_h > 0 {
        return Phase::Ending;
    }
    if !confirmed {
        return Phase::Forming;
    }
    // Deepening is falling for a low and rising for a high.
    let sign = if kind == Kind::Low { -1.0 } else { 1.0 };
    let mut phase = Phase::Steady;
    for end in 1..track.len() {
        let part = track.get(..=end).unwrap_or_default();
        let (Some(last), Some(first)) = (part.last(), part.first()) else { continue };
        let hours = PHASE_H.min(last.hour.unix_h() - first.hour.unix_h());
        let Some(change) = change(part, hours).filter(|_| hours >= 2) else { continue };
        let rate = sign * change.value / hours as f64;
        phase = match phase {
            _ if rate >= PHASE_ON_HPA_H => Phase::Deepening,
            _ if rate <= -PHASE_ON_HPA_H => Phase::Filling,
            Phase::Deepening if rate < PHASE_OFF_HPA_H => Phase::Steady,
            Phase::Filling if rate > -PHASE_OFF_HPA_H => Phase::Steady,
            other => other,
        };
    }
    phase
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sphere::Position;

    fn track(pressures: &[f64], latitude_deg: f64) -> Vec<TrackPoint> {
        pressures
            .iter()
            .zip(0..)
            .map(|(pressure_hpa, hour)| TrackPoint {
                hour: Hour::from_unix_h(hour),
                position: Position::clamped(latitude_deg, 0.0),
                position_error_km: 20.0,
                pressure_hpa: *pressure_hpa,
                pressure_error_hpa: 0.5,
                observed: true,
            })
            .collect()
    }

    /// METHODS CHK-178 to CHK-180: definition of Sanders and Gyakum (1980), who quote 28 hPa at the
    /// pole and 12 at 25 degrees for one bergeron.
    #[test]
    fn bergerons() {
        let near = |found: f64, expected: f64, tolerance: f64| {
            assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
        };
        near(bergeron(28.0, 24.0, 45.0), 1.428_87, 1e-4);
        near(bergeron(28.0, 24.0, 61.0), 1.155_20, 1e-4);
        near(bergeron(8.0, 24.0, 36.0), 0.491_12, 1e-4);
        near(bergeron(17.0, 12.0, 46.5), 1.691_36, 1e-4);
        for (latitude_deg, fall_hpa) in
            [(30.0, 13.8564), (45.0, 19.5959), (60.0, 24.0), (70.0, 26.0415)]
        {
            near(bergeron(fall_hpa, 24.0, latitude_deg), 1.0, 1e-4);
            near(bergeron(fall_hpa, 24.0, -latitude_deg), 1.0, 1e-4);
        }
        near(bergeron(28.0, 24.0, 90.0), 1.0, 0.02);
        near(bergeron(12.0, 24.0, 25.0), 1.0, 0.03);
    }

    #[test]
    fn changes_need_a_track_that_reaches_back() {
        let falling: Vec<f64> = (0..=24).map(|h| 1000.0 - f64::from(h)).collect();
        let found = track(&falling, 60.0);
        let day = change(&found, 24).expect("a change");
        assert!((day.value + 24.0).abs() < 1e-9 && (day.error - 0.5_f64.hypot(0.5)).abs() < 2e-3);
        let rate = bergeron_of(Kind::Low, &found, 24).expect("a rate");
        assert!((rate.value - 1.0).abs() < 1e-9);
        assert_eq!(change(&found[1..], 24), None);
        assert_eq!(bergeron_of(Kind::High, &found, 24), None);
        assert_eq!(bergeron_of(Kind::Low, &track(&falling, 5.0), 24), None);
    }

    #[test]
    fn the_phase_does_not_flap() {
        let falling: Vec<f64> = (0..12).map(|h| 1000.0 - 0.5 * f64::from(h)).collect();
        let found = track(&falling, 50.0);
        assert_eq!(phase(Kind::Low, &found, true, 0), Phase::Deepening);
        assert_eq!(phase(Kind::High, &found, true, 0), Phase::Filling);
        assert_eq!(phase(Kind::Low, &found, false, 0), Phase::Forming);
        assert_eq!(phase(Kind::Low, &found, true, 2), Phase::Ending);
        // Slower than where it began, faster than where it ends: still deepening.
        let slower: Vec<f64> =
            falling.iter().copied().chain((1..9).map(|h| 994.5 - 0.2 * f64::from(h))).collect();
        assert_eq!(phase(Kind::Low, &track(&slower, 50.0), true, 0), Phase::Deepening);
    }
}
