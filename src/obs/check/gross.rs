//! Gross limits (METHODS QC-1): what no weather does.

use std::ops::RangeInclusive;

use super::{Case, Findings};
use crate::obs::reduction::standard_pressure_hpa;
use crate::obs::{Element, Verdict};
use crate::quantity::{kt_from_m_s, m_s_from_kt};
use crate::report::Platform;

/// Sea-level pressures that exist, hPa.
pub const PRESSURE_MSL_HPA: RangeInclusive<f64> = 870.0..=1085.0;
/// Sea-level pressures that raise no eyebrow, hPa.
const PRESSURE_MSL_USUAL_HPA: RangeInclusive<f64> = 930.0..=1050.0;
/// Station pressures that exist, hPa.
pub const PRESSURE_STATION_HPA: RangeInclusive<f64> = 400.0..=1085.0;
/// Distance from the standard atmosphere at the station's height that is usual, hPa.
const STANDARD_ATMOSPHERE_HPA: f64 = 60.0;
/// 3-hour changes, hPa: refused above the second, suspect above the first.
const CHANGE_3H_HPA: (f64, f64) = (15.0, 40.0);
/// 24-hour changes, hPa.
const CHANGE_24H_HPA: (f64, f64) = (40.0, 80.0);
/// Air temperatures that exist, degrees Celsius.
pub const AIR_TEMPERATURE_C: RangeInclusive<f64> = -90.0..=60.0;
/// Mean winds that exist, m/s.
pub const WIND_M_S: RangeInclusive<f64> = 0.0..=75.0;
/// Mean wind above which a ship's is suspect, kt (marine minimum standards).
const SHIP_WIND_KT: f64 = 80.0;
/// Highest gust, m/s.
const GUST_M_S: f64 = 110.0;
/// Ratio of gust to mean wind above which both are suspect, with a mean above 5 m/s.
const GUST_RATIO: f64 = 3.0;
/// Sea temperatures that exist, degrees Celsius.
const SEA_TEMPERATURE_C: RangeInclusive<f64> = -2.5..=40.0;

const CHECK: &str = "QC-1 gross limits";

/// Which values of a report are within the limits.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[expect(clippy::struct_excessive_bools, reason = "one answer for each value")]
pub struct Within {
    /// The reported sea-level pressure.
    pub pressure_msl: bool,
    /// The station pressure.
    pub pressure_station: bool,
    /// The altimeter setting.
    pub altimeter: bool,
    /// The mean wind.
    pub wind: bool,
    /// The air temperature.
    pub air_temperature: bool,
    /// The dew point.
    pub dew_point: bool,
}

/// Checks every value against its limits.
///
/// A pressure that is out of limits while another one of the report can take its place is
/// noted as doubtful, not refused: the element is still usable.
pub fn check(case: &Case<'_>, findings: &mut Findings) -> Within {
    let report = case.report;
    let inside = |value: Option<f64>, limits: &RangeInclusive<f64>| {
        value.is_none_or(|value| limits.contains(&value))
    };
    let within = Within {
        pressure_msl: inside(report.pressure_msl_hpa, &PRESSURE_MSL_HPA),
        pressure_station: inside(report.pressure_station_hpa, &PRESSURE_STATION_HPA),
        altimeter: inside(report.altimeter_hpa, &PRESSURE_MSL_HPA),
        wind: inside(report.wind_speed_m_s, &WIND_M_S),
        air_temperature: inside(report.air_temperature_c, &AIR_TEMPERATURE_C),
        dew_point: inside(report.dew_point_c, &AIR_TEMPERATURE_C),
    };
    pressures(case, within, findings);
    changes(case, findings);
    winds(case, within, findings);
    temperatures(case, findings);
    within
}

fn pressures(case: &Case<'_>, within: Within, findings: &mut Findings) {
    let report = case.report;
    let sound = [
        report.pressure_msl_hpa.is_some() && within.pressure_msl,
        report.pressure_station_hpa.is_some() && within.pressure_station,
        report.altimeter_hpa.is_some() && within.altimeter,
        report.standard_surface.is_some(),
    ];
    let verdict = if sound.contains(&true) { Verdict::Doubtful } else { Verdict::Refused };
    let mut outside = |what: &str, value: Option<f64>, limits: &RangeInclusive<f64>, ok: bool| {
        if let Some(value) = value.filter(|_| !ok) {
            let (low, high) = (limits.start(), limits.end());
            let reason = format!("{what} {value:.1} hPa is outside {low:.0} to {high:.0}");
            findings.add(Element::Pressure, verdict, CHECK, reason);
        }
    };
    outside("sea-level pressure", report.pressure_msl_hpa, &PRESSURE_MSL_HPA, within.pressure_msl);
    outside(
        "station pressure",
        report.pressure_station_hpa,
        &PRESSURE_STATION_HPA,
        within.pressure_station,
    );
    outside("altimeter setting", report.altimeter_hpa, &PRESSURE_MSL_HPA, within.altimeter);
    if let Some(value) = report.pressure_msl_hpa
        && within.pressure_msl
        && !PRESSURE_MSL_USUAL_HPA.contains(&value)
    {
        let reason = format!("sea-level pressure {value:.1} hPa is outside 930 to 1050");
        findings.add(Element::Pressure, Verdict::Doubtful, CHECK, reason);
    }
    if let (Some(value), Some(height_m)) =
        (report.pressure_station_hpa, case.site.barometer_height_m)
        && within.pressure_station
    {
        let standard_hpa = standard_pressure_hpa(height_m);
        if (value - standard_hpa).abs() > STANDARD_ATMOSPHERE_HPA {
            let reason = format!(
                "station pressure {value:.1} hPa is more than 60 from the {standard_hpa:.1} of the \
                 standard atmosphere at {height_m:.0} m"
            );
            findings.add(Element::Pressure, Verdict::Doubtful, CHECK, reason);
        }
    }
}

fn changes(case: &Case<'_>, findings: &mut Findings) {
    let mut change = |hours: u8, value: Option<f64>, (suspect, refused): (f64, f64)| {
        let Some(value) = value.filter(|value| value.abs() > suspect) else {
            return;
        };
        let (verdict, limit) = if value.abs() > refused {
            (Verdict::Refused, refused)
        } else {
            (Verdict::Doubtful, suspect)
        };
        let reason = format!("{hours} h change {value:+.1} hPa is more than {limit:.0}");
        findings.add(Element::Tendency, verdict, CHECK, reason);
    };
    change(3, case.report.pressure_change_3h_hpa, CHANGE_3H_HPA);
    change(24, case.report.pressure_change_24h_hpa, CHANGE_24H_HPA);
}

fn winds(case: &Case<'_>, within: Within, findings: &mut Findings) {
    let report = case.report;
    let mut add = |verdict, reason| findings.add(Element::Wind, verdict, CHECK, reason);
    let Some(mean) = report.wind_speed_m_s else {
        return;
    };
    if !within.wind {
        add(Verdict::Refused, format!("mean wind {mean:.1} m/s is outside 0 to 75"));
        return;
    }
    if report.platform == Platform::Ship && mean > m_s_from_kt(SHIP_WIND_KT) {
        add(Verdict::Doubtful, format!("a ship's mean wind of {:.0} kt", kt_from_m_s(mean)));
    }
    if let Some(gust) = report.wind_gust_m_s {
        // Units round mean and gust apart: half a metre a second is no contradiction.
        if gust < mean - 0.5 {
            add(Verdict::Doubtful, format!("gust {gust:.1} m/s is below the mean of {mean:.1}"));
        } else if gust > GUST_M_S {
            add(Verdict::Doubtful, format!("gust {gust:.1} m/s is above 110"));
        } else if mean > 5.0 && gust > GUST_RATIO * mean {
            add(
                Verdict::Doubtful,
                format!("gust {gust:.1} m/s is more than 3 times the mean of {mean:.1}"),
            );
        }
    }
}

fn temperatures(case: &Case<'_>, findings: &mut Findings) {
    let report = case.report;
    let mut outside = |what: &str, value: Option<f64>, limits: &RangeInclusive<f64>, verdict| {
        if let Some(value) = value.filter(|value| !limits.contains(value)) {
            let (low, high) = (limits.start(), limits.end());
            let reason = format!("{what} {value:.1} C is outside {low} to {high}");
            findings.add(Element::Temperature, verdict, CHECK, reason);
        }
    };
    outside("air temperature", report.air_temperature_c, &AIR_TEMPERATURE_C, Verdict::Refused);
    outside("dew point", report.dew_point_c, &AIR_TEMPERATURE_C, Verdict::Doubtful);
    outside("sea temperature", report.sea_temperature_c, &SEA_TEMPERATURE_C, Verdict::Doubtful);
    if let (Some(air), Some(dew)) = (report.air_temperature_c, report.dew_point_c)
        && AIR_TEMPERATURE_C.contains(&air)
        && dew > air + 0.1 + 1e-9
    {
        let reason = format!("dew point {dew:.1} C is above the air temperature of {air:.1}");
        findings.add(Element::Temperature, Verdict::Doubtful, CHECK, reason);
    }
    if let Some(humidity) = report.relative_humidity_percent
        && !(0.0..=100.0).contains(&humidity)
    {
        let reason = format!("relative humidity {humidity:.0} per cent is outside 0 to 100");
        findings.add(Element::Temperature, Verdict::Doubtful, "QC-2 humidity", reason);
    }
}
