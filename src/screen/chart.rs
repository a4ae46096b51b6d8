//! The chart: isobars, coast, centres, tracks, outlooks, overlays, the cursor and its read-out.
//!
//! Everything is drawn into a raster of dots (`raster`) and a set of words that never overlap
//! (`labels`), in the order in which things matter; then both are written into the buffer.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::{Scene, number, text};
use crate::desk::view::View;
use crate::screen::theme::Role;

mod centres;
mod coast;
mod fields;
mod isolines;
mod labels;
mod raster;
mod readout;
mod reports;

use labels::Labels;
use raster::Raster;

/// Draws the chart; returns the words for its title.
pub(super) fn draw(scene: Scene<'_>, area: Rect, buf: &mut Buffer) -> String {
    let map = Rect { height: area.height.saturating_sub(1), ..area };
    let picture = scene.picture;
    let chart = &scene.desk.chart;
    let view = View::of(chart, picture, map.width, map.height);
    let hour = chart.hour_shown(picture);
    let mut raster = Raster::new(map.width, map.height);
    let mut labels = Labels::new(map.width, map.height);
    let layers = chart.layers;

    // Words in the order in which they matter: the cursor's cell, centres, own places, the rest.
    let cursor = chart.cursor.and_then(|place| view.cell_of(place));
    if let Some((column, row)) = cursor {
        labels.place(i64::from(column), i64::from(row), "+", Role::Cursor, 0);
    }
    centres::words(&view, picture, hour, &mut labels);
    reports::places(&view, scene.settings, &mut labels);

    coast::draw(&view, &mut raster);
    let analysis = picture.hour(hour);
    let field = picture.wind_field(hour);
    let mut interval = None;
    let mut lines = None;
    if let Some(analysis) = analysis {
        if layers.error {
            fields::error(&view, analysis, &mut raster);
        }
        let (drawn, chosen) = isolines::isobars(&view, analysis, &mut raster);
        interval = Some(chosen);
        lines = Some(drawn);
    }
    if let (true, Some(field)) = (layers.convergence, field) {
        fields::convergence(&view, field, &mut raster);
    }
    if layers.tracks {
        centres::tracks(&view, picture, hour, &mut raster, &mut labels);
    }
    if layers.outlook {
        centres::outlooks(&view, picture, hour, &mut raster, &mut labels);
    }
    centres::motion(&view, picture, hour, &mut raster);
    if let (true, Some(field)) = (layers.isallobars, field) {
        let changes = isolines::isallobars(&view, field, &mut raster);
        isolines::label(&changes, &mut labels);
    }
    if layers.reports {
        reports::draw(&view, picture, hour, &mut raster, &mut labels);
    }
    if let Some(lines) = &lines {
        isolines::label(lines, &mut labels);
    }
    if let (true, Some(field)) = (layers.wind, field) {
        fields::wind(&view, field, scene.look.glyphs, &mut raster, &mut labels);
    }
    if layers.graticule {
        fields::graticule(&view, &mut raster, &mut labels);
    }

    raster.blit(map, scene.look, buf);
    labels.blit(map, scene.look, buf);
    below(scene, &view, area, cursor, buf);
    title(scene, interval)
}

/// The words of the title: the hour and what it is, the interval.
fn title(scene: Scene<'_>, interval: Option<(f64, f64)>) -> String {
    let picture = scene.picture;
    let chart = &scene.desk.chart;
    let hour = chart.hour_shown(picture);
    let away_h = hour.unix_h() - picture.valid.unix_h();
    let time = hour.instant().day_time();
    let mut out = match away_h {
        0 => format!("{time} newest"),
        1.. => format!("{time} EXTRAPOLATION +{away_h} h, not a forecast"),
        _ => format!("{time} PAST, {} h before the newest", -away_h),
    };
    match (interval, away_h) {
        (Some((interval, bold)), _) => {
            out += "  isobars ";
            out += &number::fixed(interval, 0);
            out += " hPa, bold ";
            out += &number::fixed(bold, 0);
        }
        (None, ..=0) => out += "  no analysis of this hour",
        (None, _) => {}
    }
    if let Some(name) = &chart.follow {
        out += "  following ";
        out += name;
    }
    out
}

/// The read-out where the cursor is on, over the last lines of the chart; else the legend.
fn below(scene: Scene<'_>, view: &View, area: Rect, cursor: Option<(u16, u16)>, buf: &mut Buffer) {
    if area.height == 0 {
        return;
    }
    let look = scene.look;
    let Some(place) = scene.desk.chart.cursor else {
        let legend = readout::legend(scene, view);
        let style = look.style(Role::Secondary);
        text::put(buf, area.x, area.bottom() - 1, area.width, &legend, style);
        return;
    };
    let mut lines: Vec<String> = Vec::new();
    for piece in readout::at(scene, place) {
        let room = usize::from(area.width.saturating_sub(1));
        match lines.last_mut() {
            Some(line) if line.chars().count() + 2 + piece.chars().count() <= room => {
                line.push_str("  ");
                line.push_str(&piece);
            }
            _ => lines.push(piece),
        }
    }
    let most = area.height.saturating_sub(2).max(1);
    let count = u16::try_from(lines.len()).unwrap_or(most).min(most);
    let bottom = area.bottom() - count;
    // Where the cursor stands behind the read-out, the read-out stands above.
    let hidden = cursor.is_some_and(|(_, row)| area.y + row >= bottom);
    let first = if hidden { area.y } else { bottom };
    for (y, line) in (first..first + count).zip(&lines) {
        text::fill(buf, Rect { y, height: 1, ..area }, look.style(Role::Summary));
        text::put(buf, area.x, y, area.width, line, look.style(Role::Summary));
    }
    if hidden {
        let legend = readout::legend(scene, view);
        text::put(buf, area.x, area.bottom() - 1, area.width, &legend, look.style(Role::Secondary));
    }
}

#[cfg(test)]
mod tests;
