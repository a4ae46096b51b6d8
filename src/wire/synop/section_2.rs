//! Section 2: maritime elements (METHODS COD-4).

use crate::quantity::m_s_from_kt;
use crate::report::{Platform, Report};
use crate::wire::group::{Figures, Group, tenths};
use crate::wire::listener::Listener;

/// Mid values of the classes of vs, knots (code table 4451; METHODS CHK-019).
const SPEED_KT: [f64; 10] = [0.0, 3.0, 8.0, 13.0, 18.0, 23.0, 28.0, 33.0, 38.0, 43.0];

/// The classes of vs in words.
const SPEED_WORDS: [&str; 10] = [
    "0 kt",
    "1 to 5 kt",
    "6 to 10 kt",
    "11 to 15 kt",
    "16 to 20 kt",
    "21 to 25 kt",
    "26 to 30 kt",
    "31 to 35 kt",
    "36 to 40 kt",
    "over 40 kt",
];

/// `222Dsvs`: course and speed made good over the past three hours.
pub(crate) fn motion<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    let (course, speed) = (group.figure(3), group.figure(4));
    if course.is_none() && speed.is_none() {
        if group.figures(3, 5) == Figures::Missing {
            listener.part(group, || "maritime section; motion not reported".to_owned());
        } else {
            listener.complain(group, "section 2, 222Dsvs", || "no motion can be read".to_owned());
        }
        return;
    }
    // A station on land that sends a motion sends it by mistake.
    if report.platform != Platform::Ship {
        listener.part(group, || "maritime section".to_owned());
        return;
    }
    // Code table 0700: 0 stationary, 1 north-east and so on by 45 degrees, 9 unknown.
    report.course_deg = match course {
        Some(0) => Some(0.0),
        Some(figure @ 1..=8) => Some(f64::from(figure) * 45.0 % 360.0),
        _ => None,
    };
    let class = speed.map(usize::from);
    report.speed_m_s =
        class.and_then(|class| SPEED_KT.get(class)).map(|&speed_kt| m_s_from_kt(speed_kt));
    if course == Some(0) && speed.is_some_and(|speed| speed > 0) {
        report.course_deg = None;
        report.speed_m_s = None;
        listener.complain(group, "code tables 0700 and 4451", || {
            "stationary, yet with a speed: motion not used".to_owned()
        });
        return;
    }
    if course == Some(0) {
        report.speed_m_s = Some(0.0);
    }
    let course_deg = report.course_deg;
    listener.part(group, || {
        let speed = class.and_then(|class| SPEED_WORDS.get(class)).unwrap_or(&"unknown speed");
        match course {
            Some(0) => "maritime section; stationary over 3 h".to_owned(),
            _ => course_deg.map_or_else(
                || format!("maritime section; course unknown, {speed} over 3 h"),
                |course_deg| {
                    let course_deg = if course_deg == 0.0 { 360.0 } else { course_deg };
                    format!("maritime section; course {course_deg:03.0} deg, {speed} over 3 h")
                },
            ),
        }
    });
}

/// A group of section 2 after its first.
pub(crate) fn group<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    if !group.is_coded(5) {
        // Ice may be given in plain language.
        if group.text.iter().all(u8::is_ascii_uppercase) || group.text.first() == Some(&b'I') {
            listener.part(group, || "ice, in words".to_owned());
        } else {
            listener.complain(group, "section 2: five figures or solidi", || {
                "the group cannot be read".to_owned()
            });
        }
        return;
    }
    match group.figure(0) {
        Some(0) => sea_temperature(group, report, listener),
        Some(1) => waves(group, "waves, measured", listener),
        Some(2) => waves(group, "wind sea", listener),
        Some(3) => listener.part(group, || "directions of the swells".to_owned()),
        Some(4) => waves(group, "first swell", listener),
        Some(5) => waves(group, "second swell", listener),
        Some(6) => listener.part(group, || "ice accretion".to_owned()),
        Some(7) => listener.part(group, || {
            group.figures(2, 5).value().map_or_else(
                || "wave height not reported".to_owned(),
                |value| format!("wave height {:.1} m", f64::from(value) / 10.0),
            )
        }),
        Some(8) => listener.part(group, || "wet-bulb temperature".to_owned()),
        _ => listener.part(group, || "not read".to_owned()),
    }
}

/// `0ssTwTwTw`: an even ss is a temperature of zero or above, an odd one below (table 3850).
pub(crate) fn sea_temperature<L: Listener>(
    group: Group<'_>,
    report: &mut Report,
    listener: &mut L,
) {
    let sign = match group.figure(1) {
        Some(figure @ 0..=7) if figure % 2 == 0 => 1,
        Some(0..=7) => -1,
        Some(_) => {
            listener.complain(group, "code table 3850, ss: 0 to 7", || {
                "neither sign nor manner can be told: sea temperature not used".to_owned()
            });
            return;
        }
        None => {
            listener.part(group, || "sea temperature not reported".to_owned());
            return;
        }
    };
    match group.figures(2, 5) {
        Figures::Value(value) => {
            let value = tenths(sign * i32::try_from(value).unwrap_or(0));
            report.sea_temperature_c = Some(value);
            listener.part(group, || format!("sea temperature {value:.1} C"));
        }
        _ => listener.part(group, || "sea temperature not reported".to_owned()),
    }
}

/// Period in seconds, height in half-metres.
fn waves<L: Listener>(group: Group<'_>, name: &'static str, listener: &mut L) {
    listener.part(group, || match (group.figures(1, 3), group.figures(3, 5)) {
        (Figures::Value(99), Figures::Value(height)) => {
            format!("{name}: confused, {:.1} m", f64::from(height) / 2.0)
        }
        (Figures::Value(period), Figures::Value(height)) => {
            format!("{name}: {period} s, {:.1} m", f64::from(height) / 2.0)
        }
        (_, Figures::Value(height)) => format!("{name}: {:.1} m", f64::from(height) / 2.0),
        _ => format!("{name}: not reported"),
    });
}
