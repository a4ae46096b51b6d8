//! The situation as plain text of at most 72 columns: for mail, radio and screen readers.

use std::fmt::Write as _;

use super::words::{clean, measured, place_words, plain, signed, wind_words, wrapped};
use crate::picture::Picture;
use crate::quantity::{kt_from_m_s, nm_from_km};
use crate::systems::{Kind, Phase, System};
use crate::winds::beaufort::force_of_kt;
use crate::winds::{Method, StationWind};

/// Widest line, characters.
pub const WIDTH: usize = 72;
/// Above this ratio of the analysis error to that of the first guess nothing is trusted (ANA-5).
const WEAK_RATIO: f64 = 0.7;
/// Rows of each list.
const ROWS: usize = 6;

/// What the product says of itself wherever a picture leaves it.
pub const CAUTION: &str = "This supports a trained watchkeeper. It is not a warning service and not \
for navigation by itself. Official warnings, the master's judgement, local codes and licensed \
practice come first. Outlooks are extrapolations, not forecasts. No alert does not mean no danger.";

/// The brief.
pub fn brief_text(picture: &Picture) -> String {
    let mut out = String::new();
    head(picture, &mut out);
    alerts(picture, &mut out);
    systems(picture, Kind::Low, &mut out);
    systems(picture, Kind::High, &mut out);
    watch_points(picture, &mut out);
    winds(picture, &mut out);
    convergence(picture, &mut out);
    tendencies(picture, &mut out);
    section("CAUTION", &mut out);
    paragraph(CAUTION, 0, &mut out);
    out
}

fn line(text: &str, out: &mut String) {
    // Writing to a string cannot fail.
    let _ = writeln!(out, "{}", plain(text.trim_end()));
}

fn paragraph(text: &str, indent: usize, out: &mut String) {
    for row in wrapped(text, WIDTH, indent) {
        line(&row, out);
    }
}

fn section(title: &str, out: &mut String) {
    line("", out);
    line(title, out);
}

fn head(picture: &Picture, out: &mut String) {
    line(&format!("SITUATION valid {}", picture.valid.instant().rfc3339()), out);
    let counts = picture.reports;
    let newest = counts.newest.map_or_else(
        || "no report at all".to_owned(),
        |newest| {
            let age_min = picture.now.seconds_since(newest) / 60;
            format!("newest {}, {age_min} min before {}", newest.day_time(), picture.now.day_time())
        },
    );
    paragraph(&format!("Reports: {} held; {newest}.", counts.held), 2, out);
    paragraph(
        &format!(
            "Of these {} doubted, {} refused; {} repeats, {} corrections; {} complaints; {} wait \
             for their station.",
            counts.doubted,
            counts.refused,
            counts.repeats,
            counts.corrections,
            counts.complaints,
            counts.waiting_for_station
        ),
        2,
        out,
    );
    if let Some(analysis) = picture.newest() {
        let used = format!(
            "Analysis from {} pressures and {} winds of this hour and those before it.",
            analysis.pressures_used, analysis.winds_used
        );
        paragraph(&used, 2, out);
    } else {
        line("No analysis: no pressure report in reach.", out);
    }
}

fn alerts(picture: &Picture, out: &mut String) {
    section("ALERTS", out);
    if picture.alerts.is_empty() {
        let analysis = picture.newest();
        let used = analysis.map_or(0, |analysis| analysis.pressures_used);
        paragraph(
            &format!("None raised. This rests on {used} pressures; it is no sign of safety."),
            2,
            out,
        );
    }
    for alert in &picture.alerts {
        let urgency = match alert.urgency {
            crate::alert::Urgency::Urgent => "URGENT",
            crate::alert::Urgency::Warning => "WARNING",
            crate::alert::Urgency::Notice => "notice",
        };
        let text = format!("{urgency}: {}, since {}.", alert.message, alert.since.day_time());
        paragraph(&text, 2, out);
        if !alert.evidence.is_empty() {
            paragraph(&format!("  {}", alert.evidence), 4, out);
        }
    }
}

const fn phase_word(phase: Phase, kind: Kind) -> &'static str {
    match (phase, kind) {
        (Phase::Forming, _) => "forming",
        (Phase::Deepening, Kind::Low) => "deepening",
        (Phase::Deepening, Kind::High) => "building",
        (Phase::Steady, _) => "steady",
        (Phase::Filling, Kind::Low) => "filling",
        (Phase::Filling, Kind::High) => "weakening",
        (Phase::Ending, _) => "not found in the newest hour, carried on",
    }
}

fn systems(picture: &Picture, kind: Kind, out: &mut String) {
    section(if kind == Kind::Low { "LOWS" } else { "HIGHS" }, out);
    let mut any = false;
    for system in picture.systems.iter().filter(|system| system.kind == kind) {
        any = true;
        describe(system, out);
    }
    if !any {
        line("None found.", out);
    }
}

fn describe(system: &System, out: &mut String) {
    let motion = match (system.course_deg, system.speed_kt) {
        (Some(course_deg), Some(speed)) => {
            format!("moving {course_deg:03.0} deg at {:.0} kt", clean(speed.value, 0))
        }
        (None, Some(_)) => "hardly moving".to_owned(),
        _ => "motion not known yet".to_owned(),
    };
    paragraph(
        &format!(
            "{}  {} (+- {:.0} nm)  {:.1} +- {:.1} hPa, {}, {motion}.",
            system.name,
            place_words(system.position),
            nm_from_km(system.position_error_km),
            system.pressure_hpa.value,
            system.pressure_hpa.error_shown(1),
            phase_word(system.phase, system.kind)
        ),
        5,
        out,
    );
    let mut rest = format!(
        "     Change 3 h {}, 6 h {}, 12 h {}, 24 h {} hPa",
        measured(system.change_3h_hpa, 1),
        measured(system.change_6h_hpa, 1),
        measured(system.change_12h_hpa, 1),
        measured(system.change_24h_hpa, 1)
    );
    if let Some(rate) = system.bergeron {
        let _ =
            write!(rest, "; {:.1} +- {:.1} bergeron", clean(rate.value, 1), rate.error_shown(1));
    }
    if let Some(radius_km) = system.gale_radius_km {
        let _ = write!(rest, "; gale force out to {:.0} nm", nm_from_km(radius_km));
    }
    rest.push('.');
    paragraph(&rest, 5, out);
    if let Some(ahead) = system.outlook.iter().find(|point| point.lead_h == 12) {
        let text = format!(
            "     If it carries on, in 12 h {} (+- {:.0} nm), {:.0} +- {:.0} hPa.",
            place_words(ahead.position),
            nm_from_km(ahead.major_km),
            ahead.pressure_hpa.value,
            ahead.pressure_hpa.error_shown(0)
        );
        paragraph(&text, 5, out);
    }
}

/// The expected wind, marked where the analysis behind it is weak; `-` where there is none.
fn expected_words(wind: &StationWind) -> String {
    let weak = if wind.error_ratio > WEAK_RATIO { ", weak" } else { "" };
    wind.winds.surface.map_or_else(|| "-".to_owned(), |wind| wind_words(wind) + weak)
}

fn watch_points(picture: &Picture, out: &mut String) {
    let points = || picture.winds.iter().filter(|wind| wind.platform.is_none());
    if points().next().is_none() {
        return;
    }
    section("WATCH POINTS (wind expected at 10 m from the pressure pattern)", out);
    for wind in points() {
        let expected = wind.winds.surface.map_or_else(
            || "not known: no analysis there".to_owned(),
            |surface| {
                let error = wind.winds.surface_error_m_s.map_or_else(String::new, |error_m_s| {
                    format!(" +- {:.0}", kt_from_m_s(error_m_s).ceil())
                });
                let force = force_of_kt(kt_from_m_s(surface.speed_m_s));
                format!("{}{error}, force {force}", wind_words(surface))
            },
        );
        let mut doubts = String::new();
        if wind.error_ratio > WEAK_RATIO {
            doubts.push_str("; few reports near, do not trust");
        }
        if wind.winds.low_latitude {
            doubts.push_str("; low latitude, pressure says little of wind");
        }
        if wind.winds.capped {
            doubts.push_str("; gradient too strong for the curvature");
        }
        let place = place_words(wind.position);
        paragraph(&format!("{}  {place}  {expected}{doubts}.", wind.station), 2, out);
    }
}

fn winds(picture: &Picture, out: &mut String) {
    section("STRONGEST WINDS REPORTED (expected from pressure in brackets)", out);
    let mut rows: Vec<_> =
        picture.winds.iter().filter_map(|wind| Some((wind.observed?, wind))).collect();
    rows.sort_by(|one, other| {
        let speed = other.0.speed_m_s.total_cmp(&one.0.speed_m_s);
        speed.then_with(|| one.1.station.cmp(&other.1.station))
    });
    for (observed, wind) in rows.iter().take(ROWS) {
        let text = format!(
            "{:<8} {}  {} ({}) {}",
            wind.station,
            place_words(wind.position),
            wind_words(*observed),
            expected_words(wind),
            wind.explanation
        );
        paragraph_keeping(&text, out);
    }
    if rows.is_empty() {
        line("None reported.", out);
    }
}

/// A table row, kept as it stands and cut with a mark where it is too long.
fn paragraph_keeping(text: &str, out: &mut String) {
    let text = text.trim_end();
    if text.chars().count() <= WIDTH {
        line(text, out);
    } else {
        let cut: String = text.chars().take(WIDTH - 1).collect();
        line(&format!("{cut}~"), out);
    }
}

const fn method_word(method: Method) -> &'static str {
    match method {
        Method::Observed => "observed wind",
        Method::Friction => "surface friction",
        Method::Isallobaric => "isallobaric",
    }
}

fn convergence(picture: &Picture, out: &mut String) {
    section("CONVERGENCE (strongest areas)", out);
    for area in picture.convergence.iter().take(ROWS) {
        let trend = area.trend_per_s.map_or("", |trend| {
            if trend < -5e-6 {
                ", strengthening"
            } else if trend > 5e-6 {
                ", weakening"
            } else {
                ""
            }
        });
        let text = format!(
            "{}  {:.1}e-5 /s by {}, {:.1} cm/s up{trend}; {}",
            place_words(area.position),
            area.divergence_per_s * 1e5,
            method_word(area.method),
            area.ascent_m_s * 100.0,
            area.place
        );
        paragraph(&text, 2, out);
    }
    if picture.convergence.is_empty() {
        line("None stronger than 1e-5 /s where the analysis can be trusted.", out);
    }
}

fn tendencies(picture: &Picture, out: &mut String) {
    section("PRESSURE TENDENCY (fastest falling)", out);
    let mut any = false;
    for row in picture.tendencies.iter().filter(|row| row.change_3h_hpa.is_some()).take(ROWS) {
        any = true;
        let pressure = row
            .pressure_msl_hpa
            .map_or_else(|| "     -".to_owned(), |pressure_hpa| format!("{pressure_hpa:6.1}"));
        let doubt = if row.doubtful { " (doubtful)" } else { "" };
        let text = format!(
            "{:<8} {}  {pressure} hPa  {:>5} hPa/3 h  {}{doubt}",
            row.station,
            place_words(row.position),
            signed(row.change_3h_hpa, 1),
            row.words
        );
        paragraph_keeping(&text, out);
    }
    if !any {
        line("No station with a change.", out);
    }
}
