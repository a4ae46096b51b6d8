//! The drag of the surface: how much slower the wind at 10 m is, and how far it turns.

use super::Surface;
use crate::quantity::GRAVITY_M_S2;

/// Von Karman's constant.
const KARMAN: f64 = 0.4;
/// Constants of the drag law (Troen and Petersen 1989; METHODS WND-7, from memory there).
const A: f64 = 1.8;
const B: f64 = 4.5;
/// Charnock's constant (METHODS WND-7).
const CHARNOCK: f64 = 0.0144;
/// Kinematic viscosity of air, m2/s.
const VISCOSITY_M2_S: f64 = 1.5e-5;

/// Wind at 10 m over the wind above the friction, and the angle between them, radians, towards low
/// pressure. `above_m_s` is limited to 2..=60, where the iteration contracts (METHODS WND-7).
pub(super) fn ratio_and_angle(above_m_s: f64, coriolis_per_s: f64, surface: Surface) -> (f64, f64) {
    let g = above_m_s.clamp(2.0, 60.0);
    let mut friction = 0.03 * g;
    let mut roughness = 0.1;
    for _ in 0..60 {
        roughness = match surface {
            Surface::Land => 0.1,
            Surface::Sea => {
                CHARNOCK * friction * friction / GRAVITY_M_S2 + 0.11 * VISCOSITY_M2_S / friction
            }
        };
        let depth = (friction / (coriolis_per_s * roughness)).ln() - A;
        let next = f64::midpoint(friction, KARMAN * g / depth.hypot(B));
        let change = (next - friction).abs();
        friction = next;
        if change < 1e-9 {
            break;
        }
    }
    let ten = friction / KARMAN * (10.0 / roughness).ln();
    (ten / g, (B * friction / (KARMAN * g)).clamp(0.0, 1.0).asin())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::coriolis_per_s;

    /// METHODS WND-7, table at latitude 50 (fixed point and Brent's method there).
    #[test]
    fn drag_law_agrees_with_its_table() {
        let f = coriolis_per_s(50.0);
        for (surface, g, ten, angle_deg) in [
            (Surface::Sea, 5.0, 3.8956, 16.241),
            (Surface::Sea, 20.0, 13.3364, 17.294),
            (Surface::Sea, 40.0, 23.8802, 18.159),
            (Surface::Land, 10.0, 4.6991, 27.334),
            (Surface::Land, 20.0, 8.8818, 25.718),
        ] {
            let (ratio, angle) = ratio_and_angle(g, f, surface);
            assert!((ratio * g - ten).abs() < 2e-4, "{surface:?} {g}: {}", ratio * g);
            assert!((angle.to_degrees() - angle_deg).abs() < 2e-3, "{}", angle.to_degrees());
        }
    }
}
