//! When a file was received: from its name, or from its time of modification.

use crate::instant::Instant;

/// The time in a file's name, where the name follows the general file naming convention of
/// WMO-No. 386 (Attachment II-15): `..._C_CCCC_yyyyMMddhhmmss...`.
pub fn from_name(name: &str) -> Option<Instant> {
    let mut fields = name.split(['_', '.']).skip_while(|field| *field != "C").skip(1);
    let centre = fields.next()?;
    if centre.len() != 4 || !centre.bytes().all(|byte| byte.is_ascii_alphanumeric()) {
        return None;
    }
    let digits = fields.next()?;
    if digits.len() < 14 || !digits.bytes().all(|byte| byte.is_ascii_digit()) {
        return None;
    }
    let part = |range: std::ops::Range<usize>| digits.get(range)?.parse::<u32>().ok();
    let year = i32::try_from(part(0..4)?).ok()?;
    let time = Instant::from_calendar(year, part(4..6)?, part(6..8)?, part(8..10)?, part(10..12)?)?;
    Some(time.plus_s(i64::from(part(12..14)?.min(59))))
}

/// When a file counts as received: its name's time, else its modification; never after `limit`,
/// where there is one.
pub fn received(name: &str, modified: Instant, limit: Option<Instant>) -> Instant {
    let received = from_name(name).unwrap_or(modified);
    limit.map_or(received, |limit| received.min(limit))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_time_of_receipt_stands_in_a_name_of_the_convention() {
        let time = |text: &str| Instant::parse(text);
        assert_eq!(
            from_name("A_SMUK01EGRR151200_C_EGRR_20260115120500.txt.gz"),
            time("2026-01-15T12:05:00Z")
        );
        assert_eq!(
            from_name("Z__C_EDZW_20210516120400_bda01,synop_bufr_GER.bufr"),
            time("2021-05-16T12:04:00Z")
        );
        for name in ["report.txt", "A_C_EGRR_2026.txt", "x_C_EGRR_20261315120000", "_C_", "C"] {
            assert_eq!(from_name(name), None, "{name}");
        }
    }

    #[test]
    fn a_given_time_bounds_the_receipt() {
        let (early, late) = (Instant::from_unix_s(1000), Instant::from_unix_s(5000));
        assert_eq!(received("a.txt", late, None), late);
        assert_eq!(received("a.txt", late, Some(early)), early);
        assert_eq!(received("a.txt", early, Some(late)), early);
    }
}
