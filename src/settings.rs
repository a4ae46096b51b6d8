//! The configuration, read from TOML and checked once.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use crate::alert::Thresholds;
use crate::analysis::AnalysisSettings;
use crate::instant::Instant;
use crate::obs::{ObsSettings, Verdict};
use crate::report::{Identifier, Platform};
use crate::sphere::Position;

/// Everything that can be set. Every field has a default; an unknown key is an error.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct Settings {
    /// The region, or `None` to fit it to where the reports are.
    pub region: Option<RegionBox>,
    /// Grid points eastward, at most.
    pub grid_columns: usize,
    /// Grid points northward, at most.
    pub grid_rows: usize,
    /// Hours of analyses kept and shown.
    pub window_h: i64,
    /// Hours of reports that enter one hour's analysis, with decaying weight.
    pub memory_h: i64,
    /// Hours after which an hour is settled and no longer remade.
    pub settling_h: i64,
    /// Barometers above this height, m, do not enter the sea-level analysis (RED-3).
    pub station_height_max_m: f64,
    /// Places to watch.
    pub watch_points: Vec<WatchPoint>,
    /// Alert thresholds.
    pub alerts: AlertSettings,
    /// The user's own station catalogue, a CSV file; its stations override the built-in ones.
    pub stations: Option<String>,
    /// The own ship, if there is one.
    pub own_ship: Option<OwnShip>,
}

/// A latitude and longitude box; west to east runs eastward and may cross the date line.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct RegionBox {
    /// Southern edge, degrees.
    pub south_deg: f64,
    /// Northern edge, degrees.
    pub north_deg: f64,
    /// Western edge, degrees.
    pub west_deg: f64,
    /// Eastern edge, degrees.
    pub east_deg: f64,
}

/// A place that the watch keeps an eye on.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct WatchPoint {
    /// Its name.
    pub name: String,
    /// Latitude, degrees.
    pub latitude_deg: f64,
    /// Longitude, degrees.
    pub longitude_deg: f64,
}

impl WatchPoint {
    /// Where it is; `Settings::check` has made sure that it is a place.
    pub fn position(&self) -> Position {
        Position::clamped(self.latitude_deg, self.longitude_deg)
    }
}

/// The own ship, kept by hand.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct OwnShip {
    /// Latitude, degrees.
    pub latitude_deg: f64,
    /// Longitude, degrees.
    pub longitude_deg: f64,
    /// Course over ground, degrees true.
    pub course_deg: f64,
    /// Speed over ground, kt.
    pub speed_kt: f64,
}

/// Thresholds of the alert rules.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
#[serde(default, deny_unknown_fields)]
pub struct AlertSettings {
    /// 3 h fall, hPa, above which a station raises an alert (very rapidly: 6.0).
    pub fall_3h_hpa: f64,
    /// Bergerons at which a low is deepening explosively.
    pub bergeron: f64,
    /// Surface wind, kt, from which an alert stands (gale: 34).
    pub wind_kt: f64,
    /// Distance from a watch point, nautical miles, within which a low raises an alert.
    pub near_nm: f64,
    /// Minutes without a new file after which the feed is stale.
    pub stale_minutes: i64,
    /// Share of the region, 0 to 1, with an untrustworthy analysis, from which an alert stands.
    pub weak_share: f64,
    /// A program and its arguments run on a new alert; no shell is involved.
    pub command: Vec<String>,
}

impl Settings {
    /// The part that the making of observations needs.
    pub fn obs(&self, overruled: &BTreeMap<String, Verdict>) -> ObsSettings {
        ObsSettings {
            station_height_max_m: self.station_height_max_m,
            overruled: overruled.clone(),
        }
    }

    /// The part that the analysis needs; reports ruled sound are safe from the neighbour check.
    pub fn analysis(&self, overruled: &BTreeMap<String, Verdict>) -> AnalysisSettings {
        let kept = overruled
            .iter()
            .filter(|(_, verdict)| **verdict != Verdict::Refused)
            .filter_map(|(key, _)| decided(key))
            .collect();
        AnalysisSettings {
            memory_h: self.memory_h,
            station_height_max_m: self.station_height_max_m,
            kept,
            ..AnalysisSettings::default()
        }
    }

    /// The part that the alert rules need.
    pub fn thresholds(&self) -> Thresholds {
        let alerts = &self.alerts;
        Thresholds {
            fall_3h_hpa: alerts.fall_3h_hpa,
            bergeron: alerts.bergeron,
            wind_kt: alerts.wind_kt,
            near_nm: alerts.near_nm,
            stale_minutes: alerts.stale_minutes,
            weak_share: alerts.weak_share,
        }
    }
}

/// Platform, station and time of a decision's key (`ship ABCD 2026-01-15T12:00:00Z`).
fn decided(key: &str) -> Option<(Platform, Identifier, Instant)> {
    let (platform, rest) = key.split_once(' ')?;
    let (station, time) = rest.rsplit_once(' ')?;
    let platform = [Platform::Land, Platform::Ship, Platform::Buoy, Platform::Aerodrome]
        .into_iter()
        .find(|one| one.word() == platform)?;
    Some((platform, Identifier::new(station)?, Instant::parse(time)?))
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            region: None,
            grid_columns: 121,
            grid_rows: 101,
            window_h: 48,
            memory_h: 6,
            settling_h: 12,
            station_height_max_m: 1000.0,
            watch_points: Vec::new(),
            alerts: AlertSettings::default(),
            stations: None,
            own_ship: None,
        }
    }
}

impl Default for AlertSettings {
    fn default() -> Self {
        Self {
            fall_3h_hpa: 6.0,
            bergeron: 1.0,
            wind_kt: 34.0,
            near_nm: 300.0,
            stale_minutes: 90,
            weak_share: 0.6,
            command: Vec::new(),
        }
    }
}

/// Why a configuration is refused.
#[derive(Clone, PartialEq, Debug, thiserror::Error)]
pub enum SettingsError {
    /// Not TOML, an unknown key, or a value of the wrong kind; the text names line and key.
    #[error("the settings cannot be read: {0}")]
    Form(String),
    /// A value outside its range.
    #[error("settings: {key}: expected {expected}, found {found}")]
    Range {
        /// The key.
        key: String,
        /// What it must be.
        expected: String,
        /// What it is.
        found: String,
    },
}

impl Settings {
    /// Reads and checks a configuration.
    ///
    /// # Errors
    ///
    /// [`SettingsError::Form`] for text that is not such a configuration, [`SettingsError::Range`]
    /// for a value outside its range.
    pub fn from_toml(text: &str) -> Result<Self, SettingsError> {
        let settings: Self =
            toml::from_str(text).map_err(|error| SettingsError::Form(error.to_string()))?;
        settings.check()?;
        Ok(settings)
    }

    /// Checks every range.
    ///
    /// # Errors
    ///
    /// [`SettingsError::Range`], naming the first key that is out of range.
    pub fn check(&self) -> Result<(), SettingsError> {
        let whole = |key: &str, found: i64, low: i64, high: i64| {
            check(
                key,
                (low..=high).contains(&found),
                &format!("{low} to {high}"),
                &found.to_string(),
            )
        };
        let float = |key: &str, found: f64, low: f64, high: f64| {
            check(
                key,
                (low..=high).contains(&found),
                &format!("{low} to {high}"),
                &found.to_string(),
            )
        };
        let size = |found: usize| i64::try_from(found).unwrap_or(i64::MAX);
        whole("grid_columns", size(self.grid_columns), 11, 481)?;
        whole("grid_rows", size(self.grid_rows), 11, 481)?;
        whole("window_h", self.window_h, 6, 240)?;
        whole("memory_h", self.memory_h, 0, 24)?;
        whole("settling_h", self.settling_h, 1, 72)?;
        float("station_height_max_m", self.station_height_max_m, 0.0, 5000.0)?;
        if let Some(region) = &self.region {
            float("region.south_deg", region.south_deg, -90.0, 90.0)?;
            float("region.north_deg", region.north_deg, region.south_deg + 1.0, 90.0)?;
            float("region.west_deg", region.west_deg, -180.0, 360.0)?;
            float("region.east_deg", region.east_deg, -180.0, 360.0)?;
        }
        for (number, point) in self.watch_points.iter().enumerate() {
            float(
                &format!("watch_points[{number}].latitude_deg"),
                point.latitude_deg,
                -90.0,
                90.0,
            )?;
            float(
                &format!("watch_points[{number}].longitude_deg"),
                point.longitude_deg,
                -180.0,
                360.0,
            )?;
        }
        if let Some(ship) = &self.own_ship {
            float("own_ship.latitude_deg", ship.latitude_deg, -90.0, 90.0)?;
            float("own_ship.longitude_deg", ship.longitude_deg, -180.0, 360.0)?;
            float("own_ship.course_deg", ship.course_deg, 0.0, 360.0)?;
            float("own_ship.speed_kt", ship.speed_kt, 0.0, 60.0)?;
        }
        float("alerts.fall_3h_hpa", self.alerts.fall_3h_hpa, 0.5, 40.0)?;
        float("alerts.bergeron", self.alerts.bergeron, 0.1, 10.0)?;
        float("alerts.wind_kt", self.alerts.wind_kt, 10.0, 150.0)?;
        float("alerts.near_nm", self.alerts.near_nm, 0.0, 3000.0)?;
        whole("alerts.stale_minutes", self.alerts.stale_minutes, 1, 100_000)?;
        float("alerts.weak_share", self.alerts.weak_share, 0.0, 1.0)
    }
}

fn check(key: &str, sound: bool, expected: &str, found: &str) -> Result<(), SettingsError> {
    if sound {
        return Ok(());
    }
    Err(SettingsError::Range {
        key: key.to_owned(),
        expected: expected.to_owned(),
        found: found.to_owned(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_empty_file_is_the_default_and_an_unknown_key_an_error() {
        assert_eq!(Settings::from_toml(""), Ok(Settings::default()));
        let error = Settings::from_toml("window_hours = 3").expect_err("an unknown key");
        assert!(error.to_string().contains("window_hours"), "{error}");
    }

    #[test]
    fn a_value_out_of_range_says_which_and_why() {
        let error = Settings::from_toml("window_h = 1000").expect_err("too long");
        assert_eq!(error.to_string(), "settings: window_h: expected 6 to 240, found 1000");
        let nan = Settings::from_toml("[alerts]\nbergeron = nan").expect_err("not a number");
        assert_eq!(nan.to_string(), "settings: alerts.bergeron: expected 0.1 to 10, found NaN");
    }
}
