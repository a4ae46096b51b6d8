//! Coastlines: unpacked once from embedded data, in short pieces that can be passed over quickly.

use std::io::Read;
use std::sync::OnceLock;

use nalgebra::Vector3;

use super::raster::{Layer, Pattern, Pen, Raster};
use crate::desk::view::View;
use crate::quantity::wrap_180_deg;
use crate::sphere::{EARTH_RADIUS_KM, Position};

/// Points in a piece.
const PIECE: usize = 48;
/// Metres for each dot from which the coarser lines are enough.
const BROAD_M_PER_DOT: f64 = 14_000.0;
/// More than the embedded lines take when unpacked; data beyond it would not be ours.
const UNPACKED_MAX: u64 = 8 * 1024 * 1024;

/// A short piece of coastline and the circle around it.
#[derive(Debug)]
struct Piece {
    points: Vec<Position>,
    middle: Vector3<f64>,
    /// Radius of the circle, radians.
    radius: f64,
}

static BROAD: OnceLock<Vec<Piece>> = OnceLock::new();
static CLOSE: OnceLock<Vec<Piece>> = OnceLock::new();

fn pieces(broad: bool) -> &'static [Piece] {
    if broad {
        BROAD.get_or_init(|| unpack(include_bytes!("data/coast110.gz")))
    } else {
        CLOSE.get_or_init(|| unpack(include_bytes!("data/coast50.gz")))
    }
}

/// Draws the coastlines of a view.
pub(super) fn draw(view: &View, raster: &mut Raster) {
    let broad = view.m_per_dot > BROAD_M_PER_DOT;
    let middle = view.middle();
    let (across, down) = (f64::from(view.columns) * 2.0, f64::from(view.rows) * 4.0);
    // The farthest of the corners and edges that has a place; on the far side of a polar map the
    // window may hold more than it looks, so a broad one is not culled at all.
    let reach_km = [(0.0, 0.0), (1.0, 0.0), (0.0, 1.0), (1.0, 1.0), (0.5, 0.0), (0.5, 1.0)]
        .into_iter()
        .map(|(x, y)| middle.distance_km(view.place(x * across, y * down)))
        .fold(0.0, f64::max);
    let reach =
        if reach_km > 6000.0 { std::f64::consts::PI } else { reach_km * 1.1 / EARTH_RADIUS_KM };
    let unit = middle.unit();
    let centre_deg = view.projection.central_longitude_deg();
    for piece in pieces(broad) {
        if piece.middle.dot(&unit).clamp(-1.0, 1.0).acos() > reach + piece.radius {
            continue;
        }
        let mut pen = Pen::new(Layer::Coast, Pattern::Stipple);
        let mut before: Option<((f64, f64), f64)> = None;
        for place in &piece.points {
            let seam = wrap_180_deg(place.longitude_deg() - centre_deg);
            let dot = view.dot_of(*place);
            if let Some((from, from_seam)) = before {
                // A piece that crosses the map's seam would run right across it.
                if (seam - from_seam).abs() < 180.0 {
                    raster.line(&mut pen, from, dot);
                }
            }
            before = Some((dot, seam));
        }
    }
}

fn unpack(packed: &[u8]) -> Vec<Piece> {
    let mut bytes = Vec::new();
    let mut reader = flate2::read::GzDecoder::new(packed).take(UNPACKED_MAX);
    if reader.read_to_end(&mut bytes).is_err() {
        return Vec::new();
    }
    let mut numbers = Numbers { bytes: &bytes };
    let mut out = Vec::new();
    while let Some(count) = numbers.unsigned() {
        let (mut longitude, mut latitude) = (0_i64, 0_i64);
        let mut points = Vec::new();
        for _ in 0..count {
            let (Some(east), Some(north)) = (numbers.signed(), numbers.signed()) else { break };
            longitude += east;
            latitude += north;
            points.push(Position::clamped(latitude as f64 / 100.0, longitude as f64 / 100.0));
        }
        let mut start = 0;
        while start + 1 < points.len() {
            let end = (start + PIECE).min(points.len());
            out.push(piece(&points[start..end]));
            // The next piece begins where this one ends.
            start = end - 1;
        }
    }
    out
}

fn piece(points: &[Position]) -> Piece {
    let sum: Vector3<f64> = points.iter().map(|place| place.unit()).sum();
    let middle = if sum.norm() > 1e-9 { sum.normalize() } else { Vector3::x() };
    let radius = points
        .iter()
        .map(|place| place.unit().dot(&middle).clamp(-1.0, 1.0).acos())
        .fold(0.0, f64::max);
    Piece { points: points.to_vec(), middle, radius }
}

/// Numbers as `tests/reference/coastlines.py` packs them.
struct Numbers<'a> {
    bytes: &'a [u8],
}

impl Numbers<'_> {
    fn unsigned(&mut self) -> Option<u64> {
        let mut value = 0_u64;
        for shift in (0..63).step_by(7) {
            let (&byte, rest) = self.bytes.split_first()?;
            self.bytes = rest;
            value |= u64::from(byte & 0x7f) << shift;
            if byte < 0x80 {
                return Some(value);
            }
        }
        None
    }

    fn signed(&mut self) -> Option<i64> {
        let folded = self.unsigned()?;
        let half = i64::try_from(folded >> 1).ok()?;
        Some(if folded & 1 == 1 { -half - 1 } else { half })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The points and polylines of the packed data: counted by the script's input.
    #[test]
    fn the_embedded_coastlines_are_whole() {
        let count = |broad| pieces(broad).iter().map(|piece| piece.points.len() - 1).sum::<usize>();
        // 5,123 points in 127 lines and 60,606 in 1,422, less what only closes polygons.
        assert!((4_800..=5_000).contains(&count(true)), "{}", count(true));
        assert!((57_000..=59_200).contains(&count(false)), "{}", count(false));
    }

    /// A light that everyone knows stands on the coast: Land's End, 50.07 N 5.72 W (from memory).
    #[test]
    fn a_known_cape_is_on_the_coast() {
        let cape = Position::clamped(50.07, -5.72);
        let near = |broad| {
            pieces(broad)
                .iter()
                .flat_map(|piece| &piece.points)
                .map(|place| place.distance_km(cape))
                .fold(f64::INFINITY, f64::min)
        };
        assert!(near(false) < 20.0, "{}", near(false));
        assert!(near(true) < 90.0, "{}", near(true));
    }
}
