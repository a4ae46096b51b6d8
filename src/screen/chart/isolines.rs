//! Isobars and isallobars: which levels, how they are drawn, where they are labelled.

use super::labels::Labels;
use super::raster::{Layer, Pattern, Pen, Raster};
use crate::analysis::HourAnalysis;
use crate::analysis::isobar::{self, Isobar};
use crate::desk::view::View;
use crate::field::Grid;
use crate::quantity::{index_nearest, whole_below, whole_nearest};
use crate::screen::{Role, number};
use crate::winds::WindField;

/// Error ratio above which an isobar is drawn broken (METHODS ANA-5).
pub(super) const BROKEN_RATIO: f64 = 0.7;
/// Error ratio above which the analysis says next to nothing of its own: no isobar (the ratio from
/// which the Picture itself states nothing at a point).
pub(super) const NOTHING_RATIO: f64 = 0.9;
/// Dots that isobars should be apart where the gradient is in the steepest tenth of what is seen.
const APART_DOTS: f64 = 3.0;
/// Intervals of isobars, hPa, each with the multiple that is drawn bolder (every fourth or fifth).
/// The last serves windows of few cells onto a whole ocean.
const INTERVALS: [(f64, f64); 5] =
    [(1.0, 5.0), (2.0, 10.0), (4.0, 20.0), (5.0, 20.0), (10.0, 50.0)];
/// Dots of line for each label.
const LABEL_EVERY_DOTS: f64 = 130.0;
/// A line shorter than this, dots, gets no label.
const LABEL_FROM_DOTS: f64 = 28.0;

/// The interval for a view: the smallest that keeps the isobars apart where the gradient is in the
/// steepest tenth of what is seen.
pub(super) fn interval(view: &View, analysis: &HourAnalysis) -> (f64, f64) {
    let grid = &analysis.grid;
    let mut slopes = Vec::new();
    // Every second point is plenty.
    for row in (0..grid.rows.saturating_sub(1)).step_by(2) {
        for column in (0..grid.columns.saturating_sub(1)).step_by(2) {
            let (x_m, y_m) = grid.map_at(column as f64, row as f64);
            let (x, y) = view.dot(x_m, y_m);
            let seen = (0.0..f64::from(view.columns) * 2.0).contains(&x)
                && (0.0..f64::from(view.rows) * 4.0).contains(&y);
            if seen {
                let at = |c: usize, r: usize| {
                    analysis.pressure_hpa.get(grid.index(c, r)).copied().unwrap_or(f64::NAN)
                };
                let here = at(column, row);
                let slope = (at(column + 1, row) - here).hypot(at(column, row + 1) - here);
                if slope.is_finite() {
                    slopes.push(slope / grid.spacing_m);
                }
            }
        }
    }
    slopes.sort_by(f64::total_cmp);
    let steep_hpa_m = slopes.get(slopes.len() * 9 / 10).copied().unwrap_or(0.0);
    let apart = |interval: f64| interval / (steep_hpa_m * view.m_per_dot).max(1e-12);
    INTERVALS
        .into_iter()
        .find(|(interval, _)| apart(*interval) >= APART_DOTS)
        .unwrap_or(INTERVALS[4])
}

fn is_bold(level: f64, bold: f64) -> bool {
    let times = level / bold;
    (times - times.round()).abs() < 1e-6
}

/// A line in dots with its error ratio at each point.
struct Drawn {
    label: String,
    role: Role,
    bold: bool,
    points: Vec<(f64, f64)>,
    length: f64,
}

/// Draws the isobars of an analysis; the labels are left to [`label`].
pub(super) fn isobars(
    view: &View,
    analysis: &HourAnalysis,
    raster: &mut Raster,
) -> (Lines, (f64, f64)) {
    let (interval, bold) = interval(view, analysis);
    let finite = || analysis.pressure_hpa.iter().copied().filter(|value| value.is_finite());
    let low = finite().fold(f64::INFINITY, f64::min);
    let high = finite().fold(f64::NEG_INFINITY, f64::max);
    let levels = isobar::levels(interval, low, high);
    let lines =
        isobar::isobars(&analysis.grid, &analysis.pressure_hpa, &analysis.error_ratio, &levels);
    let mut out = Vec::new();
    for line in &lines {
        let is_bold = is_bold(line.level_hpa, bold);
        let layer = if is_bold { Layer::IsobarBold } else { Layer::Isobar };
        let role = if is_bold { Role::IsobarBold } else { Role::Isobar };
        out.push(trace(
            view,
            &analysis.grid,
            line,
            raster,
            layer,
            role,
            Pattern::Solid,
            number::fixed(line.level_hpa, 0),
        ));
    }
    (Lines(out), (interval, bold))
}

/// Draws lines of equal 3 h pressure change; the zero line is left out.
pub(super) fn isallobars(view: &View, field: &WindField, raster: &mut Raster) -> Lines {
    let finite = || field.change_3h_hpa.iter().copied().filter(|value| value.is_finite());
    let low = finite().fold(f64::INFINITY, f64::min);
    let high = finite().fold(f64::NEG_INFINITY, f64::max);
    let interval = if high - low > 16.0 { 2.0 } else { 1.0 };
    let levels: Vec<f64> =
        isobar::levels(interval, low, high).into_iter().filter(|level| *level != 0.0).collect();
    let unsure = vec![0.0; field.grid.len()];
    let mut out = Vec::new();
    for line in isobar::isobars(&field.grid, &field.change_3h_hpa, &unsure, &levels) {
        let (layer, role) = if line.level_hpa < 0.0 {
            (Layer::Falling, Role::Falling)
        } else {
            (Layer::Rising, Role::Rising)
        };
        let label = number::signed(line.level_hpa, 0);
        out.push(trace(view, &field.grid, &line, raster, layer, role, Pattern::Dashed, label));
    }
    Lines(out)
}

/// Lines that have been drawn and may be labelled.
pub(super) struct Lines(Vec<Drawn>);

#[expect(clippy::too_many_arguments, reason = "one call for two kinds of line")]
fn trace(
    view: &View,
    grid: &Grid,
    line: &Isobar,
    raster: &mut Raster,
    layer: Layer,
    role: Role,
    pattern: Pattern,
    label: String,
) -> Drawn {
    let count = line.points.len();
    let pieces = if line.closed { count } else { count.saturating_sub(1) };
    let dot = |point: [f64; 2]| {
        let (x_m, y_m) = grid.map_at(point[0], point[1]);
        view.dot(x_m, y_m)
    };
    // Rounded where a step of the grid is many dots: a smooth curve through every crossing.
    let fine = (grid.spacing_m / view.m_per_dot / 3.0).ceil().clamp(1.0, 8.0);
    let steps = index_nearest(fine);
    let at = |k: i64| {
        let last = i64::try_from(count).unwrap_or(1) - 1;
        let k = if line.closed { k.rem_euclid(last + 1) } else { k.clamp(0, last) };
        line.points.get(usize::try_from(k).unwrap_or(0)).copied().unwrap_or([0.0, 0.0])
    };
    let mut pen = Pen::new(layer, pattern);
    let mut points = Vec::new();
    let mut length = 0.0;
    let mut before = dot(at(0));
    for k in 0..pieces {
        let ratio = line.error_ratio.get(k).copied().unwrap_or(1.0);
        pen.pattern = if ratio > BROKEN_RATIO { Pattern::Broken } else { pattern };
        let k = i64::try_from(k).unwrap_or(0);
        let (p0, p1, p2, p3) = (at(k - 1), at(k), at(k + 1), at(k + 2));
        for step in 1..=steps {
            let t = step as f64 / fine;
            let to =
                dot([curve(p0[0], p1[0], p2[0], p3[0], t), curve(p0[1], p1[1], p2[1], p3[1], t)]);
            if ratio <= NOTHING_RATIO {
                raster.line(&mut pen, before, to);
                if ratio <= BROKEN_RATIO || step == 1 {
                    points.push(to);
                }
                length += (to.0 - before.0).hypot(to.1 - before.1);
            }
            before = to;
        }
    }
    let seen = |point: &(f64, f64)| {
        (0.0..f64::from(view.columns) * 2.0).contains(&point.0)
            && (0.0..f64::from(view.rows) * 4.0).contains(&point.1)
    };
    points.retain(seen);
    Drawn { label, role, bold: layer == Layer::IsobarBold, points, length }
}

/// A smooth curve from `b` to `c` with its neighbours `a` and `d` (Catmull and Rom 1974).
fn curve(a: f64, b: f64, c: f64, d: f64, t: f64) -> f64 {
    let cubic = 3.0 * (b - c) + d - a;
    0.5 * (2.0 * b + t * ((c - a) + t * ((2.0 * a - 5.0 * b + 4.0 * c - d) + t * cubic)))
}

/// Labels lines, the bold and long ones first, where there is room.
pub(super) fn label(lines: &Lines, labels: &mut Labels) {
    let mut order: Vec<&Drawn> = lines.0.iter().filter(|line| !line.points.is_empty()).collect();
    order.sort_by(|a, b| b.bold.cmp(&a.bold).then(b.length.total_cmp(&a.length)));
    for line in order {
        if line.length < LABEL_FROM_DOTS {
            continue;
        }
        let wanted = index_nearest((line.length / LABEL_EVERY_DOTS).ceil().clamp(1.0, 6.0));
        let count = line.points.len();
        let wide = line.label.chars().count() as f64;
        for number in 0..wanted {
            // Begin in the middle of the label's share of the line and look both ways.
            let share = count / wanted;
            let middle = number * share + share / 2;
            let tries = (0..share / 2)
                .step_by((share / 16).max(1))
                .flat_map(|away| [middle + away, middle.saturating_sub(away)]);
            for index in tries {
                let Some((x, y)) = line.points.get(index).copied() else { continue };
                let column = whole_nearest(x / 2.0 - wide / 2.0);
                if labels.place_apart(column, whole_below(y / 4.0), &line.label, line.role) {
                    break;
                }
            }
        }
    }
}
