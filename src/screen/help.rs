//! The help: keys for here, keys for everywhere, and the cautions.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::theme::Role;
use super::{Look, text};
use crate::desk::{Desk, keys};

enum Line {
    Head(String),
    Words(String),
}

/// Draws the help over the whole screen but the bottom line, from a line on.
pub(super) fn draw(desk: &Desk, look: &Look, from: usize, area: Rect, buf: &mut Buffer) {
    let area = Rect { height: area.height.saturating_sub(1), ..area };
    text::fill(buf, area, look.style(Role::Text));
    let width = usize::from(area.width.saturating_sub(2));
    let (list, own) = keys::here(desk.focus);
    let mut lines = vec![Line::Head(format!("Keys here: {}", desk.focus.word()))];
    let key_lines = |lines: &mut Vec<Line>, keys: keys::Keys| {
        for (key, what) in keys {
            let broken = text::lines(what, width.saturating_sub(12).max(8));
            for (k, piece) in broken.into_iter().enumerate() {
                if k == 0 {
                    lines.push(Line::Words(format!("{key:<11} {piece}")));
                } else {
                    lines.push(Line::Words(format!("{:<11} {piece}", "")));
                }
            }
        }
    };
    key_lines(&mut lines, own);
    key_lines(&mut lines, list);
    lines.push(Line::Head("Keys everywhere".to_owned()));
    key_lines(&mut lines, keys::EVERYWHERE);
    lines.push(Line::Head("Mind".to_owned()));
    let cautions = keys::CAUTIONS.join(" ");
    lines.extend(text::lines(&cautions, width).into_iter().map(Line::Words));
    let height = usize::from(area.height.saturating_sub(1));
    let from = from.min(lines.len().saturating_sub(height));
    let title = Rect { height: 1, ..area };
    text::fill(buf, title, look.style(Role::Front));
    let more = if lines.len() > from + height { ", more below (j)" } else { "" };
    let words = format!(
        " Help, lines {} to {} of {}{more}",
        from + 1,
        (from + height).min(lines.len()),
        lines.len()
    );
    text::put(buf, area.x, area.y, area.width, &words, look.style(Role::Front));
    for (y, line) in (area.y + 1..area.bottom()).zip(lines.iter().skip(from)) {
        let x = area.x + 1;
        let room = area.width.saturating_sub(1);
        match line {
            Line::Head(text) => {
                text::put(buf, x, y, room, text, look.style(Role::Title));
            }
            Line::Words(text) => {
                text::put(buf, x, y, room, text, look.style(Role::Text));
            }
        }
    }
}
