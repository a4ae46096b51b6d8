use super::*;
use crate::systems::{Measured, Phase, TrackPoint};

fn thresholds() -> Thresholds {
    Thresholds {
        fall_3h_hpa: 6.0,
        bergeron: 1.0,
        wind_kt: 34.0,
        near_nm: 300.0,
        stale_minutes: 90,
        weak_share: 0.6,
    }
}

fn low(pressures: &[f64]) -> System {
    let track: Vec<TrackPoint> = pressures
        .iter()
        .zip(0..)
        .map(|(pressure_hpa, hour)| TrackPoint {
            hour: Hour::from_unix_h(hour),
            position: Position::clamped(50.0, -20.0),
            position_error_km: 30.0,
            pressure_hpa: *pressure_hpa,
            pressure_error_hpa: 0.6,
            observed: true,
        })
        .collect();
    let rate = |hours| bergeron_of(Kind::Low, &track, hours);
    System {
        name: "L1k".to_owned(),
        kind: Kind::Low,
        position: Position::clamped(50.0, -20.0),
        position_error_km: 30.0,
        pressure_hpa: Measured { value: pressures[pressures.len() - 1], error: 0.6 },
        change_3h_hpa: None,
        change_6h_hpa: None,
        change_12h_hpa: None,
        change_24h_hpa: None,
        bergeron: rate(24),
        bergeron_12h: rate(12),
        course_deg: None,
        course_error_deg: None,
        speed_kt: None,
        phase: Phase::Deepening,
        confidence: 0.95,
        depth_hpa: 20.0,
        last_closed_isobar_hpa: None,
        radius_km: None,
        gale_radius_km: None,
        since: Hour::from_unix_h(0),
        track,
        outlook: Vec::new(),
        events: Vec::new(),
        reports_inside: 3,
    }
}

fn raised(systems: &[System], now: Instant, newest: Option<Instant>) -> Vec<Alert> {
    raise(&Evidence {
        now,
        valid: now.hour_floor(),
        thresholds: &thresholds(),
        systems,
        hours: &[],
        wind_fields: &[],
        winds: &[],
        observations: &[],
        tendencies: &[],
        watch_points: &[("Light 7".to_owned(), Position::clamped(51.0, -24.0))],
        newest_report: newest,
        silent: &[],
        acknowledged: &BTreeMap::new(),
    })
}

#[test]
fn explosive_deepening_is_told_beyond_its_error_and_announced_ahead() {
    let now = Hour::from_unix_h(30).instant();
    let falling = |hpa_h: f64, hours: i32| -> Vec<f64> {
        (0..=hours).map(|h| 1000.0 - hpa_h * f64::from(h)).collect()
    };
    let rules = |pressures: &[f64]| -> Vec<Rule> {
        let alerts = raised(&[low(pressures)], now, Some(now));
        alerts
            .into_iter()
            .map(|alert| alert.rule)
            .filter(|rule| *rule != Rule::SystemNear)
            .collect()
    };
    // One bergeron at 50 degrees is 21.2 hPa a day.
    assert_eq!(rules(&falling(1.3, 30)), [Rule::ExplosiveDeepening]);
    assert_eq!(rules(&falling(1.3, 14)), [Rule::DeepeningAhead]);
    assert_eq!(rules(&falling(0.89, 30)), [], "within its error of the threshold");
    assert_eq!(rules(&falling(0.5, 30)), []);
    let alert = raised(&[low(&falling(1.3, 30))], now, Some(now)).remove(0);
    assert_eq!(alert.since, Hour::from_unix_h(24).instant());
    assert!(alert.confidence.is_some_and(|sure| sure > 0.9), "{alert:?}");
}

#[test]
fn a_feed_that_stops_is_told_loudly_and_an_empty_one_too() {
    let now = Hour::from_unix_h(30).instant();
    assert_eq!(raised(&[], now, Some(now.plus_s(-60 * 89))), []);
    let alerts = raised(&[], now, Some(now.plus_s(-60 * 200)));
    assert_eq!(alerts[0].rule, Rule::StaleFeed);
    assert_eq!(alerts[0].message, "newest report is 3 h 20 min old: the picture is not of now");
    assert_eq!(raised(&[], now, None)[0].urgency, Urgency::Urgent);
}

#[test]
fn a_low_near_a_watch_point_stands_since_it_came_near() {
    let now = Hour::from_unix_h(10).instant();
    let alerts = raised(&[low(&[1000.0; 11])], now, Some(now));
    assert_eq!(alerts.len(), 1);
    assert_eq!(alerts[0].key, "system_near L1k Light 7");
    assert_eq!(alerts[0].since, Hour::from_unix_h(0).instant());
}

#[test]
fn what_wavers_about_a_threshold_does_not_flap() {
    let run = |values: &[f64]| {
        let values: Vec<(Hour, f64)> =
            values.iter().zip(0..).map(|(value, h)| (Hour::from_unix_h(h), *value)).collect();
        unbroken(&values, 10.0, 9.0)
    };
    assert_eq!(run(&[8.0, 10.0, 9.5, 10.1, 9.1]), Some(Hour::from_unix_h(1)));
    assert_eq!(run(&[10.0, 8.9, 9.9]), None);
    assert_eq!(run(&[10.0, f64::NAN]), None);
    assert_eq!(run(&[]), None);
}

#[test]
fn an_acknowledgement_ends_with_the_alert_it_was_given_to() {
    let now = Hour::from_unix_h(30).instant();
    let newest = now.plus_s(-60 * 200);
    let since = newest.plus_s(60 * 90);
    for (when, acknowledged) in [(since.plus_s(60), true), (since.plus_s(-60), false)] {
        let acknowledgements = BTreeMap::from([("stale_feed feed".to_owned(), when)]);
        let limits = thresholds();
        let evidence = Evidence {
            now,
            valid: now.hour_floor(),
            thresholds: &limits,
            systems: &[],
            hours: &[],
            wind_fields: &[],
            winds: &[],
            observations: &[],
            tendencies: &[],
            watch_points: &[],
            newest_report: Some(newest),
            silent: &[],
            acknowledged: &acknowledgements,
        };
        assert_eq!(raise(&evidence)[0].acknowledged, acknowledged);
    }
}

fn station(trace: &[f64], newest_change_hpa: f64) -> TendencyRow {
    TendencyRow {
        station: crate::report::Identifier::new("03000").expect("an identifier"),
        platform: crate::report::Platform::Land,
        name: None,
        position: Position::clamped(55.0, -5.0),
        time: Hour::from_unix_h(30).instant(),
        pressure_msl_hpa: trace.last().copied(),
        characteristic: None,
        characteristic_computed: None,
        change_3h_reported_hpa: None,
        change_3h_computed_hpa: Some(newest_change_hpa),
        tide_3h_hpa: None,
        ship_motion_3h_hpa: None,
        change_3h_hpa: Some(newest_change_hpa),
        change_3h_error_hpa: Some(0.3),
        change_1h_hpa: None,
        change_24h_hpa: None,
        words: String::new(),
        trace_hpa: trace.iter().map(|pressure_hpa| Some(*pressure_hpa)).collect(),
        doubtful: false,
    }
}

#[test]
fn a_rapid_fall_begins_above_six_and_ends_below_it_by_a_tenth() {
    let since = |steps: &[f64], newest: f64| {
        let mut trace = vec![1000.0, 1000.0, 1000.0];
        for (at, fall) in steps.iter().enumerate() {
            trace.push(trace[at] - fall);
        }
        fall_since(&station(&trace, newest), -newest, 6.0).map(|time| time.hour_floor().unix_h())
    };
    assert_eq!(since(&[1.0, 3.0, 5.0], -5.9), None);
    assert_eq!(since(&[1.0, 3.0, 6.0], -6.0), None, "6.0 is rapid, more than 6.0 is very rapid");
    assert_eq!(since(&[1.0, 3.0, 6.1], -6.1), Some(30));
    assert_eq!(since(&[1.0, 6.5, 5.8, 6.2], -6.2), Some(28));
    assert_eq!(since(&[1.0, 6.5, 5.0, 5.8], -5.8), None);
    assert_eq!(since(&[1.0, 6.5, 6.4, 5.8], -5.8), Some(28), "it wavers, it does not end");
}
