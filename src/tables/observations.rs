//! Any table with a row per vowel token, as observations, with every cell kept as it came.

use std::collections::{BTreeMap, BTreeSet};

use super::cell::{guard, unguard};
use super::column::Column;
use super::error::TableError;
use super::record::{Records, append_record};
use super::tracks::TrackTable;
use crate::tokens::Observation;
use crate::vowel::Vowel;

/// Which columns of a table stand for what. The defaults are the names of `tokens.csv`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ObservationColumns {
    /// Column for each name of `tokens.csv`, where it is another one.
    renamed: BTreeMap<String, String>,
}

impl ObservationColumns {
    /// The names a table of observations can have, of which `speaker` and `f1_hz`, `f2_hz` must be
    /// there.
    pub const NAMES: [&'static str; 11] = [
        "token",
        "speaker",
        "vowel",
        "f0_hz",
        "f1_hz",
        "f2_hz",
        "f3_hz",
        "f1_sd_hz",
        "f2_sd_hz",
        "f3_sd_hz",
        "duration_s",
    ];

    /// Every column under its own name.
    pub fn as_named() -> Self {
        Self {
            renamed: BTreeMap::new(),
        }
    }

    /// Takes `column` for `name`; an empty `column` says that the table has none.
    ///
    /// # Errors
    /// [`UnknownName`] where `name` is none of [`Self::NAMES`].
    pub fn rename(&mut self, name: &str, column: &str) -> Result<(), UnknownName> {
        if !Self::NAMES.contains(&name) {
            return Err(UnknownName(name.to_owned()));
        }
        self.renamed.insert(name.to_owned(), column.to_owned());
        Ok(())
    }

    /// The column that stands for `name`.
    pub fn column<'a>(&'a self, name: &'a str) -> &'a str {
        self.renamed.get(name).map_or(name, String::as_str)
    }

    /// Whether the column for `name` was asked for, so that it must be there.
    fn is_asked(&self, name: &str) -> bool {
        self.renamed.contains_key(name)
    }
}

impl Default for ObservationColumns {
    fn default() -> Self {
        Self::as_named()
    }
}

/// A name no column can stand for.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("no column is called `{0}`; expected one of `{names}`", names = ObservationColumns::NAMES.join(", "))]
pub struct UnknownName(pub String);

/// A table with a row per vowel token: its cells as they came, and what they say.
#[derive(Debug, Clone, PartialEq)]
pub struct ObservationTable {
    records: Records,
    /// What each row says, in the order of the rows; `None` where a row has none of F1 to F3, or
    /// where its status is `unmeasured`.
    pub observations: Vec<Option<Observation>>,
}

impl ObservationTable {
    /// Reads a table of observations.
    ///
    /// The columns for `speaker`, `f1_hz` and `f2_hz` must be there; the others may be missing,
    /// unless they were asked for by another name. Rows are named by `token` where there is such a
    /// column, by their place (`row 1` …) elsewhere. Vowels are taken as IPA.
    ///
    /// # Errors
    /// [`TableError`], with the line.
    pub fn parse(bytes: &[u8], columns: &ObservationColumns) -> Result<Self, TableError> {
        let records = Records::parse(bytes, "speaker,vowel,f1_hz,f2_hz,f3_hz")?;
        let place = |name: &str| -> Result<Option<usize>, TableError> {
            let column = columns.column(name);
            if column.is_empty() {
                // Asked for as "there is none", where a column of the usual name means another thing.
                return Ok(None);
            }
            if matches!(name, "speaker" | "f1_hz" | "f2_hz") || columns.is_asked(name) {
                records.required(column).map(Some)
            } else {
                Ok(records.position(column))
            }
        };
        let token = place("token")?;
        let speaker = place("speaker")?;
        let vowel = place("vowel")?;
        let duration = place("duration_s")?;
        let f0 = place("f0_hz")?;
        let formants = [place("f1_hz")?, place("f2_hz")?, place("f3_hz")?];
        let sds = [place("f1_sd_hz")?, place("f2_sd_hz")?, place("f3_sd_hz")?];
        let status = records.position("status");

        let mut observations = Vec::with_capacity(records.rows.len());
        let mut seen = BTreeSet::new();
        for row in 0..records.rows.len() {
            let cell = |column: Option<usize>| column.map(|at| records.cell(row, at));
            let positive = |column: Option<usize>| match cell(column) {
                Some(cell) => cell.positive(),
                None => Ok(None),
            };
            // A standard error below half a tenth of a hertz is written as `0.0`.
            let number = |column: Option<usize>| match cell(column) {
                Some(cell) => cell.number(),
                None => Ok(None),
            };
            let name = match cell(token) {
                Some(cell) => cell.text()?,
                None => format!("row {}", row + 1),
            };
            if !seen.insert(name.clone()) {
                return Err(TableError::RepeatedToken {
                    line: records.lines[row],
                    token: name,
                });
            }
            let speaker = match cell(speaker) {
                Some(cell) => cell.text()?,
                None => String::new(),
            };
            let vowel: Option<Vowel> = cell(vowel).and_then(|cell| cell.vowel());
            let formant_hz = [
                positive(formants[0])?,
                positive(formants[1])?,
                positive(formants[2])?,
            ];
            let unmeasured = cell(status).is_some_and(|cell| cell.text == "unmeasured");
            observations.push(if unmeasured || formant_hz == [None; 3] {
                None
            } else {
                Some(Observation {
                    token: name,
                    speaker,
                    vowel,
                    duration_s: positive(duration)?,
                    f0_hz: positive(f0)?,
                    formant_hz,
                    sd_hz: [number(sds[0])?, number(sds[1])?, number(sds[2])?],
                    track: Vec::new(),
                })
            });
        }
        Ok(Self {
            records,
            observations,
        })
    }

    /// Gives each observation its track.
    ///
    /// # Errors
    /// [`TableError::UnknownToken`] where a track belongs to no row of this table.
    pub fn add_tracks(&mut self, tracks: &TrackTable) -> Result<(), TableError> {
        let mut by_token = tracks.by_token();
        for observation in self.observations.iter_mut().flatten() {
            if let Some(rows) = by_token.remove(observation.token.as_str()) {
                observation.track = rows.iter().map(|row| row.point()).collect();
            }
        }
        match by_token.keys().next() {
            None => Ok(()),
            Some(token) => {
                let line = tracks.rows.iter().position(|row| row.token == *token);
                Err(TableError::UnknownToken {
                    line: line.unwrap_or_default() as u64 + 2,
                    token: (*token).to_owned(),
                })
            }
        }
    }

    /// Names of the columns, as they stand.
    pub fn header(&self) -> &[String] {
        &self.records.header
    }

    /// Number of rows, measured or not.
    pub fn len(&self) -> usize {
        self.records.rows.len()
    }

    /// Whether there is no row.
    pub fn is_empty(&self) -> bool {
        self.records.rows.is_empty()
    }

    /// Line of a row in the file it was read from.
    pub fn line(&self, row: usize) -> u64 {
        self.records.lines[row]
    }

    /// The text of any column of the table, row by row: a grouping column, say.
    ///
    /// # Errors
    /// [`TableError::MissingColumn`].
    pub fn column(&self, name: &str) -> Result<Vec<&str>, TableError> {
        let column = self.records.required(name)?;
        Ok((0..self.len())
            .map(|row| unguard(self.records.cell(row, column).text))
            .collect())
    }

    /// The table with a group of columns added at its end, as the bytes of a file. Columns of the
    /// same names that were there are left out; every other cell is as it came.
    ///
    /// `cells` has one entry per row, each with one cell per column; numbers formatted and text
    /// guarded already, as [`super::NormalizedCells::cells`] and
    /// [`super::IdentifiedCells::cells`] give them. A row with fewer cells gets empty ones.
    pub fn bytes_with(&self, columns: &[Column], cells: &[Vec<String>]) -> Vec<u8> {
        let kept: Vec<usize> = (0..self.records.header.len())
            .filter(|&at| !columns.iter().any(|c| c.name == self.records.header[at]))
            .collect();
        let mut out = Vec::new();
        let mut header: Vec<String> = kept
            .iter()
            .map(|&at| guard(&self.records.header[at]))
            .collect();
        header.extend(columns.iter().map(|column| guard(&column.name)));
        append_record(&mut out, header.iter().map(String::as_str));
        for (row, record) in self.records.rows.iter().enumerate() {
            let given: Vec<String> = kept
                .iter()
                .map(|&at| guard(unguard(record.get(at).unwrap_or_default())))
                .collect();
            let added = (0..columns.len()).map(|nth| {
                let cell = cells.get(row).and_then(|cells| cells.get(nth));
                cell.map_or("", String::as_str)
            });
            append_record(&mut out, given.iter().map(String::as_str).chain(added));
        }
        out
    }
}

#[cfg(test)]
mod tests {
    use super::super::token_row::NormalizedCells;
    use super::*;

    const FOREIGN: &str = "group,talker,ipa,note,f0,f1,f2,f3\n\
                           man,pb01,i,\"a, b\",160,240,2280,2850\n\
                           man,pb01,ɪ,=1+1,,390,1990,\n\
                           man,pb01,u,,,,NA,\n";

    fn columns() -> ObservationColumns {
        let mut columns = ObservationColumns::as_named();
        for (name, column) in [
            ("speaker", "talker"),
            ("vowel", "ipa"),
            ("f0_hz", "f0"),
            ("f1_hz", "f1"),
            ("f2_hz", "f2"),
            ("f3_hz", "f3"),
        ] {
            columns.rename(name, column).expect("a known name");
        }
        columns
    }

    #[test]
    fn a_foreign_table_is_read_by_its_own_column_names() {
        let table = ObservationTable::parse(FOREIGN.as_bytes(), &columns()).expect("a table");
        let first = table.observations[0].as_ref().expect("measured");
        assert_eq!(first.token, "row 1");
        assert_eq!(first.speaker, "pb01");
        assert_eq!(first.vowel, Some(Vowel::from_ipa("i")));
        assert_eq!(first.formant_hz, [Some(240.0), Some(2280.0), Some(2850.0)]);
        assert_eq!(table.observations[1].as_ref().map(|o| o.f0_hz), Some(None));
        assert_eq!(table.observations[2], None);
        assert_eq!(table.column("group").map(|c| c.len()), Ok(3));
    }

    #[test]
    fn adding_columns_keeps_every_other_cell_and_replaces_its_own() {
        let table = ObservationTable::parse(FOREIGN.as_bytes(), &columns()).expect("a table");
        let cells = NormalizedCells {
            formant: [Some(1.0), None, None],
            method: "x".to_owned(),
        }
        .cells();
        let added = NormalizedCells::columns();
        let bytes = table.bytes_with(&added, std::slice::from_ref(&cells));
        let text = String::from_utf8(bytes.clone()).expect("UTF-8");
        assert_eq!(
            text,
            "group,talker,ipa,note,f0,f1,f2,f3,f1_norm,f2_norm,f3_norm,norm_method\n\
             man,pb01,i,\"a, b\",160,240,2280,2850,1.000000,,,x\n\
             man,pb01,ɪ,'=1+1,,390,1990,,,,,\n\
             man,pb01,u,,,,NA,,,,,\n"
        );
        let again = ObservationTable::parse(&bytes, &columns()).expect("a table");
        assert_eq!(again.bytes_with(&added, &[cells]), bytes);
    }

    #[test]
    fn what_was_asked_for_must_be_there() {
        let mut columns = columns();
        columns.rename("duration_s", "dur").expect("a known name");
        assert!(matches!(
            ObservationTable::parse(FOREIGN.as_bytes(), &columns),
            Err(TableError::MissingColumn { column, .. }) if column == "dur"
        ));
        assert!(columns.rename("f9_hz", "x").is_err());
    }

    #[test]
    fn tracks_find_their_tokens() {
        let text = "token,speaker,f1_hz,f2_hz\na,s,500,1500\n";
        let mut table = ObservationTable::parse(text.as_bytes(), &ObservationColumns::as_named())
            .expect("a table");
        let header = String::from_utf8(TrackTable::default().bytes()).expect("UTF-8");
        let good = format!("{header}a,r,0.2,0.1,,510,1490,,,,,,,\n");
        let tracks = TrackTable::parse(good.as_bytes()).expect("tracks");
        table.add_tracks(&tracks).expect("known tokens");
        assert_eq!(
            table.observations[0].as_ref().map(|o| o.track.clone()),
            Some(vec![(0.2, [Some(510.0), Some(1490.0), None])])
        );
        let bad = format!("{header}b,r,0.2,0.1,,510,1490,,,,,,,\n");
        let tracks = TrackTable::parse(bad.as_bytes()).expect("tracks");
        assert!(matches!(
            table.add_tracks(&tracks),
            Err(TableError::UnknownToken { line: 2, .. })
        ));
    }
}
