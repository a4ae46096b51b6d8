//! From the wind above to the wind at 10 m: the geostrophic drag law.

use crate::quantity::GRAVITY_M_S2;

/// Von Karman's constant.
const KAPPA: f64 = 0.4;
/// The constants A and B of the drag law, Troen and Petersen (1989), European Wind Atlas, from
/// memory; some papers exchange the letters.
pub const TROEN_PETERSEN: (f64, f64) = (1.8, 4.5);
/// The alternative of Hess and Garratt (2002), from memory.
pub const HESS_GARRATT: (f64, f64) = (1.3, 4.4);
/// Charnock's constant (Charnock 1955; value of Garratt 1977, from memory).
const CHARNOCK: f64 = 0.0144;
/// Kinematic viscosity of air, m2/s.
const VISCOSITY_M2_S: f64 = 1.5e-5;
/// Winds above that the law is solved for, m/s; outside, the ends are used.
const SPEED_RANGE_M_S: (f64, f64) = (0.5, 80.0);
/// Iterations at most; the halving iteration contracts by more than two a step, so 1e-9 of the
/// friction velocity is reached in fewer than 40.
const ITERATIONS_MAX: usize = 60;

/// What lies under the wind.
#[derive(Clone, Copy, PartialEq, Debug)]
pub enum Surface {
    /// The open sea: roughness grows with the wind (Charnock).
    Sea,
    /// Land of a roughness length, m: 0.03 open, 0.1 farm land, 0.4 wooded (Troen and Petersen).
    Land(f64),
}

/// Farm land: what a synoptic station on land is taken to stand on.
pub const FARM_LAND: Surface = Surface::Land(0.1);

/// The wind at 10 m under a wind above.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct SurfaceWind {
    /// Friction velocity, m/s.
    pub friction_velocity_m_s: f64,
    /// Roughness length, m.
    pub roughness_m: f64,
    /// Speed at 10 m, m/s.
    pub speed_m_s: f64,
    /// Angle by which it is turned towards low pressure, degrees.
    pub angle_deg: f64,
}

/// Solves the drag law for a wind `speed_above_m_s` over a surface at a Coriolis parameter.
///
/// kappa G/u* = sqrt([ln(u*/(|f| z0)) - A]^2 + B^2), sin(angle) = B u*/(kappa G), with
/// z0 = ac u*^2/g + 0.11 nu/u* over the sea; U10 = (u*/kappa) ln(10/z0).
///
/// Valid for a neutral, steady, barotropic layer poleward of about 20 degrees and G of 2 to 60 m/s;
/// METHODS WND-7. Within that the observed ratio scatters by some 10 %.
pub fn under(
    speed_above_m_s: f64,
    coriolis_per_s: f64,
    surface: Surface,
    (a, b): (f64, f64),
) -> SurfaceWind {
    let g = speed_above_m_s.clamp(SPEED_RANGE_M_S.0, SPEED_RANGE_M_S.1);
    let f = coriolis_per_s.abs().max(1e-6);
    let roughness = |u: f64| match surface {
        Surface::Sea => CHARNOCK * u * u / GRAVITY_M_S2 + 0.11 * VISCOSITY_M2_S / u,
        Surface::Land(roughness_m) => roughness_m,
    };
    let mut u = 0.03 * g;
    for _ in 0..ITERATIONS_MAX {
        let resistance = ((u / (f * roughness(u))).ln() - a).hypot(b);
        let next = f64::midpoint(u, KAPPA * g / resistance);
        let step = (next - u).abs();
        u = next;
        if step < 1e-9 * u {
            break;
        }
    }
    let roughness_m = roughness(u);
    let speed_m_s = (u / KAPPA * (10.0 / roughness_m).ln()).clamp(0.0, g);
    let angle_deg = (b * u / (KAPPA * g)).clamp(0.0, 1.0).asin().to_degrees();
    // Below the range the ratio is kept and the speed falls to nothing.
    let share = if speed_above_m_s < g { speed_above_m_s / g } else { 1.0 };
    SurfaceWind {
        friction_velocity_m_s: u * share,
        roughness_m,
        speed_m_s: speed_m_s * share,
        angle_deg,
    }
}

/// Ratio and angle tabulated for whole fields: bilinear in the logarithms of speed and f.
#[derive(Clone, PartialEq, Debug)]
pub struct Table {
    rows: Vec<[f64; 2]>,
}

const TABLE_SPEEDS: usize = 48;
const TABLE_CORIOLIS: usize = 24;
const TABLE_CORIOLIS_RANGE: (f64, f64) = (1e-5, 1.5e-4);

impl Table {
    /// Tabulates a surface; the error is below 0.2 % in ratio and 0.05 degrees in angle (tested).
    pub fn new(surface: Surface) -> Self {
        let mut rows = Vec::with_capacity(TABLE_SPEEDS * TABLE_CORIOLIS);
        for i in 0..TABLE_CORIOLIS {
            let f = spread(TABLE_CORIOLIS_RANGE, i as f64 / (TABLE_CORIOLIS - 1) as f64);
            for j in 0..TABLE_SPEEDS {
                let g = spread(SPEED_RANGE_M_S, j as f64 / (TABLE_SPEEDS - 1) as f64);
                let wind = under(g, f, surface, TROEN_PETERSEN);
                rows.push([wind.speed_m_s / g, wind.angle_deg]);
            }
        }
        Self { rows }
    }

    /// Ratio of the 10 m speed to the speed above, and the angle towards low pressure, degrees.
    pub fn ratio_and_angle(&self, speed_above_m_s: f64, coriolis_per_s: f64) -> (f64, f64) {
        let (i, s) = place(TABLE_CORIOLIS_RANGE, coriolis_per_s.abs(), TABLE_CORIOLIS);
        let (j, t) = place(SPEED_RANGE_M_S, speed_above_m_s, TABLE_SPEEDS);
        let at = |i: usize, j: usize| self.rows[i * TABLE_SPEEDS + j];
        let mix = |part: usize| {
            (1.0 - s) * ((1.0 - t) * at(i, j)[part] + t * at(i, j + 1)[part])
                + s * ((1.0 - t) * at(i + 1, j)[part] + t * at(i + 1, j + 1)[part])
        };
        (mix(0), mix(1))
    }
}

fn spread((low, high): (f64, f64), along: f64) -> f64 {
    low * (high / low).powf(along)
}

fn place((low, high): (f64, f64), value: f64, count: usize) -> (usize, f64) {
    let along = (value.clamp(low, high) / low).ln() / (high / low).ln() * (count - 1) as f64;
    let cell = crate::quantity::index_nearest(along.floor()).min(count - 2);
    (cell, along - cell as f64)
}

/// The 10 m wind, towards east and north, of a wind above: slowed and turned towards low pressure,
/// to the left of it in the northern and to the right in the southern hemisphere.
pub fn turned(above_m_s: [f64; 2], latitude_deg: f64, ratio: f64, angle_deg: f64) -> [f64; 2] {
    let sign = if latitude_deg < 0.0 { -1.0 } else { 1.0 };
    let (sine, cosine) = (sign * angle_deg).to_radians().sin_cos();
    let [u, v] = above_m_s;
    [ratio * (u * cosine - v * sine), ratio * (u * sine + v * cosine)]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::coriolis_per_s;

    #[track_caller]
    fn near(found: f64, expected: f64, tolerance: f64) {
        assert!((found - expected).abs() <= tolerance, "{found} is not {expected}");
    }

    /// METHODS CHK-112 to CHK-118: fixed point and bracketing root finder agree.
    #[test]
    fn the_drag_law_at_50_degrees() {
        let f = coriolis_per_s(50.0);
        for (surface, g, u, speed, angle_deg) in [
            (Surface::Sea, 10.0, 0.253_42, 7.2889, 16.565),
            (Surface::Sea, 20.0, 0.528_49, 13.3364, 17.294),
            (Surface::Sea, 30.0, 0.814_65, 18.8064, 17.788),
            (Surface::Land(0.03), 10.0, 0.370_52, 5.3809, 24.635),
            (Surface::Land(0.4), 10.0, 0.460_06, 3.7022, 31.169),
        ] {
            let wind = under(g, f, surface, TROEN_PETERSEN);
            near(wind.friction_velocity_m_s, u, 1e-3);
            near(wind.speed_m_s, speed, 1e-3);
            near(wind.angle_deg, angle_deg, 1e-3);
        }
        let other = under(10.0, f, Surface::Land(0.03), HESS_GARRATT);
        near(other.speed_m_s, 5.1958, 1e-3);
        near(other.angle_deg, 23.175, 1e-3);
        for g in [5.0, 10.0, 20.0, 40.0] {
            let drag = under(g, f, Surface::Sea, TROEN_PETERSEN).friction_velocity_m_s / g;
            assert!((0.0246..=0.0280).contains(&drag), "{drag}");
        }
    }

    #[test]
    fn the_table_is_as_good_as_it_says() {
        for surface in [Surface::Sea, FARM_LAND] {
            let table = Table::new(surface);
            for g in [1.0, 3.3, 7.7, 19.0, 41.0, 66.0] {
                for latitude_deg in [12.0, 33.0, 58.0, 88.0] {
                    let f = coriolis_per_s(latitude_deg);
                    let exact = under(g, f, surface, TROEN_PETERSEN);
                    let (ratio, angle_deg) = table.ratio_and_angle(g, f);
                    near(ratio, exact.speed_m_s / g, 0.002);
                    near(angle_deg, exact.angle_deg, 0.05);
                }
            }
        }
    }

    /// Common practice, no source: the wind at the surface is slower than the wind above and
    /// crosses the isobars toward low pressure: to the left in the northern, to the right in the
    /// southern hemisphere.
    #[test]
    fn the_surface_wind_is_slower_and_turned_towards_low_pressure() {
        // Low to the north: a westerly in the northern hemisphere.
        let [_, v] = turned([20.0, 0.0], 50.0, 0.7, 17.0);
        assert!(v > 0.0);
        // Low to the south: a westerly in the southern hemisphere.
        let [u, v] = turned([20.0, 0.0], -50.0, 0.7, 17.0);
        assert!(v < 0.0 && u.hypot(v) < 20.0);
    }
}
