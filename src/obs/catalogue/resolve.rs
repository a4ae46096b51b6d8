//! Where a station stands, from everything that is known of it.

use serde::{Deserialize, Serialize};

use super::{Catalogue, Source};
use crate::obs::held::{Place, Places};
use crate::report::{Identifier, Platform, Report};
use crate::sphere::Position;

/// Distance, km, from which a report's own place and the catalogue's are a conflict. Catalogues
/// round to minutes of arc and mix town and station: 10 km is beyond both.
pub const CONFLICT_KM: f64 = 10.0;
/// Heights of stations on this earth, m: the Dead Sea to above the highest mast on a summit.
pub const HEIGHTS_M: std::ops::RangeInclusive<f64> = -450.0..=9000.0;
/// The same for heights, m: 4 hPa if a reduction believed the wrong one.
pub const CONFLICT_M: f64 = 30.0;

/// Where a report was made and how high its barometer hangs.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Site {
    /// Where.
    pub position: Position,
    /// Who says so.
    pub position_source: Source,
    /// Where the built-in catalogue has it.
    pub listed: Option<Position>,
    /// Height of the ground, m.
    pub station_height_m: Option<f64>,
    /// Height of the barometer, m: its own, else that of the ground.
    pub barometer_height_m: Option<f64>,
    /// Whether the height is that of the barometer, not of the ground.
    pub barometer_is_own: bool,
}

/// A disagreement between what reports say about a station and the catalogue.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Conflict {
    /// What kind of place.
    pub platform: Platform,
    /// Who.
    pub station: Identifier,
    /// What disagrees, with its numbers and which of the two is used.
    pub text: String,
}

/// Places a report: the user's catalogue first, then the report itself, then what other reports
/// of the station said, then the built-in catalogue. Heights are chosen in the same order, a
/// barometer's own height before the ground's. `None` where nobody knows the place.
pub fn resolve(catalogue: &Catalogue, places: Option<&Places>, report: &Report) -> Option<Site> {
    let user = catalogue.user(report.platform, report.station);
    let standard = catalogue.standard(report.platform, report.station);
    let learnt = places.and_then(Places::most_given);
    let user_position = user.and_then(|row| row.position).map(|at| (at, Source::User));
    let own_position = report.position.map(|at| (at, Source::Report));
    let learnt_position = learnt.map(|place| (place.position, Source::Learnt));
    let standard_position = standard.and_then(|row| row.position).map(|at| (at, Source::BuiltIn));
    let (position, position_source) =
        user_position.or(own_position).or(learnt_position).or(standard_position)?;
    let barometers = [
        user.and_then(|row| row.barometer_height_m),
        report.barometer_height_m,
        learnt.and_then(|place| place.barometer_height_m),
        standard.and_then(|row| row.barometer_height_m),
    ];
    let grounds = [
        user.and_then(|row| row.station_height_m),
        report.station_height_m,
        learnt.and_then(|place| place.station_height_m),
        standard.and_then(|row| row.station_height_m),
    ];
    let first = |heights: [Option<f64>; 4]| {
        heights.into_iter().flatten().find(|height_m| HEIGHTS_M.contains(height_m))
    };
    let (barometer, ground) = (first(barometers), first(grounds));
    // A user who gives the ground alone means the barometer too: it stands before other sources.
    let user_ground = user.and_then(|row| row.barometer_height_m.or(row.station_height_m));
    let barometer = if user_ground.is_some() { user_ground } else { barometer };
    let at_sea = matches!(report.platform, Platform::Ship | Platform::Buoy);
    Some(Site {
        position,
        position_source,
        listed: standard.and_then(|row| row.position),
        station_height_m: ground,
        barometer_height_m: barometer.or(if at_sea { None } else { ground }),
        barometer_is_own: barometer.is_some(),
    })
}

/// What the reports of a station and the catalogue disagree about.
pub fn conflict(
    catalogue: &Catalogue,
    platform: Platform,
    station: Identifier,
    learnt: &Place,
) -> Option<Conflict> {
    let user = catalogue.user(platform, station);
    let row = user.or_else(|| catalogue.standard(platform, station))?;
    let used = if user.is_some() { "the catalogue" } else { "the report" };
    let far = row
        .position
        .map(|position| (position, position.distance_km(learnt.position)))
        .filter(|(_, distance_km)| *distance_km > CONFLICT_KM);
    let height = |own: Option<f64>, other: Option<f64>| {
        let (own, other) = (own?, other?);
        ((own - other).abs() > CONFLICT_M).then_some((own, other))
    };
    let ground = height(learnt.station_height_m, row.station_height_m);
    let barometer = height(learnt.barometer_height_m, row.barometer_height_m);
    let mut parts = Vec::new();
    if let Some((position, distance_km)) = far {
        parts.push(format!(
            "reports put it at {:.2} {:.2}, the catalogue at {:.2} {:.2}, {distance_km:.0} km apart",
            learnt.position.latitude_deg(),
            learnt.position.longitude_deg(),
            position.latitude_deg(),
            position.longitude_deg(),
        ));
    }
    if let Some((own, other)) = ground {
        parts.push(format!("ground at {own:.0} m by its reports, {other:.0} m by the catalogue"));
    }
    if let Some((own, other)) = barometer {
        parts
            .push(format!("barometer at {own:.0} m by its reports, {other:.0} m by the catalogue"));
    }
    if parts.is_empty() {
        return None;
    }
    let text = format!("{}; {used} is used", parts.join("; "));
    Some(Conflict { platform, station, text })
}
