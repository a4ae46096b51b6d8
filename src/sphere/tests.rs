use super::Position;

fn at(latitude_deg: f64, longitude_deg: f64) -> Position {
    Position::new(latitude_deg, longitude_deg).expect("a place")
}

#[track_caller]
fn near(found: f64, expected: f64, tolerance: f64) {
    assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
}

/// METHODS CHK-170 to CHK-173: haversine, vector form and geographiclib 2.1 on the sphere agree.
#[test]
fn distance_and_bearing_agree_with_geographiclib() {
    for (from, to, km, bearing_deg) in [
        (at(50.0, -30.0), at(55.0, -15.0), 1154.2919, 55.474_10),
        (at(60.0, 170.0), at(58.0, -175.0), 885.2252, 97.994_44),
        (at(40.0, -70.0), at(51.5, -0.1), 5356.1777, 51.681_30),
        (at(-55.0, -60.0), at(-50.0, -30.0), 2087.4875, 87.041_05),
    ] {
        near(from.distance_km(to), km, 0.001);
        near(from.bearing_deg(to), bearing_deg, 1e-4);
    }
    near(at(80.0, 0.0).distance_km(at(80.0, 180.0)), 2223.9016, 0.001);
}

/// METHODS CHK-174 to CHK-177.
#[test]
fn destinations_by_great_circle_and_rhumb_line() {
    let reached = at(50.0, -30.0).destination(60.0, 500.0);
    near(reached.latitude_deg(), 52.081_324, 1e-5);
    near(reached.longitude_deg(), -23.656_852, 1e-5);
    let reached = at(60.0, 175.0).destination(80.0, 800.0);
    near(reached.latitude_deg(), 60.468_007, 1e-5);
    near(reached.longitude_deg(), -170.509_395, 1e-5);
    let (km, course_deg) = at(50.0, -30.0).rhumb_to(at(55.0, -15.0));
    near(km, 1156.3757, 0.001);
    near(course_deg, 61.262_90, 1e-4);
    let reached = at(50.0, -30.0).rhumb_destination(60.0, 500.0);
    near(reached.latitude_deg(), 52.248_301, 1e-5);
    near(reached.longitude_deg(), -23.793_860, 1e-5);
}

/// METHODS CHK-188: a ship's run.
#[test]
fn a_ships_run_in_nautical_miles() {
    let km = at(48.3, -15.6).distance_km(at(48.9, -13.2));
    near(crate::quantity::nm_from_km(km), 101.8696, 1e-3);
}

#[test]
fn what_is_no_place_is_refused() {
    assert_eq!(Position::new(90.5, 0.0), None);
    assert_eq!(Position::new(f64::NAN, 0.0), None);
    assert_eq!(Position::new(0.0, f64::INFINITY), None);
    near(at(10.0, -180.0).longitude_deg(), 180.0, 0.0);
}

proptest::proptest! {
    #[test]
    fn a_destination_lies_as_far_as_it_was_told(
        lat in -89.0..89.0_f64, lon in -180.0..180.0_f64, course in 0.0..360.0_f64, km in 0.1..9000.0_f64
    ) {
        let from = at(lat, lon);
        near(from.distance_km(from.destination(course, km)), km, 1e-6 * km + 1e-6);
    }
}
