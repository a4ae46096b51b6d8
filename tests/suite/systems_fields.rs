//! Highs and lows on real fields: the storm of January 1996 and the globe of 10 November 1994.
//!
//! Both come from fields of other makers (tests/data/SOURCES.md).

use std::collections::BTreeMap;
use std::io::Read as _;
use std::sync::Arc;

use flate2::read::GzDecoder;
use glasskeeper::analysis::HourAnalysis;
use glasskeeper::field::Grid;
use glasskeeper::instant::{Hour, Instant};
use glasskeeper::sphere::Position;
use glasskeeper::systems::centre::{Centre, centres};
use glasskeeper::systems::follow::{Followed, HourCentres, Wishes, follow};
use glasskeeper::systems::names::NameBook;
use glasskeeper::systems::{Kind, System};

/// Fields on latitudes and longitudes, both ascending; missing values are NaN.
struct Fields {
    latitudes_deg: Vec<f64>,
    longitudes_deg: Vec<f64>,
    values: BTreeMap<String, Vec<Vec<f64>>>,
}

#[expect(clippy::disallowed_methods, reason = "a test reads its data")]
fn fields(name: &str) -> Fields {
    let path = format!("{}/tests/data/{name}", env!("CARGO_MANIFEST_DIR"));
    let bytes = std::fs::read(path).expect("the data file is part of the checkout");
    let mut text = String::new();
    GzDecoder::new(&bytes[..]).read_to_string(&mut text).expect("gzip of text");
    let numbers = |line: &str| -> Vec<f64> {
        line.split_whitespace().filter_map(|word| word.parse().ok()).collect()
    };
    let mut found =
        Fields { latitudes_deg: Vec::new(), longitudes_deg: Vec::new(), values: BTreeMap::new() };
    let mut current = String::new();
    for line in text.lines().filter(|line| !line.starts_with('#')) {
        if let Some(rest) = line.strip_prefix("lat ") {
            found.latitudes_deg = numbers(rest);
        } else if let Some(rest) = line.strip_prefix("lon ") {
            found.longitudes_deg = numbers(rest);
        } else if let Some(rest) = line.strip_prefix("field ") {
            rest.trim().clone_into(&mut current);
        } else {
            found.values.entry(current.clone()).or_default().push(numbers(line));
        }
    }
    found
}

/// Value and weights of a cubic through four points (Catmull and Rom 1974).
fn cubic(values: [f64; 4], t: f64) -> f64 {
    let [a, b, c, d] = values;
    b + 0.5 * t * (c - a + t * (2.0 * a - 5.0 * b + 4.0 * c - d + t * (3.0 * (b - c) + d - a)))
}

impl Fields {
    /// A smooth value at a place: cubic where all sixteen neighbours are there, bilinear where four
    /// are, else NaN.
    fn at(&self, field: &[Vec<f64>], place: Position) -> f64 {
        let step_lat = self.latitudes_deg[1] - self.latitudes_deg[0];
        let step_lon = self.longitudes_deg[1] - self.longitudes_deg[0];
        let y = (place.latitude_deg() - self.latitudes_deg[0]) / step_lat;
        let x = (place.longitude_deg() - self.longitudes_deg[0]) / step_lon;
        let count = self.longitudes_deg.len() as f64;
        // The first and last meridian of a whole turn are the same.
        let round = (count - 1.0) * step_lon > 359.0;
        let pick = |row: f64, column: f64| {
            let column = if round { column.rem_euclid(count - 1.0) } else { column };
            let index = |x: f64| usize::try_from(glasskeeper::quantity::whole_nearest(x)).ok();
            let row = index(row).and_then(|row| field.get(row));
            row.zip(index(column)).and_then(|(row, k)| row.get(k)).copied().unwrap_or(f64::NAN)
        };
        let (s, t) = (x - x.floor(), y - y.floor());
        let steps = [-1.0, 0.0, 1.0, 2.0];
        let values = steps.map(|up| steps.map(|along| pick(y.floor() + up, x.floor() + along)));
        let smooth = cubic(values.map(|row| cubic(row, s)), t);
        if smooth.is_finite() {
            return smooth;
        }
        let [_, low, high, _] = values;
        (1.0 - t) * ((1.0 - s) * low[1] + s * low[2]) + t * ((1.0 - s) * high[1] + s * high[2])
    }
}

fn on_grid(grid: &Grid, value: impl Fn(Position) -> f64) -> Vec<f64> {
    (0..grid.len()).map(|k| value(grid.position(k % grid.columns, k / grid.columns))).collect()
}

fn followed(hours: &[Arc<HourCentres>]) -> Followed {
    let (renamed, dismissed) = (BTreeMap::new(), BTreeMap::new());
    let wishes = Wishes { renamed: &renamed, dismissed: &dismissed };
    follow(hours, &[], &NameBook::default(), Hour::from_unix_h(0), &wishes)
}

fn hour(text: &str) -> Hour {
    Instant::parse(text).expect("a time").hour_floor()
}

/// The storm hour by hour, the fields of every sixth hour interpolated.
fn storm() -> Vec<Arc<HourCentres>> {
    let fields = fields("storm/jan1996_p_msl_hpa.txt.gz");
    let grid = Arc::new(Grid::fitted(22.0, 58.0, -105.0, -55.0, 61, 61));
    let six: Vec<(Hour, Vec<f64>)> = fields
        .values
        .iter()
        .map(|(time, field)| (hour(time), on_grid(&grid, |place| fields.at(field, place))))
        .collect();
    let mut out = Vec::new();
    for pair in six.windows(2) {
        let ((first, one), (_, other)) = (&pair[0], &pair[1]);
        for step in 0..6_i32 {
            let share = f64::from(step) / 6.0;
            let pressure = one.iter().zip(other).map(|(a, b)| a + share * (b - a)).collect();
            let error = vec![0.7; grid.len()];
            let at = first.plus(i64::from(step));
            let analysis = HourAnalysis::from_field(at, Arc::clone(&grid), pressure, error);
            out.push(Arc::new(HourCentres::of(&analysis)));
        }
    }
    let (last, field) = &six[six.len() - 1];
    let error = vec![0.7; grid.len()];
    let analysis = HourAnalysis::from_field(*last, Arc::clone(&grid), field.clone(), error);
    out.push(Arc::new(HourCentres::of(&analysis)));
    out
}

/// The grid minima of the field's own points (data/README of the maker's grid): 1011.6 hPa at 31.25 N
/// 85 W on 7 January 06Z, 991.2 at 37.5 N 75 W a day later, 980.6 at 41.25 N 65 W after two: 20.4 hPa
/// in the first day, 1.30 bergeron. The grid is 1.25 by 2.5 degrees, so the true minimum may lie
/// 120 km from the least grid point and be some tenths deeper.
#[test]
fn the_storm_of_january_1996_is_followed_under_one_name_and_rated() {
    let hours = storm();
    let until = |time: &str| {
        let end = hour(time);
        let part: Vec<_> = hours.iter().filter(|h| h.hour <= end).cloned().collect();
        followed(&part).systems
    };
    let near = |systems: &[System], latitude_deg: f64, longitude_deg: f64| -> System {
        let place = Position::clamped(latitude_deg, longitude_deg);
        systems
            .iter()
            .filter(|system| system.kind == Kind::Low)
            .min_by(|a, b| a.position.distance_km(place).total_cmp(&b.position.distance_km(place)))
            .cloned()
            .expect("a low")
    };
    let mut names = Vec::new();
    for (time, latitude_deg, longitude_deg, pressure_hpa) in [
        ("1996-01-07T06:00Z", 31.25, -85.0, 1011.6),
        ("1996-01-08T06:00Z", 37.5, -75.0, 991.2),
        ("1996-01-09T06:00Z", 41.25, -65.0, 980.6),
    ] {
        let low = near(&until(time), latitude_deg, longitude_deg);
        let place = Position::clamped(latitude_deg, longitude_deg);
        let off_km = low.position.distance_km(place);
        let off_hpa = low.pressure_hpa.value - pressure_hpa;
        assert!(off_km < 150.0, "{time}: {off_km} km");
        assert!((-2.5..1.5).contains(&off_hpa), "{time}: {off_hpa} hPa");
        names.push(low.name);
    }
    let whole = followed(&hours);
    let lives: Vec<_> = whole
        .systems
        .iter()
        .chain(&whole.ended)
        .map(|s| (&s.name, s.since, s.track.last().map(|point| point.hour), &s.events))
        .collect();
    assert!(names.iter().all(|name| *name == names[0]), "{names:?} {lives:#?}");
    let low = near(&until("1996-01-08T06:00Z"), 37.5, -75.0);
    let change = low.change_24h_hpa.expect("followed for a day");
    assert!((change.value + 20.4).abs() < 3.0, "{change:?}");
    let rate = low.bergeron.expect("a rate");
    assert!((rate.value - 1.30).abs() < 0.25, "{rate:?}");
    assert!(low.outlook.len() == 5 && low.course_deg.is_some_and(|c| (20.0..90.0).contains(&c)));
}

/// Extrapolations of the storm, scored against what came.
#[test]
fn outlooks_of_the_storm_are_better_than_staying_put() {
    use glasskeeper::systems::verification::{Issued, scores, summary};
    let hours = storm();
    let whole = followed(&hours);
    let mut list = Vec::new();
    for end in 12..hours.len() {
        for system in followed(&hours[..end]).systems {
            let later = whole.systems.iter().chain(&whole.ended).find(|s| s.name == system.name);
            if let (Some(issued), Some(later), Kind::Low) =
                (Issued::of(&system), later, system.kind)
            {
                list.extend(scores(&issued, &later.track));
            }
        }
    }
    for lead in summary(&list) {
        if lead.count > 10 && lead.lead_h >= 6 {
            assert!(lead.position_km < lead.staying_km, "{lead:?}");
        }
    }
    assert!(list.len() > 60, "{}", list.len());
}

/// Lows turn with the sign of the hemisphere and highs against it, by the winds that came with the
/// pressures; common practice, no source: in the southern hemisphere the lows stand in the belt of
/// the fifties and sixties, the highs in the subtropics.
#[test]
fn centres_of_the_globe_turn_the_right_way_in_both_hemispheres() {
    let fields = fields("globe_19941110_p_u_v.txt.gz");
    let [p, u, v] = ["psl_hPa", "u1000_ms", "v1000_ms"].map(|name| &fields.values[name]);
    for south in [false, true] {
        let sign = if south { -1.0 } else { 1.0 };
        let (low_deg, high_deg) = if south { (-80.0, -20.0) } else { (20.0, 80.0) };
        let mut all: Vec<Centre> = Vec::new();
        for west_deg in [-180.0, -60.0, 60.0] {
            // A third of the way round, with room to either side, one of them over the date line.
            let grid = Arc::new(Grid::fitted(
                low_deg,
                high_deg,
                west_deg - 30.0,
                west_deg + 150.0,
                121,
                101,
            ));
            let pressure = on_grid(&grid, |place| fields.at(p, place));
            let error = vec![0.7; grid.len()];
            let analysis = HourAnalysis::from_field(Hour::from_unix_h(0), grid, pressure, error);
            all.extend(centres(&analysis).into_iter().filter(|centre| {
                let east =
                    glasskeeper::quantity::wrap_360_deg(centre.position.longitude_deg() - west_deg);
                east < 120.0
            }));
        }
        let mut turning = [0, 0, 0, 0];
        for centre in &all {
            // Circulation round the centre, 500 km off, from the winds of the file.
            let circulation: f64 = (0..24)
                .map(|k| {
                    let place = centre.position.destination(f64::from(k) * 15.0, 500.0);
                    let outward = (place.bearing_deg(centre.position) + 180.0).to_radians();
                    let (east, north) = (fields.at(u, place), fields.at(v, place));
                    north * outward.sin() - east * outward.cos()
                })
                .sum();
            if !circulation.is_finite() || centre.depth_hpa < 4.0 {
                continue;
            }
            let cyclonic = circulation * sign > 0.0;
            let right = cyclonic == (centre.kind == Kind::Low);
            let at = usize::from(centre.kind == Kind::High) * 2 + usize::from(!right);
            turning[at] += 1;
        }
        let text = format!("south {south}: lows right, wrong, highs right, wrong {turning:?}");
        assert!(turning[0] >= 5 && turning[2] >= 4, "{text}");
        assert_eq!(turning[1], 0, "{text}");
        assert_eq!(turning[3], 0, "{text}");
        if south {
            let mean = |kind: Kind| {
                let list: Vec<f64> = all
                    .iter()
                    .filter(|centre| centre.kind == kind && centre.depth_hpa >= 4.0)
                    .map(|centre| -centre.position.latitude_deg())
                    // Pressure reduced from the plateau of the south polar land means nothing.
                    .filter(|south_deg| *south_deg < 66.0)
                    .collect();
                list.iter().sum::<f64>() / list.len() as f64
            };
            assert!((50.0..70.0).contains(&mean(Kind::Low)), "{}", mean(Kind::Low));
            assert!((22.0..48.0).contains(&mean(Kind::High)), "{}", mean(Kind::High));
        }
    }
}
