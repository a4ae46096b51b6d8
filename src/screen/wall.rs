//! The wall: read from across a room, with nobody at the keys.
//!
//! The figures that matter stand in blocks five rows high or more: the deepest low, its rate, the
//! age of the feed. Beside them, by the minute, the chart, the systems and the alerts take turns;
//! an urgent alert that nobody has acknowledged takes every other turn. The whole is set off by a
//! cell now and then, so that nothing burns in.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::number;
use super::theme::Role;
use super::{Glyphs, Scene, draw_pane, strip, text};
use crate::alert::Urgency;
use crate::desk::Pane;
use crate::systems::Kind;

/// Rows and columns of a figure's pixels.
const FIGURE_ROWS: u16 = 5;
const FIGURE_COLUMNS: u16 = 3;

/// Figures of three by five pixels, a row in three bits, the upper first.
const fn figure(c: char) -> [u8; 5] {
    match c {
        '0' => [0b111, 0b101, 0b101, 0b101, 0b111],
        '1' => [0b010, 0b110, 0b010, 0b010, 0b111],
        '2' => [0b111, 0b001, 0b111, 0b100, 0b111],
        '3' => [0b111, 0b001, 0b111, 0b001, 0b111],
        '4' => [0b101, 0b101, 0b111, 0b001, 0b001],
        '5' => [0b111, 0b100, 0b111, 0b001, 0b111],
        '6' => [0b111, 0b100, 0b111, 0b101, 0b111],
        '7' => [0b111, 0b001, 0b010, 0b010, 0b010],
        '8' => [0b111, 0b101, 0b111, 0b101, 0b111],
        '9' => [0b111, 0b101, 0b111, 0b001, 0b111],
        '-' => [0b000, 0b000, 0b111, 0b000, 0b000],
        '+' => [0b000, 0b010, 0b111, 0b010, 0b000],
        '.' => [0b000, 0b000, 0b000, 0b000, 0b010],
        ':' => [0b000, 0b010, 0b000, 0b010, 0b000],
        '?' => [0b111, 0b001, 0b010, 0b000, 0b010],
        'd' => [0b001, 0b001, 0b111, 0b101, 0b111],
        'h' => [0b100, 0b100, 0b111, 0b101, 0b101],
        'm' => [0b000, 0b000, 0b111, 0b111, 0b101],
        _ => [0; 5],
    }
}

/// Cells that a text of figures takes in width at a scale: pixels are two cells wide.
fn wide(text: &str, scale: u16) -> u16 {
    let count = u16::try_from(text.chars().count()).unwrap_or(0);
    (count * (FIGURE_COLUMNS + 1)).saturating_sub(1) * 2 * scale
}

/// Draws a text in figures as large as fits; says how many rows it took, none where it did not fit.
fn figures(scene: Scene<'_>, text: &str, role: Role, area: Rect, buf: &mut Buffer) -> u16 {
    let largest = (1..=4_u16)
        .rev()
        .find(|scale| wide(text, *scale) <= area.width && FIGURE_ROWS * scale <= area.height);
    let Some(scale) = largest else { return 0 };
    let style = scene.look.style(role);
    let block = style.add_modifier(ratatui::style::Modifier::REVERSED);
    let mut left = area.x;
    for c in text.chars() {
        for (row, bits) in (0..FIGURE_ROWS).zip(figure(c)) {
            for column in 0..FIGURE_COLUMNS {
                if bits & (0b100 >> column) == 0 {
                    continue;
                }
                let pixel = Rect {
                    x: left + column * 2 * scale,
                    y: area.y + row * scale,
                    width: 2 * scale,
                    height: scale,
                };
                let pixel = pixel.intersection(area);
                for y in pixel.top()..pixel.bottom() {
                    for x in pixel.left()..pixel.right() {
                        let Some(cell) = buf.cell_mut((x, y)) else { continue };
                        // Not by attribute alone: plain terminals get a glyph.
                        if scene.look.glyphs == Glyphs::Ascii {
                            cell.set_char('#').set_style(style);
                        } else {
                            cell.set_char(' ').set_style(block);
                        }
                    }
                }
            }
        }
        left = left.saturating_add((FIGURE_COLUMNS + 1) * 2 * scale);
    }
    FIGURE_ROWS * scale
}

/// What takes its turn beside the figures.
fn turn(scene: Scene<'_>) -> Pane {
    let now = scene.desk.now.unwrap_or(scene.picture.now);
    let minute = now.unix_s().div_euclid(60);
    let urgent = scene
        .picture
        .alerts
        .iter()
        .any(|alert| alert.urgency == Urgency::Urgent && !alert.acknowledged);
    if urgent && minute.rem_euclid(2) == 0 {
        return Pane::Alerts;
    }
    match minute.div_euclid(if urgent { 2 } else { 1 }).rem_euclid(4) {
        1 => Pane::Systems,
        3 => Pane::Tendencies,
        _ => Pane::Chart,
    }
}

/// Draws the wall's screen.
pub(super) fn draw(scene: Scene<'_>, area: Rect, buf: &mut Buffer) {
    let now = scene.desk.now.unwrap_or(scene.picture.now);
    // Off by a cell every quarter of an hour, round and round.
    let quarter = now.unix_s().div_euclid(900).rem_euclid(4);
    let area = Rect {
        x: area.x + u16::from(quarter == 1 || quarter == 2),
        y: area.y + u16::from(quarter >= 2),
        width: area.width.saturating_sub(1),
        height: area.height.saturating_sub(1),
    };
    let strip_rows = 2.min(area.height);
    strip::summary(buf, Rect { height: strip_rows, ..area }, scene);
    let body =
        Rect { y: area.y + strip_rows, height: area.height.saturating_sub(strip_rows), ..area };
    let roomy = body.width >= 120 && body.height >= 26;
    let numbers = if roomy {
        let chosen = turn(scene);
        let left = Rect { width: body.width * 3 / 5, ..body };
        let mut desk = scene.desk.clone();
        desk.focus = chosen;
        draw_pane(Scene { desk: &desk, ..scene }, chosen, left, buf);
        Rect { x: left.right() + 2, width: body.width - left.width - 2, ..body }
    } else {
        body
    };
    column(scene, numbers, buf);
}

/// The figures, one below the other.
fn column(scene: Scene<'_>, area: Rect, buf: &mut Buffer) {
    let low = scene.picture.systems.iter().find(|system| system.kind == Kind::Low);
    let stale = strip::stale(scene);
    let age = strip::feed_age_minutes(scene.picture, scene.desk);
    let mut parts: Vec<(String, String, Role)> = Vec::new();
    let feed = match age {
        None => ("NO FEED".to_owned(), "?".to_owned(), Role::Stale),
        Some(age) => (
            if stale { "FEED STALE, age" } else { "age of the newest file" }.to_owned(),
            short_age(age),
            if stale { Role::Warning } else { Role::Text },
        ),
    };
    // What is wrong comes first.
    if stale {
        parts.push(feed.clone());
    }
    if let Some(low) = low {
        let weak = if strip::is_weak(low) { "?" } else { "" };
        parts.push((
            format!("deepest low {} at {}, hPa", low.name, number::place(low.position)),
            format!("{}{weak}", number::fixed(low.pressure_hpa.value, 0)),
            Role::Low,
        ));
        if let Some(change) = low.change_3h_hpa {
            let rate = low.bergeron.or(low.bergeron_12h).map_or_else(String::new, |rate| {
                format!(", {} bergeron", number::fixed(rate.value, 1))
            });
            let weak = if number::unsure(change) { "?" } else { "" };
            parts.push((
                format!("its change in 3 h, hPa{rate}"),
                format!("{}{weak}", number::signed(change.value, 1)),
                if change.value < 0.0 { Role::Falling } else { Role::Rising },
            ));
        }
    }
    if !stale {
        parts.push(feed);
    }
    let count = u16::try_from(parts.len()).unwrap_or(1).max(1);
    // As many in figures as have room for them; the rest in words.
    let in_figures = count.min(area.height.saturating_sub(4) / (FIGURE_ROWS + 2));
    let words_rows = count - in_figures + 2;
    let share = area.height.saturating_sub(words_rows) / in_figures.max(1);
    let mut y = area.y;
    for (number, (words, value, role)) in (0..count).zip(parts) {
        let room = area.bottom().saturating_sub(y);
        if room == 0 {
            return;
        }
        text::put(buf, area.x, y, area.width, &words, scene.look.style(Role::Secondary));
        let figure_area =
            Rect { y: y + 1, height: share.saturating_sub(2).min(room.saturating_sub(1)), ..area };
        let used =
            if number < in_figures { figures(scene, &value, role, figure_area, buf) } else { 0 };
        if used == 0 {
            // No room for figures: words are better than nothing.
            let x = area.x + u16::try_from(words.chars().count()).unwrap_or(0) + 2;
            let room = area.right().saturating_sub(x);
            text::put(buf, x, y, room, &value, scene.look.style(role));
            y += 1;
        } else {
            y += used + 2;
        }
    }
    let alert = scene.picture.alerts.iter().find(|alert| !alert.acknowledged);
    if let Some(alert) = alert {
        let style = scene.look.style(if alert.urgency == Urgency::Urgent {
            Role::Urgent
        } else {
            Role::Warning
        });
        let lines = text::lines(&alert.message, usize::from(area.width));
        for (y, line) in (y..area.bottom()).zip(&lines) {
            text::put(buf, area.x, y, area.width, line, style);
        }
    }
}

/// The age of the feed in few figures: minutes, hours or days.
fn short_age(minutes: i64) -> String {
    match minutes {
        ..100 => format!("{minutes}m"),
        100..2880 => format!("{}h", minutes / 60),
        _ => format!("{}d", minutes / 1440),
    }
}
