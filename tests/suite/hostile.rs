//! Nothing that a file holds may hurt: every sample cut at every byte and with every byte changed.
//! No panic, every byte accounted for, every place inside the file, no value that is no number.

use std::path::{Path, PathBuf};
use std::time::Duration;

use glasskeeper::instant::Instant;
use glasskeeper::limits::{COMPLAINTS_PER_FILE_MAX, EXPANDED_BYTES_MAX};
use glasskeeper::report::Report;
use glasskeeper::sphere::Position;
use glasskeeper::wire::{Context, Explained, Reading, explain, read};
use proptest::prelude::*;

fn context() -> Context {
    Context { received: Instant::parse("2026-01-15T12:20:00Z").expect("a time") }
}

#[expect(clippy::disallowed_methods, reason = "the test reads its own data")]
fn samples(folder: &str, endings: &[&str]) -> Vec<(PathBuf, Vec<u8>)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data").join(folder);
    let mut paths: Vec<PathBuf> = std::fs::read_dir(folder)
        .expect("the data are there")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| {
            path.extension().is_some_and(|ending| endings.iter().any(|known| ending == *known))
        })
        .collect();
    paths.sort();
    paths
        .into_iter()
        .map(|path| {
            let bytes = std::fs::read(&path).expect("a file");
            (path, bytes)
        })
        .collect()
}

fn numbers(report: &Report) -> impl Iterator<Item = f64> {
    [
        report.station_height_m,
        report.barometer_height_m,
        report.pressure_station_hpa,
        report.pressure_msl_hpa,
        report.altimeter_hpa,
        report.pressure_change_3h_hpa,
        report.pressure_change_24h_hpa,
        report.wind_from_deg,
        report.wind_speed_m_s,
        report.wind_gust_m_s,
        report.anemometer_height_m,
        report.air_temperature_c,
        report.dew_point_c,
        report.relative_humidity_percent,
        report.sea_temperature_c,
        report.course_deg,
        report.speed_m_s,
        report.standard_surface.map(|surface| surface.height_gpm),
        report.position.map(Position::latitude_deg),
        report.position.map(Position::longitude_deg),
    ]
    .into_iter()
    .flatten()
}

/// What must hold for any bytes whatever.
#[track_caller]
fn check(bytes: &[u8]) -> Reading {
    let reading = read(bytes, &context());
    let count = reading.bytes;
    assert_eq!(count.reports + count.envelope + count.refused, count.total);
    if !bytes.starts_with(&[0x1f, 0x8b, 8]) {
        assert_eq!(count.total, bytes.len() as u64);
    }
    assert!(count.total <= EXPANDED_BYTES_MAX);
    assert!(reading.complaints.len() <= COMPLAINTS_PER_FILE_MAX);
    let mut last = 0;
    for decoded in &reading.reports {
        assert!(decoded.bytes.start >= last && decoded.bytes.end as u64 <= count.total);
        last = decoded.bytes.start;
        assert!(numbers(&decoded.report).all(f64::is_finite));
        assert!(decoded.report.characteristic.is_none_or(|a| a <= 8));
        assert!(decoded.report.wind_from_deg.is_none_or(|from| (0.0..=360.0).contains(&from)));
    }
    for complaint in &reading.complaints {
        assert!(complaint.start <= complaint.end && complaint.end as u64 <= count.total);
        assert!(complaint.group.is_ascii() && complaint.group.len() <= 41);
    }
    // What is refused is complained about.
    assert!(count.refused == 0 || !reading.complaints.is_empty());
    reading
}

/// The explanation understands what the reading does.
#[track_caller]
fn check_explained(bytes: &[u8], reading: &Reading) {
    let mut reports = 0;
    let mut complaints = 0;
    explain(bytes, &context(), &mut |explained: Explained| {
        reports += usize::from(explained.report().is_some());
        complaints += explained.complaints().count();
        for part in &explained.parts {
            assert!(part.text.is_ascii());
        }
    });
    assert_eq!(reports, reading.reports.len());
    let counted = reading.complaints.len() as u64 + reading.complaints_not_kept;
    assert_eq!(complaints as u64, counted);
}

#[test]
fn every_sample_cut_at_every_byte() {
    for (path, bytes) in samples("wire", &["txt", "csv", "jsonl", "bin", "gz"]) {
        if bytes.len() > 10_000 {
            continue;
        }
        for cut in 0..=bytes.len() {
            let piece = bytes.get(..cut).expect("inside");
            let reading = check(piece);
            if cut % 7 == 0 {
                check_explained(piece, &reading);
            }
            check(bytes.get(cut..).expect("inside"));
        }
        assert!(!check(&bytes).reports.is_empty(), "{}", path.display());
    }
}

#[test]
fn every_sample_with_every_byte_changed() {
    const INTO: [u8; 9] = [1, 3, b'\n', b' ', b'/', b'=', b'9', b'"', 0xff];
    for (_, mut bytes) in samples("wire", &["txt", "csv", "jsonl", "bin", "gz"]) {
        if bytes.len() > 10_000 {
            continue;
        }
        for at in 0..bytes.len() {
            let was = bytes[at];
            for into in INTO.into_iter().chain([was ^ 1, was ^ 0x20]) {
                bytes[at] = into;
                let reading = check(&bytes);
                if at % 31 == 0 {
                    check_explained(&bytes, &reading);
                }
            }
            bytes[at] = was;
        }
    }
}

#[test]
fn every_made_message_with_every_byte_changed_to_anything() {
    for (_, mut bytes) in samples("bufr/made", &["bufr"]) {
        for at in 0..bytes.len() {
            let was = bytes[at];
            for into in 0..=u8::MAX {
                bytes[at] = into;
                check(&bytes);
            }
            bytes[at] = was;
            check(bytes.get(..at).expect("inside"));
        }
    }
}

/// Text that could make reading slow: many marks, many ends, endless lines.
#[test]
fn time_grows_with_the_length_and_no_faster() {
    let pieces: [&[u8]; 22] = [
        b"A",
        b"\n",
        b"=",
        b" ",
        b"\x01",
        b"\x01 12345\n",
        b"AAXX ",
        b"AAXX=",
        b"AAXX 15124 ",
        b"BBXX\n",
        b"{",
        b"{\"a\":\n",
        b"[",
        b"\"",
        b"SMUK01 EGRR 151200=",
        b"BUFR\0\xff\xff\x04",
        b"GRIB\0\xff\xff\x02",
        b"station,time\n",
        b"station,time\r",
        b"03772 41480 82324\n",
        b"EGLL 151220Z\r",
        b"0000000000\r",
    ];
    for piece in pieces {
        // As many bytes in all both times: the processor's account moves in steps of milliseconds,
        // and a single short text would often take no time at all by it.
        let time = |bytes: usize, times: usize| {
            let text = piece.repeat(bytes / piece.len());
            // The shortest of a few: the machine may be busy.
            let started = || {
                let begun = spent();
                for _ in 0..times {
                    check(&text);
                }
                spent().saturating_sub(begun)
            };
            (0..3).map(|_| started()).min().unwrap_or(Duration::MAX)
        };
        let (short, long) = (time(1 << 15, 16), time(1 << 19, 1));
        // Sixteen times the length at once: a quadratic reader would take sixteen times as long.
        let limit = short * 5 + Duration::from_millis(60);
        assert!(long < limit, "{:?}: {short:?}, then {long:?}", String::from_utf8_lossy(piece));
    }
}

/// Time that this thread has spent on a processor (Linux), so that a busy machine does not fail the
/// test; nothing where the system does not tell, and then the test says nothing.
#[expect(clippy::disallowed_methods, reason = "the test measures how long reading takes")]
fn spent() -> Duration {
    std::fs::read_to_string("/proc/thread-self/schedstat")
        .ok()
        .and_then(|text| text.split_whitespace().next()?.parse().ok())
        .map_or(Duration::ZERO, Duration::from_nanos)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(256))]

    #[test]
    fn any_bytes(bytes in proptest::collection::vec(any::<u8>(), 0..400)) {
        let reading = check(&bytes);
        check_explained(&bytes, &reading);
    }

    #[test]
    fn any_groups_under_any_mark(
        mark in "(AAXX 15124 |BBXX |OOXX |ZZYY |METAR |SPECI |station,time\n|\\{|)",
        groups in proptest::collection::vec("[0-9/A-Z=,:\"\n]{1,7}", 0..40),
    ) {
        let text = format!("{mark}{}", groups.join(" "));
        let reading = check(text.as_bytes());
        check_explained(text.as_bytes(), &reading);
    }

    /// A row that is written is read back, in any order of columns.
    #[test]
    fn a_row_is_read_as_it_was_written(
        pressure_tenths in 8700_i32..10850,
        change_tenths in -200_i32..200,
        latitude_hundredths in -9000_i32..=9000,
        longitude_hundredths in -17999_i32..=18000,
        order in Just([0_usize, 1, 2, 3, 4, 5]).prop_shuffle(),
    ) {
        let columns = [
            ("station", "Alpha".to_owned()),
            ("time", "2026-01-15T12:00:00Z".to_owned()),
            ("pressure_msl_hpa", format!("{:.1}", f64::from(pressure_tenths) / 10.0)),
            ("pressure_change_3h_hpa", format!("{:.1}", f64::from(change_tenths) / 10.0)),
            ("latitude_deg", format!("{:.2}", f64::from(latitude_hundredths) / 100.0)),
            ("longitude_deg", format!("{:.2}", f64::from(longitude_hundredths) / 100.0)),
        ];
        let names: Vec<&str> = order.iter().map(|&at| columns[at].0).collect();
        let values: Vec<&str> = order.iter().map(|&at| columns[at].1.as_str()).collect();
        let text = format!("{}\r\n{}\r\n", names.join(","), values.join(","));
        let reading = check(text.as_bytes());
        prop_assert_eq!(&reading.complaints, &[]);
        let report = reading.reports[0].report;
        prop_assert_eq!(report.pressure_msl_hpa, Some(f64::from(pressure_tenths) / 10.0));
        prop_assert_eq!(report.pressure_change_3h_hpa, Some(f64::from(change_tenths) / 10.0));
        let position = report.position.expect("a position");
        let expected = Position::new(
            f64::from(latitude_hundredths) / 100.0,
            f64::from(longitude_hundredths) / 100.0,
        );
        prop_assert_eq!(Some(position), expected);
    }
}
