//! The rules. Each looks at the whole window, so that "since when" follows from the reports alone
//! and a value that wavers about its threshold does not make an alert come and go: a rule comes on
//! at its threshold and goes off a little below it.

use std::collections::BTreeMap;

use super::{Alert, Rule, Urgency};
use crate::analysis::HourAnalysis;
use crate::instant::{HOUR_S, Hour, Instant};
use crate::obs::Observation;
use crate::quantity::nm_from_km;
use crate::sphere::Position;
use crate::systems::rating::bergeron_of;
use crate::systems::{Kind, System};
use crate::tendency::TendencyRow;
use crate::winds::{StationWind, WindField};

mod gale;

/// Share of a threshold at which an alert goes off again.
const OFF_SHARE: f64 = 0.9;
/// Above this ratio of the analysis error to that of the first guess nothing is trusted (ANA-5).
const ERROR_RATIO_MAX: f64 = 0.7;
/// Hours for which a system counts as new.
const NEW_H: i64 = 3;
/// Most stations named one by one by a rule.
const NAMED_MAX: usize = 6;

/// Thresholds.
#[derive(Clone, PartialEq, Debug)]
pub struct Thresholds {
    /// Fall in 3 h, hPa.
    pub fall_3h_hpa: f64,
    /// Bergerons.
    pub bergeron: f64,
    /// Surface wind, kt.
    pub wind_kt: f64,
    /// Distance of a low from a watch point, nautical miles.
    pub near_nm: f64,
    /// Minutes without a new report.
    pub stale_minutes: i64,
    /// Share of the region with an untrustworthy analysis.
    pub weak_share: f64,
}

/// What the rules look at.
#[derive(Clone, Copy, Debug)]
pub struct Evidence<'e> {
    /// The clock.
    pub now: Instant,
    /// The newest hour analysed.
    pub valid: Hour,
    /// Thresholds.
    pub thresholds: &'e Thresholds,
    /// Systems alive.
    pub systems: &'e [System],
    /// Analyses of the window, ascending.
    pub hours: &'e [std::sync::Arc<HourAnalysis>],
    /// Wind fields of the same hours.
    pub wind_fields: &'e [std::sync::Arc<WindField>],
    /// Winds at stations.
    pub winds: &'e [StationWind],
    /// Observations of the window, ascending in time for each station.
    pub observations: &'e [std::sync::Arc<Observation>],
    /// The tendency table.
    pub tendencies: &'e [TendencyRow],
    /// Watch points.
    pub watch_points: &'e [(String, Position)],
    /// Time of the newest report.
    pub newest_report: Option<Instant>,
    /// Stations that reported regularly and are silent, with the time of their last report.
    pub silent: &'e [(String, Instant)],
    /// Acknowledgements: key, when.
    pub acknowledged: &'e BTreeMap<String, Instant>,
}

/// Raises every alert that stands, most urgent first, then longest standing first.
pub fn raise(evidence: &Evidence<'_>) -> Vec<Alert> {
    let mut alerts = Vec::new();
    stale_feed(evidence, &mut alerts);
    weak_analysis(evidence, &mut alerts);
    for system in evidence.systems {
        explosive(evidence, system, &mut alerts);
        new_system(evidence, system, &mut alerts);
        near(evidence, system, &mut alerts);
    }
    gale::gales(evidence, &mut alerts);
    rapid_falls(evidence, &mut alerts);
    silent(evidence, &mut alerts);
    for alert in &mut alerts {
        // An acknowledgement stands for as long as the alert that it was given to.
        alert.acknowledged =
            evidence.acknowledged.get(&alert.key).is_some_and(|when| *when >= alert.since);
    }
    alerts.sort_by(|one, other| {
        (other.urgency, one.since, &one.key).cmp(&(one.urgency, other.since, &other.key))
    });
    alerts
}

fn alert(rule: Rule, urgency: Urgency, subject: &str, since: Instant) -> Alert {
    Alert {
        key: format!("{} {subject}", rule.word()),
        rule,
        urgency,
        subject: subject.to_owned(),
        position: None,
        message: String::new(),
        evidence: String::new(),
        confidence: None,
        since,
        acknowledged: false,
    }
}

fn stale_feed(evidence: &Evidence<'_>, out: &mut Vec<Alert>) {
    let limit_s = evidence.thresholds.stale_minutes * 60;
    let Some(newest) = evidence.newest_report else {
        let mut found = alert(Rule::StaleFeed, Urgency::Urgent, "feed", evidence.now);
        "no report at all: nothing is known".clone_into(&mut found.message);
        out.push(found);
        return;
    };
    let age_s = evidence.now.seconds_since(newest);
    if age_s <= limit_s {
        return;
    }
    let mut found = alert(Rule::StaleFeed, Urgency::Urgent, "feed", newest.plus_s(limit_s));
    found.message = format!("newest report is {} old: the picture is not of now", age_words(age_s));
    found.evidence = format!("newest report {}", newest.day_time());
    out.push(found);
}

fn age_words(age_s: i64) -> String {
    if age_s < 2 * HOUR_S {
        format!("{} min", age_s / 60)
    } else {
        format!("{} h {:02} min", age_s / HOUR_S, age_s % HOUR_S / 60)
    }
}

fn weak_share(analysis: &HourAnalysis) -> f64 {
    let sound = analysis.error_ratio.iter().filter(|ratio| **ratio <= ERROR_RATIO_MAX).count();
    1.0 - sound as f64 / analysis.error_ratio.len().max(1) as f64
}

fn weak_analysis(evidence: &Evidence<'_>, out: &mut Vec<Alert>) {
    let on = evidence.thresholds.weak_share;
    let shares: Vec<(Hour, f64)> =
        evidence.hours.iter().map(|hour| (hour.hour, weak_share(hour))).collect();
    let Some(since) = unbroken(&shares, on, on * OFF_SHARE) else { return };
    let share = shares.last().map_or(1.0, |(_, share)| *share);
    let used = evidence.hours.last().map_or(0, |hour| hour.pressures_used);
    let mut found = alert(Rule::WeakAnalysis, Urgency::Notice, "region", since.instant());
    found.message = format!("few reports: {:.0} % of the region cannot be trusted", share * 100.0);
    found.evidence =
        format!("{used} pressures used; absence of a system or alert there means nothing");
    out.push(found);
}

/// First time of the unbroken run, up to the last value, that came on at `on` and has not fallen
/// below `off`; `None` where it does not stand.
fn unbroken<T: Copy>(values: &[(T, f64)], on: f64, off: f64) -> Option<T> {
    let mut since = None;
    for (time, value) in values {
        since = match since {
            None if *value >= on => Some(*time),
            Some(_) if *value < off || value.is_nan() => None,
            other => other,
        };
    }
    since
}

fn explosive(evidence: &Evidence<'_>, system: &System, out: &mut Vec<Alert>) {
    if system.kind != Kind::Low {
        return;
    }
    let on = evidence.thresholds.bergeron;
    let run = |hours: i64| -> Vec<(Hour, f64)> {
        (1..=system.track.len())
            .filter_map(|end| {
                let part = system.track.get(..end)?;
                let rate = bergeron_of(system.kind, part, hours)?;
                // Beyond its error: the lower end of one standard error counts.
                Some((part.last()?.hour, rate.value - rate.error))
            })
            .collect()
    };
    if let (Some(since), Some(rate)) = (unbroken(&run(24), on, on * OFF_SHARE), system.bergeron) {
        let mut found =
            alert(Rule::ExplosiveDeepening, Urgency::Urgent, &system.name, since.instant());
        found.position = Some(system.position);
        found.message = format!(
            "{} deepens explosively: {:.1} +- {:.1} bergeron over 24 h",
            system.name,
            rate.value,
            rate.error_shown(1)
        );
        found.evidence = change_words(system);
        found.confidence = Some(above(rate.value, rate.error, on));
        out.push(found);
    } else if let (Some(since), Some(rate)) =
        (unbroken(&run(12), on, on * OFF_SHARE), system.bergeron_12h)
    {
        let mut found =
            alert(Rule::DeepeningAhead, Urgency::Warning, &system.name, since.instant());
        found.position = Some(system.position);
        found.message = format!(
            "{} deepens at {:.1} +- {:.1} bergeron over 12 h: explosive if it goes on",
            system.name,
            rate.value,
            rate.error_shown(1)
        );
        found.evidence = change_words(system);
        found.confidence = Some(above(rate.value, rate.error, on));
        out.push(found);
    }
}

/// Probability that a value with a standard error lies above a threshold.
fn above(value: f64, error: f64, threshold: f64) -> f64 {
    crate::systems::centre::normal_share((value - threshold) / error.max(1e-6))
}

fn change_words(system: &System) -> String {
    let part = |hours: u8, change: Option<crate::systems::Measured>| {
        change.map_or_else(
            || format!("{hours} h -"),
            |change| format!("{hours} h {:+.1} +- {:.1}", change.value, change.error_shown(1)),
        )
    };
    format!(
        "central pressure {:.1} +- {:.1} hPa; change {}, {}, {} hPa",
        system.pressure_hpa.value,
        system.pressure_hpa.error_shown(1),
        part(6, system.change_6h_hpa),
        part(12, system.change_12h_hpa),
        part(24, system.change_24h_hpa)
    )
}

fn new_system(evidence: &Evidence<'_>, system: &System, out: &mut Vec<Alert>) {
    let age_h = evidence.valid.unix_h() - system.since.unix_h();
    let first = evidence.hours.first().map(|hour| hour.hour);
    // What stood at the first hour of the window may be as old as the hills.
    if system.kind != Kind::Low || age_h > NEW_H || first == Some(system.since) {
        return;
    }
    let mut found = alert(Rule::NewSystem, Urgency::Notice, &system.name, system.since.instant());
    found.position = Some(system.position);
    found.message = format!(
        "new low {} {:.0} hPa at {}",
        system.name,
        system.pressure_hpa.value,
        place_words(system.position)
    );
    found.confidence = Some(system.confidence);
    out.push(found);
}

/// `54.3N 012.5W`.
pub fn place_words(place: Position) -> String {
    let (latitude_deg, longitude_deg) = (place.latitude_deg(), place.longitude_deg());
    format!(
        "{:04.1}{} {:05.1}{}",
        latitude_deg.abs(),
        if latitude_deg < 0.0 { 'S' } else { 'N' },
        longitude_deg.abs(),
        if longitude_deg < 0.0 { 'W' } else { 'E' }
    )
}

fn near(evidence: &Evidence<'_>, system: &System, out: &mut Vec<Alert>) {
    if system.kind != Kind::Low {
        return;
    }
    let on_nm = evidence.thresholds.near_nm;
    for (name, place) in evidence.watch_points {
        // Nearness grows as distance falls: its negative is compared.
        let run: Vec<(Hour, f64)> = system
            .track
            .iter()
            .map(|point| (point.hour, -nm_from_km(point.position.distance_km(*place))))
            .collect();
        let Some(since) = unbroken(&run, -on_nm, -on_nm / OFF_SHARE) else { continue };
        let distance_nm = nm_from_km(system.position.distance_km(*place));
        let subject = format!("{} {name}", system.name);
        let mut found = alert(Rule::SystemNear, Urgency::Warning, &subject, since.instant());
        found.position = Some(system.position);
        found.message = format!(
            "{} {distance_nm:.0} nm from {name}, {:.0} hPa",
            system.name, system.pressure_hpa.value
        );
        let closest = system
            .outlook
            .iter()
            .map(|point| (nm_from_km(point.position.distance_km(*place)), point.lead_h))
            .min_by(|one, other| one.0.total_cmp(&other.0));
        if let Some((closest_nm, lead_h)) = closest {
            found.evidence =
                format!("extrapolated: {closest_nm:.0} nm in {lead_h} h if it carries on");
        }
        found.confidence = Some(system.confidence);
        out.push(found);
    }
}

fn rapid_falls(evidence: &Evidence<'_>, out: &mut Vec<Alert>) {
    let limit_hpa = evidence.thresholds.fall_3h_hpa;
    let falling: Vec<(&TendencyRow, Instant, f64)> = evidence
        .tendencies
        .iter()
        .filter(|row| !row.doubtful)
        .filter_map(|row| {
            let change_hpa = row.change_3h_hpa?;
            Some((row, fall_since(row, -change_hpa, limit_hpa)?, change_hpa))
        })
        .collect();
    for (row, since, change_hpa) in falling.iter().take(NAMED_MAX).copied() {
        let subject = format!("{} {}", row.platform.word(), row.station);
        let mut found = alert(Rule::RapidFall, Urgency::Warning, &subject, since);
        found.position = Some(row.position);
        found.message = format!(
            "{} falls {:.1} hPa in 3 h at {}",
            row.station,
            -change_hpa,
            place_words(row.position)
        );
        found.evidence = match (row.change_3h_reported_hpa, row.change_3h_computed_hpa) {
            (Some(reported), Some(computed)) => {
                format!("reported {reported:+.1}, own series {computed:+.1} hPa")
            }
            (Some(reported), None) => format!("reported {reported:+.1} hPa"),
            (None, Some(computed)) => format!("own series {computed:+.1} hPa"),
            (None, None) => String::new(),
        };
        if falling.len() > NAMED_MAX {
            found.evidence = format!("{}; {} stations fall so fast", found.evidence, falling.len());
        }
        found.confidence =
            row.change_3h_error_hpa.map(|error| above(-change_hpa, error, limit_hpa));
        out.push(found);
    }
}

/// Since when a station falls more than the limit in 3 h, by its own trace, which ends at the whole
/// hour of the newest report, and by its newest fall; `None` where it does not stand.
fn fall_since(row: &TendencyRow, fall_3h_hpa: f64, limit_hpa: f64) -> Option<Instant> {
    let last = row.time.hour_nearest();
    let mut falls: Vec<(Instant, f64)> = row
        .trace_hpa
        .iter()
        .zip(row.trace_hpa.iter().skip(3))
        .rev()
        .zip(0..)
        .skip(1)
        .filter_map(|((then, now), back)| Some((last.plus(-back).instant(), (*then)? - (*now)?)))
        .collect();
    falls.reverse();
    falls.push((row.time, fall_3h_hpa));
    // Very rapidly is more than the limit, not the limit itself (METHODS TEN-4).
    unbroken(&falls, limit_hpa + 1e-9, limit_hpa * OFF_SHARE)
}

fn silent(evidence: &Evidence<'_>, out: &mut Vec<Alert>) {
    let Some(since) = evidence.silent.iter().map(|(_, last)| *last).min() else { return };
    let mut found = alert(Rule::SourceGone, Urgency::Notice, "stations", since);
    let names: Vec<&str> =
        evidence.silent.iter().take(NAMED_MAX).map(|(name, _)| name.as_str()).collect();
    let more = evidence.silent.len().saturating_sub(names.len());
    found.message = format!("{} regular stations are silent", evidence.silent.len());
    found.evidence = names.join(", ");
    if more > 0 {
        found.evidence = format!("{} and {more} more", found.evidence);
    }
    out.push(found);
}

#[cfg(test)]
mod tests;
