//! From a run of analyses to the systems that the watch is shown.

use std::collections::BTreeMap;
use std::sync::Arc;

pub use super::centre::HourCentres;
use super::motion::smoothed;
use super::names::{NameBook, name_tracks, settled_book};
use super::outlook::outlook;
use super::rating::{bergeron_of, change, phase};
use super::track::{Happening, Standing, Track, follow as follow_centres};
use super::{Kind, Measured, System, TrackEvent, TrackPoint};
use crate::instant::{Hour, Instant};
use crate::quantity::{kt_from_m_s, wrap_360_deg};
use crate::sphere::Position;

/// Finds before an outlook is given, and hours without a find after which it is withheld.
const OUTLOOK_HITS_MIN: usize = 4;
const OUTLOOK_COAST_MAX_H: i64 = 3;
/// Time in which the belief in a system that is not found fades by a factor e, h.
const CONFIDENCE_FADES_H: f64 = 3.0;
/// Below this speed no course is stated, kt.
const COURSE_SPEED_MIN_KT: f64 = 3.0;

/// The systems of a run of hours and the names that are settled with them.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Followed {
    /// Systems alive at the newest hour: lows deepest first, then highs highest first.
    pub systems: Vec<System>,
    /// Systems that ended within the run, newest end first.
    pub ended: Vec<System>,
    /// What was found for the first time and is not confirmed yet, without names of its own (`L?`,
    /// `H?`): not to be shown as systems. In the same order.
    pub forming: Vec<System>,
    /// The name book with what is settled now.
    pub names: NameBook,
}

/// What the watchkeeper has decided about systems, by their computed names.
#[derive(Clone, Copy, Debug)]
pub struct Wishes<'w> {
    /// Computed name to chosen name.
    pub renamed: &'w BTreeMap<String, String>,
    /// Names that are not to be shown.
    pub dismissed: &'w BTreeMap<String, Instant>,
}

/// Follows the centres of the hours, ascending, and rates what is alive at the last of them.
///
/// `reports` are the places of the newest hour's pressure reports. Names of hours not later than
/// `settled` are written into the book that comes back.
pub fn follow(
    hours: &[Arc<HourCentres>],
    reports: &[Position],
    book: &NameBook,
    settled: Hour,
    wishes: &Wishes<'_>,
) -> Followed {
    let (tracks, young): (Vec<Track>, Vec<Track>) =
        follow_centres(hours).into_iter().partition(|track| track.confirmed.is_some());
    let names = name_tracks(&tracks, book);
    // What each track is called where another's events speak of it.
    let called: BTreeMap<usize, &str> = tracks
        .iter()
        .zip(&names)
        .map(|(track, name)| (track.id, wishes.renamed.get(name).unwrap_or(name).as_str()))
        .collect();
    let mut followed =
        Followed { names: settled_book(book, &tracks, &names, settled), ..Followed::default() };
    for (track, name) in tracks.iter().zip(&names) {
        if wishes.dismissed.contains_key(name) {
            continue;
        }
        let mut system = system(track, name, &called, reports);
        if let Some(chosen) = wishes.renamed.get(name) {
            let what = format!("renamed from {name}");
            system.events.push(TrackEvent { hour: track.newest().hour, what });
            system.name.clone_from(chosen);
        }
        if track.standing == Standing::Live {
            followed.systems.push(system);
        } else {
            followed.ended.push(system);
        }
    }
    followed.forming = young
        .iter()
        .filter(|track| track.coasted_h() == 0)
        .map(|track| {
            let name = if track.kind == Kind::Low { "L?" } else { "H?" };
            system(track, name, &called, reports)
        })
        .collect();
    sort(&mut followed.systems);
    sort(&mut followed.forming);
    followed.ended.sort_by(|one, other| {
        let end = |system: &System| system.track.last().map(|point| point.hour);
        end(other).cmp(&end(one)).then_with(|| one.name.cmp(&other.name))
    });
    followed
}

/// Lows first, deepest first; then highs, highest first.
fn sort(systems: &mut [System]) {
    systems.sort_by(|one, other| {
        let key = |system: &System| match system.kind {
            Kind::Low => (0, system.pressure_hpa.value),
            Kind::High => (1, -system.pressure_hpa.value),
        };
        let ((kind_1, order_1), (kind_2, order_2)) = (key(one), key(other));
        kind_1
            .cmp(&kind_2)
            .then(order_1.total_cmp(&order_2))
            .then_with(|| one.name.cmp(&other.name))
    });
}

/// The events of a track in words.
fn events(track: &Track, called: &BTreeMap<usize, &str>) -> Vec<TrackEvent> {
    let name = |id: &usize| called.get(id).copied().unwrap_or("another");
    track
        .happened
        .iter()
        .map(|(hour, happening)| TrackEvent {
            hour: *hour,
            what: match happening {
                Happening::Found => "found".to_owned(),
                Happening::SplitFrom(id) => format!("split from {}", name(id)),
                Happening::FoundAgain => "found again".to_owned(),
                Happening::MergedInto(id) => format!("merged into {}", name(id)),
                Happening::Lost => "lost".to_owned(),
            },
        })
        .collect()
}

fn system(
    track: &Track,
    name: &str,
    called: &BTreeMap<usize, &str>,
    reports: &[Position],
) -> System {
    let states: Vec<_> = track.steps.iter().map(|step| step.state).collect();
    let hours: Vec<f64> = track.steps.iter().map(|step| step.hour.unix_h() as f64).collect();
    let points: Vec<TrackPoint> = smoothed(&states, &hours)
        .iter()
        .zip(&track.steps)
        .map(|(state, step)| TrackPoint {
            hour: step.hour,
            position: state.position,
            position_error_km: state.motion.value.sqrt(),
            pressure_hpa: state.pressure_hpa,
            pressure_error_hpa: state.pressure.value.sqrt(),
            observed: step.observed,
        })
        .collect();
    let newest = track.newest();
    let state = &newest.state;
    let coasted_h = track.coasted_h();
    let phase = phase(track.kind, &points, track.confirmed.is_some(), coasted_h);
    let [east, north] = state.velocity_km_h;
    let speed_km_h = east.hypot(north);
    let speed_kt = kt_from_m_s(speed_km_h / 3.6);
    let velocity_error_km_h = state.motion.rate.sqrt();
    let moving = speed_kt >= COURSE_SPEED_MIN_KT && points.len() > 1;
    let trusted = track.confirmed.is_some()
        && track.hits() >= OUTLOOK_HITS_MIN
        && coasted_h <= OUTLOOK_COAST_MAX_H
        && track.standing == Standing::Live;
    let radius_km = track.centre.radius_km;
    let found = coasted_h == 0;
    System {
        name: name.to_owned(),
        kind: track.kind,
        position: state.position,
        position_error_km: state.motion.value.sqrt(),
        pressure_hpa: Measured { value: state.pressure_hpa, error: state.pressure.value.sqrt() },
        change_3h_hpa: change(&points, 3),
        change_6h_hpa: change(&points, 6),
        change_12h_hpa: change(&points, 12),
        change_24h_hpa: change(&points, 24),
        bergeron: bergeron_of(track.kind, &points, 24),
        bergeron_12h: bergeron_of(track.kind, &points, 12),
        course_deg: moving.then(|| wrap_360_deg(east.atan2(north).to_degrees())),
        course_error_deg: moving.then(|| (velocity_error_km_h / speed_km_h).atan().to_degrees()),
        speed_kt: (points.len() > 1)
            .then(|| Measured { value: speed_kt, error: kt_from_m_s(velocity_error_km_h / 3.6) }),
        phase,
        // A low that is not found is as good as a coin after two hours or so.
        confidence: track.centre.confidence * (-(coasted_h as f64) / CONFIDENCE_FADES_H).exp(),
        depth_hpa: track.centre.depth_hpa,
        last_closed_isobar_hpa: found.then_some(track.centre.last_closed_isobar_hpa),
        radius_km: found.then_some(radius_km),
        gale_radius_km: None,
        since: track.since(),
        outlook: if trusted { outlook(state) } else { Vec::new() },
        events: events(track, called),
        reports_inside: reports
            .iter()
            .filter(|place| place.distance_km(state.position) <= radius_km)
            .count(),
        track: points,
    }
}

/// Greatest distance from a centre, km, of a wind of at least `least_m_s` by a sampler of the
/// expected surface wind: along 24 bearings out to `reach_km`, by steps of 25 km. `None` where
/// there is none.
pub fn wind_radius_km(
    centre: Position,
    least_m_s: f64,
    reach_km: f64,
    speed_m_s: &dyn Fn(Position) -> Option<f64>,
) -> Option<f64> {
    let mut greatest: Option<f64> = None;
    for bearing in 0..24 {
        let mut distance_km = 25.0;
        while distance_km <= reach_km {
            let place = centre.destination(f64::from(bearing) * 15.0, distance_km);
            let strong = speed_m_s(place).is_some_and(|speed| speed >= least_m_s);
            if strong && greatest.is_none_or(|so_far| distance_km > so_far) {
                greatest = Some(distance_km);
            }
            distance_km += 25.0;
        }
    }
    greatest
}
