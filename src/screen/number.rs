//! Numbers in words: units, signs, missing values, weak ones.

use super::theme::Role;
use crate::quantity::{kt_from_m_s, wrap_360_deg};
use crate::sphere::Position;
use crate::systems::Measured;
use crate::winds::Wind;

/// What stands for a value that is not known.
pub(super) const MISSING: &str = "-";
/// The mark of a weak value.
pub(super) const WEAK: char = '?';

/// A piece of a row: its text and what it is.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Item {
    pub text: String,
    pub role: Role,
}

impl Item {
    pub(super) fn new(text: impl Into<String>, role: Role) -> Self {
        Self { text: text.into(), role }
    }

    pub(super) fn text(text: impl Into<String>) -> Self {
        Self::new(text, Role::Text)
    }

    pub(super) fn missing() -> Self {
        Self::new(MISSING, Role::Secondary)
    }

    /// The same marked as weak: by a character, and by the role.
    pub(super) fn weak_if(mut self, weak: bool) -> Self {
        if weak && self.text != MISSING {
            self.text.push(WEAK);
            self.role = Role::Weak;
        }
        self
    }
}

/// A value with some decimals; a value that is not finite is missing.
pub(super) fn fixed(value: f64, decimals: usize) -> String {
    if !value.is_finite() {
        return MISSING.to_owned();
    }
    let text = format!("{value:.decimals$}");
    // No minus before a zero.
    if text.starts_with('-') && text.chars().all(|c| matches!(c, '-' | '0' | '.')) {
        return text.trim_start_matches('-').to_owned();
    }
    text
}

/// A change with its sign.
pub(super) fn signed(value: f64, decimals: usize) -> String {
    let text = fixed(value, decimals);
    let nothing = text.chars().all(|c| matches!(c, '0' | '.'));
    if text.starts_with('-') || nothing { text } else { format!("+{text}") }
}

/// A value or the mark of a missing one.
pub(super) fn optional(value: Option<f64>, decimals: usize) -> Item {
    value.map_or_else(Item::missing, |value| Item::text(fixed(value, decimals)))
}

/// A change of pressure, dressed by its sign.
pub(super) fn change(value: Option<f64>, decimals: usize) -> Item {
    value.map_or_else(Item::missing, |value| {
        let text = signed(value, decimals);
        let role = match text.chars().next() {
            Some('-') if text != MISSING => Role::Falling,
            Some('+') => Role::Rising,
            _ => Role::Text,
        };
        Item::new(text, role)
    })
}

/// A change with its error: weak where the error is large beside it.
pub(super) fn measured_change(value: Option<Measured>, decimals: usize) -> Item {
    change(value.map(|m| m.value), decimals).weak_if(value.is_some_and(unsure))
}

/// Whether a value is above a limit; one that is not a number is.
pub(super) fn above(value: f64, limit: f64) -> bool {
    value.is_nan() || value > limit
}

/// Whether an error is so large beside its value that the value is weak.
pub(super) fn unsure(measured: Measured) -> bool {
    above(measured.error, (measured.value.abs() / 2.0).max(1.0))
}

/// A wind as direction and speed in knots, `240/35`.
pub(super) fn wind(wind: Option<Wind>) -> Item {
    wind.map_or_else(Item::missing, |wind| Item::text(wind_text(wind)))
}

/// A wind as direction and speed in knots, `240/35`; calm is `calm`.
pub(super) fn wind_text(wind: Wind) -> String {
    let speed_kt = kt_from_m_s(wind.speed_m_s);
    if !speed_kt.is_finite() || !wind.from_deg.is_finite() {
        return MISSING.to_owned();
    }
    if speed_kt < 0.5 {
        return "calm".to_owned();
    }
    // Directions of the trade run from 001 to 360.
    let from = match fixed(wrap_360_deg(wind.from_deg.round()), 0).as_str() {
        "0" => "360".to_owned(),
        text => format!("{text:0>3}"),
    };
    format!("{from}/{:0>2}", fixed(speed_kt, 0))
}

/// A direction of three digits.
pub(super) fn degrees(value_deg: f64) -> String {
    if !value_deg.is_finite() {
        return MISSING.to_owned();
    }
    format!("{:0>3}", fixed(wrap_360_deg(value_deg.round()), 0))
}

/// A place as `54.3N 012.1W`.
pub(super) fn place(place: Position) -> String {
    format!("{} {}", latitude(place), longitude(place))
}

/// `54.3N`.
pub(super) fn latitude(place: Position) -> String {
    let value = place.latitude_deg();
    let letter = if value < -0.05 { 'S' } else { 'N' };
    format!("{:0>4}{letter}", fixed(value.abs(), 1))
}

/// `012.1W`.
pub(super) fn longitude(place: Position) -> String {
    let value = place.longitude_deg();
    let letter = if value < -0.05 { 'W' } else { 'E' };
    format!("{:0>5}{letter}", fixed(value.abs(), 1))
}

/// A span of minutes, `45 min`, `3 h 05 min`, `4 d 02 h`.
pub(super) fn minutes(minutes: i64) -> String {
    let whole = minutes.max(0);
    if whole < 60 {
        format!("{whole} min")
    } else if whole < 48 * 60 {
        format!("{} h {:02} min", whole / 60, whole % 60)
    } else {
        format!("{} d {:02} h", whole / 1440, whole % 1440 / 60)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_say_their_sign_and_what_is_missing() {
        assert_eq!(signed(-0.04, 1), "0.0");
        assert_eq!(signed(0.05, 1), "+0.1");
        assert_eq!(signed(-3.26, 1), "-3.3");
        assert_eq!(fixed(f64::NAN, 1), "-");
        assert_eq!(change(None, 1).text, "-");
        assert_eq!(change(Some(f64::NAN), 1).text, "-");
    }

    #[test]
    fn directions_run_from_001_to_360_and_a_light_wind_is_calm() {
        let wind = |from_deg, speed_m_s| wind_text(Wind { from_deg, speed_m_s });
        assert_eq!(wind(359.7, 10.0), "360/19");
        assert_eq!(wind(5.0, 2.0), "005/04");
        assert_eq!(wind(0.0, 0.0), "calm");
    }

    #[test]
    fn places_and_spans() {
        let place_text = |lat, lon| place(Position::clamped(lat, lon));
        assert_eq!(place_text(54.34, -12.06), "54.3N 012.1W");
        assert_eq!(place_text(-9.96, 180.0), "10.0S 180.0E");
        assert_eq!((minutes(59), minutes(185)), ("59 min".to_owned(), "3 h 05 min".to_owned()));
    }

    #[test]
    fn a_weak_value_has_a_mark_of_its_own() {
        let weak = measured_change(Some(Measured { value: -2.0, error: 1.5 }), 1);
        assert_eq!((weak.text.as_str(), weak.role), ("-2.0?", Role::Weak));
        let sound = measured_change(Some(Measured { value: -2.0, error: 0.5 }), 1);
        assert_eq!((sound.text.as_str(), sound.role), ("-2.0", Role::Falling));
    }
}
