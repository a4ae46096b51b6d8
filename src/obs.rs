//! Reports placed, timed, reduced to mean sea level, checked, and held.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use crate::instant::{Hour, Instant};
use crate::report::{Identifier, Platform, Report};
use crate::sphere::Position;

pub mod catalogue;
pub mod check;
pub mod error;
pub mod held;
mod judge;
pub mod observe;
pub mod reduction;
pub mod series;
pub mod wind;

pub use catalogue::Catalogue;
pub use held::Held;
pub use observe::{HourObserved, Observed, Observer, observe, observe_hour};

/// What can be set about the making of observations.
#[derive(Clone, PartialEq, Debug)]
pub struct ObsSettings {
    /// Barometers above this height, m, do not enter the sea-level analysis (RED-3).
    pub station_height_max_m: f64,
    /// The watchkeeper's verdicts, by [`decision_key`].
    pub overruled: BTreeMap<String, Verdict>,
}

impl Default for ObsSettings {
    fn default() -> Self {
        Self { station_height_max_m: 1000.0, overruled: BTreeMap::new() }
    }
}

/// What a decision about a report is kept under: platform, station and time, e.g.
/// `ship ABCD 2026-01-15T12:00:00Z`.
pub fn decision_key(report: &Report) -> String {
    format!("{} {} {}", report.platform.word(), report.station, report.time)
}

/// Where a held report came from.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
pub struct Provenance {
    /// File name, without its folder, made printable.
    pub file: String,
    /// Hash of the file's content, hexadecimal.
    pub content: String,
    /// First byte of the report in the expanded file.
    pub start: usize,
    /// One past its last byte.
    pub end: usize,
    /// When the file was received.
    pub received: Instant,
}

/// How far a value or a report is to be trusted, and why.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Verdict {
    /// Nothing against it.
    Sound,
    /// Used, with a larger error, and shown as doubtful.
    Doubtful,
    /// Not used.
    Refused,
}

/// One finding of a check.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Finding {
    /// Which element: `pressure`, `wind`, `tendency`, `position`, `time`, `temperature`.
    pub element: Element,
    /// What is made of it.
    pub verdict: Verdict,
    /// Which check, e.g. `QC-2 tendency against own series`.
    pub check: String,
    /// The reason in words with its numbers.
    pub reason: String,
}

/// The element a finding is about.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Element {
    /// Sea-level or station pressure.
    Pressure,
    /// Wind.
    Wind,
    /// 3-hour change and characteristic.
    Tendency,
    /// Where the report says it is.
    Position,
    /// When.
    Time,
    /// Air, dew-point or sea temperature.
    Temperature,
}

/// How the sea-level pressure of an observation was come by.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum PressureSource {
    /// As the station reported it.
    Reported,
    /// Reduced here from station pressure (RED-1).
    ReducedFromStation,
    /// From the altimeter setting (COD-10).
    FromAltimeter,
    /// From the height of a standard surface.
    FromStandardSurface,
}

/// A held report after placing, reduction and its own checks: what the analysis works on.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Observation {
    /// The report as sent (the winning copy).
    pub report: Report,
    /// Where it was made.
    pub position: Position,
    /// The hour it counts for.
    pub hour: Hour,
    /// Height of the barometer, m, where known or needed.
    pub barometer_height_m: Option<f64>,
    /// Sea-level pressure, hPa, and its observation error (standard deviation), where sound or
    /// doubtful; a refused pressure is `None` here and a finding below.
    pub pressure_msl_hpa: Option<f64>,
    /// Observation error of the pressure, hPa (METHODS ANA-4, RED-3).
    pub pressure_error_hpa: f64,
    /// How it was come by.
    pub pressure_source: Option<PressureSource>,
    /// 10 m wind towards east and north, m/s, where sound or doubtful (height corrected, WND-9).
    pub wind_m_s: Option<(f64, f64)>,
    /// Error of each wind component, m/s (METHODS ANA-4).
    pub wind_error_m_s: f64,
    /// What the checks found, in a fixed order.
    pub findings: Vec<Finding>,
    /// Where the winning copy came from.
    pub provenance: Provenance,
}

impl Observation {
    /// The worst verdict on an element; sound where nothing was found.
    pub fn verdict(&self, element: Element) -> Verdict {
        self.findings
            .iter()
            .filter(|finding| finding.element == element)
            .map(|finding| finding.verdict)
            .max()
            .unwrap_or(Verdict::Sound)
    }

    /// The key that observations are ordered and followed by.
    pub const fn key(&self) -> (Platform, Identifier, Instant) {
        (self.report.platform, self.report.station, self.report.time)
    }

    /// Whether it stands on the sea.
    pub const fn at_sea(&self) -> bool {
        matches!(self.report.platform, Platform::Ship | Platform::Buoy)
    }
}
