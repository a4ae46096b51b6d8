//! Gale, storm and hurricane force: in the expected surface wind, one alert a low, and in reports.
//!
//! Each class comes on at its own bound and is an alert of its own: a gale that grows into a storm
//! asks for attention again, whoever has acknowledged the gale.

use std::collections::{BTreeMap, BTreeSet};

use super::{ERROR_RATIO_MAX, Evidence, NAMED_MAX, OFF_SHARE, alert, place_words, unbroken};
use crate::alert::{Alert, Rule, Urgency};
use crate::instant::{Hour, Instant};
use crate::quantity::{kt_from_m_s, m_s_from_kt};
use crate::report::Platform;
use crate::sphere::Position;
use crate::systems::Kind;
use crate::winds::StationWind;
use crate::winds::beaufort::warning_class;

/// A strong wind belongs to the nearest low within this, km.
const LOW_REACH_KM: f64 = 1500.0;
/// Who a wind belongs to that has no low near.
const NO_LOW: &str = "elsewhere";
/// Speeds that passed through other units may be a hair below what they are, kt.
const ROUNDING_KT: f64 = 1e-6;
/// A station silent for longer than this begins a new stand, h.
const STATION_GAP_H: f64 = 6.0;

/// Warning classes above the gale, strongest first: lower bound, kt, and name (METHODS WND-11).
const STRONGER: [(f64, &str); 2] = [(64.0, "hurricane force"), (48.0, "storm")];

/// A class of wind that stands.
#[derive(Clone, Copy, PartialEq, Debug)]
struct Standing<T> {
    /// Since when.
    since: T,
    /// Lower bound of the class, kt.
    bound_kt: f64,
    /// Its name where it is above the gale.
    stronger: Option<&'static str>,
}

/// The strongest class that stands in a run of speeds, kt; each comes on at its lower bound and
/// goes off a little below.
fn standing<T: Copy>(run: &[(T, f64)], on_kt: f64) -> Option<Standing<T>> {
    let bounds = STRONGER.iter().filter(|(bound_kt, _)| *bound_kt > on_kt);
    let classes = bounds.map(|(bound_kt, name)| (*bound_kt, Some(*name))).chain([(on_kt, None)]);
    for (bound_kt, stronger) in classes {
        if let Some(since) = unbroken(run, bound_kt - ROUNDING_KT, bound_kt * OFF_SHARE) {
            return Some(Standing { since, bound_kt, stronger });
        }
    }
    None
}

impl<T> Standing<T> {
    fn subject(&self, whose: &str) -> String {
        self.stronger.map_or_else(|| whose.to_owned(), |class| format!("{whose} {class}"))
    }

    /// Class in words: that of the speed, or the one that stands while the wind eases below it.
    fn words(&self, speed_kt: f64) -> String {
        match self.stronger {
            Some(class) if speed_kt + ROUNDING_KT < self.bound_kt => format!("{class}, easing"),
            _ => warning_class(speed_kt).unwrap_or("strong wind").to_owned(),
        }
    }

    fn urgency(&self, speed_kt: f64) -> Urgency {
        if self.stronger.is_some() || speed_kt >= 48.0 {
            Urgency::Urgent
        } else if warning_class(speed_kt).is_some() || self.bound_kt >= 34.0 {
            Urgency::Warning
        } else {
            Urgency::Notice
        }
    }
}

/// Raises the alerts of strong wind of the newest hour.
pub(super) fn gales(evidence: &Evidence<'_>, out: &mut Vec<Alert>) {
    let on_kt = evidence.thresholds.wind_kt;
    let by_hour: Vec<BTreeMap<String, (f64, Position)>> =
        (0..evidence.wind_fields.len()).map(|at| strongest(evidence, at)).collect();
    let lows =
        evidence.wind_fields.last().map_or_else(Vec::new, |field| lows(evidence, field.hour));
    let mut covered: BTreeMap<String, f64> = BTreeMap::new();
    for (owner, (speed_m_s, place)) in by_hour.last().into_iter().flatten() {
        let run: Vec<(Hour, f64)> = by_hour
            .iter()
            .zip(evidence.wind_fields)
            .map(|(found, field)| {
                (field.hour, found.get(owner).map_or(0.0, |(speed, _)| kt_from_m_s(*speed)))
            })
            .collect();
        let Some(stand) = standing(&run, on_kt) else { continue };
        let speed_kt = kt_from_m_s(*speed_m_s);
        covered.insert(owner.clone(), stand.bound_kt);
        let mut found = alert(
            Rule::Gale,
            stand.urgency(speed_kt),
            &stand.subject(owner),
            stand.since.instant(),
        );
        owner.clone_into(&mut found.subject);
        found.position = Some(*place);
        let near = if owner == NO_LOW { String::new() } else { format!(" near {owner}") };
        found.message = format!(
            "{}{near}: {speed_kt:.0} kt expected at {}",
            stand.words(speed_kt),
            place_words(*place)
        );
        found.evidence = reported_words(evidence, &lows, owner);
        out.push(found);
    }
    reports(evidence, &lows, &covered, out);
}

/// Names and places of the lows of an hour.
fn lows<'e>(evidence: &Evidence<'e>, hour: Hour) -> Vec<(&'e str, Position)> {
    evidence
        .systems
        .iter()
        .filter(|system| system.kind == Kind::Low)
        .filter_map(|system| {
            let point = system.track.iter().find(|point| point.hour == hour)?;
            Some((system.name.as_str(), point.position))
        })
        .collect()
}

/// The low that a wind belongs to.
fn owner_of<'l>(lows: &[(&'l str, Position)], place: Position) -> &'l str {
    lows.iter()
        .map(|(name, centre)| (centre.distance_km(place), *name))
        .filter(|(distance_km, _)| *distance_km <= LOW_REACH_KM)
        .min_by(|one, other| one.0.total_cmp(&other.0).then(one.1.cmp(other.1)))
        .map_or(NO_LOW, |(_, name)| name)
}

/// The strongest trusted expected surface wind, by the low it belongs to.
fn strongest(evidence: &Evidence<'_>, at: usize) -> BTreeMap<String, (f64, Position)> {
    let mut found: BTreeMap<String, (f64, Position)> = BTreeMap::new();
    let (Some(field), Some(analysis)) = (evidence.wind_fields.get(at), evidence.hours.get(at))
    else {
        return found;
    };
    let lows = lows(evidence, field.hour);
    let grid = &field.grid;
    let least_m_s = m_s_from_kt(evidence.thresholds.wind_kt * OFF_SHARE);
    for (index, [u, v]) in field.surface_m_s.iter().enumerate() {
        let speed_m_s = u.hypot(*v);
        let trusted = analysis.error_ratio.get(index).is_some_and(|r| *r <= ERROR_RATIO_MAX);
        let (column, row) = (index % grid.columns, index / grid.columns);
        let inside = column > 1 && row > 1 && column + 2 < grid.columns && row + 2 < grid.rows;
        if !(trusted && inside && speed_m_s >= least_m_s) {
            continue;
        }
        let place = grid.position(column, row);
        let entry = found.entry(owner_of(&lows, place).to_owned()).or_insert((0.0, place));
        if speed_m_s > entry.0 {
            *entry = (speed_m_s, place);
        }
    }
    found
}

/// Reports of such winds where the pressure does not imply them, or not so strong.
fn reports(
    evidence: &Evidence<'_>,
    lows: &[(&str, Position)],
    covered: &BTreeMap<String, f64>,
    out: &mut Vec<Alert>,
) {
    let on_kt = evidence.thresholds.wind_kt;
    let least_kt = on_kt * OFF_SHARE;
    let mut past: BTreeMap<(Platform, String), Vec<(Instant, f64)>> = BTreeMap::new();
    let strong = evidence.winds.iter().filter_map(|wind| {
        let observed_kt = kt_from_m_s(wind.observed?.speed_m_s);
        Some((wind, wind.platform?, observed_kt)).filter(|_| observed_kt >= least_kt)
    });
    let strong: Vec<(&StationWind, Platform, f64)> = strong.collect();
    for (wind, platform, _) in &strong {
        past.insert((*platform, wind.station.clone()), Vec::new());
    }
    if past.is_empty() {
        return;
    }
    for one in evidence.observations {
        let key = (one.report.platform, one.report.station.to_string());
        let Some((u, v)) = one.wind_m_s else { continue };
        let Some(run) = past.get_mut(&key) else { continue };
        run.push((one.report.time, kt_from_m_s(u.hypot(v))));
    }
    for run in past.values_mut() {
        run.sort_by(|one, other| one.0.cmp(&other.0).then(one.1.total_cmp(&other.1)));
        let gap = run.windows(2).rposition(|pair| match pair {
            [one, other] => other.0.hours_since(one.0) > STATION_GAP_H,
            _ => false,
        });
        run.drain(..gap.map_or(0, |gap| gap + 1));
    }
    let mut alone: Vec<(&StationWind, Platform, f64, Standing<Instant>)> = strong
        .into_iter()
        .filter_map(|(wind, platform, speed_kt)| {
            let run = past.get(&(platform, wind.station.clone()))?;
            let stand = standing(run, on_kt)?;
            let known_kt = covered.get(owner_of(lows, wind.position)).copied();
            (known_kt.is_none_or(|known_kt| known_kt < stand.bound_kt))
                .then_some((wind, platform, speed_kt, stand))
        })
        .collect();
    alone.sort_by(|one, other| {
        other.2.total_cmp(&one.2).then_with(|| one.0.station.cmp(&other.0.station))
    });
    // A station that reports twice in the hour is one station.
    let mut seen = BTreeSet::new();
    alone.retain(|(wind, platform, ..)| seen.insert((*platform, wind.station.clone())));
    let more = alone.len().saturating_sub(NAMED_MAX);
    for (wind, platform, speed_kt, stand) in alone.into_iter().take(NAMED_MAX) {
        let who = format!("{} {}", platform.word(), wind.station);
        let urgency = stand.urgency(speed_kt);
        let mut found = alert(Rule::Gale, urgency, &stand.subject(&who), stand.since);
        found.subject = who;
        found.position = Some(wind.position);
        let gust = wind
            .gust_m_s
            .map_or_else(String::new, |gust_m_s| format!(", gusts {:.0}", kt_from_m_s(gust_m_s)));
        found.message = format!(
            "{} reported by {}: {speed_kt:.0}{gust} kt at {}",
            stand.words(speed_kt),
            wind.station,
            place_words(wind.position)
        );
        "one report".clone_into(&mut found.evidence);
        if !wind.explanation.is_empty() {
            found.evidence = format!("{}; {}", found.evidence, wind.explanation);
        }
        if more > 0 {
            found.evidence = format!("{}; {more} more stations report such winds", found.evidence);
        }
        out.push(found);
    }
}

/// The strongest report of the newest hour that belongs to a low.
fn reported_words(evidence: &Evidence<'_>, lows: &[(&str, Position)], owner: &str) -> String {
    let strongest = evidence
        .winds
        .iter()
        .filter(|wind| owner_of(lows, wind.position) == owner)
        .filter_map(|wind| Some((kt_from_m_s(wind.observed?.speed_m_s), &wind.station)))
        .max_by(|one, other| one.0.total_cmp(&other.0).then_with(|| other.1.cmp(one.1)));
    let near = if owner == NO_LOW { "away from lows" } else { owner };
    strongest.map_or_else(
        || "from the pressure pattern; no wind report near".to_owned(),
        |(speed_kt, station)| {
            let of = if owner == NO_LOW { near.to_owned() } else { format!("round {near}") };
            format!("strongest report {of}: {speed_kt:.0} kt at {station}")
        },
    )
}

#[cfg(test)]
mod tests;
