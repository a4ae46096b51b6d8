//! The walk through a file: envelopes, headings, reports and tables, one after the other.
//!
//! A cursor moves forward only and every stretch it passes is told to the listener exactly once,
//! so that the bytes add up. What a stretch is shows in its first characters; what is not known is
//! refused up to the next place where something known begins.

use std::ops::Range;

use crate::instant::Instant;
use crate::limits::REPORT_BYTES_MAX;
use crate::report::{Form, Revision};
use crate::wire::calendar::Calendar;
use crate::wire::group::{Group, Groups, is_blank};
use crate::wire::heading::{self, Heading};
use crate::wire::listener::{Listener, Outcome};
use crate::wire::table::{self, Tables};
use crate::wire::wind_unit::WindUnit;
use crate::wire::{Context, binary, bufr, buoy, metar, synop};

mod mark;
mod report_end;

use mark::Mark;
use report_end::Ends;

/// What holds for the reports of a bulletin until something else is said.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) enum Sticky {
    /// Nothing has been said yet.
    Nothing,
    /// `AAXX YYGGiw` was: the hour, if it could be read, and the unit of the wind.
    Land {
        /// The hour of the reports.
        hour: Option<Instant>,
        /// The wind unit, `None` where the indicator is invalid or missing.
        unit: Option<WindUnit>,
    },
    /// `BBXX` was.
    Ship,
    /// `OOXX` was.
    Mobile,
    /// `ZZYY` was.
    Buoy,
    /// `METAR` or `SPECI` was, or the heading promises it.
    Aerodrome(Form),
    /// A form that is not read here, named.
    NotRead(&'static str),
}

/// The walk.
#[derive(Debug)]
pub(crate) struct Walk<'a, 'l, L> {
    bytes: &'a [u8],
    at: usize,
    listener: &'l mut L,
    calendar: Calendar,
    heading: Option<Heading>,
    sticky: Sticky,
    tables: Tables,
    ends: Ends,
    bufr: bufr::Decoder,
}

impl<'a, 'l, L: Listener> Walk<'a, 'l, L> {
    /// A walk through an expanded file that was received at a moment.
    pub(crate) fn new(bytes: &'a [u8], received: Instant, listener: &'l mut L) -> Self {
        Self {
            bytes,
            at: 0,
            listener,
            calendar: Calendar::new(received),
            heading: None,
            sticky: Sticky::Nothing,
            tables: Tables::default(),
            ends: Ends::default(),
            bufr: bufr::Decoder::new(),
        }
    }

    /// Walks to the end of the file.
    pub(crate) fn run(mut self) {
        while self.at < self.bytes.len() {
            let before = self.at;
            self.step();
            debug_assert!(self.at > before, "a step must move the cursor");
            if self.at <= before {
                // Cannot happen; a walk that stands still would never end.
                let rest = self.bytes.len();
                self.refuse(rest, "a file", || "reading stopped here".to_owned());
            }
        }
    }

    fn rest(&self) -> &'a [u8] {
        self.bytes.get(self.at..).unwrap_or_default()
    }

    /// One stretch.
    fn step(&mut self) {
        if self.separators() {
            return;
        }
        match self.ends.known(self.at).unwrap_or_else(|| mark::at(self.rest())) {
            Mark::Bufr | Mark::Grib => self.binary(),
            Mark::Frame(length) => self.envelope(self.at + length),
            Mark::Heading(heading) => self.begin_bulletin(heading),
            Mark::BulletinStart => {
                self.end_bulletin();
                self.envelope(self.at + heading::line_length(self.rest()));
            }
            Mark::BulletinEnd => {
                self.end_bulletin();
                self.envelope(self.at + 4);
            }
            Mark::Land => self.land_line(),
            Mark::Ship => self.report_of(Sticky::Ship, 4),
            Mark::Mobile => self.report_of(Sticky::Mobile, 4),
            Mark::Buoy => self.report_of(Sticky::Buoy, 4),
            Mark::Aerodrome(form) => self.report_of(Sticky::Aerodrome(form), 5),
            Mark::AerodromeBare if !matches!(self.sticky, Sticky::NotRead(_)) => {
                if !matches!(self.sticky, Sticky::Aerodrome(_)) {
                    self.sticky = Sticky::Aerodrome(Form::Metar);
                }
                self.report_of(self.sticky, 0);
            }
            Mark::NotRead(name, length) => self.report_of(Sticky::NotRead(name), length),
            Mark::JsonLine => self.json_line(),
            Mark::Header => self.table(),
            Mark::AerodromeBare | Mark::Text => self.report_of(self.sticky, 0),
        }
    }

    /// Passes blanks, line ends, SOH, ETX and stray ends of reports.
    fn separators(&mut self) -> bool {
        let start = self.at;
        let mut to = start;
        while let Some(&byte) = self.bytes.get(to) {
            match byte {
                // SOH, by which a channel sequence number may stand.
                1 => {
                    self.end_bulletin();
                    to += 1;
                    let after = self.bytes.get(to..).unwrap_or_default();
                    let blanks = after.iter().take_while(|&&b| is_blank(b) && b != 1).count();
                    let after = after.get(blanks..).unwrap_or_default();
                    if let Some(length) = heading::sequence_number(after) {
                        to += blanks + length;
                    }
                }
                3 => {
                    self.end_bulletin();
                    to += 1;
                }
                b'=' => to += 1,
                // The mark that some programs put before UTF-8 text.
                0xef if self.bytes.get(to..to + 3) == Some(&[0xef, 0xbb, 0xbf]) => to += 3,
                _ if is_blank(byte) => to += 1,
                _ => break,
            }
        }
        self.envelope(to);
        to > start
    }

    fn envelope(&mut self, to: usize) {
        let to = to.min(self.bytes.len());
        if to > self.at {
            self.listener.envelope(self.at..to);
            self.at = to;
        }
    }

    fn refuse(&mut self, to: usize, rule: &str, message: impl FnOnce() -> String) {
        let bytes = self.at..to.min(self.bytes.len());
        let text = self.bytes.get(bytes.clone()).unwrap_or_default();
        self.listener.begin(None);
        self.listener.complain(Group { text, start: self.at }, rule, message);
        self.listener.end(bytes.clone(), &Outcome::Lost);
        self.at = bytes.end;
    }

    fn end_bulletin(&mut self) {
        self.heading = None;
        self.sticky = Sticky::Nothing;
    }

    fn begin_bulletin(&mut self, heading: Heading) {
        self.sticky = match &heading.designator {
            b"SA" => Sticky::Aerodrome(Form::Metar),
            b"SP" => Sticky::Aerodrome(Form::Speci),
            [b'F', _] => Sticky::NotRead("a forecast"),
            [b'U', _] => Sticky::NotRead("an upper-air report"),
            [b'W', _] => Sticky::NotRead("a warning"),
            [b'N', _] => Sticky::NotRead("a notice"),
            _ => Sticky::Nothing,
        };
        let length = heading.length;
        let line = stretch(self.bytes, self.at..self.at + length);
        self.listener.begin(None);
        self.listener.part(line, || heading.words());
        self.envelope(self.at + length);
        self.heading = Some(heading);
    }

    fn revision(&self) -> Revision {
        self.heading.map_or(Revision::Original, |heading| heading.revision)
    }

    /// `AAXX YYGGiw`, which holds for every report that follows (METHODS COD-2).
    fn land_line(&mut self) {
        let rest = self.rest();
        let rest = rest.get(..heading::HEADING_BYTES_MAX).unwrap_or(rest);
        let mut to = self.at + 4;
        let mut groups = Groups::new(self.bytes, to, self.at + rest.len());
        let line_end = self.at + heading::line_length(rest);
        let time = groups.next().filter(|group| group.start < line_end + 4);
        let (hour, unit) = match time {
            Some(group) if group.text.len() == 5 && group.figure(0).is_some() => {
                to = group.end();
                self.listener.begin(None);
                let read =
                    synop::identification::land_time(group, &mut self.calendar, self.listener);
                self.listener.envelope(self.at..to);
                self.at = to;
                read
            }
            _ => {
                self.refuse(to, "FM 12 section 0: AAXX YYGGiw", || {
                    "no day and hour follow: the reports below have no time".to_owned()
                });
                (None, None)
            }
        };
        self.sticky = Sticky::Land { hour, unit };
        self.at = self.at.max(to);
    }

    /// A report of a form whose mark of some length stands at the cursor.
    fn report_of(&mut self, form: Sticky, mark_length: usize) {
        self.sticky = form;
        let start = self.at;
        if let Sticky::NotRead(name) = form {
            let to = self.ends.next_mark(self.bytes, start);
            self.refuse(to, "forms that are read", || format!("{name}: not read"));
            return;
        }
        if form == Sticky::Nothing {
            self.unknown();
            return;
        }
        let land = matches!(form, Sticky::Land { .. });
        let end = self.ends.report_end(self.bytes, start, land);
        if end - start > REPORT_BYTES_MAX {
            self.refuse(end, "longest report", || {
                format!("{} bytes without an end of report", end - start)
            });
            return;
        }
        let mut groups = Groups::new(self.bytes, start, end);
        if mark_length > 0 {
            groups.next();
            // METAR or SPECI alone in its line stands for the whole collective.
            if groups.peek().is_none() {
                self.envelope(end);
                return;
            }
        }
        if is_nil(&groups) {
            self.envelope(end);
            return;
        }
        let revision = self.revision();
        let outcome = match form {
            Sticky::Land { hour, unit } => {
                self.listener.begin(Some(Form::Synop));
                synop::land(groups, hour, unit, revision, self.listener)
            }
            Sticky::Ship => {
                self.listener.begin(Some(Form::Ship));
                synop::sea(groups, &mut self.calendar, revision, self.listener)
            }
            Sticky::Mobile => {
                self.listener.begin(Some(Form::Mobile));
                synop::mobile(groups, &mut self.calendar, revision, self.listener)
            }
            Sticky::Buoy => {
                self.listener.begin(Some(Form::Buoy));
                buoy::read(groups, &mut self.calendar, revision, self.listener)
            }
            Sticky::Aerodrome(form) => {
                self.listener.begin(Some(form));
                metar::read(groups, form, &mut self.calendar, revision, self.listener)
            }
            Sticky::Nothing | Sticky::NotRead(_) => Outcome::Lost,
        };
        self.listener.end(start..end, &outcome);
        self.at = end;
    }

    /// Text of no known form, up to where something known begins.
    fn unknown(&mut self) {
        let to = self.ends.next_mark(self.bytes, self.at);
        let groups = Groups::new(self.bytes, self.at, to);
        if is_nil(&groups) {
            self.envelope(to);
            return;
        }
        self.refuse(to, "forms that are read", || {
            "no form of report, table or message is recognised here".to_owned()
        });
    }

    fn json_line(&mut self) {
        let start = self.at;
        let end = start + table::line_length(self.rest());
        self.listener.begin(Some(Form::Json));
        let outcome = self.tables.json_line(self.bytes, start..end, self.listener);
        self.listener.end(start..end, &outcome);
        self.at = end;
    }

    /// A header line and the rows below it, as far as they look like rows.
    fn table(&mut self) {
        let header_end = self.at + table::line_length(self.rest());
        self.listener.begin(None);
        let Some(header) = self.tables.header(self.bytes, self.at..header_end, self.listener)
        else {
            self.refuse(header_end, "CSV header", || "not a usable header line".to_owned());
            return;
        };
        self.envelope(header_end);
        loop {
            let blanks =
                self.rest().iter().take_while(|&&byte| is_blank(byte) && byte != 1 && byte != 3);
            let blanks = blanks.count();
            self.envelope(self.at + blanks);
            let rest = self.rest();
            let length = table::line_length(rest);
            let line = rest.get(..length).unwrap_or_default();
            if line.is_empty() || !header.is_row(line) || mark::at(rest).ends_table() {
                return;
            }
            let bytes = self.at..self.at + length;
            self.listener.begin(Some(Form::Csv));
            let outcome = header.row(self.bytes, bytes.clone(), self.listener);
            self.listener.end(bytes.clone(), &outcome);
            self.at = bytes.end;
        }
    }

    /// A binary message: the magic stands at the cursor.
    fn binary(&mut self) {
        let start = self.at;
        let context = Context { received: self.calendar.received() };
        let length =
            binary::read_message(&mut self.bufr, self.bytes, start, context, self.listener);
        self.at = (start + length).min(self.bytes.len());
    }
}

/// Whether the text is `NIL`, alone.
fn is_nil(groups: &Groups<'_>) -> bool {
    let mut groups = groups.clone();
    groups.next().is_some_and(|group| group.text.eq_ignore_ascii_case(b"NIL"))
        && groups.next().is_none()
}

/// The bytes of a range as one group.
pub(crate) fn stretch(bytes: &[u8], range: Range<usize>) -> Group<'_> {
    Group { start: range.start, text: bytes.get(range).unwrap_or_default() }
}
