//! Arrivals: what came in, how late, what was doubted or refused and why; feed health.

use super::Sheet;
use crate::obs::Verdict;
use crate::picture::ArrivalLine;
use crate::screen::number::{self, Item};
use crate::screen::table::{number as numbers, widening, words};
use crate::screen::theme::Role;
use crate::screen::{Scene, strip};

pub(super) const SHEET: Sheet = Sheet {
    columns: &[
        numbers("received", 9, 0),
        words("who", 9, 0),
        words("form", 6, 3),
        numbers("for", 9, 4),
        numbers("late min", 8, 2),
        words("verdict", 8, 1),
        widening("what was found", 16, 1),
        words("file", 24, 5),
    ],
    units: "",
    nothing: "nothing has come in yet",
};

const fn verdict_word(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::Sound => "sound",
        Verdict::Doubtful => "doubt ?",
        Verdict::Refused => "refused!",
    }
}

pub(super) fn row(line: &ArrivalLine) -> Vec<Item> {
    let role = match line.verdict {
        Verdict::Sound => Role::Text,
        Verdict::Doubtful => Role::Weak,
        Verdict::Refused => Role::Warning,
    };
    vec![
        Item::new(line.received.day_time(), Role::Secondary),
        Item::text(line.who.clone()),
        Item::new(line.form.clone(), Role::Secondary),
        line.time.map_or_else(Item::missing, |time| Item::new(time.day_time(), Role::Secondary)),
        line.late_minutes.map_or_else(Item::missing, |late| Item::text(late.to_string())),
        Item::new(verdict_word(line.verdict), role),
        Item::new(line.text.clone(), Role::Text),
        Item::new(line.file.clone(), Role::Secondary),
    ]
}

pub(super) fn detail(line: &ArrivalLine) -> String {
    format!(
        "{} ({}) from {}, received {}: {}. {}",
        line.who,
        line.form,
        line.file,
        line.received.day_time(),
        match line.verdict {
            Verdict::Sound => "sound",
            Verdict::Doubtful => "doubtful",
            Verdict::Refused => "refused",
        },
        if line.text.is_empty() { "Nothing against it." } else { line.text.as_str() },
    )
}

/// The state of the feed in lines above the table.
pub(super) fn health(scene: Scene<'_>, width: u16) -> Vec<Item> {
    let counts = &scene.picture.reports;
    let arrivals = &scene.picture.arrivals;
    let age = strip::feed_age_minutes(scene.picture, scene.desk);
    let newest = age.map_or_else(
        || "no file yet".to_owned(),
        |age| format!("newest file {} ago", number::minutes(age)),
    );
    let role = if strip::stale(scene) { Role::Stale } else { Role::Text };
    let mut out = vec![Item::new(
        format!("{newest}; {} files, {} reports held", arrivals.files.len(), counts.held),
        role,
    )];
    out.push(Item::new(
        format!(
            "{} repeats, {} corrections, {} doubted, {} refused, {} complaints",
            counts.repeats, counts.corrections, counts.doubted, counts.refused, counts.complaints
        ),
        Role::Secondary,
    ));
    if counts.waiting_for_station > 0 {
        let names: Vec<String> = arrivals
            .unknown_stations
            .iter()
            .map(|(name, count)| format!("{name} ({count})"))
            .collect();
        out.push(Item::new(
            format!(
                "{} wait for a place, add to the catalogue: {}",
                counts.waiting_for_station,
                names.join(", ")
            ),
            Role::Warning,
        ));
    }
    if width >= 60 && !arrivals.received_per_hour.is_empty() {
        let counts: Vec<String> =
            arrivals.received_per_hour.iter().map(ToString::to_string).collect();
        out.push(Item::new(format!("received an hour: {}", counts.join(" ")), Role::Secondary));
    }
    out
}
