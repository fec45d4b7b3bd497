//! `isophone train`.

use super::frame::{Failure, Outcome, Voice};

/// Trains a model on a table of labelled vowels and tests it on speakers it has not seen.
#[derive(Debug, clap::Args)]
pub(super) struct TrainArguments {}

/// Runs the verb.
pub(super) fn execute(_arguments: &TrainArguments, _voice: &Voice) -> Result<Outcome, Failure> {
    Err(Failure::new("`train` is not built yet"))
}
