//! FM 18 BUOY, each report with its own ZZYY.

use super::{
    Slip, change_group, pressure_group, quadrant_and_figures, temperature_group, wind_figures,
    wind_indicator, written_msl_hpa,
};
use crate::rehearse::measured::Measured;
use crate::rehearse::scenario::WindUnit;

/// One report, with its closing sign.
pub(in crate::rehearse) fn write(id: &str, m: &Measured, slip: Slip) -> String {
    let unit = WindUnit::MetresPerSecond;
    let (_, hour, minute) = super::day_hour_minute(m.time);
    // YYMMJ: day, month, last figure of the year.
    let date = m.time.calendar().map_or_else(
        || "/////".to_owned(),
        |time| {
            let year = time.format("%Y").to_string();
            time.format("%d%m").to_string() + &year.chars().next_back().unwrap_or('/').to_string()
        },
    );
    let (quadrant, latitude, longitude) = quadrant_and_figures(m, 1000.0, slip);
    let (wind, more) = wind_figures(m, unit);
    let mut groups = vec![
        "ZZYY".to_owned(),
        id.to_owned(),
        date,
        format!("{hour}{minute}{}", wind_indicator(unit, true)),
        format!("{quadrant}{latitude:05}"),
        format!("{longitude:06}"),
        // Quality of position, time and location class all good (code table 3334).
        "6111/".to_owned(),
        // Section 1, all checked and good.
        "11119".to_owned(),
        format!("0{wind}"),
    ];
    groups.extend(more);
    groups.push(temperature_group('1', m.air_c));
    groups.push(pressure_group('4', written_msl_hpa(m, slip)));
    groups.push(change_group(m, slip));
    groups.push("22219".to_owned());
    groups.push(temperature_group('0', m.sea_c));
    groups.join(" ") + "="
}
