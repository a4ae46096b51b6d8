//! Real messages against another decoder's values, made messages against the encoder's, and lies.

use std::collections::BTreeMap;
use std::io::Read;

use serde_json::Value as Json;

use super::*;
use crate::instant::Instant;
use crate::report::{Platform, Revision};

#[expect(clippy::disallowed_methods, reason = "the tests read their own data")]
fn data(name: &str) -> Vec<u8> {
    let path = format!("{}/tests/data/bufr/{name}", env!("CARGO_MANIFEST_DIR"));
    let bytes = std::fs::read(&path).expect("the test data are in the repository");
    if bytes.get(..2) != Some([0x1f, 0x8b].as_slice()) {
        return bytes;
    }
    let mut out = Vec::new();
    flate2::read::GzDecoder::new(&bytes[..]).read_to_end(&mut out).expect("a gzip file");
    out
}

fn context(text: &str) -> Context {
    Context { received: Instant::parse(text).expect("a time") }
}

/// Every message of a file: its offset and reading.
fn messages(bytes: &[u8], context: Context) -> Vec<(usize, MessageReading)> {
    let mut decoder = Decoder::new();
    let mut out = Vec::new();
    let mut at = 0;
    while let Some(found) = bytes[at..].windows(4).position(|word| word == b"BUFR") {
        at += found;
        let reading = decoder.read_message(&bytes[at..], at, &context);
        let length = reading.length;
        out.push((at, reading));
        at += length;
    }
    out
}

fn only(name: &str) -> Vec<Report> {
    let found = messages(&data(&format!("made/{name}.bufr")), context("2026-01-15T12:30Z"));
    assert_eq!(found.len(), 1);
    let reading = found.into_iter().next().expect("one").1;
    assert_eq!(reading.complaints, []);
    reading.reports
}

#[track_caller]
fn near(found: Option<f64>, expected: f64) {
    let found = found.expect("a value");
    assert!((found - expected).abs() < 1e-9, "{found} is not {expected}");
}

/// METHODS CHK-028: encoded with ecCodes 2.50.0.
#[test]
fn a_land_station_by_307080() {
    let [report] = only("s307080").try_into().expect("one report");
    assert_eq!((report.station.as_str(), report.platform), ("03772", Platform::Land));
    assert_eq!(report.time, Instant::parse("2026-01-15T12:00Z").expect("a time"));
    let place = report.position.expect("a place");
    near(Some(place.latitude_deg()), 51.478_83);
    near(Some(place.longitude_deg()), -0.449_04);
    near(report.barometer_height_m, 26.0);
    near(report.pressure_station_hpa, 987.6);
    near(report.pressure_msl_hpa, 990.8);
    near(report.pressure_change_3h_hpa, -3.4);
    near(report.pressure_change_24h_hpa, -12.8);
    assert_eq!(report.characteristic, Some(7));
    near(report.air_temperature_c, 8.2);
    near(report.dew_point_c, 5.9);
    near(report.wind_from_deg, 230.0);
    near(report.wind_speed_m_s, 12.3);
    near(report.wind_gust_m_s, 19.5);
}

/// METHODS CHK-029.
#[test]
fn a_ship_by_308009() {
    let [report] = only("s308009").try_into().expect("one report");
    assert_eq!((report.station.as_str(), report.platform), ("TESTSHP", Platform::Ship));
    near(report.course_deg, 45.0);
    near(report.speed_m_s, 9.0);
    near(report.position.map(crate::sphere::Position::latitude_deg), 48.3);
    near(report.position.map(crate::sphere::Position::longitude_deg), -15.6);
    near(report.pressure_msl_hpa, 995.8);
    near(report.pressure_change_3h_hpa, -2.7);
    assert_eq!(report.characteristic, Some(8));
    near(report.wind_from_deg, 210.0);
    near(report.wind_speed_m_s, 17.5);
    near(report.sea_temperature_c, 12.2);
}

/// METHODS CHK-030 and CHK-031: compressed numbers and characters.
#[test]
fn compressed_subsets() {
    let reports = only("scomp");
    let pressures: Vec<_> = reports.iter().map(|report| report.pressure_msl_hpa).collect();
    assert_eq!(pressures, [Some(990.8), Some(989.1), Some(972.2)]);
    assert_eq!(reports[2].wind_from_deg, None);
    let reports = only("schar");
    let names: Vec<_> = reports.iter().map(|report| report.station.to_string()).collect();
    assert_eq!(names, ["ABCD", "XYZ9", "SHIP12"]);
    let courses: Vec<_> = reports.iter().map(|report| report.course_deg).collect();
    assert_eq!(courses, [Some(45.0), Some(0.0), None]);
    assert_eq!(reports[1].speed_m_s, Some(0.0));
}

/// METHODS CHK-032: the second time is the time of observation.
#[test]
fn a_drifter_by_315009_has_two_times() {
    let [report] = only("s315009").try_into().expect("one report");
    assert_eq!((report.station.as_str(), report.platform), ("6401234", Platform::Buoy));
    assert_eq!(report.time, Instant::parse("2026-01-15T12:00Z").expect("a time"));
    near(report.position.map(crate::sphere::Position::latitude_deg), 55.123_45);
    near(report.position.map(crate::sphere::Position::longitude_deg), -20.543_21);
    near(report.pressure_station_hpa, 978.5);
    near(report.sea_temperature_c, 8.3);
}

fn listed(name: &str) -> Vec<Value> {
    let bytes = data(&format!("made/{name}.bufr"));
    let listing = Decoder::new().list(&bytes).expect("it can be walked");
    assert_eq!(listing.stop, None);
    listing.subsets.into_iter().next().expect("a subset")
}

fn number(values: &[Value], descriptor: u32, rank: usize) -> Option<f64> {
    values
        .iter()
        .filter_map(|value| match value {
            Value::Number(found, value) if *found == descriptor => Some(*value),
            _ => None,
        })
        .nth(rank)
        .flatten()
}

/// METHODS CHK-033 to CHK-035: operators 201, 202, 204, 207 and delayed replication.
#[test]
fn operators_change_width_scale_and_reference() {
    let values = listed("sops");
    near(number(&values, 10_051, 0), 99_083.0);
    near(number(&values, 12_101, 0), 281.357);
    near(number(&listed("s204"), 10_051, 0), 99_080.0);
    let values = listed("srep");
    for (rank, (amount, base)) in [(3.0, 300.0), (6.0, 900.0), (8.0, 2400.0)].iter().enumerate() {
        near(number(&values, 20_011, rank), *amount);
        near(number(&values, 20_013, rank), *base);
    }
    near(number(&values, 10_051, 0), 99_080.0);
}

fn same(found: &Value, expected: &Json) -> bool {
    match (found, expected) {
        (Value::Number(_, None) | Value::Text(_, None), Json::Null) => true,
        (Value::Number(_, Some(found)), expected) => expected
            .as_f64()
            .is_some_and(|expected| (found - expected).abs() <= 1e-9 * expected.abs().max(1.0)),
        (Value::Text(_, found), Json::String(expected)) => {
            found.as_deref().unwrap_or_default() == expected.trim_matches([' ', '\0'])
        }
        (Value::Text(_, Some(found)), Json::Null) => found.is_empty(),
        _ => false,
    }
}

fn descriptor(value: &Value) -> u32 {
    match value {
        Value::Number(descriptor, _) | Value::Text(descriptor, _) => *descriptor,
    }
}

/// Every element of ten real files, against ecCodes 2.50 (files from PyPI pybufrkit 0.2.25, MIT).
#[test]
fn every_element_agrees_with_another_decoder() {
    let mut compared = 0;
    for name in [
        "ISMD01_OKPR",
        "ISND02_LLBD",
        "bssh_170",
        "bssh_176",
        "bssh_178",
        "bssh_180",
        "buoy_27",
        "ship_9",
        "ship_11",
        "syno_4",
    ] {
        let truth: Vec<Json> =
            serde_json::from_slice(&data(&format!("{name}.json.gz"))).expect("JSON");
        let bytes = data(&format!("{name}.bufr.gz"));
        let context = context("2030-01-01T00:00Z");
        let places: Vec<usize> = messages(&bytes, context).iter().map(|found| found.0).collect();
        assert_eq!(places.len(), truth.len(), "{name}");
        let mut decoder = Decoder::new();
        for (at, truth) in places.iter().zip(&truth) {
            let listing = decoder.list(&bytes[*at..]).expect("it can be walked");
            let expected: BTreeMap<&str, &Json> = truth["data"]
                .as_array()
                .expect("an array")
                .iter()
                .map(|pair| (pair[0].as_str().expect("a key"), &pair[1]))
                .collect();
            let mut rank: BTreeMap<&str, usize> = BTreeMap::new();
            for (subset, values) in listing.subsets.iter().enumerate() {
                if listing.header.compressed {
                    rank.clear();
                }
                for value in values {
                    let descriptor = descriptor(value);
                    let row = element_in(descriptor, listing.header.tables).expect("a row");
                    // Elements of one short name share their ranks there.
                    let rank = rank.entry(row.abbreviation.as_str()).or_insert(0);
                    *rank += 1;
                    if descriptor / 1000 == 31 {
                        continue;
                    }
                    let key = format!("#{rank}#{}", row.abbreviation);
                    let Some(expected) = expected.get(key.as_str()) else {
                        panic!("{name} at {at}: no {key} in the other decoder's values");
                    };
                    let expected =
                        if let Json::Array(all) = expected { &all[subset] } else { expected };
                    assert!(same(value, expected), "{name} at {at}: {key}: {value:?}, {expected}");
                    compared += 1;
                }
            }
        }
    }
    assert!(compared > 5000, "{compared}");
}

fn rows(name: &str) -> Vec<BTreeMap<String, String>> {
    let bytes = data(name);
    let mut reader = csv::Reader::from_reader(&bytes[..]);
    let headers = reader.headers().expect("a header").clone();
    reader
        .records()
        .map(|row| {
            let row = row.expect("a row");
            headers.iter().map(str::to_owned).zip(row.iter().map(str::to_owned)).collect()
        })
        .collect()
}

/// A whole hour of the world, 2018-11-02 12 UTC, against ecCodes 2.50 (PyPI pdbufr 0.15.1):
/// counts and every used element of every message, exact to the coded digit.
#[test]
fn an_hour_of_the_whole_world() {
    let bytes = data("perf_synop.bufr.gz");
    let truth = rows("perf_synop.csv.gz");
    let found = messages(&bytes, context("2018-11-02T12:30Z"));
    assert_eq!((found.len(), truth.len()), (15_824, 15_824));
    let reports: Vec<_> = found.iter().flat_map(|(_, reading)| &reading.reports).collect();
    let pressures = reports.iter().filter(|report| report.pressure_msl_hpa.is_some()).count();
    let stations: std::collections::BTreeSet<_> =
        reports.iter().map(|report| report.station).collect();
    assert_eq!((stations.len(), pressures), (7867, 6314));
    let changes = reports
        .iter()
        .filter(|report| report.characteristic.is_some() && report.pressure_change_3h_hpa.is_some())
        .count();
    assert_eq!(changes, 6066);
    for ((_, reading), row) in found.iter().zip(&truth) {
        let [report] = reading.reports.as_slice() else { panic!("one report: {reading:?}") };
        let value = |key: &str| row[key].parse::<f64>().ok();
        let check = |key: &str, found: Option<f64>, from: fn(f64) -> f64| {
            let expected = value(key).map(from);
            let equal = match (found, expected) {
                (Some(found), Some(expected)) => (found - expected).abs() < 1e-6,
                (None, None) => true,
                _ => false,
            };
            assert!(equal, "{}: {key}: {found:?}, {expected:?}", report.station);
        };
        let hecto = |value: f64| value / 100.0;
        check("pressureReducedToMeanSeaLevel", report.pressure_msl_hpa, hecto);
        check("nonCoordinatePressure", report.pressure_station_hpa, hecto);
        check("3HourPressureChange", report.pressure_change_3h_hpa, hecto);
        check("characteristicOfPressureTendency", report.characteristic.map(f64::from), |x| x);
        check("windDirectionAt10M", report.wind_from_deg, |x| x);
        check("windSpeedAt10M", report.wind_speed_m_s, |x| x);
        check("airTemperatureAt2M", report.air_temperature_c, |x| x - 273.15);
        check("dewpointTemperatureAt2M", report.dew_point_c, |x| x - 273.15);
        check("latitude", report.position.map(crate::sphere::Position::latitude_deg), |x| x);
        check("longitude", report.position.map(crate::sphere::Position::longitude_deg), |x| x);
        check("heightOfStation", report.station_height_m, |x| x);
    }
}

/// A German bulletin file with its transmission framing, 1,031 subsets of 307086, against ecCodes.
#[test]
fn a_framed_file_of_many_subsets() {
    let bytes = data("dwd_20210516_synop.bufr.gz");
    let truth = rows("dwd_20210516.csv.gz");
    let found = messages(&bytes, context("2021-05-16T12:10Z"));
    assert_eq!(found.len(), 44);
    let reports: Vec<_> = found.iter().flat_map(|(_, reading)| &reading.reports).collect();
    assert_eq!((reports.len(), truth.len()), (1031, 1031));
    for (report, row) in reports.iter().zip(&truth) {
        let name = format!("{:0>2}{:0>3}", row["blockNumber"], row["stationNumber"]);
        if row["blockNumber"].is_empty() {
            // A national station without an index number: its short name stands for it.
            assert_eq!(report.station.as_str().len(), 4);
        } else {
            assert_eq!(report.station.as_str(), name);
        }
        for (key, found, factor) in [
            ("pressureReducedToMeanSeaLevel", report.pressure_msl_hpa, 0.01),
            ("nonCoordinatePressure", report.pressure_station_hpa, 0.01),
            ("3HourPressureChange", report.pressure_change_3h_hpa, 0.01),
            ("windDirection", report.wind_from_deg, 1.0),
            ("windSpeed", report.wind_speed_m_s, 1.0),
            ("heightOfBarometerAboveMeanSeaLevel", report.barometer_height_m, 1.0),
            ("heightOfStationGroundAboveMeanSeaLevel", report.station_height_m, 1.0),
        ] {
            let expected = row[key].parse::<f64>().ok().map(|value| value * factor);
            let equal = match (found, expected) {
                (Some(found), Some(expected)) => (found - expected).abs() < 1e-6,
                (None, None) => true,
                _ => false,
            };
            assert!(equal, "{name}: {key}: {found:?}, {expected:?}");
        }
    }
}

#[test]
fn a_correction_is_marked_by_its_update_number() {
    let mut bytes = data("made/s308009.bufr");
    bytes[16] = 2;
    let reading = Decoder::new().read_message(&bytes, 0, &context("2026-01-15T12:30Z"));
    assert_eq!(reading.reports[0].revision, Revision::Correction(2));
}

/// Every made message cut at every byte and with every byte changed.
#[test]
fn broken_messages_complain_and_never_panic() {
    let context = context("2026-01-15T12:30Z");
    for name in ["s307080", "s308009", "s315009", "scomp", "schar", "sops", "s204", "srep"] {
        let whole = data(&format!("made/{name}.bufr"));
        let mut decoder = Decoder::new();
        for cut in 4..whole.len() {
            let reading = decoder.read_message(&whole[..cut], 0, &context);
            assert!(!reading.complaints.is_empty(), "{name} cut at {cut} says nothing");
        }
        for at in 4..whole.len() {
            for change in [0x00, 0x01, 0x7f, 0x80, 0xff] {
                let mut bytes = whole.clone();
                bytes[at] ^= change;
                let reading = decoder.read_message(&bytes, 0, &context);
                assert!((4..=bytes.len()).contains(&reading.length));
            }
        }
    }
}

/// A message of `data` octets with one descriptor list and a claimed number of subsets.
fn lying(descriptors: &[u32], subsets: u16, compressed: bool, data: &[u8]) -> Vec<u8> {
    let three = 7 + 2 * descriptors.len();
    let four = 4 + data.len();
    let total = 8 + 22 + three + four + 4;
    let length = |n: usize| u32::try_from(n).expect("small").to_be_bytes()[1..].to_vec();
    let mut out = b"BUFR".to_vec();
    out.extend(length(total));
    out.push(4);
    out.extend(length(22));
    out.extend([0, 0, 0, 0, 0, 0, 0, 0, 0xff, 0, 31, 0, 7, 0xea, 1, 15, 12, 0, 0]);
    out.extend(length(three));
    out.push(0);
    out.extend(subsets.to_be_bytes());
    out.push(if compressed { 0xc0 } else { 0x80 });
    for descriptor in descriptors {
        let word =
            (descriptor / 100_000) << 14 | (descriptor / 1000 % 100) << 8 | (descriptor % 1000);
        out.extend(u16::try_from(word).expect("16 bits").to_be_bytes());
    }
    out.extend(length(four));
    out.push(0);
    out.extend(data);
    out.extend(b"7777");
    out
}

#[test]
fn a_message_that_lies_about_its_counts_costs_no_more_than_its_size() {
    let context = context("2026-01-15T12:30Z");
    // 60,000 subsets in 40 octets, compressed: refused before anything is made for them.
    let bytes = lying(&[301_090], 60_000, true, &[0; 40]);
    let reading = Decoder::new().read_message(&bytes, 0, &context);
    assert_eq!(reading.reports.len(), 0);
    assert!(reading.complaints[0].message.contains("60000 subsets"), "{reading:?}");
    // Replication factors of 65535 nested three deep: the data end first.
    let nested = [103_000, 31_002, 102_000, 31_002, 10_051];
    let bytes = lying(&nested, 1, false, &[0xff; 64]);
    let reading = Decoder::new().read_message(&bytes, 0, &context);
    assert!(reading.reports.is_empty());
    // 255 times 255 times an operator that takes no data: no lying count is run for nothing.
    let hollow = [102_255, 101_255, 201_129];
    let bytes = lying(&hollow, 1, false, &[0; 8]);
    Decoder::new().read_message(&bytes, 0, &context);
    assert!(size_of::<collect::Collector>() < MEMORY_PER_BYTE);
    assert!(size_of::<Report>() < MEMORY_PER_BYTE);
}

#[test]
fn an_unknown_descriptor_keeps_what_came_before_it() {
    let mut bytes = data("ship_9.bufr.gz");
    let at = bytes.windows(4).position(|word| word == b"BUFR").expect("a message");
    // Octet 6 of section 1: a centre whose local table is not known.
    bytes[at + 8 + 5] = 7;
    let reading = Decoder::new().read_message(&bytes[at..], at, &context("2012-10-30T00:30Z"));
    assert_eq!(reading.reports.len(), 1);
    assert_eq!(reading.reports[0].pressure_msl_hpa, Some(1010.2));
    assert!(reading.complaints[0].message.contains("010197"), "{:?}", reading.complaints);
}
