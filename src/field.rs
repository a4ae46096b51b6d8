//! Regular grids on a conformal map, and fields of numbers on them.

use serde::{Deserialize, Serialize};

use crate::projection::Projection;
use crate::quantity::index_nearest;
use crate::sphere::Position;

pub mod derivative;
pub mod spline;

/// A regular grid on a conformal map: `columns` x `rows` points, `spacing_m` apart on the map.
///
/// Values on it are row-major, the first row at the bottom of the map, the first column at the
/// left: index = row * columns + column.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Grid {
    /// The map.
    pub projection: Projection,
    /// Map x of the first column, m.
    pub x0_m: f64,
    /// Map y of the first row, m.
    pub y0_m: f64,
    /// Distance between neighbours on the map, m.
    pub spacing_m: f64,
    /// Points in a row.
    pub columns: usize,
    /// Points in a column.
    pub rows: usize,
}

/// A place on the edge may fall outside by rounding: so many steps are forgiven.
const EDGE_STEPS: f64 = 1e-6;

impl Grid {
    /// A grid of about `columns` x `rows` points over the box, spaced evenly on a fitted map.
    ///
    /// `west_deg` to `east_deg` runs eastward and may cross the date line. The spacing is the
    /// larger one that covers the box with the given number of points; the returned grid may have
    /// fewer rows or columns.
    pub fn fitted(
        south_deg: f64,
        north_deg: f64,
        west_deg: f64,
        east_deg: f64,
        columns: usize,
        rows: usize,
    ) -> Self {
        let span_deg = if (east_deg - west_deg).abs() >= 360.0 {
            360.0
        } else {
            crate::quantity::wrap_360_deg(east_deg - west_deg)
        };
        let central_longitude_deg = crate::quantity::wrap_180_deg(west_deg + span_deg / 2.0);
        let projection = Projection::fitted(south_deg, north_deg, central_longitude_deg);
        let (mut x_min, mut x_max) = (f64::INFINITY, f64::NEG_INFINITY);
        let (mut y_min, mut y_max) = (f64::INFINITY, f64::NEG_INFINITY);
        for i in 0..=72 {
            let along = f64::from(i) / 72.0;
            let longitude_deg = west_deg + span_deg * along;
            let latitude_deg = south_deg + (north_deg - south_deg) * along;
            // The edges of a whole turn meet; a hair's breadth keeps them apart on the map.
            let (west, east) = (west_deg + 1e-6, west_deg + span_deg - 1e-6);
            for place in [
                Position::clamped(south_deg, longitude_deg.clamp(west, east)),
                Position::clamped(north_deg, longitude_deg.clamp(west, east)),
                Position::clamped(latitude_deg, west),
                Position::clamped(latitude_deg, east),
            ] {
                let (x_m, y_m) = projection.forward(place);
                x_min = x_min.min(x_m);
                x_max = x_max.max(x_m);
                y_min = y_min.min(y_m);
                y_max = y_max.max(y_m);
            }
        }
        let steps = |count: usize| (count.max(2) - 1) as f64;
        let spacing_m =
            ((x_max - x_min) / steps(columns)).max((y_max - y_min) / steps(rows)).max(1000.0);
        let fit = |extent_m: f64| index_nearest((extent_m / spacing_m).ceil()).max(2) + 1;
        let (columns, rows) = (fit(x_max - x_min), fit(y_max - y_min));
        let x0_m = f64::midpoint(x_min, x_max) - spacing_m * steps(columns) / 2.0;
        let y0_m = f64::midpoint(y_min, y_max) - spacing_m * steps(rows) / 2.0;
        Self { projection, x0_m, y0_m, spacing_m, columns, rows }
    }

    /// Number of points.
    pub const fn len(&self) -> usize {
        self.columns * self.rows
    }

    /// Whether the grid has no point.
    pub const fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Index of a point in a row-major field.
    pub const fn index(&self, column: usize, row: usize) -> usize {
        row * self.columns + column
    }

    /// Map coordinates of a fractional grid place, m.
    pub fn map_at(&self, column: f64, row: f64) -> (f64, f64) {
        (self.x0_m + column * self.spacing_m, self.y0_m + row * self.spacing_m)
    }

    /// The place of a fractional grid place.
    pub fn position_at(&self, column: f64, row: f64) -> Position {
        let (x_m, y_m) = self.map_at(column, row);
        self.projection.inverse(x_m, y_m)
    }

    /// The place of a grid point.
    pub fn position(&self, column: usize, row: usize) -> Position {
        self.position_at(column as f64, row as f64)
    }

    /// Fractional column and row of a place; may lie outside the grid.
    pub fn locate(&self, place: Position) -> (f64, f64) {
        let (x_m, y_m) = self.projection.forward(place);
        ((x_m - self.x0_m) / self.spacing_m, (y_m - self.y0_m) / self.spacing_m)
    }

    /// Whether a place lies on the grid.
    pub fn contains(&self, place: Position) -> bool {
        let (column, row) = self.locate(place);
        (-EDGE_STEPS..=(self.columns - 1) as f64 + EDGE_STEPS).contains(&column)
            && (-EDGE_STEPS..=(self.rows - 1) as f64 + EDGE_STEPS).contains(&row)
    }

    /// True distance between neighbours at a latitude, m.
    pub fn true_spacing_m(&self, latitude_deg: f64) -> f64 {
        self.spacing_m / self.projection.scale(latitude_deg)
    }

    /// Bilinear value of a row-major field at a place; `None` outside the grid or where one of
    /// the four neighbours is NaN.
    pub fn sample(&self, values: &[f64], place: Position) -> Option<f64> {
        let (column, row) = self.locate(place);
        self.sample_at(values, column, row)
    }

    /// Bilinear value at a fractional grid place; `None` outside or next to a NaN.
    pub fn sample_at(&self, values: &[f64], column: f64, row: f64) -> Option<f64> {
        let (last_column, last_row) = ((self.columns - 1) as f64, (self.rows - 1) as f64);
        let inside = column >= -EDGE_STEPS
            && row >= -EDGE_STEPS
            && column <= last_column + EDGE_STEPS
            && row <= last_row + EDGE_STEPS;
        if !inside {
            return None;
        }
        let (column, row) = (column.clamp(0.0, last_column), row.clamp(0.0, last_row));
        let i = index_nearest(column.floor()).min(self.columns - 2);
        let j = index_nearest(row.floor()).min(self.rows - 2);
        let (s, t) = (column - i as f64, row - j as f64);
        let at = |i, j| values.get(self.index(i, j)).copied().unwrap_or(f64::NAN);
        let value = (1.0 - t) * ((1.0 - s) * at(i, j) + s * at(i + 1, j))
            + t * ((1.0 - s) * at(i, j + 1) + s * at(i + 1, j + 1));
        value.is_finite().then_some(value)
    }
}
