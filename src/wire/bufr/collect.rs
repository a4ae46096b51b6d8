//! The elements a surface watch needs, picked out by descriptor wherever the template has them.
//!
//! WMO-No. 306 Vol. I.2, templates 307079 to 307096, 308009, 308014, 315008, 315009 and the older
//! ones: the first value that is not missing counts; the time is the one in force when the first
//! pressure or wind is met (315009 gives the time of its position before that of observation).

use super::message::Header;
use super::walk::{Sink, trimmed};
use crate::instant::Instant;
use crate::quantity::{celsius_from_kelvin, index_nearest, m_s_from_kt};
use crate::report::{Form, Identifier, Platform, Report, Revision, StandardSurface, WindSource};
use crate::sphere::Position;

/// Minutes before the observation that a mean wind may reach back (code 0 04 025).
const WIND_PERIOD_MINUTES: std::ops::RangeInclusive<f64> = -60.0..=-1.0;

/// What has been met so far.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Collector {
    block: Option<f64>,
    number: Option<f64>,
    buoy_number: Option<f64>,
    marine_number: Option<f64>,
    wigos: [Option<f64>; 3],
    wigos_local: Option<Identifier>,
    state: Option<f64>,
    national: Option<f64>,
    call_sign: Option<Identifier>,
    aerodrome: Option<Identifier>,
    short_name: Option<Identifier>,
    name: Option<Identifier>,
    buoy_type: Option<f64>,
    wind_flags: Option<f64>,
    date: [Option<f64>; 5],
    frozen: Option<Instant>,
    latitude_deg: Option<f64>,
    longitude_deg: Option<f64>,
    coarse: bool,
    significance: Option<f64>,
    period_minutes: Option<f64>,
    sensor_height_m: Option<f64>,
    surface_hpa: Option<f64>,
    station_height_m: Option<f64>,
    barometer_height_m: Option<f64>,
    pressure_station_hpa: Option<f64>,
    pressure_msl_hpa: Option<f64>,
    altimeter_hpa: Option<f64>,
    standard_surface: Option<StandardSurface>,
    change_3h_hpa: Option<f64>,
    change_24h_hpa: Option<f64>,
    characteristic: Option<f64>,
    wind_from_deg: Option<f64>,
    wind_speed_m_s: Option<f64>,
    wind_gust_m_s: Option<f64>,
    anemometer_height_m: Option<f64>,
    air_temperature_c: Option<f64>,
    dew_point_c: Option<f64>,
    humidity_percent: Option<f64>,
    sea_temperature_c: Option<f64>,
    course_deg: Option<f64>,
    speed_m_s: Option<f64>,
    drift_m_s: Option<f64>,
}

/// Keeps the first value that is not missing.
fn first(slot: &mut Option<f64>, value: Option<f64>) {
    if slot.is_none() {
        *slot = value;
    }
}

impl Sink for Collector {
    fn wants(&self, descriptor: u32) -> bool {
        wanted(descriptor)
    }

    fn number(&mut self, descriptor: u32, value: Option<f64>) {
        match descriptor {
            1_001 => first(&mut self.block, value),
            1_002 => first(&mut self.number, value),
            1_005 => first(&mut self.buoy_number, value),
            1_012 => first(&mut self.course_deg, value),
            1_013 => first(&mut self.speed_m_s, value),
            1_014 => first(&mut self.drift_m_s, value),
            1_087 => first(&mut self.marine_number, value),
            1_101 => first(&mut self.state, value),
            1_102 => first(&mut self.national, value),
            1_125 => first(&mut self.wigos[0], value),
            1_126 => first(&mut self.wigos[1], value),
            1_127 => first(&mut self.wigos[2], value),
            2_002 => first(&mut self.wind_flags, value),
            2_149 => first(&mut self.buoy_type, value),
            4_001 => self.date = [value, None, None, None, None],
            4_002 => self.date[1] = value,
            4_003 => self.date[2] = value,
            4_004 => self.date[3] = value,
            4_005 => self.date[4] = value,
            4_024 => self.period_minutes = value.map(|hours| hours * 60.0),
            4_025 => self.period_minutes = value,
            5_001 => first(&mut self.latitude_deg, value),
            5_002 => {
                self.coarse |= self.latitude_deg.is_none();
                first(&mut self.latitude_deg, value);
            }
            6_001 | 6_002 => first(&mut self.longitude_deg, value),
            7_001 | 7_030 => first(&mut self.station_height_m, value),
            7_031 => first(&mut self.barometer_height_m, value),
            7_004 => self.surface_hpa = value.map(|pressure_pa| pressure_pa / 100.0),
            7_032 | 7_033 => {
                if value.is_some() {
                    self.sensor_height_m = value;
                } else if descriptor == 7_032 {
                    // A missing value cancels the height in force (table B, class 07).
                    self.sensor_height_m = None;
                }
            }
            8_021 => self.significance = value,
            10_004 => self.pressure(value, |found| &mut found.pressure_station_hpa),
            10_051 => self.pressure(value, |found| &mut found.pressure_msl_hpa),
            10_052 => self.pressure(value, |found| &mut found.altimeter_hpa),
            10_009 => self.height(value),
            10_061 => first(&mut self.change_3h_hpa, value.map(|change_pa| change_pa / 100.0)),
            10_062 => first(&mut self.change_24h_hpa, value.map(|change_pa| change_pa / 100.0)),
            10_063 => first(&mut self.characteristic, value),
            11_001 | 11_011 => self.wind_direction(value),
            11_002 | 11_012 => self.wind_speed(value),
            11_083 => self.wind_speed(value.map(|speed_km_h| speed_km_h / 3.6)),
            11_084 => self.wind_speed(value.map(m_s_from_kt)),
            11_041 => first(&mut self.wind_gust_m_s, value),
            12_001 | 12_004 | 12_101 => {
                first(&mut self.air_temperature_c, value.map(celsius_from_kelvin));
            }
            12_003 | 12_006 | 12_103 => {
                first(&mut self.dew_point_c, value.map(celsius_from_kelvin));
            }
            13_003 => first(&mut self.humidity_percent, value),
            22_042 | 22_043 | 22_045 | 22_049 => {
                first(&mut self.sea_temperature_c, value.map(celsius_from_kelvin));
            }
            _ => {}
        }
    }

    fn text(&mut self, descriptor: u32, text: Option<&[u8]>) {
        let Some(text) = text else { return };
        let name = trimmed(text);
        let slot = match descriptor {
            1_011 => &mut self.call_sign,
            1_015 | 1_019 => &mut self.name,
            1_018 => &mut self.short_name,
            1_063 => &mut self.aerodrome,
            1_128 => &mut self.wigos_local,
            _ => return,
        };
        if slot.is_none() {
            *slot = Identifier::new(&name);
        }
    }
}

/// Whether an element is of any use here.
pub(super) fn wanted(descriptor: u32) -> bool {
    matches!(
        descriptor,
        1_001 | 1_002 | 1_005 | 1_011..=1_015 | 1_018 | 1_019 | 1_063 | 1_087 | 1_101 | 1_102 | 1_125..=1_128
            | 2_002 | 2_149 | 4_001..=4_005 | 4_024 | 4_025 | 5_001 | 5_002 | 6_001 | 6_002
            | 7_001 | 7_004 | 7_030..=7_033 | 8_021 | 10_004 | 10_009 | 10_051 | 10_052
            | 10_061..=10_063 | 11_001 | 11_002 | 11_011 | 11_012 | 11_041 | 11_083 | 11_084
            | 12_001 | 12_003 | 12_004 | 12_006 | 12_101 | 12_103 | 13_003
            | 22_042 | 22_043 | 22_045 | 22_049
    )
}

impl Collector {
    fn pressure(&mut self, value: Option<f64>, slot: fn(&mut Self) -> &mut Option<f64>) {
        if value.is_some() {
            self.freeze();
        }
        first(slot(self), value.map(|pressure_pa| pressure_pa / 100.0));
    }

    fn height(&mut self, value: Option<f64>) {
        if let (None, Some(pressure_hpa), Some(height_gpm)) =
            (self.standard_surface, self.surface_hpa, value)
        {
            self.standard_surface = Some(StandardSurface { pressure_hpa, height_gpm });
        }
    }

    /// Whether a wind met now is the mean wind of the observation: time significance 2 (averaged),
    /// 25 (nominal time) or none, over a period of at most an hour where one is in force.
    fn is_mean_wind(&self) -> bool {
        let significance = self.significance.map_or(2, index_nearest);
        let period = self
            .period_minutes
            .is_none_or(|period| WIND_PERIOD_MINUTES.contains(&period) || period == 0.0);
        matches!(significance, 2 | 25) && period
    }

    fn wind_direction(&mut self, value: Option<f64>) {
        if self.is_mean_wind() {
            first(&mut self.wind_from_deg, value);
        }
    }

    fn wind_speed(&mut self, value: Option<f64>) {
        if value.is_some() && self.wind_speed_m_s.is_none() && self.is_mean_wind() {
            self.freeze();
            self.wind_speed_m_s = value;
            self.anemometer_height_m = self.sensor_height_m;
        }
    }

    /// Keeps the time in force as the time of observation.
    fn freeze(&mut self) {
        if self.frozen.is_none() {
            self.frozen = self.time();
        }
    }

    fn time(&self) -> Option<Instant> {
        let part =
            |slot: Option<f64>| slot.and_then(|value| u32::try_from(index_nearest(value)).ok());
        let year = i32::try_from(part(self.date[0])?).ok()?;
        Instant::from_calendar(
            year,
            part(self.date[1])?,
            part(self.date[2])?,
            part(self.date[3])?,
            part(self.date[4]).unwrap_or(0),
        )
    }

    /// The report, or what it lacks.
    pub(super) fn finish(&self, header: &Header) -> Result<Report, &'static str> {
        let (station, platform) = self.identity(header).ok_or("no identifier")?;
        let time = self.frozen.or_else(|| self.time()).or(header.time).ok_or("no time")?;
        let mut report = Report::empty(station, platform, Form::Bufr, time);
        report.revision = match header.update_number {
            0 => Revision::Original,
            number => Revision::Correction(number),
        };
        report.position = self
            .latitude_deg
            .zip(self.longitude_deg)
            .and_then(|(latitude, longitude)| Position::new(latitude, longitude));
        report.position_rounding_deg = if self.coarse { 0.005 } else { 0.000_005 };
        report.station_height_m = self.station_height_m;
        report.barometer_height_m = self.barometer_height_m;
        report.pressure_station_hpa = self.pressure_station_hpa;
        report.pressure_msl_hpa = self.pressure_msl_hpa;
        report.altimeter_hpa = self.altimeter_hpa;
        // Coded in tenths of a hectopascal: the step over the root of twelve.
        report.altimeter_rounding_hpa = 0.1 / 12.0_f64.sqrt();
        report.standard_surface = self.standard_surface;
        report.pressure_change_3h_hpa = self.change_3h_hpa;
        report.pressure_change_24h_hpa = self.change_24h_hpa;
        report.characteristic = self
            .characteristic
            .and_then(|code| u8::try_from(index_nearest(code)).ok())
            .filter(|&code| code <= 8);
        report.wind_from_deg = self.wind_from_deg.filter(|from_deg| *from_deg <= 360.0);
        report.wind_speed_m_s = self.wind_speed_m_s;
        report.wind_gust_m_s = self.wind_gust_m_s;
        report.wind_source = match self.wind_flags.map(index_nearest) {
            // Flag table 0 02 002, bit 1 (the leftmost of four): certified instruments.
            Some(flags) if flags & 8 != 0 => WindSource::Measured,
            _ => WindSource::Unknown,
        };
        report.anemometer_height_m = self.anemometer_height_m;
        report.air_temperature_c = self.air_temperature_c;
        report.dew_point_c = self.dew_point_c;
        report.relative_humidity_percent = self.humidity_percent;
        report.sea_temperature_c = self.sea_temperature_c;
        // Table B, note to 0 01 012: 0 with speed 0 is stationary, 509 unknown.
        report.course_deg = self.course_deg.filter(|course_deg| *course_deg <= 360.0);
        report.speed_m_s = self.speed_m_s.or(self.drift_m_s);
        Ok(report)
    }

    fn identity(&self, header: &Header) -> Option<(Identifier, Platform)> {
        let sea = header.category == 1 || header.category == 31;
        if let Some(number) = self.marine_number {
            return Some((numbered(number, 7)?, Platform::Buoy));
        }
        if let (true, Some(number)) = (sea, self.buoy_number) {
            return Some((numbered(number, 5)?, Platform::Buoy));
        }
        if let (Some(block), Some(number)) = (self.block, self.number) {
            let name = format!("{:02}{:03}", index_nearest(block), index_nearest(number));
            return Some((
                Identifier::new(&name)?,
                if sea { Platform::Buoy } else { Platform::Land },
            ));
        }
        if let Some(aerodrome) = self.aerodrome {
            return Some((aerodrome, Platform::Aerodrome));
        }
        if let Some(call_sign) = self.call_sign {
            let platform = match (sea, self.buoy_type) {
                (true, Some(_)) => Platform::Buoy,
                (true, None) => Platform::Ship,
                (false, _) => Platform::Land,
            };
            return Some((call_sign, platform));
        }
        let platform = if sea { Platform::Buoy } else { Platform::Land };
        if let (Some(local), [Some(series), Some(issuer), Some(issue)]) =
            (self.wigos_local, self.wigos)
        {
            let (series, issuer, issue) =
                (index_nearest(series), index_nearest(issuer), index_nearest(issue));
            // Issuers 20000 and 20001 stand for the old index numbers.
            let name = if series == 0 && matches!(issuer, 20_000 | 20_001) {
                local.as_str().to_owned()
            } else {
                format!("{series}-{issuer}-{issue}-{local}")
            };
            return Some((Identifier::new(&name)?, platform));
        }
        if let Some((state, national)) = self.state.zip(self.national) {
            let name = format!("{}-{}", index_nearest(state), index_nearest(national));
            return Some((Identifier::new(&name)?, platform));
        }
        // National stations without any number go by their short name, then by their name.
        Some((self.short_name.or(self.name)?, platform))
    }
}

fn numbered(number: f64, digits: usize) -> Option<Identifier> {
    Identifier::new(&format!("{:0digits$}", index_nearest(number)))
}
