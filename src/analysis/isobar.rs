//! Isobars: joined lines of equal pressure in grid coordinates.
//!
//! Each cell that a level crosses gives one or two directed pieces, with the lower pressure on the
//! left of the map; the pieces are joined edge by edge. A cell with its corners crosswise above and
//! below (a saddle) is decided by the mean of its corners. Lines run along straight pieces between
//! the crossings, which are placed linearly along the edges.
//! Source: Lorensen and Cline (1987), reduced to two dimensions.

use crate::field::Grid;

/// One line of equal pressure.
#[derive(Clone, PartialEq, Debug)]
pub struct Isobar {
    /// Its pressure, hPa.
    pub level_hpa: f64,
    /// Whether it closes on itself; the first point is then not repeated at the end.
    pub closed: bool,
    /// Fractional column and row of each point; lower pressure lies on the left.
    pub points: Vec<[f64; 2]>,
    /// Error ratio of the analysis at each point: above 0.7 the line is to be drawn broken.
    pub error_ratio: Vec<f64>,
}

/// The multiples of `interval_hpa` from `min_hpa` to `max_hpa`, ascending; none where the interval
/// is not positive or a bound not finite.
pub fn levels(interval_hpa: f64, min_hpa: f64, max_hpa: f64) -> Vec<f64> {
    let sound = interval_hpa > 0.0 && min_hpa.is_finite() && max_hpa.is_finite();
    if !sound {
        return Vec::new();
    }
    let first = crate::quantity::whole_nearest((min_hpa / interval_hpa).ceil());
    let last = crate::quantity::whole_below(max_hpa / interval_hpa);
    // No chart has more than some hundred isobars; a wild field must not fill the memory.
    (first..=last.min(first.saturating_add(500))).map(|k| k as f64 * interval_hpa).collect()
}

/// The isobars of a field at ascending levels: by level, open lines before closed ones, in the
/// order of the edges they start on. Cells with a value that is not finite are left out.
///
/// `error_ratio` is a field on the same grid; where it is shorter, the ratio is 1.
pub fn isobars(
    grid: &Grid,
    pressure_hpa: &[f64],
    error_ratio: &[f64],
    levels_hpa: &[f64],
) -> Vec<Isobar> {
    if grid.columns < 2 || grid.rows < 2 || pressure_hpa.len() < grid.len() {
        return Vec::new();
    }
    let tracer = Tracer { grid, pressure_hpa, error_ratio };
    let mut pieces: Vec<Vec<[usize; 2]>> = vec![Vec::new(); levels_hpa.len()];
    for row in 0..grid.rows - 1 {
        for column in 0..grid.columns - 1 {
            tracer.cell(column, row, levels_hpa, &mut pieces);
        }
    }
    let mut scratch = Scratch::new(2 * grid.len());
    let mut out = Vec::new();
    for (level_hpa, pieces) in levels_hpa.iter().zip(&pieces) {
        tracer.join(*level_hpa, pieces, &mut scratch, &mut out);
    }
    out
}

/// Marks of an edge that no piece leaves.
const NONE: usize = usize::MAX;

struct Scratch {
    /// The edge that the piece from this edge leads to.
    next: Vec<usize>,
    /// Whether a piece leads to this edge.
    reached: Vec<bool>,
}

impl Scratch {
    fn new(edges: usize) -> Self {
        Self { next: vec![NONE; edges], reached: vec![false; edges] }
    }
}

struct Tracer<'a> {
    grid: &'a Grid,
    pressure_hpa: &'a [f64],
    error_ratio: &'a [f64],
}

impl Tracer<'_> {
    /// The pieces of one cell at every level that crosses it.
    fn cell(&self, column: usize, row: usize, levels: &[f64], pieces: &mut [Vec<[usize; 2]>]) {
        let base = self.grid.index(column, row);
        let wide = self.grid.columns;
        // Corners counterclockwise from the lower left; edge k runs from corner k to corner k + 1.
        let corners = [base, base + 1, base + wide + 1, base + wide];
        let values = corners.map(|k| self.pressure_hpa[k]);
        let low = values.iter().copied().fold(f64::INFINITY, f64::min);
        let high = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        // A corner on the level counts as above it.
        let first = levels.partition_point(|level| *level <= low);
        let Some(level) = levels.get(first) else { return };
        if *level > high || !values.iter().all(|value| value.is_finite()) {
            return;
        }
        // Edges along x are even, edges along y odd; both are named by their lower or left point.
        let edges = [2 * base, 2 * (base + 1) + 1, 2 * (base + wide), 2 * base + 1];
        for (index, level) in levels.iter().enumerate().skip(first) {
            if *level > high {
                break;
            }
            let above = values.map(|value| value >= *level);
            let saddle_above = || values.iter().sum::<f64>() / 4.0 >= *level;
            // Going round counterclockwise, the level is crossed upwards on some edges and downwards
            // on the same number. A piece leads from an upward crossing, along the border of the
            // high part, to a downward one, with the low part on its left.
            let up: [bool; 4] = std::array::from_fn(|k| !above[k] && above[(k + 1) % 4]);
            let down: [bool; 4] = std::array::from_fn(|k| above[k] && !above[(k + 1) % 4]);
            let twice = up.iter().filter(|up| **up).count() == 2;
            for from in (0..4).filter(|k| up[*k]) {
                // Where the saddle is high, the low corners are cut off one by one: the border of
                // a low corner runs from the downward crossing before it, so the next downward
                // crossing backwards belongs to this upward one; else the next one forwards.
                let backwards = twice && saddle_above();
                let to = (1..4)
                    .map(|step| if backwards { (from + 4 - step) % 4 } else { (from + step) % 4 })
                    .find(|k| down[*k]);
                if let Some(to) = to {
                    pieces[index].push([edges[from], edges[to]]);
                }
            }
        }
    }

    /// Joins the pieces of one level.
    fn join(
        &self,
        level: f64,
        pieces: &[[usize; 2]],
        scratch: &mut Scratch,
        out: &mut Vec<Isobar>,
    ) {
        for [from, to] in pieces {
            scratch.next[*from] = *to;
            scratch.reached[*to] = true;
        }
        let mut trace = |start: usize, scratch: &mut Scratch| {
            let (mut points, mut ratios) = (Vec::new(), Vec::new());
            let mut edge = start;
            // Ends: each step takes one piece away.
            loop {
                let (point, ratio) = self.crossing(level, edge);
                points.push(point);
                ratios.push(ratio);
                let next = std::mem::replace(&mut scratch.next[edge], NONE);
                if next == NONE || next == start {
                    let closed = next == start;
                    out.push(Isobar { level_hpa: level, closed, points, error_ratio: ratios });
                    return;
                }
                edge = next;
            }
        };
        for [from, _] in pieces {
            if !scratch.reached[*from] {
                trace(*from, scratch);
            }
        }
        for [from, _] in pieces {
            if scratch.next[*from] != NONE {
                trace(*from, scratch);
            }
        }
        for [_, to] in pieces {
            scratch.reached[*to] = false;
        }
    }

    /// Where the level crosses an edge, and the error ratio there.
    fn crossing(&self, level: f64, edge: usize) -> ([f64; 2], f64) {
        let base = edge / 2;
        let upright = edge % 2 == 1;
        let other = if upright { base + self.grid.columns } else { base + 1 };
        let (a, b) = (self.pressure_hpa[base], self.pressure_hpa[other]);
        // One end is above the level and the other is not, so that they differ.
        let along = ((level - a) / (b - a)).clamp(0.0, 1.0);
        let (column, row) = (base % self.grid.columns, base / self.grid.columns);
        let (x, y) = (column as f64, row as f64);
        let ratio = |k: usize| self.error_ratio.get(k).copied().unwrap_or(1.0);
        let point = if upright { [x, y + along] } else { [x + along, y] };
        (point, ratio(base) * (1.0 - along) + ratio(other) * along)
    }
}

#[cfg(test)]
#[expect(clippy::float_cmp, reason = "these values are exact in binary")]
mod tests {
    use super::*;
    use crate::projection::Projection;

    fn grid(columns: usize, rows: usize) -> Grid {
        let projection = Projection::lambert(35.0, 65.0, 50.0, 0.0);
        Grid { projection, x0_m: 0.0, y0_m: 0.0, spacing_m: 1e5, columns, rows }
    }

    fn field(grid: &Grid, f: impl Fn(f64, f64) -> f64) -> Vec<f64> {
        (0..grid.len()).map(|k| f((k % grid.columns) as f64, (k / grid.columns) as f64)).collect()
    }

    /// Twice the signed area, positive counterclockwise.
    fn area(points: &[[f64; 2]]) -> f64 {
        (0..points.len())
            .map(|k| {
                let ([x0, y0], [x1, y1]) = (points[k], points[(k + 1) % points.len()]);
                x0 * y1 - x1 * y0
            })
            .sum()
    }

    #[test]
    fn levels_are_the_multiples_within_the_range() {
        assert_eq!(levels(4.0, 991.0, 1004.0), [992.0, 996.0, 1000.0, 1004.0]);
        assert!(levels(0.0, 990.0, 1000.0).is_empty());
        assert!(levels(4.0, f64::NAN, 1000.0).is_empty());
    }

    #[test]
    fn a_round_low_gives_one_closed_line_with_the_low_on_its_left() {
        let grid = grid(21, 21);
        let values = field(&grid, |x, y| 1000.0 + (x - 10.0).powi(2) + (y - 10.0).powi(2));
        let lines = isobars(&grid, &values, &[], &[1036.0]);
        assert_eq!(lines.len(), 1);
        let line = &lines[0];
        assert!(line.closed && area(&line.points) > 0.0);
        for [x, y] in &line.points {
            let radius = (x - 10.0).hypot(y - 10.0);
            assert!((radius - 6.0).abs() < 0.03, "{radius}");
        }
        // Area of a circle of radius 6: the polygon's is a little smaller.
        assert!((area(&line.points) / 2.0 - 113.1).abs() < 1.5, "{}", area(&line.points) / 2.0);
    }

    #[test]
    fn a_slope_gives_open_lines_and_a_hole_breaks_them() {
        let grid = grid(11, 9);
        let mut values = field(&grid, |x, _| 1000.0 + x);
        let lines = isobars(&grid, &values, &vec![0.25; grid.len()], &[1002.0, 1004.5, 1020.0]);
        assert_eq!(lines.len(), 2);
        for (line, x) in lines.iter().zip([2.0, 4.5]) {
            assert!(!line.closed && line.points.len() == 9);
            // Low pressure lies to the west, on the left of a line that runs north.
            assert_eq!(line.points[0], [x, 0.0]);
            assert_eq!(line.points[8], [x, 8.0]);
            assert!(line.error_ratio.iter().all(|ratio| *ratio == 0.25));
        }
        values[grid.index(4, 4)] = f64::NAN;
        let broken = isobars(&grid, &values, &[], &[1004.5]);
        assert_eq!(broken.len(), 2);
    }

    #[test]
    fn a_saddle_is_decided_by_its_middle_and_no_crossing_is_lost() {
        let grid = grid(2, 2);
        for (values, pairs) in [
            // Low corners lower left and upper right; the middle is high: they are cut off apart.
            ([0.0, 10.0, 9.0, 1.0], 2),
            ([0.0, 6.0, 6.0, 1.0], 2),
        ] {
            let lines = isobars(&grid, &values, &[], &[4.0]);
            assert_eq!(lines.len(), pairs);
            let middle_above = values.iter().sum::<f64>() / 4.0 >= 4.0;
            for line in &lines {
                let ([x0, y0], [x1, y1]) = (line.points[0], line.points[1]);
                // The corner that this piece cuts off, on the side it bulges to.
                let corner = [f64::from(x0 + x1 > 1.0), f64::from(y0 + y1 > 1.0)];
                let index = usize::from(corner[0] == 1.0) + 2 * usize::from(corner[1] == 1.0);
                assert_eq!(values[index] < 4.0, middle_above);
                // The low side is on the left.
                let left = (x1 - x0) * (corner[1] - y0) - (y1 - y0) * (corner[0] - x0) > 0.0;
                assert_eq!(left, values[index] < 4.0);
            }
        }
    }

    #[test]
    fn every_crossing_of_a_rough_field_is_on_exactly_one_line() {
        let grid = grid(40, 30);
        let values = field(&grid, |x, y| 1000.0 + 20.0 * ((x * 1.7).sin() + (y * 2.3 + x).cos()));
        let all = levels(4.0, 960.0, 1040.0);
        let lines = isobars(&grid, &values, &[], &all);
        for level in &all {
            let mut expected = 0;
            for k in 0..grid.len() {
                let (column, row) = (k % grid.columns, k / grid.columns);
                let crosses = |other: usize| (values[k] >= *level) != (values[other] >= *level);
                expected += usize::from(column + 1 < grid.columns && crosses(k + 1));
                expected += usize::from(row + 1 < grid.rows && crosses(k + grid.columns));
            }
            let found: usize = lines
                .iter()
                .filter(|line| line.level_hpa == *level)
                .map(|line| line.points.len())
                .sum();
            assert_eq!(found, expected, "{level}");
        }
    }
}
