//! What a scenario must keep to.

use super::{Area, FixedPlace, Scenario, ScenarioError};

/// Refuses the first value that makes no sense.
pub(super) fn check(scenario: &Scenario) -> Result<(), ScenarioError> {
    let s = scenario;
    ask(s.start.unix_s().rem_euclid(3600) == 0, "start", "a whole hour", s.start)?;
    ask((1..=240).contains(&s.hours), "hours", "1 to 240", s.hours)?;
    letters("centre", &s.centre, 4)?;
    range("instrument_error_factor", s.instrument_error_factor, 0.0, 10.0)?;
    let b = &s.background;
    range("background.equatorward_hpa", b.equatorward_hpa, 950.0, 1050.0)?;
    range("background.poleward_hpa", b.poleward_hpa, 950.0, 1050.0)?;
    range("background.from_latitude_deg", b.from_latitude_deg, 0.0, 89.0)?;
    range("background.to_latitude_deg", b.to_latitude_deg, b.from_latitude_deg + 1.0, 90.0)?;
    range("climate.air_at_45_c", s.climate.air_at_45_c, -30.0, 35.0)?;
    range("climate.sea_at_45_c", s.climate.sea_at_45_c, -2.0, 32.0)?;
    range("climate.air_per_degree_c", s.climate.air_per_degree_c, -2.0, 2.0)?;
    range("climate.sea_per_degree_c", s.climate.sea_per_degree_c, -2.0, 2.0)?;
    range("climate.daily_swing_land_c", s.climate.daily_swing_land_c, 0.0, 15.0)?;
    range("climate.land_offset_c", s.climate.land_offset_c, -20.0, 20.0)?;
    for system in &s.systems {
        let place = format!("system {:?}", system.name);
        ask(!system.points.is_empty(), &place, "at least one point", 0)?;
        let mut last = f64::NEG_INFINITY;
        for p in &system.points {
            ask(p.hour.is_finite() && p.hour > last, &place, "ascending hours", p.hour)?;
            last = p.hour;
            at(&place, p.latitude_deg, p.longitude_deg)?;
            range(&place, p.anomaly_hpa, -120.0, 60.0)?;
            range(&place, p.radius_km, 200.0, 5000.0)?;
        }
    }
    for land in &s.land {
        letters("land.area", &land.area, 2)?;
        every("land.every_hours", land.every_hours)?;
        for station in &land.stations {
            digits("land.stations", &station.0)?;
            fixed("land.stations", station)?;
        }
    }
    for aerodromes in &s.aerodromes {
        letters("aerodromes.area", &aerodromes.area, 2)?;
        let before = aerodromes.minutes_before;
        ask((0..30).contains(&before), "aerodromes.minutes_before", "0 to 29", before)?;
        for station in &aerodromes.stations {
            letters("aerodromes.stations", &station.0, 4)?;
            fixed("aerodromes.stations", station)?;
        }
    }
    for ships in &s.ships {
        area("ships.area", &ships.area)?;
        letters("ships.letters", &ships.letters, 2)?;
        every("ships.every_hours", ships.every_hours)?;
        ask(ships.count <= 99, "ships.count", "at most 99", ships.count)?;
        range("ships.speed_kt", ships.speed_kt.0, 0.0, 40.0)?;
        range("ships.speed_kt", ships.speed_kt.1, ships.speed_kt.0, 40.0)?;
    }
    for buoys in &s.buoys {
        area("buoys.area", &buoys.area)?;
        every("buoys.every_hours", buoys.every_hours)?;
        ask(buoys.count <= 900, "buoys.count", "at most 900", buoys.count)?;
        let first = buoys.first_number;
        ask((11_000..99_000).contains(&first), "buoys.first_number", "five digits", first)?;
    }
    for table in &s.tables {
        every("tables.every_hours", table.every_hours)?;
        let word_ok = (1..=12).contains(&table.word.len())
            && table.word.bytes().all(|byte| byte.is_ascii_uppercase());
        ask(word_ok, "tables.word", "1 to 12 capital letters", &table.word)?;
        ask(table.count <= 99, "tables.count", "at most 99", table.count)?;
        if let Some(box_) = &table.area {
            area("tables.area", box_)?;
        }
        for station in &table.stations {
            fixed("tables.stations", station)?;
        }
    }
    let minutes = s.feed.collect_minutes;
    ask(
        (1..=60).contains(&minutes) && 60 % minutes == 0,
        "feed.collect_minutes",
        "a divisor of 60",
        minutes,
    )?;
    let f = &s.faults;
    for (place, percent) in [
        ("feed.gzip_percent", s.feed.gzip_percent),
        ("feed.envelope_percent", s.feed.envelope_percent),
        ("faults.missing_percent", f.missing_percent),
        ("faults.late_percent", f.late_percent),
        ("faults.repeated_percent", f.repeated_percent),
        ("faults.corrected_percent", f.corrected_percent),
        ("faults.garbled_percent", f.garbled_percent),
        ("faults.sign_slip_percent", f.sign_slip_percent),
        ("faults.misplaced_percent", f.misplaced_percent),
    ] {
        range(place, percent, 0.0, 100.0)?;
    }
    range("faults.bias_hpa", f.bias_hpa, -50.0, 50.0)
}

fn ask(
    holds: bool,
    place: &str,
    expected: &'static str,
    found: impl std::fmt::Display,
) -> Result<(), ScenarioError> {
    if holds {
        return Ok(());
    }
    let found = format!("{:?}", found.to_string());
    Err(ScenarioError::Value { place: place.to_owned(), expected, found })
}

fn range(place: &str, value: f64, low: f64, high: f64) -> Result<(), ScenarioError> {
    ask((low..=high).contains(&value), place, "a value within its limits", value)
}

fn letters(place: &str, text: &str, count: usize) -> Result<(), ScenarioError> {
    let holds = text.len() == count && text.bytes().all(|byte| byte.is_ascii_uppercase());
    ask(holds, place, "capital letters of the right number", text)
}

fn digits(place: &str, text: &str) -> Result<(), ScenarioError> {
    let holds = text.len() == 5 && text.bytes().all(|byte| byte.is_ascii_digit());
    ask(holds, place, "five digits", text)
}

fn every(place: &str, hours: i64) -> Result<(), ScenarioError> {
    ask(matches!(hours, 1 | 3 | 6), place, "1, 3 or 6", hours)
}

fn at(place: &str, latitude_deg: f64, longitude_deg: f64) -> Result<(), ScenarioError> {
    range(place, latitude_deg, -90.0, 90.0)?;
    range(place, longitude_deg, -180.0, 180.0)
}

fn fixed(place: &str, station: &FixedPlace) -> Result<(), ScenarioError> {
    at(place, station.1, station.2)?;
    range(place, station.3, -100.0, 3000.0)
}

fn area(place: &str, area: &Area) -> Result<(), ScenarioError> {
    at(place, area.south_deg, area.west_deg)?;
    at(place, area.north_deg, area.east_deg)?;
    ask(area.south_deg < area.north_deg, place, "south of north", area.south_deg)
}
