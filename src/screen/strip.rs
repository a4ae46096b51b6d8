//! The summary strip above and the line of keys below.

use std::fmt::Write as _;

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::number::{self, Item};
use super::theme::Role;
use super::{Look, Scene, text};
use crate::desk::{Desk, Input, keys};
use crate::picture::Picture;
use crate::systems::Kind;

/// Fewer pressures than this in the newest analysis make a quiet picture no comfort.
const FEW_PRESSURES: usize = 10;

/// The strip while there is no Picture.
pub(super) fn waiting(buf: &mut Buffer, area: Rect, look: &Look) {
    text::fill(buf, area, look.style(Role::Summary));
    text::put(buf, area.x, area.y, area.width, " glasskeeper", look.style(Role::Summary));
}

/// Minutes since the newest file or, before one is known, the newest report.
pub(super) fn feed_age_minutes(picture: &Picture, desk: &Desk) -> Option<i64> {
    let now = desk.now.unwrap_or(picture.now).max(picture.now);
    let newest = picture.arrivals.newest_file.or(picture.reports.newest)?;
    Some(now.seconds_since(newest).max(0) / 60)
}

/// Whether the feed is stale by the settings.
pub(super) fn stale(scene: Scene<'_>) -> bool {
    feed_age_minutes(scene.picture, scene.desk)
        .is_none_or(|age| age >= scene.settings.alerts.stale_minutes)
}

/// Alerts that nobody has acknowledged.
pub(super) fn open_alerts(picture: &Picture) -> usize {
    picture.alerts.iter().filter(|alert| !alert.acknowledged).count()
}

fn deepest(picture: &Picture) -> Option<&crate::systems::System> {
    picture.systems.iter().find(|system| system.kind == Kind::Low)
}

/// What the strip says, in two lots: when and what from, then what of it; the narrower, the less.
fn items(scene: Scene<'_>, width: u16) -> [Vec<Item>; 2] {
    let (short, roomy) = (width < 72, width >= 100);
    let Scene { picture, desk, look, .. } = scene;
    let summary = |text: String| Item::new(text, Role::Summary);
    let now = desk.now.unwrap_or(picture.now).max(picture.now);
    let mut first = Vec::new();
    let valid = picture.valid.instant();
    first.push(if short {
        summary(valid.day_time())
    } else {
        summary(format!("valid {}", valid.day_time()))
    });
    let late = now.seconds_since(valid) >= 3 * 3600;
    if !short {
        first.push(summary(format!("now {}", now.time_of_day())));
    }
    let age = feed_age_minutes(picture, desk);
    first.push(match (age, stale(scene)) {
        (None, _) => Item::new(" NO FEED ", Role::Stale),
        (Some(age), true) => {
            Item::new(format!(" FEED STALE {} ", number::minutes(age)), Role::Stale)
        }
        (Some(age), false) => summary(format!("feed {}", number::minutes(age))),
    });
    if late {
        first.push(Item::new(" OLD ANALYSIS ", Role::Stale));
    }
    if !short {
        let used = picture.newest().map_or(0, |analysis| analysis.pressures_used);
        first.push(summary(format!("{} reports, {used} pressures used", picture.reports.held)));
        if used < FEW_PRESSURES {
            first.push(Item::new(" FEW REPORTS ", Role::Stale));
        }
        if !look.link.is_empty() {
            first.push(summary(look.link.clone()));
        }
    }
    // What matters most must not be what is cut: alerts first.
    let mut second = vec![alerts(picture, width)];
    if let Some(low) = deepest(picture) {
        let pressure = number::fixed(low.pressure_hpa.value, usize::from(!short));
        let weak = if is_weak(low) { "?" } else { "" };
        if short {
            second.push(Item::new(format!("{} {pressure}{weak}", low.name), Role::Low));
        } else {
            let error = number::fixed(low.pressure_hpa.error, 1);
            let word = if roomy { "deepest" } else { "low" };
            let mut line = format!("{word} {} {pressure}{weak} +-{error} hPa", low.name);
            if let Some(change) = low.change_3h_hpa {
                let _ = write!(line, ", {}/3 h", number::signed(change.value, 1));
            }
            if let Some(change) = low.change_24h_hpa {
                let _ = write!(line, ", {}/24 h", number::signed(change.value, 1));
            }
            if let Some(rate) = low.bergeron {
                let _ = write!(line, ", {} bergeron", number::fixed(rate.value, 1));
            } else if let Some(rate) = low.bergeron_12h {
                let _ = write!(line, ", {} bergeron by 12 h", number::fixed(rate.value, 1));
            }
            second.push(Item::new(line, Role::Low));
        }
    } else if !short {
        second.push(summary("no low found".to_owned()));
    }
    [first, second]
}

/// How many alerts nobody has acknowledged.
fn alerts(picture: &Picture, width: u16) -> Item {
    let open = open_alerts(picture);
    let urgent = picture
        .alerts
        .iter()
        .any(|alert| !alert.acknowledged && alert.urgency == crate::alert::Urgency::Urgent);
    let role = match (open, urgent) {
        (0, _) => Role::Summary,
        (_, true) => Role::Urgent,
        (_, false) => Role::Warning,
    };
    match (width, open) {
        (..72, 0) => Item::new("alerts 0", role),
        (..72, _) => Item::new(format!(" !{open} "), role),
        (_, 0) => Item::new("no open alert", role),
        (72..100, _) => Item::new(format!(" ! alerts {open} "), role),
        (_, 1) => Item::new(" ! 1 alert open ", role),
        (..) => Item::new(format!(" ! {open} alerts open "), role),
    }
}

/// Whether a system is so little sure that it is marked.
pub(super) fn is_weak(system: &crate::systems::System) -> bool {
    system.confidence < 0.6 || number::above(system.pressure_hpa.error, 3.0)
}

/// The strip.
pub(super) fn summary(buf: &mut Buffer, area: Rect, scene: Scene<'_>) {
    let look = scene.look;
    text::fill(buf, area, look.style(Role::Summary));
    let [first, second] = items(scene, area.width);
    if area.height >= 2 {
        line(buf, Rect { height: 1, ..area }, &first, look);
        line(buf, Rect { y: area.y + 1, height: 1, ..area }, &second, look);
    } else {
        let all: Vec<Item> = first.into_iter().chain(second).collect();
        line(buf, area, &all, look);
    }
}

fn line(buf: &mut Buffer, area: Rect, items: &[Item], look: &Look) {
    let mut x = area.x + 1;
    for (k, item) in items.iter().enumerate() {
        let gap = if k == 0 { 0 } else { 2 };
        let room = area.right().saturating_sub(x);
        if room <= gap + 1 {
            text::put(
                buf,
                area.right().saturating_sub(1),
                area.y,
                1,
                "~",
                look.style(Role::Summary),
            );
            return;
        }
        x += gap;
        x += text::put(buf, x, area.y, room - gap, &item.text, look.style(item.role));
    }
}

/// The bottom line: what is being typed, or a notice, or the keys of the pane in front.
pub(super) fn keys(
    buf: &mut Buffer,
    area: Rect,
    desk: &Desk,
    picture: Option<&Picture>,
    look: &Look,
) {
    let (plain, key) = (look.style(Role::Secondary), look.style(Role::Key));
    let say = |buf: &mut Buffer, text: &str| {
        text::put(buf, area.x, area.y, area.width, text, look.style(Role::Text));
    };
    match &desk.input {
        Some(Input::Filter(typed)) => {
            return say(
                buf,
                &format!("show only rows with: {typed}_   (Enter keeps, Esc shows all)"),
            );
        }
        Some(Input::Rename { from, text }) => {
            return say(buf, &format!("call {from}: {text}_   (Enter keeps, Esc leaves it)"));
        }
        Some(Input::Dismiss(name)) => {
            return say(buf, &format!("dismiss {name} as not real? y yes, any other key no"));
        }
        None => {}
    }
    if let Some(notice) = &desk.notice {
        return say(buf, notice);
    }
    let list = if desk.help.is_some() {
        &[("j k", "up and down"), ("Esc", "close the help"), ("Ctrl-C", "quit")]
    } else if picture.is_none() {
        &[("?", "help"), ("q", "quit")][..]
    } else {
        keys::bottom(desk.focus)
    };
    let mut x = area.x;
    for (name, what) in list {
        let wide = u16::try_from(name.chars().count() + what.chars().count() + 1).unwrap_or(0);
        if x + wide > area.right() {
            break;
        }
        x += text::put(buf, x, area.y, wide, name, key) + 1;
        x += text::put(buf, x, area.y, wide, what, plain) + 2;
    }
}
