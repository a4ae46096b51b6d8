//! Reports made ready for the solver: the newest of each station, as departures from the first
//! guess, dense ones joined.

use std::collections::BTreeMap;
use std::sync::Arc;

use super::AnalysisSettings;
use super::covariance::{Vector, directions, dot, wind_operators};
use super::first_guess::FirstGuess;
use super::friction::Friction;
use crate::field::Grid;
use crate::instant::Hour;
use crate::obs::{Element, Observation, Verdict};
use crate::quantity::whole_below;
use crate::report::{Identifier, Platform};
use crate::sphere::Position;

/// A measured quantity at a site as the solver wants it: departures from the first guess and their
/// standard error.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Departure {
    pub(super) values: [f64; 2],
    pub(super) error: f64,
}

/// A place with reports.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Site {
    pub(super) position: Position,
    pub(super) up: Vector,
    /// The geostrophic wind towards east and north as derivatives of the pressure.
    pub(super) operators: [Vector; 2],
    /// Fractional column and row; may lie off the grid.
    pub(super) place: [f64; 2],
    /// Hours before the hour of the analysis; negative after it.
    pub(super) age_h: f64,
    /// A scalar: pressure (first value, hPa), or two scalars of equal error.
    pub(super) scalar: Option<Departure>,
    /// Geostrophic wind towards east and north, m/s.
    pub(super) wind: Option<Departure>,
    /// Which reports stand behind it.
    pub(super) members: Vec<usize>,
}

impl Site {
    pub(super) fn new(grid: &Grid, position: Position, age_h: f64, density_kg_m3: f64) -> Self {
        let (column, row) = grid.locate(position);
        Self {
            position,
            up: directions(position)[0],
            operators: wind_operators(position, density_kg_m3),
            place: [column, row],
            age_h,
            scalar: None,
            wind: None,
            members: Vec::new(),
        }
    }

    /// The wind towards east that the first guess has here, m/s; it has none towards north.
    pub(super) fn guess_wind_m_s(&self, guess: FirstGuess) -> f64 {
        let [_, _, north] = directions(self.position);
        dot(&self.operators[0], &north) * guess.at(self.position).by_latitude_hpa
    }

    /// Number of unknowns it brings.
    pub(super) fn elements(&self) -> usize {
        usize::from(self.scalar.is_some()) + 2 * usize::from(self.wind.is_some())
    }
}

/// One report that may be used, with what of it.
#[derive(Clone, Debug)]
pub(super) struct Used {
    pub(super) observation: Arc<Observation>,
    pub(super) age_h: f64,
    pub(super) pressure: bool,
    pub(super) wind: bool,
}

/// What a station is followed by: its name, and for shared call signs its place to a degree.
type Station = (Platform, Identifier, Option<(i64, i64)>);

fn station(observation: &Observation) -> Station {
    let (platform, identifier, _) = observation.key();
    let place = identifier.is_generic().then(|| {
        let position = observation.position;
        (whole_below(position.latitude_deg()), whole_below(position.longitude_deg()))
    });
    (platform, identifier, place)
}

/// The newest pressure and the newest wind of each station in the memory, in the order of the
/// stations. Near the hour the one closest to it counts as the newest.
pub(super) fn newest(
    hour: Hour,
    observations: &BTreeMap<Hour, Vec<Arc<Observation>>>,
    settings: &AnalysisSettings,
) -> Vec<Used> {
    type Slot<'a> = Option<(f64, &'a Arc<Observation>)>;
    let mut chosen: BTreeMap<Station, [Slot<'_>; 2]> = BTreeMap::new();
    let from = hour.plus(-settings.memory_h.max(0));
    for observation in observations.range(from..=hour).flat_map(|(_, list)| list) {
        if observation.verdict(Element::Position) == Verdict::Refused
            || observation.verdict(Element::Time) == Verdict::Refused
        {
            continue;
        }
        let age_h = hour.instant().hours_since(observation.report.time);
        let low = observation
            .barometer_height_m
            .is_none_or(|height_m| height_m <= settings.station_height_max_m);
        let sound = |value: Option<f64>| value.is_some_and(f64::is_finite);
        let has = [
            sound(observation.pressure_msl_hpa) && observation.pressure_error_hpa > 0.0 && low,
            observation.wind_m_s.is_some_and(|(u, v)| u.is_finite() && v.is_finite())
                && observation.wind_error_m_s > 0.0,
        ];
        let entry = chosen.entry(station(observation)).or_default();
        for (slot, has) in entry.iter_mut().zip(has) {
            let rank = |age_h: f64, other: &Observation| (age_h.abs(), other.key());
            let better = slot.is_none_or(|(held_h, held)| {
                let (new, old) = (rank(age_h, observation), rank(held_h, held));
                new.0 < old.0 || (new.0 <= old.0 && new.1 < old.1)
            });
            if has && better {
                *slot = Some((age_h, observation));
            }
        }
    }
    let mut out = Vec::new();
    for [pressure, wind] in chosen.into_values() {
        let put = |(age_h, observation): (f64, &Arc<Observation>), pressure, wind| Used {
            observation: Arc::clone(observation),
            age_h,
            pressure,
            wind,
        };
        match (pressure, wind) {
            (Some(p), Some(w)) if Arc::ptr_eq(p.1, w.1) => out.push(put(p, true, true)),
            (p, w) => {
                out.extend(p.map(|p| put(p, true, false)));
                out.extend(w.map(|w| put(w, false, true)));
            }
        }
    }
    out
}

/// Density of the air at sea level, kg/m3, from the report's temperature or the latitude's usual
/// one (METHODS WND-1).
pub(super) fn density_kg_m3(observation: &Observation) -> f64 {
    let usual_k = 288.15 - 0.5 * (observation.position.latitude_deg().abs() - 45.0).max(0.0);
    let temperature_k = observation
        .report
        .air_temperature_c
        .filter(|celsius| celsius.abs() < 60.0)
        .map_or(usual_k, crate::quantity::kelvin_from_celsius);
    let pressure_hpa = observation.pressure_msl_hpa.unwrap_or(1010.0);
    100.0 * pressure_hpa / (287.05 * temperature_k)
}

/// One site for each report, in the same order. Sea winds are carried to their geostrophic
/// equivalents (METHODS ANA-3 f); land winds do not speak of the pressure.
pub(super) fn sites(
    grid: &Grid,
    used: &[Used],
    first_guess: FirstGuess,
    friction: &Friction,
    errors: &[f64],
) -> Vec<Site> {
    used.iter()
        .enumerate()
        .map(|(index, used)| {
            let observation = &used.observation;
            let density = density_kg_m3(observation);
            let mut site = Site::new(grid, observation.position, used.age_h, density);
            site.members.push(index);
            let guess = first_guess.at(observation.position);
            if let Some(pressure_hpa) = observation.pressure_msl_hpa.filter(|_| used.pressure) {
                let error = observation.pressure_error_hpa * errors.get(index).unwrap_or(&1.0);
                site.scalar =
                    Some(Departure { values: [pressure_hpa - guess.pressure_hpa, 0.0], error });
            }
            if let Some(wind) = observation.wind_m_s.filter(|_| used.wind && observation.at_sea()) {
                let guess_u = site.guess_wind_m_s(first_guess);
                site.wind = friction
                    .geostrophic(index, observation, wind)
                    .map(|([u, v], error)| Departure { values: [u - guess_u, v], error });
            }
            site
        })
        .filter(|site| site.elements() > 0)
        .collect()
}

/// Joins sites of the same kind that stand closer than `bin` grid steps and within an hour of each
/// other: mean departure, error s / sqrt(n) but at least 0.4 hPa or 1 m/s (METHODS ANA-9).
pub(super) fn superobbed(grid: &Grid, sites: Vec<Site>, bin: f64) -> Vec<Site> {
    let mut bins: BTreeMap<(i64, i64, i64, bool, bool), Vec<Site>> = BTreeMap::new();
    for site in sites {
        let key = (
            whole_below(site.place[1] / bin),
            whole_below(site.place[0] / bin),
            whole_below(site.age_h + 0.5),
            site.scalar.is_some(),
            site.wind.is_some(),
        );
        bins.entry(key).or_default().push(site);
    }
    let mut out = Vec::with_capacity(bins.len());
    for group in bins.into_values() {
        match <[Site; 1]>::try_from(group) {
            Ok([one]) => out.push(one),
            Err(group) => out.push(joined(grid, &group)),
        }
    }
    out
}

/// The same sites on a grid with another spacing and the same first point.
pub(super) fn regridded(sites: &[Site], factor: f64) -> Vec<Site> {
    sites
        .iter()
        .map(|site| Site { place: site.place.map(|place| place * factor), ..site.clone() })
        .collect()
}

fn joined(grid: &Grid, group: &[Site]) -> Site {
    let weight = |site: &Site| {
        let error = site.scalar.or(site.wind).map_or(1.0, |departure| departure.error);
        1.0 / (error * error)
    };
    let total: f64 = group.iter().map(weight).sum();
    let mean = |value: &dyn Fn(&Site) -> f64| {
        group.iter().map(|site| weight(site) * value(site)).sum::<f64>() / total
    };
    let [x, y] = [mean(&|site| site.place[0]), mean(&|site| site.place[1])];
    let position = grid.position_at(x, y);
    let mut site = Site::new(grid, position, mean(&|site| site.age_h), 1.22);
    site.place = [x, y];
    site.operators = std::array::from_fn(|k| {
        // The mean factor on the joined place's own directions.
        let [_, east, north] = directions(position);
        let size = |site: &Site| dot(&site.operators[k], &site.operators[k]).sqrt();
        let factor = mean(&size) * position.latitude_deg().signum();
        if k == 0 { north.map(|part| -factor * part) } else { east.map(|part| factor * part) }
    });
    let departure = |of: &dyn Fn(&Site) -> Option<Departure>, floor: f64| {
        group.iter().map(of).collect::<Option<Vec<Departure>>>().map(|departures| {
            let sum: f64 = departures.iter().map(|d| 1.0 / (d.error * d.error)).sum();
            let mean = |k: usize| {
                departures.iter().map(|d| d.values[k] / (d.error * d.error)).sum::<f64>() / sum
            };
            let least = departures.iter().map(|d| d.error).fold(f64::INFINITY, f64::min);
            Departure {
                values: [mean(0), mean(1)],
                error: sum.sqrt().recip().max(floor.min(least)),
            }
        })
    };
    site.scalar = departure(&|site| site.scalar, 0.4);
    site.wind = departure(&|site| site.wind, 1.0);
    site.members = group.iter().flat_map(|site| site.members.iter().copied()).collect();
    site
}
