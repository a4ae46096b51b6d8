//! The law of the loop: the Picture is a pure function of the set of held reports. Order, repeats
//! and the split into files cannot change it, not by one bit.

use glasskeeper::instant::Instant;
use glasskeeper::obs::held::Held;
use glasskeeper::obs::{Observation, Provenance};
use glasskeeper::picture::{Arrivals, Picture};
use glasskeeper::rehearse::FeedFile;
use glasskeeper::settings::Settings;

use crate::fold::{held_until, look, rehearsal};

/// Some hours of a sample: enough for tracks, corrections and late reports.
fn some_files(name: &str) -> (Vec<FeedFile>, Instant) {
    let rehearsal = rehearsal(name);
    let now = rehearsal.start().plus_s(6 * 3600 + 3000);
    (rehearsal.files().filter(|file| file.due <= now).collect(), now)
}

fn picture_of(files: &[FeedFile], now: Instant) -> Picture {
    look(&held_until(files, now), &settings(), now)
}

/// A small grid and a short window: the law does not depend on their size.
fn settings() -> Settings {
    Settings { grid_columns: 41, grid_rows: 31, window_h: 8, ..Settings::default() }
}

/// Everything but the record of the feed, which may depend on how reports were split into files,
/// as text: two values that print alike are equal to the last bit (the shortest text that reads
/// back as the same number), and NaN equals NaN.
fn essence(picture: &Picture) -> String {
    let mut picture = picture.clone();
    picture.arrivals = Arrivals::default();
    picture.reports.repeats = 0;
    picture.reports.complaints = 0;
    let nowhere = Provenance {
        file: String::new(),
        content: String::new(),
        start: 0,
        end: 0,
        received: Instant::default(),
    };
    for observation in &mut picture.observations {
        let bare: Observation =
            Observation { provenance: nowhere.clone(), ..(**observation).clone() };
        *observation = std::sync::Arc::new(bare);
    }
    format!("{picture:?}")
}

/// Where two long texts differ, with some text around it.
#[track_caller]
fn same(what: &str, first: &str, second: &str) {
    if first == second {
        return;
    }
    let at = first.bytes().zip(second.bytes()).position(|(a, b)| a != b).unwrap_or(0);
    let around = |text: &str| {
        text.get(at.saturating_sub(150)..(at + 150).min(text.len())).unwrap_or("").to_owned()
    };
    panic!("{what}: the Picture differs\n{}\n{}", around(first), around(second));
}

#[test]
fn order_of_arrival_and_repeats_change_nothing() {
    let (files, now) = some_files("northern-ocean-low");
    let first = essence(&picture_of(&files, now));
    let mut reversed = files.clone();
    reversed.reverse();
    same("reversed", &first, &essence(&picture_of(&reversed, now)));
    // Every third file first, then the next third, then the last.
    let dealt: Vec<FeedFile> =
        (0..3).flat_map(|third| files.iter().skip(third).step_by(3).cloned()).collect();
    same("dealt", &first, &essence(&picture_of(&dealt, now)));
    let twice: Vec<FeedFile> = files.iter().chain(&reversed).cloned().collect();
    same("twice", &first, &essence(&picture_of(&twice, now)));
}

/// The same reports one a file, taken in backwards.
#[test]
fn the_split_into_files_changes_nothing() {
    let (files, now) = some_files("southern-date-line");
    let first = essence(&picture_of(&files, now));
    let mut held = Held::new();
    for file in files.iter().rev() {
        let context = glasskeeper::wire::Context { received: file.due };
        let reading = glasskeeper::wire::read(&file.bytes, &context);
        for (n, decoded) in reading.reports.into_iter().enumerate().rev() {
            let provenance = Provenance {
                file: format!("{n}-of-{}", file.name),
                content: format!("{n} {}", file.name),
                start: 0,
                end: decoded.bytes.len(),
                received: file.due,
            };
            held.insert(decoded.report, provenance);
        }
    }
    same("split", &first, &essence(&look(&held, &settings(), now)));
}

/// The same number of threads or another: sums run in a fixed order.
#[test]
fn the_number_of_threads_changes_nothing() {
    let (files, now) = some_files("northern-ocean-low");
    let with = |threads: usize| {
        rayon::ThreadPoolBuilder::new()
            .num_threads(threads)
            .build()
            .expect("threads")
            .install(|| essence(&picture_of(&files, now)))
    };
    same("threads", &with(1), &with(3));
}
