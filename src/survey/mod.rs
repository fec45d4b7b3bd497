//! The survey: what a folder holds, the plan, the run.
//!
//! [`Survey::open`] reads a folder and plans its work, one unit per speaker;
//! [`Survey::measure`] does the units on all threads and gives each speaker's tokens in order;
//! [`run()`] goes on from there to the tables and the page. What is wrong with a file, a line or a
//! speaker is a [`Finding`]; only what leaves nothing to do is a [`SurveyError`].

mod finding;
mod folder;
mod in_order;
mod measure;
mod page;
mod pictures;
mod plan;
mod record;
mod run;
mod settings;
mod stages;

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use thiserror::Error;

use crate::files::{self, FileError};
use crate::segments::{self, LabelError};
use crate::tables::{SpeakerTable, TableError};

pub use finding::{Finding, FindingKind, Weight, count_findings};
pub use measure::MeasuredSpeaker;
pub use page::{page, pictures_of, recorded_group};
pub use plan::{LabelCounts, Plan, PlannedVowel, RecordingPlan, SpeakerPlan};
pub use run::{Agreement, Goal, Progress, RunError, RunSummary, SurveyCounts, run};
pub use settings::{Asking, LabelUse, Settings, SettingsError, SpeakerFrom};

/// Name of the file a survey can say things of itself in.
const SURVEY_FILE: &str = "survey.toml";

/// Settings of the survey file that the caller replaces.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Overrides {
    /// Notation of the labels, by name.
    pub notation: Option<String>,
    /// Whether the measuring may know the labels.
    pub label_use: Option<LabelUse>,
    /// Speaker column to group by.
    pub group: Option<String>,
    /// Normalization, by name.
    pub method: Option<String>,
    /// Path of the model, from where the program was started.
    pub model: Option<PathBuf>,
}

/// Why there is nothing to do in a folder.
#[derive(Debug, Error)]
pub enum SurveyError {
    /// A file or folder could not be read.
    #[error(transparent)]
    File(#[from] FileError),
    /// The folder is not there, or is a file.
    #[error("`{}`: no such folder; expected the folder of a survey", path.display())]
    NoFolder {
        /// Where.
        path: PathBuf,
    },
    /// The folder lacks something every survey has.
    #[error("`{}`: no `{missing}` in it; found {found}", path.display())]
    Incomplete {
        /// Where.
        path: PathBuf,
        /// What is missing.
        missing: String,
        /// What is there.
        found: String,
    },
    /// The survey file is wrong.
    #[error("`{}`: {error}", path.display())]
    Settings {
        /// Where.
        path: PathBuf,
        /// What.
        error: SettingsError,
    },
    /// The labels are wrong as a whole.
    #[error("`{}`: {error}", path.display())]
    Labels {
        /// Where.
        path: PathBuf,
        /// What.
        error: LabelError,
    },
    /// The labels name no speaker.
    #[error("`{}`: line 1: no column `{column}`, so nobody knows who speaks", path.display())]
    NoSpeakers {
        /// Where.
        path: PathBuf,
        /// The column that was looked for.
        column: String,
    },
    /// The table of speakers is wrong as a whole.
    #[error("`{}`: {error}", path.display())]
    Speakers {
        /// Where.
        path: PathBuf,
        /// What.
        error: TableError,
    },
    /// The group column is none of the speakers'.
    #[error("no speaker column `{found}` to group by; expected one of {expected}")]
    NoGroup {
        /// The column asked for.
        found: String,
        /// The columns there are.
        expected: String,
    },
    /// No label is a vowel.
    #[error(
        "`{}`: none of {labels} labels is a vowel in the notation `{notation}`", path.display()
    )]
    NoVowels {
        /// Where.
        path: PathBuf,
        /// Usable labels.
        labels: usize,
        /// The notation.
        notation: &'static str,
    },
}

impl SurveyError {
    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self {
            Self::File(error) => error.hint(),
            Self::NoFolder { .. } => "is the path right?",
            Self::Incomplete { .. } => {
                "a survey is a folder with `recordings/`, `labels.csv` and `speakers.csv`; other \
                 names can be said in `survey.toml`"
            }
            Self::Settings { error, .. } => error.hint(),
            Self::Labels { error, .. } => error.hint(),
            Self::NoSpeakers { .. } => {
                "add the column to the labels, name it in `survey.toml` under `[labels.columns]`, \
                 or say `speaker_from = \"recording\"` under `[labels]` where every recording is \
                 one speaker"
            }
            Self::Speakers { error, .. } => error.hint(),
            Self::NoGroup { .. } => "use one of these columns, or leave the setting out",
            Self::NoVowels { .. } => {
                "state the `notation` of the labels in `survey.toml`, or list the labels that are \
                 vowels under `vowels`"
            }
        }
    }
}

/// A survey, opened and planned.
#[derive(Debug, Clone)]
pub struct Survey {
    /// What it is run with.
    pub settings: Settings,
    /// The work.
    pub plan: Plan,
    /// Names of the speaker columns.
    pub speaker_columns: Vec<String>,
    /// The speaker column to group by, where there is one to choose.
    pub group: Option<String>,
    /// What was left out or odd so far.
    pub findings: Vec<Finding>,
    /// SHA-256 of every file read so far, by its name inside the folder.
    pub hashes: BTreeMap<String, String>,
}

impl Survey {
    /// Opens the survey in a folder: by convention, by its survey file, and by what the caller
    /// overrides, the later the stronger.
    ///
    /// # Errors
    /// [`SurveyError`] where nothing could be measured.
    pub fn open(folder: &Path, overrides: &Overrides) -> Result<Self, SurveyError> {
        if !folder.is_dir() {
            return Err(SurveyError::NoFolder {
                path: folder.to_owned(),
            });
        }
        let mut hashes = BTreeMap::new();
        let settings = read_settings(folder, overrides, &mut hashes)?;
        let recordings_folder = folder.join(&settings.recordings_folder);
        let labels_path = folder.join(&settings.labels_file);
        if !recordings_folder.is_dir() {
            return Err(incomplete(
                folder,
                format!("{}/", settings.recordings_folder),
            ));
        }
        if !labels_path.exists() {
            return Err(incomplete(folder, settings.labels_file.clone()));
        }
        let recordings = folder::Recordings::find(&recordings_folder)?;
        let bytes = files::read(&labels_path)?;
        hashes.insert(settings.labels_file.clone(), measure::hash(&bytes));
        let labels =
            segments::parse_delimited(&bytes, &settings.label_columns).map_err(|error| {
                SurveyError::Labels {
                    path: labels_path.clone(),
                    error,
                }
            })?;
        if settings.speaker_from == SpeakerFrom::Column && !labels.names_speakers {
            return Err(SurveyError::NoSpeakers {
                path: labels_path,
                column: settings.label_columns.speaker.clone(),
            });
        }
        let mut findings = Vec::new();
        let speakers = read_speakers(folder, &settings, &mut findings, &mut hashes)?;
        let group = choose_group(&settings, speakers.as_ref())?;
        let plan = plan::plan(
            &settings,
            labels,
            speakers.as_ref(),
            &recordings,
            &mut findings,
        );
        if plan.speakers.is_empty() {
            return Err(SurveyError::NoVowels {
                path: labels_path,
                labels: plan.label_counts.usable,
                notation: plan.notation.name(),
            });
        }
        Ok(Self {
            settings,
            plan,
            speaker_columns: speakers.map_or_else(Vec::new, |table| table.columns),
            group,
            findings,
            hashes,
        })
    }

    /// Measures every speaker, on all threads of the pool, and gives each to `sink` in the order
    /// of the plan. Only the speakers in work, and those that wait for an earlier one, are in
    /// memory.
    ///
    /// # Errors
    /// The first error of `sink`.
    pub fn measure<E>(&self, sink: impl FnMut(MeasuredSpeaker) -> Result<(), E>) -> Result<(), E> {
        in_order::in_order(
            &self.plan.speakers,
            |speaker| measure::measure_speaker(&self.settings, speaker),
            sink,
        )
    }
}

fn read_settings(
    folder: &Path,
    overrides: &Overrides,
    hashes: &mut BTreeMap<String, String>,
) -> Result<Settings, SurveyError> {
    let path = folder.join(SURVEY_FILE);
    let wrong = |error| SurveyError::Settings {
        path: path.clone(),
        error,
    };
    let mut asked = if path.exists() {
        let bytes = files::read(&path)?;
        hashes.insert(SURVEY_FILE.to_owned(), measure::hash(&bytes));
        settings::Asked::parse(&bytes).map_err(wrong)?
    } else {
        settings::Asked::default()
    };
    asked.replace(overrides);
    let mut settings = asked.check().map_err(wrong)?;
    settings.model = match &overrides.model {
        Some(model) => Some(model.clone()),
        None => settings.model.map(|model| folder.join(model)),
    };
    Ok(settings)
}

fn read_speakers(
    folder: &Path,
    settings: &Settings,
    findings: &mut Vec<Finding>,
    hashes: &mut BTreeMap<String, String>,
) -> Result<Option<SpeakerTable>, SurveyError> {
    let name = &settings.speakers_file;
    let path = folder.join(name);
    if !path.exists() {
        if settings.speakers_asked == Asking::Asked {
            return Err(incomplete(folder, name.clone()));
        }
        findings.push(Finding::new(
            FindingKind::NoSpeakerTable,
            name.clone(),
            "no such file, so nothing is known of the speakers but their names",
            "add it, with a column `speaker` and any others, to compare groups of speakers",
        ));
        return Ok(None);
    }
    let bytes = files::read(&path)?;
    hashes.insert(name.clone(), measure::hash(&bytes));
    let table = SpeakerTable::parse(&bytes, &settings.speaker_column)
        .map_err(|error| SurveyError::Speakers { path, error })?;
    for (speaker, line) in &table.repeated {
        findings.push(Finding::new(
            FindingKind::SpeakerRepeated,
            format!("{name} line {line}"),
            format!("the speaker `{speaker}` stands there again; the first row is used"),
            "remove one of the two rows",
        ));
    }
    for column in &table.clashing {
        findings.push(Finding::new(
            FindingKind::SpeakerColumnClash,
            format!("{name} line 1"),
            format!("the token table has a column `{column}` of its own; this one is left out"),
            "rename the column",
        ));
    }
    Ok(Some(table))
}

fn choose_group(
    settings: &Settings,
    speakers: Option<&SpeakerTable>,
) -> Result<Option<String>, SurveyError> {
    let columns = speakers.map_or(&[][..], |table| &table.columns);
    match &settings.group {
        None => Ok(speakers
            .and_then(SpeakerTable::natural_group)
            .map(str::to_owned)),
        Some(asked) if columns.contains(asked) => Ok(Some(asked.clone())),
        Some(asked) => Err(SurveyError::NoGroup {
            found: asked.clone(),
            expected: if columns.is_empty() {
                "none: there is no table of speakers".to_owned()
            } else {
                let named: Vec<String> =
                    columns.iter().map(|column| format!("`{column}`")).collect();
                named.join(", ")
            },
        }),
    }
}

/// The error of a folder that lacks something, with what it has.
fn incomplete(folder: &Path, missing: String) -> SurveyError {
    match files::list_top(folder) {
        Err(error) => SurveyError::File(error),
        Ok(names) if names.is_empty() => SurveyError::Incomplete {
            path: folder.to_owned(),
            missing,
            found: "an empty folder".to_owned(),
        },
        Ok(names) => {
            let shown: Vec<String> = names
                .iter()
                .take(6)
                .map(|name| format!("`{name}`"))
                .collect();
            let more = if names.len() > shown.len() {
                ", …"
            } else {
                ""
            };
            SurveyError::Incomplete {
                path: folder.to_owned(),
                missing,
                found: format!("{}{more}", shown.join(", ")),
            }
        }
    }
}
