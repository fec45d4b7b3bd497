//! `isophone run`.

use std::path::PathBuf;

use super::frame::{Failure, Outcome, Voice};
use super::survey::SurveyArguments;
use crate::survey::{Goal, Overrides};

/// Takes a survey from its recordings to a page to read: measures, normalizes, identifies, reports.
#[derive(Debug, clap::Args)]
pub(super) struct RunArguments {
    #[command(flatten)]
    survey: SurveyArguments,

    /// Speaker column whose values are compared.
    #[arg(long, value_name = "COLUMN")]
    group: Option<String>,

    /// Normalization to use instead of the program's choice.
    #[arg(long, value_name = "METHOD", help_heading = "Advanced")]
    method: Option<String>,

    /// Model to identify with instead of the shipped one.
    #[arg(long, value_name = "FILE", help_heading = "Advanced")]
    model: Option<PathBuf>,
}

/// Runs the verb.
pub(super) fn execute(arguments: &RunArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let overrides = Overrides {
        group: arguments.group.clone(),
        method: arguments.method.clone(),
        model: arguments.model.clone(),
        ..arguments.survey.overrides()
    };
    arguments.survey.run(&overrides, Goal::Report, voice)
}
