//! Which sites speak for a patch: the nearest in space and time, and some of every direction.

use super::covariance::{Vector, directions, dot};
use super::patch::Options;
use super::site::Site;
use super::statistics::spread_out;
use crate::field::Grid;
use crate::quantity::index_nearest;
use crate::sphere::EARTH_RADIUS_KM;

/// Directions told apart.
const OCTANTS: usize = 8;
/// Sites wanted in each direction, where there are any.
const PER_OCTANT: usize = 2;
/// Sites spread over the whole region, from which missing directions are filled.
const SPREAD_MAX: usize = 120;
/// Up to so many sites all are looked at.
const FEW: usize = 300;

pub(super) struct Selector<'a> {
    grid: &'a Grid,
    sites: &'a [Site],
    options: &'a Options,
    /// Sites by bin: `starts[bin]..starts[bin + 1]` of `order`.
    order: Vec<usize>,
    starts: Vec<usize>,
    columns: usize,
    rows: usize,
    /// Grid steps a bin is wide, and where the first one begins.
    size: f64,
    origin: [f64; 2],
    spread: Vec<usize>,
}

impl<'a> Selector<'a> {
    pub(super) fn new(grid: &'a Grid, sites: &'a [Site], options: &'a Options) -> Self {
        // Bins over the grid and as much again on every side; what lies beyond joins the edge.
        let (wide, high) = (grid.columns as f64, grid.rows as f64);
        let origin = [-wide, -high];
        let area = 9.0 * wide * high;
        let size = (area / (sites.len().max(1) as f64) * 2.0).sqrt().clamp(2.0, wide.max(high));
        let cells = |extent: f64| index_nearest((3.0 * extent / size).ceil()).max(1);
        let mut selector = Self {
            grid,
            sites,
            options,
            order: Vec::new(),
            starts: Vec::new(),
            columns: cells(wide),
            rows: cells(high),
            size,
            origin,
            spread: spread_out(sites, SPREAD_MAX),
        };
        let bins: Vec<usize> = sites.iter().map(|site| selector.bin(site.place)).collect();
        let mut starts = vec![0; selector.columns * selector.rows + 1];
        for bin in &bins {
            starts[bin + 1] += 1;
        }
        for bin in 1..starts.len() {
            starts[bin] += starts[bin - 1];
        }
        let mut next = starts.clone();
        let mut order = vec![0; sites.len()];
        for (index, bin) in bins.iter().enumerate() {
            order[next[*bin]] = index;
            next[*bin] += 1;
        }
        selector.order = order;
        selector.starts = starts;
        selector
    }

    fn cell(&self, place: f64, axis: usize) -> usize {
        let count = if axis == 0 { self.columns } else { self.rows };
        index_nearest(((place - self.origin[axis]) / self.size).floor().max(0.0)).min(count - 1)
    }

    fn bin(&self, place: [f64; 2]) -> usize {
        self.cell(place[1], 1) * self.columns + self.cell(place[0], 0)
    }

    /// Squared distance in space and time, km2.
    fn gap(&self, up: &Vector, index: usize) -> f64 {
        let site = &self.sites[index];
        let chord = 2.0 * (1.0 - dot(up, &site.up)).max(0.0);
        chord * EARTH_RADIUS_KM * EARTH_RADIUS_KM + (self.options.km_per_h * site.age_h).powi(2)
    }

    /// The sites for a patch around a grid place, nearest first.
    pub(super) fn nearest_to(&self, place: [f64; 2]) -> Vec<usize> {
        let up = directions(self.grid.position_at(place[0], place[1]))[0];
        let wanted = self.options.nearest;
        let mut found: Vec<(f64, usize)> = if self.sites.len() <= FEW.max(wanted) {
            (0..self.sites.len()).map(|index| (self.gap(&up, index), index)).collect()
        } else {
            self.around(&up, place, wanted)
        };
        let order = |a: &(f64, usize), b: &(f64, usize)| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1));
        if found.len() > wanted {
            found.select_nth_unstable_by(wanted - 1, order);
            found.truncate(wanted);
        }
        found.sort_unstable_by(order);
        let mut chosen: Vec<usize> = found.into_iter().map(|(_, index)| index).collect();
        let mut elements = 0;
        let fits = |index: &usize| {
            elements += self.sites[*index].elements();
            elements <= self.options.elements_max
        };
        let kept = chosen.iter().take_while({
            let mut fits = fits;
            move |index| fits(index)
        });
        let kept = kept.count();
        chosen.truncate(kept);
        self.fill_directions(&up, place, &mut chosen);
        chosen
    }

    /// Sites of ever wider rings of bins, until there are enough and one ring more.
    fn around(&self, up: &Vector, place: [f64; 2], wanted: usize) -> Vec<(f64, usize)> {
        let (column, row) = (self.cell(place[0], 0), self.cell(place[1], 1));
        let mut found = Vec::with_capacity(4 * wanted);
        let mut enough_at = None;
        for ring in 0..self.columns.max(self.rows) {
            let (left, right) =
                (column.saturating_sub(ring), (column + ring).min(self.columns - 1));
            for j in row.saturating_sub(ring)..=(row + ring).min(self.rows - 1) {
                let whole = j + ring == row || j == row + ring;
                let mut take = |from: usize, to: usize| {
                    let bins = self.starts[j * self.columns + from]
                        ..self.starts[j * self.columns + to + 1];
                    found
                        .extend(self.order[bins].iter().map(|&index| (self.gap(up, index), index)));
                };
                if whole {
                    take(left, right);
                } else {
                    if left + ring == column {
                        take(left, left);
                    }
                    if right == column + ring && ring > 0 {
                        take(right, right);
                    }
                }
            }
            if enough_at.is_some_and(|at| ring > at) {
                break;
            }
            if enough_at.is_none() && found.len() >= wanted + wanted / 4 {
                enough_at = Some(ring);
            }
        }
        found
    }

    /// Adds the nearest of the spread sites in directions that have too few.
    fn fill_directions(&self, up: &Vector, place: [f64; 2], chosen: &mut Vec<usize>) {
        let octant = |index: usize| {
            let site = &self.sites[index];
            let (dx, dy) = (site.place[0] - place[0], site.place[1] - place[1]);
            usize::from(dx > 0.0) + 2 * usize::from(dy > 0.0) + 4 * usize::from(dx.abs() > dy.abs())
        };
        let mut counts = [0; OCTANTS];
        for &index in chosen.iter() {
            counts[octant(index)] += 1;
        }
        if counts.iter().all(|count| *count >= PER_OCTANT) {
            return;
        }
        let mut more: Vec<(f64, usize)> = self
            .spread
            .iter()
            .filter(|&&index| counts[octant(index)] < PER_OCTANT && !chosen.contains(&index))
            .map(|&index| (self.gap(up, index), index))
            .collect();
        more.sort_unstable_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
        for (_, index) in more {
            let count = &mut counts[octant(index)];
            if *count < PER_OCTANT {
                *count += 1;
                chosen.push(index);
            }
        }
    }
}
