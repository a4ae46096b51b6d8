//! Who listens while a file is read.
//!
//! The decoders tell every group and what it means to a listener. The one that only wants reports
//! is deaf to meanings, so that nothing is formatted for it; the one that explains writes them
//! down. The words are closures for that reason.

use std::ops::Range;

use crate::report::{Form, Identifier, Report};
use crate::wire::bufr::MessageReading;
use crate::wire::group::Group;

/// What became of a stretch of text that should be a report.
#[derive(Clone, Copy, PartialEq, Debug)]
#[expect(clippy::large_enum_variant, reason = "lives on the stack for one report at a time")]
pub(crate) enum Outcome {
    /// A report.
    Report(Report),
    /// A station said that it has nothing to report.
    Nil,
    /// Nothing could be made of it; a complaint says why.
    Lost,
}

/// Hears what a walk through a file finds, in file order.
pub(crate) trait Listener {
    /// A report may begin: what follows belongs to it until [`Listener::end`].
    fn begin(&mut self, form: Option<Form>);

    /// The station that the present report is from.
    fn station(&mut self, station: Identifier);

    /// A group and what it means.
    fn part(&mut self, group: Group<'_>, words: impl FnOnce() -> String);

    /// A group that breaks a rule.
    fn complain(&mut self, group: Group<'_>, rule: &str, message: impl FnOnce() -> String);

    /// The report is over.
    fn end(&mut self, bytes: Range<usize>, outcome: &Outcome);

    /// A whole FM 94 message: its bytes, its place in the file, and what was read from it. It is
    /// a stretch of its own, outside [`Listener::begin`] and [`Listener::end`].
    fn message(&mut self, bytes: &[u8], start: usize, reading: MessageReading);

    /// A stretch between reports: envelopes, headings, separators.
    fn envelope(&mut self, bytes: Range<usize>);
}
