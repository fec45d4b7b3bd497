//! `tokens.csv` as a whole: one row per vowel token.

use std::collections::BTreeSet;

use super::cell::guard;
use super::column::Column;
use super::error::TableError;
use super::record::{Records, append_record};
use super::token_row::{
    BEFORE_SPEAKER_COLUMNS, ColumnGroups, IDENTIFIED, IdentifiedCells, MEASURED, NORMALIZED,
    NormalizedCells, ReadingCells, TokenRow, is_own_column, token_columns,
};

/// A whole `tokens.csv`.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct TokenTable {
    /// Names of the speaker columns.
    pub speaker_columns: Vec<String>,
    /// Which groups of columns it has.
    pub groups: ColumnGroups,
    /// The rows.
    pub rows: Vec<TokenRow>,
}

impl TokenTable {
    /// Reads the table back. Columns that are not the program's own are speaker columns.
    ///
    /// # Errors
    /// [`TableError`], with the line.
    pub fn parse(bytes: &[u8]) -> Result<Self, TableError> {
        let records = Records::parse(bytes, "token,recording,channel,speaker,…")?;
        let own: Vec<usize> = BEFORE_SPEAKER_COLUMNS
            .iter()
            .chain(&MEASURED)
            .map(|column| records.required(&column.name))
            .collect::<Result<_, _>>()?;
        let group = |columns: &[Column]| -> Result<Option<Vec<usize>>, TableError> {
            if !columns.iter().any(|c| records.position(&c.name).is_some()) {
                return Ok(None);
            }
            columns
                .iter()
                .map(|c| records.required(&c.name))
                .collect::<Result<_, _>>()
                .map(Some)
        };
        let normalized = group(&NORMALIZED)?;
        let identified = group(&IDENTIFIED)?;
        let given: Vec<usize> = (0..records.header.len())
            .filter(|&at| !is_own_column(&records.header[at]))
            .collect();
        let mut rows = Vec::with_capacity(records.rows.len());
        let mut seen = BTreeSet::new();
        for at in 0..records.rows.len() {
            let mut row = read_row(&records, at, &own)?;
            row.given = given
                .iter()
                .map(|&column| records.cell(at, column).optional_text().unwrap_or_default())
                .collect();
            if let Some(columns) = &normalized {
                row.normalized = read_normalized(&records, at, columns)?;
            }
            if let Some(columns) = &identified {
                row.identified = read_identified(&records, at, columns)?;
            }
            if !seen.insert(row.token.clone()) {
                return Err(TableError::RepeatedToken {
                    line: records.lines[at],
                    token: row.token,
                });
            }
            rows.push(row);
        }
        Ok(Self {
            speaker_columns: given.iter().map(|&at| records.header[at].clone()).collect(),
            groups: ColumnGroups {
                normalized: normalized.is_some(),
                identified: identified.is_some(),
            },
            rows,
        })
    }

    /// The table as the bytes of its file.
    pub fn bytes(&self) -> Vec<u8> {
        let mut writer = TokenWriter::new(&self.speaker_columns, self.groups);
        for row in &self.rows {
            writer.append(row);
        }
        writer.take()
    }
}

fn read_row(records: &Records, at: usize, own: &[usize]) -> Result<TokenRow, TableError> {
    let column = |name: &str| {
        let place = BEFORE_SPEAKER_COLUMNS
            .iter()
            .chain(&MEASURED)
            .position(|c| c.name == name);
        records.cell(at, own[place.unwrap_or_default()])
    };
    let channel = column("channel");
    let status = column("status");
    let reading = match status.text {
        "measured" => Ok(ReadingCells {
            f0_hz: column("f0_hz").positive()?,
            formant_hz: [
                column("f1_hz").positive()?,
                column("f2_hz").positive()?,
                column("f3_hz").positive()?,
                column("f4_hz").positive()?,
            ],
            bandwidth_hz: [
                column("b1_hz").number()?,
                column("b2_hz").number()?,
                column("b3_hz").number()?,
            ],
            sd_hz: [
                column("f1_sd_hz").number()?,
                column("f2_sd_hz").number()?,
                column("f3_sd_hz").number()?,
            ],
            at_s: column("at_s").number()?,
            doubts: column("doubts")
                .optional_text()
                .map(|text| {
                    text.split(';')
                        .map(|doubt| doubt.trim().to_owned())
                        .collect()
                })
                .unwrap_or_default(),
        }),
        "unmeasured" => Err(column("reason").optional_text().unwrap_or_default()),
        _ => return Err(status.wrong("`measured` or `unmeasured`")),
    };
    Ok(TokenRow {
        token: column("token").text()?,
        recording: column("recording").text()?,
        channel: channel
            .text
            .parse()
            .map_err(|_| channel.wrong("a channel, from 1"))?,
        speaker: column("speaker").optional_text().unwrap_or_default(),
        given: Vec::new(),
        word: column("word").optional_text(),
        label: column("label").optional_text().unwrap_or_default(),
        vowel: column("vowel").vowel(),
        start_s: column("start_s").required_number()?,
        end_s: column("end_s").required_number()?,
        duration_s: column("duration_s").required_number()?,
        reading,
        normalized: None,
        identified: None,
    })
}

fn read_normalized(
    records: &Records,
    at: usize,
    columns: &[usize],
) -> Result<Option<NormalizedCells>, TableError> {
    let cell = |nth: usize| records.cell(at, columns[nth]);
    let cells = NormalizedCells {
        formant: [cell(0).number()?, cell(1).number()?, cell(2).number()?],
        method: cell(3).optional_text().unwrap_or_default(),
    };
    Ok((cells != NormalizedCells::default()).then_some(cells))
}

fn read_identified(
    records: &Records,
    at: usize,
    columns: &[usize],
) -> Result<Option<IdentifiedCells>, TableError> {
    let cell = |nth: usize| records.cell(at, columns[nth]);
    let cells = IdentifiedCells {
        identified: cell(0).vowel(),
        probability: cell(1).number()?,
        second: cell(2).vowel(),
        second_probability: cell(3).number()?,
        model: cell(4).optional_text().unwrap_or_default(),
    };
    Ok((cells != IdentifiedCells::default()).then_some(cells))
}

/// Writes `tokens.csv` row by row into memory that can be emptied between rows.
#[derive(Debug)]
pub struct TokenWriter {
    groups: ColumnGroups,
    out: Vec<u8>,
}

impl TokenWriter {
    /// A table with its header and no row.
    pub fn new(speaker_columns: &[String], groups: ColumnGroups) -> Self {
        let mut out = Vec::new();
        let columns = token_columns(speaker_columns, groups);
        let names: Vec<String> = columns.iter().map(|column| guard(&column.name)).collect();
        append_record(&mut out, names.iter().map(String::as_str));
        Self { groups, out }
    }

    /// Adds a row.
    pub fn append(&mut self, row: &TokenRow) {
        append_record(
            &mut self.out,
            row.cells(self.groups).iter().map(String::as_str),
        );
    }

    /// Gives what was written since the last call.
    pub fn take(&mut self) -> Vec<u8> {
        std::mem::take(&mut self.out)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::formants::Unmeasured;
    use crate::segments::VowelSpan;
    use crate::tokens::{Doubt, FormantPoint, Reading, Token};
    use crate::vowel::Vowel;

    fn span(token: &str, label: &str) -> VowelSpan {
        VowelSpan {
            token: token.to_owned(),
            recording: "a, b.wav".to_owned(),
            channel: 1,
            speaker: "=s\"1".to_owned(),
            word: Some("heed".to_owned()),
            label: label.to_owned(),
            vowel: Some(Vowel::from_ipa("i")),
            start_s: 0.1,
            end_s: 0.35,
        }
    }

    fn measured() -> Token {
        Token {
            span: span("a#1", "@"),
            reading: Ok(Reading {
                at_s: 0.22,
                value: FormantPoint {
                    f0_hz: Some(120.04),
                    formant_hz: [Some(300.06), Some(2200.0), None, None],
                    bandwidth_hz: [Some(50.0), None, None],
                    sd_hz: [Some(12.345), None, None],
                },
                track: Vec::new(),
                doubts: vec![Doubt::Uncertain(3), Doubt::HighPitch],
            }),
        }
    }

    fn table() -> TokenTable {
        let mut first = TokenRow::of(&measured(), vec!["40".to_owned(), String::new()]);
        first.normalized = Some(NormalizedCells {
            formant: [Some(-1.5), Some(0.25), None],
            method: "lobanov".to_owned(),
        });
        first.identified = Some(IdentifiedCells {
            identified: Some(Vowel::from_ipa("i")),
            probability: Some(0.9),
            second: None,
            second_probability: None,
            model: "m".to_owned(),
        });
        let unmeasured = Token {
            span: span("a#2", "iy"),
            reading: Err(Unmeasured::TooShort),
        };
        TokenTable {
            speaker_columns: vec!["age".to_owned(), "place, or so".to_owned()],
            groups: ColumnGroups {
                normalized: true,
                identified: true,
            },
            rows: vec![
                first,
                TokenRow::of(&unmeasured, vec!["40".to_owned(), "-x".to_owned()]),
            ],
        }
    }

    #[test]
    fn a_table_reads_back_to_the_same_rows() {
        let table = table();
        let read = TokenTable::parse(&table.bytes()).expect("own table");
        assert_eq!(read, table);
        assert_eq!(read.bytes(), table.bytes());
    }

    #[test]
    fn cells_are_rounded_guarded_and_empty_where_missing() {
        let text = String::from_utf8(table().bytes()).expect("UTF-8");
        let row = text.lines().nth(1).expect("a row");
        assert_eq!(
            row,
            "a#1,\"a, b.wav\",1,\"'=s\"\"1\",40,,heed,'@,i,0.100000,0.350000,0.250000,measured,,\
             120.0,300.1,2200.0,,,50.0,,,12.3,,,0.220000,F3 uncertain;F0 near F1,\
             -1.500000,0.250000,,lobanov,i,0.9000,,,m"
        );
    }

    #[test]
    fn positions_are_told() {
        let text = String::from_utf8(table().bytes()).expect("UTF-8");
        let broken = text.replacen("2200.0", "2 200", 1);
        assert_eq!(
            TokenTable::parse(broken.as_bytes()),
            Err(TableError::Cell {
                line: 2,
                column: "f2_hz".to_owned(),
                found: "2 200".to_owned(),
                expected: "a number with a decimal point, or an empty cell",
            })
        );
        let headless = text.replacen("f1_hz", "F1", 1);
        assert!(matches!(
            TokenTable::parse(headless.as_bytes()),
            Err(TableError::MissingColumn { column, .. }) if column == "f1_hz"
        ));
        let twice = text.replace("a#2", "a#1");
        assert!(matches!(
            TokenTable::parse(twice.as_bytes()),
            Err(TableError::RepeatedToken { line: 3, .. })
        ));
    }
}
