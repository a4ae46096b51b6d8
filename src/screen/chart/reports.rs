//! Reports of the hour, watch points and the own ship.

use super::labels::Labels;
use super::raster::{Layer, Pattern, Pen, Raster};
use crate::desk::view::View;
use crate::instant::Hour;
use crate::obs::{Element, Observation, Verdict};
use crate::picture::Picture;
use crate::quantity::{kt_from_m_s, whole_below};
use crate::screen::{Role, number};
use crate::settings::Settings;
use crate::sphere::Position;

/// True width of a cell, m, below which stations are marked, and below which their values stand.
const MARKS_BELOW_M: f64 = 45_000.0;
const VALUES_BELOW_M: f64 = 16_000.0;

fn cell(view: &View, place: Position) -> (i64, i64) {
    let (x, y) = view.dot_of(place);
    (whole_below(x / 2.0), whole_below(y / 4.0))
}

/// Watch points and the own ship.
pub(super) fn places(view: &View, settings: &Settings, labels: &mut Labels) {
    if let Some(ship) = &settings.own_ship {
        let place = Position::clamped(ship.latitude_deg, ship.longitude_deg);
        let (column, row) = cell(view, place);
        labels.place(column, row, "@own ship", Role::Cursor, 0);
    }
    for point in &settings.watch_points {
        let (column, row) = cell(view, point.position());
        let named = format!("*{}", point.name);
        if !labels.place(column, row, &named, Role::Text, 0) {
            labels.place(column, row, "*", Role::Text, 0);
        }
    }
}

/// Stations: a mark each; closer, the pressure in tenths without its hundreds as it is plotted by
/// the trade (987 for 998.7), and a shaft towards where the wind comes from.
pub(super) fn draw(
    view: &View,
    picture: &Picture,
    hour: Hour,
    raster: &mut Raster,
    labels: &mut Labels,
) {
    let wide_m = view.cell_width_m();
    if wide_m > MARKS_BELOW_M {
        return;
    }
    for observation in picture.observations.iter().filter(|observation| observation.hour == hour) {
        if view.cell_of(observation.position).is_none() {
            continue;
        }
        let (column, row) = cell(view, observation.position);
        let (mark, role) = match observation.verdict(Element::Pressure) {
            Verdict::Sound => ("o", Role::Report),
            Verdict::Doubtful => ("?", Role::Weak),
            Verdict::Refused => ("x", Role::Warning),
        };
        if wide_m > VALUES_BELOW_M {
            labels.place(column, row, mark, role, 0);
            continue;
        }
        shaft(view, observation, raster);
        let plotted = plotted(observation.pressure_msl_hpa);
        let text = plotted.map_or_else(|| mark.to_owned(), |plotted| format!("{mark}{plotted}"));
        if !labels.place(column, row, &text, role, 0) {
            labels.place(column, row, mark, role, 0);
        }
    }
}

/// The last three digits of the tenths of a pressure (common practice of plotted charts).
fn plotted(pressure_hpa: Option<f64>) -> Option<String> {
    let tenths = crate::quantity::whole_nearest(pressure_hpa.filter(|p| p.is_finite())? * 10.0);
    Some(format!("{:03}", tenths.rem_euclid(1000)))
}

/// A shaft from the station towards where the wind comes from, a dot for each 2.5 knots, at least
/// three.
fn shaft(view: &View, observation: &Observation, raster: &mut Raster) {
    let Some((u, v)) = observation.wind_m_s else { return };
    let speed_m_s = u.hypot(v);
    if !speed_m_s.is_finite() || speed_m_s < 1.0 {
        return;
    }
    let (mx, my) = view.projection.to_map_components(observation.position.longitude_deg(), u, v);
    let length = (kt_from_m_s(speed_m_s) / 2.5).clamp(3.0, 24.0) / speed_m_s;
    let from = view.dot_of(observation.position);
    let to = (from.0 - mx * length, from.1 + my * length);
    raster.line(&mut Pen::new(Layer::Report, Pattern::Solid), from, to);
}

/// The nearest observation of the hour to a place, with its distance, km.
pub(super) fn nearest(
    picture: &Picture,
    hour: Hour,
    place: Position,
) -> Option<(&Observation, f64)> {
    picture
        .observations
        .iter()
        .filter(|observation| observation.hour == hour)
        .map(|observation| (&**observation, place.distance_km(observation.position)))
        .min_by(|a, b| a.1.total_cmp(&b.1))
}

/// A report in a few words: who, pressure, wind.
pub(super) fn words(observation: &Observation) -> String {
    let pressure = observation
        .pressure_msl_hpa
        .map_or_else(|| number::MISSING.to_owned(), |p| number::fixed(p, 1));
    let wind = observation.wind_m_s.map_or_else(
        || number::MISSING.to_owned(),
        |(u, v)| {
            let (from_deg, speed_m_s) = crate::quantity::wind_from_components(u, v);
            number::wind_text(crate::winds::Wind { from_deg, speed_m_s })
        },
    );
    let doubt = match observation.verdict(Element::Pressure) {
        Verdict::Sound => "",
        Verdict::Doubtful => " doubted",
        Verdict::Refused => " refused",
    };
    format!("{} {pressure}{doubt} {wind}", observation.report.station)
}
