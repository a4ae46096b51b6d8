//! FM 15 METAR and FM 16 SPECI (WMO-No. 306, Volume I.1; METHODS COD-9).

use crate::report::{Form, Identifier, Platform, Report, Revision, WindSource};
use crate::wire::calendar::Calendar;
use crate::wire::group::{Figures, Group, Groups};
use crate::wire::listener::{Listener, Outcome};

mod pressure;
mod remarks;
mod temperature;
mod wind;

/// Reads an aerodrome report, from the location indicator (or COR before it) on.
pub(crate) fn read<L: Listener>(
    mut groups: Groups<'_>,
    form: Form,
    calendar: &mut Calendar,
    revision: Revision,
    listener: &mut L,
) -> Outcome {
    let mut revision = revision;
    let Some(mut place) = groups.next() else { return Outcome::Lost };
    if place.text == b"COR" {
        revision = revision.max(Revision::Correction(1));
        listener.part(place, || "a correction".to_owned());
        let Some(next) = groups.next() else {
            listener.complain(place, "FM 15, CCCC", || "nothing follows: lost".to_owned());
            return Outcome::Lost;
        };
        place = next;
    }
    let named = place.text.len() == 4
        && place.first().is_ascii_uppercase()
        && place.text.iter().all(|byte| byte.is_ascii_uppercase() || byte.is_ascii_digit());
    let Some(station) = Identifier::from_bytes(place.text).filter(|_| named) else {
        listener.complain(place, "FM 15, CCCC: four letters", || {
            "no location indicator: the report is lost".to_owned()
        });
        return Outcome::Lost;
    };
    listener.station(station);
    listener.part(place, || format!("aerodrome {station}"));
    let Some(mut when) = groups.next() else {
        listener
            .complain(place, "FM 15, YYGGggZ", || "nothing follows: the report is lost".to_owned());
        return Outcome::Lost;
    };
    if when.text == b"COR" {
        revision = revision.max(Revision::Correction(1));
        listener.part(when, || "a correction".to_owned());
        let Some(next) = groups.next() else {
            listener.complain(when, "FM 15, YYGGggZ", || "nothing follows: lost".to_owned());
            return Outcome::Lost;
        };
        when = next;
    }
    if when.text.starts_with(b"NIL") {
        listener.part(when, || "nothing to report".to_owned());
        return Outcome::Nil;
    }
    let time = match (when.text.len(), when.text.last()) {
        (7, Some(b'Z')) => match (when.figures(0, 2), when.figures(2, 4), when.figures(4, 6)) {
            (Figures::Value(day), Figures::Value(hour), Figures::Value(minute)) => {
                calendar.resolve(day, hour, minute)
            }
            _ => None,
        },
        _ => None,
    };
    let Some(time) = time else {
        listener.complain(when, "FM 15, YYGGggZ: a day near the receipt", || {
            "no time can be read: the report is lost".to_owned()
        });
        return Outcome::Lost;
    };
    listener.part(when, || format!("observed {}", time.rfc3339()));
    let mut report = Report::empty(station, Platform::Aerodrome, form, time);
    report.revision = revision;
    report.wind_source = WindSource::Measured;
    if body(&mut groups, &mut report, listener) == Body::Nil {
        return Outcome::Nil;
    }
    Outcome::Report(report)
}

#[derive(PartialEq, Eq)]
enum Body {
    Read,
    Nil,
}

/// What the groups after the time tell, as far as pressure work needs it.
fn body<L: Listener>(groups: &mut Groups<'_>, report: &mut Report, listener: &mut L) -> Body {
    let mut wind_read = false;
    while let Some(group) = groups.next() {
        match group.text {
            b"NIL" => {
                listener.part(group, || "nothing to report".to_owned());
                return Body::Nil;
            }
            b"AUTO" => listener.part(group, || "automatic".to_owned()),
            b"COR" => {
                report.revision = report.revision.max(Revision::Correction(1));
                listener.part(group, || "a correction".to_owned());
            }
            // Some nations number corrections within the report.
            [b'C', b'C', x @ b'A'..=b'Z'] if !wind_read => {
                report.revision = report.revision.max(Revision::Correction(x - b'A' + 1));
                listener.part(group, || "a correction".to_owned());
            }
            b"RMK" => {
                listener.part(group, || "remarks".to_owned());
                remarks::read(groups, report, listener);
            }
            b"NOSIG" => listener.part(group, || "no significant change expected".to_owned()),
            b"TEMPO" | b"BECMG" | b"INTER" => {
                listener.part(group, || "trend forecast: not read".to_owned());
                trend(groups, report, listener);
            }
            b"CAVOK" => listener.part(group, || "cloud and visibility good".to_owned()),
            _ if !wind_read && wind::is_wind(group) => {
                wind_read = true;
                wind::read(group, report, listener);
            }
            _ if wind::is_sector(group) => wind::sector(group, report, listener),
            [b'S', b'L', b'P', _, ..] => remarks::sea_level(group, report, listener),
            [b'Q', ..] => pressure::q(group, report, listener),
            [b'A', b'0'..=b'9' | b'/', ..] => pressure::a(group, report, listener),
            _ if temperature::is_pair(group) => temperature::pair(group, report, listener),
            [b'W', ..] if temperature::is_sea(group) => temperature::sea(group, report, listener),
            _ if !wind_read && wind::lacks_unit(group) => {
                wind_read = true;
                listener.complain(group, "FM 15, dddffGfmfm and unit", || {
                    "the wind has no unit and is not used".to_owned()
                });
            }
            _ => other(group, listener),
        }
    }
    Body::Read
}

/// A trend forecast runs up to the next one or to the remarks.
fn trend<L: Listener>(groups: &mut Groups<'_>, report: &mut Report, listener: &mut L) {
    while let Some(group) = groups.next() {
        if group.text == b"RMK" {
            listener.part(group, || "remarks".to_owned());
            remarks::read(groups, report, listener);
            return;
        }
        listener.part(group, || "trend forecast".to_owned());
    }
}

/// Visibility, runway visual range, weather, cloud: known by shape, not used here.
fn other<L: Listener>(group: Group<'_>, listener: &mut L) {
    let printable = group.text.iter().all(u8::is_ascii_graphic);
    if !printable {
        listener.complain(group, "FM 15: letters, figures and solidi", || {
            "the group cannot be read".to_owned()
        });
        return;
    }
    if group.text.ends_with(b"KT") || group.text.ends_with(b"MPS") {
        listener
            .complain(group, "FM 15, dddffGfmfm and unit", || "the wind cannot be read".to_owned());
        return;
    }
    listener.part(group, || {
        match group.text {
            [b'R', b'0'..=b'9', ..] => "runway visual range or state",
            [b'F' | b'S' | b'B' | b'O', _, _, b'0'..=b'9' | b'/', ..]
            | [b'V', b'V', b'0'..=b'9' | b'/', ..]
            | b"SKC"
            | b"CLR"
            | b"NSC"
            | b"NCD" => "cloud",
            [b'0'..=b'9', ..] => "visibility",
            _ => "weather or other",
        }
        .to_owned()
    });
}
