//! Alerts: what needs attention, why, since when; acknowledged or not.

use super::Sheet;
use crate::alert::{Alert, Urgency};
use crate::screen::number::{self, Item};
use crate::screen::table::{number as numbers, widening, words};
use crate::screen::theme::Role;

pub(super) const SHEET: Sheet = Sheet {
    columns: &[
        words("", 3, 0),
        words("urgency", 7, 3),
        numbers("since", 9, 1),
        words("about", 10, 2),
        widening("what", 14, 0),
    ],
    units: "",
    nothing: "no alert stands; few or old reports would make it so too",
};

const fn urgency_word(urgency: Urgency) -> &'static str {
    match urgency {
        Urgency::Notice => "notice",
        Urgency::Warning => "warning",
        Urgency::Urgent => "URGENT",
    }
}

pub(super) fn row(alert: &Alert) -> Vec<Item> {
    let role = match (alert.acknowledged, alert.urgency) {
        (true, _) => Role::Secondary,
        (false, Urgency::Notice) => Role::Notice,
        (false, Urgency::Warning) => Role::Warning,
        (false, Urgency::Urgent) => Role::Urgent,
    };
    let mark = match (alert.acknowledged, alert.urgency) {
        (true, _) => "ack",
        (false, Urgency::Notice) => "!",
        (false, Urgency::Warning) => "!!",
        (false, Urgency::Urgent) => "!!!",
    };
    let weak = alert.confidence.is_some_and(|confidence| confidence < 0.5);
    vec![
        Item::new(mark, role),
        Item::new(urgency_word(alert.urgency), role),
        Item::new(alert.since.day_time(), Role::Secondary),
        Item::text(alert.subject.clone()).weak_if(weak),
        Item::new(
            alert.message.clone(),
            if alert.acknowledged { Role::Secondary } else { Role::Text },
        ),
    ]
}

pub(super) fn detail(alert: &Alert) -> String {
    let sure = alert
        .confidence
        .map_or_else(String::new, |c| format!(" {}% sure.", number::fixed(c * 100.0, 0)));
    format!(
        "{}: {}. Since {}. Why: {}.{sure}{}",
        urgency_word(alert.urgency),
        alert.message,
        alert.since.day_time(),
        alert.evidence,
        if alert.acknowledged { " Acknowledged." } else { " Key a acknowledges." },
    )
}
