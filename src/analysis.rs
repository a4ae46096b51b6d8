//! The objective analysis of one hour: sea-level pressure and wind, with their errors.

use std::sync::Arc;

use crate::field::Grid;
use crate::field::spline::Spline;
use crate::instant::Hour;
use crate::obs::Finding;
use crate::report::{Identifier, Platform};
use crate::sphere::Position;

pub mod isobar;
mod point;

/// What an hour's analysis says at a point. Everything is analytic in the solution, so that values
/// and derivatives agree.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct PointAnalysis {
    /// Sea-level pressure, hPa.
    pub pressure_hpa: f64,
    /// Its standard error, hPa.
    pub pressure_error_hpa: f64,
    /// Gradient of the pressure towards east and north, Pa/m.
    pub gradient_pa_m: [f64; 2],
    /// Second derivatives (east-east, east-north, north-north), Pa/m2.
    pub hessian_pa_m2: [f64; 3],
}

/// What the neighbour check said of one observation of the hour, and the innovations behind it.
#[derive(Clone, PartialEq, Debug)]
pub struct Innovation {
    /// Who.
    pub platform: Platform,
    /// Who.
    pub station: Identifier,
    /// Where.
    pub position: Position,
    /// Observed minus analysed without this report, hPa.
    pub pressure_hpa: Option<f64>,
    /// Expected standard deviation of that difference, hPa.
    pub pressure_expected_hpa: Option<f64>,
    /// The finding, where there is something against it.
    pub finding: Option<Finding>,
}

/// One hour's analysis on the grid.
///
/// Dense fields are row-major on `grid`; they may hold NaN where the analysis says nothing.
#[derive(Clone, PartialEq, Debug)]
pub struct HourAnalysis {
    /// The hour it is valid for.
    pub hour: Hour,
    /// The grid.
    pub grid: Arc<Grid>,
    /// Sea-level pressure, hPa.
    pub pressure_hpa: Vec<f64>,
    /// Its standard error, hPa.
    pub pressure_error_hpa: Vec<f64>,
    /// Standard error over that of the first guess: above 0.7 the isobars are not to be trusted
    /// (METHODS ANA-5).
    pub error_ratio: Vec<f64>,
    /// Analysed observed 10 m wind towards east and north, m/s; NaN where no reports are near.
    pub wind_m_s: Vec<[f64; 2]>,
    /// Standard error of a component of that wind, m/s.
    pub wind_error_m_s: Vec<f64>,
    /// Reports used, by the hour's fingerprint order.
    pub innovations: Vec<Innovation>,
    /// Number of pressures used, of this hour and of the hours before.
    pub pressures_used: usize,
    /// Number of winds used.
    pub winds_used: usize,
    /// Fingerprint of everything that went in: an hour is remade only when it changes.
    pub fingerprint: u64,
    /// The smooth surface through the pressures, for [`HourAnalysis::at`].
    surface: Spline,
}
