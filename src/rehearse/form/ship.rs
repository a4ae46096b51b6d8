//! FM 13 SHIP, each report with its own BBXX.

use super::{
    Slip, change_group, oktas, pressure_group, quadrant_and_figures, temperature_group,
    wind_figures, wind_indicator, written_msl_hpa,
};
use crate::quantity::whole_nearest;
use crate::rehearse::measured::Measured;
use crate::rehearse::scenario::WindUnit;

/// Ds of a course (code table 0700): 1 north-east, then with the sun to 8 north.
fn course_figure(course_deg: f64) -> i64 {
    let eighth = whole_nearest(course_deg / 45.0).rem_euclid(8);
    if eighth == 0 { 8 } else { eighth }
}

/// vs of a speed in knots (code table 4451): 1 for 1 to 5, and so on to 9 for more than 40.
fn speed_figure(speed_kt: f64) -> i64 {
    let whole = whole_nearest(speed_kt);
    if whole <= 0 { 0 } else { ((whole - 1) / 5 + 1).min(9) }
}

/// One report, with its closing sign. `observer` says whether the wind is measured.
pub(in crate::rehearse) fn write(
    id: &str,
    m: &Measured,
    wind: WindUnit,
    measured: bool,
    slip: Slip,
) -> String {
    let (day, hour, _) = super::day_hour_minute(m.time);
    let (quadrant, latitude, longitude) = quadrant_and_figures(m, 10.0, slip);
    let spread_c = m.air_c - m.dew_point_c;
    let cloud = oktas(m);
    let (wind_text, more) = wind_figures(m, wind);
    // VV at sea (code table 4377): 98 20 km, 97 10 km, 96 4 km.
    let visibility = match spread_c {
        2.5.. => 98,
        1.0.. => 97,
        _ => 96,
    };
    let mut groups = vec![
        "BBXX".to_owned(),
        id.to_owned(),
        format!("{day}{hour}{}", wind_indicator(wind, measured)),
        format!("99{latitude:03}"),
        format!("{quadrant}{longitude:04}"),
        format!("425{visibility}"),
        format!("{cloud}{wind_text}"),
    ];
    groups.extend(more);
    groups.push(temperature_group('1', m.air_c));
    groups.push(temperature_group('2', m.dew_point_c));
    groups.push(pressure_group('4', written_msl_hpa(m, slip)));
    groups.push(change_group(m, slip));
    let (course_deg, speed_kt) = m.made_good;
    let speed = speed_figure(speed_kt);
    let course = if speed == 0 { 0 } else { course_figure(course_deg) };
    groups.push(format!("222{course}{speed}"));
    // ss: 0 and 1, intake (code table 3850, from memory).
    groups.push(temperature_group('0', m.sea_c));
    // Wind sea of a steady wind, in half-metres and seconds; own rough figures.
    let height = whole_nearest(2.0 * 0.02 * m.wind_m_s * m.wind_m_s).clamp(0, 30);
    let period = whole_nearest(2.0 + 0.42 * m.wind_m_s).clamp(2, 18);
    groups.push(format!("2{period:02}{height:02}"));
    groups.join(" ") + "="
}

#[cfg(test)]
mod tests {
    use super::*;

    /// WMO-No. 306, code tables 0700 and 4451 (as METHODS COD-4 gives them).
    #[test]
    fn course_and_speed_have_the_figures_of_their_tables() {
        for (course_deg, figure) in [(45.0, 1), (90.0, 2), (182.0, 4), (314.0, 7), (350.0, 8)] {
            assert_eq!(course_figure(course_deg), figure);
        }
        for (speed_kt, figure) in [(0.0, 0), (3.0, 1), (6.0, 2), (10.4, 2), (18.0, 4), (60.0, 9)] {
            assert_eq!(speed_figure(speed_kt), figure);
        }
    }
}
