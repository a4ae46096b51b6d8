//! The values of one line, checked one by one.

use crate::instant::Instant;
use crate::report::{Form, Identifier, Platform, Report, WindSource};
use crate::sphere::Position;
use crate::wire::group::Group;
use crate::wire::listener::Listener;
use crate::wire::table::column::Column;

/// What a line has given so far.
#[derive(Debug, Default)]
pub(super) struct Row {
    /// Who.
    pub station: Option<Identifier>,
    kind: Option<Platform>,
    time: Option<Instant>,
    latitude_deg: Option<f64>,
    longitude_deg: Option<f64>,
    /// Largest rounding of latitude or longitude by their decimals, degrees.
    rounding_deg: f64,
    numbers: [Option<f64>; Column::ALL.len()],
}

impl Row {
    /// Takes a value, or complains about it.
    pub(super) fn set<L: Listener>(
        &mut self,
        column: Column,
        text: &[u8],
        group: Group<'_>,
        listener: &mut L,
    ) {
        let text = text.trim_ascii();
        if text.is_empty() {
            return;
        }
        let good = match column {
            Column::Station => {
                self.station = Identifier::from_bytes(text);
                self.station.is_some()
            }
            Column::Kind => {
                self.kind = [Platform::Land, Platform::Ship, Platform::Buoy, Platform::Aerodrome]
                    .into_iter()
                    .find(|kind| kind.word().as_bytes().eq_ignore_ascii_case(text));
                self.kind.is_some()
            }
            Column::Time => {
                self.time = std::str::from_utf8(text).ok().and_then(Instant::parse);
                self.time.is_some()
            }
            _ => self.number(column, text),
        };
        if good {
            listener.part(group, || column.meaning().to_owned());
        } else {
            listener.complain(group, range_rule(column), || {
                format!("no usable {}: not used", column.name())
            });
        }
    }

    fn number(&mut self, column: Column, text: &[u8]) -> bool {
        let value = std::str::from_utf8(text).ok().and_then(|text| text.parse::<f64>().ok());
        let Some(value) = value.filter(|value| value.is_finite()) else { return false };
        // A value that no instrument can mean is refused here; whether one is likely is asked
        // of the reports of every form, later.
        let possible = match column {
            Column::Latitude => value.abs() <= 90.0,
            Column::Longitude => value.abs() <= 360.0,
            Column::WindFrom | Column::Course => (0.0..=360.0).contains(&value),
            Column::Characteristic => (0.0..=8.0).contains(&value) && value.fract() == 0.0,
            Column::WindSpeed | Column::WindGust | Column::Speed => (0.0..=500.0).contains(&value),
            Column::PressureStation | Column::PressureMsl => (0.0..=2000.0).contains(&value),
            Column::AirTemperature | Column::DewPoint | Column::SeaTemperature => {
                (-274.0..=1000.0).contains(&value)
            }
            _ => value.abs() <= 20_000.0,
        };
        if !possible {
            return false;
        }
        match column {
            Column::Latitude => self.latitude_deg = Some(value),
            Column::Longitude => self.longitude_deg = Some(value),
            _ => {
                let place = Column::ALL.iter().position(|&other| other == column);
                if let Some(slot) = place.and_then(|place| self.numbers.get_mut(place)) {
                    // A negative zero is a zero.
                    *slot = Some(value + 0.0);
                }
            }
        }
        if matches!(column, Column::Latitude | Column::Longitude) {
            self.rounding_deg = self.rounding_deg.max(rounding(text));
        }
        true
    }

    fn value(&self, column: Column) -> Option<f64> {
        let place = Column::ALL.iter().position(|&other| other == column)?;
        self.numbers.get(place).copied().flatten()
    }

    /// The report, or the name of what is missing for one.
    pub(super) fn report(&self, form: Form) -> Result<Report, &'static str> {
        let station = self.station.ok_or("station")?;
        let time = self.time.ok_or("time")?;
        let platform = self.kind.unwrap_or(Platform::Land);
        let position = match (self.latitude_deg, self.longitude_deg) {
            (Some(latitude_deg), Some(longitude_deg)) => Position::new(latitude_deg, longitude_deg),
            _ => None,
        };
        let wind_from_deg = self.value(Column::WindFrom);
        Ok(Report {
            position,
            position_rounding_deg: if position.is_some() { self.rounding_deg } else { 0.0 },
            station_height_m: self.value(Column::StationHeight),
            barometer_height_m: self.value(Column::BarometerHeight),
            pressure_station_hpa: self.value(Column::PressureStation),
            pressure_msl_hpa: self.value(Column::PressureMsl),
            characteristic: self.value(Column::Characteristic).and_then(small),
            pressure_change_3h_hpa: self.value(Column::PressureChange),
            wind_from_deg,
            wind_speed_m_s: self.value(Column::WindSpeed),
            wind_gust_m_s: self.value(Column::WindGust),
            wind_source: WindSource::Unknown,
            air_temperature_c: self.value(Column::AirTemperature),
            dew_point_c: self.value(Column::DewPoint),
            sea_temperature_c: self.value(Column::SeaTemperature),
            course_deg: self.value(Column::Course),
            speed_m_s: self.value(Column::Speed),
            ..Report::empty(station, platform, form, time)
        })
    }
}

/// Half of the last decimal written: 0.05 for tenths, 0.5 for whole degrees.
fn rounding(text: &[u8]) -> f64 {
    let decimals = text
        .iter()
        .position(|&byte| byte == b'.')
        .map_or(0, |point| text.iter().skip(point + 1).take_while(|b| b.is_ascii_digit()).count());
    0.5 * 0.1_f64.powi(i32::try_from(decimals.min(9)).unwrap_or(9))
}

fn small(value: f64) -> Option<u8> {
    (0..=8_u8).find(|&figure| f64::from(figure).to_bits() == (value + 0.0).to_bits())
}

const fn range_rule(column: Column) -> &'static str {
    match column {
        Column::Station => "table, station: 1 to 32 characters",
        Column::Kind => "table, kind: land, ship, buoy or aerodrome",
        Column::Time => "table, time: RFC 3339, UTC",
        Column::Latitude => "table, latitude_deg: -90 to 90",
        Column::Longitude => "table, longitude_deg: -180 to 360",
        Column::Characteristic => "table, characteristic: 0 to 8",
        Column::WindFrom | Column::Course => "table: 0 to 360 degrees",
        _ => "table: a number within what can be",
    }
}
