//! The listener that writes everything down: each report group by group, with its meaning and with
//! complaints at the place they are about.

use std::ops::Range;

use crate::report::{Form, Identifier, Report};
use crate::wire::bufr::{Decoder, MessageReading};
use crate::wire::complaint::{Complaint, printable};
use crate::wire::group::Group;
use crate::wire::listener::{Listener, Outcome};
use crate::wire::recorder::{QUOTED_CHARACTERS_MAX, complaint, settle};

mod bufr;

/// One stretch of a file taken apart.
#[derive(Clone, PartialEq, Debug)]
pub struct Explained {
    /// Its bytes in the expanded file. The subsets of a BUFR message share those of the message.
    pub bytes: Range<usize>,
    /// What became of it.
    pub kind: ExplainedKind,
    /// The form it is in, where that is known.
    pub form: Option<Form>,
    /// Who reported, where that is known.
    pub station: Option<Identifier>,
    /// Its groups or elements in order.
    pub parts: Vec<Part>,
}

/// What became of a stretch.
#[derive(Clone, PartialEq, Debug)]
pub enum ExplainedKind {
    /// A report, as understood.
    Report(Box<Report>),
    /// A station said that it has nothing to report.
    Nil,
    /// Nothing could be made of it.
    Lost,
    /// What stands about reports: a heading, a table's header line, the head of a message.
    Envelope,
}

/// A group or an element.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Part {
    /// Its bytes in the expanded file; empty for an element that does not begin at a byte.
    pub bytes: Range<usize>,
    /// Its characters, made printable, or the name of the element.
    pub text: String,
    /// What it means, in words with value and unit; empty where a complaint says all.
    pub meaning: String,
    /// What is wrong with it.
    pub complaint: Option<Complaint>,
}

impl Explained {
    /// What is wrong with it, in order.
    pub fn complaints(&self) -> impl Iterator<Item = &Complaint> {
        self.parts.iter().filter_map(|part| part.complaint.as_ref())
    }

    /// The report, if there is one.
    pub fn report(&self) -> Option<&Report> {
        match &self.kind {
            ExplainedKind::Report(report) => Some(report),
            _ => None,
        }
    }
}

/// Hands each stretch on as soon as it is complete, so that a long file needs little memory.
pub(crate) struct Explainer<'f> {
    each: &'f mut dyn FnMut(Explained),
    form: Option<Form>,
    station: Option<Identifier>,
    parts: Vec<Part>,
    decoder: Decoder,
}

impl std::fmt::Debug for Explainer<'_> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Explainer").field("parts", &self.parts).finish_non_exhaustive()
    }
}

impl<'f> Explainer<'f> {
    /// A listener that hands every stretch to a function.
    pub(crate) fn new(each: &'f mut dyn FnMut(Explained)) -> Self {
        Self { each, form: None, station: None, parts: Vec::new(), decoder: Decoder::new() }
    }

    /// Hands on what is left at the end of the file: complaints about the file as a whole.
    pub(crate) fn finish(mut self, length: usize) {
        if !self.parts.is_empty() {
            self.hand(length..length, ExplainedKind::Envelope);
        }
    }

    fn hand(&mut self, bytes: Range<usize>, kind: ExplainedKind) {
        let parts = std::mem::take(&mut self.parts);
        let (form, station) = (self.form.take(), self.station.take());
        (self.each)(Explained { bytes, kind, form, station, parts });
    }
}

impl Listener for Explainer<'_> {
    fn begin(&mut self, form: Option<Form>) {
        self.form = form;
        self.station = None;
    }

    fn station(&mut self, station: Identifier) {
        self.station = Some(station);
    }

    fn part(&mut self, group: Group<'_>, words: impl FnOnce() -> String) {
        self.parts.push(Part {
            bytes: group.start..group.end(),
            text: printable(group.text, QUOTED_CHARACTERS_MAX),
            meaning: words(),
            complaint: None,
        });
    }

    fn complain(&mut self, group: Group<'_>, rule: &str, message: impl FnOnce() -> String) {
        let complaint = complaint(group, rule, message());
        // A group that was explained and is then doubted stands once.
        if let Some(last) = self.parts.last_mut()
            && last.bytes == complaint.bytes()
            && last.complaint.is_none()
        {
            last.complaint = Some(complaint);
            return;
        }
        self.parts.push(Part {
            bytes: complaint.bytes(),
            text: complaint.group.clone(),
            meaning: String::new(),
            complaint: Some(complaint),
        });
    }

    fn end(&mut self, bytes: Range<usize>, outcome: &Outcome) {
        let lost = *outcome == Outcome::Lost;
        for part in &mut self.parts {
            if let Some(complaint) = &mut part.complaint {
                settle(std::slice::from_mut(complaint), self.station, lost);
            }
        }
        let kind = match outcome {
            Outcome::Report(report) => ExplainedKind::Report(Box::new(*report)),
            Outcome::Nil => ExplainedKind::Nil,
            Outcome::Lost => ExplainedKind::Lost,
        };
        self.hand(bytes, kind);
    }

    fn message(&mut self, bytes: &[u8], start: usize, reading: MessageReading) {
        self.parts.clear();
        bufr::explain(&mut self.decoder, bytes, start, reading, self.each);
    }

    fn envelope(&mut self, bytes: Range<usize>) {
        if self.parts.is_empty() {
            return;
        }
        self.hand(bytes, ExplainedKind::Envelope);
    }
}
