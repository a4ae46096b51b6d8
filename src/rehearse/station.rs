//! Who reports: invented ships, buoys and table places, and real places with invented weather.

use super::dice::Dice;
use super::scenario::{AltimeterUnit, Area, Scenario, TableForm, WindUnit};
use super::weather::Surface;
use crate::instant::Instant;
use crate::quantity::{km_from_nm, wrap_180_deg, wrap_360_deg};
use crate::sphere::Position;

/// Places tried for each new one: the one farthest from the others is taken.
const CANDIDATES: i64 = 16;

/// In which form a station reports.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Voice {
    Synop { area: String, wind: WindUnit, manned: bool },
    Ship { wind: WindUnit, measured: bool },
    Buoy,
    Metar { area: String, altimeter: AltimeterUnit, minutes_before: i64, manned: bool },
    Table { form: TableForm, word: String, land: bool },
}

/// Where a station is.
#[derive(Clone, PartialEq, Debug)]
pub(crate) enum Place {
    Fixed(Position),
    /// To and fro between two places on a constant course.
    Plying {
        from: Position,
        to: Position,
        speed_km_h: f64,
        phase_km: f64,
    },
    /// With the mean drift of the westerlies.
    Drifting {
        from: Position,
        course_deg: f64,
        speed_km_h: f64,
    },
}

/// What is wrong with a station all the time.
#[derive(Clone, Copy, PartialEq, Debug, Default)]
pub(crate) struct Chronic {
    /// Its barometer reads too high by so much, hPa.
    pub(crate) bias_hpa: f64,
    /// Its barometer sticks from this hour of the scenario on.
    pub(crate) stuck_from_h: Option<i64>,
    /// It sends its wind in the wrong unit.
    pub(crate) wrong_unit: bool,
    /// It says nothing from the first up to the second of these hours.
    pub(crate) silent_h: Option<(i64, i64)>,
}

/// A station of the feed.
#[derive(Clone, PartialEq, Debug)]
pub(crate) struct Station {
    pub(crate) id: String,
    pub(crate) voice: Voice,
    pub(crate) place: Place,
    /// Height of the ground, and of the barometer, which is reported reduced at sea.
    pub(crate) height_m: f64,
    pub(crate) every_hours: i64,
    pub(crate) chronic: Chronic,
}

impl Station {
    /// Where it is so many hours after the start.
    pub(crate) fn position(&self, hour: f64) -> Position {
        match &self.place {
            Place::Fixed(position) => *position,
            Place::Drifting { from, course_deg, speed_km_h } => {
                from.destination(*course_deg, speed_km_h * hour)
            }
            Place::Plying { from, to, speed_km_h, phase_km } => {
                let (leg_km, course_deg) = from.rhumb_to(*to);
                if leg_km < 1.0 {
                    return *from;
                }
                let run_km = (phase_km + speed_km_h * hour).rem_euclid(2.0 * leg_km);
                let out_km = if run_km < leg_km { run_km } else { 2.0 * leg_km - run_km };
                from.rhumb_destination(course_deg, out_km)
            }
        }
    }

    /// What lies under its wind.
    pub(crate) const fn surface(&self) -> Surface {
        match self.voice {
            Voice::Synop { .. } | Voice::Metar { .. } | Voice::Table { land: true, .. } => {
                Surface::Land
            }
            _ => Surface::Sea,
        }
    }

    /// When it observes for an hour of the scenario; `None` where it does not.
    pub(crate) fn observes(&self, start: Instant, hour: i64) -> Option<Instant> {
        let whole = start.plus_s(hour * 3600);
        if whole.hour_floor().unix_h().rem_euclid(self.every_hours) != 0 {
            return None;
        }
        if self.chronic.silent_h.is_some_and(|(from, to)| (from..to).contains(&hour)) {
            return None;
        }
        let minutes = match self.voice {
            Voice::Metar { minutes_before, .. } => minutes_before,
            _ => 0,
        };
        Some(whole.plus_s(-60 * minutes))
    }
}

/// All stations of a scenario, in a fixed order.
pub(crate) fn stations(scenario: &Scenario) -> Vec<Station> {
    let dice = Dice::new(scenario.seed).word("stations");
    let mut all = Vec::new();
    let station = |id: &str, voice, place, height_m, every_hours| Station {
        id: id.to_owned(),
        voice,
        place,
        height_m,
        every_hours,
        chronic: Chronic::default(),
    };
    let fixed =
        |latitude_deg, longitude_deg| Place::Fixed(Position::clamped(latitude_deg, longitude_deg));
    for land in &scenario.land {
        for (id, latitude_deg, longitude_deg, height_m) in &land.stations {
            let manned = dice.word(id).word("manned").happens(60.0);
            let voice = Voice::Synop { area: land.area.clone(), wind: land.wind, manned };
            let place = fixed(*latitude_deg, *longitude_deg);
            all.push(station(id, voice, place, *height_m, land.every_hours));
        }
    }
    for plan in &scenario.aerodromes {
        for (id, latitude_deg, longitude_deg, height_m) in &plan.stations {
            let voice = Voice::Metar {
                area: plan.area.clone(),
                altimeter: plan.altimeter,
                minutes_before: plan.minutes_before,
                manned: dice.word(id).word("manned").happens(70.0),
            };
            all.push(station(id, voice, fixed(*latitude_deg, *longitude_deg), *height_m, 1));
        }
    }
    for plan in &scenario.ships {
        let dice = dice.word("ships").word(&plan.letters);
        let places = scatter(&plan.area, plan.count, dice);
        for (n, from) in (1_i64..).zip(places) {
            let dice = dice.number(n);
            let to = scatter(&plan.area, 1, dice.word("to")).pop().unwrap_or(from);
            let speed_kt = dice.word("speed").between(plan.speed_kt.0, plan.speed_kt.1);
            let voice = Voice::Ship {
                wind: if dice.word("unit").happens(80.0) {
                    WindUnit::Knots
                } else {
                    WindUnit::MetresPerSecond
                },
                measured: dice.word("measured").happens(60.0),
            };
            let place = Place::Plying { from, to, speed_km_h: km_from_nm(speed_kt), phase_km: 0.0 };
            let id = format!("Q{}{n:02}", plan.letters);
            all.push(station(&id, voice, place, 0.0, plan.every_hours));
        }
    }
    for plan in &scenario.buoys {
        let dice = dice.word("buoys").number(i64::from(plan.first_number));
        for (n, from) in (0_u32..).zip(scatter(&plan.area, plan.count, dice)) {
            let dice = dice.number(i64::from(n));
            let place = if plan.drifting {
                let course_deg = dice.word("course").between(60.0, 120.0);
                let speed_km_h = dice.word("drift").between(0.3, 1.2);
                Place::Drifting { from, course_deg, speed_km_h }
            } else {
                Place::Fixed(from)
            };
            let id = format!("{:05}", plan.first_number + n);
            all.push(station(&id, Voice::Buoy, place, 0.0, plan.every_hours));
        }
    }
    for plan in &scenario.tables {
        let voice = |land| Voice::Table { form: plan.form, word: plan.word.clone(), land };
        for (id, latitude_deg, longitude_deg, height_m) in &plan.stations {
            let place = fixed(*latitude_deg, *longitude_deg);
            all.push(station(id, voice(true), place, *height_m, plan.every_hours));
        }
        if let Some(area) = &plan.area {
            let places = scatter(area, plan.count, dice.word("tables").word(&plan.word));
            for (n, position) in (1_i64..).zip(places) {
                let id = format!("INVENTED-{}-{n}", plan.word);
                let place = Place::Fixed(position);
                all.push(station(&id, voice(false), place, 0.0, plan.every_hours));
            }
        }
    }
    afflict(scenario, &mut all);
    all
}

/// Gives the chronic faults to stations that have none.
fn afflict(scenario: &Scenario, stations: &mut [Station]) {
    let faults = &scenario.faults;
    let dice = Dice::new(scenario.seed).word("chronic");
    let mut hit =
        |word: &str, count: usize, fits: fn(&Voice) -> bool, with: &dyn Fn(Dice) -> Chronic| {
            let mut given = 0;
            for n in 0..10_000 {
                if given == count {
                    break;
                }
                let dice = dice.word(word).number(n);
                let index = dice.below(stations.len());
                if let Some(station) = stations.get_mut(index)
                    && fits(&station.voice)
                    && station.chronic == Chronic::default()
                {
                    station.chronic = with(dice.word("how"));
                    given += 1;
                }
            }
        };
    hit("biased", faults.biased_stations, |v| !matches!(v, Voice::Table { .. }), &|dice| {
        let sign = if dice.word("sign").happens(50.0) { 1.0 } else { -1.0 };
        Chronic { bias_hpa: sign * faults.bias_hpa, ..Chronic::default() }
    });
    hit("stuck", faults.stuck_stations, |v| matches!(v, Voice::Buoy), &|dice| Chronic {
        stuck_from_h: i64::try_from(6 + dice.word("from").below(12)).ok(),
        ..Chronic::default()
    });
    hit("unit", faults.wrong_unit_stations, |v| matches!(v, Voice::Synop { .. }), &|_| Chronic {
        wrong_unit: true,
        ..Chronic::default()
    });
    hit("silent", faults.silent_stations, |_| true, &|dice| {
        let from = i64::try_from(8 + dice.word("from").below(20)).unwrap_or(8);
        let long = i64::try_from(6 + dice.word("long").below(12)).unwrap_or(6);
        Chronic { silent_h: Some((from, from + long)), ..Chronic::default() }
    });
}

/// Places spread over a box: each is the one of several candidates that is farthest from the
/// places there are (Mitchell 1991, SIGGRAPH, best candidate).
fn scatter(area: &Area, count: usize, dice: Dice) -> Vec<Position> {
    let width_deg = {
        let width = wrap_360_deg(area.east_deg - area.west_deg);
        if width == 0.0 { 360.0 } else { width }
    };
    let (low, high) = (area.south_deg.to_radians().sin(), area.north_deg.to_radians().sin());
    let mut places: Vec<Position> = Vec::with_capacity(count);
    for n in (0_i64..).take(count) {
        let mut best: Option<(f64, Position)> = None;
        for candidate in 0..CANDIDATES {
            let dice = dice.word("place").number(n).number(candidate);
            let latitude_deg = dice.word("y").between(low, high).asin().to_degrees();
            let longitude_deg = area.west_deg + width_deg * dice.word("x").unit();
            let place = Position::clamped(latitude_deg, wrap_180_deg(longitude_deg));
            let room =
                places.iter().map(|other| other.distance_km(place)).fold(f64::INFINITY, f64::min);
            if best.is_none_or(|(most, _)| room > most) {
                best = Some((room, place));
            }
        }
        places.extend(best.map(|(_, place)| place));
    }
    places
}
