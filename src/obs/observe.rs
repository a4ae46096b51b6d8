//! From the held reports to observations, hour by hour.
//!
//! [`observe`] is the plain function: the same held set gives the same observations, bit for bit.
//! An [`Observer`] remembers the last answer and makes again only what a change can have touched;
//! its answers are those of the plain function.

use std::cmp::Ordering;
use std::collections::{BTreeMap, BTreeSet};
use std::ops::RangeInclusive;
use std::sync::Arc;

use super::catalogue::{Catalogue, Conflict, resolve};
use super::held::{Entry, Held, HourReports, Key, Places};
use super::judge::judge;
use super::series::{AHEAD_H, BACK_H, Point, Series, StationPoint};
use super::{ObsSettings, Observation};
use crate::instant::Hour;
use crate::report::{Identifier, Platform};

/// A station: what reports are strung together by.
pub type Who = (Platform, Identifier);

/// The observations of one hour.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct HourObserved {
    /// One for each station that reported, by platform, station and time.
    pub observations: Vec<Arc<Observation>>,
    /// Stations that nobody can place, with the number of their waiting reports.
    pub waiting: BTreeMap<Who, usize>,
}

/// The observations of a range of hours.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Observed {
    /// The hours that have reports.
    pub hours: BTreeMap<Hour, Arc<HourObserved>>,
    /// Stations that nobody can place, with the number of their waiting reports in these hours.
    pub waiting: Vec<(Who, usize)>,
    /// What reports and the catalogue disagree about.
    pub conflicts: Arc<Vec<Conflict>>,
    /// How many stations were placed or given a height by other reports of theirs.
    pub learnt: usize,
}

impl Observed {
    /// The observations of an hour; none where nothing was reported.
    pub fn hour(&self, hour: Hour) -> &[Arc<Observation>] {
        self.hours.get(&hour).map_or(&[], |observed| &observed.observations)
    }

    /// All observations, by hour and then in the order of their keys.
    pub fn observations(&self) -> impl Iterator<Item = &Arc<Observation>> {
        self.hours.values().flat_map(|observed| &observed.observations)
    }
}

/// Makes the observations of a range of hours.
///
/// A report counts for the hour nearest to it; of several of one station the one with a pressure
/// that is nearest to the hour is taken, the others still serve its series. Reports that carry
/// neither pressure, wind nor change are left out. Stations that neither the report, the catalogue
/// nor other reports can place wait and are counted.
pub fn observe(
    held: &Held,
    catalogue: &Catalogue,
    hours: RangeInclusive<Hour>,
    settings: &ObsSettings,
) -> Observed {
    let hours: Vec<Hour> = held.hours().filter(|hour| hours.contains(hour)).collect();
    let made = rayon_map(&hours, |hour| Arc::new(observe_hour(held, catalogue, hour, settings)));
    let (conflicts, learnt) = lessons(held, catalogue);
    assemble(hours.into_iter().zip(made), Arc::new(conflicts), learnt)
}

/// Makes the observations of one hour: what [`observe`] does for each.
pub fn observe_hour(
    held: &Held,
    catalogue: &Catalogue,
    hour: Hour,
    settings: &ObsSettings,
) -> HourObserved {
    let mut made = HourObserved::default();
    let Some(bucket) = held.hour(hour) else {
        return made;
    };
    let maker = Maker { held, catalogue, hour, settings };
    let mut cursors: Vec<_> = maker.series_buckets().map(HourReports::points).collect();
    let mut points = Vec::new();
    let mut group = Vec::new();
    let mut entries = bucket.entries().peekable();
    while let Some((key, _)) = entries.peek() {
        let who = (key.platform, key.station);
        group.clear();
        while let Some(next) = entries.next_if(|(key, _)| (key.platform, key.station) == who) {
            group.push(next);
        }
        points.clear();
        for cursor in &mut cursors {
            advance(cursor, who, &mut points);
        }
        maker.station(who, &group, &points, &mut made);
    }
    made
}

/// The pieces that an hour is made of.
#[derive(Clone, Copy)]
struct Maker<'a> {
    held: &'a Held,
    catalogue: &'a Catalogue,
    hour: Hour,
    settings: &'a ObsSettings,
}

impl<'a> Maker<'a> {
    /// The buckets that the series of this hour reach into, oldest first.
    fn series_buckets(self) -> impl Iterator<Item = &'a HourReports> {
        let Maker { held, hour, .. } = self;
        (-BACK_H..=AHEAD_H).filter_map(move |step| held.hour(hour.plus(step)).map(AsRef::as_ref))
    }

    /// Makes the observation, or observations, of one station.
    fn station(
        self,
        who: Who,
        group: &[(&Key, &Entry)],
        points: &[Point],
        made: &mut HourObserved,
    ) {
        let places = self.held.places().get(&who);
        if who.1.is_generic() {
            // Each is another ship: no choice among them and no series.
            for one in group {
                self.report(who, std::slice::from_ref(one), &[], places, made);
            }
        } else {
            self.report(who, group, points, places, made);
        }
    }

    fn report(
        self,
        who: Who,
        group: &[(&Key, &Entry)],
        points: &[Point],
        places: Option<&Places>,
        made: &mut HourObserved,
    ) {
        let distance = |key: &Key| key.time.seconds_since(self.hour.instant()).abs();
        let nearest = group
            .iter()
            .min_by_key(|(key, entry)| (!entry.standing().has_pressure(), distance(key), key.time));
        let Some((key, entry)) = nearest else {
            return;
        };
        let report = entry.report(key);
        if !report.is_useful() {
            return;
        }
        let Some(site) = resolve(self.catalogue, places, &report) else {
            *made.waiting.entry(who).or_default() += group.len();
            return;
        };
        let provenance = entry.standing().provenance();
        let series = Series::new(points);
        let made_of = judge(&report, provenance, self.hour, &site, series, self.settings);
        made.observations.push(Arc::new(made_of));
    }

    /// Makes the hour again for some stations, keeping the others of `old`.
    fn again(self, old: &HourObserved, touched: &BTreeSet<Who>) -> HourObserved {
        let mut fresh = HourObserved::default();
        for who in touched {
            let Some(bucket) = self.held.hour(self.hour) else {
                break;
            };
            let group: Vec<_> = bucket.station(who.0, who.1).collect();
            if group.is_empty() {
                continue;
            }
            let mut points = Vec::new();
            for bucket in self.series_buckets() {
                let entries = bucket.station(who.0, who.1);
                points.extend(entries.map(|(_, entry)| Point::of(entry.standing())));
            }
            self.station(*who, &group, &points, &mut fresh);
        }
        let of =
            |observation: &Observation| (observation.report.platform, observation.report.station);
        let kept = old.observations.iter().filter(|held| !touched.contains(&of(held)));
        let mut observations: Vec<_> = kept.cloned().collect();
        observations.append(&mut fresh.observations);
        // Stable, and no station is in both parts: the order within a station stays.
        observations.sort_by_key(|observation| of(observation));
        let mut waiting = old.waiting.clone();
        waiting.retain(|who, _| !touched.contains(who));
        waiting.append(&mut fresh.waiting);
        HourObserved { observations, waiting }
    }
}

/// Moves a walk through an hour's points to a station and takes its own. Stations must be asked for
/// in order.
fn advance(cursor: &mut &[StationPoint], who: Who, points: &mut Vec<Point>) {
    while let Some((first, rest)) = cursor.split_first() {
        match (first.platform, first.station).cmp(&who) {
            Ordering::Less => {}
            Ordering::Equal => points.push(first.point),
            Ordering::Greater => return,
        }
        *cursor = rest;
    }
}

fn rayon_map<T: Send>(hours: &[Hour], make: impl Fn(Hour) -> T + Sync) -> Vec<T> {
    use rayon::prelude::*;
    hours.par_iter().map(|hour| make(*hour)).collect()
}

fn assemble(
    hours: impl Iterator<Item = (Hour, Arc<HourObserved>)>,
    conflicts: Arc<Vec<Conflict>>,
    learnt: usize,
) -> Observed {
    let hours: BTreeMap<Hour, Arc<HourObserved>> = hours.collect();
    let mut waiting: BTreeMap<Who, usize> = BTreeMap::new();
    for observed in hours.values() {
        for (who, count) in &observed.waiting {
            *waiting.entry(*who).or_default() += count;
        }
    }
    Observed { hours, waiting: waiting.into_iter().collect(), conflicts, learnt }
}

/// What the reports teach: conflicts with the catalogue, and the number of stations of which they
/// know more than it does.
fn lessons(held: &Held, catalogue: &Catalogue) -> (Vec<Conflict>, usize) {
    let mut conflicts = Vec::new();
    let mut learnt = 0;
    for ((platform, station), places) in held.places() {
        let Some(place) = places.most_given() else {
            continue;
        };
        conflicts.extend(resolve::conflict(catalogue, *platform, *station, place));
        let row = catalogue.user(*platform, *station).or(catalogue.standard(*platform, *station));
        let known = row.is_some_and(|row| {
            row.position.is_some()
                && (row.barometer_height_m.is_some() || place.barometer_height_m.is_none())
        });
        learnt += usize::from(!known);
    }
    (conflicts, learnt)
}

/// Remembers the last answer, so that a new report costs its own station and hours only.
#[derive(Debug, Default)]
pub struct Observer {
    held: Held,
    catalogue: Catalogue,
    settings: ObsSettings,
    hours: BTreeMap<Hour, Arc<HourObserved>>,
    lessons: Option<(Arc<Vec<Conflict>>, usize)>,
}

impl Observer {
    /// Remembers nothing yet.
    pub fn new() -> Self {
        Self::default()
    }

    /// As [`observe`], making again only what changed since the last call.
    pub fn observe(
        &mut self,
        held: &Held,
        catalogue: &Catalogue,
        hours: RangeInclusive<Hour>,
        settings: &ObsSettings,
    ) -> Observed {
        let same_catalogue = self.catalogue.is_same(catalogue);
        if !same_catalogue || self.settings != *settings {
            self.hours.clear();
        }
        let places_changed = !self.held.shares_places(held);
        if !same_catalogue || places_changed {
            self.lessons = None;
        }
        let moved = if places_changed { moved_stations(&self.held, held) } else { BTreeSet::new() };
        let changed = changed_stations(&self.held, held);
        let wanted: Vec<Hour> = held.hours().filter(|hour| hours.contains(hour)).collect();
        let made = rayon_map(&wanted, |hour| {
            let mut touched = moved.clone();
            for (_, stations) in changed.range(hour.plus(-BACK_H)..=hour.plus(AHEAD_H)) {
                touched.extend(stations);
            }
            match self.hours.get(&hour) {
                Some(old) if touched.is_empty() => Arc::clone(old),
                // Few of many: one by one. Else the walk through the whole hour is cheaper.
                Some(old) if touched.len() * 8 <= held.hour(hour).map_or(0, |b| b.len()) => {
                    let maker = Maker { held, catalogue, hour, settings };
                    Arc::new(maker.again(old, &touched))
                }
                _ => Arc::new(observe_hour(held, catalogue, hour, settings)),
            }
        });
        self.hours = wanted.iter().copied().zip(made).collect();
        self.held = held.clone();
        self.catalogue = catalogue.clone();
        self.settings = settings.clone();
        let (conflicts, learnt) = self
            .lessons
            .get_or_insert_with(|| {
                let (conflicts, learnt) = lessons(held, catalogue);
                (Arc::new(conflicts), learnt)
            })
            .clone();
        let hours = self.hours.iter().map(|(hour, observed)| (*hour, Arc::clone(observed)));
        assemble(hours, conflicts, learnt)
    }
}

/// Stations whose reports differ between two held sets, by hour.
fn changed_stations(old: &Held, new: &Held) -> BTreeMap<Hour, BTreeSet<Who>> {
    let mut changed: BTreeMap<Hour, BTreeSet<Who>> = BTreeMap::new();
    let hours: BTreeSet<Hour> = old.hours().chain(new.hours()).collect();
    for hour in hours {
        let (before, after) = (old.hour(hour), new.hour(hour));
        if let (Some(before), Some(after)) = (before, after)
            && Arc::ptr_eq(before, after)
        {
            continue;
        }
        let stations = changed.entry(hour).or_default();
        let (before, after) = (entries_of(before), entries_of(after));
        let (mut before, mut after) = (before.as_slice(), after.as_slice());
        // Both are in the order of their keys: a walk through the two finds what one lacks.
        loop {
            let order = match (before.first(), after.first()) {
                (None, None) => break,
                (Some(_), None) => Ordering::Less,
                (None, Some(_)) => Ordering::Greater,
                (Some((old, _)), Some((new, _))) => old.cmp(new),
            };
            let old = before.first().filter(|_| order.is_le());
            let new = after.first().filter(|_| order.is_ge());
            match (old, new) {
                (Some((_, held)), Some((_, entry))) if held.is_same(entry) => {}
                (Some((key, _)), _) | (None, Some((key, _))) => {
                    stations.insert((key.platform, key.station));
                }
                (None, None) => {}
            }
            before = before.get(usize::from(old.is_some())..).unwrap_or_default();
            after = after.get(usize::from(new.is_some())..).unwrap_or_default();
        }
    }
    changed
}

fn entries_of(bucket: Option<&Arc<HourReports>>) -> Vec<(&Key, &Entry)> {
    bucket.into_iter().flat_map(|bucket| bucket.entries()).collect()
}

/// Stations that the reports place otherwise than before.
fn moved_stations(old: &Held, new: &Held) -> BTreeSet<Who> {
    let mut moved = BTreeSet::new();
    for (who, places) in new.places() {
        let before = old.places().get(who).and_then(Places::most_given);
        if before != places.most_given() {
            moved.insert(*who);
        }
    }
    moved.extend(old.places().keys().filter(|who| !new.places().contains_key(who)));
    moved
}

#[cfg(test)]
mod tests;
