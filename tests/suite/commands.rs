//! The commands as a user runs them, on the invented samples.

use std::path::PathBuf;
use std::process::{Command, Output};

use serde_json::Value;

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

fn run(arguments: &[&str]) -> Output {
    let nowhere = tempfile::tempdir().expect("a folder");
    Command::new(env!("CARGO_BIN_EXE_glasskeeper"))
        .args(arguments)
        .current_dir(root())
        .env("XDG_CONFIG_HOME", nowhere.path())
        .output()
        .expect("it runs")
}

const FEED: &str = "samples/southern-date-line/feed";
const AT: &str = "2026-07-10T14:00Z";

#[test]
fn brief_as_json_has_every_documented_key() {
    let output = run(&["brief", FEED, "--json", "--at", AT]);
    assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stderr));
    let brief: Value = serde_json::from_slice(&output.stdout).expect("JSON");
    assert_eq!(brief["schema"], 1);
    assert_eq!(brief["valid"], "2026-07-10T14:00:00Z");
    for key in [
        "held",
        "repeats",
        "corrections",
        "doubted",
        "refused",
        "complaints",
        "waiting_for_station",
        "newest",
    ] {
        assert!(brief["reports"].get(key).is_some(), "reports.{key}");
    }
    let systems = brief["systems"].as_array().expect("a list");
    assert!(!systems.is_empty());
    for system in systems {
        for key in [
            "name",
            "kind",
            "latitude_deg",
            "longitude_deg",
            "position_error_km",
            "pressure_hpa",
            "pressure_error_hpa",
            "change_3h_hpa",
            "change_6h_hpa",
            "change_12h_hpa",
            "change_24h_hpa",
            "bergeron",
            "course_deg",
            "speed_kt",
            "phase",
            "since",
            "track",
        ] {
            assert!(system.get(key).is_some(), "systems.{key}");
        }
        for key in ["time", "latitude_deg", "longitude_deg", "pressure_hpa"] {
            assert!(system["track"][0].get(key).is_some(), "track.{key}");
        }
    }
    let tendency = &brief["tendencies"][0];
    for key in ["station", "time", "characteristic", "change_3h_hpa"] {
        assert!(tendency.get(key).is_some(), "tendencies.{key}");
    }
    for key in ["region", "winds", "convergence", "alerts"] {
        assert!(brief.get(key).is_some(), "{key}");
    }
}

#[test]
fn brief_as_text_fits_72_columns_of_ascii_and_states_the_cautions() {
    let output = run(&["brief", FEED, "--at", AT]);
    let text = String::from_utf8(output.stdout).expect("text");
    assert!(text.is_ascii());
    for line in text.lines() {
        assert!(line.len() <= 72, "{line}");
    }
    for piece in ["SITUATION valid 2026-07-10T14:00:00Z", "LOWS", "not a warning service"] {
        assert!(text.contains(piece), "{piece}");
    }
}

#[test]
fn points_come_out_in_their_order_and_empty_where_nothing_is_known() {
    let folder = tempfile::tempdir().expect("a folder");
    let points = folder.path().join("points.csv");
    #[expect(clippy::disallowed_methods, reason = "the test makes its own list of points")]
    std::fs::write(&points, "latitude_deg,longitude_deg\n-45,170\n60,0\n-48.5,-179\n")
        .expect("written");
    let output =
        run(&["export", "points", FEED, "--points", &points.to_string_lossy(), "--at", AT]);
    let text = String::from_utf8(output.stdout).expect("text");
    let lines: Vec<&str> = text.lines().collect();
    assert_eq!(
        lines[0],
        "time,latitude_deg,longitude_deg,pressure_hpa,pressure_error_hpa,change_3h_hpa,\
         geostrophic_from_deg,geostrophic_speed_kt,gradient_from_deg,gradient_speed_kt,\
         surface_from_deg,surface_speed_kt,divergence_per_s"
    );
    assert_eq!(lines.len(), 4);
    let cells: Vec<&str> = lines[1].split(',').collect();
    assert_eq!(cells.len(), 13);
    let pressure: f64 = cells[3].parse().expect("a pressure");
    assert!((940.0..1050.0).contains(&pressure));
    assert_eq!(lines[2], "2026-07-10T14:00:00Z,60,0,,,,,,,,,,");
}

#[test]
fn decode_names_the_place_of_a_fault_and_tells_it_by_the_exit_code() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("a.txt");
    let text = "AAXX 15124\n03772 41480 82324 10082 20059 39876 4X908 57034=\n";
    #[expect(clippy::disallowed_methods, reason = "the test makes its own file")]
    std::fs::write(&file, text).expect("written");
    let path = file.to_string_lossy().into_owned();
    let output = run(&["decode", &path, "--json", "--received", "2026-01-15T12:20Z"]);
    assert_eq!(output.status.code(), Some(1));
    let line = String::from_utf8(output.stdout).expect("text");
    let report: Value = serde_json::from_str(line.lines().next().expect("a line")).expect("JSON");
    assert_eq!(report["station"], "03772");
    assert_eq!(report["time"], "2026-01-15T12:00:00Z");
    assert!(report["pressure_msl_hpa"].is_null());
    assert_eq!(report["pressure_station_hpa"], 987.6);
    assert_eq!(report["complaints"].as_array().map(Vec::len), Some(1));
}

#[test]
fn an_empty_folder_is_no_error_and_no_safety() {
    let folder = tempfile::tempdir().expect("a folder");
    let output = run(&["brief", &folder.path().to_string_lossy()]);
    assert_eq!(output.status.code(), Some(0));
    let text = String::from_utf8(output.stdout).expect("text");
    assert!(text.contains("no report at all"), "{text}");
    let output = run(&["brief", "no-such-folder"]);
    assert_eq!(output.status.code(), Some(1));
    assert!(String::from_utf8_lossy(&output.stderr).contains("no-such-folder"));
}
