//! Characteristics and changes computed from real hourly series against those that the stations sent.

use std::io::Read;

use glasskeeper::instant::Instant;
use glasskeeper::obs::held::Held;
use glasskeeper::obs::{Catalogue, ObsSettings, Provenance, observe};
use glasskeeper::report::{Form, Identifier, Platform, Report};
use glasskeeper::sphere::Position;
use glasskeeper::tendency;

#[expect(clippy::disallowed_methods, reason = "the test reads its reference data")]
fn held() -> Held {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/data/hourly_pressures_19950318.csv.gz");
    let bytes = std::fs::read(path).expect("the reference data");
    let mut text = String::new();
    flate2::read::GzDecoder::new(bytes.as_slice()).read_to_string(&mut text).expect("gzip");
    let mut held = Held::new();
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    for record in reader.records() {
        let record = record.expect("a row");
        let number = |column: usize| record[column].parse::<f64>().ok();
        let station = Identifier::new(&record[0]).expect("a name");
        let time = Instant::parse(&record[1]).expect("a time");
        let mut report = Report::empty(station, Platform::Land, Form::Csv, time);
        report.position = number(2).zip(number(3)).and_then(|(n, e)| Position::new(n, e));
        report.pressure_msl_hpa = number(4);
        report.characteristic = record[5].parse().ok();
        report.pressure_change_3h_hpa = number(6);
        let provenance = Provenance {
            file: "day".to_owned(),
            content: "00".to_owned(),
            start: 0,
            end: 1,
            received: time,
        };
        held.insert(report, provenance);
    }
    held
}

/// Source: hourly reports of North America, 18 March 1995 (Debian `libncarg-data` 6.6.2). The
/// observer reads a barograph at the station's own level, the program four whole hours of sea-level
/// pressure in tenths; so the code is the same for about 63 of 100 and says the same direction for
/// about 95 (counted by another program on the same file, too). Reports ten minutes off the hour
/// are scaled to three hours, so that half of the changes agree within two tenths.
#[test]
fn computed_tendencies_are_those_that_the_stations_send() {
    let held = held();
    let first = Instant::from_calendar(1995, 3, 18, 3, 0).expect("a time").hour_floor();
    let mut misses: Vec<f64> = Vec::new();
    let (mut compared, mut same_code, mut same_direction) = (0.0, 0.0, 0.0);
    for step in 0..7 {
        let valid = first.plus(3 * step);
        let settings = ObsSettings::default();
        let hours = valid.plus(-25)..=valid.plus(1);
        let observed = observe(&held, &Catalogue::empty(), hours, &settings);
        let now = valid.instant().plus_s(300);
        let rows = tendency::table(&observed, now, valid, &Catalogue::empty(), &|_, _| None);
        for row in rows.iter().filter(|row| now.seconds_since(row.time) < 1800) {
            if let (Some(own), Some(sent)) =
                (row.change_3h_computed_hpa, row.change_3h_reported_hpa)
            {
                misses.push(own - sent);
            }
            if let (Some(own), Some(sent)) = (row.characteristic_computed, row.characteristic) {
                compared += 1.0;
                same_code += f64::from(u8::from(own == sent));
                same_direction += f64::from(u8::from((own < 4) == (sent < 4)));
            }
        }
    }
    misses.sort_by(f64::total_cmp);
    assert!(misses.len() > 700, "{} changes", misses.len());
    let at = |share: usize| misses[misses.len() * share / 100];
    assert!(at(50).abs() <= 0.05, "the median miss is {:.2} hPa", at(50));
    assert!(at(25) >= -0.2 && at(75) <= 0.2, "half lie within {:.2} {:.2}", at(25), at(75));
    assert!(at(5) >= -1.5 && at(95) <= 1.5, "nine in ten lie within {:.2} {:.2}", at(5), at(95));
    assert!(compared > 300.0, "{compared} characteristics");
    assert!(same_code / compared > 0.55, "{same_code} of {compared} codes");
    assert!(same_direction / compared > 0.92, "{same_direction} of {compared} directions");
}
