//! The held reports: an ordered set. A correction replaces what it corrects, a repeat joins.
//!
//! What is held depends on the set of reports alone, never on the order in which they came: all
//! distinct copies of a report are kept, and which of them stands follows from their content
//! (METHODS QC-7, see [`entry`]). Reports lie by hour behind shared pointers, so that a snapshot is
//! cheap and a change touches one hour.

use std::collections::{BTreeMap, BTreeSet, btree_map};
use std::ops::RangeInclusive;
use std::sync::{Arc, OnceLock};

use serde::{Deserialize, Serialize};

use super::Provenance;
use super::series::{Point, StationPoint};
use crate::instant::{Hour, Instant};
use crate::report::{Identifier, Platform, Report};
use crate::wire::{ByteCount, Complaint};

pub mod copy;
pub mod entry;
pub mod places;

pub use copy::{Copy, Slot};
pub use entry::{Entry, Key};
pub use places::{Place, Places};

use copy::{Arrival, Origin};

/// What became of a report that came in.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
pub enum Joined {
    /// It is new.
    New,
    /// It says what a held one says.
    Repeat,
    /// It replaced a held one.
    Corrected,
    /// A held one outranks it.
    Outranked,
}

/// What became of a file: the ledger's row.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct FileRecord {
    /// Its name without the folder, made printable.
    pub file: String,
    /// Hash of its content, hexadecimal.
    pub content: String,
    /// When it was received.
    pub received: Instant,
    /// How its bytes were spent.
    pub bytes: ByteCount,
    /// Reports read from it.
    pub reports: usize,
    /// What was not understood, at most [`crate::limits::COMPLAINTS_PER_FILE_MAX`].
    pub complaints: Vec<Complaint>,
    /// How many complaints there were in all.
    pub complaints_total: usize,
    /// Why the whole file was refused, where it was.
    pub refused: Option<String>,
}

/// How many reports are held and what became of the others; the four add up to all that came in.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default, Serialize, Deserialize)]
pub struct HeldCounts {
    /// Reports held.
    pub held: usize,
    /// Copies that said what another copy says.
    pub repeats: usize,
    /// Copies that a correction replaced.
    pub corrections: usize,
    /// Copies that another one outranks: the same report in another form or less complete.
    pub outranked: usize,
}

/// One held report on its own, for a journal: [`Held::rows`] and back.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Row {
    /// The report as it was put in.
    pub report: Report,
    /// Where it came from.
    pub provenance: Provenance,
}

/// The reports of one hour: those whose time is nearest to it.
#[derive(Clone, Debug, Default)]
pub struct HourReports {
    entries: BTreeMap<Key, Entry>,
    fingerprint: u64,
    /// What series need of the entries, side by side: made when first asked for.
    points: OnceLock<Box<[StationPoint]>>,
}

impl HourReports {
    /// The reports in the order of their keys: platform, station, time, place.
    pub fn entries(&self) -> impl Iterator<Item = (&Key, &Entry)> {
        self.entries.iter()
    }

    /// The reports of one station.
    pub fn station(
        &self,
        platform: Platform,
        station: Identifier,
    ) -> impl Iterator<Item = (&Key, &Entry)> {
        self.entries.range(Key::first(platform, station)..=Key::last(platform, station))
    }

    /// Whether there is a report of this key.
    pub fn holds(&self, key: &Key) -> bool {
        self.entries.contains_key(key)
    }

    /// How many there are.
    pub fn len(&self) -> usize {
        self.entries.len()
    }

    /// Whether there are none.
    pub fn is_empty(&self) -> bool {
        self.entries.is_empty()
    }

    /// What series need of the standing reports, in the order of their keys.
    pub(super) fn points(&self) -> &[StationPoint] {
        self.points.get_or_init(|| {
            let points = self.entries.iter().map(|(key, entry)| StationPoint {
                platform: key.platform,
                station: key.station,
                point: Point::of(entry.standing()),
            });
            points.collect()
        })
    }

    /// A fingerprint of the standing reports; it does not depend on their order of arrival.
    pub const fn fingerprint(&self) -> u64 {
        self.fingerprint
    }
}

/// The held reports and the ledger of files.
///
/// Two are equal if they hold the same reports with the same copies and the same ledger, whatever
/// the order and the number of times they came in.
#[derive(Clone, Debug, Default)]
pub struct Held {
    hours: BTreeMap<Hour, Arc<HourReports>>,
    places: Arc<BTreeMap<(Platform, Identifier), Places>>,
    files: Arc<BTreeMap<String, Arc<FileRecord>>>,
    origins: BTreeSet<Arc<Origin>>,
    counts: HeldCounts,
}

impl PartialEq for Held {
    fn eq(&self, other: &Self) -> bool {
        let same_hour = |a: &HourReports, b: &HourReports| {
            a.entries.len() == b.entries.len()
                && a.entries.iter().zip(&b.entries).all(|((key, entry), (other_key, other))| {
                    key == other_key && entry.same_reports(other)
                })
        };
        self.files == other.files
            && self.places == other.places
            && self.hours.len() == other.hours.len()
            && self
                .hours
                .iter()
                .zip(&other.hours)
                .all(|((hour, a), (other_hour, b))| hour == other_hour && same_hour(a, b))
    }
}

impl Held {
    /// Nothing held.
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes in one report. Values that are not finite are left out.
    pub fn insert(&mut self, report: Report, provenance: Provenance) -> Joined {
        let Provenance { file, content, start, end, received } = provenance;
        let arrival = Arrival {
            origin: self.origin(Origin { content, file, received }),
            start: u32::try_from(start).unwrap_or(u32::MAX),
            end: u32::try_from(end).unwrap_or(u32::MAX),
        };
        let key = Key::of(&report);
        let copy = Copy::pack(&report, arrival);
        let place = Place::taught_by(&key, &copy);
        let bucket = Arc::make_mut(self.hours.entry(report.time.hour_nearest()).or_default());
        bucket.points = OnceLock::new();
        let (joined, before, after) = match bucket.entries.entry(key) {
            btree_map::Entry::Vacant(slot) => {
                let entry = slot.insert(Entry::new(copy));
                bucket.fingerprint = bucket.fingerprint.wrapping_add(entry.fingerprint(&key));
                (Joined::New, HeldCounts::default(), entry.counts())
            }
            btree_map::Entry::Occupied(mut slot) => {
                let entry = slot.get_mut();
                let before = (entry.counts(), entry.fingerprint(&key));
                let joined = entry.join(copy);
                bucket.fingerprint =
                    bucket.fingerprint.wrapping_sub(before.1).wrapping_add(entry.fingerprint(&key));
                (joined, before.0, entry.counts())
            }
        };
        self.counts.change(before, after);
        if joined != Joined::Repeat
            && let Some(place) = place
        {
            Arc::make_mut(&mut self.places)
                .entry((key.platform, key.station))
                .or_default()
                .add(place);
        }
        joined
    }

    fn origin(&mut self, origin: Origin) -> Arc<Origin> {
        if let Some(shared) = self.origins.get(&origin) {
            return Arc::clone(shared);
        }
        let shared = Arc::new(origin);
        self.origins.insert(Arc::clone(&shared));
        shared
    }

    /// Takes in a file's row of the ledger. Of two rows for the same content the one received
    /// first stands.
    pub fn record_file(&mut self, record: FileRecord) {
        let files = Arc::make_mut(&mut self.files);
        match files.get(&record.content) {
            Some(held) if (held.received, &held.file) <= (record.received, &record.file) => {}
            _ => {
                files.insert(record.content.clone(), Arc::new(record));
            }
        }
    }

    /// Whether a file of this content is in the ledger.
    pub fn knows_file(&self, content: &str) -> bool {
        self.files.contains_key(content)
    }

    /// The ledger, in the order of content hashes.
    pub fn files(&self) -> impl Iterator<Item = &FileRecord> {
        self.files.values().map(AsRef::as_ref)
    }

    /// How many are held and what became of the others.
    pub const fn counts(&self) -> HeldCounts {
        self.counts
    }

    /// The hours that have reports, oldest first.
    pub fn hours(&self) -> impl Iterator<Item = Hour> {
        self.hours.keys().copied()
    }

    /// The reports of an hour.
    pub fn hour(&self, hour: Hour) -> Option<&Arc<HourReports>> {
        self.hours.get(&hour)
    }

    /// The standing reports of a range of hours with their provenance, in canonical order.
    pub fn reports(
        &self,
        hours: RangeInclusive<Hour>,
    ) -> impl Iterator<Item = (Report, Provenance)> {
        self.hours
            .range(hours)
            .flat_map(|(_, bucket)| bucket.entries())
            .map(|(key, entry)| (entry.report(key), entry.standing().provenance()))
    }

    /// Time of the newest report held.
    pub fn newest(&self) -> Option<Instant> {
        let (_, bucket) = self.hours.last_key_value()?;
        bucket.entries.values().map(|entry| entry.standing().time()).max()
    }

    /// Time of the newest report held that is not later than `limit`: a ship's clock that runs
    /// ahead does not move the watch.
    pub fn newest_until(&self, limit: Instant) -> Option<Instant> {
        self.hours.range(..=limit.hour_nearest()).rev().find_map(|(_, bucket)| {
            let times = bucket.entries.values().map(|entry| entry.standing().time());
            times.filter(|time| *time <= limit).max()
        })
    }

    /// What the held reports say about where fixed stations stand.
    pub fn places(&self) -> &BTreeMap<(Platform, Identifier), Places> {
        &self.places
    }

    /// Whether the places are the very same object as in another set: nothing has changed.
    pub(super) fn shares_places(&self, other: &Self) -> bool {
        Arc::ptr_eq(&self.places, &other.places)
    }

    /// Lets go of all reports of hours before `hour`; the ledger stays, so that their files are not
    /// read again.
    pub fn forget_before(&mut self, hour: Hour) {
        let kept = self.hours.split_off(&hour);
        let forgotten = std::mem::replace(&mut self.hours, kept);
        for bucket in forgotten.values() {
            for (key, entry) in bucket.entries() {
                self.counts.change(entry.counts(), HeldCounts::default());
                for copy in entry.copies() {
                    self.forget_place(key, copy);
                }
            }
        }
        drop(forgotten);
        self.origins.retain(|shared| Arc::strong_count(shared) > 1);
    }

    fn forget_place(&mut self, key: &Key, copy: &Copy) {
        let Some(place) = Place::taught_by(key, copy) else {
            return;
        };
        let places = Arc::make_mut(&mut self.places);
        if let Some(of_station) = places.get_mut(&(key.platform, key.station)) {
            of_station.remove(&place);
            if of_station.is_empty() {
                places.remove(&(key.platform, key.station));
            }
        }
    }

    /// Everything that was put in, one row a copy and a repeat, in canonical order: putting the rows
    /// in again gives an equal set with equal counts.
    pub fn rows(&self) -> impl Iterator<Item = Row> {
        self.hours.values().flat_map(|bucket| bucket.entries()).flat_map(|(key, entry)| {
            entry.copies().flat_map(move |copy| {
                let report = copy.unpack(key);
                copy.arrivals().map(move |arrival| Row { report, provenance: arrival.provenance() })
            })
        })
    }

    /// The set that holds these rows, in whatever order they come.
    pub fn from_rows(rows: impl IntoIterator<Item = Row>) -> Self {
        let mut held = Self::new();
        for row in rows {
            held.insert(row.report, row.provenance);
        }
        held
    }
}

impl HeldCounts {
    /// Takes one report's old counts out and its new ones in.
    const fn change(&mut self, before: Self, after: Self) {
        self.held = self.held - before.held + after.held;
        self.repeats = self.repeats - before.repeats + after.repeats;
        self.corrections = self.corrections - before.corrections + after.corrections;
        self.outranked = self.outranked - before.outranked + after.outranked;
    }
}

#[cfg(test)]
mod tests;
