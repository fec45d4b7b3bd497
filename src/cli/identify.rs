//! `isophone identify`.

use std::collections::BTreeMap;
use std::path::PathBuf;

use super::frame::{Failure, Outcome, Voice};
use super::table::{ColumnArguments, add_tracks};
use crate::files;
use crate::identify::{Declined, Identification, Model, identify_with, shipped};
use crate::tables::IdentifiedCells;
use crate::tokens::Observation;

/// Says which vowels the rows of a table are, and how probably.
///
/// Gives the table back with identified, probability, second, second_probability and model added;
/// every other cell stays as it was. The size of speakers is taken out inside, as the model was
/// trained.
#[derive(Debug, clap::Args)]
pub(super) struct IdentifyArguments {
    /// Table with a row per vowel token.
    table: PathBuf,

    /// Tracks of the table, for models that follow the vowel.
    #[arg(long, value_name = "FILE")]
    tracks: Option<PathBuf>,

    /// A model written by `train`; the models for American English the program brings, otherwise.
    #[arg(long, value_name = "FILE")]
    model: Option<PathBuf>,

    /// Writes the table here instead of to stdout.
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,

    #[command(flatten)]
    columns: ColumnArguments,
}

/// Runs the verb.
pub(super) fn execute(arguments: &IdentifyArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let models = match &arguments.model {
        None => shipped().map_err(|error| Failure::new(&error).hint(error.hint()))?,
        Some(path) => {
            let bytes = files::read(path)?;
            let text = String::from_utf8_lossy(&bytes);
            let model = Model::parse(&text).map_err(|error| {
                Failure::new(format!("`{}`: {error}", path.display())).hint(error.hint())
            })?;
            vec![model]
        }
    };
    let mut table = arguments.columns.read(&arguments.table)?;
    if let Some(tracks) = &arguments.tracks {
        add_tracks(&mut table, tracks)?;
    }
    let observations: Vec<Observation> = table.observations.iter().flatten().cloned().collect();
    let answers = identify_with(&models, &observations);
    let outcome = report(&models, &observations, &answers, voice);
    let mut answers = answers.into_iter();
    let cells: Vec<Vec<String>> = table
        .observations
        .iter()
        .map(|observation| match observation {
            None => Vec::new(),
            Some(_) => answers
                .next()
                .map_or_else(Vec::new, |a| IdentifiedCells::of(&a).cells()),
        })
        .collect();
    let bytes = table.bytes_with(&IdentifiedCells::columns(), &cells);
    match &arguments.out {
        Some(path) => files::write(path, &bytes)?,
        None => voice.give(&bytes)?,
    }
    Ok(outcome)
}

/// Says what was declined and why, which labels no model knows, and how answers agree with labels.
fn report(
    models: &[Model],
    observations: &[Observation],
    answers: &[Identification],
    voice: &Voice,
) -> Outcome {
    let mut declined: BTreeMap<String, usize> = BTreeMap::new();
    let mut left_out = false;
    let mut answered: BTreeMap<&str, usize> = BTreeMap::new();
    let mut agreeing = 0;
    let mut compared = 0;
    for (observation, answer) in observations.iter().zip(answers) {
        match &answer.ranked {
            Err(reason) => {
                *declined.entry(reason.to_string()).or_insert(0) += 1;
                // That a token is like no vowel of the model is an answer.
                left_out |= *reason != Declined::UnlikeAny;
            }
            Ok(ranked) => {
                *answered.entry(&answer.model).or_insert(0) += 1;
                let known = |vowel| models.iter().any(|m| m.vowels.contains(vowel));
                if let Some(label) = observation.vowel.as_ref().filter(|v| known(v)) {
                    compared += 1;
                    agreeing += usize::from(ranked.first().is_some_and(|(v, _)| v == label));
                }
            }
        }
    }
    for (model, count) in answered {
        voice.say(format!("{model} answered {count} tokens"));
    }
    if compared > 0 {
        voice.say(format!(
            "{agreeing} of {compared} answers agree with the label ({:.1} %)",
            100.0 * f64::from(agreeing as u32) / f64::from(compared as u32)
        ));
    }
    let unknown = models.last().map(|m| m.unknown_labels(observations));
    for (vowel, count) in unknown.unwrap_or_default() {
        if !models.iter().any(|m| m.vowels.contains(&vowel)) {
            voice.warning(
                format!("no model knows the vowel `{vowel}` ({count} tokens labelled so)"),
                Some("train a model on the survey's own labelled tokens with `isophone train`"),
            );
        }
    }
    for (reason, count) in &declined {
        voice.warning(format!("{count} tokens not identified: {reason}"), None);
    }
    if left_out {
        Outcome::SomethingLeftOut
    } else {
        Outcome::AllDone
    }
}
