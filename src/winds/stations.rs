//! The wind at stations and watch points: observed, implied by the pressure, and why they differ.

use super::fields::{DragLaw, MovingCentre, at};
use super::land::is_land;
use super::{StationWind, Wind};
use crate::analysis::HourAnalysis;
use crate::obs::{Element, Observation, Verdict};
use crate::quantity::{kt_from_m_s, wind_from_components, wrap_180_deg};
use crate::sphere::Position;

/// A difference in speed, in standard errors, from which it needs an explanation.
const SIGMAS: f64 = 2.0;
/// Below this speed directions mean little, m/s.
const LIGHT_M_S: f64 = 3.0;
/// Error of a reported 10 m wind where the observation does not say, m/s.
const USUAL_ERROR_M_S: f64 = 2.1;

/// Winds at the stations of an hour, in the order of the observations, then at the watch points.
pub fn stations<'o>(
    analysis: &HourAnalysis,
    observations: impl Iterator<Item = &'o Observation>,
    watch_points: &[(String, Position)],
    law: &DragLaw,
    centres: &[MovingCentre],
) -> Vec<StationWind> {
    let mut rows: Vec<StationWind> = watch_points
        .iter()
        .map(|(name, place)| row(analysis, name, None, *place, law, centres))
        .collect();
    rows.extend(observations.filter(|observation| observation.wind_m_s.is_some()).map(
        |observation| {
            let name = observation.report.station.to_string();
            row(analysis, &name, Some(observation), observation.position, law, centres)
        },
    ));
    rows
}

fn row(
    analysis: &HourAnalysis,
    name: &str,
    observation: Option<&Observation>,
    position: Position,
    law: &DragLaw,
    centres: &[MovingCentre],
) -> StationWind {
    let winds = at(analysis, position, law, centres);
    let observed = observation.and_then(|observation| observation.wind_m_s).map(|(u, v)| {
        let (from_deg, speed_m_s) = wind_from_components(u, v);
        Wind { from_deg, speed_m_s }
    });
    let difference = observed.zip(winds.surface);
    let speed_difference_m_s =
        difference.map(|(observed, expected)| observed.speed_m_s - expected.speed_m_s);
    let direction_difference_deg = difference
        .filter(|(observed, expected)| {
            observed.speed_m_s >= LIGHT_M_S && expected.speed_m_s >= LIGHT_M_S
        })
        .map(|(observed, expected)| wrap_180_deg(observed.from_deg - expected.from_deg));
    let error_ratio =
        analysis.grid.sample(&analysis.error_ratio, position).unwrap_or(1.0).clamp(0.0, 1.0);
    let mut wind = StationWind {
        station: name.to_owned(),
        platform: observation.map(|observation| observation.report.platform),
        position,
        time: observation.map(|observation| observation.report.time),
        observed,
        gust_m_s: observation.and_then(|observation| observation.report.wind_gust_m_s),
        winds,
        speed_difference_m_s,
        direction_difference_deg,
        explanation: String::new(),
        error_ratio,
    };
    wind.explanation = explanation(&wind, observation);
    wind
}

/// What explains a disagreement; empty where there is none, or nothing to compare.
fn explanation(wind: &StationWind, observation: Option<&Observation>) -> String {
    let (Some(observation), Some(speed_difference)) = (observation, wind.speed_difference_m_s)
    else {
        return String::new();
    };
    let error_m_s = wind.winds.surface_error_m_s.unwrap_or(USUAL_ERROR_M_S).hypot(
        if observation.wind_error_m_s > 0.0 { observation.wind_error_m_s } else { USUAL_ERROR_M_S },
    );
    let fast = speed_difference.abs() > SIGMAS * error_m_s;
    let expected = wind.winds.surface.map_or(0.0, |wind| wind.speed_m_s);
    // An error across the wind turns it: its share of the speed, in degrees.
    let turn_error_deg = (error_m_s / expected.max(1.0)).atan().to_degrees().max(15.0);
    let turned =
        wind.direction_difference_deg.is_some_and(|turn| turn.abs() > SIGMAS * turn_error_deg);
    if !fast && !turned {
        return String::new();
    }
    if observation.verdict(Element::Wind) != Verdict::Sound {
        return "the report itself is doubtful".to_owned();
    }
    if wind.error_ratio > 0.7 {
        return "the analysis is weak here".to_owned();
    }
    if wind.winds.low_latitude {
        return "low latitude: pressure says little of wind".to_owned();
    }
    if wind.winds.capped {
        return "gradient too strong for the curvature of the high".to_owned();
    }
    if observation.report.pressure_change_3h_hpa.is_some_and(|change| change.abs() >= 4.0) {
        return "pressure changing fast: wind not yet in balance".to_owned();
    }
    if !observation.at_sea() && is_land(wind.position) {
        return "land: local relief and stability".to_owned();
    }
    if !observation.at_sea() {
        return "coast: land and sea winds".to_owned();
    }
    if fast && speed_difference > 0.0 {
        return format!(
            "stronger than the pressure implies by {:.0} kt",
            kt_from_m_s(speed_difference)
        );
    }
    if fast {
        let weaker_kt = kt_from_m_s(-speed_difference);
        return format!("weaker than the pressure implies by {weaker_kt:.0} kt");
    }
    let turn = wind.direction_difference_deg.unwrap_or(0.0);
    let word = if turn > 0.0 { "veered" } else { "backed" };
    format!("{word} by {:.0} deg from what the pressure implies", turn.abs())
}
