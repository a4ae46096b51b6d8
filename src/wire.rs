//! Bytes to reports as sent. Reading never fails as a whole: what was understood comes with
//! complaints about what was not, each with its place and the rule it breaks.
//!
//! A file is expanded if it is compressed (`gzip`), then walked through once (`walk`). The walk
//! tells what begins where by its content and hands it to the reader of that form (`synop`, `buoy`,
//! `metar`, `table`, `binary`). All of them speak to a listener (`listener`): one that gathers
//! reports ([`read`]) or one that writes every group down with its meaning.

use std::ops::Range;

use serde::{Deserialize, Serialize};

use crate::instant::Instant;
use crate::report::Report;

mod binary;
pub mod bufr;
mod buoy;
mod calendar;
pub mod complaint;
mod explain;
mod group;
mod gzip;
mod heading;
mod listener;
mod metar;
mod recorder;
mod synop;
mod table;
mod walk;
mod wind_unit;

pub use complaint::Complaint;
pub use explain::{Explained, ExplainedKind, Part};
pub use table::column::Column;

use gzip::Fault;
use recorder::Recorder;
use walk::Walk;

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
    /// What was not understood, in file order; at most
    /// [`COMPLAINTS_PER_FILE_MAX`](crate::limits::COMPLAINTS_PER_FILE_MAX).
    pub complaints: Vec<Complaint>,
    /// How many more complaints there were.
    pub complaints_not_kept: u64,
    /// Reports in which a station said that it has none (NIL).
    pub nil_reports: u64,
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
    let mut recorder = Recorder::default();
    listen(bytes, *context, &mut recorder);
    recorder.finish()
}

/// Takes a file apart for a reader: hands on, in file order, each report group by group and each
/// heading, with what they mean and what is wrong with them.
///
/// It understands exactly what [`read`] does: both hear the same decoders.
pub fn explain(bytes: &[u8], context: &Context, each: &mut dyn FnMut(Explained)) {
    let mut explainer = explain::Explainer::new(each);
    let length = listen(bytes, *context, &mut explainer);
    explainer.finish(length);
}

/// Tells a listener everything that a file holds.
fn listen<L: listener::Listener>(bytes: &[u8], context: Context, listener: &mut L) -> usize {
    let expanded = gzip::expand(bytes);
    Walk::new(&expanded.bytes, context.received, listener).run();
    if let Some(fault) = expanded.fault {
        let end = expanded.bytes.len();
        let place = walk::stretch(&expanded.bytes, end..end);
        match fault {
            Fault::TooLong => listener.complain(place, "compressed files: bounded length", || {
                format!("longer than {end} bytes when expanded: the rest is not read")
            }),
            Fault::Damaged(reason) => listener.complain(place, "RFC 1952", || {
                format!("the compressed data end early or are damaged ({reason})")
            }),
        }
    }
    expanded.bytes.len()
}

#[cfg(test)]
mod tests;
