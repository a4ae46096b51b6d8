//! FM 12 SYNOP, FM 13 SHIP and FM 14 SYNOP MOBIL, sections 0 to 3 (WMO-No. 306, Volume I.1;
//! METHODS COD-2 to COD-7).
//!
//! The three forms differ in how they say who, when and where; from section 1 on they are one.

use crate::instant::Instant;
use crate::report::{Form, Identifier, Platform, Report, Revision};
use crate::wire::calendar::Calendar;
use crate::wire::group::{Group, Groups};
use crate::wire::listener::{Listener, Outcome};
use crate::wire::wind_unit::WindUnit;

pub(crate) mod element;
pub(crate) mod identification;
pub(crate) mod pressure;
pub(crate) mod section_1;
mod section_2;
mod section_3;

/// Which section the groups belong to.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Section {
    One,
    Two,
    Three,
    National,
}

/// Reads a land report; its hour and wind unit come from `AAXX YYGGiw` above it.
pub(crate) fn land<L: Listener>(
    mut groups: Groups<'_>,
    hour: Option<Instant>,
    unit: Option<WindUnit>,
    revision: Revision,
    listener: &mut L,
) -> Outcome {
    let Some(index) = groups.next() else { return Outcome::Lost };
    if index.text.len() != 5 || !index.is_all_figures() {
        listener.complain(index, "FM 12 section 0, IIiii: five figures", || {
            "no station number: the report is lost".to_owned()
        });
        return Outcome::Lost;
    }
    let Some(station) = Identifier::from_bytes(index.text) else { return Outcome::Lost };
    listener.station(station);
    listener.part(index, || format!("station {station}"));
    if is_nil(&groups, listener) {
        return Outcome::Nil;
    }
    let Some(time) = hour else {
        listener.complain(index, "FM 12 section 0: AAXX YYGGiw", || {
            "no time stands above this report: it is lost".to_owned()
        });
        return Outcome::Lost;
    };
    let mut report = Report::empty(station, Platform::Land, Form::Synop, time);
    report.revision = revision;
    body(groups, &report, unit, listener)
}

/// Reads a ship's report, from the call sign on.
pub(crate) fn sea<L: Listener>(
    mut groups: Groups<'_>,
    calendar: &mut Calendar,
    revision: Revision,
    listener: &mut L,
) -> Outcome {
    let Some(place) = identification::mobile(&mut groups, calendar, listener) else {
        return Outcome::Lost;
    };
    if is_nil(&groups, listener) {
        return Outcome::Nil;
    }
    let Some(time) = place.time else { return Outcome::Lost };
    let mut report = Report::empty(place.station, Platform::Ship, Form::Ship, time);
    report.revision = revision;
    report.position = place.position;
    report.position_rounding_deg = 0.05;
    body(groups, &report, place.unit, listener)
}

/// Reads the report of a mobile land station, from the call sign on.
pub(crate) fn mobile<L: Listener>(
    mut groups: Groups<'_>,
    calendar: &mut Calendar,
    revision: Revision,
    listener: &mut L,
) -> Outcome {
    let Some(place) = identification::mobile(&mut groups, calendar, listener) else {
        return Outcome::Lost;
    };
    if is_nil(&groups, listener) {
        return Outcome::Nil;
    }
    let Some(time) = place.time else { return Outcome::Lost };
    let mut report = Report::empty(place.station, Platform::Land, Form::Mobile, time);
    report.revision = revision;
    report.position = place.position;
    report.position_rounding_deg = 0.05;
    report.station_height_m = identification::height(&mut groups, listener);
    body(groups, &report, place.unit, listener)
}

/// Two groups between which the blank was lost.
fn run_together(group: Group<'_>) -> Option<(Group<'_>, Group<'_>)> {
    if !group.is_coded(10) {
        return None;
    }
    let (one, two) = group.text.split_at_checked(5)?;
    Some((Group { text: one, start: group.start }, Group { text: two, start: group.start + 5 }))
}

fn is_nil<L: Listener>(groups: &Groups<'_>, listener: &mut L) -> bool {
    let Some(group) = groups.peek() else { return false };
    if !group.text.eq_ignore_ascii_case(b"NIL") {
        return false;
    }
    listener.part(group, || "nothing to report".to_owned());
    true
}

/// Sections 1 to 3.
fn body<L: Listener>(
    mut groups: Groups<'_>,
    report: &Report,
    unit: Option<WindUnit>,
    listener: &mut L,
) -> Outcome {
    let nominal = report.time;
    let mut first = section_1::Section1::new(report, unit);
    let mut third = section_3::Section3::default();
    let mut section = Section::One;
    if let Some(group) = groups.peek()
        && group.text == b"COR"
    {
        groups.next();
        first.report.revision = first.report.revision.max(Revision::Correction(1));
        listener.part(group, || "a correction".to_owned());
    }
    first.positional(&mut groups, listener);
    let mut second_half = None;
    while let Some(mut group) = second_half.take().or_else(|| groups.next()) {
        if let Some((one, two)) = run_together(group) {
            listener.complain(group, "groups of five figures", || {
                "two groups run together: read as two".to_owned()
            });
            group = one;
            second_half = Some(two);
        }
        match group.text {
            b"333" => {
                section = Section::Three;
                listener.part(group, || "section 3: for regional exchange".to_owned());
                continue;
            }
            b"444" | b"555" | b"666" | b"777" => {
                section = Section::National;
                listener.part(group, || "national section: not read".to_owned());
                continue;
            }
            [b'2', b'2', b'2', _, _] if section == Section::One => {
                section = Section::Two;
                section_2::motion(group, &mut first.report, listener);
                continue;
            }
            b"COR" | b"CORR" => {
                first.report.revision = first.report.revision.max(Revision::Correction(1));
                listener.part(group, || "a correction".to_owned());
                continue;
            }
            _ => {}
        }
        match section {
            Section::One => first.group(group, nominal, listener),
            Section::Two => section_2::group(group, &mut first.report, listener),
            Section::Three => third.group(group, &mut groups, &mut first, listener),
            Section::National => listener.part(group, || "national".to_owned()),
        }
    }
    first.finish();
    Outcome::Report(first.report)
}
