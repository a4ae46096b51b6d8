//! Invented weather with a known truth, reported as a real feed reports, faults and all.
//!
//! A [`Scenario`] plans highs and lows on the sphere, who reports them, and what goes wrong. A
//! [`Rehearsal`] makes the atmosphere of it (a sum of moving round systems, with winds that follow
//! from the pressure), lets the stations observe it with the errors of real instruments, writes
//! what they measured in the code forms of the trade, and delivers it in files, late, repeated,
//! corrected and garbled. What was true can be asked at any place and time.
//!
//! It stands apart: it uses no decoder and no analysis of the watch, so that an error there cannot
//! hide behind the same error here. Everything follows from the scenario, its seed and its start.

use crate::instant::Instant;
use crate::sphere::Position;

mod bulletin;
mod characteristic;
mod curve;
mod delivery;
mod dice;
mod form;
mod garble;
mod measured;
mod reduction;
pub mod scenario;
mod station;
pub mod truth;
mod vortex;
mod weather;

pub use scenario::{Scenario, ScenarioError};
pub use truth::{PlantedFault, TruePoint, TrueSystem, Truth};
pub use weather::Surface;

/// A file of the feed.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct FeedFile {
    /// When it is received, by the scenario's clock.
    pub due: Instant,
    /// Its name, which holds that time; the convention of WMO-No. 386, Attachment II-15.
    pub name: String,
    /// Its content.
    pub bytes: Vec<u8>,
}

/// A scenario with a start: the weather, the feed and the truth.
#[derive(Clone, PartialEq, Debug)]
pub struct Rehearsal {
    scenario: Scenario,
    start: Instant,
    weather: weather::Weather,
    plan: delivery::Plan,
}

impl Rehearsal {
    /// Makes the weather and the feed of a scenario that begins at `start` (taken down to the
    /// whole hour).
    pub fn new(scenario: Scenario, start: Instant) -> Self {
        let start = start.hour_floor().instant();
        let weather = weather::Weather::new(&scenario, start);
        let dice = dice::Dice::new(scenario.seed).word("instruments");
        let error_factor = scenario.instrument_error_factor;
        let eye = measured::Eye { weather: &weather, start, dice, error_factor };
        let plan = delivery::plan(&scenario, &station::stations(&scenario), &eye);
        Self { scenario, start, weather, plan }
    }

    /// The scenario.
    pub const fn scenario(&self) -> &Scenario {
        &self.scenario
    }

    /// The first hour.
    pub const fn start(&self) -> Instant {
        self.start
    }

    /// The last hour.
    pub const fn end(&self) -> Instant {
        self.start.plus_s(self.scenario.hours * 3600)
    }

    /// The files of the feed in the order they are due, those due together by name. Every call
    /// gives the same bytes.
    pub fn files(&self) -> impl Iterator<Item = FeedFile> + use<> {
        self.plan.files(&self.scenario).into_iter()
    }

    /// Number of reports sent, each sending of a report counted.
    pub const fn reports(&self) -> usize {
        self.plan.reports
    }

    /// Sea-level pressure at a place and time, hPa; exact.
    pub fn pressure_hpa(&self, position: Position, time: Instant) -> f64 {
        self.weather.at(time).pressure_hpa(position)
    }

    /// Wind at 10 m towards east and north, m/s: gradient wind for the curvature of the isobars,
    /// slowed and turned by friction (METHODS WND-3 and WND-7).
    pub fn wind_m_s(&self, position: Position, time: Instant, surface: Surface) -> (f64, f64) {
        self.weather.at(time).wind_m_s(position, surface)
    }

    /// What was true: highs and lows hour by hour, and the planted faults.
    pub fn truth(&self) -> Truth {
        Truth {
            schema: 1,
            note: "Invented weather: none of this happened.".to_owned(),
            scenario: self.scenario.name.clone(),
            start: self.start,
            end: self.end(),
            systems: truth::systems(&self.weather, self.start, self.scenario.hours),
            faults: self.plan.faults.clone(),
        }
    }
}

#[cfg(test)]
mod tests;
