//! A frame: the whole screen drawn into a buffer, for the picture of a sample feed.

use std::hint::black_box;
use std::path::Path;
use std::time::{Duration, Instant as Clock};

use glasskeeper::desk::{Desk, Event, Key};
use glasskeeper::feed::batch::read_folder;
use glasskeeper::obs::Catalogue;
use glasskeeper::picture::{Decisions, Inputs, picture};
use glasskeeper::screen::{Look, render};
use glasskeeper::settings::Settings;
use glasskeeper::systems::names::NameBook;
use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

#[expect(clippy::disallowed_methods, reason = "a benchmark reads the clock")]
fn timed(mut work: impl FnMut()) -> Duration {
    let mut times: Vec<Duration> = (0..100)
        .map(|_| {
            let start = Clock::now();
            work();
            start.elapsed()
        })
        .collect();
    times.sort();
    times[times.len() / 2]
}

/// Draws frames at several sizes and states the median time of each.
pub(crate) fn run() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("samples/northern-ocean-low/feed");
    let Ok(held) = read_folder(&folder, None) else { return };
    let now = held.newest().unwrap_or_default().hour_nearest().instant();
    let settings = Settings { window_h: 6, ..Settings::default() };
    let inputs = Inputs {
        held: &held,
        catalogue: &Catalogue::built_in(),
        decisions: &Decisions::default(),
        names: &NameBook::default(),
        settled: &std::collections::BTreeMap::new(),
        settings: &settings,
    };
    let (picture, _) = picture(&inputs, now);
    for (columns, rows, script) in
        [(80, 24, ""), (80, 24, "n++++"), (200, 60, ""), (200, 60, "n++++"), (200, 60, "wivex")]
    {
        let mut desk = Desk::new(columns, rows);
        for key in Key::script(script).unwrap_or_default() {
            desk.update(Event::Key(key), Some(&picture));
        }
        let look = Look::new();
        let area = Rect::new(0, 0, columns, rows);
        let mut buf = Buffer::empty(area);
        let median = timed(|| {
            render(Some(&picture), &desk, &settings, &look, area, &mut buf);
            black_box(&buf);
        });
        println!("screen: {columns} x {rows}, keys {script:?}: {median:.2?} a frame");
    }
}
