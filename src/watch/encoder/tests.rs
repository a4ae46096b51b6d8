//! The encoder against a terminal emulator (vt100 0.18.1): what it draws is what was meant.

use proptest::prelude::*;
use ratatui::layout::Rect;
use ratatui::style::Style;

use super::*;

fn colour_of(found: vt100::Color) -> Color {
    match found {
        vt100::Color::Default => Color::Reset,
        vt100::Color::Idx(number) => Color::Indexed(number),
        vt100::Color::Rgb(red, green, blue) => Color::Rgb(red, green, blue),
    }
}

/// The sixteen as the emulator numbers them.
fn numbered(colour: Color) -> Color {
    match colour {
        Color::Red => Color::Indexed(1),
        Color::LightCyan => Color::Indexed(14),
        Color::DarkGray => Color::Indexed(8),
        other => other,
    }
}

#[track_caller]
fn agrees(terminal: &vt100::Parser, meant: &Buffer) {
    for y in 0..meant.area.height {
        for x in 0..meant.area.width {
            let cell = &meant[(x, y)];
            let found = terminal.screen().cell(y, x).expect("a cell");
            let text = if found.contents().is_empty() { " " } else { found.contents() };
            assert_eq!(text, cell.symbol(), "at {x},{y}");
            assert_eq!(colour_of(found.bgcolor()), numbered(cell.bg), "ground at {x},{y}");
            if cell.symbol() != " " {
                assert_eq!(colour_of(found.fgcolor()), numbered(cell.fg), "ink at {x},{y}");
                assert_eq!(found.bold(), cell.modifier.contains(Modifier::BOLD), "at {x},{y}");
            }
            let reversed = cell.modifier.contains(Modifier::REVERSED);
            assert_eq!(found.inverse(), reversed, "reverse at {x},{y}");
        }
    }
}

fn painted(cells: &[(u8, u8, u8)], width: u16, height: u16) -> Buffer {
    let mut buffer = Buffer::empty(Rect::new(0, 0, width, height));
    for (cell, (symbol, ink, look)) in buffer.content.iter_mut().zip(cells) {
        cell.set_symbol(["a", " ", "\u{28ff}", " ", "7", " "][usize::from(symbol % 6)]);
        let ink =
            [Color::Reset, Color::Red, Color::LightCyan, Color::Rgb(1, 2, 3)][usize::from(ink % 4)];
        let ground = [Color::Reset, Color::Reset, Color::Indexed(17), Color::DarkGray]
            [usize::from(look % 4)];
        let modifier = [Modifier::empty(), Modifier::BOLD, Modifier::REVERSED, Modifier::empty()]
            [usize::from(look / 4 % 4)];
        cell.set_style(Style::new().fg(ink).bg(ground).add_modifier(modifier));
    }
    buffer
}

proptest! {
    #[test]
    fn an_emulator_shows_what_was_meant(
        first in proptest::collection::vec((0..6_u8, 0..4_u8, 0..16_u8), 60),
        second in proptest::collection::vec((0..6_u8, 0..4_u8, 0..16_u8), 60),
        keep in proptest::collection::vec(any::<bool>(), 60),
    ) {
        let (width, height) = (12, 5);
        let mixed: Vec<_> = first
            .iter()
            .zip(&second)
            .zip(&keep)
            .map(|((one, two), keep)| if *keep { *one } else { *two })
            .collect();
        let (before, after) = (painted(&first, width, height), painted(&mixed, width, height));
        let mut terminal = vt100::Parser::new(
            std::num::NonZero::new(height).expect("rows"),
            std::num::NonZero::new(width).expect("columns"),
            0,
        );
        let mut pen = Pen::default();
        let mut out = Vec::new();
        encode(None, &before, &mut pen, &mut out);
        terminal.process(&out);
        agrees(&terminal, &before);
        out.clear();
        encode(Some(&before), &after, &mut pen, &mut out);
        terminal.process(&out);
        agrees(&terminal, &after);
        out.clear();
        encode(Some(&after), &after, &mut pen, &mut out);
        prop_assert!(out.is_empty(), "equal screens cost nothing");
    }
}

#[test]
fn a_single_changed_figure_costs_a_handful_of_bytes() {
    let area = Rect::new(0, 0, 80, 24);
    let mut before = Buffer::empty(area);
    before.set_string(10, 5, "995.8", Style::new());
    let mut after = before.clone();
    after.set_string(10, 5, "995.6", Style::new());
    let mut pen = Pen::default();
    let mut out = Vec::new();
    encode(None, &before, &mut pen, &mut out);
    out.clear();
    encode(Some(&before), &after, &mut pen, &mut out);
    assert!(out.len() <= 8, "{out:?}");
}
