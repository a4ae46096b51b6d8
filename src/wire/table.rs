//! Tables: CSV with a header line, and JSON lines with the same keys.

use std::collections::BTreeSet;
use std::ops::Range;

use crate::report::{Form, Report};
use crate::wire::group::Group;
use crate::wire::listener::{Listener, Outcome};
use crate::wire::walk::stretch;

pub(crate) mod column;
mod csv;
mod json;
mod row;

use column::Column;
use row::Row;

/// Longest header line, bytes.
const HEADER_BYTES_MAX: usize = 4096;
/// Most columns of a table that are looked at.
const COLUMNS_MAX: usize = 256;

/// What has been said about the tables of a file.
#[derive(Debug, Default)]
pub(crate) struct Tables {
    /// Unknown columns complained about already.
    unknown: BTreeSet<String>,
}

/// The columns of a CSV table.
#[derive(Debug)]
pub(crate) struct Header {
    columns: Vec<Option<Column>>,
}

/// Bytes before the line feed that ends a line, a carriage return before it left out.
pub(crate) fn line_length(text: &[u8]) -> usize {
    let length = text.iter().position(|&byte| byte == b'\n').unwrap_or(text.len());
    let line = text.get(..length).unwrap_or_default();
    length - line.iter().rev().take_while(|&&byte| byte == b'\r').count()
}

/// Whether the line at the start of `text` is a header: it has commas and two known column names.
pub(crate) fn is_header(text: &[u8]) -> bool {
    let text = text.get(..HEADER_BYTES_MAX).unwrap_or(text);
    let is_end = |byte: &u8| matches!(byte, b'\n' | b'\r');
    // Most lines are told from a header by the first of these: a comma, or none.
    if text.iter().find(|byte| **byte == b',' || is_end(byte)) != Some(&b',') {
        return false;
    }
    let length = text.iter().position(is_end).unwrap_or(text.len());
    let line = text.get(..length).unwrap_or_default();
    csv::fields(line).take(COLUMNS_MAX).filter(|field| Column::named(&field.text).is_some()).count()
        >= 2
}

impl Tables {
    /// Reads a header line; unknown columns are complained about once a file.
    pub(crate) fn header<L: Listener>(
        &mut self,
        bytes: &[u8],
        range: Range<usize>,
        listener: &mut L,
    ) -> Option<Header> {
        let line = bytes.get(range.clone())?;
        let mut columns = Vec::new();
        for field in csv::fields(line).take(COLUMNS_MAX) {
            let column = Column::named(&field.text);
            let group = stretch(bytes, range.start + field.at.start..range.start + field.at.end);
            match column {
                Some(column) if columns.contains(&Some(column)) => {
                    listener.complain(group, "table: each column once", || {
                        "the column is repeated: the first is read".to_owned()
                    });
                    columns.push(None);
                }
                Some(column) => {
                    listener.part(group, || column.meaning().to_owned());
                    columns.push(Some(column));
                }
                None => {
                    self.unknown(&field.text, group, listener);
                    columns.push(None);
                }
            }
        }
        (columns.iter().flatten().count() >= 2).then_some(Header { columns })
    }

    fn unknown<L: Listener>(&mut self, name: &[u8], group: Group<'_>, listener: &mut L) {
        let name = String::from_utf8_lossy(name).into_owned();
        // Bounded: a file may not fill the memory with names.
        if self.unknown.len() < COLUMNS_MAX && self.unknown.insert(name) {
            listener.complain(group, "table: known columns", || {
                "the column is not known: not read".to_owned()
            });
        }
    }

    /// Reads one line of JSON.
    pub(crate) fn json_line<L: Listener>(
        &mut self,
        bytes: &[u8],
        range: Range<usize>,
        listener: &mut L,
    ) -> Outcome {
        let whole = stretch(bytes, range);
        let object = match json::object(whole.text) {
            Ok(object) => object,
            Err(reason) => {
                listener.complain(whole, "JSON lines: one object a line", || {
                    format!("{reason}: the line is lost")
                });
                return Outcome::Lost;
            }
        };
        let mut row = Row::default();
        for (key, value) in &object {
            let group = json::place(whole, key);
            match Column::named(key.as_bytes()) {
                Some(column) => match json::text(value) {
                    Ok(Some(text)) => row.set(column, text.as_bytes(), group, listener),
                    Ok(None) => {}
                    Err(()) => listener.complain(group, "JSON lines: text or number", || {
                        format!("{}: neither text nor number: not used", column.name())
                    }),
                },
                // What `decode --json` writes beside the columns.
                None if key == "complaints" => {}
                None => self.unknown(key.as_bytes(), group, listener),
            }
        }
        finish(&row, Form::Json, whole, listener)
    }
}

impl Header {
    /// Whether a line may be a row of this table: it has commas, unless the table has one column.
    #[expect(clippy::unused_self, reason = "a question about the table")]
    pub(crate) fn is_row(&self, line: &[u8]) -> bool {
        line.contains(&b',')
    }

    /// Reads a row.
    pub(crate) fn row<L: Listener>(
        &self,
        bytes: &[u8],
        range: Range<usize>,
        listener: &mut L,
    ) -> Outcome {
        let whole = stretch(bytes, range.clone());
        let mut row = Row::default();
        let mut count = 0;
        for (column, field) in self
            .columns
            .iter()
            .map(Some)
            .chain(std::iter::repeat(None))
            .zip(csv::fields(whole.text))
        {
            count += 1;
            let Some(column) = column else { continue };
            let place = range.start + field.at.start..range.start + field.at.end;
            if let (Some(column), false) = (column, field.text.is_empty()) {
                row.set(*column, &field.text, stretch(bytes, place), listener);
            }
        }
        if count != self.columns.len() {
            listener.complain(whole, "CSV: as many fields as columns", || {
                format!("{count} fields under {} columns: the line is lost", self.columns.len())
            });
            return Outcome::Lost;
        }
        finish(&row, Form::Csv, whole, listener)
    }
}

fn finish<L: Listener>(row: &Row, form: Form, whole: Group<'_>, listener: &mut L) -> Outcome {
    if let Some(station) = row.station {
        listener.station(station);
    }
    match row.report(form) {
        Ok(report) => {
            useful(&report, whole, listener);
            Outcome::Report(report)
        }
        Err(missing) => {
            listener.complain(whole, "table: station and time are needed", || {
                format!("no usable {missing}: the line is lost")
            });
            Outcome::Lost
        }
    }
}

fn useful<L: Listener>(report: &Report, whole: Group<'_>, listener: &mut L) {
    if !report.is_useful() {
        listener.complain(whole, "table: a pressure or a wind is needed", || {
            "neither pressure nor wind".to_owned()
        });
    }
}

#[cfg(test)]
mod tests;
