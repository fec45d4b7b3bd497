//! What is to be measured: the vowels of each speaker, recording by recording.

use std::collections::{BTreeMap, BTreeSet};
use std::path::PathBuf;

use super::finding::{Finding, FindingKind};
use super::folder::{Recordings, stem};
use super::settings::{LabelUse, Settings, SpeakerFrom};
use crate::segments::{LabelRow, Labels, name_tokens};
use crate::tables::SpeakerTable;
use crate::vowel::{LabelKind, Notation, Vowel};

/// The work of a run: one unit per speaker, sorted by name.
#[derive(Debug, Clone, PartialEq)]
pub struct Plan {
    /// One speaker after the other.
    pub speakers: Vec<SpeakerPlan>,
    /// The notation the labels are read in.
    pub notation: Notation,
    /// What the labels turned out to be.
    pub label_counts: LabelCounts,
}

/// What the labels of a survey turned out to be.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct LabelCounts {
    /// Lines that could be used.
    pub usable: usize,
    /// Of these, vowels to be measured.
    pub vowels: usize,
    /// Of these, what the notation knows and is no vowel, or a vowel that was not asked for.
    pub passed_over: usize,
    /// Of these, what the notation does not know.
    pub unknown: usize,
}

/// The vowels of one speaker.
#[derive(Debug, Clone, PartialEq)]
pub struct SpeakerPlan {
    /// Who.
    pub speaker: String,
    /// The speaker's values in the speaker columns.
    pub given: Vec<String>,
    /// The recordings, sorted by name.
    pub recordings: Vec<RecordingPlan>,
}

/// The vowels of one speaker in one recording.
#[derive(Debug, Clone, PartialEq)]
pub struct RecordingPlan {
    /// The recording as the labels name it.
    pub name: String,
    /// Its file, as a name inside the folder of recordings; `None` where there is none.
    pub file_name: Option<String>,
    /// Where that file is.
    pub path: Option<PathBuf>,
    /// The vowels, by time.
    pub vowels: Vec<PlannedVowel>,
}

/// One vowel to be measured.
#[derive(Debug, Clone, PartialEq)]
pub struct PlannedVowel {
    /// Its name in the survey.
    pub token: String,
    /// The label's line.
    pub row: LabelRow,
    /// The vowel the label names, where it may be known.
    pub vowel: Option<Vowel>,
}

/// Plans a survey. What is left out or odd goes to `findings`.
pub(super) fn plan(
    settings: &Settings,
    labels: Labels,
    speakers: Option<&SpeakerTable>,
    recordings: &Recordings,
    findings: &mut Vec<Finding>,
) -> Plan {
    for problem in &labels.problems {
        findings.push(Finding::new(
            FindingKind::LabelLine,
            format!("{} line {}", settings.labels_file, problem.line),
            &problem.problem,
            problem.problem.hint(),
        ));
    }
    let notation = settings
        .notation
        .clone()
        .unwrap_or_else(|| Notation::guess(labels.rows.iter().map(|row| row.label.as_str())));
    let mut counts = LabelCounts {
        usable: labels.rows.len(),
        ..LabelCounts::default()
    };
    note_unlabelled_recordings(settings, &labels, recordings, findings);
    let (rows, vowels) = sort_out(settings, labels, &notation, &mut counts, findings);
    let names = name_tokens(&rows);

    let mut by_speaker: BTreeMap<String, BTreeMap<String, Vec<PlannedVowel>>> = BTreeMap::new();
    for ((mut row, vowel), token) in rows.into_iter().zip(vowels).zip(names) {
        let speaker = match settings.speaker_from {
            SpeakerFrom::Recording => stem(&row.recording).to_owned(),
            // The reader has made sure that every line names a speaker.
            SpeakerFrom::Column => row.speaker.clone().unwrap_or_default(),
        };
        let mut vowel = vowel;
        if settings.label_use == LabelUse::Hidden {
            vowel = None;
            row.label = String::new();
            row.word = None;
        }
        by_speaker
            .entry(speaker)
            .or_default()
            .entry(row.recording.clone())
            .or_default()
            .push(PlannedVowel { token, row, vowel });
    }
    note_missing(settings, &by_speaker, speakers, recordings, findings);
    let speakers = by_speaker
        .into_iter()
        .map(|(speaker, by_recording)| SpeakerPlan {
            given: speakers.map_or_else(Vec::new, |table| table.values(&speaker)),
            recordings: by_recording
                .into_iter()
                .map(|(name, mut vowels)| {
                    // By place in the recording: names of more digits come later.
                    vowels
                        .sort_by(|a, b| (a.token.len(), &a.token).cmp(&(b.token.len(), &b.token)));
                    let file_name = recordings.resolve(&name).map(str::to_owned);
                    RecordingPlan {
                        path: file_name.as_deref().map(|file| recordings.path(file)),
                        file_name,
                        name,
                        vowels,
                    }
                })
                .collect(),
            speaker,
        })
        .collect();
    Plan {
        speakers,
        notation,
        label_counts: counts,
    }
}

/// The labels that are to be measured, each with its vowel.
fn sort_out(
    settings: &Settings,
    labels: Labels,
    notation: &Notation,
    counts: &mut LabelCounts,
    findings: &mut Vec<Finding>,
) -> (Vec<LabelRow>, Vec<Option<Vowel>>) {
    let mut unknown: BTreeMap<String, (u64, usize)> = BTreeMap::new();
    let mut kept = (Vec::new(), Vec::new());
    for row in labels.rows {
        let kind = notation.read(&row.label);
        let asked = settings
            .vowels
            .as_ref()
            .map(|asked| asked.contains(&row.label));
        let vowel = match (asked, kind) {
            (Some(false), _) | (None, LabelKind::NotVowel) => {
                counts.passed_over += 1;
                continue;
            }
            (None, LabelKind::Unknown) => {
                counts.unknown += 1;
                unknown.entry(row.label).or_insert((row.line, 0)).1 += 1;
                continue;
            }
            (_, LabelKind::Vowel(vowel, _)) => Some(vowel),
            // Asked for by name: a vowel, though the notation cannot say which.
            (Some(true), _) => None,
        };
        counts.vowels += 1;
        kept.0.push(row);
        kept.1.push(vowel);
    }
    for (label, (line, count)) in unknown {
        findings.push(Finding::new(
            FindingKind::UnknownLabel,
            format!("{} line {line}", settings.labels_file),
            format!(
                "the label `{label}` ({count} of them, the first here) is not known in the \
                 notation `{}`; expected a vowel or another sound of it",
                notation.name()
            ),
            "state the `notation` of the labels in `survey.toml`, or list the labels that are \
             vowels under `vowels`",
        ));
    }
    kept
}

fn note_unlabelled_recordings(
    settings: &Settings,
    labels: &Labels,
    recordings: &Recordings,
    findings: &mut Vec<Finding>,
) {
    let named: BTreeSet<&str> = labels
        .rows
        .iter()
        .filter_map(|row| recordings.resolve(&row.recording))
        .collect();
    for name in recordings.names() {
        let sound = name.to_ascii_lowercase().ends_with(".wav");
        if sound && !named.contains(name) {
            findings.push(Finding::new(
                FindingKind::RecordingUnlabelled,
                format!("{}/{name}", settings.recordings_folder),
                format!(
                    "no label in `{}` is in this recording",
                    settings.labels_file
                ),
                "nothing to do if that is meant",
            ));
        }
    }
}

fn note_missing(
    settings: &Settings,
    by_speaker: &BTreeMap<String, BTreeMap<String, Vec<PlannedVowel>>>,
    speakers: Option<&SpeakerTable>,
    recordings: &Recordings,
    findings: &mut Vec<Finding>,
) {
    if let Some(table) = speakers {
        for speaker in by_speaker.keys() {
            if !table.speakers.contains_key(speaker) {
                findings.push(Finding::new(
                    FindingKind::SpeakerInNoTable,
                    settings.speakers_file.clone(),
                    format!(
                        "no row for the speaker `{speaker}` of the labels; the speaker is \
                         measured, with empty speaker columns"
                    ),
                    "add a row for the speaker, or mend the spelling in one of the two files",
                ));
            }
        }
    }
    let mut missing: BTreeMap<&str, usize> = BTreeMap::new();
    for by_recording in by_speaker.values() {
        for (name, vowels) in by_recording {
            if recordings.resolve(name).is_none() {
                *missing.entry(name).or_default() += vowels.len();
            }
        }
    }
    for (name, count) in missing {
        findings.push(Finding::new(
            FindingKind::RecordingMissing,
            format!("{}/{name}", settings.recordings_folder),
            format!(
                "no such recording; expected one, as `{}` has {count} vowels in it",
                settings.labels_file
            ),
            "copy the recording into the folder, or mend its name in the labels",
        ));
    }
}
