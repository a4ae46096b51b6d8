//! How well highs and lows are found and followed in rehearsed weather, from reports to outlooks.
//!
//! Invented lows and highs on the sphere, both hemispheres, some over the date line; each hour's
//! field is sampled by land stations and moving ships with the errors of ANCHORS (0.5 hPa on land,
//! 1.0 at sea, winds 1.5 m/s), analysed, and followed as a watch would: hour by hour.

use std::collections::BTreeMap;
use std::sync::Arc;

use glasskeeper::analysis::{AnalysisSettings, analyse};
use glasskeeper::field::Grid;
use glasskeeper::instant::Hour;
use glasskeeper::obs::{Observation, PressureSource, Provenance};
use glasskeeper::rehearse::scenario::{SystemPlan, SystemPoint};
use glasskeeper::rehearse::{Rehearsal, Scenario, Surface, TruePoint};
use glasskeeper::report::{Form, Identifier, Platform, Report};
use glasskeeper::sphere::Position;
use glasskeeper::systems::follow::{HourCentres, Wishes, follow};
use glasskeeper::systems::names::NameBook;
use glasskeeper::systems::{Kind, System};

/// Draws that fall the same way every time (a Weyl sequence through a multiplicative mix).
struct Dice(u64);

impl Dice {
    fn unit(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut word = self.0;
        word = (word ^ (word >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        word = (word ^ (word >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        ((word ^ (word >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }

    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.unit()
    }

    fn normal(&mut self) -> f64 {
        let radius = (-2.0 * (1.0 - self.unit()).ln()).sqrt();
        radius * (std::f64::consts::TAU * self.unit()).cos()
    }
}

const HOURS: i64 = 48;

/// Three lows and two highs that cross a region in two days.
fn rehearsal(seed: u64, south: bool, west_deg: f64) -> Rehearsal {
    let mut dice = Dice(seed.wrapping_mul(7919));
    let mut scenario = Scenario::built_in("northern-ocean-low").expect("built in");
    let sign = if south { -1.0 } else { 1.0 };
    scenario.land.clear();
    scenario.aerodromes.clear();
    scenario.ships.clear();
    scenario.buoys.clear();
    scenario.tables.clear();
    scenario.hours = HOURS;
    scenario.seed = seed;
    scenario.systems = (0..5)
        .map(|k| {
            let low = k < 3;
            let start = Position::clamped(
                sign * dice.between(38.0, 60.0),
                west_deg
                    + 12.0
                    + 22.0 * f64::from(k % 3)
                    + dice.between(-6.0, 6.0)
                    + if low { 0.0 } else { 10.0 },
            );
            let course_deg = 90.0 - sign * dice.between(0.0, 55.0);
            let speed_km_h = dice.between(15.0, if low { 75.0 } else { 35.0 });
            let first = if low { dice.between(-30.0, -8.0) } else { dice.between(8.0, 16.0) };
            let last = if low { dice.between(-50.0, -10.0) } else { dice.between(8.0, 16.0) };
            let turn_deg = dice.between(-25.0, 25.0);
            let radius_km = dice.between(1100.0, 1900.0);
            let points = [-12.0, 12.0, 36.0, 60.0]
                .iter()
                .scan((start, course_deg), |(place, course), hour| {
                    let here = *place;
                    *place = place.destination(*course, speed_km_h * 24.0);
                    *course += turn_deg;
                    let share = ((hour + 12.0) / 72.0_f64).clamp(0.0, 1.0);
                    Some(SystemPoint {
                        hour: *hour,
                        latitude_deg: here.latitude_deg(),
                        longitude_deg: here.longitude_deg(),
                        anomaly_hpa: first + (last - first) * share,
                        radius_km,
                    })
                })
                .collect();
            SystemPlan { name: format!("s{k}"), points }
        })
        .collect();
    let start = scenario.start;
    Rehearsal::new(scenario, start)
}

/// One observation of the true weather with the errors of its kind.
fn observed(
    rehearsal: &Rehearsal,
    dice: &mut Dice,
    name: &str,
    platform: Platform,
    position: Position,
    hour: Hour,
) -> Observation {
    let time = hour.instant();
    let land = platform == Platform::Land;
    let error_hpa = if land { 0.5 } else { 1.0 };
    let surface = if land { Surface::Land } else { Surface::Sea };
    let (u, v) = rehearsal.wind_m_s(position, time, surface);
    let station = Identifier::new(name).expect("a short name");
    Observation {
        report: Report::empty(station, platform, Form::Csv, time),
        position,
        hour,
        barometer_height_m: None,
        pressure_msl_hpa: Some(rehearsal.pressure_hpa(position, time) + error_hpa * dice.normal()),
        pressure_error_hpa: error_hpa,
        pressure_source: Some(PressureSource::Reported),
        wind_m_s: Some((u + 1.5 * dice.normal(), v + 1.5 * dice.normal())),
        wind_error_m_s: 1.5,
        findings: Vec::new(),
        provenance: Provenance {
            file: String::new(),
            content: String::new(),
            start: 0,
            end: 0,
            received: time,
        },
    }
}

/// `count` reports an hour: two fifths fixed, the rest ships that report every third hour.
fn feed(
    rehearsal: &Rehearsal,
    seed: u64,
    count: u32,
    area: [f64; 4],
) -> BTreeMap<Hour, Vec<Arc<Observation>>> {
    let mut dice = Dice(seed.wrapping_mul(104_729).wrapping_add(u64::from(count)));
    let place = |dice: &mut Dice| {
        let (low, high) = (area[0].to_radians().sin(), area[1].to_radians().sin());
        let latitude_deg = dice.between(low, high).asin().to_degrees();
        Position::clamped(latitude_deg, dice.between(area[2], area[3]))
    };
    let fixed = 2 * count / 5;
    let ships = 3 * (count - fixed);
    let stations: Vec<Position> = (0..fixed).map(|_| place(&mut dice)).collect();
    let ways: Vec<(Position, f64, f64)> = (0..ships)
        .map(|_| (place(&mut dice), dice.between(0.0, 360.0), dice.between(0.0, 35.0)))
        .collect();
    let start = rehearsal.start().hour_floor();
    (0..=HOURS)
        .map(|h| {
            let hour = start.plus(h);
            let mut list: Vec<Arc<Observation>> = Vec::new();
            for (k, position) in stations.iter().enumerate() {
                let name = format!("{k:05}");
                let land = Platform::Land;
                list.push(Arc::new(observed(rehearsal, &mut dice, &name, land, *position, hour)));
            }
            for (k, (from, course_deg, speed_km_h)) in ways.iter().enumerate() {
                if (h + i64::try_from(k).unwrap_or(0)) % 3 == 0 {
                    let position = from.destination(*course_deg, speed_km_h * h as f64);
                    let name = format!("Q{k:04}");
                    let ship = Platform::Ship;
                    list.push(Arc::new(observed(
                        rehearsal, &mut dice, &name, ship, position, hour,
                    )));
                }
            }
            (hour, list)
        })
        .collect()
}

/// Sums over all scenarios of a density.
#[derive(Default)]
struct Tally {
    true_points: usize,
    found: usize,
    position_km: Vec<f64>,
    position_scaled: Vec<f64>,
    pressure: Vec<f64>,
    pressure_scaled: Vec<f64>,
    raw_position_scaled: Vec<f64>,
    raw_position_km: Vec<f64>,
    raw_pressure: Vec<f64>,
    raw_rows: Vec<[f64; 4]>,
    /// Errors of the raw place and pressure in units of those stated, by scenario and system.
    series: BTreeMap<String, BTreeMap<i64, [f64; 3]>>,
    change: BTreeMap<i64, Vec<(f64, f64)>>,
    velocity: Vec<(f64, f64)>,
    outlook: BTreeMap<i64, Vec<[f64; 5]>>,
    switches: usize,
    tracks: usize,
    false_hours: usize,
    hours: usize,
    phantoms: BTreeMap<String, usize>,
}

fn rms(values: impl Iterator<Item = f64>) -> f64 {
    let (sum, count) =
        values.fold((0.0, 0.0), |(sum, count), value| (sum + value * value, count + 1.0));
    (sum / f64::max(count, 1.0)).sqrt()
}

fn mean(values: &[f64]) -> f64 {
    values.iter().sum::<f64>() / values.len().max(1) as f64
}

fn median(values: &[f64]) -> f64 {
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    sorted.get(sorted.len() / 2).copied().unwrap_or(f64::NAN)
}

fn share(values: impl Iterator<Item = bool>) -> f64 {
    let (yes, all) =
        values.fold((0.0, 0.0), |(yes, all), is| (yes + f64::from(u8::from(is)), all + 1.0));
    100.0 * yes / f64::max(all, 1.0)
}

/// 68 % of a two-dimensional normal distribution lies within this squared distance.
const SQUARE_68: f64 = 2.2789;

fn one(seed: u64, count: u32, tally: &mut Tally) {
    let south = seed % 2 == 1;
    let west_deg = [-70.0, 140.0, -30.0, 20.0][usize::try_from(seed % 4).unwrap_or(0)];
    let rehearsal = rehearsal(seed, south, west_deg);
    let (low, high) = if south { (-70.0, -30.0) } else { (30.0, 70.0) };
    let area = [low, high, west_deg, west_deg + 90.0];
    let grid = Arc::new(Grid::fitted(low, high, west_deg, west_deg + 90.0, 101, 81));
    let observations = feed(&rehearsal, seed, count, area);
    let truth = rehearsal.truth();
    let at = |name: &str, hour: Hour| -> Option<TruePoint> {
        let system = truth.systems.iter().find(|system| system.name == name)?;
        system.points.iter().find(|point| point.time == hour).copied()
    };
    let inside = |place: Position| {
        let (column, row) = grid.locate(place);
        let margin_steps = 300_000.0 / grid.true_spacing_m(place.latitude_deg());
        column > margin_steps
            && row > margin_steps
            && column < grid.columns as f64 - 1.0 - margin_steps
            && row < grid.rows as f64 - 1.0 - margin_steps
    };
    let settings = AnalysisSettings::default();
    let mut hours: Vec<Arc<HourCentres>> = Vec::new();
    let mut named: BTreeMap<String, Vec<String>> = BTreeMap::new();
    let (renamed, dismissed) = (BTreeMap::new(), BTreeMap::new());
    let wishes = Wishes { renamed: &renamed, dismissed: &dismissed };
    for h in 0..=HOURS {
        let hour = rehearsal.start().hour_floor().plus(h);
        let analysis = analyse(&grid, hour, &observations, &settings);
        hours.push(Arc::new(HourCentres::of(&analysis)));
        if h < 6 {
            continue;
        }
        let book = NameBook::default();
        let followed = follow(&hours, &[], &book, hour.plus(-1000), &wishes);
        tally.hours += 1;
        let mut used = vec![false; followed.systems.len()];
        for system in &truth.systems {
            let Some(point) = at(&system.name, hour) else { continue };
            let kind = if system.kind == "low" { Kind::Low } else { Kind::High };
            let place = point.position();
            let nearest = followed
                .systems
                .iter()
                .enumerate()
                .filter(|(k, s)| !used[*k] && s.kind == kind)
                .min_by(|(_, a), (_, b)| {
                    a.position.distance_km(place).total_cmp(&b.position.distance_km(place))
                });
            let near = nearest.filter(|(_, s)| s.position.distance_km(place) < 400.0);
            if let Some((k, _)) = near {
                used[k] = true;
            }
            let raw = hours[hours.len() - 1]
                .centres
                .iter()
                .filter(|c| c.kind == kind && c.position.distance_km(place) < 400.0)
                .min_by(|a, b| {
                    a.position.distance_km(place).total_cmp(&b.position.distance_km(place))
                });
            if kind == Kind::High || point.depth_hpa < 4.0 || !inside(place) {
                continue;
            }
            tally.true_points += 1;
            if let Some(raw) = raw {
                let off_km = raw.position.distance_km(place);
                let off_hpa = raw.pressure_hpa - point.pressure_hpa;
                tally.raw_position_km.push(off_km);
                tally.raw_position_scaled.push((off_km / raw.position_error_km).powi(2));
                tally.raw_pressure.push(off_hpa);
                let (east, north) = place.offset_to(raw.position);
                let scaled = [
                    east / raw.position_error_km,
                    north / raw.position_error_km,
                    off_hpa / raw.pressure_error_hpa,
                ];
                let series = tally.series.entry(format!("{seed} {}", system.name)).or_default();
                series.insert(h, scaled);
                tally.raw_rows.push([
                    off_hpa,
                    raw.pressure_error_hpa,
                    raw.depth_hpa,
                    analysis
                        .at(raw.position)
                        .map_or(0.0, |p| (p.hessian_pa_m2[0] + p.hessian_pa_m2[2]) / 8.0878e-9),
                ]);
            }
            let Some((_, found)) = near else { continue };
            tally.found += 1;
            named.entry(system.name.clone()).or_default().push(found.name.clone());
            score(tally, found, &point, hour, &|hour| at(&system.name, hour));
        }
        for (k, system) in followed.systems.iter().enumerate() {
            if !used[k] && inside(system.position) {
                let any = truth.systems.iter().any(|s| {
                    at(&s.name, hour)
                        .is_some_and(|p| p.position().distance_km(system.position) < 400.0)
                });
                if !any {
                    tally.false_hours += 1;
                    *tally.phantoms.entry(format!("{seed} {}", system.name)).or_default() += 1;
                }
            }
        }
    }
    for names in named.values() {
        tally.tracks += 1;
        tally.switches += names.windows(2).filter(|pair| pair[0] != pair[1]).count();
    }
}

fn score(
    tally: &mut Tally,
    found: &System,
    point: &TruePoint,
    hour: Hour,
    at: &dyn Fn(Hour) -> Option<TruePoint>,
) {
    let place = point.position();
    let off_km = found.position.distance_km(place);
    let off_hpa = found.pressure_hpa.value - point.pressure_hpa;
    tally.position_km.push(off_km);
    tally.position_scaled.push((off_km / found.position_error_km).powi(2));
    tally.pressure.push(off_hpa);
    tally.pressure_scaled.push(off_hpa / found.pressure_hpa.error);
    for (lead, change) in [
        (3, found.change_3h_hpa),
        (6, found.change_6h_hpa),
        (12, found.change_12h_hpa),
        (24, found.change_24h_hpa),
    ] {
        if let (Some(change), Some(before)) = (change, at(hour.plus(-lead))) {
            let off = change.value - (point.pressure_hpa - before.pressure_hpa);
            tally.change.entry(lead).or_default().push((off, change.error));
        }
    }
    if let (Some(before), Some(after), Some(speed), Some(course)) =
        (at(hour.plus(-1)), at(hour.plus(1)), found.speed_kt, found.course_deg)
    {
        let (east, north) = before.position().offset_to(after.position());
        let (sine, cosine) = course.to_radians().sin_cos();
        let kt = 2.0 * 1.852;
        let off = (speed.value * sine - east / kt).hypot(speed.value * cosine - north / kt);
        tally.velocity.push((off, speed.error));
    }
    for outlook in &found.outlook {
        let Some(later) = at(hour.plus(outlook.lead_h)) else { continue };
        let later_place = later.position();
        let (east, north) = outlook.position.offset_to(later_place);
        let (sine, cosine) = outlook.axis_deg.to_radians().sin_cos();
        let along = east * sine + north * cosine;
        let across = east * cosine - north * sine;
        tally.outlook.entry(outlook.lead_h).or_default().push([
            along.hypot(across),
            found.position.distance_km(later_place),
            (along / outlook.major_km).powi(2) + (across / outlook.minor_km).powi(2),
            outlook.pressure_hpa.value - later.pressure_hpa,
            outlook.pressure_hpa.error,
        ]);
    }
}

fn print(count: u32, tally: &Tally) {
    println!(
        "  {count} reports an hour: found {:.1} % of {} lows deeper than 4 hPa; {} switches in {} tracks; {:.3} false an hour",
        100.0 * tally.found as f64 / tally.true_points.max(1) as f64,
        tally.true_points,
        tally.switches,
        tally.tracks,
        tally.false_hours as f64 / tally.hours.max(1) as f64
    );
    let longest = tally.phantoms.values().max().copied().unwrap_or(0);
    println!("    phantoms {} longest {longest} h; {:?}", tally.phantoms.len(), tally.phantoms);
    println!(
        "    followed: position mean {:.0} median {:.0} km, {:.0} % in the 68 % circle; pressure bias {:+.2} rms {:.2} hPa, {:.0} % within one error",
        mean(&tally.position_km),
        median(&tally.position_km),
        share(tally.position_scaled.iter().map(|square| *square < SQUARE_68)),
        mean(&tally.pressure),
        rms(tally.pressure.iter().copied()),
        share(tally.pressure_scaled.iter().map(|scaled| scaled.abs() < 1.0)),
    );
    println!(
        "    raw: {:.1} % position mean {:.0} median {:.0} km, {:.0} % in the circle; pressure bias {:+.2} rms {:.2}",
        100.0 * tally.raw_position_km.len() as f64 / tally.true_points.max(1) as f64,
        mean(&tally.raw_position_km),
        median(&tally.raw_position_km),
        share(tally.raw_position_scaled.iter().map(|square| *square < SQUARE_68)),
        mean(&tally.raw_pressure),
        rms(tally.raw_pressure.iter().copied()),
    );
    for lag in [1, 2, 3, 6, 12] {
        let mut sums = [[0.0; 3]; 3];
        for series in tally.series.values() {
            for (h, one) in series {
                if let Some(other) = series.get(&(h + lag)) {
                    for k in 0..3 {
                        sums[k][0] += one[k] * other[k];
                        sums[k][1] += one[k] * one[k];
                        sums[k][2] += other[k] * other[k];
                    }
                }
            }
        }
        let like = sums.map(|[both, one, other]| both / f64::sqrt(one * other));
        println!("      errors {lag} h apart are alike by {like:.2?} (east, north, pressure)");
    }
    for column in 1..4 {
        let mut rows = tally.raw_rows.clone();
        rows.sort_by(|a, b| a[column].total_cmp(&b[column]));
        let parts: Vec<String> = rows
            .chunks(rows.len() / 5 + 1)
            .map(|part| {
                let off: Vec<f64> = part.iter().map(|row| row[0]).collect();
                format!(
                    "{:.2}: {:+.2} rms {:.2}",
                    part[part.len() / 2][column],
                    mean(&off),
                    rms(off.iter().copied())
                )
            })
            .collect();
        println!(
            "      bias by {}: {}",
            ["", "error", "depth", "laplacian"][column],
            parts.join("; ")
        );
    }
    for (lead, list) in &tally.change {
        println!(
            "    change {lead:2} h: rms {:.2} hPa, {:.0} % within one error ({} cases)",
            rms(list.iter().map(|(off, _)| *off)),
            share(list.iter().map(|(off, error)| off.abs() < *error)),
            list.len()
        );
    }
    println!(
        "    velocity: rms {:.1} kt, {:.0} % in the 68 % circle",
        rms(tally.velocity.iter().map(|(off, _)| *off)),
        share(tally.velocity.iter().map(|(off, error)| (off / error).powi(2) < SQUARE_68))
    );
    for (lead, list) in &tally.outlook {
        let km: Vec<f64> = list.iter().map(|row| row[0]).collect();
        let still: Vec<f64> = list.iter().map(|row| row[1]).collect();
        println!(
            "    outlook {lead:2} h: {:.0} km (staying {:.0}), {:.0} % in the ellipse; pressure rms {:.1}, {:.0} % within one error ({} cases)",
            mean(&km),
            mean(&still),
            share(list.iter().map(|row| row[2] < SQUARE_68)),
            rms(list.iter().map(|row| row[3])),
            share(list.iter().map(|row| row[3].abs() < row[4])),
            list.len()
        );
    }
}

pub(crate) fn run() {
    println!(
        "systems: rehearsed lows from reports to outlooks, 48 h each, the first 6 h not counted"
    );
    // The constants of the room were set on the first seeds; the others judge them.
    for (count, seeds, what) in [
        (300, 0..10, "set on these"),
        (300, 10..18, "judged by these"),
        (1000, 0..6, "set on these"),
        (1000, 6..11, "judged by these"),
    ] {
        println!("  seeds {seeds:?}, {what}");
        let mut tally = Tally::default();
        for seed in seeds {
            one(seed, count, &mut tally);
        }
        print(count, &tally);
    }
}
