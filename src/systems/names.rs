//! Names of systems: short, stable, not used again within ten days.
//!
//! A name is the kind, the day of the month of birth, and a letter for the place of birth: one of
//! 23 sectors of longitude from the date line eastward, the next free letter where
//! two are born in one sector on one day. So a name follows from the birth alone; a late report
//! that adds another birth elsewhere changes no name. What the rolling window has forgotten is
//! kept in the [`NameBook`].

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use super::Kind;
use super::track::Track;
use crate::instant::{Hour, Instant};
use crate::quantity::index_nearest;
use crate::sphere::Position;

/// Letters of the sectors; those that a tired eye takes for a figure are left out.
const LETTERS: &[u8; 23] = b"abcdefghjkmnpqrstuvwxyz";
/// Days within which a name is not used again.
const REST_H: i64 = 240;
/// A settled point of the book and a track's point of the same hour belong together within this, km.
const SAME_KM: f64 = 250.0;

/// Names given to tracks whose hours are settled.
#[derive(Clone, PartialEq, Debug, Default, Serialize, Deserialize)]
pub struct NameBook {
    /// By name: the kind and the settled points.
    pub entries: BTreeMap<String, NameEntry>,
}

/// One named track's settled points.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct NameEntry {
    /// High or low.
    pub kind: Kind,
    /// Hour of birth.
    pub since: Hour,
    /// Where it was at each settled hour.
    pub points: BTreeMap<i64, Position>,
}

/// Names for the tracks, in their order. A name in the book goes to the track that shares most of
/// its settled points; the other tracks are named by their birth.
pub fn name_tracks(tracks: &[Track], book: &NameBook) -> Vec<String> {
    let mut names: Vec<Option<String>> = vec![None; tracks.len()];
    for (name, entry) in &book.entries {
        let best = tracks
            .iter()
            .enumerate()
            .filter(|(at, track)| names[*at].is_none() && track.kind == entry.kind)
            .map(|(at, track)| (shared(track, entry), at))
            .filter(|(count, _)| *count > 0)
            .max_by_key(|(count, at)| (*count, usize::MAX - at));
        if let Some((_, at)) = best {
            names[at] = Some(name.clone());
        }
    }
    let mut used: BTreeMap<String, Hour> =
        book.entries.iter().map(|(name, entry)| (name.clone(), entry.last())).collect();
    // In the order of confirmation: the next hour's confirmations come after all that there are, and
    // change none of their names.
    let mut order: Vec<usize> = (0..tracks.len()).collect();
    order.sort_by_key(|at| (tracks[*at].confirmed, tracks[*at].id));
    for at in order {
        let track = &tracks[at];
        let name = names[at].get_or_insert_with(|| fresh(track, &used));
        used.insert(name.clone(), track.newest().hour);
    }
    names.into_iter().map(Option::unwrap_or_default).collect()
}

fn shared(track: &Track, entry: &NameEntry) -> usize {
    track
        .steps
        .iter()
        .filter(|step| {
            entry
                .points
                .get(&step.hour.unix_h())
                .is_some_and(|place| place.distance_km(step.state.position) < SAME_KM)
        })
        .count()
}

fn fresh(track: &Track, used: &BTreeMap<String, Hour>) -> String {
    let birth = track.since();
    let letter = match track.kind {
        Kind::Low => 'L',
        Kind::High => 'H',
    };
    let day = day_of_month(birth.instant());
    let longitude_deg = track.steps[0].state.position.longitude_deg();
    let turn = (longitude_deg + 180.0) / 360.0 * LETTERS.len() as f64;
    let sector = index_nearest(turn.floor()) % LETTERS.len();
    for round in 0..LETTERS.len() {
        let sector = LETTERS[(sector + round) % LETTERS.len()];
        let name = format!("{letter}{day}{}", char::from(sector));
        let rested = used.get(&name).is_none_or(|last| birth.unix_h() - last.unix_h() > REST_H);
        if rested {
            return name;
        }
    }
    // More than 23 births of a kind in a day: numbers go on where letters end.
    let mut number = 1;
    loop {
        let name = format!("{letter}{day}-{number}");
        if !used.contains_key(&name) {
            return name;
        }
        number += 1;
    }
}

fn day_of_month(time: Instant) -> u32 {
    use chrono::Datelike as _;
    time.calendar().map_or(0, |calendar| calendar.day())
}

impl NameEntry {
    fn last(&self) -> Hour {
        self.points.keys().next_back().map_or(self.since, |hour| Hour::from_unix_h(*hour))
    }
}

/// The book with the points of hours that are settled now, and without entries that have rested.
///
/// Only hours not later than `settled` are written, so the book is the same whatever came late.
#[must_use]
pub fn settled_book(
    book: &NameBook,
    tracks: &[Track],
    names: &[String],
    settled: Hour,
) -> NameBook {
    let mut next = book.clone();
    for (track, name) in tracks.iter().zip(names) {
        if track.confirmed.is_none() || track.since() > settled {
            continue;
        }
        let entry = next.entries.entry(name.clone()).or_insert_with(|| NameEntry {
            kind: track.kind,
            since: track.since(),
            points: BTreeMap::new(),
        });
        for step in track.steps.iter().filter(|step| step.hour <= settled) {
            entry.points.entry(step.hour.unix_h()).or_insert(step.state.position);
        }
    }
    next.entries.retain(|_, entry| settled.unix_h() - entry.last().unix_h() <= REST_H);
    for entry in next.entries.values_mut() {
        entry.points.retain(|hour, _| settled.unix_h() - hour <= REST_H);
    }
    next
}
