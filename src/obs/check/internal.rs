//! Internal consistency (METHODS QC-2): what a report says twice must agree.

use super::{Case, Findings};
use crate::obs::series::Level;
use crate::obs::{Element, Verdict};
use crate::report::Platform;

/// Tenths of a hPa that rounding may make between a change and the difference of two pressures.
const CHANGE_GOOD_HPA: f64 = 1.0;
/// Above this the pressure itself is in doubt, not only the change.
const CHANGE_WRONG_HPA: f64 = 3.0;
/// Seconds that the report of three hours ago may lie off.
const THREE_HOURS_TOLERANCE_S: i64 = 20 * 60;
const DIRECTION_AND_SPEED: &str = "QC-2 direction and speed";
/// A ground height that stands for the barometer's may be off by this, m ...
const GROUND_FOR_BAROMETER_M: f64 = 5.0;
/// ... and a metre is worth this, hPa (METHODS RED-2).
const METRE_HPA: f64 = 0.12;
/// What rounding both pressures to tenths can make of their difference, hPa.
const ROUNDING_HPA: f64 = 0.1;
/// Height, m, up to which all ways of reducing agree within the rounding and a kelvin.
const METHODS_AGREE_M: f64 = 150.0;
/// What a kelvin is worth for each metre of height, hPa (METHODS RED-3).
const KELVIN_HPA_M: f64 = 0.000_43;
/// Height, m, above which equal station and sea-level pressures mean a forgotten reduction.
const HEIGHT_FORGOTTEN_M: f64 = 20.0;

/// Runs the checks that need the report alone and those of the change against the own series.
pub fn check(case: &Case<'_>, findings: &mut Findings) {
    characteristic(case, findings);
    wind(case, findings);
    own_series(case, findings);
}

/// Code table 0200: 4 with no change; 1, 2, 3 with a rise, 6, 7, 8 with a fall; 0 with no fall, 5
/// with no rise.
fn characteristic(case: &Case<'_>, findings: &mut Findings) {
    let (Some(code), Some(change)) =
        (case.report.characteristic, case.report.pressure_change_3h_hpa)
    else {
        return;
    };
    let tenths = crate::quantity::whole_nearest(change * 10.0);
    let agrees = match code {
        0 => tenths >= 0,
        1..=3 => tenths > 0,
        4 => tenths == 0,
        5 => tenths <= 0,
        6..=8 => tenths < 0,
        _ => false,
    };
    if !agrees {
        let reason = format!("characteristic {code} does not go with a change of {change:+.1} hPa");
        findings.add(Element::Tendency, Verdict::Doubtful, "QC-2 characteristic", reason);
    }
}

/// A calm has no direction and a wind has one (code table 0877).
fn wind(case: &Case<'_>, findings: &mut Findings) {
    let report = case.report;
    let Some(speed) = report.wind_speed_m_s else {
        return;
    };
    let reason = match report.wind_from_deg {
        Some(from) if !(0.0..=360.0).contains(&from) => {
            format!("wind direction {from:.0} is outside 0 to 360")
        }
        Some(from) if from == 0.0 && speed > 0.0 => {
            format!("direction 0 means calm, but the speed is {speed:.1} m/s")
        }
        // Automatic stations keep the last direction in a calm: worth a word, not a doubt.
        Some(from) if from > 0.0 && speed == 0.0 => {
            let reason = format!("calm, but from {from:.0} degrees");
            findings.add(Element::Wind, Verdict::Sound, DIRECTION_AND_SPEED, reason);
            return;
        }
        _ => return,
    };
    findings.add(Element::Wind, Verdict::Doubtful, DIRECTION_AND_SPEED, reason);
}

/// The reported change against the difference of the station's own two pressures.
///
/// A ship's own barometer moves with it, and so does its change: both see the same motion, so the
/// comparison holds at sea too.
fn own_series(case: &Case<'_>, findings: &mut Findings) {
    let report = case.report;
    let Some(change) = report.pressure_change_3h_hpa else {
        return;
    };
    let then = report.time.plus_s(-3 * crate::instant::HOUR_S);
    let difference = |level: Level, now: Option<f64>| {
        let wanted = |point: &_| level.of(point).is_some();
        let point = case.series.near(then, THREE_HOURS_TOLERANCE_S, wanted)?;
        Some(now? - level.of(point)?)
    };
    let own = difference(Level::Station, report.pressure_station_hpa)
        .or_else(|| difference(Level::Sea, report.pressure_msl_hpa));
    let Some(own) = own else {
        return;
    };
    let miss = (own - change).abs();
    if miss <= CHANGE_GOOD_HPA + 1e-9 {
        return;
    }
    let check = "QC-2 change against own series";
    let sign_slip = (own + change).abs() <= 0.3 && change.abs() > 0.5;
    let hint = if sign_slip { "; it would fit with the other sign" } else { "" };
    let reason =
        format!("change {change:+.1} hPa in 3 h, but its own pressures differ by {own:+.1}{hint}");
    findings.add(Element::Tendency, Verdict::Doubtful, check, reason.clone());
    if miss > CHANGE_WRONG_HPA && !sign_slip {
        findings.add(Element::Pressure, Verdict::Doubtful, check, reason);
    }
}

/// The reported sea-level pressure against those reduced here with the temperature of now and the
/// mean of 12 hours (METHODS RED-4): `Doubtful` where it lies further from both than 0.5 hPa and
/// 0.003 hPa for each metre of height, or further still where only the ground's height is known.
/// Below 150 m a difference beyond the rounding is worth a word: there all methods agree.
pub fn reduction_agrees(
    case: &Case<'_>,
    reported_hpa: f64,
    reduced_hpa: [f64; 2],
    findings: &mut Findings,
) {
    let height_m = case.site.barometer_height_m.unwrap_or(0.0);
    let unsure_m = if case.site.barometer_is_own { 0.0 } else { GROUND_FOR_BAROMETER_M };
    let tolerance_hpa = 0.5 + 0.003 * height_m.abs() + METRE_HPA * unsure_m;
    let [now, mean] = reduced_hpa.map(|reduced| reduced - reported_hpa);
    let (miss, reduced) =
        if now.abs() <= mean.abs() { (now, reduced_hpa[0]) } else { (mean, reduced_hpa[1]) };
    let reason = || {
        format!(
            "reported {reported_hpa:.1} hPa at sea level, {reduced:.1} by reduction from \
             {height_m:.0} m: {miss:+.2}"
        )
    };
    let fine_hpa = ROUNDING_HPA + KELVIN_HPA_M * height_m.abs();
    let check = "RED-4 reduction";
    if miss.abs() > tolerance_hpa {
        let reason = format!("{}, tolerance {tolerance_hpa:.1}", reason());
        findings.add(Element::Pressure, Verdict::Doubtful, check, reason);
    } else if case.site.barometer_is_own
        && case.report.dew_point_c.is_some()
        && height_m.abs() <= METHODS_AGREE_M
        && miss.abs() > fine_hpa
    {
        let reason = format!("{}, rounding explains {fine_hpa:.2}", reason());
        findings.add(Element::Pressure, Verdict::Sound, check, reason);
    }
}

/// Whether station and sea-level pressure are the same although the barometer hangs above 20 m:
/// one of them was copied, and nothing in the report says which. It is then refused.
pub fn height_forgotten(case: &Case<'_>, findings: &mut Findings) -> bool {
    let report = case.report;
    let (Some(station), Some(sea), Some(height_m)) =
        (report.pressure_station_hpa, report.pressure_msl_hpa, case.site.barometer_height_m)
    else {
        return false;
    };
    // A drifting buoy's two pressures are the same by design.
    let forgotten = height_m > HEIGHT_FORGOTTEN_M
        && (station - sea).abs() < 0.05
        && report.platform != Platform::Buoy;
    if forgotten {
        let reason = format!(
            "station and sea-level pressure are both {sea:.1} hPa at {height_m:.0} m: the height \
             was forgotten in one of them"
        );
        findings.add(Element::Pressure, Verdict::Refused, "QC-2 height forgotten", reason);
    }
    forgotten
}
