//! How good the analysis is: against fields and withheld reports of other makers, and against
//! general-purpose interpolators on the very same reports (tests/reference/interpolators.py).

use std::collections::BTreeMap;
use std::io::Read;
use std::sync::Arc;

use flate2::read::GzDecoder;
use glasskeeper::analysis::{AnalysisSettings, HourAnalysis, analyse};
use glasskeeper::field::Grid;
use glasskeeper::instant::{Hour, Instant};
use glasskeeper::obs::{Observation, PressureSource, Provenance};
use glasskeeper::report::{Form, Identifier, Platform, Report};
use glasskeeper::sphere::Position;

/// A report made by hand, with the errors of the reference runs: 0.5 hPa on land, 1.0 at sea, winds
/// 1.5 m/s.
pub(crate) fn observation(
    number: u32,
    platform: Platform,
    position: Position,
    pressure_hpa: f64,
    wind_m_s: (f64, f64),
) -> Observation {
    let station = Identifier::new(&format!("{number:05}")).expect("a short name");
    let time = Instant::from_unix_s(0);
    let report = Report::empty(station, platform, Form::Csv, time);
    Observation {
        report,
        position,
        hour: time.hour_nearest(),
        barometer_height_m: None,
        pressure_msl_hpa: Some(pressure_hpa),
        pressure_error_hpa: if platform == Platform::Land { 0.5 } else { 1.0 },
        pressure_source: Some(PressureSource::Reported),
        wind_m_s: Some(wind_m_s),
        wind_error_m_s: 1.5,
        findings: Vec::new(),
        provenance: Provenance {
            file: String::new(),
            content: String::new(),
            start: 0,
            end: 0,
            received: time,
        },
    }
}

#[expect(clippy::disallowed_methods, reason = "a benchmark reads its data")]
pub(crate) fn table(name: &str) -> Vec<Vec<String>> {
    let path = format!("{}/tests/data/{name}", env!("CARGO_MANIFEST_DIR"));
    let bytes = std::fs::read(&path).expect("the data file is part of the checkout");
    let mut text = String::new();
    if bytes.starts_with(&[0x1f, 0x8b]) {
        GzDecoder::new(&bytes[..]).read_to_string(&mut text).expect("gzip");
    } else {
        text = String::from_utf8(bytes).expect("text");
    }
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(true)
        .flexible(true)
        .comment(Some(b'#'))
        .from_reader(text.as_bytes());
    reader.records().map(|row| row.expect("csv").iter().map(str::to_owned).collect()).collect()
}

pub(crate) fn number(text: &str) -> f64 {
    text.parse().unwrap_or(f64::NAN)
}

fn rms(values: &[f64]) -> f64 {
    (values.iter().map(|value| value * value).sum::<f64>() / values.len().max(1) as f64).sqrt()
}

/// Root mean square error, over all and over sea, and the spread of the error over what was claimed.
fn against_truth(analysis: &HourAnalysis, truth: &[(Position, bool, f64)]) -> [f64; 3] {
    let (mut all, mut sea, mut normalised) = (Vec::new(), Vec::new(), Vec::new());
    for (place, at_sea, pressure_hpa) in truth {
        let at = analysis.at(*place).expect("the grid covers the truth");
        let error = at.pressure_hpa - pressure_hpa;
        all.push(error);
        if *at_sea {
            sea.push(error);
        }
        normalised.push(error / at.pressure_error_hpa.max(1e-6));
    }
    [rms(&all), rms(&sea), rms(&normalised)]
}

fn january() {
    println!("accuracy: January 1996 fields sampled as reports; RMSE in hPa, all and (sea)");
    println!(
        "  hour               count   pressure only      with wind      thin plate   smoothed best   claimed"
    );
    let reports = table("analysis_january_1996.csv.gz");
    let truth = table("analysis_january_1996_truth.csv.gz");
    let reference = table("analysis_reference.csv");
    let mut hours: Vec<&String> = truth.iter().map(|row| &row[0]).collect();
    hours.dedup();
    let grid = Arc::new(Grid::fitted(19.0, 61.0, -141.0, -51.5, 121, 101));
    let mut ratios: BTreeMap<u32, [Vec<f64>; 4]> = BTreeMap::new();
    for hour in hours {
        let truth: Vec<(Position, bool, f64)> = truth
            .iter()
            .filter(|row| &row[0] == hour)
            .map(|row| {
                let place = Position::clamped(number(&row[1]), number(&row[2]));
                (place, row[3] == "1", number(&row[4]))
            })
            .collect();
        for count in [100, 300, 1000] {
            let list: Vec<Arc<Observation>> = reports
                .iter()
                .filter(|row| &row[0] == hour && row[1] == count.to_string())
                .zip(0..)
                .map(|(row, k)| {
                    let place = Position::clamped(number(&row[2]), number(&row[3]));
                    let platform = if row[4] == "1" { Platform::Land } else { Platform::Ship };
                    let wind = (number(&row[6]), number(&row[7]));
                    Arc::new(observation(k, platform, place, number(&row[5]), wind))
                })
                .collect();
            let zero = Hour::from_unix_h(0);
            let observations = BTreeMap::from([(zero, list)]);
            let of = |use_winds| {
                let settings = AnalysisSettings { use_winds, ..AnalysisSettings::default() };
                analyse(&grid, zero, &observations, &settings)
            };
            let (alone, both) = (of(false), of(true));
            let (a, b) = (against_truth(&alone, &truth), against_truth(&both, &truth));
            let plates: Vec<[f64; 2]> = reference
                .iter()
                .filter(|row| row[0] == "january" && &row[1] == hour && row[2] == count.to_string())
                .map(|row| [number(&row[4]), number(&row[5])])
                .collect();
            let best = plates
                .iter()
                .copied()
                .fold([f64::INFINITY; 2], |x, y| [x[0].min(y[0]), x[1].min(y[1])]);
            let plain = plates[0];
            println!(
                "  {hour} {count:5}   {:.3} ({:.3})   {:.3} ({:.3})   {:.3} ({:.3})   {:.3} ({:.3})   {:.2} {:.2}   L {:.0} s {:.1}",
                a[0],
                a[1],
                b[0],
                b[1],
                plain[0],
                plain[1],
                best[0],
                best[1],
                a[2],
                b[2],
                both.statistics.length_km,
                both.statistics.sigma_hpa
            );
            let entry = ratios.entry(count).or_default();
            for (list, ratio) in entry.iter_mut().zip([
                a[0] / best[0],
                b[0] / best[0],
                b[0] / plain[0],
                b[1] / plain[1],
            ]) {
                list.push(ratio);
            }
        }
    }
    for (count, [alone, best, plain, sea]) in ratios {
        let mean = |list: &[f64]| list.iter().sum::<f64>() / list.len() as f64;
        println!(
            "  {count:5}: pressure only / smoothed plate {:.3}; with wind / smoothed plate {:.3}; / plate {:.3}; sea / plate {:.3}",
            mean(&alone),
            mean(&best),
            mean(&plain),
            mean(&sea)
        );
    }
}

/// One in ten stations withheld: 2 November 2018 in three regions, five folds; 18 March 1995 with
/// three hours of memory, all stations and one in eight.
fn stations() {
    println!("accuracy: withheld stations; RMSE in hPa");
    println!(
        "  case                 ours   thin plate  smoothed best   ratio   normalised   refused"
    );
    let rows = table("analysis_stations.csv.gz");
    let reference = table("analysis_reference.csv");
    for (case, parts) in [("rich", 5_u32), ("middling", 5), ("poor", 5), ("hourly", 2)] {
        let mut sums = [0.0; 5];
        for fold in 0..parts {
            let name = match (case, fold) {
                ("hourly", 0) => "all".to_owned(),
                ("hourly", _) => "sparse".to_owned(),
                _ => format!("fold {fold}"),
            };
            let (errors, normalised, refused) = withheld(&rows, case, fold);
            let plates: Vec<f64> = reference
                .iter()
                .filter(|row| row[0] == case && row[1] == name)
                .map(|row| number(&row[4]))
                .collect();
            let best = plates.iter().copied().fold(f64::INFINITY, f64::min);
            let found = [rms(&errors), plates[0], best, rms(&normalised), refused];
            if case == "hourly" {
                print_row(&format!("{case} {name}"), &found);
            }
            for (sum, value) in sums.iter_mut().zip(found) {
                *sum += value / f64::from(parts);
            }
        }
        if case != "hourly" {
            print_row(case, &sums);
        }
    }
}

fn print_row(name: &str, [ours, plain, best, normalised, refused]: &[f64; 5]) {
    println!(
        "  {name:16} {ours:8.3} {plain:10.3} {best:12.3} {:10.3} {normalised:10.2} {refused:10.1}",
        ours / best
    );
}

/// Errors at withheld stations, the same over what is expected of them, and how many reports were
/// refused.
fn withheld(rows: &[Vec<String>], case: &str, fold: u32) -> (Vec<f64>, Vec<f64>, f64) {
    let mut observations: BTreeMap<Hour, Vec<Arc<Observation>>> = BTreeMap::new();
    let mut truth = Vec::new();
    let mut places = Vec::new();
    let mut last = Hour::from_unix_h(i64::MIN / 8000);
    for row in rows.iter().filter(|row| row[0] == case) {
        let time = Instant::parse(&row[1]).expect("a time");
        let place = Position::clamped(number(&row[3]), number(&row[4]));
        let (height_m, pressure_hpa) = (number(&row[5]), number(&row[6]));
        let part: u32 = row[9].parse().expect("a number");
        let held = if case == "hourly" { part.is_multiple_of(10) } else { part % 10 == fold };
        places.push(place);
        last = last.max(time.hour_nearest());
        let error_hpa = 0.6_f64.hypot(0.001 * height_m);
        if held {
            if row[10] == "0" {
                truth.push((time.hour_nearest(), place, pressure_hpa, error_hpa));
            }
            continue;
        }
        if case == "hourly" && fold == 1 && part >= 14 {
            continue;
        }
        let wind = (number(&row[7]), number(&row[8]));
        let mut made = observation(0, Platform::Land, place, pressure_hpa, wind);
        made.report.station = Identifier::new(&row[2]).expect("a name");
        made.report.time = time;
        made.hour = time.hour_nearest();
        made.pressure_error_hpa = error_hpa;
        made.wind_m_s = wind.0.is_finite().then_some(wind);
        made.wind_error_m_s = 2.5;
        observations.entry(made.hour).or_default().push(Arc::new(made));
    }
    let grid = Arc::new(glasskeeper::analysis::fit_region(&places, 121, 101));
    let settings = AnalysisSettings { memory_h: 3, ..AnalysisSettings::default() };
    let analysis = analyse(&grid, last, &observations, &settings);
    let refused = analysis
        .innovations
        .iter()
        .filter_map(|innovation| innovation.finding.as_ref())
        .filter(|finding| finding.verdict == glasskeeper::obs::Verdict::Refused)
        .count();
    let (mut errors, mut normalised) = (Vec::new(), Vec::new());
    for (_, place, pressure_hpa, error_hpa) in truth.iter().filter(|row| row.0 == last) {
        let at = analysis.at(*place).expect("the region holds its stations");
        let error = at.pressure_hpa - pressure_hpa;
        errors.push(error);
        normalised.push(error / at.pressure_error_hpa.hypot(*error_hpa));
    }
    (errors, normalised, refused as f64)
}

pub(crate) fn run() {
    january();
    stations();
}
