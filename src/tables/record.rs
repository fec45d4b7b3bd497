//! Records of a CSV table, with the line each stands in.

use std::collections::BTreeSet;

use super::cell::Cell;
use super::error::TableError;
use crate::segments::{LineCounter, guess_delimiter};

/// A table taken apart into cells: the header, then rows of as many cells.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Records {
    /// Names of the columns.
    pub(super) header: Vec<String>,
    /// Cells of each row, as they stand in the file.
    pub(super) rows: Vec<csv::StringRecord>,
    /// Line of each row.
    pub(super) lines: Vec<u64>,
}

impl Records {
    /// Takes a table apart.
    ///
    /// # Errors
    /// An empty text, a repeated column, a row of another length, bytes that are not UTF-8.
    pub(super) fn parse(bytes: &[u8], expected: &str) -> Result<Self, TableError> {
        let bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .flexible(true)
            .delimiter(guess_delimiter(bytes))
            .from_reader(bytes);
        let mut lines = LineCounter::new(bytes);
        let mut records = reader.records();
        let header: Vec<String> = match records.next() {
            None => {
                return Err(TableError::Empty {
                    expected: expected.to_owned(),
                });
            }
            Some(record) => record
                .map_err(|_| TableError::NotUtf8 { line: 1 })?
                .iter()
                .map(|name| super::cell::unguard(name.trim()).to_owned())
                .collect(),
        };
        let mut seen = BTreeSet::new();
        for name in &header {
            if !name.is_empty() && !seen.insert(name) {
                return Err(TableError::RepeatedColumn {
                    column: name.clone(),
                });
            }
        }
        let mut rows = Vec::new();
        let mut row_lines = Vec::new();
        for record in records {
            let record = record.map_err(|error| TableError::NotUtf8 {
                line: lines.line_of(error.position()),
            })?;
            let line = lines.line_of(record.position());
            if record.len() != header.len() {
                return Err(TableError::Ragged {
                    line,
                    found: record.len(),
                    expected: header.len(),
                });
            }
            rows.push(record);
            row_lines.push(line);
        }
        Ok(Self {
            header,
            rows,
            lines: row_lines,
        })
    }

    /// Where a column stands.
    pub(super) fn position(&self, name: &str) -> Option<usize> {
        self.header.iter().position(|column| column == name)
    }

    /// Where a column stands that must be there.
    ///
    /// # Errors
    /// [`TableError::MissingColumn`].
    pub(super) fn required(&self, name: &str) -> Result<usize, TableError> {
        self.position(name)
            .ok_or_else(|| TableError::MissingColumn {
                column: name.to_owned(),
                found: self.header.join(","),
            })
    }

    /// One cell with its position.
    pub(super) fn cell(&self, row: usize, column: usize) -> Cell<'_> {
        Cell {
            line: self.lines[row],
            column: &self.header[column],
            text: self.rows[row].get(column).unwrap_or_default(),
        }
    }
}

/// One record of `cells` as RFC 4180 text with its line end, appended to `out`.
pub(super) fn append_record<'a>(out: &mut Vec<u8>, cells: impl IntoIterator<Item = &'a str>) {
    let mut first = true;
    for cell in cells {
        if !first {
            out.push(b',');
        }
        first = false;
        // A lone carriage return ends a line for some readers, so it is quoted as well.
        if cell.contains([',', '"', '\n', '\r']) {
            out.push(b'"');
            out.extend(cell.replace('"', "\"\"").bytes());
            out.push(b'"');
        } else {
            out.extend(cell.bytes());
        }
    }
    out.push(b'\n');
}
