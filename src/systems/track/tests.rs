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

/// A find beyond the gate of 99 % does not cut the track, and a centre that jumps within its low
/// keeps the name; one that appears while the old one is still there is another.
#[test]
fn a_jump_is_no_end_and_a_second_centre_no_jump() {
    let place = Position::clamped(-52.0, 178.0);
    let low = |h: i64, off_km: f64| {
        let along = place.destination(90.0, 40.0 * h as f64);
        centre(Kind::Low, along.destination(0.0, off_km), 975.0)
    };
    for off_km in [120.0, 230.0] {
        let jumped: Vec<(Hour, Vec<Centre>)> = (0..20)
            .map(|h| (Hour::from_unix_h(h), vec![low(h, if h < 10 { 0.0 } else { off_km })]))
            .collect();
        let tracks = run(&jumped);
        assert_eq!(tracks.len(), 1, "{off_km}");
        assert_eq!(tracks[0].hits(), 20);
    }
    let second: Vec<(Hour, Vec<Centre>)> = (0..20)
        .map(|h| {
            let both = if h < 10 { vec![low(h, 0.0)] } else { vec![low(h, 0.0), low(h, 400.0)] };
            (Hour::from_unix_h(h), both)
        })
        .collect();
    let tracks = run(&second);
    assert_eq!(tracks.len(), 2);
    let parent = tracks[0].id;
    assert!(tracks[1].happened.iter().any(|(_, what)| *what == Happening::SplitFrom(parent)));
}

/// Two lows become one: the one that is no longer found ends as merged, and the other goes on.
#[test]
fn a_low_that_is_taken_in_ends_as_merged() {
    let place = Position::clamped(55.0, -20.0);
    let hours: Vec<(Hour, Vec<Centre>)> = (0..24)
        .map(|h| {
            let apart_km = 700.0 - 45.0 * h as f64;
            let deep = centre(Kind::Low, place, 970.0);
            let weak = centre(Kind::Low, place.destination(90.0, apart_km), 990.0);
            let both = if apart_km > 200.0 { vec![deep, weak] } else { vec![deep] };
            (Hour::from_unix_h(h), both)
        })
        .collect();
    let tracks = run(&hours);
    assert_eq!(tracks.len(), 2);
    assert_eq!(tracks[0].standing, Standing::Live);
    assert_eq!(tracks[0].hits(), 24);
    assert_eq!(tracks[1].standing, Standing::Ended);
    let last = tracks[1].happened.last().map(|(_, what)| *what);
    assert_eq!(last, Some(Happening::MergedInto(tracks[0].id)));
}
