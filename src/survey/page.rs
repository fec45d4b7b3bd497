//! The page of a run: what the record says of it, and the findings.

use std::collections::BTreeMap;

use serde_json::Value;

use super::Survey;
use super::pictures::{Drawn, draw};
use crate::report::{Frame, Nature, Picture, ReportError, Subject, render};
use crate::tables::{TokenTable, TrackRow, TrackTable};

/// The bytes of `report.html`.
///
/// # Errors
/// [`ReportError`], a defect of the program.
pub fn page(subject: &Subject, record: &Value) -> Result<String, ReportError> {
    render(subject, &frame(subject, record))
}

/// Pictures of the doubtful tokens of a run, from the survey it was a run of.
pub fn pictures_of(
    survey: &Survey,
    table: &TokenTable,
    tracks: &TrackTable,
) -> BTreeMap<String, Picture> {
    let tracks = tracks.by_token();
    let mut drawn = Drawn::default();
    for row in &table.rows {
        let track = tracks.get(row.token.as_str()).into_iter().flatten();
        let track: Vec<TrackRow> = track.map(|t| (*t).clone()).collect();
        drawn.consider(row, &track);
    }
    draw(survey, &drawn)
}

/// The speaker column a recorded run was grouped by.
pub fn recorded_group(record: &Value) -> Option<&str> {
    record.pointer("/settings/speakers/group")?.as_str()
}

fn frame(subject: &Subject, record: &Value) -> Frame {
    let settings = |path: &str| record.pointer(&format!("/settings{path}"));
    let title = settings("/report/title")
        .and_then(Value::as_str)
        .map_or_else(
            || {
                format!(
                    "The vowels of {} speakers",
                    subject.findings.tally.speakers.len()
                )
            },
            str::to_owned,
        );
    let invented = settings("/report/invented").and_then(Value::as_bool) == Some(true);
    let mut provenance = Vec::new();
    let mut tell = |name: &str, value: Option<String>| {
        if let Some(value) = value.filter(|v| !v.is_empty()) {
            provenance.push((name.to_owned(), value));
        }
    };
    let words = |path: &str| settings(path).and_then(Value::as_str).map(str::to_owned);
    tell("labels read as", words("/labels/notation"));
    tell("labels were used to", words("/labels/use"));
    tell("vowels taken", words("/labels/vowels"));
    tell("grouping chosen by", words("/speakers/group chosen by"));
    tell("method chosen by", words("/normalize/chosen by"));
    tell("model", words("/identify/model"));
    let inputs = record.get("inputs").and_then(Value::as_array).map(Vec::len);
    tell(
        "inputs",
        inputs.map(|n| format!("{n} files, the SHA-256 of each in run.json")),
    );
    let counts = record.pointer("/counts/recordings").and_then(Value::as_u64);
    tell("recordings read", counts.map(|n| n.to_string()));
    let findings = record
        .pointer("/findings/counts")
        .and_then(Value::as_object);
    tell(
        "left out or odd",
        findings.map(|kinds| {
            let said: Vec<String> = kinds
                .iter()
                .map(|(kind, n)| format!("{n} {kind}"))
                .collect();
            if said.is_empty() {
                "nothing".to_owned()
            } else {
                said.join(", ")
            }
        }),
    );
    Frame {
        title,
        nature: if invented {
            Nature::Invented
        } else {
            Nature::Recorded
        },
        provenance,
    }
}
