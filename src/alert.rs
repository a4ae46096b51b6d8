//! What needs attention, why, since when, on what evidence.

use serde::{Deserialize, Serialize};

use crate::instant::Instant;
use crate::sphere::Position;

mod rules;

pub use rules::{Evidence, Thresholds, place_words, raise};

/// How pressing an alert is.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Urgency {
    /// Worth knowing.
    Notice,
    /// Needs attention.
    Warning,
    /// Needs attention at once.
    Urgent,
}

/// Which rule raised an alert.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Rule {
    /// A station's pressure falls very rapidly (more than 6.0 hPa in 3 h).
    RapidFall,
    /// A low deepens at 1 bergeron or more.
    ExplosiveDeepening,
    /// A low's 6 and 12 h rates lead to explosive deepening.
    DeepeningAhead,
    /// Gale force or more in the expected surface wind or in reports.
    Gale,
    /// A system comes near a watch point.
    SystemNear,
    /// A new system.
    NewSystem,
    /// The analysis cannot be trusted over much of the region.
    WeakAnalysis,
    /// No report for too long.
    StaleFeed,
    /// A station that reported regularly is silent.
    SourceGone,
}

/// One alert.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Alert {
    /// Stable key: the rule and what it is about, e.g. `rapid_fall 03772`. Acknowledgements refer
    /// to it.
    pub key: String,
    /// The rule.
    pub rule: Rule,
    /// How pressing.
    pub urgency: Urgency,
    /// What it is about: a system's name, a station, an area.
    pub subject: String,
    /// Where, if anywhere.
    pub position: Option<Position>,
    /// One line: what, with its numbers and units.
    pub message: String,
    /// Why: the evidence in words.
    pub evidence: String,
    /// How sure, 0 to 1, where a probability is known.
    pub confidence: Option<f64>,
    /// Since when it has stood.
    pub since: Instant,
    /// Whether the watchkeeper has acknowledged it.
    pub acknowledged: bool,
}

impl Rule {
    /// The word that keys begin with.
    pub const fn word(self) -> &'static str {
        match self {
            Self::RapidFall => "rapid_fall",
            Self::ExplosiveDeepening => "explosive_deepening",
            Self::DeepeningAhead => "deepening_ahead",
            Self::Gale => "gale",
            Self::SystemNear => "system_near",
            Self::NewSystem => "new_system",
            Self::WeakAnalysis => "weak_analysis",
            Self::StaleFeed => "stale_feed",
            Self::SourceGone => "source_gone",
        }
    }
}
