use super::*;
use crate::instant::Instant;
use crate::obs::Provenance;
use crate::obs::held::Held;
use crate::report::{Form, Report};

fn name(text: &str) -> Identifier {
    Identifier::new(text).expect("a name")
}

fn provenance() -> Provenance {
    Provenance {
        file: "feed.bufr".to_owned(),
        content: "00".to_owned(),
        start: 0,
        end: 9,
        received: Instant::from_unix_s(0),
    }
}

/// Heathrow, index 03772, EGLL: 51.479 N 0.449 W, barometer about 25 m (WMO-No. 9, from memory).
#[test]
fn the_built_in_list_knows_a_station_by_number_and_by_indicator() {
    let catalogue = Catalogue::built_in();
    assert!(catalogue.len() > 15_000, "{}", catalogue.len());
    let by_number = catalogue.standard(Platform::Land, name("03772")).expect("in the list");
    let position = by_number.position.expect("a place");
    assert!(position.distance_km(Position::clamped(51.479, -0.449)) < 3.0, "{position:?}");
    assert!(by_number.station_height_m.is_some_and(|height| (20.0..30.0).contains(&height)));
    let by_indicator = catalogue.standard(Platform::Aerodrome, name("EGLL")).expect("in the list");
    assert!(by_indicator.position.expect("a place").distance_km(position) < 5.0);
    assert!(catalogue.standard(Platform::Buoy, name("03772")).is_none(), "a buoy is no station");
}

#[test]
fn every_row_of_the_built_in_list_is_understood() {
    let mut text = String::new();
    flate2::read::GzDecoder::new(BUILT_IN).read_to_string(&mut text).expect("whole");
    let (_, complaints) = read_rows(&text, Source::BuiltIn);
    assert_eq!(complaints, []);
}

#[test]
fn a_users_row_overrides_and_a_wrong_one_is_complained_about() {
    let text = "wmo_index,latitude_deg,longitude_deg,station_height_m\n\
                03772,51.0,-1.0,40\n\
                99999,95,0,3\n\
                ,10,10,3\n\
                01001,,,12\n";
    let (catalogue, complaints) = Catalogue::built_in().with_user(text);
    let said: Vec<String> = complaints.iter().map(ToString::to_string).collect();
    assert_eq!(
        said,
        [
            "line 3: latitude_deg: expected -90 to 90, found 95",
            "line 4: expected a wmo_index, icao or station, found none",
        ]
    );
    let time = Instant::from_unix_s(0);
    let report = Report::empty(name("03772"), Platform::Land, Form::Synop, time);
    let site = resolve(&catalogue, None, &report).expect("placed");
    assert_eq!(site.position, Position::clamped(51.0, -1.0));
    assert_eq!((site.position_source, site.barometer_height_m), (Source::User, Some(40.0)));
    // A height alone leaves the place to the list beneath.
    let report = Report::empty(name("01001"), Platform::Land, Form::Synop, time);
    let site = resolve(&catalogue, None, &report).expect("placed");
    assert_eq!((site.position_source, site.barometer_height_m), (Source::BuiltIn, Some(12.0)));
    let (_, complaints) = Catalogue::empty().with_user("a,b\n1,2\n");
    assert_eq!(complaints.len(), 1);
}

#[test]
fn reports_that_carry_their_place_teach_it_and_conflicts_are_listed() {
    let time = Instant::from_unix_s(0);
    let mut bufr = Report::empty(name("03772"), Platform::Land, Form::Bufr, time);
    bufr.position = Position::new(52.5, -0.45);
    bufr.barometer_height_m = Some(26.0);
    bufr.pressure_msl_hpa = Some(1000.0);
    let mut unknown = bufr;
    unknown.station = name("99123");
    let mut held = Held::new();
    held.insert(bufr, provenance());
    held.insert(unknown, provenance());
    let catalogue = Catalogue::built_in();
    let places = |station: &str| held.places().get(&(Platform::Land, name(station)));
    let synop = Report::empty(name("99123"), Platform::Land, Form::Synop, time.plus_s(3600));
    let site = resolve(&catalogue, places("99123"), &synop).expect("learnt");
    assert_eq!((site.position_source, site.barometer_height_m), (Source::Learnt, Some(26.0)));
    let learnt = places("03772").and_then(Places::most_given).expect("learnt");
    let found = resolve::conflict(&catalogue, Platform::Land, name("03772"), learnt);
    let found = found.expect("a degree of latitude apart");
    assert!(
        found.text.contains("114 km apart") || found.text.contains("113 km apart"),
        "{}",
        found.text
    );
    held.forget_before(time.hour_floor().plus(1));
    assert!(held.places().is_empty());
}

use crate::obs::held::Places;
