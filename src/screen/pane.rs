//! The lists: one file for each, all drawn as tables with a detail of the selected row below.

use std::fmt::Write as _;

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::number::Item;
use super::table::{self, Column};
use super::theme::Role;
use super::{Scene, text};
use crate::desk::{Pane, rows};

mod alerts;
mod arrivals;
mod convergence;
mod systems;
mod tendencies;
mod winds;

pub(super) use systems::phase_word;

/// Rows from which a pane has room for the detail of its selected row.
const DETAIL_FROM: u16 = 11;

/// What a list shows.
struct Sheet {
    columns: &'static [Column],
    /// Units and the like, for the title.
    units: &'static str,
    /// What is said where there are no rows.
    nothing: &'static str,
}

/// The title line of a pane.
pub(super) fn title(scene: Scene<'_>, pane: Pane, words: &str, area: Rect, buf: &mut Buffer) {
    let front = scene.desk.focus == pane;
    let style = scene.look.style(if front { Role::Front } else { Role::Title });
    text::fill(buf, area, style);
    let mark = if front { ">" } else { " " };
    let line = format!("{mark}{}  {words}", pane.word());
    text::put(buf, area.x, area.y, area.width, line.trim_end(), style);
}

/// Draws a list; returns the words for its title.
pub(super) fn draw(scene: Scene<'_>, pane: Pane, area: Rect, buf: &mut Buffer) -> String {
    let shown = rows::shown(scene.picture, scene.desk, pane);
    let list = scene.desk.list(pane);
    let front = scene.desk.focus == pane;
    let sheet = sheet(pane);
    let selected = list.selected.min(shown.len().saturating_sub(1));
    // The pane in front tells about its selected row; another one where it has rows to spare.
    let spare = usize::from(area.height).saturating_sub(shown.len() + 1);
    let detail = if area.height >= DETAIL_FROM && (front || spare > 4) {
        shown.get(selected).map_or_else(Vec::new, |index| {
            detail(scene, pane, *index, usize::from(area.width.saturating_sub(2)))
        })
    } else {
        Vec::new()
    };
    let most = area.height * 2 / 5;
    let most = most.max(u16::try_from(spare.saturating_sub(1)).unwrap_or(0));
    let detail_rows = u16::try_from(detail.len()).unwrap_or(0).min(most);
    // A line between the rows and the detail.
    let below = if detail_rows > 0 { detail_rows + 1 } else { 0 };
    let above = above(scene, pane, area.width);
    let above_rows = u16::try_from(above.len()).unwrap_or(0).min(area.height / 3);
    for (y, item) in (area.y..area.y + above_rows).zip(&above) {
        text::put(
            buf,
            area.x + 1,
            y,
            area.width.saturating_sub(1),
            &item.text,
            scene.look.style(item.role),
        );
    }
    let body = Rect {
        y: area.y + above_rows,
        height: area.height.saturating_sub(below + above_rows),
        ..area
    };
    if shown.is_empty() {
        let words =
            if list.filter.is_empty() { sheet.nothing } else { "no row holds the filter's text" };
        let style = scene.look.style(Role::Secondary);
        text::put(buf, body.x + 1, body.y, body.width.saturating_sub(1), words, style);
    } else {
        table::draw(
            scene.look,
            sheet.columns,
            table::Rows {
                count: shown.len(),
                selected: front.then_some(selected),
                page_of: if front { selected } else { 0 },
            },
            body,
            buf,
            |k| shown.get(k).map_or_else(Vec::new, |index| row(scene, pane, *index)),
        );
    }
    for (y, line) in (area.bottom().saturating_sub(detail_rows)..area.bottom()).zip(&detail) {
        let width = area.width.saturating_sub(1);
        // Lines that do not fit end with the mark of what is cut.
        let last = y + 1 == area.bottom() && usize::from(detail_rows) < detail.len();
        let cut;
        let line = if last {
            cut = format!("{line} ~");
            &cut
        } else {
            line
        };
        text::put(buf, area.x + 1, y, width, line, scene.look.style(Role::Secondary));
    }
    let height = usize::from(body.height.saturating_sub(1)).max(1);
    let (first, _) = table::page(if front { selected } else { 0 }, height);
    words(scene, pane, shown.len(), first, height)
}

/// The words of the title: how many rows, which are seen, their order, the filter.
fn words(scene: Scene<'_>, pane: Pane, count: usize, first: usize, height: usize) -> String {
    let list = scene.desk.list(pane);
    let mut out = if count > height {
        format!("{}-{} of {count}", first + 1, (first + height).min(count))
    } else {
        format!("{count}")
    };
    let units = sheet(pane).units;
    if !units.is_empty() {
        let _ = write!(out, "  {units}");
    }
    let orders = rows::orders(pane);
    if list.order > 0 || list.reversed {
        let order = orders.get(list.order).copied().unwrap_or_default();
        let turned = if list.reversed { ", turned round" } else { "" };
        let _ = write!(out, "  by {order}{turned}");
    }
    if !list.filter.is_empty() {
        let _ = write!(out, "  only with \"{}\"", list.filter);
    }
    out
}

fn sheet(pane: Pane) -> Sheet {
    match pane {
        Pane::Chart | Pane::Systems => systems::SHEET,
        Pane::Winds => winds::SHEET,
        Pane::Convergence => convergence::SHEET,
        Pane::Tendencies => tendencies::SHEET,
        Pane::Alerts => alerts::SHEET,
        Pane::Arrivals => arrivals::SHEET,
    }
}

fn row(scene: Scene<'_>, pane: Pane, index: usize) -> Vec<Item> {
    let found = match pane {
        Pane::Chart => None,
        Pane::Systems => scene.picture.systems.get(index).map(|system| systems::row(scene, system)),
        Pane::Winds => scene.picture.winds.get(index).map(winds::row),
        Pane::Convergence => scene.picture.convergence.get(index).map(convergence::row),
        Pane::Tendencies => {
            scene.picture.tendencies.get(index).map(|row| tendencies::row(scene, row))
        }
        Pane::Alerts => scene.picture.alerts.get(index).map(alerts::row),
        Pane::Arrivals => scene.picture.arrivals.lines.get(index).map(arrivals::row),
    };
    found.unwrap_or_default()
}

/// Lines above the table.
fn above(scene: Scene<'_>, pane: Pane, width: u16) -> Vec<Item> {
    match pane {
        Pane::Arrivals => arrivals::health(scene, width),
        _ => Vec::new(),
    }
}

/// Everything about one row, in lines.
fn detail(scene: Scene<'_>, pane: Pane, index: usize, width: usize) -> Vec<String> {
    match pane {
        Pane::Chart => Vec::new(),
        Pane::Systems => scene
            .picture
            .systems
            .get(index)
            .map_or_else(Vec::new, |system| systems::detail(system, width)),
        Pane::Winds => {
            let text = scene.picture.winds.get(index).map(winds::detail).unwrap_or_default();
            text::lines(&text, width)
        }
        Pane::Convergence => {
            let text =
                scene.picture.convergence.get(index).map(convergence::detail).unwrap_or_default();
            text::lines(&text, width)
        }
        Pane::Tendencies => scene
            .picture
            .tendencies
            .get(index)
            .map_or_else(Vec::new, |row| tendencies::detail(scene, row, width)),
        Pane::Alerts => {
            let text = scene.picture.alerts.get(index).map(alerts::detail).unwrap_or_default();
            text::lines(&text, width)
        }
        Pane::Arrivals => {
            let text =
                scene.picture.arrivals.lines.get(index).map(arrivals::detail).unwrap_or_default();
            text::lines(&text, width)
        }
    }
}
