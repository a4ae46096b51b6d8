//! The one way from a file to held reports.

use std::panic::{AssertUnwindSafe, catch_unwind};

use super::content::content_name;
use crate::instant::Instant;
use crate::limits::COMPLAINTS_PER_FILE_MAX;
use crate::obs::Provenance;
use crate::obs::held::{FileRecord, Held, Joined, Row};
use crate::wire::complaint::printable;
use crate::wire::{Context, Reading, read};

/// Longest file name kept, characters.
const NAME_CHARACTERS_MAX: usize = 120;

/// A file read, ready to be taken in: made on any thread, taken in on one.
#[derive(Clone, PartialEq, Debug)]
pub struct ReadFile {
    /// The ledger's row.
    pub record: FileRecord,
    /// The reports with their provenance, in file order.
    pub rows: Vec<Row>,
}

/// What a file brought.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct TakenIn {
    /// Reports that were new.
    pub new: usize,
    /// Reports that said what was known.
    pub repeats: usize,
    /// Reports that replaced another.
    pub corrected: usize,
    /// Reports that another outranks.
    pub outranked: usize,
    /// Whether the very content was known: nothing was done.
    pub known: bool,
}

impl TakenIn {
    /// Whether anything changed in what is held.
    pub const fn changed(&self) -> bool {
        self.new + self.corrected > 0
    }
}

/// Reads a file's bytes. A decoder that panics costs this file alone: it is refused with a reason.
pub fn read_file(name: &str, bytes: &[u8], received: Instant) -> ReadFile {
    let file = printable(name.as_bytes(), NAME_CHARACTERS_MAX);
    let content = content_name(bytes);
    let context = Context { received };
    let outcome = catch_unwind(AssertUnwindSafe(|| read(bytes, &context)));
    let (reading, mut refused) = match outcome {
        Ok(reading) => (reading, None),
        Err(_) => (Reading::default(), Some("the reading of it failed; kept aside".to_owned())),
    };
    if refused.is_none() && reading.reports.is_empty() && reading.bytes.reports == 0 {
        refused = refusal(&reading);
    }
    let complaints_total = reading.complaints.len();
    let mut complaints = reading.complaints;
    complaints.truncate(COMPLAINTS_PER_FILE_MAX);
    let record = FileRecord {
        file: file.clone(),
        content: content.clone(),
        received,
        bytes: reading.bytes,
        reports: reading.reports.len(),
        complaints,
        complaints_total,
        refused,
    };
    let rows = reading
        .reports
        .into_iter()
        .map(|decoded| Row {
            report: decoded.report,
            provenance: Provenance {
                file: file.clone(),
                content: content.clone(),
                start: decoded.bytes.start,
                end: decoded.bytes.end,
                received,
            },
        })
        .collect();
    ReadFile { record, rows }
}

/// Why a file without a report is refused; `None` where it merely had nothing to say.
fn refusal(reading: &Reading) -> Option<String> {
    if reading.bytes.refused == 0 {
        return None;
    }
    Some(reading.complaints.first().map_or_else(
        || "no report found in it".to_owned(),
        |complaint| format!("no report found in it; {}", complaint.message),
    ))
}

/// Takes a read file into the held reports; a content that is known is left alone.
pub fn take_in(read: ReadFile, held: &mut Held) -> TakenIn {
    let mut taken = TakenIn::default();
    if held.knows_file(&read.record.content) {
        taken.known = true;
        return taken;
    }
    for row in read.rows {
        match held.insert(row.report, row.provenance) {
            Joined::New => taken.new += 1,
            Joined::Repeat => taken.repeats += 1,
            Joined::Corrected => taken.corrected += 1,
            Joined::Outranked => taken.outranked += 1,
        }
    }
    held.record_file(read.record);
    taken
}
