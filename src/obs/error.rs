//! How far an observation can be trusted: the error model (METHODS ANA-4, RED-3, WND).
//!
//! Standard deviations, hPa and m/s a component. They hold the instrument, what the place stands
//! for, the reduction, the rounding of the code and the distance in time from the hour.

use super::PressureSource;
use crate::report::{Form, Platform, Report, WindSource};

/// A barometer on low land, with what its place stands for (METHODS ANA-4).
const LAND_HPA: f64 = 0.6;
/// A ship of unknown equipment (METHODS ANA-4; Kent, Challenor and Taylor 1999 found 2.3 with the
/// blunders that the checks take out).
const SHIP_HPA: f64 = 1.8;
/// A ship that reports its barometer's height by machine: an automatic station.
const SHIP_AUTOMATIC_HPA: f64 = 1.0;
/// A moored buoy.
const BUOY_MOORED_HPA: f64 = 0.7;
/// A drifting buoy.
const BUOY_DRIFTING_HPA: f64 = 0.9;
/// An altimeter setting is never better than this.
const ALTIMETER_MIN_HPA: f64 = 0.7;
/// Error of the temperature of the fictitious column, K (METHODS RED-3, own).
pub const COLUMN_K: f64 = 3.0;
/// The same where the report has no temperature at all, K.
pub const COLUMN_ASSUMED_K: f64 = 10.0;
/// The column above a station up to a standard surface is real air, but the code rounds to whole
/// metres and the temperature aloft is guessed; own figure.
const SURFACE_HPA: f64 = 1.5;
/// Growth with the distance from the hour, hPa for each hour (METHODS ANA-4, own).
const TIME_HPA_H: f64 = 0.3;
/// A doubtful value counts with this many times its error; own figure.
pub const DOUBT_FACTOR: f64 = 2.0;

/// What the error of a pressure depends on beside its report.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct PressureCase {
    /// How the sea-level pressure was come by.
    pub source: PressureSource,
    /// |dp0/dT| times the error of the column's temperature, hPa (METHODS RED-3).
    pub reduction_hpa: f64,
    /// Hours between the report and the hour it counts for.
    pub offset_h: f64,
    /// Height known only roughly: its error in m, times 0.12 hPa/m (METHODS RED-2).
    pub height_error_m: f64,
}

/// Standard deviation of an observed sea-level pressure, hPa (METHODS ANA-4).
pub fn pressure_hpa(report: &Report, case: &PressureCase) -> f64 {
    let instrument = match report.platform {
        Platform::Land | Platform::Aerodrome => LAND_HPA,
        Platform::Ship if report.barometer_height_m.is_some() => SHIP_AUTOMATIC_HPA,
        Platform::Ship => SHIP_HPA,
        Platform::Buoy if is_drifting(report) => BUOY_DRIFTING_HPA,
        Platform::Buoy => BUOY_MOORED_HPA,
    };
    let rounding = match case.source {
        PressureSource::FromAltimeter => report.altimeter_rounding_hpa.clamp(0.0, 10.0),
        PressureSource::FromStandardSurface => SURFACE_HPA,
        PressureSource::Reported | PressureSource::ReducedFromStation => 0.0,
    };
    let variance = instrument.powi(2)
        + rounding.powi(2)
        + case.reduction_hpa.powi(2)
        + (0.12 * case.height_error_m).powi(2)
        + (TIME_HPA_H * case.offset_h).powi(2);
    let sigma = variance.sqrt();
    if case.source == PressureSource::FromAltimeter { sigma.max(ALTIMETER_MIN_HPA) } else { sigma }
}

/// Whether a buoy drifts: by its WMO number the buoys 500 and above of each area do (FM 18), and
/// one that makes way does.
fn is_drifting(report: &Report) -> bool {
    let name = report.station.as_str();
    let number = name.get(name.len().saturating_sub(3)..).and_then(|tail| tail.parse::<u16>().ok());
    let numbered = matches!(name.len(), 5 | 7) && number.is_some_and(|number| number >= 500);
    numbered || report.speed_m_s.is_some_and(|speed| speed > 0.0)
}

/// Standard deviation of each component of an observed 10 m wind, m/s (METHODS ANA-4).
///
/// `speed_m_s` is the 10 m speed. Land winds stand for little more than their own place; the
/// direction comes in tens of degrees from the character forms.
pub fn wind_m_s(report: &Report, speed_m_s: f64, height_corrected: bool) -> f64 {
    let base = match report.platform {
        Platform::Buoy => 1.5,
        Platform::Ship if height_corrected || report.wind_source == WindSource::Estimated => 2.1,
        // A measured wind of unknown height: 10 to 40 m make 0 to 17 per cent.
        Platform::Ship => 2.1 + 0.05 * speed_m_s,
        Platform::Land | Platform::Aerodrome => 2.5,
    };
    let coded_in_tens = !matches!(report.form, Form::Bufr | Form::Csv | Form::Json);
    // Ten degrees of rounding: 10/sqrt(12) degrees across the wind, half of it a component.
    let rounding = if coded_in_tens { speed_m_s * 0.05 / std::f64::consts::SQRT_2 } else { 0.0 };
    let time = 0.5 * report.time.hours_since(report.time.hour_nearest().instant());
    (base * base + rounding * rounding + time * time).sqrt()
}
