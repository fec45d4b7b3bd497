//! `tracks.csv`: one row per token and time point.

use std::collections::BTreeMap;

use super::cell::{guard, optional, round_to};
use super::column::{Column, Kind};
use super::error::TableError;
use super::record::{Records, append_record};
use crate::tokens::Token;

use Column as C;

const TRACK: [Column; 14] = [
    C::fixed(
        "token",
        Kind::Text,
        "Name of the token, as in the token table.",
    ),
    C::fixed("recording", Kind::Text, "File name of the recording."),
    C::fixed(
        "proportion",
        Kind::Proportion,
        "Share of the vowel's duration gone by.",
    ),
    C::fixed("time_s", Kind::Seconds, "The moment in the recording."),
    C::fixed("f0_hz", Kind::Hertz, "Fundamental frequency."),
    C::fixed("f1_hz", Kind::Hertz, "First formant."),
    C::fixed("f2_hz", Kind::Hertz, "Second formant."),
    C::fixed("f3_hz", Kind::Hertz, "Third formant."),
    C::fixed("b1_hz", Kind::Hertz, "Bandwidth of the first formant."),
    C::fixed("b2_hz", Kind::Hertz, "Bandwidth of the second formant."),
    C::fixed("b3_hz", Kind::Hertz, "Bandwidth of the third formant."),
    C::fixed("f1_sd_hz", Kind::Hertz, "Standard error of `f1_hz`."),
    C::fixed("f2_sd_hz", Kind::Hertz, "Standard error of `f2_hz`."),
    C::fixed("f3_sd_hz", Kind::Hertz, "Standard error of `f3_hz`."),
];

/// The columns of `tracks.csv`, in order.
pub fn track_columns() -> Vec<Column> {
    TRACK.to_vec()
}

/// One row of `tracks.csv`. Numbers are rounded to what their cells hold.
#[derive(Debug, Clone, PartialEq)]
pub struct TrackRow {
    /// Name of the token.
    pub token: String,
    /// File name of the recording.
    pub recording: String,
    /// Share of the duration, 0 to 1.
    pub proportion: f64,
    /// Seconds from the start of the recording.
    pub time_s: f64,
    /// F0 in hertz.
    pub f0_hz: Option<f64>,
    /// F1 to F3 in hertz.
    pub formant_hz: [Option<f64>; 3],
    /// Bandwidths of F1 to F3 in hertz.
    pub bandwidth_hz: [Option<f64>; 3],
    /// Standard errors of F1 to F3 in hertz.
    pub sd_hz: [Option<f64>; 3],
}

impl TrackRow {
    /// The rows of a token: one for each point of its track, none where it is unmeasured.
    pub fn of(token: &Token) -> Vec<Self> {
        let hertz = |value: Option<f64>| value.map(|v| round_to(Kind::Hertz, v));
        let Ok(reading) = &token.reading else {
            return Vec::new();
        };
        reading
            .track
            .iter()
            .map(|at| {
                let [f1, f2, f3, _] = at.point.formant_hz;
                Self {
                    token: token.span.token.clone(),
                    recording: token.span.recording.clone(),
                    proportion: round_to(Kind::Proportion, at.proportion),
                    time_s: round_to(Kind::Seconds, at.time_s),
                    f0_hz: hertz(at.point.f0_hz),
                    formant_hz: [f1, f2, f3].map(hertz),
                    bandwidth_hz: at.point.bandwidth_hz.map(hertz),
                    sd_hz: at.point.sd_hz.map(hertz),
                }
            })
            .collect()
    }

    /// What an observation keeps of the row.
    pub fn point(&self) -> (f64, [Option<f64>; 3]) {
        (self.proportion, self.formant_hz)
    }
}

/// A whole `tracks.csv`.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct TrackTable {
    /// The rows, in the order of the file.
    pub rows: Vec<TrackRow>,
}

impl TrackTable {
    /// Reads the table back.
    ///
    /// # Errors
    /// [`TableError`], with the line.
    pub fn parse(bytes: &[u8]) -> Result<Self, TableError> {
        let records = Records::parse(bytes, "token,recording,proportion,time_s,…")?;
        let columns: Vec<usize> = TRACK
            .iter()
            .map(|column| records.required(&column.name))
            .collect::<Result<_, _>>()?;
        let mut rows = Vec::with_capacity(records.rows.len());
        for at in 0..records.rows.len() {
            let cell = |nth: usize| records.cell(at, columns[nth]);
            let proportion = cell(2).required_number()?;
            if !(0.0..=1.0).contains(&proportion) {
                return Err(cell(2).wrong("a proportion between 0 and 1"));
            }
            rows.push(TrackRow {
                token: cell(0).text()?,
                recording: cell(1).optional_text().unwrap_or_default(),
                proportion,
                time_s: cell(3).required_number()?,
                f0_hz: cell(4).positive()?,
                formant_hz: [
                    cell(5).positive()?,
                    cell(6).positive()?,
                    cell(7).positive()?,
                ],
                bandwidth_hz: [cell(8).number()?, cell(9).number()?, cell(10).number()?],
                sd_hz: [cell(11).number()?, cell(12).number()?, cell(13).number()?],
            });
        }
        Ok(Self { rows })
    }

    /// The rows of each token, in the order of the file.
    pub fn by_token(&self) -> BTreeMap<&str, Vec<&TrackRow>> {
        let mut by_token: BTreeMap<&str, Vec<&TrackRow>> = BTreeMap::new();
        for row in &self.rows {
            by_token.entry(&row.token).or_default().push(row);
        }
        by_token
    }

    /// The table as the bytes of its file.
    pub fn bytes(&self) -> Vec<u8> {
        let mut writer = TrackWriter::new();
        for row in &self.rows {
            writer.append(row);
        }
        writer.take()
    }
}

/// Writes `tracks.csv` row by row into memory that can be emptied between rows.
#[derive(Debug)]
pub struct TrackWriter {
    out: Vec<u8>,
}

impl TrackWriter {
    /// A table with its header and no row.
    pub fn new() -> Self {
        let mut out = Vec::new();
        append_record(&mut out, TRACK.iter().map(|column| &*column.name));
        Self { out }
    }

    /// Adds a row.
    pub fn append(&mut self, row: &TrackRow) {
        let mut cells = vec![
            guard(&row.token),
            guard(&row.recording),
            optional(Kind::Proportion, Some(row.proportion)),
            optional(Kind::Seconds, Some(row.time_s)),
            optional(Kind::Hertz, row.f0_hz),
        ];
        let hertz = row
            .formant_hz
            .iter()
            .chain(&row.bandwidth_hz)
            .chain(&row.sd_hz);
        cells.extend(hertz.map(|&value| optional(Kind::Hertz, value)));
        append_record(&mut self.out, cells.iter().map(String::as_str));
    }

    /// Gives what was written since the last call.
    pub fn take(&mut self) -> Vec<u8> {
        std::mem::take(&mut self.out)
    }
}

impl Default for TrackWriter {
    fn default() -> Self {
        Self::new()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_table_reads_back_to_the_same_rows() {
        let row = |proportion: f64| TrackRow {
            token: "-a#1".to_owned(),
            recording: "a.wav".to_owned(),
            proportion,
            time_s: 1.25,
            f0_hz: None,
            formant_hz: [Some(500.5), Some(1500.0), None],
            bandwidth_hz: [Some(80.0), None, None],
            sd_hz: [Some(10.0), Some(20.1), None],
        };
        let table = TrackTable {
            rows: vec![row(0.2), row(0.5)],
        };
        let bytes = table.bytes();
        assert_eq!(TrackTable::parse(&bytes), Ok(table.clone()));
        let text = String::from_utf8(bytes).expect("UTF-8");
        assert_eq!(
            text.lines().nth(1),
            Some("'-a#1,a.wav,0.20,1.250000,,500.5,1500.0,,80.0,,,10.0,20.1,")
        );
    }

    #[test]
    fn a_proportion_above_one_is_refused() {
        let header = TrackTable::default().bytes();
        let text = [header, b"t,r,1.5,0,,,,,,,,,,\n".to_vec()].concat();
        assert!(matches!(
            TrackTable::parse(&text),
            Err(TableError::Cell { line: 2, .. })
        ));
    }
}
