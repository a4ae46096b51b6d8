//! Colours and attributes by role, from `themes/*.json`, degraded to what the terminal has.

use std::collections::BTreeMap;

use ratatui::style::{Color, Modifier, Style};
use serde::Deserialize;

/// What a piece of the screen is, so that a theme can dress it.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Role {
    /// Ordinary text.
    Text,
    /// Text of second rank: units, heads of columns.
    Secondary,
    /// Title of a pane.
    Title,
    /// Title of the pane in front.
    Front,
    /// The summary strip.
    Summary,
    /// Coastlines.
    Coast,
    /// Meridians and parallels.
    Graticule,
    /// Isobars.
    Isobar,
    /// Every fourth or fifth isobar.
    IsobarBold,
    /// Lows.
    Low,
    /// Highs.
    High,
    /// Past tracks.
    Track,
    /// Outlooks.
    Outlook,
    /// Falling pressure.
    Falling,
    /// Rising pressure.
    Rising,
    /// A weak value.
    Weak,
    /// Worth knowing.
    Notice,
    /// Needs attention.
    Warning,
    /// Needs attention at once.
    Urgent,
    /// What is old.
    Stale,
    /// The selected row.
    Selected,
    /// A key on the bottom line.
    Key,
    /// The cursor on the chart.
    Cursor,
    /// A report on the chart.
    Report,
    /// Wind arrows.
    Wind,
    /// Convergence.
    Convergence,
    /// Where the analysis is not to be trusted.
    Unsure,
}

impl Role {
    /// All roles.
    pub const ALL: [Self; 27] = [
        Self::Text,
        Self::Secondary,
        Self::Title,
        Self::Front,
        Self::Summary,
        Self::Coast,
        Self::Graticule,
        Self::Isobar,
        Self::IsobarBold,
        Self::Low,
        Self::High,
        Self::Track,
        Self::Outlook,
        Self::Falling,
        Self::Rising,
        Self::Weak,
        Self::Notice,
        Self::Warning,
        Self::Urgent,
        Self::Stale,
        Self::Selected,
        Self::Key,
        Self::Cursor,
        Self::Report,
        Self::Wind,
        Self::Convergence,
        Self::Unsure,
    ];
}

/// How many colours the terminal has.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Depth {
    /// None: attributes alone.
    None,
    /// The sixteen of ISO 6429 with their bright forms.
    Sixteen,
    /// The 256 of the usual palette: a 6 x 6 x 6 cube and 24 greys.
    Palette,
    /// Red, green and blue of eight bits each.
    #[default]
    True,
}

/// Red, green, blue.
type Rgb = [u8; 3];

#[derive(Clone, PartialEq, Debug, Default, Deserialize)]
#[serde(default, deny_unknown_fields)]
struct Dress {
    foreground: Option<String>,
    foreground_16: Option<u8>,
    background: Option<String>,
    background_16: Option<u8>,
    attributes: Vec<String>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    name: String,
    background: Option<String>,
    #[serde(default)]
    background_16: Option<u8>,
    roles: BTreeMap<Role, Dress>,
}

/// Colours and attributes by role.
#[derive(Clone, PartialEq, Debug)]
pub struct Theme {
    name: String,
    ground: Option<Rgb>,
    ground_16: Option<u8>,
    roles: BTreeMap<Role, Worn>,
}

#[derive(Clone, Copy, PartialEq, Debug, Default)]
struct Worn {
    foreground: Option<Rgb>,
    foreground_16: Option<u8>,
    background: Option<Rgb>,
    background_16: Option<u8>,
    attributes: Modifier,
}

const BUILT_IN: [&str; 6] = [
    include_str!("../../themes/dark.json"),
    include_str!("../../themes/light.json"),
    include_str!("../../themes/night.json"),
    include_str!("../../themes/high-contrast.json"),
    include_str!("../../themes/colour-blind-safe.json"),
    include_str!("../../themes/monochrome.json"),
];

impl Theme {
    /// The names of the built-in themes.
    pub const NAMES: [&'static str; 6] =
        ["dark", "light", "night", "high-contrast", "colour-blind-safe", "monochrome"];

    /// A built-in theme.
    pub fn named(name: &str) -> Option<Self> {
        let index = Self::NAMES.iter().position(|known| *known == name)?;
        Self::from_json(BUILT_IN.get(index)?).ok()
    }

    /// No colours: bold, reverse, dim, underline.
    pub fn monochrome() -> Self {
        Self::named("monochrome").unwrap_or_else(|| Self {
            name: "monochrome".to_owned(),
            ground: None,
            ground_16: None,
            roles: BTreeMap::new(),
        })
    }

    /// A theme from the text of a JSON file.
    ///
    /// # Errors
    ///
    /// What is wrong with it, in words.
    pub fn from_json(text: &str) -> Result<Self, String> {
        let file: File = serde_json::from_str(text).map_err(|error| format!("theme: {error}"))?;
        let colour = |text: &Option<String>| text.as_deref().map(rgb).transpose();
        let mut roles = BTreeMap::new();
        for (role, dress) in &file.roles {
            let mut attributes = Modifier::empty();
            for word in &dress.attributes {
                attributes |= attribute(word)?;
            }
            let worn = Worn {
                foreground: colour(&dress.foreground)?,
                foreground_16: dress.foreground_16,
                background: colour(&dress.background)?,
                background_16: dress.background_16,
                attributes,
            };
            roles.insert(*role, worn);
        }
        if let Some(missing) = Role::ALL.iter().find(|role| !roles.contains_key(role)) {
            return Err(format!("theme {}: no role {missing:?}", file.name));
        }
        let ground = colour(&file.background)?;
        Ok(Self { name: file.name, ground, ground_16: file.background_16, roles })
    }

    /// Its name.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// The style of a role at a depth of colour.
    pub fn style(&self, role: Role, depth: Depth) -> Style {
        let worn = self.roles.get(&role).copied().unwrap_or_default();
        let shade = |rgb: Option<Rgb>, sixteen: Option<u8>| match depth {
            Depth::None => None,
            Depth::Sixteen => sixteen.map(sixteen_colour),
            Depth::Palette => rgb.map(|rgb| Color::Indexed(palette_index(rgb))),
            Depth::True => rgb.map(|[r, g, b]| Color::Rgb(r, g, b)),
        };
        let background = worn.background.or(self.ground);
        let background_16 =
            if worn.background.is_some() { worn.background_16 } else { None }.or(self.ground_16);
        let mut attributes = worn.attributes;
        if depth == Depth::None || (depth == Depth::Sixteen && worn.background_16.is_none()) {
            attributes |= without_colour(role);
        }
        Style::new()
            .fg(shade(worn.foreground, worn.foreground_16).unwrap_or(Color::Reset))
            .bg(shade(background, background_16).unwrap_or(Color::Reset))
            .add_modifier(attributes)
    }

    /// Foreground and background of a role as red, green, blue, where the theme has colours.
    pub fn colours(&self, role: Role) -> Option<([u8; 3], [u8; 3])> {
        let worn = self.roles.get(&role)?;
        Some((worn.foreground?, worn.background.or(self.ground)?))
    }
}

/// What stands in for a background or hue that the terminal cannot show.
const fn without_colour(role: Role) -> Modifier {
    match role {
        Role::Front | Role::Urgent | Role::Stale | Role::Selected | Role::Cursor => {
            Modifier::REVERSED
        }
        Role::Title => Modifier::UNDERLINED,
        _ => Modifier::empty(),
    }
}

fn attribute(word: &str) -> Result<Modifier, String> {
    Ok(match word {
        "bold" => Modifier::BOLD,
        "dim" => Modifier::DIM,
        "italic" => Modifier::ITALIC,
        "underline" => Modifier::UNDERLINED,
        "reverse" => Modifier::REVERSED,
        _ => return Err(format!("theme: no attribute {word:?}")),
    })
}

fn rgb(text: &str) -> Result<Rgb, String> {
    let wrong = || format!("theme: expected a colour such as #a0b1c2, found {text:?}");
    let digits = text.strip_prefix('#').filter(|digits| digits.len() == 6).ok_or_else(wrong)?;
    let number = u32::from_str_radix(digits, 16).ok().ok_or_else(wrong)?;
    let [_, r, g, b] = number.to_be_bytes();
    Ok([r, g, b])
}

const fn sixteen_colour(index: u8) -> Color {
    match index {
        0 => Color::Black,
        1 => Color::Red,
        2 => Color::Green,
        3 => Color::Yellow,
        4 => Color::Blue,
        5 => Color::Magenta,
        6 => Color::Cyan,
        7 => Color::Gray,
        8 => Color::DarkGray,
        9 => Color::LightRed,
        10 => Color::LightGreen,
        11 => Color::LightYellow,
        12 => Color::LightBlue,
        13 => Color::LightMagenta,
        14 => Color::LightCyan,
        _ => Color::White,
    }
}

/// Levels of the cube of the 256-colour palette.
const CUBE: [u8; 6] = [0, 95, 135, 175, 215, 255];

/// The nearest of the cube and the greys of the 256-colour palette (the first sixteen depend on
/// the terminal and are left out). Common practice, no source.
fn palette_index(rgb: Rgb) -> u8 {
    let distance = |other: Rgb| -> u32 {
        rgb.iter().zip(other).map(|(a, b)| u32::from(a.abs_diff(b)).pow(2)).sum()
    };
    let (mut best, mut index) = (u32::MAX, 16_u8);
    for candidate in 16..=255_u8 {
        let colour = if candidate < 232 {
            let k = usize::from(candidate - 16);
            [CUBE[k / 36], CUBE[k / 6 % 6], CUBE[k % 6]]
        } else {
            [8 + 10 * (candidate - 232); 3]
        };
        if distance(colour) < best {
            (best, index) = (distance(colour), candidate);
        }
    }
    index
}

#[cfg(test)]
mod tests;
