//! The Picture: everything the watch sees, and the only function that makes one.

use std::sync::Arc;

use serde::{Deserialize, Serialize};

use crate::alert::Alert;
use crate::analysis::HourAnalysis;
use crate::field::Grid;
use crate::instant::{Hour, Instant};
use crate::obs::held::FileRecord;
use crate::obs::{Observation, Verdict};
use crate::systems::System;
use crate::tendency::TendencyRow;
use crate::winds::fields::DragLaw;
use crate::winds::{ConvergenceArea, StationWind, WindField};

mod arrivals;
mod point;
mod workshop;

pub use point::PointValues;
pub use workshop::{Inputs, Workshop, picture, settled_until};

/// The whole result, immutable: screen and paper show it and compute nothing of their own.
#[derive(Clone, PartialEq, Debug)]
pub struct Picture {
    /// The clock it was made with.
    pub now: Instant,
    /// The hour the newest analysis is valid for.
    pub valid: Hour,
    /// The analysis grid, and with it the region.
    pub grid: Arc<Grid>,
    /// How many reports, and what became of them.
    pub reports: ReportCounts,
    /// The analyses of the window, oldest first, one for each hour that has reports in reach.
    pub hours: Vec<Arc<HourAnalysis>>,
    /// Winds and convergence fields of the same hours, in the same order.
    pub wind_fields: Vec<Arc<WindField>>,
    /// Highs and lows: lows first, deepest first, then highs, highest first.
    pub systems: Vec<System>,
    /// Systems that ended within the window, newest end first.
    pub ended: Vec<System>,
    /// Winds at watch points and stations.
    pub winds: Vec<StationWind>,
    /// Areas of convergence, strongest first.
    pub convergence: Vec<ConvergenceArea>,
    /// The pressure-tendency table, fastest falling first.
    pub tendencies: Vec<TendencyRow>,
    /// Alerts, most urgent first.
    pub alerts: Vec<Alert>,
    /// Observations of the valid hour and of each of the hours before, by hour, for the chart and
    /// the cursor.
    pub observations: Vec<Arc<Observation>>,
    /// What came in and what became of it.
    pub arrivals: Arrivals,
    /// The drag law, for winds at points.
    pub law: Arc<DragLaw>,
}

/// How many reports, and what became of them.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default, Serialize, Deserialize)]
pub struct ReportCounts {
    /// Held now.
    pub held: usize,
    /// Came again.
    pub repeats: usize,
    /// Replaced by a correction.
    pub corrections: usize,
    /// Held with a doubt.
    pub doubted: usize,
    /// Held, but not used.
    pub refused: usize,
    /// Complaints about what was not understood.
    pub complaints: usize,
    /// Held, but their station is in no catalogue.
    pub waiting_for_station: usize,
    /// Time of the newest report held.
    pub newest: Option<Instant>,
}

/// What came in and what became of it: a record of the feed. It may depend on how the reports were
/// split into files; nothing else in the Picture does.
#[derive(Clone, PartialEq, Debug, Default, Serialize)]
pub struct Arrivals {
    /// Files, newest first.
    pub files: Vec<FileRecord>,
    /// What came in lately, newest first.
    pub lines: Vec<ArrivalLine>,
    /// Stations that no catalogue holds, with the number of their waiting reports.
    pub unknown_stations: Vec<(String, usize)>,
    /// When the newest file was received.
    pub newest_file: Option<Instant>,
    /// Reports received in each of the last 24 hours, oldest first.
    pub received_per_hour: Vec<usize>,
}

/// One line of the Arrivals pane.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct ArrivalLine {
    /// When it was received.
    pub received: Instant,
    /// Station, or file name for a complaint about a file.
    pub who: String,
    /// Form or file kind in a word, e.g. `synop`, `bufr`, `file`.
    pub form: String,
    /// Time of observation.
    pub time: Option<Instant>,
    /// Minutes from observation to receipt.
    pub late_minutes: Option<i64>,
    /// What is made of it.
    pub verdict: Verdict,
    /// What was found, in words; empty where nothing was.
    pub text: String,
    /// File it came from.
    pub file: String,
    /// What a decision about the report is kept under; `None` for lines about files.
    pub decision: Option<String>,
}

/// The watchkeeper's decisions: part of the fold, kept in the journal.
#[derive(Clone, PartialEq, Debug, Default, Serialize, Deserialize)]
pub struct Decisions {
    /// Alerts acknowledged: key, when.
    pub acknowledged: std::collections::BTreeMap<String, Instant>,
    /// Reports overruled: `platform station time` to the verdict that stands.
    pub overruled: std::collections::BTreeMap<String, Verdict>,
    /// Systems renamed: computed name to chosen name.
    pub renamed: std::collections::BTreeMap<String, String>,
    /// Systems dismissed by name, with the time.
    pub dismissed: std::collections::BTreeMap<String, Instant>,
}

impl Picture {
    /// The newest analysis.
    pub fn newest(&self) -> Option<&Arc<HourAnalysis>> {
        self.hours.last()
    }

    /// The analysis of an hour.
    pub fn hour(&self, hour: Hour) -> Option<&Arc<HourAnalysis>> {
        self.hours.iter().find(|analysis| analysis.hour == hour)
    }

    /// The winds of an hour.
    pub fn wind_field(&self, hour: Hour) -> Option<&Arc<WindField>> {
        self.wind_fields.iter().find(|field| field.hour == hour)
    }
}
