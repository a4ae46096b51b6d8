//! Finding centres in one hour's analysis: extrema with a closed isobar, placed between grid points.

use super::Kind;
use crate::analysis::HourAnalysis;
use crate::field::Grid;
use crate::sphere::Position;

/// Least depth of a centre to its last closed isobar, hPa (METHODS TRK-1, own rule).
const DEPTH_MIN_HPA: f64 = 1.0;
/// Least radius of a high, km: smaller ones are ripples (TRK-1).
const HIGH_RADIUS_MIN_KM: f64 = 300.0;
/// Least radius of a low, km: below it a centre is one report's doing.
const LOW_RADIUS_MIN_KM: f64 = 60.0;
/// Centres nearer than this with a shallow saddle are one system, km (TRK-1).
const ONE_SYSTEM_KM: f64 = 300.0;
/// Saddle above the shallower centre below which two near ones are one system, hPa (TRK-1).
const ONE_SYSTEM_SADDLE_HPA: f64 = 2.0;
/// Above this ratio of the analysis error to that of the first guess no centre is believed.
const ERROR_RATIO_MAX: f64 = 0.7;
/// Scale over which the error of an analysis is alike, m.
const ERROR_SCALE_M: f64 = 400_000.0;
/// Largest position error stated, km; beyond it the centre is only known to be thereabouts.
const POSITION_ERROR_MAX_KM: f64 = 400.0;
/// Steps of Newton's method at most; it settles in three or four where it settles at all.
const NEWTON_STEPS_MAX: usize = 12;

/// A centre found in one analysis.
#[derive(Clone, PartialEq, Debug)]
pub struct Centre {
    /// High or low.
    pub kind: Kind,
    /// Where.
    pub position: Position,
    /// Standard error of each coordinate, km.
    pub position_error_km: f64,
    /// Central pressure, hPa.
    pub pressure_hpa: f64,
    /// Its standard error, hPa.
    pub pressure_error_hpa: f64,
    /// Depth to the last closed isobar, hPa, positive for highs too.
    pub depth_hpa: f64,
    /// Pressure of the last closed isobar, hPa.
    pub last_closed_isobar_hpa: f64,
    /// Radius of a circle of the area inside it, km.
    pub radius_km: f64,
    /// Probability that it is real: that the depth is not the analysis error's doing.
    pub confidence: f64,
}

/// A local extremum with the level at which its basin runs over.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Basin {
    /// Index of the extremum.
    pub at: usize,
    /// Value there.
    pub value: f64,
    /// Level at which the flood reaches the edge, a missing value or a deeper basin.
    pub level: f64,
    /// Points inside just before that.
    pub points: usize,
}

/// Basins of a field by flooding from below, eight neighbours, the edge being deeper than all
/// (METHODS TRK-1). For peaks pass the field with its sign changed.
///
/// The points are taken in ascending order and joined; where two basins meet, the shallower one
/// ends, and its depth is known. Ties go by index, so the result is a function of the field.
pub fn basins(values: &[f64], columns: usize, rows: usize) -> Vec<Basin> {
    let mut order: Vec<usize> = (0..values.len()).filter(|at| values[*at].is_finite()).collect();
    order.sort_by(|one, other| values[*one].total_cmp(&values[*other]).then(one.cmp(other)));
    let mut forest = Forest { parent: vec![usize::MAX; values.len()] };
    // By root: where the basin began, its points, whether it has run over.
    let mut begun = vec![usize::MAX; values.len()];
    let mut points = vec![0_usize; values.len()];
    let mut over = vec![false; values.len()];
    let mut found = Vec::new();
    for &at in &order {
        forest.parent[at] = at;
        begun[at] = at;
        points[at] = 1;
        let (column, row) = (at % columns, at / columns);
        let edge = column == 0 || row == 0 || column + 1 == columns || row + 1 == rows;
        let mut outside = edge;
        for j in row.saturating_sub(1)..=(row + 1).min(rows - 1) {
            for i in column.saturating_sub(1)..=(column + 1).min(columns - 1) {
                let other = j * columns + i;
                if other == at {
                    continue;
                }
                if !values[other].is_finite() {
                    outside = true;
                    continue;
                }
                if forest.parent[other] == usize::MAX {
                    continue;
                }
                let (one, two) = (forest.root(at), forest.root(other));
                if one == two {
                    continue;
                }
                // The one that began lower goes on; a basin that has run over is the edge itself.
                let deeper = |x: usize, y: usize| {
                    let (bx, by) = (begun[x], begun[y]);
                    over[x]
                        || (!over[y]
                            && (values[bx], bx)
                                .partial_cmp(&(values[by], by))
                                .is_none_or(std::cmp::Ordering::is_le))
                };
                let (stays, ends) = if deeper(one, two) { (one, two) } else { (two, one) };
                if !over[ends] && begun[ends] != at {
                    let begin = begun[ends];
                    found.push(Basin {
                        at: begin,
                        value: values[begin],
                        level: values[at],
                        points: points[ends],
                    });
                }
                forest.parent[ends] = stays;
                points[stays] += points[ends];
            }
        }
        let root = forest.root(at);
        if outside && !over[root] {
            over[root] = true;
            let begin = begun[root];
            if begin != at {
                found.push(Basin {
                    at: begin,
                    value: values[begin],
                    level: values[at],
                    points: points[root] - 1,
                });
            }
        }
    }
    found.sort_by(|one, other| one.value.total_cmp(&other.value).then(one.at.cmp(&other.at)));
    found
}

struct Forest {
    parent: Vec<usize>,
}

impl Forest {
    fn root(&mut self, mut at: usize) -> usize {
        while self.parent[at] != at {
            // Halving the path keeps the trees flat.
            self.parent[at] = self.parent[self.parent[at]];
            at = self.parent[at];
        }
        at
    }
}

/// Centres of both kinds in an analysis: lows deepest first, then highs highest first.
///
/// A centre needs a closed isobar at least 1 hPa from it, a radius, and an analysis that can be
/// trusted there. Two near ones with a shallow saddle are one system; the deeper names it.
pub fn centres(analysis: &HourAnalysis) -> Vec<Centre> {
    let mut all = of_kind(analysis, Kind::Low);
    all.extend(of_kind(analysis, Kind::High));
    all
}

fn of_kind(analysis: &HourAnalysis, kind: Kind) -> Vec<Centre> {
    let grid = &analysis.grid;
    let sign = if kind == Kind::Low { 1.0 } else { -1.0 };
    let values: Vec<f64> = analysis.pressure_hpa.iter().map(|pressure| sign * pressure).collect();
    let mut kept: Vec<Centre> = Vec::new();
    for basin in basins(&values, grid.columns, grid.rows) {
        let depth_hpa = basin.level - basin.value;
        let trusted = analysis.error_ratio.get(basin.at).is_some_and(|r| *r <= ERROR_RATIO_MAX);
        if depth_hpa < DEPTH_MIN_HPA || !trusted {
            continue;
        }
        let Some(centre) = centre(analysis, kind, &basin, sign) else { continue };
        let least_km = if kind == Kind::Low { LOW_RADIUS_MIN_KM } else { HIGH_RADIUS_MIN_KM };
        let secondary = kept.iter().any(|other| {
            other.position.distance_km(centre.position) < ONE_SYSTEM_KM
                && depth_hpa < ONE_SYSTEM_SADDLE_HPA
        });
        if centre.radius_km >= least_km && !secondary {
            kept.push(centre);
        }
    }
    kept
}

fn centre(analysis: &HourAnalysis, kind: Kind, basin: &Basin, sign: f64) -> Option<Centre> {
    let grid = &analysis.grid;
    let (column, row) = (basin.at % grid.columns, basin.at / grid.columns);
    let start = grid.position(column, row);
    let spacing_km = grid.true_spacing_m(start.latitude_deg()) / 1000.0;
    let placed = newton(analysis, start, sign, spacing_km);
    let (position, pressure_hpa) = placed.unwrap_or_else(|| {
        let (x, y, value) = paraboloid(grid, &analysis.pressure_hpa, column, row);
        (grid.position_at(column as f64 + x, row as f64 + y), value)
    });
    let point = analysis.at(position)?;
    let error_hpa = point.pressure_error_hpa;
    let depth_hpa = sign * (sign * basin.level - pressure_hpa);
    Some(Centre {
        kind,
        position,
        position_error_km: position_error_km(point.hessian_pa_m2, error_hpa, sign, spacing_km),
        pressure_hpa,
        pressure_error_hpa: error_hpa,
        depth_hpa,
        last_closed_isobar_hpa: sign * basin.level,
        radius_km: (basin.points as f64 * spacing_km * spacing_km / std::f64::consts::PI).sqrt(),
        confidence: confidence(depth_hpa, error_hpa),
    })
}

/// Probability that a depth is more than the errors of centre and saddle could make of nothing;
/// the two errors are half alike, so that of their difference is about the error itself.
fn confidence(depth_hpa: f64, error_hpa: f64) -> f64 {
    normal_share(depth_hpa / error_hpa.max(0.05))
}

/// Share of a normal distribution that lies below `z` standard deviations.
pub fn normal_share(z: f64) -> f64 {
    0.5 * (1.0 + erf(z / std::f64::consts::SQRT_2))
}

/// The error function, to 1.5e-7 (Abramowitz and Stegun 1964, 7.1.26).
pub(super) fn erf(x: f64) -> f64 {
    let t = 1.0 / (1.0 + 0.327_591_1 * x.abs());
    let sum = t
        * (0.254_829_592
            + t * (-0.284_496_736
                + t * (1.421_413_741 + t * (-1.453_152_027 + t * 1.061_405_429))));
    (1.0 - sum * (-x * x).exp()) * x.signum()
}

/// Newton's method on the smooth surface of the analysis; `None` where it leaves the neighbourhood
/// of two grid steps, where the surface does not curve the right way, or where it does not settle.
fn newton(
    analysis: &HourAnalysis,
    start: Position,
    sign: f64,
    spacing_km: f64,
) -> Option<(Position, f64)> {
    let mut place = start;
    for _ in 0..NEWTON_STEPS_MAX {
        let point = analysis.at(place)?;
        let [hxx, hxy, hyy] = point.hessian_pa_m2.map(|part| sign * part);
        let [gx, gy] = point.gradient_pa_m.map(|part| sign * part);
        let determinant = hxx * hyy - hxy * hxy;
        if hxx + hyy <= 0.0 || determinant <= 0.0 {
            return None;
        }
        let mut east_km = -(hyy * gx - hxy * gy) / determinant / 1000.0;
        let mut north_km = -(hxx * gy - hxy * gx) / determinant / 1000.0;
        let length_km = east_km.hypot(north_km);
        if length_km > spacing_km {
            east_km *= spacing_km / length_km;
            north_km *= spacing_km / length_km;
        }
        place = place.offset(east_km, north_km);
        if place.distance_km(start) > 2.0 * spacing_km {
            return None;
        }
        if length_km < 0.01 {
            return Some((place, analysis.at(place)?.pressure_hpa));
        }
    }
    None
}

/// Standard error of a centre's place from that of the gradient, through the inverse Hessian.
fn position_error_km(hessian: [f64; 3], error_hpa: f64, sign: f64, spacing_km: f64) -> f64 {
    let [hxx, hxy, hyy] = hessian.map(|part| sign * part);
    let determinant = hxx * hyy - hxy * hxy;
    let gradient_error_pa_m = error_hpa * 100.0 / ERROR_SCALE_M;
    let square = (hxx * hxx + hyy * hyy + 2.0 * hxy * hxy) / (2.0 * determinant * determinant);
    let error_km = gradient_error_pa_m * square.sqrt() / 1000.0;
    if determinant > 0.0 && error_km.is_finite() {
        // The surface between grid points is a guess of its own: a tenth of the step.
        error_km.hypot(0.1 * spacing_km).min(POSITION_ERROR_MAX_KM)
    } else {
        POSITION_ERROR_MAX_KM
    }
}

/// Least-squares paraboloid through 3x3 points: place within a step of the middle, and value there
/// (METHODS TRK-2).
pub fn paraboloid(grid: &Grid, values: &[f64], column: usize, row: usize) -> (f64, f64, f64) {
    let middle = values[grid.index(column, row)];
    let inside = column > 0 && row > 0 && column + 1 < grid.columns && row + 1 < grid.rows;
    if !inside {
        return (0.0, 0.0, middle);
    }
    let (mut s, mut sx, mut sy, mut sxy, mut sxx, mut syy) = (0.0, 0.0, 0.0, 0.0, 0.0, 0.0);
    for j in 0..3 {
        for i in 0..3 {
            let value = values[grid.index(column + i - 1, row + j - 1)];
            let (x, y) = (i as f64 - 1.0, j as f64 - 1.0);
            s += value;
            sx += x * value;
            sy += y * value;
            sxy += x * y * value;
            sxx += x * x * value;
            syy += y * y * value;
        }
    }
    let (c1, c2, c4) = (sx / 6.0, sy / 6.0, sxy / 4.0);
    let (c3, c5) = (sxx / 2.0 - s / 3.0, syy / 2.0 - s / 3.0);
    let c0 = 5.0 * s / 9.0 - (sxx + syy) / 3.0;
    let determinant = 4.0 * c3 * c5 - c4 * c4;
    if determinant.abs() < 1e-12 {
        return (0.0, 0.0, middle);
    }
    let x = ((-2.0 * c5 * c1 + c4 * c2) / determinant).clamp(-1.0, 1.0);
    let y = ((-2.0 * c3 * c2 + c4 * c1) / determinant).clamp(-1.0, 1.0);
    (x, y, c0 + f64::midpoint(c1 * x, c2 * y))
}

#[cfg(test)]
mod tests;
