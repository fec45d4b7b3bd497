//! The page of a run: what the record says of it, and the findings.

use serde_json::Value;

use crate::report::{Frame, Nature, ReportError, Subject, render};

/// The bytes of `report.html`.
///
/// # Errors
/// [`ReportError`], a defect of the program.
pub fn page(subject: &Subject, record: &Value) -> Result<String, ReportError> {
    render(subject, &frame(subject, record))
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
