//! What the Picture says at a point: the read-out under a cursor and in a table of points.

use super::Picture;
use crate::instant::Hour;
use crate::sphere::Position;
use crate::systems::System;
use crate::winds::PointWinds;
use crate::winds::fields::{MovingCentre, at};

/// Above this ratio of the analysis error to that of the first guess nothing is stated (ANA-5).
const ERROR_RATIO_MAX: f64 = 0.9;

/// Values at a point; `None` where unknown or not to be trusted.
#[derive(Clone, Copy, PartialEq, Debug, Default)]
pub struct PointValues {
    /// Sea-level pressure, hPa.
    pub pressure_hpa: Option<f64>,
    /// Its standard error, hPa.
    pub pressure_error_hpa: Option<f64>,
    /// Error over that of the first guess, 0 to 1.
    pub error_ratio: Option<f64>,
    /// Change over 3 h, hPa.
    pub change_3h_hpa: Option<f64>,
    /// Geostrophic, gradient and expected surface wind.
    pub winds: PointWinds,
    /// Divergence of the expected surface wind, 1/s.
    pub divergence_per_s: Option<f64>,
}

impl Picture {
    /// What the newest analysis says at a place.
    pub fn at_point(&self, place: Position) -> PointValues {
        self.at_point_of(self.valid, place)
    }

    /// What an hour's analysis says at a place; everything is `None` off the grid, for an hour
    /// that was not analysed, and where the reports say next to nothing.
    pub fn at_point_of(&self, hour: Hour, place: Position) -> PointValues {
        let Some(analysis) = self.hour(hour) else { return PointValues::default() };
        let grid = &analysis.grid;
        let error_ratio = grid.sample(&analysis.error_ratio, place);
        let Some(point) = analysis.at(place).filter(|_| error_ratio <= Some(ERROR_RATIO_MAX))
        else {
            return PointValues { error_ratio, ..PointValues::default() };
        };
        let movers: Vec<MovingCentre> = self
            .systems
            .iter()
            .chain(&self.ended)
            .filter_map(|system| mover(system, hour))
            .collect();
        let field = self.wind_field(hour);
        PointValues {
            pressure_hpa: Some(point.pressure_hpa),
            pressure_error_hpa: Some(point.pressure_error_hpa),
            error_ratio,
            change_3h_hpa: field.and_then(|field| grid.sample(&field.change_3h_hpa, place)),
            winds: at(analysis, place, &self.law, &movers),
            divergence_per_s: field
                .and_then(|field| grid.sample(&field.divergence_friction_per_s, place)),
        }
    }
}

/// Where a system was at an hour and its velocity then, from its track.
pub(super) fn mover(system: &System, hour: Hour) -> Option<MovingCentre> {
    let at = system.track.iter().position(|point| point.hour == hour)?;
    let before = system.track.get(at.saturating_sub(1))?;
    let after = system.track.get(at + 1).or_else(|| system.track.get(at))?;
    let elapsed_s = after.hour.instant().seconds_since(before.hour.instant()) as f64;
    let position = system.track.get(at)?.position;
    if elapsed_s <= 0.0 {
        return Some(MovingCentre { position, velocity_m_s: [0.0, 0.0] });
    }
    let (east_km, north_km) = before.position.offset_to(after.position);
    let velocity_m_s = [east_km, north_km].map(|part| part * 1000.0 / elapsed_s);
    Some(MovingCentre { position, velocity_m_s })
}
