//! Following centres from hour to hour: assignment, births, gaps, ends, splits and merges.

use pathfinding::kuhn_munkres::kuhn_munkres_min;
use pathfinding::matrix::Matrix;

use super::centre::Centre;
use super::motion::State;
use super::{Kind, TrackEvent};
use crate::instant::Hour;
use crate::quantity::whole_nearest;

/// Gate of the association: chi-squared of three degrees of freedom at 99 % (METHODS TRK-4).
pub const GATE: f64 = 11.344_87;
/// Fastest believed motion of a centre, km/h (60 kt, TRK-4).
const SPEED_MAX_KM_H: f64 = 111.0;
/// Slack on that limit, km: two places are each uncertain.
const SPEED_SLACK_KM: f64 = 200.0;
/// Hours without a find after which a followed track ends (TRK-4: two analyses or 9 h).
const COAST_MAX_H: i64 = 9;
/// Analyses missed in a row after which an unconfirmed track is dropped.
const TENTATIVE_MISSES_MAX: usize = 1;
/// Finds after which a track is confirmed.
const HITS_TO_CONFIRM: usize = 2;
/// Confidence of a centre needed for a birth, and for a confirmation.
const BIRTH_CONFIDENCE: f64 = 0.75;
const CONFIRM_CONFIDENCE: f64 = 0.90;
/// Least errors of an observed centre: the finder and the analysis are no better than this.
const POSITION_ERROR_MIN_KM: f64 = 15.0;
const PRESSURE_ERROR_MIN_HPA: f64 = 0.3;

/// What is kept of one hour of a track.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Step {
    /// When.
    pub hour: Hour,
    /// The filtered state.
    pub state: State,
    /// Whether a centre was found; else the state is carried forward.
    pub observed: bool,
}

/// A track: the states of one centre.
#[derive(Clone, PartialEq, Debug)]
pub struct Track {
    /// High or low.
    pub kind: Kind,
    /// Its states, ascending in time.
    pub steps: Vec<Step>,
    /// Whether it has been found often enough to be shown as a system.
    pub confirmed: bool,
    /// The last centre found.
    pub centre: Centre,
    /// What happened.
    pub events: Vec<TrackEvent>,
    /// Whether it has ended.
    pub ended: bool,
    hits: usize,
    misses: usize,
    best_confidence: f64,
}

impl Track {
    fn born(hour: Hour, centre: &Centre, events: Vec<TrackEvent>) -> Self {
        let state = State::first(
            centre.position,
            position_error_km(centre),
            centre.pressure_hpa,
            pressure_error_hpa(centre),
        );
        Self {
            kind: centre.kind,
            steps: vec![Step { hour, state, observed: true }],
            confirmed: false,
            centre: centre.clone(),
            events,
            ended: false,
            hits: 1,
            misses: 0,
            best_confidence: centre.confidence,
        }
    }

    /// Its newest step; a track has one from its birth.
    pub fn newest(&self) -> &Step {
        &self.steps[self.steps.len() - 1]
    }

    /// Hour of its birth.
    pub fn since(&self) -> Hour {
        self.steps[0].hour
    }

    /// Hours since it was last found.
    pub fn coasted_h(&self) -> i64 {
        let last = self.steps.iter().rev().find(|step| step.observed).map(|step| step.hour);
        last.map_or(0, |hour| self.newest().hour.unix_h() - hour.unix_h())
    }

    fn extend(&mut self, hour: Hour, predicted: &State, centre: Option<&Centre>) {
        let Some(centre) = centre else {
            self.misses += 1;
            self.steps.push(Step { hour, state: *predicted, observed: false });
            return;
        };
        let state = predicted.updated(
            centre.position,
            position_error_km(centre),
            centre.pressure_hpa,
            pressure_error_hpa(centre),
        );
        self.steps.push(Step { hour, state, observed: true });
        self.centre = centre.clone();
        self.hits += 1;
        self.misses = 0;
        self.best_confidence = self.best_confidence.max(centre.confidence);
        if self.hits >= HITS_TO_CONFIRM && self.best_confidence >= CONFIRM_CONFIDENCE {
            self.confirmed = true;
        }
    }

    /// Drops the states carried forward after the last find.
    fn trim(&mut self) {
        while self.steps.len() > 1 && self.steps.last().is_some_and(|step| !step.observed) {
            self.steps.pop();
        }
    }
}

fn position_error_km(centre: &Centre) -> f64 {
    centre.position_error_km.max(POSITION_ERROR_MIN_KM)
}

fn pressure_error_hpa(centre: &Centre) -> f64 {
    centre.pressure_error_hpa.max(PRESSURE_ERROR_MIN_HPA)
}

/// Follows the centres of a run of hours, ascending; hours may be missing. Every track that was
/// ever confirmed comes back, the ended ones too, in order of birth.
pub fn follow(hours: &[(Hour, Vec<Centre>)]) -> Vec<Track> {
    let mut live: Vec<Track> = Vec::new();
    let mut past: Vec<Track> = Vec::new();
    for (hour, centres) in hours {
        for kind in [Kind::Low, Kind::High] {
            let found: Vec<&Centre> = centres.iter().filter(|centre| centre.kind == kind).collect();
            step(&mut live, *hour, kind, &found);
        }
        let (ended, kept): (Vec<Track>, Vec<Track>) = live.into_iter().partition(|t| t.ended);
        past.extend(ended.into_iter().filter(|track| track.confirmed));
        live = kept;
    }
    past.extend(live);
    past.sort_by(|one, other| {
        (one.since(), one.kind)
            .cmp(&(other.since(), other.kind))
            .then(one.steps[0].state.pressure_hpa.total_cmp(&other.steps[0].state.pressure_hpa))
            .then(
                one.steps[0]
                    .state
                    .position
                    .longitude_deg()
                    .total_cmp(&other.steps[0].state.position.longitude_deg()),
            )
    });
    past
}

fn step(live: &mut Vec<Track>, hour: Hour, kind: Kind, centres: &[&Centre]) {
    let members: Vec<usize> = (0..live.len()).filter(|k| live[*k].kind == kind).collect();
    let predicted: Vec<State> = members
        .iter()
        .map(|k| {
            let last = live[*k].newest();
            last.state.predicted((hour.unix_h() - last.hour.unix_h()) as f64)
        })
        .collect();
    let distances: Vec<Vec<Option<f64>>> = members
        .iter()
        .zip(&predicted)
        .map(|(k, state)| {
            centres.iter().map(|centre| distance(&live[*k], state, hour, centre)).collect()
        })
        .collect();
    let assigned = assign(&distances, centres.len());
    for ((member, state), column) in members.iter().zip(&predicted).zip(&assigned) {
        live[*member].extend(hour, state, column.map(|column| centres[column]));
    }
    let taken: Vec<Option<usize>> = (0..centres.len())
        .map(|column| assigned.iter().position(|found| *found == Some(column)))
        .collect();
    for (row, member) in members.iter().enumerate() {
        if assigned[row].is_some() {
            continue;
        }
        let merged = (0..centres.len()).find(|column| {
            taken[*column].is_some() && distances[row][*column].is_some_and(|d| d <= GATE)
        });
        let track = &live[*member];
        let lost = if track.confirmed {
            track.coasted_h() > COAST_MAX_H
        } else {
            track.misses > TENTATIVE_MISSES_MAX
        };
        if let (Some(column), true) = (merged, track.confirmed) {
            let into = taken[column].map(|row| members[row]);
            let what = format!("merged into {}", mark(into));
            let track = &mut live[*member];
            track.trim();
            track.events.push(TrackEvent { hour, what });
            track.ended = true;
        } else if lost {
            let track = &mut live[*member];
            track.trim();
            track.events.push(TrackEvent { hour, what: "lost".to_owned() });
            track.ended = true;
        }
    }
    for (column, centre) in centres.iter().enumerate() {
        if taken[column].is_some() || centre.confidence < BIRTH_CONFIDENCE {
            continue;
        }
        let mut events = vec![TrackEvent { hour, what: "found".to_owned() }];
        let parent = live.iter().position(|track| {
            track.kind == kind
                && track.confirmed
                && track.newest().state.position.distance_km(centre.position)
                    < track.centre.radius_km
        });
        if parent.is_some() {
            events.push(TrackEvent { hour, what: format!("split from {}", mark(parent)) });
        }
        live.push(Track::born(hour, centre, events));
    }
}

/// Another track in an event.
fn mark(track: Option<usize>) -> String {
    track.map_or_else(|| "another".to_owned(), |_| "a near one".to_owned())
}

/// Squared normalised distance of a centre from a predicted state; `None` beyond the gate or the
/// fastest believed motion.
fn distance(track: &Track, predicted: &State, hour: Hour, centre: &Centre) -> Option<f64> {
    let last = track.newest();
    let moved_km = last.state.position.distance_km(centre.position);
    let elapsed_h = (hour.unix_h() - last.hour.unix_h()) as f64;
    let speed_limit_km = SPEED_MAX_KM_H * elapsed_h + SPEED_SLACK_KM;
    if moved_km > speed_limit_km {
        return None;
    }
    let (east_km, north_km) = predicted.position.offset_to(centre.position);
    let position_variance = predicted.motion.value + position_error_km(centre).powi(2);
    let pressure_variance = predicted.pressure.value + pressure_error_hpa(centre).powi(2);
    let surprise_hpa = centre.pressure_hpa - predicted.pressure_hpa;
    let squared = (east_km * east_km + north_km * north_km) / position_variance
        + surprise_hpa * surprise_hpa / pressure_variance;
    (squared <= GATE).then_some(squared)
}

/// Cheapest assignment of rows to columns; a row may go without at the price of the gate.
///
/// Costs are whole thousandths, so that the outcome is exact and the same everywhere; equal ones
/// are settled by the order of rows and columns.
pub fn assign(distances: &[Vec<Option<f64>>], columns: usize) -> Vec<Option<usize>> {
    if distances.is_empty() {
        return Vec::new();
    }
    let thousandths = |cost: f64| whole_nearest(cost * 1000.0);
    let forbidden = thousandths(GATE) * 1000;
    let rows = distances.len();
    let mut weights = Matrix::new(rows, columns + rows, forbidden);
    for (row, costs) in distances.iter().enumerate() {
        for (column, cost) in costs.iter().enumerate() {
            if let Some(cost) = cost {
                weights[(row, column)] = thousandths(*cost);
            }
        }
        weights[(row, columns + row)] = thousandths(GATE);
    }
    let (_, found) = kuhn_munkres_min(&weights);
    found
        .into_iter()
        .enumerate()
        .map(|(row, column)| {
            (column < columns && weights[(row, column)] < forbidden).then_some(column)
        })
        .collect()
}

#[cfg(test)]
mod tests;
