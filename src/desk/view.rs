//! How the chart is looked at: its window onto the map of the analysis grid.

use crate::field::Grid;
use crate::instant::Hour;
use crate::picture::Picture;
use crate::projection::Projection;
use crate::quantity::whole_nearest;
use crate::sphere::Position;
use crate::systems::System;

/// Steps of magnification each way; a step is the square root of two.
const ZOOM_MIN: i32 = -4;
const ZOOM_MAX: i32 = 14;

/// Dots across a cell and down a cell: dots are about square, a cell twice as high as wide.
pub const DOTS_ACROSS: f64 = 2.0;
/// Dots down a cell.
pub const DOTS_DOWN: f64 = 4.0;

/// What is drawn on the chart beside isobars, coast and centres.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[expect(clippy::struct_excessive_bools, reason = "each is a layer of its own, on or off")]
pub struct Layers {
    /// Past tracks.
    pub tracks: bool,
    /// Outlook ellipses.
    pub outlook: bool,
    /// Lines of equal 3 h pressure change.
    pub isallobars: bool,
    /// Where the expected surface wind converges.
    pub convergence: bool,
    /// Expected surface wind as arrows.
    pub wind: bool,
    /// Where the analysis is not to be trusted.
    pub error: bool,
    /// The reports of the hour.
    pub reports: bool,
    /// Meridians and parallels.
    pub graticule: bool,
}

impl Default for Layers {
    fn default() -> Self {
        Self {
            tracks: true,
            outlook: true,
            isallobars: false,
            convergence: false,
            wind: false,
            error: false,
            reports: true,
            graticule: false,
        }
    }
}

/// How the chart is looked at.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Chart {
    /// What stands in the middle; `None` is the middle of the region.
    pub centre: Option<Position>,
    /// Steps of magnification over the view that just holds the region.
    pub zoom: i32,
    /// The system that is kept in the middle.
    pub follow: Option<String>,
    /// The place that is read out.
    pub cursor: Option<Position>,
    /// Where the ruler starts.
    pub ruler: Option<Position>,
    /// The hour that is looked at; `None` is the newest.
    pub hour: Option<Hour>,
    /// What is drawn.
    pub layers: Layers,
}

impl Chart {
    /// Magnifies by some steps.
    pub fn zoom_by(&mut self, steps: i32) {
        self.zoom = self.zoom.saturating_add(steps).clamp(ZOOM_MIN, ZOOM_MAX);
    }

    /// The hour shown: the chosen one, else the newest.
    pub fn hour_shown(&self, picture: &Picture) -> Hour {
        self.hour.unwrap_or(picture.valid)
    }
}

/// Where a system is at an hour: on its track, in its outlook (the lead before and after joined by
/// a straight line), or nowhere.
pub fn system_at(system: &System, hour: Hour, valid: Hour) -> Option<Position> {
    if hour == valid {
        return Some(system.position);
    }
    if hour < valid {
        return system.track.iter().find(|point| point.hour == hour).map(|point| point.position);
    }
    let lead_h = hour.unix_h() - valid.unix_h();
    let mut before = (0, system.position);
    for point in &system.outlook {
        if point.lead_h >= lead_h {
            let share = (lead_h - before.0) as f64 / (point.lead_h - before.0).max(1) as f64;
            let (from, to) = (before.1, point.position);
            return Some(from.destination(from.bearing_deg(to), from.distance_km(to) * share));
        }
        before = (point.lead_h, point.position);
    }
    None
}

/// A window of whole cells onto the map.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct View {
    /// The map.
    pub projection: Projection,
    /// Map x of the left edge, m.
    pub left_m: f64,
    /// Map y of the upper edge, m.
    pub top_m: f64,
    /// Metres on the map for each dot.
    pub m_per_dot: f64,
    /// Columns of cells.
    pub columns: u16,
    /// Rows of cells.
    pub rows: u16,
}

impl View {
    /// The window of a pane of `columns` x `rows` cells. Its edges lie on whole cells, so that
    /// moving it does not change the pattern of the dots.
    pub fn of(chart: &Chart, picture: &Picture, columns: u16, rows: u16) -> Self {
        let grid = &picture.grid;
        let (across, down) = (f64::from(columns.max(1)) * 2.0, f64::from(rows.max(1)) * 4.0);
        let fit_m = fitting_m(grid, across, down);
        let m_per_dot = fit_m / 2.0_f64.powf(f64::from(chart.zoom) / 2.0);
        let middle = chart
            .follow
            .as_ref()
            .and_then(|name| picture.systems.iter().find(|system| system.name == *name))
            .and_then(|system| system_at(system, chart.hour_shown(picture), picture.valid))
            .or(chart.centre)
            .map_or_else(|| middle_m(grid), |place| grid.projection.forward(place));
        let snap = |edge_m: f64, cell_m: f64| whole_nearest(edge_m / cell_m) as f64 * cell_m;
        Self {
            projection: grid.projection,
            left_m: snap(middle.0 - across / 2.0 * m_per_dot, m_per_dot * DOTS_ACROSS),
            top_m: snap(middle.1 + down / 2.0 * m_per_dot, m_per_dot * DOTS_DOWN),
            m_per_dot,
            columns,
            rows,
        }
    }

    /// Dots from the left and from the top for map coordinates, m.
    pub fn dot(&self, x_m: f64, y_m: f64) -> (f64, f64) {
        ((x_m - self.left_m) / self.m_per_dot, (self.top_m - y_m) / self.m_per_dot)
    }

    /// Dots from the left and from the top for a place.
    pub fn dot_of(&self, place: Position) -> (f64, f64) {
        let (x_m, y_m) = self.projection.forward(place);
        self.dot(x_m, y_m)
    }

    /// The place at a dot.
    pub fn place(&self, dot_x: f64, dot_y: f64) -> Position {
        self.projection
            .inverse(self.left_m + dot_x * self.m_per_dot, self.top_m - dot_y * self.m_per_dot)
    }

    /// The place in the middle.
    pub fn middle(&self) -> Position {
        self.place(f64::from(self.columns), f64::from(self.rows) * 2.0)
    }

    /// Column and row of the cell a place is in, where it is in the window.
    pub fn cell_of(&self, place: Position) -> Option<(u16, u16)> {
        let (x, y) = self.dot_of(place);
        let cell = |dot: f64, dots: f64, count: u16| {
            let k = crate::quantity::whole_below(dot / dots);
            u16::try_from(k).ok().filter(|k| *k < count)
        };
        Some((cell(x, DOTS_ACROSS, self.columns)?, cell(y, DOTS_DOWN, self.rows)?))
    }

    /// The place in the middle of the cell that lies `columns` and `rows` from the one of `place`,
    /// kept inside the window.
    pub fn neighbour(&self, place: Position, columns: i32, rows: i32) -> Position {
        let (x, y) = self.dot_of(place);
        let step = |dot: f64, dots: f64, by: i32, count: u16| {
            let k = (dot / dots).floor() + f64::from(by);
            (k.clamp(0.0, f64::from(count.max(1)) - 1.0) + 0.5) * dots
        };
        self.place(step(x, DOTS_ACROSS, columns, self.columns), step(y, DOTS_DOWN, rows, self.rows))
    }

    /// Metres of true distance across one cell in the middle of the window.
    pub fn cell_width_m(&self) -> f64 {
        DOTS_ACROSS * self.m_per_dot / self.projection.scale(self.middle().latitude_deg())
    }
}

/// Metres for each dot at which the grid just fits.
fn fitting_m(grid: &Grid, across: f64, down: f64) -> f64 {
    let wide = (grid.columns.max(2) - 1) as f64 * grid.spacing_m;
    let high = (grid.rows.max(2) - 1) as f64 * grid.spacing_m;
    (wide / across).max(high / down).max(1.0)
}

fn middle_m(grid: &Grid) -> (f64, f64) {
    grid.map_at((grid.columns.max(1) - 1) as f64 / 2.0, (grid.rows.max(1) - 1) as f64 / 2.0)
}
