//! The screen: `(&Picture, &Desk, &Settings)` to cells. Reads the Picture, computes nothing of its own.
//!
//! [`render`] draws everything into a buffer; it can be called at any size and never fails. The
//! parts: the chart (`chart/`), one file for each list (`pane/`), the strip and the bottom line,
//! the help. Colours come from a [`Theme`], shapes from [`Glyphs`]; meaning never hangs on colour
//! alone.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use crate::desk::layout::Area;
use crate::desk::{Desk, Pane};
use crate::picture::Picture;
use crate::settings::Settings;

mod chart;
mod help;
mod number;
mod pane;
pub mod plain;
mod strip;
mod table;
mod text;
pub mod theme;
mod trace;
mod wall;

pub use theme::{Depth, Role, Theme};

/// Which glyphs lines and traces are drawn with.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Glyphs {
    /// Braille patterns: eight dots a cell.
    #[default]
    Braille,
    /// ASCII alone, for terminals and fonts without braille, and for thin links.
    Ascii,
}

/// How the screen looks.
#[derive(Clone, PartialEq, Debug)]
pub struct Look {
    /// Colours and attributes.
    pub theme: Theme,
    /// How many colours the terminal has.
    pub depth: Depth,
    /// Which glyphs.
    pub glyphs: Glyphs,
    /// Whether nobody sits at it: the layout for a wall.
    pub wall: bool,
    /// A word about the link or the watcher for the strip, e.g. `412 B/min`; empty for none.
    pub link: String,
}

impl Look {
    /// Dark, true colour, braille.
    pub fn new() -> Self {
        Self {
            theme: Theme::named("dark").unwrap_or_else(Theme::monochrome),
            depth: Depth::True,
            glyphs: Glyphs::Braille,
            wall: false,
            link: String::new(),
        }
    }

    fn style(&self, role: Role) -> ratatui::style::Style {
        self.theme.style(role, self.depth)
    }
}

impl Default for Look {
    fn default() -> Self {
        Self::new()
    }
}

/// What every part needs to draw itself.
#[derive(Clone, Copy)]
struct Scene<'a> {
    picture: &'a Picture,
    desk: &'a Desk,
    settings: &'a Settings,
    look: &'a Look,
}

/// Draws the whole screen into `area` of a buffer.
///
/// The layout follows the desk's own size; what does not fit `area` is left out. Nothing is drawn
/// outside the buffer.
pub fn render(
    picture: Option<&Picture>,
    desk: &Desk,
    settings: &Settings,
    look: &Look,
    area: Rect,
    buf: &mut Buffer,
) {
    let area = area.intersection(buf.area);
    let base = look.style(Role::Text);
    for y in area.top()..area.bottom() {
        for x in area.left()..area.right() {
            let cell = &mut buf[(x, y)];
            cell.reset();
            cell.set_style(base);
        }
    }
    // A desk that does not know its size yet, or an area that is smaller than it thinks.
    let mut desk = desk.clone();
    (desk.columns, desk.rows) = (area.width, area.height);
    let Some(layout) = desk.layout() else {
        text::centred(buf, area, "too small: 40 x 12 at least", base);
        return;
    };
    let rect = |part: Area| {
        Rect::new(area.x + part.x, area.y + part.y, part.width, part.height).intersection(area)
    };
    let Some(picture) = picture else {
        strip::waiting(buf, rect(layout.summary), look);
        text::centred(buf, area, "no picture yet: waiting for the first reports", base);
        strip::keys(buf, rect(layout.keys), &desk, None, look);
        if let Some(line) = desk.help {
            help::draw(&desk, look, line, area, buf);
        }
        return;
    };
    let scene = Scene { picture, desk: &desk, settings, look };
    if look.wall {
        wall::draw(scene, area, buf);
        return;
    }
    strip::summary(buf, rect(layout.summary), scene);
    for (pane, part) in &layout.panes {
        draw_pane(scene, *pane, rect(*part), buf);
    }
    strip::keys(buf, rect(layout.keys), &desk, Some(picture), look);
    if let Some(line) = desk.help {
        help::draw(&desk, look, line, area, buf);
    }
}

fn draw_pane(scene: Scene<'_>, pane: Pane, area: Rect, buf: &mut Buffer) {
    if area.height == 0 {
        return;
    }
    let title = Rect { height: 1, ..area };
    let content = Rect { y: area.y + 1, height: area.height - 1, ..area };
    if pane == Pane::Chart {
        let words = chart::draw(scene, content, buf);
        pane::title(scene, pane, &words, title, buf);
    } else {
        let words = pane::draw(scene, pane, content, buf);
        pane::title(scene, pane, &words, title, buf);
    }
}

#[cfg(test)]
mod sample;
#[cfg(test)]
mod tests;
