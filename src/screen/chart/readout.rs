//! What is read out at the cursor, and the legend below the chart.

use super::isolines::BROKEN_RATIO;
use super::reports;
use crate::desk::view::{View, system_at};
use crate::picture::PointValues;
use crate::quantity::nm_from_km;
use crate::screen::number;
use crate::screen::{Scene, strip};
use crate::sphere::Position;

/// The read-out at a place, in pieces that belong together; a piece is never broken.
pub(super) fn at(scene: Scene<'_>, place: Position) -> Vec<String> {
    let picture = scene.picture;
    let hour = scene.desk.chart.hour_shown(picture);
    let mut out = vec![number::place(place)];
    let values = picture.at_point_of(hour, place);
    match values.pressure_hpa {
        None => out.push("no analysis here".to_owned()),
        Some(pressure) => {
            let weak = values.error_ratio.is_none_or(|ratio| ratio > BROKEN_RATIO);
            let error = values.pressure_error_hpa.unwrap_or(f64::NAN);
            out.push(format!(
                "{}{} hPa +-{}",
                number::fixed(pressure, 1),
                if weak { "?" } else { "" },
                number::fixed(error, 1)
            ));
            winds(&values, weak, &mut out);
        }
    }
    if let Some((observation, distance_km)) = reports::nearest(picture, hour, place) {
        let to = way(place, observation.position, distance_km);
        out.push(format!("report {} {to}", reports::words(observation)));
    }
    let nearest = picture
        .systems
        .iter()
        .filter_map(|system| Some((system, system_at(system, hour, picture.valid)?)))
        .map(|(system, at)| (system, at, place.distance_km(at)))
        .min_by(|a, b| a.2.total_cmp(&b.2));
    if let Some((system, at, distance_km)) = nearest {
        let weak = if strip::is_weak(system) { "?" } else { "" };
        out.push(format!("{}{weak} bears {}", system.name, way(place, at, distance_km)));
    }
    if let Some(start) = scene.desk.chart.ruler {
        let distance_km = start.distance_km(place);
        out.push(format!("ruler {} from {}", way(start, place, distance_km), number::place(start)));
    }
    out
}

/// Bearing and distance, `045 120 nm`.
fn way(from: Position, to: Position, distance_km: f64) -> String {
    format!(
        "{} {} nm",
        number::degrees(from.bearing_deg(to)),
        number::fixed(nm_from_km(distance_km), 0)
    )
}

fn winds(values: &PointValues, weak: bool, out: &mut Vec<String>) {
    let mark = if weak { "?" } else { "" };
    let change = values.change_3h_hpa.map_or_else(
        || number::MISSING.to_owned(),
        |change| format!("{}{mark}", number::signed(change, 1)),
    );
    out.push(format!("3 h {change}"));
    let doubt = if weak || values.winds.low_latitude || values.winds.capped { "?" } else { "" };
    let named = [
        ("surface", values.winds.surface),
        ("gradient", values.winds.gradient),
        ("geostrophic", values.winds.geostrophic),
    ];
    for (name, wind) in named {
        let text = wind.map_or_else(
            || number::MISSING.to_owned(),
            |wind| format!("{}{doubt}", number::wind_text(wind)),
        );
        out.push(format!("{name} {text}"));
    }
}

/// The line below the chart: scale, and what the shapes mean.
pub(super) fn legend(scene: Scene<'_>, view: &View) -> String {
    let cell_km = view.cell_width_m() / 1000.0;
    let nm = [10.0, 20.0, 50.0, 100.0, 200.0, 500.0, 1000.0, 2000.0];
    let most = f64::from(view.columns) / 6.0;
    let bar = nm
        .into_iter()
        .rev()
        .map(|nm| (nm, crate::quantity::km_from_nm(nm) / cell_km))
        .find(|(_, cells)| *cells <= most && *cells >= 3.0);
    let mut out = Vec::new();
    if let Some((nm, cells)) = bar {
        let dashes = "-".repeat(crate::quantity::index_nearest(cells).saturating_sub(2));
        out.push(format!("|{dashes}| {} nm", number::fixed(nm, 0)));
    }
    let layers = scene.desk.chart.layers;
    if layers.outlook {
        out.push("dashed +h: extrapolation".to_owned());
    }
    out.push("broken: weak".to_owned());
    if layers.tracks {
        out.push("o: every 6 h".to_owned());
    }
    if layers.isallobars {
        out.push("dashed +-: 3 h change, hPa".to_owned());
    }
    if layers.convergence {
        out.push("shaded: convergence from 2e-5/s".to_owned());
    }
    if layers.wind {
        out.push("arrows: expected surface wind".to_owned());
    }
    if layers.error {
        out.push("dotted: analysis weak".to_owned());
    }
    out.join("  ")
}
