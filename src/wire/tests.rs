use super::*;
use crate::quantity::m_s_from_kt;
use crate::report::{Form, Platform, Revision, WindSource};

fn at(text: &str) -> Instant {
    Instant::parse(text).expect("a time")
}

fn reading(text: &str) -> Reading {
    let reading = read(text.as_bytes(), &Context { received: at("2026-01-15T12:20:00Z") });
    let bytes = reading.bytes;
    assert_eq!(bytes.total, text.len() as u64);
    assert_eq!(bytes.reports + bytes.envelope + bytes.refused, bytes.total, "{text:?}");
    reading
}

#[track_caller]
fn only(text: &str) -> Report {
    let reading = reading(text);
    assert_eq!(reading.complaints, [], "{text}");
    let [decoded] = reading.reports.as_slice() else { panic!("{:?}", reading.reports) };
    decoded.report
}

/// METHODS CHK-013 (pymetdecoder 0.2.2).
#[test]
fn a_land_report_with_every_element() {
    let report = only(
        "AAXX 15124 03772 41480 82324 10082 20059 39876 49908 57034 72182 83500 \
         333 20056 59128 91038",
    );
    assert_eq!(report.station.as_str(), "03772");
    assert_eq!((report.platform, report.form), (Platform::Land, Form::Synop));
    assert_eq!(report.time, at("2026-01-15T12:00:00Z"));
    assert_eq!(report.wind_from_deg, Some(230.0));
    assert_eq!(report.wind_speed_m_s, Some(m_s_from_kt(24.0)));
    assert_eq!(report.wind_source, WindSource::Measured);
    assert_eq!(report.air_temperature_c, Some(8.2));
    assert_eq!(report.dew_point_c, Some(5.9));
    assert_eq!(report.pressure_station_hpa, Some(987.6));
    assert_eq!(report.pressure_msl_hpa, Some(990.8));
    assert_eq!(report.characteristic, Some(7));
    assert_eq!(report.pressure_change_3h_hpa, Some(-3.4));
    assert_eq!(report.pressure_change_24h_hpa, Some(-12.8));
    assert_eq!(report.wind_gust_m_s, Some(m_s_from_kt(38.0)));
}

/// METHODS CHK-014 (pymetdecoder 0.2.2).
#[test]
fn a_high_station_sends_a_height_and_a_wind_of_three_figures() {
    let report = only("AAXX 15121 06780 41580 52599 00105 11062 21105 37520 47007 52008");
    assert_eq!((report.wind_from_deg, report.wind_speed_m_s), (Some(250.0), Some(105.0)));
    assert_eq!((report.air_temperature_c, report.dew_point_c), (Some(-6.2), Some(-10.5)));
    assert_eq!((report.pressure_station_hpa, report.pressure_msl_hpa), (Some(752.0), None));
    let surface = report.standard_surface.expect("a surface");
    assert_eq!((surface.pressure_hpa, surface.height_gpm), (700.0, 3007.0));
    assert_eq!((report.characteristic, report.pressure_change_3h_hpa), (Some(2), Some(0.8)));
}

/// METHODS CHK-015 (pymetdecoder 0.2.2).
#[test]
fn a_ship_says_where_and_whither() {
    let report = only(
        "BBXX TESTSHP 15124 99483 70156 41498 82134 10111 20090 49958 58027 72162 83500 \
         22214 00122 20605 333 59128",
    );
    let position = report.position.expect("a position");
    assert_eq!((position.latitude_deg(), position.longitude_deg()), (48.3, -15.6));
    assert!((report.position_rounding_deg - 0.05).abs() < 1e-12);
    assert_eq!(
        (report.wind_from_deg, report.wind_speed_m_s),
        (Some(210.0), Some(m_s_from_kt(34.0)))
    );
    assert_eq!((report.air_temperature_c, report.dew_point_c), (Some(11.1), Some(9.0)));
    assert_eq!(report.pressure_msl_hpa, Some(995.8));
    assert_eq!((report.characteristic, report.pressure_change_3h_hpa), (Some(8), Some(-2.7)));
    // METHODS CHK-019.
    assert_eq!((report.course_deg, report.speed_m_s), (Some(45.0), Some(m_s_from_kt(18.0))));
    assert_eq!(report.sea_temperature_c, Some(12.2));
    assert_eq!(report.pressure_change_24h_hpa, Some(-12.8));
}

/// METHODS CHK-016 (pymetdecoder 0.2.2; 22200 by tables 0700 and 4451).
#[test]
fn a_buoy_in_ship_form_lies_still_in_the_south() {
    let report = only("BBXX 6401234 15120 99551 50205 46/// /0412 49785 53012 22200 00083");
    let position = report.position.expect("a position");
    assert_eq!((position.latitude_deg(), position.longitude_deg()), (-55.1, -20.5));
    assert_eq!((report.wind_from_deg, report.wind_speed_m_s), (Some(40.0), Some(12.0)));
    assert_eq!(report.wind_source, WindSource::Estimated);
    assert_eq!(report.pressure_msl_hpa, Some(978.5));
    assert_eq!((report.characteristic, report.pressure_change_3h_hpa), (Some(3), Some(1.2)));
    assert_eq!(report.speed_m_s, Some(0.0));
    assert_eq!(report.sea_temperature_c, Some(8.3));
}

/// METHODS CHK-017 (pymetdecoder 0.2.2).
#[test]
fn a_variable_wind_and_a_humidity() {
    let report = only("AAXX 15124 03005 41480 /9915 10082 29075 30024 40031 54000");
    assert!(report.wind_variable);
    assert_eq!((report.wind_from_deg, report.wind_speed_m_s), (None, Some(m_s_from_kt(15.0))));
    assert_eq!(report.relative_humidity_percent, Some(75.0));
    assert_eq!(
        (report.pressure_station_hpa, report.pressure_msl_hpa),
        (Some(1002.4), Some(1003.1))
    );
    assert_eq!((report.characteristic, report.pressure_change_3h_hpa), (Some(4), Some(0.0)));
}

/// METHODS CHK-020 to CHK-022.
#[test]
fn altimeter_settings_and_sea_level_remarks() {
    let report = only("METAR EGPF 151220Z 24012G25KT 9999 SCT020 08/M01 Q0990=");
    assert_eq!(report.altimeter_hpa, Some(990.5));
    assert!((report.altimeter_rounding_hpa - 0.2887).abs() < 1e-4);
    assert_eq!((report.platform, report.form), (Platform::Aerodrome, Form::Metar));
    assert_eq!(report.time, at("2026-01-15T12:20:00Z"));
    assert_eq!(
        (report.wind_from_deg, report.wind_gust_m_s),
        (Some(240.0), Some(m_s_from_kt(25.0)))
    );
    assert_eq!((report.air_temperature_c, report.dew_point_c), (Some(8.0), Some(-1.0)));
    for (group, expected_hpa) in [("A2992", 1013.207), ("A3006", 1017.948), ("A2850", 965.121)] {
        let report = only(&format!("KJFK 151151Z 24012KT 10SM CLR 08/M01 {group}"));
        assert!((report.altimeter_hpa.expect("a setting") - expected_hpa).abs() < 0.001);
    }
    for (group, expected_hpa) in [("SLP179", 1017.9), ("SLP982", 998.2), ("SLP024", 1002.4)] {
        let report = only(&format!("KJFK 151151Z 24012KT 10SM CLR 08/M01 RMK AO2 {group} 57034"));
        assert_eq!(report.pressure_msl_hpa, Some(expected_hpa));
        assert_eq!((report.characteristic, report.pressure_change_3h_hpa), (Some(7), Some(-3.4)));
    }
}

#[test]
fn envelopes_headings_and_line_ends_of_every_kind() {
    let body = "AAXX 15124\r\r\n03772 41480 82324 10082 39876 49908 57034=\r\r\n03776 NIL=\r\r\n\
                03779 41480 82324 10082\r\r\n      39876 49908 57034=\r\r\n";
    let soh = format!("\x01\r\r\n123\r\r\nSMUK01 EGRR 151200 CCB\r\r\n{body}\x03");
    let zczc = format!("ZCZC 123\r\r\nSMUK01 EGRR 151200\r\r\n{body}\r\r\nNNNN\r\r\n");
    let framed = format!("{:08}00{soh}", soh.len());
    let unix = format!("SMUK01 EGRR 151200\n{}", body.replace("\r\r\n", "\n"));
    for text in [&soh, &zczc, &framed, &unix, &format!("{framed}{framed}{zczc}{unix}{soh}")] {
        let reading = reading(text);
        assert_eq!(reading.complaints, [], "{text}");
        let bulletins = text.matches("SMUK01").count();
        assert_eq!(reading.reports.len(), 2 * bulletins, "{text:?}");
        for decoded in &reading.reports {
            assert_eq!(decoded.report.pressure_msl_hpa, Some(990.8));
        }
    }
    let first = reading(&soh).reports.remove(0);
    assert_eq!(first.report.revision, Revision::Correction(2));
    assert_eq!(soh.get(first.bytes), Some("03772 41480 82324 10082 39876 49908 57034"));
}

#[test]
fn a_garbled_group_costs_itself_alone() {
    let reading = reading("AAXX 15124 03772 41480 82324 1O082 20059 39876 4990 57034=");
    let [decoded] = reading.reports.as_slice() else { panic!("one report") };
    assert_eq!(decoded.report.air_temperature_c, None);
    assert_eq!(decoded.report.pressure_msl_hpa, None);
    assert_eq!(decoded.report.dew_point_c, Some(5.9));
    assert_eq!(decoded.report.pressure_change_3h_hpa, Some(-3.4));
    let groups: Vec<&str> = reading.complaints.iter().map(|c| c.group.as_str()).collect();
    assert_eq!(groups, ["1O082", "4990"]);
    assert!(reading.complaints.iter().all(|c| c.station == "03772" && !c.report_lost));
}

#[test]
fn what_comes_twice_and_differs_is_not_believed() {
    let reading = reading("AAXX 15124 03772 41480 82324 10082 49876 49908 57034=");
    assert_eq!(reading.reports[0].report.pressure_msl_hpa, None);
    assert_eq!(reading.complaints.len(), 1);
}

#[test]
fn a_lost_end_does_not_join_two_reports() {
    let reading = reading(
        "AAXX 15124\n83772 41480 82324 10082 39876 49908 57034\n\
         03776 41480 82310 10092 39976 40008 57034=\n",
    );
    let pressures: Vec<_> =
        reading.reports.iter().map(|decoded| decoded.report.pressure_msl_hpa).collect();
    assert_eq!(pressures, [Some(990.8), Some(1000.8)]);
}

#[test]
fn tables_and_reports_in_one_file() {
    let text = "station,time,latitude_deg,longitude_deg,colour,pressure_msl_hpa,wind_from_deg,wind_speed_m_s\n\
                Alpha,2026-01-15T12:00:00Z,48.25,-12.5,red,990.8,230,12.3\n\
                \"Beta, Old\",2026-01-15T12:00:00Z,48.3,-12.5,red,,,\n\
                {\"station\":\"Gamma\",\"kind\":\"ship\",\"time\":\"2026-01-15T12:00:00Z\",\"pressure_msl_hpa\":1001.5,\"characteristic\":7,\"course_deg\":null,\"colour\":1}\n\
                AAXX 15124 03772 41480 82324 10082 39876 49908 57034=\n";
    let reading = reading(text);
    let forms: Vec<_> = reading.reports.iter().map(|decoded| decoded.report.form).collect();
    assert_eq!(forms, [Form::Csv, Form::Csv, Form::Json, Form::Synop]);
    let alpha = reading.reports[0].report;
    assert_eq!(alpha.station.as_str(), "Alpha");
    assert_eq!(alpha.pressure_msl_hpa, Some(990.8));
    assert!((alpha.position_rounding_deg - 0.05).abs() < 1e-12);
    let gamma = reading.reports[2].report;
    assert_eq!((gamma.platform, gamma.characteristic), (Platform::Ship, Some(7)));
    let rules: Vec<&str> = reading.complaints.iter().map(|c| c.rule.as_str()).collect();
    assert_eq!(rules, ["table: known columns", "table: a pressure or a wind is needed"]);
}

#[test]
fn times_of_day_near_midnight_fall_on_the_right_day() {
    let reading = read(
        b"AAXX 15004 03772 41480 82324 49908 92350=",
        &Context { received: at("2026-01-15T00:20:00Z") },
    );
    assert_eq!(reading.reports[0].report.time, at("2026-01-14T23:50:00Z"));
}

#[test]
fn a_collective_has_its_word_once() {
    let reading = reading(
        "SAUK31 EGRR 151220\r\r\nMETAR\r\r\nEGLL 151220Z 24012KT CAVOK 08/01 Q0990=\r\r\n\
         EGKK 151220Z NIL=\r\r\nCOR EGPF 151220Z AUTO VRB03KT 180V240 9999 M01/M03 Q1001 TEMPO 25040KT=\r\r\n\
         UUEE 151200Z 24012G20MPS 9999 OVC010 M05/M07 Q0995 R24/1200 NOSIG RMK QFE738=\r\r\n\
         KJFK 151151Z COR 240P99KT 10SM CLR 00/M01 A2992 RMK SLPNO PRESFR=\r\r\n",
    );
    assert_eq!(reading.complaints, []);
    let stations: Vec<_> =
        reading.reports.iter().map(|d| d.report.station.as_str().to_owned()).collect();
    assert_eq!(stations, ["EGLL", "EGPF", "UUEE", "KJFK"]);
    assert_eq!(reading.nil_reports, 1);
    assert_eq!(reading.reports[1].report.revision, Revision::Correction(1));
    assert!(reading.reports[1].report.wind_variable);
    assert_eq!(reading.reports[2].report.wind_speed_m_s, Some(12.0));
    assert_eq!(reading.reports[3].report.wind_speed_m_s, Some(m_s_from_kt(100.0)));
}

#[test]
fn compressed_files_are_read_and_cut_ones_as_far_as_they_go() {
    use std::io::Write as _;
    let text = "AAXX 15124 03772 41480 82324 10082 39876 49908 57034=\n".repeat(400);
    let mut encoder = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::fast());
    encoder.write_all(text.as_bytes()).expect("writing to memory");
    let file = encoder.finish().expect("writing to memory");
    let context = Context { received: at("2026-01-15T12:20:00Z") };
    let whole = read(&file, &context);
    assert_eq!((whole.reports.len(), whole.complaints.len()), (400, 0));
    let cut = read(&file[..file.len() - 10], &context);
    assert!(cut.reports.len() > 100);
    assert_eq!(cut.complaints.last().map(|complaint| complaint.rule.as_str()), Some("RFC 1952"));
    assert_eq!(cut.bytes.total, cut.bytes.reports + cut.bytes.envelope + cut.bytes.refused);
}

#[test]
fn what_is_not_known_is_refused_with_its_place() {
    let text = "AAXX 15124 03772 41480 82324 49908=\nSOME NOTICE\nOF TWO LINES\nMETAR EGLL 151220Z 24012KT 08/01 Q0990=";
    let reading = reading(&text.replace("SOME", "\x01SOME"));
    assert_eq!(reading.reports.len(), 2);
    let [complaint] = reading.complaints.as_slice() else { panic!("{:?}", reading.complaints) };
    assert!(complaint.report_lost && complaint.group.starts_with("SOME NOTICE"));
}
