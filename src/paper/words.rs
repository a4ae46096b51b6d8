//! Small pieces of text that brief and exports share.

use crate::systems::Measured;

pub use crate::alert::place_words;

/// `+1.4` or `-` where unknown.
pub fn signed(value: Option<f64>, decimals: usize) -> String {
    value.map_or_else(|| "-".to_owned(), |value| format!("{:+.decimals$}", clean(value, decimals)))
}

/// `-3.4 +- 0.6`, or `-` where unknown.
pub fn measured(value: Option<Measured>, decimals: usize) -> String {
    value.map_or_else(
        || "-".to_owned(),
        |value| {
            format!("{:+.decimals$} +- {:.decimals$}", clean(value.value, decimals), value.error)
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
}
