//! Reports decoded per second on one core, beside a scan of the same text for line ends, which is
//! the floor. The reports are those that the decoders are checked with, so that they are as varied.

use std::fmt::Write as _;
use std::hint::black_box;
use std::io::Read as _;
use std::path::Path;
use std::time::{Duration, Instant as Clock};

use flate2::read::GzDecoder;
use glasskeeper::instant::Instant;
use glasskeeper::wire::{Context, explain, read};
use serde_json::Value;

/// Reports in each text.
const REPORTS: usize = 200_000;
/// Runs of which the fastest counts.
const RUNS: usize = 7;

#[expect(clippy::disallowed_methods, reason = "a benchmark reads its data")]
fn expanded(file: &str) -> Vec<u8> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data").join(file);
    let mut bytes = Vec::new();
    let file = std::fs::read(path).expect("the data are there");
    GzDecoder::new(&file[..]).read_to_end(&mut bytes).expect("gzip");
    bytes
}

/// Time that this process has spent on a processor, where the system tells (Linux); other work on
/// the machine does not count.
#[expect(clippy::disallowed_methods, reason = "a benchmark measures")]
fn processor_time() -> Option<Duration> {
    let text = std::fs::read_to_string("/proc/self/schedstat").ok()?;
    text.split_whitespace().next()?.parse().ok().map(Duration::from_nanos)
}

#[expect(clippy::disallowed_methods, reason = "a benchmark measures")]
fn fastest(mut work: impl FnMut()) -> Duration {
    let once = |work: &mut dyn FnMut()| {
        let (begun, processor) = (Clock::now(), processor_time());
        work();
        match (processor, processor_time()) {
            (Some(before), Some(after)) => after.saturating_sub(before),
            _ => begun.elapsed(),
        }
    };
    (0..RUNS).map(|_| once(&mut work)).min().unwrap_or_default()
}

/// The reports of the reference data that begin with one of some words.
fn reports(words: &[&str]) -> Vec<String> {
    let text = String::from_utf8(expanded("wire/character_forms.json.gz")).expect("text");
    text.lines()
        .skip(1)
        .map(|line| serde_json::from_str::<Value>(line).expect("JSON"))
        .map(|row| row["text"].as_str().unwrap_or_default().trim_end_matches(['=', ' ']).to_owned())
        .filter(|text| words.iter().any(|word| text.starts_with(word)))
        .collect()
}

/// Bulletins of many reports.
fn bulletins(words: &[&str], opening: &str, drop: usize) -> String {
    let reports = reports(words);
    let mut text = String::new();
    for (i, report) in reports.iter().cycle().take(REPORTS).enumerate() {
        if i % 40 == 0 {
            text.push_str("\u{3}\u{1}\r\r\n123\r\r\n");
            text.push_str(opening);
        }
        let body: Vec<&str> = report.split_whitespace().skip(drop).collect();
        text.push_str(&body.join(" "));
        text.push_str("=\r\r\n");
    }
    text
}

fn rows() -> String {
    let mut text = String::from(
        "station,kind,time,latitude_deg,longitude_deg,pressure_msl_hpa,characteristic,\
         pressure_change_3h_hpa,wind_from_deg,wind_speed_m_s,air_temperature_c,dew_point_c\n",
    );
    for i in 0..REPORTS {
        let (minute, tenths) = (i % 60, i % 10);
        let _ = writeln!(
            text,
            "P{i},land,2026-01-15T12:{minute:02}:00Z,48.{tenths},-12.{tenths},99{tenths}.8,7,\
             -3.{tenths},230,12.{tenths},8.2,5.9"
        );
    }
    text
}

#[expect(clippy::naive_bytecount, reason = "the plain scan is what is measured")]
fn line_ends(bytes: &[u8]) -> usize {
    bytes.iter().filter(|&&byte| byte == b'\n').count()
}

fn line(name: &str, count: usize, bytes: usize, time: Duration) {
    let seconds = time.as_secs_f64().max(1e-9);
    println!(
        "  {name:<34}{:>12.0} a second {:>8.0} MB/s",
        count as f64 / seconds,
        bytes as f64 / seconds / 1e6
    );
}

/// Measures every form.
pub(crate) fn run() {
    let context = Context { received: Instant::from_unix_s(1_768_480_000) };
    let clock = if processor_time().is_some() { "processor time" } else { "wall time" };
    println!("decode: one core, fastest of {RUNS} runs, {clock}");
    let texts = [
        ("SYNOP", bulletins(&["AAXX"], "SMQX01 QXKA 151200\r\r\nAAXX 15124\r\r\n", 2)),
        ("SHIP", bulletins(&["BBXX"], "SNVX01 QXKA 151200\r\r\n", 0)),
        ("METAR", bulletins(&["METAR"], "SAQX01 QXKA 151220\r\r\nMETAR\r\r\n", 1)),
        ("CSV", rows()),
    ];
    for (name, text) in &texts {
        let bytes = text.as_bytes();
        let found = read(bytes, &context);
        let count = found.reports.len();
        let lines = line_ends(bytes);
        println!(
            "{name}: {count} reports, {} bytes each, {} complaints",
            bytes.len() / count.max(1),
            found.complaints.len() as u64 + found.complaints_not_kept
        );
        let scan = fastest(|| {
            black_box(line_ends(black_box(bytes)));
        });
        line("line ends of the same text, lines", lines, bytes.len(), scan);
        let reading = fastest(|| {
            black_box(read(black_box(bytes), &context));
        });
        line("read, reports", count, bytes.len(), reading);
        let explaining = fastest(|| {
            explain(black_box(bytes), &context, &mut |explained| {
                black_box(explained);
            });
        });
        line("explained, reports", count, bytes.len(), explaining);
    }
    let bufr = expanded("bufr/perf_synop.bufr.gz");
    let count = read(&bufr, &context).reports.len();
    println!("BUFR: {count} reports, {} bytes each", bufr.len() / count.max(1));
    let reading = fastest(|| {
        black_box(read(black_box(&bufr), &context));
    });
    line("read, reports", count, bufr.len(), reading);
}
