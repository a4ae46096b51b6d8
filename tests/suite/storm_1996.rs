//! The storm of January 1996 off the east coast of North America, from a gridded analysis that this
//! project did not make: sampled as reports at scattered places, it must be found, followed and
//! rated (`tests/data/storm`, see SOURCES.md).

use std::fmt::Write;
use std::io::Read;

use flate2::read::GzDecoder;
use glasskeeper::instant::Instant;
use glasskeeper::rehearse::FeedFile;
use glasskeeper::settings::Settings;
use glasskeeper::sphere::Position;
use glasskeeper::systems::Kind;

use crate::fold::{held_until, look};

const GRID: &[u8] = include_bytes!("../data/storm/jan1996_p_msl_hpa.txt.gz");
/// Reports at each time, and the standard deviation of their noise, hPa.
const REPORTS: usize = 400;
const NOISE_HPA: f64 = 0.7;

/// Sea-level pressure on a grid, every six hours.
struct Grid {
    latitudes_deg: Vec<f64>,
    longitudes_deg: Vec<f64>,
    fields: Vec<(Instant, Vec<Vec<f64>>)>,
}

fn grid() -> Grid {
    let mut text = String::new();
    GzDecoder::new(GRID).read_to_string(&mut text).expect("a text");
    let mut lines = text.lines().skip(2);
    let numbers = |line: &str| -> Vec<f64> {
        line.split_whitespace().filter_map(|word| word.parse().ok()).collect()
    };
    let latitudes_deg = numbers(lines.next().expect("latitudes"));
    let longitudes_deg = numbers(lines.next().expect("longitudes"));
    let mut fields = Vec::new();
    while let Some(line) = lines.next() {
        let time = line.strip_prefix("field ").and_then(Instant::parse).expect("a time");
        let rows = lines.by_ref().take(latitudes_deg.len()).map(numbers).collect();
        fields.push((time, rows));
    }
    Grid { latitudes_deg, longitudes_deg, fields }
}

impl Grid {
    /// Bilinear value of a field; `None` outside or next to a missing value.
    fn value(&self, field: &[Vec<f64>], position: Position) -> Option<f64> {
        let cell = |values: &[f64], x: f64| {
            let i = values.windows(2).position(|pair| pair[0] <= x && x <= pair[1])?;
            Some((i, (x - values[i]) / (values[i + 1] - values[i])))
        };
        let (row, t) = cell(&self.latitudes_deg, position.latitude_deg())?;
        let (column, s) = cell(&self.longitudes_deg, position.longitude_deg())?;
        let at = |dy: usize, dx: usize| field[row + dy][column + dx];
        let value = (1.0 - t) * ((1.0 - s) * at(0, 0) + s * at(0, 1))
            + t * ((1.0 - s) * at(1, 0) + s * at(1, 1));
        value.is_finite().then_some(value)
    }

    /// The storm's grid minimum at each time from 7 January 00 UTC: the least value within 900 km
    /// of the one before.
    fn storm(&self) -> Vec<(Instant, Position, f64)> {
        let from = Instant::parse("1996-01-07T00:00Z").expect("a time");
        let mut last = Position::clamped(31.25, -85.0);
        let mut track = Vec::new();
        for (time, field) in self.fields.iter().filter(|(time, _)| *time >= from) {
            let mut best: Option<(f64, Position)> = None;
            for (latitude_deg, row) in self.latitudes_deg.iter().zip(field) {
                for (longitude_deg, &value) in self.longitudes_deg.iter().zip(row) {
                    let place = Position::clamped(*latitude_deg, *longitude_deg);
                    if value.is_finite()
                        && place.distance_km(last) < 900.0
                        && best.is_none_or(|(least, _)| value < least)
                    {
                        best = Some((value, place));
                    }
                }
            }
            let (value, place) = best.expect("a minimum");
            track.push((*time, place, value));
            last = place;
        }
        track
    }
}

/// A small generator of this test's own: the same places and noise in every run.
struct Chance(u64);

impl Chance {
    fn unit(&mut self) -> f64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        let radius = (-2.0 * (1.0 - self.unit()).ln()).sqrt();
        radius * (std::f64::consts::TAU * self.unit()).cos()
    }
}

/// Reports at scattered places of equal density on the sphere, as a table for each time.
fn feed(grid: &Grid, seed: u64) -> Vec<FeedFile> {
    let mut chance = Chance(seed);
    let (low, high) = (20_f64.to_radians().sin(), 60_f64.to_radians().sin());
    let mut places = Vec::new();
    while places.len() < REPORTS {
        let latitude_deg = (low + (high - low) * chance.unit()).asin().to_degrees();
        let longitude_deg = -140.0 + 87.5 * chance.unit();
        let place = Position::clamped(latitude_deg, longitude_deg);
        if grid.fields.iter().all(|(_, field)| grid.value(field, place).is_some()) {
            places.push(place);
        }
    }
    let mut files = Vec::new();
    for (time, field) in &grid.fields {
        let mut text = "station,kind,time,latitude_deg,longitude_deg,pressure_msl_hpa\n".to_owned();
        for (n, place) in places.iter().enumerate() {
            let value = grid.value(field, *place).expect("a value") + NOISE_HPA * chance.normal();
            let (latitude_deg, longitude_deg) = (place.latitude_deg(), place.longitude_deg());
            // Writing to a string cannot fail.
            let _ = writeln!(
                text,
                "P{n:03},buoy,{time},{latitude_deg:.3},{longitude_deg:.3},{value:.1}"
            );
        }
        let due = time.plus_s(600);
        files.push(FeedFile {
            due,
            name: format!("{}.csv", due.unix_s()),
            bytes: text.into_bytes(),
        });
    }
    files
}

/// The data's own description: 1011.6 hPa at 31.25 N 85 W on 7 January 06 UTC, 991.2 hPa at 37.5 N
/// 75 W a day later.
#[test]
fn the_grid_is_the_one_described() {
    let track = grid().storm();
    let at = |index: usize| track[index];
    let (time, place, value) = at(1);
    assert_eq!(time.rfc3339(), "1996-01-07T06:00:00Z");
    assert_eq!((place, value), (Position::clamped(31.25, -85.0), 1011.63));
    let (_, place, value) = at(5);
    assert_eq!((place, value), (Position::clamped(37.5, -75.0), 991.22));
}

#[test]
fn the_storm_is_found_followed_and_rated() {
    let grid = grid();
    let storm = grid.storm();
    for seed in [19_960_107, 3, 77] {
        let files = feed(&grid, seed);
        let (first, first_place, first_hpa) = storm[1];
        let (last, last_place, last_hpa) = storm[5];
        let now = last.plus_s(900);
        let held = held_until(&files, now);
        let picture = look(&held, &Settings::default(), now);
        let system = picture
            .systems
            .iter()
            .filter(|system| system.kind == Kind::Low)
            .min_by(|a, b| {
                a.position.distance_km(last_place).total_cmp(&b.position.distance_km(last_place))
            })
            .expect("a low");
        let error_km = system.position.distance_km(last_place);
        assert!(error_km < 150.0, "seed {seed}: {error_km} km off at the end");
        let change = system.change_24h_hpa.expect("followed for 24 hours").value;
        let expected = last_hpa - first_hpa;
        assert!((change - expected).abs() < 3.0, "seed {seed}: {change} hPa, true {expected}");
        assert!(system.since.instant() <= first.plus_s(3600), "seed {seed}: {}", system.since);
        for (time, place, _) in storm.iter().take(6).skip(1) {
            let hour = time.hour_nearest();
            let point = system
                .track
                .iter()
                .find(|point| point.hour == hour)
                .unwrap_or_else(|| panic!("seed {seed}: not followed at {hour}"));
            let error_km = point.position.distance_km(*place);
            assert!(error_km < 150.0, "seed {seed} {hour}: {error_km} km off");
        }
        assert!(first_place.distance_km(system.track[0].position) < 400.0);
    }
}
