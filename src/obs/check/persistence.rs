//! Consistency in time (METHODS QC-5): jumps, spikes and stuck barometers.

use super::{Case, Findings, slip};
use crate::instant::HOUR_S;
use crate::obs::series::{Level, Point};
use crate::obs::{Element, Verdict};

/// Change in an hour, hPa, above which a pressure is suspect.
const JUMP_HPA: f64 = 10.0;
/// A spike stands out from both neighbours by this, hPa ...
const SPIKE_HPA: f64 = 3.0;
/// ... while they agree within this, hPa.
const SPIKE_NEIGHBOURS_HPA: f64 = 1.0;
/// Identical reports in a row that make a barometer stuck.
const STUCK_REPORTS: usize = 6;
/// And the time they must span: automatic stations may report every minute.
const STUCK_SPAN_S: i64 = 5 * HOUR_S;
/// How far a neighbour in time may be, seconds.
const NEIGHBOUR_S: i64 = HOUR_S + 15 * 60;
/// Standard deviation of an hour's change, hPa, for the proposal of slips.
const HOUR_CHANGE_HPA: f64 = 1.0;

/// Checks the pressure against the station's own neighbours in time.
pub fn check(case: &Case<'_>, findings: &mut Findings) {
    let report = case.report;
    let (level, now) = match (report.pressure_station_hpa, report.pressure_msl_hpa) {
        (Some(now), _) => (Level::Station, now),
        (None, Some(now)) => (Level::Sea, now),
        (None, None) => return,
    };
    let wanted = |point: &Point| level.of(point).is_some();
    let value = |point: Option<&Point>| point.and_then(|point| level.of(point));
    let before = value(case.series.before(report.time, NEIGHBOUR_S, wanted));
    let after = value(case.series.after(report.time, NEIGHBOUR_S, wanted));
    jump(now, before, after, findings);
    stuck(case, level, now, findings);
}

fn jump(now: f64, before: Option<f64>, after: Option<f64>, findings: &mut Findings) {
    let mut add = |check: &str, mut reason: String, expected: f64| {
        if let Some(proposed) = slip::propose(now, expected, HOUR_CHANGE_HPA) {
            reason = format!("{reason}; {proposed}");
        }
        findings.add(Element::Pressure, Verdict::Doubtful, check, reason);
    };
    if let (Some(before), Some(after)) = (before, after)
        && (before - after).abs() <= SPIKE_NEIGHBOURS_HPA
        && (now - before).abs() > SPIKE_HPA
        && (now - after).abs() > SPIKE_HPA
    {
        let reason =
            format!("{now:.1} hPa stands out between {before:.1} before and {after:.1} after");
        add("QC-5 spike", reason, f64::midpoint(before, after));
        return;
    }
    if let Some(before) = before
        && (now - before).abs() > JUMP_HPA
    {
        let reason = format!("{:+.1} hPa in an hour, from {before:.1} to {now:.1}", now - before);
        add("QC-5 jump", reason, before);
    }
}

fn stuck(case: &Case<'_>, level: Level, now: f64, findings: &mut Findings) {
    let mut same = 1;
    let mut oldest = case.report.time;
    let earlier = case.series.points().iter().rev().filter(|point| point.time < case.report.time);
    for point in earlier.filter(|point| level.of(point).is_some()) {
        if level.of(point) != Some(now) {
            break;
        }
        same += 1;
        oldest = point.time;
    }
    let span_s = case.report.time.seconds_since(oldest);
    if same >= STUCK_REPORTS && span_s >= STUCK_SPAN_S {
        let hours = span_s / HOUR_S;
        let reason = format!("{now:.1} hPa in {same} reports over {hours} h without any change");
        findings.add(Element::Pressure, Verdict::Doubtful, "QC-5 stuck barometer", reason);
    }
}
