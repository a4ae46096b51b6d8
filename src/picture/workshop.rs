//! Making a Picture: the fold itself, and what is kept from one making to the next.
//!
//! The [`Workshop`] only saves work: every piece in it is kept under a fingerprint of all that it
//! was made from, so a Picture made with it equals one made without (`tests/suite/law.rs`).

use std::collections::BTreeMap;
use std::hash::{DefaultHasher, Hash, Hasher};
use std::sync::Arc;

use rayon::prelude::*;

use super::{Decisions, Picture, arrivals};
use crate::alert::{Evidence, raise};
use crate::analysis::region::fit_region;
use crate::analysis::settled::Settled;
use crate::analysis::{AnalysisSettings, HourAnalysis, analyse, fingerprint};
use crate::field::Grid;
use crate::instant::{Hour, Instant};
use crate::obs::{Catalogue, Held, Observation, Observed, Observer};
use crate::quantity::m_s_from_kt;
use crate::settings::Settings;
use crate::sphere::Position;
use crate::systems::Kind;
use crate::systems::follow::{Followed, HourCentres, Wishes, follow, wind_radius_km};
use crate::systems::names::NameBook;
use crate::tendency;
use crate::winds::WindField;
use crate::winds::convergence::{Landmark, areas};
use crate::winds::fields::{DragLaw, MovingCentre, field};
use crate::winds::stations::stations;

/// Hours of change that tendency and isallobars are taken over.
const CHANGE_H: i64 = 3;
/// Hours of observations kept before the window: tendencies and traces reach back a day.
const REACH_BACK_H: i64 = 25;
/// Furthest that a radius of gales is looked for, km.
const GALE_REACH_KM: f64 = 1500.0;
/// Gale force, kt.
const GALE_KT: f64 = 34.0;

/// Observations by hour, each hour's in canonical order.
type ByHour = BTreeMap<Hour, Vec<Arc<Observation>>>;

/// All that a Picture is a function of, but the time.
#[derive(Clone, Copy, Debug)]
pub struct Inputs<'i> {
    /// The held reports.
    pub held: &'i Held,
    /// The station catalogue, part of the configuration.
    pub catalogue: &'i Catalogue,
    /// What the watchkeeper decided.
    pub decisions: &'i Decisions,
    /// Names of systems that are settled.
    pub names: &'i NameBook,
    /// Analyses of hours that are settled: what an hour was when it settled stands, whatever came
    /// later. Only hours older than the settling time are looked up.
    pub settled: &'i Settled,
    /// The configuration.
    pub settings: &'i Settings,
}

/// Remembers the pieces of the last Picture.
#[derive(Debug, Default)]
pub struct Workshop {
    observer: Observer,
    analyses: BTreeMap<Hour, Arc<HourAnalysis>>,
    centres: BTreeMap<Hour, (u64, Arc<HourCentres>)>,
    fields: BTreeMap<Hour, (u64, Arc<WindField>)>,
    law: Arc<DragLaw>,
}

/// Makes the Picture: the one function that does, and the names that are settled with it.
pub fn picture(inputs: &Inputs<'_>, now: Instant) -> (Picture, NameBook) {
    Workshop::default().picture(inputs, now)
}

impl Workshop {
    /// A workshop that remembers nothing.
    pub fn new() -> Self {
        Self::default()
    }

    /// As [`picture`], making again only the hours whose inputs changed.
    pub fn picture(&mut self, inputs: &Inputs<'_>, now: Instant) -> (Picture, NameBook) {
        let settings = inputs.settings;
        let latest = now.hour_floor();
        let reach = latest.plus(-(settings.window_h + REACH_BACK_H))..=latest.plus(1);
        let obs_settings = settings.obs(&inputs.decisions.overruled);
        let observed = self.observer.observe(inputs.held, inputs.catalogue, reach, &obs_settings);
        let by_hour = by_hour(&observed, latest, now);
        let valid = newest_pressure(&by_hour).unwrap_or(latest);
        let grid = region(settings, &by_hour, valid);
        let analysis_settings = settings.analysis(&inputs.decisions.overruled);
        let boundary = settled_until(settings, now);
        let settled = inputs.settled.range(..=boundary);
        let settled: Settled = settled.map(|(hour, kept)| (*hour, Arc::clone(kept))).collect();
        let hours = self.analyses(
            &grid,
            &by_hour,
            &settled,
            (valid, settings.window_h),
            &analysis_settings,
        );
        let followed = self.follow(inputs, &hours, &by_hour, valid, now);
        let wind_fields = self.fields(&hours, &followed);
        let newest = hours.last().filter(|analysis| analysis.hour == valid);
        let newest_field = wind_fields.last().filter(|field| field.hour == valid);
        let mut systems = followed.systems.clone();
        let lows: Vec<Position> = systems
            .iter()
            .filter(|system| system.kind == Kind::Low)
            .map(|system| system.position)
            .collect();
        for system in systems.iter_mut().filter(|system| system.kind == Kind::Low) {
            let centre = system.position;
            // A gale belongs to the nearest low.
            let is_nearest = |place: Position| {
                let own_km = centre.distance_km(place);
                lows.iter().all(|other| other.distance_km(place) >= own_km)
            };
            system.gale_radius_km = newest_field.and_then(|winds| {
                let speed_m_s = |place| speed_at(winds, place).filter(|_| is_nearest(place));
                wind_radius_km(centre, m_s_from_kt(GALE_KT), GALE_REACH_KM, &speed_m_s)
            });
        }
        let watch_points: Vec<(String, Position)> = settings
            .watch_points
            .iter()
            .map(|point| (point.name.clone(), point.position()))
            .collect();
        let of_valid = by_hour.get(&valid).map_or(&[][..], Vec::as_slice);
        let movers = movers(&followed, valid);
        let winds = newest.map_or_else(Vec::new, |analysis| {
            let reports = of_valid.iter().map(AsRef::as_ref);
            stations(analysis, reports, &watch_points, &self.law, &movers)
        });
        let landmarks: Vec<Landmark> = systems
            .iter()
            .map(|system| Landmark { name: system.name.clone(), position: system.position })
            .collect();
        let before = wind_fields.iter().find(|field| field.hour == valid.plus(-CHANGE_H));
        let convergence = newest.zip(newest_field).map_or_else(Vec::new, |(analysis, winds)| {
            areas(analysis, winds, before.map(AsRef::as_ref), &landmarks)
        });
        let sampler = |hour: Hour, place: Position| {
            let analysis = hours.iter().find(|analysis| analysis.hour == hour)?;
            analysis.at(place).map(|point| point.pressure_hpa)
        };
        let tendencies = tendency::table(&observed, now, valid, inputs.catalogue, &sampler);
        let newest_report = inputs.held.newest_until(now);
        let observations: Vec<Arc<Observation>> = by_hour
            .range(valid.plus(-settings.window_h)..=valid)
            .flat_map(|(_, list)| list.iter().map(Arc::clone))
            .collect();
        let alerts = raise(&Evidence {
            now,
            valid,
            thresholds: &settings.thresholds(),
            systems: &systems,
            hours: &hours,
            wind_fields: &wind_fields,
            winds: &winds,
            observations: &observations,
            tendencies: &tendencies,
            watch_points: &watch_points,
            newest_report,
            silent: &silent_stations(&by_hour, valid),
            acknowledged: &inputs.decisions.acknowledged,
        });
        let reports =
            arrivals::counts(inputs.held, &observed, &observations, &hours, newest_report);
        let arrivals = arrivals::arrivals(inputs.held, &observed, &hours, now);
        let picture = Picture {
            now,
            valid,
            grid,
            reports,
            hours,
            wind_fields,
            systems,
            ended: followed.ended,
            winds,
            convergence,
            tendencies,
            alerts,
            observations,
            arrivals,
            law: Arc::clone(&self.law),
        };
        (picture, followed.names)
    }

    /// Analyses of the window's hours, the kept ones where nothing changed. An hour is analysed
    /// where it has pressures of its own or of the memory before it.
    fn analyses(
        &mut self,
        grid: &Arc<Grid>,
        by_hour: &ByHour,
        settled: &Settled,
        (valid, window_h): (Hour, i64),
        settings: &AnalysisSettings,
    ) -> Vec<Arc<HourAnalysis>> {
        let wanted: Vec<Hour> = (0..window_h)
            .rev()
            .map(|back| valid.plus(-back))
            .filter(|hour| {
                let mut memory = by_hour.range(hour.plus(-settings.memory_h)..=*hour);
                memory.any(|(_, list)| list.iter().any(|one| one.pressure_msl_hpa.is_some()))
            })
            .collect();
        let kept = std::mem::take(&mut self.analyses);
        let made: Vec<Arc<HourAnalysis>> = wanted
            .par_iter()
            .map(|hour| {
                if let Some(kept) = settled.get(hour).filter(|kept| kept.grid == *grid) {
                    return Arc::clone(kept);
                }
                let print = fingerprint(grid, *hour, by_hour, settings);
                match kept.get(hour) {
                    Some(old) if old.fingerprint == print && old.grid == *grid => Arc::clone(old),
                    _ => Arc::new(analyse(grid, *hour, by_hour, settings)),
                }
            })
            .collect();
        self.analyses = wanted.into_iter().zip(made.iter().map(Arc::clone)).collect();
        made
    }

    fn follow(
        &mut self,
        inputs: &Inputs<'_>,
        hours: &[Arc<HourAnalysis>],
        by_hour: &ByHour,
        valid: Hour,
        now: Instant,
    ) -> Followed {
        let kept = std::mem::take(&mut self.centres);
        let made: Vec<(u64, Arc<HourCentres>)> = hours
            .par_iter()
            .map(|analysis| match kept.get(&analysis.hour) {
                Some((print, centres)) if *print == analysis.fingerprint => {
                    (*print, Arc::clone(centres))
                }
                _ => (analysis.fingerprint, Arc::new(HourCentres::of(analysis))),
            })
            .collect();
        // An hour that few reported in shows the hours before it once more, not where the centres
        // have gone: it is left out, or a six-hourly feed would make every system stand and jump.
        let centres: Vec<Arc<HourCentres>> = hours
            .iter()
            .zip(&made)
            .filter(|(analysis, _)| analysis.hour == valid || is_informed(analysis))
            .map(|(_, (_, centres))| Arc::clone(centres))
            .collect();
        self.centres = hours.iter().map(|analysis| analysis.hour).zip(made).collect();
        let reports: Vec<Position> = by_hour
            .get(&valid)
            .into_iter()
            .flatten()
            .filter(|one| one.pressure_msl_hpa.is_some())
            .map(|one| one.position)
            .collect();
        let Decisions { renamed, dismissed, .. } = inputs.decisions;
        let settled = settled_until(inputs.settings, now);
        follow(&centres, &reports, inputs.names, settled, &Wishes { renamed, dismissed })
    }

    fn fields(&mut self, hours: &[Arc<HourAnalysis>], followed: &Followed) -> Vec<Arc<WindField>> {
        let kept = std::mem::take(&mut self.fields);
        let law = &self.law;
        let made: Vec<(u64, Arc<WindField>)> = hours
            .par_iter()
            .map(|analysis| {
                let before = analysis.hour.plus(-CHANGE_H);
                let earlier = hours.iter().find(|other| other.hour == before).map(AsRef::as_ref);
                let movers = movers(followed, analysis.hour);
                let print = field_print(analysis, earlier, &movers);
                match kept.get(&analysis.hour) {
                    Some((old, winds)) if *old == print && winds.grid == analysis.grid => {
                        (print, Arc::clone(winds))
                    }
                    _ => (print, Arc::new(field(analysis, earlier, law, &movers))),
                }
            })
            .collect();
        let out = made.iter().map(|(_, winds)| Arc::clone(winds)).collect();
        self.fields = hours.iter().map(|analysis| analysis.hour).zip(made).collect();
        out
    }
}

/// Whether at least a tenth of the pressures that an analysis used are of its own hour.
fn is_informed(analysis: &HourAnalysis) -> bool {
    let own = analysis.innovations.iter().filter(|one| one.pressure_hpa.is_some()).count();
    own > 0 && own * 10 >= analysis.pressures_used
}

/// The newest hour that is settled at a time.
pub fn settled_until(settings: &Settings, now: Instant) -> Hour {
    now.hour_floor().plus(-settings.settling_h)
}

/// Observations by hour up to the newest hour, without those of the future.
fn by_hour(observed: &Observed, latest: Hour, now: Instant) -> ByHour {
    let known = observed.hours.range(..=latest).map(|(hour, made)| {
        let list = made.observations.iter().filter(|one| one.report.time <= now);
        (*hour, list.map(Arc::clone).collect::<Vec<_>>())
    });
    known.filter(|(_, list)| !list.is_empty()).collect()
}

/// The newest hour with a pressure.
fn newest_pressure(by_hour: &ByHour) -> Option<Hour> {
    let mut hours = by_hour.iter().rev();
    hours
        .find(|(_, list)| list.iter().any(|one| one.pressure_msl_hpa.is_some()))
        .map(|(hour, _)| *hour)
}

/// The region that is set, or the one that the window's reports fit.
fn region(settings: &Settings, by_hour: &ByHour, valid: Hour) -> Arc<Grid> {
    let (columns, rows) = (settings.grid_columns, settings.grid_rows);
    Arc::new(if let Some(area) = settings.region {
        Grid::fitted(area.south_deg, area.north_deg, area.west_deg, area.east_deg, columns, rows)
    } else {
        let positions: Vec<Position> = by_hour
            .range(valid.plus(-settings.window_h)..=valid)
            .flat_map(|(_, list)| list.iter().map(|one| one.position))
            .collect();
        fit_region(&positions, columns, rows)
    })
}

/// Where the systems were at an hour, and their velocity then, from their tracks.
fn movers(followed: &Followed, hour: Hour) -> Vec<MovingCentre> {
    let systems = followed.systems.iter().chain(&followed.ended);
    systems.filter_map(|system| super::point::mover(system, hour)).collect()
}

fn field_print(
    analysis: &HourAnalysis,
    earlier: Option<&HourAnalysis>,
    movers: &[MovingCentre],
) -> u64 {
    // The standard hasher with its fixed keys: the same throughout one run, which is as long as
    // anything is remembered.
    let mut hasher = DefaultHasher::new();
    analysis.fingerprint.hash(&mut hasher);
    earlier.map(|earlier| earlier.fingerprint).hash(&mut hasher);
    for mover in movers {
        mover.position.latitude_deg().to_bits().hash(&mut hasher);
        mover.position.longitude_deg().to_bits().hash(&mut hasher);
        mover.velocity_m_s.map(f64::to_bits).hash(&mut hasher);
    }
    hasher.finish()
}

/// Expected surface wind at the nearest grid point, m/s.
fn speed_at(winds: &WindField, place: Position) -> Option<f64> {
    let grid = &winds.grid;
    let (column, row) = grid.locate(place);
    let nearest = |x: f64, count: usize| {
        let inside = x >= -0.5 && x <= count as f64 - 0.5;
        inside.then(|| crate::quantity::index_nearest(x).min(count - 1))
    };
    let at = grid.index(nearest(column, grid.columns)?, nearest(row, grid.rows)?);
    let [u, v] = *winds.surface_m_s.get(at)?;
    let speed_m_s = u.hypot(v);
    speed_m_s.is_finite().then_some(speed_m_s)
}

/// Stations that reported in at least six of the eight hours before the last four and in none of
/// those four, with the time of their last report.
fn silent_stations(by_hour: &ByHour, valid: Hour) -> Vec<(String, Instant)> {
    let mut heard: BTreeMap<_, (usize, Instant)> = BTreeMap::new();
    for one in by_hour.range(valid.plus(-11)..=valid.plus(-4)).flat_map(|(_, list)| list) {
        let who = (one.report.platform, one.report.station);
        let entry = heard.entry(who).or_insert((0, one.report.time));
        entry.0 += 1;
        entry.1 = entry.1.max(one.report.time);
    }
    for one in by_hour.range(valid.plus(-3)..=valid).flat_map(|(_, list)| list) {
        heard.remove(&(one.report.platform, one.report.station));
    }
    heard
        .into_iter()
        .filter(|(_, (count, _))| *count >= 6)
        .map(|((platform, station), (_, last))| (format!("{} {station}", platform.word()), last))
        .collect()
}
