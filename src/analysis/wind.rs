//! The analysed observed wind at 10 m: what the pressure leads one to expect, corrected towards the
//! reports, over sea and land.
//!
//! Expected: the gradient of the analysed pressure as a wind, slowed and turned by friction as the
//! hour's reports themselves show it, over sea and land apart. The differences of the reports from
//! it are analysed as two scalars along the map's axes, so that poles do no harm. Where no report
//! is near, nothing is said.

use rayon::prelude::*;

use super::covariance::{Covariance, coupling};
use super::patch::{self, Options};
use super::pressure::{COARSER, coarser, positions, ups};
use super::site::{Departure, Site, Used, regridded, superobbed};
use crate::field::Grid;
use crate::field::spline::Spline;
use crate::quantity::{coriolis_per_s, index_nearest};
use crate::sphere::Position;

/// Scales of the differences of observed from expected winds.
const LENGTH_KM: f64 = 420.0;
const TIME_H: f64 = 6.0;
/// Error ratio from which nothing is said.
const FAR: f64 = 0.85;
/// Friction where few winds are known: factor and angle towards low pressure, degrees, over sea and
/// over land (METHODS WND-6), and how many m/s squared of wind they weigh.
const PRIOR: [(f64, f64); 2] = [(0.69, 18.0), (0.45, 27.0)];
const PRIOR_WEIGHT: f64 = 400.0;
/// Steps of the lattice on which the share of land reports is kept.
const SHARE_STEPS: usize = 4;

/// The analysed wind and its error, on the grid.
pub(super) struct WindAnalysis {
    pub(super) wind_m_s: Vec<[f64; 2]>,
    pub(super) error_m_s: Vec<f64>,
}

impl WindAnalysis {
    pub(super) fn none(count: usize) -> Self {
        Self { wind_m_s: vec![[f64::NAN; 2]; count], error_m_s: vec![f64::NAN; count] }
    }
}

/// Complex product.
fn times(a: [f64; 2], b: [f64; 2]) -> [f64; 2] {
    [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]]
}

/// The geostrophic wind of a field along the map's axes, m/s, damped towards the equator.
fn geostrophic(grid: &Grid, places: &[Position], pressure_hpa: &[f64]) -> Vec<[f64; 2]> {
    (0..grid.len())
        .into_par_iter()
        .map(|point| {
            let (column, row) = (point % grid.columns, point / grid.columns);
            let slope = |low: usize, high: usize, steps: usize| {
                (pressure_hpa[high] - pressure_hpa[low]) / (steps.max(1) as f64 * grid.spacing_m)
            };
            let (left, right) = (column.saturating_sub(1), (column + 1).min(grid.columns - 1));
            let (low, high) = (row.saturating_sub(1), (row + 1).min(grid.rows - 1));
            let latitude_deg = places[point].latitude_deg();
            let coriolis = coriolis_per_s(latitude_deg);
            if coriolis == 0.0 {
                return [0.0; 2];
            }
            let factor = 100.0 * grid.projection.scale(latitude_deg) * coupling(latitude_deg)
                / (1.22 * coriolis);
            let x = slope(grid.index(left, row), grid.index(right, row), right - left);
            let y = slope(grid.index(column, low), grid.index(column, high), high - low);
            let wind = [-factor * y, factor * x];
            // What no curvature lets through is not expected at the surface either.
            let speed = wind[0].hypot(wind[1]);
            let cap = if speed > 60.0 { 60.0 / speed } else { 1.0 };
            wind.map(|part| part * cap)
        })
        .collect()
}

/// One wind report along the map's axes.
struct Seen {
    site: Site,
    observed: [f64; 2],
    expected: [f64; 2],
    sign: f64,
    land: bool,
    error: f64,
}

/// Analyses the observed winds of the hour.
pub(super) fn analyse(
    grid: &Grid,
    places: &[Position],
    pressure_hpa: &[f64],
    used: &[Used],
) -> WindAnalysis {
    let field = geostrophic(grid, places, pressure_hpa);
    let parts: [Vec<f64>; 2] = std::array::from_fn(|k| field.iter().map(|wind| wind[k]).collect());
    let seen: Vec<Seen> = used
        .iter()
        .filter(|used| used.wind)
        .filter_map(|used| {
            let observation = &used.observation;
            let (u, v) = observation.wind_m_s?;
            let place = observation.position;
            let (column, row) = grid.locate(place);
            let (last_column, last_row) = ((grid.columns - 1) as f64, (grid.rows - 1) as f64);
            // A report a little off the grid still counts, with the wind expected at the edge.
            let near = (-3.0..=last_column + 3.0).contains(&column)
                && (-3.0..=last_row + 3.0).contains(&row);
            let (inside_column, inside_row) =
                (column.clamp(0.0, last_column), row.clamp(0.0, last_row));
            let sample = |part: &[f64]| grid.sample_at(part, inside_column, inside_row);
            let expected = [sample(&parts[0])?, sample(&parts[1])?];
            let (x, y) = grid.projection.to_map_components(place.longitude_deg(), u, v);
            near.then(|| Seen {
                site: Site::new(grid, place, used.age_h, 1.22),
                observed: [x, y],
                expected,
                sign: if place.latitude_deg() < 0.0 { -1.0 } else { 1.0 },
                land: !observation.at_sea(),
                error: observation.wind_error_m_s.max(1.0),
            })
        })
        .collect();
    if seen.is_empty() {
        return WindAnalysis::none(grid.len());
    }
    let friction = [false, true].map(|land| friction(&seen, land));
    let share = LandShare::new(grid, &seen);
    let expected = |wind: [f64; 2], sign: f64, land: f64| {
        let factor = std::array::from_fn(|k| {
            let mixed = friction[0][k] * (1.0 - land) + friction[1][k] * land;
            if k == 1 { sign * mixed } else { mixed }
        });
        times(wind, factor)
    };
    let sites: Vec<Site> = seen
        .iter()
        .enumerate()
        .map(|(index, seen)| {
            let mut site = seen.site.clone();
            let land = share.at(site.place);
            let guess = expected(seen.expected, seen.sign, land);
            let values = [seen.observed[0] - guess[0], seen.observed[1] - guess[1]];
            site.scalar = Some(Departure { values, error: seen.error });
            site.members.push(index);
            site
        })
        .collect();
    let sites = superobbed(grid, sites, 0.5);
    let sigma = spread(&sites);
    // A difference beyond any likelihood is a wrong report, not weather.
    let sites: Vec<Site> = sites
        .into_iter()
        .filter(|site| {
            site.scalar.is_some_and(|departure| {
                let limit = 4.5 * sigma.hypot(departure.error);
                departure.values.iter().all(|value| value.abs() < limit)
            })
        })
        .collect();
    let covariance = Covariance::new([0.9 * sigma, 0.436 * sigma], LENGTH_KM, TIME_H);
    // The differences are smooth: they are analysed on a coarser grid and carried over.
    let coarse = coarser(grid);
    let ups = ups(&positions(&coarse));
    let sites = regridded(&sites, 1.0 / COARSER as f64);
    let solution = patch::solve(&coarse, &ups, &sites, &covariance, &Options::for_wind());
    let surfaces: [Spline; 2] = std::array::from_fn(|k| {
        let part: Vec<f64> = solution.values.iter().map(|value| value[k]).collect();
        Spline::through(&part, coarse.columns, coarse.rows)
    });
    let total = covariance.variance().sqrt();
    let mut out = WindAnalysis::none(grid.len());
    for point in 0..grid.len() {
        let [x, y] =
            [point % grid.columns, point / grid.columns].map(|k| k as f64 / COARSER as f64);
        let Some(error) = coarse.sample_at(&solution.errors, x, y) else { continue };
        if error > FAR * total {
            continue;
        }
        let (column, row) = (point % grid.columns, point / grid.columns);
        let land = share.at([column as f64, row as f64]);
        let sign = if places[point].latitude_deg() < 0.0 { -1.0 } else { 1.0 };
        let guess = expected(field[point], sign, land);
        let found: [f64; 2] = std::array::from_fn(|k| guess[k] + surfaces[k].at(x, y).value);
        let [x, y] = found;
        let longitude_deg = places[point].longitude_deg();
        let (east, north) = grid.projection.to_earth_components(longitude_deg, x, y);
        out.wind_m_s[point] = [east, north];
        out.error_m_s[point] = error;
    }
    out
}

/// Least squares of observed on expected wind as a complex factor, turned the northern way.
fn friction(seen: &[Seen], land: bool) -> [f64; 2] {
    let (ratio, angle_deg) = PRIOR[usize::from(land)];
    let (sine, cosine) = f64::to_radians(angle_deg).sin_cos();
    let mut sum = [PRIOR_WEIGHT * ratio * cosine, PRIOR_WEIGHT * ratio * sine];
    let mut weight = PRIOR_WEIGHT;
    for seen in seen.iter().filter(|seen| seen.land == land) {
        // In the southern hemisphere the mirror image.
        let turned = [seen.expected[0], -seen.expected[1]];
        let product = times(seen.observed, turned);
        sum[0] += product[0];
        sum[1] += product[1] * seen.sign;
        weight += seen.expected[0].powi(2) + seen.expected[1].powi(2);
    }
    let factor = sum.map(|part| part / weight);
    let size = factor[0].hypot(factor[1]).max(1e-9);
    // Friction neither strengthens the wind nor nearly stops it.
    factor.map(|part| part / size * size.clamp(0.25, 1.0))
}

/// Standard deviation of the differences that is not observation error, m/s.
fn spread(sites: &[Site]) -> f64 {
    let (mut sum, mut count) = (10.0 * 9.0, 10.0);
    for departure in sites.iter().filter_map(|site| site.scalar) {
        for value in departure.values {
            let square = value * value - departure.error * departure.error;
            // A wild report must not widen the rest.
            sum += 0.5 * square.min(100.0);
            count += 0.5;
        }
    }
    (sum / count).max(0.0).sqrt().clamp(1.5, 6.0)
}

/// Share of land among the wind reports around, on a coarse lattice.
struct LandShare {
    columns: usize,
    rows: usize,
    share: Vec<f64>,
}

impl LandShare {
    fn new(grid: &Grid, seen: &[Seen]) -> Self {
        let (columns, rows) = (grid.columns / SHARE_STEPS + 2, grid.rows / SHARE_STEPS + 2);
        let mut sums = vec![[0.0; 2]; columns * rows];
        let cell = |place: f64, count: usize| {
            index_nearest((place / SHARE_STEPS as f64).max(0.0)).min(count - 1)
        };
        for seen in seen {
            let at = cell(seen.site.place[1], rows) * columns + cell(seen.site.place[0], columns);
            sums[at][usize::from(seen.land)] += 1.0;
        }
        for _ in 0..2 {
            let from = sums.clone();
            for row in 0..rows {
                for column in 0..columns {
                    let mut sum = [0.0; 2];
                    for j in row.saturating_sub(1)..=(row + 1).min(rows - 1) {
                        for i in column.saturating_sub(1)..=(column + 1).min(columns - 1) {
                            sum[0] += from[j * columns + i][0] / 9.0;
                            sum[1] += from[j * columns + i][1] / 9.0;
                        }
                    }
                    sums[row * columns + column] = sum;
                }
            }
        }
        // Where there is nothing, it is taken for sea.
        let share = sums.iter().map(|[sea, land]| land / (sea + land + 0.02)).collect();
        Self { columns, rows, share }
    }

    fn at(&self, place: [f64; 2]) -> f64 {
        let split = |place: f64, count: usize| {
            let place = (place / SHARE_STEPS as f64).clamp(0.0, (count - 1) as f64);
            let low = index_nearest(place.floor()).min(count - 2);
            (low, place - low as f64)
        };
        let (i, s) = split(place[0], self.columns);
        let (j, t) = split(place[1], self.rows);
        let at = |i: usize, j: usize| self.share[j * self.columns + i];
        (1.0 - t) * ((1.0 - s) * at(i, j) + s * at(i + 1, j))
            + t * ((1.0 - s) * at(i, j + 1) + s * at(i + 1, j + 1))
    }
}
