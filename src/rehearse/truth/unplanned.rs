//! Highs and lows that nobody planned: they arise where the planned ones meet.

use super::{DEPTH_MIN_HPA, TrueSystem, centre, depth_hpa, point};
use crate::instant::Instant;
use crate::rehearse::weather::Sky;
use crate::sphere::Position;

/// Columns of the search lattice round the earth: 1.25 degrees.
const COLUMNS: usize = 288;
/// Rows of it: from 85 degrees south to 85 degrees north.
const ROWS: usize = 137;
/// How far such a centre may move in an hour and still be the same, km.
const STEP_MAX_KM: f64 = 250.0;
/// Centres closer than this are one, km.
const APART_MIN_KM: f64 = 60.0;

fn place(row: usize, column: usize) -> Position {
    Position::clamped(-85.0 + 1.25 * row as f64, 1.25 * column as f64)
}

/// Adds the centres of an hour that are not `taken` to those of the hours before.
pub(super) fn add(
    sky: &Sky<'_>,
    time: Instant,
    taken: &[Position],
    unplanned: &mut Vec<TrueSystem>,
) {
    let mut found: Vec<Position> = taken.to_vec();
    for (start, low) in candidates(sky) {
        let Some(here) = centre(sky, start, low) else { continue };
        if found.iter().any(|other| other.distance_km(here) < APART_MIN_KM) {
            continue;
        }
        let depth = depth_hpa(sky, here, low);
        if depth < DEPTH_MIN_HPA {
            continue;
        }
        found.push(here);
        let kind = if low { "low" } else { "high" };
        let point = point(sky, time, here, depth);
        let before = point.time.plus(-1);
        let same = unplanned.iter_mut().find(|system| {
            system.kind == kind
                && system.points.last().is_some_and(|last| {
                    last.time == before && last.position().distance_km(here) <= STEP_MAX_KM
                })
        });
        if let Some(system) = same {
            system.points.push(point);
        } else {
            unplanned.push(TrueSystem {
                name: format!("unplanned {}", unplanned.len() + 1),
                kind: kind.to_owned(),
                points: vec![point],
            });
        }
    }
}

/// Lattice points that are the extreme of their eight neighbours, within reach of a system: the
/// background alone has none. True for a low.
fn candidates(sky: &Sky<'_>) -> Vec<(Position, bool)> {
    let mut lattice: Vec<Option<f64>> = Vec::with_capacity(ROWS * COLUMNS);
    for row in 0..ROWS {
        for column in 0..COLUMNS {
            let place = place(row, column);
            let unit = place.unit();
            let near = sky.moments.iter().any(|m| m.pressure_hpa(&unit).abs() > 0.0);
            lattice.push(near.then(|| sky.pressure_hpa(place)));
        }
    }
    let at = |row: usize, column: usize| {
        lattice.get(row * COLUMNS + column % COLUMNS).copied().flatten()
    };
    let mut candidates = Vec::new();
    for row in 1..ROWS - 1 {
        for column in 0..COLUMNS {
            let Some(middle) = at(row, column) else { continue };
            let around = [
                at(row - 1, column + COLUMNS - 1),
                at(row - 1, column),
                at(row - 1, column + 1),
                at(row, column + COLUMNS - 1),
                at(row, column + 1),
                at(row + 1, column + COLUMNS - 1),
                at(row + 1, column),
                at(row + 1, column + 1),
            ];
            let all = |holds: fn(f64, f64) -> bool| {
                around.iter().all(|other| other.is_some_and(|other| holds(other, middle)))
            };
            if all(|other, middle| other > middle) {
                candidates.push((place(row, column), true));
            } else if all(|other, middle| other < middle) {
                candidates.push((place(row, column), false));
            }
        }
    }
    candidates
}
