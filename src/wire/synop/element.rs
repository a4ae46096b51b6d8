//! Elements that several forms code alike.

use crate::wire::group::{Figures, Group, tenths};
use crate::wire::listener::Listener;

/// `snTTT` at places 1 to 4: a temperature in tenths of a degree with its sign.
pub(crate) fn temperature_c<L: Listener>(
    group: Group<'_>,
    name: &'static str,
    rule: &'static str,
    listener: &mut L,
) -> Option<f64> {
    let figures = group.figures(2, 5);
    let value = match (group.figure(1), figures) {
        (_, Figures::Missing) => {
            listener.part(group, || format!("{name} not reported"));
            return None;
        }
        (Some(0), Figures::Value(value)) => tenths(i32::try_from(value).ok()?),
        (Some(1), Figures::Value(value)) => tenths(-i32::try_from(value).ok()?),
        _ => {
            listener.complain(group, rule, || {
                format!("the sign figure must be 0 or 1: {name} not used")
            });
            return None;
        }
    };
    listener.part(group, || format!("{name} {value:.1} C"));
    Some(value)
}

/// What `5appp` says.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) struct Tendency {
    /// Code table 0200.
    pub characteristic: Option<u8>,
    /// Signed change over three hours, hPa.
    pub change_hpa: Option<f64>,
}

/// `5appp`: characteristic and 3-hour change (code table 0200; METHODS COD-3).
pub(crate) fn tendency<L: Listener>(
    group: Group<'_>,
    rule: &'static str,
    listener: &mut L,
) -> Option<Tendency> {
    let characteristic = group.figure(1);
    if group.text.get(1) == Some(&b'9') {
        listener.complain(group, rule, || {
            "characteristic 9 does not exist: tendency not used".to_owned()
        });
        return None;
    }
    let change = match (characteristic, group.figures(2, 5)) {
        (None, Figures::Missing) => {
            listener.part(group, || "pressure tendency not reported".to_owned());
            return None;
        }
        (None, _) => {
            listener.complain(group, rule, || {
                "no characteristic, hence no sign: change not used".to_owned()
            });
            return None;
        }
        (Some(_), Figures::Missing) => None,
        (Some(_), Figures::Garbled) => return None,
        (Some(a), Figures::Value(value)) => {
            let value = i32::try_from(value).ok()?;
            // Above: now higher or the same; 4: the same; 5 to 8: now lower or the same.
            match a {
                0..=3 => Some(tenths(value)),
                4 if value != 0 => {
                    listener.complain(group, rule, || {
                        "characteristic 4 says no change, the figures say one: not used".to_owned()
                    });
                    return None;
                }
                4 => Some(0.0),
                _ => Some(tenths(-value)),
            }
        }
    };
    listener.part(group, || {
        let words = characteristic.map_or("", characteristic_words);
        change.map_or_else(
            || format!("{words}; change not reported"),
            |change| format!("pressure change in 3 h {change:+.1} hPa, {words}"),
        )
    });
    Some(Tendency { characteristic, change_hpa: change })
}

/// Code table 0200 in words of our own.
pub(crate) const fn characteristic_words(a: u8) -> &'static str {
    match a {
        0 => "rising, then falling",
        1 => "rising, then steady or rising more slowly",
        2 => "rising",
        3 => "falling or steady, then rising; or rising faster",
        4 => "steady",
        5 => "falling, then rising",
        6 => "falling, then steady or falling more slowly",
        7 => "falling",
        8 => "steady or rising, then falling; or falling faster",
        _ => "no such characteristic",
    }
}
