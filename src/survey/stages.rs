//! What a run does with measured tokens: the same steps the verbs take on a table.

use serde_json::{Value, json};

use super::finding::{Finding, FindingKind};
use super::settings::Settings;
use crate::normalize::{Method, Normalization, advise};
use crate::tables::{NormalizedCells, TokenTable};
use crate::tokens::Observation;

/// Rows of the token table with what later stages need of each; `None` where it is unmeasured.
pub(super) struct Measured<'a> {
    /// The table; the stages fill their columns.
    pub(super) table: &'a mut TokenTable,
    /// Of each row, in order.
    pub(super) observations: &'a [Option<Observation>],
}

impl Measured<'_> {
    fn known(&self) -> Vec<Observation> {
        self.observations.iter().flatten().cloned().collect()
    }
}

/// Takes the size of the speakers out; gives the settings for the record.
pub(super) fn normalize(
    measured: &mut Measured<'_>,
    settings: &Settings,
    findings: &mut Vec<Finding>,
) -> Value {
    let known = measured.known();
    let (method, chosen_by) = match &settings.method {
        Some(method) => (method.clone(), "the survey".to_owned()),
        None => {
            let advice = advise(&known);
            (advice.method, format!("the program: {}", advice.reason))
        }
    };
    let normalization = Normalization::fit(&method, &known);
    note_left_out(&normalization, settings, findings);
    measured.table.groups.normalized = true;
    for (row, observation) in measured.table.rows.iter_mut().zip(measured.observations) {
        row.normalized = observation
            .as_ref()
            .map(|observation| NormalizedCells::of(&normalization, observation));
    }
    describe_method(&method, &chosen_by)
}

fn describe_method(method: &Method, chosen_by: &str) -> Value {
    let account = method.account();
    json!({
        "method": method.to_string(),
        "chosen by": chosen_by,
        "formula": account.formula,
        "unit": account.unit,
    })
}

fn note_left_out(normalization: &Normalization, settings: &Settings, findings: &mut Vec<Finding>) {
    for (speaker, scale) in &normalization.scales {
        if let Err(lack) = scale {
            findings.push(Finding::new(
                FindingKind::SpeakerNotNormalized,
                settings.labels_file.clone(),
                format!(
                    "the speaker `{speaker}` could not be normalized by {}: {lack}",
                    normalization.method
                ),
                "label more vowels of the speaker, or use a method that needs less of a speaker",
            ));
        }
    }
    for (speaker, vowels) in &normalization.missing_vowels {
        let names: Vec<String> = vowels.iter().map(|vowel| format!("`{vowel}`")).collect();
        findings.push(Finding::new(
            FindingKind::SpeakerLacksVowels,
            settings.labels_file.clone(),
            format!(
                "the speaker `{speaker}` has no {}, which moves what {} takes out",
                names.join(", "),
                normalization.method
            ),
            "regression-log-mean is made for missing vowels",
        ));
    }
}
