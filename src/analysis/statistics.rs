//! The statistics of the departures from the first guess, learnt from the reports of the window
//! within stated limits.
//!
//! Scale and variance: most probable values given the departures of reports spread over the region
//! (a Gaussian likelihood with a prior that holds where reports are few). Offset of the first
//! guess: generalised least squares with a prior. Time scale: from how much pressure changes at a
//! station. Sources: Dee and da Silva (1999); METHODS ANA-4.

use std::collections::BTreeMap;

use rayon::prelude::*;

use super::covariance::Covariance;
use super::site::{Departure, Site};
use super::solve::{Factor, dot};
use crate::quantity::whole_below;

/// What was learnt.
#[derive(Clone, Copy, PartialEq, Debug, serde::Serialize, serde::Deserialize)]
pub struct Statistics {
    /// Standard deviation of the departures of pressure, hPa, 4 to 20.
    pub sigma_hpa: f64,
    /// Length scale of the Matern function of order 5/2, km, 650 to 1750.
    pub length_km: f64,
    /// Time scale, h, 5 to 30.
    pub time_h: f64,
    /// What was added to the usual pressure of the latitude, hPa.
    pub offset_hpa: f64,
}

impl Default for Statistics {
    /// What holds where nothing is known: middle latitudes in winter (METHODS ANA-4).
    fn default() -> Self {
        Self { sigma_hpa: 12.0, length_km: 1100.0, time_h: 12.0, offset_hpa: 0.0 }
    }
}

/// Length scales tried, km.
const LENGTHS_KM: [f64; 5] = [650.0, 850.0, 1100.0, 1400.0, 1750.0];
/// Prior: median length, km, and spread of its logarithm.
const LENGTH_PRIOR: (f64, f64) = (1150.0, 0.35);
/// Prior: standard deviation, hPa, worth so many reports.
const SIGMA_PRIOR: (f64, f64) = (12.0, 8.0);
/// Prior spread of the offset of the first guess, hPa.
const OFFSET_SPREAD_HPA: f64 = 6.0;
/// Most reports in the likelihood.
const SPREAD_MAX: usize = 110;
/// Standard deviation of the smaller term as a share of the larger.
const SMALL_SHARE: f64 = 0.20;

impl Statistics {
    /// The covariance that these statistics describe.
    pub(super) fn covariance(&self) -> Covariance {
        let sigmas = [self.sigma_hpa, SMALL_SHARE * self.sigma_hpa];
        Covariance::new(sigmas, self.length_km, self.time_h)
    }

    /// Learns from sites whose departures are from the first guess without offset.
    pub(super) fn learnt(sites: &[Site], time_h: f64) -> Self {
        let spread = spread_out(sites, SPREAD_MAX);
        let chosen: Vec<(&Site, Departure)> =
            spread.iter().filter_map(|&k| Some((&sites[k], sites[k].scalar?))).collect();
        let prior = Self { time_h, ..Self::default() };
        if chosen.len() < 4 {
            return prior;
        }
        let trials: Vec<(f64, Self)> =
            LENGTHS_KM.par_iter().map(|length_km| trial(&chosen, *length_km, prior)).collect();
        // The best of the scales, refined by a parabola through its neighbours in the logarithm.
        let best = (0..trials.len())
            .max_by(|&a, &b| trials[a].0.total_cmp(&trials[b].0))
            .unwrap_or_default();
        if best == 0 || best + 1 == trials.len() {
            return trials[best].1;
        }
        let [low, mid, high] = [trials[best - 1], trials[best], trials[best + 1]];
        let bend = low.0 - 2.0 * mid.0 + high.0;
        let shift =
            if bend < -1e-9 { (0.5 * (low.0 - high.0) / bend).clamp(-0.5, 0.5) } else { 0.0 };
        let other = if shift < 0.0 { low.1 } else { high.1 };
        let mix = |a: f64, b: f64| a * (b / a).powf(shift.abs());
        Self {
            sigma_hpa: mix(mid.1.sigma_hpa, other.sigma_hpa),
            length_km: mix(mid.1.length_km, other.length_km),
            time_h: mid.1.time_h,
            offset_hpa: mid.1.offset_hpa + (other.offset_hpa - mid.1.offset_hpa) * shift.abs(),
        }
    }
}

/// Log of the posterior, and the statistics, for one length scale.
fn trial(chosen: &[(&Site, Departure)], length_km: f64, prior: Statistics) -> (f64, Statistics) {
    let count = chosen.len();
    let mut found = Statistics { length_km, ..prior };
    let mut log_posterior = 0.0;
    // Two rounds settle the variance, which enters through the observation errors alone.
    for _ in 0..2 {
        let covariance = found.covariance();
        let variance = found.sigma_hpa * found.sigma_hpa;
        let mut factor = Factor::default();
        factor.reset(count, 2);
        for (i, (site, departure)) in chosen.iter().enumerate() {
            let row = factor.row_mut(i);
            for (j, (other, _)) in chosen[..=i].iter().enumerate() {
                let gap: [f64; 3] = std::array::from_fn(|k| site.up[k] - other.up[k]);
                let versine = super::covariance::dot(&gap, &gap) / 2.0;
                row[j] = covariance.between(versine, site.age_h - other.age_h).value / variance;
            }
            row[i] += departure.error * departure.error / variance;
        }
        for (j, (_, departure)) in chosen.iter().enumerate() {
            factor.row_mut(count)[j] = departure.values[0];
            factor.row_mut(count + 1)[j] = 1.0;
        }
        factor.factor(1e-9);
        let (y, one) = (factor.row(count), factor.row(count + 1));
        let spread = (OFFSET_SPREAD_HPA / found.sigma_hpa).powi(2);
        let information = dot(one, one) + 1.0 / spread;
        let offset_hpa = dot(one, y) / information;
        let misfit = dot(y, y) - offset_hpa * dot(one, y);
        let (sigma, worth) = SIGMA_PRIOR;
        let total = count as f64 + worth;
        let sum = misfit + worth * sigma * sigma;
        found.sigma_hpa = (sum / total).sqrt().clamp(4.0, 20.0);
        found.offset_hpa = offset_hpa;
        log_posterior = -0.5 * total * (sum / total).ln()
            - 0.5 * factor.log_determinant()
            - 0.5 * ((length_km / LENGTH_PRIOR.0).ln() / LENGTH_PRIOR.1).powi(2);
    }
    (log_posterior, found)
}

/// Sites with a scalar, spread over the region: one to a bin, bins doubled until few enough are
/// left. Of a bin the one nearest the hour, then with the smallest error, then the first.
pub(super) fn spread_out(sites: &[Site], most: usize) -> Vec<usize> {
    let mut size = 1.0;
    // Ends: at the latest when one bin holds the whole plane around the origin's four quarters.
    loop {
        let mut bins: BTreeMap<(i64, i64), (f64, f64, usize)> = BTreeMap::new();
        for (index, site) in sites.iter().enumerate() {
            let Some(departure) = site.scalar else { continue };
            let bin = (whole_below(site.place[1] / size), whole_below(site.place[0] / size));
            let rank = (site.age_h.abs(), departure.error, index);
            let held = bins.entry(bin).or_insert(rank);
            if rank.0.total_cmp(&held.0).then(rank.1.total_cmp(&held.1)).is_lt() {
                *held = rank;
            }
        }
        if bins.len() <= most.max(4) || size > 1e9 {
            return bins.into_values().map(|(_, _, index)| index).collect();
        }
        size *= 1.3;
    }
}
