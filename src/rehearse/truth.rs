//! What was true: every high and low, hour by hour, and every fault that was planted.
//!
//! The centres of the whole field count, not those of the plan: a planned low may be an open wave,
//! and highs arise between lows without having been planned. Both are found on the exact field.

use std::cmp::Reverse;
use std::collections::{BTreeSet, BinaryHeap};

use serde::{Deserialize, Serialize};

use super::weather::{Sky, Weather};

mod unplanned;
use crate::instant::{Hour, Instant};
use crate::quantity::whole_nearest;
use crate::sphere::Position;

/// Half-width, in steps, and step of the lattice on which depths are measured, km.
const LATTICE_HALF: i64 = 40;
const LATTICE_STEP_KM: f64 = 50.0;
/// Least depth of a centre, hPa: below it a dent is an open wave.
const DEPTH_MIN_HPA: f64 = 0.5;

/// What was true in a rehearsal.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Truth {
    /// Version of this form: 1.
    pub schema: u32,
    /// That the weather is invented.
    pub note: String,
    /// Name of the scenario.
    pub scenario: String,
    /// First hour.
    pub start: Instant,
    /// Last hour.
    pub end: Instant,
    /// Highs and lows: the planned ones in the order of the scenario, then those that arose.
    pub systems: Vec<TrueSystem>,
    /// Faults planted in the feed, by time and station.
    pub faults: Vec<PlantedFault>,
}

/// One high or low.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct TrueSystem {
    /// The scenario's name for it, or `unplanned 1` and so on.
    pub name: String,
    /// `high` or `low`.
    pub kind: String,
    /// Each whole hour at which the whole field has its centre at least 0.5 hPa deep; hours at
    /// which it has none (an open wave) are left out.
    pub points: Vec<TruePoint>,
}

/// A high or low at one hour.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct TruePoint {
    /// When.
    pub time: Hour,
    /// Latitude of the extreme of the whole field, degrees.
    pub latitude_deg: f64,
    /// Its longitude, degrees.
    pub longitude_deg: f64,
    /// Sea-level pressure there, hPa.
    pub pressure_hpa: f64,
    /// Difference to the last closed isobar, hPa, within 2,000 km, to about 0.2 hPa.
    pub depth_hpa: f64,
}

/// A fault planted in the feed.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct PlantedFault {
    /// Who reported.
    pub station: String,
    /// Time of the observation, or since when.
    pub time: Instant,
    /// What was done.
    pub what: String,
}

impl TruePoint {
    /// Where.
    pub fn position(&self) -> Position {
        Position::clamped(self.latitude_deg, self.longitude_deg)
    }
}

/// The highs and lows of every whole hour.
pub(super) fn systems(weather: &Weather, start: Instant, hours: i64) -> Vec<TrueSystem> {
    let mut systems: Vec<TrueSystem> = weather
        .vortices
        .iter()
        .map(|vortex| TrueSystem {
            name: vortex.name.clone(),
            kind: if vortex.at(0.0).anomaly_hpa < 0.0 { "low" } else { "high" }.to_owned(),
            points: Vec::new(),
        })
        .collect();
    let mut unplanned = Vec::new();
    for hour in 0..=hours {
        let time = start.plus_s(hour * 3600);
        let sky = weather.at(time);
        let mut taken: Vec<Position> = Vec::new();
        for (index, system) in systems.iter_mut().enumerate() {
            let Some(moment) = sky.moments.get(index) else { continue };
            let low = system.kind == "low";
            let Some(centre) = centre(&sky, moment.position(), low) else { continue };
            // Two systems that share one centre are one; the first in the scenario keeps it.
            let reach_km = 0.6 * moment.radius_km;
            if centre.distance_km(moment.position()) > reach_km
                || taken.iter().any(|other| other.distance_km(centre) < 20.0)
            {
                continue;
            }
            let depth_hpa = depth_hpa(&sky, centre, low);
            if depth_hpa < DEPTH_MIN_HPA {
                continue;
            }
            taken.push(centre);
            system.points.push(point(&sky, time, centre, depth_hpa));
        }
        unplanned::add(&sky, time, &taken, &mut unplanned);
    }
    systems.extend(unplanned);
    systems
}

fn point(sky: &Sky<'_>, time: Instant, centre: Position, depth_hpa: f64) -> TruePoint {
    TruePoint {
        time: time.hour_floor(),
        latitude_deg: rounded(centre.latitude_deg(), 1e4),
        longitude_deg: rounded(centre.longitude_deg(), 1e4),
        pressure_hpa: rounded(sky.pressure_hpa(centre), 1e3),
        depth_hpa: rounded(depth_hpa, 10.0),
    }
}

fn rounded(value: f64, parts: f64) -> f64 {
    (value * parts).round() / parts
}

/// The extreme of the field nearest downhill (uphill for a high) of a place: Newton's method on the
/// exact field where it is bowl-shaped, a step along the slope where it is not. `None` where no
/// extreme is reached in 200 steps.
pub(super) fn centre(sky: &Sky<'_>, from: Position, low: bool) -> Option<Position> {
    let sign = if low { 1.0 } else { -1.0 };
    let mut place = from;
    for _ in 0..200 {
        let ([px, py], [pxx, pxy, pyy]) = sky.derivatives_hpa_km(place);
        let (px, py) = (sign * px, sign * py);
        let (pxx, pxy, pyy) = (sign * pxx, sign * pxy, sign * pyy);
        let determinant = pxx * pyy - pxy * pxy;
        let bowl = determinant > 0.0 && pxx > 0.0;
        let (mut east, mut north) = if bowl {
            ((-px * pyy + py * pxy) / determinant, (-py * pxx + px * pxy) / determinant)
        } else {
            let slope = px.hypot(py).max(1e-12);
            (-25.0 * px / slope, -25.0 * py / slope)
        };
        let length = east.hypot(north);
        if bowl && length < 0.005 {
            return Some(place);
        }
        if length > 40.0 {
            (east, north) = (east * 40.0 / length, north * 40.0 / length);
        }
        place = place.offset(east, north);
    }
    None
}

/// Difference between the centre and the last closed isobar, by flooding a lattice round it: the
/// water rises until it runs out over the edge or into a deeper place.
fn depth_hpa(sky: &Sky<'_>, centre: Position, low: bool) -> f64 {
    let sign = if low { 1.0 } else { -1.0 };
    let bottom_hpa = sky.pressure_hpa(centre);
    // Thousandths of a hectopascal above the centre: whole numbers order without doubt.
    let height = |x: i64, y: i64| {
        let (x, y) = (x as f64 * LATTICE_STEP_KM, y as f64 * LATTICE_STEP_KM);
        whole_nearest(1000.0 * sign * (sky.pressure_hpa(centre.offset(x, y)) - bottom_hpa))
    };
    let mut seen = BTreeSet::from([(0, 0)]);
    let mut shore = BinaryHeap::from([Reverse((0, 0_i64, 0_i64))]);
    let mut level = 0;
    while let Some(Reverse((rise, x, y))) = shore.pop() {
        level = level.max(rise);
        if x.abs() == LATTICE_HALF || y.abs() == LATTICE_HALF || rise < -100 {
            break;
        }
        for (dx, dy) in [(1, 0), (-1, 0), (0, 1), (0, -1), (1, 1), (1, -1), (-1, 1), (-1, -1)] {
            let next = (x + dx, y + dy);
            if seen.insert(next) {
                shore.push(Reverse((height(next.0, next.1), next.0, next.1)));
            }
        }
    }
    level as f64 / 1000.0
}
