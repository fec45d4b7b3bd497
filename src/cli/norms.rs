//! `isophone norms`.

use super::frame::{Failure, Outcome, Voice};

/// Lists and shows the published vowel tables.
#[derive(Debug, clap::Args)]
pub(super) struct NormsArguments {}

/// Runs the verb.
pub(super) fn execute(_arguments: &NormsArguments, _voice: &Voice) -> Result<Outcome, Failure> {
    Err(Failure::new("`norms` is not built yet"))
}
