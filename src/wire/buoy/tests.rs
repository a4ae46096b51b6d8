use crate::instant::Instant;
use crate::report::{Platform, Report};
use crate::wire::{Context, Reading, read};

fn reading(text: &str) -> Reading {
    let received = Instant::parse("2026-01-15T12:20:00Z").expect("a time");
    read(text.as_bytes(), &Context { received })
}

#[track_caller]
fn only(text: &str) -> Report {
    let reading = reading(text);
    assert_eq!(reading.complaints, []);
    let [decoded] = reading.reports.as_slice() else { panic!("{:?}", reading.reports) };
    decoded.report
}

/// WMO-No. 306, Volume I.1, FM 18: the code form, read group by group.
#[test]
fn a_moored_buoy_with_every_section() {
    let report = only(
        "ZZYY 62023 15016 11501 751400 007900 6111/ 11119 02312 10095 20061 39987 40001 57012 \
         22219 00104 10805 20081 21024 444 6050/ 71304 555 12345=",
    );
    assert_eq!((report.station.as_str(), report.platform), ("62023", Platform::Buoy));
    assert_eq!(report.time.rfc3339(), "2026-01-15T11:50:00Z");
    let position = report.position.expect("a position");
    assert_eq!((position.latitude_deg(), position.longitude_deg()), (51.4, -7.9));
    assert_eq!((report.wind_from_deg, report.wind_speed_m_s), (Some(230.0), Some(12.0)));
    assert_eq!((report.air_temperature_c, report.dew_point_c), (Some(9.5), Some(6.1)));
    assert_eq!(report.pressure_station_hpa, Some(998.7));
    assert_eq!(report.pressure_msl_hpa, Some(1000.1));
    assert_eq!((report.characteristic, report.pressure_change_3h_hpa), (Some(7), Some(-1.2)));
    assert_eq!(report.sea_temperature_c, Some(10.4));
    assert_eq!(report.anemometer_height_m, Some(5.0));
}

#[test]
fn a_position_in_hundredths_or_tenths_says_how_coarse_it_is() {
    let hundredths = only("ZZYY 1300512 31125 0006/ 35514/ 02050/ 11119 40001=");
    assert!((hundredths.position_rounding_deg - 0.005).abs() < 1e-12);
    let position = hundredths.position.expect("a position");
    assert_eq!((position.latitude_deg(), position.longitude_deg()), (-55.14, 20.5));
    // The last day of the year before, found from its last figure.
    assert_eq!(hundredths.time.rfc3339(), "2025-12-31T00:06:00Z");
    let tenths = only("ZZYY 13005 15016 00061 3551// 0205// 11119 40001=");
    assert!((tenths.position_rounding_deg - 0.05).abs() < 1e-12);
}

#[test]
fn what_the_buoys_own_quality_flags_doubt_is_left_out() {
    // Qd 4, Qx 3: the third group of the section is wrong.
    let one = reading("ZZYY 62023 15016 11501 751400 007900 11143 02312 10095 40001 57012=");
    let report = one.reports[0].report;
    assert_eq!(report.pressure_msl_hpa, None);
    assert_eq!(report.pressure_change_3h_hpa, Some(-1.2));
    assert_eq!(one.complaints.len(), 1);
    let all = reading("ZZYY 62023 15016 11501 751400 007900 11139 02312 10095 40001 57012=");
    assert_eq!(all.complaints.len(), 4);
    assert!(!all.reports[0].report.is_useful());
    let place = reading("ZZYY 62023 15016 11501 751400 007900 6411/ 11119 02312 40001=");
    assert_eq!(place.reports[0].report.position, None);
    let time = reading("ZZYY 62023 15016 11501 751400 007900 6141/ 11119 02312 40001=");
    assert!(time.reports.is_empty() && time.complaints[0].report_lost);
}

#[test]
fn a_temperature_below_ten_is_not_taken_for_a_section() {
    let report = only("ZZYY 62023 15016 11501 751400 007900 11119 02312 11105 40001=");
    assert_eq!(report.air_temperature_c, Some(-10.5));
}
