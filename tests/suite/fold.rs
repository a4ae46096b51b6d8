//! From files to a Picture, as the watch does it, without a folder or a clock.

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
    let inputs = Inputs {
        held,
        catalogue: &Catalogue::built_in(),
        decisions: &Decisions::default(),
        names: &NameBook::default(),
        settings,
    };
    picture(&inputs, now).0
}
