//! One report made into an observation: reduced, checked, carried to 10 m, given its error.

use super::catalogue::Site;
use super::check::{self, Case, Findings, gross, internal};
use super::error::{self, COLUMN_ASSUMED_K, COLUMN_K, DOUBT_FACTOR, PressureCase};
use super::reduction;
use super::series::Series;
use super::{Element, ObsSettings, Observation, PressureSource, Provenance, Verdict, wind};
use crate::instant::{HOUR_S, Hour};
use crate::quantity::wind_components;
use crate::report::{Platform, Report};

/// Tolerance for the temperature of 12 hours ago, seconds.
const TWELVE_HOURS_TOLERANCE_S: i64 = 35 * 60;
/// Height that a ship's barometer is taken to hang at where it does not say, m, and how far that
/// may be off (METHODS RED-2: bridges of 20 to 40 m; small ships less).
const SHIP_BAROMETER_M: (f64, f64) = (15.0, 10.0);
/// Error of a ground height that stands for the barometer's, m; own figure.
const GROUND_FOR_BAROMETER_M: f64 = 2.0;
/// Altimeter settings of a station without a known height are used below nothing at all: COD-10
/// needs the height. Standard surfaces further than this from the station are not reduced, m.
const SURFACE_DISTANCE_M: f64 = 1500.0;

/// A sea-level pressure with how it was come by.
#[derive(Clone, Copy, PartialEq, Debug)]
struct SeaLevel {
    pressure_hpa: f64,
    source: PressureSource,
    reduction_hpa: f64,
    height_error_m: f64,
}

/// The column that a report is reduced through.
#[derive(Clone, Copy, PartialEq, Debug)]
struct Column {
    temperature_c: f64,
    now_c: f64,
    vapour_hpa: f64,
    error_k: f64,
}

/// Makes an observation of a report.
pub(super) fn judge(
    report: &Report,
    provenance: Provenance,
    hour: Hour,
    site: &Site,
    series: Series<'_>,
    settings: &ObsSettings,
) -> Observation {
    let case = Case { report, site, series };
    let mut findings = Findings::default();
    let within = gross::check(&case, &mut findings);
    internal::check(&case, &mut findings);
    check::place::check(&case, &mut findings);
    check::track::check(&case, &mut findings);
    check::persistence::check(&case, &mut findings);
    let sea_level = sea_level(&case, within, &mut findings);
    let too_high =
        site.barometer_height_m.filter(|height_m| *height_m > settings.station_height_max_m);
    if let (Some(height_m), Some(_)) = (too_high, sea_level) {
        let limit_m = settings.station_height_max_m;
        findings.add(
            Element::Pressure,
            Verdict::Sound,
            "RED-3 height",
            format!(
                "barometer at {height_m:.0} m: above {limit_m:.0} m not in the sea-level analysis"
            ),
        );
    }
    let ten_metres = wind::at_ten_metres(report);
    let findings = overrule(report, findings.into_sorted(), settings);
    let mut observation = Observation {
        report: *report,
        position: site.position,
        hour,
        barometer_height_m: site.barometer_height_m,
        pressure_msl_hpa: None,
        pressure_error_hpa: 0.0,
        pressure_source: sea_level.map(|value| value.source),
        wind_m_s: None,
        wind_error_m_s: 0.0,
        findings,
        provenance,
    };
    let misplaced = observation.verdict(Element::Position);
    let offset_h = report.time.hours_since(hour.instant()).abs();
    let doubt = |verdict: Verdict| {
        if verdict.max(misplaced) == Verdict::Doubtful { DOUBT_FACTOR } else { 1.0 }
    };
    let pressure_verdict = observation.verdict(Element::Pressure);
    if let Some(value) = sea_level {
        let error_case = PressureCase {
            source: value.source,
            reduction_hpa: value.reduction_hpa,
            offset_h,
            height_error_m: value.height_error_m,
        };
        observation.pressure_error_hpa =
            error::pressure_hpa(report, &error_case) * doubt(pressure_verdict);
        if pressure_verdict.max(misplaced) < Verdict::Refused && too_high.is_none() {
            observation.pressure_msl_hpa = Some(value.pressure_hpa);
        }
    }
    if let Some((speed_m_s, height_known)) = ten_metres {
        let wind_verdict = observation.verdict(Element::Wind);
        if wind_verdict.max(misplaced) < Verdict::Refused {
            observation.wind_error_m_s =
                error::wind_m_s(report, speed_m_s, height_known) * doubt(wind_verdict);
            observation.wind_m_s = components(report, speed_m_s);
        }
    }
    observation
}

/// The wind as a vector: a calm is one, a variable wind of some strength is none.
fn components(report: &Report, speed_m_s: f64) -> Option<(f64, f64)> {
    if speed_m_s == 0.0 {
        return Some((0.0, 0.0));
    }
    let from_deg = report.wind_from_deg.filter(|_| !report.wind_variable)?;
    (0.0..=360.0).contains(&from_deg).then(|| wind_components(from_deg, speed_m_s))
}

/// Sea-level pressure of a report: as reported, else reduced from the station pressure, else from
/// the altimeter setting (COD-10), else from a standard surface.
fn sea_level(case: &Case<'_>, within: gross::Within, findings: &mut Findings) -> Option<SeaLevel> {
    let (report, site) = (case.report, case.site);
    let forgotten = internal::height_forgotten(case, findings);
    let (height_m, height_error_m) = barometer(case);
    let column = height_m.map(|height_m| column(case, within, height_m));
    let through = |station_hpa: f64, temperature: fn(&Column) -> f64| {
        let (height_m, column) = (height_m?, column?);
        let (t_c, e_hpa) = (temperature(&column), column.vapour_hpa);
        let pressure_hpa = reduction::to_sea_level_hpa(station_hpa, height_m, t_c, e_hpa);
        gross::PRESSURE_MSL_HPA.contains(&pressure_hpa).then_some(pressure_hpa)
    };
    let reduced = |station_hpa: f64| through(station_hpa, |column| column.temperature_c);
    let reduction_hpa = |pressure_hpa: f64| match (height_m, column) {
        (Some(height_m), Some(column)) => {
            let (t_c, e_hpa) = (column.temperature_c, column.vapour_hpa);
            reduction::sensitivity_hpa_k(pressure_hpa, height_m, t_c, e_hpa).abs() * column.error_k
        }
        _ => 0.0,
    };
    let station_hpa = report.pressure_station_hpa.filter(|_| within.pressure_station);
    let from_station = station_hpa.and_then(reduced);
    if let Some(pressure_hpa) = report.pressure_msl_hpa.filter(|_| within.pressure_msl) {
        let with_now = station_hpa.and_then(|hpa| through(hpa, |column| column.now_c));
        if let (Some(mean), Some(now)) = (from_station, with_now)
            && !forgotten
            && within.air_temperature
            && report.air_temperature_c.is_some()
            && site.barometer_height_m.is_some()
        {
            internal::reduction_agrees(case, pressure_hpa, [now, mean], findings);
        }
        return Some(SeaLevel {
            pressure_hpa,
            source: PressureSource::Reported,
            reduction_hpa: reduction_hpa(pressure_hpa),
            height_error_m: 0.0,
        });
    }
    let found = |pressure_hpa: f64, source: PressureSource| SeaLevel {
        pressure_hpa,
        source,
        reduction_hpa: reduction_hpa(pressure_hpa),
        height_error_m,
    };
    if let Some(pressure_hpa) = from_station {
        return Some(found(pressure_hpa, PressureSource::ReducedFromStation));
    }
    let from_altimeter = report
        .altimeter_hpa
        .filter(|_| within.altimeter)
        .zip(height_m)
        .map(|(setting_hpa, height_m)| reduction::station_from_altimeter_hpa(setting_hpa, height_m))
        .and_then(reduced);
    if let Some(pressure_hpa) = from_altimeter {
        return Some(found(pressure_hpa, PressureSource::FromAltimeter));
    }
    let (surface, height_m) = report.standard_surface.zip(height_m)?;
    let near = (surface.height_gpm - height_m).abs() <= SURFACE_DISTANCE_M;
    let column = column.filter(|_| near)?;
    let pressure_hpa = reduction::sea_level_from_surface_hpa(
        surface.pressure_hpa,
        surface.height_gpm,
        height_m,
        column.temperature_c,
        column.vapour_hpa,
    );
    gross::PRESSURE_MSL_HPA
        .contains(&pressure_hpa)
        .then(|| found(pressure_hpa, PressureSource::FromStandardSurface))
}

/// Height of the barometer, m, and its error, m.
fn barometer(case: &Case<'_>) -> (Option<f64>, f64) {
    match (case.site.barometer_height_m, case.report.platform) {
        (Some(height_m), _) if case.site.barometer_is_own => (Some(height_m), 0.0),
        (Some(height_m), _) => (Some(height_m), GROUND_FOR_BAROMETER_M),
        (None, Platform::Buoy) => (Some(0.0), 1.0),
        (None, Platform::Ship) => (Some(SHIP_BAROMETER_M.0), SHIP_BAROMETER_M.1),
        (None, Platform::Land | Platform::Aerodrome) => (None, 0.0),
    }
}

/// The column of air to reduce through (METHODS RED-3): the mean temperature of now and 12 hours
/// ago where the own series has both, else the one of now, else an assumed one with a large error.
fn column(case: &Case<'_>, within: gross::Within, height_m: f64) -> Column {
    let report = case.report;
    let now = report.air_temperature_c.filter(|_| within.air_temperature);
    let Some(now_c) = now else {
        let latitude_deg = case.site.position.latitude_deg();
        let temperature_c = reduction::assumed_temperature_c(height_m, latitude_deg);
        let vapour_hpa = reduction::vapour_hpa(temperature_c, None, None);
        return Column {
            temperature_c,
            now_c: temperature_c,
            vapour_hpa,
            error_k: COLUMN_ASSUMED_K,
        };
    };
    let then = report.time.plus_s(-12 * HOUR_S);
    let sound = |temperature_c: &f64| gross::AIR_TEMPERATURE_C.contains(temperature_c);
    let then_c = case
        .series
        .near(then, TWELVE_HOURS_TOLERANCE_S, |point| {
            point.air_temperature_c.as_ref().is_some_and(sound)
        })
        .and_then(|point| point.air_temperature_c);
    let dew_c = report.dew_point_c.filter(|_| within.dew_point);
    let temperature_c = reduction::reduction_temperature_c(now_c, then_c);
    let vapour_hpa = reduction::vapour_hpa(now_c, dew_c, report.relative_humidity_percent);
    Column { temperature_c, now_c, vapour_hpa, error_k: COLUMN_K }
}

/// The watchkeeper's word over the checks: the findings stay, with his verdict in place of theirs.
fn overrule(
    report: &Report,
    mut findings: Vec<super::Finding>,
    settings: &ObsSettings,
) -> Vec<super::Finding> {
    if settings.overruled.is_empty() {
        return findings;
    }
    let Some(verdict) = settings.overruled.get(&super::decision_key(report)) else {
        return findings;
    };
    for finding in &mut findings {
        finding.verdict = finding.verdict.min(*verdict);
    }
    for element in [Element::Pressure, Element::Wind] {
        findings.push(super::Finding {
            element,
            verdict: *verdict,
            check: "decision".to_owned(),
            reason: "set by the watchkeeper".to_owned(),
        });
    }
    findings.sort_by_key(|finding| finding.element);
    findings
}
