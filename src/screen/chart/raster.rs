//! The chart's own raster: two by four dots a cell, dots of all layers joined, the cell coloured by
//! the layer that matters most.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use crate::quantity::whole_below;
use crate::screen::trace::{BRAILLE_BITS, braille};
use crate::screen::{Glyphs, Look, Role};

/// What a line is; later ones win the colour of a cell.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(super) enum Layer {
    Nothing,
    Unsure,
    Graticule,
    Convergence,
    Coast,
    Isobar,
    IsobarBold,
    Falling,
    Rising,
    Wind,
    Outlook,
    Track,
    Report,
    Low,
    High,
}

impl Layer {
    const fn role(self) -> Role {
        match self {
            Self::Nothing => Role::Text,
            Self::Unsure => Role::Unsure,
            Self::Graticule => Role::Graticule,
            Self::Convergence => Role::Convergence,
            Self::Coast => Role::Coast,
            Self::Isobar => Role::Isobar,
            Self::IsobarBold => Role::IsobarBold,
            Self::Falling => Role::Falling,
            Self::Rising => Role::Rising,
            Self::Wind => Role::Wind,
            Self::Outlook => Role::Outlook,
            Self::Track => Role::Track,
            Self::Report => Role::Report,
            Self::Low => Role::Low,
            Self::High => Role::High,
        }
    }
}

/// Which dots of a line are set.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Pattern {
    /// All.
    Solid,
    /// Four, then three not.
    Broken,
    /// Two, then two not.
    Dashed,
    /// Every other one, by place, so that it does not crawl when the chart moves.
    Stipple,
    /// One in four, by place.
    Sparse,
}

/// A line that is being drawn: its pattern goes on from piece to piece.
#[derive(Clone, Copy, Debug)]
pub(super) struct Pen {
    pub layer: Layer,
    pub pattern: Pattern,
    run: u32,
}

impl Pen {
    pub(super) const fn new(layer: Layer, pattern: Pattern) -> Self {
        Self { layer, pattern, run: 0 }
    }
}

/// Dots and layers of a window of cells.
#[derive(Clone, Debug)]
pub(super) struct Raster {
    width: u16,
    height: u16,
    bits: Vec<u8>,
    layers: Vec<Layer>,
}

impl Raster {
    pub(super) fn new(width: u16, height: u16) -> Self {
        let count = usize::from(width) * usize::from(height);
        Self { width, height, bits: vec![0; count], layers: vec![Layer::Nothing; count] }
    }

    /// Sets a dot.
    pub(super) fn plot(&mut self, x: i64, y: i64, layer: Layer) {
        let (Ok(x), Ok(y)) = (usize::try_from(x), usize::try_from(y)) else { return };
        let (column, row) = (x / 2, y / 4);
        if column >= usize::from(self.width) || row >= usize::from(self.height) {
            return;
        }
        let index = row * usize::from(self.width) + column;
        self.bits[index] |= BRAILLE_BITS[x % 2][y % 4];
        self.layers[index] = self.layers[index].max(layer);
    }

    /// The layer of a cell.
    #[cfg(test)]
    pub(super) fn layer(&self, column: u16, row: u16) -> Layer {
        let index = usize::from(row) * usize::from(self.width) + usize::from(column);
        self.layers.get(index).copied().unwrap_or(Layer::Nothing)
    }

    /// Draws a straight line between two places in dots; what lies outside is left out.
    pub(super) fn line(&mut self, pen: &mut Pen, from: (f64, f64), to: (f64, f64)) {
        let Some((a, b)) = self.clipped(from, to) else { return };
        let steps = (b.0 - a.0).abs().max((b.1 - a.1).abs()).ceil().max(1.0);
        // Clipped to the window: at most some hundred steps.
        let count = crate::quantity::index_nearest(steps);
        for k in 0..=count {
            let share = k as f64 / steps;
            let x = whole_below(a.0 + (b.0 - a.0) * share);
            let y = whole_below(a.1 + (b.1 - a.1) * share);
            let set = match pen.pattern {
                Pattern::Solid => true,
                Pattern::Broken => pen.run % 7 < 4,
                Pattern::Dashed => pen.run % 4 < 2,
                Pattern::Stipple => (x + y).rem_euclid(2) == 0,
                Pattern::Sparse => (x + y).rem_euclid(4) == 0,
            };
            // The last dot of a piece is the first of the next.
            if k < count || count == 1 {
                pen.run = pen.run.wrapping_add(1);
            }
            if set {
                self.plot(x, y, pen.layer);
            }
        }
    }

    /// The part of a line inside the window with a margin (Liang and Barsky 1984).
    fn clipped(&self, a: (f64, f64), b: (f64, f64)) -> Option<((f64, f64), (f64, f64))> {
        if ![a.0, a.1, b.0, b.1].iter().all(|value| value.is_finite()) {
            return None;
        }
        let (right, bottom) = (f64::from(self.width) * 2.0, f64::from(self.height) * 4.0);
        let (dx, dy) = (b.0 - a.0, b.1 - a.1);
        let (mut enter, mut leave) = (0.0_f64, 1.0_f64);
        for (step, room) in [(-dx, a.0), (dx, right - a.0), (-dy, a.1), (dy, bottom - a.1)] {
            if step == 0.0 {
                if room < 0.0 {
                    return None;
                }
            } else if step < 0.0 {
                enter = enter.max(room / step);
            } else {
                leave = leave.min(room / step);
            }
        }
        (enter <= leave).then(|| {
            let at = |t: f64| (a.0 + dx * t, a.1 + dy * t);
            (at(enter), at(leave))
        })
    }

    /// Writes the cells that hold a dot.
    pub(super) fn blit(&self, area: Rect, look: &Look, buf: &mut Buffer) {
        let styles: Vec<_> =
            (0..=u8::MAX).map_while(layer_at).map(|l| look.style(l.role())).collect();
        for (index, (bits, layer)) in self.bits.iter().zip(&self.layers).enumerate() {
            if *bits == 0 {
                continue;
            }
            let place = (
                u16::try_from(index % usize::from(self.width.max(1))),
                u16::try_from(index / usize::from(self.width.max(1))),
            );
            let (Ok(column), Ok(row)) = place else { continue };
            if column >= area.width || row >= area.height {
                continue;
            }
            let Some(cell) = buf.cell_mut((area.x + column, area.y + row)) else { continue };
            cell.set_char(match look.glyphs {
                Glyphs::Braille => braille(*bits),
                Glyphs::Ascii => ascii(*bits, *layer),
            });
            if let Some(style) = styles.get(*layer as usize) {
                cell.set_style(*style);
            }
        }
    }
}

const LAYERS: [Layer; 15] = [
    Layer::Nothing,
    Layer::Unsure,
    Layer::Graticule,
    Layer::Convergence,
    Layer::Coast,
    Layer::Isobar,
    Layer::IsobarBold,
    Layer::Falling,
    Layer::Rising,
    Layer::Wind,
    Layer::Outlook,
    Layer::Track,
    Layer::Report,
    Layer::Low,
    Layer::High,
];

fn layer_at(index: u8) -> Option<Layer> {
    LAYERS.get(usize::from(index)).copied()
}

/// The ASCII character that comes nearest to some dots; shading and coast have their own.
fn ascii(bits: u8, layer: Layer) -> char {
    match layer {
        Layer::Unsure => return '`',
        Layer::Graticule | Layer::Coast => return '.',
        Layer::Convergence => return if bits.count_ones() > 1 { '%' } else { ',' },
        _ => {}
    }
    let rows = |column: usize| {
        let found: Vec<usize> =
            (0..4).filter(|row| bits & BRAILLE_BITS[column][*row] != 0).collect();
        found
    };
    let (left, right) = (rows(0), rows(1));
    let all = || left.iter().chain(&right).copied();
    let (Some(top), Some(bottom)) = (all().min(), all().max()) else { return ' ' };
    if left.is_empty() || right.is_empty() {
        return match (bottom - top, top) {
            (0, 0 | 1) => '\'',
            (0, _) => ',',
            _ => '|',
        };
    }
    let mean = |rows: &[usize]| rows.iter().sum::<usize>() as f64 / rows.len() as f64;
    let fall = mean(&right) - mean(&left);
    if fall.abs() < 0.75 {
        return match (bottom - top, bottom) {
            (0 | 1, 3) => '_',
            (0 | 1, _) => '-',
            _ => '+',
        };
    }
    if fall > 0.0 { '\\' } else { '/' }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn text(raster: &Raster, glyphs: Glyphs) -> Vec<String> {
        let area = Rect::new(0, 0, raster.width, raster.height);
        let mut buf = Buffer::empty(area);
        let look = Look { glyphs, ..Look::new() };
        raster.blit(area, &look, &mut buf);
        buf.content
            .chunks(usize::from(raster.width))
            .map(|row| row.iter().map(ratatui::buffer::Cell::symbol).collect())
            .collect()
    }

    #[track_caller]
    fn check(from: (f64, f64), to: (f64, f64), glyphs: Glyphs, expected: &[&str]) {
        let mut raster = Raster::new(4, 2);
        raster.line(&mut Pen::new(Layer::Isobar, Pattern::Solid), from, to);
        assert_eq!(text(&raster, glyphs), expected);
    }

    #[test]
    fn lines_in_braille_and_in_ascii() {
        check((0.0, 1.0), (7.9, 1.0), Glyphs::Braille, &["⠒⠒⠒⠒", "    "]);
        check((0.0, 1.0), (7.9, 1.0), Glyphs::Ascii, &["----", "    "]);
        check((2.0, 0.0), (2.0, 7.9), Glyphs::Ascii, &[" |  ", " |  "]);
        check((0.5, 7.5), (7.5, 0.5), Glyphs::Ascii, &["  //", "//  "]);
        check((0.5, 0.5), (7.5, 7.5), Glyphs::Ascii, &["\\\\  ", "  \\\\"]);
    }

    #[test]
    fn layers_join_their_dots_and_the_higher_one_gives_the_colour() {
        let mut raster = Raster::new(1, 1);
        raster.plot(0, 0, Layer::IsobarBold);
        raster.plot(1, 3, Layer::Coast);
        assert_eq!(text(&raster, Glyphs::Braille), ["⢁"]);
        assert_eq!(raster.layer(0, 0), Layer::IsobarBold);
    }

    #[test]
    fn whatever_the_line_nothing_is_drawn_outside() {
        let mut raster = Raster::new(3, 2);
        let mut pen = Pen::new(Layer::Isobar, Pattern::Broken);
        for from in [-1e12, -5.0, 0.0, 3.0, 1e12, f64::NAN] {
            for to in [-1e12, 2.0, 9.0, 1e300, f64::INFINITY] {
                raster.line(&mut pen, (from, to), (to, from));
            }
        }
        assert_eq!(text(&raster, Glyphs::Ascii).len(), 2);
        let mut nothing = Raster::new(0, 0);
        nothing.line(&mut pen, (0.0, 0.0), (9.0, 9.0));
    }
}
