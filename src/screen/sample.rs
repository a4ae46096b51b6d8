//! A Picture made by hand for the tests of the screen: two lows and a high, one of the lows moving
//! east and deepening, over an invented day. No report, no analysis stands behind it.

use std::sync::Arc;

use crate::alert::{Alert, Rule, Urgency};
use crate::analysis::HourAnalysis;
use crate::field::Grid;
use crate::instant::{Hour, Instant};
use crate::obs::held::FileRecord;
use crate::obs::{Element, Finding, Observation, PressureSource, Provenance, Verdict};
use crate::picture::{ArrivalLine, Arrivals, Picture, ReportCounts};
use crate::quantity::{coriolis_per_s, wind_from_components};
use crate::report::{Form, Identifier, Platform, Report};
use crate::sphere::Position;
use crate::systems::{Kind, Measured, OutlookPoint, Phase, System, TrackEvent, TrackPoint};
use crate::tendency::TendencyRow;
use crate::winds::{ConvergenceArea, Method, PointWinds, StationWind, Wind, WindField};
use crate::wire::ByteCount;

/// A centre of the invented field: pressure against 1012 hPa, radius, km.
struct Centre {
    place: Position,
    depth_hpa: f64,
    radius_km: f64,
}

fn at(latitude_deg: f64, longitude_deg: f64) -> Position {
    Position::clamped(latitude_deg, longitude_deg)
}

/// Mirrors a northern place into the hemisphere and turns it to another meridian.
#[derive(Clone, Copy)]
pub(super) struct Where {
    pub south: bool,
    pub turn_deg: f64,
}

impl Where {
    fn place(self, latitude_deg: f64, longitude_deg: f64) -> Position {
        let sign = if self.south { -1.0 } else { 1.0 };
        at(sign * latitude_deg, longitude_deg + self.turn_deg)
    }
}

fn centres(hours_back: f64, place: Where) -> [Centre; 3] {
    let lon = -18.0 - hours_back * 0.55;
    let lat = 56.0 - hours_back * 0.22;
    [
        Centre {
            place: place.place(lat, lon),
            depth_hpa: -52.0 + hours_back * 1.15,
            radius_km: 780.0,
        },
        Centre { place: place.place(43.0, 8.5), depth_hpa: -13.0, radius_km: 420.0 },
        Centre { place: place.place(44.0, -24.0), depth_hpa: 22.0, radius_km: 1100.0 },
    ]
}

fn pressure(centres: &[Centre; 3], place: Position) -> f64 {
    let bump = |centre: &Centre| {
        let share = place.distance_km(centre.place) / centre.radius_km;
        centre.depth_hpa * (-share * share).exp()
    };
    1012.0 + centres.iter().map(bump).sum::<f64>()
}

const HOURS: i64 = 24;

fn valid() -> Hour {
    Instant::from_calendar(2026, 1, 15, 12, 0).expect("a date").hour_floor()
}

/// The usual sample: the north-east Atlantic.
pub(super) fn picture() -> Picture {
    static USUAL: std::sync::OnceLock<Picture> = std::sync::OnceLock::new();
    USUAL.get_or_init(|| picture_at(Where { south: false, turn_deg: 0.0 })).clone()
}

/// The same weather elsewhere.
pub(super) fn picture_at(place: Where) -> Picture {
    let (south, north) = if place.south { (-66.0, -36.0) } else { (36.0, 66.0) };
    let (west, east) = (-42.0 + place.turn_deg, 18.0 + place.turn_deg);
    let grid = Arc::new(Grid::fitted(south, north, west, east, 61, 51));
    let hours: Vec<Arc<HourAnalysis>> =
        (0..=HOURS).map(|k| Arc::new(analysis(&grid, k - HOURS, place))).collect();
    let wind_fields = (0..=HOURS).map(|k| Arc::new(winds(&grid, &hours, k, place))).collect();
    Picture {
        now: valid().instant().plus_s(26 * 60),
        valid: valid(),
        grid,
        reports: ReportCounts {
            held: 1_284,
            repeats: 96,
            corrections: 7,
            doubted: 11,
            refused: 4,
            complaints: 23,
            waiting_for_station: 3,
            newest: Some(valid().instant().plus_s(20 * 60)),
        },
        hours,
        wind_fields,
        systems: systems(place),
        ended: Vec::new(),
        law: Arc::default(),
        winds: station_winds(place),
        convergence: convergence(place),
        tendencies: tendencies(place),
        alerts: alerts(place),
        observations: observations(place),
        arrivals: arrivals(),
    }
}

fn analysis(grid: &Arc<Grid>, back: i64, place: Where) -> HourAnalysis {
    let centres = centres(-back as f64, place);
    let places: Vec<Position> =
        (0..grid.len()).map(|k| grid.position(k % grid.columns, k / grid.columns)).collect();
    let pressure_hpa = places.iter().map(|place| pressure(&centres, *place)).collect();
    // Well known in the east, hardly known in the far west.
    let error_hpa = places
        .iter()
        .map(|at| {
            let east = crate::quantity::wrap_180_deg(at.longitude_deg() - place.turn_deg);
            (0.6 + ((-12.0 - east) / 30.0).max(0.0).powi(2) * 9.0).min(12.0)
        })
        .collect();
    let hour = valid().plus(back);
    let mut analysis = HourAnalysis::from_field(hour, Arc::clone(grid), pressure_hpa, error_hpa);
    analysis.pressures_used = 412;
    analysis.winds_used = 388;
    analysis
}

fn winds(grid: &Arc<Grid>, hours: &[Arc<HourAnalysis>], k: i64, place: Where) -> WindField {
    let index = usize::try_from(k).expect("not negative");
    let now = centres((HOURS - k) as f64, place);
    let before = centres((HOURS - k + 3) as f64, place);
    let mut field = WindField {
        hour: hours[index].hour,
        grid: Arc::clone(grid),
        geostrophic_m_s: Vec::new(),
        gradient_m_s: Vec::new(),
        surface_m_s: Vec::new(),
        divergence_friction_per_s: Vec::new(),
        divergence_isallobaric_per_s: Vec::new(),
        divergence_observed_per_s: Vec::new(),
        vorticity_per_s: Vec::new(),
        change_3h_hpa: Vec::new(),
    };
    for point in 0..grid.len() {
        let place = grid.position(point % grid.columns, point / grid.columns);
        let slope = |east: f64, north: f64| {
            let (a, b) = (place.offset(east, north), place.offset(-east, -north));
            (pressure(&now, a) - pressure(&now, b)) * 100.0 / 40_000.0
        };
        let f = coriolis_per_s(place.latitude_deg());
        let (px, py) = (slope(20.0, 0.0), slope(0.0, 20.0));
        let (u, v) = (-py / (1.25 * f), px / (1.25 * f));
        let turn = 0.35 * f.signum();
        let (sine, cosine) = turn.sin_cos();
        field.geostrophic_m_s.push([u, v]);
        field.gradient_m_s.push([0.85 * u, 0.85 * v]);
        field.surface_m_s.push([0.62 * (u * cosine - v * sine), 0.62 * (u * sine + v * cosine)]);
        let around: f64 = [(80.0, 0.0), (-80.0, 0.0), (0.0, 80.0), (0.0, -80.0)]
            .iter()
            .map(|(east, north)| pressure(&now, place.offset(*east, *north)))
            .sum();
        let curvature = (around - 4.0 * pressure(&now, place)) * 100.0 / 80_000.0_f64.powi(2);
        let divergence = -curvature * 12_000.0;
        field.divergence_friction_per_s.push(divergence);
        field.divergence_isallobaric_per_s.push(divergence / 3.0);
        field.divergence_observed_per_s.push(f64::NAN);
        field.vorticity_per_s.push(curvature / (1.25 * f));
        field.change_3h_hpa.push(if k >= 3 {
            pressure(&now, place) - pressure(&before, place)
        } else {
            f64::NAN
        });
    }
    field
}

fn measured(value: f64, error: f64) -> Measured {
    Measured { value, error }
}

fn systems(place: Where) -> Vec<System> {
    let track = |index: usize, hours: i64| -> Vec<TrackPoint> {
        (0..=hours)
            .map(|k| {
                let back = hours - k;
                let centres = centres(back as f64, place);
                TrackPoint {
                    hour: valid().plus(-back),
                    position: centres[index].place,
                    position_error_km: 30.0,
                    pressure_hpa: pressure(&centres, centres[index].place),
                    pressure_error_hpa: 0.8,
                    observed: back != 5,
                }
            })
            .collect()
    };
    let now = centres(0.0, place);
    let outlook = |course: f64, speed_km_h: f64, rate: f64| -> Vec<OutlookPoint> {
        [3, 6, 12, 18, 24]
            .into_iter()
            .map(|lead_h| {
                let lead = lead_h as f64;
                OutlookPoint {
                    lead_h,
                    position: now[0].place.destination(course, speed_km_h * lead),
                    major_km: 40.0 + 13.0 * lead,
                    minor_km: 30.0 + 8.0 * lead,
                    axis_deg: course,
                    pressure_hpa: measured(
                        pressure(&now, now[0].place) + rate * lead,
                        1.0 + lead / 4.0,
                    ),
                }
            })
            .collect()
    };
    let course = if place.south { 124.0 } else { 56.0 };
    let base = |name: &str, kind: Kind, index: usize| System {
        name: name.to_owned(),
        kind,
        position: now[index].place,
        position_error_km: 34.0,
        pressure_hpa: measured(pressure(&now, now[index].place), 0.9),
        change_3h_hpa: Some(measured(-3.4, 0.6)),
        change_6h_hpa: Some(measured(-6.9, 0.7)),
        change_12h_hpa: Some(measured(-13.8, 0.9)),
        change_24h_hpa: Some(measured(-27.6, 1.1)),
        bergeron: Some(measured(1.2, 0.1)),
        bergeron_12h: Some(measured(1.2, 0.1)),
        course_deg: Some(course),
        course_error_deg: Some(9.0),
        speed_kt: Some(measured(23.0, 3.0)),
        phase: Phase::Deepening,
        confidence: 0.98,
        depth_hpa: 46.0,
        last_closed_isobar_hpa: Some(1008.0),
        radius_km: Some(820.0),
        gale_radius_km: Some(540.0),
        since: valid().plus(-24),
        track: track(index, 24),
        outlook: Vec::new(),
        events: vec![TrackEvent { hour: valid().plus(-24), what: "found".to_owned() }],
        reports_inside: 38,
    };
    let mut deep = base("L14k", Kind::Low, 0);
    deep.outlook = outlook(course, 43.0, -1.0);
    let mut weak = base("L15n", Kind::Low, 1);
    weak.pressure_hpa.error = 1.6;
    weak.change_3h_hpa = Some(measured(-0.4, 1.4));
    weak.change_6h_hpa = None;
    weak.change_12h_hpa = None;
    weak.change_24h_hpa = None;
    weak.bergeron = None;
    weak.bergeron_12h = None;
    weak.course_deg = None;
    weak.course_error_deg = None;
    weak.speed_kt = Some(measured(4.0, 6.0));
    weak.phase = Phase::Forming;
    weak.confidence = 0.52;
    weak.depth_hpa = 4.1;
    weak.gale_radius_km = None;
    weak.since = valid().plus(-3);
    weak.track = track(1, 3);
    weak.reports_inside = 6;
    let mut high = base("H13p", Kind::High, 2);
    high.change_3h_hpa = Some(measured(0.3, 0.5));
    high.change_6h_hpa = Some(measured(0.8, 0.6));
    high.change_12h_hpa = Some(measured(1.1, 0.8));
    high.change_24h_hpa = Some(measured(2.9, 1.0));
    high.bergeron = None;
    high.bergeron_12h = None;
    high.course_deg = None;
    high.course_error_deg = None;
    high.speed_kt = None;
    high.phase = Phase::Steady;
    high.confidence = 0.91;
    vec![deep, weak, high]
}

const NAMES: [(&str, Platform, f64, f64); 12] = [
    ("03953", Platform::Land, 51.9, -10.2),
    ("SKELF", Platform::Ship, 53.4, -13.8),
    ("62095", Platform::Buoy, 53.1, -15.9),
    ("QGKA", Platform::Aerodrome, 52.7, -8.9),
    ("03100", Platform::Land, 56.5, -6.9),
    ("VRNA7", Platform::Ship, 50.1, -17.7),
    ("03026", Platform::Land, 58.2, -6.3),
    ("62029", Platform::Buoy, 48.7, -12.4),
    ("QGKB", Platform::Aerodrome, 47.4, -0.7),
    ("07110", Platform::Land, 48.4, -4.4),
    ("HAVN", Platform::Ship, 60.3, -22.4),
    ("06260", Platform::Land, 52.1, 5.2),
];

fn surface_wind(centres: &[Centre; 3], place: Position) -> Wind {
    let slope = |east: f64, north: f64| {
        let (a, b) = (place.offset(east, north), place.offset(-east, -north));
        (pressure(centres, a) - pressure(centres, b)) * 100.0 / 40_000.0
    };
    let f = coriolis_per_s(place.latitude_deg());
    let (u, v) = (-slope(0.0, 20.0) / (1.25 * f), slope(20.0, 0.0) / (1.25 * f));
    let (sine, cosine) = (0.35 * f.signum()).sin_cos();
    let (from_deg, speed_m_s) =
        wind_from_components(0.62 * (u * cosine - v * sine), 0.62 * (u * sine + v * cosine));
    Wind { from_deg, speed_m_s }
}

fn station_winds(place: Where) -> Vec<StationWind> {
    let now = centres(0.0, place);
    let mut out: Vec<StationWind> = NAMES
        .iter()
        .enumerate()
        .map(|(k, (name, platform, lat, lon))| {
            let position = place.place(*lat, *lon);
            let surface = surface_wind(&now, position);
            let off = (k % 5) as f64 - 2.0;
            let observed = Wind {
                from_deg: crate::quantity::wrap_360_deg(surface.from_deg + off * 9.0),
                speed_m_s: (surface.speed_m_s + off * 1.3).max(0.5),
            };
            StationWind {
                station: (*name).to_owned(),
                platform: Some(*platform),
                position,
                time: Some(valid().instant()),
                observed: Some(observed),
                gust_m_s: (k % 3 == 0).then_some(observed.speed_m_s * 1.4),
                winds: PointWinds {
                    geostrophic: Some(Wind { speed_m_s: surface.speed_m_s / 0.62, ..surface }),
                    gradient: Some(Wind { speed_m_s: surface.speed_m_s * 1.37, ..surface }),
                    surface: Some(surface),
                    surface_error_m_s: Some(1.4),
                    capped: false,
                    low_latitude: false,
                },
                speed_difference_m_s: Some(observed.speed_m_s - surface.speed_m_s),
                direction_difference_deg: Some(off * 9.0),
                explanation: if off > 1.0 {
                    "sheltered from this direction".to_owned()
                } else {
                    String::new()
                },
                error_ratio: if lon < &-20.0 { 0.82 } else { 0.2 },
            }
        })
        .collect();
    out.push(StationWind {
        station: "Long Reach".to_owned(),
        platform: None,
        position: place.place(54.0, -11.0),
        time: None,
        observed: None,
        gust_m_s: None,
        winds: PointWinds::default(),
        speed_difference_m_s: None,
        direction_difference_deg: None,
        explanation: String::new(),
        error_ratio: 0.3,
    });
    out
}

fn convergence(place: Where) -> Vec<ConvergenceArea> {
    let area = |method, lat, lon, value: f64, error, trend, words: &str| ConvergenceArea {
        method,
        position: place.place(lat, lon),
        divergence_per_s: value,
        error_per_s: error,
        area_km2: 84_000.0,
        ascent_m_s: -value * 1000.0,
        trend_per_s: trend,
        place: words.to_owned(),
    };
    vec![
        area(Method::Friction, 56.0, -17.5, -8.1e-5, Some(1.1e-5), Some(-1.4e-5), "at L14k"),
        area(Method::Observed, 53.0, -12.0, -5.2e-5, Some(1.9e-5), None, "130 300 nm of L14k"),
        area(
            Method::Isallobaric,
            57.5,
            -12.0,
            -3.3e-5,
            Some(2.4e-5),
            Some(0.3e-5),
            "070 190 nm of L14k",
        ),
        area(Method::Friction, 43.0, 8.6, -1.9e-5, None, Some(-0.2e-5), "at L15n"),
    ]
}

fn tendencies(place: Where) -> Vec<TendencyRow> {
    let (now, before) = (centres(0.0, place), centres(3.0, place));
    let mut rows: Vec<TendencyRow> = NAMES
        .iter()
        .enumerate()
        .map(|(k, (name, platform, lat, lon))| {
            let position = place.place(*lat, *lon);
            let change = pressure(&now, position) - pressure(&before, position);
            let trace_hpa = (0..24)
                .map(|hour: i64| {
                    let back = (23 - hour) as f64;
                    ((hour + 1) % 7 != 0 || k % 2 == 0)
                        .then(|| pressure(&centres(back, place), position))
                })
                .collect();
            TendencyRow {
                station: Identifier::new(name).expect("a name"),
                platform: *platform,
                name: (k == 0).then(|| "Blackhead Light".to_owned()),
                position,
                time: valid().instant(),
                pressure_msl_hpa: (k != 9).then(|| pressure(&now, position)),
                characteristic: (k % 4 != 1).then_some(if change < 0.0 { 7 } else { 2 }),
                characteristic_computed: Some(if change < 0.0 { 8 } else { 2 }),
                change_3h_reported_hpa: (k % 4 != 1).then_some(change + 0.2),
                change_3h_computed_hpa: Some(change + 0.1),
                tide_3h_hpa: Some(0.2),
                ship_motion_3h_hpa: (*platform == Platform::Ship).then_some(-0.4),
                change_3h_hpa: Some(change),
                change_3h_error_hpa: Some(if k == 5 { 2.1 } else { 0.4 }),
                change_1h_hpa: Some(change / 2.6),
                change_24h_hpa: (k % 3 != 2).then_some(change * 6.0),
                words: crate::tendency::words::of_change(change, Some(7)),
                trace_hpa,
                doubtful: k == 7,
            }
        })
        .collect();
    rows.sort_by(|a, b| a.change_3h_hpa.unwrap_or(0.0).total_cmp(&b.change_3h_hpa.unwrap_or(0.0)));
    rows
}

fn alerts(place: Where) -> Vec<Alert> {
    let since = |minutes: i64| valid().instant().plus_s(-minutes * 60);
    let alert = |rule, urgency, subject: &str, message: &str, evidence: &str| Alert {
        key: format!("{rule:?} {subject}"),
        rule,
        urgency,
        subject: subject.to_owned(),
        position: Some(place.place(56.0, -18.0)),
        message: message.to_owned(),
        evidence: evidence.to_owned(),
        confidence: Some(0.93),
        since: since(180),
        acknowledged: false,
    };
    let mut gale = alert(
        Rule::Gale,
        Urgency::Warning,
        "L14k",
        "gale force within 290 nm of L14k: expected surface wind up to 52 kt",
        "expected surface wind from the analysis, 9 reports of 34 kt or more agree",
    );
    gale.acknowledged = true;
    vec![
        alert(
            Rule::ExplosiveDeepening,
            Urgency::Urgent,
            "L14k",
            "L14k deepens explosively: 27.6 hPa in 24 h, 1.2 bergeron",
            "central pressure 962 +-0.9 hPa, 38 reports inside, followed for 24 h",
        ),
        alert(
            Rule::RapidFall,
            Urgency::Warning,
            "03953",
            "03953 falls very rapidly: -6.4 hPa in 3 h",
            "as sent -6.2, from its own series -6.3, tide removed",
        ),
        gale,
        Alert {
            confidence: Some(0.4),
            ..alert(
                Rule::NewSystem,
                Urgency::Notice,
                "L15n",
                "new low L15n, 1000 hPa",
                "closed isobar found in 3 hours running, 6 reports inside",
            )
        },
    ]
}

fn observations(place: Where) -> Vec<Arc<Observation>> {
    let now = centres(0.0, place);
    NAMES
        .iter()
        .enumerate()
        .map(|(k, (name, platform, lat, lon))| {
            let position = place.place(*lat, *lon);
            let wind = surface_wind(&now, position);
            let (u, v) = crate::quantity::wind_components(wind.from_deg, wind.speed_m_s);
            let station = Identifier::new(name).expect("a name");
            let report = Report::empty(station, *platform, Form::Synop, valid().instant());
            let findings = if k == 3 {
                vec![Finding {
                    element: Element::Pressure,
                    verdict: Verdict::Doubtful,
                    check: "QC-6 neighbours".to_owned(),
                    reason: "3.1 hPa off its neighbours".to_owned(),
                }]
            } else {
                Vec::new()
            };
            Arc::new(Observation {
                report,
                position,
                hour: valid(),
                barometer_height_m: None,
                pressure_msl_hpa: Some(pressure(&now, position)),
                pressure_error_hpa: 0.5,
                pressure_source: Some(PressureSource::Reported),
                wind_m_s: Some((u, v)),
                wind_error_m_s: 1.5,
                findings,
                provenance: Provenance {
                    file: "A_SNXX20.txt".to_owned(),
                    content: "00".to_owned(),
                    start: 0,
                    end: 60,
                    received: valid().instant().plus_s(600),
                },
            })
        })
        .collect()
}

fn arrivals() -> Arrivals {
    let received = |minutes: i64| valid().instant().plus_s(minutes * 60);
    let line = |minutes: i64, who: &str, form: &str, verdict, text: &str| ArrivalLine {
        received: received(minutes),
        who: who.to_owned(),
        form: form.to_owned(),
        time: Some(valid().instant()),
        late_minutes: Some(minutes),
        verdict,
        text: text.to_owned(),
        file: format!("A_SN{minutes:02}QGKS151200_C_QGKS.txt"),
        decision: Some(format!("land {who} 2026-01-15T12:00:00Z")),
    };
    let mut lines = vec![
        line(22, "SKELF", "ship", Verdict::Sound, ""),
        line(
            21,
            "QGKA",
            "metar",
            Verdict::Doubtful,
            "QC-6 neighbours: pressure 3.1 hPa off its neighbours",
        ),
        line(
            20,
            "03953",
            "synop",
            Verdict::Refused,
            "QC-1: sea-level pressure 885.2 hPa outside 900 to 1080",
        ),
        line(19, "62095", "buoy", Verdict::Sound, ""),
        // What a hostile report might carry.
        line(
            18,
            "EV\u{1b}[31mIL",
            "synop",
            Verdict::Doubtful,
            "group \u{1b}]0;x\u{7} not understood",
        ),
    ];
    for k in 0..14 {
        lines.push(line(
            17 - k,
            NAMES[usize::try_from(k).unwrap_or(0) % 12].0,
            "synop",
            Verdict::Sound,
            "",
        ));
    }
    Arrivals {
        files: vec![FileRecord {
            file: "A_SN22QGKS151200_C_QGKS.txt".to_owned(),
            content: "00".to_owned(),
            received: received(22),
            bytes: ByteCount::default(),
            reports: 40,
            complaints: Vec::new(),
            complaints_total: 0,
            refused: None,
        }],
        lines,
        unknown_stations: vec![("61999".to_owned(), 2), ("99112".to_owned(), 1)],
        newest_file: Some(received(22)),
        received_per_hour: vec![
            48, 50, 49, 61, 47, 50, 52, 63, 50, 51, 49, 60, 52, 50, 47, 66, 51, 50, 48, 62, 50, 51,
            49, 64,
        ],
    }
}
