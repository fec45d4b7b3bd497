//! `tokens.csv`: one row per vowel token.

use std::borrow::Cow;
use std::collections::BTreeSet;

use super::cell::{guard, optional, round_to};
use super::column::{Column, Kind};
use super::error::TableError;
use super::record::{Records, append_record};
use crate::tokens::{Observation, Token};
use crate::vowel::Vowel;

use Column as C;

const BEFORE_SPEAKER_COLUMNS: [Column; 4] = [
    C::fixed(
        "token",
        Kind::Text,
        "Name of the token, unique in its survey.",
    ),
    C::fixed("recording", Kind::Text, "File name of the recording."),
    C::fixed("channel", Kind::Count, "Channel of the recording, from 1."),
    C::fixed("speaker", Kind::Text, "Who speaks."),
];

const MEASURED: [Column; 21] = [
    C::fixed(
        "word",
        Kind::Text,
        "The word the vowel stands in, as given.",
    ),
    C::fixed("label", Kind::Text, "The label, as given."),
    C::fixed("vowel", Kind::Text, "The vowel the label names, in IPA."),
    C::fixed(
        "start_s",
        Kind::Seconds,
        "Start of the vowel in its recording.",
    ),
    C::fixed("end_s", Kind::Seconds, "End of the vowel in its recording."),
    C::fixed("duration_s", Kind::Seconds, "End less start."),
    C::fixed("status", Kind::Text, "`measured` or `unmeasured`."),
    C::fixed("reason", Kind::Text, "Why the token is unmeasured."),
    C::fixed("f0_hz", Kind::Hertz, "Fundamental frequency at `at_s`."),
    C::fixed("f1_hz", Kind::Hertz, "First formant at `at_s`."),
    C::fixed("f2_hz", Kind::Hertz, "Second formant at `at_s`."),
    C::fixed("f3_hz", Kind::Hertz, "Third formant at `at_s`."),
    C::fixed("f4_hz", Kind::Hertz, "Fourth formant at `at_s`."),
    C::fixed("b1_hz", Kind::Hertz, "Bandwidth of the first formant."),
    C::fixed("b2_hz", Kind::Hertz, "Bandwidth of the second formant."),
    C::fixed("b3_hz", Kind::Hertz, "Bandwidth of the third formant."),
    C::fixed("f1_sd_hz", Kind::Hertz, "Standard error of `f1_hz`."),
    C::fixed("f2_sd_hz", Kind::Hertz, "Standard error of `f2_hz`."),
    C::fixed("f3_sd_hz", Kind::Hertz, "Standard error of `f3_hz`."),
    C::fixed(
        "at_s",
        Kind::Seconds,
        "The moment the single values stand for.",
    ),
    C::fixed(
        "doubts",
        Kind::Text,
        "Reasons to look before trusting, `;` between.",
    ),
];

const NORMALIZED: [Column; 4] = [
    C::fixed("f1_norm", Kind::Normalized, "First formant, normalized."),
    C::fixed("f2_norm", Kind::Normalized, "Second formant, normalized."),
    C::fixed("f3_norm", Kind::Normalized, "Third formant, normalized."),
    C::fixed(
        "norm_method",
        Kind::Text,
        "How the normalized values were made.",
    ),
];

const IDENTIFIED: [Column; 5] = [
    C::fixed(
        "identified",
        Kind::Text,
        "The vowel the model takes it for, in IPA.",
    ),
    C::fixed(
        "probability",
        Kind::Probability,
        "How probable the model holds that.",
    ),
    C::fixed(
        "second",
        Kind::Text,
        "The next most probable vowel, in IPA.",
    ),
    C::fixed(
        "second_probability",
        Kind::Probability,
        "How probable the model holds that.",
    ),
    C::fixed("model", Kind::Text, "The model that identified it."),
];

/// The columns of a token table with these speaker columns and groups, in order.
pub fn token_columns(speaker_columns: &[String], groups: ColumnGroups) -> Vec<Column> {
    let mut columns = BEFORE_SPEAKER_COLUMNS.to_vec();
    columns.extend(speaker_columns.iter().map(|name| Column {
        name: Cow::Owned(name.clone()),
        kind: Kind::Text,
        description: Cow::Borrowed("Of the speaker, as given."),
    }));
    columns.extend(MEASURED);
    if groups.normalized {
        columns.extend(NORMALIZED);
    }
    if groups.identified {
        columns.extend(IDENTIFIED);
    }
    columns
}

/// Whether a name belongs to the program's own columns, so that no speaker column may have it.
pub(crate) fn is_own_column(name: &str) -> bool {
    BEFORE_SPEAKER_COLUMNS
        .iter()
        .chain(&MEASURED)
        .chain(&NORMALIZED)
        .chain(&IDENTIFIED)
        .any(|column| column.name == name)
}

/// Which groups of columns a token table has beyond the measured ones.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct ColumnGroups {
    /// `f1_norm` … `norm_method`.
    pub normalized: bool,
    /// `identified` … `model`.
    pub identified: bool,
}

/// One row of `tokens.csv`. Numbers are rounded to what their cells hold.
#[derive(Debug, Clone, PartialEq)]
pub struct TokenRow {
    /// Name, unique in the table.
    pub token: String,
    /// File name of the recording.
    pub recording: String,
    /// Channel, from 1.
    pub channel: u16,
    /// Who speaks.
    pub speaker: String,
    /// Values of the speaker columns, in the order of the table's; empty where not given.
    pub given: Vec<String>,
    /// The word.
    pub word: Option<String>,
    /// The label, as given.
    pub label: String,
    /// The vowel the label names.
    pub vowel: Option<Vowel>,
    /// Start in seconds.
    pub start_s: f64,
    /// End in seconds.
    pub end_s: f64,
    /// Duration in seconds.
    pub duration_s: f64,
    /// What was measured, or why nothing.
    pub reading: Result<ReadingCells, String>,
    /// Normalized values, where there are any.
    pub normalized: Option<NormalizedCells>,
    /// What it was identified as, where it was.
    pub identified: Option<IdentifiedCells>,
}

/// The measured cells of one row.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct ReadingCells {
    /// F0 in hertz.
    pub f0_hz: Option<f64>,
    /// F1 to F4 in hertz.
    pub formant_hz: [Option<f64>; 4],
    /// Bandwidths of F1 to F3 in hertz.
    pub bandwidth_hz: [Option<f64>; 3],
    /// Standard errors of F1 to F3 in hertz.
    pub sd_hz: [Option<f64>; 3],
    /// The moment the values stand for, in seconds.
    pub at_s: Option<f64>,
    /// Doubts, as the program words them.
    pub doubts: Vec<String>,
}

/// The normalized cells of one row.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct NormalizedCells {
    /// F1 to F3.
    pub formant: [Option<f64>; 3],
    /// How they were made; empty where they could not be.
    pub method: String,
}

/// The identification cells of one row.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct IdentifiedCells {
    /// The most probable vowel; `None` where the model declined.
    pub identified: Option<Vowel>,
    /// Its probability.
    pub probability: Option<f64>,
    /// The next one.
    pub second: Option<Vowel>,
    /// Its probability.
    pub second_probability: Option<f64>,
    /// Name of the model.
    pub model: String,
}

impl TokenRow {
    /// The row of a measured token, with its speaker's values as given.
    pub fn of(token: &Token, given: Vec<String>) -> Self {
        let span = &token.span;
        let hertz = |value: Option<f64>| value.map(|v| round_to(Kind::Hertz, v));
        let seconds = |value: f64| round_to(Kind::Seconds, value);
        let reading = match &token.reading {
            Err(reason) => Err(reason.reason().to_owned()),
            Ok(reading) => Ok(ReadingCells {
                f0_hz: hertz(reading.value.f0_hz),
                formant_hz: reading.value.formant_hz.map(hertz),
                bandwidth_hz: reading.value.bandwidth_hz.map(hertz),
                sd_hz: reading.value.sd_hz.map(hertz),
                at_s: Some(seconds(reading.at_s)),
                doubts: reading.doubts.iter().map(|doubt| doubt.text()).collect(),
            }),
        };
        Self {
            token: span.token.clone(),
            recording: span.recording.clone(),
            channel: span.channel,
            speaker: span.speaker.clone(),
            given,
            word: span.word.clone(),
            label: span.label.clone(),
            vowel: span.vowel.clone(),
            start_s: seconds(span.start_s),
            end_s: seconds(span.end_s),
            duration_s: seconds(span.duration_s()),
            reading,
            normalized: None,
            identified: None,
        }
    }

    /// What later stages need of the row; `None` where it is unmeasured.
    ///
    /// `track` is the token's track: proportion, then F1 to F3 in hertz.
    pub fn observation(&self, track: Vec<(f64, [Option<f64>; 3])>) -> Option<Observation> {
        let reading = self.reading.as_ref().ok()?;
        let [f1, f2, f3, _] = reading.formant_hz;
        Some(Observation {
            token: self.token.clone(),
            speaker: self.speaker.clone(),
            vowel: self.vowel.clone(),
            duration_s: Some(self.duration_s),
            f0_hz: reading.f0_hz,
            formant_hz: [f1, f2, f3],
            sd_hz: reading.sd_hz,
            track,
        })
    }

    fn cells(&self, groups: ColumnGroups) -> Vec<String> {
        let vowel = |vowel: &Option<Vowel>| vowel.as_ref().map_or("", Vowel::ipa).to_owned();
        let unmeasured = ReadingCells::default();
        let (status, reason, reading) = match &self.reading {
            Ok(reading) => ("measured", "", reading),
            Err(reason) => ("unmeasured", reason.as_str(), &unmeasured),
        };
        let mut cells = vec![
            guard(&self.token),
            guard(&self.recording),
            self.channel.to_string(),
            guard(&self.speaker),
        ];
        cells.extend(self.given.iter().map(|text| guard(text)));
        cells.extend([
            guard(self.word.as_deref().unwrap_or_default()),
            guard(&self.label),
            guard(&vowel(&self.vowel)),
            optional(Kind::Seconds, Some(self.start_s)),
            optional(Kind::Seconds, Some(self.end_s)),
            optional(Kind::Seconds, Some(self.duration_s)),
            status.to_owned(),
            guard(reason),
            optional(Kind::Hertz, reading.f0_hz),
        ]);
        let hertz = reading
            .formant_hz
            .iter()
            .chain(&reading.bandwidth_hz)
            .chain(&reading.sd_hz);
        cells.extend(hertz.map(|&value| optional(Kind::Hertz, value)));
        cells.push(optional(Kind::Seconds, reading.at_s));
        cells.push(guard(&reading.doubts.join(";")));
        if groups.normalized {
            cells.extend(self.normalized.clone().unwrap_or_default().cells());
        }
        if groups.identified {
            cells.extend(self.identified.clone().unwrap_or_default().cells());
        }
        cells
    }
}

impl NormalizedCells {
    /// The names of the columns, in order.
    pub fn columns() -> Vec<Column> {
        NORMALIZED.to_vec()
    }

    /// The cells, in the order of the columns.
    pub fn cells(&self) -> Vec<String> {
        let mut cells: Vec<String> = self
            .formant
            .iter()
            .map(|&value| optional(Kind::Normalized, value))
            .collect();
        cells.push(guard(&self.method));
        cells
    }
}

impl IdentifiedCells {
    /// The names of the columns, in order.
    pub fn columns() -> Vec<Column> {
        IDENTIFIED.to_vec()
    }

    /// The cells, in the order of the columns.
    pub fn cells(&self) -> Vec<String> {
        let vowel = |vowel: &Option<Vowel>| guard(vowel.as_ref().map_or("", Vowel::ipa));
        vec![
            vowel(&self.identified),
            optional(Kind::Probability, self.probability),
            vowel(&self.second),
            optional(Kind::Probability, self.second_probability),
            guard(&self.model),
        ]
    }
}

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
    use crate::tokens::{Doubt, FormantPoint, Reading};

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
                doubts: vec![Doubt::Disagreement(3), Doubt::HighPitch],
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
