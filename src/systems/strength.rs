//! How strong a centre is by the curvature of the pressure: the measure that an open low has too.
//!
//! Murray and Simmonds (1991) and later work rate systems by the Laplacian of sea-level pressure,
//! averaged over two degrees of latitude, in hPa per degree of latitude squared: above 0.2 weak,
//! above 0.6 to 0.7 strong (from memory, METHODS TRK-3).

use crate::analysis::HourAnalysis;
use crate::quantity::{EARTH_RADIUS_M, coriolis_per_s};
use crate::sphere::Position;

/// Radius of the mean, degrees of latitude.
pub const RADIUS_DEG: f64 = 2.0;
/// Density of surface air for the vorticity, kg/m3 (METHODS TRK-3).
const AIR_DENSITY_KG_M3: f64 = 1.225;
/// Points on the circle.
const BEARINGS: u32 = 24;

/// Pa/m2 in one hPa per degree of latitude squared.
pub fn pa_m2_per_hpa_deg2() -> f64 {
    let degree_m = EARTH_RADIUS_M.to_radians();
    100.0 / (degree_m * degree_m)
}

/// Mean Laplacian of the pressure within two degrees of latitude of a place, hPa per degree of
/// latitude squared, positive in lows: by the divergence theorem 2/R times the mean slope outward
/// on the circle (exact on the plane). `None` where the circle leaves the analysis.
pub fn mean_laplacian_hpa_deg2(analysis: &HourAnalysis, place: Position) -> Option<f64> {
    let radius_m = RADIUS_DEG * EARTH_RADIUS_M.to_radians();
    let mut sum_pa_m = 0.0;
    for k in 0..BEARINGS {
        let bearing_deg = f64::from(k) * 360.0 / f64::from(BEARINGS);
        let there = place.destination(bearing_deg, radius_m / 1000.0);
        let [east, north] = analysis.at(there)?.gradient_pa_m;
        // Outward at the far end of the spoke.
        let outward = (there.bearing_deg(place) + 180.0).to_radians();
        sum_pa_m += east * outward.sin() + north * outward.cos();
    }
    let mean_slope_pa_m = sum_pa_m / f64::from(BEARINGS);
    Some(2.0 / radius_m * mean_slope_pa_m / pa_m2_per_hpa_deg2())
}

/// Relative vorticity of the geostrophic wind, 1/s, of a Laplacian in hPa per degree of latitude
/// squared: positive turns against the clock seen from above, so lows are positive in the north and
/// negative in the south. `None` within 5 degrees of the equator, where the balance fails.
pub fn vorticity_per_s(laplacian_hpa_deg2: f64, latitude_deg: f64) -> Option<f64> {
    (latitude_deg.abs() >= 5.0).then(|| {
        laplacian_hpa_deg2 * pa_m2_per_hpa_deg2()
            / (AIR_DENSITY_KG_M3 * coriolis_per_s(latitude_deg))
    })
}

#[cfg(test)]
mod tests {
    use std::sync::Arc;

    use super::*;
    use crate::field::Grid;
    use crate::instant::Hour;

    /// METHODS CHK-164.
    #[test]
    fn one_unit_of_curvature() {
        assert!((pa_m2_per_hpa_deg2() - 8.087_77e-9).abs() < 1e-12);
        let north = vorticity_per_s(1.0, 45.0).expect("a vorticity");
        let south = vorticity_per_s(1.0, -45.0).expect("a vorticity");
        assert!((north - 6.4021e-5).abs() < 1e-8, "{north}");
        assert!((south + north).abs() < 1e-15);
        assert_eq!(vorticity_per_s(1.0, 2.0), None);
    }

    /// METHODS CHK-165: a Gaussian low of 20 hPa and 500 km has a mean of 1.79198 within two
    /// degrees on the plane (quadrature), 1.97830 at its centre. On the sphere distances along the
    /// circle shrink by R/(a tan(R/a)), 4 parts in 10,000 here.
    #[test]
    fn the_curvature_of_a_round_low() {
        for latitude_deg in [55.0, -55.0] {
            let centre = Position::clamped(latitude_deg, 179.0);
            let grid = Arc::new(Grid::fitted(
                latitude_deg - 12.0,
                latitude_deg + 12.0,
                155.0,
                -157.0,
                81,
                61,
            ));
            let pressure = (0..grid.len())
                .map(|at| {
                    let place = grid.position(at % grid.columns, at / grid.columns);
                    let r = place.distance_km(centre) / 500.0;
                    1010.0 - 20.0 * (-0.5 * r * r).exp()
                })
                .collect();
            let error = vec![0.5; grid.len()];
            let analysis = HourAnalysis::from_field(Hour::from_unix_h(0), grid, pressure, error);
            let mean = mean_laplacian_hpa_deg2(&analysis, centre).expect("inside");
            assert!((mean - 1.791_98).abs() < 3e-3, "{mean}");
            let [xx, _, yy] = analysis.at(centre).expect("inside").hessian_pa_m2;
            let middle = (xx + yy) / pa_m2_per_hpa_deg2();
            assert!((middle - 1.978_30).abs() < 5e-3, "{middle}");
        }
    }
}
