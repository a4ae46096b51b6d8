//! `dddffGfmfm` with its unit, and the sector it varies in.

use crate::quantity::{kt_from_m_s, m_s_from_km_h, m_s_from_kt};
use crate::report::Report;
use crate::wire::group::{Figures, Group, figures};
use crate::wire::listener::Listener;

/// The parts of a wind group.
struct Parts<'a> {
    direction: &'a [u8],
    speed: &'a [u8],
    gust: Option<&'a [u8]>,
    unit: Unit,
}

#[derive(Clone, Copy, PartialEq)]
enum Unit {
    Knots,
    MetresPerSecond,
    KilometresPerHour,
}

impl Unit {
    fn m_s(self, coded: u32) -> f64 {
        match self {
            Self::Knots => m_s_from_kt(f64::from(coded)),
            Self::MetresPerSecond => f64::from(coded),
            Self::KilometresPerHour => m_s_from_km_h(f64::from(coded)),
        }
    }
}

fn parts(group: Group<'_>) -> Option<Parts<'_>> {
    let text = group.text;
    let (body, unit) = if let Some(body) = text.strip_suffix(b"KT") {
        (body, Unit::Knots)
    } else if let Some(body) = text.strip_suffix(b"KTS") {
        (body, Unit::Knots)
    } else if let Some(body) = text.strip_suffix(b"MPS") {
        (body, Unit::MetresPerSecond)
    } else {
        (text.strip_suffix(b"KMH")?, Unit::KilometresPerHour)
    };
    let (direction, rest) = body.split_at_checked(3)?;
    let known =
        direction == b"VRB" || direction.iter().all(|byte| byte.is_ascii_digit() || *byte == b'/');
    let (speed, gust) = match rest.iter().position(|&byte| byte == b'G') {
        Some(at) => (rest.get(..at)?, Some(rest.get(at + 1..)?)),
        None => (rest, None),
    };
    let is_speed = |text: &[u8]| {
        let text = text.strip_prefix(b"P").unwrap_or(text);
        (2..=3).contains(&text.len())
            && text.iter().all(|byte| byte.is_ascii_digit() || *byte == b'/')
    };
    (known && is_speed(speed) && gust.is_none_or(is_speed)).then_some(Parts {
        direction,
        speed,
        gust,
        unit,
    })
}

/// Whether a group is a wind.
pub(super) fn is_wind(group: Group<'_>) -> bool {
    matches!(group.text.last(), Some(b'T' | b'S' | b'H')) && parts(group).is_some()
}

/// Whether a group is a wind but for its unit: five figures, with or without a gust.
pub(super) fn lacks_unit(group: Group<'_>) -> bool {
    let (mean, gust) = group.text.split_at_checked(5).unwrap_or_default();
    !mean.is_empty()
        && mean.iter().all(u8::is_ascii_digit)
        && (gust.is_empty()
            || matches!(gust, [b'G', figures @ ..]
                if figures.len() == 2 && figures.iter().all(u8::is_ascii_digit)))
}

/// A speed of two or three figures; P before it says that it is more than can be coded.
fn speed(text: &[u8], unit: Unit) -> (Option<f64>, bool) {
    let (text, beyond) = text.strip_prefix(b"P").map_or((text, false), |text| (text, true));
    // P99KT is 100 kt or more, P49MPS 50 m/s or more: the least that can be meant is kept.
    let coded = figures(text).value().map(|coded| if beyond { coded + 1 } else { coded });
    (coded.map(|coded| unit.m_s(coded)), beyond)
}

/// Reads a wind group.
pub(super) fn read<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    let Some(parts) = parts(group) else { return };
    let (speed_m_s, beyond) = speed(parts.speed, parts.unit);
    report.wind_speed_m_s = speed_m_s;
    report.wind_gust_m_s = parts.gust.and_then(|gust| speed(gust, parts.unit).0);
    match figures(parts.direction) {
        // 00000KT is calm; 36000 does not occur.
        Figures::Value(degrees) if degrees <= 360 => {
            report.wind_from_deg = Some(f64::from(degrees));
            if degrees == 0 && speed_m_s.is_some_and(|speed| speed > 0.0) {
                report.wind_from_deg = None;
                listener.complain(group, "FM 15, ddd: 000 is calm", || {
                    "calm, yet with a speed: no direction".to_owned()
                });
                return;
            }
        }
        Figures::Value(degrees) => {
            listener.complain(group, "FM 15, ddd: 000 to 360", || {
                format!("direction {degrees} does not exist: not used")
            });
            return;
        }
        Figures::Garbled if parts.direction == b"VRB" => report.wind_variable = true,
        _ => {}
    }
    let (from, gust, variable) = (report.wind_from_deg, report.wind_gust_m_s, report.wind_variable);
    listener.part(group, || {
        let Some(speed_m_s) = speed_m_s else { return "wind speed not reported".to_owned() };
        if speed_m_s == 0.0 && from == Some(0.0) {
            return "calm".to_owned();
        }
        let direction = match from {
            Some(degrees) => format!("wind from {degrees:03.0} deg"),
            None if variable => "wind variable".to_owned(),
            None => "wind, direction not reported,".to_owned(),
        };
        let more = if beyond { " or more" } else { "" };
        let gust =
            gust.map_or_else(String::new, |gust| format!(", gusts {:.0} kt", kt_from_m_s(gust)));
        format!("{direction} at {:.0} kt ({speed_m_s:.1} m/s){more}{gust}", kt_from_m_s(speed_m_s))
    });
}

/// Whether a group is `dndndnVdxdxdx`.
pub(super) fn is_sector(group: Group<'_>) -> bool {
    let [a @ .., b'V', d, e, f] = group.text else { return false };
    a.len() == 3 && a.iter().chain([d, e, f]).all(u8::is_ascii_digit)
}

/// The sector that the direction varies in: the mean direction stands.
pub(super) fn sector<L: Listener>(group: Group<'_>, _: &mut Report, listener: &mut L) {
    match (group.figures(0, 3), group.figures(4, 7)) {
        (Figures::Value(from @ 0..=360), Figures::Value(to @ 0..=360)) => {
            listener.part(group, || format!("direction varies from {from:03} to {to:03} deg"));
        }
        _ => listener.complain(group, "FM 15, dndndnVdxdxdx: 000 to 360", || {
            "no such directions".to_owned()
        }),
    }
}
