//! The rules. Each looks at the whole window, so that "since when" follows from the reports alone
//! and a value that wavers about its threshold does not make an alert come and go: a rule comes on
//! at its threshold and goes off a little below it.

use std::collections::BTreeMap;

use super::{Alert, Rule, Urgency};
use crate::analysis::HourAnalysis;
use crate::instant::{HOUR_S, Hour, Instant};
use crate::quantity::{kt_from_m_s, nm_from_km};
use crate::sphere::Position;
use crate::systems::rating::bergeron_of;
use crate::systems::{Kind, System};
use crate::tendency::TendencyRow;
use crate::winds::beaufort::warning_class;
use crate::winds::{StationWind, WindField};

/// Share of a threshold at which an alert goes off again.
const OFF_SHARE: f64 = 0.9;
/// Above this ratio of the analysis error to that of the first guess nothing is trusted (ANA-5).
const ERROR_RATIO_MAX: f64 = 0.7;
/// A strong wind belongs to the nearest low within this, km.
const LOW_REACH_KM: f64 = 1500.0;
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
    gales(evidence, &mut alerts);
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

/// First hour of the unbroken run, up to the last value, that came on at `on` and has not fallen
/// below `off`; `None` where it does not stand.
fn unbroken(values: &[(Hour, f64)], on: f64, off: f64) -> Option<Hour> {
    let mut since = None;
    for (hour, value) in values {
        since = match since {
            None if *value >= on => Some(*hour),
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
            system.name, rate.value, rate.error
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
            system.name, rate.value, rate.error
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
            |change| format!("{hours} h {:+.1} +- {:.1}", change.value, change.error),
        )
    };
    format!(
        "central pressure {:.1} +- {:.1} hPa; change {}, {}, {} hPa",
        system.pressure_hpa.value,
        system.pressure_hpa.error,
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

/// The strongest trusted expected surface wind, by the low it belongs to.
fn strongest(evidence: &Evidence<'_>, at: usize) -> BTreeMap<String, (f64, Position)> {
    let mut found: BTreeMap<String, (f64, Position)> = BTreeMap::new();
    let (Some(field), Some(analysis)) = (evidence.wind_fields.get(at), evidence.hours.get(at))
    else {
        return found;
    };
    let lows: Vec<(&str, Position)> = evidence
        .systems
        .iter()
        .filter(|system| system.kind == Kind::Low)
        .filter_map(|system| {
            let point = system.track.iter().find(|point| point.hour == field.hour)?;
            Some((system.name.as_str(), point.position))
        })
        .collect();
    let grid = &field.grid;
    let least_m_s = crate::quantity::m_s_from_kt(evidence.thresholds.wind_kt * OFF_SHARE);
    for (index, [u, v]) in field.surface_m_s.iter().enumerate() {
        let speed_m_s = u.hypot(*v);
        let trusted = analysis.error_ratio.get(index).is_some_and(|r| *r <= ERROR_RATIO_MAX);
        let (column, row) = (index % grid.columns, index / grid.columns);
        let inside = column > 1 && row > 1 && column + 2 < grid.columns && row + 2 < grid.rows;
        if !(trusted && inside && speed_m_s >= least_m_s) {
            continue;
        }
        let place = grid.position(column, row);
        let owner = lows
            .iter()
            .map(|(name, centre)| (centre.distance_km(place), *name))
            .filter(|(distance_km, _)| *distance_km <= LOW_REACH_KM)
            .min_by(|one, other| one.0.total_cmp(&other.0).then(one.1.cmp(other.1)))
            .map_or("elsewhere", |(_, name)| name);
        let entry = found.entry(owner.to_owned()).or_insert((0.0, place));
        if speed_m_s > entry.0 {
            *entry = (speed_m_s, place);
        }
    }
    found
}

fn gales(evidence: &Evidence<'_>, out: &mut Vec<Alert>) {
    let on_kt = evidence.thresholds.wind_kt;
    let by_hour: Vec<BTreeMap<String, (f64, Position)>> =
        (0..evidence.wind_fields.len()).map(|at| strongest(evidence, at)).collect();
    let Some(newest) = by_hour.last() else { return };
    for (owner, (speed_m_s, place)) in newest {
        let run: Vec<(Hour, f64)> = by_hour
            .iter()
            .zip(evidence.wind_fields)
            .map(|(found, field)| {
                (field.hour, found.get(owner).map_or(0.0, |(speed, _)| kt_from_m_s(*speed)))
            })
            .collect();
        let Some(since) = unbroken(&run, on_kt, on_kt * OFF_SHARE) else { continue };
        let speed_kt = kt_from_m_s(*speed_m_s);
        let class = warning_class(speed_kt).unwrap_or("near gale");
        let mut found = alert(Rule::Gale, urgency_of(class), owner, since.instant());
        found.position = Some(*place);
        let near = if owner == "elsewhere" { String::new() } else { format!(" near {owner}") };
        found.message =
            format!("{class}{near}: {speed_kt:.0} kt expected at {}", place_words(*place));
        found.evidence = observed_words(evidence, *place);
        out.push(found);
    }
    // Reports of such winds where the pressure does not imply them.
    let mut alone: Vec<&StationWind> = evidence
        .winds
        .iter()
        .filter(|wind| {
            wind.observed.is_some_and(|observed| kt_from_m_s(observed.speed_m_s) >= on_kt)
                && !newest.values().any(|(_, place)| place.distance_km(wind.position) < 800.0)
        })
        .collect();
    alone.sort_by(|one, other| {
        let speed = |wind: &StationWind| wind.observed.map_or(0.0, |wind| wind.speed_m_s);
        speed(other).total_cmp(&speed(one)).then_with(|| one.station.cmp(&other.station))
    });
    for wind in alone.into_iter().take(NAMED_MAX) {
        let Some(observed) = wind.observed else { continue };
        let speed_kt = kt_from_m_s(observed.speed_m_s);
        let class = warning_class(speed_kt).unwrap_or("near gale");
        let since = wind.time.unwrap_or(evidence.now);
        let mut found = alert(Rule::Gale, urgency_of(class), &wind.station, since);
        found.position = Some(wind.position);
        found.message = format!(
            "{class} reported by {}: {speed_kt:.0} kt at {}",
            wind.station,
            place_words(wind.position)
        );
        found.evidence = if wind.explanation.is_empty() {
            "one report".to_owned()
        } else {
            format!("one report; {}", wind.explanation)
        };
        out.push(found);
    }
}

fn urgency_of(class: &str) -> Urgency {
    match class {
        "storm" | "hurricane force" => Urgency::Urgent,
        "gale" => Urgency::Warning,
        _ => Urgency::Notice,
    }
}

fn observed_words(evidence: &Evidence<'_>, place: Position) -> String {
    let strongest = evidence
        .winds
        .iter()
        .filter(|wind| wind.position.distance_km(place) < 400.0)
        .filter_map(|wind| Some((kt_from_m_s(wind.observed?.speed_m_s), &wind.station)))
        .max_by(|one, other| one.0.total_cmp(&other.0).then_with(|| other.1.cmp(one.1)));
    strongest.map_or_else(
        || "from the pressure pattern; no wind report within 215 nm".to_owned(),
        |(speed_kt, station)| {
            format!("strongest report within 215 nm: {speed_kt:.0} kt at {station}")
        },
    )
}

fn rapid_falls(evidence: &Evidence<'_>, out: &mut Vec<Alert>) {
    let limit_hpa = evidence.thresholds.fall_3h_hpa;
    let falling: Vec<&TendencyRow> = evidence
        .tendencies
        .iter()
        .filter(|row| !row.doubtful && row.change_3h_hpa.is_some_and(|change| change < -limit_hpa))
        .collect();
    for row in falling.iter().take(NAMED_MAX) {
        let Some(change_hpa) = row.change_3h_hpa else { continue };
        let subject = format!("{} {}", row.platform.word(), row.station);
        let mut found =
            alert(Rule::RapidFall, Urgency::Warning, &subject, fall_since(row, limit_hpa));
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

/// First hour of the unbroken run in which the station's own trace falls that fast; the trace ends
/// at the whole hour of the newest report.
fn fall_since(row: &TendencyRow, limit_hpa: f64) -> Instant {
    let last = row.time.hour_nearest();
    let length = row.trace_hpa.len();
    let mut since = row.time;
    for back in 0..length.saturating_sub(3) {
        let at = length - 1 - back;
        let (Some(Some(now)), Some(Some(then))) =
            (row.trace_hpa.get(at), row.trace_hpa.get(at - 3))
        else {
            break;
        };
        if then - now < limit_hpa * OFF_SHARE {
            break;
        }
        since = last.plus(-i64::try_from(back).unwrap_or(0)).instant().min(row.time);
    }
    since
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
