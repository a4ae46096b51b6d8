//! Places on the sphere: distance, bearing, destination, rhumb lines, unit vectors.

use nalgebra::Vector3;
use serde::{Deserialize, Serialize};

use crate::quantity::{EARTH_RADIUS_M, wrap_180_deg, wrap_360_deg};

/// Radius of the earth, km.
pub const EARTH_RADIUS_KM: f64 = EARTH_RADIUS_M / 1000.0;

/// A place: latitude in -90..=90 and longitude in (-180, 180], both finite.
#[derive(Clone, Copy, PartialEq, PartialOrd, Debug, Serialize, Deserialize)]
pub struct Position {
    latitude_deg: f64,
    longitude_deg: f64,
}

impl Position {
    /// A place, or `None` where the latitude is outside -90..=90 or a value is not finite.
    /// The longitude may be anything finite within two turns and is wrapped.
    pub fn new(latitude_deg: f64, longitude_deg: f64) -> Option<Self> {
        (latitude_deg.abs() <= 90.0 && longitude_deg.abs() <= 720.0)
            .then(|| Self { latitude_deg, longitude_deg: wrap_180_deg(longitude_deg) })
    }

    /// A place from values that are known to be finite; the latitude is clamped to the poles.
    pub fn clamped(latitude_deg: f64, longitude_deg: f64) -> Self {
        let latitude_deg =
            if latitude_deg.is_finite() { latitude_deg.clamp(-90.0, 90.0) } else { 0.0 };
        let longitude_deg =
            if longitude_deg.is_finite() { wrap_180_deg(longitude_deg) } else { 0.0 };
        Self { latitude_deg, longitude_deg }
    }

    /// Latitude, degrees, north positive.
    pub const fn latitude_deg(self) -> f64 {
        self.latitude_deg
    }

    /// Longitude, degrees in (-180, 180], east positive.
    pub const fn longitude_deg(self) -> f64 {
        self.longitude_deg
    }

    /// The unit vector from the centre of the earth.
    pub fn unit(self) -> Vector3<f64> {
        let (sin_lat, cos_lat) = self.latitude_deg.to_radians().sin_cos();
        let (sin_lon, cos_lon) = self.longitude_deg.to_radians().sin_cos();
        Vector3::new(cos_lat * cos_lon, cos_lat * sin_lon, sin_lat)
    }

    /// The place under a vector from the centre of the earth; the null vector gives 0, 0.
    pub fn from_vector(vector: Vector3<f64>) -> Self {
        let latitude = vector.z.atan2(vector.x.hypot(vector.y));
        Self::clamped(latitude.to_degrees(), vector.y.atan2(vector.x).to_degrees())
    }

    /// Great-circle distance, km (haversine, METHODS TRK-7).
    pub fn distance_km(self, other: Self) -> f64 {
        let (p1, p2) = (self.latitude_deg.to_radians(), other.latitude_deg.to_radians());
        let half_lat = ((p2 - p1) / 2.0).sin();
        let half_lon = ((other.longitude_deg - self.longitude_deg).to_radians() / 2.0).sin();
        let h = half_lat * half_lat + p1.cos() * p2.cos() * half_lon * half_lon;
        2.0 * EARTH_RADIUS_KM * h.sqrt().min(1.0).asin()
    }

    /// Initial great-circle bearing towards `other`, degrees in [0, 360) (METHODS TRK-7).
    pub fn bearing_deg(self, other: Self) -> f64 {
        let (p1, p2) = (self.latitude_deg.to_radians(), other.latitude_deg.to_radians());
        let d = (other.longitude_deg - self.longitude_deg).to_radians();
        let y = d.sin() * p2.cos();
        let x = p1.cos() * p2.sin() - p1.sin() * p2.cos() * d.cos();
        wrap_360_deg(y.atan2(x).to_degrees())
    }

    /// The place reached along a great circle (METHODS TRK-7).
    #[must_use]
    pub fn destination(self, bearing_deg: f64, distance_km: f64) -> Self {
        let p1 = self.latitude_deg.to_radians();
        let theta = bearing_deg.to_radians();
        let s = distance_km / EARTH_RADIUS_KM;
        let sin_p2 = (p1.sin() * s.cos() + p1.cos() * s.sin() * theta.cos()).clamp(-1.0, 1.0);
        let d = (theta.sin() * s.sin() * p1.cos()).atan2(s.cos() - p1.sin() * sin_p2);
        Self::clamped(sin_p2.asin().to_degrees(), self.longitude_deg + d.to_degrees())
    }

    /// The place `east_km` and `north_km` from here, along the great circle they point to.
    #[must_use]
    pub fn offset(self, east_km: f64, north_km: f64) -> Self {
        self.destination(east_km.atan2(north_km).to_degrees(), east_km.hypot(north_km))
    }

    /// East and north components, km, of the great circle from here to `other`.
    pub fn offset_to(self, other: Self) -> (f64, f64) {
        let distance_km = self.distance_km(other);
        let (sine, cosine) = self.bearing_deg(other).to_radians().sin_cos();
        (distance_km * sine, distance_km * cosine)
    }

    /// Distance, km, and constant course, degrees, of the rhumb line to `other` (METHODS TRK-7).
    pub fn rhumb_to(self, other: Self) -> (f64, f64) {
        let (p1, p2) = (self.latitude_deg.to_radians(), other.latitude_deg.to_radians());
        let d_lon = wrap_180_deg(other.longitude_deg - self.longitude_deg).to_radians();
        let psi = stretched(p2) - stretched(p1);
        let q = if psi.abs() > 1e-12 { (p2 - p1) / psi } else { p1.cos() };
        let distance_km = EARTH_RADIUS_KM * (p2 - p1).hypot(q * d_lon);
        (distance_km, wrap_360_deg(d_lon.atan2(psi).to_degrees()))
    }

    /// The place reached on a constant course (METHODS TRK-7); it stops at a pole.
    #[must_use]
    pub fn rhumb_destination(self, course_deg: f64, distance_km: f64) -> Self {
        let p1 = self.latitude_deg.to_radians();
        let s = distance_km / EARTH_RADIUS_KM;
        let (sine, cosine) = course_deg.to_radians().sin_cos();
        let p2 = (p1 + s * cosine).clamp(-std::f64::consts::FRAC_PI_2, std::f64::consts::FRAC_PI_2);
        let psi = stretched(p2) - stretched(p1);
        let q = if psi.abs() > 1e-12 { (p2 - p1) / psi } else { p1.cos() };
        let d_lon = if q.abs() > 1e-12 { s * sine / q } else { 0.0 };
        Self::clamped(p2.to_degrees(), self.longitude_deg + d_lon.to_degrees())
    }
}

/// Mercator's stretched latitude, kept finite next to the poles.
fn stretched(latitude: f64) -> f64 {
    let limit = std::f64::consts::FRAC_PI_2 - 1e-9;
    (std::f64::consts::FRAC_PI_4 + latitude.clamp(-limit, limit) / 2.0).tan().ln()
}

#[cfg(test)]
mod tests;
