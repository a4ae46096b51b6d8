//! A ship's track (METHODS QC-4): how fast it would have had to go.

use super::{Case, Findings};
use crate::instant::{HOUR_S, Instant};
use crate::obs::series::Point;
use crate::obs::{Element, Verdict};
use crate::quantity::{kt_from_m_s, nm_from_km, wrap_180_deg};
use crate::report::Platform;
use crate::sphere::Position;

/// Fastest ship, kt.
const SHIP_KT: f64 = 40.0;
/// Fastest drift of a buoy, kt.
const BUOY_KT: f64 = 6.0;
/// What a ship may be faster than it says, kt.
const CLASS_MARGIN_KT: f64 = 10.0;
/// How far back the last position may be, seconds.
const BACK_S: i64 = 12 * HOUR_S;
/// Each of two positions may be rounded by this, km: a twentieth of a degree both ways.
const ROUNDING_KM: f64 = 8.0;
/// Change of latitude in an hour that is suspect, degrees (marine minimum standards, MQCS-III 2000).
const LATITUDE_DEG_H: f64 = 0.7;

const CHECK: &str = "QC-4 track";

/// Change of longitude in an hour that is suspect, degrees, by latitude (MQCS-III 2000); `None`
/// poleward of 80 degrees.
pub fn longitude_limit_deg_h(latitude_deg: f64) -> Option<f64> {
    let latitude_deg = latitude_deg.abs();
    let bands = [(40.0, 0.7), (50.0, 1.0), (60.0, 1.4), (70.0, 2.0), (80.0, 2.7)];
    bands.into_iter().find(|(edge_deg, _)| latitude_deg < *edge_deg).map(|(_, limit)| limit)
}

/// Checks the position of what moves against its own last position and, where there is one, its
/// next.
pub fn check(case: &Case<'_>, findings: &mut Findings) {
    let report = case.report;
    let limit_kt = match report.platform {
        Platform::Ship => SHIP_KT,
        Platform::Buoy => BUOY_KT,
        Platform::Land | Platform::Aerodrome => return,
    };
    let here = case.site.position;
    if here.latitude_deg() == 0.0 && here.longitude_deg() == 0.0 {
        let reason = "latitude and longitude are both exactly 0: not filled in".to_owned();
        findings.add(Element::Position, Verdict::Refused, CHECK, reason);
        return;
    }
    let placed = |point: &Point| point.position.is_some();
    let Some(before) = case.series.before(report.time, BACK_S, placed) else {
        return;
    };
    let Some(from) = before.position else {
        return;
    };
    let hours = report.time.hours_since(before.time);
    let fast = |from: Position, to: Position, hours: f64| {
        let distance_km = (from.distance_km(to) - ROUNDING_KM).max(0.0);
        nm_from_km(distance_km) / hours.max(1.0 / 60.0)
    };
    let speed_kt = fast(from, here, hours);
    if speed_kt > limit_kt {
        let earlier = case
            .series
            .before(before.time, BACK_S - report.time.seconds_since(before.time), placed)
            .and_then(|point| Some((point.position?, point.time)));
        let back_kt = |(to, time): (Position, Instant)| {
            (
                fast(to, from, before.time.hours_since(time)),
                fast(to, here, report.time.hours_since(time)),
            )
        };
        let known = earlier.map(back_kt);
        if known.is_some_and(|(last_kt, this_kt)| last_kt > limit_kt && this_kt <= limit_kt) {
            // Here it fits the position before the last one, which the last one does not: that one
            // was wrong, and this report pays no price for it.
            return;
        }
        let slip = sign_slip(here, |place| fast(from, place, hours) <= limit_kt);
        // Two positions that agree, and a third that only another quadrant brings to them: this
        // one is wrong for certain, without waiting for the next (METHODS QC-3).
        let slipped = slip.is_some() && known.is_some_and(|(last_kt, _)| last_kt <= limit_kt);
        let after = case.series.after(report.time, BACK_S, placed);
        let verdict = match after.and_then(|point| Some((point.position?, point.time))) {
            // Out and back: this position is the wrong one. Only out: either may be.
            Some((to, time)) => {
                let onward_kt = fast(here, to, time.hours_since(report.time));
                let straight_kt = fast(from, to, time.hours_since(before.time));
                if slipped || (onward_kt > limit_kt && straight_kt <= limit_kt) {
                    Verdict::Refused
                } else {
                    Verdict::Doubtful
                }
            }
            None if slipped => Verdict::Refused,
            None => Verdict::Doubtful,
        };
        let mut reason = format!(
            "{:.0} nm in {hours:.1} h from its last position: {speed_kt:.0} kt, limit {limit_kt:.0}",
            nm_from_km(from.distance_km(here))
        );
        if let Some(hint) = slip {
            reason.push_str(&hint);
        }
        findings.add(Element::Position, verdict, CHECK, reason);
        return;
    }
    minimum_standards(case, from, hours, speed_kt, findings);
}

/// The finer limits: the speed that the ship gives itself, and degrees in an hour.
fn minimum_standards(
    case: &Case<'_>,
    from: Position,
    hours: f64,
    speed_kt: f64,
    findings: &mut Findings,
) {
    let here = case.site.position;
    if case.report.platform != Platform::Ship {
        return;
    }
    if let Some(own) = case.report.speed_m_s
        && speed_kt > kt_from_m_s(own) + CLASS_MARGIN_KT
    {
        let reason = format!(
            "{speed_kt:.0} kt from its last position, but it gives {:.0} kt",
            kt_from_m_s(own)
        );
        findings.add(Element::Position, Verdict::Doubtful, CHECK, reason);
        return;
    }
    // A tenth of a degree of rounding between two positions is not a run.
    let rounded = |degrees: f64| (degrees.abs() - 0.1).max(0.0) / hours.max(1.0 / 60.0);
    let north = rounded(here.latitude_deg() - from.latitude_deg());
    let east = rounded(wrap_180_deg(here.longitude_deg() - from.longitude_deg()));
    let east_limit = longitude_limit_deg_h(here.latitude_deg()).unwrap_or(f64::INFINITY);
    if north > LATITUDE_DEG_H || east > east_limit {
        let reason = format!(
            "{north:.1} degrees of latitude and {east:.1} of longitude in an hour, limits \
             {LATITUDE_DEG_H} and {east_limit}"
        );
        findings.add(Element::Position, Verdict::Doubtful, CHECK, reason);
    }
}

/// The quadrant of the globe that would fit, if exactly one other does (METHODS QC-3).
fn sign_slip(here: Position, fits: impl Fn(Position) -> bool) -> Option<String> {
    let (north, east) = (here.latitude_deg(), here.longitude_deg());
    let others = [(-north, east), (north, -east), (-north, -east)];
    let mut found = others
        .into_iter()
        .map(|(latitude, longitude)| Position::clamped(latitude, longitude))
        .filter(|place| fits(*place));
    let only = found.next()?;
    if found.next().is_some() {
        return None;
    }
    Some(format!(
        "; {:.1} {:.1} in another quadrant would fit",
        only.latitude_deg(),
        only.longitude_deg()
    ))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-188, CHK-189 (MQCS-III 2000; haversine).
    #[test]
    fn a_run_and_the_limits_of_the_minimum_standards() {
        let run = Position::clamped(48.3, -15.6).distance_km(Position::clamped(48.9, -13.2));
        assert!((nm_from_km(run) - 101.8696).abs() < 1e-3);
        assert!((nm_from_km(run) / 6.0 - 16.9783).abs() < 1e-3);
        assert_eq!(longitude_limit_deg_h(55.0), Some(1.4));
        assert_eq!(longitude_limit_deg_h(-39.9), Some(0.7));
        assert_eq!(longitude_limit_deg_h(85.0), None);
    }
}
