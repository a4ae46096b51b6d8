//! Signs and balances of the invented atmosphere.

use super::*;
use crate::quantity::{wind_from_components, wrap_180_deg};

fn weather(latitude_deg: f64, longitude_deg: f64, anomaly_hpa: f64) -> Weather {
    let mut scenario = Scenario::built_in("northern-ocean-low").expect("a built-in scenario");
    scenario.background.equatorward_hpa = 1010.0;
    scenario.background.poleward_hpa = 1010.0;
    scenario.systems.truncate(1);
    let system = scenario.systems.first_mut().expect("a system");
    system.points.truncate(1);
    let point = system.points.first_mut().expect("a point");
    point.latitude_deg = latitude_deg;
    point.longitude_deg = longitude_deg;
    point.anomaly_hpa = anomaly_hpa;
    point.radius_km = 1500.0;
    Weather::new(&scenario, scenario.start)
}

/// Common practice, no source: the wind blows counterclockwise and inward round a northern low,
/// clockwise and inward round a southern one, and the other way round highs; friction slows it and
/// turns it across the isobars toward low pressure.
#[test]
fn wind_turns_the_right_way_in_both_hemispheres() {
    for (latitude_deg, longitude_deg) in [(50.0, -30.0), (-50.0, 179.9)] {
        for anomaly_hpa in [-30.0, 12.0] {
            let weather = weather(latitude_deg, longitude_deg, anomaly_hpa);
            let sky = weather.at(weather.start);
            let centre = Position::clamped(latitude_deg, longitude_deg);
            for bearing_deg in [20.0, 110.0, 200.0, 290.0] {
                let place = centre.destination(bearing_deg, 450.0);
                let outward_deg = (place.bearing_deg(centre) + 180.0).to_radians();
                let (out_x, out_y) = outward_deg.sin_cos();
                let above = sky.gradient_wind_m_s(place);
                let below = sky.wind_m_s(place, Surface::Sea);
                let turning = out_x * above.1 - out_y * above.0;
                assert!(turning * latitude_deg.signum() * -anomaly_hpa.signum() > 5.0);
                let outflow = out_x * below.0 + out_y * below.1;
                assert!(outflow * anomaly_hpa.signum() > 0.5, "{outflow}");
                assert!(below.0.hypot(below.1) < above.0.hypot(above.1));
                let land = sky.wind_m_s(place, Surface::Land);
                assert!(land.0.hypot(land.1) < below.0.hypot(below.1));
            }
        }
    }
}

/// The gradient wind of a round low in closed form (METHODS WND-3): K V^2 + f V = f Vg with the
/// radius as the curvature.
#[test]
fn gradient_wind_agrees_with_a_circle() {
    let weather = weather(50.0, -30.0, -30.0);
    let sky = weather.at(weather.start);
    let centre = Position::clamped(50.0, -30.0);
    let place = centre.destination(90.0, 500.0);
    let (u, v) = sky.gradient_wind_m_s(place);
    let f = coriolis_per_s(place.latitude_deg());
    let x: f64 = 500.0 / 1500.0;
    // The derivative of A (1 - x^2)^4 in Pa/m.
    let slope = 3000.0 * 8.0 * x * (1.0 - x * x).powi(3) / 1_500_000.0;
    let temperature_k = sky.sea_air_c(place.latitude_deg()) + ZERO_CELSIUS_K;
    let density = 100.0 * sky.pressure_hpa(place) / (GAS_CONSTANT_DRY_AIR * temperature_k);
    let speed = u.hypot(v);
    let residual = speed * speed / 500_000.0 + f * speed - slope / density;
    // Isobars on the sphere curve a little less than 1/r: tan(r/a) against r/a is 0.2 per cent.
    assert!((residual / (slope / density)).abs() < 0.005, "{residual}");
    let (from_deg, _) = wind_from_components(u, v);
    // Counterclockwise: with the low on the left it blows from 90 degrees right of outward.
    let outward_deg = place.bearing_deg(centre) + 180.0;
    assert!(wrap_180_deg(from_deg - outward_deg - 90.0).abs() < 0.1, "{from_deg} {outward_deg}");
}

/// METHODS TEN-3 checks (two routes there).
#[test]
fn tide_agrees_with_its_checks() {
    let at = |latitude_deg, longitude_deg, hour| {
        let time = Instant::from_calendar(2026, 3, 1, hour, 0).expect("a time");
        tide_hpa(Position::clamped(latitude_deg, longitude_deg), time)
    };
    assert!((at(50.0, -10.0, 12) - 0.2347).abs() < 1e-4);
    assert!((at(-20.0, 120.0, 3) - 0.7714).abs() < 1e-4);
    assert!((at(20.0, 60.0, 18) - 0.9775).abs() < 1e-4);
}
