//! `rehearse`: a practice feed of invented weather, all at once or at any speed.

use std::io::Write;
use std::path::{Path, PathBuf};
use std::time::Duration;

use anyhow::{Context, bail};
use clap::Args;

use crate::instant::Instant;
use crate::rehearse::{FeedFile, Rehearsal, Scenario};

/// Arguments of `rehearse`.
#[derive(Clone, PartialEq, Debug, Args)]
pub struct Arguments {
    /// Name of a scenario that comes with the program, or a scenario file
    pub scenario: String,
    /// Folder that the files are put into; made if it is not there
    #[arg(long, value_name = "FOLDER")]
    pub into: PathBuf,
    /// How many times faster than real time; all at once if left out
    #[arg(long, value_name = "N")]
    pub speed: Option<f64>,
    /// Write what was true to this file, as JSON
    #[arg(long, value_name = "FILE")]
    pub truth: Option<PathBuf>,
    /// When the weather begins: a time in UTC, `now`, or `now-24h`; the scenario's own start if
    /// left out
    #[arg(long, value_name = "TIME")]
    pub start: Option<String>,
    /// With --speed: how many hours of the feed are there at once; if the weather begins before
    /// now, as many as have gone by
    #[arg(long, value_name = "HOURS")]
    pub ahead: Option<f64>,
}

/// Waits for as long as it is told; false when the run is to end.
pub type Pause<'a> = dyn FnMut(Duration) -> bool + 'a;

/// Runs the command. `now` is the present, `pause` waits between the files of a run with a speed.
///
/// # Errors
/// A scenario that cannot be read or makes no sense, a speed or time that is none, and files that
/// cannot be written.
pub fn run(
    arguments: &Arguments,
    now: Instant,
    pause: &mut Pause<'_>,
    out: &mut dyn Write,
) -> anyhow::Result<()> {
    let scenario = scenario(&arguments.scenario)?;
    let start = match &arguments.start {
        None => scenario.start,
        Some(text) => start(text, now)?,
    };
    let rehearsal = Rehearsal::new(scenario, start);
    make_folder(&arguments.into)?;
    if let Some(file) = &arguments.truth {
        let text = serde_json::to_string_pretty(&rehearsal.truth())? + "\n";
        put(file, text.as_bytes())?;
    }
    let speed = arguments.speed;
    if speed.is_some_and(|speed| !(speed > 0.0 && speed.is_finite())) {
        bail!("--speed: expected a number above 0, found {}", speed.unwrap_or_default());
    }
    writeln!(
        out,
        "Invented weather: {}. {} reports from {} to {} into {}.",
        rehearsal.scenario().title,
        rehearsal.reports(),
        rehearsal.start(),
        rehearsal.end(),
        arguments.into.display()
    )?;
    let ahead_h = arguments.ahead.unwrap_or_else(|| {
        let relative = arguments.start.as_ref().is_some_and(|text| text.starts_with("now"));
        if relative { now.hours_since(rehearsal.start()).max(0.0) } else { 0.0 }
    });
    let mut clock_h = ahead_h;
    for file in rehearsal.files() {
        if let Some(speed) = speed {
            let due_h = file.due.hours_since(rehearsal.start());
            if due_h > clock_h {
                let wait_s = (due_h - clock_h) * 3600.0 / speed;
                clock_h = due_h;
                if !pause(Duration::from_secs_f64(wait_s.min(1e9))) {
                    return Ok(());
                }
            }
        }
        deliver(&arguments.into, &file)?;
    }
    Ok(())
}

/// A built-in scenario by its name, or one read from a file.
///
/// # Errors
/// Neither a built-in name nor a file with a scenario that makes sense.
pub fn scenario(name_or_file: &str) -> anyhow::Result<Scenario> {
    if let Some(scenario) = Scenario::built_in(name_or_file) {
        return Ok(scenario);
    }
    let text = read(Path::new(name_or_file)).with_context(|| {
        let names: Vec<&str> = Scenario::built_in_names().collect();
        format!("{name_or_file:?} is neither a scenario file nor one of {}", names.join(", "))
    })?;
    Scenario::from_toml(&text).with_context(|| format!("scenario file {name_or_file:?}"))
}

/// `now`, `now-24h`, `now+1h` or a time in UTC.
fn start(text: &str, now: Instant) -> anyhow::Result<Instant> {
    let relative = text.strip_prefix("now").and_then(|rest| {
        if rest.is_empty() {
            return Some(0);
        }
        rest.strip_suffix('h').and_then(|hours| hours.parse::<i64>().ok())
    });
    match relative {
        Some(hours) if hours.abs() <= 240 => Ok(now.plus_s(3600 * hours)),
        _ => Instant::parse(text).with_context(|| {
            format!("--start: expected a time such as 2026-01-15T00:00Z or now-24h, found {text:?}")
        }),
    }
}

/// Writes a file under a name that watchers leave alone, then gives it its own name at one stroke.
fn deliver(folder: &Path, file: &FeedFile) -> anyhow::Result<()> {
    let hidden = folder.join(format!(".{}", file.name));
    put(&hidden, &file.bytes)?;
    let place = folder.join(&file.name);
    std::fs::rename(&hidden, &place).with_context(|| format!("cannot name {}", place.display()))
}

#[expect(clippy::disallowed_methods, reason = "a command stands at the rim")]
fn put(path: &Path, bytes: &[u8]) -> anyhow::Result<()> {
    std::fs::write(path, bytes).with_context(|| format!("cannot write {}", path.display()))
}

#[expect(clippy::disallowed_methods, reason = "a command stands at the rim")]
fn read(path: &Path) -> anyhow::Result<String> {
    std::fs::read_to_string(path).with_context(|| format!("cannot read {}", path.display()))
}

fn make_folder(path: &Path) -> anyhow::Result<()> {
    std::fs::create_dir_all(path).with_context(|| format!("cannot make {}", path.display()))
}
