//! The first guess: the usual pressure of the latitude, moved by one number to suit the reports.
//!
//! Broad on purpose. A first guess made of the hour before was measured to do harm in moving
//! weather, so that an hour stands on its reports alone.

use std::sync::OnceLock;

use crate::field::spline::Spline;
use crate::sphere::Position;

/// Yearly mean sea-level pressure of each tenth parallel from 90 S, hPa, rounded to a hectopascal.
/// From memory of published zonal means (e.g. Peixoto and Oort 1992, Physics of Climate); its
/// errors are far inside the spread that the analysis allows about it.
const ZONAL_MEAN_HPA: [f64; 19] = [
    990.0, 988.0, 986.0, 989.0, 999.0, 1012.0, 1018.0, 1016.0, 1012.0, 1010.5, 1011.0, 1014.0,
    1017.0, 1016.0, 1013.5, 1012.0, 1012.5, 1013.5, 1014.0,
];

/// The first guess at a latitude.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Guess {
    pub(super) pressure_hpa: f64,
    /// Change by the latitude in radians, hPa.
    pub(super) by_latitude_hpa: f64,
}

/// The first guess of an hour.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct FirstGuess {
    /// What is added to the zonal mean, hPa.
    pub(super) offset_hpa: f64,
}

fn zonal() -> &'static Spline {
    // A constant of the program, made when first asked for.
    static ZONAL: OnceLock<Spline> = OnceLock::new();
    ZONAL.get_or_init(|| {
        let twice: Vec<f64> = ZONAL_MEAN_HPA.iter().chain(&ZONAL_MEAN_HPA).copied().collect();
        Spline::through(&twice, ZONAL_MEAN_HPA.len(), 2)
    })
}

impl FirstGuess {
    pub(super) fn at(self, position: Position) -> Guess {
        let jet = zonal().at((position.latitude_deg() + 90.0) / 10.0, 0.0);
        Guess {
            pressure_hpa: jet.value + self.offset_hpa,
            by_latitude_hpa: jet.gradient[0] * 18.0 / std::f64::consts::PI,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn it_has_belts_of_high_pressure_in_both_hemispheres_and_a_deep_southern_trough() {
        let at = |latitude_deg| {
            FirstGuess { offset_hpa: 0.0 }.at(Position::clamped(latitude_deg, 0.0)).pressure_hpa
        };
        assert!(at(30.0) > at(0.0) + 5.0 && at(30.0) > at(60.0) + 3.0);
        assert!(at(-30.0) > at(0.0) + 5.0 && at(-65.0) < 990.0);
        let h = 1e-4;
        let slope = (at(-50.0 + h) - at(-50.0 - h)) / (2.0 * h).to_radians();
        let guess = FirstGuess { offset_hpa: 3.0 }.at(Position::clamped(-50.0, 7.0));
        assert!((guess.by_latitude_hpa - slope).abs() < 1e-3 * slope.abs());
        assert!((guess.pressure_hpa - at(-50.0) - 3.0).abs() < 1e-12);
    }
}
