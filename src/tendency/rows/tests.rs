use super::*;
use crate::obs::{Held, ObsSettings, Provenance, observe};
use crate::report::Report;

fn valid() -> Hour {
    Instant::from_calendar(2026, 1, 15, 12, 0).expect("a time").hour_floor()
}

fn name(text: &str) -> Identifier {
    Identifier::new(text).expect("a name")
}

fn land(station: &str, hour: Hour, pressure_hpa: f64) -> Report {
    let mut report = Report::empty(name(station), Platform::Land, Form::Synop, hour.instant());
    report.pressure_station_hpa = Some(pressure_hpa);
    report.air_temperature_c = Some(8.0);
    report
}

fn ship(hour: Hour, latitude_deg: f64, longitude_deg: f64, pressure_hpa: f64) -> Report {
    let mut report = Report::empty(name("ABCD"), Platform::Ship, Form::Ship, hour.instant());
    report.position = Position::new(latitude_deg, longitude_deg);
    report.pressure_msl_hpa = Some(pressure_hpa);
    report
}

fn rows_with(
    reports: &[Report],
    sampler: &dyn Fn(Hour, Position) -> Option<f64>,
) -> Vec<TendencyRow> {
    let mut held = Held::new();
    for report in reports {
        let provenance = Provenance {
            file: "feed".to_owned(),
            content: "00".to_owned(),
            start: 0,
            end: 9,
            received: valid().instant(),
        };
        held.insert(*report, provenance);
    }
    let catalogue = Catalogue::built_in();
    let hours = valid().plus(-30)..=valid().plus(1);
    let observed = observe(&held, &catalogue, hours, &ObsSettings::default());
    table(&observed, valid().instant().plus_s(600), valid(), &catalogue, sampler)
}

fn rows(reports: &[Report]) -> Vec<TendencyRow> {
    rows_with(reports, &|_, _| None)
}

#[track_caller]
fn near(found: Option<f64>, expected: f64) {
    assert!(found.is_some_and(|found| (found - expected).abs() < 1e-6), "{found:?}, {expected}");
}

#[test]
fn a_full_series_gives_every_change_and_the_trace() {
    let pressures = [1010.0, 1009.0, 1008.4, 1008.3];
    let mut reports: Vec<Report> = (0..4)
        .map(|step| {
            land("01001", valid().plus(step - 3), pressures[usize::try_from(step).expect("few")])
        })
        .collect();
    reports.push(land("01001", valid().plus(-24), 1000.3));
    let all = rows(&reports);
    let row = all.first().expect("a row");
    assert_eq!(all.len(), 1);
    assert_eq!(row.characteristic_computed, Some(6));
    near(row.change_3h_computed_hpa, -1.7);
    near(row.change_3h_hpa, -1.7);
    near(row.change_1h_hpa, -0.1);
    near(row.change_24h_hpa, 8.0);
    assert_eq!(row.words, "falling, more slowly");
    assert_eq!(row.name.as_deref(), Some("Jan Mayen"));
    assert_eq!(row.trace_hpa.len(), 24);
    assert_eq!(row.trace_hpa.iter().flatten().count(), 4);
    assert!(row.trace_hpa.last().expect("24").is_some_and(|hpa| (hpa - 1009.4).abs() < 0.1));
    assert!(!row.doubtful);
}

#[test]
fn the_fastest_fall_comes_first_and_unknown_last() {
    let change = |station: &str, hpa: Option<f64>| {
        let mut report = land(station, valid(), 1000.0);
        report.pressure_change_3h_hpa = hpa;
        report
    };
    let stations =
        [("01001", Some(-1.0)), ("01002", None), ("01003", Some(-4.2)), ("01004", Some(-1.0))];
    let order: Vec<String> = rows(&stations.map(|(station, hpa)| change(station, hpa)))
        .iter()
        .map(|row| row.station.to_string())
        .collect();
    assert_eq!(order, ["01003", "01001", "01004", "01002"]);
}

#[test]
fn an_old_report_has_no_row_and_a_future_one_does_not_count() {
    assert_eq!(rows(&[land("01001", valid().plus(-3), 1000.0)]), []);
    let all = rows(&[land("01001", valid(), 1000.0), land("01001", valid().plus(1), 990.0)]);
    assert_eq!(all.first().map(|row| row.time), Some(valid().instant()));
}

#[test]
fn a_reported_change_in_doubt_gives_way_to_the_own_series() {
    let mut now = land("01001", valid(), 996.6);
    now.pressure_change_3h_hpa = Some(3.4);
    now.characteristic = Some(2);
    let all = rows(&[land("01001", valid().plus(-3), 1000.0), now]);
    let row = all.first().expect("a row");
    near(row.change_3h_reported_hpa, 3.4);
    near(row.change_3h_hpa, -3.4);
    assert!(row.doubtful);
}

/// METHODS TEN-2: 18 kt to the north-east through a gradient of (-1.2, -0.8) hPa/100 km, -3.1 hPa on
/// the ship's barometer: 1.4 of it is the ship's own way.
#[test]
fn a_ships_own_way_is_taken_out_by_places_or_by_course_and_speed() {
    let here = Position::clamped(45.0, -30.0);
    let field = move |_: Hour, place: Position| {
        let (east_km, north_km) = here.offset_to(place);
        Some(1000.0 - 0.012 * east_km - 0.008 * north_km)
    };
    let mut now = ship(valid(), 45.0, -30.0, 1000.0);
    now.pressure_change_3h_hpa = Some(-3.1);
    now.characteristic = Some(7);
    let unknown = rows_with(&[now], &field);
    let row = unknown.first().expect("a row");
    assert_eq!(row.change_3h_hpa, None, "nothing says how the ship moves");
    assert_eq!(row.words, "falling (own motion not taken out)");
    now.course_deg = Some(45.0);
    now.speed_m_s = Some(crate::quantity::m_s_from_kt(18.0));
    let coded = rows_with(&[now], &field);
    let row = coded.first().expect("a row");
    assert!((row.change_3h_hpa.expect("known") + 1.686).abs() < 0.02, "{:?}", row.change_3h_hpa);
    let then = here.rhumb_destination(225.0, 100.0);
    let before = ship(valid().plus(-3), then.latitude_deg(), then.longitude_deg(), 1003.1);
    let placed = rows_with(&[before, now], &field);
    let row = placed.first().expect("a row");
    assert!((row.change_3h_hpa.expect("known") + 1.686).abs() < 0.02, "{:?}", row.change_3h_hpa);
    let error = |rows: &[TendencyRow]| rows.first().and_then(|row| row.change_3h_error_hpa);
    assert!(error(&placed) < error(&coded), "places know the way better");
    // Without an analysis there the change is not cleared of it.
    assert_eq!(rows(&[now]).first().expect("a row").change_3h_hpa, None);
}

#[test]
fn the_tide_is_taken_out_in_the_tropics() {
    let mut report = land("01001", valid(), 1010.0);
    report.position = Position::new(15.0, -60.0);
    report.pressure_change_3h_hpa = Some(1.4);
    let all = rows(&[report]);
    let row = all.first().expect("a row");
    assert!(row.change_3h_hpa.expect("known").abs() < 0.15, "{:?}", row.change_3h_hpa);
    assert!(row.words.contains("slowly") || row.words == "steady", "{}", row.words);
}

#[test]
fn altimeter_settings_give_a_change_but_no_characteristic() {
    let metar = |hour: Hour, setting_hpa: f64| {
        let mut report =
            Report::empty(name("EGLL"), Platform::Aerodrome, Form::Metar, hour.instant());
        report.altimeter_hpa = Some(setting_hpa);
        report.altimeter_rounding_hpa = 0.2887;
        report
    };
    let all = rows(&[metar(valid().plus(-3), 1012.5), metar(valid(), 1008.5)]);
    let row = all.first().expect("a row");
    near(row.change_3h_computed_hpa, -4.0);
    assert_eq!(row.characteristic_computed, None);
    assert!(row.change_3h_error_hpa.is_some_and(|error| error > 0.4));
}
