//! The arguments of the program.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand, ValueEnum};

use super::rehearse;

/// Keeps the watch on the barometer: highs and lows, winds and tendencies from surface reports.
///
/// It supports a trained watchkeeper; it is not a warning service and not for navigation by itself.
/// Official warnings, the master's judgement, local codes and licensed practice come first.
#[derive(Clone, PartialEq, Debug, Parser)]
#[command(name = "glasskeeper", version, propagate_version = true)]
pub struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// The commands.
#[derive(Clone, PartialEq, Debug, Subcommand)]
pub enum Command {
    /// Watch a folder of reports in a full-screen interface
    Watch(Box<Watch>),
    /// Print the situation once, as text or JSON
    Brief(Brief),
    /// Explain a file of reports group by group
    Decode(Decode),
    /// Export what the analysis says
    #[command(subcommand)]
    Export(Export),
    /// Make a practice feed of invented weather
    Rehearse(rehearse::Arguments),
}

/// Where settings come from, for every command that makes a picture.
#[derive(Clone, PartialEq, Debug, Default, Args)]
pub struct Configuration {
    /// Settings file; by default glasskeeper/settings.toml in the user's configuration folder
    #[arg(long, value_name = "FILE")]
    pub settings: Option<PathBuf>,
    /// Station catalogue, a CSV file whose stations override the built-in ones
    #[arg(long, value_name = "FILE")]
    pub stations: Option<PathBuf>,
}

/// Arguments of `watch`.
#[derive(Clone, PartialEq, Debug, Args)]
pub struct Watch {
    /// The folder that reports fall into
    #[arg(required_unless_present = "rehearse")]
    pub folder: Option<PathBuf>,
    /// Where settings come from.
    #[command(flatten)]
    pub configuration: Configuration,
    /// Practise on invented weather: a scenario that comes with the program, or a scenario file
    #[arg(long, value_name = "SCENARIO", conflicts_with = "folder")]
    pub rehearse: Option<String>,
    /// With --rehearse: how many times faster than real time
    #[arg(long, value_name = "N", default_value_t = 600.0, requires = "rehearse")]
    pub speed: f64,
    /// With --rehearse: hours of the feed that are there at once
    #[arg(long, value_name = "HOURS", default_value_t = 12.0, requires = "rehearse")]
    pub ahead: f64,
    /// Folder of the journal; by default glasskeeper in the user's state folder
    #[arg(long, value_name = "FOLDER")]
    pub state: Option<PathBuf>,
    /// Keep no journal: only look
    #[arg(long)]
    pub no_journal: bool,
    /// Look into the folder every 2 seconds instead of waiting for word from the system
    #[arg(long)]
    pub poll: bool,
    /// Colours to use; by default what the terminal says it can
    #[arg(long, value_enum)]
    pub colour: Option<Colour>,
    /// Signs to draw with; by default what the language settings allow
    #[arg(long, value_enum)]
    pub glyphs: Option<Glyphs>,
    /// Name of a theme
    #[arg(long, value_name = "NAME")]
    pub theme: Option<String>,
    /// Keep to a link of so many bits a second
    #[arg(long, value_name = "BITS_PER_SECOND")]
    pub link: Option<u64>,
}

/// How many colours.
#[derive(Clone, Copy, PartialEq, Eq, Debug, ValueEnum)]
pub enum Colour {
    /// None: bold and reverse only
    Never,
    /// The sixteen
    #[value(name = "16")]
    Sixteen,
    /// The 256
    #[value(name = "256")]
    Many,
    /// Full
    Full,
}

/// Which signs.
#[derive(Clone, Copy, PartialEq, Eq, Debug, ValueEnum)]
pub enum Glyphs {
    /// Braille dots and box lines
    Braille,
    /// ASCII alone
    Ascii,
}

/// Arguments of `brief`.
#[derive(Clone, PartialEq, Debug, Args)]
pub struct Brief {
    /// The folder of reports
    pub folder: PathBuf,
    /// Where settings come from.
    #[command(flatten)]
    pub configuration: Configuration,
    /// As JSON
    #[arg(long)]
    pub json: bool,
    /// The situation at this time in UTC, e.g. 2026-01-16T12:00Z; by default that of the newest
    /// report
    #[arg(long, value_name = "TIME")]
    pub at: Option<String>,
}

/// Arguments of `decode`.
#[derive(Clone, PartialEq, Debug, Args)]
pub struct Decode {
    /// The file
    pub file: PathBuf,
    /// One JSON object a report
    #[arg(long)]
    pub json: bool,
    /// When it was received, for days of the month; by default as its name or its time says
    #[arg(long, value_name = "TIME")]
    pub received: Option<String>,
}

/// What to export.
#[derive(Clone, PartialEq, Debug, Subcommand)]
pub enum Export {
    /// Pressure, change, winds and divergence at points, as CSV
    Points(Points),
}

/// Arguments of `export points`.
#[derive(Clone, PartialEq, Debug, Args)]
pub struct Points {
    /// The folder of reports
    pub folder: PathBuf,
    /// A CSV file with columns latitude_deg and longitude_deg
    #[arg(long, value_name = "FILE")]
    pub points: PathBuf,
    /// Where settings come from.
    #[command(flatten)]
    pub configuration: Configuration,
    /// The situation at this time in UTC; by default that of the newest report
    #[arg(long, value_name = "TIME")]
    pub at: Option<String>,
}
