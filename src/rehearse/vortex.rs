//! One invented high or low: a round anomaly of pressure that moves, deepens and fills.

use nalgebra::Vector3;

use super::curve::Curve;
use super::scenario::SystemPlan;
use crate::sphere::{EARTH_RADIUS_KM, Position};

/// A high or low over its whole life.
#[derive(Clone, PartialEq, Debug)]
pub(crate) struct Vortex {
    pub(crate) name: String,
    /// Unit vector of the centre, each component over the hours; made a unit again when read.
    place: [Curve; 3],
    /// Pressure of the centre against its surroundings, hPa; negative for a low.
    anomaly_hpa: Curve,
    /// Where its influence ends, km.
    radius_km: Curve,
}

/// A high or low at one moment.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) struct Moment {
    pub(crate) unit: Vector3<f64>,
    pub(crate) anomaly_hpa: f64,
    pub(crate) radius_km: f64,
}

impl Vortex {
    pub(crate) fn new(plan: &SystemPlan) -> Self {
        let component = |axis: usize| {
            let points: Vec<(f64, f64)> = plan
                .points
                .iter()
                .map(|p| {
                    let unit = Position::clamped(p.latitude_deg, p.longitude_deg).unit();
                    (p.hour, unit[axis])
                })
                .collect();
            Curve::smooth(&points)
        };
        let of = |value: fn(&super::scenario::SystemPoint) -> f64| {
            let points: Vec<(f64, f64)> = plan.points.iter().map(|p| (p.hour, value(p))).collect();
            Curve::monotone(&points)
        };
        Self {
            name: plan.name.clone(),
            place: [component(0), component(1), component(2)],
            anomaly_hpa: of(|p| p.anomaly_hpa),
            radius_km: of(|p| p.radius_km),
        }
    }

    /// Its state so many hours after the start of the scenario.
    pub(crate) fn at(&self, hour: f64) -> Moment {
        let vector =
            Vector3::new(self.place[0].at(hour), self.place[1].at(hour), self.place[2].at(hour));
        let norm = vector.norm();
        Moment {
            unit: if norm > 0.0 { vector / norm } else { Vector3::x() },
            anomaly_hpa: self.anomaly_hpa.at(hour),
            radius_km: self.radius_km.at(hour),
        }
    }
}

impl Moment {
    /// Its share of the pressure at a place, hPa: A (1 - (r/R)^2)^4 inside the radius R, nothing
    /// outside; three times differentiable everywhere. Near the centre it is close to a Gaussian
    /// of scale R/2.83. Own choice.
    pub(crate) fn pressure_hpa(&self, unit: &Vector3<f64>) -> f64 {
        let half_chord = (unit - self.unit).norm() / 2.0;
        let distance_km = 2.0 * half_chord.min(1.0).asin() * EARTH_RADIUS_KM;
        let x = distance_km / self.radius_km;
        if x < 1.0 { self.anomaly_hpa * (1.0 - x * x).powi(4) } else { 0.0 }
    }

    /// Where its own centre is (the field's centre may lie aside).
    pub(crate) fn position(&self) -> Position {
        Position::from_vector(self.unit)
    }
}
