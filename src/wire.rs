//! Bytes to reports as sent. Reading never fails as a whole: what was understood comes with
//! complaints about what was not, each with its place and the rule it breaks.

use std::ops::Range;

use serde::{Deserialize, Serialize};

use crate::instant::Instant;
use crate::report::Report;

pub mod bufr;
pub mod complaint;

pub use complaint::Complaint;

/// What a decoder must know beside the bytes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Context {
    /// When the file was received: day-of-month times are resolved against it.
    pub received: Instant,
}

/// One report with the place of its text in the (expanded) file.
#[derive(Clone, PartialEq, Debug)]
pub struct Decoded {
    /// The report.
    pub report: Report,
    /// Its bytes in the expanded file.
    pub bytes: Range<usize>,
}

/// What became of a file.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Reading {
    /// The reports in file order.
    pub reports: Vec<Decoded>,
    /// What was not understood, in file order.
    pub complaints: Vec<Complaint>,
    /// How the bytes of the expanded file were spent; they add up to `total`.
    pub bytes: ByteCount,
}

/// How the bytes of a file were spent: they add up to the length of the expanded file.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default, Serialize, Deserialize)]
pub struct ByteCount {
    /// Length of the expanded file.
    pub total: u64,
    /// Inside reports that were understood.
    pub reports: u64,
    /// Envelopes, headings, separators, blank lines, NIL reports: nothing to report.
    pub envelope: u64,
    /// Not understood: covered by complaints.
    pub refused: u64,
}

/// Reads a whole file, of whatever form its content shows: bulletins, bare reports, tables, BUFR,
/// or any of these compressed.
pub fn read(bytes: &[u8], context: &Context) -> Reading {
    let _ = context;
    let total = u64::try_from(bytes.len()).unwrap_or(u64::MAX);
    Reading {
        bytes: ByteCount { total, refused: total, ..ByteCount::default() },
        ..Reading::default()
    }
}
