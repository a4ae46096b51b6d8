//! What an analysis says at a point: value, gradient and second derivatives of a smooth surface
//! through the grid's pressures, in true distances towards true east and north.

use std::sync::Arc;

use super::{HourAnalysis, PointAnalysis};
use crate::field::Grid;
use crate::field::spline::Spline;
use crate::instant::Hour;
use crate::quantity::EARTH_RADIUS_M;
use crate::sphere::Position;

/// Standard deviation of sea-level pressure about a broad mean in middle latitudes, hPa: what the
/// error ratio of a field that was not analysed here is measured against (METHODS ANA-4).
const CLIMATE_ERROR_HPA: f64 = 12.0;
const PA_PER_HPA: f64 = 100.0;

impl HourAnalysis {
    /// An analysis made of a field that is known already: no reports, no winds. Both fields are
    /// row-major on `grid`, in hPa; what is missing of them counts as NaN.
    pub fn from_field(
        hour: Hour,
        grid: Arc<Grid>,
        mut pressure_hpa: Vec<f64>,
        mut error_hpa: Vec<f64>,
    ) -> Self {
        let count = grid.len();
        pressure_hpa.resize(count, f64::NAN);
        error_hpa.resize(count, f64::NAN);
        let surface = Spline::through(&pressure_hpa, grid.columns, grid.rows);
        let error_ratio =
            error_hpa.iter().map(|error| (error / CLIMATE_ERROR_HPA).clamp(0.0, 1.0)).collect();
        Self {
            hour,
            grid,
            pressure_hpa,
            pressure_error_hpa: error_hpa,
            error_ratio,
            wind_m_s: vec![[f64::NAN; 2]; count],
            wind_error_m_s: vec![f64::NAN; count],
            innovations: Vec::new(),
            pressures_used: 0,
            winds_used: 0,
            fingerprint: 0,
            statistics: super::Statistics::default(),
            surface,
        }
    }

    /// Pressure, gradient and second derivatives at a place; `None` outside the grid and next to
    /// a missing value.
    ///
    /// They belong to a quintic spline through the grid's values, four times continuously
    /// differentiable, so that they agree with each other. The second derivatives are those of the
    /// tangent plane (covariant on the sphere), so that they do not depend on the map.
    pub fn at(&self, place: Position) -> Option<PointAnalysis> {
        let grid = &self.grid;
        let (column, row) = grid.locate(place);
        // Bilinear: also says whether the place is on the grid and its neighbours are finite.
        grid.sample_at(&self.pressure_hpa, column, row)?;
        let pressure_error_hpa = grid.sample_at(&self.pressure_error_hpa, column, row)?;
        let jet = self.surface.at(column, row);
        let scale = grid.projection.scale(place.latitude_deg());
        let step_m = grid.spacing_m / scale;
        let [px, py] = jet.gradient.map(|slope| slope * PA_PER_HPA / step_m);
        let [pxx, pxy, pyy] = jet.hessian.map(|bend| bend * PA_PER_HPA / (step_m * step_m));
        // The true length of a step changes with place as 1/k; Christoffel symbols of a conformal
        // map with the logarithm of 1/k. Along the map's axes, in true metres:
        let rise = log_scale_slope_per_m(grid, place.latitude_deg());
        let (kx, ky) = grid.projection.to_map_components(place.longitude_deg(), 0.0, rise);
        let along = kx * px + ky * py;
        let hxx = pxx + 2.0 * kx * px - along;
        let hxy = pxy + ky * px + kx * py;
        let hyy = pyy + 2.0 * ky * py - along;
        // Turn the axes to east and north.
        let turn =
            |x: f64, y: f64| grid.projection.to_earth_components(place.longitude_deg(), x, y);
        let (east, north) = turn(px, py);
        let (ex, ey) = grid.projection.to_map_components(place.longitude_deg(), 1.0, 0.0);
        let (nx, ny) = grid.projection.to_map_components(place.longitude_deg(), 0.0, 1.0);
        let form = |ax: f64, ay: f64, bx: f64, by: f64| {
            hxx * ax * bx + hxy * (ax * by + ay * bx) + hyy * ay * by
        };
        Some(PointAnalysis {
            pressure_hpa: jet.value,
            pressure_error_hpa,
            gradient_pa_m: [east, north],
            hessian_pa_m2: [form(ex, ey, ex, ey), form(ex, ey, nx, ny), form(nx, ny, nx, ny)],
        })
    }
}

/// Change of ln k towards north, 1/m; k is the map's scale factor, which depends on latitude alone.
fn log_scale_slope_per_m(grid: &Grid, latitude_deg: f64) -> f64 {
    // A central difference; the steps stay off the poles, where the slope vanishes or is not used.
    let half_deg = 0.01;
    let low = (latitude_deg - half_deg).clamp(-89.98, 89.96);
    let high = low + 2.0 * half_deg;
    let difference = (grid.projection.scale(high) / grid.projection.scale(low)).ln();
    difference / ((high - low).to_radians() * EARTH_RADIUS_M)
}

#[cfg(test)]
#[expect(clippy::float_cmp, reason = "a constant field is sampled exactly")]
mod tests {
    use super::*;
    use crate::projection::Projection;

    /// p = 1000 hPa + A (unit . c), whose gradient and covariant second derivatives are known:
    /// the second derivatives of a first-degree harmonic are minus itself over a^2, times the metric.
    #[test]
    fn derivatives_are_those_of_the_sphere_on_every_map() {
        for (projection, place) in [
            (Projection::polar_stereographic(60.0, 10.0), Position::clamped(78.0, 100.0)),
            (Projection::polar_stereographic(-60.0, -50.0), Position::clamped(-66.0, 150.0)),
            (Projection::lambert(35.0, 65.0, 52.0, -20.0), Position::clamped(58.0, -45.0)),
            (Projection::lambert(-35.0, -60.0, -45.0, 170.0), Position::clamped(-40.0, -170.0)),
            (Projection::mercator(20.0, 180.0), Position::clamped(-15.0, -179.0)),
        ] {
            let (x_m, y_m) = projection.forward(place);
            let spacing_m = 60_000.0;
            let (x0_m, y0_m) = (x_m - 10.3 * spacing_m, y_m - 9.6 * spacing_m);
            let grid = Grid { projection, x0_m, y0_m, spacing_m, columns: 21, rows: 20 };
            let axis = Position::clamped(20.0, 60.0).unit();
            let amplitude_hpa = 40.0;
            let values: Vec<f64> = (0..grid.len())
                .map(|k| {
                    let at = grid.position(k % grid.columns, k / grid.columns);
                    1000.0 + amplitude_hpa * at.unit().dot(&axis)
                })
                .collect();
            let errors = vec![1.5; grid.len()];
            let hour = Hour::from_unix_h(0);
            let analysis = HourAnalysis::from_field(hour, Arc::new(grid), values, errors);
            let found = analysis.at(place).expect("on the grid");
            let wave = amplitude_hpa * place.unit().dot(&axis);
            assert!((found.pressure_hpa - 1000.0 - wave).abs() < 1e-7);
            assert_eq!(found.pressure_error_hpa, 1.5);
            let (phi, lam) =
                (place.latitude_deg().to_radians(), place.longitude_deg().to_radians());
            let east = nalgebra::Vector3::new(-lam.sin(), lam.cos(), 0.0);
            let north =
                nalgebra::Vector3::new(-phi.sin() * lam.cos(), -phi.sin() * lam.sin(), phi.cos());
            let unit_pa_m = 100.0 * amplitude_hpa / EARTH_RADIUS_M;
            let expected = [east.dot(&axis) * unit_pa_m, north.dot(&axis) * unit_pa_m];
            let unit = unit_pa_m / EARTH_RADIUS_M;
            let bend = -place.unit().dot(&axis) * unit;
            for (found, expected) in found.gradient_pa_m.iter().zip(expected) {
                assert!((found - expected).abs() < 2e-5 * unit_pa_m, "{found} {expected}");
            }
            for (found, expected) in found.hessian_pa_m2.iter().zip([bend, 0.0, bend]) {
                assert!((found - expected).abs() < 2e-4 * unit, "{found} {expected}");
            }
        }
    }

    #[test]
    fn outside_the_grid_and_beside_a_gap_nothing_is_said() {
        let projection = Projection::lambert(35.0, 65.0, 50.0, 0.0);
        let grid =
            Grid { projection, x0_m: -1e6, y0_m: -1e6, spacing_m: 1e5, columns: 21, rows: 21 };
        let mut values = vec![1000.0; grid.len()];
        values[grid.index(5, 5)] = f64::NAN;
        let (beside, inside) = (grid.position_at(5.5, 5.5), grid.position_at(9.5, 9.5));
        let outside = grid.position_at(-1.0, 3.0);
        let errors = vec![1.0; grid.len()];
        let analysis =
            HourAnalysis::from_field(Hour::from_unix_h(0), Arc::new(grid), values, errors);
        assert!(analysis.at(beside).is_none());
        assert!(analysis.at(outside).is_none());
        let found = analysis.at(inside).expect("inside");
        assert!((found.pressure_hpa - 1000.0).abs() < 1e-9);
        assert!(found.gradient_pa_m.iter().all(|slope| slope.abs() < 1e-12));
    }
}
