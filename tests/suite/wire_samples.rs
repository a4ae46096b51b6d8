//! The sample feeds read as files arrive: every byte accounted for, nearly every report read.

use std::path::{Path, PathBuf};

use glasskeeper::instant::Instant;
use glasskeeper::wire::{Context, Reading, read};

fn feed(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("samples").join(name).join("feed")
}

#[expect(clippy::disallowed_methods, reason = "the test reads the samples")]
fn readings(name: &str, received: &str) -> Vec<(String, Reading)> {
    let context = Context { received: Instant::parse(received).expect("a time") };
    let mut files: Vec<PathBuf> = std::fs::read_dir(feed(name))
        .expect("the feed is there")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.is_file())
        .collect();
    files.sort();
    files
        .into_iter()
        .map(|path| {
            let bytes = std::fs::read(&path).expect("a file");
            (path.display().to_string(), read(&bytes, &context))
        })
        .collect()
}

fn check(name: &str, received: &str) {
    let mut reports = 0;
    let mut refused = 0;
    let mut total = 0;
    for (file, reading) in readings(name, received) {
        let bytes = reading.bytes;
        assert_eq!(bytes.reports + bytes.envelope + bytes.refused, bytes.total, "{file}");
        reports += reading.reports.len();
        refused += bytes.refused;
        total += bytes.total;
        for complaint in &reading.complaints {
            assert!(complaint.end as u64 <= bytes.total && complaint.start <= complaint.end);
        }
    }
    // A rehearsed feed garbles a few reports in a thousand.
    assert!(reports > 1000, "{reports} reports");
    assert!(refused * 100 < total, "{refused} of {total} bytes refused");
}

#[test]
fn the_northern_feed_is_read() {
    check("northern-ocean-low", "2026-01-17T12:00:00Z");
}

#[test]
fn the_southern_feed_is_read() {
    check("southern-date-line", "2026-07-01T00:00:00Z");
}
