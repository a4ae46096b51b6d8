//! Systems: every high and low.

use std::fmt::Write as _;

use super::Sheet;
use crate::quantity::nm_from_km;
use crate::screen::number::{self, Item};
use crate::screen::table::{number as numbers, words};
use crate::screen::theme::Role;
use crate::screen::{Scene, strip, text, trace};
use crate::systems::{Kind, Measured, Phase, System};

pub(super) const SHEET: Sheet = Sheet {
    columns: &[
        words("name", 6, 0),
        numbers("hPa", 7, 0),
        numbers("+-", 4, 4),
        numbers("3 h", 6, 1),
        numbers("6 h", 6, 7),
        numbers("12 h", 6, 8),
        numbers("24 h", 6, 3),
        numbers("berg", 5, 5),
        numbers("course", 6, 2),
        numbers("kt", 5, 2),
        numbers("lat", 5, 4),
        numbers("lon", 6, 4),
        numbers("+-nm", 5, 9),
        words("phase", 9, 6),
        numbers("sure", 5, 9),
        numbers("radius", 6, 10),
        words("24 h trace", 12, 11),
    ],
    units: "hPa, degrees true, kt",
    nothing: "no high or low found in the analysis",
};

/// The word for what a system is doing.
pub(in crate::screen) const fn phase_word(kind: Kind, phase: Phase) -> &'static str {
    match (kind, phase) {
        (_, Phase::Forming) => "forming",
        (Kind::Low, Phase::Deepening) => "deepening",
        (Kind::High, Phase::Deepening) => "building",
        (_, Phase::Steady) => "steady",
        (Kind::Low, Phase::Filling) => "filling",
        (Kind::High, Phase::Filling) => "weakening",
        (_, Phase::Ending) => "ending",
    }
}

pub(super) fn row(scene: Scene<'_>, system: &System) -> Vec<Item> {
    let role = if system.kind == Kind::Low { Role::Low } else { Role::High };
    let weak = strip::is_weak(system);
    let bergeron = system.bergeron.or(system.bergeron_12h);
    let explosive = bergeron.is_some_and(|rate| rate.value >= scene.settings.alerts.bergeron);
    let rate = bergeron.map_or_else(Item::missing, |rate| {
        let text = number::fixed(rate.value, 1);
        // The mark, not the colour, says that the threshold is reached.
        Item::new(
            if explosive { format!("!{text}") } else { text },
            if explosive { Role::Warning } else { Role::Text },
        )
        .weak_if(number::unsure(rate))
    });
    let course = system.course_deg.map_or_else(Item::missing, |course| {
        Item::text(number::degrees(course))
            .weak_if(system.course_error_deg.is_some_and(|error| error > 30.0))
    });
    vec![
        Item::new(system.name.clone(), role).weak_if(weak),
        Item::new(number::fixed(system.pressure_hpa.value, 1), Role::Text)
            .weak_if(number::above(system.pressure_hpa.error, 3.0)),
        Item::text(number::fixed(system.pressure_hpa.error, 1)),
        number::measured_change(system.change_3h_hpa, 1),
        number::measured_change(system.change_6h_hpa, 1),
        number::measured_change(system.change_12h_hpa, 1),
        number::measured_change(system.change_24h_hpa, 1),
        rate,
        course,
        system.speed_kt.map_or_else(Item::missing, weak_speed),
        Item::text(number::latitude(system.position)),
        Item::text(number::longitude(system.position)),
        Item::text(number::fixed(nm_from_km(system.position_error_km), 0)),
        Item::text(phase_word(system.kind, system.phase)),
        Item::text(format!("{}%", number::fixed(system.confidence * 100.0, 0))),
        number::optional(system.radius_km.map(nm_from_km), 0),
        Item::new(pressure_trace(scene, system, 12, 1).concat(), role),
    ]
}

fn weak_speed(speed: Measured) -> Item {
    Item::text(number::fixed(speed.value, 0)).weak_if(speed.error > (speed.value / 2.0).max(5.0))
}

/// Central pressures of the last 24 hours up to the valid hour, where it was found.
fn pressure_trace(scene: Scene<'_>, system: &System, width: usize, height: usize) -> Vec<String> {
    let valid_h = scene.picture.valid.unix_h();
    let values: Vec<Option<f64>> = (valid_h - 23..=valid_h)
        .map(|hour| {
            system
                .track
                .iter()
                .find(|point| point.hour.unix_h() == hour && point.observed)
                .map(|point| point.pressure_hpa)
        })
        .collect();
    trace::lines(&values, width, height, scene.look.glyphs)
}

/// Everything about a system.
pub(super) fn detail(system: &System, width: usize) -> Vec<String> {
    let kind = if system.kind == Kind::Low { "low" } else { "high" };
    let mut first = format!(
        "{} {kind}, {}, {} +-{} nm, found {}, {} reports inside, {}% sure.",
        system.name,
        phase_word(system.kind, system.phase),
        number::place(system.position),
        number::fixed(nm_from_km(system.position_error_km), 0),
        system.since.instant().day_time(),
        system.reports_inside,
        number::fixed(system.confidence * 100.0, 0),
    );
    let _ = write!(first, " Depth {} hPa", number::fixed(system.depth_hpa, 1));
    if let Some(isobar) = system.last_closed_isobar_hpa {
        let _ = write!(first, " to the last closed isobar {}", number::fixed(isobar, 0));
    }
    if let Some(radius) = system.gale_radius_km {
        let _ = write!(first, ", gale out to {} nm", number::fixed(nm_from_km(radius), 0));
    }
    first.push('.');
    let mut out = text::lines(&first, width);
    let span = |name: &str, change: Option<Measured>| {
        change.map(|change| {
            let weak = if number::unsure(change) { "?" } else { "" };
            format!(
                "{name} {}{weak} +-{}",
                number::signed(change.value, 1),
                number::fixed(change.error, 1)
            )
        })
    };
    let changes: Vec<String> = [
        span("3 h", system.change_3h_hpa),
        span("6 h", system.change_6h_hpa),
        span("12 h", system.change_12h_hpa),
        span("24 h", system.change_24h_hpa),
    ]
    .into_iter()
    .flatten()
    .collect();
    if !changes.is_empty() {
        out.extend(text::lines(&format!("Change, hPa: {}.", changes.join(", ")), width));
    }
    if !system.outlook.is_empty() {
        let points: Vec<String> = system
            .outlook
            .iter()
            .map(|point| {
                format!(
                    "+{} h {} {} hPa +-{}, within {} x {} nm",
                    point.lead_h,
                    number::place(point.position),
                    number::fixed(point.pressure_hpa.value, 0),
                    number::fixed(point.pressure_hpa.error, 0),
                    number::fixed(nm_from_km(point.major_km), 0),
                    number::fixed(nm_from_km(point.minor_km), 0),
                )
            })
            .collect();
        let line = format!("Extrapolation, no forecast: {}.", points.join("; "));
        out.extend(text::lines(&line, width));
    }
    if let Some(event) = system.events.last() {
        let line = format!("Last event {}: {}.", event.hour.instant().day_time(), event.what);
        out.extend(text::lines(&line, width));
    }
    out
}
