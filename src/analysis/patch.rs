//! The local solver: overlapping patches of the grid, each solved with the reports near it.
//!
//! A patch is a node of a coarse lattice with all grid points up to the next nodes. Its reports are
//! the nearest ones in space and time, and beyond them some of every direction, so that a crowd on
//! one side does not hide a ship on the other. One factor serves all points of the patch. Each grid
//! point lies in up to four patches, whose values are blended with weights that are smooth and add
//! up to one: no seams. The error is found on a lattice twice as fine and interpolated. Each
//! report's difference from an analysis without it falls out of the patch nearest to it
//! (METHODS ANA-6). Patches are independent and joined in their order: the number of threads
//! cannot be seen in the result.

use rayon::prelude::*;

use super::covariance::{Covariance, Vector, directions, dot};
use super::select::Selector;
use super::site::Site;
use super::solve::{self, Factor};
use crate::field::Grid;

/// How the solver works.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Options {
    /// Nodes are so many grid steps apart.
    pub(super) step: usize,
    /// Nearest sites taken.
    pub(super) nearest: usize,
    /// Most unknowns of a patch.
    pub(super) elements_max: usize,
    /// What an hour of age counts as, km, when the nearest are chosen.
    pub(super) km_per_h: f64,
    /// Whether the errors of the field are wanted.
    pub(super) errors: bool,
    /// Whether each site's difference from an analysis without it is wanted.
    pub(super) left_out: bool,
}

/// A site's difference from an analysis without it, and the variance expected of it.
#[derive(Clone, Copy, PartialEq, Debug, Default)]
pub(super) struct LeftOut {
    /// First and second scalar, variance.
    pub(super) scalar: Option<([f64; 2], f64)>,
    /// Wind components, variance of each.
    pub(super) wind: Option<([f64; 2], [f64; 2])>,
}

/// The analysed departures.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Solution {
    /// Row-major; both scalars.
    pub(super) values: Vec<[f64; 2]>,
    /// Standard error, row-major; empty where it was not wanted.
    pub(super) errors: Vec<f64>,
    /// By site.
    pub(super) left_out: Vec<Option<LeftOut>>,
}

/// Solves for the departures of the scalars on the whole grid.
pub(super) fn solve(
    grid: &Grid,
    ups: &[Vector],
    sites: &[Site],
    covariance: &Covariance,
    options: &Options,
) -> Solution {
    let (across, along) = (nodes(grid.columns, options.step), nodes(grid.rows, options.step));
    let selector = Selector::new(grid, sites, options);
    // Which patch answers for which site.
    let mut own: Vec<Vec<usize>> = vec![Vec::new(); across.len() * along.len()];
    if options.left_out {
        for (index, site) in sites.iter().enumerate() {
            let (i, j) = (nearest(&across, site.place[0]), nearest(&along, site.place[1]));
            own[j * across.len() + i].push(index);
        }
    }
    let worker = Worker { grid, ups, sites, covariance, options, across: &across, along: &along };
    let patches: Vec<Patch> = (0..across.len() * along.len())
        .into_par_iter()
        .map_init(Scratch::default, |scratch, index| {
            let (i, j) = (index % across.len(), index / across.len());
            let chosen = selector.nearest_to([across[i] as f64, along[j] as f64]);
            worker.patch(scratch, i, j, &chosen, &own[index])
        })
        .collect();
    worker.joined(&patches)
}

/// Node places along an axis of `count` points: multiples of `step`, and the last point.
fn nodes(count: usize, step: usize) -> Vec<usize> {
    let last = count.saturating_sub(1);
    let mut out: Vec<usize> = (0..last).step_by(step.max(1)).collect();
    // A short last interval is joined to the one before it.
    if out.len() > 1 && last - out[out.len() - 1] < step.div_ceil(2) {
        out.pop();
    }
    out.push(last);
    out
}

fn nearest(nodes: &[usize], place: f64) -> usize {
    let gap = |k: usize| (nodes[k] as f64 - place).abs();
    (0..nodes.len()).min_by(|&a, &b| gap(a).total_cmp(&gap(b))).unwrap_or_default()
}

/// From 0 to 1 with two vanishing derivatives at both ends, over the middle three fifths of the way
/// between two nodes: what lies closer to a node is its patch's alone.
fn blend(t: f64) -> f64 {
    let t = ((t - 0.2) / 0.6).clamp(0.0, 1.0);
    t * t * t * (10.0 + t * (6.0 * t - 15.0))
}

/// First point, and the weights of the points that a node answers for.
fn weights(nodes: &[usize], node: usize) -> (usize, Vec<f64>) {
    let centre = nodes[node];
    let low = if node == 0 { centre } else { nodes[node - 1] + 1 };
    let high = nodes.get(node + 1).map_or(centre, |next| next - 1);
    let weight = |point: usize| {
        let share = |from: usize| point.abs_diff(from) as f64 / centre.abs_diff(from) as f64;
        match point.cmp(&centre) {
            std::cmp::Ordering::Less => blend(share(nodes[node - 1])),
            std::cmp::Ordering::Equal => 1.0,
            std::cmp::Ordering::Greater => blend(share(nodes[node + 1])),
        }
    };
    // Rounding apart, the blend is symmetric: what is left out here is whole elsewhere.
    let weighs = |point: &usize| weight(*point) > 1e-12;
    let first = (low..=centre).find(weighs).unwrap_or(centre);
    let last = (centre..=high).rev().find(weighs).unwrap_or(centre);
    (first, (first..=last).map(weight).collect())
}

#[derive(Default)]
struct Scratch {
    factor: Factor,
    versine: Vec<f64>,
    between: Vec<f64>,
    value: Vec<f64>,
    first: Vec<f64>,
    second: Vec<f64>,
}

struct Patch {
    values: Vec<[f64; 2]>,
    /// At the node, half a step to the right, above, and both.
    errors: [f64; 4],
    left_out: Vec<(usize, LeftOut)>,
}

struct Worker<'a> {
    grid: &'a Grid,
    ups: &'a [Vector],
    sites: &'a [Site],
    covariance: &'a Covariance,
    options: &'a Options,
    across: &'a [usize],
    along: &'a [usize],
}

/// What a patch knows of its sites, side by side for speed.
struct Chosen<'a> {
    sites: Vec<&'a Site>,
    ups: [Vec<f64>; 3],
    ages: Vec<f64>,
    /// First unknown of each site, and one past the last.
    starts: Vec<usize>,
}

impl<'a> Chosen<'a> {
    fn new(sites: &'a [Site], chosen: &[usize]) -> Self {
        let sites: Vec<&Site> = chosen.iter().map(|&k| &sites[k]).collect();
        let mut starts = Vec::with_capacity(sites.len() + 1);
        let mut order = 0;
        for site in &sites {
            starts.push(order);
            order += site.elements();
        }
        starts.push(order);
        Self {
            ups: std::array::from_fn(|k| sites.iter().map(|site| site.up[k]).collect()),
            ages: sites.iter().map(|site| site.age_h).collect(),
            sites,
            starts,
        }
    }

    fn order(&self) -> usize {
        self.starts.last().copied().unwrap_or_default()
    }
}

impl Scratch {
    /// Correlations of a place and age with the first `count` sites.
    fn radial(
        &mut self,
        covariance: &Covariance,
        chosen: &Chosen<'_>,
        up: &Vector,
        age_h: f64,
        count: usize,
        second: bool,
    ) {
        self.versine.clear();
        self.between.clear();
        let [x, y, z] = chosen.ups.each_ref().map(|part| &part[..count]);
        self.versine.extend(x.iter().zip(y).zip(z).map(|((x, y), z)| {
            let (dx, dy, dz) = (x - up[0], y - up[1], z - up[2]);
            0.5 * (dx * dx + dy * dy + dz * dz)
        }));
        self.between.extend(chosen.ages[..count].iter().map(|age| age - age_h));
        for out in [&mut self.value, &mut self.first, &mut self.second] {
            out.resize(count, 0.0);
        }
        let (value, first) = (&mut self.value[..], &mut self.first[..]);
        if second {
            covariance.fill_second(&self.versine, &self.between, value, first, &mut self.second);
        } else {
            covariance.fill(&self.versine, &self.between, value, first);
        }
    }
}

/// The solution of a patch, side by side for speed: the analysed scalars are sums over the sites of
/// value x weight + first x (up . vector).
#[derive(Default)]
struct Weights {
    scalars: [Vec<f64>; 2],
    vectors: [Vec<f64>; 3],
    has_wind: bool,
}

impl Weights {
    fn new(chosen: &Chosen<'_>, solved: &[Vec<f64>; 2]) -> Self {
        let mut out = Self::default();
        for (l, site) in chosen.sites.iter().enumerate() {
            let mut at = chosen.starts[l];
            let mut scalars = [0.0; 2];
            if site.scalar.is_some() {
                scalars = [solved[0][at], solved[1][at]];
                at += 1;
            }
            for (to, from) in out.scalars.iter_mut().zip(scalars) {
                to.push(from);
            }
            let pair =
                if site.wind.is_some() { [solved[0][at], solved[0][at + 1]] } else { [0.0; 2] };
            out.has_wind |= site.wind.is_some();
            for (k, to) in out.vectors.iter_mut().enumerate() {
                to.push(site.operators[0][k] * pair[0] + site.operators[1][k] * pair[1]);
            }
        }
        out
    }
}

impl Worker<'_> {
    fn patch(
        &self,
        scratch: &mut Scratch,
        i: usize,
        j: usize,
        chosen: &[usize],
        own: &[usize],
    ) -> Patch {
        let (first_column, column_weights) = weights(self.across, i);
        let (first_row, row_weights) = weights(self.along, j);
        let count = column_weights.len() * row_weights.len();
        let sigma = self.covariance.variance().sqrt();
        let chosen_sites = Chosen::new(self.sites, chosen);
        let order = chosen_sites.order();
        if order == 0 {
            return Patch {
                values: vec![[0.0; 2]; count],
                errors: [sigma; 4],
                left_out: Vec::new(),
            };
        }
        let places = if self.options.errors { self.error_places(i, j) } else { Vec::new() };
        // Which of the chosen this patch answers for.
        let answered: Vec<usize> =
            (0..chosen.len()).filter(|&k| own.contains(&chosen[k])).collect();
        let units: usize = answered.iter().map(|&k| chosen_sites.sites[k].elements()).sum();
        let mut factor = std::mem::take(&mut scratch.factor);
        factor.reset(order, 2 + places.len() + units);
        self.assemble(scratch, &mut factor, &chosen_sites);
        for (k, place) in places.iter().enumerate() {
            let up = directions(self.grid.position_at(place[0], place[1]))[0];
            self.target(scratch, &chosen_sites, &up, factor.row_mut(order + 2 + k));
        }
        let mut unit = order + 2 + places.len();
        for &k in &answered {
            for element in chosen_sites.starts[k]..chosen_sites.starts[k + 1] {
                factor.row_mut(unit)[element] = 1.0;
                unit += 1;
            }
        }
        factor.factor(1e-6 * self.covariance.variance());
        let solved = [factor.back(factor.row(order)), factor.back(factor.row(order + 1))];
        let weights = Weights::new(&chosen_sites, &solved);
        let mut values = Vec::with_capacity(count);
        for row in 0..row_weights.len() {
            for column in 0..column_weights.len() {
                let point = self.grid.index(first_column + column, first_row + row);
                values.push(self.mean(scratch, &chosen_sites, &self.ups[point], &weights));
            }
        }
        let mut errors = [sigma; 4];
        for (k, error) in errors.iter_mut().enumerate().take(places.len()) {
            let reduced = factor.row(order + 2 + k);
            let left = self.covariance.variance() - solve::dot(reduced, reduced);
            *error = left.max(0.0).sqrt();
        }
        let left_out = left_out(&factor, &chosen_sites, chosen, &answered, &solved, places.len());
        scratch.factor = factor;
        Patch { values, errors, left_out }
    }

    /// The node and half a step to the right and up.
    fn error_places(&self, i: usize, j: usize) -> Vec<[f64; 2]> {
        let half = |nodes: &[usize], k: usize| {
            let here = nodes[k] as f64;
            nodes.get(k + 1).map_or(here, |next| f64::midpoint(here, *next as f64))
        };
        let (x, y) = (self.across[i] as f64, self.along[j] as f64);
        let (right, up) = (half(self.across, i), half(self.along, j));
        vec![[x, y], [right, y], [x, up], [right, up]]
    }

    /// Fills the matrix and the two right-hand sides.
    fn assemble(&self, scratch: &mut Scratch, factor: &mut Factor, chosen: &Chosen<'_>) {
        let order = chosen.order();
        for (k, site) in chosen.sites.iter().enumerate() {
            scratch.radial(self.covariance, chosen, &site.up, site.age_h, k + 1, true);
            let mut element = chosen.starts[k];
            if let Some(departure) = &site.scalar {
                let row = factor.row_mut(element);
                for (l, other) in chosen.sites[..k].iter().enumerate() {
                    let mut at = chosen.starts[l];
                    if other.scalar.is_some() {
                        row[at] = scratch.value[l];
                        at += 1;
                    }
                    if other.wind.is_some() {
                        row[at] = scratch.first[l] * dot(&site.up, &other.operators[0]);
                        row[at + 1] = scratch.first[l] * dot(&site.up, &other.operators[1]);
                    }
                }
                row[element] = scratch.value[k] + departure.error * departure.error;
                for (which, value) in departure.values.iter().enumerate() {
                    factor.row_mut(order + which)[element] = *value;
                }
                element += 1;
            }
            if let Some(departure) = &site.wind {
                for which in 0..2 {
                    let operator = &site.operators[which];
                    let row = factor.row_mut(element);
                    for (l, other) in chosen.sites[..k].iter().enumerate() {
                        let mut at = chosen.starts[l];
                        let lean = dot(operator, &other.up);
                        if other.scalar.is_some() {
                            row[at] = scratch.first[l] * lean;
                            at += 1;
                        }
                        if other.wind.is_some() {
                            for (m, theirs) in other.operators.iter().enumerate() {
                                row[at + m] = scratch.first[l] * dot(operator, theirs)
                                    + scratch.second[l] * lean * dot(&site.up, theirs);
                            }
                        }
                    }
                    // Within the site: pressure and wind, and the two components, are uncorrelated.
                    row[element] = scratch.first[k] * dot(operator, operator)
                        + departure.error * departure.error;
                    factor.row_mut(order)[element] = departure.values[which];
                    element += 1;
                }
            }
        }
    }

    /// Covariances of the scalar at a place, at the hour, with every unknown.
    fn target(&self, scratch: &mut Scratch, chosen: &Chosen<'_>, up: &Vector, row: &mut [f64]) {
        scratch.radial(self.covariance, chosen, up, 0.0, chosen.sites.len(), false);
        for (l, other) in chosen.sites.iter().enumerate() {
            let mut at = chosen.starts[l];
            if other.scalar.is_some() {
                row[at] = scratch.value[l];
                at += 1;
            }
            if other.wind.is_some() {
                row[at] = scratch.first[l] * dot(up, &other.operators[0]);
                row[at + 1] = scratch.first[l] * dot(up, &other.operators[1]);
            }
        }
    }

    /// The analysed scalars at a place.
    fn mean(
        &self,
        scratch: &mut Scratch,
        chosen: &Chosen<'_>,
        up: &Vector,
        weights: &Weights,
    ) -> [f64; 2] {
        scratch.radial(self.covariance, chosen, up, 0.0, chosen.sites.len(), false);
        let mut sums = weights.scalars.each_ref().map(|part| solve::dot(&scratch.value, part));
        if weights.has_wind {
            let [x, y, z] = &weights.vectors;
            let lean = &mut scratch.versine;
            lean.clear();
            lean.extend(
                x.iter().zip(y).zip(z).map(|((x, y), z)| up[0] * x + up[1] * y + up[2] * z),
            );
            sums[0] += solve::dot(&scratch.first, lean);
        }
        sums
    }

    /// The patches blended, the errors interpolated, in the order of the patches.
    fn joined(&self, patches: &[Patch]) -> Solution {
        let mut values = vec![[0.0; 2]; self.grid.len()];
        let mut left_out = vec![None; self.sites.len()];
        let wide = self.across.len();
        for (index, patch) in patches.iter().enumerate() {
            let (first_column, column_weights) = weights(self.across, index % wide);
            let (first_row, row_weights) = weights(self.along, index / wide);
            let mut from = patch.values.iter();
            for (row, row_weight) in row_weights.iter().enumerate() {
                let start = self.grid.index(first_column, first_row + row);
                let line = &mut values[start..start + column_weights.len()];
                for ((to, from), weight) in line.iter_mut().zip(&mut from).zip(&column_weights) {
                    to[0] += row_weight * weight * from[0];
                    to[1] += row_weight * weight * from[1];
                }
            }
            for (site, found) in &patch.left_out {
                left_out[*site] = Some(*found);
            }
        }
        let errors = if self.options.errors { self.errors(patches) } else { Vec::new() };
        Solution { values, errors, left_out }
    }

    /// Standard errors from the fine lattice, linear between its lines.
    fn errors(&self, patches: &[Patch]) -> Vec<f64> {
        // For a point: interval of the fine lattice (twice the node, plus one for the half) and share.
        let places = |nodes: &[usize], count: usize| -> Vec<(usize, usize, f64)> {
            (0..count)
                .map(|point| {
                    let node = nodes.partition_point(|node| *node <= point).max(1) - 1;
                    let Some(next) = nodes.get(node + 1) else { return (2 * node, 2 * node, 0.0) };
                    let along = 2.0 * (point - nodes[node]) as f64 / (next - nodes[node]) as f64;
                    let half = usize::from(along >= 1.0);
                    (2 * node + half, 2 * node + half + 1, along - half as f64)
                })
                .collect()
        };
        let (across, along) =
            (places(self.across, self.grid.columns), places(self.along, self.grid.rows));
        let at = |x: usize, y: usize| {
            patches[(y / 2) * self.across.len() + x / 2].errors[(y % 2) * 2 + x % 2]
        };
        let mut out = Vec::with_capacity(self.grid.len());
        for &(y0, y1, t) in &along {
            for &(x0, x1, s) in &across {
                out.push(
                    (1.0 - t) * ((1.0 - s) * at(x0, y0) + s * at(x1, y0))
                        + t * ((1.0 - s) * at(x0, y1) + s * at(x1, y1)),
                );
            }
        }
        out
    }
}

/// Differences from the analysis without the site: block of the inverse, METHODS ANA-6 for
/// all unknowns of a site at once.
fn left_out(
    factor: &Factor,
    chosen: &Chosen<'_>,
    indices: &[usize],
    answered: &[usize],
    solved: &[Vec<f64>; 2],
    places: usize,
) -> Vec<(usize, LeftOut)> {
    let mut unit = factor.order + 2 + places;
    let mut out = Vec::with_capacity(answered.len());
    for &k in answered {
        let site = chosen.sites[k];
        let (size, start) = (site.elements(), chosen.starts[k]);
        let mut block = nalgebra::Matrix3::identity();
        for a in 0..size {
            for b in 0..size {
                block[(a, b)] = solve::dot(factor.row(unit + a), factor.row(unit + b));
            }
        }
        unit += size;
        let Some(inverse) = block.try_inverse() else { continue };
        let part =
            |which: usize| {
                let right = nalgebra::Vector3::from_fn(|a, _| {
                    if a < size { solved[which][start + a] } else { 0.0 }
                });
                inverse * right
            };
        let (one, two) = (part(0), part(1));
        let mut found = LeftOut::default();
        let mut at = 0;
        if site.scalar.is_some() {
            found.scalar = Some(([one[0], two[0]], inverse[(0, 0)]));
            at = 1;
        }
        if site.wind.is_some() {
            let variance = [inverse[(at, at)], inverse[(at + 1, at + 1)]];
            found.wind = Some(([one[at], one[at + 1]], variance));
        }
        out.push((indices[k], found));
    }
    out
}
