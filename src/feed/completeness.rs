//! Which files of a folder are complete: a pure rule of names, sizes, times and the clock.

use std::collections::BTreeMap;

use crate::instant::Instant;

/// Seconds for which a file must stand unchanged before it is read.
pub const SETTLING_S: i64 = 2;

/// What a look into the folder says of one file.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Stamp {
    /// Bytes.
    pub size: u64,
    /// Time of modification, nanoseconds since 1970.
    pub modified_ns: i128,
}

impl Stamp {
    /// The time of modification.
    pub fn modified(&self) -> Instant {
        let seconds = self.modified_ns.div_euclid(1_000_000_000);
        Instant::from_unix_s(i64::try_from(seconds).unwrap_or(0))
    }
}

/// A file known from earlier looks.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Known {
    stamp: Stamp,
    /// When this stamp was first seen.
    since: Instant,
    read: bool,
}

/// Remembers the files of a folder from look to look.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Watchlist {
    files: BTreeMap<String, Known>,
}

/// Whether a name is one of a file still being written, or hidden.
pub fn is_passed_over(name: &str) -> bool {
    let lower = name.to_ascii_lowercase();
    name.starts_with('.')
        || name.ends_with('~')
        || [".tmp", ".part", ".partial", ".writing"].iter().any(|end| lower.ends_with(end))
}

impl Watchlist {
    /// Nothing known.
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes in a look at the folder and says which files to read now, in the order of names.
    ///
    /// A file is complete when its size and time of modification have stood for
    /// [`SETTLING_S`] seconds of this clock; when it was last modified that long before it was
    /// first seen; or when `finished` names it, because its writer closed it or it was moved in.
    /// A file that changes after it was read is complete again when it has settled. A file of no
    /// bytes is never complete.
    pub fn look(
        &mut self,
        seen: &BTreeMap<String, Stamp>,
        finished: &dyn Fn(&str) -> bool,
        now: Instant,
    ) -> Vec<String> {
        self.files.retain(|name, _| seen.contains_key(name));
        let mut ready = Vec::new();
        for (name, stamp) in seen {
            if is_passed_over(name) {
                continue;
            }
            let first_sight = !self.files.contains_key(name);
            let known = self
                .files
                .entry(name.clone())
                .and_modify(|known| {
                    if known.stamp != *stamp {
                        *known = Known { stamp: *stamp, since: now, read: false };
                    }
                })
                .or_insert(Known { stamp: *stamp, since: now, read: false });
            if known.read || stamp.size == 0 {
                continue;
            }
            let stood = now.seconds_since(known.since) >= SETTLING_S;
            let age_s = now.seconds_since(stamp.modified());
            // A clock that runs behind the file server's makes ages negative: then only standing
            // still counts. So it does for a file that was seen to change: its time of
            // modification may be behind, or set by whoever copied it.
            let old = first_sight && age_s >= SETTLING_S;
            if stood || old || finished(name) {
                known.read = true;
                ready.push(name.clone());
            }
        }
        ready
    }

    /// Whether files wait to be complete.
    pub fn waits(&self) -> bool {
        self.files.values().any(|known| !known.read && known.stamp.size > 0)
    }

    /// A file could not be read: it is tried again at the next look.
    pub fn unread(&mut self, name: &str) {
        if let Some(known) = self.files.get_mut(name) {
            known.read = false;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn stamp(size: u64, modified_s: i64) -> Stamp {
        Stamp { size, modified_ns: i128::from(modified_s) * 1_000_000_000 }
    }

    fn look(list: &mut Watchlist, files: &[(&str, u64, i64)], now_s: i64) -> Vec<String> {
        let seen = files
            .iter()
            .map(|(name, size, modified_s)| ((*name).to_owned(), stamp(*size, *modified_s)))
            .collect();
        list.look(&seen, &|name| name.starts_with("moved"), Instant::from_unix_s(now_s))
    }

    #[test]
    fn a_growing_file_waits_until_it_stands() {
        let mut list = Watchlist::new();
        assert!(look(&mut list, &[("a", 10, 100)], 100).is_empty());
        assert!(look(&mut list, &[("a", 20, 101)], 101).is_empty());
        assert!(look(&mut list, &[("a", 20, 101)], 102).is_empty());
        assert!(list.waits());
        assert_eq!(look(&mut list, &[("a", 20, 101)], 103), ["a"]);
        assert!(look(&mut list, &[("a", 20, 101)], 110).is_empty());
        // It grows again: read again when it stands.
        assert!(look(&mut list, &[("a", 30, 111)], 111).is_empty());
        assert_eq!(look(&mut list, &[("a", 30, 111)], 113), ["a"]);
    }

    #[test]
    fn old_files_and_those_moved_in_are_read_at_once() {
        let mut list = Watchlist::new();
        assert_eq!(look(&mut list, &[("moved", 5, 100), ("old", 5, 50)], 100), ["moved", "old"]);
    }

    #[test]
    fn a_replacement_with_an_older_time_is_seen() {
        let mut list = Watchlist::new();
        assert_eq!(look(&mut list, &[("a", 5, 50)], 100), ["a"]);
        assert!(look(&mut list, &[("a", 5, 40)], 101).is_empty());
        assert_eq!(look(&mut list, &[("a", 5, 40)], 103), ["a"]);
    }

    #[test]
    fn a_file_growing_on_a_server_whose_clock_is_behind_waits() {
        let mut list = Watchlist::new();
        assert!(look(&mut list, &[("a", 10, 99)], 100).is_empty());
        // Its times are 30 s behind ours from here on: they do not make it complete.
        assert!(look(&mut list, &[("a", 20, 71)], 101).is_empty());
        assert!(look(&mut list, &[("a", 30, 72)], 102).is_empty());
        assert_eq!(look(&mut list, &[("a", 30, 72)], 104), ["a"]);
    }

    #[test]
    fn a_file_that_could_not_be_read_is_tried_again() {
        let mut list = Watchlist::new();
        assert_eq!(look(&mut list, &[("a", 5, 50)], 100), ["a"]);
        list.unread("a");
        assert!(list.waits());
        assert_eq!(look(&mut list, &[("a", 5, 50)], 102), ["a"]);
        assert!(look(&mut list, &[("a", 5, 50)], 104).is_empty());
    }

    #[test]
    fn files_in_the_making_hidden_and_empty_ones_are_passed_over() {
        let mut list = Watchlist::new();
        let names = [("a.tmp", 5, 1), (".b", 5, 1), ("c~", 5, 1), ("d.PART", 5, 1), ("e", 0, 1)];
        assert!(look(&mut list, &names, 100).is_empty());
    }

    #[test]
    fn a_clock_behind_the_file_servers_reads_what_stands_still() {
        let mut list = Watchlist::new();
        assert!(look(&mut list, &[("a", 5, 9000)], 100).is_empty());
        assert_eq!(look(&mut list, &[("a", 5, 9000)], 102), ["a"]);
    }
}
