//! Which rows a list shows, in which order, and what each is about.

use std::cmp::Ordering;

use super::{Desk, List, Pane};
use crate::alert::Alert;
use crate::picture::{ArrivalLine, Picture};
use crate::sphere::Position;
use crate::systems::System;
use crate::tendency::TendencyRow;
use crate::winds::{ConvergenceArea, Method, StationWind};

/// The names of a pane's orders; the first is the one it starts with.
pub const fn orders(pane: Pane) -> &'static [&'static str] {
    match pane {
        Pane::Chart => &[],
        Pane::Systems => &["lows first", "3 h change", "speed", "name"],
        Pane::Winds => &["as listed", "disagreement", "observed speed", "expected speed", "name"],
        Pane::Convergence => &["strongest", "strengthening", "area", "method"],
        Pane::Tendencies => &["fastest falling", "24 h change", "pressure", "time", "name"],
        Pane::Alerts => &["most urgent", "newest", "subject"],
        Pane::Arrivals => &["newest", "worst", "latest", "name"],
    }
}

/// Indices into the Picture's list of the rows that a pane shows, in their order.
pub fn shown(picture: &Picture, desk: &Desk, pane: Pane) -> Vec<usize> {
    let list = desk.list(pane);
    match pane {
        Pane::Chart => Vec::new(),
        Pane::Systems => ordered(list, &picture.systems, system_text, |order, a, b| match order {
            1 => falling(
                a.change_3h_hpa.map(|change| change.value),
                b.change_3h_hpa.map(|change| change.value),
            ),
            2 => largest(a.speed_kt.map(|speed| speed.value), b.speed_kt.map(|speed| speed.value)),
            3 => a.name.cmp(&b.name),
            _ => Ordering::Equal,
        }),
        Pane::Winds => ordered(list, &picture.winds, wind_text, |order, a, b| match order {
            1 => {
                largest(a.speed_difference_m_s.map(f64::abs), b.speed_difference_m_s.map(f64::abs))
            }
            2 => largest(
                a.observed.map(|wind| wind.speed_m_s),
                b.observed.map(|wind| wind.speed_m_s),
            ),
            3 => largest(
                a.winds.surface.map(|wind| wind.speed_m_s),
                b.winds.surface.map(|wind| wind.speed_m_s),
            ),
            4 => a.station.cmp(&b.station),
            _ => Ordering::Equal,
        }),
        Pane::Convergence => {
            ordered(list, &picture.convergence, convergence_text, |order, a, b| match order {
                1 => falling(a.trend_per_s, b.trend_per_s),
                2 => largest(Some(a.area_km2), Some(b.area_km2)),
                3 => a.method.cmp(&b.method),
                _ => Ordering::Equal,
            })
        }
        Pane::Tendencies => {
            ordered(list, &picture.tendencies, tendency_text, |order, a, b| match order {
                1 => falling(a.change_24h_hpa, b.change_24h_hpa),
                2 => falling(a.pressure_msl_hpa, b.pressure_msl_hpa),
                3 => b.time.cmp(&a.time),
                4 => a.station.cmp(&b.station),
                _ => Ordering::Equal,
            })
        }
        Pane::Alerts => ordered(list, &picture.alerts, alert_text, |order, a, b| match order {
            1 => b.since.cmp(&a.since),
            2 => a.subject.cmp(&b.subject),
            _ => Ordering::Equal,
        }),
        Pane::Arrivals => {
            ordered(list, &picture.arrivals.lines, arrival_text, |order, a, b| match order {
                1 => b.verdict.cmp(&a.verdict),
                2 => b.late_minutes.cmp(&a.late_minutes),
                3 => a.who.cmp(&b.who),
                _ => Ordering::Equal,
            })
        }
    }
}

fn ordered<T>(
    list: &List,
    items: &[T],
    text: impl Fn(&T) -> String,
    compare: impl Fn(usize, &T, &T) -> Ordering,
) -> Vec<usize> {
    let wanted = list.filter.to_lowercase();
    let mut rows: Vec<usize> = items
        .iter()
        .enumerate()
        .filter(|(_, item)| wanted.is_empty() || text(item).to_lowercase().contains(&wanted))
        .map(|(index, _)| index)
        .collect();
    // A stable sort: equals keep the Picture's order.
    rows.sort_by(|a, b| compare(list.order, &items[*a], &items[*b]));
    if list.reversed {
        rows.reverse();
    }
    rows
}

/// Most negative first; unknown last.
fn falling(a: Option<f64>, b: Option<f64>) -> Ordering {
    match (a, b) {
        (Some(a), Some(b)) => a.total_cmp(&b),
        (Some(_), None) => Ordering::Less,
        (None, Some(_)) => Ordering::Greater,
        (None, None) => Ordering::Equal,
    }
}

/// Largest first; unknown last.
fn largest(a: Option<f64>, b: Option<f64>) -> Ordering {
    falling(a.map(|value| -value), b.map(|value| -value))
}

fn system_text(system: &System) -> String {
    format!("{} {:?} {:?}", system.name, system.kind, system.phase)
}

fn wind_text(wind: &StationWind) -> String {
    let word = wind.platform.map_or("watch point", crate::report::Platform::word);
    format!("{} {word} {}", wind.station, wind.explanation)
}

/// The word for a method.
pub const fn method_word(method: Method) -> &'static str {
    match method {
        Method::Observed => "observed wind",
        Method::Friction => "friction",
        Method::Isallobaric => "isallobaric",
    }
}

fn convergence_text(area: &ConvergenceArea) -> String {
    format!("{} {}", method_word(area.method), area.place)
}

fn tendency_text(row: &TendencyRow) -> String {
    let name = row.name.as_deref().unwrap_or_default();
    format!("{} {name} {} {}", row.station, row.platform.word(), row.words)
}

fn alert_text(alert: &Alert) -> String {
    format!("{} {} {:?}", alert.subject, alert.message, alert.urgency)
}

fn arrival_text(line: &ArrivalLine) -> String {
    format!("{} {} {} {} {:?}", line.who, line.form, line.text, line.file, line.verdict)
}

/// What a row is about: stays the same while rows come and go.
pub fn about(picture: &Picture, pane: Pane, index: usize) -> Option<String> {
    match pane {
        Pane::Chart => None,
        Pane::Systems => picture.systems.get(index).map(|system| system.name.clone()),
        Pane::Winds => picture.winds.get(index).map(|wind| wind.station.clone()),
        Pane::Convergence => picture
            .convergence
            .get(index)
            .map(|area| format!("{} {}", method_word(area.method), area.place)),
        Pane::Tendencies => picture
            .tendencies
            .get(index)
            .map(|row| format!("{} {}", row.platform.word(), row.station)),
        Pane::Alerts => picture.alerts.get(index).map(|alert| alert.key.clone()),
        Pane::Arrivals => picture
            .arrivals
            .lines
            .get(index)
            .map(|line| format!("{} {} {} {}", line.received, line.who, line.file, line.text)),
    }
}

/// Where a row's subject is, where it has a place.
pub fn place(picture: &Picture, pane: Pane, index: usize) -> Option<Position> {
    match pane {
        Pane::Chart | Pane::Arrivals => None,
        Pane::Systems => picture.systems.get(index).map(|system| system.position),
        Pane::Winds => picture.winds.get(index).map(|wind| wind.position),
        Pane::Convergence => picture.convergence.get(index).map(|area| area.position),
        Pane::Tendencies => picture.tendencies.get(index).map(|row| row.position),
        Pane::Alerts => picture.alerts.get(index).and_then(|alert| alert.position),
    }
}
