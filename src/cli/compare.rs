//! `isophone compare`.

use super::frame::{Failure, Outcome, Voice};

/// Compares groups of speakers, vowel by vowel.
#[derive(Debug, clap::Args)]
pub(super) struct CompareArguments {}

/// Runs the verb.
pub(super) fn execute(_arguments: &CompareArguments, _voice: &Voice) -> Result<Outcome, Failure> {
    Err(Failure::new("`compare` is not built yet"))
}
