//! Highs and lows: letter, name, pressure, motion, past track, outlook.

use super::labels::Labels;
use super::raster::{Layer, Pattern, Pen, Raster};
use crate::desk::view::{View, system_at};
use crate::instant::Hour;
use crate::picture::Picture;
use crate::quantity::km_from_nm;
use crate::screen::{Role, number, strip};
use crate::sphere::Position;
use crate::systems::{Kind, OutlookPoint, System};

/// Hours of motion that the arrow spans.
const ARROW_H: f64 = 6.0;

/// A system as it stands at the hour shown.
struct Standing<'a> {
    system: &'a System,
    place: Position,
    pressure_hpa: Option<f64>,
}

fn standing(picture: &Picture, hour: Hour) -> Vec<Standing<'_>> {
    // In the past those that have ended since are there too.
    let ended = if hour < picture.valid { picture.ended.as_slice() } else { &[] };
    picture
        .systems
        .iter()
        .chain(ended)
        .filter_map(|system| {
            let place = system_at(system, hour, picture.valid)?;
            let pressure_hpa = if hour == picture.valid {
                Some(system.pressure_hpa.value)
            } else {
                system.track.iter().find(|point| point.hour == hour).map(|p| p.pressure_hpa)
            };
            Some(Standing { system, place, pressure_hpa })
        })
        .collect()
}

const fn dress(kind: Kind) -> (Layer, Role) {
    match kind {
        Kind::Low => (Layer::Low, Role::Low),
        Kind::High => (Layer::High, Role::High),
    }
}

fn cell(dot: (f64, f64)) -> (i64, i64) {
    (crate::quantity::whole_below(dot.0 / 2.0), crate::quantity::whole_below(dot.1 / 4.0))
}

/// Letters, names and pressures. They come before every other word on the chart.
pub(super) fn words(view: &View, picture: &Picture, hour: Hour, labels: &mut Labels) {
    let all = standing(picture, hour);
    for standing in &all {
        let (_, role) = dress(standing.system.kind);
        let letter = if standing.system.kind == Kind::Low { 'L' } else { 'H' };
        let (column, row) = cell(view.dot_of(standing.place));
        // The letter stands exactly on the centre; a short name of our own begins with it.
        let name = &standing.system.name;
        let weak = if strip::is_weak(standing.system) { "?" } else { "" };
        let full = if name.starts_with(letter) && name.chars().count() <= 4 {
            format!("{name}{weak}")
        } else {
            format!("{letter} {name}{weak}")
        };
        if !labels.place(column, row, &full, role, 0) {
            labels.place(column, row, &letter.to_string(), role, 1);
        }
        let Some(pressure) = standing.pressure_hpa else { continue };
        let text = number::fixed(pressure, 0);
        let wide = i64::try_from(full.chars().count()).unwrap_or(2);
        let tries = [(0, 1), (-1, 1), (0, -1), (wide + 1, 0), (-5, 0), (1, 1)];
        for (across, down) in tries {
            if labels.place(column + across, row + down, &text, role, 0) {
                break;
            }
        }
    }
}

/// Motion arrows at the newest hour: where a system will be in six hours if it carries on so.
pub(super) fn motion(view: &View, picture: &Picture, hour: Hour, raster: &mut Raster) {
    if hour != picture.valid {
        return;
    }
    for system in &picture.systems {
        let (Some(course), Some(speed)) = (system.course_deg, system.speed_kt) else { continue };
        let way_km = km_from_nm(speed.value * ARROW_H);
        let from = view.dot_of(system.position);
        let to = view.dot_of(system.position.destination(course, way_km));
        arrow(raster, dress(system.kind).0, from, to, 5.0);
    }
}

/// An arrow, the first `free` dots left out.
pub(super) fn arrow(
    raster: &mut Raster,
    layer: Layer,
    from: (f64, f64),
    to: (f64, f64),
    free: f64,
) {
    let (dx, dy) = (to.0 - from.0, to.1 - from.1);
    let length = dx.hypot(dy);
    if length.is_nan() || length <= free + 2.0 || length > 400.0 {
        return;
    }
    let (ux, uy) = (dx / length, dy / length);
    let start = (from.0 + ux * free, from.1 + uy * free);
    let mut pen = Pen::new(layer, Pattern::Solid);
    raster.line(&mut pen, start, to);
    let head = (length / 3.0).clamp(2.0, 4.0);
    for side in [-0.6_f64, 0.6] {
        let (sine, cosine) = side.sin_cos();
        let barb =
            (to.0 - head * (ux * cosine - uy * sine), to.1 - head * (ux * sine + uy * cosine));
        raster.line(&mut pen, to, barb);
    }
}

/// Past tracks up to the hour, with a mark every six hours.
pub(super) fn tracks(
    view: &View,
    picture: &Picture,
    hour: Hour,
    raster: &mut Raster,
    labels: &mut Labels,
) {
    for system in &picture.systems {
        let mut pen = Pen::new(Layer::Track, Pattern::Dashed);
        let mut before = None;
        for point in system.track.iter().filter(|point| point.hour <= hour) {
            let dot = view.dot_of(point.position);
            if let Some(from) = before {
                pen.pattern = if point.observed { Pattern::Solid } else { Pattern::Dashed };
                raster.line(&mut pen, from, dot);
            }
            before = Some(dot);
            if point.hour.unix_h().rem_euclid(6) == 0 {
                let (column, row) = cell(dot);
                let mark = if point.observed { "o" } else { "?" };
                labels.place(column, row, mark, Role::Track, 0);
            }
        }
    }
}

/// Outlooks: the way ahead and one-sigma ellipses at 12 and 24 hours, or at the hour looked at.
pub(super) fn outlooks(
    view: &View,
    picture: &Picture,
    hour: Hour,
    raster: &mut Raster,
    labels: &mut Labels,
) {
    if hour < picture.valid {
        return;
    }
    let lead_h = hour.unix_h() - picture.valid.unix_h();
    for system in &picture.systems {
        let mut pen = Pen::new(Layer::Outlook, Pattern::Dashed);
        let mut from = view.dot_of(system.position);
        for point in &system.outlook {
            let to = view.dot_of(point.position);
            raster.line(&mut pen, from, to);
            from = to;
            let wanted = if lead_h > 0 { point.lead_h == lead_h } else { point.lead_h % 12 == 0 };
            if wanted {
                let right = ellipse(view, point, raster);
                let (column, row) = cell(right);
                let text = format!("+{}h", point.lead_h);
                labels.place(column + 1, row, &text, Role::Outlook, 0);
            }
        }
    }
}

/// Draws an error ellipse; returns its rightmost dot.
fn ellipse(view: &View, point: &OutlookPoint, raster: &mut Raster) -> (f64, f64) {
    let mut pen = Pen::new(Layer::Outlook, Pattern::Dashed);
    let mut right = (f64::NEG_INFINITY, 0.0);
    let mut before = None;
    for k in 0..=36 {
        let angle = f64::from(k) * std::f64::consts::TAU / 36.0;
        let (sine, cosine) = angle.sin_cos();
        let (along_km, across_km) = (point.major_km * cosine, point.minor_km * sine);
        let turn = across_km.atan2(along_km).to_degrees();
        let place = point.position.destination(point.axis_deg + turn, along_km.hypot(across_km));
        let dot = view.dot_of(place);
        if let Some(from) = before {
            raster.line(&mut pen, from, dot);
        }
        if dot.0 > right.0 {
            right = dot;
        }
        before = Some(dot);
    }
    right
}
