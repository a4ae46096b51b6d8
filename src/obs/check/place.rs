//! Where a fixed station says it stands against where the catalogue has it (METHODS QC-3: a swapped
//! hemisphere is the usual slip).

use super::{Case, Findings};
use crate::obs::catalogue::Source;
use crate::obs::{Element, Verdict};
use crate::report::{Form, Platform};
use crate::sphere::Position;

/// Distance from the listed place, km, above which a station's own is in doubt: stations are moved
/// and lists are rough, but not by a degree.
const DOUBT_KM: f64 = 100.0;
/// A swapped hemisphere must hit the listed place this well, km.
const SWAP_KM: f64 = 20.0;

/// Doubts a fixed station that reports itself far from where it is listed, and refuses it where a
/// swapped hemisphere explains it.
pub fn check(case: &Case<'_>, findings: &mut Findings) {
    let fixed = matches!(case.report.platform, Platform::Land | Platform::Aerodrome)
        && case.report.form != Form::Mobile
        && case.site.position_source == Source::Report;
    let Some(listed) = case.site.listed.filter(|_| fixed) else {
        return;
    };
    let here = case.site.position;
    let distance_km = here.distance_km(listed);
    if distance_km <= DOUBT_KM {
        return;
    }
    let (north, east) = (here.latitude_deg(), here.longitude_deg());
    let swapped = [(-north, east), (north, -east), (-north, -east)]
        .into_iter()
        .map(|(latitude, longitude)| Position::clamped(latitude, longitude))
        .find(|place| place.distance_km(listed) <= SWAP_KM);
    let (verdict, hint) = match swapped {
        Some(_) => (Verdict::Refused, "; a swapped hemisphere explains it"),
        None => (Verdict::Doubtful, ""),
    };
    let reason = format!(
        "reports itself at {north:.2} {east:.2}, {distance_km:.0} km from its place in the \
         catalogue{hint}"
    );
    findings.add(Element::Position, verdict, "QC-3 place", reason);
}
