//! Holding and judging a world's reports: a real hour of 2 November 2018, repeated hour by hour with
//! the pressures moved by tenths.

use std::hint::black_box;
use std::time::{Duration, Instant as Clock};

use glasskeeper::instant::{Hour, Instant};
use glasskeeper::obs::held::Held;
use glasskeeper::obs::{Catalogue, ObsSettings, Observer, Provenance, observe, observe_hour};
use glasskeeper::report::Report;
use glasskeeper::tendency;
use glasskeeper::wire::{Context, read};

#[expect(clippy::disallowed_methods, reason = "a benchmark reads the clock")]
fn timed<T>(work: impl FnOnce() -> T) -> (T, Duration) {
    let start = Clock::now();
    let result = work();
    (result, start.elapsed())
}

#[expect(clippy::disallowed_methods, reason = "a benchmark reads its data")]
fn world_hour() -> Vec<Report> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/data/bufr/perf_synop.bufr.gz");
    let bytes = std::fs::read(path).unwrap_or_default();
    let received = Instant::parse("2018-11-02T13:00:00Z").unwrap_or_default();
    read(&bytes, &Context { received }).reports.into_iter().map(|one| one.report).collect()
}

/// Resident memory, MB; 0 where the system does not say.
#[expect(clippy::disallowed_methods, reason = "a benchmark looks at its own memory")]
fn resident_mb() -> f64 {
    let text = std::fs::read_to_string("/proc/self/statm").unwrap_or_default();
    let pages = text.split_whitespace().nth(1).and_then(|pages| pages.parse::<f64>().ok());
    pages.unwrap_or(0.0) * 4096.0 / 1e6
}

fn moved(report: &Report, step: i64) -> Report {
    let mut report = *report;
    let wobble = (step % 7) as f64 / 10.0;
    report.time = report.time.plus_s(step * 3600);
    report.pressure_msl_hpa = report.pressure_msl_hpa.map(|hpa| hpa + wobble);
    report.pressure_station_hpa = report.pressure_station_hpa.map(|hpa| hpa + wobble);
    report
}

fn provenance(step: i64) -> Provenance {
    Provenance {
        file: format!("hour {step}"),
        content: format!("{step:032x}"),
        start: 0,
        end: 100,
        received: Instant::from_unix_s(1_541_160_000 + step * 3600),
    }
}

/// Measures and reports.
pub(crate) fn run() {
    let reports = world_hour();
    let hour = Instant::from_unix_s(1_541_160_000).hour_floor();
    let newest = hour.plus(71);
    let before = resident_mb();
    let mut held = Held::new();
    let ((), filling) = timed(|| {
        for step in 0..72 {
            let from = provenance(step);
            for report in &reports {
                held.insert(moved(report, step), from.clone());
            }
        }
    });
    let counts = held.counts();
    let inserted = counts.held + counts.repeats + counts.corrections + counts.outranked;
    println!(
        "held: {inserted} copies of {} reports in {filling:.1?}, {:.0} a millisecond, {:.0} MB",
        counts.held,
        inserted as f64 / filling.as_secs_f64() / 1e3,
        resident_mb() - before,
    );
    let (catalogue, reading) = timed(Catalogue::built_in);
    println!("catalogue: {} names read in {reading:.1?}", catalogue.len());
    let settings = ObsSettings::default();
    let (one, judging) = timed(|| observe_hour(&held, &catalogue, newest, &settings));
    println!("one world hour judged: {} in {judging:.1?}", one.observations.len());
    let day = newest.plus(-25)..=newest;
    let (all, judging) = timed(|| observe(&held, &catalogue, day.clone(), &settings));
    println!("26 world hours judged: {} in {judging:.1?}", all.observations().count());
    let mut observer = Observer::new();
    let (_, first) = timed(|| observer.observe(&held, &catalogue, day.clone(), &settings));
    late_report(&mut held, reports.first(), newest);
    let (late, second) = timed(|| observer.observe(&held, &catalogue, day, &settings));
    println!("observer: {first:.1?} at first, {second:.1?} for one late report");
    let now = newest.instant().plus_s(600);
    let (rows, making) =
        timed(|| tendency::table(&late, now, newest, &catalogue, &|_, _| Some(1000.0)));
    println!("tendency table: {} rows in {making:.1?}", rows.len());
    black_box((one, all, late));
}

fn late_report(held: &mut Held, report: Option<&Report>, newest: Hour) {
    let Some(mut report) = report.copied() else {
        return;
    };
    report.time = newest.plus(-3).instant().plus_s(120);
    held.insert(report, provenance(99));
}
