//! One row of `tokens.csv`, and its columns.

use std::borrow::Cow;

use super::cell::{guard, optional, round_to};
use super::column::{Column, Kind};
use crate::identify::Identification;
use crate::normalize::Normalization;
use crate::tokens::{Observation, Token};
use crate::vowel::Vowel;

use Column as C;

pub(super) const BEFORE_SPEAKER_COLUMNS: [Column; 4] = [
    C::fixed(
        "token",
        Kind::Text,
        "Name of the token, unique in its survey.",
    ),
    C::fixed("recording", Kind::Text, "File name of the recording."),
    C::fixed("channel", Kind::Count, "Channel of the recording, from 1."),
    C::fixed("speaker", Kind::Text, "Who speaks."),
];

pub(super) const MEASURED: [Column; 21] = [
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

pub(super) const NORMALIZED: [Column; 4] = [
    C::fixed("f1_norm", Kind::Normalized, "First formant, normalized."),
    C::fixed("f2_norm", Kind::Normalized, "Second formant, normalized."),
    C::fixed("f3_norm", Kind::Normalized, "Third formant, normalized."),
    C::fixed(
        "norm_method",
        Kind::Text,
        "How the normalized values were made.",
    ),
];

pub(super) const IDENTIFIED: [Column; 5] = [
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
pub(super) fn is_own_column(name: &str) -> bool {
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

    /// The cells, in the order of [`token_columns`].
    pub(super) fn cells(&self, groups: ColumnGroups) -> Vec<String> {
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
    /// The cells of one observation; no method stands where nothing could be normalized.
    pub fn of(normalization: &Normalization, observation: &Observation) -> Self {
        let value = normalization.normalize(observation).value;
        let formant = value.map(|v| v.map(|v| round_to(Kind::Normalized, v)));
        Self {
            formant,
            method: if formant == [None; 3] {
                String::new()
            } else {
                normalization.method.to_string()
            },
        }
    }

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
    /// The cells of one answer; only the model's name where it declined.
    pub fn of(answer: &Identification) -> Self {
        let ranked = answer.ranked.as_deref().unwrap_or_default();
        let vowel = |nth: usize| ranked.get(nth).map(|(vowel, _)| vowel.clone());
        let probability = |nth: usize| {
            ranked
                .get(nth)
                .map(|(_, p)| round_to(Kind::Probability, *p))
        };
        Self {
            identified: vowel(0),
            probability: probability(0),
            second: vowel(1),
            second_probability: probability(1),
            model: answer.model.clone(),
        }
    }

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
