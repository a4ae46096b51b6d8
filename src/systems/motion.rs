//! Filters for a moving centre: constant velocity on the sphere, and pressure with its rate.

use crate::sphere::Position;

/// Noise of the velocity, km2/h3: how quickly systems turn and change speed (METHODS TRK-5).
pub(super) const VELOCITY_NOISE_KM2_H3: f64 = 20.0;
/// Noise of the pressure rate, hPa2/h3 (TRK-5).
pub(super) const RATE_NOISE_HPA2_H3: f64 = 0.01;
/// Standard deviation of an unknown velocity, km/h (TRK-5).
pub(super) const FIRST_VELOCITY_KM_H: f64 = 30.0;
/// Standard deviation of an unknown pressure rate, hPa/h.
pub(super) const FIRST_RATE_HPA_H: f64 = 1.0;

/// A value and its rate with their covariance: one axis of a constant-rate filter.
///
/// Covariance as value-value, value-rate, rate-rate.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Covariance {
    /// Variance of the value.
    pub value: f64,
    /// Covariance of value and rate.
    pub cross: f64,
    /// Variance of the rate.
    pub rate: f64,
}

impl Covariance {
    /// After `hours` with a white-noise rate of intensity `noise`: P' = F P F' + Q.
    #[must_use]
    pub fn predicted(self, hours: f64, noise: f64) -> Self {
        let Self { value, cross, rate } = self;
        Self {
            value: value + 2.0 * hours * cross + hours * hours * rate + noise * hours.powi(3) / 3.0,
            cross: cross + hours * rate + noise * hours * hours / 2.0,
            rate: rate + noise * hours,
        }
    }

    /// Gains of value and rate for an observation of the value with variance `error`.
    pub fn gains(self, error: f64) -> (f64, f64) {
        let total = self.value + error;
        (self.value / total, self.cross / total)
    }

    /// After that observation.
    #[must_use]
    pub fn updated(self, error: f64) -> Self {
        let (k_value, k_rate) = self.gains(error);
        Self {
            value: (1.0 - k_value) * self.value,
            cross: (1.0 - k_value) * self.cross,
            rate: self.rate - k_rate * self.cross,
        }
    }
}

/// State of a track at one hour: place, velocity, pressure, rate.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct State {
    /// Where.
    pub position: Position,
    /// Velocity towards east and north, km/h.
    pub velocity_km_h: [f64; 2],
    /// Covariance of each axis of place and velocity.
    pub motion: Covariance,
    /// Central pressure, hPa.
    pub pressure_hpa: f64,
    /// Its rate, hPa/h.
    pub rate_hpa_h: f64,
    /// Covariance of pressure and rate.
    pub pressure: Covariance,
}

impl State {
    /// A state first seen: nothing is known of its motion.
    pub fn first(
        position: Position,
        position_error_km: f64,
        pressure_hpa: f64,
        pressure_error_hpa: f64,
    ) -> Self {
        Self {
            position,
            velocity_km_h: [0.0, 0.0],
            motion: Covariance {
                value: position_error_km.powi(2),
                cross: 0.0,
                rate: FIRST_VELOCITY_KM_H.powi(2),
            },
            pressure_hpa,
            rate_hpa_h: 0.0,
            pressure: Covariance {
                value: pressure_error_hpa.powi(2),
                cross: 0.0,
                rate: FIRST_RATE_HPA_H.powi(2),
            },
        }
    }

    /// The state `hours` later, along a great circle, with its velocity turned to the east and
    /// north of the new place (METHODS TRK-5, TRK-7).
    #[must_use]
    pub fn predicted(&self, hours: f64) -> Self {
        let [east, north] = self.velocity_km_h;
        let position = self.position.offset(east * hours, north * hours);
        Self {
            position,
            velocity_km_h: carried(self.position, position, self.velocity_km_h),
            motion: self.motion.predicted(hours, VELOCITY_NOISE_KM2_H3),
            pressure_hpa: self.pressure_hpa + hours * self.rate_hpa_h,
            rate_hpa_h: self.rate_hpa_h,
            pressure: self.pressure.predicted(hours, RATE_NOISE_HPA2_H3),
        }
    }

    /// The state after a centre was observed.
    #[must_use]
    pub fn updated(
        &self,
        position: Position,
        position_error_km: f64,
        pressure_hpa: f64,
        pressure_error_hpa: f64,
    ) -> Self {
        let (east_km, north_km) = self.position.offset_to(position);
        let (k_value, k_rate) = self.motion.gains(position_error_km.powi(2));
        let [u, v] = self.velocity_km_h;
        let (p_value, p_rate) = self.pressure.gains(pressure_error_hpa.powi(2));
        let surprise_hpa = pressure_hpa - self.pressure_hpa;
        Self {
            position: self.position.offset(k_value * east_km, k_value * north_km),
            velocity_km_h: [u + k_rate * east_km, v + k_rate * north_km],
            motion: self.motion.updated(position_error_km.powi(2)),
            pressure_hpa: self.pressure_hpa + p_value * surprise_hpa,
            rate_hpa_h: self.rate_hpa_h + p_rate * surprise_hpa,
            pressure: self.pressure.updated(pressure_error_hpa.powi(2)),
        }
    }
}

/// A vector carried along the great circle from one place to another: its angle to it stays.
fn carried(from: Position, to: Position, [east, north]: [f64; 2]) -> [f64; 2] {
    if from.distance_km(to) < 1e-6 {
        return [east, north];
    }
    let turn = (to.bearing_deg(from) + 180.0 - from.bearing_deg(to)).to_radians();
    let (sine, cosine) = turn.sin_cos();
    [east * cosine + north * sine, north * cosine - east * sine]
}

/// Smooths filtered states backwards, so that the past knows what came after (Rauch, Tung and
/// Striebel 1965). `hours` are the hours of the states, ascending.
pub fn smoothed(states: &[State], hours: &[f64]) -> Vec<State> {
    let mut out = states.to_vec();
    for at in (0..states.len().saturating_sub(1)).rev() {
        let step = hours[at + 1] - hours[at];
        let here = states[at];
        let ahead = here.predicted(step);
        let later = out[at + 1];
        let (east_km, north_km) = ahead.position.offset_to(later.position);
        let change = [
            later.velocity_km_h[0] - ahead.velocity_km_h[0],
            later.velocity_km_h[1] - ahead.velocity_km_h[1],
        ];
        let motion = Gain::of(here.motion, ahead.motion, step);
        let pressure = Gain::of(here.pressure, ahead.pressure, step);
        let surprise =
            (later.pressure_hpa - ahead.pressure_hpa, later.rate_hpa_h - ahead.rate_hpa_h);
        let (east, u) = motion.apply(east_km, change[0]);
        let (north, v) = motion.apply(north_km, change[1]);
        let (value, rate) = pressure.apply(surprise.0, surprise.1);
        out[at] = State {
            position: here.position.offset(east, north),
            velocity_km_h: [here.velocity_km_h[0] + u, here.velocity_km_h[1] + v],
            motion: motion.covariance(here.motion, ahead.motion, later.motion),
            pressure_hpa: here.pressure_hpa + value,
            rate_hpa_h: here.rate_hpa_h + rate,
            pressure: pressure.covariance(here.pressure, ahead.pressure, later.pressure),
        };
    }
    out
}

/// The smoother's gain C = P F' P'^-1 for one axis.
#[derive(Clone, Copy)]
struct Gain([[f64; 2]; 2]);

impl Gain {
    fn of(here: Covariance, ahead: Covariance, step: f64) -> Self {
        // P F'
        let pf = [
            [here.value + step * here.cross, here.cross],
            [here.cross + step * here.rate, here.rate],
        ];
        let determinant = ahead.value * ahead.rate - ahead.cross * ahead.cross;
        let inverse = [
            [ahead.rate / determinant, -ahead.cross / determinant],
            [-ahead.cross / determinant, ahead.value / determinant],
        ];
        let row = |r: [f64; 2]| {
            [
                r[0] * inverse[0][0] + r[1] * inverse[1][0],
                r[0] * inverse[0][1] + r[1] * inverse[1][1],
            ]
        };
        Self([row(pf[0]), row(pf[1])])
    }

    fn apply(self, value: f64, rate: f64) -> (f64, f64) {
        let Self([a, b]) = self;
        (a[0] * value + a[1] * rate, b[0] * value + b[1] * rate)
    }

    /// P + C (Ps' - P') C'.
    fn covariance(self, here: Covariance, ahead: Covariance, later: Covariance) -> Covariance {
        let Self([a, b]) = self;
        let (value, cross, rate) =
            (later.value - ahead.value, later.cross - ahead.cross, later.rate - ahead.rate);
        let form = |x: [f64; 2], y: [f64; 2]| {
            x[0] * (value * y[0] + cross * y[1]) + x[1] * (cross * y[0] + rate * y[1])
        };
        Covariance {
            value: (here.value + form(a, a)).max(1e-9),
            cross: here.cross + form(a, b),
            rate: (here.rate + form(b, b)).max(1e-9),
        }
    }
}

/// Velocity of a centre towards east and north, m/s, from the field itself: C = -H^-1 g, with H the
/// Hessian of the pressure (Pa/m2: east-east, east-north, north-north) and g the gradient of its
/// tendency, Pa/(m s). Petterssen (1956), METHODS TEN-6. `None` in flat or elongated centres.
pub fn kinematic_velocity_m_s(hessian_pa_m2: [f64; 3], tendency: [f64; 2]) -> Option<[f64; 2]> {
    let [hxx, hxy, hyy] = hessian_pa_m2;
    let [gx, gy] = tendency;
    let determinant = hxx * hyy - hxy * hxy;
    if determinant <= 0.05 * (0.5 * (hxx + hyy)).powi(2) {
        return None;
    }
    Some([-(hyy * gx - hxy * gy) / determinant, -(hxx * gy - hxy * gx) / determinant])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    /// METHODS CHK-168: gain form and information form agree.
    #[test]
    fn one_step_of_the_filter() {
        let before = Covariance { value: 3600.0, cross: 0.0, rate: 900.0 };
        let ahead = before.predicted(6.0, 20.0);
        near(ahead.value, 37_440.0, 1e-6);
        near(ahead.cross, 5760.0, 1e-6);
        near(ahead.rate, 1020.0, 1e-6);
        let (k_value, k_rate) = ahead.gains(3600.0);
        near(k_value, 0.912_280_7, 1e-7);
        near(k_rate, 0.140_350_9, 1e-7);
        near(240.0 + k_value * 50.0, 285.614_04, 1e-5);
        near(40.0 + k_rate * 50.0, 47.017_54, 1e-5);
        let after = ahead.updated(3600.0);
        near(after.value, 3284.2105, 1e-3);
        near(after.cross, 505.2632, 1e-3);
        near(after.rate, 211.5789, 1e-3);
    }

    /// METHODS CHK-169: iteration and the Riccati equation agree (scipy).
    #[test]
    fn the_steady_state_of_the_filter() {
        let mut state = Covariance { value: 3600.0, cross: 0.0, rate: 900.0 };
        for _ in 0..400 {
            state = state.predicted(6.0, 20.0).updated(3600.0);
        }
        near(state.value.sqrt(), 52.7259, 0.01);
        near(state.rate.sqrt(), 10.8282, 0.01);
        near(state.predicted(12.0, 20.0).value.sqrt(), 196.755, 0.01);
        near(state.predicted(24.0, 20.0).value.sqrt(), 421.346, 0.01);
    }

    /// METHODS CHK-089: a field translated by a known velocity.
    #[test]
    fn the_kinematic_velocity_of_a_centre() {
        let found = kinematic_velocity_m_s([2.4e-9, 0.6e-9, 1.6e-9], [-3.18e-8, -1.52e-8])
            .expect("a velocity");
        near(found[0], 12.0, 1e-9);
        near(found[1], 5.0, 1e-9);
        assert_eq!(kinematic_velocity_m_s([2.4e-9, 0.0, 1e-12], [1e-8, 1e-8]), None);
    }

    #[test]
    fn a_steady_mover_is_followed_over_the_date_line_and_past_the_pole() {
        for (start, course_deg) in
            [(Position::clamped(-50.0, 175.0), 80.0), (Position::clamped(84.0, 20.0), 350.0)]
        {
            let at = |hour: f64| start.destination(course_deg, 50.0 * hour);
            let mut state = State::first(start, 30.0, 990.0, 1.0);
            for hour in 1..=24 {
                let observed = at(f64::from(hour));
                state = state.predicted(1.0).updated(observed, 30.0, 990.0 - f64::from(hour), 1.0);
            }
            let ahead = state.predicted(6.0);
            let miss_km = ahead.position.distance_km(at(30.0));
            assert!(miss_km < 15.0, "{miss_km}");
            near(ahead.pressure_hpa, 960.0, 0.5);
        }
    }

    #[test]
    fn smoothing_betters_the_past_and_leaves_the_present() {
        let start = Position::clamped(50.0, -40.0);
        let hours: Vec<f64> = (0..12).map(f64::from).collect();
        let at = |hour: f64| start.destination(60.0, 45.0 * hour);
        let mut states = vec![State::first(at(0.0), 40.0, 1000.0, 1.0)];
        for hour in &hours[1..] {
            let last = states[states.len() - 1];
            let next = last.predicted(1.0).updated(at(*hour), 40.0, 1000.0 - hour, 1.0);
            states.push(next);
        }
        let smooth = smoothed(&states, &hours);
        assert_eq!(smooth[11], states[11]);
        let miss = |states: &[State]| {
            (1..11).map(|k| states[k].position.distance_km(at(hours[k]))).sum::<f64>()
        };
        assert!(miss(&smooth) < 0.6 * miss(&states), "{} {}", miss(&smooth), miss(&states));
        assert!(smooth[3].motion.value < states[3].motion.value);
    }
}
