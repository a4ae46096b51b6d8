//! The rehearsal as a whole.

use super::*;

fn rehearsal(name: &str) -> Rehearsal {
    let scenario = Scenario::built_in(name).expect("a built-in scenario");
    let start = scenario.start;
    Rehearsal::new(scenario, start)
}

#[test]
fn every_built_in_scenario_reads() {
    for name in Scenario::built_in_names() {
        let scenario = Scenario::built_in(name);
        assert_eq!(scenario.map(|s| s.name), Some(name.to_owned()));
    }
}

#[test]
fn a_misspelt_key_and_a_senseless_value_are_refused_with_their_place() {
    let text = include_str!("../../samples/northern-ocean-low.toml");
    let error = Scenario::from_toml(&text.replace("seed =", "sead =")).expect_err("misspelt");
    assert!(error.to_string().contains("sead"), "{error}");
    let error = Scenario::from_toml(&text.replace("hours = 48", "hours = 0")).expect_err("none");
    assert_eq!(error.to_string(), "hours: expected 1 to 240, found \"0\"");
}

#[test]
fn the_same_scenario_gives_the_same_bytes_and_another_seed_others() {
    let first = rehearsal("northern-ocean-low");
    let again: Vec<FeedFile> = rehearsal("northern-ocean-low").files().collect();
    assert!(first.files().eq(again.iter().cloned()));
    let mut scenario = first.scenario().clone();
    scenario.seed += 1;
    let other = Rehearsal::new(scenario, first.start());
    assert!(!other.files().eq(again));
}

#[test]
fn files_are_in_order_with_their_time_in_a_name_of_their_own() {
    for name in Scenario::built_in_names() {
        let files: Vec<FeedFile> = rehearsal(name).files().collect();
        assert!(files.len() > 100, "{}", files.len());
        for pair in files.windows(2) {
            assert!((pair[0].due, &pair[0].name) < (pair[1].due, &pair[1].name));
        }
        for file in &files {
            assert!(file.name.contains(&bulletin::stamp(file.due)), "{}", file.name);
        }
    }
}

/// Pressure at a centre of the truth is the extreme of the field round it.
#[test]
fn truth_centres_are_the_extremes_of_the_field() {
    for name in Scenario::built_in_names() {
        let rehearsal = rehearsal(name);
        let truth = rehearsal.truth();
        let mut checked = 0;
        for system in &truth.systems {
            let sign = if system.kind == "low" { 1.0 } else { -1.0 };
            for point in &system.points {
                for bearing in 0..12 {
                    for distance_km in [2.0, 15.0, 60.0] {
                        let place =
                            point.position().destination(30.0 * f64::from(bearing), distance_km);
                        let there = rehearsal.pressure_hpa(place, point.time.instant());
                        // Positions are rounded to 1e-4 degrees, pressures to 0.001 hPa.
                        assert!(
                            sign * (there - point.pressure_hpa) > -0.0011,
                            "{} {} {there} {}",
                            system.name,
                            point.time,
                            point.pressure_hpa
                        );
                    }
                }
                checked += 1;
            }
        }
        assert!(checked > 100, "{checked}");
    }
}
