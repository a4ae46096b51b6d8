//! Looking into the watched folder and reading from it.

use std::collections::BTreeMap;
use std::io::Read as _;
use std::path::Path;
use std::time::UNIX_EPOCH;

use super::completeness::{Stamp, is_passed_over};
use crate::limits::FILE_BYTES_MAX;

/// Why the folder or a file in it cannot be read.
#[derive(Debug, thiserror::Error)]
pub enum FolderError {
    /// The folder cannot be listed.
    #[error("cannot look into {folder}: {source}")]
    Folder {
        /// The folder.
        folder: String,
        /// Why.
        source: std::io::Error,
    },
    /// A file cannot be read.
    #[error("cannot read {file}: {source}")]
    File {
        /// The file's name.
        file: String,
        /// Why.
        source: std::io::Error,
    },
    /// A file is larger than is read.
    #[error("{file} has {found} bytes, at most {expected} are read")]
    TooLarge {
        /// The file's name.
        file: String,
        /// Its size.
        found: u64,
        /// The bound.
        expected: u64,
    },
}

/// The plain files of a folder with their stamps, by name; those in the making are left out.
///
/// # Errors
///
/// [`FolderError::Folder`] where the folder cannot be listed. A file that vanishes meanwhile is
/// left out.
pub fn look(folder: &Path) -> Result<BTreeMap<String, Stamp>, FolderError> {
    let failed = |source| FolderError::Folder { folder: folder.display().to_string(), source };
    let mut seen = BTreeMap::new();
    #[expect(clippy::disallowed_methods, reason = "the rim looks into the watched folder here")]
    let entries = std::fs::read_dir(folder).map_err(failed)?;
    for entry in entries {
        let entry = entry.map_err(failed)?;
        let name = entry.file_name().to_string_lossy().into_owned();
        if is_passed_over(&name) {
            continue;
        }
        // Following links: a feed may be a folder of them.
        let Ok(about) = std::fs::metadata(entry.path()) else { continue };
        if !about.is_file() {
            continue;
        }
        seen.insert(name, stamp_of(&about));
    }
    Ok(seen)
}

/// Size and time of modification of a file; `None` where it cannot be looked at.
pub fn stamp(path: &Path) -> Option<Stamp> {
    std::fs::metadata(path).ok().map(|about| stamp_of(&about))
}

fn stamp_of(about: &std::fs::Metadata) -> Stamp {
    let modified = about.modified().unwrap_or(UNIX_EPOCH);
    let modified_ns = match modified.duration_since(UNIX_EPOCH) {
        Ok(after) => i128::try_from(after.as_nanos()).unwrap_or(0),
        Err(before) => -i128::try_from(before.duration().as_nanos()).unwrap_or(0),
    };
    Stamp { size: about.len(), modified_ns }
}

/// Reads a file of the folder whole, up to [`FILE_BYTES_MAX`].
///
/// # Errors
///
/// [`FolderError::File`] where it cannot be read, [`FolderError::TooLarge`] where it is too large.
pub fn read(folder: &Path, name: &str) -> Result<Vec<u8>, FolderError> {
    let failed = |source| FolderError::File { file: name.to_owned(), source };
    #[expect(clippy::disallowed_methods, reason = "the rim reads the watched folder here")]
    let file = std::fs::File::open(folder.join(name)).map_err(failed)?;
    let size = file.metadata().map_err(failed)?.len();
    let mut bytes = Vec::new();
    // One byte more than the bound tells a file that grows while it is read.
    file.take(FILE_BYTES_MAX + 1).read_to_end(&mut bytes).map_err(failed)?;
    let found = u64::try_from(bytes.len()).unwrap_or(u64::MAX).max(size);
    if found > FILE_BYTES_MAX {
        return Err(FolderError::TooLarge {
            file: name.to_owned(),
            found,
            expected: FILE_BYTES_MAX,
        });
    }
    Ok(bytes)
}
