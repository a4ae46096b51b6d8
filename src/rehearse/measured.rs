//! What the instruments of a station show: the truth with the errors of instruments and of places.

use super::characteristic::characteristic;
use super::dice::Dice;
use super::reduction::{altimeter_hpa, sea_level_ratio};
use super::station::{Place, Station, Voice};
use super::weather::{Sky, Surface, Weather};
use crate::instant::Instant;
use crate::quantity::{kt_from_m_s, whole_nearest, wind_from_components};
use crate::sphere::Position;

/// Standard deviations of the errors of a kind of station.
struct Errors {
    /// Of its barometer's calibration, the same all the time, hPa.
    fixed_hpa: f64,
    /// Of what is too small for the truth, changing over some hours, hPa.
    slow_hpa: f64,
    /// Of each reading, hPa.
    reading_hpa: f64,
    /// Of each wind component, m/s.
    wind_m_s: f64,
}

/// The size of the errors: in all 0.45 hPa on land, 0.9 on ships, 0.45 on buoys. The trade reckons
/// with 0.6, 1.0 to 1.8 and 0.7 (METHODS ANA-4), which hold more small weather than there is here.
const fn errors(voice: &Voice) -> Errors {
    match voice {
        Voice::Synop { .. } => {
            Errors { fixed_hpa: 0.2, slow_hpa: 0.4, reading_hpa: 0.08, wind_m_s: 1.3 }
        }
        Voice::Metar { .. } => {
            Errors { fixed_hpa: 0.25, slow_hpa: 0.4, reading_hpa: 0.1, wind_m_s: 1.4 }
        }
        Voice::Ship { .. } => {
            Errors { fixed_hpa: 0.7, slow_hpa: 0.5, reading_hpa: 0.25, wind_m_s: 1.8 }
        }
        Voice::Buoy | Voice::Table { .. } => {
            Errors { fixed_hpa: 0.25, slow_hpa: 0.35, reading_hpa: 0.1, wind_m_s: 1.1 }
        }
    }
}

/// One reading of all instruments of a station.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) struct Measured {
    pub(crate) time: Instant,
    pub(crate) position: Position,
    pub(crate) station_hpa: f64,
    pub(crate) msl_hpa: f64,
    pub(crate) altimeter_hpa: f64,
    /// Figure of code table 0200 and the signed change over 3 h, tenths of a hectopascal.
    pub(crate) characteristic: u8,
    pub(crate) change_3h_tenths: i64,
    /// The signed change over 24 h, tenths of a hectopascal.
    pub(crate) change_24h_tenths: i64,
    /// Where the wind blows from, degrees in (0, 360].
    pub(crate) wind_from_deg: f64,
    pub(crate) wind_m_s: f64,
    /// The highest gust, where it stands out.
    pub(crate) gust_m_s: Option<f64>,
    pub(crate) air_c: f64,
    pub(crate) dew_point_c: f64,
    pub(crate) sea_c: f64,
    /// Course, degrees, and speed, kt, made good over the past 3 hours.
    pub(crate) made_good: (f64, f64),
}

/// The weather as one station sees it.
pub(crate) struct Eye<'a> {
    pub(crate) weather: &'a Weather,
    pub(crate) start: Instant,
    pub(crate) dice: Dice,
    /// Size of the errors: 1 as in reality.
    pub(crate) error_factor: f64,
}

impl Eye<'_> {
    /// Pressure at the barometer and reduced to sea level, hPa.
    fn barometer(&self, station: &Station, time: Instant) -> (f64, f64) {
        let stuck = station.chronic.stuck_from_h.map(|hour| self.start.plus_s(hour * 3600));
        let time = stuck.map_or(time, |stuck| time.min(stuck));
        let errors = errors(&station.voice);
        let dice = self.dice.word(&station.id);
        let block = time.unix_s().div_euclid(3 * 3600);
        let share = time.unix_s().rem_euclid(3 * 3600) as f64 / (3.0 * 3600.0);
        let slow = |n| dice.word("slow").number(n).normal();
        // The two ends are independent: the division keeps the variance over the block.
        let blend = (share * share + (1.0 - share) * (1.0 - share)).sqrt();
        let slow = (slow(block) * (1.0 - share) + slow(block + 1) * share) / blend;
        let error = station.chronic.bias_hpa
            + self.error_factor
                * (errors.fixed_hpa * dice.word("fixed").normal()
                    + errors.slow_hpa * slow
                    + errors.reading_hpa * dice.word("reading").number(time.unix_s()).normal());
        let sky = self.weather.at(time);
        let position = station.position(time.hours_since(self.start));
        let (air_c, dew_c) = sky.air_and_dew_point_c(position, station.height_m, station.surface());
        let ratio = sea_level_ratio(station.height_m, air_c, dew_c);
        let at_station = sky.pressure_hpa(position) / ratio + error;
        (at_station, at_station * ratio)
    }

    /// What the station reads at a time.
    pub(crate) fn measure(&self, station: &Station, time: Instant) -> Measured {
        let hour = time.hours_since(self.start);
        let position = station.position(hour);
        let sky: Sky<'_> = self.weather.at(time);
        let surface = station.surface();
        let errors = errors(&station.voice);
        let dice = self.dice.word(&station.id).word("moment").number(time.unix_s());

        let (station_hpa, msl_hpa) = self.barometer(station, time);
        let tenths = |back_h: i64| {
            let (at_station, at_sea) = self.barometer(station, time.plus_s(-3600 * back_h));
            whole_nearest(10.0 * if surface == Surface::Sea { at_sea } else { at_station })
        };
        let trace = [tenths(3), tenths(2), tenths(1), tenths(0)];

        let (u, v) = sky.wind_m_s(position, surface);
        let u = u + self.error_factor * errors.wind_m_s * dice.word("u").normal();
        let v = v + self.error_factor * errors.wind_m_s * dice.word("v").normal();
        let (wind_from_deg, wind_m_s) = wind_from_components(u, v);
        let gust_m_s = wind_m_s * dice.word("gust").between(1.3, 1.55);

        let (air_c, dew_c) = sky.air_and_dew_point_c(position, station.height_m, surface);
        let air_c = air_c + self.error_factor * 0.3 * dice.word("air").normal();
        let dew_point_c = (dew_c + self.error_factor * 0.4 * dice.word("dew").normal()).min(air_c);

        let before = station.position(hour - 3.0);
        let (run_km, course_deg) = before.rhumb_to(position);
        let speed_kt = kt_from_m_s(run_km * 1000.0 / (3.0 * 3600.0));
        let moves = matches!(station.place, Place::Plying { .. }) && speed_kt >= 0.5;
        Measured {
            time,
            position,
            station_hpa,
            msl_hpa,
            altimeter_hpa: altimeter_hpa(station_hpa, station.height_m),
            characteristic: characteristic(trace),
            change_3h_tenths: trace[3] - trace[0],
            change_24h_tenths: trace[3] - tenths(24),
            wind_from_deg,
            wind_m_s,
            gust_m_s: (wind_m_s >= 7.5 && gust_m_s >= 12.9).then_some(gust_m_s),
            air_c,
            dew_point_c,
            sea_c: sky.sea_temperature_c(position)
                + self.error_factor * 0.2 * dice.word("sea").normal(),
            made_good: if moves { (course_deg, speed_kt) } else { (0.0, 0.0) },
        }
    }
}
