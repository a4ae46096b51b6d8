//! Text into cells: cut with a mark, made safe, never outside.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Style;
use unicode_width::UnicodeWidthChar;

/// The mark at the end of a text that was cut.
pub(super) const CUT: char = '~';

/// Where a text stands in its field.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Align {
    Left,
    Right,
}

/// A text from outside made safe: what is not a glyph of one cell is escaped, so that nothing of a
/// report can drive the terminal or shift a column.
pub(super) fn safe(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        if c.is_control() || UnicodeWidthChar::width(c) != Some(1) || direction_mark(c) {
            out.extend(c.escape_unicode());
        } else {
            out.push(c);
        }
    }
    out
}

/// Marks that turn the direction of text round.
fn direction_mark(c: char) -> bool {
    matches!(c, '\u{200e}' | '\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}')
}

/// A text of at most `width` cells, cut with a mark.
pub(super) fn fit(text: &str, width: usize) -> String {
    let text = safe(text);
    if text.chars().count() <= width {
        return text;
    }
    let mut out: String = text.chars().take(width.saturating_sub(1)).collect();
    if width > 0 {
        out.push(CUT);
    }
    out
}

/// Writes a text into at most `width` cells from a place; returns the cells used.
pub(super) fn put(buf: &mut Buffer, x: u16, y: u16, width: u16, text: &str, style: Style) -> u16 {
    let room = buf.area.right().saturating_sub(x).min(width);
    if y < buf.area.top() || y >= buf.area.bottom() || x < buf.area.left() {
        return 0;
    }
    let mut used = 0;
    for c in fit(text, usize::from(room)).chars() {
        let cell = &mut buf[(x + used, y)];
        cell.set_char(c);
        cell.set_style(style);
        used += 1;
    }
    used
}

/// Writes a text into a field of `width` cells, padded, left or right.
pub(super) fn field(
    buf: &mut Buffer,
    x: u16,
    y: u16,
    width: u16,
    text: &str,
    align: Align,
    style: Style,
) {
    let text = fit(text, usize::from(width));
    let used = u16::try_from(text.chars().count()).unwrap_or(width);
    let start = match align {
        Align::Left => x,
        Align::Right => x + width.saturating_sub(used),
    };
    put(buf, start, y, used, &text, style);
}

/// Fills a row with a style and blanks.
pub(super) fn fill(buf: &mut Buffer, area: Rect, style: Style) {
    let area = area.intersection(buf.area);
    for y in area.top()..area.bottom() {
        for x in area.left()..area.right() {
            let cell = &mut buf[(x, y)];
            cell.set_char(' ');
            cell.set_style(style);
        }
    }
}

/// Writes one line into the middle of an area.
pub(super) fn centred(buf: &mut Buffer, area: Rect, text: &str, style: Style) {
    if area.is_empty() {
        return;
    }
    let text = fit(text, usize::from(area.width));
    let used = u16::try_from(text.chars().count()).unwrap_or(area.width);
    let x = area.x + (area.width - used.min(area.width)) / 2;
    put(buf, x, area.y + area.height / 2, used, &text, style);
}

/// Breaks a text into lines of at most `width` cells at blanks; a longer word is cut with a mark.
pub(super) fn lines(text: &str, width: usize) -> Vec<String> {
    let mut out = Vec::new();
    let mut line = String::new();
    for word in safe(text).split_whitespace() {
        let have = line.chars().count();
        if have > 0 && have + 1 + word.chars().count() > width {
            out.push(std::mem::take(&mut line));
        }
        if !line.is_empty() {
            line.push(' ');
        }
        line.push_str(&fit(word, width));
    }
    if !line.is_empty() {
        out.push(line);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_text_is_cut_with_a_mark_and_controls_are_escaped() {
        assert_eq!(fit("barometer", 9), "barometer");
        assert_eq!(fit("barometer", 5), "baro~");
        assert_eq!(fit("barometer", 0), "");
        assert_eq!(safe("a\u{1b}[2Jb"), "a\\u{1b}[2Jb");
        // Two cells wide, no cell wide, and turning the line round.
        assert_eq!(safe("\u{6f22}\u{301}\u{202e}"), "\\u{6f22}\\u{301}\\u{202e}");
        assert_eq!(safe("Skagen fyr, Læsø"), "Skagen fyr, Læsø");
    }

    #[test]
    fn lines_break_at_blanks() {
        assert_eq!(lines("fresh to strong north-westerly", 9), ["fresh to", "strong", "north-we~"]);
    }
}
