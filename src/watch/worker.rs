//! The worker: the one place that changes what is held, keeps the journal and makes Pictures.

use std::collections::BTreeMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::Arc;
use std::sync::mpsc::{Receiver, Sender};

use super::Message;
use super::clock::Clock;
use crate::analysis::settled::Settled;
use crate::feed::intake::{ReadFile, take_in};
use crate::instant::{Hour, Instant};
use crate::journal::Journal;
use crate::obs::{Catalogue, Held, Verdict};
use crate::picture::{Decisions, Inputs, Picture, Workshop, settled_until};
use crate::settings::Settings;
use crate::systems::names::NameBook;

/// Seconds of the watch's clock for which an old hour must stand unchanged before it is settled.
const STANDS_S: i64 = 600;
/// Old hours: the fingerprint of each, and since when it has stood.
type Standing = BTreeMap<Hour, (u64, Instant)>;
/// Hours that reports are kept beyond the window: tendencies and traces reach back a day.
const KEPT_BEYOND_H: i64 = 48;

/// What the worker is asked.
#[derive(Debug)]
pub enum Task {
    /// Files were read.
    Files(Vec<ReadFile>),
    /// An alert was acknowledged, or no longer is.
    Acknowledge(String, bool),
    /// A system is not to be shown.
    Dismiss(String),
    /// A system has another name.
    Rename(String, String),
    /// A report was overruled, or no longer is.
    Overrule(String, Option<Verdict>),
    /// Time has gone by.
    Time,
    /// The watch ends.
    End,
}

/// All that the worker owns.
#[derive(Debug)]
pub struct Worker {
    /// What is held.
    pub held: Held,
    /// Settled names.
    pub names: NameBook,
    /// Analyses of settled hours.
    pub settled: Settled,
    /// Decisions.
    pub decisions: Decisions,
    /// The catalogue.
    pub catalogue: Catalogue,
    /// The settings.
    pub settings: Settings,
    /// The journal, where one is kept.
    pub journal: Option<Journal>,
    /// The clock.
    pub clock: Clock,
}

impl Worker {
    /// Works until it is told to end or nobody listens any more.
    pub fn run(mut self, tasks: &Receiver<Task>, out: &Sender<Message>) {
        let mut workshop = Workshop::new();
        let mut standing = Standing::new();
        // With nothing held yet the first look into the folder comes first: an empty picture would
        // say that there is no feed before anybody has looked.
        if self.held.counts().held > 0 {
            self.make(&mut workshop, &mut standing, out);
        }
        let mut looked = false;
        while let Ok(first) = tasks.recv() {
            let mut changed = false;
            let mut files = Vec::new();
            // Everything that waits is taken together: one Picture for all of it.
            for task in std::iter::once(first).chain(tasks.try_iter()) {
                match task {
                    Task::End => return,
                    Task::Files(read) => {
                        changed |= !std::mem::replace(&mut looked, true);
                        files.extend(read);
                    }
                    Task::Time => changed |= looked,
                    decision => changed |= self.decide(decision, out),
                }
            }
            if !files.is_empty() {
                changed |= self.take(files, out);
            }
            if changed && !self.make(&mut workshop, &mut standing, out) {
                return;
            }
        }
    }

    fn take(&mut self, files: Vec<ReadFile>, out: &Sender<Message>) -> bool {
        let new: Vec<ReadFile> =
            files.into_iter().filter(|file| !self.held.knows_file(&file.record.content)).collect();
        if let Some(journal) = &mut self.journal
            && let Err(error) = journal.keep_files(&new)
        {
            let _ = out.send(Message::Trouble(error.to_string()));
        }
        let changed = !new.is_empty();
        for file in new {
            take_in(file, &mut self.held);
        }
        changed
    }

    fn decide(&mut self, task: Task, out: &Sender<Message>) -> bool {
        let now = self.clock.now();
        match task {
            Task::Acknowledge(key, true) => {
                self.decisions.acknowledged.insert(key, now);
            }
            Task::Acknowledge(key, false) => {
                self.decisions.acknowledged.remove(&key);
            }
            Task::Dismiss(name) => {
                self.decisions.dismissed.insert(name, now);
            }
            Task::Rename(from, to) => {
                // A renamed system is renamed again by the name it was computed with.
                let computed = self.decisions.renamed.iter().find(|(_, chosen)| **chosen == from);
                let computed = computed.map_or(from, |(computed, _)| computed.clone());
                self.decisions.renamed.insert(computed, to);
            }
            Task::Overrule(key, Some(verdict)) => {
                self.unsettle(&key);
                self.decisions.overruled.insert(key, verdict);
            }
            Task::Overrule(key, None) => {
                self.unsettle(&key);
                self.decisions.overruled.remove(&key);
            }
            Task::Files(_) | Task::Time | Task::End => return false,
        }
        if let Some(journal) = &self.journal
            && let Err(error) = journal.keep_decisions(&self.decisions)
        {
            let _ = out.send(Message::Trouble(error.to_string()));
        }
        true
    }

    /// Makes a Picture and hands it over; false where nobody listens. A failure is told, and the
    /// last Picture stands.
    fn make(
        &mut self,
        workshop: &mut Workshop,
        standing: &mut Standing,
        out: &Sender<Message>,
    ) -> bool {
        let now = self.clock.now();
        self.forget(now);
        let outcome = catch_unwind(AssertUnwindSafe(|| {
            let inputs = Inputs {
                held: &self.held,
                catalogue: &self.catalogue,
                decisions: &self.decisions,
                names: &self.names,
                settled: &self.settled,
                settings: &self.settings,
            };
            workshop.picture(&inputs, now)
        }));
        let Ok((picture, names)) = outcome else {
            *workshop = Workshop::new();
            let trouble = "the picture could not be made; the last one stands".to_owned();
            return out.send(Message::Trouble(trouble)).is_ok();
        };
        if names != self.names {
            self.names = names;
            if let Some(journal) = &self.journal
                && let Err(error) = journal.keep_names(&self.names)
            {
                let _ = out.send(Message::Trouble(error.to_string()));
            }
        }
        self.settle(&picture, standing, out);
        out.send(Message::Picture(Box::new(picture))).is_ok()
    }

    /// Settles the hours of a Picture that are old enough and have stood unchanged for a while: a
    /// feed that comes in all at once must not freeze hours that it is still filling.
    fn settle(&mut self, picture: &Picture, standing: &mut Standing, out: &Sender<Message>) {
        let until = settled_until(&self.settings, picture.now);
        standing.retain(|hour, _| picture.hour(*hour).is_some());
        for analysis in picture.hours.iter().filter(|analysis| analysis.hour <= until) {
            let stands = standing
                .entry(analysis.hour)
                .and_modify(|(print, since)| {
                    if *print != analysis.fingerprint {
                        (*print, *since) = (analysis.fingerprint, picture.now);
                    }
                })
                .or_insert((analysis.fingerprint, picture.now));
            let kept = self.settled.get(&analysis.hour);
            let known = kept.is_some_and(|kept| kept.grid == analysis.grid);
            if known || picture.now.seconds_since(stands.1) < STANDS_S {
                continue;
            }
            if let Some(journal) = &self.journal
                && let Err(error) = journal.keep_settled(analysis)
            {
                let _ = out.send(Message::Trouble(error.to_string()));
            }
            self.settled.insert(analysis.hour, Arc::clone(analysis));
        }
        let oldest = picture.valid.plus(-self.settings.window_h);
        self.settled.retain(|hour, _| *hour >= oldest);
    }

    /// A decision about a report opens the hours that it enters.
    fn unsettle(&mut self, key: &str) {
        let Some(time) = key.rsplit(' ').next().and_then(Instant::parse) else { return };
        let first = time.hour_floor();
        let hours = first..=first.plus(self.settings.memory_h + 1);
        self.settled.retain(|hour, _| !hours.contains(hour));
        if let Some(journal) = &self.journal {
            // What cannot be deleted now is written over when the hours settle again.
            let _ = journal.unsettle(&hours);
        }
    }

    fn forget(&mut self, now: Instant) {
        let oldest: Hour = now.hour_floor().plus(-(self.settings.window_h + KEPT_BEYOND_H));
        if self.held.hours().next().is_some_and(|first| first < oldest) {
            self.held.forget_before(oldest);
            if let Some(journal) = &self.journal {
                // What cannot be deleted now is deleted at the next hour.
                let _ = journal.forget_before(oldest);
            }
        }
    }
}
