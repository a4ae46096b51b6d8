use proptest::prelude::Just;

use super::*;
use crate::instant::Instant;
use crate::obs::{Element, PressureSource, Provenance, Verdict};
use crate::report::{Form, Report};
use crate::sphere::Position;

static CATALOGUE: std::sync::LazyLock<Catalogue> = std::sync::LazyLock::new(Catalogue::built_in);

fn start() -> Hour {
    Instant::from_calendar(2026, 1, 15, 12, 0).expect("a time").hour_floor()
}

fn name(text: &str) -> Identifier {
    Identifier::new(text).expect("a name")
}

fn provenance(minute: i64) -> Provenance {
    Provenance {
        file: "feed".to_owned(),
        content: "00".to_owned(),
        start: 0,
        end: 9,
        received: start().instant().plus_s(minute * 60),
    }
}

fn synop(station: &str, hour: Hour, pressure_hpa: f64) -> Report {
    let mut report = Report::empty(name(station), Platform::Land, Form::Synop, hour.instant());
    report.pressure_station_hpa = Some(pressure_hpa);
    report.air_temperature_c = Some(8.0);
    report.dew_point_c = Some(5.0);
    report
}

fn ship(hour: Hour, latitude_deg: f64, longitude_deg: f64) -> Report {
    let mut report = Report::empty(name("ABCD"), Platform::Ship, Form::Ship, hour.instant());
    report.position = Position::new(latitude_deg, longitude_deg);
    report.pressure_msl_hpa = Some(995.8);
    report.wind_from_deg = Some(210.0);
    report.wind_speed_m_s = Some(17.5);
    report
}

fn made(reports: &[Report], hour: Hour) -> Vec<Arc<Observation>> {
    let mut held = Held::new();
    for report in reports {
        held.insert(*report, provenance(0));
    }
    observe(&held, &CATALOGUE, hour..=hour, &ObsSettings::default()).hour(hour).to_vec()
}

#[track_caller]
fn first(reports: &[Report], hour: Hour) -> Arc<Observation> {
    Arc::clone(made(reports, hour).first().expect("an observation"))
}

fn checks(observation: &Observation) -> Vec<(Element, Verdict, &str)> {
    let findings = observation.findings.iter();
    findings.map(|finding| (finding.element, finding.verdict, finding.check.as_str())).collect()
}

/// 01001 stands in the catalogue at 9 m.
#[test]
fn a_station_pressure_is_placed_and_reduced() {
    let observation = first(&[synop("01001", start(), 1000.0)], start());
    assert_eq!(observation.pressure_source, Some(PressureSource::ReducedFromStation));
    let pressure = observation.pressure_msl_hpa.expect("reduced");
    assert!((pressure - 1001.09).abs() < 0.02, "{pressure}");
    assert!((observation.position.latitude_deg() - 70.93).abs() < 0.01);
    assert_eq!(observation.findings, []);
}

#[test]
fn a_station_that_nobody_knows_waits_and_is_counted() {
    let mut held = Held::new();
    held.insert(synop("99998", start(), 1000.0), provenance(0));
    held.insert(synop("99998", start().plus(1), 1000.0), provenance(0));
    let all = start()..=start().plus(2);
    let observed = observe(&held, &Catalogue::built_in(), all, &ObsSettings::default());
    assert_eq!(observed.waiting, [((Platform::Land, name("99998")), 2)]);
    assert_eq!(observed.observations().count(), 0);
}

#[test]
fn the_report_nearest_the_hour_counts_and_a_pressure_comes_first() {
    let mut early = synop("01001", start(), 999.0);
    early.time = start().instant().plus_s(-600);
    let mut windy = synop("01001", start(), 999.0);
    windy.pressure_station_hpa = None;
    windy.wind_speed_m_s = Some(3.0);
    let observation = first(&[early, windy], start());
    assert_eq!(observation.report.time, early.time);
    let observation = first(&[early, synop("01001", start(), 1000.0)], start());
    assert_eq!(observation.report.pressure_station_hpa, Some(1000.0));
}

/// METHODS QC-1: the gross errors of the sample hour of 2 November 2018.
#[test]
fn gross_errors_are_refused_with_their_numbers() {
    let mut report = synop("01001", start(), 1000.0);
    report.wind_speed_m_s = Some(349.0);
    report.wind_from_deg = Some(10.0);
    report.air_temperature_c = Some(99.0);
    report.pressure_msl_hpa = Some(250.0);
    let observation = first(&[report], start());
    assert_eq!(observation.wind_m_s, None);
    assert_eq!(observation.verdict(Element::Wind), Verdict::Refused);
    assert_eq!(observation.verdict(Element::Temperature), Verdict::Refused);
    // The station pressure takes the place of the impossible one.
    assert_eq!(observation.verdict(Element::Pressure), Verdict::Doubtful);
    assert_eq!(observation.pressure_source, Some(PressureSource::ReducedFromStation));
    let reasons: Vec<&str> =
        observation.findings.iter().map(|finding| finding.reason.as_str()).collect();
    assert!(reasons.contains(&"mean wind 349.0 m/s is outside 0 to 75"), "{reasons:?}");
    let mut report = ship(start(), 50.0, -20.0);
    report.pressure_msl_hpa = Some(100.0);
    let observation = first(&[report], start());
    assert_eq!(observation.pressure_msl_hpa, None);
    assert_eq!(observation.verdict(Element::Pressure), Verdict::Refused);
}

/// METHODS COD-10, CHK-024: QNH 1013 at 300 m and -10 C is 1016.1 hPa at sea level.
#[test]
fn an_altimeter_setting_is_carried_down_and_never_taken_as_it_is() {
    let mut report =
        Report::empty(name("EGLL"), Platform::Aerodrome, Form::Metar, start().instant());
    report.altimeter_hpa = Some(1013.0);
    report.altimeter_rounding_hpa = 0.2887;
    report.air_temperature_c = Some(-10.0);
    report.relative_humidity_percent = Some(70.0);
    report.position = Position::new(51.0, 0.0);
    report.barometer_height_m = Some(300.0);
    let observation = first(&[report], start());
    let pressure = observation.pressure_msl_hpa.expect("a pressure");
    assert!((pressure - 1016.123).abs() < 0.003, "{pressure}");
    assert_eq!(observation.pressure_source, Some(PressureSource::FromAltimeter));
    assert!(observation.pressure_error_hpa >= 0.7);
}

#[test]
fn high_stations_keep_out_of_the_sea_level_analysis_but_stay_in_the_list() {
    let mut report = synop("01001", start(), 850.0);
    report.barometer_height_m = Some(1450.0);
    let observation = first(&[report], start());
    assert_eq!(observation.pressure_msl_hpa, None);
    assert_eq!(observation.verdict(Element::Pressure), Verdict::Sound);
    assert_eq!(checks(&observation), [(Element::Pressure, Verdict::Sound, "RED-3 height")]);
}

#[test]
fn a_forgotten_height_is_refused_and_a_strange_reduction_doubted() {
    let mut report = synop("01001", start(), 1000.0);
    report.barometer_height_m = Some(60.0);
    report.pressure_msl_hpa = Some(1000.0);
    let observation = first(&[report], start());
    assert_eq!(observation.pressure_msl_hpa, None);
    assert!(checks(&observation).contains(&(
        Element::Pressure,
        Verdict::Refused,
        "QC-2 height forgotten"
    )));
    report.pressure_msl_hpa = Some(1010.0);
    let doubted = first(&[report], start());
    assert_eq!(doubted.verdict(Element::Pressure), Verdict::Doubtful);
    assert_eq!(doubted.pressure_msl_hpa, Some(1010.0), "the reported value is kept");
    report.pressure_msl_hpa = Some(1007.3);
    let sound = first(&[report], start());
    assert_eq!(sound.findings, []);
    assert!(doubted.pressure_error_hpa > 1.9 * sound.pressure_error_hpa);
}

/// METHODS RED-3: the mean of now and 12 hours ago.
#[test]
fn the_temperature_of_twelve_hours_ago_enters_the_reduction() {
    let mut now = synop("01001", start(), 950.0);
    now.barometer_height_m = Some(500.0);
    now.air_temperature_c = Some(25.0);
    now.dew_point_c = Some(9.6794);
    let mut then = now;
    then.time = start().plus(-12).instant();
    then.air_temperature_c = Some(11.0);
    let alone = first(&[now], start()).pressure_msl_hpa.expect("a pressure");
    let meant = first(&[now, then], start()).pressure_msl_hpa.expect("a pressure");
    assert!((alone - 1005.431).abs() < 0.001, "{alone}");
    assert!((meant - 1006.7885).abs() < 0.001, "{meant}");
}

#[test]
fn a_change_that_its_own_series_denies_is_doubted_and_a_wrong_sign_named() {
    let mut now = synop("01001", start(), 996.6);
    now.pressure_change_3h_hpa = Some(3.4);
    now.characteristic = Some(2);
    let observation = first(&[now, synop("01001", start().plus(-3), 1000.0)], start());
    assert_eq!(observation.verdict(Element::Tendency), Verdict::Doubtful);
    assert_eq!(observation.verdict(Element::Pressure), Verdict::Sound);
    let reason = &observation.findings.first().expect("a finding").reason;
    assert!(reason.ends_with("it would fit with the other sign"), "{reason}");
}

#[test]
fn a_spike_a_jump_and_a_stuck_barometer_are_doubted() {
    let series = |pressures: &[f64]| -> Vec<Report> {
        let first = start().plus(1 - i64::try_from(pressures.len()).expect("few"));
        let times = (0..).map(|step| first.plus(step));
        pressures.iter().zip(times).map(|(hpa, hour)| synop("01001", hour, *hpa)).collect()
    };
    let found = |pressures: &[f64], hour: Hour| {
        let observation = first(&series(pressures), hour);
        observation.findings.iter().map(|f| f.check.clone()).collect::<Vec<_>>()
    };
    assert_eq!(found(&[1000.0, 1010.2, 1000.4], start().plus(-1)), ["QC-5 spike"]);
    assert_eq!(found(&[1000.0, 1000.2, 1000.4], start().plus(-1)), Vec::<String>::new());
    assert_eq!(found(&[1003.2, 1013.6], start()), ["QC-5 jump"]);
    assert_eq!(found(&[1000.0; 6], start()), ["QC-5 stuck barometer"]);
    assert_eq!(found(&[1000.0; 5], start()), Vec::<String>::new());
    let jump = first(&series(&[1003.2, 1013.6]), start());
    let reason = &jump.findings.first().expect("a finding").reason;
    assert!(reason.ends_with("1003.6 hPa with another tens digit would fit"), "{reason}");
}

#[test]
fn a_ship_that_leaps_out_and_back_is_refused_there() {
    let hours = [start().plus(-1), start(), start().plus(1)];
    let track =
        [ship(hours[0], 48.3, -15.6), ship(hours[1], 48.4, 15.4), ship(hours[2], 48.5, -15.2)];
    let observation = first(&track, start());
    assert_eq!(observation.verdict(Element::Position), Verdict::Refused);
    assert_eq!((observation.pressure_msl_hpa, observation.wind_m_s), (None, None));
    let reason = &observation.findings.first().expect("a finding").reason;
    assert!(reason.ends_with("48.4 -15.4 in another quadrant would fit"), "{reason}");
    let sound = first(&[track[0], ship(start(), 48.4, -15.4), track[2]], start());
    assert_eq!(sound.findings, []);
    assert!(sound.pressure_msl_hpa.is_some() && sound.wind_m_s.is_some());
}

#[test]
fn the_watchkeeper_overrules() {
    let track = [ship(start(), 48.3, -15.6)];
    let mut held = Held::new();
    held.insert(track[0], provenance(0));
    let mut settings = ObsSettings::default();
    let key = crate::obs::decision_key(&track[0]);
    assert_eq!(key, "ship ABCD 2026-01-15T12:00:00Z");
    settings.overruled.insert(key, Verdict::Refused);
    let observed = observe(&held, &Catalogue::empty(), start()..=start(), &settings);
    let observation = observed.hour(start()).first().expect("kept");
    assert_eq!((observation.pressure_msl_hpa, observation.wind_m_s), (None, None));
}

/// 03772 stands at 51.48 N 0.45 W; 01001 at 70.93 N 8.67 W.
#[test]
fn a_station_that_reports_itself_elsewhere_is_doubted_and_a_swapped_hemisphere_refused() {
    let mut report = synop("01001", start(), 1000.0);
    report.form = Form::Bufr;
    report.position = Position::new(70.9, -8.7);
    assert_eq!(first(&[report], start()).findings, []);
    report.position = Position::new(72.9, -8.7);
    let doubted = first(&[report], start());
    assert_eq!(doubted.verdict(Element::Position), Verdict::Doubtful);
    assert!(doubted.pressure_msl_hpa.is_some());
    report.position = Position::new(70.93, 8.67);
    let refused = first(&[report], start());
    assert_eq!(refused.verdict(Element::Position), Verdict::Refused);
    assert_eq!(refused.pressure_msl_hpa, None);
    let reason = &refused.findings.first().expect("a finding").reason;
    assert!(reason.ends_with("a swapped hemisphere explains it"), "{reason}");
}

proptest::proptest! {
    /// Whatever a report holds, nothing that is not a number or impossible comes out.
    #[test]
    fn no_report_makes_a_value_that_is_not_one(
        values in proptest::collection::vec(
            proptest::option::of(proptest::prop_oneof![
                proptest::num::f64::ANY,
                -1e3..1e5_f64,
                Just(0.0),
                900.0..1100.0_f64,
            ]),
            19,
        ),
        platform in 0..4_usize,
        position in proptest::option::of((-90.0..90.0_f64, -180.0..180.0_f64)),
    ) {
        let platform =
            [Platform::Land, Platform::Ship, Platform::Buoy, Platform::Aerodrome][platform];
        let mut report = Report::empty(name("01001"), platform, Form::Csv, start().instant());
        report.position = position.and_then(|(north, east)| Position::new(north, east));
        report.station_height_m = values[0];
        report.barometer_height_m = values[1];
        report.pressure_station_hpa = values[2];
        report.pressure_msl_hpa = values[3];
        report.altimeter_hpa = values[4];
        report.altimeter_rounding_hpa = values[5].unwrap_or(0.0);
        report.pressure_change_3h_hpa = values[6];
        report.pressure_change_24h_hpa = values[7];
        report.wind_from_deg = values[8];
        report.wind_speed_m_s = values[9];
        report.wind_gust_m_s = values[10];
        report.anemometer_height_m = values[11];
        report.air_temperature_c = values[12];
        report.dew_point_c = values[13];
        report.relative_humidity_percent = values[14];
        report.sea_temperature_c = values[15];
        report.speed_m_s = values[16];
        report.standard_surface = values[17].zip(values[18]).map(|(pressure_hpa, height_gpm)| {
            crate::report::StandardSurface { pressure_hpa, height_gpm }
        });
        for observation in made(&[report], start()) {
            let wind = observation.wind_m_s.unwrap_or_default();
            proptest::prop_assert!(wind.0.is_finite() && wind.1.is_finite());
            proptest::prop_assert!(wind.0.hypot(wind.1) < 150.0);
            proptest::prop_assert!(observation.wind_error_m_s.is_finite());
            proptest::prop_assert!(observation.pressure_error_hpa.is_finite());
            if let Some(pressure) = observation.pressure_msl_hpa {
                proptest::prop_assert!((870.0..=1085.0).contains(&pressure));
                proptest::prop_assert!(observation.pressure_error_hpa >= 0.5);
            }
        }
    }
}

/// The memory of the observer cannot be seen in its answers.
#[test]
fn an_observer_answers_as_the_plain_function_does() {
    let catalogue = Catalogue::built_in();
    let settings = ObsSettings::default();
    let range = start().plus(-20)..=start().plus(5);
    let stations: Vec<Identifier> = (1..60)
        .map(|number| name(&format!("01{number:03}")))
        .filter(|station| catalogue.standard(Platform::Land, *station).is_some())
        .collect();
    assert!(stations.len() > 20);
    let mut held = Held::new();
    let mut observer = Observer::new();
    let mut step = 0_i64;
    let mut agree = |held: &Held| {
        let remembered = observer.observe(held, &catalogue, range.clone(), &settings);
        assert_eq!(remembered, observe(held, &catalogue, range.clone(), &settings));
        step += 1;
    };
    agree(&held);
    for hours in -20..4 {
        for (number, station) in (0_i64..).zip(&stations) {
            let tenths = (hours * 7 + number * 13) % 50;
            let mut report = synop("01001", start().plus(hours), 1000.0 + tenths as f64 / 10.0);
            report.station = *station;
            held.insert(report, provenance(hours));
        }
        if hours % 6 == 0 {
            agree(&held);
        }
    }
    agree(&held);
    // One late report, one correction, one that teaches a place, one that stays unknown.
    let mut late = synop("01001", start().plus(-7), 990.0);
    late.time = late.time.plus_s(60);
    held.insert(late, provenance(9));
    agree(&held);
    let mut corrected = synop("01001", start().plus(-3), 1003.0);
    corrected.revision = crate::report::Revision::Correction(1);
    held.insert(corrected, provenance(9));
    agree(&held);
    held.insert(synop("99998", start(), 1000.0), provenance(9));
    agree(&held);
    let mut teaching = synop("99998", start().plus(2), 1000.0);
    teaching.form = Form::Bufr;
    teaching.position = Position::new(60.0, 10.0);
    teaching.barometer_height_m = Some(12.0);
    held.insert(teaching, provenance(9));
    agree(&held);
    held.forget_before(start().plus(-2));
    agree(&held);
    assert!(step > 8);
}
