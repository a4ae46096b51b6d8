//! The situation of a folder at a time: what `brief` and `export` make their output from.

use std::path::Path;

use anyhow::{Context, anyhow};

use super::arguments::Configuration;
use crate::feed::batch::read_folder;
use crate::instant::Instant;
use crate::obs::Catalogue;
use crate::picture::{Decisions, Inputs, Picture, picture};
use crate::settings::Settings;
use crate::systems::names::NameBook;

/// Longest settings or catalogue file read, bytes.
const TEXT_BYTES_MAX: u64 = 64 * 1024 * 1024;

/// Settings and catalogue of a run, and what was wrong with the catalogue.
#[derive(Debug)]
pub struct Configured {
    /// The settings.
    pub settings: Settings,
    /// The catalogue.
    pub catalogue: Catalogue,
    /// Complaints about the user's catalogue, one line each.
    pub complaints: Vec<String>,
}

/// Reads a text file with a bound.
///
/// # Errors
///
/// A file that cannot be read or is too large.
pub fn read_text(path: &Path) -> anyhow::Result<String> {
    let size = std::fs::metadata(path).with_context(|| path.display().to_string())?.len();
    if size > TEXT_BYTES_MAX {
        return Err(anyhow!("{}: {size} bytes, at most {TEXT_BYTES_MAX} are read", path.display()));
    }
    #[expect(clippy::disallowed_methods, reason = "commands read what their arguments name")]
    let bytes = std::fs::read(path).with_context(|| path.display().to_string())?;
    Ok(String::from_utf8_lossy(&bytes).into_owned())
}

/// Settings and catalogue as the arguments and the user's configuration folder say.
///
/// # Errors
///
/// Files that cannot be read, and settings that are refused.
pub fn configured(configuration: &Configuration) -> anyhow::Result<Configured> {
    let named = configuration.settings.clone();
    let usual = || {
        use etcetera::BaseStrategy as _;
        let folder = etcetera::choose_base_strategy().ok()?.config_dir();
        Some(folder.join("glasskeeper").join("settings.toml")).filter(|path| path.is_file())
    };
    let settings = match named.or_else(usual) {
        Some(path) => {
            Settings::from_toml(&read_text(&path)?).with_context(|| path.display().to_string())?
        }
        None => Settings::default(),
    };
    let built_in = Catalogue::built_in();
    let own = configuration.stations.clone().or_else(|| settings.stations.clone().map(Into::into));
    let (catalogue, complaints) = match own {
        None => (built_in, Vec::new()),
        Some(path) => {
            let (catalogue, complaints) = built_in.with_user(&read_text(&path)?);
            let complaints =
                complaints.iter().map(|complaint| format!("{}: {complaint}", path.display()));
            (catalogue, complaints.collect())
        }
    };
    Ok(Configured { settings, catalogue, complaints })
}

/// A time given in words of RFC 3339.
///
/// # Errors
///
/// Text that is no such time.
pub fn time(text: &str) -> anyhow::Result<Instant> {
    Instant::parse(text)
        .ok_or_else(|| anyhow!("expected a time in UTC such as 2026-01-16T12:00Z, found {text:?}"))
}

/// The picture of what lies in a folder, at a time or at that of the newest report.
///
/// # Errors
///
/// A folder that cannot be listed, a time that is none.
pub fn situation(
    folder: &Path,
    configured: &Configured,
    at: Option<&str>,
) -> anyhow::Result<Picture> {
    let at = at.map(time).transpose()?;
    let held = read_folder(folder, at)?;
    // Aerodromes report shortly before the hour that they report for.
    let now =
        at.or_else(|| held.newest().map(|newest| newest.max(newest.hour_nearest().instant())));
    let now = now.unwrap_or_default();
    let (picture, _) = picture(
        &Inputs {
            held: &held,
            catalogue: &configured.catalogue,
            decisions: &Decisions::default(),
            names: &NameBook::default(),
            settled: &std::collections::BTreeMap::new(),
            settings: &configured.settings,
        },
        now,
    );
    Ok(picture)
}
