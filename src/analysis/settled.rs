//! An analysis as bytes and back, bit for bit: how a settled hour is kept.
//!
//! One line of JSON with what is small, then the dense fields as little-endian 64-bit floats in a
//! fixed order, all gzipped. The smooth surface is worked out again from the pressures.

use std::collections::BTreeMap;
use std::io::{Read as _, Write as _};
use std::sync::Arc;

use flate2::Compression;
use flate2::read::GzDecoder;
use flate2::write::GzEncoder;
use serde::{Deserialize, Serialize};

use super::{HourAnalysis, Innovation, Statistics};
use crate::field::Grid;
use crate::instant::Hour;

/// Analyses that are settled, by hour.
pub type Settled = BTreeMap<Hour, Arc<HourAnalysis>>;

/// Most points that a kept grid may have: the largest that the settings allow.
const POINTS_MAX: usize = 481 * 481;
/// Floats a point: pressure, its error, the ratio, two of wind and its error.
const FLOATS: usize = 6;

#[derive(Serialize, Deserialize)]
struct Head {
    hour: Hour,
    grid: Grid,
    innovations: Vec<Innovation>,
    pressures_used: usize,
    winds_used: usize,
    fingerprint: u64,
    statistics: Statistics,
}

impl HourAnalysis {
    /// The analysis as bytes.
    pub fn to_bytes(&self) -> Vec<u8> {
        let head = Head {
            hour: self.hour,
            grid: (*self.grid).clone(),
            innovations: self.innovations.clone(),
            pressures_used: self.pressures_used,
            winds_used: self.winds_used,
            fingerprint: self.fingerprint,
            statistics: self.statistics,
        };
        let mut plain = serde_json::to_vec(&head).unwrap_or_default();
        plain.push(b'\n');
        let winds = self.wind_m_s.iter().flatten();
        let all = [&self.pressure_hpa, &self.pressure_error_hpa, &self.error_ratio];
        for value in all.into_iter().flatten().chain(winds).chain(&self.wind_error_m_s) {
            plain.extend(value.to_le_bytes());
        }
        let mut packed = GzEncoder::new(Vec::new(), Compression::fast());
        // Writing to memory cannot fail.
        let _ = packed.write_all(&plain);
        packed.finish().unwrap_or_default()
    }

    /// The analysis that [`HourAnalysis::to_bytes`] made the bytes of; `None` for any other bytes.
    pub fn from_bytes(bytes: &[u8]) -> Option<Self> {
        let most = u64::try_from(POINTS_MAX * FLOATS * 8 + 64 * 1024 * 1024).ok()?;
        let mut plain = Vec::new();
        GzDecoder::new(bytes).take(most).read_to_end(&mut plain).ok()?;
        let end = plain.iter().position(|byte| *byte == b'\n')?;
        let head: Head = serde_json::from_slice(plain.get(..end)?).ok()?;
        let count = head.grid.columns.checked_mul(head.grid.rows)?;
        let rest = plain.get(end + 1..)?;
        let thin = head.grid.columns < 2 || head.grid.rows < 2;
        if thin || count > POINTS_MAX || rest.len() != count * FLOATS * 8 {
            return None;
        }
        let floats: Vec<f64> = rest
            .chunks_exact(8)
            .filter_map(|eight| Some(f64::from_le_bytes(eight.try_into().ok()?)))
            .collect();
        let part =
            |from: usize, to: usize| floats.get(from * count..to * count).map(<[f64]>::to_vec);
        let mut analysis =
            Self::from_field(head.hour, Arc::new(head.grid), part(0, 1)?, part(1, 2)?);
        analysis.error_ratio = part(2, 3)?;
        analysis.wind_m_s = part(3, 5)?.chunks_exact(2).map(|pair| [pair[0], pair[1]]).collect();
        analysis.wind_error_m_s = part(5, 6)?;
        analysis.innovations = head.innovations;
        analysis.pressures_used = head.pressures_used;
        analysis.winds_used = head.winds_used;
        analysis.fingerprint = head.fingerprint;
        analysis.statistics = head.statistics;
        Some(analysis)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::obs::{Element, Finding, Verdict};
    use crate::report::{Identifier, Platform};
    use crate::sphere::Position;

    fn some_analysis() -> HourAnalysis {
        let grid = Arc::new(Grid::fitted(30.0, 60.0, 170.0, -160.0, 21, 17));
        let value = |k: usize| 1000.0 + (k as f64 * 0.37).sin() * 17.0 / 3.0;
        let pressure = (0..grid.len()).map(value).collect();
        let mut error: Vec<f64> = (0..grid.len()).map(|k| 0.1 + k as f64 / 7.0).collect();
        error[3] = f64::NAN;
        let mut analysis =
            HourAnalysis::from_field(Hour::from_unix_h(491_000), grid, pressure, error);
        analysis.wind_m_s[5] = [1.0 / 3.0, -2.0 / 7.0];
        analysis.fingerprint = u64::MAX - 12;
        analysis.innovations = vec![Innovation {
            platform: Platform::Ship,
            station: Identifier::new("QA1").expect("a name"),
            position: Position::clamped(45.0, -179.9),
            pressure_hpa: Some(0.1 + 0.2),
            pressure_expected_hpa: None,
            finding: Some(Finding {
                element: Element::Pressure,
                verdict: Verdict::Doubtful,
                check: "QC-6".to_owned(),
                reason: "two words".to_owned(),
            }),
        }];
        analysis
    }

    #[test]
    fn an_analysis_survives_its_bytes_to_the_last_bit() {
        let analysis = some_analysis();
        let again = HourAnalysis::from_bytes(&analysis.to_bytes()).expect("its own bytes");
        assert_eq!(again, analysis);
        let place = Position::clamped(47.3, 179.2);
        assert_eq!(again.at(place), analysis.at(place));
    }

    #[test]
    fn other_bytes_are_refused() {
        let bytes = some_analysis().to_bytes();
        for cut in [0, 1, 10, bytes.len() / 2, bytes.len() - 1] {
            assert!(HourAnalysis::from_bytes(bytes.get(..cut).expect("inside")).is_none(), "{cut}");
        }
        assert!(HourAnalysis::from_bytes(b"no gzip at all").is_none());
    }
}
