use super::*;
use crate::projection::Projection;

fn plane(columns: usize, rows: usize) -> Grid {
    Grid {
        projection: Projection::mercator(0.0, 0.0),
        x0_m: 0.0,
        y0_m: 0.0,
        spacing_m: 100_000.0,
        columns,
        rows,
    }
}

/// METHODS CHK-162: priority queue and threshold sweep agree.
#[test]
fn depths_of_two_centres_by_flooding() {
    let field = [
        1012.0, 1011.0, 1010.0, 1011.0, 1012.0, 1013.0, //
        1010.0, 1006.0, 1004.0, 1007.0, 1009.0, 1011.0, //
        1009.0, 1003.0, 998.0, 1002.0, 1005.0, 1008.0, //
        1008.0, 1004.0, 1001.0, 1000.0, 997.0, 1004.0, //
        1007.0, 1006.0, 1005.0, 1003.0, 1001.0, 1003.0, //
        1008.0, 1008.0, 1007.0, 1006.0, 1005.0, 1004.0,
    ];
    let found = basins(&field, 6, 6);
    let depths: Vec<(f64, f64)> =
        found.iter().map(|basin| (basin.value, basin.level - basin.value)).collect();
    assert_eq!(depths, [(997.0, 6.0), (998.0, 2.0)]);
}

/// METHODS CHK-163: least squares and a minimiser agree.
#[test]
fn the_paraboloid_through_nine_points() {
    let values = [990.4, 989.1, 989.6, 989.0, 987.9, 988.7, 989.5, 988.6, 989.7];
    let (x, y, value) = paraboloid(&plane(3, 3), &values, 1, 1);
    assert!((x - 0.065_069).abs() < 1e-5 && (y - 0.105_473).abs() < 1e-5, "{x} {y}");
    assert!((value - 987.883_694).abs() < 1e-5, "{value}");
}

fn low(latitude_deg: f64, longitude_deg: f64, depth_hpa: f64) -> (HourAnalysis, Position) {
    let grid = Arc::new(Grid::fitted(
        (latitude_deg - 18.0).max(-90.0),
        (latitude_deg + 18.0).min(90.0),
        longitude_deg - 40.0,
        longitude_deg + 40.0,
        61,
        51,
    ));
    let centre = Position::clamped(latitude_deg + 0.13, longitude_deg + 0.31);
    let pressure = (0..grid.len())
        .map(|at| {
            let place = grid.position(at % grid.columns, at / grid.columns);
            1012.0 - depth_hpa * (-0.5 * (place.distance_km(centre) / 600.0).powi(2)).exp()
        })
        .collect();
    let error = vec![0.6; grid.len()];
    (HourAnalysis::from_field(Hour::from_unix_h(0), grid, pressure, error), centre)
}

/// A known centre is found within a kilometre in both hemispheres, over the date line and near
/// the pole; a high as well as a low.
#[test]
fn a_planted_centre_is_found_between_the_grid_points() {
    for (latitude_deg, longitude_deg, depth_hpa) in [
        (50.0, -30.0, 25.0),
        (-50.0, 179.8, 25.0),
        (45.0, -179.9, -15.0),
        (-35.0, 20.0, -12.0),
        (82.0, 60.0, 20.0),
        (3.0, 0.0, 8.0),
    ] {
        let (analysis, centre) = low(latitude_deg, longitude_deg, depth_hpa);
        let found = centres(&analysis);
        assert_eq!(found.len(), 1, "{latitude_deg}: {found:?}");
        let kind = if depth_hpa > 0.0 { Kind::Low } else { Kind::High };
        assert_eq!(found[0].kind, kind);
        let miss_km = found[0].position.distance_km(centre);
        assert!(miss_km < 1.2, "{latitude_deg}: {miss_km} km");
        assert!((found[0].pressure_hpa - (1012.0 - depth_hpa)).abs() < 0.05);
        assert!(found[0].confidence > 0.99);
        assert!((5.0..110.0).contains(&found[0].position_error_km), "{found:?}");
    }
}

#[test]
fn a_ripple_and_a_weak_analysis_make_no_centre() {
    let (analysis, _) = low(50.0, -30.0, 0.8);
    assert_eq!(centres(&analysis), []);
    let (analysis, _) = low(50.0, -30.0, 20.0);
    let weak = vec![11.0; analysis.grid.len()];
    let weak = HourAnalysis::from_field(
        analysis.hour,
        Arc::clone(&analysis.grid),
        analysis.pressure_hpa.clone(),
        weak,
    );
    assert_eq!(centres(&weak), []);
}

#[test]
fn a_missing_value_is_an_edge() {
    let mut field = vec![1010.0; 49];
    field[24] = 1000.0;
    field[26] = f64::NAN;
    let found = basins(&field, 7, 7);
    assert_eq!(found.len(), 1);
    assert!((found[0].level - 1010.0).abs() < 1e-12);
    // Beside the extremum itself nothing closes round it.
    field[25] = f64::NAN;
    assert_eq!(basins(&field, 7, 7), []);
}

#[test]
fn the_error_function_is_as_good_as_it_says() {
    // Abramowitz and Stegun (1964), table 7.1.
    for (x, value) in [(0.5, 0.520_499_878), (1.0, 0.842_700_793), (2.0, 0.995_322_265)] {
        assert!((erf(x) - value).abs() < 1.5e-7);
        assert!((erf(-x) + value).abs() < 1.5e-7);
    }
}
