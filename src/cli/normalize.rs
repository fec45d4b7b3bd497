//! `isophone normalize`.

use super::frame::{Failure, Outcome, Voice};

/// Takes the size of each speaker out of a table of vowels.
#[derive(Debug, clap::Args)]
pub(super) struct NormalizeArguments {}

/// Runs the verb.
pub(super) fn execute(_arguments: &NormalizeArguments, _voice: &Voice) -> Result<Outcome, Failure> {
    Err(Failure::new("`normalize` is not built yet"))
}
