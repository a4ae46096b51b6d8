use super::*;

#[track_caller]
fn near(found: f64, expected: f64, tolerance: f64) {
    assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
}

/// METHODS CHK-090 (MetPy 1.7.1 for the third).
#[test]
fn densities() {
    near(density_kg_m3(1013.25, 288.15), 1.2250, 1e-4);
    near(density_kg_m3(980.0, 278.15), 1.2274, 1e-4);
    let moist_k = 303.15 * (1.0 + 0.608 * 0.018);
    near(density_kg_m3(1000.0, moist_k), 1.1367, 1e-4);
    near(density_kg_m3(1030.0, 253.15), 1.4174, 1e-4);
}

/// METHODS CHK-091 to CHK-096 (MetPy 1.7.1 on a 20 km grid).
#[test]
fn the_geostrophic_wind_in_both_hemispheres() {
    let [u, v] = geostrophic([-0.0012, 0.0016], 50.0, 1.225);
    near(u, -11.690_86, 1e-4);
    near(v, -8.768_14, 1e-4);
    let Wind { from_deg, speed_m_s } = wind([u, v]).expect("a wind");
    near(speed_m_s, 14.613_57, 1e-4);
    near(from_deg, 53.1301, 1e-4);
    for (latitude_deg, speed) in [(30.0, 11.194_65), (50.0, 7.306_79), (70.0, 5.956_55)] {
        let [u, v] = geostrophic([0.001, 0.0], latitude_deg, 1.225);
        near(u.hypot(v), speed, 1e-4);
    }
    let [u, v] = geostrophic([-0.0012, 0.0016], -50.0, 1.225);
    near(u, 11.690_86, 1e-4);
    near(v, 8.768_14, 1e-4);
}

fn speed(latitude_deg: f64, geostrophic_m_s: f64, radius_km: f64, along_m_s: f64) -> GradientSpeed {
    let f = coriolis_per_s(latitude_deg);
    gradient_speed(geostrophic_m_s * f, f, 1.0 / (radius_km * 1000.0), along_m_s)
}

/// METHODS CHK-097 to CHK-101: closed form, polynomial roots and relaxation agree.
#[test]
fn gradient_winds_round_lows_and_highs() {
    for (latitude_deg, geostrophic_m_s, radius_km, expected) in [
        (50.0, 30.0, 500.0, 21.626_96),
        (50.0, 12.0, -500.0, 17.452_91),
        (45.0, 40.0, 300.0, 22.960_25),
        (60.0, 20.0, -1000.0, 24.914_70),
        (35.0, 15.0, -800.0, 22.699_79),
    ] {
        let found = speed(latitude_deg, geostrophic_m_s, radius_km, 0.0);
        near(found.speed_m_s, expected, 1e-4);
        assert!(!found.capped);
    }
}

/// METHODS CHK-102 to CHK-104.
#[test]
fn the_anticyclonic_limit() {
    let f = coriolis_per_s(50.0);
    let root = anomalous_root(12.0 * f, f, -1.0 / 500_000.0).expect("a root");
    near(root, 38.4079, 1e-3);
    let limit = f * 500_000.0 / 4.0;
    near(limit, 13.9652, 1e-3);
    near(1.225 * f * limit * 1e5 / 100.0, 1.9113, 1e-3);
    near(speed(50.0, limit * (1.0 - 1e-12), -500.0, 0.0).speed_m_s, 27.9304, 1e-3);
    assert_eq!(anomalous_root(limit * f * 1.0001, f, -1.0 / 500_000.0), None);
    assert!(speed(50.0, limit * 1.0001, -500.0, 0.0).capped);
}

/// METHODS CHK-105: the curvature of an ellipse; and the sign holds for highs and lows.
#[test]
fn the_curvature_of_isobars() {
    near(isobar_curvature_per_m([2.0, 4.0], [2.0, 0.0, 4.0]), 0.536_656, 1e-6);
    near(isobar_curvature_per_m([-2.0, -4.0], [-2.0, 0.0, -4.0]), -0.536_656, 1e-6);
    near(isobar_curvature_per_m([0.0, 0.0], [1.0, 0.0, 1.0]), 0.0, 0.0);
}

/// METHODS CHK-106 to CHK-108: Blaton's relation for moving systems.
#[test]
fn moving_systems_bend_the_paths() {
    near(speed(45.0, 30.0, 500.0, 15.0).speed_m_s, 25.090_19, 1e-4);
    near(speed(45.0, 30.0, 500.0, -15.0).speed_m_s, 18.240_81, 1e-4);
    near(speed(45.0, 10.0, -800.0, 8.0).speed_m_s, 10.284_84, 1e-4);
}

/// METHODS CHK-109 to CHK-111.
#[test]
fn winds_near_the_equator() {
    let calm = gradient_speed(0.002 / 1.15, 0.0, 1e-5, 0.0);
    near(calm.speed_m_s, 13.187_61, 1e-4);
    let low = gradient_speed(0.003 / 1.15, coriolis_per_s(15.0), 1.0 / 150_000.0, 0.0);
    near(low.speed_m_s, 17.151_96, 1e-4);
    let f = coriolis_per_s(50.0);
    let [u, v] = linear_drag([0.0, -0.002], f, 1.225, f * 20.0_f64.to_radians().tan());
    near(u, 12.904_11, 1e-4);
    near(v, 4.696_71, 1e-4);
    near(u.hypot(v) / (0.002 / (1.225 * f)), 0.939_693, 1e-4);
}

/// METHODS CHK-150.
#[test]
fn the_weight_of_balance_falls_towards_the_equator() {
    for (latitude_deg, weight) in
        [(5.0, 0.105_16), (10.0, 0.358_82), (20.0, 0.830_99), (-30.0, 0.981_68)]
    {
        near(balance_weight(latitude_deg), weight, 1e-5);
    }
}
