//! From files to a Picture, as the watch does it, without a folder or a clock.

use glasskeeper::analysis::settled::Settled;
use glasskeeper::feed::intake::{read_file, take_in};
use glasskeeper::instant::Instant;
use glasskeeper::obs::{Catalogue, Held};
use glasskeeper::picture::{Decisions, Inputs, Picture, picture};
use glasskeeper::rehearse::{FeedFile, Rehearsal, Scenario};
use glasskeeper::settings::Settings;
use glasskeeper::systems::names::NameBook;

/// A built-in scenario at its own start.
pub(crate) fn rehearsal(name: &str) -> Rehearsal {
    let scenario = Scenario::built_in(name).expect("a built-in scenario");
    let start = scenario.start;
    Rehearsal::new(scenario, start)
}

/// Everything received by a time.
pub(crate) fn held_until(files: &[FeedFile], now: Instant) -> Held {
    let mut held = Held::new();
    for file in files.iter().filter(|file| file.due <= now) {
        take_in(read_file(&file.name, &file.bytes, file.due), &mut held);
    }
    held
}

/// The Picture without decisions and without a past.
pub(crate) fn look(held: &Held, settings: &Settings, now: Instant) -> Picture {
    look_with(held, settings, &Settled::new(), now)
}

/// The Picture with hours that are settled.
pub(crate) fn look_with(
    held: &Held,
    settings: &Settings,
    settled: &Settled,
    now: Instant,
) -> Picture {
    let inputs = Inputs {
        held,
        catalogue: &Catalogue::built_in(),
        decisions: &Decisions::default(),
        names: &NameBook::default(),
        settled,
        settings,
    };
    picture(&inputs, now).0
}

/// The value below which a share of a list of numbers lies.
pub(crate) fn quantile(values: &[f64], share: f64) -> f64 {
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    let last = sorted.len().saturating_sub(1) as f64;
    let index = glasskeeper::quantity::index_nearest(share * last);
    sorted.get(index).copied().unwrap_or(f64::NAN)
}
