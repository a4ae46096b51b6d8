//! The altimeter setting, in hectopascals or in inches of mercury.

use crate::quantity::hpa_from_inches_of_mercury;
use crate::report::Report;
use crate::wire::group::{Figures, Group};
use crate::wire::listener::Listener;

/// Standard deviation of a value spread evenly over one hectopascal: 1/sqrt(12)
/// (METHODS CHK-020).
pub(crate) const ROUNDING_Q_HPA: f64 = 0.288_675_134_594_812_9;

/// Standard deviation of a setting in hundredths of an inch, hPa.
///
/// Nations differ in whether they round or cut, so that the true value may lie anywhere from half
/// a unit (0.3386 hPa) below to a whole one above: 1.5 units / sqrt(12).
pub(crate) const ROUNDING_A_HPA: f64 = 0.146_635_0;

/// The settings that can occur, hPa.
const PLAUSIBLE_HPA: std::ops::RangeInclusive<f64> = 850.0..=1100.0;

/// `Qxxxx`, whole hectopascals rounded down: the middle of what it can mean (METHODS COD-9).
pub(super) fn q<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    const RULE: &str = "FM 15, QPHPHPHPH: four figures";
    match (group.text.len(), group.figures(1, 5)) {
        (5, Figures::Value(coded)) => {
            let setting_hpa = f64::from(coded) + 0.5;
            keep(group, setting_hpa, ROUNDING_Q_HPA, RULE, report, listener);
        }
        (5, Figures::Missing) => listener.part(group, || "altimeter not reported".to_owned()),
        _ => listener.complain(group, RULE, || "no altimeter setting can be read".to_owned()),
    }
}

/// `Axxxx`, hundredths of an inch of mercury.
pub(super) fn a<L: Listener>(group: Group<'_>, report: &mut Report, listener: &mut L) {
    const RULE: &str = "FM 15, APHPHPHPH: four figures";
    match (group.text.len(), group.figures(1, 5)) {
        (5, Figures::Value(coded)) => {
            let setting_hpa = hpa_from_inches_of_mercury(f64::from(coded) / 100.0);
            keep(group, setting_hpa, ROUNDING_A_HPA, RULE, report, listener);
        }
        (5, Figures::Missing) => listener.part(group, || "altimeter not reported".to_owned()),
        _ => listener.complain(group, RULE, || "no altimeter setting can be read".to_owned()),
    }
}

fn keep<L: Listener>(
    group: Group<'_>,
    setting_hpa: f64,
    rounding_hpa: f64,
    rule: &'static str,
    report: &mut Report,
    listener: &mut L,
) {
    if !PLAUSIBLE_HPA.contains(&setting_hpa) {
        listener.complain(group, rule, || {
            format!("{setting_hpa:.1} hPa is no altimeter setting: not used")
        });
        return;
    }
    if report.altimeter_hpa.is_some() {
        // The same setting in the other unit.
        listener.part(group, || format!("altimeter setting {setting_hpa:.1} hPa, again"));
        return;
    }
    report.altimeter_hpa = Some(setting_hpa);
    report.altimeter_rounding_hpa = rounding_hpa;
    listener.part(group, || format!("altimeter setting {setting_hpa:.1} hPa"));
}
