//! What the rehearsal writes and what the watch reads: two hands that share no code meet here.

use std::collections::{BTreeMap, BTreeSet};

use glasskeeper::quantity::{wind_from_components, wrap_180_deg};
use glasskeeper::rehearse::{Rehearsal, Scenario, Surface};
use glasskeeper::report::{Form, Platform, Report, Revision, WindSource};
use glasskeeper::sphere::Position;
use glasskeeper::wire::{Complaint, Context, read};

struct Feed {
    rehearsal: Rehearsal,
    reports: Vec<Report>,
    complaints: Vec<(String, Complaint)>,
}

fn feed(scenario: Scenario) -> Feed {
    let start = scenario.start;
    let rehearsal = Rehearsal::new(scenario, start);
    let mut reports = Vec::new();
    let mut complaints = Vec::new();
    for file in rehearsal.files() {
        let reading = read(&file.bytes, &Context { received: file.due });
        reports.extend(reading.reports.into_iter().map(|decoded| decoded.report));
        complaints.extend(reading.complaints.into_iter().map(|c| (file.name.clone(), c)));
    }
    Feed { rehearsal, reports, complaints }
}

fn scenario(name: &str) -> Scenario {
    Scenario::built_in(name).expect("a built-in scenario")
}

/// Perfect instruments, and nothing goes wrong.
fn perfect(name: &str) -> Feed {
    let mut scenario = scenario(name);
    scenario.instrument_error_factor = 0.0;
    scenario.faults = glasskeeper::rehearse::scenario::FaultPlan::default();
    feed(scenario)
}

fn land_places(scenario: &Scenario) -> BTreeMap<String, (Position, f64)> {
    let land = scenario.land.iter().flat_map(|plan| &plan.stations);
    let aerodromes = scenario.aerodromes.iter().flat_map(|plan| &plan.stations);
    land.chain(aerodromes)
        .map(|(id, latitude_deg, longitude_deg, height_m)| {
            (id.clone(), (Position::clamped(*latitude_deg, *longitude_deg), *height_m))
        })
        .collect()
}

#[track_caller]
fn near(report: &Report, what: &str, found: f64, expected: f64, tolerance: f64) {
    assert!(
        (found - expected).abs() <= tolerance,
        "{} {} {}: {what} {found}, true {expected}",
        report.form as u8,
        report.station,
        report.time
    );
}

#[test]
fn a_perfect_feed_is_read_without_a_complaint_and_says_what_is_true() {
    for name in Scenario::built_in_names() {
        let feed = perfect(name);
        assert_eq!(feed.complaints, Vec::new(), "{name}");
        assert_eq!(feed.reports.len(), feed.rehearsal.reports(), "{name}");
        let land = land_places(feed.rehearsal.scenario());
        let forms: BTreeSet<Form> = feed.reports.iter().map(|report| report.form).collect();
        let all = [Form::Synop, Form::Ship, Form::Metar, Form::Buoy, Form::Csv, Form::Json];
        assert_eq!(forms, BTreeSet::from(all), "{name}");
        let mut calm = 0;
        for report in &feed.reports {
            let placed = land.get(report.station.as_str());
            let position = report.position.or(placed.map(|(position, _)| *position));
            let position = position.expect("every station has a place");
            let rehearsal = &feed.rehearsal;
            let truth_hpa = rehearsal.pressure_hpa(position, report.time);
            // Ships give tenths of a degree: up to 7 km off, at up to 6 hPa/100 km.
            // The others give thousandths.
            let place_hpa = if report.form == Form::Ship { 0.4 } else { 0.005 };
            match (report.pressure_msl_hpa, report.altimeter_hpa) {
                (Some(found), _) => near(report, "msl", found, truth_hpa, 0.0501 + place_hpa),
                // The setting is within its own unit and the difference of QNH and sea level.
                (None, Some(found)) if placed.is_some_and(|(_, height_m)| *height_m < 30.0) => {
                    near(report, "altimeter", found, truth_hpa, 0.5 + 0.35);
                }
                _ => {}
            }
            let surface = match report.platform {
                Platform::Land | Platform::Aerodrome => Surface::Land,
                Platform::Ship | Platform::Buoy => Surface::Sea,
            };
            let (u, v) = rehearsal.wind_m_s(position, report.time, surface);
            let (from_deg, speed_m_s) = wind_from_components(u, v);
            let place_m_s = if report.form == Form::Ship { 1.0 } else { 0.0 };
            let found = report.wind_speed_m_s.expect("a wind");
            near(report, "wind", found, speed_m_s, 0.501 + place_m_s);
            if let Some(found_deg) = report.wind_from_deg
                && found > 2.0
            {
                let off = wrap_180_deg(found_deg - from_deg).abs();
                let place_deg = if report.form == Form::Ship { 12.0 } else { 0.02 };
                assert!(off <= 5.0 + place_deg, "{} {found_deg} {from_deg}", report.station);
            } else {
                calm += 1;
            }
            if matches!(report.form, Form::Synop | Form::Ship | Form::Buoy) {
                assert_ne!(report.wind_source, WindSource::Unknown);
                assert!(report.air_temperature_c.is_some());
            }
        }
        assert!(calm < feed.reports.len() / 4, "{calm}");
    }
}

/// Code table 0200 (WMO-No. 306): the figure and the sign belong together; a moored buoy's change
/// is that of the field, a ship's has its own motion in it (METHODS TEN-2).
#[test]
fn changes_are_those_of_the_truth_and_a_ships_has_its_motion_in_it() {
    for name in Scenario::built_in_names() {
        let feed = perfect(name);
        let rehearsal = &feed.rehearsal;
        let mut places = BTreeMap::new();
        for report in &feed.reports {
            if let Some(position) = report.position {
                places.insert((report.station, report.time), position);
            }
        }
        let (mut checked, mut ships, mut moved) = (0, 0, 0);
        for report in &feed.reports {
            let Some(change_hpa) = report.pressure_change_3h_hpa else { continue };
            match report.characteristic {
                Some(0) => assert!(change_hpa >= 0.0),
                Some(1..=3) => assert!(change_hpa > 0.0),
                Some(4) => assert!(change_hpa == 0.0),
                Some(5) => assert!(change_hpa <= 0.0),
                Some(6..=8) => assert!(change_hpa < 0.0),
                other => panic!("{} has the figure {other:?}", report.station),
            }
            let before = report.time.plus_s(-3 * 3600);
            let (Some(here), Some(there)) =
                (report.position, places.get(&(report.station, before)))
            else {
                continue;
            };
            let at = |position| rehearsal.pressure_hpa(position, report.time);
            let expected_hpa = at(here) - rehearsal.pressure_hpa(*there, before);
            match report.platform {
                Platform::Buoy => {
                    near(report, "change", change_hpa, expected_hpa, 0.101);
                    checked += 1;
                }
                Platform::Ship => {
                    near(report, "change", change_hpa, expected_hpa, 0.101 + 0.6);
                    let fixed_hpa = at(here) - rehearsal.pressure_hpa(here, before);
                    moved += usize::from((fixed_hpa - expected_hpa).abs() > 1.0);
                    ships += 1;
                    let (run_km, course_deg) = there.rhumb_to(here);
                    let speed_m_s = report.speed_m_s.expect("a speed");
                    // Half a class of 5 kt, and the rounding of both places.
                    near(report, "speed", speed_m_s, run_km / 10.8, 1.3 + 1.5);
                    if run_km > 60.0 {
                        let found_deg = report.course_deg.expect("a course");
                        assert!(wrap_180_deg(found_deg - course_deg).abs() <= 22.5 + 12.0);
                    }
                }
                _ => {}
            }
        }
        assert!(checked > 1000 && ships > 100 && moved > 10, "{name} {checked} {ships} {moved}");
    }
}

/// The planted faults are what the reader complains about, and all that it complains about.
#[test]
fn complaints_are_about_planted_faults_alone() {
    for name in Scenario::built_in_names() {
        let feed = feed(scenario(name));
        let truth = feed.rehearsal.truth();
        let garbled: BTreeSet<&str> = truth
            .faults
            .iter()
            .filter(|fault| fault.what.starts_with("garbled"))
            .map(|fault| fault.station.as_str())
            .collect();
        for (file, complaint) in &feed.complaints {
            assert!(
                garbled.contains(complaint.station.as_str()),
                "{name} {file}: {complaint:?} was not planted"
            );
        }
        // A spoilt group may still read as a group, but not often.
        assert!(feed.complaints.len() * 2 > garbled.len(), "{name} {}", feed.complaints.len());
        let lost = feed.rehearsal.reports() - feed.reports.len();
        assert!(lost <= garbled.len(), "{name}: {lost} reports lost");
        let corrections = feed.reports.iter().filter(|r| r.revision != Revision::Original).count();
        let planted =
            truth.faults.iter().filter(|fault| fault.what.contains("corrected after")).count();
        assert!(corrections > 10 && corrections <= planted, "{name} {corrections} {planted}");
    }
}
