//! The journal: SQLite in the state directory. A restart resumes from it at once and equal.
//!
//! It keeps the ledger of files by content, every copy of every held report with its provenance,
//! the names of systems and the analyses of hours that are settled, and the watchkeeper's decisions. A file and its reports
//! are written in one transaction, so that a kill between any two writes loses whole files at
//! most, and those are read again. A row that cannot be read is told and passed over.

use std::ops::RangeInclusive;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use rusqlite::{Connection, OptionalExtension as _, params};

use crate::analysis::HourAnalysis;
use crate::analysis::settled::Settled;
use crate::feed::content::content_name;
use crate::feed::intake::ReadFile;
use crate::instant::Hour;
use crate::obs::Held;
use crate::obs::held::{FileRecord, Row};
use crate::picture::Decisions;
use crate::systems::names::NameBook;

/// Migrations in order; the database's `user_version` counts those that were done.
const MIGRATIONS: &[&str] =
    &[include_str!("journal/0001_first.sql"), include_str!("journal/0002_settled.sql")];
/// Milliseconds to wait for another program's hold on the file.
const BUSY_MS: u64 = 5000;

/// Why the journal cannot be kept.
#[derive(Debug, thiserror::Error)]
pub enum JournalError {
    /// SQLite's own word.
    #[error("journal {path}: {source}")]
    Database {
        /// The file.
        path: String,
        /// Why.
        source: rusqlite::Error,
    },
    /// The folder cannot be made.
    #[error("journal folder {path}: {source}")]
    Folder {
        /// The folder.
        path: String,
        /// Why.
        source: std::io::Error,
    },
    /// Written by a newer version.
    #[error("journal {path}: version {found}, this program knows up to {expected}")]
    Newer {
        /// The file.
        path: String,
        /// Its version.
        found: usize,
        /// The newest known.
        expected: usize,
    },
}

/// An open journal.
#[derive(Debug)]
pub struct Journal {
    connection: Connection,
    path: String,
}

/// What a journal held.
#[derive(Debug, Default)]
pub struct Resumed {
    /// Reports and ledger.
    pub held: Held,
    /// Names that are settled.
    pub names: NameBook,
    /// Decisions.
    pub decisions: Decisions,
    /// Analyses of settled hours.
    pub settled: Settled,
    /// Rows that could not be read.
    pub unreadable: usize,
}

/// Where the journal of a watched folder lies in a state folder: one file a folder.
pub fn file_for(state: &Path, folder: &Path) -> PathBuf {
    let whole = folder.canonicalize().unwrap_or_else(|_| folder.to_owned());
    let name = content_name(whole.to_string_lossy().as_bytes());
    state.join(format!("watch-{}.sqlite", name.get(..16).unwrap_or(&name)))
}

impl Journal {
    /// Opens or makes a journal, bringing an older one up to date.
    ///
    /// # Errors
    ///
    /// [`JournalError`] where folder or file cannot be used, or a newer version wrote it.
    pub fn open(path: &Path) -> Result<Self, JournalError> {
        if let Some(folder) = path.parent() {
            std::fs::create_dir_all(folder).map_err(|source| JournalError::Folder {
                path: folder.display().to_string(),
                source,
            })?;
        }
        let shown = path.display().to_string();
        let failed = |source| JournalError::Database { path: shown.clone(), source };
        let connection = Connection::open(path).map_err(failed)?;
        Self::prepare(connection, shown)
    }

    /// A journal in memory alone, for tests.
    ///
    /// # Errors
    ///
    /// As [`Journal::open`].
    pub fn in_memory() -> Result<Self, JournalError> {
        let shown = "in memory".to_owned();
        let failed = |source| JournalError::Database { path: shown.clone(), source };
        let connection = Connection::open_in_memory().map_err(failed)?;
        Self::prepare(connection, shown)
    }

    fn prepare(connection: Connection, path: String) -> Result<Self, JournalError> {
        let mut journal = Self { connection, path };
        journal
            .connection
            .busy_timeout(std::time::Duration::from_millis(BUSY_MS))
            .and_then(|()| journal.connection.pragma_update(None, "journal_mode", "WAL"))
            .and_then(|()| journal.connection.pragma_update(None, "synchronous", "NORMAL"))
            .map_err(|source| journal.failed(source))?;
        journal.migrate()?;
        Ok(journal)
    }

    fn failed(&self, source: rusqlite::Error) -> JournalError {
        JournalError::Database { path: self.path.clone(), source }
    }

    fn migrate(&mut self) -> Result<(), JournalError> {
        let version: i64 = self
            .connection
            .query_row("PRAGMA user_version", [], |row| row.get(0))
            .map_err(|source| self.failed(source))?;
        let done = usize::try_from(version).unwrap_or(0);
        if done > MIGRATIONS.len() {
            return Err(JournalError::Newer {
                path: self.path.clone(),
                found: done,
                expected: MIGRATIONS.len(),
            });
        }
        for (number, sql) in MIGRATIONS.iter().enumerate().skip(done) {
            let step = |connection: &mut Connection| {
                let transaction = connection.transaction()?;
                transaction.execute_batch(sql)?;
                let version = i64::try_from(number + 1).unwrap_or(i64::MAX);
                transaction.pragma_update(None, "user_version", version)?;
                transaction.commit()
            };
            step(&mut self.connection).map_err(|source| self.failed(source))?;
        }
        Ok(())
    }

    /// Everything that is kept.
    ///
    /// # Errors
    ///
    /// [`JournalError::Database`] where the file cannot be read at all.
    pub fn resume(&self) -> Result<Resumed, JournalError> {
        let mut unreadable = 0;
        let read = || -> rusqlite::Result<Resumed> {
            let mut rows = Vec::new();
            let mut statement = self.connection.prepare("SELECT row FROM report ORDER BY id")?;
            let mut found = statement.query([])?;
            while let Some(row) = found.next()? {
                match serde_json::from_str::<Row>(&row.get::<_, String>(0)?) {
                    Ok(row) => rows.push(row),
                    Err(_) => unreadable += 1,
                }
            }
            let mut held = Held::from_rows(rows);
            let mut statement = self.connection.prepare("SELECT record FROM file")?;
            let mut found = statement.query([])?;
            while let Some(row) = found.next()? {
                match serde_json::from_str::<FileRecord>(&row.get::<_, String>(0)?) {
                    Ok(record) => held.record_file(record),
                    Err(_) => unreadable += 1,
                }
            }
            let names = self.kept("names", &mut unreadable)?.unwrap_or_default();
            let decisions = self.kept("decisions", &mut unreadable)?.unwrap_or_default();
            let mut settled = Settled::new();
            let mut statement = self.connection.prepare("SELECT analysis FROM settled")?;
            let mut found = statement.query([])?;
            while let Some(row) = found.next()? {
                match HourAnalysis::from_bytes(&row.get::<_, Vec<u8>>(0)?) {
                    Some(analysis) => {
                        settled.insert(analysis.hour, Arc::new(analysis));
                    }
                    None => unreadable += 1,
                }
            }
            Ok(Resumed { held, names, decisions, settled, unreadable: 0 })
        };
        let mut read = read;
        let resumed = read().map_err(|source| self.failed(source))?;
        Ok(Resumed { unreadable, ..resumed })
    }

    fn kept<T: serde::de::DeserializeOwned>(
        &self,
        what: &str,
        unreadable: &mut usize,
    ) -> rusqlite::Result<Option<T>> {
        let text: Option<String> = self
            .connection
            .query_row("SELECT value FROM kept WHERE what = ?1", [what], |row| row.get(0))
            .optional()?;
        let value = text.as_deref().map(serde_json::from_str::<T>);
        if matches!(value, Some(Err(_))) {
            *unreadable += 1;
        }
        Ok(value.and_then(Result::ok))
    }

    fn keep<T: serde::Serialize>(&self, what: &str, value: &T) -> Result<(), JournalError> {
        let text = serde_json::to_string(value).unwrap_or_default();
        self.connection
            .execute(
                "INSERT INTO kept (what, value) VALUES (?1, ?2)
                 ON CONFLICT (what) DO UPDATE SET value = excluded.value",
                params![what, text],
            )
            .map(|_| ())
            .map_err(|source| self.failed(source))
    }

    /// Keeps read files with their reports, in one transaction.
    ///
    /// # Errors
    ///
    /// [`JournalError::Database`], e.g. on a full disk; nothing of these files is kept then.
    pub fn keep_files(&mut self, files: &[ReadFile]) -> Result<(), JournalError> {
        let write = |connection: &mut Connection| -> rusqlite::Result<()> {
            let transaction = connection.transaction()?;
            {
                let mut ledger = transaction.prepare_cached(
                    "INSERT OR IGNORE INTO file (content, record) VALUES (?1, ?2)",
                )?;
                let mut report = transaction.prepare_cached(
                    "INSERT INTO report (hour, content, row) VALUES (?1, ?2, ?3)",
                )?;
                for file in files {
                    let record = serde_json::to_string(&file.record).unwrap_or_default();
                    if ledger.execute(params![file.record.content, record])? == 0 {
                        continue;
                    }
                    for row in &file.rows {
                        let hour = row.report.time.hour_nearest().unix_h();
                        let text = serde_json::to_string(row).unwrap_or_default();
                        report.execute(params![hour, file.record.content, text])?;
                    }
                }
            }
            transaction.commit()
        };
        write(&mut self.connection).map_err(|source| self.failed(source))
    }

    /// Keeps the settled names.
    ///
    /// # Errors
    ///
    /// [`JournalError::Database`].
    pub fn keep_names(&self, names: &NameBook) -> Result<(), JournalError> {
        self.keep("names", names)
    }

    /// Keeps the decisions.
    ///
    /// # Errors
    ///
    /// [`JournalError::Database`].
    pub fn keep_decisions(&self, decisions: &Decisions) -> Result<(), JournalError> {
        self.keep("decisions", decisions)
    }

    /// Keeps the analysis of a settled hour, in place of an earlier one of that hour.
    ///
    /// # Errors
    ///
    /// [`JournalError::Database`].
    pub fn keep_settled(&self, analysis: &HourAnalysis) -> Result<(), JournalError> {
        self.connection
            .execute(
                "INSERT OR REPLACE INTO settled (hour, analysis) VALUES (?1, ?2)",
                params![analysis.hour.unix_h(), analysis.to_bytes()],
            )
            .map(|_| ())
            .map_err(|source| self.failed(source))
    }

    /// Takes the settled analyses of a range of hours back: a decision concerns them.
    ///
    /// # Errors
    ///
    /// [`JournalError::Database`].
    pub fn unsettle(&self, hours: &RangeInclusive<Hour>) -> Result<(), JournalError> {
        let (first, last) = (hours.start().unix_h(), hours.end().unix_h());
        self.connection
            .execute("DELETE FROM settled WHERE hour BETWEEN ?1 AND ?2", [first, last])
            .map(|_| ())
            .map_err(|source| self.failed(source))
    }

    /// Lets go of reports and analyses of hours before `hour`; the ledger stays.
    ///
    /// # Errors
    ///
    /// [`JournalError::Database`].
    pub fn forget_before(&self, hour: Hour) -> Result<(), JournalError> {
        self.connection
            .execute("DELETE FROM report WHERE hour < ?1", [hour.unix_h()])
            .and_then(|_| {
                self.connection.execute("DELETE FROM settled WHERE hour < ?1", [hour.unix_h()])
            })
            .map(|_| ())
            .map_err(|source| self.failed(source))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::feed::intake::{read_file, take_in};
    use crate::instant::Instant;

    fn file(name: &str, text: &str) -> ReadFile {
        let received = Instant::from_calendar(2026, 1, 15, 12, 10).expect("a time");
        read_file(name, text.as_bytes(), received)
    }

    const SYNOP: &str = "AAXX 15124\r\n03772 41480 82324 10082 20059 39876 49908 57034=\r\n";

    #[test]
    fn a_restart_resumes_equal() {
        let mut journal = Journal::in_memory().expect("a journal");
        let files = [file("a.txt", SYNOP), file("b.txt", "rubbish that is no report\n")];
        let mut held = Held::new();
        for file in &files {
            take_in(file.clone(), &mut held);
        }
        journal.keep_files(&files).expect("kept");
        journal.keep_files(&files).expect("kept twice is kept once");
        let mut decisions = Decisions::default();
        decisions.renamed.insert("L15k".to_owned(), "Old Ben".to_owned());
        journal.keep_decisions(&decisions).expect("kept");
        let resumed = journal.resume().expect("resumed");
        assert_eq!(resumed.held, held);
        assert_eq!(resumed.decisions, decisions);
        assert_eq!(resumed.unreadable, 0);
        assert!(resumed.held.knows_file(&files[0].record.content));
    }

    #[test]
    fn a_row_that_cannot_be_read_is_counted_and_passed_over() {
        let mut journal = Journal::in_memory().expect("a journal");
        journal.keep_files(&[file("a.txt", SYNOP)]).expect("kept");
        journal
            .connection
            .execute("INSERT INTO report (hour, content, row) VALUES (1, 'x', '{broken')", [])
            .expect("put in");
        journal
            .connection
            .execute("INSERT INTO kept (what, value) VALUES ('decisions', '{broken')", [])
            .expect("put in");
        let resumed = journal.resume().expect("resumed");
        assert_eq!(resumed.unreadable, 2);
        assert_eq!(resumed.held.counts().held, 1);
    }

    #[test]
    fn old_reports_go_and_their_files_stay_known() {
        let mut journal = Journal::in_memory().expect("a journal");
        let read = file("a.txt", SYNOP);
        journal.keep_files(std::slice::from_ref(&read)).expect("kept");
        journal.forget_before(Hour::from_unix_h(1_000_000)).expect("forgotten");
        let resumed = journal.resume().expect("resumed");
        assert_eq!(resumed.held.counts().held, 0);
        assert!(resumed.held.knows_file(&read.record.content));
    }

    #[test]
    fn settled_hours_come_back_bit_for_bit_and_can_be_opened_again() {
        let journal = Journal::in_memory().expect("a journal");
        let grid = Arc::new(crate::field::Grid::fitted(40.0, 60.0, -30.0, 0.0, 12, 11));
        let hour = |h: i64| {
            let pressure = (0..grid.len()).map(|k| 1000.0 + (k as f64).sqrt() / 3.0).collect();
            let error = vec![0.7; grid.len()];
            HourAnalysis::from_field(Hour::from_unix_h(h), Arc::clone(&grid), pressure, error)
        };
        for h in 100..104 {
            journal.keep_settled(&hour(h)).expect("kept");
        }
        journal.keep_settled(&hour(103)).expect("kept again is kept once");
        let resumed = journal.resume().expect("resumed");
        assert_eq!(resumed.settled.len(), 4);
        assert_eq!(*resumed.settled[&Hour::from_unix_h(102)], hour(102));
        journal.unsettle(&(Hour::from_unix_h(101)..=Hour::from_unix_h(102))).expect("opened");
        journal.forget_before(Hour::from_unix_h(101)).expect("forgotten");
        let left: Vec<i64> =
            journal.resume().expect("resumed").settled.keys().map(|hour| hour.unix_h()).collect();
        assert_eq!(left, [103]);
    }

    #[test]
    fn a_journal_of_the_first_schema_opens_with_what_it_held() {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("j.sqlite");
        let read = file("a.txt", SYNOP);
        {
            let connection = Connection::open(&path).expect("made");
            connection.execute_batch(MIGRATIONS[0]).expect("the first schema");
            connection.pragma_update(None, "user_version", 1).expect("set");
            let row = serde_json::to_string(&read.rows[0]).expect("text");
            connection
                .execute("INSERT INTO report (hour, content, row) VALUES (1, 'x', ?1)", [row])
                .expect("put in");
        }
        let journal = Journal::open(&path).expect("brought up to date");
        let resumed = journal.resume().expect("resumed");
        assert_eq!((resumed.held.counts().held, resumed.unreadable), (1, 0));
        assert!(resumed.settled.is_empty());
    }

    #[test]
    fn a_newer_journal_is_not_touched() {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("state").join("j.sqlite");
        drop(Journal::open(&path).expect("made"));
        let connection = Connection::open(&path).expect("opened");
        connection.pragma_update(None, "user_version", 99).expect("set");
        drop(connection);
        let error = Journal::open(&path).expect_err("newer");
        assert!(error.to_string().contains("version 99, this program knows up to 2"), "{error}");
    }
}
