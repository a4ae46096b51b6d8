//! Fields drawn over the window: where the analysis is weak, where air converges, the wind.

use super::centres::arrow;
use super::isolines::BROKEN_RATIO;
use super::labels::Labels;
use super::raster::{Layer, Pattern, Pen, Raster};
use crate::analysis::HourAnalysis;
use crate::desk::view::View;
use crate::field::Grid;
use crate::quantity::{kt_from_m_s, wind_from_components};
use crate::screen::{Glyphs, Role, number};
use crate::sphere::Position;
use crate::winds::WindField;

/// Convergence, 1/s, from which a cell is shaded, and from which it is shaded densely.
const CONVERGENCE_PER_S: [f64; 2] = [-2e-5, -4e-5];
/// Cells between wind arrows.
const ARROW_COLUMNS: u16 = 8;
const ARROW_ROWS: u16 = 4;

/// Fractional column and row of the grid at the middle of a cell.
fn grid_place(view: &View, grid: &Grid, column: u16, row: u16) -> (f64, f64) {
    let x_m = view.left_m + (f64::from(column) * 2.0 + 1.0) * view.m_per_dot;
    let y_m = view.top_m - (f64::from(row) * 4.0 + 2.0) * view.m_per_dot;
    ((x_m - grid.x0_m) / grid.spacing_m, (y_m - grid.y0_m) / grid.spacing_m)
}

/// Shades cells where the analysis is not to be trusted.
pub(super) fn error(view: &View, analysis: &HourAnalysis, raster: &mut Raster) {
    for row in 0..view.rows {
        for column in 0..view.columns {
            let (x, y) = grid_place(view, &analysis.grid, column, row);
            let Some(ratio) = analysis.grid.sample_at(&analysis.error_ratio, x, y) else {
                continue;
            };
            if ratio > BROKEN_RATIO && (column + row) % 2 == 0 {
                raster.plot(i64::from(column) * 2, i64::from(row) * 4 + 1, Layer::Unsure);
            }
        }
    }
}

/// Shades cells where the expected surface wind converges.
pub(super) fn convergence(view: &View, field: &WindField, raster: &mut Raster) {
    for row in 0..view.rows {
        for column in 0..view.columns {
            let (x, y) = grid_place(view, &field.grid, column, row);
            let found = field.grid.sample_at(&field.divergence_friction_per_s, x, y);
            let Some(divergence) = found else { continue };
            let (left, top) = (i64::from(column) * 2, i64::from(row) * 4);
            if divergence <= CONVERGENCE_PER_S[0] {
                raster.plot(left, top, Layer::Convergence);
            }
            if divergence <= CONVERGENCE_PER_S[1] {
                raster.plot(left + 1, top + 2, Layer::Convergence);
                raster.plot(left, top + 3, Layer::Convergence);
            }
        }
    }
}

/// The expected surface wind: arrows that point downwind and grow with the speed (braille), or
/// where it blows from and knots in words (ASCII).
pub(super) fn wind(
    view: &View,
    field: &WindField,
    glyphs: Glyphs,
    raster: &mut Raster,
    labels: &mut Labels,
) {
    let east: Vec<f64> = field.surface_m_s.iter().map(|[u, _]| *u).collect();
    let north: Vec<f64> = field.surface_m_s.iter().map(|[_, v]| *v).collect();
    for row in (ARROW_ROWS / 2..view.rows).step_by(usize::from(ARROW_ROWS)) {
        // Every other row is set off by half, so that the arrows do not stand in files.
        let shift = if (row / ARROW_ROWS).is_multiple_of(2) { 0 } else { ARROW_COLUMNS / 2 };
        for column in (ARROW_COLUMNS / 2 + shift..view.columns).step_by(usize::from(ARROW_COLUMNS))
        {
            let (x, y) = grid_place(view, &field.grid, column, row);
            let (Some(u), Some(v)) =
                (field.grid.sample_at(&east, x, y), field.grid.sample_at(&north, x, y))
            else {
                continue;
            };
            let (from_deg, speed_m_s) = wind_from_components(u, v);
            let speed_kt = kt_from_m_s(speed_m_s);
            if speed_kt < 3.0 {
                continue;
            }
            if glyphs == Glyphs::Ascii {
                let text = format!("{}{}", point_word(from_deg), number::fixed(speed_kt, 0));
                labels.place(i64::from(column), i64::from(row), &text, Role::Wind, 1);
                continue;
            }
            let dot = (f64::from(column) * 2.0 + 1.0, f64::from(row) * 4.0 + 2.0);
            let place = view.place(dot.0, dot.1);
            let (mx, my) = view.projection.to_map_components(place.longitude_deg(), u, v);
            let length = (speed_kt / 4.0).clamp(3.0, 14.0);
            let scale = length / speed_m_s;
            let half = (mx * scale / 2.0, -my * scale / 2.0);
            arrow(
                raster,
                Layer::Wind,
                (dot.0 - half.0, dot.1 - half.1),
                (dot.0 + half.0, dot.1 + half.1),
                0.0,
            );
        }
    }
}

/// The point of the compass, of eight, that a wind blows from.
pub(super) fn point_word(from_deg: f64) -> &'static str {
    const POINTS: [&str; 8] = ["N", "NE", "E", "SE", "S", "SW", "W", "NW"];
    let index = crate::quantity::index_nearest(crate::quantity::wrap_360_deg(from_deg) / 45.0) % 8;
    POINTS[index]
}

/// Meridians and parallels, with their values where they leave the window.
pub(super) fn graticule(view: &View, raster: &mut Raster, labels: &mut Labels) {
    let wide_km = view.cell_width_m() / 1000.0 * f64::from(view.columns);
    let step = if wide_km > 5000.0 {
        20
    } else if wide_km > 1500.0 {
        10
    } else if wide_km > 600.0 {
        5
    } else {
        1
    };
    let seam = view.projection.central_longitude_deg();
    let draw = |raster: &mut Raster, from: Position, to: Position| {
        let offset = |place: Position| crate::quantity::wrap_180_deg(place.longitude_deg() - seam);
        if (offset(from) - offset(to)).abs() < 180.0 {
            let mut pen = Pen::new(Layer::Graticule, Pattern::Sparse);
            raster.line(&mut pen, view.dot_of(from), view.dot_of(to));
        }
    };
    let place = |lat: i32, lon: i32| Position::clamped(f64::from(lat), f64::from(lon));
    for latitude in (-80..=80).step_by(step) {
        for longitude in (-180..180).step_by(2) {
            draw(raster, place(latitude, longitude), place(latitude, longitude + 2));
        }
    }
    for longitude in (-180..180).step_by(step) {
        for latitude in (-88..88).step_by(2) {
            draw(raster, place(latitude, longitude), place(latitude + 2, longitude));
        }
    }
    label_edges(view, step, labels);
}

fn label_edges(view: &View, step: usize, labels: &mut Labels) {
    let step = step as f64;
    let crossed = |a: f64, b: f64| {
        let (a, b) = (a / step, b / step);
        ((b - a).abs() < 1.0 && (a.floor() - b.floor()).abs() > 0.5)
            .then(|| a.max(b).floor() * step)
    };
    for row in 1..view.rows {
        let at = |row: u16| view.place(1.0, f64::from(row) * 4.0).latitude_deg();
        if let Some(latitude) = crossed(at(row - 1), at(row)) {
            let letter = if latitude < 0.0 { 'S' } else { 'N' };
            let text = format!("{}{letter}", number::fixed(latitude.abs(), 0));
            labels.place(0, i64::from(row) - 1, &text, Role::Graticule, 1);
        }
    }
    let bottom = f64::from(view.rows) * 4.0 - 1.0;
    for column in 1..view.columns {
        let at = |column: u16| view.place(f64::from(column) * 2.0, bottom).longitude_deg();
        if let Some(longitude) = crossed(at(column - 1), at(column)) {
            let letter = if longitude < 0.0 { 'W' } else { 'E' };
            let text = format!("{}{letter}", number::fixed(longitude.abs(), 0));
            let row = i64::from(view.rows) - 1;
            labels.place(i64::from(column) - 1, row, &text, Role::Graticule, 1);
        }
    }
}
