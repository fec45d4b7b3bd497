//! `survey.toml`: what a survey says of itself where the convention does not fit.
//!
//! Typed twice: as asked ([`Asked`], straight from the file, nothing unknown accepted), and as
//! checked ([`Settings`], every value there and allowed).

use std::collections::{BTreeMap, BTreeSet};
use std::path::PathBuf;

use serde::Deserialize;
use thiserror::Error;

use super::Overrides;
use crate::normalize::Method;
use crate::report::Nature;
use crate::segments::LabelColumns;
use crate::vowel::{Notation, OwnTable, OwnTableError};

/// What `survey.toml` may say. Everything may be left out.
#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct Asked {
    pub(super) recordings: AskedRecordings,
    pub(super) labels: AskedLabels,
    pub(super) speakers: AskedSpeakers,
    pub(super) normalize: AskedNormalize,
    pub(super) identify: AskedIdentify,
    pub(super) report: AskedReport,
}

#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct AskedReport {
    title: Option<String>,
    invented: Option<bool>,
}

#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct AskedRecordings {
    folder: Option<String>,
}

#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct AskedLabels {
    file: Option<String>,
    pub(super) notation: Option<String>,
    /// The survey's own labels, each with its IPA vowel or nothing.
    own: Option<BTreeMap<String, String>>,
    vowels: Option<Vec<String>>,
    pub(super) hidden: Option<bool>,
    speaker_from: Option<AskedSpeakerFrom>,
    columns: AskedColumns,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "kebab-case")]
enum AskedSpeakerFrom {
    Column,
    Recording,
}

#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct AskedColumns {
    recording: Option<String>,
    start_s: Option<String>,
    end_s: Option<String>,
    label: Option<String>,
    word: Option<String>,
    speaker: Option<String>,
    channel: Option<String>,
}

#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct AskedSpeakers {
    file: Option<String>,
    column: Option<String>,
    pub(super) group: Option<String>,
}

#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct AskedNormalize {
    pub(super) method: Option<String>,
}

#[derive(Debug, Clone, PartialEq, Eq, Default, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub(super) struct AskedIdentify {
    pub(super) model: Option<String>,
}

/// Where a label's speaker comes from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SpeakerFrom {
    /// The labels have a column for it.
    Column,
    /// Every recording is one speaker, named as the file without its ending.
    Recording,
}

/// Whether the measuring may know which vowel a label names.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LabelUse {
    /// Labels group the tokens of a speaker.
    Shown,
    /// Labels say where a vowel is and nothing else; the tables have none either.
    Hidden,
}

/// What a survey is run with.
#[derive(Debug, Clone, PartialEq)]
pub struct Settings {
    /// Folder of the recordings, inside the survey's.
    pub recordings_folder: String,
    /// File of the labels, inside the survey's folder.
    pub labels_file: String,
    /// File of the speakers, inside the survey's folder.
    pub speakers_file: String,
    /// Whether the file of the speakers was asked for, so that it must be there.
    pub speakers_asked: Asking,
    /// Names of the columns of the labels.
    pub label_columns: LabelColumns,
    /// Where a label's speaker comes from.
    pub speaker_from: SpeakerFrom,
    /// Name of the speaker column of the speakers' file.
    pub speaker_column: String,
    /// The notation of the labels; `None` to find it from the labels.
    pub notation: Option<Notation>,
    /// The labels that are to be measured; `None` for every vowel of the notation.
    pub vowels: Option<BTreeSet<String>>,
    /// Whether the measuring may know the labels.
    pub label_use: LabelUse,
    /// The speaker column to group by; `None` to choose one.
    pub group: Option<String>,
    /// The normalization; `None` for the program's choice.
    pub method: Option<Method>,
    /// Path of the model; `None` for the shipped one.
    pub model: Option<PathBuf>,
    /// Title of the page; `None` for one the program makes.
    pub title: Option<String>,
    /// Whether people were recorded.
    pub nature: Nature,
}

/// Whether something was asked for or is there by convention.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Asking {
    /// The survey file names it.
    Asked,
    /// It stands where the convention puts it.
    Convention,
}

/// What is wrong with `survey.toml`.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
pub enum SettingsError {
    /// Not TOML, or something in it that is not known.
    #[error("line {line}, column {column}: {reason}\n  | {text}")]
    Parse {
        /// Line, from 1.
        line: usize,
        /// Column, from 1.
        column: usize,
        /// What the reader says.
        reason: String,
        /// The line as it stands.
        text: String,
    },
    /// Bytes that are no text.
    #[error("bytes that are not UTF-8 text")]
    NotUtf8,
    /// A value that is not among the allowed ones.
    #[error("`{key}` is `{found}`; expected one of {expected}")]
    NotKnown {
        /// Name of the setting.
        key: &'static str,
        /// What it is.
        found: String,
        /// The names there are.
        expected: String,
    },
    /// A meaning of one of the survey's own labels that is no vowel.
    #[error("`own`: {0}")]
    Own(#[from] OwnTableError),
    /// A path that leaves the survey's folder.
    #[error("`{key}` is `{found}`; expected a name inside the survey's folder")]
    Outside {
        /// Name of the setting.
        key: &'static str,
        /// What it is.
        found: String,
    },
}

impl SettingsError {
    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self {
            Self::Parse { .. } => "the README lists what a survey file may say",
            Self::NotUtf8 => "save the file again as UTF-8",
            Self::NotKnown { .. } => "use one of the names, or leave the setting out",
            Self::Own(_) => {
                "write each of the survey's own labels with its IPA vowel, or with \"\""
            }
            Self::Outside { .. } => "move or link the data into the survey's folder",
        }
    }
}

impl Asked {
    /// Reads the text of a survey file.
    pub(super) fn parse(bytes: &[u8]) -> Result<Self, SettingsError> {
        let text = std::str::from_utf8(bytes).map_err(|_| SettingsError::NotUtf8)?;
        toml::from_str(text).map_err(|error| {
            let start = error.span().map_or(0, |span| span.start.min(text.len()));
            let before = &text[..text.floor_char_boundary(start)];
            let line_start = before.rfind('\n').map_or(0, |at| at + 1);
            SettingsError::Parse {
                line: before.matches('\n').count() + 1,
                column: before[line_start..].chars().count() + 1,
                reason: error.message().to_owned(),
                text: text[line_start..]
                    .lines()
                    .next()
                    .unwrap_or_default()
                    .to_owned(),
            }
        })
    }

    /// Puts what the caller says in the place of what the file says.
    pub(super) fn replace(&mut self, overrides: &Overrides) {
        fn put<T: Clone>(place: &mut Option<T>, value: &Option<T>) {
            if value.is_some() {
                place.clone_from(value);
            }
        }
        put(&mut self.labels.notation, &overrides.notation);
        put(&mut self.speakers.group, &overrides.group);
        put(&mut self.normalize.method, &overrides.method);
        let hidden = overrides.label_use.map(|labels| labels == LabelUse::Hidden);
        put(&mut self.labels.hidden, &hidden);
    }

    /// Checks every value and fills in the convention.
    pub(super) fn check(self) -> Result<Settings, SettingsError> {
        let own = LabelColumns::default();
        let columns = self.labels.columns;
        let notation =
            match self.labels.notation.as_deref() {
                None | Some("auto") => None,
                Some(name) => Some(Notation::named(name).ok_or_else(|| {
                    SettingsError::NotKnown {
                        key: "notation",
                        found: name.to_owned(),
                        expected: listed(
                            std::iter::once("auto")
                                .chain(Notation::NAMED.iter().map(|(name, _)| *name)),
                        ),
                    }
                })?),
            };
        let notation = match &self.labels.own {
            None => notation,
            Some(own) => {
                let pairs = own.iter().map(|(l, m)| (l.as_str(), m.as_str()));
                Some(Notation::Own(OwnTable::new(pairs, notation)?))
            }
        };
        let method = match self.normalize.method.as_deref() {
            None | Some("auto") => None,
            Some(name) => Some(
                name.parse::<Method>()
                    .map_err(|_| SettingsError::NotKnown {
                        key: "method",
                        found: name.to_owned(),
                        expected: "those `isophone normalize --help` lists".to_owned(),
                    })?,
            ),
        };
        let speakers_asked = match self.speakers.file {
            Some(_) => Asking::Asked,
            None => Asking::Convention,
        };
        Ok(Settings {
            recordings_folder: inside(
                "folder",
                self.recordings
                    .folder
                    .unwrap_or_else(|| "recordings".to_owned()),
            )?,
            labels_file: inside(
                "file",
                self.labels.file.unwrap_or_else(|| "labels.csv".to_owned()),
            )?,
            speakers_file: inside(
                "file",
                self.speakers
                    .file
                    .unwrap_or_else(|| "speakers.csv".to_owned()),
            )?,
            speakers_asked,
            label_columns: LabelColumns {
                recording: columns.recording.unwrap_or(own.recording),
                start_s: columns.start_s.unwrap_or(own.start_s),
                end_s: columns.end_s.unwrap_or(own.end_s),
                label: columns.label.unwrap_or(own.label),
                word: columns.word.unwrap_or(own.word),
                speaker: columns.speaker.unwrap_or(own.speaker),
                channel: columns.channel.unwrap_or(own.channel),
            },
            speaker_from: match self.labels.speaker_from {
                None | Some(AskedSpeakerFrom::Column) => SpeakerFrom::Column,
                Some(AskedSpeakerFrom::Recording) => SpeakerFrom::Recording,
            },
            speaker_column: self.speakers.column.unwrap_or_else(|| "speaker".to_owned()),
            notation,
            vowels: self
                .labels
                .vowels
                .map(|labels| labels.into_iter().collect()),
            label_use: match self.labels.hidden {
                Some(true) => LabelUse::Hidden,
                _ => LabelUse::Shown,
            },
            group: self.speakers.group,
            method,
            model: self.identify.model.map(PathBuf::from),
            title: self.report.title,
            nature: match self.report.invented {
                Some(true) => Nature::Invented,
                _ => Nature::Recorded,
            },
        })
    }
}

/// A path inside the survey's folder, so that a survey is whole when its folder is copied.
fn inside(key: &'static str, path: String) -> Result<String, SettingsError> {
    use std::path::{Component, Path};
    let leaves = Path::new(&path)
        .components()
        .any(|part| !matches!(part, Component::Normal(_) | Component::CurDir));
    if leaves || path.is_empty() {
        Err(SettingsError::Outside { key, found: path })
    } else {
        Ok(path)
    }
}

fn listed<'a>(names: impl Iterator<Item = &'a str>) -> String {
    names
        .map(|name| format!("`{name}`"))
        .collect::<Vec<_>>()
        .join(", ")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn settings(text: &str) -> Result<Settings, SettingsError> {
        Asked::parse(text.as_bytes())?.check()
    }

    #[test]
    fn an_empty_file_is_the_convention() {
        let settings = settings("").expect("settings");
        assert_eq!(settings.recordings_folder, "recordings");
        assert_eq!(settings.labels_file, "labels.csv");
        assert_eq!(settings.label_columns, LabelColumns::default());
        assert_eq!(settings.notation, None);
        assert_eq!(settings.label_use, LabelUse::Shown);
    }

    #[test]
    fn everything_can_be_said() {
        let settings = settings(
            "[recordings]\nfolder = \"sound\"\n\
             [labels]\nfile = \"l.tsv\"\nnotation = \"arpabet\"\nvowels = [\"iy\"]\nhidden = true\n\
             speaker_from = \"recording\"\n\
             [labels.columns]\nstart_s = \"from\"\nend_s = \"to\"\n\
             [speakers]\nfile = \"who.csv\"\ncolumn = \"id\"\ngroup = \"village\"\n\
             [normalize]\nmethod = \"auto\"\n\
             [identify]\nmodel = \"my.model\"\n",
        )
        .expect("settings");
        assert_eq!(settings.notation, Some(Notation::Arpabet));
        assert_eq!(settings.label_columns.start_s, "from");
        assert_eq!(settings.label_use, LabelUse::Hidden);
        assert_eq!(settings.speaker_from, SpeakerFrom::Recording);
        assert_eq!(settings.group.as_deref(), Some("village"));
    }

    #[test]
    fn the_survey_file_of_the_readme_is_one() {
        let readme = include_str!("../../README.md");
        let block: String = readme
            .lines()
            .skip_while(|line| *line != "    [recordings]")
            .take_while(|line| line.is_empty() || line.starts_with("    "))
            .map(|line| format!("{}\n", line.trim_start()))
            .collect();
        let settings = settings(&block).expect("settings");
        assert_eq!(settings.label_columns.label, "phone");
        assert_eq!(settings.group.as_deref(), Some("village"));
        assert_eq!(settings.title.as_deref(), Some("The vowels of my valley"));
    }

    #[test]
    fn own_labels_come_before_the_notation() {
        let settings = settings(
            "[labels]\nnotation = \"arpabet\"\n[labels.own]\nshort-a = \"æ\"\ntap = \"\"\n",
        )
        .expect("settings");
        let notation = settings.notation.expect("a notation");
        let read = |label: &str| notation.read(label);
        assert_eq!(read("short-a"), Notation::Ipa.read("æ"));
        assert_eq!(read("tap"), Notation::Ipa.read("t"));
        assert_eq!(read("iy"), Notation::Ipa.read("i"));
    }

    #[test]
    fn an_own_label_must_mean_a_vowel() {
        let error = settings("[labels.own]\nx = \"heed\"\n").expect_err("no vowel");
        assert!(error.to_string().contains("the label `x`"), "{error}");
    }

    #[test]
    fn what_is_not_known_has_a_place() {
        let error = settings("[labels]\n\nnotations = \"ipa\"\n").expect_err("unknown");
        let SettingsError::Parse {
            line,
            column,
            reason,
            text,
        } = error
        else {
            panic!("expected a place");
        };
        assert_eq!((line, column), (3, 1));
        assert!(reason.contains("notations"), "{reason}");
        assert_eq!(text, "notations = \"ipa\"");
        assert!(matches!(
            settings("[labels]\nnotation = \"runes\"\n"),
            Err(SettingsError::NotKnown {
                key: "notation",
                ..
            })
        ));
        assert!(matches!(
            settings("[recordings]\nfolder = \"../elsewhere\"\n"),
            Err(SettingsError::Outside { .. })
        ));
    }
}
