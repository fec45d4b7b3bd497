//! `isophone report`.

use super::frame::{Failure, Outcome, Voice};

/// Makes the page to read from a run.
#[derive(Debug, clap::Args)]
pub(super) struct ReportArguments {}

/// Runs the verb.
pub(super) fn execute(_arguments: &ReportArguments, _voice: &Voice) -> Result<Outcome, Failure> {
    Err(Failure::new("`report` is not built yet"))
}
