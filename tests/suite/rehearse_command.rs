//! The command `rehearse` as a watchkeeper uses it.

use std::path::{Path, PathBuf};
use std::time::Duration;

use glasskeeper::command::rehearse::{Arguments, run};
use glasskeeper::instant::Instant;
use glasskeeper::rehearse::{Rehearsal, Scenario, Truth};

const NAME: &str = "southern-date-line";

fn arguments(into: &Path) -> Arguments {
    Arguments {
        scenario: NAME.to_owned(),
        into: into.to_owned(),
        speed: None,
        truth: None,
        start: None,
        ahead: None,
    }
}

fn now() -> Instant {
    Instant::parse("2026-03-02T10:20Z").expect("a time")
}

/// Runs it, gives back what it said, the pauses it made, and stops it after so many pauses.
fn run_until(arguments: &Arguments, pauses: usize) -> Result<(String, Vec<Duration>), String> {
    let mut said = Vec::new();
    let mut waited = Vec::new();
    let mut pause = |wait: Duration| {
        waited.push(wait);
        waited.len() < pauses
    };
    run(arguments, now(), &mut pause, &mut said).map_err(|error| format!("{error:#}"))?;
    Ok((String::from_utf8(said).expect("text"), waited))
}

#[expect(clippy::disallowed_methods, reason = "looks into the folder that was written")]
fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = std::fs::read_dir(folder)
        .expect("a folder")
        .map(|entry| entry.expect("an entry").file_name().to_string_lossy().into_owned())
        .collect();
    names.sort();
    names
}

fn rehearsal(start: Option<&str>) -> Rehearsal {
    let scenario = Scenario::built_in(NAME).expect("built in");
    let start = start.map_or(scenario.start, |text| Instant::parse(text).expect("a time"));
    Rehearsal::new(scenario, start)
}

#[test]
#[expect(clippy::disallowed_methods, reason = "looks at the files that were written")]
fn all_at_once_writes_every_file_and_the_truth() {
    let folder = tempfile::tempdir().expect("a folder");
    let feed = folder.path().join("new").join("feed");
    let truth: PathBuf = folder.path().join("truth.json");
    let arguments = Arguments { truth: Some(truth.clone()), ..arguments(&feed) };
    let (said, waited) = run_until(&arguments, usize::MAX).expect("it runs");
    assert!(said.starts_with("Invented weather: "), "{said}");
    assert!(waited.is_empty());
    let rehearsal = rehearsal(None);
    let mut expected: Vec<String> = rehearsal.files().map(|file| file.name).collect();
    expected.sort();
    assert_eq!(names(&feed), expected);
    let text = std::fs::read_to_string(truth).expect("the truth");
    let written: Truth = serde_json::from_str(&text).expect("truth as JSON");
    assert_eq!(written, rehearsal.truth());
}

#[test]
fn at_a_speed_it_waits_as_long_as_the_scenario_does_divided_by_the_speed() {
    let folder = tempfile::tempdir().expect("a folder");
    let arguments = Arguments { speed: Some(600.0), ..arguments(folder.path()) };
    let (_, waited) = run_until(&arguments, usize::MAX).expect("it runs");
    let rehearsal = rehearsal(None);
    let last = rehearsal.files().last().expect("files").due;
    let total: Duration = waited.iter().sum();
    let expected_s = last.hours_since(rehearsal.start()) * 3600.0 / 600.0;
    assert!((total.as_secs_f64() - expected_s).abs() < 1e-3, "{total:?} {expected_s}");
}

#[test]
fn it_stops_when_it_is_told_and_leaves_no_half_file() {
    let folder = tempfile::tempdir().expect("a folder");
    let arguments = Arguments { speed: Some(3600.0), ..arguments(folder.path()) };
    run_until(&arguments, 5).expect("it runs");
    let names = names(folder.path());
    assert!(!names.is_empty() && names.len() < 20, "{names:?}");
    assert!(names.iter().all(|name| !name.starts_with('.')), "{names:?}");
}

#[test]
fn weather_that_began_before_now_is_there_at_once_up_to_now() {
    let folder = tempfile::tempdir().expect("a folder");
    let arguments = Arguments {
        start: Some("now-24h".to_owned()),
        speed: Some(1.0),
        ..arguments(folder.path())
    };
    run_until(&arguments, 1).expect("it runs");
    // The start is taken down to the whole hour; what was due by now has come.
    let rehearsal = rehearsal(Some("2026-03-01T10:00Z"));
    let mut expected: Vec<String> =
        rehearsal.files().filter(|file| file.due <= now()).map(|file| file.name).collect();
    expected.sort();
    assert_eq!(names(folder.path()), expected);
}

#[test]
fn what_it_cannot_do_it_says() {
    let folder = tempfile::tempdir().expect("a folder");
    let base = arguments(folder.path());
    let error = run_until(&Arguments { scenario: "nowhere".to_owned(), ..base.clone() }, 1);
    let error = error.expect_err("no such scenario");
    assert!(error.contains("northern-ocean-low, southern-date-line"), "{error}");
    let error = run_until(&Arguments { speed: Some(0.0), ..base.clone() }, 1);
    assert_eq!(error, Err("--speed: expected a number above 0, found 0".to_owned()));
    let error = run_until(&Arguments { start: Some("yesterday".to_owned()), ..base }, 1);
    let expected =
        "--start: expected a time such as 2026-01-15T00:00Z or now-24h, found \"yesterday\"";
    assert_eq!(error, Err(expected.to_owned()));
}
