//! The rows of the pressure-tendency table.

use std::sync::Arc;

use super::motion::{self, Way};
use super::{TendencyRow, characteristic, tide, words};
use crate::instant::{HOUR_S, Hour, Instant};
use crate::obs::{Catalogue, Element, Observation, Observed, Verdict};
use crate::report::{Form, Identifier, Platform};
use crate::sphere::Position;

/// A row needs a report this young.
const NEWEST_S: i64 = 3 * HOUR_S;
/// Hours of the trace.
const TRACE_H: i64 = 24;
/// How far from one hour ago the earlier report may lie, seconds.
const ONE_HOUR_TOLERANCE_S: i64 = 15 * 60;
/// How far from three hours ago, seconds.
const THREE_HOURS_TOLERANCE_S: i64 = 25 * 60;
/// How far from a day ago, seconds.
const DAY_TOLERANCE_S: i64 = 65 * 60;
/// How far from its hour a point of a trace for the characteristic may lie, seconds.
const TRACE_TOLERANCE_S: i64 = 10 * 60;
/// Error of a 3 h change of one barometer, hPa: reading and rounding at both ends (own figures).
const FIXED_ERROR_HPA: f64 = 0.15;
/// The same at sea, where the barometer is read on a moving bridge.
const SHIP_ERROR_HPA: f64 = 0.5;
/// Share of the tide that its formula may be wrong by (Copenhagen: phase 17 degrees off).
const TIDE_SHARE: f64 = 0.3;

/// Pressure-tendency table at `now`, fastest falling first; rows without a change last, ties by
/// kind and name.
///
/// `observed` must reach from 24 hours before `valid` to it. A station has a row if its newest report
/// is not older than three hours. `sampler` gives the analysed sea-level pressure, hPa, of an hour
/// at a place, or nothing where there is no analysis; it serves the ships' own motion alone.
///
/// The 3 h change is the reported one unless it is in doubt and the own series has one; what the
/// tide (equatorward of 45 degrees) and the ship's way made of it is taken out. A moving ship
/// whose way cannot be taken out has no corrected change.
pub fn table(
    observed: &Observed,
    now: Instant,
    valid: Hour,
    catalogue: &Catalogue,
    sampler: &dyn Fn(Hour, Position) -> Option<f64>,
) -> Vec<TendencyRow> {
    let first = valid.plus(-TRACE_H - 1);
    let hours: Vec<(Hour, &[Arc<Observation>])> = observed
        .hours
        .range(first..=valid.plus(1))
        .map(|(hour, of_hour)| (*hour, of_hour.observations.as_slice()))
        .collect();
    let mut cursors: Vec<&[Arc<Observation>]> = hours.iter().map(|(_, list)| *list).collect();
    let mut rows = Vec::new();
    // The walks stand in the order of kind and name: the least of their heads is next.
    while let Some(who) = cursors.iter().filter_map(|list| list.first()).map(|one| who(one)).min() {
        let mut series: Vec<&Observation> = Vec::new();
        for cursor in &mut cursors {
            while let Some((one, rest)) = cursor.split_first() {
                if self::who(one) != who {
                    break;
                }
                series.push(one);
                *cursor = rest;
            }
        }
        series.retain(|one| one.report.time <= now);
        series.sort_by_key(|one| one.report.time);
        let recent = |one: &&&Observation| now.seconds_since(one.report.time) <= NEWEST_S;
        if who.1.is_generic() {
            // Each is another ship, so it has no series but itself.
            let alone = series.iter().filter(recent);
            rows.extend(alone.filter_map(|one| row(&[*one], valid, catalogue, sampler)));
        } else if series.last().as_ref().is_some_and(recent) {
            rows.extend(row(&series, valid, catalogue, sampler));
        }
    }
    rows.sort_by(|a, b| {
        let key = |row: &TendencyRow| row.change_3h_hpa.unwrap_or(f64::INFINITY);
        key(a)
            .total_cmp(&key(b))
            .then_with(|| (a.platform, a.station, a.time).cmp(&(b.platform, b.station, b.time)))
    });
    rows
}

fn who(observation: &Observation) -> (Platform, Identifier) {
    (observation.report.platform, observation.report.station)
}

/// Which pressure of a station's reports is compared.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Level {
    Station,
    Sea,
    Altimeter,
}

impl Level {
    /// The pressure of an observation, hPa, unless its pressure is refused.
    fn of(self, observation: &Observation) -> Option<f64> {
        if observation.verdict(Element::Pressure) == Verdict::Refused
            || observation.verdict(Element::Position) == Verdict::Refused
        {
            return None;
        }
        match self {
            Self::Station => observation.report.pressure_station_hpa,
            Self::Sea => observation.report.pressure_msl_hpa,
            Self::Altimeter => observation.report.altimeter_hpa,
        }
    }
}

/// One station's reports, in order of time, seen from the newest.
struct Trace<'a> {
    series: &'a [&'a Observation],
    newest: &'a Observation,
}

impl Trace<'_> {
    fn near(&self, hours: i64, tolerance_s: i64, level: Level) -> Option<&Observation> {
        let then = self.newest.report.time.plus_s(-hours * HOUR_S);
        let distance = |one: &Observation| one.report.time.seconds_since(then).abs();
        self.series
            .iter()
            .copied()
            .filter(|one| distance(one) <= tolerance_s && level.of(one).is_some())
            .min_by_key(|one| (distance(one), one.report.time))
    }

    /// The change over so many hours, hPa, of the pressure that both ends have, scaled where they are
    /// not exactly so far apart; and the level it is of.
    fn change(&self, hours: i64, tolerance_s: i64) -> Option<(f64, Level)> {
        [Level::Station, Level::Sea, Level::Altimeter].into_iter().find_map(|level| {
            let now_hpa = level.of(self.newest)?;
            let then = self.near(hours, tolerance_s, level)?;
            let apart_h = self.newest.report.time.hours_since(then.report.time);
            // Longer spans are not scaled: a day's change is not a rate.
            let scale = if hours <= 3 { hours as f64 / apart_h } else { 1.0 };
            Some(((now_hpa - level.of(then)?) * scale, level))
        })
    }

    /// The characteristic of the hourly trace, of the two ends alone where the middle is missing;
    /// altimeter settings are too coarse for one.
    fn characteristic(&self) -> Option<u8> {
        [Level::Station, Level::Sea].into_iter().find_map(|level| {
            let at = |hours: i64| {
                let one = self.near(hours, TRACE_TOLERANCE_S, level)?;
                level.of(one).map(characteristic::tenths)
            };
            let (oldest, newest) = (at(3)?, at(0)?);
            Some(match (at(2), at(1)) {
                (Some(p2), Some(p1)) => characteristic::of_trace([oldest, p2, p1, newest]).0,
                _ => characteristic::of_change(newest - oldest),
            })
        })
    }

    fn three_hours_ago(&self) -> Option<Position> {
        let then = self.newest.report.time.plus_s(-3 * HOUR_S);
        let off = |one: &Observation| one.report.time.seconds_since(then).abs();
        self.series
            .iter()
            .filter(|one| off(one) <= THREE_HOURS_TOLERANCE_S)
            .filter(|one| one.verdict(Element::Position) == Verdict::Sound)
            .min_by_key(|one| (off(one), one.report.time))
            .map(|one| one.position)
    }
}

fn row(
    series: &[&Observation],
    valid: Hour,
    catalogue: &Catalogue,
    sampler: &dyn Fn(Hour, Position) -> Option<f64>,
) -> Option<TendencyRow> {
    let newest = *series.last()?;
    let report = &newest.report;
    let trace = Trace { series, newest };
    let reported = report.pressure_change_3h_hpa;
    let computed = trace.change(3, THREE_HOURS_TOLERANCE_S);
    let characteristic_computed = trace.characteristic();
    let code = report.characteristic.or(characteristic_computed);
    let pressure_known = [Level::Station, Level::Sea, Level::Altimeter]
        .into_iter()
        .any(|level| level.of(newest).is_some());
    if reported.is_none() && !pressure_known {
        return None;
    }
    let tendency_verdict = newest.verdict(Element::Tendency);
    let usable = reported.filter(|_| tendency_verdict < Verdict::Refused);
    let chosen = match (usable, computed) {
        (Some(change), None) => Some((change, Level::Station)),
        (Some(change), Some(_)) if tendency_verdict == Verdict::Sound => {
            Some((change, Level::Station))
        }
        (_, computed) => computed,
    };
    let removed = chosen.and_then(|(change, level)| remove(&trace, change, level, sampler));
    let text = match (chosen, &removed) {
        (_, Some(clean)) => words::of_change(clean.change_hpa, code),
        (Some((change, _)), None) => {
            format!("{} (own motion not taken out)", words::of_change(change, code))
        }
        (None, None) => String::new(),
    };
    let doubtful = [Element::Pressure, Element::Tendency, Element::Position]
        .into_iter()
        .any(|element| newest.verdict(element) > Verdict::Sound);
    Some(TendencyRow {
        station: report.station,
        platform: report.platform,
        name: catalogue.name(report.platform, report.station).map(str::to_owned),
        position: newest.position,
        time: report.time,
        pressure_msl_hpa: newest.pressure_msl_hpa.or_else(|| Level::Sea.of(newest)),
        characteristic: report.characteristic,
        characteristic_computed,
        change_3h_reported_hpa: reported,
        change_3h_computed_hpa: computed.map(|(change, _)| change),
        tide_3h_hpa: removed.as_ref().map(|clean| clean.tide_hpa),
        ship_motion_3h_hpa: removed.as_ref().and_then(|clean| clean.motion_hpa),
        change_3h_hpa: removed.as_ref().map(|clean| clean.change_hpa),
        change_3h_error_hpa: removed.as_ref().map(|clean| clean.error_hpa),
        change_1h_hpa: trace.change(1, ONE_HOUR_TOLERANCE_S).map(|(change, _)| change),
        change_24h_hpa: report
            .pressure_change_24h_hpa
            .filter(|_| tendency_verdict == Verdict::Sound)
            .or_else(|| trace.change(24, DAY_TOLERANCE_S).map(|(change, _)| change)),
        words: text,
        trace_hpa: hourly(series, valid),
        doubtful,
    })
}

/// A change with what is not weather taken out.
#[expect(clippy::struct_field_names, reason = "a name ends in its unit")]
struct Clean {
    change_hpa: f64,
    error_hpa: f64,
    tide_hpa: f64,
    motion_hpa: Option<f64>,
}

fn remove(
    trace: &Trace<'_>,
    change_hpa: f64,
    level: Level,
    sampler: &dyn Fn(Hour, Position) -> Option<f64>,
) -> Option<Clean> {
    let newest = trace.newest;
    let at_hour = newest.hour;
    let (motion_hpa, motion_error_hpa) = match motion::way(newest, trace.three_hours_ago()) {
        Way::Still => (None, 0.0),
        Way::From(from, way_error) => {
            let now_field = |place: Position| sampler(at_hour, place);
            let then_field = |place: Position| sampler(at_hour.plus(-3), place);
            let fields: [&dyn Fn(Position) -> Option<f64>; 2] = [&now_field, &then_field];
            let (part, error) = motion::part_hpa(newest.position, from, way_error, &fields)?;
            (Some(part), error)
        }
        Way::Unknown => return None,
    };
    let tide_hpa = tide::change_hpa(newest.position, newest.report.time, 3);
    let barometer = if newest.report.platform == Platform::Ship && newest.report.form != Form::Bufr
    {
        SHIP_ERROR_HPA
    } else {
        FIXED_ERROR_HPA
    };
    let rounding = if level == Level::Altimeter {
        newest.report.altimeter_rounding_hpa * std::f64::consts::SQRT_2
    } else {
        0.0
    };
    let variance = barometer * barometer
        + rounding * rounding
        + motion_error_hpa * motion_error_hpa
        + (TIDE_SHARE * tide_hpa).powi(2);
    Some(Clean {
        change_hpa: change_hpa - tide_hpa - motion_hpa.unwrap_or(0.0),
        error_hpa: variance.sqrt(),
        tide_hpa,
        motion_hpa,
    })
}

/// Sea-level pressures of the last 24 whole hours, oldest first, hPa: those not refused. Where a
/// station gives none (it stands too high) its station pressures make the trace.
fn hourly(series: &[&Observation], valid: Hour) -> Vec<Option<f64>> {
    let sea = |one: &Observation| one.pressure_msl_hpa.or_else(|| Level::Sea.of(one));
    let any_sea = series.iter().any(|one| sea(one).is_some());
    (0..TRACE_H)
        .map(|step| {
            let hour = valid.plus(step + 1 - TRACE_H);
            let one = series.iter().find(|one| one.hour == hour)?;
            if any_sea { sea(one) } else { Level::Station.of(one) }
        })
        .collect()
}

#[cfg(test)]
mod tests;
