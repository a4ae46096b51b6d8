//! A surface report as it was sent: what the decoders hand upwards, whatever the code form.
//!
//! Nothing is reduced, checked or placed here; a value that the report lacks is `None`.

use std::fmt;

use serde::{Deserialize, Deserializer, Serialize, Serializer};

use crate::instant::Instant;
use crate::sphere::Position;

/// Longest identifier kept, bytes: a WIGOS identifier or a table's station name fits.
pub const IDENTIFIER_BYTES: usize = 32;

/// The name a station reports under: index number, call sign, location indicator or table name.
///
/// Held in place, upper case as sent, printable ASCII only.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Identifier {
    bytes: [u8; IDENTIFIER_BYTES],
    length: u8,
}

impl Identifier {
    /// An identifier of the printable ASCII of `text`, trimmed; anything else becomes `?`.
    /// `None` where nothing is left or it is longer than [`IDENTIFIER_BYTES`].
    pub fn new(text: &str) -> Option<Self> {
        Self::from_bytes(text.trim().as_bytes())
    }

    /// As [`Identifier::new`], from bytes that are already trimmed.
    pub fn from_bytes(text: &[u8]) -> Option<Self> {
        if text.is_empty() || text.len() > IDENTIFIER_BYTES {
            return None;
        }
        let mut bytes = [0; IDENTIFIER_BYTES];
        for (to, &from) in bytes.iter_mut().zip(text) {
            *to = if from.is_ascii_graphic() || from == b' ' { from } else { b'?' };
        }
        Some(Self { bytes, length: u8::try_from(text.len()).ok()? })
    }

    /// The text.
    pub fn as_str(&self) -> &str {
        let bytes = self.bytes.get(..usize::from(self.length)).unwrap_or_default();
        std::str::from_utf8(bytes).unwrap_or("?")
    }

    /// Whether ships share this call sign, so that it names no single ship (METHODS QC-7).
    pub fn is_generic(&self) -> bool {
        matches!(self.as_str(), "SHIP" | "PLAT" | "MASK" | "MASKSTID" | "RIGG" | "BUOY")
    }
}

impl fmt::Debug for Identifier {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:?}", self.as_str())
    }
}

impl fmt::Display for Identifier {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(self.as_str())
    }
}

impl Serialize for Identifier {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(self.as_str())
    }
}

impl<'de> Deserialize<'de> for Identifier {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        let text = String::deserialize(deserializer)?;
        Self::new(&text).ok_or_else(|| {
            serde::de::Error::custom(format!(
                "expected an identifier of 1 to {IDENTIFIER_BYTES} characters, found {text:?}"
            ))
        })
    }
}

/// What kind of place the report was made at.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Platform {
    /// A land station, fixed or mobile.
    Land,
    /// A ship or a fixed platform that reports as one.
    Ship,
    /// A moored or drifting buoy.
    Buoy,
    /// An aerodrome.
    Aerodrome,
}

impl Platform {
    /// The word used in tables: `land`, `ship`, `buoy`, `aerodrome`.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Land => "land",
            Self::Ship => "ship",
            Self::Buoy => "buoy",
            Self::Aerodrome => "aerodrome",
        }
    }
}

/// The form the report came in.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Form {
    /// FM 12.
    Synop,
    /// FM 13.
    Ship,
    /// FM 14: a mobile land station.
    Mobile,
    /// FM 15.
    Metar,
    /// FM 16.
    Speci,
    /// FM 18.
    Buoy,
    /// FM 94.
    Bufr,
    /// A table with a header line.
    Csv,
    /// JSON lines.
    Json,
}

/// How a wind speed was come by (code table 1855).
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum WindSource {
    /// Measured by an anemometer.
    Measured,
    /// Estimated, by the Beaufort scale as a rule; already a 10 m wind.
    Estimated,
    /// Not said.
    Unknown,
}

/// Which of several copies of a report this one is (METHODS QC-7).
///
/// The order is the precedence: a later variant, or a higher rank, replaces an earlier one.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Revision {
    /// A first or delayed (RRx) report.
    Original,
    /// A correction: the x of CCx counted from 1, 1 for COR, or the BUFR update number.
    Correction(u8),
}

/// A geopotential height of a standard pressure surface, sent in place of sea-level pressure.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct StandardSurface {
    /// The surface, hPa: 1000, 925, 850, 700 or 500.
    pub pressure_hpa: f64,
    /// Its height, geopotential metres.
    pub height_gpm: f64,
}

/// A surface report as sent. See the module's text; METHODS COD.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct Report {
    /// Who reported.
    pub station: Identifier,
    /// From what kind of place.
    pub platform: Platform,
    /// In which form.
    pub form: Form,
    /// Time of observation, to the minute.
    pub time: Instant,
    /// Whether this is a first report or a correction.
    pub revision: Revision,
    /// Where, if the report says so itself.
    pub position: Option<Position>,
    /// Largest rounding error of the position as coded, degrees: 0.05 for tenths.
    pub position_rounding_deg: f64,
    /// Height of the ground above mean sea level, m.
    pub station_height_m: Option<f64>,
    /// Height of the barometer above mean sea level, m.
    pub barometer_height_m: Option<f64>,
    /// Pressure at the barometer, hPa.
    pub pressure_station_hpa: Option<f64>,
    /// Pressure reduced to mean sea level, as reported, hPa.
    pub pressure_msl_hpa: Option<f64>,
    /// Altimeter setting (QNH), hPa, the middle of what the coded value can mean (COD-9).
    pub altimeter_hpa: Option<f64>,
    /// Standard deviation of the rounding of [`Report::altimeter_hpa`], hPa.
    pub altimeter_rounding_hpa: f64,
    /// Height of a standard surface, sent in place of sea-level pressure.
    pub standard_surface: Option<StandardSurface>,
    /// Characteristic of the tendency, code table 0200, 0 to 8.
    pub characteristic: Option<u8>,
    /// Change over the last 3 hours as reported, signed, hPa.
    pub pressure_change_3h_hpa: Option<f64>,
    /// Change over the last 24 hours as reported, signed, hPa.
    pub pressure_change_24h_hpa: Option<f64>,
    /// Where the wind blows from, degrees true in 0..=360; `None` for variable and unknown.
    pub wind_from_deg: Option<f64>,
    /// Whether the direction was reported as variable.
    pub wind_variable: bool,
    /// Mean wind speed, m/s.
    pub wind_speed_m_s: Option<f64>,
    /// Highest gust, m/s.
    pub wind_gust_m_s: Option<f64>,
    /// How the wind was come by.
    pub wind_source: WindSource,
    /// Height of the anemometer above ground or water, m.
    pub anemometer_height_m: Option<f64>,
    /// Air temperature, degrees Celsius.
    pub air_temperature_c: Option<f64>,
    /// Dew point, degrees Celsius.
    pub dew_point_c: Option<f64>,
    /// Relative humidity, per cent.
    pub relative_humidity_percent: Option<f64>,
    /// Sea-surface temperature, degrees Celsius.
    pub sea_temperature_c: Option<f64>,
    /// Course made good over the past 3 hours, degrees true; motion is towards it.
    pub course_deg: Option<f64>,
    /// Speed made good, m/s; 0 with any course is stationary.
    pub speed_m_s: Option<f64>,
}

impl Report {
    /// A report with nothing in it but who, what, how and when.
    pub const fn empty(station: Identifier, platform: Platform, form: Form, time: Instant) -> Self {
        Self {
            station,
            platform,
            form,
            time,
            revision: Revision::Original,
            position: None,
            position_rounding_deg: 0.0,
            station_height_m: None,
            barometer_height_m: None,
            pressure_station_hpa: None,
            pressure_msl_hpa: None,
            altimeter_hpa: None,
            altimeter_rounding_hpa: 0.0,
            standard_surface: None,
            characteristic: None,
            pressure_change_3h_hpa: None,
            pressure_change_24h_hpa: None,
            wind_from_deg: None,
            wind_variable: false,
            wind_speed_m_s: None,
            wind_gust_m_s: None,
            wind_source: WindSource::Unknown,
            anemometer_height_m: None,
            air_temperature_c: None,
            dew_point_c: None,
            relative_humidity_percent: None,
            sea_temperature_c: None,
            course_deg: None,
            speed_m_s: None,
        }
    }

    /// Whether the report carries a pressure of any sort.
    pub const fn has_pressure(&self) -> bool {
        self.pressure_station_hpa.is_some()
            || self.pressure_msl_hpa.is_some()
            || self.altimeter_hpa.is_some()
            || self.standard_surface.is_some()
    }

    /// Whether the report carries a pressure or a wind, and so is of use here.
    pub const fn is_useful(&self) -> bool {
        self.has_pressure()
            || self.wind_speed_m_s.is_some()
            || self.pressure_change_3h_hpa.is_some()
    }
}
