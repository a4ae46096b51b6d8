use super::*;

fn centre(kind: Kind, position: Position, pressure_hpa: f64) -> Centre {
    Centre {
        kind,
        position,
        position_error_km: 30.0,
        pressure_hpa,
        pressure_error_hpa: 0.7,
        depth_hpa: 10.0,
        last_closed_isobar_hpa: pressure_hpa + 10.0,
        radius_km: 500.0,
        confidence: 0.99,
        laplacian_hpa_deg2: None,
        secondaries: Vec::new(),
    }
}

fn run(hours: &[(Hour, Vec<Centre>)]) -> Vec<Track> {
    let hours: Vec<Arc<HourCentres>> = hours
        .iter()
        .map(|(hour, list)| Arc::new(HourCentres::known(*hour, list.clone())))
        .collect();
    follow(&hours)
}

/// METHODS CHK-167: brute force agrees; taking the nearest first would be wrong.
#[test]
fn the_cheapest_assignment_is_found() {
    let costs = |rows: &[&[f64]]| -> Vec<Vec<Option<f64>>> {
        rows.iter().map(|row| row.iter().map(|cost| Some(cost / 1000.0)).collect()).collect()
    };
    let three: [&[f64]; 3] =
        [&[120.0, 800.0, 500.0], &[700.0, 90.0, 400.0], &[450.0, 350.0, 1200.0]];
    assert_eq!(assign(&costs(&three), 3), [Some(0), Some(2), Some(1)]);
    let two: [&[f64]; 2] = [&[50.0, 60.0], &[40.0, 300.0]];
    assert_eq!(assign(&costs(&two), 2), [Some(1), Some(0)]);
    assert_eq!(assign(&[vec![None, None]], 2), [None]);
    assert_eq!(assign(&[], 3), []);
}

/// METHODS CHK-166: 99 % of chi-squared with three degrees of freedom (scipy).
#[test]
fn the_gate_is_chi_squared() {
    // P(x) = erf(sqrt(x/2)) - sqrt(2x/pi) exp(-x/2) for three degrees of freedom.
    let p = crate::systems::centre::erf((GATE / 2.0).sqrt())
        - (2.0 * GATE / std::f64::consts::PI).sqrt() * (-GATE / 2.0).exp();
    assert!((p - 0.99).abs() < 1e-6, "{p}");
}

/// Two lows whose paths cross, each carried on its own way.
#[test]
fn crossing_lows_keep_their_identities() {
    let start = Position::clamped(50.0, -40.0);
    let other = start.destination(0.0, 600.0);
    let hours: Vec<(Hour, Vec<Centre>)> = (0..24)
        .map(|h| {
            let along = 50.0 * f64::from(h);
            let one = centre(Kind::Low, start.destination(60.0, along), 985.0);
            let two = centre(Kind::Low, other.destination(120.0, along), 1001.0);
            (Hour::from_unix_h(i64::from(h)), vec![two, one])
        })
        .collect();
    let tracks = run(&hours);
    assert_eq!(tracks.len(), 2);
    for track in &tracks {
        assert!(track.confirmed.is_some() && track.standing == Standing::Live);
        assert_eq!(track.steps.len(), 24);
        let pressures: Vec<f64> = track.steps.iter().map(|s| s.state.pressure_hpa).collect();
        let spread = pressures.iter().fold(0.0_f64, |m, p| m.max((p - pressures[0]).abs()));
        assert!(spread < 2.0, "a track changed its low: {pressures:?}");
    }
}

#[test]
fn a_gap_is_bridged_and_a_silence_ends_the_track() {
    let start = Position::clamped(-45.0, 170.0);
    let at = |h: i64| centre(Kind::Low, start.destination(100.0, 45.0 * h as f64), 980.0);
    let mut hours: Vec<(Hour, Vec<Centre>)> = (0..30)
        .map(|h| {
            let seen = !(8..=11).contains(&h) && h < 18;
            (Hour::from_unix_h(h), if seen { vec![at(h)] } else { vec![] })
        })
        .collect();
    let tracks = run(&hours);
    assert_eq!(tracks.len(), 1);
    assert_eq!(tracks[0].standing, Standing::Ended);
    assert_eq!(tracks[0].newest().hour, Hour::from_unix_h(17));
    assert!(tracks[0].happened.iter().any(|(_, what)| *what == Happening::Lost));
    // Hours that are missing altogether are a gap too.
    hours.retain(|(hour, _)| !(4..=9).contains(&hour.unix_h()));
    assert_eq!(run(&hours).len(), 1);
}

#[test]
fn a_single_find_is_no_system_and_doubt_confirms_nothing() {
    let place = Position::clamped(50.0, -40.0);
    let mut once = vec![(Hour::from_unix_h(0), vec![centre(Kind::Low, place, 990.0)])];
    once.extend((1..5).map(|h| (Hour::from_unix_h(h), vec![])));
    assert_eq!(run(&once), []);
    let doubtful: Vec<(Hour, Vec<Centre>)> = (0..6)
        .map(|h| {
            let mut centre = centre(Kind::Low, place, 1004.0);
            centre.confidence = 0.8;
            (Hour::from_unix_h(h), vec![centre])
        })
        .collect();
    assert!(run(&doubtful).iter().all(|track| track.confirmed.is_none()));
}
