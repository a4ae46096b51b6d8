//! Pressure tendency: as reported, as computed from the station's own series, in words.
//!
//! [`table`] makes the rows. Its parts: [`characteristic`] the code of a trace (TEN-1), [`motion`] what
//! a ship's own way does to its barometer (TEN-2), [`tide`] the atmospheric tide (TEN-3), [`words`]
//! the trade's words (TEN-4).

use serde::{Deserialize, Serialize};

use crate::instant::Instant;
use crate::report::{Identifier, Platform};
use crate::sphere::Position;

pub mod characteristic;
pub mod motion;
pub mod rows;
pub mod tide;
pub mod words;

pub use rows::table;

/// One row of the pressure-tendency table.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct TendencyRow {
    /// Who.
    pub station: Identifier,
    /// What kind of place.
    pub platform: Platform,
    /// Name from the catalogue, where known.
    pub name: Option<String>,
    /// Where.
    pub position: Position,
    /// Time of the newest report.
    pub time: Instant,
    /// Newest sea-level pressure, hPa.
    pub pressure_msl_hpa: Option<f64>,
    /// Characteristic as reported (code table 0200).
    pub characteristic: Option<u8>,
    /// Characteristic as computed from the station's own series (TEN-1).
    pub characteristic_computed: Option<u8>,
    /// 3 h change as reported, hPa.
    pub change_3h_reported_hpa: Option<f64>,
    /// 3 h change as computed from the own series, hPa.
    pub change_3h_computed_hpa: Option<f64>,
    /// Part of it that is the atmospheric tide (TEN-3), hPa.
    pub tide_3h_hpa: Option<f64>,
    /// Part of it that is the ship's own motion through the field (TEN-2), hPa.
    pub ship_motion_3h_hpa: Option<f64>,
    /// The 3 h change with tide and ship motion removed, hPa, with its error.
    pub change_3h_hpa: Option<f64>,
    /// Its standard error, hPa.
    pub change_3h_error_hpa: Option<f64>,
    /// Change over the last hour, hPa.
    pub change_1h_hpa: Option<f64>,
    /// 24 h change, as reported or else computed, hPa.
    pub change_24h_hpa: Option<f64>,
    /// The change in words (TEN-4), e.g. `falling quickly, more slowly`.
    pub words: String,
    /// Pressures of the last 24 whole hours, oldest first, hPa: the barograph trace.
    pub trace_hpa: Vec<Option<f64>>,
    /// Whether something speaks against the newest value.
    pub doubtful: bool,
}
