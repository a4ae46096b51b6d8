//! A station's own series: what its checks and its tendency look at.

use crate::instant::Instant;
use crate::obs::held::{Copy, Slot};
use crate::report::{Identifier, Platform};
use crate::sphere::Position;

/// Hours before the hour that a series reaches back: the temperature of 12 hours ago (RED-3).
pub const BACK_H: i64 = 12;
/// Hours after it: a spike shows by what follows (QC-5).
pub const AHEAD_H: i64 = 1;

/// One report of a series.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Point {
    /// Time of observation.
    pub time: Instant,
    /// Where, if it said so.
    pub position: Option<Position>,
    /// Pressure at the barometer, hPa.
    pub pressure_station_hpa: Option<f64>,
    /// Sea-level pressure as reported, hPa.
    pub pressure_msl_hpa: Option<f64>,
    /// Air temperature, degrees Celsius.
    pub air_temperature_c: Option<f64>,
}

impl Point {
    /// The values of a held copy.
    pub fn of(copy: &Copy) -> Self {
        Self {
            time: copy.time(),
            position: copy.position(),
            pressure_station_hpa: copy.value(Slot::PressureStation),
            pressure_msl_hpa: copy.value(Slot::PressureMsl),
            air_temperature_c: copy.value(Slot::AirTemperature),
        }
    }
}

/// A point with the station it belongs to.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct StationPoint {
    /// What kind of place.
    pub platform: Platform,
    /// Who.
    pub station: Identifier,
    /// What was reported.
    pub point: Point,
}

/// A pressure that can be compared within a series.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Level {
    /// At the barometer: what the tendency group refers to (COD-3).
    Station,
    /// At sea level as reported.
    Sea,
}

impl Level {
    /// The pressure of a point at this level, hPa.
    pub const fn of(self, point: &Point) -> Option<f64> {
        match self {
            Self::Station => point.pressure_station_hpa,
            Self::Sea => point.pressure_msl_hpa,
        }
    }
}

/// A station's reports in order of time, those of the hours around the one in question.
#[derive(Clone, Copy, Debug)]
pub struct Series<'a> {
    points: &'a [Point],
}

impl<'a> Series<'a> {
    /// A series of points that are in order of time.
    pub const fn new(points: &'a [Point]) -> Self {
        Self { points }
    }

    /// The points.
    pub const fn points(&self) -> &'a [Point] {
        self.points
    }

    /// The point nearest to a time, within a tolerance in seconds, that `wanted` accepts; of two at
    /// the same distance the earlier.
    pub fn near(
        &self,
        time: Instant,
        tolerance_s: i64,
        wanted: impl Fn(&Point) -> bool,
    ) -> Option<&'a Point> {
        let distance = |point: &Point| point.time.seconds_since(time).abs();
        self.points
            .iter()
            .filter(|point| distance(point) <= tolerance_s && wanted(point))
            .min_by_key(|point| (distance(point), point.time))
    }

    /// The last point before a time, within so many seconds, that `wanted` accepts.
    pub fn before(
        &self,
        time: Instant,
        within_s: i64,
        wanted: impl Fn(&Point) -> bool,
    ) -> Option<&'a Point> {
        self.points
            .iter()
            .rev()
            .find(|point| point.time < time && wanted(point))
            .filter(|point| time.seconds_since(point.time) <= within_s)
    }

    /// The first point after a time, within so many seconds, that `wanted` accepts.
    pub fn after(
        &self,
        time: Instant,
        within_s: i64,
        wanted: impl Fn(&Point) -> bool,
    ) -> Option<&'a Point> {
        self.points
            .iter()
            .find(|point| point.time > time && wanted(point))
            .filter(|point| point.time.seconds_since(time) <= within_s)
    }
}
