//! `T'T'/T'dT'd` and, from platforms at sea, `WTsTs/SS'`.

use crate::report::Report;
use crate::wire::group::{Group, figures};
use crate::wire::listener::Listener;

/// Two figures with M before a negative value.
fn value_c(text: &[u8]) -> Option<f64> {
    match text {
        // Subtracted, since a negative zero is a zero here.
        [b'M', rest @ ..] if rest.len() == 2 => Some(0.0 - f64::from(figures(rest).value()?)),
        _ if text.len() == 2 => Some(f64::from(figures(text).value()?)),
        _ => None,
    }
}

/// Whether text is a value or stands for a missing one.
fn is_value(text: &[u8]) -> bool {
    matches!(text, b"//" | b"XX" | b"" | b"MM") || value_c(text).is_some()
}

fn halves(text: &[u8]) -> Option<(&[u8], &[u8])> {
    // The solidus that parts the two is the third or fourth character.
    let at = if text.get(2) == Some(&b'/') { 2 } else { 3 };
    (text.get(at) == Some(&b'/')).then_some(())?;
    Some((text.get(..at)?, text.get(at + 1..)?))
}

/// Whether a group is temperature and dew point.
pub(super) fn is_pair(group: Group<'_>) -> bool {
    if !matches!(group.text.len(), 3..=7)
        || !matches!(group.first(), b'M' | b'0'..=b'9' | b'/' | b'X')
    {
        return false;
    }
    halves(group.text).is_some_and(|(t, td)| !t.is_empty() && is_value(t) && is_value(td))
}

/// Reads temperature and dew point.
pub(super) fn pair<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    let Some((t, td)) = halves(group.text) else { return };
    report.air_temperature_c = value_c(t);
    report.dew_point_c = value_c(td);
    let (t, td) = (report.air_temperature_c, report.dew_point_c);
    listener.part(group, || {
        let words = |value: Option<f64>| {
            value.map_or_else(|| "not reported".to_owned(), |value| format!("{value:.0} C"))
        };
        format!("air temperature {}, dew point {}", words(t), words(td))
    });
}

/// Whether a group is a sea temperature and state.
pub(super) fn is_sea(group: Group<'_>) -> bool {
    group
        .text
        .strip_prefix(b"W")
        .and_then(halves)
        .is_some_and(|(t, state)| t.len() >= 2 && is_value(t) && matches!(state, [b'S' | b'H', ..]))
}

/// Reads a sea temperature.
pub(super) fn sea<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    let value = group.text.strip_prefix(b"W").and_then(halves).and_then(|(t, _)| value_c(t));
    report.sea_temperature_c = value;
    listener.part(group, || {
        value.map_or_else(
            || "sea temperature not reported".to_owned(),
            |value| format!("sea temperature {value:.0} C"),
        )
    });
}
