//! Where a system will be if it carries on: an extrapolation with its error, never a forecast.

use super::motion::State;
use super::{Measured, OutlookPoint};

/// Hours ahead that an outlook is given for (METHODS TRK-6: stop at 24).
pub const LEADS_H: [i64; 5] = [3, 6, 12, 18, 24];
/// Times over which motion and pressure rate are damped, h: systems slow down, and deepening ends.
/// Scores should set them; until there are some, motion is damped little.
const MOTION_DAMPING_H: f64 = 120.0;
const RATE_DAMPING_H: f64 = 14.0;
/// Share of the distance run that is uncertain along the track beyond the filter's own error.
const ALONG_TRACK_SHARE: f64 = 0.12;

/// The outlook from a filtered state, one point for each lead.
pub fn outlook(state: &State) -> Vec<OutlookPoint> {
    LEADS_H.iter().map(|lead_h| point(state, *lead_h)).collect()
}

fn point(state: &State, lead_h: i64) -> OutlookPoint {
    let hours = lead_h as f64;
    let damped = |scale: f64| scale * (1.0 - (-hours / scale).exp());
    let [east, north] = state.velocity_km_h;
    let (east_km, north_km) = (east * damped(MOTION_DAMPING_H), north * damped(MOTION_DAMPING_H));
    let run_km = east_km.hypot(north_km);
    let position = state.position.offset(east_km, north_km);
    let across_km = state.motion_ahead(hours).value.max(0.0).sqrt();
    // The bearing on arrival: the long axis lies along the track there.
    let axis_deg = if run_km > 1.0 {
        crate::quantity::wrap_360_deg(position.bearing_deg(state.position) + 180.0)
    } else {
        0.0
    };
    let pressure = state.pressure_ahead(hours);
    OutlookPoint {
        lead_h,
        position,
        major_km: across_km.hypot(ALONG_TRACK_SHARE * run_km),
        minor_km: across_km,
        axis_deg,
        pressure_hpa: Measured {
            value: state.pressure_hpa + state.rate_hpa_h * damped(RATE_DAMPING_H),
            error: pressure.value.max(0.0).sqrt(),
        },
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sphere::Position;
    use crate::systems::motion::Sighting;

    #[test]
    fn an_outlook_goes_on_ahead_and_knows_less_and_less() {
        let seen = |position: Position, pressure_hpa: f64| Sighting {
            position,
            position_error_km: 30.0,
            pressure_hpa,
            pressure_error_hpa: 1.0,
            doubt: (0.0, 0.0),
        };
        let mut state = State::first(&seen(Position::clamped(50.0, 170.0), 985.0));
        for hour in 1..=12 {
            let place = Position::clamped(50.0, 170.0).destination(80.0, 50.0 * f64::from(hour));
            state = state.predicted(1.0).updated(&seen(place, 985.0 - f64::from(hour)));
        }
        let ahead = outlook(&state);
        assert_eq!(ahead.len(), LEADS_H.len());
        let straight = Position::clamped(50.0, 170.0).destination(80.0, 50.0 * 18.0);
        assert!(ahead[1].position.distance_km(straight) < 60.0, "{ahead:?}");
        for pair in ahead.windows(2) {
            assert!(pair[1].major_km > pair[0].major_km && pair[1].minor_km > pair[0].minor_km);
            assert!(pair[1].pressure_hpa.error > pair[0].pressure_hpa.error);
            assert!(pair[1].pressure_hpa.value < pair[0].pressure_hpa.value);
        }
        assert!(ahead.iter().all(|point| point.major_km >= point.minor_km));
        // METHODS TRK-6, from memory: 400 to 550 km at 24 h is the usual size of the error.
        assert!((250.0..700.0).contains(&ahead[4].major_km), "{}", ahead[4].major_km);
    }
}
