use proptest::prelude::*;

use super::*;
use crate::report::{Form, Revision};
use crate::sphere::Position;

fn time(hour: i64, minute: i64) -> Instant {
    Instant::from_unix_s(1_700_000_000 - 1_700_000_000 % 3600 + hour * 3600 + minute * 60)
}

fn report(station: &str, platform: Platform, form: Form, at: Instant) -> Report {
    let station = Identifier::new(station).expect("a name");
    let mut report = Report::empty(station, platform, form, at);
    report.pressure_msl_hpa = Some(1000.0);
    report.pressure_station_hpa = Some(995.0);
    report.wind_speed_m_s = Some(5.0);
    report.wind_from_deg = Some(270.0);
    report
}

fn from(file: &str, received_min: i64) -> Provenance {
    Provenance {
        file: file.to_owned(),
        content: format!("hash of {file}"),
        start: 0,
        end: 40,
        received: time(1, received_min),
    }
}

fn only(held: &Held) -> Report {
    let all: Vec<_> = held.reports(Hour::from_unix_h(0)..=Hour::from_unix_h(i64::MAX)).collect();
    assert_eq!(all.len(), 1, "one report is held");
    all.into_iter().next().expect("one").0
}

#[test]
fn a_repeat_joins_and_keeps_the_earliest_receipt() {
    let mut held = Held::new();
    let first = report("03772", Platform::Land, Form::Synop, time(0, 0));
    assert_eq!(held.insert(first, from("late", 30)), Joined::New);
    assert_eq!(held.insert(first, from("early", 10)), Joined::Repeat);
    assert_eq!(held.insert(first, from("early", 10)), Joined::Repeat);
    assert_eq!(held.counts(), HeldCounts { held: 1, repeats: 1, corrections: 0, outranked: 0 });
    let (_, provenance) =
        held.reports(time(0, 0).hour_floor()..=time(0, 0).hour_floor()).next().expect("held");
    assert_eq!(provenance.file, "early");
}

#[test]
fn the_later_correction_stands_whatever_comes_last() {
    let original = report("03772", Platform::Land, Form::Synop, time(0, 0));
    let corrected = |number: u8, pressure: f64| Report {
        revision: Revision::Correction(number),
        pressure_msl_hpa: Some(pressure),
        ..original
    };
    let copies = [original, corrected(1, 1001.0), corrected(2, 1002.0)];
    for order in [[0, 1, 2], [2, 1, 0], [1, 2, 0], [2, 0, 1], [0, 2, 1], [1, 0, 2]] {
        let mut held = Held::new();
        for index in order {
            held.insert(copies[index], from("feed", 1));
        }
        assert_eq!(only(&held).pressure_msl_hpa, Some(1002.0));
        let counts = HeldCounts { held: 1, repeats: 0, corrections: 2, outranked: 0 };
        assert_eq!(held.counts(), counts);
    }
}

#[test]
fn bufr_stands_before_the_character_form_unless_it_is_not_sound() {
    let synop = report("03772", Platform::Land, Form::Synop, time(0, 0));
    let mut bufr = report("0-20000-0-03772", Platform::Land, Form::Bufr, time(0, 0));
    bufr.position = Position::new(51.479, -0.449);
    let mut held = Held::new();
    assert_eq!(held.insert(synop, from("a", 1)), Joined::New);
    assert_eq!(held.insert(bufr, from("b", 2)), Joined::Corrected);
    assert_eq!(only(&held).form, Form::Bufr);
    assert_eq!(only(&held).station.as_str(), "03772", "a WIGOS identifier is the same station");
    bufr.pressure_msl_hpa = Some(250.0);
    let mut held = Held::new();
    assert_eq!(held.insert(bufr, from("b", 2)), Joined::New);
    assert_eq!(held.insert(synop, from("a", 1)), Joined::Corrected);
    assert_eq!(only(&held).form, Form::Synop);
}

#[test]
fn an_empty_message_does_not_hide_a_full_one() {
    let full = report("40340", Platform::Land, Form::Bufr, time(0, 0));
    let empty = Report::empty(full.station, full.platform, full.form, full.time);
    for copies in [[full, empty], [empty, full]] {
        let mut held = Held::new();
        for copy in copies {
            held.insert(copy, from("feed", 1));
        }
        assert_eq!(only(&held).pressure_msl_hpa, Some(1000.0));
        assert_eq!(held.counts().outranked, 1);
    }
}

#[test]
fn an_aerodrome_and_a_land_station_are_two_and_so_are_two_ships_called_ship() {
    let mut held = Held::new();
    held.insert(report("EGLL", Platform::Aerodrome, Form::Metar, time(0, 0)), from("a", 1));
    held.insert(report("EGLL", Platform::Land, Form::Synop, time(0, 0)), from("a", 1));
    assert_eq!(held.counts().held, 2);
    for longitude in [-15.6, -30.2] {
        let mut ship = report("SHIP", Platform::Ship, Form::Ship, time(0, 0));
        ship.position = Position::new(48.3, longitude);
        held.insert(ship, from("a", 1));
    }
    assert_eq!(held.counts().held, 4);
}

/// METHODS QC-7: a partial resend corrects what it carries and keeps the rest, if at least two of
/// its values agree with the report that it corrects.
#[test]
fn a_partial_correction_keeps_what_it_leaves_out() {
    let mut original = report("ABCD", Platform::Ship, Form::Ship, time(0, 0));
    original.position = Position::new(48.3, -15.6);
    original.air_temperature_c = Some(11.1);
    original.dew_point_c = Some(9.0);
    original.pressure_station_hpa = None;
    let mut partial = Report::empty(original.station, Platform::Ship, Form::Ship, original.time);
    partial.revision = Revision::Correction(1);
    partial.position = original.position;
    partial.pressure_msl_hpa = Some(985.8);
    for copies in [[original, partial], [partial, original]] {
        let mut held = Held::new();
        for copy in copies {
            held.insert(copy, from("feed", 1));
        }
        let standing = only(&held);
        assert_eq!(standing.pressure_msl_hpa, Some(985.8));
        assert_eq!(standing.air_temperature_c, Some(11.1));
        assert_eq!(standing.revision, Revision::Correction(1));
    }
    // A correction of another place is a report of its own right.
    partial.position = Position::new(38.3, -25.6);
    let mut held = Held::new();
    held.insert(original, from("feed", 1));
    held.insert(partial, from("feed", 1));
    assert_eq!(only(&held).air_temperature_c, None);
}

#[test]
fn newest_can_look_past_a_clock_that_runs_ahead() {
    let mut held = Held::new();
    assert_eq!(held.newest(), None);
    held.insert(report("03772", Platform::Land, Form::Synop, time(0, 0)), from("a", 1));
    held.insert(report("ABCD", Platform::Ship, Form::Ship, time(30, 0)), from("a", 1));
    assert_eq!(held.newest(), Some(time(30, 0)));
    assert_eq!(held.newest_until(time(2, 0)), Some(time(0, 0)));
    assert_eq!(held.newest_until(time(-2, 0)), None);
}

prop_compose! {
    /// Few stations, hours, forms and values, so that copies meet.
    fn arriving()(
        station in 0..3_usize,
        hour in 0..3_i64,
        minute in prop::sample::select(vec![0_i64, 50]),
        form in prop::sample::select(vec![Form::Synop, Form::Bufr, Form::Csv]),
        revision in 0..3_u8,
        pressure in prop::sample::select(vec![None, Some(250.0), Some(1000.0), Some(1001.5)]),
        temperature in prop::sample::select(vec![None, Some(11.1)]),
        placed in any::<bool>(),
        file in 0..4_i64,
    ) -> (Report, Provenance) {
        let station = ["03772", "SHIP", "01001"][station];
        let platform = if station == "SHIP" { Platform::Ship } else { Platform::Land };
        let mut one = report(station, platform, form, time(hour, minute));
        one.pressure_msl_hpa = pressure;
        one.air_temperature_c = temperature;
        one.position = Position::new(50.0, 8.0).filter(|_| placed);
        if revision > 0 {
            one.revision = Revision::Correction(revision);
            one.pressure_station_hpa = None;
        }
        (one, from(&format!("file {file}"), file))
    }
}

proptest! {
    /// The law of the loop, at its root: the order of arrival and repeats cannot matter.
    #[test]
    fn any_order_any_repeats_and_a_restart_hold_the_same(
        (reports, shuffled) in prop::collection::vec(arriving(), 1..25)
            .prop_flat_map(|list| (Just(list.clone()), Just(list).prop_shuffle())),
        again in prop::collection::vec(any::<prop::sample::Index>(), 0..10),
    ) {
        let mut held = Held::new();
        for (report, provenance) in &reports {
            held.insert(*report, provenance.clone());
        }
        let mut other = Held::new();
        for (report, provenance) in &shuffled {
            other.insert(*report, provenance.clone());
        }
        for index in &again {
            let (report, provenance) = index.get(&reports);
            prop_assert_eq!(other.insert(*report, provenance.clone()), Joined::Repeat);
        }
        let rows: Vec<Row> = held.rows().collect();
        let restarted = Held::from_rows(rows.iter().rev().cloned());
        let everything = Hour::from_unix_h(0)..=Hour::from_unix_h(i64::MAX);
        for same in [&other, &restarted] {
            prop_assert_eq!(&held, same);
            prop_assert_eq!(held.counts(), same.counts());
            prop_assert_eq!(&rows, &same.rows().collect::<Vec<_>>());
            let a: Vec<_> = held.reports(everything.clone()).collect();
            prop_assert_eq!(a, same.reports(everything.clone()).collect::<Vec<_>>());
            for hour in held.hours() {
                let print = |held: &Held| held.hour(hour).map(|bucket| bucket.fingerprint());
                prop_assert_eq!(print(&held), print(same));
            }
        }
        // The four counts add up to what came in, the same piece of the same file counted once.
        let mut pieces: Vec<_> = Vec::new();
        for (report, provenance) in &reports {
            if !pieces.contains(&(report, provenance)) {
                pieces.push((report, provenance));
            }
        }
        let counts = held.counts();
        let sum = counts.held + counts.repeats + counts.corrections + counts.outranked;
        prop_assert_eq!(sum, pieces.len());
        // Forgetting everything leaves nothing behind.
        held.forget_before(time(100, 0).hour_floor());
        prop_assert_eq!(held, Held::new());
    }

    #[test]
    fn a_report_survives_being_held(
        values in prop::collection::vec(prop::option::of(-1e4..1e4), 12),
        characteristic in prop::option::of(0..9_u8),
        variable in any::<bool>(),
    ) {
        let mut one = report("03772", Platform::Land, Form::Bufr, time(0, 0));
        one.station_height_m = values[0];
        one.barometer_height_m = values[1];
        one.altimeter_hpa = values[2];
        one.pressure_change_24h_hpa = values[3];
        one.wind_gust_m_s = values[4];
        one.anemometer_height_m = values[5];
        one.relative_humidity_percent = values[6];
        one.sea_temperature_c = values[7];
        one.course_deg = values[8];
        one.speed_m_s = values[9];
        one.pressure_msl_hpa = values[10];
        one.wind_from_deg = values[11];
        one.characteristic = characteristic;
        one.wind_variable = variable;
        one.position = Position::new(51.479, -0.449);
        let mut held = Held::new();
        held.insert(one, from("a", 1));
        prop_assert_eq!(only(&held), one);
    }
}
