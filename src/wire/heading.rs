//! The abbreviated heading of a bulletin and the envelopes about it (METHODS COD-1).

use crate::report::Revision;
use crate::wire::group::is_blank;

/// What an abbreviated heading says.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct Heading {
    /// Data designator T1T2, a hint to the form.
    pub designator: [u8; 2],
    /// Day of the month, hour, minute.
    pub day_hour_minute: (u32, u32, u32),
    /// What the indicator BBB makes of the reports below.
    pub revision: Revision,
    /// Length in bytes, to the end of the line.
    pub length: usize,
}

impl Heading {
    /// What it says, in words.
    pub(crate) fn words(&self) -> String {
        let (day, hour, minute) = self.day_hour_minute;
        let revision = match self.revision {
            Revision::Original => String::new(),
            Revision::Correction(number) => format!(", correction {number}"),
        };
        format!("heading, day {day:02} at {hour:02}:{minute:02} UTC{revision}")
    }
}

/// Longest heading line, bytes; real ones have at most 22 and a few blanks.
pub(crate) const HEADING_BYTES_MAX: usize = 64;

/// An abbreviated heading `TTAAii CCCC YYGGgg [BBB]` that fills the line at the start of `text`.
pub(crate) fn heading(text: &[u8]) -> Option<Heading> {
    // Cheap refusal first: this is asked of every line.
    if !text.first()?.is_ascii_uppercase() || !text.get(3)?.is_ascii_uppercase() {
        return None;
    }
    // Bounded, so that many marks in one endless line cost no more than many lines.
    let length = line_length(text.get(..HEADING_BYTES_MAX).unwrap_or(text));
    if length >= HEADING_BYTES_MAX {
        return None;
    }
    let mut words =
        text.get(..length)?.split(|&byte| is_blank(byte)).filter(|word| !word.is_empty());
    let (ttaaii, cccc, time) = (words.next()?, words.next()?, words.next()?);
    let indicator = words.next();
    let [t1, t2, a1, a2, number @ ..] = ttaaii else { return None };
    let letters = [t1, t2, a1, a2].into_iter().all(u8::is_ascii_uppercase);
    let numbered = matches!(number.len(), 1 | 2) && number.iter().all(u8::is_ascii_digit);
    let centre = cccc.len() == 4
        && cccc.first()?.is_ascii_uppercase()
        && cccc.iter().all(|byte| byte.is_ascii_uppercase() || byte.is_ascii_digit());
    if !letters || !numbered || !centre || words.next().is_some() {
        return None;
    }
    let &[y1, y2, h1, h2, m1, m2] = time else { return None };
    let pair = |tens: u8, units: u8| {
        (tens.is_ascii_digit() && units.is_ascii_digit())
            .then(|| u32::from(tens - b'0') * 10 + u32::from(units - b'0'))
    };
    Some(Heading {
        designator: [*t1, *t2],
        day_hour_minute: (pair(y1, y2)?, pair(h1, h2)?, pair(m1, m2)?),
        revision: match indicator {
            None => Revision::Original,
            Some(indicator) => revision(indicator)?,
        },
        length,
    })
}

/// BBB: RRx delayed, CCx correction, AAx amendment, Pxx segment (WMO-No. 386, Part II).
fn revision(indicator: &[u8]) -> Option<Revision> {
    match indicator {
        [b'C', b'C', x @ b'A'..=b'Z'] | [b'A', b'A', x @ b'A'..=b'Z'] => {
            Some(Revision::Correction(x - b'A' + 1))
        }
        // Some centres write the bare word.
        b"COR" => Some(Revision::Correction(1)),
        [b'A'..=b'Z', b'A'..=b'Z', b'A'..=b'Z'] => Some(Revision::Original),
        _ => None,
    }
}

/// Bytes before the end of the line, without the line end itself.
pub(crate) fn line_length(text: &[u8]) -> usize {
    text.iter().position(|&byte| matches!(byte, b'\n' | b'\r' | 3)).unwrap_or(text.len())
}

/// The length of a file frame at the start of `text`: eight figures of length and a format
/// identifier 00 or 01 before each bulletin (WMO-No. 386, attachment II-15).
pub(crate) fn frame(text: &[u8]) -> Option<usize> {
    let frame = text.get(..10)?;
    (frame.iter().all(u8::is_ascii_digit)
        && frame.get(8) == Some(&b'0')
        && matches!(frame.get(9), Some(b'0' | b'1'))
        && matches!(text.get(10), None | Some(1 | b'\r' | b'\n' | b'A'..=b'Z')))
    .then_some(10)
}

/// The length of a channel sequence number alone in its line, as it follows SOH: three or five
/// figures.
pub(crate) fn sequence_number(text: &[u8]) -> Option<usize> {
    let text = text.get(..HEADING_BYTES_MAX).unwrap_or(text);
    let line = text.get(..line_length(text))?;
    let figures = line.iter().take_while(|byte| byte.is_ascii_digit()).count();
    let rest = line.get(figures..)?;
    ((3..=5).contains(&figures) && rest.iter().all(|&byte| is_blank(byte))).then_some(figures)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reads_headings_with_and_without_an_indicator() {
        let plain = heading(b"SMUK01 EGRR 151200\r\r\nAAXX").expect("a heading");
        assert_eq!(plain.designator, *b"SM");
        assert_eq!(plain.day_hour_minute, (15, 12, 0));
        assert_eq!((plain.revision, plain.length), (Revision::Original, 18));
        let of = |text: &[u8]| heading(text).expect("a heading").revision;
        assert_eq!(of(b"SMUK01 EGRR 151200 RRA"), Revision::Original);
        assert_eq!(of(b"SMUK01 EGRR 151200 CCB "), Revision::Correction(2));
        assert_eq!(of(b"SMUK01 EGRR 151200 AAA"), Revision::Correction(1));
        assert_eq!(of(b"SMUK01 EGRR 151200 PAB"), Revision::Original);
    }

    #[test]
    fn reports_are_not_headings() {
        for text in
            ["METAR EGLL 151220Z", "EGLL 151220Z 24012KT", "SMUK01 EGRR 15120/", "SMUK01", ""]
        {
            assert_eq!(heading(text.as_bytes()), None, "{text}");
        }
    }

    #[test]
    fn reads_frames_and_sequence_numbers() {
        assert_eq!(frame(b"0000013400\x01\r\r\n"), Some(10));
        assert_eq!(frame(b"0000013401\r\r\nSM"), Some(10));
        assert_eq!(frame(b"0000013402\r\r\nSM"), None);
        assert_eq!(sequence_number(b"123 \r\r\nSM"), Some(3));
        assert_eq!(sequence_number(b"12345\r\r\nSM"), Some(5));
        assert_eq!(sequence_number(b"03772 41480"), None);
    }
}
