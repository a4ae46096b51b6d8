//! Reading a whole folder at once, for the commands that look and end.

use std::path::Path;

use rayon::prelude::*;

use super::folder::{FolderError, look, read};
use super::intake::{ReadFile, read_file, take_in};
use super::received::received;
use crate::instant::Instant;
use crate::obs::Held;
use crate::obs::held::FileRecord;
use crate::wire::ByteCount;

/// Everything that lies in a folder, held. Files that cannot be read stand in the ledger, refused.
///
/// `limit` bounds the time of receipt, for a look at an earlier time.
///
/// # Errors
///
/// [`FolderError::Folder`] where the folder cannot be listed.
pub fn read_folder(folder: &Path, limit: Option<Instant>) -> Result<Held, FolderError> {
    let seen: Vec<(String, Instant)> = look(folder)?
        .into_iter()
        .filter(|(_, stamp)| stamp.size > 0)
        .map(|(name, stamp)| {
            let received = received(&name, stamp.modified(), limit);
            (name, received)
        })
        .collect();
    let files: Vec<ReadFile> = seen
        .par_iter()
        .map(|(name, received)| match read(folder, name) {
            Ok(bytes) => read_file(name, &bytes, *received),
            Err(error) => unreadable(name, *received, &error),
        })
        .collect();
    let mut held = Held::new();
    for file in files {
        take_in(file, &mut held);
    }
    Ok(held)
}

/// The ledger's row of a file that could not be read.
pub fn unreadable(name: &str, received: Instant, error: &FolderError) -> ReadFile {
    let record = FileRecord {
        file: crate::wire::complaint::printable(name.as_bytes(), 120),
        content: format!("unread {name} {}", received.unix_s()),
        received,
        bytes: ByteCount::default(),
        reports: 0,
        complaints: Vec::new(),
        complaints_total: 0,
        refused: Some(error.to_string()),
    };
    ReadFile { record, rows: Vec::new() }
}
