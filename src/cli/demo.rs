//! `isophone demo`.

use super::frame::{Failure, Outcome, Voice};

/// Invents a survey, synthesises it, runs it, and says what was found beside what was put in.
#[derive(Debug, clap::Args)]
pub(super) struct DemoArguments {}

/// Runs the verb.
pub(super) fn execute(_arguments: &DemoArguments, _voice: &Voice) -> Result<Outcome, Failure> {
    Err(Failure::new("`demo` is not built yet"))
}
