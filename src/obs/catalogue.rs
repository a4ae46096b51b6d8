//! The station catalogue: where the stations stand that do not say so themselves.
//!
//! A user's own file comes before the built-in list, and what BUFR reports say about their
//! stations fills the gaps of both (see [`resolve`]). Where a report and the catalogue disagree the
//! conflict is listed, never hidden.

use std::collections::BTreeMap;
use std::io::Read;
use std::sync::Arc;

use serde::{Deserialize, Serialize};

use crate::report::{Identifier, Platform};
use crate::sphere::Position;

pub mod resolve;

pub use resolve::{Conflict, Site, resolve};

/// The built-in list, gzip of CSV. `data/SOURCES.md` names its sources.
const BUILT_IN: &[u8] = include_bytes!("data/stations.csv.gz");
/// Bytes that the built-in list may expand to.
const BUILT_IN_BYTES_MAX: u64 = 4 * 1024 * 1024;
/// Rows of a user's file that are read; a list of the whole world has a tenth of this.
const ROWS_MAX: usize = 200_000;
/// Complaints kept about a user's file.
const COMPLAINTS_MAX: usize = 100;

/// Who says where a station stands.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Source {
    /// The report itself.
    Report,
    /// The user's own catalogue.
    User,
    /// The built-in catalogue.
    BuiltIn,
    /// Other reports of the station that carried their place.
    Learnt,
}

/// One station of a catalogue.
#[derive(Clone, PartialEq, Debug)]
pub struct Station {
    /// Its name, in the catalogue's spelling, control characters escaped; may be empty.
    pub name: String,
    /// Where it stands; a user's row may leave it out to correct a height alone.
    pub position: Option<Position>,
    /// Height of the ground, m above mean sea level.
    pub station_height_m: Option<f64>,
    /// Height of the barometer, m above mean sea level.
    pub barometer_height_m: Option<f64>,
    /// Whose row it is.
    pub source: Source,
    /// Where the row was taken from, in a word, e.g. `nsd`.
    pub origin: String,
}

/// What was not understood in a user's catalogue.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("line {line}: {message}")]
pub struct CatalogueComplaint {
    /// Line of the file, from 1.
    pub line: u64,
    /// What was expected and what was found.
    pub message: String,
}

/// The catalogue. Cloning it is cheap.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Catalogue {
    built_in: Arc<Rows>,
    user: Arc<Rows>,
}

impl Catalogue {
    /// No station at all.
    pub fn empty() -> Self {
        Self::default()
    }

    /// The built-in catalogue. It takes some milliseconds: call it once.
    pub fn built_in() -> Self {
        let mut text = String::new();
        let mut expanding = flate2::read::GzDecoder::new(BUILT_IN).take(BUILT_IN_BYTES_MAX);
        // The file is part of the program; a test reads it. A broken one is an empty one.
        if expanding.read_to_string(&mut text).is_err() {
            return Self::empty();
        }
        let (stations, _) = read_rows(&text, Source::BuiltIn);
        Self { built_in: Arc::new(stations), user: Arc::default() }
    }

    /// This catalogue with a user's own file laid over it, and what was wrong with the file.
    ///
    /// CSV with a header line and any of the columns `wmo_index`, `icao`, `station` with `kind`
    /// (`land`, `ship`, `buoy`, `aerodrome`), `name`, `latitude_deg`, `longitude_deg`,
    /// `station_height_m`, `barometer_height_m`, `source`. A row needs a name to go by; what it leaves
    /// out is taken from the catalogue beneath. A wrong row is left out and complained about.
    #[must_use]
    pub fn with_user(&self, text: &str) -> (Self, Vec<CatalogueComplaint>) {
        let (stations, complaints) = read_rows(text, Source::User);
        (Self { built_in: Arc::clone(&self.built_in), user: Arc::new(stations) }, complaints)
    }

    /// Whether it is the very same object as another, or holds the same rows.
    pub(super) fn is_same(&self, other: &Self) -> bool {
        let same = |a: &Arc<Rows>, b: &Arc<Rows>| Arc::ptr_eq(a, b) || a == b;
        same(&self.built_in, &other.built_in) && same(&self.user, &other.user)
    }

    /// How many names it holds: stations with an index number and an indicator count twice.
    pub fn len(&self) -> usize {
        let own = self.user.keys().filter(|key| !self.built_in.contains_key(key)).count();
        self.built_in.len() + own
    }

    /// Whether it holds nothing.
    pub fn is_empty(&self) -> bool {
        self.built_in.is_empty() && self.user.is_empty()
    }

    /// The user's row for a station.
    pub fn user(&self, platform: Platform, station: Identifier) -> Option<&Station> {
        find(&self.user, platform, station)
    }

    /// The built-in row for a station.
    pub fn standard(&self, platform: Platform, station: Identifier) -> Option<&Station> {
        find(&self.built_in, platform, station)
    }

    /// A station's name, where a catalogue has one.
    pub fn name(&self, platform: Platform, station: Identifier) -> Option<&str> {
        let rows = [self.user(platform, station), self.standard(platform, station)];
        rows.into_iter().flatten().map(|row| row.name.as_str()).find(|name| !name.is_empty())
    }
}

/// Land stations and aerodromes stand in for each other: a table may call an aerodrome a land
/// station. Ships and buoys are only found under their own kind, as buoy numbers look like index
/// numbers.
fn find(
    rows: &BTreeMap<(Platform, Identifier), Arc<Station>>,
    platform: Platform,
    station: Identifier,
) -> Option<&Station> {
    let other = match platform {
        Platform::Land => Some(Platform::Aerodrome),
        Platform::Aerodrome => Some(Platform::Land),
        Platform::Ship | Platform::Buoy => None,
    };
    let found = rows.get(&(platform, station));
    found.or_else(|| rows.get(&(other?, station))).map(AsRef::as_ref)
}

/// Columns of the header, by number.
#[derive(Debug, Default)]
struct Columns {
    wmo_index: Option<usize>,
    icao: Option<usize>,
    station: Option<usize>,
    kind: Option<usize>,
    name: Option<usize>,
    latitude: Option<usize>,
    longitude: Option<usize>,
    station_height: Option<usize>,
    barometer_height: Option<usize>,
    source: Option<usize>,
}

impl Columns {
    fn read(header: &csv::StringRecord) -> Self {
        let at = |name: &str| header.iter().position(|column| column.trim() == name);
        Self {
            wmo_index: at("wmo_index"),
            icao: at("icao"),
            station: at("station"),
            kind: at("kind"),
            name: at("name"),
            latitude: at("latitude_deg"),
            longitude: at("longitude_deg"),
            station_height: at("station_height_m"),
            barometer_height: at("barometer_height_m"),
            source: at("source"),
        }
    }
}

type Rows = BTreeMap<(Platform, Identifier), Arc<Station>>;

fn read_rows(text: &str, source: Source) -> (Rows, Vec<CatalogueComplaint>) {
    let mut rows = Rows::new();
    let mut complaints = Vec::new();
    let mut complain = |line: u64, message: String| {
        if complaints.len() < COMPLAINTS_MAX {
            complaints.push(CatalogueComplaint { line, message });
        }
    };
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let mut reader = csv::ReaderBuilder::new().flexible(true).from_reader(text.as_bytes());
    let columns = match reader.headers() {
        Ok(header) => Columns::read(header),
        Err(error) => {
            complain(1, format!("expected a header line, found {error}"));
            return (rows, complaints);
        }
    };
    if columns.wmo_index.is_none() && columns.icao.is_none() && columns.station.is_none() {
        let expected = "expected a column wmo_index, icao or station in the header";
        complain(1, format!("{expected}; nothing was read"));
        return (rows, complaints);
    }
    let mut record = csv::StringRecord::new();
    for _ in 0..ROWS_MAX {
        let line = reader.position().line();
        match reader.read_record(&mut record) {
            Ok(false) => return (rows, complaints),
            Ok(true) => match read_row(&record, &columns, source) {
                Ok((names, station)) => {
                    let station = Arc::new(station);
                    for name in names {
                        rows.insert(name, Arc::clone(&station));
                    }
                }
                Err(message) => complain(line, message),
            },
            Err(error) => complain(line, format!("not a row of the table: {error}")),
        }
    }
    complain(reader.position().line(), format!("more than {ROWS_MAX} rows; the rest is not read"));
    (rows, complaints)
}

type Names = Vec<(Platform, Identifier)>;

fn read_row(
    record: &csv::StringRecord,
    columns: &Columns,
    source: Source,
) -> Result<(Names, Station), String> {
    let cell = |column: Option<usize>| {
        column.and_then(|column| record.get(column)).map(str::trim).filter(|text| !text.is_empty())
    };
    let number = |column: Option<usize>, what: &str, low: f64, high: f64| {
        let Some(text) = cell(column) else {
            return Ok(None);
        };
        match text.parse::<f64>() {
            Ok(value) if (low..=high).contains(&value) => Ok(Some(value)),
            _ => Err(format!("{what}: expected {low} to {high}, found {}", shown(text))),
        }
    };
    let mut names = Names::new();
    let mut name = |platform: Platform, text: Option<&str>| {
        names.extend(text.and_then(Identifier::new).map(|name| (platform, name)));
    };
    name(Platform::Land, cell(columns.wmo_index));
    name(Platform::Aerodrome, cell(columns.icao));
    let kind = match cell(columns.kind) {
        None | Some("land") => Platform::Land,
        Some("ship") => Platform::Ship,
        Some("buoy") => Platform::Buoy,
        Some("aerodrome") => Platform::Aerodrome,
        Some(other) => {
            return Err(format!(
                "kind: expected land, ship, buoy or aerodrome, found {}",
                shown(other)
            ));
        }
    };
    name(kind, cell(columns.station));
    if names.is_empty() {
        return Err("expected a wmo_index, icao or station, found none".to_owned());
    }
    let latitude = number(columns.latitude, "latitude_deg", -90.0, 90.0)?;
    let longitude = number(columns.longitude, "longitude_deg", -180.0, 360.0)?;
    let position = match (latitude, longitude) {
        (Some(latitude), Some(longitude)) => Position::new(latitude, longitude),
        (None, None) => None,
        _ => return Err("expected both latitude_deg and longitude_deg or neither".to_owned()),
    };
    let station = Station {
        name: shown(cell(columns.name).unwrap_or_default()),
        position,
        station_height_m: number(columns.station_height, "station_height_m", -450.0, 9000.0)?,
        barometer_height_m: number(columns.barometer_height, "barometer_height_m", -450.0, 9000.0)?,
        source,
        origin: shown(cell(columns.source).unwrap_or_default()),
    };
    Ok((names, station))
}

/// Text from outside made safe to show: control characters escaped, at most 60 characters.
fn shown(text: &str) -> String {
    if !text.chars().any(char::is_control) && text.len() <= 60 {
        return text.to_owned();
    }
    text.chars()
        .take(60)
        .flat_map(|character| {
            let escaped = character.is_control();
            let plain = (!escaped).then_some(character);
            escaped.then(|| character.escape_default()).into_iter().flatten().chain(plain)
        })
        .collect()
}

#[cfg(test)]
mod tests;
