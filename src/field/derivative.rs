//! Derivatives on a conformal grid, in true distances and towards true east and north.
//!
//! Centred differences inside, one-sided on the edges. The map factor k enters every one of them:
//! METHODS DIV-1 (conformal form).

use super::Grid;

/// Gradient of a field at every point, units of the field a metre, towards east and north.
///
/// Second order inside, first order on the edge. A NaN spreads to its neighbours.
pub fn gradient(grid: &Grid, values: &[f64]) -> Vec<[f64; 2]> {
    let mut out = Vec::with_capacity(grid.len());
    for row in 0..grid.rows {
        for column in 0..grid.columns {
            let place = grid.position(column, row);
            let scale = grid.projection.scale(place.latitude_deg());
            let x = difference_x(grid, values, column, row) * scale;
            let y = difference_y(grid, values, column, row) * scale;
            let (east, north) = grid.projection.to_earth_components(place.longitude_deg(), x, y);
            out.push([east, north]);
        }
    }
    out
}

/// Laplacian of a field, units of the field a square metre; NaN on the edge.
pub fn laplacian(grid: &Grid, values: &[f64]) -> Vec<f64> {
    let mut out = vec![f64::NAN; grid.len()];
    for row in 1..grid.rows.saturating_sub(1) {
        for column in 1..grid.columns.saturating_sub(1) {
            let scale = grid.projection.scale(grid.position(column, row).latitude_deg());
            let at = |i, j| values[grid.index(i, j)];
            let sum = at(column - 1, row)
                + at(column + 1, row)
                + at(column, row - 1)
                + at(column, row + 1)
                - 4.0 * at(column, row);
            out[grid.index(column, row)] = sum * (scale / grid.spacing_m).powi(2);
        }
    }
    out
}

/// Divergence and vorticity of a wind, 1/s, from its components towards east and north, m/s.
///
/// D = k^2 [d(U/k)/dX + d(V/k)/dY], Z = k^2 [d(V/k)/dX - d(U/k)/dY], METHODS DIV-1.
pub fn divergence_and_vorticity(grid: &Grid, wind: &[[f64; 2]]) -> (Vec<f64>, Vec<f64>) {
    let mut scales = Vec::with_capacity(grid.len());
    let (mut x_part, mut y_part) = (Vec::with_capacity(grid.len()), Vec::with_capacity(grid.len()));
    for row in 0..grid.rows {
        for column in 0..grid.columns {
            let place = grid.position(column, row);
            let scale = grid.projection.scale(place.latitude_deg());
            let [u, v] = wind[grid.index(column, row)];
            let (x, y) = grid.projection.to_map_components(place.longitude_deg(), u, v);
            scales.push(scale);
            x_part.push(x / scale);
            y_part.push(y / scale);
        }
    }
    let mut divergence = Vec::with_capacity(grid.len());
    let mut vorticity = Vec::with_capacity(grid.len());
    for row in 0..grid.rows {
        for column in 0..grid.columns {
            let square = scales[grid.index(column, row)].powi(2);
            let ux = difference_x(grid, &x_part, column, row);
            let vy = difference_y(grid, &y_part, column, row);
            let vx = difference_x(grid, &y_part, column, row);
            let uy = difference_y(grid, &x_part, column, row);
            divergence.push(square * (ux + vy));
            vorticity.push(square * (vx - uy));
        }
    }
    (divergence, vorticity)
}

/// Difference along x in map distances.
fn difference_x(grid: &Grid, values: &[f64], column: usize, row: usize) -> f64 {
    let (low, high) = (column.saturating_sub(1), (column + 1).min(grid.columns - 1));
    (values[grid.index(high, row)] - values[grid.index(low, row)])
        / (grid.spacing_m * (high - low) as f64)
}

/// Difference along y in map distances.
fn difference_y(grid: &Grid, values: &[f64], column: usize, row: usize) -> f64 {
    let (low, high) = (row.saturating_sub(1), (row + 1).min(grid.rows - 1));
    (values[grid.index(column, high)] - values[grid.index(column, low)])
        / (grid.spacing_m * (high - low) as f64)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::projection::Projection;
    use crate::quantity::EARTH_RADIUS_M;
    use crate::sphere::Position;

    fn around(projection: Projection, place: Position) -> Grid {
        let (x_m, y_m) = projection.forward(place);
        let spacing_m = 10_000.0;
        let x0_m = x_m - 2.0 * spacing_m;
        let y0_m = y_m - 2.0 * spacing_m;
        Grid { projection, x0_m, y0_m, spacing_m, columns: 5, rows: 5 }
    }

    /// METHODS CHK-128 and the exact vorticity beside it (sympy, finite differences).
    #[test]
    fn divergence_on_a_polar_map_agrees_with_the_exact_value() {
        let place = Position::clamped(55.0, 20.0);
        let grid = around(Projection::polar_stereographic(60.0, 0.0), place);
        let wind: Vec<[f64; 2]> = (0..grid.len())
            .map(|k| {
                let place = grid.position(k % grid.columns, k / grid.columns);
                let (phi, lam) =
                    (place.latitude_deg().to_radians(), place.longitude_deg().to_radians());
                [20.0 * phi.cos() + 5.0 * (2.0 * lam).sin() * phi.cos(), 10.0 * (3.0 * phi).cos()]
            })
            .collect();
        let (divergence, vorticity) = divergence_and_vorticity(&grid, &wind);
        // The published values are on a sphere of 6371229 m; 3.5e-5 relative.
        assert!((divergence[12] - 2.148_84e-6).abs() < 1e-9, "{}", divergence[12]);
        assert!((vorticity[12] - 5.969_25e-6).abs() < 1e-9, "{}", vorticity[12]);
    }

    /// The gradient of a sin(latitude) points north with cos(latitude) in every projection.
    #[test]
    fn the_gradient_of_the_sine_of_latitude_is_known() {
        for (projection, place) in [
            (Projection::polar_stereographic(-60.0, 0.0), Position::clamped(-70.0, 150.0)),
            (Projection::lambert(35.0, 65.0, 52.0, 10.0), Position::clamped(58.0, -25.0)),
            (Projection::mercator(20.0, 180.0), Position::clamped(-5.0, -179.0)),
        ] {
            let grid = around(projection, place);
            let values: Vec<f64> = (0..grid.len())
                .map(|k| {
                    let at = grid.position(k % grid.columns, k / grid.columns);
                    EARTH_RADIUS_M * at.latitude_deg().to_radians().sin()
                })
                .collect();
            let [east, north] = gradient(&grid, &values)[12];
            let expected = place.latitude_deg().to_radians().cos();
            assert!(east.abs() < 1e-5 && (north - expected).abs() < 1e-5, "{east} {north}");
        }
    }
}
