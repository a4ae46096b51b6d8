//! Winds that the pressure field implies, the surface wind to expect, and how it agrees with what
//! was observed; convergence and what it implies.

use std::sync::Arc;

use serde::{Deserialize, Serialize};

use crate::field::Grid;
use crate::instant::{Hour, Instant};
use crate::report::Platform;
use crate::sphere::Position;

pub mod balance;
pub mod beaufort;
pub mod convergence;
pub mod fields;
pub mod land;
pub mod stations;
pub mod surface_layer;

/// A wind: where it blows from and how fast.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct Wind {
    /// Where it blows from, degrees true in (0, 360], 0 for calm.
    pub from_deg: f64,
    /// Speed, m/s.
    pub speed_m_s: f64,
}

/// The winds at one point.
#[derive(Clone, Copy, PartialEq, Debug, Default, Serialize, Deserialize)]
pub struct PointWinds {
    /// Geostrophic; `None` within 10 degrees of the equator.
    pub geostrophic: Option<Wind>,
    /// Gradient.
    pub gradient: Option<Wind>,
    /// Expected at 10 m (WND-7 over the gradient wind).
    pub surface: Option<Wind>,
    /// Standard error of the expected speed, m/s, from the analysis error.
    pub surface_error_m_s: Option<f64>,
    /// Whether the gradient is too strong for the anticyclonic curvature (WND-3) and was capped.
    pub capped: bool,
    /// Whether the latitude makes the balanced wind weak evidence (10 to 20 degrees).
    pub low_latitude: bool,
}

/// A station or watch point in the Winds pane.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct StationWind {
    /// Who, or the name of a watch point.
    pub station: String,
    /// What kind of place; `None` for a watch point.
    pub platform: Option<Platform>,
    /// Where.
    pub position: Position,
    /// Time of the observation.
    pub time: Option<Instant>,
    /// As observed, brought to 10 m.
    pub observed: Option<Wind>,
    /// Gust as observed, m/s.
    pub gust_m_s: Option<f64>,
    /// What the pressure implies.
    pub winds: PointWinds,
    /// Observed minus expected speed, m/s.
    pub speed_difference_m_s: Option<f64>,
    /// Observed minus expected direction, degrees, positive where the observed is veered.
    pub direction_difference_deg: Option<f64>,
    /// What explains a disagreement, in words; empty where they agree.
    pub explanation: String,
    /// Analysis error ratio at the place (above 0.7: do not trust).
    pub error_ratio: f64,
}

/// The winds at every grid point of an hour.
#[derive(Clone, PartialEq, Debug)]
pub struct WindField {
    /// The hour.
    pub hour: Hour,
    /// The grid.
    pub grid: Arc<Grid>,
    /// Geostrophic wind towards east and north, m/s; NaN where unknown.
    pub geostrophic_m_s: Vec<[f64; 2]>,
    /// Gradient wind.
    pub gradient_m_s: Vec<[f64; 2]>,
    /// Expected surface wind.
    pub surface_m_s: Vec<[f64; 2]>,
    /// Divergence of the expected surface wind: frictional convergence, 1/s (DIV-5).
    pub divergence_friction_per_s: Vec<f64>,
    /// Divergence of the isallobaric wind, 1/s (TEN-5).
    pub divergence_isallobaric_per_s: Vec<f64>,
    /// Divergence of the analysed observed wind, 1/s.
    pub divergence_observed_per_s: Vec<f64>,
    /// Relative vorticity of the gradient wind, 1/s.
    pub vorticity_per_s: Vec<f64>,
    /// Change of the analysed pressure over 3 h, hPa; NaN where unknown.
    pub change_3h_hpa: Vec<f64>,
}

/// How a convergence was come by.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Method {
    /// From the analysed observed wind.
    Observed,
    /// From surface friction under the gradient wind.
    Friction,
    /// From the isallobaric wind.
    Isallobaric,
}

/// An area of convergence.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct ConvergenceArea {
    /// By which method.
    pub method: Method,
    /// Where it is strongest.
    pub position: Position,
    /// Strongest divergence, 1/s: negative, for it converges.
    pub divergence_per_s: f64,
    /// Its standard error, 1/s, where known.
    pub error_per_s: Option<f64>,
    /// Area, km2, within which it exceeds half its strongest value.
    pub area_km2: f64,
    /// Vertical motion at the top of the lowest kilometre that it implies, m/s, upward positive.
    pub ascent_m_s: f64,
    /// Change of the strongest value over the last 3 h, 1/s; negative is strengthening.
    pub trend_per_s: Option<f64>,
    /// Where it is, in words: bearing and distance from the nearest system.
    pub place: String,
}
