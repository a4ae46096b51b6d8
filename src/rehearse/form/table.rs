//! Tables: CSV with a header line, and JSON lines with the same keys.

use serde_json::{Map, Value};

use super::Slip;
use crate::rehearse::measured::Measured;
use crate::rehearse::weather::Surface;

/// The columns, in the order they are written.
const COLUMNS: [&str; 16] = [
    "station",
    "kind",
    "time",
    "latitude_deg",
    "longitude_deg",
    "station_height_m",
    "barometer_height_m",
    "pressure_station_hpa",
    "pressure_msl_hpa",
    "characteristic",
    "pressure_change_3h_hpa",
    "wind_from_deg",
    "wind_speed_m_s",
    "air_temperature_c",
    "dew_point_c",
    "sea_temperature_c",
];

/// The header line.
pub(in crate::rehearse) fn csv_header() -> String {
    COLUMNS.join(",")
}

/// One row of a CSV table.
pub(in crate::rehearse) fn csv_row(
    id: &str,
    m: &Measured,
    height_m: f64,
    surface: Surface,
    slip: Slip,
) -> String {
    values(id, m, height_m, surface, slip).map(|(_, value)| value.text()).join(",")
}

/// One JSON line; what is not measured is left out.
pub(in crate::rehearse) fn json_line(
    id: &str,
    m: &Measured,
    height_m: f64,
    surface: Surface,
    slip: Slip,
) -> String {
    let object: Map<String, Value> = values(id, m, height_m, surface, slip)
        .into_iter()
        .filter(|(_, value)| *value != Cell::Nothing)
        .map(|(key, value)| (key.to_owned(), value.json()))
        .collect();
    Value::Object(object).to_string()
}

#[derive(Clone, PartialEq, Debug)]
enum Cell {
    Nothing,
    Word(String),
    /// A number and how many decimals it is written with.
    Number(f64, usize),
}

impl Cell {
    fn text(&self) -> String {
        match self {
            Self::Nothing => String::new(),
            Self::Word(word) => word.clone(),
            Self::Number(number, decimals) => format!("{number:.decimals$}"),
        }
    }

    fn json(&self) -> Value {
        match self {
            Self::Nothing => Value::Null,
            Self::Word(word) => Value::String(word.clone()),
            Self::Number(..) => {
                self.text().parse::<serde_json::Number>().map_or(Value::Null, Value::Number)
            }
        }
    }
}

fn values(
    id: &str,
    m: &Measured,
    height_m: f64,
    surface: Surface,
    slip: Slip,
) -> [(&'static str, Cell); COLUMNS.len()] {
    let land = surface == Surface::Land;
    let only = |on: bool, value: f64, decimals: usize| {
        if on { Cell::Number(value, decimals) } else { Cell::Nothing }
    };
    let tens = if slip == Slip::PressureTens { 10.0 } else { 0.0 };
    let sign = if slip == Slip::ChangeSign { -1.0 } else { 1.0 };
    let longitude_deg = m.position.longitude_deg();
    let cells = [
        Cell::Word(id.to_owned()),
        Cell::Word(if land { "land" } else { "buoy" }.to_owned()),
        Cell::Word(m.time.rfc3339()),
        Cell::Number(m.position.latitude_deg(), 3),
        Cell::Number(if slip == Slip::Meridian { -longitude_deg } else { longitude_deg }, 3),
        only(land, height_m, 0),
        only(land, height_m, 0),
        only(land, m.station_hpa + tens, 1),
        only(!land, m.msl_hpa + tens, 1),
        Cell::Number(f64::from(m.characteristic), 0),
        Cell::Number(sign * m.change_3h_tenths as f64 / 10.0, 1),
        Cell::Number(m.wind_from_deg, 0),
        Cell::Number(m.wind_m_s, 1),
        Cell::Number(m.air_c, 1),
        Cell::Number(m.dew_point_c, 1),
        only(!land, m.sea_c, 1),
    ];
    let mut cells = cells.into_iter();
    COLUMNS.map(|key| (key, cells.next().unwrap_or(Cell::Nothing)))
}
