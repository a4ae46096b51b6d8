//! Where to draw the map: a box around the reports that does not jump with each of them.

use crate::field::Grid;
use crate::quantity::{index_nearest, wrap_180_deg, wrap_360_deg};
use crate::sphere::Position;

/// Edges lie on multiples of this, degrees.
const STEP_DEG: f64 = 5.0;
/// Least distance from the reports to the edge, degrees.
const MARGIN_DEG: f64 = 2.0;
/// Smallest extent of the box, degrees of latitude.
const EXTENT_MIN_DEG: f64 = 15.0;
/// A cell of [`STEP_DEG`] counts if it and its neighbours hold more than this share of all
/// reports, or this many reports; a misplaced report stands alone.
const ALONE: usize = 1;
/// Widest box, degrees of longitude: beyond it the whole turn is shown.
const TURN_DEG: f64 = 300.0;

/// A grid of at most `columns` x `rows` points over the region of the reports.
///
/// Edges are multiples of five degrees, at least two degrees off the reports, so that a new report
/// moves them seldom. A cell of five degrees with a single report and none in the cells around it is
/// left out where there are many reports: it may be misplaced. A region that holds a pole becomes a
/// cap, one that goes round the world the whole turn. Without reports: the whole turn between 70 S
/// and 70 N. The order of the positions does not matter.
pub fn fit_region(positions: &[Position], columns: usize, rows: usize) -> Grid {
    let (wide, high) = (cells(360.0), cells(180.0));
    let mut counts = vec![0_usize; wide * high];
    for place in positions {
        let i =
            index_nearest((wrap_360_deg(place.longitude_deg()) / STEP_DEG).floor()).min(wide - 1);
        let j = index_nearest(((place.latitude_deg() + 90.0) / STEP_DEG).floor()).min(high - 1);
        counts[j * wide + i] += 1;
    }
    let company = |i: usize, j: usize| {
        let mut sum = 0;
        for row in j.saturating_sub(2)..=(j + 2).min(high - 1) {
            // Near the poles a cell is narrow: look further round.
            let latitude = (row as f64 + 0.5) * STEP_DEG - 90.0;
            let reach = index_nearest(2.0 / latitude.to_radians().cos()).min(wide / 2);
            for step in 0..=2 * reach.min((wide - 1) / 2) {
                sum += counts[row * wide + (i + wide + step - reach.min((wide - 1) / 2)) % wide];
            }
        }
        sum
    };
    let many = positions.len() >= 12;
    let kept = |i: usize, j: usize| counts[j * wide + i] > 0 && (!many || company(i, j) > ALONE);
    let rows_kept: Vec<usize> = (0..high).filter(|&j| (0..wide).any(|i| kept(i, j))).collect();
    let columns_kept: Vec<bool> = (0..wide).map(|i| (0..high).any(|j| kept(i, j))).collect();
    let (Some(&first), Some(&last)) = (rows_kept.first(), rows_kept.last()) else {
        return Grid::fitted(-70.0, 70.0, -180.0, 180.0, columns, rows);
    };
    // The margin inside the outer cells decides whether one cell more is shown.
    let near = |j: usize, edge_deg: f64| {
        positions.iter().any(|place| {
            let inside = ((place.latitude_deg() + 90.0) / STEP_DEG).floor();
            index_nearest(inside).min(high - 1) == j
                && (place.latitude_deg() - edge_deg).abs() < MARGIN_DEG
        })
    };
    let mut south_deg = first as f64 * STEP_DEG - 90.0;
    let mut north_deg = (last + 1) as f64 * STEP_DEG - 90.0;
    if near(first, south_deg) {
        south_deg -= STEP_DEG;
    }
    if near(last, north_deg) {
        north_deg += STEP_DEG;
    }
    while north_deg - south_deg < EXTENT_MIN_DEG {
        south_deg -= STEP_DEG;
        if north_deg - south_deg < EXTENT_MIN_DEG {
            north_deg += STEP_DEG;
        }
    }
    let (south_deg, north_deg) = (south_deg.max(-90.0), north_deg.min(90.0));
    let (west_deg, span_deg) = longitudes(&columns_kept, f64::midpoint(south_deg, north_deg));
    let whole = span_deg > TURN_DEG;
    if whole && (south_deg >= 20.0 || north_deg <= -20.0) {
        // Round a pole: a cap down to the outermost report.
        let (south_deg, north_deg) =
            if south_deg > 0.0 { (south_deg, 90.0) } else { (-90.0, north_deg) };
        return Grid::fitted(south_deg, north_deg, -180.0, 180.0, columns, rows);
    }
    if whole {
        let (south_deg, north_deg) = (south_deg.max(-75.0), north_deg.min(80.0));
        return Grid::fitted(south_deg, north_deg, -180.0, 180.0, columns, rows);
    }
    let west_deg = wrap_180_deg(west_deg);
    Grid::fitted(south_deg, north_deg, west_deg, west_deg + span_deg, columns, rows)
}

/// Western edge and extent of the shortest arc that holds all kept columns, with a margin cell
/// on both sides where there is room.
fn longitudes(kept: &[bool], latitude_deg: f64) -> (f64, f64) {
    let count = kept.len();
    // The longest run of empty columns is left out.
    let run = |start: usize| (0..count).take_while(|step| !kept[(start + step) % count]).count();
    let (mut best, mut start) = (0, 0);
    for column in 0..count {
        let length = run(column);
        if length > best {
            (best, start) = (length, column);
        }
    }
    let margin = usize::from(best >= 4);
    let mut first = start + best - margin;
    let mut columns = count - best + 2 * margin;
    let least = EXTENT_MIN_DEG / latitude_deg.to_radians().cos().max(0.2);
    while columns as f64 * STEP_DEG < least && columns + 1 < count {
        first = (first + count - 1) % count;
        columns += 1;
        if (columns as f64) * STEP_DEG < least {
            columns += 1;
        }
    }
    ((first % count) as f64 * STEP_DEG, columns as f64 * STEP_DEG)
}

fn cells(extent_deg: f64) -> usize {
    index_nearest(extent_deg / STEP_DEG)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn scattered(count: u32, south: f64, north: f64, west: f64, span: f64) -> Vec<Position> {
        (0..count)
            .map(|k| {
                let (a, b) = (f64::from(k) * 0.618_034 % 1.0, f64::from(k) * 0.414_214 % 1.0);
                Position::clamped(south + (north - south) * a, west + span * b)
            })
            .collect()
    }

    #[track_caller]
    fn holds(grid: &Grid, places: &[Position]) {
        for place in places {
            assert!(grid.contains(*place), "{place:?} {grid:?}");
        }
        assert!(grid.columns <= 123 && grid.rows <= 103, "{} {}", grid.columns, grid.rows);
    }

    #[test]
    fn every_part_of_the_world_is_covered_without_distortion() {
        for (south, north, west, span) in [
            (32.0, 68.0, -62.0, 70.0),
            (-62.0, -31.0, 150.0, 80.0),
            (-18.0, 22.0, 100.0, 60.0),
            (62.0, 89.0, -180.0, 359.0),
            (-85.0, -55.0, -180.0, 359.0),
            (-60.0, 70.0, -180.0, 359.0),
            (48.0, 48.5, 10.0, 0.5),
        ] {
            let places = scattered(200, south, north, west, span);
            let grid = fit_region(&places, 121, 101);
            holds(&grid, &places);
            // The map's scale must not run away inside the box.
            let scales: Vec<f64> =
                places.iter().map(|p| grid.projection.scale(p.latitude_deg())).collect();
            let ratio = scales.iter().copied().fold(0.0, f64::max)
                / scales.iter().copied().fold(f64::INFINITY, f64::min);
            assert!(ratio < 4.5, "{south} {north}: {ratio}");
        }
    }

    #[test]
    fn one_more_report_does_not_move_the_map_and_a_misplaced_one_is_left_out() {
        let places = scattered(300, 32.5, 67.0, -62.0, 70.0);
        let grid = fit_region(&places, 121, 101);
        let mut more = places.clone();
        more.push(Position::clamped(40.0, -30.0));
        more.push(Position::clamped(-33.0, 151.0));
        more.push(Position::clamped(0.0, 0.0));
        assert_eq!(fit_region(&more, 121, 101), grid);
        more.reverse();
        assert_eq!(fit_region(&more, 121, 101), grid);
        let fewer = fit_region(&places[..150], 121, 101);
        assert_eq!(fewer, grid);
    }

    #[test]
    fn few_and_no_reports_give_a_map_too() {
        let one = [Position::clamped(-41.0, 179.9)];
        holds(&fit_region(&one, 121, 101), &one);
        let pole = [Position::clamped(90.0, 0.0)];
        holds(&fit_region(&pole, 121, 101), &pole);
        assert!(fit_region(&[], 121, 101).len() > 1000);
    }
}
