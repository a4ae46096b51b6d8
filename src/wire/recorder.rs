//! The listener that only wants reports and complaints.

use std::ops::Range;

use crate::limits::COMPLAINTS_PER_FILE_MAX;
use crate::report::{Form, Identifier};
use crate::wire::bufr::MessageReading;
use crate::wire::complaint::{Complaint, printable};
use crate::wire::group::Group;
use crate::wire::listener::{Listener, Outcome};
use crate::wire::{Decoded, Reading};

/// Longest piece of a file quoted in a complaint, characters.
pub(crate) const QUOTED_CHARACTERS_MAX: usize = 40;

/// Gathers a [`Reading`].
#[derive(Debug, Default)]
pub(crate) struct Recorder {
    reading: Reading,
    /// The first complaint of the present report.
    first: usize,
    station: Option<Identifier>,
}

impl Recorder {
    /// What was gathered.
    pub(crate) fn finish(self) -> Reading {
        self.reading
    }

    fn keep(&mut self, complaint: Complaint) {
        if self.reading.complaints.len() < COMPLAINTS_PER_FILE_MAX {
            self.reading.complaints.push(complaint);
        } else {
            self.reading.complaints_not_kept += 1;
        }
    }

    fn spend(&mut self, bytes: &Range<usize>) -> u64 {
        let length = u64::try_from(bytes.len()).unwrap_or(u64::MAX);
        self.reading.bytes.total += length;
        length
    }
}

impl Listener for Recorder {
    fn begin(&mut self, _: Option<Form>) {
        self.first = self.reading.complaints.len();
        self.station = None;
    }

    fn station(&mut self, station: Identifier) {
        self.station = Some(station);
    }

    fn part(&mut self, _: Group<'_>, _: impl FnOnce() -> String) {}

    fn complain(&mut self, group: Group<'_>, rule: &str, message: impl FnOnce() -> String) {
        if self.reading.complaints.len() >= COMPLAINTS_PER_FILE_MAX {
            self.reading.complaints_not_kept += 1;
            return;
        }
        self.reading.complaints.push(complaint(group, rule, message()));
    }

    fn end(&mut self, bytes: Range<usize>, outcome: &Outcome) {
        let length = self.spend(&bytes);
        let station = self.station.take();
        let own = self.reading.complaints.get_mut(self.first..).unwrap_or_default();
        settle(own, station, *outcome == Outcome::Lost);
        self.first = self.reading.complaints.len();
        match outcome {
            Outcome::Report(report) => {
                self.reading.bytes.reports += length;
                self.reading.reports.push(Decoded { report: *report, bytes });
            }
            Outcome::Nil => {
                self.reading.bytes.envelope += length;
                self.reading.nil_reports += 1;
            }
            Outcome::Lost => self.reading.bytes.refused += length,
        }
    }

    fn message(&mut self, bytes: &[u8], start: usize, reading: MessageReading) {
        let range = start..start + bytes.len();
        let length = self.spend(&range);
        if reading.understood {
            self.reading.bytes.reports += length;
        } else {
            self.reading.bytes.refused += length;
        }
        self.reading.reports.extend(
            reading.reports.iter().map(|report| Decoded { report: *report, bytes: range.clone() }),
        );
        for complaint in reading.complaints {
            self.keep(complaint);
        }
        self.first = self.reading.complaints.len();
    }

    fn envelope(&mut self, bytes: Range<usize>) {
        self.reading.bytes.envelope += self.spend(&bytes);
        self.first = self.reading.complaints.len();
    }
}

/// A complaint about a group, its station yet unknown.
pub(crate) fn complaint(group: Group<'_>, rule: &str, message: String) -> Complaint {
    Complaint {
        start: group.start,
        end: group.end(),
        station: String::new(),
        group: printable(group.text, QUOTED_CHARACTERS_MAX),
        rule: rule.to_owned(),
        message,
        report_lost: false,
    }
}

/// Tells the complaints of a report whose it is and whether it was lost.
pub(crate) fn settle(complaints: &mut [Complaint], station: Option<Identifier>, lost: bool) {
    for complaint in complaints {
        if let Some(station) = station {
            station.as_str().clone_into(&mut complaint.station);
        }
        complaint.report_lost = lost;
    }
}
