//! Filters for a moving centre: constant velocity on the sphere, and pressure with its rate.

use nalgebra::{Matrix3, Vector3};

use crate::sphere::Position;

/// Noise of the velocity, km2/h3: how quickly systems turn and change speed (METHODS TRK-5).
const VELOCITY_NOISE_KM2_H3: f64 = 20.0;
/// Noise of the pressure rate, hPa2/h3 (TRK-5).
const RATE_NOISE_HPA2_H3: f64 = 0.01;
/// Standard deviation of an unknown velocity, km/h (TRK-5).
const FIRST_VELOCITY_KM_H: f64 = 30.0;
/// Standard deviation of an unknown pressure rate, hPa/h.
const FIRST_RATE_HPA_H: f64 = 1.0;

/// Share of an observation's error variance that lasts from hour to hour: analyses of neighbouring
/// hours share most of their reports.
const LASTING_SHARE: f64 = 0.9;
/// Time in which that part is forgotten by a factor e, of places and of pressures, h. In rehearsed
/// analyses of 300 and 1,000 reports an hour the errors of place were alike by 0.4 to 0.6 an hour
/// apart and 0.1 to 0.4 two hours apart, those of pressure by 0.6 and 0.5.
const LASTING_PLACE_H: f64 = 2.5;
pub(super) const LASTING_PRESSURE_H: f64 = 4.0;

/// The error of an observation: a part that is new every time, and one that lasts.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Noise {
    /// Variance of the new part.
    pub fresh: f64,
    /// Standard deviation of the lasting part.
    pub lasting: f64,
}

impl Noise {
    /// Of an observation from an hourly analysis with this standard error.
    pub fn of_analysis(error: f64) -> Self {
        Self { fresh: (1.0 - LASTING_SHARE) * error * error, lasting: LASTING_SHARE.sqrt() * error }
    }

    /// New every time, with this variance.
    pub const fn fresh(variance: f64) -> Self {
        Self { fresh: variance, lasting: 0.0 }
    }
}

/// Covariance of a value, its rate, and the lasting part of the observation's error (in units of
/// its standard deviation): one axis of a constant-rate filter with coloured noise (Bryson and
/// Henrikson 1968, by augmentation).
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Covariance {
    /// Variance of the value.
    pub value: f64,
    /// Covariance of value and rate.
    pub cross: f64,
    /// Variance of the rate.
    pub rate: f64,
    /// Covariance of the value and the lasting part.
    pub value_off: f64,
    /// Covariance of the rate and the lasting part.
    pub rate_off: f64,
    /// Variance of the lasting part.
    pub off: f64,
}

/// How much of a lasting part is left after some hours.
pub(super) fn likeness(hours: f64, lasting_h: f64) -> f64 {
    (-hours / lasting_h).exp()
}

impl Covariance {
    /// After a first observation, with a rate of which only the standard deviation is known.
    pub fn first(noise: Noise, rate_error: f64) -> Self {
        Self {
            value: noise.fresh + noise.lasting * noise.lasting,
            cross: 0.0,
            rate: rate_error * rate_error,
            value_off: -noise.lasting,
            rate_off: 0.0,
            off: 1.0,
        }
    }

    /// After `hours` with a white-noise rate of intensity `noise`: P' = F P F' + Q. The lasting part
    /// is forgotten in `lasting_h` by a factor e.
    #[must_use]
    pub fn predicted(self, hours: f64, noise: f64, lasting_h: f64) -> Self {
        let like = likeness(hours, lasting_h);
        let Self { value, cross, rate, value_off, rate_off, off } = self;
        Self {
            value: value + 2.0 * hours * cross + hours * hours * rate + noise * hours.powi(3) / 3.0,
            cross: cross + hours * rate + noise * hours * hours / 2.0,
            rate: rate + noise * hours,
            value_off: like * (value_off + hours * rate_off),
            rate_off: like * rate_off,
            off: like * like * off + 1.0 - like * like,
        }
    }

    /// Variance of observed minus predicted.
    pub fn surprise(self, noise: Noise) -> f64 {
        let r = noise.lasting;
        self.value + 2.0 * r * self.value_off + r * r * self.off + noise.fresh
    }

    /// Gains of value, rate and lasting part for an observation of the value.
    pub fn gains(self, noise: Noise) -> [f64; 3] {
        let total = self.surprise(noise);
        self.with_observed(noise).map(|part| part / total)
    }

    /// Covariances of value, rate and lasting part with what is observed.
    fn with_observed(self, noise: Noise) -> [f64; 3] {
        let r = noise.lasting;
        [
            self.value + r * self.value_off,
            self.cross + r * self.rate_off,
            self.value_off + r * self.off,
        ]
    }

    /// After that observation.
    #[must_use]
    pub fn updated(self, noise: Noise) -> Self {
        let [k_value, k_rate, k_off] = self.gains(noise);
        let [h_value, h_rate, h_off] = self.with_observed(noise);
        Self {
            value: (self.value - k_value * h_value).max(1e-9),
            cross: self.cross - k_value * h_rate,
            rate: (self.rate - k_rate * h_rate).max(1e-9),
            value_off: self.value_off - k_value * h_off,
            rate_off: self.rate_off - k_rate * h_off,
            off: (self.off - k_off * h_off).max(1e-9),
        }
    }

    fn matrix(self) -> Matrix3<f64> {
        let Self { value, cross, rate, value_off, rate_off, off } = self;
        Matrix3::new(value, cross, value_off, cross, rate, rate_off, value_off, rate_off, off)
    }

    fn of_matrix(m: &Matrix3<f64>) -> Self {
        Self {
            value: m[(0, 0)].max(1e-9),
            cross: m[(0, 1)],
            rate: m[(1, 1)].max(1e-9),
            value_off: m[(0, 2)],
            rate_off: m[(1, 2)],
            off: m[(2, 2)].max(1e-9),
        }
    }
}

/// A centre as one hour's analysis shows it.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Sighting {
    /// Where.
    pub position: Position,
    /// Standard error of each coordinate, km.
    pub position_error_km: f64,
    /// Central pressure, hPa.
    pub pressure_hpa: f64,
    /// Its standard error, hPa.
    pub pressure_error_hpa: f64,
    /// Doubt of this one sighting beyond those errors: of the place, km, and of the pressure, hPa.
    pub doubt: (f64, f64),
}

impl Sighting {
    fn place_noise(&self) -> Noise {
        let noise = Noise::of_analysis(self.position_error_km);
        Noise { fresh: noise.fresh + self.doubt.0.powi(2), ..noise }
    }

    fn pressure_noise(&self) -> Noise {
        let noise = Noise::of_analysis(self.pressure_error_hpa);
        Noise { fresh: noise.fresh + self.doubt.1.powi(2), ..noise }
    }
}

/// State of a track at one hour: place, velocity, pressure, rate.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct State {
    /// Where.
    pub position: Position,
    /// Velocity towards east and north, km/h.
    pub velocity_km_h: [f64; 2],
    /// Lasting part of the error of the place, in units of its standard deviation.
    off: [f64; 2],
    /// Covariance of each axis of place and velocity.
    pub motion: Covariance,
    /// Central pressure, hPa.
    pub pressure_hpa: f64,
    /// Its rate, hPa/h.
    pub rate_hpa_h: f64,
    /// Lasting part of the error of the pressure, in the same units.
    pressure_off: f64,
    /// Covariance of pressure and rate.
    pub pressure: Covariance,
}

impl State {
    /// A state first seen: nothing is known of its motion.
    pub fn first(seen: &Sighting) -> Self {
        Self {
            position: seen.position,
            velocity_km_h: [0.0, 0.0],
            off: [0.0, 0.0],
            motion: Covariance::first(seen.place_noise(), FIRST_VELOCITY_KM_H),
            pressure_hpa: seen.pressure_hpa,
            rate_hpa_h: 0.0,
            pressure_off: 0.0,
            pressure: Covariance::first(seen.pressure_noise(), FIRST_RATE_HPA_H),
        }
    }

    /// The state `hours` later, along a great circle, with its velocity turned to the east and
    /// north of the new place (METHODS TRK-5, TRK-7).
    #[must_use]
    pub fn predicted(&self, hours: f64) -> Self {
        let [east, north] = self.velocity_km_h;
        let position = self.position.offset(east * hours, north * hours);
        let like = likeness(hours, LASTING_PLACE_H);
        Self {
            position,
            velocity_km_h: carried(self.position, position, self.velocity_km_h),
            off: carried(self.position, position, self.off.map(|part| like * part)),
            motion: self.motion_ahead(hours),
            pressure_hpa: self.pressure_hpa + hours * self.rate_hpa_h,
            rate_hpa_h: self.rate_hpa_h,
            pressure_off: likeness(hours, LASTING_PRESSURE_H) * self.pressure_off,
            pressure: self.pressure_ahead(hours),
        }
    }

    /// Covariance of each axis of place and velocity `hours` later.
    pub fn motion_ahead(&self, hours: f64) -> Covariance {
        self.motion.predicted(hours, VELOCITY_NOISE_KM2_H3, LASTING_PLACE_H)
    }

    /// Covariance of pressure and rate `hours` later.
    pub fn pressure_ahead(&self, hours: f64) -> Covariance {
        self.pressure.predicted(hours, RATE_NOISE_HPA2_H3, LASTING_PRESSURE_H)
    }

    /// Squared normalised distance of what is seen from this prediction, three degrees of freedom,
    /// and the determinant of its covariance, km4 hPa2.
    pub fn distance(&self, seen: &Sighting) -> (f64, f64) {
        let [east_km, north_km] = self.off_km(seen);
        let square_km = self.motion.surprise(seen.place_noise());
        let square_hpa = self.pressure.surprise(seen.pressure_noise());
        let off_hpa = self.off_hpa(seen);
        let squared =
            (east_km * east_km + north_km * north_km) / square_km + off_hpa * off_hpa / square_hpa;
        (squared, square_km * square_km * square_hpa)
    }

    /// Observed minus expected place, km.
    fn off_km(&self, seen: &Sighting) -> [f64; 2] {
        let lasting = seen.place_noise().lasting;
        let (east_km, north_km) = self.position.offset_to(seen.position);
        [east_km - lasting * self.off[0], north_km - lasting * self.off[1]]
    }

    /// Observed minus expected pressure, hPa.
    fn off_hpa(&self, seen: &Sighting) -> f64 {
        let lasting = seen.pressure_noise().lasting;
        seen.pressure_hpa - self.pressure_hpa - lasting * self.pressure_off
    }

    /// The state after a centre was observed.
    #[must_use]
    pub fn updated(&self, seen: &Sighting) -> Self {
        let motion_noise = seen.place_noise();
        let pressure_noise = seen.pressure_noise();
        let [east_km, north_km] = self.off_km(seen);
        let [k_value, k_rate, k_off] = self.motion.gains(motion_noise);
        let [u, v] = self.velocity_km_h;
        let [p_value, p_rate, p_off] = self.pressure.gains(pressure_noise);
        let off_hpa = self.off_hpa(seen);
        Self {
            position: self.position.offset(k_value * east_km, k_value * north_km),
            velocity_km_h: [u + k_rate * east_km, v + k_rate * north_km],
            off: [self.off[0] + k_off * east_km, self.off[1] + k_off * north_km],
            motion: self.motion.updated(motion_noise),
            pressure_hpa: self.pressure_hpa + p_value * off_hpa,
            rate_hpa_h: self.rate_hpa_h + p_rate * off_hpa,
            pressure_off: self.pressure_off + p_off * off_hpa,
            pressure: self.pressure.updated(pressure_noise),
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
        let (Some(motion), Some(pressure)) = (
            gain(here.motion, ahead.motion, step, LASTING_PLACE_H),
            gain(here.pressure, ahead.pressure, step, LASTING_PRESSURE_H),
        ) else {
            // A covariance without an inverse says that nothing more can be learnt.
            continue;
        };
        let (east_km, north_km) = ahead.position.offset_to(later.position);
        let axis = |place_km: f64, k: usize| {
            motion
                * Vector3::new(
                    place_km,
                    later.velocity_km_h[k] - ahead.velocity_km_h[k],
                    later.off[k] - ahead.off[k],
                )
        };
        let (east, north) = (axis(east_km, 0), axis(north_km, 1));
        let change = pressure
            * Vector3::new(
                later.pressure_hpa - ahead.pressure_hpa,
                later.rate_hpa_h - ahead.rate_hpa_h,
                later.pressure_off - ahead.pressure_off,
            );
        out[at] = State {
            position: here.position.offset(east[0], north[0]),
            velocity_km_h: [here.velocity_km_h[0] + east[1], here.velocity_km_h[1] + north[1]],
            off: [here.off[0] + east[2], here.off[1] + north[2]],
            motion: smoothed_covariance(here.motion, ahead.motion, later.motion, &motion),
            pressure_hpa: here.pressure_hpa + change[0],
            rate_hpa_h: here.rate_hpa_h + change[1],
            pressure_off: here.pressure_off + change[2],
            pressure: smoothed_covariance(here.pressure, ahead.pressure, later.pressure, &pressure),
        };
    }
    out
}

/// The smoother's gain C = P F' P'^-1 for one axis.
fn gain(here: Covariance, ahead: Covariance, step: f64, lasting_h: f64) -> Option<Matrix3<f64>> {
    let like = likeness(step, lasting_h);
    let transition = Matrix3::new(1.0, step, 0.0, 0.0, 1.0, 0.0, 0.0, 0.0, like);
    Some(here.matrix() * transition.transpose() * ahead.matrix().try_inverse()?)
}

/// P + C (Ps' - P') C'.
fn smoothed_covariance(
    here: Covariance,
    ahead: Covariance,
    later: Covariance,
    gain: &Matrix3<f64>,
) -> Covariance {
    let change = gain * (later.matrix() - ahead.matrix()) * gain.transpose();
    Covariance::of_matrix(&(here.matrix() + change))
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

    fn seen(position: Position, position_error_km: f64, pressure_hpa: f64) -> Sighting {
        let doubt = (0.0, 0.0);
        Sighting { position, position_error_km, pressure_hpa, pressure_error_hpa: 1.0, doubt }
    }

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    /// METHODS CHK-168: gain form and information form agree.
    #[test]
    fn one_step_of_the_filter() {
        let before = Covariance::first(Noise::fresh(3600.0), 30.0);
        let ahead = before.predicted(6.0, 20.0, 1.0);
        near(ahead.value, 37_440.0, 1e-6);
        near(ahead.cross, 5760.0, 1e-6);
        near(ahead.rate, 1020.0, 1e-6);
        let [k_value, k_rate, _] = ahead.gains(Noise::fresh(3600.0));
        near(k_value, 0.912_280_7, 1e-7);
        near(k_rate, 0.140_350_9, 1e-7);
        near(240.0 + k_value * 50.0, 285.614_04, 1e-5);
        near(40.0 + k_rate * 50.0, 47.017_54, 1e-5);
        let after = ahead.updated(Noise::fresh(3600.0));
        near(after.value, 3284.2105, 1e-3);
        near(after.cross, 505.2632, 1e-3);
        near(after.rate, 211.5789, 1e-3);
    }

    /// METHODS CHK-169: iteration and the Riccati equation agree (scipy).
    #[test]
    fn the_steady_state_of_the_filter() {
        let mut state = Covariance::first(Noise::fresh(3600.0), 30.0);
        for _ in 0..400 {
            state = state.predicted(6.0, 20.0, 1.0).updated(Noise::fresh(3600.0));
        }
        near(state.value.sqrt(), 52.7259, 0.01);
        near(state.rate.sqrt(), 10.8282, 0.01);
        near(state.predicted(12.0, 20.0, 1.0).value.sqrt(), 196.755, 0.01);
        near(state.predicted(24.0, 20.0, 1.0).value.sqrt(), 421.346, 0.01);
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
            let mut state = State::first(&seen(start, 30.0, 990.0));
            for hour in 1..=24 {
                let observed = at(f64::from(hour));
                state =
                    state.predicted(1.0).updated(&seen(observed, 30.0, 990.0 - f64::from(hour)));
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
        let mut states = vec![State::first(&seen(at(0.0), 40.0, 1000.0))];
        for hour in &hours[1..] {
            let last = states[states.len() - 1];
            let next = last.predicted(1.0).updated(&seen(at(*hour), 40.0, 1000.0 - hour));
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

    /// Errors that last are not averaged away: the stated error of the place is that of the mean of
    /// many runs.
    #[test]
    fn lasting_errors_are_not_averaged_away() {
        let start = Position::clamped(-45.0, 10.0);
        let mut state = State::first(&seen(start, 40.0, 990.0));
        let mut alone = Covariance::first(Noise::fresh(1600.0), FIRST_VELOCITY_KM_H);
        for _ in 0..24 {
            state = state.predicted(1.0).updated(&seen(start, 40.0, 990.0));
            alone = alone.predicted(1.0, VELOCITY_NOISE_KM2_H3, 1.0).updated(Noise::fresh(1600.0));
        }
        let (error_km, fresh_km) = (state.motion.value.sqrt(), alone.value.sqrt());
        assert!(fresh_km < 26.0 && error_km > 30.0 && error_km < 40.0, "{fresh_km} {error_km}");
    }
}
