//! Covariances of pressure and geostrophic wind on the sphere.
//!
//! A function of the chord between two places, positive definite in three dimensions, stays so on
//! the sphere (METHODS ANA-3 d). With C the cosine of the angle between the unit vectors n, the
//! wind is a derivative along a tangent vector w that carries the geostrophic factor, and all
//! covariances follow from three numbers: the correlation and its first and second derivative by C:
//!
//! pressure, pressure: rho; pressure, wind: rho' (n_i . w_j); wind, wind:
//! rho' (w_i . w_j) + rho'' (w_i . n_j)(n_i . w_j).
//!
//! Sources: Gandin (1963); Daley (1991), Atmospheric Data Analysis, chapters 4 and 5; Matern (1960).

use crate::quantity::{EARTH_RADIUS_M, coriolis_per_s};
use crate::sphere::Position;

/// A vector of the space around the sphere.
pub(super) type Vector = [f64; 3];

pub(super) fn dot(a: &Vector, b: &Vector) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

/// The correlation and its first and second derivatives by the cosine C.
#[derive(Clone, Copy, PartialEq, Debug, Default)]
pub(super) struct Radial {
    pub(super) value: f64,
    pub(super) first: f64,
    pub(super) second: f64,
}

/// How much smaller in space and shorter in time the second term of a covariance is: a whole
/// number, so that one exponential serves both.
const SMALLER: f64 = 3.0;

/// The covariance of the departures from the first guess: two Matern functions of order 5/2 of the
/// chord, each times a function of the time between, (1 + t) exp(-t). The first is for weather
/// systems; the second, a third as wide and as long, for what is smaller. Products and sums of
/// positive definite functions are positive definite.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Covariance {
    /// Variances of the two terms, hPa squared.
    variances: [f64; 2],
    /// sqrt(5) a / L: the argument of the first term for a chord of one radius.
    rate: f64,
    /// One over the time scale of the first term, 1/h.
    rate_per_h: f64,
}

impl Covariance {
    /// Standard deviations of the two terms, length scale, km, and time scale, h, of the first.
    pub(super) fn new(sigmas_hpa: [f64; 2], length_km: f64, time_h: f64) -> Self {
        Self {
            variances: sigmas_hpa.map(|sigma| sigma * sigma),
            rate: 5.0_f64.sqrt() * EARTH_RADIUS_M / (length_km * 1000.0),
            rate_per_h: 1.0 / time_h,
        }
    }

    /// For a cosine given as 1 - C, and the time between two reports, h.
    #[inline]
    pub(super) fn between(&self, versine: f64, between_h: f64) -> Radial {
        // Rounding may leave a place a hair's breadth beyond itself.
        let x = self.rate * (if versine > 0.0 { 2.0 * versine } else { 0.0 }).sqrt();
        let t = self.rate_per_h * between_h.abs();
        let e = decay(x + t);
        let (xs, ts) = (SMALLER * x, SMALLER * t);
        let large = self.variances[0] * (1.0 + t) * e;
        let small = self.variances[1] * (1.0 + ts) * (e * e * e);
        let third = self.rate * self.rate / 3.0;
        let thirds = third * (SMALLER * SMALLER);
        Radial {
            value: large * (1.0 + x * (1.0 + x / 3.0)) + small * (1.0 + xs * (1.0 + xs / 3.0)),
            first: large * third * (1.0 + x) + small * thirds * (1.0 + xs),
            second: 3.0 * (large * third * third + small * thirds * thirds),
        }
    }

    /// Value and first derivative of [`Covariance::between`] for many at once; all slices of the
    /// same length. One over the other is left to the compiler's vectors.
    pub(super) fn fill(
        &self,
        versine: &[f64],
        between_h: &[f64],
        value: &mut [f64],
        first: &mut [f64],
    ) {
        for ((value, first), (versine, between)) in
            value.iter_mut().zip(first.iter_mut()).zip(versine.iter().zip(between_h))
        {
            let radial = self.between(*versine, *between);
            *value = radial.value;
            *first = radial.first;
        }
    }

    /// The same with the second derivative.
    pub(super) fn fill_second(
        &self,
        versine: &[f64],
        between_h: &[f64],
        value: &mut [f64],
        first: &mut [f64],
        second: &mut [f64],
    ) {
        let outs = value.iter_mut().zip(first.iter_mut()).zip(second.iter_mut());
        for (((value, first), second), (versine, between)) in
            outs.zip(versine.iter().zip(between_h))
        {
            let radial = self.between(*versine, *between);
            *value = radial.value;
            *first = radial.first;
            *second = radial.second;
        }
    }

    /// Variance of the pressure, hPa squared.
    pub(super) fn variance(&self) -> f64 {
        self.variances[0] + self.variances[1]
    }
}

/// exp(-x) for x >= 0, relative error below 1e-11, nearly 0 from 300 on. Written so that a loop over
/// it can run on whole vectors of the machine.
#[inline]
pub(super) fn decay(x: f64) -> f64 {
    // Adding this leaves the nearest whole number in the lowest bits.
    const SHIFT: f64 = 6_755_399_441_055_744.0;
    let x = if x < 300.0 { x } else { 300.0 };
    let shifted = x * std::f64::consts::LOG2_E + SHIFT;
    let whole = shifted - SHIFT;
    // ln 2 in two parts, so that the remainder is exact.
    let rest = -((x - whole * 0.693_147_180_369_123_8) - whole * 1.908_214_929_270_587_7e-10);
    let mut sum = 1.0 / 362_880.0;
    for factor in [
        1.0 / 40_320.0,
        1.0 / 5040.0,
        1.0 / 720.0,
        1.0 / 120.0,
        1.0 / 24.0,
        1.0 / 6.0,
        0.5,
        1.0,
        1.0,
    ] {
        sum = sum * rest + factor;
    }
    let power = 1023_u64.wrapping_sub(shifted.to_bits()) << 52;
    sum * f64::from_bits(power)
}

/// The directions at a place: up, east and north.
pub(super) fn directions(place: Position) -> [Vector; 3] {
    let (sin_lat, cos_lat) = place.latitude_deg().to_radians().sin_cos();
    let (sin_lon, cos_lon) = place.longitude_deg().to_radians().sin_cos();
    [
        [cos_lat * cos_lon, cos_lat * sin_lon, sin_lat],
        [-sin_lon, cos_lon, 0.0],
        [-sin_lat * cos_lon, -sin_lat * sin_lon, cos_lat],
    ]
}

/// How far a wind is coupled to the pressure: 1 - exp(-(latitude / 15 deg)^2), METHODS ANA-3 e.
pub(super) fn coupling(latitude_deg: f64) -> f64 {
    1.0 - (-(latitude_deg / 15.0).powi(2)).exp()
}

/// The vectors whose derivatives of the pressure in hPa by the angle give the coupled geostrophic
/// wind towards east and north in m/s; null at the equator.
pub(super) fn wind_operators(place: Position, density_kg_m3: f64) -> [Vector; 2] {
    let [_, east, north] = directions(place);
    let coriolis = coriolis_per_s(place.latitude_deg());
    let factor = if coriolis == 0.0 {
        0.0
    } else {
        let coupled = coupling(place.latitude_deg());
        100.0 * coupled / (density_kg_m3 * coriolis * EARTH_RADIUS_M)
    };
    [north.map(|part| -factor * part), east.map(|part| factor * part)]
}

#[cfg(test)]
mod tests;
