//! What a ship's own way does to its barometer (METHODS TEN-2; Petterssen 1956, Saucier 1955).

use crate::obs::Observation;
use crate::quantity::km_from_nm;
use crate::report::Platform;
use crate::sphere::Position;

/// Slower than this a ship counts as lying still, m/s: the code's rounding of the speed.
const STILL_M_S: f64 = 0.6;
/// Error of the correction for each hPa/100 km of gradient and 100 km of run, hPa: course in eighths
/// and speed in fives of knots (METHODS TEN-2).
const CODED_WAY_ERROR: f64 = 0.4;
/// The same where both places are known to a tenth of a degree: 6 km of 100.
const PLACES_ERROR: f64 = 0.06;
/// Share of the correction that the analysed gradient may be wrong by; own figure.
const FIELD_SHARE: f64 = 0.2;

/// How a report's platform moved over the last three hours.
#[derive(Clone, Copy, PartialEq, Debug)]
pub enum Way {
    /// It does not move, or no further than the code rounds.
    Still,
    /// It came from there; the number is the error of the correction for each hPa/100 km and 100 km.
    From(Position, f64),
    /// It moves, and nothing says how: its change cannot be used.
    Unknown,
}

/// How the platform of an observation moved: by its own position of three hours ago, else by the
/// course and speed it gives, taken backwards along the rhumb line.
pub fn way(observation: &Observation, three_hours_ago: Option<Position>) -> Way {
    if observation.report.platform != Platform::Ship {
        return Way::Still;
    }
    if let Some(from) = three_hours_ago {
        // Two places within their rounding are one.
        let moved = from.distance_km(observation.position) > 2.0;
        return if moved { Way::From(from, PLACES_ERROR) } else { Way::Still };
    }
    match (observation.report.course_deg, observation.report.speed_m_s) {
        (_, Some(speed_m_s)) if speed_m_s < STILL_M_S => Way::Still,
        (Some(course_deg), Some(speed_m_s)) => {
            let run_km = speed_m_s * 3.0 * 3.6;
            let from = observation.position.rhumb_destination(course_deg + 180.0, run_km);
            Way::From(from, CODED_WAY_ERROR)
        }
        _ => Way::Unknown,
    }
}

/// Part of a ship's change that its own way made, hPa, and its error: the analysed pressure where it
/// is now less that where it was, in one and the same field; with two fields their mean.
///
/// `sampler` gives the analysed pressure of one hour, hPa, at a place.
pub fn part_hpa(
    here: Position,
    from: Position,
    way_error: f64,
    fields: &[&dyn Fn(Position) -> Option<f64>],
) -> Option<(f64, f64)> {
    let parts: Vec<f64> = fields.iter().filter_map(|at| Some(at(here)? - at(from)?)).collect();
    if parts.is_empty() {
        return None;
    }
    let part = parts.iter().sum::<f64>() / parts.len() as f64;
    let run = (from.distance_km(here) / 100.0).max(0.01);
    // The gradient along the way stands for the one across it, which nothing here knows.
    let gradient = (part / run).abs().max(0.5);
    Some((part, (way_error * gradient * run).hypot(FIELD_SHARE * part)))
}

/// The advective part of a change for a known gradient, hPa: course in degrees, speed in kt,
/// gradient towards east and north in hPa/100 km (METHODS TEN-2).
pub fn advective_hpa(course_deg: f64, speed_kt: f64, gradient: (f64, f64), hours: f64) -> f64 {
    let (sine, cosine) = course_deg.to_radians().sin_cos();
    km_from_nm(speed_kt * hours) / 100.0 * (gradient.0 * sine + gradient.1 * cosine)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    /// METHODS CHK-079, CHK-080 and the westward case of TEN-2.
    #[test]
    fn removes_the_ships_own_way() {
        near(-3.1 - advective_hpa(45.0, 18.0, (-1.2, -0.8), 3.0), -1.6857, 0.001);
        near(2.0 - advective_hpa(180.0, 20.0, (-0.5, 1.5), 3.0), 3.6668, 0.001);
        near(-1.0 - advective_hpa(270.0, 15.0, (0.0, -2.0), 3.0), -1.0, 1e-9);
    }

    /// The finite form in a field of known gradient is the advective one.
    #[test]
    fn the_finite_form_agrees_with_the_gradient() {
        let here = Position::clamped(45.0, -30.0);
        let field = |place: Position| {
            let (east_km, north_km) = here.offset_to(place);
            Some(1000.0 - 0.012 * east_km - 0.008 * north_km)
        };
        let from = here.rhumb_destination(225.0, km_from_nm(54.0));
        let (part, error) = part_hpa(here, from, CODED_WAY_ERROR, &[&field]).expect("in the field");
        near(part, -1.414, 0.01);
        assert!((0.4..0.8).contains(&error), "{error}");
        assert_eq!(part_hpa(here, from, CODED_WAY_ERROR, &[&|_| None]), None);
    }
}
