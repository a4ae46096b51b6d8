//! Conformal maps of the sphere: polar stereographic, Lambert conformal conic, Mercator.
//!
//! Source for all three: Snyder (1987), USGS Professional Paper 1395; METHODS MAP-1 to MAP-4.
//! On a conformal map a small distance is the same stretch in every direction: the scale factor.

use serde::{Deserialize, Serialize};

use crate::quantity::{EARTH_RADIUS_M, wrap_180_deg};
use crate::sphere::Position;

/// A conformal map of the sphere onto a plane, in metres.
#[derive(Clone, Copy, PartialEq, Debug, Serialize, Deserialize)]
pub struct Projection {
    kind: Kind,
    /// The meridian that points straight up, degrees.
    central_longitude_deg: f64,
    radius_m: f64,
    /// Cone constant n: the angle between meridians for each degree of longitude.
    cone: f64,
    /// F for Lambert, cos(true latitude) for Mercator, 1 + sin(true latitude) for stereographic.
    factor: f64,
    /// Distance of the origin from the apex, in radii (Lambert only).
    rho0: f64,
}

/// Which of the three maps.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub enum Kind {
    /// Polar stereographic: for the caps.
    PolarStereographic,
    /// Lambert conformal conic: for the middle latitudes.
    Lambert,
    /// Mercator: for the tropics.
    Mercator,
}

impl Projection {
    /// Polar stereographic, true at `true_latitude_deg`, whose sign chooses the pole (MAP-1).
    pub fn polar_stereographic(true_latitude_deg: f64, central_longitude_deg: f64) -> Self {
        Self {
            kind: Kind::PolarStereographic,
            central_longitude_deg,
            radius_m: EARTH_RADIUS_M,
            cone: if true_latitude_deg >= 0.0 { 1.0 } else { -1.0 },
            factor: 1.0 + true_latitude_deg.abs().to_radians().sin(),
            rho0: 0.0,
        }
    }

    /// Lambert conformal conic with two standard parallels of the same hemisphere (MAP-2).
    /// Equal parallels give the one-parallel form.
    pub fn lambert(
        parallel_1_deg: f64,
        parallel_2_deg: f64,
        origin_latitude_deg: f64,
        central_longitude_deg: f64,
    ) -> Self {
        let (p1, p2) = (parallel_1_deg.to_radians(), parallel_2_deg.to_radians());
        let half = |p: f64| (std::f64::consts::FRAC_PI_4 + p / 2.0).tan();
        let cone = if (p1 - p2).abs() < 1e-9 {
            p1.sin()
        } else {
            (p1.cos() / p2.cos()).ln() / (half(p2) / half(p1)).ln()
        };
        let factor = p1.cos() * half(p1).powf(cone) / cone;
        let rho0 = factor / half(origin_latitude_deg.to_radians()).powf(cone);
        let kind = Kind::Lambert;
        Self { kind, central_longitude_deg, radius_m: EARTH_RADIUS_M, cone, factor, rho0 }
    }

    /// Mercator, true at `true_latitude_deg` (MAP-3).
    pub fn mercator(true_latitude_deg: f64, central_longitude_deg: f64) -> Self {
        Self {
            kind: Kind::Mercator,
            central_longitude_deg,
            radius_m: EARTH_RADIUS_M,
            cone: 0.0,
            factor: true_latitude_deg.to_radians().cos(),
            rho0: 0.0,
        }
    }

    /// The map that suits a region (MAP-5): stereographic beyond 65 degrees or where the region
    /// holds a pole, Mercator within 25 degrees or across the equator, Lambert between.
    pub fn fitted(south_deg: f64, north_deg: f64, central_longitude_deg: f64) -> Self {
        let centre_deg = f64::midpoint(south_deg, north_deg);
        let reach_deg = south_deg.abs().max(north_deg.abs());
        if centre_deg.abs() > 65.0 || reach_deg > 85.0 {
            return Self::polar_stereographic(60.0 * centre_deg.signum(), central_longitude_deg);
        }
        if centre_deg.abs() < 25.0 || south_deg.min(north_deg) * south_deg.max(north_deg) < -100.0 {
            return Self::mercator(centre_deg.abs().min(45.0), central_longitude_deg);
        }
        let third = (north_deg - south_deg).abs() / 3.0;
        let sign = centre_deg.signum();
        let low = (centre_deg.abs() - third).max(5.0);
        let high = (centre_deg.abs() + third).min(85.0);
        Self::lambert(sign * low, sign * high, centre_deg, central_longitude_deg)
    }

    /// The same map of a sphere of another radius, m.
    #[must_use]
    pub fn with_radius_m(mut self, radius_m: f64) -> Self {
        self.radius_m = radius_m;
        self
    }

    /// Which map this is.
    pub const fn kind(&self) -> Kind {
        self.kind
    }

    /// The meridian that points straight up, degrees.
    pub const fn central_longitude_deg(&self) -> f64 {
        self.central_longitude_deg
    }

    /// Map coordinates, m: x to the right, y up. Points that the map cannot show (the far pole)
    /// come out very large but finite.
    pub fn forward(&self, place: Position) -> (f64, f64) {
        let d_lon = wrap_180_deg(place.longitude_deg() - self.central_longitude_deg).to_radians();
        let phi = place.latitude_deg().to_radians();
        match self.kind {
            Kind::PolarStereographic => {
                let s = self.cone;
                let rho = self.factor * phi.cos() / (1.0 + s * phi.sin()).max(1e-9);
                (self.radius_m * rho * d_lon.sin(), -s * self.radius_m * rho * d_lon.cos())
            }
            Kind::Lambert => {
                let rho = (self.factor / half_tangent(phi).powf(self.cone)).clamp(-1e3, 1e3);
                let theta = self.cone * d_lon;
                (self.radius_m * rho * theta.sin(), self.radius_m * (self.rho0 - rho * theta.cos()))
            }
            Kind::Mercator => {
                let scale_m = self.radius_m * self.factor;
                (scale_m * d_lon, scale_m * half_tangent(phi).ln())
            }
        }
    }

    /// The place at map coordinates, m.
    pub fn inverse(&self, x_m: f64, y_m: f64) -> Position {
        let (x, y) = (x_m / self.radius_m, y_m / self.radius_m);
        let (phi, d_lon) = match self.kind {
            Kind::PolarStereographic => {
                let s = self.cone;
                let rho = x.hypot(y);
                let colatitude = 2.0 * (rho / self.factor).atan();
                (s * (std::f64::consts::FRAC_PI_2 - colatitude), x.atan2(-s * y))
            }
            Kind::Lambert => {
                let s = self.cone.signum();
                let rho = s * x.hypot(self.rho0 - y);
                let theta = (s * x).atan2(s * (self.rho0 - y));
                let t = (self.factor / rho).powf(1.0 / self.cone);
                (2.0 * t.atan() - std::f64::consts::FRAC_PI_2, theta / self.cone)
            }
            Kind::Mercator => (
                2.0 * (y / self.factor).exp().atan() - std::f64::consts::FRAC_PI_2,
                x / self.factor,
            ),
        };
        Position::clamped(phi.to_degrees(), self.central_longitude_deg + d_lon.to_degrees())
    }

    /// Scale factor k: map distance over true distance.
    pub fn scale(&self, latitude_deg: f64) -> f64 {
        let phi = latitude_deg.to_radians();
        match self.kind {
            Kind::PolarStereographic => self.factor / (1.0 + self.cone * phi.sin()).max(1e-9),
            Kind::Lambert => {
                let rho = self.factor / half_tangent(phi).powf(self.cone);
                self.cone * rho / phi.cos().max(1e-9)
            }
            Kind::Mercator => self.factor / phi.cos().max(1e-9),
        }
    }

    /// Angle from true north to the map's up, radians, positive where north leans to the left of
    /// up: the g of MAP-4.
    pub fn convergence_rad(&self, longitude_deg: f64) -> f64 {
        self.cone * wrap_180_deg(longitude_deg - self.central_longitude_deg).to_radians()
    }

    /// Components along the map's x and y from components towards east and north (MAP-4).
    pub fn to_map_components(&self, longitude_deg: f64, east: f64, north: f64) -> (f64, f64) {
        let (sine, cosine) = self.convergence_rad(longitude_deg).sin_cos();
        (east * cosine - north * sine, east * sine + north * cosine)
    }

    /// Components towards east and north from components along the map's x and y (MAP-4).
    pub fn to_earth_components(&self, longitude_deg: f64, x: f64, y: f64) -> (f64, f64) {
        let (sine, cosine) = self.convergence_rad(longitude_deg).sin_cos();
        (x * cosine + y * sine, y * cosine - x * sine)
    }
}

/// tan(45 + latitude/2), kept off the poles.
fn half_tangent(phi: f64) -> f64 {
    let limit = std::f64::consts::FRAC_PI_2 - 1e-9;
    (std::f64::consts::FRAC_PI_4 + phi.clamp(-limit, limit) / 2.0).tan()
}

#[cfg(test)]
mod tests;
