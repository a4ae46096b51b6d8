//! The situation as JSON, for machines. The form is versioned by `schema`; unknown is null.
//!
//! `schema` 1:
//!
//! | key | value |
//! | --- | --- |
//! | `schema` | 1 |
//! | `valid`, `now` | RFC 3339 times: the hour of the newest analysis, the clock |
//! | `region` | `map`, `columns`, `rows`, `spacing_km`, corners as `[latitude_deg, longitude_deg]` |
//! | `reports` | counts: `held`, `repeats`, `corrections`, `doubted`, `refused`, `complaints`, `waiting_for_station`, and `newest` |
//! | `systems` | each high and low: see [`system`]; bergeron positive for deepening lows |
//! | `tendencies` | one object a station, fastest falling first |
//! | `winds` | one object a station or watch point |
//! | `convergence` | areas, strongest first |
//! | `alerts` | most urgent first |
//! | `caution` | what the product says of itself |

use serde_json::{Value, json};

use super::brief::CAUTION;
use super::words::from_whole_deg;
use crate::field::Grid;
use crate::picture::Picture;
use crate::quantity::kt_from_m_s;
use crate::systems::{Measured, System};
use crate::tendency::TendencyRow;
use crate::winds::{ConvergenceArea, StationWind, Wind};

/// Version of the form.
pub const SCHEMA: u32 = 1;

/// The Picture as JSON.
pub fn brief_json(picture: &Picture) -> Value {
    let counts = picture.reports;
    json!({
        "schema": SCHEMA,
        "valid": picture.valid,
        "now": picture.now,
        "region": region(&picture.grid),
        "reports": {
            "held": counts.held,
            "repeats": counts.repeats,
            "corrections": counts.corrections,
            "doubted": counts.doubted,
            "refused": counts.refused,
            "complaints": counts.complaints,
            "waiting_for_station": counts.waiting_for_station,
            "newest": counts.newest,
        },
        "systems": picture.systems.iter().map(system).collect::<Vec<_>>(),
        "tendencies": picture.tendencies.iter().map(tendency).collect::<Vec<_>>(),
        "winds": picture.winds.iter().map(wind).collect::<Vec<_>>(),
        "convergence": picture.convergence.iter().map(area).collect::<Vec<_>>(),
        "alerts": picture.alerts,
        "caution": CAUTION,
    })
}

/// A number rounded to so many decimals; null where it is not finite.
fn number(value: f64, decimals: i32) -> Value {
    let scale = 10_f64.powi(decimals);
    let rounded = (value * scale).round() / scale;
    // Minus nought is nought.
    if rounded == 0.0 { json!(0.0) } else { json!(rounded) }
}

fn optional(value: Option<f64>, decimals: i32) -> Value {
    value.map_or(Value::Null, |value| number(value, decimals))
}

fn value_of(measured: Option<Measured>, decimals: i32) -> Value {
    optional(measured.map(|measured| measured.value), decimals)
}

fn error_of(measured: Option<Measured>, decimals: i32) -> Value {
    optional(measured.map(|measured| measured.error), decimals)
}

fn region(grid: &Grid) -> Value {
    let corner = |column: usize, row: usize| {
        let place = grid.position(column, row);
        json!([number(place.latitude_deg(), 2), number(place.longitude_deg(), 2)])
    };
    let (last_column, last_row) = (grid.columns.saturating_sub(1), grid.rows.saturating_sub(1));
    json!({
        "map": match grid.projection.kind() {
            crate::projection::Kind::PolarStereographic => "polar stereographic",
            crate::projection::Kind::Lambert => "Lambert conformal conic",
            crate::projection::Kind::Mercator => "Mercator",
        },
        "columns": grid.columns,
        "rows": grid.rows,
        "spacing_km": number(grid.spacing_m / 1000.0, 1),
        "corners": [
            corner(0, 0),
            corner(last_column, 0),
            corner(last_column, last_row),
            corner(0, last_row),
        ],
    })
}

/// One system. Errors are standard errors; `track` is oldest first and smoothed backwards;
/// `outlook` is an extrapolation.
fn system(system: &System) -> Value {
    let track: Vec<Value> = system
        .track
        .iter()
        .map(|point| {
            json!({
                "time": point.hour,
                "latitude_deg": number(point.position.latitude_deg(), 3),
                "longitude_deg": number(point.position.longitude_deg(), 3),
                "pressure_hpa": number(point.pressure_hpa, 2),
                "found": point.observed,
            })
        })
        .collect();
    let outlook: Vec<Value> = system
        .outlook
        .iter()
        .map(|point| {
            json!({
                "lead_h": point.lead_h,
                "latitude_deg": number(point.position.latitude_deg(), 2),
                "longitude_deg": number(point.position.longitude_deg(), 2),
                "major_km": number(point.major_km, 0),
                "minor_km": number(point.minor_km, 0),
                "axis_deg": number(point.axis_deg, 0),
                "pressure_hpa": number(point.pressure_hpa.value, 1),
                "pressure_error_hpa": number(point.pressure_hpa.error, 1),
            })
        })
        .collect();
    json!({
        "name": system.name,
        "kind": system.kind,
        "latitude_deg": number(system.position.latitude_deg(), 3),
        "longitude_deg": number(system.position.longitude_deg(), 3),
        "position_error_km": number(system.position_error_km, 1),
        "pressure_hpa": number(system.pressure_hpa.value, 2),
        "pressure_error_hpa": number(system.pressure_hpa.error, 2),
        "change_3h_hpa": value_of(system.change_3h_hpa, 2),
        "change_6h_hpa": value_of(system.change_6h_hpa, 2),
        "change_12h_hpa": value_of(system.change_12h_hpa, 2),
        "change_24h_hpa": value_of(system.change_24h_hpa, 2),
        "change_24h_error_hpa": error_of(system.change_24h_hpa, 2),
        "bergeron": value_of(system.bergeron, 3),
        "bergeron_error": error_of(system.bergeron, 3),
        "bergeron_12h": value_of(system.bergeron_12h, 3),
        "course_deg": optional(system.course_deg, 1),
        "course_error_deg": optional(system.course_error_deg, 1),
        "speed_kt": value_of(system.speed_kt, 1),
        "speed_error_kt": error_of(system.speed_kt, 1),
        "phase": system.phase,
        "confidence": number(system.confidence, 3),
        "depth_hpa": number(system.depth_hpa, 1),
        "last_closed_isobar_hpa": optional(system.last_closed_isobar_hpa, 1),
        "radius_km": optional(system.radius_km, 0),
        "gale_radius_km": optional(system.gale_radius_km, 0),
        "reports_inside": system.reports_inside,
        "since": system.since,
        "track": track,
        "outlook": outlook,
        "events": system.events,
    })
}

fn tendency(row: &TendencyRow) -> Value {
    json!({
        "station": row.station,
        "kind": row.platform,
        "name": row.name,
        "latitude_deg": number(row.position.latitude_deg(), 4),
        "longitude_deg": number(row.position.longitude_deg(), 4),
        "time": row.time,
        "pressure_msl_hpa": optional(row.pressure_msl_hpa, 2),
        "characteristic": row.characteristic,
        "characteristic_computed": row.characteristic_computed,
        "change_3h_hpa": optional(row.change_3h_hpa, 2),
        "change_3h_error_hpa": optional(row.change_3h_error_hpa, 2),
        "change_3h_reported_hpa": optional(row.change_3h_reported_hpa, 2),
        "change_3h_computed_hpa": optional(row.change_3h_computed_hpa, 2),
        "tide_3h_hpa": optional(row.tide_3h_hpa, 2),
        "ship_motion_3h_hpa": optional(row.ship_motion_3h_hpa, 2),
        "change_1h_hpa": optional(row.change_1h_hpa, 2),
        "change_24h_hpa": optional(row.change_24h_hpa, 2),
        "words": row.words,
        "doubtful": row.doubtful,
    })
}

fn blowing(wind: Option<Wind>) -> Value {
    wind.map_or(Value::Null, |wind| {
        json!({
            "from_deg": from_whole_deg(wind),
            "speed_kt": number(kt_from_m_s(wind.speed_m_s), 1),
        })
    })
}

fn wind(wind: &StationWind) -> Value {
    json!({
        "station": wind.station,
        "kind": wind.platform,
        "latitude_deg": number(wind.position.latitude_deg(), 4),
        "longitude_deg": number(wind.position.longitude_deg(), 4),
        "time": wind.time,
        "observed": blowing(wind.observed),
        "gust_kt": optional(wind.gust_m_s.map(kt_from_m_s), 1),
        "geostrophic": blowing(wind.winds.geostrophic),
        "gradient": blowing(wind.winds.gradient),
        "surface": blowing(wind.winds.surface),
        "surface_error_kt": optional(wind.winds.surface_error_m_s.map(kt_from_m_s), 1),
        "speed_difference_kt": optional(wind.speed_difference_m_s.map(kt_from_m_s), 1),
        "direction_difference_deg": optional(wind.direction_difference_deg, 0),
        "explanation": wind.explanation,
        "error_ratio": number(wind.error_ratio, 2),
    })
}

fn area(area: &ConvergenceArea) -> Value {
    json!({
        "method": area.method,
        "latitude_deg": number(area.position.latitude_deg(), 2),
        "longitude_deg": number(area.position.longitude_deg(), 2),
        "divergence_per_s": number(area.divergence_per_s, 8),
        "error_per_s": optional(area.error_per_s, 8),
        "area_km2": number(area.area_km2, 0),
        "ascent_m_s": number(area.ascent_m_s, 4),
        "trend_per_s": optional(area.trend_per_s, 8),
        "place": area.place,
    })
}
