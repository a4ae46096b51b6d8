//! Watches the folder on a thread of its own: the system's word wakes it, and it looks for itself.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::sync::mpsc::{Receiver, RecvTimeoutError, Sender, channel};
use std::time::Duration;

use notify::event::{AccessKind, AccessMode, EventKind, ModifyKind, RenameMode};
use notify::{RecursiveMode, Watcher as _};
use rayon::prelude::*;

use super::clock;
use super::worker::Task;
use crate::feed::batch::unreadable;
use crate::feed::completeness::Watchlist;
use crate::feed::folder::{FolderError, look, read};
use crate::feed::intake::{ReadFile, read_file};
use crate::feed::received::received;
use crate::instant::Instant;

/// Between looks where the system sends no word, or where files wait to be complete.
const POLL: Duration = Duration::from_secs(2);
/// Between looks where it does: word can be lost.
const RESCAN: Duration = Duration::from_secs(60);
/// After word came, a moment for more of it.
const GATHER: Duration = Duration::from_millis(20);
/// Longest such moment in all: a file written to without end must not keep the others waiting.
const GATHER_MAX: Duration = Duration::from_millis(200);

/// What wakes the feeder.
enum Wake {
    /// A file was closed after writing, or moved in: it is complete.
    Finished(String),
    /// Something happened.
    Something,
}

/// Watches `folder` until nobody listens. `limit` gives the latest time of receipt: the watch's
/// own clock, which in a rehearsal is not the system's.
pub fn run(folder: &Path, poll: bool, limit: &dyn Fn() -> Instant, out: &Sender<Task>) {
    let (wake, woken) = channel();
    let mut watcher = if poll { None } else { arm(folder, &wake) };
    let mut list = Watchlist::new();
    let mut finished: BTreeSet<String> = BTreeSet::new();
    let mut told = false;
    loop {
        let seen = look(folder);
        if let Ok(seen) = &seen {
            if watcher.is_none() && !poll {
                watcher = arm(folder, &wake);
            }
            let ready = list.look(seen, &|name| finished.contains(name), clock::now());
            finished.clear();
            let files: Vec<(&String, Instant)> = ready
                .iter()
                .filter_map(|name| {
                    let stamp = seen.get(name)?;
                    Some((name, received(name, stamp.modified(), Some(limit()))))
                })
                .collect();
            let (read, again): (Vec<ReadFile>, Vec<bool>) = files
                .par_iter()
                .map(|(name, received)| match read(folder, name) {
                    Ok(bytes) => (read_file(name, &bytes, *received), false),
                    Err(error) => {
                        // What is too large stays so; anything else may pass.
                        let again = !matches!(error, FolderError::TooLarge { .. });
                        (unreadable(name, *received, &error), again)
                    }
                })
                .unzip();
            for ((name, _), again) in files.iter().zip(again) {
                if again {
                    list.unread(name);
                }
            }
            // That there is nothing is told once, when nothing is on its way either.
            let tell = !read.is_empty() || (!told && !list.waits());
            if tell && out.send(Task::Files(read)).is_err() {
                return;
            }
            told |= tell;
        } else {
            if !told && out.send(Task::Files(Vec::new())).is_err() {
                return;
            }
            told = true;
            // The folder is gone: its watch is too. It is armed again when the folder returns.
            watcher = None;
        }
        let patience = if watcher.is_none() || list.waits() { POLL } else { RESCAN };
        if !wait(&woken, patience, &mut finished) {
            return;
        }
    }
}

/// Waits for word or for `patience`; false where the senders are gone.
fn wait(woken: &Receiver<Wake>, patience: Duration, finished: &mut BTreeSet<String>) -> bool {
    let mut patience = patience;
    let mut gathering_until = None;
    loop {
        match woken.recv_timeout(patience) {
            Ok(Wake::Finished(name)) => {
                finished.insert(name);
            }
            Ok(Wake::Something) => {}
            Err(RecvTimeoutError::Timeout) => return true,
            Err(RecvTimeoutError::Disconnected) => return false,
        }
        let now = clock::steady();
        let until = *gathering_until.get_or_insert(now + GATHER_MAX);
        if now >= until {
            return true;
        }
        patience = GATHER.min(until - now);
    }
}

/// Asks the system for word of the folder; `None` where it will not give any.
fn arm(folder: &Path, wake: &Sender<Wake>) -> Option<notify::RecommendedWatcher> {
    let wake = wake.clone();
    let mut watcher = notify::recommended_watcher(move |event: notify::Result<notify::Event>| {
        let Ok(event) = event else {
            let _ = wake.send(Wake::Something);
            return;
        };
        match event.kind {
            EventKind::Access(AccessKind::Close(AccessMode::Write))
            | EventKind::Modify(ModifyKind::Name(RenameMode::To | RenameMode::Both)) => {
                for name in event.paths.iter().filter_map(|path: &PathBuf| path.file_name()) {
                    let _ = wake.send(Wake::Finished(name.to_string_lossy().into_owned()));
                }
            }
            // Our own reading makes these.
            EventKind::Access(_) => {}
            _ => {
                let _ = wake.send(Wake::Something);
            }
        }
    })
    .ok()?;
    watcher.watch(folder, RecursiveMode::NonRecursive).ok()?;
    Some(watcher)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Word that never stops coming ends the wait all the same: the sender goes on until the wait
    /// is over, and only then lets go.
    #[test]
    fn word_without_end_does_not_keep_the_folder_from_being_looked_at() {
        let (wake, woken) = channel();
        let over = std::sync::atomic::AtomicBool::new(false);
        std::thread::scope(|scope| {
            scope.spawn(|| {
                while !over.load(std::sync::atomic::Ordering::Relaxed) {
                    let _ = wake.send(Wake::Something);
                    std::thread::yield_now();
                }
            });
            let mut finished = BTreeSet::new();
            assert!(wait(&woken, RESCAN, &mut finished));
            over.store(true, std::sync::atomic::Ordering::Relaxed);
        });
    }

    #[test]
    fn files_that_were_finished_are_remembered_and_a_lost_sender_ends_it() {
        let (wake, woken) = channel();
        wake.send(Wake::Finished("a".to_owned())).expect("sent");
        wake.send(Wake::Finished("b".to_owned())).expect("sent");
        let mut finished = BTreeSet::new();
        assert!(wait(&woken, RESCAN, &mut finished));
        assert_eq!(finished.into_iter().collect::<Vec<_>>(), ["a", "b"]);
        drop(wake);
        assert!(!wait(&woken, RESCAN, &mut BTreeSet::new()));
    }
}
