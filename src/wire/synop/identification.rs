//! Section 0: who, when and where (METHODS COD-2).

use crate::instant::Instant;
use crate::quantity::m_from_feet;
use crate::report::Identifier;
use crate::sphere::Position;
use crate::wire::calendar::Calendar;
use crate::wire::group::{Figures, Group, Groups, tenths};
use crate::wire::listener::Listener;
use crate::wire::wind_unit::WindUnit;

/// `YYGGiw`, the five figures after the letters `AAXX` or a call sign: the hour and the wind unit.
pub(crate) fn land_time<L: Listener>(
    group: Group<'_>,
    calendar: &mut Calendar,
    listener: &mut L,
) -> (Option<Instant>, Option<WindUnit>) {
    let (Figures::Value(day), Figures::Value(hour)) = (group.figures(0, 2), group.figures(2, 4))
    else {
        listener.complain(group, "section 0, YYGGiw: day and hour", || {
            "no day and hour can be read".to_owned()
        });
        return (None, None);
    };
    let time = calendar.resolve(day, hour, 0);
    let unit = WindUnit::from_indicator(group.figure(4));
    match (time, unit) {
        (Some(time), Some(unit)) => listener.part(group, || {
            format!("day {day}, {hour:02} UTC: {}; {}", time.rfc3339(), unit.description())
        }),
        (Some(_), None) => listener.complain(group, "code table 1855, iw: 0, 1, 3 or 4", || {
            format!("day {day}, {hour:02} UTC; the wind has no unit and is not used")
        }),
        (None, _) => listener.complain(group, "section 0, YYGGiw: a day near the receipt", || {
            format!("day {day}, {hour:02} UTC is no time near the receipt")
        }),
    }
    (time, unit)
}

/// Who, when and where of a report that moves.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) struct Place {
    /// The call sign or platform number.
    pub station: Identifier,
    /// The hour.
    pub time: Option<Instant>,
    /// The wind unit.
    pub unit: Option<WindUnit>,
    /// Where, if it could be read.
    pub position: Option<Position>,
}

/// `D....D YYGGiw 99LaLaLa QcLoLoLoLo`; `None` where no report can be made of it, said why.
pub(crate) fn mobile<L: Listener>(
    groups: &mut Groups<'_>,
    calendar: &mut Calendar,
    listener: &mut L,
) -> Option<Place> {
    let name = groups.next()?;
    // A report without its call sign begins with the time and the latitude.
    let unnamed = name.is_coded(5)
        && groups.peek().is_some_and(|group| group.text.starts_with(b"99") && group.is_coded(5))
        && matches!(
            (name.figures(0, 2), name.figures(2, 4)),
            (Figures::Value(day), Figures::Value(hour))
                if calendar.resolve(day, hour, 0).is_some()
        );
    let time_group = if unnamed {
        listener.complain(name, "FM 13 section 0: D....D", || {
            "the call sign is missing; SHIP is taken".to_owned()
        });
        name
    } else {
        let Some(station) = Identifier::from_bytes(name.text) else {
            listener.complain(name, "FM 13 section 0: D....D", || {
                "no call sign: the report is lost".to_owned()
            });
            return None;
        };
        listener.station(station);
        listener.part(name, || format!("call sign {station}"));
        if groups.peek().is_some_and(|group| group.text.eq_ignore_ascii_case(b"NIL")) {
            return Some(Place { station, time: None, unit: None, position: None });
        }
        let Some(time) = groups.next() else {
            listener.complain(name, "FM 13 section 0: YYGGiw", || {
                "nothing follows the call sign: the report is lost".to_owned()
            });
            return None;
        };
        time
    };
    let station =
        if unnamed { Identifier::new("SHIP")? } else { Identifier::from_bytes(name.text)? };
    if time_group.text.len() != 5 {
        listener.complain(time_group, "section 0, YYGGiw: five figures", || {
            "no time: the report is lost".to_owned()
        });
        return None;
    }
    let (time, unit) = land_time(time_group, calendar, listener);
    let time = time?;
    let position = position(groups, listener);
    Some(Place { station, time: Some(time), unit, position })
}

/// `99LaLaLa QcLoLoLoLo`, tenths of a degree and the quadrant of the globe (code table 3333).
fn position<L: Listener>(groups: &mut Groups<'_>, listener: &mut L) -> Option<Position> {
    let latitude = groups.peek()?;
    if !latitude.text.starts_with(b"99") {
        listener.complain(latitude, "section 0, 99LaLaLa", || {
            "no position where one is due".to_owned()
        });
        return None;
    }
    groups.next();
    let Some(longitude) = groups.peek() else {
        listener.complain(latitude, "section 0, QcLoLoLoLo", || {
            "the longitude is missing: no position".to_owned()
        });
        return None;
    };
    groups.next();
    let tenths_north = (latitude.text.len() == 5).then(|| latitude.figures(2, 5).value()).flatten();
    let tenths_east =
        (longitude.text.len() == 5).then(|| longitude.figures(1, 5).value()).flatten();
    let Some(north) = tenths_north.filter(|value| *value <= 900) else {
        listener.complain(latitude, "section 0, 99LaLaLa: 000 to 900", || {
            "no latitude can be read: no position".to_owned()
        });
        return None;
    };
    let Some(east) = tenths_east.filter(|value| *value <= 1800) else {
        listener.complain(longitude, "section 0, QcLoLoLoLo: 0000 to 1800", || {
            "no longitude can be read: no position".to_owned()
        });
        return None;
    };
    let Some((north_sign, east_sign)) = quadrant(longitude.figure(0)) else {
        listener.complain(longitude, "code table 3333, Qc: 1, 3, 5 or 7", || {
            "the quadrant of the globe is invalid: no position".to_owned()
        });
        return None;
    };
    let signed = |sign: i32, value: u32| tenths(sign * i32::try_from(value).unwrap_or(0));
    let place = Position::new(signed(north_sign, north), signed(east_sign, east))?;
    listener.part(latitude, || format!("latitude {}", degrees(place.latitude_deg(), 1, 'N', 'S')));
    listener
        .part(longitude, || format!("longitude {}", degrees(place.longitude_deg(), 1, 'E', 'W')));
    Some(place)
}

/// The signs of latitude and longitude in a quadrant of the globe, code table 3333.
pub(crate) const fn quadrant(figure: Option<u8>) -> Option<(i32, i32)> {
    match figure {
        Some(1) => Some((1, 1)),
        Some(3) => Some((-1, 1)),
        Some(5) => Some((-1, -1)),
        Some(7) => Some((1, -1)),
        _ => None,
    }
}

/// An angle with the letter of its hemisphere.
pub(crate) fn degrees(value: f64, decimals: usize, positive: char, negative: char) -> String {
    let letter = if value < 0.0 { negative } else { positive };
    format!("{:.decimals$} {letter}", value.abs())
}

/// `MMMULaULo h0h0h0h0im` of FM 14: the Marsden square, passed over, and the station height.
pub(crate) fn height<L: Listener>(groups: &mut Groups<'_>, listener: &mut L) -> Option<f64> {
    let square = groups.next()?;
    listener.part(square, || "Marsden square of the position".to_owned());
    let group = groups.next()?;
    let metres = match (group.text.len(), group.figures(0, 4), group.figure(4)) {
        (5, Figures::Value(height), Some(1..=4)) => f64::from(height),
        (5, Figures::Value(height), Some(5..=8)) => m_from_feet(f64::from(height)),
        (5, Figures::Missing, _) => {
            listener.part(group, || "station height not reported".to_owned());
            return None;
        }
        _ => {
            listener.complain(group, "FM 14 section 0, h0h0h0h0im; code table 1845", || {
                "no station height can be read".to_owned()
            });
            return None;
        }
    };
    listener.part(group, || format!("station height {metres:.0} m"));
    Some(metres)
}
