//! The chart of the sample: words apart, both hemispheres, the date line, the pole.

use super::*;
use crate::desk::Desk;
use crate::screen::sample::{self, Where};
use crate::screen::{Glyphs, Look};
use crate::settings::Settings;

fn drawn(picture: &crate::picture::Picture, desk: &Desk, width: u16, height: u16) -> Vec<String> {
    let area = Rect::new(0, 0, width, height);
    let mut buf = Buffer::empty(area);
    let settings = Settings::default();
    let look = Look { glyphs: Glyphs::Braille, ..Look::new() };
    let scene = Scene { picture, desk, settings: &settings, look: &look };
    draw(scene, area, &mut buf);
    buf.content
        .chunks(usize::from(width))
        .map(|row| row.iter().map(ratatui::buffer::Cell::symbol).collect())
        .collect()
}

fn dots(lines: &[String]) -> usize {
    lines
        .iter()
        .flat_map(|line| line.chars())
        .filter(|c| ('\u{2801}'..='\u{28ff}').contains(c))
        .count()
}

#[test]
fn no_two_words_overlap_at_any_magnification_and_with_every_layer_on() {
    let picture = sample::picture();
    let settings = Settings {
        watch_points: vec![crate::settings::WatchPoint {
            name: "Long Reach".to_owned(),
            latitude_deg: 54.0,
            longitude_deg: -11.0,
        }],
        ..Settings::default()
    };
    for zoom in -2..=12 {
        let mut desk = Desk::new(120, 40);
        desk.chart.zoom = zoom;
        desk.chart.centre = Some(crate::sphere::Position::clamped(53.0, -12.0));
        desk.chart.cursor = desk.chart.centre;
        desk.chart.layers.wind = true;
        desk.chart.layers.isallobars = true;
        desk.chart.layers.graticule = true;
        let look = Look { glyphs: Glyphs::Ascii, ..Look::new() };
        let scene = Scene { picture: &picture, desk: &desk, settings: &settings, look: &look };
        let view = View::of(&desk.chart, &picture, 120, 36);
        let mut labels = Labels::new(120, 36);
        let mut raster = Raster::new(120, 36);
        let hour = picture.valid;
        centres::words(&view, &picture, hour, &mut labels);
        reports::places(&view, scene.settings, &mut labels);
        centres::tracks(&view, &picture, hour, &mut raster, &mut labels);
        centres::outlooks(&view, &picture, hour, &mut raster, &mut labels);
        let analysis = picture.newest().expect("an analysis");
        let field = picture.wind_field(hour).expect("winds");
        isolines::label(&isolines::isallobars(&view, field, &mut raster), &mut labels);
        reports::draw(&view, &picture, hour, &mut raster, &mut labels);
        isolines::label(&isolines::isobars(&view, analysis, &mut raster).0, &mut labels);
        fields::wind(&view, field, Glyphs::Ascii, &mut raster, &mut labels);
        fields::graticule(&view, &mut raster, &mut labels);
        let mut seen = std::collections::BTreeSet::new();
        for label in &labels.placed {
            for k in 0..u16::try_from(label.text.chars().count()).expect("short") {
                assert!(seen.insert((label.column + k, label.row)), "zoom {zoom}: {label:?}");
                assert!(label.column + k < 120 && label.row < 36);
            }
        }
        assert!(labels.placed.len() > 5, "zoom {zoom}: {}", labels.placed.len());
    }
}

#[test]
fn the_same_weather_is_drawn_in_the_south_and_over_the_date_line() {
    let usual = drawn(&sample::picture(), &Desk::new(80, 24), 78, 20);
    assert!(usual.iter().any(|line| line.contains("L14k")));
    for place in [
        Where { south: true, turn_deg: 0.0 },
        Where { south: false, turn_deg: -168.0 },
        Where { south: true, turn_deg: 192.0 },
    ] {
        let picture = sample::picture_at(place);
        let lines = drawn(&picture, &Desk::new(80, 24), 78, 20);
        for name in ["L14k", "L15n?", "H13p", "964", "1032"] {
            assert!(lines.iter().any(|line| line.contains(name)), "{name}\n{}", lines.join("\n"));
        }
        // No streak across the window: no row is a line from edge to edge.
        for line in &lines {
            let run = line.chars().filter(|c| *c == '⠤' || *c == '⠒' || *c == '⠉').count();
            assert!(run < 60, "{line}");
        }
    }
    // The southern low turns the other way, but its isobars are the mirror image: as many dots.
    let mut desk = Desk::new(80, 24);
    desk.chart.layers.tracks = false;
    let south = drawn(&sample::picture_at(Where { south: true, turn_deg: 0.0 }), &desk, 78, 20);
    assert!(dots(&south) > 300, "{}", dots(&south));
}

#[test]
fn coast_and_view_go_over_the_pole() {
    let mut picture = sample::picture();
    let grid = crate::field::Grid::fitted(50.0, 90.0, -180.0, 180.0, 61, 61);
    picture.grid = std::sync::Arc::new(grid);
    picture.hours.clear();
    picture.wind_fields.clear();
    let desk = Desk::new(80, 24);
    let lines = drawn(&picture, &desk, 78, 20);
    assert!(dots(&lines) > 200, "{}", lines.join("\n"));
    let view = View::of(&desk.chart, &picture, 78, 19);
    let pole = crate::sphere::Position::clamped(90.0, 0.0);
    let (x, y) = view.dot_of(pole);
    assert!((x - 78.0).abs() < 3.0 && (y - 38.0).abs() < 5.0, "{x} {y}");
    // There and back again, beside the pole.
    let place = crate::sphere::Position::clamped(88.0, 135.0);
    let (x, y) = view.dot_of(place);
    assert!(view.place(x, y).distance_km(place) < 0.01);
}

#[test]
fn moving_by_whole_cells_does_not_change_the_dots() {
    let picture = sample::picture();
    let mut desk = Desk::new(80, 24);
    desk.chart.zoom = 2;
    desk.chart.layers.reports = false;
    let at = |desk: &Desk| drawn(&picture, desk, 78, 20);
    let view = View::of(&desk.chart, &picture, 78, 19);
    desk.chart.centre = Some(view.middle());
    let view = View::of(&desk.chart, &picture, 78, 19);
    let before = at(&desk);
    desk.chart.centre = Some(view.place(78.0 + 6.0, 38.0));
    let after = at(&desk);
    // Coast and isobars three cells to the left; words may choose other places.
    let braille = |c: char| ('\u{2800}'..='\u{28ff}').contains(&c);
    let (mut same, mut all) = (0, 0);
    for (old, new) in before.iter().zip(&after).take(19) {
        let (old, new): (Vec<char>, Vec<char>) = (old.chars().collect(), new.chars().collect());
        for k in 5..70 {
            if braille(old[k + 3]) && braille(new[k]) {
                all += 1;
                same += usize::from(old[k + 3] == new[k]);
            }
        }
    }
    assert!(all > 100 && same * 100 >= all * 97, "{same} of {all}");
}

#[test]
fn an_hour_without_analysis_has_no_isobars_and_says_so() {
    let picture = sample::picture();
    let mut desk = Desk::new(80, 24);
    desk.chart.hour = Some(picture.valid.plus(6));
    let area = Rect::new(0, 0, 80, 20);
    let (settings, look) = (Settings::default(), Look::new());
    let scene = Scene { picture: &picture, desk: &desk, settings: &settings, look: &look };
    let words = draw(scene, area, &mut Buffer::empty(area));
    assert_eq!(words, "15 18:00Z EXTRAPOLATION +6 h, not a forecast");
    let mut past = desk.clone();
    past.chart.hour = Some(picture.valid.plus(-3));
    let scene = Scene { desk: &past, ..scene };
    let words = draw(scene, area, &mut Buffer::empty(area));
    assert!(words.starts_with("15 09:00Z PAST, 3 h before the newest  isobars"), "{words}");
}

#[test]
fn where_the_analysis_is_weak_the_isobars_have_gaps_and_beyond_there_are_none() {
    // One straight isobar down the middle, at three error ratios.
    let drawn_dots = |error_hpa: f64| {
        let mut picture = sample::picture();
        let grid = std::sync::Arc::clone(&picture.grid);
        let pressure = (0..grid.len()).map(|k| 1000.0 + (k % grid.columns) as f64 - 30.0).collect();
        let errors = vec![error_hpa; grid.len()];
        let analysis = crate::analysis::HourAnalysis::from_field(
            picture.valid,
            std::sync::Arc::clone(&grid),
            pressure,
            errors,
        );
        picture.hours = vec![std::sync::Arc::new(analysis)];
        let view = View::of(&Desk::new(80, 24).chart, &picture, 78, 20);
        let mut raster = Raster::new(78, 20);
        isolines::isobars(&view, &picture.hours[0], &mut raster);
        let mut buf = Buffer::empty(Rect::new(0, 0, 78, 20));
        raster.blit(buf.area, &Look::new(), &mut buf);
        buf.content
            .iter()
            .filter_map(|cell| cell.symbol().chars().next())
            .filter(|c| ('\u{2800}'..='\u{28ff}').contains(c))
            .map(|c| (u32::from(c) - 0x2800).count_ones())
            .sum::<u32>()
    };
    let (whole, broken, none) = (drawn_dots(2.0), drawn_dots(9.5), drawn_dots(11.9));
    assert!(whole > 300, "{whole}");
    assert!(broken * 10 > whole * 4 && broken * 10 < whole * 7, "{broken} of {whole}");
    assert_eq!(none, 0);
}
