//! What was not understood, where, and by which rule.

use std::ops::Range;

use serde::{Deserialize, Serialize};

/// One complaint about one piece of a file. The rest of the report or file survives.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
pub struct Complaint {
    /// First byte of the piece, in the expanded file.
    pub start: usize,
    /// One past its last byte.
    pub end: usize,
    /// Station of the report it stands in, where known; else empty.
    pub station: String,
    /// The group or element, made printable (control characters escaped), at most 40 characters.
    pub group: String,
    /// The rule, e.g. `FM 12 section 1, group 3: four digits`.
    pub rule: String,
    /// What was found and what became of it, one line.
    pub message: String,
    /// Whether the whole report was lost, or only this group of it.
    pub report_lost: bool,
}

impl Complaint {
    /// The bytes complained about.
    pub const fn bytes(&self) -> Range<usize> {
        self.start..self.end
    }
}

/// Text from outside made safe to show: control and non-ASCII bytes escaped, cut with a mark.
pub fn printable(bytes: &[u8], characters_max: usize) -> String {
    let mut out = String::with_capacity(bytes.len().min(characters_max) + 1);
    for &byte in bytes {
        if matches!(byte, b' '..=b'~') && out.len() < characters_max {
            out.push(char::from(byte));
            continue;
        }
        let piece = match byte {
            b' '..=b'~' => char::from(byte).to_string(),
            b'\n' => "\\n".to_owned(),
            b'\r' => "\\r".to_owned(),
            b'\t' => "\\t".to_owned(),
            _ => format!("\\x{byte:02x}"),
        };
        if out.len() + piece.len() > characters_max {
            out.push('~');
            break;
        }
        out.push_str(&piece);
    }
    out
}
