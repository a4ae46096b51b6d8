//! What changed between two Pictures, as lines of text: for screen readers, dumb terminals and
//! logs. No cursor is moved and no colour used; a line stands for itself.

use super::number;
use super::pane::phase_word;
use super::text::safe;
use crate::alert::{Alert, Urgency};
use crate::picture::Picture;
use crate::systems::{Kind, System};

/// Change of central pressure, hPa, that is worth a line between two analyses of the same hour.
const TOLD_HPA: f64 = 0.5;

/// The changes from one Picture to the next, one line each: alerts first, then the hour, then
/// systems. Without a Picture before, everything that stands is told. Nothing changed: no lines.
pub fn changes(before: Option<&Picture>, after: &Picture) -> Vec<String> {
    let mut out = Vec::new();
    alerts(before, after, &mut out);
    let new_hour = before.is_none_or(|before| before.valid != after.valid);
    if new_hour {
        let used = after.newest().map_or(0, |analysis| analysis.pressures_used);
        out.push(format!(
            "Analysis of {} from {used} pressures; {} reports held.",
            after.valid.instant().day_time(),
            after.reports.held
        ));
    }
    systems(before, after, new_hour, &mut out);
    out.iter().map(|line| safe(line)).collect()
}

fn alerts(before: Option<&Picture>, after: &Picture, out: &mut Vec<String>) {
    let old =
        |key: &str| before.and_then(|before| before.alerts.iter().find(|alert| alert.key == key));
    for alert in &after.alerts {
        match old(&alert.key) {
            None => out.push(alert_line("Alert", alert)),
            Some(known) if known.urgency < alert.urgency => {
                out.push(alert_line("Alert more pressing", alert));
            }
            Some(known) if known.acknowledged != alert.acknowledged => {
                let word =
                    if alert.acknowledged { "Acknowledged" } else { "No longer acknowledged" };
                out.push(format!("{word}: {}.", alert.message));
            }
            Some(_) => {}
        }
    }
    for gone in before.map_or(&[][..], |before| &before.alerts) {
        if !after.alerts.iter().any(|alert| alert.key == gone.key) {
            out.push(format!("Alert over: {}.", gone.message));
        }
    }
}

fn alert_line(word: &str, alert: &Alert) -> String {
    let urgency = match alert.urgency {
        Urgency::Notice => "notice",
        Urgency::Warning => "warning",
        Urgency::Urgent => "URGENT",
    };
    format!(
        "{word}, {urgency}: {}. Since {}. Why: {}.",
        alert.message,
        alert.since.day_time(),
        alert.evidence
    )
}

fn systems(before: Option<&Picture>, after: &Picture, new_hour: bool, out: &mut Vec<String>) {
    for system in &after.systems {
        let known =
            before.and_then(|before| before.systems.iter().find(|old| old.name == system.name));
        let word = if known.is_none() { "New " } else { "" };
        let changed = known.is_none_or(|known| {
            known.phase != system.phase
                || (known.pressure_hpa.value - system.pressure_hpa.value).abs() >= TOLD_HPA
        });
        if new_hour || changed {
            out.push(format!("{word}{}", system_line(system)));
        }
    }
    for gone in before.map_or(&[][..], |before| &before.systems) {
        if !after.systems.iter().any(|system| system.name == gone.name) {
            out.push(format!("{} {} is no longer followed.", kind_word(gone.kind), gone.name));
        }
    }
}

const fn kind_word(kind: Kind) -> &'static str {
    match kind {
        Kind::Low => "Low",
        Kind::High => "High",
    }
}

fn system_line(system: &System) -> String {
    let weak = if super::strip::is_weak(system) { ", weak evidence" } else { "" };
    let change = system.change_3h_hpa.map_or_else(
        || "3 h change unknown".to_owned(),
        |change| format!("{} hPa in 3 h", number::signed(change.value, 1)),
    );
    let rate = system
        .bergeron
        .map_or_else(String::new, |rate| format!(", {} bergeron", number::fixed(rate.value, 1)));
    let motion = match (system.course_deg, system.speed_kt) {
        (Some(course), Some(speed)) => {
            format!("moving {} at {} kt", number::degrees(course), number::fixed(speed.value, 0))
        }
        _ => "hardly moving or motion unknown".to_owned(),
    };
    format!(
        "{} {}: {} hPa +-{}, {}, {change}{rate}, {motion}, {}{weak}.",
        kind_word(system.kind),
        system.name,
        number::fixed(system.pressure_hpa.value, 1),
        number::fixed(system.pressure_hpa.error, 1),
        number::place(system.position),
        phase_word(system.kind, system.phase),
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::screen::sample;

    #[test]
    fn without_a_picture_before_everything_is_told_and_with_the_same_one_nothing() {
        let picture = sample::picture();
        let told = changes(None, &picture);
        assert_eq!(told.len(), picture.alerts.len() + 1 + picture.systems.len());
        assert!(told[0].starts_with("Alert, URGENT: L14k deepens explosively"), "{}", told[0]);
        assert!(
            told.iter().any(|line| line
                == "New Low L14k: 964.4 hPa +-0.9, 56.0N 018.0W, -3.4 hPa in 3 h, 1.2 bergeron, \
                    moving 056 at 23 kt, deepening."),
            "{told:#?}"
        );
        assert!(changes(Some(&picture), &picture).is_empty());
    }

    #[test]
    fn what_changed_is_told_and_nothing_else() {
        let before = sample::picture();
        let mut after = before.clone();
        after.alerts[0].acknowledged = true;
        after.alerts.pop();
        after.systems[0].pressure_hpa.value -= 0.6;
        after.systems.pop();
        let told = changes(Some(&before), &after);
        assert_eq!(told.len(), 4, "{told:#?}");
        assert!(told[0].starts_with("Acknowledged: L14k deepens"));
        assert!(told[1].starts_with("Alert over: new low L15n"));
        assert!(told[2].starts_with("Low L14k: 963.8 hPa"));
        assert_eq!(told[3], "High H13p is no longer followed.");
    }
}
