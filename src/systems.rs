//! Highs and lows: found in each hour's analysis, followed from hour to hour, rated, extrapolated.

use serde::{Deserialize, Serialize};

use crate::instant::{Hour, Instant};
use crate::sphere::Position;

pub mod basin;
pub mod centre;
pub mod follow;
pub mod motion;
pub mod names;
pub mod outlook;
pub mod rating;
pub mod strength;
pub mod track;
pub mod verification;

/// High or low.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Kind {
    /// A high.
    High,
    /// A low.
    Low,
}

/// What a system is doing.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Phase {
    /// New, not yet confirmed.
    Forming,
    /// A low whose pressure falls, or a high whose pressure rises ("building").
    Deepening,
    /// Neither.
    Steady,
    /// A low whose pressure rises, or a high that weakens.
    Filling,
    /// No longer found in the newest analysis; carried forward.
    Ending,
}

/// A value with its standard error.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct Measured {
    /// The value.
    pub value: f64,
    /// Its standard error, same unit.
    pub error: f64,
}

impl Measured {
    /// The error as it is shown with so many decimals: rounded up, so that a small one is never
    /// shown as none.
    pub fn error_shown(&self, decimals: usize) -> f64 {
        let scale = 10_f64.powi(i32::try_from(decimals).unwrap_or(0));
        // A hair's breadth keeps 0.7 from becoming 0.8 by the last bit.
        (self.error * scale - 1e-9).ceil().max(1.0) / scale
    }
}

/// One point of a track.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct TrackPoint {
    /// When.
    pub hour: Hour,
    /// Where (filtered and smoothed).
    pub position: Position,
    /// Standard error of the position (each axis), km.
    pub position_error_km: f64,
    /// Central pressure, hPa.
    pub pressure_hpa: f64,
    /// Its standard error, hPa.
    pub pressure_error_hpa: f64,
    /// Whether it was found in that hour's analysis, or carried over a gap.
    pub observed: bool,
}

/// Where a system will be if it carries on: an extrapolation, not a forecast.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct OutlookPoint {
    /// Hours after the valid time.
    pub lead_h: i64,
    /// Where.
    pub position: Position,
    /// Long half-axis of the one-sigma error ellipse, km.
    pub major_km: f64,
    /// Short half-axis, km.
    pub minor_km: f64,
    /// Bearing of the long axis, degrees.
    pub axis_deg: f64,
    /// Central pressure, hPa, with its error.
    pub pressure_hpa: Measured,
}

/// Something that happened to a track.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct TrackEvent {
    /// When.
    pub hour: Hour,
    /// What, in words: `found`, `merged into L3`, `split from L1`, `lost`, `renamed`.
    pub what: String,
}

/// A high or low that is being followed.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct System {
    /// Short stable name, e.g. `L4` or `H2`; never used again within ten days.
    pub name: String,
    /// High or low.
    pub kind: Kind,
    /// Where at the valid time.
    pub position: Position,
    /// Standard error of the position, km.
    pub position_error_km: f64,
    /// Central pressure, hPa.
    pub pressure_hpa: Measured,
    /// Change over 3 h, hPa, with its error; negative is falling. `None` where not followed so long.
    pub change_3h_hpa: Option<Measured>,
    /// Change over 6 h.
    pub change_6h_hpa: Option<Measured>,
    /// Change over 12 h.
    pub change_12h_hpa: Option<Measured>,
    /// Change over 24 h.
    pub change_24h_hpa: Option<Measured>,
    /// Deepening in bergerons over 24 h (Sanders and Gyakum 1980), positive for deepening lows.
    /// `None` for highs and where it was not followed for 24 h.
    pub bergeron: Option<Measured>,
    /// The same rate over the last 12 h, an earlier sign.
    pub bergeron_12h: Option<Measured>,
    /// Course it moves towards, degrees true, `None` where it hardly moves.
    pub course_deg: Option<f64>,
    /// Standard error of the course, degrees.
    pub course_error_deg: Option<f64>,
    /// Speed, kt, with its error.
    pub speed_kt: Option<Measured>,
    /// What it is doing.
    pub phase: Phase,
    /// Probability that it is real, 0 to 1, from the analysis error.
    pub confidence: f64,
    /// Depth to the last closed isobar, hPa.
    pub depth_hpa: f64,
    /// Pressure of the last closed isobar, hPa.
    pub last_closed_isobar_hpa: Option<f64>,
    /// Radius of a circle of the area inside it, km.
    pub radius_km: Option<f64>,
    /// Greatest distance from the centre of gale-force expected surface wind, km.
    pub gale_radius_km: Option<f64>,
    /// When it was first found.
    pub since: Hour,
    /// Its past, oldest first, the last point at or before the valid time.
    pub track: Vec<TrackPoint>,
    /// Its extrapolation at 3, 6, 12, 18 and 24 h, empty while it cannot be trusted.
    pub outlook: Vec<OutlookPoint>,
    /// What happened to it.
    pub events: Vec<TrackEvent>,
    /// Reports within its last closed isobar in the newest hour.
    pub reports_inside: usize,
}

impl System {
    /// The last hour in which it was found.
    pub fn last_found(&self) -> Option<Instant> {
        self.track.iter().rev().find(|point| point.observed).map(|point| point.hour.instant())
    }
}
