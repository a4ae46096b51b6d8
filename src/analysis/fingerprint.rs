//! A number for everything that goes into an hour's analysis, so that it is remade only when that
//! changes. FNV-1a over 64-bit words (Fowler, Noll and Vo), with a final mix.

use std::collections::BTreeMap;
use std::sync::Arc;

use super::AnalysisSettings;
use crate::field::Grid;
use crate::instant::Hour;
use crate::obs::{Element, Observation, Verdict};

struct Mixer(u64);

impl Mixer {
    fn word(&mut self, word: u64) {
        self.0 = (self.0 ^ word).wrapping_mul(0x0000_0100_0000_01b3);
        self.0 ^= self.0 >> 29;
    }

    fn float(&mut self, value: f64) {
        self.word(value.to_bits());
    }

    fn option(&mut self, value: Option<f64>) {
        // No float of a report has this pattern.
        self.word(value.map_or(u64::MAX, f64::to_bits));
    }

    fn text(&mut self, text: &str) {
        for byte in text.bytes() {
            self.word(u64::from(byte));
        }
        self.word(u64::MAX);
    }
}

/// The fingerprint of an hour's analysis: grid, hour, settings and every observation of the
/// memory, in their canonical order.
pub fn fingerprint(
    grid: &Grid,
    hour: Hour,
    observations: &BTreeMap<Hour, Vec<Arc<Observation>>>,
    settings: &AnalysisSettings,
) -> u64 {
    let mut mixer = Mixer(0xcbf2_9ce4_8422_2325);
    mixer.word(hour.unix_h().cast_unsigned());
    mixer.text(&format!("{:?} {} {}", grid.projection, grid.columns, grid.rows));
    for value in [grid.x0_m, grid.y0_m, grid.spacing_m, settings.station_height_max_m] {
        mixer.float(value);
    }
    mixer.word(settings.memory_h.cast_unsigned());
    mixer.word(u64::from(settings.use_winds));
    let from = hour.plus(-settings.memory_h.max(0));
    for (of, list) in observations.range(from..=hour) {
        mixer.word(of.unix_h().cast_unsigned());
        for observation in list {
            observed(&mut mixer, observation);
            if settings.kept.contains(&observation.key()) {
                mixer.word(7);
            }
        }
    }
    mixer.0 ^ (mixer.0 >> 32)
}

fn observed(mixer: &mut Mixer, observation: &Observation) {
    let report = &observation.report;
    mixer.text(report.platform.word());
    mixer.text(report.station.as_str());
    mixer.word(report.time.unix_s().cast_unsigned());
    mixer.float(observation.position.latitude_deg());
    mixer.float(observation.position.longitude_deg());
    mixer.option(observation.pressure_msl_hpa);
    mixer.float(observation.pressure_error_hpa);
    mixer.option(observation.wind_m_s.map(|(u, _)| u));
    mixer.option(observation.wind_m_s.map(|(_, v)| v));
    mixer.float(observation.wind_error_m_s);
    mixer.option(observation.barometer_height_m);
    mixer.option(report.pressure_change_3h_hpa);
    mixer.option(report.air_temperature_c);
    for element in [Element::Pressure, Element::Wind, Element::Position, Element::Time] {
        mixer.word(match observation.verdict(element) {
            Verdict::Sound => 1,
            Verdict::Doubtful => 2,
            Verdict::Refused => 3,
        });
    }
}
