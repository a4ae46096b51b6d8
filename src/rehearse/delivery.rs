//! What is sent, when, and what goes wrong on the way: reports become bulletins, bulletins files.

use std::collections::BTreeMap;
use std::io::Write;

use flate2::{Compression, GzBuilder};

use super::bulletin::{Bulletin, Wrapping, stamp};
use super::dice::Dice;
use super::form::{Slip, buoy, metar, ship, synop, table};
use super::measured::{Eye, Measured};
use super::scenario::{Scenario, TableForm, WindUnit};
use super::station::{Station, Voice};
use super::truth::PlantedFault;
use super::{FeedFile, garble};
use crate::instant::Instant;

/// Minutes after its end for which the scenario still delivers.
const AFTER_END_MIN: i64 = 60;

/// Why a report is sent; the order is that of the bulletins in a file.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
enum Sending {
    First,
    Again,
    Late,
    Corrected,
}

/// Which bulletin a report goes into: when it is sent, its heading, its time, why it is sent.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Debug)]
struct Gathering {
    due: Instant,
    heading: String,
    time: Instant,
    sending: Sending,
    opening: Option<String>,
}

/// Everything that is sent, in order, and what was planted in it.
#[derive(Clone, PartialEq, Debug, Default)]
pub(super) struct Plan {
    bulletins: BTreeMap<Gathering, Vec<String>>,
    tables: BTreeMap<(Instant, TableForm, String), Vec<String>>,
    pub(super) faults: Vec<PlantedFault>,
    pub(super) reports: usize,
}

struct Planner<'a> {
    scenario: &'a Scenario,
    dice: Dice,
    last: Instant,
    plan: Plan,
}

/// Lets every station observe for every hour and decides what becomes of its reports.
pub(super) fn plan(scenario: &Scenario, stations: &[Station], eye: &Eye<'_>) -> Plan {
    let last = eye.start.plus_s(scenario.hours * 3600 + 60 * AFTER_END_MIN);
    let dice = Dice::new(scenario.seed).word("delivery");
    let mut planner = Planner { scenario, dice, last, plan: Plan::default() };
    planner.plan.faults = stations.iter().flat_map(|s| chronic_faults(s, eye.start)).collect();
    for hour in 0..=scenario.hours {
        for station in stations {
            if let Some(time) = station.observes(eye.start, hour) {
                planner.report(station, time, eye);
            }
        }
    }
    planner.plan.faults.sort_by(|a, b| (a.time, &a.station).cmp(&(b.time, &b.station)));
    planner.plan
}

fn chronic_faults(station: &Station, start: Instant) -> Vec<PlantedFault> {
    let chronic = &station.chronic;
    let fault = |hour: i64, what: String| PlantedFault {
        station: station.id.clone(),
        time: start.plus_s(hour * 3600),
        what,
    };
    let mut faults = Vec::new();
    if chronic.bias_hpa != 0.0 {
        faults
            .push(fault(0, format!("barometer wrong by {:+.1} hPa throughout", chronic.bias_hpa)));
    }
    if let Some(hour) = chronic.stuck_from_h {
        faults.push(fault(hour, "barometer stuck from here on".to_owned()));
    }
    if chronic.wrong_unit {
        faults.push(fault(0, "wind in the wrong unit throughout".to_owned()));
    }
    if let Some((from, to)) = chronic.silent_h {
        faults.push(fault(from, format!("silent for {} hours", to - from)));
    }
    faults
}

impl Planner<'_> {
    fn report(&mut self, station: &Station, time: Instant, eye: &Eye<'_>) {
        let faults = &self.scenario.faults;
        let dice = self.dice.word(&station.id).number(time.unix_s());
        if dice.word("missing").happens(faults.missing_percent) {
            if matches!(station.voice, Voice::Synop { .. }) && dice.word("nil").happens(50.0) {
                let transit_min = transit_minutes(station, time, self.dice);
                let text = format!("{} NIL=", station.id);
                self.send(station, time, transit_min, Sending::First, text);
            } else {
                self.plant(station, time, "missing");
            }
            return;
        }
        let m = eye.measure(station, time);
        let at_sea = matches!(station.voice, Voice::Ship { .. });
        let corrected = dice.word("corrected").happens(faults.corrected_percent);
        let slip = if corrected {
            Slip::PressureTens
        } else if at_sea && dice.word("misplaced").happens(faults.misplaced_percent) {
            self.plant(station, time, "east and west exchanged");
            Slip::Meridian
        } else if m.change_3h_tenths != 0
            && dice.word("sign").happens(faults.sign_slip_percent)
            && !matches!(station.voice, Voice::Metar { .. })
        {
            self.plant(station, time, "3-hour change with the wrong sign");
            Slip::ChangeSign
        } else {
            Slip::None
        };
        let mut text = write(station, &m, slip, false);
        let is_table = matches!(station.voice, Voice::Table { .. });
        if !is_table && dice.word("garbled").happens(faults.garbled_percent) {
            let (garbled, what) = garble::garble(&text, dice.word("how"));
            text = garbled;
            self.plant(station, time, &what);
        }
        let on_time_min = transit_minutes(station, time, self.dice);
        let late = dice.word("late").happens(faults.late_percent);
        let (transit_min, sending) = if late {
            let extra_min = dice.word("by").between(60.0, 480.0);
            self.plant(station, time, &format!("late by {extra_min:.0} minutes"));
            (on_time_min + extra_min, Sending::Late)
        } else {
            (on_time_min, Sending::First)
        };
        self.send(station, time, transit_min, sending, text.clone());
        if corrected {
            let after_min = dice.word("after").between(40.0, 110.0);
            self.plant(
                station,
                time,
                &format!("pressure 10 hPa too high, corrected after {after_min:.0} minutes"),
            );
            let text = write(station, &m, Slip::None, true);
            self.send(station, time, transit_min + after_min, Sending::Corrected, text);
        } else if dice.word("again").happens(faults.repeated_percent) {
            let after_min = dice.word("after").between(5.0, 90.0);
            self.plant(station, time, &format!("sent again after {after_min:.0} minutes"));
            self.send(station, time, transit_min + after_min, Sending::Again, text);
        }
    }

    fn plant(&mut self, station: &Station, time: Instant, what: &str) {
        let (station, what) = (station.id.clone(), what.to_owned());
        self.plan.faults.push(PlantedFault { station, time, what });
    }

    /// Puts a report into the bulletin or table of the collecting period it falls into.
    fn send(
        &mut self,
        station: &Station,
        time: Instant,
        transit_min: f64,
        sending: Sending,
        text: String,
    ) {
        let period_s = 60 * self.scenario.feed.collect_minutes;
        let sent = time.plus_s(crate::quantity::whole_nearest(60.0 * transit_min));
        let due = Instant::from_unix_s((sent.unix_s().div_euclid(period_s) + 1) * period_s);
        if due > self.last {
            return;
        }
        self.plan.reports += usize::from(!text.ends_with("NIL="));
        if let Voice::Table { form, word, .. } = &station.voice {
            self.plan.tables.entry((due, *form, word.clone())).or_default().push(text);
            return;
        }
        let again = sending == Sending::Again;
        let gathering = Gathering {
            due,
            heading: heading(station, time, again),
            time: standard_time(station, time),
            sending,
            opening: match &station.voice {
                Voice::Synop { wind, .. } => Some(synop::opening(time, *wind)),
                _ => None,
            },
        };
        self.plan.bulletins.entry(gathering).or_default().push(text);
    }
}

/// Minutes from the observation until the report is sent.
fn transit_minutes(station: &Station, time: Instant, dice: Dice) -> f64 {
    let each = dice.word(&station.id).word("transit").number(time.unix_s());
    match &station.voice {
        Voice::Synop { area, .. } => {
            dice.word(area).word("transit").number(time.unix_s()).between(4.0, 14.0)
        }
        Voice::Metar { .. } => each.between(2.0, 6.0),
        Voice::Ship { .. } => each.between(10.0, 55.0),
        Voice::Buoy => each.between(12.0, 48.0),
        Voice::Table { .. } => each.between(5.0, 16.0),
    }
}

/// The time of the heading: the standard time of observation, whole hours but for aerodromes.
fn standard_time(station: &Station, time: Instant) -> Instant {
    match station.voice {
        Voice::Metar { .. } => time,
        _ => time.hour_nearest().instant(),
    }
}

/// TTAAii. SM, SI and SN for main, intermediate and other hours; SA for METAR; SS for buoys;
/// VX for ships of more than one area (WMO-No. 386, Table B1 and C1, from memory).
fn heading(station: &Station, time: Instant, again: bool) -> String {
    let hour = time.hour_nearest().unix_h();
    let synoptic = match (hour.rem_euclid(6), hour.rem_euclid(3)) {
        (0, _) => "SM",
        (_, 0) => "SI",
        _ => "SN",
    };
    let (kind, area, number) = match &station.voice {
        Voice::Synop { area, .. } => (synoptic, area.as_str(), 1),
        Voice::Metar { area, .. } => ("SA", area.as_str(), 31),
        Voice::Ship { .. } => (synoptic, "VX", 21),
        Voice::Buoy | Voice::Table { .. } => ("SS", "VX", 11),
    };
    format!("{kind}{area}{:02}", number + if again { 40 } else { 0 })
}

/// A report in the station's own form.
fn write(station: &Station, m: &Measured, slip: Slip, corrected: bool) -> String {
    let id = &station.id;
    match &station.voice {
        Voice::Synop { wind, manned, .. } => {
            let wind = match (station.chronic.wrong_unit, wind) {
                (false, unit) => *unit,
                (true, WindUnit::Knots) => WindUnit::MetresPerSecond,
                (true, WindUnit::MetresPerSecond) => WindUnit::Knots,
            };
            let day_change = m.time.hour_floor().unix_h().rem_euclid(12) == 0;
            synop::write(id, m, synop::Habit { wind, manned: *manned, day_change }, slip)
        }
        Voice::Ship { wind, measured } => ship::write(id, m, *wind, *measured, slip),
        Voice::Buoy => buoy::write(id, m, slip),
        Voice::Metar { altimeter, manned, .. } => {
            let habit = metar::Habit { altimeter: *altimeter, manned: *manned, corrected };
            metar::write(id, m, habit, slip)
        }
        Voice::Table { form, .. } => {
            let (height_m, surface) = (station.height_m, station.surface());
            match form {
                TableForm::Csv => table::csv_row(id, m, height_m, surface, slip),
                TableForm::Json => table::json_line(id, m, height_m, surface, slip),
            }
        }
    }
}

impl Plan {
    /// The files in the order they are due, and by name where due together.
    pub(super) fn files(&self, scenario: &Scenario) -> Vec<FeedFile> {
        let dice = Dice::new(scenario.seed).word("files");
        let mut letters: BTreeMap<(String, Instant, Sending), u8> = BTreeMap::new();
        let mut texts: BTreeMap<Instant, (String, String)> = BTreeMap::new();
        for (number, (key, reports)) in (0_u32..).zip(&self.bulletins) {
            let revision = match key.sending {
                Sending::First | Sending::Again => None,
                Sending::Late | Sending::Corrected => {
                    let of = (key.heading.clone(), key.time, key.sending);
                    let letter = letters.entry(of).or_insert(b'A');
                    let word = if key.sending == Sending::Late { "RR" } else { "CC" };
                    let revision = format!("{word}{}", char::from(*letter));
                    // The letters run to X.
                    *letter = (*letter + 1).min(b'X');
                    Some(revision)
                }
            };
            let bulletin = Bulletin {
                heading: key.heading.clone(),
                centre: scenario.centre.clone(),
                time: key.time,
                revision,
                opening: key.opening.clone(),
                reports: reports.clone(),
            };
            let dice = dice.word("wrapping").number(i64::from(number));
            let wrapping = if dice.word("envelope").happens(scenario.feed.envelope_percent) {
                if dice.word("alphabet").happens(20.0) {
                    Wrapping::Signals(number)
                } else {
                    Wrapping::Enveloped(number)
                }
            } else if dice.word("lines").happens(50.0) {
                Wrapping::Teleprinter
            } else {
                Wrapping::Plain
            };
            let (_, text) = texts
                .entry(key.due)
                .or_insert_with(|| (bulletin.file_name(key.due) + ".txt", String::new()));
            text.push_str(&bulletin.text(wrapping));
        }
        let mut files: Vec<FeedFile> = Vec::new();
        let mut add = |due: Instant, name: String, text: &str| {
            let press = dice.word(&name).happens(scenario.feed.gzip_percent);
            files.push(if press {
                FeedFile { due, name: name + ".gz", bytes: gzip(text.as_bytes()) }
            } else {
                FeedFile { due, name, bytes: text.as_bytes().to_vec() }
            });
        };
        for (due, (name, text)) in texts {
            add(due, name, &text);
        }
        for ((due, form, word), rows) in &self.tables {
            let name = format!("Z_{word}_C_{}_{}", scenario.centre, stamp(*due));
            match form {
                TableForm::Csv => {
                    let text = table::csv_header() + "\n" + &rows.join("\n") + "\n";
                    add(*due, name + ".csv", &text);
                }
                TableForm::Json => add(*due, name + ".jsonl", &(rows.join("\n") + "\n")),
            }
        }
        files.sort_by(|a, b| (a.due, &a.name).cmp(&(b.due, &b.name)));
        files
    }
}

/// RFC 1952, without a time or a name, so that the same text gives the same bytes.
fn gzip(bytes: &[u8]) -> Vec<u8> {
    let mut writer = GzBuilder::new().write(Vec::new(), Compression::best());
    // Writing to memory cannot fail; if it did, the plain bytes are as good a file.
    match writer.write_all(bytes).and_then(|()| writer.finish()) {
        Ok(pressed) => pressed,
        Err(_) => bytes.to_vec(),
    }
}
