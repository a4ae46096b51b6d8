//! Contrast, colour-blindness, and what is left on a poor terminal.

use super::*;

/// Roles that only ever draw lines and dots; all others also write words.
const MARKS: [Role; 7] = [
    Role::Coast,
    Role::Graticule,
    Role::Unsure,
    Role::Convergence,
    Role::Wind,
    Role::Track,
    Role::Cursor,
];

fn linear(rgb: [u8; 3]) -> [f64; 3] {
    rgb.map(|part| {
        let c = f64::from(part) / 255.0;
        if c <= 0.040_45 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) }
    })
}

/// Relative luminance (W3C, Web Content Accessibility Guidelines 2.2, definition of the term).
fn luminance(rgb: [u8; 3]) -> f64 {
    let [r, g, b] = linear(rgb);
    0.2126 * r + 0.7152 * g + 0.0722 * b
}

/// Contrast ratio (same source, success criteria 1.4.6: 7 to 1 for text, 1.4.11: 3 to 1 for marks).
fn contrast(a: [u8; 3], b: [u8; 3]) -> f64 {
    let (a, b) = (luminance(a), luminance(b));
    (a.max(b) + 0.05) / (a.min(b) + 0.05)
}

fn coloured() -> impl Iterator<Item = Theme> {
    Theme::NAMES
        .into_iter()
        .filter(|name| *name != "monochrome")
        .map(|name| Theme::named(name).expect("a built-in theme"))
}

#[test]
fn the_contrast_itself_is_right_at_its_ends() {
    assert!((contrast([0, 0, 0], [255, 255, 255]) - 21.0).abs() < 1e-9);
    assert!((contrast([119, 119, 119], [255, 255, 255]) - 4.48).abs() < 0.01);
}

#[test]
fn every_built_in_theme_can_be_read_and_knows_its_name() {
    for name in Theme::NAMES {
        assert_eq!(Theme::named(name).map(|theme| theme.name().to_owned()), Some(name.to_owned()));
    }
    assert!(Theme::from_json("{}").is_err());
}

#[test]
fn words_stand_out_seven_to_one_and_marks_three_to_one() {
    for theme in coloured() {
        // Dim red on black cannot reach 7 to 1: pure red itself has 5.25. The night theme gives
        // up contrast for the eye's adaptation to the dark.
        let text = if theme.name() == "night" { 4.5 } else { 7.0 };
        for role in Role::ALL {
            let (fore, back) = theme.colours(role).expect("both colours");
            let found = contrast(fore, back);
            let wanted = if MARKS.contains(&role) { 3.0 } else { text };
            assert!(found >= wanted, "{} {role:?}: {found:.2}", theme.name());
        }
    }
}

#[test]
fn the_night_theme_is_nothing_but_red() {
    let theme = Theme::named("night").expect("built in");
    for role in Role::ALL {
        let (fore, back) = theme.colours(role).expect("both colours");
        for [r, g, b] in [fore, back] {
            assert!(u32::from(g.max(b)) * 10 <= u32::from(r) * 3, "{role:?} {r} {g} {b}");
        }
    }
}

/// Severity 1.0 of protanomaly, deuteranomaly and tritanomaly, on linear RGB.
/// Machado, Oliveira and Fernandes (2009), IEEE Transactions on Visualization and Computer
/// Graphics 15(6), table 1; values from memory.
const DEFICIENCIES: [[[f64; 3]; 3]; 3] = [
    [
        [0.152_286, 1.052_583, -0.204_868],
        [0.114_503, 0.786_281, 0.099_216],
        [-0.003_882, -0.048_116, 1.051_998],
    ],
    [
        [0.367_322, 0.860_646, -0.227_968],
        [0.280_085, 0.672_501, 0.047_413],
        [-0.011_820, 0.042_940, 0.968_881],
    ],
    [
        [1.255_528, -0.076_749, -0.178_779],
        [-0.078_411, 0.930_809, 0.147_602],
        [0.004_733, 0.691_367, 0.303_900],
    ],
];

/// CIE 1976 L*a*b* of linear sRGB under D65 (ISO/CIE 11664-4; IEC 61966-2-1 primaries).
fn lab([r, g, b]: [f64; 3]) -> [f64; 3] {
    let x = (0.4124 * r + 0.3576 * g + 0.1805 * b) / 0.9505;
    let y = 0.2126 * r + 0.7152 * g + 0.0722 * b;
    let z = (0.0193 * r + 0.1192 * g + 0.9505 * b) / 1.089;
    let f = |t: f64| if t > 0.008_856 { t.cbrt() } else { 7.787 * t + 16.0 / 116.0 };
    [116.0 * f(y) - 16.0, 500.0 * (f(x) - f(y)), 200.0 * (f(y) - f(z))]
}

#[test]
fn each_matrix_keeps_white_white() {
    for matrix in DEFICIENCIES {
        for row in matrix {
            assert!((row.iter().sum::<f64>() - 1.0).abs() < 2e-5);
        }
    }
}

#[test]
fn what_must_be_told_apart_differs_for_every_kind_of_colour_vision() {
    let theme = Theme::named("colour-blind-safe").expect("built in");
    let pairs = [
        (Role::Low, Role::High),
        (Role::Falling, Role::Rising),
        (Role::Coast, Role::IsobarBold),
        (Role::Coast, Role::Isobar),
        (Role::Track, Role::Outlook),
        (Role::Warning, Role::Notice),
        (Role::Wind, Role::Outlook),
    ];
    for (a, b) in pairs {
        for (number, matrix) in DEFICIENCIES.iter().enumerate() {
            let seen = |role| {
                let (fore, _) = theme.colours(role).expect("both colours");
                let c = linear(fore);
                lab(matrix
                    .map(|row| (row[0] * c[0] + row[1] * c[1] + row[2] * c[2]).clamp(0.0, 1.0)))
            };
            let (first, second) = (seen(a), seen(b));
            let apart: f64 =
                first.iter().zip(second).map(|(x, y)| (x - y).powi(2)).sum::<f64>().sqrt();
            // About ten times what is just noticed side by side.
            assert!(apart >= 20.0, "{a:?} {b:?} under {number}: {apart:.1}");
        }
    }
}

#[test]
fn without_colours_there_are_attributes_and_never_a_colour() {
    for name in Theme::NAMES {
        let theme = Theme::named(name).expect("built in");
        for role in Role::ALL {
            let style = theme.style(role, Depth::None);
            assert_eq!((style.fg, style.bg), (Some(Color::Reset), Some(Color::Reset)));
        }
        for role in [Role::Front, Role::Urgent, Role::Stale, Role::Selected] {
            let style = theme.style(role, Depth::None);
            assert!(style.add_modifier.contains(Modifier::REVERSED), "{name} {role:?}");
        }
    }
}

/// Corners of the cube and a grey of the usual palette (common practice, no source).
#[test]
fn colours_fall_to_the_nearest_of_the_palette() {
    assert_eq!(palette_index([255, 0, 0]), 196);
    assert_eq!(palette_index([255, 255, 255]), 231);
    assert_eq!(palette_index([0, 0, 0]), 16);
    assert_eq!(palette_index([118, 118, 118]), 243);
    let style = Theme::named("dark").expect("built in").style(Role::Low, Depth::Sixteen);
    assert_eq!(style.fg, Some(Color::LightRed));
}
