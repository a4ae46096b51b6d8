//! Scripts of keys to state and effects.

use super::*;
use crate::instant::Hour;
use crate::obs::Verdict;
use crate::picture::{Arrivals, Picture, ReportCounts};
use crate::sphere::Position;
use crate::systems::{Kind, Measured, Phase, System, TrackPoint};

fn system(name: &str, latitude_deg: f64) -> System {
    let position = Position::clamped(latitude_deg, 0.0);
    let hour = Hour::from_unix_h(500_000);
    let point = |k: i64| TrackPoint {
        hour: hour.plus(k),
        position,
        position_error_km: 20.0,
        pressure_hpa: 990.0,
        pressure_error_hpa: 1.0,
        observed: true,
    };
    System {
        name: name.to_owned(),
        kind: Kind::Low,
        position,
        position_error_km: 20.0,
        pressure_hpa: Measured { value: 990.0, error: 1.0 },
        change_3h_hpa: None,
        change_6h_hpa: None,
        change_12h_hpa: None,
        change_24h_hpa: None,
        bergeron: None,
        bergeron_12h: None,
        course_deg: None,
        course_error_deg: None,
        speed_kt: None,
        phase: Phase::Steady,
        confidence: 0.9,
        depth_hpa: 10.0,
        last_closed_isobar_hpa: None,
        radius_km: None,
        gale_radius_km: None,
        since: hour,
        track: vec![point(-2), point(-1), point(0)],
        outlook: Vec::new(),
        events: Vec::new(),
        reports_inside: 9,
    }
}

fn picture() -> Picture {
    let grid = std::sync::Arc::new(crate::field::Grid::fitted(40.0, 60.0, -20.0, 20.0, 21, 21));
    let valid = Hour::from_unix_h(500_000);
    let flat = |k: i64| {
        std::sync::Arc::new(crate::analysis::HourAnalysis::from_field(
            valid.plus(k),
            std::sync::Arc::clone(&grid),
            vec![1010.0; grid.len()],
            vec![1.0; grid.len()],
        ))
    };
    Picture {
        now: valid.instant(),
        valid,
        hours: vec![flat(-2), flat(-1), flat(0)],
        grid,
        reports: ReportCounts::default(),
        wind_fields: Vec::new(),
        ended: Vec::new(),
        law: std::sync::Arc::default(),
        systems: vec![system("L1", 50.0), system("L2", 55.0), system("L3", 45.0)],
        winds: Vec::new(),
        convergence: Vec::new(),
        tendencies: Vec::new(),
        alerts: vec![alert("gale L1", false), alert("gale L2", true)],
        observations: Vec::new(),
        arrivals: Arrivals {
            lines: vec![line(Some("land 03953 2026")), line(None)],
            ..Arrivals::default()
        },
    }
}

fn line(decision: Option<&str>) -> crate::picture::ArrivalLine {
    crate::picture::ArrivalLine {
        received: Instant::from_unix_s(0),
        who: "03953".to_owned(),
        form: "synop".to_owned(),
        time: None,
        late_minutes: None,
        verdict: Verdict::Doubtful,
        text: String::new(),
        file: "a".to_owned(),
        decision: decision.map(str::to_owned),
    }
}

fn alert(key: &str, acknowledged: bool) -> crate::alert::Alert {
    crate::alert::Alert {
        key: key.to_owned(),
        rule: crate::alert::Rule::Gale,
        urgency: crate::alert::Urgency::Warning,
        subject: key.to_owned(),
        position: None,
        message: "gale".to_owned(),
        evidence: "wind".to_owned(),
        confidence: None,
        since: Instant::from_unix_s(0),
        acknowledged,
    }
}

fn press(desk: &mut Desk, picture: &Picture, script: &str) -> Vec<Effect> {
    let keys = Key::script(script).expect("a script");
    keys.into_iter().flat_map(|key| desk.update(Event::Key(key), Some(picture))).collect()
}

fn after(script: &str) -> (Desk, Vec<Effect>) {
    let picture = picture();
    let mut desk = Desk::new(80, 24);
    let effects = press(&mut desk, &picture, script);
    (desk, effects)
}

#[test]
fn a_script_names_its_keys_and_refuses_others() {
    let keys = Key::script("j<enter><c-l><lt>").expect("a script");
    let expected = [Key::char('j'), Key::plain(Code::Enter), Key::control('l'), Key::char('<')];
    assert_eq!(keys, expected);
    assert_eq!(Key::script("<f13>"), Err("no key is called <f13>".to_owned()));
}

#[test]
fn quitting_takes_q_or_control_c_and_never_escape() {
    assert_eq!(after("q").1, [Effect::Quit]);
    assert_eq!(after("<c-c>").1, [Effect::Quit]);
    assert_eq!(after("S/q<c-c>").1.last(), Some(&Effect::Quit), "even while typing");
    for start in ["", "x", "xm", "z", "?", "S", "S/abc", "Sd", "Sn", "T"] {
        let (_, effects) = after(&format!("{start}<esc><esc><esc><esc><esc>"));
        assert!(!effects.contains(&Effect::Quit), "{start}");
    }
    assert!(!after("?q").1.contains(&Effect::Quit), "q closes the help");
}

#[test]
fn panes_come_by_tab_number_and_letter() {
    assert_eq!(after("<tab>").0.focus, Pane::Systems);
    assert_eq!(after("<backtab>").0.focus, Pane::Arrivals);
    for (index, pane) in Pane::ALL.into_iter().enumerate() {
        assert_eq!(after(&format!("{}", index + 1)).0.focus, pane);
        assert_eq!(after(&pane.letter().to_string()).0.focus, pane);
        assert_eq!(pane.index(), index);
    }
}

#[test]
fn every_key_of_the_bottom_lines_does_something() {
    let picture = picture();
    for pane in Pane::ALL {
        for (keys, what) in keys::bottom(pane) {
            let name = match *keys {
                "Tab" => "<tab>",
                "Enter" => "<enter>",
                other => other,
            };
            let pieces: Vec<String> = if name.starts_with('<') {
                vec![name.to_owned()]
            } else {
                name.chars().map(|c| c.to_string()).collect()
            };
            for key in pieces {
                // Taking back needs an alert that is acknowledged; rows need rows.
                if matches!(pane, Pane::Winds | Pane::Convergence | Pane::Tendencies)
                    && !matches!(key.as_str(), "?" | "<tab>" | "q" | "z" | "o" | "/")
                {
                    continue;
                }
                let mut desk = Desk::new(80, 24);
                let start = if key == "u" && pane == Pane::Alerts { "j" } else { "" };
                press(&mut desk, &picture, &format!("{}{start}", pane.letter()));
                let effects = press(&mut desk, &picture, &key);
                assert!(!effects.is_empty(), "{pane:?} {key} {what}");
            }
        }
    }
}

#[test]
fn alerts_are_acknowledged_and_taken_back_by_their_key() {
    assert_eq!(after("Aa").1.last(), Some(&Effect::Acknowledge("gale L1".to_owned())));
    assert_eq!(after("Aju").1.last(), Some(&Effect::Unacknowledge("gale L2".to_owned())));
    assert!(!after("Au").1.iter().any(|effect| matches!(effect, Effect::Unacknowledge(_))));
}

#[test]
fn a_system_is_dismissed_only_after_a_yes_and_renamed_after_enter() {
    assert!(after("Sdy").1.contains(&Effect::Dismiss("L1".to_owned())));
    for no in ["Sdn", "Sd<esc>", "Sd<enter>"] {
        assert!(!after(no).1.iter().any(|effect| matches!(effect, Effect::Dismiss(_))), "{no}");
    }
    let renamed = Effect::Rename { from: "L1".to_owned(), to: "Ada".to_owned() };
    assert!(after("SnAdx<backspace>a<enter>").1.contains(&renamed));
    assert!(!after("SnAda<esc>").1.contains(&renamed));
}

#[test]
fn a_report_is_overruled_where_a_decision_about_it_is_possible() {
    let overrule = |verdict| Effect::Overrule { decision: "land 03953 2026".to_owned(), verdict };
    assert_eq!(after("Ry").1.last(), Some(&overrule(Some(Verdict::Sound))));
    assert_eq!(after("Rx").1.last(), Some(&overrule(Some(Verdict::Refused))));
    assert_eq!(after("Ru").1.last(), Some(&overrule(None)));
    assert_eq!(after("Rjx").1.last(), Some(&Effect::Draw), "a line about a file: only a notice");
}

#[test]
fn a_filter_holds_until_escape() {
    let picture = picture();
    let shown = |script: &str| {
        let (desk, _) = after(script);
        rows::shown(&picture, &desk, Pane::Systems).len()
    };
    assert_eq!(shown("S/l2"), 1, "while it is typed");
    assert_eq!(shown("S/l2<enter>"), 1);
    assert_eq!(shown("S/l2<enter><esc>"), 3);
    assert_eq!(shown("S/l2<esc>"), 3);
}

#[test]
fn a_selection_stays_with_what_it_is_about() {
    let mut picture = picture();
    let mut desk = Desk::new(80, 24);
    press(&mut desk, &picture, "Sjj");
    assert_eq!(desk.list(Pane::Systems).about.as_deref(), Some("L3"));
    picture.systems.rotate_right(1);
    desk.update(Event::Picture, Some(&picture));
    assert_eq!(desk.list(Pane::Systems).about.as_deref(), Some("L3"));
    assert_eq!(desk.list(Pane::Systems).selected, 0);
    picture.systems.clear();
    desk.update(Event::Picture, Some(&picture));
    assert_eq!((desk.list(Pane::Systems).selected, &desk.list(Pane::Systems).about), (0, &None));
}

#[test]
fn time_is_stepped_within_the_window_and_the_outlook() {
    let valid = picture().valid;
    assert_eq!(after("[").0.chart.hour, Some(valid.plus(-1)));
    assert_eq!(after("[[[[[[").0.chart.hour, Some(valid.plus(-2)), "no older than the window");
    assert_eq!(after("[]").0.chart.hour, None);
    assert_eq!(after("[[.").0.chart.hour, None);
    assert_eq!(after(&"]".repeat(40)).0.chart.hour, Some(valid.plus(24)));
}

#[test]
fn the_chart_zooms_moves_and_comes_back() {
    let (desk, _) = after("++lljx0");
    assert_eq!((desk.chart.centre, desk.chart.zoom), (None, 0));
    let moved = after("++l").0.chart.centre.expect("a centre");
    assert!(moved.longitude_deg() > 1.0, "{moved:?}");
    // The first stands in the middle already: on to the second, and back again.
    assert_eq!(after("n").0.chart.centre, Some(Position::clamped(55.0, 0.0)));
    assert_eq!(after("nN").0.chart.centre, Some(Position::clamped(50.0, 0.0)));
    assert_eq!(after("nf").0.chart.follow.as_deref(), Some("L2"));
    let zoomed = after(&"+".repeat(100)).0.chart.zoom;
    assert_eq!(zoomed, after(&"+".repeat(101)).0.chart.zoom);
}

#[test]
fn the_clock_draws_only_when_the_minute_changes() {
    let mut desk = Desk::new(80, 24);
    let time = Instant::from_unix_s(6000);
    assert_eq!(desk.update(Event::Tick(time), None), [Effect::Draw]);
    assert_eq!(desk.update(Event::Tick(time.plus_s(59)), None), []);
    assert_eq!(desk.update(Event::Tick(time.plus_s(60)), None), [Effect::Draw]);
}

#[test]
fn a_resize_of_whatever_size_repaints() {
    let mut desk = Desk::new(80, 24);
    let resize = Event::Resize { columns: 80, rows: 24 };
    assert_eq!(desk.update(resize, None), [Effect::Repaint]);
}
