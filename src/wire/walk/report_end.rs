//! Where a report ends.
//!
//! A report ends with `=`. Where none comes before the next mark, each line is a report of its own
//! and indented lines, or lines that begin with a section indicator, continue it. Both searches
//! remember their last answer, so that the whole walk stays linear.

use super::mark::{self, Mark};
use crate::limits::REPORT_BYTES_MAX;
use crate::wire::group::{Groups, is_blank};

/// The next end of report and the next mark, as far as they are known.
#[derive(Debug, Default)]
pub(super) struct Ends {
    /// The next `=` at or after `equals_from`.
    equals: usize,
    equals_from: usize,
    /// The next mark after `mark_from`.
    mark: usize,
    mark_from: usize,
    mark_is: Option<Mark>,
}

impl Ends {
    /// One past the last byte of the report that begins at `start`.
    pub(super) fn report_end(&mut self, bytes: &[u8], start: usize, land: bool) -> usize {
        let mark = self.next_mark(bytes, start);
        let equals = self.next_equals(bytes, start);
        if equals < mark && equals - start <= REPORT_BYTES_MAX {
            return if land { lost_end(bytes, start, equals).unwrap_or(equals) } else { equals };
        }
        let mut end = line_end(bytes, start, mark);
        while end < mark {
            let Some(next) = continuation(bytes, end, mark) else { break };
            let next_end = line_end(bytes, next, mark);
            if next_end - start > REPORT_BYTES_MAX {
                break;
            }
            end = next_end;
        }
        end
    }

    fn next_equals(&mut self, bytes: &[u8], from: usize) -> usize {
        if from < self.equals_from || from > self.equals || self.equals_from == self.equals {
            let rest = bytes.get(from..).unwrap_or_default();
            self.equals =
                rest.iter().position(|&byte| byte == b'=').map_or(bytes.len(), |i| from + i);
            self.equals_from = from;
        }
        self.equals
    }

    /// The next place after `from` where something known begins: a line that starts with a mark,
    /// SOH, ETX, or the magic of a binary message anywhere.
    pub(super) fn next_mark(&mut self, bytes: &[u8], from: usize) -> usize {
        if from >= self.mark_from && from < self.mark {
            return self.mark;
        }
        self.mark_from = from;
        let (at, found) = find_mark(bytes, from);
        self.mark = at;
        self.mark_is = Some(found);
        at
    }

    /// The mark at a place, where the search for the next one has stopped there already.
    pub(super) fn known(&self, at: usize) -> Option<Mark> {
        self.mark_is.filter(|found| at == self.mark && *found != Mark::Text)
    }
}

/// Bytes that are looked at more closely in the midst of a line: line ends, SOH, ETX, and the first
/// letters of the binary messages' magic.
const TELLING: [bool; 256] = {
    let mut table = [false; 256];
    table[b'\n' as usize] = true;
    table[b'\r' as usize] = true;
    table[1] = true;
    table[3] = true;
    table[b'B' as usize] = true;
    table[b'G' as usize] = true;
    table
};

fn find_mark(bytes: &[u8], from: usize) -> (usize, Mark) {
    let mut at = from;
    let mut line_begins = false;
    while let Some(rest) = bytes.get(at..) {
        if line_begins {
            let text = rest.iter().position(|&byte| !is_blank(byte) || is_envelope(byte));
            let Some(blanks) = text else { break };
            at += blanks;
            line_begins = false;
            let found = mark::at(bytes.get(at..).unwrap_or_default());
            if found != Mark::Text {
                return (at, found);
            }
            continue;
        }
        let Some(skipped) = rest.iter().position(|&byte| TELLING[usize::from(byte)]) else { break };
        at += skipped;
        let here = bytes.get(at..).unwrap_or_default();
        match here.first() {
            Some(b'\n' | b'\r') => line_begins = true,
            Some(&byte) if is_envelope(byte) && at > from => return (at, Mark::Text),
            Some(b'B') if at > from && mark::is_bufr(here) => return (at, Mark::Bufr),
            Some(b'G') if at > from && mark::is_grib(here) => return (at, Mark::Grib),
            _ => {}
        }
        at += 1;
    }
    (bytes.len(), Mark::Text)
}

const fn is_envelope(byte: u8) -> bool {
    matches!(byte, 1 | 3)
}

fn line_end(bytes: &[u8], start: usize, limit: usize) -> usize {
    let line = bytes.get(start..limit).unwrap_or_default();
    line.iter().position(|&byte| matches!(byte, b'\n' | b'\r')).map_or(limit, |i| start + i)
}

/// Where the line after the one that ends at `end` begins, if it continues the report.
fn continuation(bytes: &[u8], end: usize, limit: usize) -> Option<usize> {
    let rest = bytes.get(end..limit)?;
    let mut line_ends = 0;
    let mut indented = false;
    let mut text = None;
    for (i, &byte) in rest.iter().enumerate() {
        match byte {
            b'\n' => {
                line_ends += 1;
                indented = false;
            }
            b'\r' => {}
            b' ' | b'\t' => indented = true,
            _ => {
                text = Some(end + i);
                break;
            }
        }
        if line_ends > 1 {
            return None;
        }
    }
    let text = text?;
    let first = Groups::new(bytes, text, limit).next()?.text;
    (indented || matches!(first, b"333" | b"444" | b"555")).then_some(text)
}

/// Where the next land report begins inside one that seems to run up to `end`, because the sign
/// between them was lost: a line that begins with a station number and looks like section 1.
fn lost_end(bytes: &[u8], start: usize, end: usize) -> Option<usize> {
    let text = bytes.get(start..end)?;
    for (i, &byte) in text.iter().enumerate() {
        if byte != b'\n' {
            continue;
        }
        let line = start + i + 1;
        // Indented lines continue a report.
        if bytes.get(line).is_none_or(|&byte| !byte.is_ascii_digit()) {
            continue;
        }
        let mut groups = Groups::new(bytes, line, end);
        let (Some(station), Some(first), Some(wind), Some(next)) =
            (groups.next(), groups.next(), groups.next(), groups.next())
        else {
            continue;
        };
        // iR 0 to 4, ix 1 to 7; dd 00 to 36 or 99 (tables 1819, 1860, 0877).
        let section_1 = station.text.len() == 5
            && station.is_all_figures()
            && first.is_coded(5)
            && matches!(first.figure(0), Some(0..=4))
            && matches!(first.figure(1), Some(1..=7))
            && wind.is_coded(5)
            && matches!(wind.figures(1, 3).value(), Some(0..=36 | 99));
        // The groups of section 1 ascend, so that a continuation seldom looks like this.
        let ascends = station.first() < first.first()
            && first.first() < wind.first()
            && wind.first() < next.first();
        if section_1 && !ascends && matches!(next.figure(0), Some(0..=5)) {
            return Some(line);
        }
    }
    None
}
