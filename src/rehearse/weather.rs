//! The invented atmosphere: sea-level pressure is a sum of moving round systems on a zonal
//! background; wind, temperature and humidity follow from it.

use nalgebra::Vector3;

use super::scenario::{Background, Climate, Scenario};
use super::vortex::{Moment, Vortex};
use crate::instant::Instant;
use crate::quantity::{GAS_CONSTANT_DRY_AIR, ZERO_CELSIUS_K, coriolis_per_s};
use crate::sphere::Position;

mod friction;

/// Half the distance over which slopes of the pressure are taken, km: the systems are hundreds of
/// kilometres wide, so the error of the slope is below 0.1 per cent.
const STEP_KM: f64 = 10.0;
/// Strongest curvature of an isobar that the wind feels, 1/m (METHODS WND-3).
const CURVATURE_MAX_PER_M: f64 = 1.0 / 100_000.0;
/// Latitude below which the wind stops growing, degrees (METHODS WND-2: not valid below 10).
const WIND_LATITUDE_MIN_DEG: f64 = 15.0;

/// What lies under the wind.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Surface {
    /// Water.
    Sea,
    /// Farm land, roughness length 0.1 m.
    Land,
}

/// The atmosphere of a scenario.
#[derive(Clone, PartialEq, Debug)]
pub(crate) struct Weather {
    start: Instant,
    background: Background,
    climate: Climate,
    tide: bool,
    pub(crate) vortices: Vec<Vortex>,
}

/// The atmosphere at one moment.
#[derive(Clone, PartialEq, Debug)]
pub(crate) struct Sky<'a> {
    weather: &'a Weather,
    time: Instant,
    pub(crate) moments: Vec<Moment>,
}

/// Slopes of the pressure at a place, Pa/m and Pa/m2, x east and y north.
#[derive(Clone, Copy, PartialEq, Debug)]
struct Slopes {
    px: f64,
    py: f64,
    pxx: f64,
    pxy: f64,
    pyy: f64,
}

impl Weather {
    pub(crate) fn new(scenario: &Scenario, start: Instant) -> Self {
        Self {
            start,
            background: scenario.background,
            climate: scenario.climate,
            tide: scenario.tide,
            vortices: scenario.systems.iter().map(Vortex::new).collect(),
        }
    }

    pub(crate) fn at(&self, time: Instant) -> Sky<'_> {
        let hour = time.hours_since(self.start);
        Sky { weather: self, time, moments: self.vortices.iter().map(|v| v.at(hour)).collect() }
    }
}

impl Background {
    /// Pressure at a latitude, hPa: a quintic step, twice differentiable.
    fn pressure_hpa(&self, latitude_deg: f64) -> f64 {
        let width = self.to_latitude_deg - self.from_latitude_deg;
        let x = ((latitude_deg.abs() - self.from_latitude_deg) / width).clamp(0.0, 1.0);
        let step = x * x * x * (x * (6.0 * x - 15.0) + 10.0);
        self.equatorward_hpa + (self.poleward_hpa - self.equatorward_hpa) * step
    }
}

/// The half-daily tide of the atmosphere, hPa (Haurwitz 1956; METHODS TEN-3, constants from memory
/// there).
fn tide_hpa(position: Position, time: Instant) -> f64 {
    let latitude = position.latitude_deg().to_radians();
    let universal_deg = 15.0 * time.hour_of_day();
    let local_deg = universal_deg + position.longitude_deg();
    let p2 = (3.0 * latitude.sin().powi(2) - 1.0) / 2.0;
    1.16 * latitude.cos().powi(3) * (2.0 * local_deg + 158.0).to_radians().sin()
        + 0.085 * p2 * (2.0 * universal_deg + 118.0).to_radians().sin()
}

impl Sky<'_> {
    /// Sea-level pressure, hPa.
    pub(crate) fn pressure_hpa(&self, position: Position) -> f64 {
        let unit: Vector3<f64> = position.unit();
        let systems: f64 = self.moments.iter().map(|m| m.pressure_hpa(&unit)).sum();
        let tide = if self.weather.tide { tide_hpa(position, self.time) } else { 0.0 };
        self.weather.background.pressure_hpa(position.latitude_deg()) + systems + tide
    }

    fn slopes(&self, position: Position) -> Slopes {
        let p = |east: f64, north: f64| {
            100.0 * self.pressure_hpa(position.offset(east * STEP_KM, north * STEP_KM))
        };
        let h = STEP_KM * 1000.0;
        let middle = p(0.0, 0.0);
        let (e, w, n, s) = (p(1.0, 0.0), p(-1.0, 0.0), p(0.0, 1.0), p(0.0, -1.0));
        let corners = p(1.0, 1.0) - p(1.0, -1.0) - p(-1.0, 1.0) + p(-1.0, -1.0);
        Slopes {
            px: (e - w) / (2.0 * h),
            py: (n - s) / (2.0 * h),
            pxx: (e - 2.0 * middle + w) / (h * h),
            pyy: (n - 2.0 * middle + s) / (h * h),
            pxy: corners / (4.0 * h * h),
        }
    }

    /// Gradient of the pressure towards east and north, hPa/km, and its second derivatives
    /// (east-east, east-north, north-north), hPa/km2.
    pub(crate) fn derivatives_hpa_km(&self, position: Position) -> ([f64; 2], [f64; 3]) {
        let s = self.slopes(position);
        ([s.px * 10.0, s.py * 10.0], [s.pxx * 1e4, s.pxy * 1e4, s.pyy * 1e4])
    }

    /// The wind above the friction, towards east and north, m/s: gradient wind for the curvature of
    /// the isobars (METHODS WND-3, the motion of the systems left out).
    pub(crate) fn gradient_wind_m_s(&self, position: Position) -> (f64, f64) {
        let s = self.slopes(position);
        let slope = s.px.hypot(s.py);
        if slope < 1e-9 {
            return (0.0, 0.0);
        }
        let latitude_deg = position.latitude_deg();
        let south = latitude_deg < 0.0;
        let least = coriolis_per_s(WIND_LATITUDE_MIN_DEG);
        let f = coriolis_per_s(latitude_deg).abs().max(least);
        let temperature_k = self.sea_air_c(latitude_deg) + ZERO_CELSIUS_K;
        let density = 100.0 * self.pressure_hpa(position) / (GAS_CONSTANT_DRY_AIR * temperature_k);
        let geostrophic = slope / (density * f);
        // Positive where the pressure is lower on the concave side: cyclonic in both hemispheres.
        let curvature =
            (s.pxx * s.py * s.py - 2.0 * s.pxy * s.px * s.py + s.pyy * s.px * s.px) / slope.powi(3);
        let curvature = curvature.clamp(-CURVATURE_MAX_PER_M, CURVATURE_MAX_PER_M);
        // K V^2 + f V - f Vg = 0; in a high the slope is capped at the largest with a solution.
        let root = (1.0 + 4.0 * curvature * geostrophic / f).max(0.0).sqrt();
        let speed = if curvature < 0.0 && root == 0.0 {
            f / (2.0 * -curvature)
        } else {
            2.0 * geostrophic / (1.0 + root)
        };
        // Along the isobar, low pressure to the left in the north and to the right in the south.
        let (u, v) = (-s.py / slope, s.px / slope);
        if south { (-u * speed, -v * speed) } else { (u * speed, v * speed) }
    }

    /// Wind at 10 m towards east and north, m/s: the gradient wind slowed and turned towards low
    /// pressure by the drag of the surface (METHODS WND-7).
    pub(crate) fn wind_m_s(&self, position: Position, surface: Surface) -> (f64, f64) {
        let (u, v) = self.gradient_wind_m_s(position);
        let above = u.hypot(v);
        if above < 0.05 {
            return (0.0, 0.0);
        }
        let latitude_deg = position.latitude_deg();
        let f = coriolis_per_s(latitude_deg).abs().max(coriolis_per_s(WIND_LATITUDE_MIN_DEG));
        let (ratio, inflow) = friction::ratio_and_angle(above, f, surface);
        let turn = if latitude_deg < 0.0 { -inflow } else { inflow };
        let (sine, cosine) = turn.sin_cos();
        (ratio * (u * cosine - v * sine), ratio * (u * sine + v * cosine))
    }

    fn sea_air_c(&self, latitude_deg: f64) -> f64 {
        let climate = &self.weather.climate;
        climate.air_at_45_c + climate.air_per_degree_c * (latitude_deg.abs() - 45.0)
    }

    /// Sea-surface temperature, degrees Celsius.
    pub(crate) fn sea_temperature_c(&self, position: Position) -> f64 {
        let climate = &self.weather.climate;
        let poleward_deg = position.latitude_deg().abs() - 45.0;
        (climate.sea_at_45_c + climate.sea_per_degree_c * poleward_deg).max(-1.5)
    }

    /// Air temperature and dew point at a height, degrees Celsius. Air from the Equator is warm and
    /// moist, air from the Pole cold and dry; land follows the sun. Own choice.
    pub(crate) fn air_and_dew_point_c(
        &self,
        position: Position,
        height_m: f64,
        surface: Surface,
    ) -> (f64, f64) {
        let (_, v) = self.gradient_wind_m_s(position);
        let poleward = if position.latitude_deg() < 0.0 { -v } else { v };
        let brought = (0.35 * poleward).clamp(-7.0, 7.0);
        let climate = &self.weather.climate;
        let (daily, offset) = match surface {
            Surface::Sea => (0.0, 0.0),
            Surface::Land => {
                let local_h = self.time.hour_of_day() + position.longitude_deg() / 15.0;
                let phase = std::f64::consts::TAU * (local_h - 14.0) / 24.0;
                (climate.daily_swing_land_c * phase.cos(), climate.land_offset_c)
            }
        };
        let at_sea_level = self.sea_air_c(position.latitude_deg()) + brought + daily + offset;
        let air = at_sea_level - 0.0065 * height_m;
        let spread = (3.2 - 0.3 * brought + 0.4 * daily).clamp(0.3, 9.0);
        (air, air - spread)
    }
}

#[cfg(test)]
mod tests;
