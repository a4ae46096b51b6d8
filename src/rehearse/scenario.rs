//! A scenario: the plan of an invented spell of weather, of who reports it, and of what goes wrong.
//!
//! The file form is TOML; `samples/README.md` spells the keys out. A scenario is checked as a whole
//! before anything is made of it.

use serde::{Deserialize, Serialize};
use thiserror::Error;

use crate::instant::Instant;

mod check;

/// The scenarios that come with the program: name and text.
const BUILT_IN: [(&str, &str); 2] = [
    ("northern-ocean-low", include_str!("../../samples/northern-ocean-low.toml")),
    ("southern-date-line", include_str!("../../samples/southern-date-line.toml")),
];

/// Why a scenario cannot be used.
#[derive(Clone, PartialEq, Debug, Error)]
pub enum ScenarioError {
    /// Not TOML, or a key is missing, misspelt or of the wrong type.
    #[error("the scenario does not read as one: {0}")]
    Form(String),
    /// A value that makes no sense.
    #[error("{place}: expected {expected}, found {found}")]
    Value {
        /// Which key.
        place: String,
        /// What it should be.
        expected: &'static str,
        /// What it is.
        found: String,
    },
}

/// An invented spell of weather and its feed.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Scenario {
    /// Short name, used for file names.
    pub name: String,
    /// What happens, in a sentence.
    pub title: String,
    /// When it begins unless another time is asked for; a whole hour.
    pub start: Instant,
    /// How long it lasts, hours, 1 to 240.
    pub hours: i64,
    /// Seed of everything that is left to chance.
    pub seed: u64,
    /// Originating centre of the bulletins: four letters, invented.
    pub centre: String,
    /// Whether the half-daily tide of the atmosphere is part of the pressure.
    #[serde(default)]
    pub tide: bool,
    /// Size of the errors of the instruments: 1 as in reality, 0 for perfect ones.
    #[serde(default = "as_in_reality")]
    pub instrument_error_factor: f64,
    /// The pressure without the systems.
    pub background: Background,
    /// Temperatures.
    pub climate: Climate,
    /// Highs and lows.
    #[serde(rename = "system")]
    pub systems: Vec<SystemPlan>,
    /// Land stations that report in SYNOP.
    #[serde(default)]
    pub land: Vec<LandPlan>,
    /// Aerodromes that report in METAR.
    #[serde(default)]
    pub aerodromes: Vec<AerodromePlan>,
    /// Ships that report in SHIP.
    #[serde(default)]
    pub ships: Vec<ShipPlan>,
    /// Buoys that report in FM 18.
    #[serde(default)]
    pub buoys: Vec<BuoyPlan>,
    /// Places that report in a table.
    #[serde(default)]
    pub tables: Vec<TablePlan>,
    /// How the feed is packed.
    #[serde(default)]
    pub feed: FeedPlan,
    /// What goes wrong.
    #[serde(default)]
    pub faults: FaultPlan,
}

/// Pressure that falls from one latitude to another, the same all round the earth and in both
/// hemispheres; constant outside.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Background {
    /// Equatorward pressure, hPa.
    pub equatorward_hpa: f64,
    /// Poleward pressure, hPa.
    pub poleward_hpa: f64,
    /// Latitude, north or south, where the change begins, degrees.
    pub from_latitude_deg: f64,
    /// Latitude, north or south, where it ends, degrees.
    pub to_latitude_deg: f64,
}

/// Temperatures: linear in the distance from latitude 45.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Climate {
    /// Air over the sea at latitude 45, degrees Celsius.
    pub air_at_45_c: f64,
    /// Its change for each degree poleward, kelvin.
    pub air_per_degree_c: f64,
    /// Sea surface at latitude 45, degrees Celsius.
    pub sea_at_45_c: f64,
    /// Its change for each degree poleward, kelvin.
    pub sea_per_degree_c: f64,
    /// Half of the daily range over land, kelvin.
    pub daily_swing_land_c: f64,
    /// How much warmer land is than sea air, kelvin.
    pub land_offset_c: f64,
}

/// A high or low.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SystemPlan {
    /// What the truth calls it.
    pub name: String,
    /// Key points of its life, hours ascending; it passes through them smoothly, and rests before
    /// the first and after the last.
    pub points: Vec<SystemPoint>,
}

/// A key point of the life of a high or low.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SystemPoint {
    /// Hours after the start; may be negative.
    pub hour: f64,
    /// Latitude, degrees.
    pub latitude_deg: f64,
    /// Longitude, degrees.
    pub longitude_deg: f64,
    /// Pressure at the centre against the surroundings, hPa: negative for a low.
    pub anomaly_hpa: f64,
    /// Where its influence ends, km.
    pub radius_km: f64,
}

/// A box in latitude and longitude; west may exceed east, for boxes across the date line.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Area {
    /// Southern edge, degrees.
    pub south_deg: f64,
    /// Northern edge, degrees.
    pub north_deg: f64,
    /// Western edge, degrees.
    pub west_deg: f64,
    /// Eastern edge, degrees.
    pub east_deg: f64,
}

/// Unit in which a station sends its wind.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum WindUnit {
    /// Knots.
    #[default]
    Knots,
    /// Metres a second.
    MetresPerSecond,
}

/// Unit in which an aerodrome sends its altimeter setting.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum AltimeterUnit {
    /// Whole hectopascals, rounded down.
    #[default]
    Hectopascals,
    /// Hundredths of an inch of mercury, and sea-level pressure in the remarks.
    Inches,
}

/// A fixed place: name, latitude and longitude in degrees, height above mean sea level in metres.
pub type FixedPlace = (String, f64, f64, f64);

/// Land stations of one bulletin.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LandPlan {
    /// Geographical designator of the heading: two letters.
    pub area: String,
    /// Wind unit.
    #[serde(default)]
    pub wind: WindUnit,
    /// Reports every so many hours, counted from 00 UTC: 1, 3 or 6.
    #[serde(default = "one")]
    pub every_hours: i64,
    /// Index number, latitude, longitude, height.
    pub stations: Vec<FixedPlace>,
}

/// Aerodromes of one bulletin.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct AerodromePlan {
    /// Geographical designator of the heading: two letters.
    pub area: String,
    /// Minutes before the whole hour of the observation, 0 to 29.
    #[serde(default)]
    pub minutes_before: i64,
    /// Altimeter unit.
    #[serde(default)]
    pub altimeter: AltimeterUnit,
    /// Location indicator, latitude, longitude, height.
    pub stations: Vec<FixedPlace>,
}

/// Ships that ply between two places of a box.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ShipPlan {
    /// Where.
    pub area: Area,
    /// How many.
    pub count: usize,
    /// Two letters that follow Q in the call signs; no real call sign begins with Q.
    pub letters: String,
    /// Reports every so many hours, counted from 00 UTC: 1, 3 or 6.
    pub every_hours: i64,
    /// Slowest and fastest, kt.
    pub speed_kt: (f64, f64),
}

/// Buoys spread over a box.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct BuoyPlan {
    /// Where.
    pub area: Area,
    /// How many.
    pub count: usize,
    /// The first identifier; the others follow on. Five digits.
    pub first_number: u32,
    /// Reports every so many hours, counted from 00 UTC: 1, 3 or 6.
    #[serde(default = "one")]
    pub every_hours: i64,
    /// Whether it drifts (downwind, at 2 per cent of the mean westerlies) or is moored.
    #[serde(default)]
    pub drifting: bool,
}

/// The form of a table.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum TableForm {
    /// CSV with a header line.
    Csv,
    /// JSON lines.
    Json,
}

/// Places that report in a table: buoys spread over a box, or land stations named one by one.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct TablePlan {
    /// CSV or JSON lines.
    pub form: TableForm,
    /// Word that names the files and begins the buoys' names.
    pub word: String,
    /// Reports every so many hours, counted from 00 UTC: 1, 3 or 6.
    #[serde(default = "one")]
    pub every_hours: i64,
    /// Where the buoys are.
    #[serde(default)]
    pub area: Option<Area>,
    /// How many buoys.
    #[serde(default)]
    pub count: usize,
    /// Land stations: name, latitude, longitude, height.
    #[serde(default)]
    pub stations: Vec<FixedPlace>,
}

/// How the feed is packed.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct FeedPlan {
    /// Bulletins are collected for so many minutes and sent as one file; divides 60.
    #[serde(default = "half_hour")]
    pub collect_minutes: i64,
    /// Share of the files that are compressed, per cent.
    #[serde(default)]
    pub gzip_percent: f64,
    /// Share of the bulletins in SOH and ETX, per cent.
    #[serde(default)]
    pub envelope_percent: f64,
}

impl Default for FeedPlan {
    fn default() -> Self {
        Self { collect_minutes: half_hour(), gzip_percent: 0.0, envelope_percent: 30.0 }
    }
}

/// What goes wrong, and how often. Everything that happens is listed in the truth.
#[derive(Clone, Copy, PartialEq, Debug, Default, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct FaultPlan {
    /// Reports that never come, per cent.
    pub missing_percent: f64,
    /// Reports that come one to eight hours late, per cent.
    pub late_percent: f64,
    /// Reports that come twice, per cent.
    pub repeated_percent: f64,
    /// Reports that are wrong and corrected later, per cent.
    pub corrected_percent: f64,
    /// Reports with a garbled group, per cent.
    pub garbled_percent: f64,
    /// Reports whose 3-hour change has the wrong sign, per cent.
    pub sign_slip_percent: f64,
    /// Ship reports on the wrong side of the meridian, per cent.
    pub misplaced_percent: f64,
    /// Number of stations whose barometer is wrong all the time.
    pub biased_stations: usize,
    /// By how much, hPa.
    pub bias_hpa: f64,
    /// Number of stations whose barometer sticks after some hours.
    pub stuck_stations: usize,
    /// Number of stations that send their wind in the wrong unit.
    pub wrong_unit_stations: usize,
    /// Number of stations that fall silent for some hours.
    pub silent_stations: usize,
}

const fn one() -> i64 {
    1
}

const fn as_in_reality() -> f64 {
    1.0
}

const fn half_hour() -> i64 {
    30
}

impl Scenario {
    /// Reads a scenario from TOML text.
    ///
    /// # Errors
    /// What is wrong with it, and where.
    pub fn from_toml(text: &str) -> Result<Self, ScenarioError> {
        let scenario: Self =
            toml::from_str(text).map_err(|error| ScenarioError::Form(error.to_string()))?;
        check::check(&scenario)?;
        Ok(scenario)
    }

    /// A scenario that comes with the program; `None` where the name is unknown.
    pub fn built_in(name: &str) -> Option<Self> {
        let (_, text) = BUILT_IN.iter().find(|(known, _)| *known == name)?;
        Self::from_toml(text).ok()
    }

    /// The names of the scenarios that come with the program.
    pub fn built_in_names() -> impl Iterator<Item = &'static str> {
        BUILT_IN.iter().map(|(name, _)| *name)
    }
}
