//! The command line: the only room that prints.
//!
//! One file per verb, each with its arguments and `execute`; [`frame`] has what they share: how
//! to speak, what an end and a failure are.

mod check;
mod compare;
mod demo;
mod frame;
mod identify;
mod measure;
mod normalize;
mod norms;
mod report;
mod run;
mod survey;
mod table;
mod train;
mod train_text;

use std::process::ExitCode;

use clap::{Parser, Subcommand};

use frame::{Outcome, Talk, Voice};

/// From recordings of many speakers to defensible statements about their vowels.
///
/// Nothing leaves this machine, and no analysis setting is needed. Exit status: 0 when all was
/// done, 1 when something was left out (and said), 2 when nothing could be done.
#[derive(Debug, Parser)]
#[command(
    name = "isophone",
    version,
    propagate_version = true,
    arg_required_else_help = true
)]
struct Arguments {
    /// Work with this many threads (as many as the machine has, otherwise). Results are the same.
    #[arg(long, global = true, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    threads: Option<u16>,

    /// Say nothing but warnings and errors.
    #[arg(long, global = true)]
    quiet: bool,

    #[command(subcommand)]
    verb: Verb,
}

#[derive(Debug, Subcommand)]
enum Verb {
    Run(run::RunArguments),
    Measure(measure::MeasureArguments),
    Normalize(normalize::NormalizeArguments),
    Train(train::TrainArguments),
    Identify(identify::IdentifyArguments),
    Compare(compare::CompareArguments),
    Check(check::CheckArguments),
    Norms(norms::NormsArguments),
    Report(report::ReportArguments),
    Demo(demo::DemoArguments),
}

/// Runs the program on the arguments of the process.
pub fn main() -> ExitCode {
    let arguments = Arguments::parse();
    let voice = Voice::from_environment(if arguments.quiet {
        Talk::WarningsOnly
    } else {
        Talk::Full
    });
    if let Some(threads) = arguments.threads {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(usize::from(threads));
        if let Err(error) = pool.build_global() {
            voice.failure(&frame::Failure::new(format!(
                "could not start {threads} threads: {error}"
            )));
            return ExitCode::from(2);
        }
    }
    let outcome = match &arguments.verb {
        Verb::Run(arguments) => run::execute(arguments, &voice),
        Verb::Measure(arguments) => measure::execute(arguments, &voice),
        Verb::Normalize(arguments) => normalize::execute(arguments, &voice),
        Verb::Train(arguments) => train::execute(arguments, &voice),
        Verb::Identify(arguments) => identify::execute(arguments, &voice),
        Verb::Compare(arguments) => compare::execute(arguments, &voice),
        Verb::Check(arguments) => check::execute(arguments, &voice),
        Verb::Norms(arguments) => norms::execute(arguments, &voice),
        Verb::Report(arguments) => report::execute(arguments, &voice),
        Verb::Demo(arguments) => demo::execute(arguments, &voice),
    };
    match outcome {
        Ok(Outcome::AllDone) => ExitCode::SUCCESS,
        Ok(Outcome::SomethingLeftOut) => ExitCode::from(1),
        Err(failure) => {
            voice.failure(&failure);
            ExitCode::from(2)
        }
    }
}
