//! The character forms against two published decoders: pymetdecoder 0.2.2 (FM 12, 13, 14) and
//! metar 2.0.2 (FM 15, 16), over reports that `tests/reference/character_forms.py` wrote, took from
//! the samples, or found in the tests of the second.

use std::io::Read as _;
use std::path::Path;

use flate2::read::GzDecoder;
use glasskeeper::instant::Instant;
use glasskeeper::quantity::m_s_from_kt;
use glasskeeper::report::{Report, WindSource};
use glasskeeper::sphere::Position;
use glasskeeper::wire::{Context, read};
use serde_json::Value;

#[expect(clippy::disallowed_methods, reason = "the test reads its own data")]
fn rows() -> Vec<Value> {
    let path =
        Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/wire/character_forms.json.gz");
    let file = std::fs::read(path).expect("the data are there");
    let mut text = String::new();
    GzDecoder::new(&file[..]).read_to_string(&mut text).expect("gzip");
    text.lines().map(|line| serde_json::from_str(line).expect("JSON")).collect()
}

fn decoded(text: &str) -> Option<Report> {
    // The library was told that days up to the 15th are of January, later ones of December; six
    // hours after this receipt the 15th ends.
    let received = Instant::parse("2026-01-15T17:59:59Z").expect("a time");
    let reading = read(text.as_bytes(), &Context { received });
    let bytes = reading.bytes;
    assert_eq!(bytes.reports + bytes.envelope + bytes.refused, bytes.total, "{text}");
    reading.reports.first().map(|decoded| decoded.report)
}

/// Both missing, or both there and closer than a tolerance.
fn agree(found: Option<f64>, expected: &Value, tolerance: f64) -> bool {
    match (found, expected.as_f64()) {
        (None, None) => expected.is_null(),
        (Some(found), Some(expected)) => (found - expected).abs() <= tolerance,
        _ => false,
    }
}

fn differences_synop(report: &Report, expected: &Value) -> Vec<&'static str> {
    let mut differing = Vec::new();
    let mut check = |name, good: bool| {
        if !good {
            differing.push(name);
        }
    };
    let exact = 1e-9;
    check("station", expected["station"] == report.station.as_str());
    let time = report.time.day_time();
    let day_hour = format!(
        "{:02} {:02}:00Z",
        expected["day"].as_u64().unwrap_or(99),
        expected["hour"].as_u64().unwrap_or(99)
    );
    check("time", time == day_hour);
    check(
        "latitude",
        agree(report.position.map(Position::latitude_deg), &expected["latitude_deg"], exact),
    );
    check(
        "longitude",
        agree(report.position.map(Position::longitude_deg), &expected["longitude_deg"], exact)
            // The 180th meridian has two names.
            || expected["longitude_deg"] == -180.0,
    );
    let to_m_s = |value: &Value| {
        value
            .as_f64()
            .map(|speed| if expected["wind_unit"] == "KT" { m_s_from_kt(speed) } else { speed })
    };
    check(
        "wind source",
        (report.wind_source == WindSource::Estimated) == (expected["wind_estimated"] == true),
    );
    check("wind variable", report.wind_variable == (expected["wind_variable"] == true));
    if expected["wind_calm"] == true {
        check("calm", report.wind_from_deg == Some(0.0) && report.wind_speed_m_s == Some(0.0));
    } else {
        check("wind from", agree(report.wind_from_deg, &expected["wind_from_deg"], exact));
    }
    let close = |found: Option<f64>, expected: Option<f64>| match (found, expected) {
        (None, None) => true,
        (Some(found), Some(expected)) => (found - expected).abs() < exact,
        _ => false,
    };
    check("wind speed", close(report.wind_speed_m_s, to_m_s(&expected["wind_speed"])));
    check("gust", close(report.wind_gust_m_s, to_m_s(&expected["gust"])));
    check("air", agree(report.air_temperature_c, &expected["air_temperature_c"], exact));
    check("dew", agree(report.dew_point_c, &expected["dew_point_c"], exact));
    check(
        "humidity",
        agree(report.relative_humidity_percent, &expected["relative_humidity_percent"], exact),
    );
    check(
        "station p",
        agree(report.pressure_station_hpa, &expected["pressure_station_hpa"], exact),
    );
    check("sea-level p", agree(report.pressure_msl_hpa, &expected["pressure_msl_hpa"], exact));
    let surface = report.standard_surface;
    check("surface", agree(surface.map(|s| s.pressure_hpa), &expected["surface_hpa"], exact));
    // The library leaves the thousands of a 500 hPa height out, as they are coded.
    let left_out = if expected["surface_hpa"] == 500 { 5000.0 } else { 0.0 };
    check(
        "height",
        agree(surface.map(|s| s.height_gpm - left_out), &expected["surface_gpm"], exact),
    );
    check(
        "characteristic",
        report.characteristic.map(u64::from) == expected["characteristic"].as_u64(),
    );
    check("3 h", agree(report.pressure_change_3h_hpa, &expected["pressure_change_3h_hpa"], exact));
    check(
        "24 h",
        agree(report.pressure_change_24h_hpa, &expected["pressure_change_24h_hpa"], exact),
    );
    check("sea", agree(report.sea_temperature_c, &expected["sea_temperature_c"], exact));
    if let Some(code) = expected["course_code"].as_u64().filter(|code| (1..=8).contains(code)) {
        // Code table 0700: eighths of the compass from north-east.
        let course_deg = (45 * code % 360) as f64;
        check("course", report.course_deg == Some(course_deg));
    }
    if let Some(code) = expected["speed_code"].as_u64() {
        // Code table 4451, mid values as METHODS COD-4 takes them.
        let mid_kt = if code == 0 { 0.0 } else { (5 * code - 2) as f64 };
        check("speed", close(report.speed_m_s, Some(m_s_from_kt(mid_kt))));
    }
    if let Some(height) = expected["elevation"]["value"].as_f64() {
        let metres = if expected["elevation"]["unit"] == "m" { height } else { height * 0.3048 };
        check("station height", close(report.station_height_m, Some(metres)));
    }
    differing
}

fn differences_metar(report: &Report, expected: &Value) -> Vec<&'static str> {
    let mut differing = Vec::new();
    let mut check = |name, good: bool| {
        if !good {
            differing.push(name);
        }
    };
    check("station", expected["station"] == report.station.as_str());
    check("time", expected["time"] == report.time.rfc3339());
    let calm = report.wind_speed_m_s == Some(0.0) && expected["wind_speed_m_s"] == 0.0;
    check("wind from", calm || agree(report.wind_from_deg, &expected["wind_from_deg"], 1e-9));
    // The library rounds its knot to five figures.
    check("wind speed", agree(report.wind_speed_m_s, &expected["wind_speed_m_s"], 0.001));
    check("gust", agree(report.wind_gust_m_s, &expected["wind_gust_m_s"], 0.001));
    check("air", agree(report.air_temperature_c, &expected["air_temperature_c"], 1e-9));
    check("dew", agree(report.dew_point_c, &expected["dew_point_c"], 1e-9));
    check("sea-level p", agree(report.pressure_msl_hpa, &expected["pressure_msl_hpa"], 1e-9));
    // Whole hectopascals are cut, so that the middle of the hectopascal is half of one higher;
    // the library's inch of mercury differs from the definition by 3 in a million.
    let half = if expected["altimeter_inches"] == true { 0.0 } else { 0.5 };
    check(
        "altimeter",
        agree(report.altimeter_hpa.map(|p| p - half), &expected["altimeter_hpa"], 0.004),
    );
    differing
}

/// Where a library is at odds with the standard, by the text that shows it.
fn excused(text: &str, differing: &str) -> bool {
    // The library takes a wind without a unit for knots; FM 15 has no wind without a unit.
    let no_unit = text == "CXXX 101651Z 09010G20";
    // It passes over two groups run together; here they are read as two, with a complaint.
    let run_together = text.contains(" 2222400086 ");
    (no_unit && matches!(differing, "wind from" | "wind speed" | "gust"))
        || (run_together && differing == "sea")
}

#[test]
fn published_decoders_say_the_same() {
    let rows = rows();
    let mut compared = [0_usize; 2];
    let mut wrong = Vec::new();
    for row in rows.iter().skip(1) {
        let (text, expected) = (row["text"].as_str().expect("text"), &row["expected"]);
        let library = expected["library"].as_str().expect("a library");
        let Some(report) = decoded(text) else {
            wrong.push(format!("not read: {text}"));
            continue;
        };
        let differing = if library == "metar" {
            compared[1] += 1;
            differences_metar(&report, expected)
        } else {
            compared[0] += 1;
            differences_synop(&report, expected)
        };
        for name in differing.into_iter().filter(|name| !excused(text, name)) {
            wrong.push(format!("{name}: {text}\n    found {report:?}\n    expected {expected}"));
        }
    }
    assert!(compared[0] >= 300 && compared[1] >= 140, "{compared:?} reports compared");
    assert!(wrong.is_empty(), "{} differences\n{}", wrong.len(), wrong.join("\n"));
}
