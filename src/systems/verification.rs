//! How outlooks stood against what was analysed later: by lead time, against systems that were taken
//! to stay as they were, and whether the ellipses held what they promised.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use super::{Measured, OutlookPoint, System, TrackPoint};
use crate::instant::Hour;
use crate::sphere::Position;

/// Squared distance in units of the ellipse within which 68 % of a two-dimensional normal
/// distribution lies: -2 ln(1 - 0.68).
pub const SQUARE_68: f64 = 2.278_87;

/// An outlook as it was given: what the journal keeps until it can be scored.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Issued {
    /// Name of the system.
    pub name: String,
    /// Hour it was given for.
    pub hour: Hour,
    /// Where the system was then.
    pub position: Position,
    /// Its central pressure then, hPa.
    pub pressure_hpa: f64,
    /// The outlook.
    pub points: Vec<OutlookPoint>,
}

impl Issued {
    /// The outlook of a system at the newest hour of its track; `None` where none was given.
    pub fn of(system: &System) -> Option<Self> {
        let last = system.track.last()?;
        (!system.outlook.is_empty()).then(|| Self {
            name: system.name.clone(),
            hour: last.hour,
            position: system.position,
            pressure_hpa: system.pressure_hpa.value,
            points: system.outlook.clone(),
        })
    }
}

/// How one point of an outlook stood.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct Score {
    /// Hours ahead.
    pub lead_h: i64,
    /// Distance between outlook and analysis, km.
    pub position_error_km: f64,
    /// The same for a system taken to stay where it was.
    pub staying_error_km: f64,
    /// Outlook minus analysed central pressure, hPa.
    pub pressure_error_hpa: f64,
    /// The same for an unchanged pressure.
    pub staying_pressure_error_hpa: f64,
    /// Squared distance in units of the ellipse, see [`SQUARE_68`].
    pub ellipse: f64,
    /// Error of the pressure over the one that was stated.
    pub pressure_scaled: f64,
}

/// Scores an outlook against the track as it is known now. Only hours at which the system was
/// found count; others say nothing about where it was.
pub fn scores(issued: &Issued, track: &[TrackPoint]) -> Vec<Score> {
    issued
        .points
        .iter()
        .filter_map(|outlook| {
            let hour = issued.hour.plus(outlook.lead_h);
            let found = track.iter().find(|point| point.hour == hour && point.observed)?;
            Some(score(issued, outlook, found))
        })
        .collect()
}

fn score(issued: &Issued, outlook: &OutlookPoint, found: &TrackPoint) -> Score {
    let (east_km, north_km) = outlook.position.offset_to(found.position);
    let (sine, cosine) = outlook.axis_deg.to_radians().sin_cos();
    let along_km = east_km * sine + north_km * cosine;
    let across_km = east_km * cosine - north_km * sine;
    // What was found is uncertain too.
    let square = found.position_error_km.powi(2);
    let pressure_error_hpa = outlook.pressure_hpa.value - found.pressure_hpa;
    Score {
        lead_h: outlook.lead_h,
        position_error_km: east_km.hypot(north_km),
        staying_error_km: issued.position.distance_km(found.position),
        pressure_error_hpa,
        staying_pressure_error_hpa: issued.pressure_hpa - found.pressure_hpa,
        ellipse: along_km.powi(2) / (outlook.major_km.powi(2) + square)
            + across_km.powi(2) / (outlook.minor_km.powi(2) + square),
        pressure_scaled: pressure_error_hpa
            / outlook.pressure_hpa.error.hypot(found.pressure_error_hpa).max(1e-6),
    }
}

/// The scores of one lead time together.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct LeadSummary {
    /// Hours ahead.
    pub lead_h: i64,
    /// Number of outlooks.
    pub count: usize,
    /// Mean distance, km.
    pub position_km: f64,
    /// Mean distance of staying put, km.
    pub staying_km: f64,
    /// Mean of outlook minus analysed pressure with the standard error of that mean, hPa; the
    /// outlooks of one track are alike, so the error is the least it can be.
    pub pressure_bias_hpa: Measured,
    /// Root mean square of it, hPa.
    pub pressure_rms_hpa: f64,
    /// The same of an unchanged pressure, hPa.
    pub staying_pressure_rms_hpa: f64,
    /// Share within the 68 % ellipse, 0 to 1.
    pub in_ellipse: f64,
    /// Share of pressures within one stated error, 0 to 1; 0.68 is right.
    pub in_pressure_error: f64,
}

/// Summaries by lead time, ascending.
pub fn summary(scores: &[Score]) -> Vec<LeadSummary> {
    let mut by_lead: BTreeMap<i64, Vec<&Score>> = BTreeMap::new();
    for score in scores {
        by_lead.entry(score.lead_h).or_default().push(score);
    }
    by_lead
        .into_iter()
        .map(|(lead_h, list)| {
            let count = list.len() as f64;
            let mean = |of: &dyn Fn(&Score) -> f64| {
                list.iter().map(|score| of(score)).sum::<f64>() / count
            };
            let bias_hpa = mean(&|score| score.pressure_error_hpa);
            let square = mean(&|score| score.pressure_error_hpa.powi(2));
            LeadSummary {
                lead_h,
                count: list.len(),
                position_km: mean(&|score| score.position_error_km),
                staying_km: mean(&|score| score.staying_error_km),
                pressure_bias_hpa: Measured {
                    value: bias_hpa,
                    error: ((square - bias_hpa * bias_hpa).max(0.0) / count).sqrt(),
                },
                pressure_rms_hpa: square.sqrt(),
                staying_pressure_rms_hpa: mean(&|s| s.staying_pressure_error_hpa.powi(2)).sqrt(),
                in_ellipse: mean(&|score| f64::from(u8::from(score.ellipse < SQUARE_68))),
                in_pressure_error: mean(&|score| {
                    f64::from(u8::from(score.pressure_scaled.abs() < 1.0))
                }),
            }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn outlook(lead_h: i64, position: Position) -> OutlookPoint {
        let pressure_hpa = Measured { value: 970.0, error: 3.0 };
        OutlookPoint {
            lead_h,
            position,
            major_km: 100.0,
            minor_km: 50.0,
            axis_deg: 90.0,
            pressure_hpa,
        }
    }

    fn found(hour: i64, position: Position, observed: bool) -> TrackPoint {
        TrackPoint {
            hour: Hour::from_unix_h(hour),
            position,
            position_error_km: 0.0,
            pressure_hpa: 973.0,
            pressure_error_hpa: 4.0,
            observed,
        }
    }

    #[test]
    fn an_outlook_is_scored_at_the_hours_when_the_system_was_found() {
        let start = Position::clamped(-50.0, 179.0);
        let there = start.destination(90.0, 300.0);
        let issued = Issued {
            name: "L1a".to_owned(),
            hour: Hour::from_unix_h(0),
            position: start,
            pressure_hpa: 980.0,
            points: vec![outlook(6, there), outlook(12, there), outlook(18, there)],
        };
        // 100 km along the long axis at 6 h, 100 km across it at 12 h, not found at 18 h.
        let track = [
            found(6, there.destination(90.0, 100.0), true),
            found(12, there.destination(0.0, 100.0), true),
            found(18, there, false),
        ];
        let list = scores(&issued, &track);
        assert_eq!(list.iter().map(|score| score.lead_h).collect::<Vec<_>>(), [6, 12]);
        assert!((list[0].ellipse - 1.0).abs() < 1e-6 && (list[1].ellipse - 4.0).abs() < 1e-3);
        assert!((list[0].position_error_km - 100.0).abs() < 1e-6);
        assert!((list[0].pressure_error_hpa + 3.0).abs() < 1e-12);
        assert!((list[0].pressure_scaled + 0.6).abs() < 1e-12);
        assert!((list[0].staying_pressure_error_hpa - 7.0).abs() < 1e-12);
        assert!(list[0].staying_error_km > 380.0);
        let summary = summary(&list);
        assert_eq!(summary.len(), 2);
        assert!((summary[0].in_ellipse - 1.0).abs() < 1e-12 && summary[1].in_ellipse < 1e-12);
        assert!((summary[0].in_pressure_error - 1.0).abs() < 1e-12);
    }

    /// P(d2 < x) = 1 - exp(-x/2) in two dimensions.
    #[test]
    fn the_ellipse_of_68_in_100() {
        assert!((1.0 - (-SQUARE_68 / 2.0).exp() - 0.68).abs() < 1e-5);
    }
}
