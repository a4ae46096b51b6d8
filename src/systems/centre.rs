//! Finding centres in one hour's analysis: extrema with a closed isobar, placed between grid points.

use std::sync::Arc;

use super::Kind;
use super::basin::{Basin, basins};
use super::strength::mean_laplacian_hpa_deg2;
use crate::analysis::HourAnalysis;
use crate::field::Grid;
use crate::instant::Hour;
use crate::quantity::index_nearest;
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
/// Up to this ratio an analysis that shows no centre is taken to say that there is none.
const TRUST_RATIO_MAX: f64 = 0.4;
/// Error of the pressure over error of its slope, m: set on rehearsed lows of 300 and 1,000 reports
/// an hour, so that about 68 in 100 of them lie within the stated error of place.
const ERROR_SCALE_M: f64 = 250_000.0;
/// Errors of rehearsed analyses over those stated, at centres and saddles.
const ERROR_EXCESS: f64 = 1.3;
/// Distance over which the errors of a centre and its saddle are alike, km.
const ERROR_ALIKE_KM: f64 = 400.0;
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
    /// Mean Laplacian within two degrees of latitude, hPa per degree of latitude squared
    /// (METHODS TRK-3).
    pub laplacian_hpa_deg2: Option<f64>,
    /// Shallower centres of the same system, deepest first.
    pub secondaries: Vec<Secondary>,
}

/// A second centre within a system: nearer than 300 km to the first, with a saddle of less than
/// 2 hPa between them (METHODS TRK-1).
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Secondary {
    /// Where.
    pub position: Position,
    /// Its pressure, hPa.
    pub pressure_hpa: f64,
}

/// Centres of an hour's analysis, found once and kept with it.
#[derive(Clone, PartialEq, Debug)]
pub struct HourCentres {
    /// The hour.
    pub hour: Hour,
    /// Its centres.
    pub centres: Vec<Centre>,
    /// The grid, and for each of its points whether the analysis can be trusted there: a centre
    /// that is not found there is not there. `None` where nothing is known of that.
    trust: Option<(Arc<Grid>, Vec<bool>)>,
}

impl HourCentres {
    /// Finds the centres of an analysis.
    pub fn of(analysis: &HourAnalysis) -> Self {
        let trusted = analysis.error_ratio.iter().map(|r| *r <= TRUST_RATIO_MAX).collect();
        let trust = Some((Arc::clone(&analysis.grid), trusted));
        Self { hour: analysis.hour, centres: centres(analysis), trust }
    }

    /// Centres that are known otherwise than from an analysis.
    pub const fn known(hour: Hour, centres: Vec<Centre>) -> Self {
        Self { hour, centres, trust: None }
    }

    /// Whether a centre at a place would have been found.
    pub fn trusted(&self, place: Position) -> bool {
        let Some((grid, trusted)) = &self.trust else { return false };
        if !grid.contains(place) {
            return false;
        }
        let (column, row) = grid.locate(place);
        let at = grid.index(
            index_nearest(column).min(grid.columns - 1),
            index_nearest(row).min(grid.rows - 1),
        );
        trusted.get(at).copied().unwrap_or(false)
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
        let host = kept.iter_mut().find(|other| {
            other.position.distance_km(centre.position) < ONE_SYSTEM_KM
                && depth_hpa < ONE_SYSTEM_SADDLE_HPA
        });
        if let Some(host) = host {
            let (position, pressure_hpa) = (centre.position, centre.pressure_hpa);
            host.secondaries.push(Secondary { position, pressure_hpa });
        } else if centre.radius_km >= least_km {
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
    let saddle = grid.position(basin.saddle % grid.columns, basin.saddle / grid.columns);
    let saddle_error_hpa =
        analysis.pressure_error_hpa.get(basin.saddle).copied().filter(|e| e.is_finite());
    let difference_error_hpa = error_of_difference_hpa(
        error_hpa,
        saddle_error_hpa.unwrap_or(error_hpa),
        position.distance_km(saddle),
    );
    Some(Centre {
        kind,
        position,
        position_error_km: position_error_km(point.hessian_pa_m2, error_hpa, sign, spacing_km),
        pressure_hpa,
        pressure_error_hpa: error_hpa,
        depth_hpa,
        last_closed_isobar_hpa: sign * basin.level,
        radius_km: (basin.points as f64 * spacing_km * spacing_km / std::f64::consts::PI).sqrt(),
        confidence: confidence(depth_hpa, ERROR_EXCESS * difference_error_hpa),
        laplacian_hpa_deg2: mean_laplacian_hpa_deg2(analysis, position),
        secondaries: Vec::new(),
    })
}

/// Error of the difference between two pressures of one analysis: near each other the errors are
/// alike and cancel, far from each other they add.
fn error_of_difference_hpa(one_hpa: f64, other_hpa: f64, distance_km: f64) -> f64 {
    let alike = (-0.5 * (distance_km / ERROR_ALIKE_KM).powi(2)).exp();
    (one_hpa * one_hpa + other_hpa * other_hpa - 2.0 * alike * one_hpa * other_hpa).max(0.0).sqrt()
}

/// Probability that a depth is more than its error could make of nothing.
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
