//! Whole screens as text, scripts of keys to screens, sizes, and what must never reach a cell.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::sample;
use super::*;
use crate::desk::{Event, Key};

/// The screen as lines of text.
fn drawn(picture: Option<&Picture>, desk: &Desk, look: &Look) -> Vec<String> {
    let area = Rect::new(0, 0, desk.columns, desk.rows);
    let mut buf = Buffer::empty(area);
    render(picture, desk, &Settings::default(), look, area, &mut buf);
    lines(&buf)
}

fn lines(buf: &Buffer) -> Vec<String> {
    buf.content
        .chunks(usize::from(buf.area.width.max(1)))
        .map(|row| {
            let line: String = row.iter().map(ratatui::buffer::Cell::symbol).collect();
            line.trim_end().to_owned()
        })
        .collect()
}

fn typed(picture: &Picture, columns: u16, rows: u16, script: &str) -> Desk {
    let mut desk = Desk::new(columns, rows);
    desk.update(Event::Tick(picture.now), Some(picture));
    desk.update(Event::Picture, Some(picture));
    for key in Key::script(script).expect("a script") {
        desk.update(Event::Key(key), Some(picture));
    }
    desk
}

#[test]
fn look() {
    let picture = sample::picture();
    let script = std::env::var("KEYS").ok().unwrap_or_default();
    let (w, h) = (
        std::env::var("W").ok().and_then(|w| w.parse().ok()).unwrap_or(80),
        std::env::var("H").ok().and_then(|w| w.parse().ok()).unwrap_or(24),
    );
    let glyphs =
        if std::env::var("ASCII").ok().is_some() { Glyphs::Ascii } else { Glyphs::Braille };
    let desk = typed(&picture, w, h, &script);
    let all = drawn(Some(&picture), &desk, &Look { glyphs, ..Look::new() }).join("\n");
    std::io::Write::write_all(&mut std::io::stderr(), all.as_bytes()).expect("written");
}
