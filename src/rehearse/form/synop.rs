//! FM 12 SYNOP, without the line AAXX YYGGiw that opens the bulletin.

use super::{
    Slip, change_group, oktas, pressure_group, speed_figures, temperature_group, wind_figures,
    wind_indicator, written_msl_hpa,
};
use crate::rehearse::measured::Measured;
use crate::rehearse::scenario::WindUnit;

/// The line that opens a bulletin: AAXX YYGGiw.
pub(in crate::rehearse) fn opening(time: crate::instant::Instant, wind: WindUnit) -> String {
    let (day, hour, _) = super::day_hour_minute(time);
    format!("AAXX {day}{hour}{}", wind_indicator(wind, true))
}

/// How a station writes: its wind unit (which may be the wrong one) and whether it is manned.
#[derive(Clone, Copy, Debug)]
pub(in crate::rehearse) struct Habit {
    pub(in crate::rehearse) wind: WindUnit,
    pub(in crate::rehearse) manned: bool,
    /// Whether the change over 24 hours is given at this time.
    pub(in crate::rehearse) day_change: bool,
}

/// One report, with its closing sign.
pub(in crate::rehearse) fn write(id: &str, m: &Measured, habit: Habit, slip: Slip) -> String {
    let spread_c = m.air_c - m.dew_point_c;
    let wet = spread_c < 1.0;
    let mut groups = vec![id.to_owned()];
    // iR ix h VV: ix 1 manned with, 2 without weather to report, 5 automatic without (code table
    // 1860); VV 20, 10 or 4 km (code table 4377).
    let visibility = match spread_c {
        2.5.. => 70,
        1.0.. => 60,
        _ => 40,
    };
    let (kind, base) = match (habit.manned, wet) {
        (true, true) => ('1', '4'),
        (true, false) => ('2', '5'),
        (false, _) => ('5', '/'),
    };
    groups.push(format!("4{kind}{base}{visibility}"));
    let cloud = oktas(m);
    let (wind, more) = wind_figures(m, habit.wind);
    groups.push(if habit.manned { format!("{cloud}{wind}") } else { format!("/{wind}") });
    groups.extend(more);
    groups.push(temperature_group('1', m.air_c));
    groups.push(temperature_group('2', m.dew_point_c));
    groups.push(pressure_group('3', m.station_hpa));
    groups.push(pressure_group('4', written_msl_hpa(m, slip)));
    groups.push(change_group(m, slip));
    if habit.manned && wet {
        // Slight rain or snow now, rain or snow before (code tables 4677 and 4561).
        groups.push(if m.air_c > 1.0 { "76166" } else { "77177" }.to_owned());
    }
    if habit.manned && cloud > 0 {
        groups.push(format!("8{cloud}5//"));
    }
    let mut third = Vec::new();
    if habit.day_change {
        let sign = if m.change_24h_tenths < 0 { '9' } else { '8' };
        third.push(format!("5{sign}{:03}", m.change_24h_tenths.abs().min(999)));
    }
    if let Some(gust_m_s) = m.gust_m_s {
        let gust = speed_figures(gust_m_s, habit.wind);
        third.push(format!("910{:02}", gust.min(99)));
        if gust >= 99 {
            third.push(format!("00{gust:03}"));
        }
    }
    if !third.is_empty() {
        groups.push("333".to_owned());
        groups.extend(third);
    }
    groups.join(" ") + "="
}
