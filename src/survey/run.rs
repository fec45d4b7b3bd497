//! From an opened survey to its tables.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};

use thiserror::Error;

use super::finding::Finding;
use super::page::page;
use super::pictures::{Drawn, draw};
use super::record::{Stages, record};
use super::stages::{self, Measured};
use super::{MeasuredSpeaker, Survey};
use crate::compare::Resampling;
use crate::files::{self, FileError, Replacement};
use crate::identify::ModelError;
use crate::report::{ReportError, Subject};
use crate::tables::{
    ColumnGroups, TokenRow, TokenTable, TrackRow, TrackWriter, describe, token_columns,
    track_columns,
};
use crate::tokens::Observation;

/// How far a run goes.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Goal {
    /// To measured tokens.
    Measured,
    /// To normalized and identified tokens and the page.
    Report,
}

/// How far a run has come.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Progress {
    /// Speakers done.
    pub speakers: usize,
    /// Speakers to be done.
    pub of_speakers: usize,
    /// Tokens done.
    pub tokens: usize,
}

/// Counts over the tokens of a run.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct SurveyCounts {
    /// Recordings that were read.
    pub recordings: usize,
    /// Tokens, measured or not.
    pub tokens: usize,
    /// Measured tokens.
    pub measured: usize,
    /// Unmeasured tokens by reason.
    pub unmeasured: BTreeMap<String, usize>,
    /// Measured tokens with a doubt.
    pub doubted: usize,
    /// Doubts by their text.
    pub doubts: BTreeMap<String, usize>,
    /// What came of identifying, where that was done.
    pub identified: Option<Agreement>,
}

/// How identified vowels agree with the labels.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Agreement {
    /// Tokens a model had an answer for.
    pub answered: usize,
    /// Of these, tokens whose label names a vowel the answering model knows.
    pub comparable: usize,
    /// Of these, tokens whose answer is the label's vowel.
    pub agreeing: usize,
}

/// What came of a run.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct RunSummary {
    /// Counts.
    pub counts: SurveyCounts,
    /// What was left out or odd.
    pub findings: Vec<Finding>,
    /// The files written, the one to look at first at the front.
    pub written: Vec<PathBuf>,
}

/// Why a run could not be brought to its end.
#[derive(Debug, Error)]
pub enum RunError {
    /// The disk refused.
    #[error(transparent)]
    File(#[from] FileError),
    /// The model asked for is none.
    #[error("`{}`: {error}", path.display())]
    Model {
        /// Where.
        path: PathBuf,
        /// What is wrong with it.
        error: ModelError,
    },
    /// A model the program brings is damaged.
    #[error("a model of the program itself: {0}")]
    ShippedModel(ModelError),
    /// The record just written cannot be read back.
    #[error("the record of the run cannot be read back: {0}")]
    Record(serde_json::Error),
    /// The page could not be made.
    #[error(transparent)]
    Page(#[from] ReportError),
}

impl RunError {
    /// What a person can do about it.
    pub fn hint(&self) -> String {
        match self {
            Self::File(error) => error.hint().to_owned(),
            Self::Model { error, .. } | Self::ShippedModel(error) => error.hint().to_owned(),
            Self::Record(_) | Self::Page(_) => {
                "this is a defect of the program; the tables are complete".to_owned()
            }
        }
    }
}

/// Measures a survey and writes its tables into `out`, each replaced whole.
///
/// # Errors
/// [`RunError`] where the output cannot be written.
pub fn run(
    survey: &Survey,
    out: &Path,
    goal: Goal,
    mut progress: impl FnMut(Progress),
) -> Result<RunSummary, RunError> {
    let models = match goal {
        Goal::Measured => Vec::new(),
        Goal::Report => stages::read_models(&survey.settings)?,
    };
    files::create_folder(out)?;
    // Begun before any work, so that a place that cannot be written is told at once.
    let tokens_path = out.join("tokens.csv");
    let mut tokens_file = Replacement::begin(&tokens_path)?;
    let mut tracks_file = Replacement::begin(&out.join("tracks.csv"))?;

    let mut gathered = Gathered::new(survey);
    let mut tracks = TrackWriter::new();
    survey.measure(|speaker| -> Result<(), FileError> {
        gathered.add(speaker, &mut tracks);
        progress(Progress {
            speakers: gathered.speakers,
            of_speakers: survey.plan.speakers.len(),
            tokens: gathered.table.rows.len(),
        });
        tracks_file.append(&tracks.take())
    })?;
    let mut record_of = Stages::default();
    if goal == Goal::Report {
        let mut measured = Measured {
            table: &mut gathered.table,
            observations: &gathered.observations,
        };
        let settings = &survey.settings;
        let normalized = stages::normalize(&mut measured, settings, &mut gathered.findings);
        record_of.settings.insert("normalize", normalized);
        let (identified, agreement) =
            stages::identify(&mut measured, &models, settings, &mut gathered.findings);
        record_of.settings.insert("identify", identified);
        gathered.counts.identified = Some(agreement);
    }

    tokens_file.append(&gathered.table.bytes())?;
    let token_columns = token_columns(&gathered.table.speaker_columns, gathered.table.groups);
    let descriptions = [
        (
            "tokens.csv-metadata.json",
            describe("tokens.csv", "Vowel tokens", &token_columns, &["token"]),
        ),
        (
            "tracks.csv-metadata.json",
            describe(
                "tracks.csv",
                "Formant tracks of the vowel tokens",
                &track_columns(),
                &["token", "proportion"],
            ),
        ),
    ];
    gathered.findings.sort();
    let record = record(
        survey,
        &record_of,
        &gathered.counts,
        &gathered.hashes,
        &gathered.findings,
    );
    tokens_file.finish()?;
    tracks_file.finish()?;
    let mut written = vec![tokens_path, out.join("tracks.csv")];
    for (name, bytes) in descriptions {
        files::write(&out.join(name), &bytes)?;
    }
    files::write(&out.join("run.json"), &record)?;
    written.push(out.join("run.json"));
    if goal == Goal::Report {
        let record = serde_json::from_slice(&record).map_err(RunError::Record)?;
        let observations: Vec<Observation> = gathered.observations.into_iter().flatten().collect();
        let group = survey.group.as_deref();
        let mut subject = Subject::of(gathered.table, &observations, group, Resampling::default());
        subject.pictures = draw(survey, &gathered.drawn);
        let path = out.join("report.html");
        files::write(&path, page(&subject, &record)?.as_bytes())?;
        written.insert(0, path);
    }
    Ok(RunSummary {
        counts: gathered.counts,
        findings: gathered.findings,
        written,
    })
}

/// What is kept of the speakers as they come.
struct Gathered {
    speakers: usize,
    table: TokenTable,
    /// Of each row, in order.
    observations: Vec<Option<Observation>>,
    counts: SurveyCounts,
    findings: Vec<Finding>,
    hashes: BTreeMap<String, String>,
    recordings: BTreeSet<String>,
    drawn: Drawn,
}

impl Gathered {
    fn new(survey: &Survey) -> Self {
        Self {
            speakers: 0,
            table: TokenTable {
                speaker_columns: survey.speaker_columns.clone(),
                groups: ColumnGroups::default(),
                rows: Vec::new(),
            },
            observations: Vec::new(),
            counts: SurveyCounts::default(),
            findings: survey.findings.clone(),
            hashes: survey.hashes.clone(),
            recordings: BTreeSet::new(),
            drawn: Drawn::default(),
        }
    }

    fn add(&mut self, speaker: MeasuredSpeaker, tracks: &mut TrackWriter) {
        self.speakers += 1;
        self.findings.extend(speaker.findings);
        self.recordings.extend(speaker.hashes.keys().cloned());
        self.counts.recordings = self.recordings.len();
        self.hashes.extend(speaker.hashes);
        for token in &speaker.tokens {
            let row = TokenRow::of(token, speaker.given.clone());
            let track_rows = TrackRow::of(token);
            track_rows.iter().for_each(|row| tracks.append(row));
            let points = track_rows.iter().map(TrackRow::point).collect();
            // From the row and not from the token: what later stages see is what the table holds,
            // so that they give the same when they are run on the table by themselves.
            self.observations.push(row.observation(points));
            self.drawn.consider(&row, &track_rows);
            self.count(&row);
            self.table.rows.push(row);
        }
    }

    fn count(&mut self, row: &TokenRow) {
        self.counts.tokens += 1;
        match &row.reading {
            Ok(reading) => {
                self.counts.measured += 1;
                self.counts.doubted += usize::from(!reading.doubts.is_empty());
                for doubt in &reading.doubts {
                    *self.counts.doubts.entry(doubt.clone()).or_default() += 1;
                }
            }
            Err(reason) => *self.counts.unmeasured.entry(reason.clone()).or_default() += 1,
        }
    }
}
