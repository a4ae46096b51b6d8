//! FM 18 BUOY, sections 0 to 2, and the height of the anemometer from section 4 (WMO-No. 306,
//! Volume I.1; METHODS COD-8).
//!
//! `ZZYY A1bwnbnbnb YYMMJ GGggiw QcLaLaLaLaLa LoLoLoLoLoLo (6QlQtQA/) (111QdQx ...) (222QdQx ...)`

use crate::instant::{HOUR_S, Instant};
use crate::report::{Form, Identifier, Platform, Report, Revision};
use crate::sphere::Position;
use crate::wire::calendar::Calendar;
use crate::wire::group::{Figures, Group, Groups, figures};
use crate::wire::listener::{Listener, Outcome};
use crate::wire::synop::element;
use crate::wire::synop::identification::{degrees, quadrant};
use crate::wire::synop::section_1::Section1;
use crate::wire::wind_unit::WindUnit;

/// Which section the groups belong to.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Section {
    Zero,
    One,
    Two,
    Depths,
    Technical,
    National,
}

/// The quality flag of a section: Qd (code table 3334) and the place Qx of the group it is about.
#[derive(Clone, Copy)]
struct Flag {
    quality: Option<u8>,
    place: Option<u8>,
}

impl Flag {
    const NONE: Self = Self { quality: None, place: None };

    fn of(group: Group<'_>) -> Self {
        Self { quality: group.figure(3), place: group.figure(4) }
    }

    /// Whether the group at a place, counted from 1, is doubtful (3) or wrong (4). Qx is the place
    /// of the one group that the flag is about, or 9 for all (regulation 18.3.3).
    fn is_against(self, place: u8) -> bool {
        matches!(self.quality, Some(3 | 4))
            && matches!(self.place, Some(at) if at == 9 || at == place)
    }
}

/// Reads a buoy's report, from its number on.
pub(crate) fn read<L: Listener>(
    mut groups: Groups<'_>,
    calendar: &mut Calendar,
    revision: Revision,
    listener: &mut L,
) -> Outcome {
    let Some(number) = groups.next() else { return Outcome::Lost };
    let named = matches!(number.text.len(), 5 | 7) && number.is_all_figures();
    let Some(station) = Identifier::from_bytes(number.text).filter(|_| named) else {
        listener.complain(number, "FM 18 section 0, A1bwnbnbnb: five or seven figures", || {
            "no buoy number: the report is lost".to_owned()
        });
        return Outcome::Lost;
    };
    listener.station(station);
    listener.part(number, || format!("buoy {station}"));
    if groups.peek().is_some_and(|group| group.text == b"NIL") {
        return Outcome::Nil;
    }
    let Some((time, unit)) = time(&mut groups, calendar.received(), number, listener) else {
        return Outcome::Lost;
    };
    let mut report = Report::empty(station, Platform::Buoy, Form::Buoy, time);
    report.revision = revision;
    if let Some((position, rounding_deg)) = position(&mut groups, number, listener) {
        report.position = Some(position);
        report.position_rounding_deg = rounding_deg;
    }
    if let Some(group) = groups.peek()
        && matches!(group.text, [b'6', _, _, _, b'/'])
    {
        groups.next();
        if !quality(group, &mut report, listener) {
            return Outcome::Lost;
        }
    }
    sections(groups, &report, unit, listener)
}

/// `YYMMJ GGggiw`: the date with the last figure of the year, the time to the minute, the unit.
fn time<L: Listener>(
    groups: &mut Groups<'_>,
    received: Instant,
    number: Group<'_>,
    listener: &mut L,
) -> Option<(Instant, Option<WindUnit>)> {
    let (Some(date), Some(clock)) = (groups.next(), groups.next()) else {
        listener.complain(number, "FM 18 section 0, YYMMJ GGggiw", || {
            "no time follows: the report is lost".to_owned()
        });
        return None;
    };
    let moment = (date.text.len() == 5 && clock.text.len() == 5)
        .then(|| {
            nearest(
                date.figures(0, 2).value()?,
                date.figures(2, 4).value()?,
                date.figure(4)?,
                clock.figures(0, 2).value()?,
                clock.figures(2, 4).value()?,
                received,
            )
        })
        .flatten();
    let Some(moment) = moment else {
        listener.complain(date, "FM 18 section 0, YYMMJ GGggiw", || {
            "no date and time can be read: the report is lost".to_owned()
        });
        return None;
    };
    listener.part(date, || format!("date {}", moment.rfc3339()));
    let unit = WindUnit::from_indicator(clock.figure(4));
    match unit {
        Some(unit) => listener
            .part(clock, || format!("observed {}; {}", moment.time_of_day(), unit.description())),
        // A buoy without an anemometer need not say.
        None if clock.figures(4, 5) == Figures::Missing => {
            listener.part(clock, || format!("observed {}", moment.time_of_day()));
        }
        None => listener.complain(clock, "code table 1855, iw: 0, 1, 3 or 4", || {
            "the wind has no unit and is not used".to_owned()
        }),
    }
    Some((moment, unit))
}

/// The moment with a given last figure of the year that is nearest to the receipt, of those not
/// later than six hours after it.
fn nearest(
    day: u32,
    month: u32,
    year_figure: u8,
    hour: u32,
    minute: u32,
    received: Instant,
) -> Option<Instant> {
    let year: i32 = received.calendar()?.format("%Y").to_string().parse().ok()?;
    let limit = received.plus_s(6 * HOUR_S);
    (year - 10..=year + 1)
        .rev()
        .filter(|year| year.rem_euclid(10) == i32::from(year_figure))
        .filter_map(|year| Instant::from_calendar(year, month, day, hour, minute))
        .find(|moment| *moment <= limit)
}

/// `QcLaLaLaLaLa LoLoLoLoLoLo`: thousandths of a degree; solidi stand for figures not known.
fn position<L: Listener>(
    groups: &mut Groups<'_>,
    number: Group<'_>,
    listener: &mut L,
) -> Option<(Position, f64)> {
    const RULE: &str = "FM 18 section 0, QcLaLaLaLaLa LoLoLoLoLoLo";
    let (Some(latitude), Some(longitude)) = (groups.next(), groups.next()) else {
        listener.complain(number, RULE, || "no position follows".to_owned());
        return None;
    };
    let found = (latitude.text.len() == 6 && longitude.text.len() == 6)
        .then(|| {
            let (north, rounding_north) = thousandths(latitude.text.get(1..)?)?;
            let (east, rounding_east) = thousandths(longitude.text)?;
            let (north_sign, east_sign) = quadrant(latitude.figure(0))?;
            (east <= 180_000).then_some(())?;
            let signed = |sign: i32, value: i32| f64::from(sign * value) / 1000.0;
            let position = Position::new(signed(north_sign, north), signed(east_sign, east))?;
            Some((position, rounding_north.max(rounding_east)))
        })
        .flatten();
    let Some((position, rounding_deg)) = found else {
        listener.complain(latitude, RULE, || "no position can be read".to_owned());
        return None;
    };
    let decimals = if rounding_deg < 0.001 { 3 } else { 2 };
    listener.part(latitude, || {
        format!("latitude {}", degrees(position.latitude_deg(), decimals, 'N', 'S'))
    });
    listener.part(longitude, || {
        format!("longitude {}", degrees(position.longitude_deg(), decimals, 'E', 'W'))
    });
    Some((position, rounding_deg))
}

/// Thousandths with up to two figures left out at the end, and the largest rounding, degrees.
fn thousandths(text: &[u8]) -> Option<(i32, f64)> {
    let known = text.iter().take_while(|&&byte| byte != b'/').count();
    let missing = text.len() - known;
    let (factor, rounding_deg) = match missing {
        0 => (1, 0.0005),
        1 => (10, 0.005),
        2 => (100, 0.05),
        _ => return None,
    };
    let solidi = text.get(known..)?.iter().all(|&byte| byte == b'/');
    let value = figures(text.get(..known)?).value().filter(|_| solidi)?;
    Some((i32::try_from(value).ok()? * factor, rounding_deg))
}

/// `6QlQtQA/`: quality of position and time (code table 3334). Whether the report can be kept.
fn quality<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) -> bool {
    const RULE: &str = "code table 3334: doubtful or wrong";
    if matches!(group.figure(2), Some(3 | 4)) {
        listener.complain(group, RULE, || {
            "the time is flagged as doubtful or wrong: the report is lost".to_owned()
        });
        return false;
    }
    if matches!(group.figure(1), Some(3 | 4)) {
        report.position = None;
        report.position_rounding_deg = 0.0;
        listener.complain(group, RULE, || {
            "the position is flagged as doubtful or wrong: not used".to_owned()
        });
        return true;
    }
    listener.part(group, || "quality of position and time".to_owned());
    true
}

fn sections<L: Listener>(
    groups: Groups<'_>,
    report: &Report,
    unit: Option<WindUnit>,
    listener: &mut L,
) -> Outcome {
    let mut groups = groups;
    let nominal = report.time;
    let mut first = Section1::new(report, unit);
    let mut section = Section::Zero;
    let mut flag = Flag::NONE;
    let mut place = 0;
    while let Some(group) = groups.next() {
        let begins = match (section, group.text) {
            (Section::Zero, [b'1', b'1', b'1', _, _]) => Some(Section::One),
            // Neither a dew point nor a wave has these figures.
            (Section::Zero | Section::One, [b'2', b'2', b'2', _, _]) => Some(Section::Two),
            (Section::Zero | Section::One | Section::Two, [b'3', b'3', b'3', _, _]) => {
                Some(Section::Depths)
            }
            (Section::National, _) => None,
            (_, b"444") => Some(Section::Technical),
            (_, b"555") => Some(Section::National),
            _ => None,
        };
        if let Some(begun) = begins {
            section = begun;
            flag = Flag::of(group);
            place = 0;
            listener.part(group, || section_words(begun).to_owned());
            continue;
        }
        place += 1;
        if matches!(section, Section::One | Section::Two) && flag.is_against(place) {
            listener.complain(group, "code table 3334: doubtful or wrong", || {
                "flagged as doubtful or wrong: not used".to_owned()
            });
            // A speed of three figures belongs to its wind.
            if section == Section::One
                && group.first() == b'0'
                && group.figures(3, 5) == Figures::Value(99)
                && groups.peek().is_some_and(|next| next.text.starts_with(b"00"))
            {
                groups.next();
            }
            continue;
        }
        match section {
            Section::One if group.first() == b'0' && group.is_coded(5) => {
                first.wind(group, &mut groups, listener);
            }
            Section::One => first.group(group, nominal, listener),
            Section::Two => marine(group, &mut first.report, listener),
            Section::Technical => technical(group, &mut first.report, listener),
            Section::Zero => listener.complain(group, "FM 18: 111QdQx, 222QdQx, 333, 444", || {
                "no section begins so: not read".to_owned()
            }),
            Section::Depths => listener.part(group, || "temperature or current below".to_owned()),
            Section::National => listener.part(group, || "national".to_owned()),
        }
    }
    first.finish();
    Outcome::Report(first.report)
}

const fn section_words(section: Section) -> &'static str {
    match section {
        Section::Zero => "section 0: who, when, where",
        Section::One => "section 1: the air",
        Section::Two => "section 2: the sea",
        Section::Depths => "section 3: below the surface, not read",
        Section::Technical => "section 4: the buoy itself",
        Section::National => "national section: not read",
    }
}

/// Section 2: `0snTwTwTw 1PwaPwaHwaHwa 20PwaPwaPwa 21HwaHwaHwa`.
fn marine<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    if !group.is_coded(5) {
        listener.complain(group, "FM 18 section 2: five figures or solidi", || {
            "the group cannot be read".to_owned()
        });
        return;
    }
    match group.text {
        [b'0', ..] => {
            report.sea_temperature_c = element::temperature_c(
                group,
                "sea temperature",
                "FM 18 section 2, 0snTwTwTw",
                listener,
            );
        }
        [b'1' | b'2', ..] => listener.part(group, || "waves, measured".to_owned()),
        _ => listener.part(group, || "not read".to_owned()),
    }
}

/// Section 4: only `6AhAhAhAN`, the height of the anemometer in decimetres; 999 says that the wind
/// is brought to 10 m already (regulation 18.6.11).
fn technical<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    match (group.text, group.figures(1, 4)) {
        ([b'6', _, _, _, _], Figures::Value(999)) => {
            report.anemometer_height_m = Some(10.0);
            listener.part(group, || "wind brought to a height of 10 m".to_owned());
        }
        ([b'6', _, _, _, _], Figures::Value(height)) => {
            let height_m = f64::from(height) / 10.0;
            report.anemometer_height_m = Some(height_m);
            listener.part(group, || format!("anemometer at {height_m:.1} m"));
        }
        _ => listener.part(group, || "state of the buoy: not read".to_owned()),
    }
}

#[cfg(test)]
mod tests;
