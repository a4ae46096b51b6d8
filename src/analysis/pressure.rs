//! The pressure of an hour: two solutions, the first of which judges the reports and shows how the
//! flow curves, so that the second can use sound reports and better winds.

use std::sync::Arc;

use rayon::prelude::*;

use super::first_guess::FirstGuess;
use super::friction::{Friction, Learnt, WindFit};
use super::neighbour::{Check, Judgement};
use super::patch::{LeftOut, Options, Solution};
use super::site::{Site, Used};
use super::statistics::Statistics;
use super::{AnalysisSettings, HourAnalysis, PointAnalysis, covariance, patch, site};
use crate::field::Grid;
use crate::instant::Hour;
use crate::obs::Verdict;
use crate::quantity::index_nearest;
use crate::sphere::Position;

/// Sites closer than this, in grid steps, are joined; the second where there are more reports than
/// [`CROWDED`] of the grid points.
const JOINED_STEPS: [f64; 2] = [0.5, 1.0];
const CROWDED: f64 = 0.45;
/// The first solution is made on a grid so many times coarser.
pub(super) const COARSER: usize = 2;
/// The curvature of the flow is not believed beyond 1 / (150 km): the analysis that it comes from
/// is not certain enough.
const CURVATURE_MAX_PER_M: f64 = 1.0 / 150e3;
/// How many pressures must speak before their errors are moved half way.
const UNEXPLAINED_WEIGHT: f64 = 20.0;

/// What the pressure analysis is made of.
pub(super) struct Making<'a> {
    pub(super) grid: &'a Grid,
    pub(super) places: &'a [Position],
    pub(super) ups: &'a [covariance::Vector],
    pub(super) used: &'a [Used],
    pub(super) settings: &'a AnalysisSettings,
}

/// The pressure analysis.
pub(super) struct Pressure {
    pub(super) field_hpa: Vec<f64>,
    pub(super) error_hpa: Vec<f64>,
    pub(super) sigma_hpa: f64,
    pub(super) statistics: Statistics,
    pub(super) judgements: Vec<Judgement>,
    pub(super) pressures_used: usize,
}

impl Options {
    /// For `sites` on a grid, with these statistics.
    fn fitting(grid: &Grid, sites: usize, statistics: &Statistics) -> Self {
        let per_point = sites as f64 / grid.len().max(1) as f64;
        let step = if per_point > 0.25 { 5 } else { 6 };
        Self {
            step,
            nearest: 48,
            elements_max: 100,
            // Where both covariances have fallen equally far, to second order.
            km_per_h: 0.775 * statistics.length_km / statistics.time_h,
            errors: true,
            left_out: false,
        }
    }

    /// For the first solution, on the coarse grid: about 16 sites to a patch, each of which must
    /// be among those that the patch takes.
    fn first(self, coarse: &Grid, sites: usize) -> Self {
        let points = 16.0 * coarse.len() as f64 / sites.max(1) as f64;
        let step = index_nearest(points.sqrt()).clamp(2, 6);
        Self { step, nearest: 32, elements_max: 64, errors: false, left_out: true, ..self }
    }

    /// For the observed wind, on the coarse grid.
    pub(super) const fn for_wind() -> Self {
        let (errors, left_out) = (true, false);
        Self { step: 3, nearest: 24, elements_max: 40, km_per_h: 60.0, errors, left_out }
    }
}

/// The same part of the world with a coarser mesh that reaches at least as far.
pub(super) fn coarser(grid: &Grid) -> Grid {
    let reach = |count: usize| ((count - 1).div_ceil(COARSER) + 1).max(2);
    Grid {
        spacing_m: grid.spacing_m * COARSER as f64,
        columns: reach(grid.columns),
        rows: reach(grid.rows),
        ..grid.clone()
    }
}

/// The place of every grid point.
pub(super) fn positions(grid: &Grid) -> Vec<Position> {
    (0..grid.len())
        .into_par_iter()
        .map(|k| grid.position(k % grid.columns, k / grid.columns))
        .collect()
}

/// Their unit vectors.
pub(super) fn ups(places: &[Position]) -> Vec<covariance::Vector> {
    places.par_iter().map(|place| covariance::directions(*place)[0]).collect()
}

impl Making<'_> {
    /// Learns, judges and solves.
    pub(super) fn pressure(&self) -> Pressure {
        let none = FirstGuess { offset_hpa: 0.0 };
        let mut friction = Friction::default();
        let ones = vec![1.0; self.used.len()];
        let raw = self.sites(none, &friction, &ones);
        let statistics = Statistics::learnt(&raw, Statistics::default().time_h);
        let covariance = statistics.covariance();
        let guess = FirstGuess { offset_hpa: statistics.offset_hpa };
        let single = self.sites(guess, &friction, &ones);
        let crowded = single.len() as f64 > CROWDED * self.grid.len() as f64;
        let bin = JOINED_STEPS[usize::from(crowded)];
        let joined = site::superobbed(self.grid, single.clone(), bin);
        let options = Options::fitting(self.grid, joined.len(), &statistics);
        let coarse = coarser(self.grid);
        let coarse_places = positions(&coarse);
        let first = patch::solve(
            &coarse,
            &ups(&coarse_places),
            &site::regridded(&joined, 1.0 / COARSER as f64),
            &covariance,
            &options.first(&coarse, joined.len()),
        );
        let kept: Vec<bool> = self
            .used
            .iter()
            .map(|used| self.settings.kept.contains(&used.observation.key()))
            .collect();
        let judgements = Check {
            used: self.used,
            single: &single,
            sites: &joined,
            left_out: &first.left_out,
            covariance: &covariance,
            km_per_h: options.km_per_h,
            kept: &kept,
        }
        .judge();
        // Where winds speak too, what does not fit is put down to them.
        let winds = joined.iter().any(|site| site.wind.is_some());
        let unexplained = if winds { 1.0 } else { unexplained(&joined, &first.left_out) };
        let refused = judgements.iter().any(Judgement::refuses_pressure);
        if winds {
            friction.curvature_per_m = self.curvatures(&coarse, &coarse_places, guess, &first);
            friction.learnt = Learnt::from_winds(&left_out_winds(&joined, &first, guess));
        }
        // The second solution: without the refused, doubtful ones with a larger error.
        let factors: Vec<f64> =
            judgements.iter().map(|judgement| unexplained * judgement.error_factor()).collect();
        let mut sites = self.sites(guess, &friction, &factors);
        for site in &mut sites {
            let judged = |of: &dyn Fn(&Judgement) -> bool| {
                site.members.iter().any(|&member| of(&judgements[member]))
            };
            if judged(&Judgement::refuses_pressure) {
                site.scalar = None;
            }
            if judged(&|judgement| judgement.wind_finding.is_some()) {
                site.wind = None;
            }
        }
        sites.retain(|site| site.elements() > 0);
        let pressures_used = sites.iter().filter(|site| site.scalar.is_some()).count();
        let joined_again = site::superobbed(self.grid, sites, bin);
        // What a refused report had done to its neighbours' differences must go too.
        let second = Options { left_out: refused, ..options };
        let solution = patch::solve(self.grid, self.ups, &joined_again, &covariance, &second);
        let sigma_hpa = covariance.variance().sqrt();
        let (last_sites, last) =
            if refused { (&joined_again, &solution.left_out) } else { (&joined, &first.left_out) };
        let factor = calibration(last_sites, last);
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
            judgements: merged(judgements, last_sites, last),
            pressures_used,
        }
    }

    fn sites(&self, guess: FirstGuess, friction: &Friction, factors: &[f64]) -> Vec<Site> {
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
    fn curvatures(
        &self,
        grid: &Grid,
        places: &[Position],
        guess: FirstGuess,
        solution: &Solution,
    ) -> Vec<f64> {
        let field: Vec<f64> = solution
            .values
            .iter()
            .zip(places)
            .map(|(value, place)| value[0] + guess.at(*place).pressure_hpa)
            .collect();
        let errors = vec![0.0; field.len()];
        let hour = Hour::from_unix_h(0);
        let first = HourAnalysis::from_field(hour, Arc::new(grid.clone()), field, errors);
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

/// How the sea winds of a solution fit what is expected without them.
fn left_out_winds(sites: &[Site], solution: &Solution, guess: FirstGuess) -> Vec<WindFit> {
    sites
        .iter()
        .zip(&solution.left_out)
        .filter_map(|(site, left_out)| {
            let (departure, (gap, variance)) = (site.wind?, left_out.as_ref()?.wind?);
            let guess_u = site.guess_wind_m_s(guess);
            let found = [departure.values[0] + guess_u, departure.values[1]];
            let expected = [found[0] - gap[0], found[1] - gap[1]];
            let sign = if site.position.latitude_deg() < 0.0 { -1.0 } else { 1.0 };
            let variance = f64::midpoint(variance[0], variance[1]);
            Some(WindFit { found, expected, variance, error: departure.error, sign })
        })
        .collect()
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

/// What the observation errors of the pressures must be multiplied with so that the left-out
/// differences are as large as expected: what a dense network shows beyond its barometers' errors
/// (hills, sea breezes, the hour's weather) is not the analysis's to follow.
fn unexplained(sites: &[Site], left_out: &[Option<LeftOut>]) -> f64 {
    let (mut excess, mut errors, mut count) = (0.0, 0.0, 0.0);
    for (site, left_out) in sites.iter().zip(left_out) {
        let found = left_out.as_ref().and_then(|left_out| left_out.scalar);
        if let (Some(departure), Some(([difference, _], variance))) = (site.scalar, found) {
            // Only where the error weighs: elsewhere the weather's spread is what is seen.
            let share = departure.error * departure.error / variance;
            let square = (difference * difference).min(12.0 * variance);
            excess += share * (square - variance);
            errors += share * departure.error * departure.error;
            count += share;
        }
    }
    if count < 1.0 {
        return 1.0;
    }
    let square: f64 = 1.0 + excess / errors * (count / (count + UNEXPLAINED_WEIGHT));
    square.clamp(1.0, 4.0).sqrt()
}

/// What the errors must be multiplied with so that the left-out differences are as large as
/// expected; near one where there are few reports.
fn calibration(sites: &[Site], left_out: &[Option<LeftOut>]) -> f64 {
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
    mut judgements: Vec<Judgement>,
    sites: &[Site],
    left_out: &[Option<LeftOut>],
) -> Vec<Judgement> {
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
