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
    let mut line = String::new();
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
