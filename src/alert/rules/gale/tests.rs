use std::sync::Arc;

use super::*;
use crate::alert::raise;
use crate::alert::rules::Thresholds;
use crate::analysis::HourAnalysis;
use crate::field::Grid;
use crate::obs::{Observation, Provenance};
use crate::report::{Form, Identifier, Report};
use crate::winds::{PointWinds, Wind, WindField};

const LIMITS: Thresholds = Thresholds {
    fall_3h_hpa: 6.0,
    bergeron: 1.0,
    wind_kt: 34.0,
    near_nm: 300.0,
    stale_minutes: 90,
    weak_share: 0.6,
};

/// Fields of an expected surface wind that is alike everywhere, one for each hour.
fn fields(speeds_kt: &[f64]) -> (Vec<Arc<HourAnalysis>>, Vec<Arc<WindField>>) {
    let grid = Arc::new(Grid::fitted(40.0, 60.0, -30.0, 0.0, 11, 11));
    let count = grid.len();
    let unknown = vec![f64::NAN; count];
    speeds_kt
        .iter()
        .zip(0..)
        .map(|(speed_kt, hour)| {
            let hour = Hour::from_unix_h(hour);
            let analysis = HourAnalysis::from_field(
                hour,
                Arc::clone(&grid),
                vec![1000.0; count],
                vec![1.0; count],
            );
            let wind = vec![[m_s_from_kt(*speed_kt), 0.0]; count];
            let field = WindField {
                hour,
                grid: Arc::clone(&grid),
                geostrophic_m_s: wind.clone(),
                gradient_m_s: wind.clone(),
                surface_m_s: wind,
                divergence_friction_per_s: unknown.clone(),
                divergence_isallobaric_per_s: unknown.clone(),
                divergence_observed_per_s: unknown.clone(),
                vorticity_per_s: unknown.clone(),
                change_3h_hpa: unknown.clone(),
            };
            (Arc::new(analysis), Arc::new(field))
        })
        .unzip()
}

/// A ship's winds of successive hours: the observations, and the row of the newest.
fn ship(speeds_kt: &[f64]) -> (Vec<Arc<Observation>>, Vec<StationWind>) {
    let position = Position::clamped(50.0, -15.0);
    let station = Identifier::new("SHIP7").expect("an identifier");
    let observations: Vec<Arc<Observation>> = speeds_kt
        .iter()
        .zip(0..)
        .map(|(speed_kt, hour)| {
            let hour = Hour::from_unix_h(hour);
            Arc::new(Observation {
                report: Report::empty(station, Platform::Ship, Form::Ship, hour.instant()),
                position,
                hour,
                barometer_height_m: None,
                pressure_msl_hpa: None,
                pressure_error_hpa: 1.0,
                pressure_source: None,
                wind_m_s: Some((m_s_from_kt(*speed_kt), 0.0)),
                wind_error_m_s: 2.0,
                findings: Vec::new(),
                provenance: Provenance {
                    file: String::new(),
                    content: String::new(),
                    start: 0,
                    end: 0,
                    received: hour.instant(),
                },
            })
        })
        .collect();
    let row = StationWind {
        station: "SHIP7".to_owned(),
        platform: Some(Platform::Ship),
        position,
        time: observations.last().map(|one| one.report.time),
        observed: speeds_kt
            .last()
            .map(|speed_kt| Wind { from_deg: 270.0, speed_m_s: m_s_from_kt(*speed_kt) }),
        gust_m_s: None,
        winds: PointWinds::default(),
        speed_difference_m_s: None,
        direction_difference_deg: None,
        explanation: String::new(),
        error_ratio: 0.2,
    };
    (observations, vec![row])
}

fn raised(
    expected_kt: &[f64],
    reported_kt: &[f64],
    acknowledged: &BTreeMap<String, Instant>,
) -> Vec<Alert> {
    let (hours, wind_fields) = fields(expected_kt);
    let (observations, winds) = ship(reported_kt);
    let valid = Hour::from_unix_h(i64::try_from(expected_kt.len()).expect("small") - 1);
    raise(&Evidence {
        now: valid.instant(),
        valid,
        thresholds: &LIMITS,
        systems: &[],
        hours: &hours,
        wind_fields: &wind_fields,
        winds: if reported_kt.is_empty() { &[] } else { &winds },
        observations: &observations,
        tendencies: &[],
        watch_points: &[],
        newest_report: Some(valid.instant()),
        silent: &[],
        acknowledged,
    })
}

#[test]
fn a_gale_of_exactly_34_kt_is_a_gale_and_33_is_not() {
    let none = BTreeMap::new();
    assert_eq!(raised(&[33.0], &[], &none), []);
    let alerts = raised(&[34.0], &[], &none);
    assert_eq!(alerts.len(), 1);
    assert_eq!(alerts[0].urgency, Urgency::Warning);
    assert!(alerts[0].message.starts_with("gale: 34 kt expected at "), "{}", alerts[0].message);
    assert_eq!(alerts[0].evidence, "from the pressure pattern; no wind report near");
    assert_eq!(raised(&[10.0], &[34.0], &none).len(), 1, "a report alone raises it too");
}

#[test]
fn a_gale_that_grows_into_a_storm_asks_again_whoever_acknowledged_the_gale() {
    let gale = &raised(&[36.0, 40.0], &[], &BTreeMap::new())[0];
    let acknowledged =
        BTreeMap::from([(gale.key.clone(), Hour::from_unix_h(1).instant().plus_s(60))]);
    assert!(raised(&[36.0, 40.0, 44.0], &[], &acknowledged)[0].acknowledged);
    let storm = &raised(&[36.0, 40.0, 50.0, 47.0], &[], &acknowledged)[0];
    assert!(!storm.acknowledged);
    assert_eq!((storm.urgency, storm.since), (Urgency::Urgent, Hour::from_unix_h(2).instant()));
    assert!(storm.message.starts_with("storm, easing: 47 kt"), "{}", storm.message);
    let hurricane = &raised(&[36.0, 70.0], &[], &acknowledged)[0];
    assert!(hurricane.message.starts_with("hurricane force: 70 kt"), "{}", hurricane.message);
}

#[test]
fn a_report_stronger_in_class_than_what_is_expected_is_an_alert_of_its_own() {
    let none = BTreeMap::new();
    let alerts = raised(&[40.0], &[38.0], &none);
    assert_eq!(alerts.len(), 1, "a gale reported within a gale is its evidence: {alerts:?}");
    assert_eq!(alerts[0].evidence, "strongest report away from lows: 38 kt at SHIP7");
    let alerts = raised(&[40.0], &[66.0], &none);
    assert_eq!(alerts.len(), 2);
    assert_eq!(alerts[0].key, "gale ship SHIP7 hurricane force");
    assert_eq!(alerts[0].urgency, Urgency::Urgent);
}

/// An acknowledgement of a reported gale lasts from report to report while the gale does.
#[test]
fn a_reported_gale_stands_since_its_first_report() {
    let calm = vec![10.0; 5];
    let alerts = raised(&calm, &[20.0, 35.0, 33.0, 31.0, 36.0], &BTreeMap::new());
    assert_eq!(alerts[0].since, Hour::from_unix_h(1).instant());
    let alerts = raised(&calm, &[20.0, 35.0, 33.0, 29.0, 36.0], &BTreeMap::new());
    assert_eq!(alerts[0].since, Hour::from_unix_h(4).instant());
}
