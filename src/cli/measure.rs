//! `isophone measure`.

use super::frame::{Failure, Outcome, Voice};
use super::survey::SurveyArguments;
use crate::survey::Goal;

/// Measures the vowels of a survey: `tokens.csv`, `tracks.csv` and `run.json`.
#[derive(Debug, clap::Args)]
pub(super) struct MeasureArguments {
    #[command(flatten)]
    survey: SurveyArguments,
}

/// Runs the verb.
pub(super) fn execute(arguments: &MeasureArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let overrides = arguments.survey.overrides();
    arguments.survey.run(&overrides, Goal::Measured, voice)
}
