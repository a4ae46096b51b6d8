//! The 3-hour change in the trade's words (METHODS TEN-4: the usual words of coastal station
//! reports).

use super::characteristic::tenths;

/// Changes, tenths of a hPa in 3 hours, up to which each word holds.
const SLOWLY: u32 = 15;
const PLAIN: u32 = 35;
const QUICKLY: u32 = 60;

/// The change over the last 3 hours in words, e.g. `falling quickly, more slowly`.
///
/// Compared in tenths: 1.5 is slowly, 1.6 is plain. The characteristic adds how it came about: `more
/// slowly` for 1 and 6, `now rising` and `now falling` where the trace turned (0, 3, 5, 8; the link
/// to the characteristic is an own rule).
pub fn of_change(change_3h_hpa: f64, characteristic: Option<u8>) -> String {
    let change = tenths(change_3h_hpa);
    let direction = if change > 0 { "rising" } else { "falling" };
    let rate = match change.unsigned_abs() {
        0 => None,
        1..=SLOWLY => Some(" slowly"),
        size if size <= PLAIN => Some(""),
        size if size <= QUICKLY => Some(" quickly"),
        _ => Some(" very rapidly"),
    };
    let plain = rate.map_or_else(|| "steady".to_owned(), |rate| format!("{direction}{rate}"));
    match (characteristic, change.signum()) {
        (Some(0), 0..) => format!("{plain}, now falling"),
        (Some(5), ..=0) => format!("{plain}, now rising"),
        (Some(1), 1) | (Some(6), -1) => format!("{plain}, more slowly"),
        (Some(3), 1) | (Some(8), -1) => format!("now {plain}"),
        _ => plain,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// METHODS CHK-086.
    #[test]
    fn the_words_change_at_the_tenths_of_the_trade() {
        for (change, words) in [
            (0.0, "steady"),
            (0.04, "steady"),
            (-0.1, "falling slowly"),
            (-1.5, "falling slowly"),
            (-1.6, "falling"),
            (-3.5, "falling"),
            (-3.6, "falling quickly"),
            (-6.0, "falling quickly"),
            (-6.1, "falling very rapidly"),
            (2.0, "rising"),
        ] {
            assert_eq!(of_change(change, None), words, "{change}");
        }
    }

    #[test]
    fn the_characteristic_says_how_it_came_about() {
        assert_eq!(of_change(-4.0, Some(6)), "falling quickly, more slowly");
        assert_eq!(of_change(-4.0, Some(8)), "now falling quickly");
        assert_eq!(of_change(-0.5, Some(5)), "falling slowly, now rising");
        assert_eq!(of_change(0.0, Some(0)), "steady, now falling");
        // A characteristic that contradicts the change adds nothing.
        assert_eq!(of_change(-4.0, Some(1)), "falling quickly");
    }
}
