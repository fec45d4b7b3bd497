//! `isophone identify`.

use super::frame::{Failure, Outcome, Voice};

/// Says which vowels the rows of a normalized table are, and how probably.
#[derive(Debug, clap::Args)]
pub(super) struct IdentifyArguments {}

/// Runs the verb.
pub(super) fn execute(_arguments: &IdentifyArguments, _voice: &Voice) -> Result<Outcome, Failure> {
    Err(Failure::new("`identify` is not built yet"))
}
