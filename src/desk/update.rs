//! What an event does to the desk.

use super::key::{Code, Key};
use super::view::{View, system_at};
use super::{Desk, Effect, Event, Input, Pane, rows};
use crate::obs::Verdict;
use crate::picture::Picture;
use crate::sphere::Position;

/// Longest text that can be typed.
const TYPED_MAX: usize = 40;
/// Hours of outlook that can be stepped into.
const OUTLOOK_H: i64 = 24;

pub(super) fn update(desk: &mut Desk, event: Event, picture: Option<&Picture>) -> Vec<Effect> {
    match event {
        Event::Key(key) => {
            desk.notice = None;
            pressed(desk, key, picture)
        }
        Event::Resize { columns, rows } => {
            (desk.columns, desk.rows) = (columns, rows);
            vec![Effect::Repaint]
        }
        Event::Picture => {
            keep_selections(desk, picture);
            vec![Effect::Draw]
        }
        Event::Tick(now) => {
            let minute = |time: crate::instant::Instant| time.unix_s().div_euclid(60);
            let changed = desk.now.map(minute) != Some(minute(now));
            desk.now = Some(now);
            if changed { vec![Effect::Draw] } else { Vec::new() }
        }
        Event::Notice(text) => {
            desk.notice = Some(text);
            vec![Effect::Draw]
        }
    }
}

/// After a new Picture: every selection stays with what it is about.
fn keep_selections(desk: &mut Desk, picture: Option<&Picture>) {
    let Some(picture) = picture else { return };
    for pane in Pane::ALL {
        let rows = rows::shown(picture, desk, pane);
        let list = &desk.lists[pane.index()];
        // The top of a list is a place of its own: whoever has not moved sees what comes first.
        let found = list.about.as_ref().filter(|_| list.selected > 0).and_then(|about| {
            rows.iter().position(|index| rows::about(picture, pane, *index).as_ref() == Some(about))
        });
        let selected = found.unwrap_or(list.selected).min(rows.len().saturating_sub(1));
        select(desk, picture, pane, selected);
    }
    if let Some(hour) = desk.chart.hour {
        let oldest = picture.hours.first().map_or(picture.valid, |analysis| analysis.hour);
        if hour < oldest {
            desk.chart.hour = Some(oldest);
        }
    }
}

fn select(desk: &mut Desk, picture: &Picture, pane: Pane, selected: usize) {
    let rows = rows::shown(picture, desk, pane);
    let selected = selected.min(rows.len().saturating_sub(1));
    let list = &mut desk.lists[pane.index()];
    list.selected = selected;
    list.about = rows.get(selected).and_then(|index| rows::about(picture, pane, *index));
}

fn pressed(desk: &mut Desk, key: Key, picture: Option<&Picture>) -> Vec<Effect> {
    if key.control {
        match key.code {
            Code::Char('c') => return vec![Effect::Quit],
            Code::Char('l') => return vec![Effect::Repaint],
            Code::Char('z') => return vec![Effect::Suspend],
            _ => {}
        }
    }
    if desk.input.is_some() {
        return typed(desk, key, picture);
    }
    if desk.help.is_some() {
        return in_help(desk, key);
    }
    if let Some(effects) = everywhere(desk, key, picture) {
        return effects;
    }
    let Some(picture) = picture else { return Vec::new() };
    if desk.focus == Pane::Chart {
        on_chart(desk, key, picture)
    } else {
        in_list(desk, key, picture)
    }
}

fn in_help(desk: &mut Desk, key: Key) -> Vec<Effect> {
    let line = desk.help.unwrap_or(0);
    let page = usize::from(desk.rows.saturating_sub(6)).max(1);
    desk.help = match key.code {
        Code::Escape | Code::Char('?' | 'q') | Code::Enter => None,
        Code::Char('j') | Code::Down => Some(line + 1),
        Code::Char('k') | Code::Up => Some(line.saturating_sub(1)),
        Code::PageDown | Code::Char(' ') => Some(line + page),
        Code::PageUp => Some(line.saturating_sub(page)),
        Code::Char('g') | Code::Home => Some(0),
        _ => Some(line),
    };
    // The help is short: nobody needs to scroll into the void.
    desk.help = desk.help.map(|line| line.min(60));
    vec![Effect::Draw]
}

/// Keys that work in every pane; `None` for the others.
fn everywhere(desk: &mut Desk, key: Key, picture: Option<&Picture>) -> Option<Vec<Effect>> {
    if key.control {
        return None;
    }
    match key.code {
        Code::Char('q') => return Some(vec![Effect::Quit]),
        Code::Char('p') => return Some(vec![Effect::Export]),
        Code::Char('?') => desk.help = Some(0),
        Code::Char('z') => desk.alone = !desk.alone,
        Code::Tab => focus(desk, next_pane(desk, 1)),
        Code::BackTab => focus(desk, next_pane(desk, Pane::ALL.len() - 1)),
        Code::Char('.') => desk.chart.hour = None,
        Code::Char('[') => step_hour(desk, picture?, -1),
        Code::Char(']') => step_hour(desk, picture?, 1),
        Code::Escape => close(desk, picture),
        Code::Char(c) => {
            let by_letter = Pane::ALL.into_iter().find(|pane| pane.letter() == c);
            let by_number = c
                .to_digit(10)
                .and_then(|digit| usize::try_from(digit).ok()?.checked_sub(1))
                .and_then(|index| Pane::ALL.get(index).copied());
            focus(desk, by_letter.or(by_number)?);
        }
        _ => return None,
    }
    Some(vec![Effect::Draw])
}

fn next_pane(desk: &Desk, step: usize) -> Pane {
    desk.focus.stepped(step)
}

fn focus(desk: &mut Desk, pane: Pane) {
    desk.focus = pane;
    if pane != Pane::Chart {
        desk.list_focus = pane;
    }
}

/// Escape closes one thing at a time, the newest first, and never leaves the program.
fn close(desk: &mut Desk, picture: Option<&Picture>) {
    if desk.focus == Pane::Chart {
        if desk.chart.ruler.take().is_some() {
            return;
        }
        if desk.chart.cursor.take().is_some() {
            return;
        }
        if desk.chart.follow.take().is_some() {
            return;
        }
    } else if !desk.lists[desk.focus.index()].filter.is_empty() {
        desk.lists[desk.focus.index()].filter.clear();
        if let Some(picture) = picture {
            keep_selections(desk, Some(picture));
        }
        return;
    }
    desk.alone = false;
}

/// Steps through the window's hours and into the outlook.
fn step_hour(desk: &mut Desk, picture: &Picture, by: i64) {
    let oldest = picture.hours.first().map_or(picture.valid, |analysis| analysis.hour);
    let latest = picture.valid.plus(OUTLOOK_H);
    let hour = desk.chart.hour_shown(picture).plus(by).clamp(oldest.min(latest), latest);
    desk.chart.hour = (hour != picture.valid).then_some(hour);
}

fn view(desk: &Desk, picture: &Picture) -> Option<View> {
    let area = desk.layout()?.content(Pane::Chart)?;
    Some(View::of(&desk.chart, picture, area.width, area.height.saturating_sub(1)))
}

fn on_chart(desk: &mut Desk, key: Key, picture: &Picture) -> Vec<Effect> {
    let Some(view) = view(desk, picture) else { return Vec::new() };
    let layers = &mut desk.chart.layers;
    let toggle = match key.code {
        Code::Char('w') => Some(&mut layers.wind),
        Code::Char('i') => Some(&mut layers.isallobars),
        Code::Char('v') => Some(&mut layers.convergence),
        Code::Char('e') => Some(&mut layers.error),
        Code::Char('r') => Some(&mut layers.reports),
        Code::Char('t') => Some(&mut layers.tracks),
        Code::Char('o') => Some(&mut layers.outlook),
        Code::Char('u') => Some(&mut layers.graticule),
        _ => None,
    };
    if let Some(layer) = toggle {
        *layer = !*layer;
        return vec![Effect::Draw];
    }
    let far = i32::from(view.columns / 4).max(1);
    match key.code {
        Code::Char('h') | Code::Left => shift(desk, &view, -1, 0),
        Code::Char('l') | Code::Right => shift(desk, &view, 1, 0),
        Code::Char('k') | Code::Up => shift(desk, &view, 0, -1),
        Code::Char('j') | Code::Down => shift(desk, &view, 0, 1),
        Code::Char('H') | Code::Home => shift(desk, &view, -far, 0),
        Code::Char('L') | Code::End => shift(desk, &view, far, 0),
        Code::Char('K') | Code::PageUp => shift(desk, &view, 0, -far / 2),
        Code::Char('J') | Code::PageDown => shift(desk, &view, 0, far / 2),
        Code::Char('+' | '=') => zoom(desk, &view, 1),
        Code::Char('-' | '_') => zoom(desk, &view, -1),
        Code::Char('0') => {
            (desk.chart.centre, desk.chart.follow, desk.chart.zoom) = (None, None, 0);
        }
        Code::Char('x') => {
            desk.chart.cursor = match desk.chart.cursor {
                Some(_) => None,
                None => Some(view.middle()),
            };
        }
        Code::Char('m') => {
            desk.chart.ruler = match (desk.chart.ruler, desk.chart.cursor) {
                (None, Some(cursor)) => Some(cursor),
                _ => None,
            };
        }
        Code::Char('n') => next_system(desk, picture, &view, true),
        Code::Char('N') => next_system(desk, picture, &view, false),
        Code::Char('f') => {
            desk.chart.follow = match desk.chart.follow {
                Some(_) => None,
                None => nearest_system(desk, picture, view.middle()),
            };
        }
        _ => return Vec::new(),
    }
    vec![Effect::Draw]
}

/// Moves the cursor where it is on, else the chart, by eighths of the window.
fn shift(desk: &mut Desk, view: &View, columns: i32, rows: i32) {
    if let Some(cursor) = desk.chart.cursor {
        desk.chart.cursor = Some(view.neighbour(cursor, columns, rows));
        return;
    }
    desk.chart.follow = None;
    let across = f64::from(view.columns / 8).max(1.0) * f64::from(columns.signum()) * 2.0;
    let down = f64::from(view.rows / 8).max(1.0) * f64::from(rows.signum()) * 4.0;
    let times = if columns.abs() > 1 || rows.abs() > 1 { 3.0 } else { 1.0 };
    let place = view
        .place(f64::from(view.columns) + across * times, f64::from(view.rows) * 2.0 + down * times);
    desk.chart.centre = Some(place);
}

/// Zooms about the cursor where it is on, else about the middle.
fn zoom(desk: &mut Desk, view: &View, steps: i32) {
    if desk.chart.follow.is_none() {
        let keep = desk.chart.cursor.or(desk.chart.centre);
        if desk.chart.cursor.is_some() || desk.chart.centre.is_some() {
            desk.chart.centre = keep;
        } else if steps > 0 {
            desk.chart.centre = Some(view.middle());
        }
    }
    desk.chart.zoom_by(steps);
}

/// Systems that can be shown at the hour, west to east of nothing in particular: in the Picture's
/// order, with their places.
fn systems_shown(desk: &Desk, picture: &Picture) -> Vec<(String, Position)> {
    let hour = desk.chart.hour_shown(picture);
    picture
        .systems
        .iter()
        .filter_map(|system| Some((system.name.clone(), system_at(system, hour, picture.valid)?)))
        .collect()
}

fn nearest_system(desk: &Desk, picture: &Picture, place: Position) -> Option<String> {
    systems_shown(desk, picture)
        .into_iter()
        .min_by(|a, b| place.distance_km(a.1).total_cmp(&place.distance_km(b.1)))
        .map(|(name, _)| name)
}

fn next_system(desk: &mut Desk, picture: &Picture, view: &View, forward: bool) {
    let systems = systems_shown(desk, picture);
    if systems.is_empty() {
        return;
    }
    // The one in the middle, if one is: within two cells.
    let middle = desk.chart.centre.unwrap_or_else(|| view.middle());
    let near_km = 4.0 * view.cell_width_m() / 1000.0;
    let at = systems.iter().position(|(_, place)| middle.distance_km(*place) <= near_km);
    let count = systems.len();
    let next = match (at, forward) {
        (None, true) => 0,
        (None, false) => count - 1,
        (Some(at), true) => (at + 1) % count,
        (Some(at), false) => (at + count - 1) % count,
    };
    if let Some((name, place)) = systems.into_iter().nth(next) {
        desk.chart.centre = Some(place);
        if desk.chart.follow.is_some() {
            desk.chart.follow = Some(name);
        }
        if desk.chart.cursor.is_some() {
            desk.chart.cursor = Some(place);
        }
    }
}

fn in_list(desk: &mut Desk, key: Key, picture: &Picture) -> Vec<Effect> {
    let pane = desk.focus;
    let selected = desk.list(pane).selected;
    let rows = rows::shown(picture, desk, pane);
    let page = desk
        .layout()
        .and_then(|layout| layout.content(pane))
        .map_or(1, |area| usize::from(area.height.saturating_sub(2)).max(1));
    let code = match (key.control, key.code) {
        (true, Code::Char('f')) => Code::PageDown,
        (true, Code::Char('b')) => Code::PageUp,
        (true, _) => return Vec::new(),
        (false, code) => code,
    };
    let chosen = rows.get(selected).copied();
    match code {
        Code::Char('j') | Code::Down => select(desk, picture, pane, selected + 1),
        Code::Char('k') | Code::Up => select(desk, picture, pane, selected.saturating_sub(1)),
        Code::Char('g') | Code::Home => select(desk, picture, pane, 0),
        Code::Char('G') | Code::End => select(desk, picture, pane, usize::MAX),
        Code::PageDown => select(desk, picture, pane, selected.saturating_add(page)),
        Code::PageUp => select(desk, picture, pane, selected.saturating_sub(page)),
        Code::Char('o') => {
            let count = rows::orders(pane).len().max(1);
            let list = &mut desk.lists[pane.index()];
            list.order = (list.order + 1) % count;
            select(desk, picture, pane, 0);
        }
        Code::Char('O') => {
            desk.lists[pane.index()].reversed = !desk.lists[pane.index()].reversed;
            select(desk, picture, pane, 0);
        }
        Code::Char('/') => {
            desk.input = Some(Input::Filter(desk.lists[pane.index()].filter.clone()));
        }
        Code::Enter => {
            let place = chosen.and_then(|index| rows::place(picture, pane, index));
            let Some(place) = place else {
                desk.notice = Some("this row has no place on the chart".to_owned());
                return vec![Effect::Draw];
            };
            desk.chart.centre = Some(place);
            desk.chart.follow = None;
            desk.chart.cursor = Some(place);
            desk.chart.zoom = desk.chart.zoom.max(2);
            focus(desk, Pane::Chart);
        }
        _ => return chosen.map_or_else(Vec::new, |row| on_row(desk, code, picture, row)),
    }
    vec![Effect::Draw]
}

/// Keys of single panes, for the row chosen.
fn on_row(desk: &mut Desk, code: Code, picture: &Picture, row: usize) -> Vec<Effect> {
    match (desk.focus, code) {
        (Pane::Alerts, Code::Char('a')) => picture
            .alerts
            .get(row)
            .filter(|alert| !alert.acknowledged)
            .map_or_else(Vec::new, |alert| vec![Effect::Acknowledge(alert.key.clone())]),
        (Pane::Alerts, Code::Char('u')) => picture
            .alerts
            .get(row)
            .filter(|alert| alert.acknowledged)
            .map_or_else(Vec::new, |alert| vec![Effect::Unacknowledge(alert.key.clone())]),
        (Pane::Arrivals, Code::Char(c @ ('y' | 'x' | 'u'))) => {
            let line = picture.arrivals.lines.get(row);
            let Some(decision) = line.and_then(|line| line.decision.clone()) else {
                desk.notice = Some("no decision can be kept about this line".to_owned());
                return vec![Effect::Draw];
            };
            let verdict = match c {
                'y' => Some(Verdict::Sound),
                'x' => Some(Verdict::Refused),
                _ => None,
            };
            vec![Effect::Overrule { decision, verdict }]
        }
        (Pane::Systems, Code::Char(c @ ('f' | 'n' | 'd'))) => {
            let Some(system) = picture.systems.get(row) else { return Vec::new() };
            let name = system.name.clone();
            match c {
                'f' => {
                    desk.chart.follow = Some(name);
                    desk.chart.zoom = desk.chart.zoom.max(2);
                    focus(desk, Pane::Chart);
                }
                'n' => desk.input = Some(Input::Rename { from: name, text: String::new() }),
                _ => desk.input = Some(Input::Dismiss(name)),
            }
            vec![Effect::Draw]
        }
        _ => Vec::new(),
    }
}

/// Keys while something is being typed.
fn typed(desk: &mut Desk, key: Key, picture: Option<&Picture>) -> Vec<Effect> {
    let Some(mut input) = desk.input.take() else { return Vec::new() };
    let mut effects = vec![Effect::Draw];
    if let Input::Dismiss(name) = input {
        if key.code == Code::Char('y') {
            effects.push(Effect::Dismiss(name));
        }
        return effects;
    }
    let (Input::Filter(text) | Input::Rename { text, .. }) = &mut input else { return effects };
    match key.code {
        Code::Escape => {
            // The filter as it stood before cannot be told from what was typed: all rows again.
            if let (Input::Filter(_), Some(picture)) = (&input, picture) {
                desk.lists[desk.focus.index()].filter.clear();
                select(desk, picture, desk.focus, 0);
            }
            return effects;
        }
        Code::Enter => {
            match input {
                Input::Rename { from, text } if !text.trim().is_empty() => {
                    effects.push(Effect::Rename { from, to: text.trim().to_owned() });
                }
                Input::Filter(text) => {
                    text.trim().clone_into(&mut desk.lists[desk.focus.index()].filter);
                    if let Some(picture) = picture {
                        select(desk, picture, desk.focus, 0);
                    }
                }
                _ => {}
            }
            return effects;
        }
        Code::Backspace => {
            text.pop();
        }
        Code::Char(c) if !key.control && !c.is_control() && text.chars().count() < TYPED_MAX => {
            text.push(c);
        }
        _ => {}
    }
    // The list follows what is typed, so that one sees at once what is left.
    if let (Input::Filter(text), Some(picture)) = (&input, picture) {
        text.trim().clone_into(&mut desk.lists[desk.focus.index()].filter);
        select(desk, picture, desk.focus, 0);
    }
    desk.input = Some(input);
    effects
}
