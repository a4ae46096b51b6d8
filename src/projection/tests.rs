use super::Projection;
use crate::sphere::Position;

/// Radius used by the published check values (METHODS MAP-1).
const MAP_RADIUS_M: f64 = 6_371_229.0;

fn at(latitude_deg: f64, longitude_deg: f64) -> Position {
    Position::new(latitude_deg, longitude_deg).expect("a place")
}

#[track_caller]
fn check(map: Projection, place: Position, expected: (f64, f64)) {
    let (x_m, y_m) = map.forward(place);
    assert!((x_m - expected.0).abs() < 0.01 && (y_m - expected.1).abs() < 0.01, "{x_m} {y_m}");
    assert!(map.inverse(x_m, y_m).distance_km(place) < 1e-6);
}

/// METHODS CHK-190 to CHK-198: pyproj 3.7.2 (PROJ 9.5.1).
#[test]
fn maps_agree_with_pyproj() {
    let north = Projection::polar_stereographic(60.0, 0.0).with_radius_m(MAP_RADIUS_M);
    check(north, at(50.0, -30.0), (-2_163_598.340, -3_747_462.252));
    check(north, at(75.0, 120.0), (1_355_503.057, 782_600.055));
    assert!((north.scale(50.0) - 1.056_612_9).abs() < 1e-6);
    assert!((north.scale(75.0) - 0.949_184_0).abs() < 1e-6);
    let south = Projection::polar_stereographic(-60.0, 0.0).with_radius_m(MAP_RADIUS_M);
    check(south, at(-55.0, 70.0), (3_522_482.839, 1_282_078.904));
    let conic = Projection::lambert(35.0, 65.0, 52.0, 10.0).with_radius_m(MAP_RADIUS_M);
    assert!((conic.cone - 0.775_289_018_3).abs() < 1e-9);
    check(conic, at(60.0, -20.0), (-1_588_474.649, 1_190_295.611));
    assert!((conic.scale(60.0) - 0.978_999_3).abs() < 1e-6);
    let conic_south = Projection::lambert(-35.0, -65.0, -52.0, 140.0).with_radius_m(MAP_RADIUS_M);
    check(conic_south, at(-60.0, 110.0), (-1_588_474.649, -1_190_295.611));
    let one = Projection::lambert(50.0, 50.0, 50.0, 0.0).with_radius_m(MAP_RADIUS_M);
    check(one, at(58.0, -15.0), (-887_167.038, 981_891.804));
    let mercator = Projection::mercator(45.0, 0.0).with_radius_m(MAP_RADIUS_M);
    check(mercator, at(60.0, -20.0), (-1_572_590.257, 5_933_078.686));
    assert!((mercator.scale(60.0) - std::f64::consts::SQRT_2).abs() < 1e-6);
}

/// METHODS CHK-199 to CHK-201: by displacing a point through pyproj 3.7.2.
#[test]
fn winds_turn_onto_the_map_and_back() {
    let check = |map: Projection, longitude_deg: f64, wind: (f64, f64), expected: (f64, f64)| {
        let (x, y) = map.to_map_components(longitude_deg, wind.0, wind.1);
        assert!((x - expected.0).abs() < 1e-4 && (y - expected.1).abs() < 1e-4, "{x} {y}");
        let (u, v) = map.to_earth_components(longitude_deg, x, y);
        assert!((u - wind.0).abs() < 1e-12 && (v - wind.1).abs() < 1e-12);
    };
    let north = Projection::polar_stereographic(60.0, 0.0);
    check(north, -30.0, (10.0, 0.0), (8.660_25, -5.0));
    let south = Projection::polar_stereographic(-60.0, 0.0);
    check(south, 70.0, (10.0, 4.0), (7.178_97, -8.028_85));
    let conic = Projection::lambert(35.0, 65.0, 52.0, 10.0);
    check(conic, -20.0, (10.0, 0.0), (9.187_31, -3.948_83));
    let conic_south = Projection::lambert(-35.0, -65.0, -52.0, 140.0);
    check(conic_south, 110.0, (10.0, 4.0), (7.607_78, 7.623_75));
}

#[test]
fn every_map_stays_finite_at_its_worst_points() {
    for map in [
        Projection::polar_stereographic(60.0, 0.0),
        Projection::lambert(35.0, 65.0, 52.0, 10.0),
        Projection::mercator(0.0, 180.0),
    ] {
        for place in [at(90.0, 0.0), at(-90.0, 0.0), at(0.0, 180.0), at(0.0, -179.999)] {
            let (x_m, y_m) = map.forward(place);
            assert!(x_m.is_finite() && y_m.is_finite(), "{map:?} {place:?}");
        }
    }
}
