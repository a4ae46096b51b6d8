//! The code forms, written from what a station measured: shared groups here, one file a form.
//!
//! WMO-No. 306, Volume I.1, Part A. Nothing here is shared with the decoders.

use super::measured::Measured;
use super::scenario::WindUnit;
use crate::quantity::{kt_from_m_s, whole_nearest, wrap_360_deg};

pub(super) mod buoy;
pub(super) mod metar;
pub(super) mod ship;
pub(super) mod synop;
pub(super) mod table;

/// A mistake made in writing one report.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Slip {
    /// None.
    None,
    /// The 3-hour change has the wrong sign.
    ChangeSign,
    /// East and west are exchanged.
    Meridian,
    /// The tens of hectopascals of the sea-level pressure (or altimeter setting) are wrong by one.
    PressureTens,
}

/// `digit` sn and three figures of tenths of a degree: groups 1 and 2.
fn temperature_group(digit: char, temperature_c: f64) -> String {
    let tenths = whole_nearest(10.0 * temperature_c);
    format!("{digit}{}{:03}", u8::from(tenths < 0), tenths.abs().min(999))
}

/// `digit` and four figures of tenths of a hectopascal, thousands omitted: groups 3 and 4.
fn pressure_group(digit: char, pressure_hpa: f64) -> String {
    format!("{digit}{:04}", whole_nearest(10.0 * pressure_hpa).rem_euclid(10_000))
}

/// 5appp.
fn change_group(measured: &Measured, slip: Slip) -> String {
    let figure = match (slip, measured.characteristic) {
        // The mirror image in code table 0200.
        (Slip::ChangeSign, 0..=3) => measured.characteristic + 5,
        (Slip::ChangeSign, 5..=8) => measured.characteristic - 5,
        (_, figure) => figure,
    };
    format!("5{figure}{:03}", measured.change_3h_tenths.abs().min(999))
}

/// Sea-level pressure as it is written, hPa.
fn written_msl_hpa(measured: &Measured, slip: Slip) -> f64 {
    measured.msl_hpa + if slip == Slip::PressureTens { 10.0 } else { 0.0 }
}

/// Speed in whole units of the report.
fn speed_figures(speed_m_s: f64, unit: WindUnit) -> i64 {
    whole_nearest(match unit {
        WindUnit::Knots => kt_from_m_s(speed_m_s),
        WindUnit::MetresPerSecond => speed_m_s,
    })
}

/// ddff, and 00fff where it is needed (code table 0877).
fn wind_figures(measured: &Measured, unit: WindUnit) -> (String, Option<String>) {
    let speed = speed_figures(measured.wind_m_s, unit);
    if speed == 0 {
        return ("0000".to_owned(), None);
    }
    let tens = whole_nearest(wrap_360_deg(measured.wind_from_deg) / 10.0);
    let tens = if tens == 0 { 36 } else { tens };
    if speed >= 99 {
        return (format!("{tens:02}99"), Some(format!("00{speed:03}")));
    }
    (format!("{tens:02}{speed:02}"), None)
}

/// iw (code table 1855).
const fn wind_indicator(unit: WindUnit, measured: bool) -> char {
    match (unit, measured) {
        (WindUnit::MetresPerSecond, false) => '0',
        (WindUnit::MetresPerSecond, true) => '1',
        (WindUnit::Knots, false) => '3',
        (WindUnit::Knots, true) => '4',
    }
}

/// Oktas of cloud: the moister the air, the more. Own choice.
fn oktas(measured: &Measured) -> i64 {
    (8 - whole_nearest(measured.air_c - measured.dew_point_c)).clamp(0, 8)
}

/// Latitude and longitude in units of a part of a degree, with the quadrant of code table 3333.
fn quadrant_and_figures(measured: &Measured, parts: f64, slip: Slip) -> (char, i64, i64) {
    let (latitude_deg, longitude_deg) =
        (measured.position.latitude_deg(), measured.position.longitude_deg());
    let east = (longitude_deg >= 0.0) != (slip == Slip::Meridian);
    let quadrant = match (latitude_deg >= 0.0, east) {
        (true, true) => '1',
        (false, true) => '3',
        (false, false) => '5',
        (true, false) => '7',
    };
    let figures = |degrees: f64| whole_nearest(parts * degrees.abs());
    (quadrant, figures(latitude_deg), figures(longitude_deg))
}

/// Day, hour and minute of a time, two figures each.
pub(super) fn day_hour_minute(time: crate::instant::Instant) -> (String, String, String) {
    time.calendar().map_or_else(
        || ("//".to_owned(), "//".to_owned(), "//".to_owned()),
        |time| {
            let of = |form: &str| time.format(form).to_string();
            (of("%d"), of("%H"), of("%M"))
        },
    )
}
