//! The analysis of an hour, from reports to the field: its law, its judgement, its accuracy.

use std::collections::BTreeMap;
use std::io::Read;
use std::sync::Arc;

use glasskeeper::analysis::{AnalysisSettings, HourAnalysis, analyse, fingerprint};
use glasskeeper::field::Grid;
use glasskeeper::instant::Hour;
use glasskeeper::obs::{Observation, PressureSource, Provenance, Verdict};
use glasskeeper::report::{Form, Identifier, Platform, Report};
use glasskeeper::sphere::Position;

const HOUR: Hour = Hour::from_unix_h(450_000);

fn observation(
    name: &str,
    platform: Platform,
    position: Position,
    pressure_hpa: f64,
    wind_m_s: Option<(f64, f64)>,
) -> Observation {
    let station = Identifier::new(name).expect("a short name");
    let time = HOUR.instant();
    Observation {
        report: Report::empty(station, platform, Form::Synop, time),
        position,
        hour: HOUR,
        barometer_height_m: None,
        pressure_msl_hpa: Some(pressure_hpa),
        pressure_error_hpa: if platform == Platform::Land { 0.6 } else { 1.0 },
        pressure_source: Some(PressureSource::Reported),
        wind_m_s,
        wind_error_m_s: 2.0,
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

fn grid() -> Arc<Grid> {
    Arc::new(Grid::fitted(35.0, 65.0, -50.0, 5.0, 61, 51))
}

/// A smooth invented field, hPa.
fn field_hpa(place: Position) -> f64 {
    1006.0 + 9.0 * (place.longitude_deg() / 12.0).sin() + 8.0 * (place.latitude_deg() / 8.0).cos()
}

/// Ships spread evenly over the grid's box.
fn ships(count: u32) -> Vec<Observation> {
    (0..count)
        .map(|k| {
            let spread = |step: f64| (f64::from(k) * step + 0.3).fract();
            let place = Position::clamped(
                36.0 + 28.0 * spread(0.618_034),
                -49.0 + 53.0 * spread(0.754_878),
            );
            observation(
                &format!("SHIP{k:03}"),
                Platform::Ship,
                place,
                field_hpa(place),
                Some((5.0, -3.0)),
            )
        })
        .collect()
}

fn held(list: Vec<Observation>) -> BTreeMap<Hour, Vec<Arc<Observation>>> {
    let mut out: BTreeMap<Hour, Vec<Arc<Observation>>> = BTreeMap::new();
    for observation in list {
        out.entry(observation.hour).or_default().push(Arc::new(observation));
    }
    out
}

fn made(list: Vec<Observation>) -> HourAnalysis {
    analyse(&grid(), HOUR, &held(list), &AnalysisSettings::default())
}

fn finding<'a>(analysis: &'a HourAnalysis, name: &str) -> Option<&'a glasskeeper::obs::Finding> {
    analysis
        .innovations
        .iter()
        .find(|innovation| innovation.station.as_str() == name)
        .expect("every report of the hour has its innovation")
        .finding
        .as_ref()
}

#[test]
fn neither_threads_nor_the_order_of_the_list_can_be_seen_in_the_result() {
    let observations = held(ships(150));
    let settings = AnalysisSettings::default();
    let with = |threads: usize, observations: &BTreeMap<Hour, Vec<Arc<Observation>>>| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("threads");
        pool.install(|| analyse(&grid(), HOUR, observations, &settings))
    };
    let one = with(1, &observations);
    assert!(one == with(3, &observations));
    assert!(one.pressure_hpa.iter().all(|value| value.is_finite()));
    let mut turned = observations.clone();
    for list in turned.values_mut() {
        list.reverse();
    }
    let other = with(2, &turned);
    assert!(one.pressure_hpa == other.pressure_hpa);
    assert!(one.pressure_error_hpa == other.pressure_error_hpa);
}

#[test]
fn the_fingerprint_changes_with_the_reports_of_the_memory_and_with_no_others() {
    let settings = AnalysisSettings::default();
    let base = held(ships(20));
    let print =
        |held: &BTreeMap<Hour, Vec<Arc<Observation>>>| fingerprint(&grid(), HOUR, held, &settings);
    let mut later = base.clone();
    let mut moved = ships(21);
    let mut extra = moved.pop().expect("the last");
    extra.hour = HOUR.plus(1);
    later.entry(extra.hour).or_default().push(Arc::new(extra.clone()));
    assert_eq!(print(&base), print(&later));
    extra.hour = HOUR.plus(-9);
    later.entry(extra.hour).or_default().push(Arc::new(extra.clone()));
    assert_eq!(print(&base), print(&later));
    extra.hour = HOUR.plus(-5);
    later.entry(extra.hour).or_default().push(Arc::new(extra));
    assert_ne!(print(&base), print(&later));
    let mut changed = ships(20);
    changed[7].pressure_msl_hpa = Some(1000.1);
    assert_ne!(print(&base), print(&held(changed)));
    // What comes later changes nothing in the analysis either.
    let analysis = analyse(&grid(), HOUR, &base, &settings);
    let mut future = base.clone();
    let mut ship = ships(21).pop().expect("the last");
    ship.hour = HOUR.plus(1);
    future.entry(ship.hour).or_default().push(Arc::new(ship));
    assert!(analysis == analyse(&grid(), HOUR, &future, &settings));
}

#[test]
fn without_reports_it_says_that_it_knows_nothing() {
    let analysis = made(Vec::new());
    assert!(analysis.error_ratio.iter().all(|ratio| *ratio > 0.99));
    assert!(analysis.pressure_hpa.iter().all(|value| (990.0..1030.0).contains(value)));
    assert!(analysis.wind_m_s.iter().flatten().all(|part| part.is_nan()));
    assert_eq!((analysis.pressures_used, analysis.winds_used), (0, 0));
}

#[test]
fn it_is_sure_beside_a_report_and_unsure_far_from_all() {
    let place = Position::clamped(50.0, -20.0);
    let analysis = made(vec![observation("ONE", Platform::Ship, place, 985.0, None)]);
    let grid = analysis.grid.clone();
    let ratio = |place| grid.sample(&analysis.error_ratio, place).expect("on the grid");
    assert!(ratio(place) < 0.25, "{}", ratio(place));
    assert!(ratio(Position::clamped(38.0, -47.0)) > 0.7);
    let at = analysis.at(place).expect("on the grid");
    assert!((at.pressure_hpa - 985.0).abs() < 1.0, "{}", at.pressure_hpa);
}

#[test]
fn an_old_report_counts_less_than_a_new_one() {
    let place = Position::clamped(50.0, -20.0);
    let error = |age_h: i64| {
        let mut old = observation("OLD", Platform::Ship, place, 985.0, None);
        old.report.time = HOUR.plus(-age_h).instant();
        old.hour = HOUR.plus(-age_h);
        let analysis = made(vec![old]);
        (analysis.at(place).expect("on the grid").pressure_error_hpa, analysis.pressures_used)
    };
    let (fresh, three, six, nine) = (error(0), error(3), error(6), error(9));
    assert!(fresh.0 < three.0 && three.0 < six.0 && six.0 < nine.0, "{fresh:?} {three:?} {six:?}");
    assert_eq!((six.1, nine.1), (1, 0));
}

#[test]
fn a_wrong_barometer_is_refused_and_its_neighbours_are_not() {
    let mut list = ships(150);
    let wrong_place = list[40].position;
    let wrong = list[40].pressure_msl_hpa.map(|value| value + 20.0);
    list[40].pressure_msl_hpa = wrong;
    let analysis = made(list);
    let found = finding(&analysis, "SHIP040").expect("a finding");
    assert_eq!(found.verdict, Verdict::Refused, "{}", found.reason);
    assert!(found.reason.contains("hPa from what the neighbours say"), "{}", found.reason);
    let refused = analysis
        .innovations
        .iter()
        .filter_map(|innovation| innovation.finding.as_ref())
        .filter(|finding| finding.verdict == Verdict::Refused)
        .count();
    assert_eq!(refused, 1);
    assert_eq!(analysis.pressures_used, 149);
    // What the watchkeeper rules sound stays.
    let mut list = ships(150);
    list[40].pressure_msl_hpa = wrong;
    let kept = AnalysisSettings {
        kept: [list[40].key()].into_iter().collect(),
        ..AnalysisSettings::default()
    };
    let analysis = analyse(&grid(), HOUR, &held(list), &kept);
    assert!(finding(&analysis, "SHIP040").is_none());
    assert!(
        analysis.at(wrong_place).expect("on the grid").pressure_hpa > field_hpa(wrong_place) + 10.0
    );
}

/// An exploding low is an outlier and true (METHODS ANA-7, pitfall).
#[test]
fn the_one_ship_in_an_exploding_low_is_kept_where_its_barometer_falls() {
    let low = |fall: Option<f64>| {
        let mut list = ships(150);
        let value = list[40].pressure_msl_hpa.map(|value| value - 12.0);
        list[40].pressure_msl_hpa = value;
        list[40].report.pressure_change_3h_hpa = fall;
        made(list)
    };
    let kept = low(Some(-9.0));
    let found = finding(&kept, "SHIP040").expect("a finding");
    assert_eq!(found.verdict, Verdict::Doubtful, "{}", found.reason);
    assert_eq!(kept.pressures_used, 150);
    assert_eq!(finding(&low(None), "SHIP040").map(|found| found.verdict), Some(Verdict::Refused));
}

#[test]
fn two_ships_that_support_each_other_are_kept() {
    let mut list = ships(150);
    let place = list[40].position;
    for (name, east_km) in [("FIRST", 30.0), ("SECOND", 75.0)] {
        let there = place.offset(east_km, 40.0);
        list.push(observation(name, Platform::Ship, there, field_hpa(there) - 11.0, None));
    }
    let analysis = made(list);
    for name in ["FIRST", "SECOND"] {
        let verdict = finding(&analysis, name).map(|found| found.verdict);
        assert_ne!(verdict, Some(Verdict::Refused), "{name}");
    }
}

fn table(name: &str) -> Vec<Vec<String>> {
    let path = format!("{}/tests/data/{name}", env!("CARGO_MANIFEST_DIR"));
    #[expect(clippy::disallowed_methods, reason = "a test reads its data")]
    let bytes = std::fs::read(&path).expect("the data file is part of the checkout");
    let mut text = String::new();
    if bytes.starts_with(&[0x1f, 0x8b]) {
        flate2::read::GzDecoder::new(&bytes[..]).read_to_string(&mut text).expect("gzip");
    } else {
        text = String::from_utf8(bytes).expect("text");
    }
    let mut reader =
        csv::ReaderBuilder::new().flexible(true).comment(Some(b'#')).from_reader(text.as_bytes());
    reader.records().map(|row| row.expect("csv").iter().map(str::to_owned).collect()).collect()
}

/// January 1996 (tests/data/SOURCES.md): 300 reports of a field made elsewhere. The analysis beats
/// scipy's thin-plate interpolation of the very same reports, plain and with its best smoothing
/// (tests/reference/interpolators.py), and its errors are what it says they are.
#[test]
fn a_real_storm_is_analysed_better_than_by_a_general_interpolator() {
    let hour = "1996-01-08T18:00Z";
    let value = |text: &str| text.parse::<f64>().unwrap_or(f64::NAN);
    let list: Vec<Observation> = table("analysis_january_1996.csv.gz")
        .iter()
        .filter(|row| row[0] == hour && row[1] == "300")
        .zip(0..)
        .map(|(row, k)| {
            let platform = if row[4] == "1" { Platform::Land } else { Platform::Ship };
            let place = Position::clamped(value(&row[2]), value(&row[3]));
            let wind = Some((value(&row[6]), value(&row[7])));
            observation(&format!("{k}"), platform, place, value(&row[5]), wind)
        })
        .collect();
    assert_eq!(list.len(), 300);
    let grid = Arc::new(Grid::fitted(19.0, 61.0, -141.0, -51.5, 91, 76));
    let observations = held(list);
    let analysis = analyse(&grid, HOUR, &observations, &AnalysisSettings::default());
    // Every report is true: the storm must not be refused for being one, nor without its winds.
    let alone = AnalysisSettings { use_winds: false, ..AnalysisSettings::default() };
    assert_eq!(analysis.pressures_used, 300);
    assert_eq!(analyse(&grid, HOUR, &observations, &alone).pressures_used, 300);
    let (mut square, mut normalised, mut count) = (0.0, 0.0, 0.0);
    for row in table("analysis_january_1996_truth.csv.gz").iter().filter(|row| row[0] == hour) {
        let place = Position::clamped(value(&row[1]), value(&row[2]));
        let at = analysis.at(place).expect("on the grid");
        let error = at.pressure_hpa - value(&row[4]);
        square += error * error;
        normalised += (error / at.pressure_error_hpa).powi(2);
        count += 1.0;
    }
    let rmse = f64::sqrt(square / count);
    let references: Vec<f64> = table("analysis_reference.csv")
        .iter()
        .filter(|row| row[0] == "january" && row[1] == hour && row[2] == "300")
        .map(|row| value(&row[4]))
        .collect();
    assert!(references.len() >= 4);
    for reference in references {
        assert!(rmse < 0.9 * reference, "{rmse} against {reference}");
    }
    let spread = f64::sqrt(normalised / count);
    assert!((0.75..1.33).contains(&spread), "{spread}");
}

/// Common practice, no source: wind blows counterclockwise round a northern low and clockwise round
/// a southern one. Ships without barometers around a low must draw it, in both hemispheres.
#[test]
fn winds_alone_draw_a_low_in_both_hemispheres() {
    for sign in [1.0, -1.0] {
        let centre = Position::clamped(sign * 50.0, -20.0);
        let list: Vec<Observation> = (0..24)
            .map(|k| {
                let bearing = f64::from(k) * 15.0;
                let place = centre.destination(bearing, 350.0);
                // Counterclockwise in the north: from the east on the northern side.
                let (sine, cosine) = bearing.to_radians().sin_cos();
                let wind = (-14.0 * cosine * sign, 14.0 * sine * sign);
                let mut ship =
                    observation(&format!("W{k}"), Platform::Ship, place, 1000.0, Some(wind));
                ship.pressure_msl_hpa = None;
                ship
            })
            .collect();
        let grid = Arc::new(Grid::fitted(
            centre.latitude_deg() - 15.0,
            centre.latitude_deg() + 15.0,
            -45.0,
            5.0,
            61,
            41,
        ));
        let analysis = analyse(&grid, HOUR, &held(list), &AnalysisSettings::default());
        let at = |place| analysis.at(place).expect("on the grid").pressure_hpa;
        let ring =
            (0..8).map(|k| at(centre.destination(f64::from(k) * 45.0, 700.0))).sum::<f64>() / 8.0;
        assert!(at(centre) < ring - 6.0, "{} {ring}", at(centre));
        assert_eq!((analysis.pressures_used, analysis.winds_used), (0, 24));
    }
}
