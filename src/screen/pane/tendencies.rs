//! Tendencies: the pressure-tendency table with its barograph traces.

use super::Sheet;
use super::winds::short;
use crate::screen::number::{self, Item};
use crate::screen::table::{number as numbers, widening, words};
use crate::screen::theme::Role;
use crate::screen::{Scene, text, trace};
use crate::tendency::TendencyRow;

pub(super) const SHEET: Sheet = Sheet {
    columns: &[
        words("station", 9, 0),
        words("kind", 4, 10),
        numbers("time", 6, 6),
        numbers("hPa", 7, 0),
        numbers("a", 2, 3),
        numbers("3 h", 7, 0),
        numbers("+-", 4, 7),
        numbers("sent", 6, 8),
        numbers("1 h", 5, 5),
        numbers("24 h", 6, 4),
        words("24 h trace", 12, 2),
        widening("trend in words", 24, 1),
    ],
    units: "hPa",
    nothing: "no station with a pressure tendency",
};

/// The change that the pane stands for: cleaned, else computed, else as reported.
fn best_change(row: &TendencyRow) -> Option<f64> {
    row.change_3h_hpa.or(row.change_3h_computed_hpa).or(row.change_3h_reported_hpa)
}

pub(super) fn row(scene: Scene<'_>, row: &TendencyRow) -> Vec<Item> {
    let characteristic = row.characteristic.or(row.characteristic_computed);
    let very_rapid =
        best_change(row).is_some_and(|change| change <= -scene.settings.alerts.fall_3h_hpa);
    let mut change = number::change(best_change(row), 1);
    if very_rapid {
        change = Item::new(format!("!{}", change.text), Role::Warning);
    }
    let unsure = row.change_3h_error_hpa.is_some_and(|error| number::above(error, 1.5));
    vec![
        Item::text(row.station.to_string()),
        Item::new(short(row.platform), Role::Secondary),
        Item::new(row.time.time_of_day(), Role::Secondary),
        number::optional(row.pressure_msl_hpa, 1).weak_if(row.doubtful),
        characteristic.map_or_else(Item::missing, |a| {
            Item::text(a.to_string()).weak_if(row.characteristic.is_none())
        }),
        change.weak_if(unsure || row.doubtful),
        number::optional(row.change_3h_error_hpa, 1),
        number::change(row.change_3h_reported_hpa, 1),
        number::change(row.change_1h_hpa, 1),
        number::change(row.change_24h_hpa, 1),
        Item::text(trace::lines(&row.trace_hpa, 12, 1, scene.look.glyphs).concat()),
        Item::new(row.words.clone(), Role::Secondary),
    ]
}

pub(super) fn detail(scene: Scene<'_>, row: &TendencyRow, width: usize) -> Vec<String> {
    let name = row.name.as_deref().map_or_else(String::new, |name| format!(" {name}"));
    let part = |name: &str, value: Option<f64>| {
        format!("{name} {}", value.map_or_else(|| "unknown".to_owned(), |v| number::signed(v, 1)))
    };
    let text_of = format!(
        "{}{name}, {} at {}, {}. 3 h change, hPa: {}, {}, {}, {}; {}{}.{}",
        row.station,
        row.platform.word(),
        number::place(row.position),
        row.time.day_time(),
        part("as sent", row.change_3h_reported_hpa),
        part("from its own series", row.change_3h_computed_hpa),
        part("of it tide", row.tide_3h_hpa),
        row.ship_motion_3h_hpa
            .map_or_else(|| "no motion of its own".to_owned(), |way| part("own motion", Some(way))),
        part("left", row.change_3h_hpa),
        row.change_3h_error_hpa
            .map_or_else(String::new, |error| format!(" +-{}", number::fixed(error, 1))),
        if row.doubtful { " Something speaks against the newest value." } else { "" },
    );
    let graph_width = if width >= 60 { 24 } else { 0 };
    let mut out = text::lines(&text_of, width.saturating_sub(graph_width + 2));
    if graph_width > 0 {
        // The barograph of the last 24 hours beside the words.
        let known = || row.trace_hpa.iter().flatten().copied().filter(|value| value.is_finite());
        let height = 3;
        let graph = trace::lines(&row.trace_hpa, graph_width - 8, height, scene.look.glyphs);
        let low = known().fold(f64::INFINITY, f64::min);
        let high = known().fold(f64::NEG_INFINITY, f64::max);
        out.resize(out.len().max(height), String::new());
        let text_width = width.saturating_sub(graph_width + 2);
        for (k, line) in graph.iter().enumerate() {
            let label = match k {
                0 => number::fixed(high, 1),
                2 => number::fixed(low, 1),
                _ => String::new(),
            };
            out[k] = format!("{:<text_width$}  {line} {label:>6}", out[k]);
        }
    }
    out
}
