//! The objective analysis of one hour: sea-level pressure and wind, with their errors.
//!
//! Statistical interpolation (METHODS ANA-2 to ANA-9) of the newest report of each station in the
//! memory about a broad first guess, pressure and sea wind together, in overlapping patches. The
//! story of an hour: the newest reports ([`site`]) become departures from the first guess
//! ([`first_guess`], [`friction`]); the statistics of the departures are learnt ([`statistics`]);
//! a first solution ([`patch`]) judges the reports ([`neighbour`]) and gives the curvature of the
//! flow; a second one, without the refused, is the analysis. Last comes the observed wind
//! ([`wind`]). Each hour stands on its own memory: no hour depends on the analysis of another.

use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

use rayon::prelude::*;

use crate::field::Grid;
use crate::field::spline::Spline;
use crate::instant::{Hour, Instant};
use crate::obs::{Finding, Observation, Verdict};
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
pub mod region;
mod select;
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
    /// What was learnt of the hour's departures from the first guess.
    pub statistics: Statistics,
    /// The smooth surface through the pressures, for [`HourAnalysis::at`].
    surface: Spline,
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

/// Sites closer than this, in grid steps, are joined.
const JOINED_STEPS: f64 = 0.5;
/// The curvature of the flow is not believed beyond 1 / (150 km) nor taken whole: the analysis that
/// it comes from is smoother than the truth in lows and less certain elsewhere.
const CURVATURE_MAX_PER_M: f64 = 1.0 / 150e3;

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
    let places: Vec<Position> = (0..grid.len())
        .into_par_iter()
        .map(|k| grid.position(k % grid.columns, k / grid.columns))
        .collect();
    let ups: Vec<covariance::Vector> =
        places.par_iter().map(|place| covariance::directions(*place)[0]).collect();
    let latitudes_deg: Vec<f64> = places.iter().map(|place| place.latitude_deg()).collect();
    let made = Making { grid, places: &places, ups: &ups, used: &used, settings };
    let pressure = made.pressure();
    let wind = if used.iter().any(|used| used.wind) {
        let options = pressure.options.for_wind();
        wind::analyse(grid, &ups, &latitudes_deg, &pressure.field_hpa, &used, &options)
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

/// What the pressure analysis is made of.
struct Making<'a> {
    grid: &'a Grid,
    places: &'a [Position],
    ups: &'a [covariance::Vector],
    used: &'a [site::Used],
    settings: &'a AnalysisSettings,
}

/// The pressure analysis.
struct Pressure {
    field_hpa: Vec<f64>,
    error_hpa: Vec<f64>,
    sigma_hpa: f64,
    statistics: Statistics,
    options: patch::Options,
    judgements: Vec<neighbour::Judgement>,
    pressures_used: usize,
}

impl patch::Options {
    /// For `sites` on a grid, with these statistics.
    fn fitting(grid: &Grid, sites: usize, statistics: &Statistics) -> Self {
        let per_point = sites as f64 / grid.len().max(1) as f64;
        // About a dozen sites to a patch's core, as far as that goes.
        let step = if per_point > 0.4 {
            4
        } else if per_point > 0.05 {
            5
        } else {
            6
        };
        Self {
            step,
            nearest: 48,
            elements_max: 110,
            // Where both covariances have fallen equally far, to second order.
            km_per_h: 0.775 * statistics.length_km / statistics.time_h,
            errors: true,
            left_out: true,
        }
    }

    fn for_wind(self) -> Self {
        Self {
            nearest: 24,
            elements_max: 40,
            km_per_h: 60.0,
            errors: true,
            left_out: false,
            ..self
        }
    }
}

impl Making<'_> {
    fn pressure(&self) -> Pressure {
        let none = first_guess::FirstGuess { offset_hpa: 0.0 };
        let mut friction = friction::Friction::default();
        let ones = vec![1.0; self.used.len()];
        let raw = self.sites(none, &friction, &ones);
        let statistics = Statistics::learnt(&raw, Statistics::default().time_h);
        let covariance = statistics.covariance();
        let guess = first_guess::FirstGuess { offset_hpa: statistics.offset_hpa };
        let single = self.sites(guess, &friction, &ones);
        let joined = site::superobbed(self.grid, single.clone(), JOINED_STEPS);
        let options = patch::Options::fitting(self.grid, joined.len(), &statistics);
        let has_winds = joined.iter().any(|site| site.wind.is_some());
        let first = patch::Options { errors: false, ..options };
        let solution = patch::solve(self.grid, self.ups, &joined, &covariance, &first);
        let kept: Vec<bool> = self
            .used
            .iter()
            .map(|used| self.settings.kept.contains(&used.observation.key()))
            .collect();
        let check =
            |sites: &[site::Site], left_out: &[Option<patch::LeftOut>], single: &[site::Site]| {
                neighbour::Check {
                    used: self.used,
                    single,
                    sites,
                    left_out,
                    covariance: &covariance,
                    km_per_h: options.km_per_h,
                    kept: &kept,
                }
                .judge()
            };
        let judgements = check(&joined, &solution.left_out, &single);
        if has_winds {
            friction.curvature_per_m = self.curvatures(guess, &solution);
        }
        // The second solution: without the refused, doubtful ones with a larger error.
        let factors: Vec<f64> = judgements.iter().map(neighbour::Judgement::error_factor).collect();
        let mut sites = self.sites(guess, &friction, &factors);
        for site in &mut sites {
            let judged = |of: &dyn Fn(&neighbour::Judgement) -> bool| {
                site.members.iter().any(|&member| of(&judgements[member]))
            };
            if judged(&neighbour::Judgement::refuses_pressure) {
                site.scalar = None;
            }
            if judged(&|judgement| judgement.wind_finding.is_some()) {
                site.wind = None;
            }
        }
        sites.retain(|site| site.elements() > 0);
        let pressures_used = sites.iter().filter(|site| site.scalar.is_some()).count();
        let joined = site::superobbed(self.grid, sites, JOINED_STEPS);
        let solution = patch::solve(self.grid, self.ups, &joined, &covariance, &options);
        let sigma_hpa = covariance.variance().sqrt();
        let factor = calibration(&joined, &solution.left_out);
        Pressure {
            field_hpa: solution
                .values
                .iter()
                .zip(self.places)
                .map(|(value, place)| value[0] + guess.at(*place).pressure_hpa)
                .collect(),
            error_hpa: solution
                .errors
                .iter()
                .map(|error| (error * factor).min(sigma_hpa))
                .collect(),
            sigma_hpa,
            statistics,
            options,
            judgements: merged(judgements, &joined, &solution.left_out),
            pressures_used,
        }
    }

    fn sites(
        &self,
        guess: first_guess::FirstGuess,
        friction: &friction::Friction,
        factors: &[f64],
    ) -> Vec<site::Site> {
        let mut sites = site::sites(self.grid, self.used, guess, friction, factors);
        if !self.settings.use_winds {
            for site in &mut sites {
                site.wind = None;
            }
            sites.retain(|site| site.elements() > 0);
        }
        sites
    }

    /// Curvature of the isobars of a first solution at each report with a sea wind.
    fn curvatures(&self, guess: first_guess::FirstGuess, solution: &patch::Solution) -> Vec<f64> {
        let field: Vec<f64> = solution
            .values
            .iter()
            .zip(self.places)
            .map(|(value, place)| value[0] + guess.at(*place).pressure_hpa)
            .collect();
        let errors = vec![0.0; field.len()];
        let hour = Hour::from_unix_h(0);
        let first = HourAnalysis::from_field(hour, Arc::new(self.grid.clone()), field, errors);
        self.used
            .par_iter()
            .map(|used| {
                if !used.wind || !used.observation.at_sea() {
                    return 0.0;
                }
                let at = first.at(used.observation.position);
                at.map_or(0.0, |at| {
                    curvature_per_m(&at).clamp(-CURVATURE_MAX_PER_M, CURVATURE_MAX_PER_M)
                })
            })
            .collect()
    }
}

/// Curvature of the isobar through a point, 1/m, positive round low pressure (METHODS WND-3); it
/// fades where the gradient is too weak to tell.
fn curvature_per_m(at: &PointAnalysis) -> f64 {
    let [px, py] = at.gradient_pa_m;
    let [pxx, pxy, pyy] = at.hessian_pa_m2;
    let square = px * px + py * py;
    // 0.3 hPa in 100 km.
    let weak = 3e-4_f64.powi(2);
    (pxx * py * py - 2.0 * pxy * px * py + pyy * px * px) / (square + weak).powf(1.5)
}

/// What the errors must be multiplied with so that the left-out differences are as large as
/// expected; near one where there are few reports.
fn calibration(sites: &[site::Site], left_out: &[Option<patch::LeftOut>]) -> f64 {
    let (mut sum, mut count) = (30.0, 30.0);
    for (_, left_out) in sites.iter().zip(left_out) {
        if let Some(([difference, _], variance)) = left_out.and_then(|left_out| left_out.scalar) {
            // The few that are far off are the neighbour check's affair.
            sum += (difference * difference / variance).min(9.0);
            count += 1.0;
        }
    }
    f64::sqrt(sum / count).clamp(0.6, 1.6)
}

/// The first judgements with the differences of the second solution, for those that it used.
fn merged(
    mut judgements: Vec<neighbour::Judgement>,
    sites: &[site::Site],
    left_out: &[Option<patch::LeftOut>],
) -> Vec<neighbour::Judgement> {
    for (site, left_out) in sites.iter().zip(left_out) {
        let Some((difference, variance)) = left_out.and_then(|left_out| left_out.scalar) else {
            continue;
        };
        // A joined site's difference is not one report's.
        if let [member] = site.members[..] {
            let judgement = &mut judgements[member];
            let doubted =
                judgement.pressure_finding.as_ref().is_some_and(|f| f.verdict != Verdict::Sound);
            if !doubted {
                judgement.pressure = Some((difference[0], variance));
            }
        }
    }
    judgements
}
