//! One copy of a report, packed: a world's three days of reports are to fit in memory.

use std::cmp::Ordering;
use std::sync::Arc;

use super::Key;
use crate::instant::Instant;
use crate::obs::Provenance;
use crate::report::{Form, Report, Revision, StandardSurface, WindSource};
use crate::sphere::Position;

/// A value of a report, by its place in the packed form.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
#[repr(u8)]
#[expect(missing_docs, reason = "each is the field of `Report` of the same name")]
pub enum Slot {
    Latitude,
    Longitude,
    PositionRounding,
    StationHeight,
    BarometerHeight,
    PressureStation,
    PressureMsl,
    Altimeter,
    AltimeterRounding,
    SurfacePressure,
    SurfaceHeight,
    PressureChange3h,
    PressureChange24h,
    WindFrom,
    WindSpeed,
    WindGust,
    AnemometerHeight,
    AirTemperature,
    DewPoint,
    RelativeHumidity,
    SeaTemperature,
    Course,
    Speed,
}

const SLOTS: usize = 23;

impl Slot {
    const fn bit(self) -> u32 {
        1 << (self as u8)
    }
}

/// A file that reports came from, shared by all of them.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(super) struct Origin {
    pub(super) content: String,
    pub(super) file: String,
    pub(super) received: Instant,
}

/// Where in which file a copy came from.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Arrival {
    pub(super) origin: Arc<Origin>,
    pub(super) start: u32,
    pub(super) end: u32,
}

impl Arrival {
    /// Earliest received first; ties by content, so that the order of reading cannot matter.
    fn order(&self, other: &Self) -> Ordering {
        let key = |arrival: &Self| (arrival.origin.received, arrival.start, arrival.end);
        key(self)
            .cmp(&key(other))
            .then_with(|| self.origin.content.cmp(&other.origin.content))
            .then_with(|| self.origin.file.cmp(&other.origin.file))
    }

    pub(super) fn provenance(&self) -> Provenance {
        Provenance {
            file: self.origin.file.clone(),
            content: self.origin.content.clone(),
            start: usize::try_from(self.start).unwrap_or(usize::MAX),
            end: usize::try_from(self.end).unwrap_or(usize::MAX),
            received: self.origin.received,
        }
    }
}

/// One copy of a report with where it came from. Station and platform stand in its key.
#[derive(Clone, Debug)]
pub struct Copy {
    values: Box<[f64]>,
    time: Instant,
    first: Arrival,
    repeats: Vec<Arrival>,
    mask: u32,
    form: Form,
    revision: Revision,
    wind_source: WindSource,
    wind_variable: bool,
    characteristic: Option<u8>,
}

impl Copy {
    /// Packs a report; values that are not finite are left out.
    pub(super) fn pack(report: &Report, arrival: Arrival) -> Self {
        let slots: [Option<f64>; SLOTS] = [
            report.position.map(Position::latitude_deg),
            report.position.map(Position::longitude_deg),
            Some(report.position_rounding_deg).filter(|rounding| *rounding != 0.0),
            report.station_height_m,
            report.barometer_height_m,
            report.pressure_station_hpa,
            report.pressure_msl_hpa,
            report.altimeter_hpa,
            Some(report.altimeter_rounding_hpa).filter(|rounding| *rounding != 0.0),
            report.standard_surface.map(|surface| surface.pressure_hpa),
            report.standard_surface.map(|surface| surface.height_gpm),
            report.pressure_change_3h_hpa,
            report.pressure_change_24h_hpa,
            report.wind_from_deg,
            report.wind_speed_m_s,
            report.wind_gust_m_s,
            report.anemometer_height_m,
            report.air_temperature_c,
            report.dew_point_c,
            report.relative_humidity_percent,
            report.sea_temperature_c,
            report.course_deg,
            report.speed_m_s,
        ];
        let mut mask = 0;
        let mut values = Vec::with_capacity(SLOTS);
        for (number, value) in slots.into_iter().enumerate() {
            if let Some(value) = value.filter(|value| value.is_finite()) {
                mask |= 1 << number;
                // One zero only, so that equal values are equal bits.
                values.push(value + 0.0);
            }
        }
        Self {
            values: values.into_boxed_slice(),
            time: report.time,
            first: arrival,
            repeats: Vec::new(),
            mask,
            form: report.form,
            revision: report.revision,
            wind_source: report.wind_source,
            wind_variable: report.wind_variable,
            characteristic: report.characteristic,
        }
    }

    /// The value in a slot.
    pub fn value(&self, slot: Slot) -> Option<f64> {
        if self.mask & slot.bit() == 0 {
            return None;
        }
        let below = (self.mask & (slot.bit() - 1)).count_ones();
        self.values.get(usize::try_from(below).ok()?).copied()
    }

    /// The report.
    pub fn unpack(&self, key: &Key) -> Report {
        let pair = |a: Slot, b: Slot| Some((self.value(a)?, self.value(b)?));
        Report {
            station: key.station,
            platform: key.platform,
            form: self.form,
            time: self.time,
            revision: self.revision,
            position: self.position(),
            position_rounding_deg: self.value(Slot::PositionRounding).unwrap_or(0.0),
            station_height_m: self.value(Slot::StationHeight),
            barometer_height_m: self.value(Slot::BarometerHeight),
            pressure_station_hpa: self.value(Slot::PressureStation),
            pressure_msl_hpa: self.value(Slot::PressureMsl),
            altimeter_hpa: self.value(Slot::Altimeter),
            altimeter_rounding_hpa: self.value(Slot::AltimeterRounding).unwrap_or(0.0),
            standard_surface: pair(Slot::SurfacePressure, Slot::SurfaceHeight)
                .map(|(pressure_hpa, height_gpm)| StandardSurface { pressure_hpa, height_gpm }),
            characteristic: self.characteristic,
            pressure_change_3h_hpa: self.value(Slot::PressureChange3h),
            pressure_change_24h_hpa: self.value(Slot::PressureChange24h),
            wind_from_deg: self.value(Slot::WindFrom),
            wind_variable: self.wind_variable,
            wind_speed_m_s: self.value(Slot::WindSpeed),
            wind_gust_m_s: self.value(Slot::WindGust),
            wind_source: self.wind_source,
            anemometer_height_m: self.value(Slot::AnemometerHeight),
            air_temperature_c: self.value(Slot::AirTemperature),
            dew_point_c: self.value(Slot::DewPoint),
            relative_humidity_percent: self.value(Slot::RelativeHumidity),
            sea_temperature_c: self.value(Slot::SeaTemperature),
            course_deg: self.value(Slot::Course),
            speed_m_s: self.value(Slot::Speed),
        }
    }

    /// Time of observation.
    pub const fn time(&self) -> Instant {
        self.time
    }

    /// The form it came in.
    pub const fn form(&self) -> Form {
        self.form
    }

    /// Whether it is a correction.
    pub const fn revision(&self) -> Revision {
        self.revision
    }

    /// Characteristic of the tendency.
    pub const fn characteristic(&self) -> Option<u8> {
        self.characteristic
    }

    /// Where, if it says so itself.
    pub fn position(&self) -> Option<Position> {
        Position::new(self.value(Slot::Latitude)?, self.value(Slot::Longitude)?)
    }

    /// Whether it carries a pressure of any sort.
    pub fn has_pressure(&self) -> bool {
        let slots =
            [Slot::PressureStation, Slot::PressureMsl, Slot::Altimeter, Slot::SurfaceHeight];
        slots.iter().any(|slot| self.mask & slot.bit() != 0)
    }

    /// Where it came from first.
    pub fn provenance(&self) -> Provenance {
        self.first.provenance()
    }

    /// How often it came again.
    pub fn repeats(&self) -> usize {
        self.repeats.len()
    }

    pub(super) fn arrivals(&self) -> impl Iterator<Item = &Arrival> {
        std::iter::once(&self.first).chain(&self.repeats)
    }

    /// Values that the report carries, the identification apart.
    pub(super) fn completeness(&self) -> u32 {
        const IDENTIFICATION: u32 = Slot::Latitude.bit()
            | Slot::Longitude.bit()
            | Slot::PositionRounding.bit()
            | Slot::StationHeight.bit()
            | Slot::AltimeterRounding.bit()
            | Slot::AnemometerHeight.bit();
        (self.mask & !IDENTIFICATION).count_ones() + u32::from(self.characteristic.is_some())
    }

    /// A total order on what the report says and in which form; equal means a repeat.
    pub(super) fn content_order(&self, other: &Self) -> Ordering {
        let head = |copy: &Self| {
            (
                copy.revision,
                copy.form,
                copy.time,
                copy.mask,
                copy.wind_source,
                copy.wind_variable,
                copy.characteristic,
            )
        };
        head(self).cmp(&head(other)).then_with(|| {
            let pairs = self.values.iter().zip(&other.values);
            pairs
                .map(|(a, b)| a.total_cmp(b))
                .find(|order| order.is_ne())
                .unwrap_or(Ordering::Equal)
        })
    }

    /// Takes in another arrival of the same copy; the earliest comes to stand first. The same
    /// piece of the same file counts once.
    pub(super) fn repeat(&mut self, mut arrival: Arrival) {
        if self.arrivals().any(|held| *held == arrival) {
            return;
        }
        if arrival.order(&self.first).is_lt() {
            std::mem::swap(&mut arrival, &mut self.first);
        }
        let at = self.repeats.partition_point(|held| held.order(&arrival).is_lt());
        self.repeats.insert(at, arrival);
    }

    pub(super) fn into_arrival(self) -> Arrival {
        self.first
    }

    /// This copy with what it lacks taken from `older` (METHODS QC-7, partial resend): `None`
    /// unless it is a correction with at most half of the older one's values, of which at least two
    /// are shared and equal.
    pub(super) fn completed_by(&self, older: &Self) -> Option<Self> {
        const AGREEING: usize = 2;
        if self.revision == Revision::Original
            || self.completeness() * 2 > older.completeness()
            || self.time != older.time
        {
            return None;
        }
        let mut values = Vec::with_capacity(SLOTS);
        let (mut mask, mut agreeing) = (0_u32, 0);
        let (mut own, mut old) = (self.values.iter(), older.values.iter());
        for number in 0..SLOTS {
            let bit = 1 << number;
            let own_value = if self.mask & bit == 0 { None } else { own.next() };
            let old_value = if older.mask & bit == 0 { None } else { old.next() };
            if let (Some(a), Some(b)) = (own_value, old_value)
                && a.total_cmp(b).is_eq()
            {
                agreeing += 1;
            }
            if let Some(value) = own_value.or(old_value) {
                mask |= bit;
                values.push(*value);
            }
        }
        (agreeing >= AGREEING).then(|| Self {
            values: values.into_boxed_slice(),
            mask,
            characteristic: self.characteristic.or(older.characteristic),
            wind_variable: self.wind_variable || older.wind_variable,
            ..self.clone()
        })
    }

    /// A number that two copies share only if they say the same (up to chance).
    pub(super) fn fingerprint(&self) -> u64 {
        let head = u64::from(self.mask)
            | u64::from(self.wind_variable) << 32
            | u64::from(self.characteristic.unwrap_or(255)) << 40;
        let mut mixed = mix(head ^ mix(self.time.unix_s().cast_unsigned()));
        for value in &self.values {
            mixed = mix(mixed ^ value.to_bits());
        }
        mixed
    }
}

/// A mixing step of SplitMix64 (Steele, Lea and Flood 2014).
pub(super) const fn mix(word: u64) -> u64 {
    let word = word.wrapping_add(0x9E37_79B9_7F4A_7C15);
    let word = (word ^ (word >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    let word = (word ^ (word >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    word ^ (word >> 31)
}
