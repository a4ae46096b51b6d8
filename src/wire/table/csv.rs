//! Fields of a line of comma-separated values (RFC 4180, except that a line end ends the record
//! even between quotes, so that one bad quote costs one line).

use std::borrow::Cow;
use std::ops::Range;

/// One field.
#[derive(Debug)]
pub(super) struct Field<'a> {
    /// Its text, trimmed, quotes taken off.
    pub text: Cow<'a, [u8]>,
    /// Where it stands in the line, with its quotes.
    pub at: Range<usize>,
}

/// The fields of a line.
pub(super) fn fields(line: &[u8]) -> Fields<'_> {
    Fields { line, at: Some(0) }
}

/// Iterator over the fields of a line.
#[derive(Debug)]
pub(super) struct Fields<'a> {
    line: &'a [u8],
    at: Option<usize>,
}

impl<'a> Iterator for Fields<'a> {
    type Item = Field<'a>;

    fn next(&mut self) -> Option<Field<'a>> {
        let start = self.at?;
        let rest = self.line.get(start..)?;
        let mut quoted = false;
        let length = rest
            .iter()
            .position(|&byte| {
                if byte == b'"' {
                    quoted = !quoted;
                }
                byte == b',' && !quoted
            })
            .unwrap_or(rest.len());
        let raw = rest.get(..length)?;
        self.at = (length < rest.len()).then_some(start + length + 1);
        let lead = raw.iter().take_while(|byte| byte.is_ascii_whitespace()).count();
        let trimmed = raw.trim_ascii();
        let at = start + lead..start + lead + trimmed.len();
        Some(Field { text: unquoted(trimmed), at })
    }
}

fn unquoted(text: &[u8]) -> Cow<'_, [u8]> {
    let Some(inner) = text.strip_prefix(b"\"") else { return Cow::Borrowed(text) };
    let inner = inner.strip_suffix(b"\"").unwrap_or(inner);
    if !inner.contains(&b'"') {
        return Cow::Borrowed(inner.trim_ascii());
    }
    // A doubled quote is a quote.
    let mut out = Vec::with_capacity(inner.len());
    let mut skip = false;
    for &byte in inner {
        if byte == b'"' && !skip {
            skip = true;
            continue;
        }
        skip = false;
        out.push(byte);
    }
    Cow::Owned(out)
}
