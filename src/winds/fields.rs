//! The winds at a point and over the whole grid of an hour.

use std::sync::Arc;

use super::balance::{
    self, GEOSTROPHIC_LATITUDE_MIN_DEG, GRADIENT_LATITUDE_MIN_DEG, LOW_LATITUDE_DEG,
};
use super::land::is_land;
use super::surface_layer::{FARM_LAND, Surface, Table, turned};
use super::{PointWinds, WindField};
use crate::analysis::{HourAnalysis, PointAnalysis};
use crate::field::Grid;
use crate::field::derivative::{divergence_and_vorticity, laplacian};
use crate::quantity::coriolis_per_s;
use crate::sphere::Position;

/// Most that a gradient wind is believed to exceed the geostrophic one. The theory allows twice as
/// much, but so near its limit the speed hangs on a curvature that no analysis knows: against the
/// true wind of invented weather the limit leaves a quarter of the false gales and misses no more
/// (`tests/suite/winds_truth.rs`). Own rule.
const ANTICYCLONIC_RATIO_MAX: f64 = 1.3;
/// Distance beyond which a system's motion no longer bends the path of the air, km (WND-4).
const MOTION_REACH_KM: f64 = 1000.0;
/// Scale over which the error of an analysis is alike, m: turns its error into one of the gradient.
const ERROR_SCALE_M: f64 = 400_000.0;
/// Scatter of the drag law about observed winds, as a share of the speed (METHODS WND-6).
const DRAG_LAW_SCATTER: f64 = 0.12;
/// Drag of the balance near the equator, 1/s, over sea and land (METHODS WND-5, from memory).
const LINEAR_DRAG_PER_S: (f64, f64) = (3e-5, 6e-5);
/// Ratio of the 10 m wind to the wind of that balance, which is too strong near the ground.
const LINEAR_DRAG_RATIO: f64 = 0.75;
/// Radius over which the surface wind is smoothed before its divergence is taken, m (DIV-5).
const WIND_SMOOTHING_M: f64 = 100_000.0;
/// Radius over which a 3 h change is smoothed before its second derivatives are taken, m (TEN-5).
const CHANGE_SMOOTHING_M: f64 = 300_000.0;
/// No isallobaric wind equatorward of this latitude (TEN-5).
const ISALLOBARIC_LATITUDE_MIN_DEG: f64 = 30.0;

/// A moving centre: where it is and its velocity towards east and north, m/s.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct MovingCentre {
    /// Where.
    pub position: Position,
    /// Velocity, m/s.
    pub velocity_m_s: [f64; 2],
}

/// The drag law tabulated for both surfaces: made once, used for every field.
#[derive(Clone, PartialEq, Debug)]
pub struct DragLaw {
    sea: Table,
    land: Table,
}

impl Default for DragLaw {
    fn default() -> Self {
        Self { sea: Table::new(Surface::Sea), land: Table::new(FARM_LAND) }
    }
}

impl DragLaw {
    /// The tables.
    pub fn new() -> Self {
        Self::default()
    }

    /// The 10 m wind towards east and north under a wind above.
    pub fn surface(&self, above_m_s: [f64; 2], latitude_deg: f64, land: bool) -> [f64; 2] {
        let table = if land { &self.land } else { &self.sea };
        let speed_m_s = above_m_s[0].hypot(above_m_s[1]);
        let (ratio, angle_deg) = table.ratio_and_angle(speed_m_s, coriolis_per_s(latitude_deg));
        turned(above_m_s, latitude_deg, ratio, angle_deg)
    }
}

/// Components towards east and north at a point; NaN where unknown.
#[derive(Clone, Copy, Debug)]
struct Components {
    geostrophic: [f64; 2],
    gradient: [f64; 2],
    surface: [f64; 2],
    capped: bool,
}

const UNKNOWN: [f64; 2] = [f64::NAN; 2];

fn components(
    point: &PointAnalysis,
    place: Position,
    law: &DragLaw,
    land: bool,
    centres: &[MovingCentre],
) -> Components {
    let latitude_deg = place.latitude_deg();
    let f = coriolis_per_s(latitude_deg);
    let density = balance::usual_density_kg_m3(point.pressure_hpa, latitude_deg);
    let gradient_pa_m = point.gradient_pa_m;
    let geostrophic = if latitude_deg.abs() < GEOSTROPHIC_LATITUDE_MIN_DEG {
        UNKNOWN
    } else {
        balance::geostrophic(gradient_pa_m, latitude_deg, density)
    };
    let mut capped = false;
    let gradient = if latitude_deg.abs() < GRADIENT_LATITUDE_MIN_DEG {
        UNKNOWN
    } else {
        let slope = gradient_pa_m[0].hypot(gradient_pa_m[1]);
        let along = balance::geostrophic(gradient_pa_m, latitude_deg, density);
        let length = along[0].hypot(along[1]).max(1e-12);
        let direction = [along[0] / length, along[1] / length];
        let curvature = balance::isobar_curvature_per_m(gradient_pa_m, point.hessian_pa_m2);
        let motion = motion_at(place, centres);
        let along_m_s = motion[0] * direction[0] + motion[1] * direction[1];
        let speed = balance::gradient_speed(slope / density, f, curvature, along_m_s);
        // An anticyclonic curvature read off an analysis is mostly its error where it asks for more.
        let most_m_s = ANTICYCLONIC_RATIO_MAX * length;
        capped = speed.capped || speed.speed_m_s > most_m_s;
        let speed_m_s = speed.speed_m_s.min(most_m_s);
        [direction[0] * speed_m_s, direction[1] * speed_m_s]
    };
    let drag = if land { LINEAR_DRAG_PER_S.1 } else { LINEAR_DRAG_PER_S.0 };
    let equatorial = balance::linear_drag(gradient_pa_m, f, density, drag)
        .map(|part| part * LINEAR_DRAG_RATIO * if land { 0.6 } else { 1.0 });
    let surface = if gradient[0].is_finite() {
        let weight = balance::balance_weight(latitude_deg);
        let balanced = law.surface(gradient, latitude_deg, land);
        [0, 1].map(|part| weight * balanced[part] + (1.0 - weight) * equatorial[part])
    } else {
        equatorial
    };
    Components { geostrophic, gradient, surface, capped }
}

/// Velocity of the nearest moving centre, damped to nothing at [`MOTION_REACH_KM`].
fn motion_at(place: Position, centres: &[MovingCentre]) -> [f64; 2] {
    let mut nearest: Option<(f64, [f64; 2])> = None;
    for centre in centres {
        let distance_km = place.distance_km(centre.position);
        if nearest.is_none_or(|(least, _)| distance_km < least) {
            nearest = Some((distance_km, centre.velocity_m_s));
        }
    }
    nearest.map_or([0.0, 0.0], |(distance_km, velocity)| {
        let share = (1.0 - distance_km / MOTION_REACH_KM).max(0.0);
        velocity.map(|part| part * share)
    })
}

/// The winds at a place of an hour's analysis; everything is `None` off the grid.
///
/// `centres` are the hour's moving systems. Geostrophic wind poleward of 10 degrees, gradient wind
/// poleward of 5, surface wind everywhere. The error is that of the expected 10 m speed: the
/// gradient's share of the analysis error, and 12 % for the scatter of the drag law.
pub fn at(
    analysis: &HourAnalysis,
    place: Position,
    law: &DragLaw,
    centres: &[MovingCentre],
) -> PointWinds {
    let Some(point) = analysis.at(place) else { return PointWinds::default() };
    let land = is_land(place);
    let found = components(&point, place, law, land, centres);
    let surface = balance::wind(found.surface);
    let surface_error_m_s = surface.map(|wind| {
        let density = balance::usual_density_kg_m3(point.pressure_hpa, place.latitude_deg());
        let f = balance::coriolis_floor_per_s(place.latitude_deg());
        let above = point.pressure_error_hpa * 100.0 / (density * f * ERROR_SCALE_M);
        let ratio = if land { 0.45 } else { 0.7 };
        (ratio * above).hypot(DRAG_LAW_SCATTER * wind.speed_m_s)
    });
    PointWinds {
        geostrophic: balance::wind(found.geostrophic),
        gradient: balance::wind(found.gradient),
        surface,
        surface_error_m_s,
        capped: found.capped,
        low_latitude: place.latitude_deg().abs() < LOW_LATITUDE_DEG,
    }
}

/// Winds, divergences, vorticity and 3 h change of an hour over its grid.
///
/// `earlier` is the analysis three hours before, on the same grid; without it the change and the
/// isallobaric divergence are NaN.
pub fn field(
    analysis: &HourAnalysis,
    earlier: Option<&HourAnalysis>,
    law: &DragLaw,
    centres: &[MovingCentre],
) -> WindField {
    let grid = &analysis.grid;
    let count = grid.len();
    let mut geostrophic = Vec::with_capacity(count);
    let mut gradient = Vec::with_capacity(count);
    let mut surface = Vec::with_capacity(count);
    for row in 0..grid.rows {
        for column in 0..grid.columns {
            let place = grid.position(column, row);
            let found = analysis.at(place).map_or(
                Components {
                    geostrophic: UNKNOWN,
                    gradient: UNKNOWN,
                    surface: UNKNOWN,
                    capped: false,
                },
                |point| components(&point, place, law, is_land(place), centres),
            );
            geostrophic.push(found.geostrophic);
            gradient.push(found.gradient);
            surface.push(found.surface);
        }
    }
    let smooth = smoothed_wind(grid, &surface, WIND_SMOOTHING_M);
    let (divergence_friction_per_s, _) = divergence_and_vorticity(grid, &smooth);
    let (_, vorticity_per_s) = divergence_and_vorticity(grid, &gradient);
    let observed = smoothed_wind(grid, &analysis.wind_m_s, WIND_SMOOTHING_M);
    let (divergence_observed_per_s, _) = divergence_and_vorticity(grid, &observed);
    let change_3h_hpa = change(analysis, earlier);
    let divergence_isallobaric_per_s = isallobaric_divergence(grid, &change_3h_hpa, analysis);
    WindField {
        hour: analysis.hour,
        grid: Arc::clone(grid),
        geostrophic_m_s: geostrophic,
        gradient_m_s: gradient,
        surface_m_s: surface,
        divergence_friction_per_s,
        divergence_isallobaric_per_s,
        divergence_observed_per_s,
        vorticity_per_s,
        change_3h_hpa,
    }
}

fn change(analysis: &HourAnalysis, earlier: Option<&HourAnalysis>) -> Vec<f64> {
    match earlier {
        Some(earlier) if earlier.grid == analysis.grid => {
            let now = analysis.pressure_hpa.iter();
            now.zip(&earlier.pressure_hpa).map(|(now, then)| now - then).collect()
        }
        _ => vec![f64::NAN; analysis.grid.len()],
    }
}

/// Divergence of the isallobaric wind, -(1/(rho f^2)) lap(dp/dt), from a 3 h change, hPa
/// (Brunt and Douglas 1928; METHODS TEN-5). NaN equatorward of 30 degrees.
pub fn isallobaric_divergence(
    grid: &Grid,
    change_3h_hpa: &[f64],
    analysis: &HourAnalysis,
) -> Vec<f64> {
    let smooth = smoothed(grid, change_3h_hpa, CHANGE_SMOOTHING_M);
    let mut out = laplacian(grid, &smooth);
    for (at, value) in out.iter_mut().enumerate() {
        let latitude_deg = grid.position(at % grid.columns, at / grid.columns).latitude_deg();
        if latitude_deg.abs() < ISALLOBARIC_LATITUDE_MIN_DEG {
            *value = f64::NAN;
            continue;
        }
        let pressure_hpa = analysis.pressure_hpa.get(at).copied().unwrap_or(f64::NAN);
        let density = balance::usual_density_kg_m3(pressure_hpa, latitude_deg);
        let f = coriolis_per_s(latitude_deg);
        *value *= -100.0 / (3.0 * 3600.0) / (density * f * f);
    }
    out
}

/// A field smoothed by two passes of a running mean, together about a Gaussian of the given
/// radius; a NaN stays NaN and does not enter its neighbours' means.
pub fn smoothed(grid: &Grid, values: &[f64], radius_m: f64) -> Vec<f64> {
    let half = crate::quantity::index_nearest(radius_m / grid.spacing_m * 0.6);
    if half == 0 {
        return values.to_vec();
    }
    let (columns, rows) = (grid.columns, grid.rows);
    let mut field = values.to_vec();
    for _ in 0..2 {
        field = pass(&field, rows, columns, half, |line, at| line * columns + at);
        field = pass(&field, columns, rows, half, |line, at| at * columns + line);
    }
    for (value, original) in field.iter_mut().zip(values) {
        if !original.is_finite() {
            *value = f64::NAN;
        }
    }
    field
}

/// Running means along lines, by sums that run in a fixed order.
fn pass(
    values: &[f64],
    lines: usize,
    length: usize,
    half: usize,
    index: impl Fn(usize, usize) -> usize,
) -> Vec<f64> {
    let mut out = values.to_vec();
    let mut sums = vec![(0.0, 0_usize); length + 1];
    for line in 0..lines {
        for at in 0..length {
            let value = values[index(line, at)];
            let (sum, count) = sums[at];
            sums[at + 1] = if value.is_finite() { (sum + value, count + 1) } else { (sum, count) };
        }
        for at in 0..length {
            // A window that is cut at the edge is cut on both sides, so that slopes stay.
            let half = half.min(at).min(length - 1 - at);
            let ((low, first), (high, last)) = (sums[at - half], sums[at + half + 1]);
            let count = last - first;
            out[index(line, at)] = if count > 0 { (high - low) / count as f64 } else { f64::NAN };
        }
    }
    out
}

/// A wind smoothed component by component, along the map so that the components stay comparable.
fn smoothed_wind(grid: &Grid, wind: &[[f64; 2]], radius_m: f64) -> Vec<[f64; 2]> {
    let longitudes: Vec<f64> = (0..grid.len())
        .map(|at| grid.position(at % grid.columns, at / grid.columns).longitude_deg())
        .collect();
    let mapped: Vec<(f64, f64)> = wind
        .iter()
        .zip(&longitudes)
        .map(|([u, v], longitude_deg)| grid.projection.to_map_components(*longitude_deg, *u, *v))
        .collect();
    let x = smoothed(grid, &mapped.iter().map(|part| part.0).collect::<Vec<_>>(), radius_m);
    let y = smoothed(grid, &mapped.iter().map(|part| part.1).collect::<Vec<_>>(), radius_m);
    x.iter()
        .zip(&y)
        .zip(&longitudes)
        .map(|((x, y), longitude_deg)| {
            let (u, v) = grid.projection.to_earth_components(*longitude_deg, *x, *y);
            [u, v]
        })
        .collect()
}

#[cfg(test)]
mod tests;
