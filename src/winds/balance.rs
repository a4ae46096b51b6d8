//! Winds in balance with the pressure: geostrophic, gradient, and the drag balance near the equator.

use super::Wind;
use crate::quantity::{EARTH_ROTATION_RAD_S, coriolis_per_s, wind_from_components};

/// Below this latitude no geostrophic wind is given (METHODS WND-2).
pub const GEOSTROPHIC_LATITUDE_MIN_DEG: f64 = 10.0;
/// Below this latitude no gradient wind is given: isobars say little of direction there.
pub const GRADIENT_LATITUDE_MIN_DEG: f64 = 5.0;
/// Below this latitude a balanced wind is weak evidence (METHODS WND-2).
pub const LOW_LATITUDE_DEG: f64 = 20.0;
/// Sharpest curvature of isobars that is believed, 1/m: one in 100 km (METHODS WND-3, own rule).
pub const CURVATURE_MAX_PER_M: f64 = 1e-5;

/// Density of air, kg/m3, from pressure, hPa, and virtual temperature, K (METHODS WND-1).
pub fn density_kg_m3(pressure_hpa: f64, virtual_temperature_k: f64) -> f64 {
    pressure_hpa * 100.0 / (crate::quantity::GAS_CONSTANT_DRY_AIR * virtual_temperature_k)
}

/// Density where no temperature is known: 288.15 K, half a kelvin less for each degree of latitude
/// poleward of 45 (METHODS WND-1, own rule; up to 10 % off in the cold air behind a front).
pub fn usual_density_kg_m3(pressure_hpa: f64, latitude_deg: f64) -> f64 {
    density_kg_m3(pressure_hpa, 288.15 - 0.5 * (latitude_deg.abs() - 45.0).max(0.0))
}

/// Geostrophic wind towards east and north, m/s, from the pressure gradient, Pa/m.
///
/// u = -(1/(rho f)) dp/dy, v = (1/(rho f)) dp/dx, with the sign of f (Holton 2004, section 2.4.1).
pub fn geostrophic(gradient_pa_m: [f64; 2], latitude_deg: f64, density: f64) -> [f64; 2] {
    let factor = 1.0 / (density * coriolis_per_s(latitude_deg));
    [-factor * gradient_pa_m[1], factor * gradient_pa_m[0]]
}

/// Curvature of the isobars, 1/m, positive where they curve round low pressure, in both
/// hemispheres. `hessian_pa_m2` is east-east, east-north, north-north (METHODS WND-3).
pub fn isobar_curvature_per_m(gradient_pa_m: [f64; 2], hessian_pa_m2: [f64; 3]) -> f64 {
    let [px, py] = gradient_pa_m;
    let [pxx, pxy, pyy] = hessian_pa_m2;
    let slope = px.hypot(py);
    if slope < 1e-9 {
        return 0.0;
    }
    (pxx * py * py - 2.0 * pxy * px * py + pyy * px * px) / slope.powi(3)
}

/// A gradient wind speed.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct GradientSpeed {
    /// Speed, m/s.
    pub speed_m_s: f64,
    /// Whether the gradient was too strong for the anticyclonic curvature and the speed capped.
    pub capped: bool,
}

/// Speed of the gradient wind, m/s, for a straight-line acceleration `|grad p|/rho` in m/s2, the
/// Coriolis parameter (any sign) and the curvature of the path, 1/m, positive cyclonic.
///
/// The regular root of K V^2 + f V - G = 0 in the form 2 G/(f + sqrt(f^2 + 4 K G)), which stays
/// exact as K goes to 0 and finite at the equator (Holton 2004, section 3.2; METHODS WND-3, WND-5).
/// `along_m_s` is the part of the system's velocity along the wind (Blaton's relation, WND-4): it
/// replaces f by f - K C.
///
/// Beyond the anticyclonic limit |dp/dn| = rho f^2 R/4 the speed is twice the geostrophic one, at
/// most f R/2, and marked.
pub fn gradient_speed(
    acceleration_m_s2: f64,
    coriolis_per_s: f64,
    curvature_per_m: f64,
    along_m_s: f64,
) -> GradientSpeed {
    let f = coriolis_per_s.abs();
    let k = curvature_per_m.clamp(-CURVATURE_MAX_PER_M, CURVATURE_MAX_PER_M);
    let g = acceleration_m_s2;
    let turned = f - k * along_m_s;
    let square = turned * turned + 4.0 * k * g;
    let divisor = turned + square.max(0.0).sqrt();
    if square < 0.0 || divisor <= 0.0 {
        let geostrophic = g / f.max(1e-9);
        let limit = if k < 0.0 { f / (-2.0 * k) } else { f64::INFINITY };
        return GradientSpeed { speed_m_s: (2.0 * geostrophic).min(limit), capped: true };
    }
    GradientSpeed { speed_m_s: 2.0 * g / divisor, capped: false }
}

/// The other root of the gradient wind equation: the anomalous high (K < 0) or, negative, the
/// anomalous low. `None` where the discriminant is negative. Not used for the watch.
pub fn anomalous_root(acceleration: f64, coriolis_per_s: f64, curvature_per_m: f64) -> Option<f64> {
    let f = coriolis_per_s.abs();
    let square = f * f + 4.0 * curvature_per_m * acceleration;
    (square >= 0.0 && curvature_per_m != 0.0)
        .then(|| (-f - square.sqrt()) / (2.0 * curvature_per_m))
}

/// Wind in balance with pressure gradient, Coriolis force and a drag proportional to the wind,
/// towards east and north, m/s: regular at the equator (Guldberg and Mohn 1876; METHODS WND-5).
pub fn linear_drag(
    gradient_pa_m: [f64; 2],
    coriolis_per_s: f64,
    density: f64,
    drag_per_s: f64,
) -> [f64; 2] {
    let [px, py] = gradient_pa_m;
    let (f, r) = (coriolis_per_s, drag_per_s);
    let factor = 1.0 / (density * (f * f + r * r));
    [-factor * (f * py + r * px), factor * (f * px - r * py)]
}

/// Weight of the balanced wind, 0 at the equator to 1: 1 - exp(-(latitude/15)^2) (METHODS ANA-3 e).
pub fn balance_weight(latitude_deg: f64) -> f64 {
    1.0 - (-(latitude_deg / 15.0).powi(2)).exp()
}

/// Coriolis parameter in the limit of a latitude that is never zero: for scales only.
pub fn coriolis_floor_per_s(latitude_deg: f64) -> f64 {
    let least = 2.0 * EARTH_ROTATION_RAD_S * GRADIENT_LATITUDE_MIN_DEG.to_radians().sin();
    coriolis_per_s(latitude_deg).abs().max(least)
}

/// A wind from its components towards east and north.
pub fn wind(components: [f64; 2]) -> Option<Wind> {
    let [u, v] = components;
    if !(u.is_finite() && v.is_finite()) {
        return None;
    }
    let (from_deg, speed_m_s) = wind_from_components(u, v);
    Some(Wind { from_deg, speed_m_s })
}

#[cfg(test)]
mod tests;
