//! Section 1: the elements for international exchange (METHODS COD-3).
//!
//! `iRixhVV Nddff` stand at the head by position; every group after them shows by its first
//! figure what it is. Groups ascend, but one garbled first figure must not cost the groups after
//! it, so any order is read. What comes twice and differs is not believed either time.

use super::element;
use super::pressure::{GroupFour, group_four, unwrap_pressure_hpa};
use crate::instant::{HOUR_S, Instant};
use crate::report::{Platform, Report};
use crate::wire::group::{Figures, Group, Groups};
use crate::wire::listener::Listener;
use crate::wire::wind_unit::WindUnit;

/// Minutes that 9GGgg may differ from the hour of the report; more is a slip.
const ACTUAL_TIME_MINUTES_MAX: i64 = 90;

/// What section 1 has given so far.
#[derive(Debug)]
pub(crate) struct Section1<'a> {
    /// The report as far as it is known.
    pub report: Report,
    /// The wind unit.
    pub unit: Option<WindUnit>,
    /// The first group seen with each first figure, 1 to 9.
    seen: [Option<Group<'a>>; 10],
    last: u8,
}

impl<'a> Section1<'a> {
    /// An empty section 1 for a report that is known, timed and placed.
    pub(crate) fn new(report: &Report, unit: Option<WindUnit>) -> Self {
        Self { report: *report, unit, seen: [None; 10], last: 0 }
    }

    /// The groups that are known by their place: `iRixhVV Nddff (00fff)`.
    pub(crate) fn positional<L: Listener>(&mut self, groups: &mut Groups<'a>, listener: &mut L) {
        let Some(first) = groups.peek() else { return };
        if is_indicator(first) {
            return;
        }
        groups.next();
        if first.is_coded(5) {
            listener.part(first, || station_words(first));
        } else {
            listener.complain(first, "section 1, iRixhVV: five figures", || {
                "cloud base and visibility cannot be read".to_owned()
            });
        }
        let Some(wind) = groups.peek() else { return };
        if is_indicator(wind) {
            return;
        }
        groups.next();
        if !wind.is_coded(5) {
            listener.complain(wind, "section 1, Nddff: five figures", || {
                "the wind cannot be read".to_owned()
            });
            return;
        }
        self.wind(wind, groups, listener);
    }

    /// `Nddff`, or `0ddff` of FM 18, with the `00fff` that may follow it.
    pub(crate) fn wind<L: Listener>(
        &mut self,
        group: Group<'a>,
        groups: &mut Groups<'a>,
        listener: &mut L,
    ) {
        let (direction, mut speed) = (group.figures(1, 3), group.figures(3, 5));
        let mut speed_group = None;
        if let Some(next) = groups.peek()
            && next.text.starts_with(b"00")
            && next.is_coded(5)
            && speed == Figures::Value(99)
        {
            groups.next();
            speed = next.figures(2, 5);
            speed_group = Some(next);
        }
        let Some(unit) = self.unit else {
            listener.part(group, || "wind in an unknown unit: not used".to_owned());
            return;
        };
        self.report.wind_source = unit.source;
        self.report.wind_speed_m_s = speed.value().map(|coded| unit.speed_m_s(coded));
        match (direction, speed) {
            (Figures::Value(0), Figures::Value(0)) => {
                self.report.wind_from_deg = Some(0.0);
                listener.part(group, || "calm".to_owned());
            }
            (Figures::Value(0), Figures::Value(coded)) => {
                listener.complain(group, "code table 0877, dd: 00 is calm", || {
                    format!("calm, yet a speed of {}: no direction", unit.words(coded))
                });
            }
            (Figures::Value(tens @ 1..=36), speed) => {
                self.report.wind_from_deg = Some(f64::from(tens * 10));
                listener.part(group, || {
                    let from = format!("wind from {:03} deg", tens * 10);
                    speed.value().map_or_else(
                        || format!("{from}, speed not reported"),
                        |coded| format!("{from} at {}", unit.words(coded)),
                    )
                });
            }
            (Figures::Value(99), speed) => {
                self.report.wind_variable = true;
                listener.part(group, || {
                    speed.value().map_or_else(
                        || "wind variable, speed not reported".to_owned(),
                        |coded| format!("wind variable at {}", unit.words(coded)),
                    )
                });
            }
            (Figures::Value(tens), _) => {
                listener.complain(group, "code table 0877, dd: 00 to 36 or 99", || {
                    format!("direction {tens} does not exist: not used")
                });
            }
            (_, speed) => listener.part(group, || {
                speed.value().map_or_else(
                    || "wind not reported".to_owned(),
                    |coded| format!("wind speed {}, direction not reported", unit.words(coded)),
                )
            }),
        }
        if let Some(group) = speed_group {
            listener.part(group, || {
                speed.value().map_or_else(
                    || "wind speed not reported".to_owned(),
                    |coded| format!("wind speed {}", unit.words(coded)),
                )
            });
        }
    }

    /// A group after the first two.
    pub(crate) fn group<L: Listener>(
        &mut self,
        group: Group<'a>,
        nominal: Instant,
        listener: &mut L,
    ) {
        if !group.is_coded(5) {
            listener.complain(group, "section 1: five figures or solidi", || {
                "the group cannot be read".to_owned()
            });
            return;
        }
        let Some(number) = group.figure(0) else {
            listener.part(group, || "not reported".to_owned());
            return;
        };
        if number == 0 {
            listener.complain(group, "section 1, 00fff: only after ff = 99", || {
                "no group 0 is due here: not used".to_owned()
            });
            return;
        }
        if let Some(slot) = self.seen.get_mut(usize::from(number)) {
            if let Some(before) = *slot {
                if before.text == group.text {
                    listener.part(group, || "repeated".to_owned());
                } else {
                    self.withdraw(number, nominal);
                    listener.complain(group, "section 1: each group once", || {
                        format!("a second group {number} that differs: neither is used")
                    });
                }
                return;
            }
            *slot = Some(group);
        }
        if number < self.last {
            listener.complain(group, "section 1: groups in ascending order", || {
                format!("group {number} after group {}: read all the same", self.last)
            });
        }
        self.last = number;
        self.read(number, group, nominal, listener);
    }

    fn read<L: Listener>(
        &mut self,
        number: u8,
        group: Group<'a>,
        nominal: Instant,
        listener: &mut L,
    ) {
        let report = &mut self.report;
        match number {
            1 => {
                report.air_temperature_c =
                    element::temperature_c(group, "air temperature", "section 1, 1snTTT", listener);
            }
            2 if group.figure(1) == Some(9) => humidity(group, report, listener),
            2 => {
                report.dew_point_c =
                    element::temperature_c(group, "dew point", "section 1, 2snTdTdTd", listener);
            }
            3 => match group.figures(1, 5) {
                Figures::Value(coded) => {
                    report.pressure_station_hpa = unwrap_pressure_hpa(coded);
                    let value = report.pressure_station_hpa;
                    listener.part(group, || {
                        format!("station pressure {:.1} hPa", value.unwrap_or_default())
                    });
                }
                _ => listener.part(group, || "station pressure not reported".to_owned()),
            },
            4 => four(group, report, listener),
            5 => {
                if let Some(tendency) = element::tendency(group, "section 1, 5appp", listener) {
                    report.characteristic = tendency.characteristic;
                    report.pressure_change_3h_hpa = tendency.change_hpa;
                }
            }
            6 => listener.part(group, || "precipitation".to_owned()),
            7 => listener.part(group, || "present and past weather".to_owned()),
            8 => listener.part(group, || "cloud".to_owned()),
            _ => actual_time(group, report, nominal, listener),
        }
    }

    /// Takes back what a group gave.
    fn withdraw(&mut self, number: u8, nominal: Instant) {
        let report = &mut self.report;
        match number {
            1 => report.air_temperature_c = None,
            2 => {
                report.dew_point_c = None;
                report.relative_humidity_percent = None;
            }
            3 => report.pressure_station_hpa = None,
            4 => {
                report.pressure_msl_hpa = None;
                report.standard_surface = None;
            }
            5 => {
                report.characteristic = None;
                report.pressure_change_3h_hpa = None;
            }
            9 => report.time = nominal,
            _ => {}
        }
    }

    /// Settles what only the whole section can tell: a group 4 that came before its group 3.
    pub(crate) fn finish(&mut self) {
        let Some(Some(group)) = self.seen.get(4) else { return };
        let report = &mut self.report;
        if let (Figures::Value(coded), true) = (
            group.figures(1, 5),
            report.pressure_msl_hpa.is_some() || report.standard_surface.is_some(),
        ) {
            assign_four(group_four(coded, report.platform, report.pressure_station_hpa), report);
        }
    }
}

fn is_indicator(group: Group<'_>) -> bool {
    matches!(group.text, b"333" | b"444" | b"555")
}

/// `iRixhVV` in words: what it says of the station (code table 1860).
fn station_words(group: Group<'_>) -> String {
    let manned = match group.figure(1) {
        Some(1..=3) => "manned station",
        Some(4..=7) => "automatic station",
        _ => "station of unknown kind",
    };
    format!("{manned}; cloud base and visibility")
}

fn humidity<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    match group.figures(2, 5) {
        Figures::Value(percent @ 0..=100) => {
            report.relative_humidity_percent = Some(f64::from(percent));
            listener.part(group, || format!("relative humidity {percent} %"));
        }
        Figures::Value(percent) => {
            listener.complain(group, "section 1, 29UUU: 000 to 100", || {
                format!("a humidity of {percent} % does not exist: not used")
            });
        }
        _ => listener.part(group, || "relative humidity not reported".to_owned()),
    }
}

fn assign_four(found: Option<GroupFour>, report: &mut Report) {
    match found {
        Some(GroupFour::SeaLevel(pressure_hpa)) => {
            report.pressure_msl_hpa = Some(pressure_hpa);
            report.standard_surface = None;
        }
        Some(GroupFour::Height(surface)) => {
            report.pressure_msl_hpa = None;
            report.standard_surface = Some(surface);
        }
        None => {}
    }
}

fn four<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    let Figures::Value(coded) = group.figures(1, 5) else {
        listener.part(group, || "sea-level pressure not reported".to_owned());
        return;
    };
    let found = group_four(coded, report.platform, report.pressure_station_hpa);
    assign_four(found, report);
    match found {
        Some(GroupFour::SeaLevel(pressure_hpa)) => {
            listener.part(group, || format!("sea-level pressure {pressure_hpa:.1} hPa"));
        }
        Some(GroupFour::Height(surface)) => listener.part(group, || {
            format!("{:.0} hPa surface at {:.0} gpm", surface.pressure_hpa, surface.height_gpm)
        }),
        None => {
            let sea = report.platform == Platform::Ship;
            listener.complain(group, "section 1, 4PPPP or 4a3hhh; code table 0264", || {
                if sea {
                    "no sea-level pressure begins so: not used".to_owned()
                } else {
                    "neither a sea-level pressure nor a standard surface: not used".to_owned()
                }
            });
        }
    }
}

/// `9GGgg`: the actual time, the one nearest to the hour of the report.
fn actual_time<L: Listener>(
    group: Group<'_>,
    report: &mut Report,
    nominal: Instant,
    listener: &mut L,
) {
    let (Figures::Value(hour), Figures::Value(minute)) = (group.figures(1, 3), group.figures(3, 5))
    else {
        listener.part(group, || "time of observation not reported".to_owned());
        return;
    };
    let nominal_minute = nominal.unix_s().rem_euclid(24 * HOUR_S) / 60;
    let minute_of_day = i64::from(hour) * 60 + i64::from(minute);
    // The difference brought into half a day either way.
    let difference = (minute_of_day - nominal_minute + 720).rem_euclid(1440) - 720;
    if hour > 23 || minute > 59 || difference.abs() > ACTUAL_TIME_MINUTES_MAX {
        listener.complain(group, "section 1, 9GGgg: near the hour of the report", || {
            format!("{hour:02}:{minute:02} UTC is not the time of this report: not used")
        });
        return;
    }
    report.time = nominal.plus_s(difference * 60);
    listener.part(group, || format!("observed at {hour:02}:{minute:02} UTC"));
}
