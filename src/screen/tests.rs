//! Whole screens as text, scripts of keys to screens, sizes, and what must never reach a cell.

use std::path::PathBuf;

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::{Color, Modifier};

use super::sample;
use super::*;
use crate::desk::{Event, Key};

fn buffer(picture: Option<&Picture>, desk: &Desk, look: &Look) -> Buffer {
    let area = Rect::new(0, 0, desk.columns, desk.rows);
    let mut buf = Buffer::empty(area);
    render(picture, desk, &Settings::default(), look, area, &mut buf);
    buf
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

fn drawn(picture: &Picture, desk: &Desk, glyphs: Glyphs) -> Vec<String> {
    lines(&buffer(Some(picture), desk, &Look { glyphs, ..Look::new() }))
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

/// Compares a screen with the kept one; `UPDATE=1` keeps the new one.
#[expect(clippy::disallowed_methods, reason = "kept screens are files of the tests")]
fn golden(name: &str, found: &[String], faults: &mut Vec<String>) {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/suite/golden/screen");
    let path = folder.join(format!("{name}.txt"));
    let mut text = found.join("\n");
    text.push('\n');
    if std::env::var("UPDATE").is_ok() {
        std::fs::create_dir_all(&folder).expect("a folder");
        std::fs::write(&path, &text).expect("written");
        return;
    }
    let kept = std::fs::read_to_string(&path).unwrap_or_default();
    if kept != text {
        let line = kept.lines().zip(text.lines()).position(|(a, b)| a != b).unwrap_or(0);
        faults.push(format!(
            "{name}, line {line}:\n kept  {}\n found {}",
            kept.lines().nth(line).unwrap_or_default(),
            text.lines().nth(line).unwrap_or_default()
        ));
    }
}

#[test]
fn every_pane_at_every_size_looks_as_it_was_kept() {
    let picture = sample::picture();
    let mut faults = Vec::new();
    for (glyphs, word) in [(Glyphs::Braille, "braille"), (Glyphs::Ascii, "ascii")] {
        for pane in Pane::ALL {
            for (columns, rows) in [(40, 12), (80, 24)] {
                let desk = typed(&picture, columns, rows, &pane.letter().to_string());
                let name = format!("{}-{columns}x{rows}-{word}", pane.word().to_lowercase());
                golden(&name, &drawn(&picture, &desk, glyphs), &mut faults);
            }
        }
        for (columns, rows) in [(120, 40), (160, 48), (200, 60)] {
            let desk = typed(&picture, columns, rows, "");
            let found = drawn(&picture, &desk, glyphs);
            golden(&format!("all-{columns}x{rows}-{word}"), &found, &mut faults);
        }
        for (name, script) in [
            ("help", "?"),
            ("cursor", "x+++"),
            ("overlays", "wiveu"),
            ("past", "[[["),
            ("outlook", "]]]]]]"),
            ("close", "n+++++++"),
        ] {
            let desk = typed(&picture, 80, 24, script);
            golden(&format!("{name}-80x24-{word}"), &drawn(&picture, &desk, glyphs), &mut faults);
        }
        let look = Look { glyphs, wall: true, ..Look::new() };
        for (columns, rows) in [(80, 24), (160, 48)] {
            let desk = typed(&picture, columns, rows, "");
            let found = lines(&buffer(Some(&picture), &desk, &look));
            golden(&format!("wall-{columns}x{rows}-{word}"), &found, &mut faults);
        }
    }
    assert!(faults.is_empty(), "{}\n(UPDATE=1 keeps the new screens)", faults.join("\n"));
}

#[test]
fn at_no_size_and_with_no_pane_does_it_panic_or_draw_outside() {
    let picture = sample::picture();
    for width in (0..=60).step_by(3) {
        for height in 0..=20_u16 {
            let pane = Pane::ALL[usize::from(width / 3 + height) % 7];
            let script = format!("{}{}", pane.letter(), if height % 4 == 3 { "?" } else { "" });
            let mut desk = typed(&picture, width, height, &script);
            let wall = height % 5 == 4;
            let glyphs = if height % 2 == 0 { Glyphs::Braille } else { Glyphs::Ascii };
            let look = Look { glyphs, wall, ..Look::new() };
            buffer(Some(&picture), &desk, &look);
            buffer(None, &desk, &look);
            // A desk that is wrong about its size, and an area that lies partly off the buffer.
            (desk.columns, desk.rows) = (200, 60);
            let mut small =
                Buffer::filled(Rect::new(0, 0, 50, 14), ratatui::buffer::Cell::new("#"));
            let area = Rect::new(7, 2, width, height);
            render(Some(&picture), &desk, &Settings::default(), &look, area, &mut small);
            assert_eq!((small[(0, 0)].symbol(), small[(6, 13)].symbol()), ("#", "#"));
        }
    }
}

#[test]
fn a_terminal_that_is_too_small_is_told_so() {
    let picture = sample::picture();
    let found = drawn(&picture, &typed(&picture, 39, 12, ""), Glyphs::Ascii);
    assert!(found.iter().any(|line| line.contains("too small: 40 x 12 at least")));
}

#[test]
fn only_ascii_and_braille_reach_the_cells_and_no_control_of_a_report() {
    let mut picture = sample::picture();
    let evil = "\u{1b}[2J\u{9b}31m\r\n\u{202e}\u{7}x";
    picture.alerts[0].message = evil.to_owned();
    picture.alerts[0].evidence = evil.to_owned();
    picture.alerts[0].subject = evil.to_owned();
    picture.systems[0].name = evil.to_owned();
    picture.winds[0].station = evil.to_owned();
    picture.winds[0].explanation = evil.to_owned();
    picture.convergence[0].place = evil.to_owned();
    picture.tendencies[0].name = Some(evil.to_owned());
    picture.tendencies[0].words = evil.to_owned();
    picture.arrivals.lines[0].who = evil.to_owned();
    picture.arrivals.lines[0].file = evil.to_owned();
    picture.arrivals.unknown_stations[0].0 = evil.to_owned();
    for glyphs in [Glyphs::Braille, Glyphs::Ascii] {
        for (columns, rows) in [(80, 24), (200, 60)] {
            for pane in Pane::ALL {
                let mut desk = typed(&picture, columns, rows, &pane.letter().to_string());
                desk.notice = (pane == Pane::Chart).then(|| evil.to_owned());
                let look = Look { glyphs, link: evil.to_owned(), ..Look::new() };
                for cell in &buffer(Some(&picture), &desk, &look).content {
                    let mut symbol = cell.symbol().chars();
                    let c = symbol.next().expect("a glyph");
                    assert_eq!(symbol.next(), None);
                    let braille = ('\u{2800}'..='\u{28ff}').contains(&c);
                    let fine = (' '..='~').contains(&c) || (braille && glyphs == Glyphs::Braille);
                    assert!(fine, "{c:?}");
                }
            }
        }
    }
}

#[test]
fn without_colours_what_matters_has_attributes_and_marks() {
    let picture = sample::picture();
    let desk = typed(&picture, 80, 24, "A");
    let look = Look { theme: Theme::monochrome(), depth: Depth::None, ..Look::new() };
    let buf = buffer(Some(&picture), &desk, &look);
    assert!(buf.content.iter().all(|cell| cell.fg == Color::Reset && cell.bg == Color::Reset));
    let text = lines(&buf);
    // The selected row has its mark, the urgent alert its own, the acknowledged one a word.
    assert!(text.iter().any(|line| line.starts_with(">!!! URGENT")), "{}", text.join("\n"));
    assert!(text.iter().any(|line| line.starts_with(" ack")));
    assert!(buf[(0, 2)].modifier.contains(Modifier::REVERSED), "the title of the pane in front");
}

#[test]
fn a_stale_feed_cannot_be_overlooked() {
    let picture = sample::picture();
    let mut desk = typed(&picture, 80, 24, "");
    desk.update(Event::Tick(picture.now.plus_s(5 * 3600)), Some(&picture));
    for columns in [40, 80, 160] {
        desk.columns = columns;
        let buf = buffer(Some(&picture), &desk, &Look::new());
        let text = lines(&buf).join("\n");
        assert!(text.contains("FEED STALE 5 h 04 min"), "{text}");
        assert!(text.contains("OLD ANALYSIS") || columns == 40, "{text}");
    }
}

#[test]
fn few_reports_and_no_alert_are_not_shown_as_safety() {
    let mut picture = sample::picture();
    picture.alerts.clear();
    let mut analysis = (**picture.hours.last().expect("an hour")).clone();
    analysis.pressures_used = 4;
    *picture.hours.last_mut().expect("an hour") = std::sync::Arc::new(analysis);
    let text = drawn(&picture, &typed(&picture, 120, 24, "A"), Glyphs::Ascii).join("\n");
    assert!(text.contains("FEW REPORTS"), "{text}");
    assert!(text.contains("no alert stands; few or old reports would make it so too"), "{text}");
}

#[test]
fn the_help_names_every_key_of_the_bottom_line_and_the_cautions() {
    let picture = sample::picture();
    for pane in Pane::ALL {
        let mut desk = typed(&picture, 80, 60, &format!("{}?", pane.letter()));
        desk.rows = 80;
        let text = drawn(&picture, &desk, Glyphs::Ascii).join("\n");
        for (key, _) in crate::desk::keys::bottom(pane) {
            let named = key.chars().all(|c| text.contains(c)) || text.contains(key);
            assert!(named, "{pane:?} {key}");
        }
        for words in ["not a warning service", "Official warnings", "extrapolation"] {
            assert!(text.contains(words), "{pane:?} {words}");
        }
    }
}

#[test]
fn keys_lead_from_a_row_to_its_place_on_the_chart() {
    let picture = sample::picture();
    let desk = typed(&picture, 80, 24, "Sj<enter>");
    let text = drawn(&picture, &desk, Glyphs::Ascii).join("\n");
    assert!(text.contains(">Chart"), "{text}");
    assert!(text.contains("L15n? bears"), "{text}");
    let filtered = drawn(&picture, &typed(&picture, 80, 24, "T/ship<enter>"), Glyphs::Ascii);
    let text = filtered.join("\n");
    assert!(text.contains("only with \"ship\"") && text.contains("SKELF"), "{text}");
    assert!(!text.contains("QGKA"), "{text}");
}

/// The samples, read and judged as the watch does it: their pictures on the screen.
#[test]
fn the_sample_feeds_fill_the_screen() {
    for name in ["northern-ocean-low", "southern-date-line"] {
        let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("samples").join(name);
        let held = crate::feed::batch::read_folder(&folder.join("feed"), None).expect("a folder");
        let now = held.newest().expect("reports").hour_nearest().instant();
        // A short window: the picture, not the history, is looked at here.
        let settings = Settings { window_h: 6, ..Settings::default() };
        let inputs = crate::picture::Inputs {
            held: &held,
            catalogue: &crate::obs::Catalogue::built_in(),
            decisions: &crate::picture::Decisions::default(),
            names: &crate::systems::names::NameBook::default(),
            settled: &std::collections::BTreeMap::new(),
            settings: &settings,
        };
        let (picture, _) = crate::picture::picture(&inputs, now);
        for (columns, rows, script) in [(80, 24, ""), (160, 48, "x"), (200, 60, "")] {
            let desk = typed(&picture, columns, rows, script);
            let text = drawn(&picture, &desk, Glyphs::Braille).join("\n");
            let low = picture.systems.first().expect("a system");
            assert!(text.contains(&low.name), "{text}");
            assert!(!text.contains("no analysis of this hour"), "{text}");
        }
    }
}
