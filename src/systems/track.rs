//! Following centres from hour to hour: assignment, births, gaps, ends, splits and merges.

use std::sync::Arc;

use pathfinding::kuhn_munkres::kuhn_munkres_min;
use pathfinding::matrix::Matrix;

use super::Kind;
use super::centre::{Centre, HourCentres};
use super::motion::{Sighting, State};
use crate::instant::Hour;
use crate::quantity::whole_nearest;
use crate::sphere::Position;

/// Gate of the association: chi-squared of three degrees of freedom at 99 % (METHODS TRK-4).
pub const GATE: f64 = 11.344_87;
/// Gate of the second round, among tracks and centres that the first left over: one in a hundred
/// finds lies beyond the first gate by chance, and would cut most tracks within four days.
const SECOND_GATE: f64 = 25.0;
/// The third round, among confirmed tracks and centres that are left over still: where the old
/// centre is gone and a new one stands this near, with a pressure this like, the system has not
/// ended; its centre has jumped, as in a broad flat low.
const JUMP_KM: f64 = 250.0;
const JUMP_HPA: f64 = 5.0;
/// Fastest believed motion of a centre, km/h (60 kt, TRK-4).
const SPEED_MAX_KM_H: f64 = 111.0;
/// Slack on that limit, km: two places are each uncertain.
const SPEED_SLACK_KM: f64 = 200.0;
/// A followed track ends after so many hours and so many analyses without a find (TRK-4).
const COAST_MAX_H: i64 = 9;
const COAST_MAX_MISSES: usize = 2;
/// Where the analysis can be trusted and shows no centre, or where another system has taken the
/// place, a track is withdrawn after so many hours; until it ends it may still be found again.
const WITHDRAW_H: i64 = 4;
/// The same for one that was not beyond doubt when it was last found.
const WITHDRAW_WEAK_H: i64 = 2;
const WEAK_CONFIDENCE: f64 = 0.99;
/// A track that loses its centre to another within this distance of its own place merges, km.
const MERGE_KM: f64 = 250.0;
/// Analyses missed in a row after which an unconfirmed track is dropped.
const TENTATIVE_MISSES_MAX: usize = 1;
/// Finds after which a track is confirmed.
const HITS_TO_CONFIRM: usize = 2;
/// Confidence of a centre needed for a birth, and for a confirmation.
const BIRTH_CONFIDENCE: f64 = 0.75;
const CONFIRM_CONFIDENCE: f64 = 0.95;
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

/// Something that happened to a track; other tracks are named by their [`Track::id`].
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Happening {
    /// It was first found.
    Found,
    /// It was first found within the last closed isobar of another.
    SplitFrom(usize),
    /// It was found again after it had been withdrawn.
    FoundAgain,
    /// Its centre is no longer to be told from that of another.
    MergedInto(usize),
    /// It is no longer found.
    Lost,
}

/// How a track stands.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Standing {
    /// Followed.
    Live,
    /// Not shown any more, but may still be found again.
    Withdrawn,
    /// Ended.
    Ended,
}

/// A track: the states of one centre.
#[derive(Clone, PartialEq, Debug)]
pub struct Track {
    /// Number within the run, in order of birth.
    pub id: usize,
    /// High or low.
    pub kind: Kind,
    /// Its states, ascending in time.
    pub steps: Vec<Step>,
    /// When it had been found often enough to be shown as a system.
    pub confirmed: Option<Hour>,
    /// The last centre found.
    pub centre: Centre,
    /// What happened, and when.
    pub happened: Vec<(Hour, Happening)>,
    /// How it stands.
    pub standing: Standing,
    /// The other track that has the centre in its place, since it was last found.
    rival: Option<usize>,
    hits: usize,
    misses: usize,
    best_confidence: f64,
}

impl Track {
    fn born(id: usize, hour: Hour, centre: &Centre) -> Self {
        let state = State::first(&sighting(centre, centre.position));
        Self {
            id,
            kind: centre.kind,
            steps: vec![Step { hour, state, observed: true }],
            confirmed: None,
            centre: centre.clone(),
            happened: vec![(hour, Happening::Found)],
            standing: Standing::Live,
            rival: None,
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

    /// How often it was found.
    pub const fn hits(&self) -> usize {
        self.hits
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
        if self.standing == Standing::Withdrawn {
            self.standing = Standing::Live;
            self.happened.push((hour, Happening::FoundAgain));
        }
        let seen = Round::ALL
            .iter()
            .find_map(|round| self.take(predicted, hour, centre, *round))
            .map_or_else(|| sighting(centre, centre.position), |(_, seen)| seen);
        let state = predicted.updated(&seen);
        self.steps.push(Step { hour, state, observed: true });
        self.centre = centre.clone();
        self.hits += 1;
        self.misses = 0;
        self.rival = None;
        self.best_confidence = self.best_confidence.max(centre.confidence);
        if self.hits >= HITS_TO_CONFIRM && self.best_confidence >= CONFIRM_CONFIDENCE {
            self.confirmed.get_or_insert(hour);
        }
    }

    /// Drops the states carried forward after the last find.
    fn trim(&mut self) {
        while self.steps.len() > 1 && self.steps.last().is_some_and(|step| !step.observed) {
            self.steps.pop();
        }
    }

    /// Cost of taking a centre for this track in a round of the association, and the sighting that
    /// it then is: at the centre's own place, or at that of a secondary where only that lies within
    /// the gate. `None` beyond the gate or the fastest believed motion.
    ///
    /// The cost is the squared normalised distance and the logarithm of the covariance's
    /// determinant, so that a track that knows less claims less (TRK-4).
    fn take(
        &self,
        predicted: &State,
        hour: Hour,
        centre: &Centre,
        round: Round,
    ) -> Option<(f64, Sighting)> {
        let last = self.newest();
        let elapsed_h = (hour.unix_h() - last.hour.unix_h()) as f64;
        let reach_km = SPEED_MAX_KM_H * elapsed_h + SPEED_SLACK_KM;
        std::iter::once(centre.position)
            .chain(centre.secondaries.iter().map(|secondary| secondary.position))
            .filter(|place| last.state.position.distance_km(*place) <= reach_km)
            .find_map(|place| {
                let mut seen = sighting(centre, place);
                let (squared, determinant) = predicted.distance(&seen);
                let off_km = predicted.position.distance_km(place);
                let off_hpa = (predicted.pressure_hpa - centre.pressure_hpa).abs();
                let within = match round {
                    Round::First => squared <= GATE,
                    Round::Second => squared <= SECOND_GATE,
                    Round::Jump => {
                        self.confirmed.is_some() && off_km <= JUMP_KM && off_hpa <= JUMP_HPA
                    }
                };
                if round == Round::Jump {
                    // A jump says little of the motion: it is doubted, and turns the track less.
                    seen.doubt = (off_km / 3.0, off_hpa / 3.0);
                }
                within.then(|| (squared + determinant.ln(), seen))
            })
    }
}

/// The rounds of the association: each takes what the one before left over.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Round {
    First,
    Second,
    Jump,
}

impl Round {
    const ALL: [Self; 3] = [Self::First, Self::Second, Self::Jump];
}

/// A centre as the filter takes it, at one of its places.
fn sighting(centre: &Centre, position: Position) -> Sighting {
    Sighting {
        position,
        position_error_km: centre.position_error_km.max(POSITION_ERROR_MIN_KM),
        pressure_hpa: centre.pressure_hpa,
        pressure_error_hpa: centre.pressure_error_hpa.max(PRESSURE_ERROR_MIN_HPA),
        doubt: (0.0, 0.0),
    }
}

/// Follows the centres of a run of hours, ascending; hours may be missing. Every track that was
/// ever confirmed comes back, the ended ones too, and the unconfirmed ones of the last hour, in
/// order of birth.
pub fn follow(hours: &[Arc<HourCentres>]) -> Vec<Track> {
    let mut run = Run::default();
    for hour in hours {
        for kind in [Kind::Low, Kind::High] {
            run.step(hour, kind);
        }
        run.bury();
    }
    let mut tracks = run.past;
    tracks.extend(run.live);
    tracks.sort_by_key(|track| track.id);
    tracks
}

/// The tracks of a run so far.
#[derive(Default)]
struct Run {
    live: Vec<Track>,
    past: Vec<Track>,
    born: usize,
}

impl Run {
    fn step(&mut self, hour: &HourCentres, kind: Kind) {
        let now = hour.hour;
        let centres: Vec<&Centre> =
            hour.centres.iter().filter(|centre| centre.kind == kind).collect();
        let members: Vec<usize> =
            (0..self.live.len()).filter(|k| self.live[*k].kind == kind).collect();
        let predicted: Vec<State> = members
            .iter()
            .map(|k| {
                let last = self.live[*k].newest();
                last.state.predicted((now.unix_h() - last.hour.unix_h()) as f64)
            })
            .collect();
        let mut assigned: Vec<Option<usize>> = vec![None; members.len()];
        for round in Round::ALL {
            let mut costs = costs(&self.live, &members, &predicted, now, &centres, round);
            for (row, costs) in costs.iter_mut().enumerate() {
                for (column, cost) in costs.iter_mut().enumerate() {
                    if assigned[row].is_some() || assigned.contains(&Some(column)) {
                        *cost = None;
                    }
                }
            }
            for (row, column) in assign(&costs, centres.len()).into_iter().enumerate() {
                assigned[row] = assigned[row].or(column);
            }
        }
        for ((member, state), column) in members.iter().zip(&predicted).zip(&assigned) {
            self.live[*member].extend(now, state, column.map(|column| centres[column]));
        }
        // By centre: the number of the track that has it.
        let taken: Vec<Option<usize>> = (0..centres.len())
            .map(|column| assigned.iter().position(|found| *found == Some(column)))
            .map(|row| row.map(|row| self.live[members[row]].id))
            .collect();
        for (row, member) in members.iter().enumerate() {
            if assigned[row].is_none() {
                let trusted = hour.trusted(predicted[row].position);
                miss(&mut self.live[*member], now, trusted, &centres, &taken);
            }
        }
        for (column, centre) in centres.iter().enumerate() {
            if taken[column].is_none() && centre.confidence >= BIRTH_CONFIDENCE {
                self.bear(now, centre);
            }
        }
    }

    /// A centre that belongs to no track begins one.
    fn bear(&mut self, now: Hour, centre: &Centre) {
        let mut track = Track::born(self.born, now, centre);
        self.born += 1;
        let parent = self
            .live
            .iter()
            .filter(|other| {
                other.kind == centre.kind && other.confirmed.is_some() && other.misses == 0
            })
            .map(|other| (other, other.newest().state.position.distance_km(centre.position)))
            .filter(|(other, distance_km)| *distance_km < other.centre.radius_km)
            .min_by(|(_, one), (_, other)| one.total_cmp(other));
        if let Some((parent, _)) = parent {
            track.happened.push((now, Happening::SplitFrom(parent.id)));
        }
        self.live.push(track);
    }

    /// Moves what has ended out of the way; what was never confirmed leaves no trace.
    fn bury(&mut self) {
        let (ended, kept): (Vec<Track>, Vec<Track>) =
            std::mem::take(&mut self.live).into_iter().partition(|t| t.standing == Standing::Ended);
        self.past.extend(ended.into_iter().filter(|track| track.confirmed.is_some()));
        self.live = kept;
    }
}

/// A track without a find this hour: it coasts, is withdrawn, or ends.
fn miss(track: &mut Track, now: Hour, trusted: bool, centres: &[&Centre], taken: &[Option<usize>]) {
    if track.confirmed.is_none() {
        if track.misses > TENTATIVE_MISSES_MAX {
            track.standing = Standing::Ended;
        }
        return;
    }
    let place = track.newest().state.position;
    if track.rival.is_none() {
        track.rival = centres
            .iter()
            .zip(taken)
            .map(|(centre, by)| (centre.position.distance_km(place), *by))
            .filter(|(distance_km, by)| *distance_km < MERGE_KM && by.is_some())
            .min_by(|(one, _), (other, _)| one.total_cmp(other))
            .and_then(|(_, by)| by);
    }
    let coasted_h = track.coasted_h();
    let weak = track.centre.confidence < WEAK_CONFIDENCE;
    let withdraw_h = if weak { WITHDRAW_WEAK_H } else { WITHDRAW_H };
    if coasted_h > COAST_MAX_H && track.misses > COAST_MAX_MISSES {
        if track.standing == Standing::Live {
            track.happened.push((now, farewell(track)));
        }
        track.standing = Standing::Ended;
        track.trim();
    } else if track.standing == Standing::Live
        && coasted_h >= withdraw_h
        && (trusted || track.rival.is_some())
    {
        track.happened.push((now, farewell(track)));
        track.standing = Standing::Withdrawn;
    }
}

fn farewell(track: &Track) -> Happening {
    track.rival.map_or(Happening::Lost, Happening::MergedInto)
}

/// Costs of giving each centre to each track, counted from the least.
fn costs(
    live: &[Track],
    members: &[usize],
    predicted: &[State],
    now: Hour,
    centres: &[&Centre],
    round: Round,
) -> Vec<Vec<Option<f64>>> {
    let raw: Vec<Vec<Option<f64>>> = members
        .iter()
        .zip(predicted)
        .map(|(k, state)| {
            centres
                .iter()
                .map(|centre| live[*k].take(state, now, centre, round).map(|(cost, _)| cost))
                .collect()
        })
        .collect();
    let least = raw.iter().flatten().flatten().copied().fold(f64::INFINITY, f64::min);
    raw.into_iter()
        .map(|row| row.into_iter().map(|cost| cost.map(|cost| cost - least)).collect())
        .collect()
}

/// Cheapest assignment of rows to columns; a row goes without only where it must: that costs more
/// than any pair.
///
/// Costs are whole thousandths, so that the outcome is exact and the same everywhere; equal ones
/// are settled by the order of rows and columns.
pub fn assign(distances: &[Vec<Option<f64>>], columns: usize) -> Vec<Option<usize>> {
    if distances.is_empty() {
        return Vec::new();
    }
    let thousandths = |cost: f64| whole_nearest(cost * 1000.0);
    let dearest = distances.iter().flatten().flatten().copied().fold(GATE, f64::max);
    let without = thousandths(dearest) + 1;
    let forbidden = without.saturating_mul(1000);
    let rows = distances.len();
    let mut weights = Matrix::new(rows, columns + rows, forbidden);
    for (row, costs) in distances.iter().enumerate() {
        for (column, cost) in costs.iter().enumerate() {
            if let Some(cost) = cost {
                weights[(row, column)] = thousandths(*cost);
            }
        }
        weights[(row, columns + row)] = without;
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
