//! What is read out at the cursor, and the legend below the chart.

use super::isolines::{BROKEN_RATIO, NOTHING_RATIO};
use super::reports;
use crate::desk::view::{View, system_at};
use crate::quantity::{nm_from_km, wind_from_components};
use crate::screen::number;
use crate::screen::{Scene, strip};
use crate::sphere::Position;
use crate::winds::{Wind, WindField};

/// The read-out at a place, in pieces that belong together; a piece is never broken.
pub(super) fn at(scene: Scene<'_>, place: Position) -> Vec<String> {
    let picture = scene.picture;
    let hour = scene.desk.chart.hour_shown(picture);
    let mut out = vec![number::place(place)];
    let analysis = picture.hour(hour);
    let point = analysis.and_then(|analysis| analysis.at(place));
    let ratio = analysis.and_then(|analysis| analysis.grid.sample(&analysis.error_ratio, place));
    match (&point, ratio) {
        (_, Some(ratio)) if ratio > NOTHING_RATIO => out.push("no analysis here".to_owned()),
        (None, _) => out.push("no analysis here".to_owned()),
        (Some(point), ratio) => {
            let weak = ratio.is_none_or(|ratio| ratio > BROKEN_RATIO);
            out.push(format!(
                "{}{} hPa +-{}",
                number::fixed(point.pressure_hpa, 1),
                if weak { "?" } else { "" },
                number::fixed(point.pressure_error_hpa, 1)
            ));
            if let Some(field) = picture.wind_field(hour) {
                winds(field, place, weak, &mut out);
            }
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

fn winds(field: &WindField, place: Position, weak: bool, out: &mut Vec<String>) {
    let mark = if weak { "?" } else { "" };
    if let Some(change) = field.grid.sample(&field.change_3h_hpa, place) {
        out.push(format!("3 h {}{mark}", number::signed(change, 1)));
    }
    let sample = |values: &[[f64; 2]]| {
        let part = |index: usize| -> Option<f64> {
            let one: Vec<f64> = values.iter().map(|pair| pair[index]).collect();
            field.grid.sample(&one, place)
        };
        let (from_deg, speed_m_s) = wind_from_components(part(0)?, part(1)?);
        Some(Wind { from_deg, speed_m_s })
    };
    let named = [
        ("surface", sample(&field.surface_m_s)),
        ("gradient", sample(&field.gradient_m_s)),
        ("geostrophic", sample(&field.geostrophic_m_s)),
    ];
    for (name, wind) in named {
        let text = wind.map_or_else(|| number::MISSING.to_owned(), number::wind_text);
        out.push(format!("{name} {text}{mark}"));
    }
}

/// The line below the chart: scale, and what the shapes mean.
pub(super) fn legend(scene: Scene<'_>, view: &View) -> String {
    let cell_km = view.cell_width_m() / 1000.0;
    let nm = [10.0, 20.0, 50.0, 100.0, 200.0, 500.0, 1000.0, 2000.0];
    let most = f64::from(view.columns) / 4.0;
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
    out.push("broken isobar: weak".to_owned());
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
