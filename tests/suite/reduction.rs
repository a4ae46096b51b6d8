//! Reduction to sea level against what 184 stations report themselves.

use std::io::Read;

use glasskeeper::obs::reduction::{to_sea_level_hpa, vapour_hpa};
use glasskeeper::quantity::celsius_from_kelvin;

struct Row {
    station: String,
    barometer_m: f64,
    reported_hpa: f64,
    reduced_hpa: f64,
}

#[expect(clippy::disallowed_methods, reason = "the test reads its reference data")]
fn rows() -> Vec<Row> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/data/msl_reduction_dwd.csv.gz");
    let bytes = std::fs::read(path).expect("the reference data");
    let mut text = String::new();
    flate2::read::GzDecoder::new(bytes.as_slice()).read_to_string(&mut text).expect("gzip");
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let header = reader.headers().expect("a header").clone();
    let at = |name: &str| header.iter().position(|column| column == name).expect("the column");
    let columns = [
        "blockNumber",
        "stationNumber",
        "heightOfBarometerAboveMeanSeaLevel",
        "nonCoordinatePressure",
        "airTemperature",
        "dewpointTemperature",
        "pressureReducedToMeanSeaLevel",
    ]
    .map(at);
    reader
        .records()
        .map(|record| {
            let record = record.expect("a row");
            let [block, number, barometer_m, station_pa, air_k, dew_k, sea_pa] =
                columns.map(|column| record[column].parse::<f64>().expect("a number"));
            let air_c = celsius_from_kelvin(air_k);
            let vapour = vapour_hpa(air_c, Some(celsius_from_kelvin(dew_k)), None);
            Row {
                station: format!("{:05}", block * 1000.0 + number),
                barometer_m,
                reported_hpa: sea_pa / 100.0,
                reduced_hpa: to_sea_level_hpa(station_pa / 100.0, barometer_m, air_c, vapour),
            }
        })
        .collect()
}

/// Source: 184 German stations, 16 May 2021 12 UTC, decoded with ecCodes 2.50 from a sample of
/// PyPI `pdbufr` 0.15.1. Their sea-level pressures are coded in tenths of a hPa, which alone makes
/// differences up to 0.05 with a median size of 0.025: so the bias is asked to be within 0.02 hPa,
/// and 95 per cent of the stations within 0.06.
#[test]
fn reduces_as_184_stations_do_themselves() {
    let rows = rows();
    assert_eq!(rows.len(), 184);
    let mut differences: Vec<f64> =
        rows.iter().map(|row| row.reduced_hpa - row.reported_hpa).collect();
    differences.sort_by(f64::total_cmp);
    let median = f64::midpoint(differences[91], differences[92]);
    assert!(median.abs() <= 0.02, "the median is {median:.4} hPa");
    let mut sizes: Vec<f64> = differences.iter().map(|difference| difference.abs()).collect();
    sizes.sort_by(f64::total_cmp);
    assert!(sizes[174] <= 0.06, "95 per cent are within {:.4} hPa", sizes[174]);
    // Rounded as the code rounds, the difference is nothing or one tenth.
    let tenths = |hpa: f64| glasskeeper::quantity::whole_nearest(hpa * 10.0);
    let same =
        rows.iter().filter(|row| tenths(row.reduced_hpa) == tenths(row.reported_hpa)).count();
    assert!(same >= 170, "{same} of 184 agree to the coded tenth");
}

/// The five that do not agree are faults of the reports, named in the set's own notes.
#[test]
fn the_five_faulty_reports_stand_out() {
    let rows = rows();
    let mut faulty: Vec<&str> = rows
        .iter()
        .filter(|row| (row.reduced_hpa - row.reported_hpa).abs() > 0.06)
        .map(|row| row.station.as_str())
        .collect();
    faulty.sort_unstable();
    assert_eq!(faulty, ["10124", "10126", "10335", "10476", "10853"]);
    // The largest is seen by the check on single reports too (METHODS RED-4): 1.8 hPa at 396 m is
    // beyond 0.5 + 0.003 H = 1.69.
    let worst = rows.iter().find(|row| row.station == "10853").expect("in the set");
    let miss = (worst.reduced_hpa - worst.reported_hpa).abs();
    assert!(miss > 0.5 + 0.003 * worst.barometer_m, "{miss}");
}
