//! Expected surface winds of the samples' analyses against the wind that was true.

use glasskeeper::picture::Picture;
use glasskeeper::quantity::{coriolis_per_s, m_s_from_kt};
use glasskeeper::rehearse::{Scenario, Surface};
use glasskeeper::settings::Settings;
use glasskeeper::winds::balance::{gradient_speed, isobar_curvature_per_m, usual_density_kg_m3};
use glasskeeper::winds::fields::at;
use glasskeeper::winds::land::is_land;

use crate::fold::{held_until, look, rehearsal};

/// Width of Beaufort force 7, m/s (WMO-No. 306, code table 1100): an expected wind is to be right to
/// within a force.
const FORCE_M_S: f64 = 17.2 - 13.9;
/// Hours after the start that are looked at, each 40 minutes past.
const HOURS: [i64; 5] = [12, 24, 31, 36, 42];

#[derive(Default, Debug)]
struct Sums {
    points: usize,
    squares: f64,
    gales: usize,
    false_gales: usize,
    missed_gales: usize,
}

impl Sums {
    fn add(&mut self, expected_m_s: f64, true_m_s: f64) {
        self.points += 1;
        self.squares += (expected_m_s - true_m_s).powi(2);
        // A gale is false or missed where it is not even near: more than 5 kt off, or 3.
        let gale = m_s_from_kt(34.0);
        if expected_m_s >= gale {
            self.gales += 1;
            self.false_gales += usize::from(true_m_s < m_s_from_kt(29.0));
        } else {
            self.missed_gales += usize::from(true_m_s >= m_s_from_kt(37.0));
        }
    }

    fn rms_m_s(&self) -> f64 {
        (self.squares / self.points as f64).sqrt()
    }
}

/// Adds the trusted points at sea of a Picture: the expected wind, and what the theory's whole
/// anticyclonic range would have made of it.
fn add(
    picture: &Picture,
    wind: impl Fn(&glasskeeper::sphere::Position) -> f64,
    sums: &mut [Sums; 2],
) {
    let analysis = picture.newest().expect("an analysis");
    let grid = &analysis.grid;
    for row in 3..grid.rows - 3 {
        for column in 3..grid.columns - 3 {
            let place = grid.position(column, row);
            if is_land(place) || analysis.error_ratio[grid.index(column, row)] > 0.7 {
                continue;
            }
            let winds = at(analysis, place, &picture.law, &[]);
            let (Some(surface), Some(gradient), Some(point)) =
                (winds.surface, winds.gradient, analysis.at(place))
            else {
                continue;
            };
            let [px, py] = point.gradient_pa_m;
            let density = usual_density_kg_m3(point.pressure_hpa, place.latitude_deg());
            let curvature = isobar_curvature_per_m(point.gradient_pa_m, point.hessian_pa_m2);
            let f = coriolis_per_s(place.latitude_deg());
            let whole = gradient_speed(px.hypot(py) / density, f, curvature, 0.0).speed_m_s;
            let unlimited = surface.speed_m_s * whole / gradient.speed_m_s.max(0.1);
            sums[0].add(surface.speed_m_s, wind(&place));
            sums[1].add(unlimited, wind(&place));
        }
    }
}

/// Few false gales, hardly one missed; and the limit on anticyclonic winds earns its place: without
/// it the false gales are several times as many, the error larger, and no more gales are found.
#[test]
fn expected_winds_at_sea_are_near_the_true_ones_and_cry_no_wolf() {
    let mut sums = [Sums::default(), Sums::default()];
    for name in Scenario::built_in_names() {
        let rehearsal = rehearsal(name);
        let files: Vec<_> = rehearsal.files().collect();
        let start = Scenario::built_in(name).expect("built in").start;
        for hours in HOURS {
            let now = start.plus_s(hours * 3600 + 2400);
            let settings = Settings { window_h: 12, ..Settings::default() };
            let picture = look(&held_until(&files, now), &settings, now);
            let time = picture.valid.instant();
            let truth = |place: &glasskeeper::sphere::Position| {
                let (u, v) = rehearsal.wind_m_s(*place, time, Surface::Sea);
                u.hypot(v)
            };
            add(&picture, truth, &mut sums);
        }
    }
    let [limited, unlimited] = &sums;
    assert!(limited.points > 30_000 && limited.gales > 800, "{sums:?}");
    assert!(limited.rms_m_s() < FORCE_M_S, "{}", limited.rms_m_s());
    assert!(limited.false_gales * 20 < limited.gales, "{sums:?}");
    assert!(limited.missed_gales * 100 < limited.gales, "{sums:?}");
    assert!(limited.rms_m_s() < unlimited.rms_m_s());
    assert!(limited.false_gales * 3 < unlimited.false_gales, "{sums:?}");
    assert!(limited.missed_gales <= unlimited.missed_gales + 2, "{sums:?}");
}
