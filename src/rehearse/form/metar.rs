//! FM 15 METAR.

use super::{Slip, change_group, oktas, speed_figures};
use crate::quantity::{hpa_from_inches_of_mercury, whole_below, whole_nearest, wrap_360_deg};
use crate::rehearse::measured::Measured;
use crate::rehearse::scenario::{AltimeterUnit, WindUnit};

/// How an aerodrome writes.
#[derive(Clone, Copy, Debug)]
pub(in crate::rehearse) struct Habit {
    pub(in crate::rehearse) altimeter: AltimeterUnit,
    pub(in crate::rehearse) manned: bool,
    pub(in crate::rehearse) corrected: bool,
}

/// One report, with its closing sign.
pub(in crate::rehearse) fn write(id: &str, m: &Measured, habit: Habit, slip: Slip) -> String {
    let (day, hour, minute) = super::day_hour_minute(m.time);
    let mut groups = vec!["METAR".to_owned()];
    if habit.corrected {
        groups.push("COR".to_owned());
    }
    groups.push(id.to_owned());
    groups.push(format!("{day}{hour}{minute}Z"));
    if !habit.manned {
        groups.push("AUTO".to_owned());
    }
    groups.push(wind_group(m));
    let spread_c = m.air_c - m.dew_point_c;
    groups.push(if spread_c > 1.5 { "9999" } else { "6000" }.to_owned());
    groups.push(
        match oktas(m) {
            0..=2 => "FEW030",
            3..=4 => "SCT025",
            5..=7 => "BKN018",
            _ => "OVC009",
        }
        .to_owned(),
    );
    groups.push(format!("{}/{}", whole_degrees(m.air_c), whole_degrees(m.dew_point_c)));
    let slipped_hpa = if slip == Slip::PressureTens { 10.0 } else { 0.0 };
    let altimeter_hpa = m.altimeter_hpa + slipped_hpa;
    match habit.altimeter {
        // Rounded down (COD-9).
        AltimeterUnit::Hectopascals => groups.push(format!("Q{:04}", whole_below(altimeter_hpa))),
        AltimeterUnit::Inches => {
            let hundredths = whole_nearest(100.0 * altimeter_hpa / hpa_from_inches_of_mercury(1.0));
            groups.push(format!("A{hundredths:04}"));
            let tenths = whole_nearest(10.0 * (m.msl_hpa + slipped_hpa)).rem_euclid(1000);
            groups.push(format!("RMK SLP{tenths:03}"));
            if m.time.hour_nearest().unix_h().rem_euclid(3) == 0 {
                groups.push(change_group(m, slip));
            }
        }
    }
    groups.join(" ") + "="
}

fn wind_group(m: &Measured) -> String {
    let speed = speed_figures(m.wind_m_s, WindUnit::Knots);
    if speed == 0 {
        return "00000KT".to_owned();
    }
    let tens = whole_nearest(wrap_360_deg(m.wind_from_deg) / 10.0);
    let direction = if tens == 0 { 360 } else { tens * 10 };
    // Common practice, no source: a light wind has no direction worth the name.
    let direction = if speed <= 2 { "VRB".to_owned() } else { format!("{direction:03}") };
    let speed_text = if speed >= 100 { "P99".to_owned() } else { format!("{speed:02}") };
    let gust = m.gust_m_s.map(|gust| speed_figures(gust, WindUnit::Knots));
    match gust {
        // Annex 3 of ICAO: gusts that exceed the mean by 10 kt or more (from memory).
        Some(gust) if gust >= speed + 10 && gust < 100 => {
            format!("{direction}{speed_text}G{gust:02}KT")
        }
        _ => format!("{direction}{speed_text}KT"),
    }
}

fn whole_degrees(temperature_c: f64) -> String {
    let whole = whole_nearest(temperature_c);
    let minus = if temperature_c < 0.0 && whole <= 0 { "M" } else { "" };
    format!("{minus}{:02}", whole.abs())
}
