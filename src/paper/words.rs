//! Small pieces of text that brief and exports share.

use crate::quantity::{kt_from_m_s, whole_nearest};
use crate::systems::Measured;
use crate::winds::Wind;

pub use crate::alert::place_words;

/// Where a wind blows from in whole degrees, 1 to 360; 0 is kept for calm (METHODS WND-13).
pub fn from_whole_deg(wind: Wind) -> i64 {
    if wind.speed_m_s == 0.0 {
        return 0;
    }
    let from_deg = whole_nearest(wind.from_deg).rem_euclid(360);
    if from_deg == 0 { 360 } else { from_deg }
}

/// `270/34 kt`, or `calm`.
pub fn wind_words(wind: Wind) -> String {
    let speed_kt = kt_from_m_s(wind.speed_m_s);
    if speed_kt < 0.5 {
        return "calm".to_owned();
    }
    format!("{:03}/{speed_kt:.0} kt", from_whole_deg(wind))
}

/// Printable ASCII: everything else, control characters above all, becomes `?`.
pub fn plain(text: &str) -> String {
    text.chars().map(|c| if c == ' ' || c.is_ascii_graphic() { c } else { '?' }).collect()
}

/// `+1.4` or `-` where unknown.
pub fn signed(value: Option<f64>, decimals: usize) -> String {
    value.map_or_else(|| "-".to_owned(), |value| format!("{:+.decimals$}", clean(value, decimals)))
}

/// `-3.4 +- 0.6`, or `-` where unknown.
pub fn measured(value: Option<Measured>, decimals: usize) -> String {
    value.map_or_else(
        || "-".to_owned(),
        |value| {
            format!(
                "{:+.decimals$} +- {:.decimals$}",
                clean(value.value, decimals),
                value.error_shown(decimals)
            )
        },
    )
}

/// No minus before a value that is shown as nought.
pub fn clean(value: f64, decimals: usize) -> f64 {
    let scale = 10_f64.powi(i32::try_from(decimals).unwrap_or(0));
    let rounded = (value * scale).round() / scale;
    if rounded == 0.0 { 0.0 } else { rounded }
}

/// Text in lines of at most `width` characters, the later ones indented.
pub fn wrapped(text: &str, width: usize, indent: usize) -> Vec<String> {
    let mut lines = Vec::new();
    // The first line keeps the indentation that it came with.
    let lead = text.len() - text.trim_start().len();
    let mut line = " ".repeat(lead);
    for word in text.split_whitespace() {
        let begins = line.trim().is_empty();
        if !begins && line.len() + 1 + word.len() > width {
            lines.push(std::mem::replace(&mut line, " ".repeat(indent)));
        }
        if !line.trim().is_empty() {
            line.push(' ');
        }
        line.push_str(word);
    }
    if !line.trim().is_empty() {
        lines.push(line);
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_keep_their_width_and_indentation() {
        let lines = wrapped("  one two three four", 9, 4);
        assert_eq!(lines, ["  one two", "    three", "    four"]);
        assert!(wrapped("", 10, 0).is_empty());
    }

    #[test]
    fn no_minus_stands_before_nought() {
        assert_eq!(signed(Some(-0.04), 1), "+0.0");
        assert_eq!(signed(Some(-0.06), 1), "-0.1");
        assert_eq!(signed(None, 1), "-");
        assert_eq!(place_words(crate::sphere::Position::clamped(-4.25, 179.96)), "04.2S 180.0E");
    }

    /// Common practice, no source: north is 360, and 0 means calm.
    #[test]
    fn a_northerly_is_360_and_only_calm_is_0() {
        let words = |from_deg, speed_m_s| wind_words(Wind { from_deg, speed_m_s });
        assert_eq!(words(0.3, 10.0), "360/19 kt");
        assert_eq!(words(359.6, 10.0), "360/19 kt");
        assert_eq!(words(0.6, 10.0), "001/19 kt");
        assert_eq!(words(0.0, 0.0), "calm");
        assert_eq!(from_whole_deg(Wind { from_deg: 0.2, speed_m_s: 0.1 }), 360);
    }

    #[test]
    fn text_from_outside_cannot_drive_a_terminal() {
        assert_eq!(plain("Cape \u{1b}[31m\u{e9}\n"), "Cape ?[31m??");
    }
}
