//! What a run does with measured tokens: the same steps the verbs take on a table.

use std::collections::BTreeMap;

use serde_json::{Value, json};

use super::finding::{Finding, FindingKind};
use super::measure::hash;
use super::settings::Settings;
use super::{Agreement, RunError};
use crate::files;
use crate::identify::{self, Model, identify_with};
use crate::normalize::{Method, Normalization, advise};
use crate::tables::{IdentifiedCells, NormalizedCells, TokenTable};
use crate::tokens::Observation;
use crate::vowel::Vowel;

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

/// The models of a run, best first: the one asked for, or those the program brings.
pub(super) fn read_models(settings: &Settings) -> Result<Vec<Model>, RunError> {
    let Some(path) = &settings.model else {
        return identify::shipped().map_err(RunError::ShippedModel);
    };
    let bytes = files::read(path)?;
    let model =
        Model::parse(&String::from_utf8_lossy(&bytes)).map_err(|error| RunError::Model {
            path: path.clone(),
            error,
        })?;
    Ok(vec![model])
}

/// Says which vowel each token sounds like; gives the settings for the record, and how the answers
/// agree with the labels.
pub(super) fn identify(
    measured: &mut Measured<'_>,
    models: &[Model],
    settings: &Settings,
    findings: &mut Vec<Finding>,
) -> (Value, Agreement) {
    let known = measured.known();
    let mut agreement = Agreement::default();
    let mut answers = identify_with(models, &known).into_iter();
    measured.table.groups.identified = true;
    let mut declined: BTreeMap<String, usize> = BTreeMap::new();
    for (row, observation) in measured.table.rows.iter_mut().zip(measured.observations) {
        row.identified = observation
            .as_ref()
            .and_then(|_| answers.next())
            .map(|answer| {
                if let Err(reason) = &answer.ranked {
                    *declined.entry(reason.to_string()).or_default() += 1;
                }
                let cells = IdentifiedCells::of(&answer);
                agreement.count(row.vowel.as_ref(), &cells, models);
                cells
            });
    }
    for (reason, count) in declined {
        findings.push(Finding::new(
            FindingKind::NotIdentified,
            settings.labels_file.clone(),
            format!("{count} measured vowels were not identified: {reason}"),
            "`isophone train` makes a model for what a survey has",
        ));
    }
    note_unknown_vowels(models, &known, settings, findings);
    let described: Vec<Value> = models
        .iter()
        .map(|model| json!({ "model": model.name, "sha256": hash(model.to_text().as_bytes()) }))
        .collect();
    let settings = json!({
        "model": models.iter().map(|model| model.name.as_str()).collect::<Vec<_>>().join(", then "),
        "models": described,
        "chosen by": match settings.model {
            Some(_) => "the survey",
            None => "the program: it brings them; each token gets the first that has an answer",
        },
    });
    (settings, agreement)
}

impl Agreement {
    fn count(&mut self, label: Option<&Vowel>, cells: &IdentifiedCells, models: &[Model]) {
        let Some(answer) = &cells.identified else {
            return;
        };
        self.answered += 1;
        let answering = models.iter().find(|model| model.name == cells.model);
        if let Some(label) = label
            && answering.is_some_and(|model| model.vowels.contains(label))
        {
            self.comparable += 1;
            self.agreeing += usize::from(answer == label);
        }
    }
}

fn note_unknown_vowels(
    models: &[Model],
    known: &[Observation],
    settings: &Settings,
    findings: &mut Vec<Finding>,
) {
    let Some((first, others)) = models.split_first() else {
        return;
    };
    for (vowel, count) in first.unknown_labels(known) {
        if !others.iter().any(|model| model.vowels.contains(&vowel)) {
            findings.push(Finding::new(
                FindingKind::VowelInNoModel,
                settings.labels_file.clone(),
                format!(
                    "no model knows the vowel `{vowel}` ({count} measured); each of them was \
                     taken for the vowel the model knows that is most like it"
                ),
                "`isophone train` makes a model for what a survey has",
            ));
        }
    }
}
