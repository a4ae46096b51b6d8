//! Winds: observed and implied, and what explains a disagreement.

use std::fmt::Write as _;

use super::Sheet;
use crate::quantity::kt_from_m_s;
use crate::report::Platform;
use crate::screen::number::{self, Item};
use crate::screen::table::{number as numbers, widening, words};
use crate::screen::theme::Role;
use crate::winds::StationWind;

pub(super) const SHEET: Sheet = Sheet {
    columns: &[
        words("station", 9, 0),
        words("kind", 6, 8),
        numbers("observed", 8, 0),
        numbers("gust", 4, 6),
        numbers("expected", 8, 1),
        numbers("+-kt", 5, 7),
        numbers("gradient", 9, 3),
        numbers("geostr", 7, 5),
        numbers("d kt", 5, 2),
        numbers("d deg", 5, 4),
        widening("what explains it", 16, 6),
    ],
    units: "degrees/kt",
    nothing: "no station or watch point with a wind",
};

/// Error ratio above which the analysis is not to be trusted (METHODS ANA-5).
const UNSURE_RATIO: f64 = 0.7;

pub(super) fn row(wind: &StationWind) -> Vec<Item> {
    let weak = number::above(wind.error_ratio, UNSURE_RATIO)
        || wind.winds.low_latitude
        || wind.winds.capped;
    let kt = |value: Option<f64>| value.map(kt_from_m_s);
    let difference = |value: Option<f64>| {
        value.map_or_else(Item::missing, |value| Item::text(number::signed(value, 0)))
    };
    vec![
        Item::text(wind.station.clone()),
        Item::new(wind.platform.map_or("point", short), Role::Secondary),
        number::wind(wind.observed),
        number::optional(kt(wind.gust_m_s), 0),
        number::wind(wind.winds.surface).weak_if(weak),
        number::optional(kt(wind.winds.surface_error_m_s), 0),
        number::wind(wind.winds.gradient).weak_if(weak),
        number::wind(wind.winds.geostrophic),
        difference(kt(wind.speed_difference_m_s)),
        difference(wind.direction_difference_deg),
        Item::new(wind.explanation.clone(), Role::Secondary),
    ]
}

/// A short word for a kind of place.
pub(super) const fn short(platform: Platform) -> &'static str {
    match platform {
        Platform::Land => "land",
        Platform::Ship => "ship",
        Platform::Buoy => "buoy",
        Platform::Aerodrome => "aero",
    }
}

pub(super) fn detail(wind: &StationWind) -> String {
    let say = |name: &str, wind: Option<crate::winds::Wind>| {
        format!("{name} {}", wind.map_or_else(|| "unknown".to_owned(), number::wind_text))
    };
    let mut out = format!(
        "{} at {}{}: degrees/kt: {}, {}, {}, {}.",
        wind.station,
        number::place(wind.position),
        wind.time.map_or_else(String::new, |time| format!(", {}", time.day_time())),
        say("observed", wind.observed),
        say("expected at 10 m", wind.winds.surface),
        say("gradient", wind.winds.gradient),
        say("geostrophic", wind.winds.geostrophic),
    );
    if number::above(wind.error_ratio, UNSURE_RATIO) {
        out += " The analysis is weak here.";
    }
    if wind.winds.low_latitude {
        out += " Near the equator the balanced wind is weak evidence.";
    }
    if wind.winds.capped {
        out += " The pressure gradient is steeper than the curvature allows: capped.";
    }
    if !wind.explanation.is_empty() {
        let _ = write!(out, " Disagreement: {}.", wind.explanation);
    }
    out
}
