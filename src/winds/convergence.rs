//! Where air converges: areas on the grid, and the estimates from a few stations.

use super::{ConvergenceArea, Method, WindField};
use crate::analysis::HourAnalysis;
use crate::field::Grid;
use crate::quantity::index_nearest;
use crate::sphere::Position;

/// Weakest convergence that is listed, 1/s (typical synoptic values are 1e-6 to 1e-5, DIV-7).
const LEAST_PER_S: f64 = 1.0e-5;
/// Above this ratio of the analysis error to that of the first guess nothing is listed (ANA-5).
const ERROR_RATIO_MAX: f64 = 0.7;
/// Areas of one method nearer than this are one area, km.
const APART_KM: f64 = 500.0;
/// Grid points next to the edge that are left out.
const EDGE: usize = 3;
/// Depth of the layer whose convergence is taken to lift the air, m (DIV-5).
const LAYER_M: f64 = 1000.0;
/// Most areas listed by one method.
const AREAS_MAX: usize = 8;

/// A named place that areas are described from: a system.
#[derive(Clone, PartialEq, Debug)]
pub struct Landmark {
    /// Its name.
    pub name: String,
    /// Where it is.
    pub position: Position,
}

/// Areas of convergence by every method, strongest first.
///
/// `earlier` is the wind field three hours before on the same grid, for the trend. Nothing is
/// listed where the analysis is not to be trusted, nor within three points of the edge.
pub fn areas(
    analysis: &HourAnalysis,
    winds: &WindField,
    earlier: Option<&WindField>,
    landmarks: &[Landmark],
) -> Vec<ConvergenceArea> {
    let mut all = Vec::new();
    for method in [Method::Observed, Method::Friction, Method::Isallobaric] {
        let before = earlier.filter(|field| field.grid == winds.grid);
        all.extend(areas_of(analysis, method, of(winds, method), before, landmarks));
    }
    all.sort_by(|one, other| {
        one.divergence_per_s.total_cmp(&other.divergence_per_s).then(one.method.cmp(&other.method))
    });
    all
}

fn of(winds: &WindField, method: Method) -> &[f64] {
    match method {
        Method::Observed => &winds.divergence_observed_per_s,
        Method::Friction => &winds.divergence_friction_per_s,
        Method::Isallobaric => &winds.divergence_isallobaric_per_s,
    }
}

fn areas_of(
    analysis: &HourAnalysis,
    method: Method,
    values: &[f64],
    earlier: Option<&WindField>,
    landmarks: &[Landmark],
) -> Vec<ConvergenceArea> {
    let grid = &analysis.grid;
    let trusted = |at: usize| analysis.error_ratio.get(at).is_some_and(|r| *r <= ERROR_RATIO_MAX);
    let mut peaks: Vec<(usize, f64)> = Vec::new();
    for row in EDGE..grid.rows.saturating_sub(EDGE) {
        for column in EDGE..grid.columns.saturating_sub(EDGE) {
            let at = grid.index(column, row);
            let value = values[at];
            if value <= -LEAST_PER_S && trusted(at) && is_lowest(grid, values, column, row) {
                peaks.push((at, value));
            }
        }
    }
    peaks.sort_by(|one, other| one.1.total_cmp(&other.1).then(one.0.cmp(&other.0)));
    let mut areas: Vec<ConvergenceArea> = Vec::new();
    for (at, divergence_per_s) in peaks {
        let position = grid.position(at % grid.columns, at / grid.columns);
        let near = areas.iter().any(|area| area.position.distance_km(position) < APART_KM);
        if near || areas.len() >= AREAS_MAX {
            continue;
        }
        let trend_per_s = earlier
            .and_then(|field| strongest_near(grid, of(field, method), position))
            .map(|before| divergence_per_s - before);
        areas.push(ConvergenceArea {
            method,
            position,
            divergence_per_s,
            error_per_s: error_per_s(analysis, method, at),
            area_km2: area_km2(grid, values, at, divergence_per_s / 2.0),
            ascent_m_s: -divergence_per_s * LAYER_M,
            trend_per_s,
            place: place_in_words(position, landmarks),
        });
    }
    areas
}

fn is_lowest(grid: &Grid, values: &[f64], column: usize, row: usize) -> bool {
    let here = values[grid.index(column, row)];
    (row - 1..=row + 1).all(|j| {
        (column - 1..=column + 1).all(|i| {
            let other = values[grid.index(i, j)];
            (i, j) == (column, row) || !other.is_finite() || here <= other
        })
    })
}

/// The strongest convergence within 300 km in another field.
fn strongest_near(grid: &Grid, values: &[f64], place: Position) -> Option<f64> {
    let reach = 300_000.0 / grid.spacing_m * grid.projection.scale(place.latitude_deg());
    let (column, row) = grid.locate(place);
    let range = |middle: f64, count: usize| {
        index_nearest((middle - reach).max(0.0))..=index_nearest(middle + reach).min(count - 1)
    };
    let mut strongest: Option<f64> = None;
    for j in range(row, grid.rows) {
        for i in range(column, grid.columns) {
            let value = values[grid.index(i, j)];
            if value.is_finite() && strongest.is_none_or(|least| value < least) {
                strongest = Some(value);
            }
        }
    }
    strongest
}

/// Error of the divergence of a wind whose error is alike over some 400 km; the observed wind's
/// own error, or a share of the speed for the expected one, is not known better than this.
fn error_per_s(analysis: &HourAnalysis, method: Method, at: usize) -> Option<f64> {
    let wind_error_m_s = match method {
        Method::Observed => analysis.wind_error_m_s.get(at).copied()?,
        Method::Friction | Method::Isallobaric => return None,
    };
    wind_error_m_s.is_finite().then_some(2.0 * wind_error_m_s / 400_000.0)
}

/// Area, km2, of the points joined to `peak` whose value is at most `level`.
fn area_km2(grid: &Grid, values: &[f64], peak: usize, level: f64) -> f64 {
    let mut seen = vec![false; values.len()];
    let mut waiting = vec![peak];
    let mut area_km2 = 0.0;
    while let Some(at) = waiting.pop() {
        if std::mem::replace(&mut seen[at], true) || values[at].is_nan() || values[at] > level {
            continue;
        }
        let (column, row) = (at % grid.columns, at / grid.columns);
        let spacing_m = grid.true_spacing_m(grid.position(column, row).latitude_deg());
        area_km2 += (spacing_m / 1000.0).powi(2);
        if column > 0 {
            waiting.push(at - 1);
        }
        if column + 1 < grid.columns {
            waiting.push(at + 1);
        }
        if row > 0 {
            waiting.push(at - grid.columns);
        }
        if row + 1 < grid.rows {
            waiting.push(at + grid.columns);
        }
    }
    area_km2
}

/// `180 nm NE of L15a`: distance and bearing from the nearest landmark.
pub fn place_in_words(place: Position, landmarks: &[Landmark]) -> String {
    let nearest = landmarks.iter().min_by(|one, other| {
        place.distance_km(one.position).total_cmp(&place.distance_km(other.position))
    });
    nearest.map_or_else(String::new, |landmark| {
        let distance_nm = crate::quantity::nm_from_km(landmark.position.distance_km(place)).round();
        if distance_nm < 30.0 {
            return format!("at {}", landmark.name);
        }
        let bearing_deg = landmark.position.bearing_deg(place);
        format!("{distance_nm:.0} nm {} of {}", compass_point(bearing_deg), landmark.name)
    })
}

/// The nearest of the sixteen points of the compass.
pub fn compass_point(bearing_deg: f64) -> &'static str {
    const POINTS: [&str; 16] = [
        "N", "NNE", "NE", "ENE", "E", "ESE", "SE", "SSE", "S", "SSW", "SW", "WSW", "W", "WNW",
        "NW", "NNW",
    ];
    POINTS[index_nearest(crate::quantity::wrap_360_deg(bearing_deg) / 22.5) % 16]
}

/// Divergence and its like from a few stations, with the standard error that winds of a given
/// error give it.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct StationDivergence {
    /// Divergence, 1/s.
    pub divergence_per_s: f64,
    /// Vorticity, 1/s.
    pub vorticity_per_s: f64,
    /// Stretching deformation, 1/s.
    pub stretching_per_s: f64,
    /// Shearing deformation, 1/s.
    pub shearing_per_s: f64,
    /// Standard error of the divergence, 1/s.
    pub error_per_s: f64,
}

/// A station of a local estimate: offsets from a common point, m, and wind, m/s.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct LocalWind {
    /// Towards east, m.
    pub x_m: f64,
    /// Towards north, m.
    pub y_m: f64,
    /// Towards east, m/s.
    pub u_m_s: f64,
    /// Towards north, m/s.
    pub v_m_s: f64,
}

/// Fits a linear wind field to three or more stations by least squares; through three it passes
/// exactly and equals the triangle method of Bellamy (1949). METHODS DIV-3, DIV-4.
///
/// `None` for fewer than three stations or stations in one line.
pub fn from_stations(stations: &[LocalWind], wind_error_m_s: f64) -> Option<StationDivergence> {
    if stations.len() < 3 {
        return None;
    }
    let count = stations.len() as f64;
    let mean = |of: fn(&LocalWind) -> f64| stations.iter().map(of).sum::<f64>() / count;
    let (x0, y0) = (mean(|s| s.x_m), mean(|s| s.y_m));
    let (u0, v0) = (mean(|s| s.u_m_s), mean(|s| s.v_m_s));
    let (mut sxx, mut sxy, mut syy) = (0.0, 0.0, 0.0);
    let (mut sxu, mut syu, mut sxv, mut syv) = (0.0, 0.0, 0.0, 0.0);
    for station in stations {
        let (x, y) = (station.x_m - x0, station.y_m - y0);
        let (u, v) = (station.u_m_s - u0, station.v_m_s - v0);
        sxx += x * x;
        sxy += x * y;
        syy += y * y;
        sxu += x * u;
        syu += y * u;
        sxv += x * v;
        syv += y * v;
    }
    let determinant = sxx * syy - sxy * sxy;
    if determinant <= 1e-9 * sxx * syy || !determinant.is_finite() {
        return None;
    }
    let solve = |sx: f64, sy: f64| {
        ((syy * sx - sxy * sy) / determinant, (sxx * sy - sxy * sx) / determinant)
    };
    let ((ux, uy), (vx, vy)) = (solve(sxu, syu), solve(sxv, syv));
    Some(StationDivergence {
        divergence_per_s: ux + vy,
        vorticity_per_s: vx - uy,
        stretching_per_s: ux - vy,
        shearing_per_s: vx + uy,
        error_per_s: wind_error_m_s * ((sxx + syy) / determinant).sqrt(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn station(x_km: f64, y_km: f64, u_m_s: f64, v_m_s: f64) -> LocalWind {
        LocalWind { x_m: x_km * 1000.0, y_m: y_km * 1000.0, u_m_s, v_m_s }
    }

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    /// METHODS CHK-130 to CHK-132: formula, least squares, Bellamy (1949) and change of area agree.
    #[test]
    fn a_triangle_of_stations() {
        let triangle = [
            station(0.0, 0.0, 5.0, 2.0),
            station(200.0, 0.0, -3.0, 4.0),
            station(80.0, 160.0, 1.0, -6.0),
        ];
        let found = from_stations(&triangle, 2.0).expect("a triangle");
        near(found.divergence_per_s, -9.5e-5, 1e-12);
        near(found.vorticity_per_s, 1.5e-5, 1e-12);
        near(found.stretching_per_s, 1.5e-5, 1e-12);
        near(found.shearing_per_s, 5.0e-6, 1e-12);
        near(found.error_per_s, 2.091_65e-5, 1e-9);
        let half = 100.0 * 3.0_f64.sqrt();
        let even = [
            station(0.0, 0.0, 0.0, 0.0),
            station(200.0, 0.0, 0.0, 0.0),
            station(100.0, half, 0.0, 0.0),
        ];
        near(from_stations(&even, 2.0).expect("a triangle").error_per_s, 2.0e-5, 1e-9);
    }

    /// METHODS CHK-133.
    #[test]
    fn seven_stations_by_least_squares() {
        let places = [
            (0.0, 0.0),
            (150.0, 20.0),
            (-120.0, 60.0),
            (40.0, 170.0),
            (-60.0, -140.0),
            (130.0, -90.0),
            (-160.0, -50.0),
        ];
        let stations = places.map(|(x, y)| {
            let (x_m, y_m) = (x * 1000.0, y * 1000.0);
            station(x, y, 2e-5 * x_m - 4e-5 * y_m, 3e-5 * x_m - 5e-5 * y_m)
        });
        let found = from_stations(&stations, 2.0).expect("a fit");
        near(found.divergence_per_s, -3.0e-5, 1e-9);
        near(found.vorticity_per_s, 7.0e-5, 1e-9);
        near(found.error_per_s, 1.0580e-5, 1e-9);
        let line = [0.0, 1.0, 2.0].map(|k| station(k, k, 1.0, 1.0));
        assert_eq!(from_stations(&line, 2.0), None);
    }

    #[test]
    fn places_in_words() {
        let low = Landmark { name: "L15a".to_owned(), position: Position::clamped(55.0, -20.0) };
        let place = low.position.destination(45.0, 333.36);
        assert_eq!(place_in_words(place, std::slice::from_ref(&low)), "180 nm NE of L15a");
        assert_eq!(place_in_words(low.position, &[low]), "at L15a");
        assert_eq!(place_in_words(place, &[]), "");
        assert_eq!(compass_point(359.0), "N");
    }
}
