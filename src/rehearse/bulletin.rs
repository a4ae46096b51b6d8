//! Reports gathered into bulletins with abbreviated headings (WMO-No. 386, Part II), and the names
//! of the files they travel in (Attachment II-15).

use std::fmt::Write;

use super::form::day_hour_minute;
use crate::instant::Instant;

/// Longest line of a bulletin, characters: that of a teleprinter.
const LINE_MAX: usize = 69;

/// One bulletin.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Bulletin {
    /// TTAAii.
    pub(super) heading: String,
    /// CCCC.
    pub(super) centre: String,
    /// The standard time of observation: YYGGgg.
    pub(super) time: Instant,
    /// BBB.
    pub(super) revision: Option<String>,
    /// A line that opens the text, such as AAXX YYGGiw.
    pub(super) opening: Option<String>,
    /// The reports, each with its closing sign.
    pub(super) reports: Vec<String>,
}

/// How a bulletin is wrapped.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Wrapping {
    /// Lines end in LF; nothing around it.
    Plain,
    /// Lines end in CR CR LF; nothing around it.
    Teleprinter,
    /// SOH, a sequence number, CR CR LF, and ETX at the end (International Alphabet No. 5).
    Enveloped(u32),
    /// ZCZC and a sequence number, and NNNN at the end (International Alphabet No. 2).
    Signals(u32),
}

impl Bulletin {
    fn day_time(&self) -> String {
        let (day, hour, minute) = day_hour_minute(self.time);
        day + &hour + &minute
    }

    /// The abbreviated heading: `SMUK01 QGKN 151200 RRA`.
    pub(super) fn heading_line(&self) -> String {
        let mut line = format!("{} {} {}", self.heading, self.centre, self.day_time());
        if let Some(revision) = &self.revision {
            line.push(' ');
            line.push_str(revision);
        }
        line
    }

    /// Name of a file received at a time whose first bulletin this is, without its ending:
    /// `A_SMUK01QGKN151200RRA_C_QGKN_20260115120500`.
    pub(super) fn file_name(&self, received: Instant) -> String {
        let centre = &self.centre;
        let revision = self.revision.as_deref().unwrap_or("");
        let product = format!("{}{centre}{}{revision}", self.heading, self.day_time());
        format!("A_{product}_C_{centre}_{}", stamp(received))
    }

    /// The bulletin as it is sent.
    pub(super) fn text(&self, wrapping: Wrapping) -> String {
        let end = if wrapping == Wrapping::Plain { "\n" } else { "\r\r\n" };
        let mut text = String::new();
        if let Wrapping::Enveloped(number) = wrapping {
            // Writing to a string cannot fail.
            let _ = write!(text, "\u{1}{end}{:03}{end}", number % 1000);
        }
        if let Wrapping::Signals(number) = wrapping {
            let _ = write!(text, "ZCZC {:03}{end}", number % 1000);
        }
        text.push_str(&self.heading_line());
        text.push_str(end);
        for report in self.opening.iter().chain(&self.reports) {
            let mut column = 0;
            for word in report.split(' ') {
                if column > 0 && column + 1 + word.len() > LINE_MAX {
                    text.push_str(end);
                    column = 0;
                }
                if column > 0 {
                    text.push(' ');
                    column += 1;
                }
                text.push_str(word);
                column += word.len();
            }
            text.push_str(end);
        }
        match wrapping {
            Wrapping::Enveloped(_) => text.push('\u{3}'),
            Wrapping::Signals(_) => text.push_str("\n\n\nNNNN"),
            Wrapping::Plain | Wrapping::Teleprinter => {}
        }
        text.push_str(end);
        text
    }
}

/// Date and time to the second, fourteen figures.
pub(super) fn stamp(time: Instant) -> String {
    time.calendar().map_or_else(String::new, |time| time.format("%Y%m%d%H%M%S").to_string())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_bulletin_has_its_heading_lines_and_name() {
        let time = Instant::from_calendar(2026, 1, 15, 12, 0).expect("a time");
        let bulletin = Bulletin {
            heading: "SMUK01".to_owned(),
            centre: "QGKN".to_owned(),
            time,
            revision: Some("RRA".to_owned()),
            opening: Some("AAXX 15124".to_owned()),
            reports: vec!["03772 NIL=".to_owned()],
        };
        assert_eq!(
            bulletin.text(Wrapping::Enveloped(7)),
            "\u{1}\r\r\n007\r\r\nSMUK01 QGKN 151200 RRA\r\r\nAAXX 15124\r\r\n03772 NIL=\r\r\n\u{3}\r\r\n"
        );
        assert_eq!(
            bulletin.file_name(time.plus_s(300)),
            "A_SMUK01QGKN151200RRA_C_QGKN_20260115120500"
        );
    }
}
