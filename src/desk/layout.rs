//! Where everything stands on a terminal of a given size.
//!
//! One pane and the summary strip on a small terminal, the chart over a list on a middling one, the
//! chart with several lists on a large one, everything on the largest.

use super::Pane;

/// Fewest columns that anything is shown in.
pub const COLUMNS_MIN: u16 = 40;
/// Fewest rows.
pub const ROWS_MIN: u16 = 12;

/// A rectangle of cells.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct Area {
    /// First column.
    pub x: u16,
    /// First row.
    pub y: u16,
    /// Columns.
    pub width: u16,
    /// Rows.
    pub height: u16,
}

/// Where everything stands.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Layout {
    /// The summary strip.
    pub summary: Area,
    /// The panes shown, title lines included.
    pub panes: Vec<(Pane, Area)>,
    /// The line of keys.
    pub keys: Area,
}

impl Layout {
    /// Where a pane's content stands, below its title; `None` where the pane is not shown.
    pub fn content(&self, pane: Pane) -> Option<Area> {
        self.panes.iter().find(|(shown, _)| *shown == pane).map(|(_, area)| below_title(*area))
    }
}

/// A pane's area without its title line.
pub fn below_title(area: Area) -> Area {
    Area { y: area.y.saturating_add(1), height: area.height.saturating_sub(1), ..area }
}

/// Where everything stands; `None` where the terminal is too small for anything.
pub fn layout(
    columns: u16,
    rows: u16,
    focus: Pane,
    list_focus: Pane,
    alone: bool,
) -> Option<Layout> {
    if columns < COLUMNS_MIN || rows < ROWS_MIN {
        return None;
    }
    // A narrow terminal needs two lines for the summary; a very low one has room for one.
    let summary_rows = if rows < 16 || columns >= 150 { 1 } else { 2 };
    let summary = Area { x: 0, y: 0, width: columns, height: summary_rows };
    let keys = Area { x: 0, y: rows - 1, width: columns, height: 1 };
    let body = Area { x: 0, y: summary_rows, width: columns, height: rows - summary_rows - 1 };
    let list = if focus == Pane::Chart { list_focus } else { focus };
    let panes = if alone || columns < 100 || rows < 30 {
        vec![(focus, body)]
    } else if columns < 150 || rows < 40 {
        stacked(body, list)
    } else if columns < 190 || rows < 56 {
        several(body, list)
    } else {
        everything(body)
    };
    Some(Layout { summary, panes, keys })
}

/// The chart over one list.
fn stacked(body: Area, list: Pane) -> Vec<(Pane, Area)> {
    let (top, bottom) = split_rows(body, body.height * 3 / 5);
    vec![(Pane::Chart, top), (list, bottom)]
}

/// The chart with Systems and Alerts beside it, and Tendencies and one more list below.
fn several(body: Area, list: Pane) -> Vec<(Pane, Area)> {
    let (top, bottom) = split_rows(body, body.height * 31 / 50);
    let (chart, side) = split_columns(top, top.width * 29 / 50);
    let (systems, alerts) = split_rows(side, side.height / 2);
    let (left, right) = split_columns(bottom, bottom.width / 2);
    let other = match list {
        Pane::Winds | Pane::Convergence | Pane::Arrivals => list,
        _ => Pane::Winds,
    };
    vec![
        (Pane::Chart, chart),
        (Pane::Systems, systems),
        (Pane::Alerts, alerts),
        (Pane::Tendencies, left),
        (other, right),
    ]
}

/// Every pane.
fn everything(body: Area) -> Vec<(Pane, Area)> {
    let (left, right) = split_columns(body, body.width * 56 / 100);
    let (chart, tendencies) = split_rows(left, left.height * 66 / 100);
    let (systems, rest) = split_rows(right, right.height * 26 / 100);
    let (alerts, rest) = split_rows(rest, right.height * 17 / 100);
    let (winds, rest) = split_rows(rest, right.height * 22 / 100);
    let (convergence, arrivals) = split_rows(rest, right.height * 15 / 100);
    vec![
        (Pane::Chart, chart),
        (Pane::Systems, systems),
        (Pane::Alerts, alerts),
        (Pane::Winds, winds),
        (Pane::Convergence, convergence),
        (Pane::Arrivals, arrivals),
        (Pane::Tendencies, tendencies),
    ]
}

fn split_rows(area: Area, first: u16) -> (Area, Area) {
    let first = first.min(area.height);
    (
        Area { height: first, ..area },
        Area { y: area.y + first, height: area.height - first, ..area },
    )
}

/// Side by side, with a free column between.
fn split_columns(area: Area, first: u16) -> (Area, Area) {
    let first = first.min(area.width.saturating_sub(1));
    (
        Area { width: first, ..area },
        Area { x: area.x + first + 1, width: area.width - first - 1, ..area },
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn at_every_size_and_pane_the_areas_stay_inside_and_apart_and_the_pane_in_front_is_shown() {
        for columns in (0..=320).step_by(7) {
            for rows in 0..=110 {
                for pane in Pane::ALL {
                    let list = if pane == Pane::Chart { Pane::Arrivals } else { pane };
                    for alone in [false, true] {
                        let Some(found) = layout(columns, rows, pane, list, alone) else {
                            assert!(columns < COLUMNS_MIN || rows < ROWS_MIN);
                            continue;
                        };
                        assert!(found.content(pane).is_some(), "{pane:?} {columns}x{rows}");
                        let mut areas: Vec<Area> =
                            found.panes.iter().map(|(_, area)| *area).collect();
                        areas.extend([found.summary, found.keys]);
                        for (k, a) in areas.iter().enumerate() {
                            assert!(a.x + a.width <= columns && a.y + a.height <= rows);
                            assert!(a.height >= 1 && a.width >= 20, "{columns}x{rows} {found:?}");
                            for b in &areas[k + 1..] {
                                let apart = a.x + a.width <= b.x
                                    || b.x + b.width <= a.x
                                    || a.y + a.height <= b.y
                                    || b.y + b.height <= a.y;
                                assert!(apart, "{columns}x{rows}: {a:?} {b:?}");
                            }
                        }
                    }
                }
            }
        }
    }

    #[test]
    fn the_largest_terminals_show_every_pane() {
        let found = layout(200, 60, Pane::Chart, Pane::Systems, false).expect("it fits");
        assert_eq!(found.panes.len(), Pane::ALL.len());
    }
}
