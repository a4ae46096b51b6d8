//! Hours that are settled stand as they were; the others follow what comes in.

use std::sync::Arc;

use glasskeeper::analysis::HourAnalysis;
use glasskeeper::analysis::settled::Settled;
use glasskeeper::picture::Picture;
use glasskeeper::settings::Settings;

use crate::fold::{held_until, look, look_with, rehearsal};

/// Where the two Pictures' analyses differ, as hours before the newest.
fn differing(one: &Picture, other: &Picture) -> Vec<i64> {
    let hours = one.hours.iter().zip(&other.hours);
    hours.filter(|(a, b)| a != b).map(|(a, _)| one.valid.unix_h() - a.hour.unix_h()).collect()
}

#[test]
fn a_late_report_remakes_open_hours_and_leaves_settled_ones() {
    let rehearsal = rehearsal("northern-ocean-low");
    let now = rehearsal.start().plus_s(10 * 3600 + 3000);
    let settings = Settings {
        grid_columns: 41,
        grid_rows: 31,
        window_h: 10,
        settling_h: 4,
        memory_h: 3,
        // A region of its own: a late report from afar must not move it.
        region: Some(glasskeeper::settings::RegionBox {
            south_deg: 35.0,
            north_deg: 70.0,
            west_deg: -60.0,
            east_deg: 20.0,
        }),
        ..Settings::default()
    };
    let mut files: Vec<_> = rehearsal.files().filter(|file| file.due <= now).collect();
    // Files of the second and the ninth hour are late: they are held back at first.
    let is_late = |file: &glasskeeper::rehearse::FeedFile| {
        let due_h = file.due.hours_since(rehearsal.start());
        (2.0..2.6).contains(&due_h) || (9.0..9.6).contains(&due_h)
    };
    let early: Vec<_> = files.iter().filter(|file| !is_late(file)).cloned().collect();
    files.sort_by_key(|file| file.due);
    assert!(early.len() < files.len());
    let before = look(&held_until(&early, now), &settings, now);
    let until = before.now.hour_floor().plus(-settings.settling_h);
    // Kept and taken back as the journal does.
    let settled: Settled = before
        .hours
        .iter()
        .map(|analysis| HourAnalysis::from_bytes(&analysis.to_bytes()).expect("its own bytes"))
        .map(|analysis| (analysis.hour, Arc::new(analysis)))
        .collect();
    let all = held_until(&files, now);
    let open = look(&all, &settings, now);
    let kept = look_with(&all, &settings, &settled, now);
    let changed_open = differing(&before, &open);
    let changed_kept = differing(&before, &kept);
    let settling_h = before.valid.unix_h() - until.unix_h();
    assert!(changed_open.iter().any(|back| *back >= settling_h), "{changed_open:?}");
    assert!(changed_open.iter().any(|back| *back < settling_h), "{changed_open:?}");
    // What is not old enough is remade even though an analysis of it was handed in.
    let expected: Vec<i64> =
        changed_open.iter().copied().filter(|back| *back < settling_h).collect();
    assert_eq!(changed_kept, expected);
    // The late reports still join the stations' own series. (A ship's own motion is read from the
    // analyses, and so may differ.)
    let series = |picture: &Picture| {
        let mut rows: Vec<_> = picture
            .tendencies
            .iter()
            .map(|row| (row.platform, row.station, row.time, format!("{:?}", row.trace_hpa)))
            .collect();
        rows.sort();
        rows
    };
    assert!(series(&kept) == series(&open), "a series lost a late report");
    assert!(series(&kept) != series(&before), "the late reports are in no series");
}
