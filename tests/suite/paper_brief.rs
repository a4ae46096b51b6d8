//! What goes out: brief, JSON and table of points of an invented deepening low, in both hemispheres.

use std::fmt::Write as _;
use std::path::Path;

use glasskeeper::command::situation::{Configured, situation};
use glasskeeper::obs::Catalogue;
use glasskeeper::paper::brief::{WIDTH, brief_text};
use glasskeeper::paper::json::brief_json;
use glasskeeper::paper::points::{HEADER, points_csv};
use glasskeeper::picture::Picture;
use glasskeeper::quantity::wrap_360_deg;
use glasskeeper::settings::{Settings, WatchPoint};
use glasskeeper::sphere::Position;

/// Buoys four degrees apart round an invented low that deepens 2 hPa an hour for eight hours.
fn feed(folder: &Path, centre: Position) {
    let mut text = String::from(
        "station,kind,time,latitude_deg,longitude_deg,pressure_msl_hpa,wind_from_deg,wind_speed_m_s\n",
    );
    let sign = centre.latitude_deg().signum();
    for hour in 0..8_u8 {
        let depth_hpa = 14.0 + 2.0 * f64::from(hour);
        for row in 0..7_u8 {
            for column in 0..9_u8 {
                let place = Position::clamped(
                    centre.latitude_deg() + 4.0 * (f64::from(row) - 3.0) + 0.7,
                    centre.longitude_deg() + 5.0 * (f64::from(column) - 4.0) + 0.9,
                );
                let share = place.distance_km(centre) / 600.0;
                let pressure_hpa = 1012.0 - depth_hpa * (-0.5 * share * share).exp();
                let speed_m_s = 30.0 * share * (-0.5 * share * share).exp();
                // From 70 degrees off the outward bearing: round the low and inward.
                let outward_deg = place.bearing_deg(centre) + 180.0;
                let from_deg = wrap_360_deg(outward_deg + sign * 70.0);
                let _ = writeln!(
                    text,
                    "B{row}{column},buoy,2026-01-15T{hour:02}:00:00Z,{:.2},{:.2},{pressure_hpa:.1},\
                     {from_deg:.0},{speed_m_s:.1}",
                    place.latitude_deg(),
                    place.longitude_deg(),
                );
            }
        }
    }
    #[expect(clippy::disallowed_methods, reason = "the test makes its own feed")]
    std::fs::write(folder.join("buoys.csv"), text).expect("a writable folder");
}

fn picture(centre: Position) -> Picture {
    let folder = tempfile::tempdir().expect("a folder");
    feed(folder.path(), centre);
    let point = |name: &str, place: Position| WatchPoint {
        name: name.to_owned(),
        latitude_deg: place.latitude_deg(),
        longitude_deg: place.longitude_deg(),
    };
    let settings = Settings {
        grid_columns: 41,
        grid_rows: 41,
        window_h: 12,
        watch_points: vec![
            point("Skerry \u{1b}[31m\u{e6}", centre.destination(90.0, 600.0)),
            point("Far away", centre.destination(180.0, 5500.0)),
        ],
        ..Settings::default()
    };
    let catalogue = Catalogue::built_in();
    let configured = Configured { settings, catalogue, complaints: Vec::new() };
    situation(folder.path(), &configured, None).expect("a picture")
}

fn north() -> Position {
    Position::clamped(54.0, -24.0)
}

fn south() -> Position {
    Position::clamped(-52.0, 178.0)
}

#[test]
fn the_brief_is_plain_complete_and_no_wider_than_72_columns() {
    for (centre, latitude) in [(north(), 'N'), (south(), 'S')] {
        let text = brief_text(&picture(centre));
        for line in text.lines() {
            assert!(line.chars().count() <= WIDTH, "{line}");
            assert!(line.chars().all(|c| c == ' ' || c.is_ascii_graphic()), "{line:?}");
        }
        for expected in [
            "SITUATION valid 2026-01-15T07:00:00Z",
            "Reports: 504 held",
            "LOWS",
            "HIGHS",
            "deepening",
            "WATCH POINTS",
            "Skerry ?[31m?",
            "Far away",
            "not known: no analysis there",
            "STRONGEST WINDS REPORTED",
            "CONVERGENCE",
            "PRESSURE TENDENCY",
            "not a warning service",
            "Official warnings",
        ] {
            assert!(text.contains(expected), "{expected} is missing from:\n{text}");
        }
        let low = text.lines().skip_while(|line| *line != "LOWS").nth(1).expect("a low");
        assert!(low.contains(latitude), "{low}");
    }
}

#[test]
fn the_json_has_every_promised_key_and_null_for_the_unknown() {
    let json = brief_json(&picture(north()));
    assert_eq!(json["schema"], 1);
    for key in
        ["valid", "region", "reports", "systems", "tendencies", "winds", "convergence", "alerts"]
    {
        assert!(!json[key].is_null(), "{key}");
    }
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
        assert!(json["reports"].get(key).is_some(), "reports.{key}");
    }
    let low = &json["systems"][0];
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
        assert!(low.get(key).is_some(), "systems[0].{key}");
    }
    assert_eq!(low["kind"], "low");
    assert!(low["change_24h_hpa"].is_null() && low["bergeron"].is_null(), "{low}");
    let change_hpa = low["change_6h_hpa"].as_f64().expect("followed for seven hours");
    assert!((change_hpa + 12.0).abs() < 3.0, "{change_hpa}");
    for key in ["time", "latitude_deg", "longitude_deg", "pressure_hpa"] {
        assert!(low["track"][0].get(key).is_some(), "track.{key}");
    }
    let far = json["winds"].as_array().expect("a list").iter().find(|w| w["station"] == "Far away");
    assert!(far.expect("the watch point")["surface"].is_null());
}

#[test]
fn the_table_of_points_has_its_header_and_is_empty_off_the_grid() {
    let picture = picture(south());
    let points = [south().destination(0.0, 600.0), Position::clamped(60.0, 0.0)];
    let mut out = Vec::new();
    points_csv(&picture, &points, &mut out).expect("written");
    let text = String::from_utf8(out).expect("text");
    let lines: Vec<&str> = text.lines().collect();
    assert_eq!(lines.len(), 3);
    assert_eq!(lines[0], HEADER);
    assert_eq!(lines[0].split(',').count(), 13);
    let cells: Vec<&str> = lines[1].split(',').collect();
    assert!(cells.iter().all(|cell| !cell.is_empty()), "{cells:?}");
    // Common practice, no source: north of a southern low the wind is westerly, turned towards it.
    let surface_from_deg: f64 = cells[10].parse().expect("a direction");
    assert!((270.0..350.0).contains(&surface_from_deg), "{surface_from_deg}");
    let gradient_from_deg: f64 = cells[8].parse().expect("a direction");
    assert!((255.0..285.0).contains(&gradient_from_deg), "{gradient_from_deg}");
    assert_eq!(lines[2], "2026-01-15T07:00:00Z,60,0,,,,,,,,,,");
}
