//! How long one hour's analysis takes.

use std::collections::BTreeMap;
use std::sync::Arc;

use glasskeeper::analysis::{AnalysisSettings, analyse, fit_region, isobar};
use glasskeeper::field::Grid;
use glasskeeper::instant::Hour;
use glasskeeper::obs::Observation;
use glasskeeper::report::Platform;
use glasskeeper::sphere::Position;

use crate::accuracy::observation;

/// Invented weather: a few waves, with winds that are nearly geostrophic.
fn invented(count: u32, sea_share: f64) -> Vec<Arc<Observation>> {
    (0..count)
        .map(|k| {
            let spread = |step: f64| (f64::from(k) * step + 0.5).fract();
            let latitude = (0.42 + 0.54 * spread(0.618_034)).asin().to_degrees();
            let place = Position::clamped(latitude, -80.0 + 120.0 * spread(0.754_878));
            let sea = spread(0.569_840) < sea_share;
            let (x, y) = (place.longitude_deg() / 11.0, latitude / 6.0);
            let pressure = 1008.0 + 12.0 * (x.sin() + y.cos()) + 0.6 * (spread(0.917) - 0.5);
            let wind = (8.0 * y.sin(), 9.0 * x.cos());
            let platform = if sea { Platform::Ship } else { Platform::Land };
            Arc::new(observation(k, platform, place, pressure, wind))
        })
        .collect()
}

#[expect(clippy::disallowed_methods, reason = "a benchmark measures time")]
fn milliseconds(mut work: impl FnMut()) -> f64 {
    let mut best = f64::INFINITY;
    for _ in 0..15 {
        let start = std::time::Instant::now();
        work();
        best = best.min(start.elapsed().as_secs_f64() * 1e3);
    }
    best
}

/// Processor time of this process so far, all threads, ms, in steps of 10; 0 where the system does
/// not say. On a busy machine it tells more than the clock.
#[expect(clippy::disallowed_methods, reason = "a benchmark measures time")]
fn processor_ms() -> f64 {
    let text = std::fs::read_to_string("/proc/self/stat").unwrap_or_default();
    let ticks = |word: usize| {
        text.split_whitespace().nth(word).and_then(|word| word.parse::<f64>().ok()).unwrap_or(0.0)
    };
    10.0 * (ticks(13) + ticks(14))
}

pub(crate) fn run() {
    let hour = Hour::from_unix_h(0);
    println!("analysis: one hour, best of fifteen, ms");
    for (count, columns, rows, sea) in [
        (300, 121, 101, 0.3),
        (1000, 121, 51, 0.3),
        (1000, 121, 101, 0.3),
        (3000, 121, 101, 0.3),
        (3000, 121, 101, 1.0),
        (10_000, 121, 101, 0.3),
        (3000, 241, 101, 0.3),
    ] {
        let list = invented(count, sea);
        let grid = Arc::new(Grid::fitted(25.0, 75.0, -80.0, 40.0, columns, rows));
        let observations = BTreeMap::from([(hour, list)]);
        let settings = AnalysisSettings::default();
        let mut used = 0;
        let before = processor_ms();
        let mut runs = 0.0;
        let time = milliseconds(|| {
            runs += 1.0;
            used = analyse(&grid, hour, &observations, &settings).pressures_used;
        });
        let processor = (processor_ms() - before) / runs;
        println!(
            "  {count:6} reports, {:3.0} % at sea, {}x{}: {time:7.1}, processor {processor:6.1}   ({used} pressures used)",
            sea * 100.0,
            grid.columns,
            grid.rows
        );
    }
    let list = invented(3000, 0.3);
    let places: Vec<Position> = list.iter().map(|observation| observation.position).collect();
    let mut points = 0;
    let time = milliseconds(|| points = fit_region(&places, 121, 101).len());
    println!("  fit_region of 3000, {points} points: {time:.2}");
    let grid = Arc::new(Grid::fitted(25.0, 75.0, -80.0, 40.0, 121, 101));
    let observations = BTreeMap::from([(hour, list)]);
    let analysis = analyse(&grid, hour, &observations, &AnalysisSettings::default());
    let levels = isobar::levels(2.0, 976.0, 1040.0);
    let time = milliseconds(|| {
        drop(isobar::isobars(&grid, &analysis.pressure_hpa, &analysis.error_ratio, &levels));
    });
    println!("  isobars, {} levels: {time:.2}", levels.len());
}
