//! `run.json`: enough to make the run again and get the same bytes.
//!
//! No clock, no path from outside the survey's folder, no number of threads: the same input gives
//! the same record.

use std::collections::BTreeMap;

use serde_json::{Value, json};

use super::finding::{Finding, count_findings};
use super::settings::{LabelUse, Settings, SpeakerFrom};
use super::{Survey, SurveyCounts};
use crate::report::Nature;

/// What later stages add to the record.
#[derive(Debug, Clone, PartialEq, Default)]
pub(super) struct Stages {
    /// Settings of the stages that were run, by name of the stage.
    pub(super) settings: BTreeMap<&'static str, Value>,
}

/// The record as the bytes of its file.
pub(super) fn record(
    survey: &Survey,
    stages: &Stages,
    counts: &SurveyCounts,
    hashes: &BTreeMap<String, String>,
    findings: &[Finding],
) -> Vec<u8> {
    let inputs: Vec<Value> = hashes
        .iter()
        .map(|(file, sha256)| json!({ "file": file, "sha256": sha256 }))
        .collect();
    let kinds: BTreeMap<&str, usize> = count_findings(findings)
        .into_iter()
        .map(|(kind, count)| (kind.name(), count))
        .collect();
    let listed: Vec<Value> = findings
        .iter()
        .map(|finding| {
            json!({
                "kind": finding.kind.name(),
                "place": finding.place,
                "found": finding.text,
                "hint": finding.hint,
            })
        })
        .collect();
    let labels = survey.plan.label_counts;
    let mut settings = settings_value(survey);
    for (stage, value) in &stages.settings {
        settings[*stage] = value.clone();
    }
    let record = json!({
        "program": { "name": "isophone", "version": env!("CARGO_PKG_VERSION") },
        "settings": settings,
        "inputs": inputs,
        "counts": {
            "speakers": survey.plan.speakers.len(),
            "recordings": counts.recordings,
            "labels": {
                "usable": labels.usable,
                "vowels": labels.vowels,
                "passed over": labels.passed_over,
                "unknown": labels.unknown,
            },
            "tokens": counts.tokens,
            "measured": counts.measured,
            "unmeasured": counts.unmeasured,
            "tokens with doubts": counts.doubted,
            "doubts": counts.doubts,
            "identified": counts.identified.map(|agreement| json!({
                "answered": agreement.answered,
                "with a label the model knows": agreement.comparable,
                "as labelled": agreement.agreeing,
            })),
        },
        "findings": { "counts": kinds, "list": listed },
    });
    format!("{record:#}\n").into_bytes()
}

fn settings_value(survey: &Survey) -> Value {
    let Settings {
        recordings_folder,
        labels_file,
        speakers_file,
        label_columns,
        speaker_column,
        vowels,
        ..
    } = &survey.settings;
    json!({
        "recordings": { "folder": recordings_folder },
        "labels": {
            "file": labels_file,
            "notation": survey.plan.notation.name(),
            "notation chosen by": if survey.settings.notation.is_some() {
                "the survey"
            } else {
                "the program: it knows most of the labels"
            },
            "vowels": match vowels {
                Some(labels) => json!(labels),
                None => json!("every vowel of the notation"),
            },
            "use": match survey.settings.label_use {
                LabelUse::Shown => "group the tokens of a speaker",
                LabelUse::Hidden => "hidden from the measuring",
            },
            "speaker from": match survey.settings.speaker_from {
                SpeakerFrom::Column => "column",
                SpeakerFrom::Recording => "recording",
            },
            "columns": {
                "recording": label_columns.recording,
                "start_s": label_columns.start_s,
                "end_s": label_columns.end_s,
                "label": label_columns.label,
                "word": label_columns.word,
                "speaker": label_columns.speaker,
                "channel": label_columns.channel,
            },
        },
        "speakers": {
            "file": speakers_file,
            "column": speaker_column,
            "group": survey.group,
            "group chosen by": if survey.settings.group.is_some() {
                "the survey"
            } else {
                "the program: the first column that puts at least two speakers on average into \
                 each of at least two groups"
            },
        },
        "report": {
            "title": survey.settings.title,
            "invented": survey.settings.nature == Nature::Invented,
        },
    })
}
