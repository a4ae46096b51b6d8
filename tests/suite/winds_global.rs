//! Winds against a global field that this project did not make: sea-level pressure and the wind at
//! 1000 hPa of 10 November 1994 (Debian `libncarg-data` 6.6.2, UCAR).
//!
//! The wind at 1000 hPa blows some 100 m above the sea: nearer the ground than the balanced wind,
//! higher than the 10 m wind. So it is turned towards low pressure by less than the full angle.

use std::io::Read as _;
use std::path::PathBuf;
use std::sync::Arc;

use glasskeeper::analysis::HourAnalysis;
use glasskeeper::field::Grid;
use glasskeeper::instant::Hour;
use glasskeeper::quantity::wind_components;
use glasskeeper::sphere::Position;
use glasskeeper::winds::Wind;
use glasskeeper::winds::fields::{DragLaw, at};
use glasskeeper::winds::land::is_land;

/// Fields on the latitudes -90 to 90 by 2.5 and the longitudes -180 to 180 by 5 degrees.
struct Global {
    pressure_hpa: Vec<f64>,
    east_m_s: Vec<f64>,
    north_m_s: Vec<f64>,
}

const SIDE: usize = 73;

fn latitude_deg(row: usize) -> f64 {
    -90.0 + 2.5 * row as f64
}

fn longitude_deg(column: usize) -> f64 {
    -180.0 + 5.0 * column as f64
}

#[expect(clippy::disallowed_methods, reason = "the test reads its data")]
fn global() -> Global {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("tests/data/grids/global_19941110_p_u_v.txt.gz");
    let packed = std::fs::read(path).expect("the data");
    let mut text = String::new();
    flate2::read::GzDecoder::new(packed.as_slice()).read_to_string(&mut text).expect("gzip");
    let mut fields: Vec<Vec<f64>> = Vec::new();
    for line in text.lines() {
        if line.starts_with("field") {
            fields.push(Vec::new());
        } else if let Some(field) = fields.last_mut() {
            field.extend(line.split_whitespace().map(|word| word.parse::<f64>().expect("number")));
        }
    }
    assert!(fields.iter().all(|field| field.len() == SIDE * SIDE), "three whole fields");
    let [pressure_hpa, east_m_s, north_m_s] =
        <[Vec<f64>; 3]>::try_from(fields).expect("three fields");
    Global { pressure_hpa, east_m_s, north_m_s }
}

/// Value of the pressure at a place by cubic convolution, which passes through the given values
/// and has a continuous slope.
fn pressure_at(global: &Global, place: Position) -> f64 {
    let y = (place.latitude_deg() + 90.0) / 2.5;
    let x = (place.longitude_deg() + 180.0) / 5.0;
    let (j, i) = (y.floor(), x.floor());
    let weights = |t: f64| {
        [
            t * (-0.5 + t * (1.0 - 0.5 * t)),
            1.0 + t * t * (-2.5 + 1.5 * t),
            t * (0.5 + t * (2.0 - 1.5 * t)),
            t * t * (-0.5 + 0.5 * t),
        ]
    };
    let (down, along) = (weights(y - j), weights(x - i));
    let index = |value: f64, step: usize, count: usize, turn: bool| {
        let whole =
            glasskeeper::quantity::whole_nearest(value) - 1 + i64::try_from(step).expect("small");
        let count = i64::try_from(count).expect("small");
        // The last column repeats the first; the rows end at the poles.
        let at = if turn { whole.rem_euclid(count - 1) } else { whole.clamp(0, count - 1) };
        usize::try_from(at).expect("not negative")
    };
    let mut sum = 0.0;
    for (row, down) in down.iter().enumerate() {
        for (column, along) in along.iter().enumerate() {
            let at = index(j, row, SIDE, false) * SIDE + index(i, column, SIDE, true);
            sum += down * along * global.pressure_hpa[at];
        }
    }
    sum
}

/// Sums over the points of a zone that compare winds with the wind at 1000 hPa, as complex numbers.
#[derive(Default)]
struct Agreement {
    points: usize,
    dot: f64,
    cross: f64,
    own: f64,
    other: f64,
}

impl Agreement {
    fn add(&mut self, wind: Option<Wind>, east_m_s: f64, north_m_s: f64) {
        let Some(wind) = wind else { return };
        let (u, v) = wind_components(wind.from_deg, wind.speed_m_s);
        self.points += 1;
        self.dot += u * east_m_s + v * north_m_s;
        self.cross += u * north_m_s - v * east_m_s;
        self.own += u * u + v * v;
        self.other += east_m_s * east_m_s + north_m_s * north_m_s;
    }

    /// Size of the complex correlation, 0 to 1.
    fn correlation(&self) -> f64 {
        self.dot.hypot(self.cross) / (self.own * self.other).sqrt()
    }

    /// Angle from our wind to the wind at 1000 hPa, degrees, positive to the left.
    fn turn_left_deg(&self) -> f64 {
        self.cross.atan2(self.dot).to_degrees()
    }
}

/// Geostrophic, gradient and expected surface wind of a zone, at sea, against the given wind.
fn zone(
    global: &Global,
    south_deg: f64,
    north_deg: f64,
    sea_only: bool,
) -> (Agreement, Agreement, Agreement) {
    let law = DragLaw::new();
    // Four maps of a quarter each, with room about it.
    let mut sums = (Agreement::default(), Agreement::default(), Agreement::default());
    for quarter in 0..4_u8 {
        let west_deg = -180.0 + 90.0 * f64::from(quarter);
        let grid = Arc::new(Grid::fitted(
            south_deg - 10.0,
            north_deg + 10.0,
            west_deg - 15.0,
            west_deg + 105.0,
            81,
            81,
        ));
        let pressure = (0..grid.len())
            .map(|at| pressure_at(global, grid.position(at % grid.columns, at / grid.columns)))
            .collect();
        let error = vec![0.5; grid.len()];
        let analysis =
            HourAnalysis::from_field(Hour::from_unix_h(0), Arc::clone(&grid), pressure, error);
        for row in 0..SIDE {
            for column in 0..SIDE - 1 {
                let (latitude_deg, longitude_deg) = (latitude_deg(row), longitude_deg(column));
                let inside = (south_deg..=north_deg).contains(&latitude_deg)
                    && (west_deg..west_deg + 90.0).contains(&longitude_deg);
                let place = Position::clamped(latitude_deg, longitude_deg);
                if !inside || sea_only && is_land(place) {
                    continue;
                }
                let winds = at(&analysis, place, &law, &[]);
                let at = row * SIDE + column;
                let (u, v) = (global.east_m_s[at], global.north_m_s[at]);
                sums.0.add(winds.geostrophic, u, v);
                sums.1.add(winds.gradient, u, v);
                sums.2.add(winds.surface, u, v);
            }
        }
    }
    sums
}

/// Centred differences of the same pressure on its own grid (numpy 2) give correlations of 0.905
/// and 0.965, turned by 23 to 24 degrees to the left and 16 to 17 to the right.
///
/// Open question: the gradient wind of the same pressures agrees a little less with this wind than
/// the geostrophic (0.891 against 0.904, and 0.960 against 0.964; over the sea alone 0.949 against
/// 0.956, and 0.965 against 0.968). It should agree better. Not known yet: how much of it is the
/// curvature that pressures 2.5 by 5 degrees apart, so interpolated, cannot give.
#[test]
fn the_geostrophic_wind_agrees_with_a_global_wind_in_both_hemispheres() {
    let global = global();
    for (south_deg, north_deg, correlation, turn_left_deg) in
        [(30.0, 70.0, 0.905, 23.9), (-60.0, -30.0, 0.965, -16.3)]
    {
        let (geostrophic, ..) = zone(&global, south_deg, north_deg, false);
        assert!(geostrophic.points > 900, "{} points", geostrophic.points);
        let found = (geostrophic.correlation(), geostrophic.turn_left_deg());
        assert!((found.0 - correlation).abs() < 0.01, "{found:?}");
        assert!((found.1 - turn_left_deg).abs() < 1.5, "{found:?}");
    }
}

/// Common practice, no source: the wind near the surface is turned towards low pressure; so what
/// is left between the expected 10 m wind and the wind 100 m up is small, and its speed is less.
#[test]
fn the_expected_surface_wind_at_sea_lies_near_the_direction_of_the_global_wind() {
    let global = global();
    for (south_deg, north_deg) in [(30.0, 70.0), (-60.0, -30.0)] {
        let (_, gradient, surface) = zone(&global, south_deg, north_deg, true);
        let (before, after) = (gradient.turn_left_deg(), surface.turn_left_deg());
        assert!(after.abs() < before.abs() - 8.0, "{before} then {after}");
        assert!(surface.correlation() > gradient.correlation() - 0.01);
        let speeds = (surface.own / surface.other).sqrt();
        assert!((0.75..1.0).contains(&speeds), "share of the speed at 1000 hPa: {speeds}");
    }
}
