//! Convergence: the strongest areas by each method.

use super::Sheet;
use crate::desk::rows::method_word;
use crate::screen::number::{self, Item};
use crate::screen::table::{number as numbers, widening, words};
use crate::screen::theme::Role;
use crate::winds::ConvergenceArea;

pub(super) const SHEET: Sheet = Sheet {
    columns: &[
        numbers("1e-5/s", 7, 0),
        numbers("+-", 4, 4),
        words("method", 13, 0),
        numbers("cm/s up", 7, 3),
        numbers("3 h trend", 9, 2),
        numbers("1000 km2", 8, 5),
        numbers("lat", 5, 1),
        numbers("lon", 6, 1),
        widening("where", 14, 4),
    ],
    units: "",
    nothing: "no area of convergence stands out",
};

const PER_1E5: f64 = 1e5;

fn weak(area: &ConvergenceArea) -> bool {
    area.error_per_s.is_some_and(|error| number::above(error, area.divergence_per_s.abs() / 2.0))
}

pub(super) fn row(area: &ConvergenceArea) -> Vec<Item> {
    let trend = area.trend_per_s.map_or_else(Item::missing, |trend| {
        // More negative is stronger convergence.
        let role = if trend < 0.0 { Role::Falling } else { Role::Text };
        Item::new(number::signed(trend * PER_1E5, 1), role)
    });
    vec![
        Item::new(number::signed(area.divergence_per_s * PER_1E5, 1), Role::Convergence)
            .weak_if(weak(area)),
        number::optional(area.error_per_s.map(|error| error * PER_1E5), 1),
        Item::text(method_word(area.method)),
        Item::text(number::fixed(area.ascent_m_s * 100.0, 1)),
        trend,
        Item::text(number::fixed(area.area_km2 / 1000.0, 0)),
        Item::text(number::latitude(area.position)),
        Item::text(number::longitude(area.position)),
        Item::new(area.place.clone(), Role::Secondary),
    ]
}

pub(super) fn detail(area: &ConvergenceArea) -> String {
    let mut out = format!(
        "Divergence {} 1e-5/s from {} at {}, {}; ascent {} cm/s at the top of the lowest kilometre.",
        number::signed(area.divergence_per_s * PER_1E5, 1),
        method_word(area.method),
        number::place(area.position),
        if area.place.is_empty() { "no system near" } else { area.place.as_str() },
        number::fixed(area.ascent_m_s * 100.0, 1),
    );
    if weak(area) {
        out += " Weak: the error is more than half the value.";
    }
    out
}
