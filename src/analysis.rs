//! The objective analysis of one hour: sea-level pressure and wind, with their errors.
//!
//! Statistical interpolation (METHODS ANA-2 to ANA-9) of the newest report of each station in the
//! memory about a broad first guess, pressure and sea wind together, in overlapping patches. The
//! story of an hour: the newest reports ([`site`]) become departures from the first guess
//! ([`first_guess`], [`friction`]); the statistics of the departures are learnt ([`statistics`]);
//! a first solution, on a coarser grid ([`patch`]), judges the reports ([`neighbour`]) and gives the curvature of the
//! flow; a second one, without the refused, is the analysis. Last comes the observed wind
//! ([`wind`]). Each hour stands on its own memory: no hour depends on the analysis of another.

use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

use serde::{Deserialize, Serialize};

use crate::field::Grid;
use crate::field::spline::Spline;
use crate::instant::{Hour, Instant};
use crate::obs::{Finding, Observation};
use crate::report::{Identifier, Platform};
use crate::sphere::Position;

mod covariance;
mod fingerprint;
mod first_guess;
mod friction;
pub mod isobar;
mod neighbour;
mod patch;
mod point;
mod pressure;
pub mod region;
mod select;
pub mod settled;
mod site;
mod solve;
mod statistics;
mod wind;

pub use fingerprint::fingerprint;
pub use region::fit_region;
pub use statistics::Statistics;

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
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
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
/// Dense fields are row-major on `grid`; they may hold NaN where the analysis says nothing. Two
/// analyses are equal where they are equal bit for bit, so that NaN equals itself.
#[derive(Clone, Debug)]
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
    /// What was learnt of the hour's departures from the first guess.
    pub statistics: Statistics,
    /// The smooth surface through the pressures, for [`HourAnalysis::at`].
    surface: Spline,
}

impl PartialEq for HourAnalysis {
    fn eq(&self, other: &Self) -> bool {
        let same = |a: &[f64], b: &[f64]| {
            a.len() == b.len() && a.iter().zip(b).all(|(a, b)| a.to_bits() == b.to_bits())
        };
        self.hour == other.hour
            && self.fingerprint == other.fingerprint
            && self.grid == other.grid
            && self.pressures_used == other.pressures_used
            && self.winds_used == other.winds_used
            && self.statistics == other.statistics
            && same(&self.pressure_hpa, &other.pressure_hpa)
            && same(&self.pressure_error_hpa, &other.pressure_error_hpa)
            && same(&self.error_ratio, &other.error_ratio)
            && same(self.wind_m_s.as_flattened(), other.wind_m_s.as_flattened())
            && same(&self.wind_error_m_s, &other.wind_error_m_s)
            && self.innovations == other.innovations
    }
}

/// What can be set of an analysis.
#[derive(Clone, PartialEq, Debug)]
pub struct AnalysisSettings {
    /// Hours of reports that enter, with decaying weight.
    pub memory_h: i64,
    /// Barometers above this height, m, do not enter (RED-3).
    pub station_height_max_m: f64,
    /// Whether sea winds speak of the pressure.
    pub use_winds: bool,
    /// Reports that the watchkeeper has ruled sound: the neighbour check does not touch them.
    pub kept: BTreeSet<(Platform, Identifier, Instant)>,
}

impl Default for AnalysisSettings {
    fn default() -> Self {
        Self { memory_h: 6, station_height_max_m: 1000.0, use_winds: true, kept: BTreeSet::new() }
    }
}

/// Analyses one hour.
///
/// `observations` by hour, each hour's in canonical order; those of the memory before the hour and
/// of the hour itself are used, later ones never. The result depends on nothing else, and not on
/// the number of threads. Without reports it is the first guess with its whole error.
pub fn analyse(
    grid: &Arc<Grid>,
    hour: Hour,
    observations: &BTreeMap<Hour, Vec<Arc<Observation>>>,
    settings: &AnalysisSettings,
) -> HourAnalysis {
    let used = site::newest(hour, observations, settings);
    let places = pressure::positions(grid);
    let ups = pressure::ups(&places);
    let making = pressure::Making { grid, places: &places, ups: &ups, used: &used, settings };
    let pressure = making.pressure();
    let wind = if used.iter().any(|used| used.wind) {
        wind::analyse(grid, &places, &pressure.field_hpa, &used)
    } else {
        wind::WindAnalysis::none(grid.len())
    };
    let mut analysis =
        HourAnalysis::from_field(hour, Arc::clone(grid), pressure.field_hpa, pressure.error_hpa);
    let sigma = pressure.sigma_hpa.max(1e-9);
    analysis.error_ratio =
        analysis.pressure_error_hpa.iter().map(|error| (error / sigma).clamp(0.0, 1.0)).collect();
    analysis.wind_m_s = wind.wind_m_s;
    analysis.wind_error_m_s = wind.error_m_s;
    analysis.innovations = innovations(hour, &used, pressure.judgements);
    analysis.pressures_used = pressure.pressures_used;
    analysis.winds_used = used.iter().filter(|used| used.wind).count();
    analysis.fingerprint = fingerprint(grid, hour, observations, settings);
    analysis.statistics = pressure.statistics;
    analysis
}

/// The judgements of the hour's own reports, in the order of the stations.
fn innovations(
    hour: Hour,
    used: &[site::Used],
    judgements: Vec<neighbour::Judgement>,
) -> Vec<Innovation> {
    used.iter()
        .zip(judgements)
        .filter(|(used, _)| used.observation.hour == hour)
        .map(|(used, judgement)| Innovation {
            platform: used.observation.report.platform,
            station: used.observation.report.station,
            position: used.observation.position,
            pressure_hpa: judgement.pressure.map(|(difference, _)| difference),
            pressure_expected_hpa: judgement.pressure.map(|(_, variance)| variance.sqrt()),
            finding: judgement.pressure_finding.or(judgement.wind_finding),
        })
        .collect()
}
