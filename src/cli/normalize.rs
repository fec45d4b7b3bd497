//! `isophone normalize`.

use std::collections::BTreeSet;
use std::path::PathBuf;

use super::frame::{Failure, Outcome, Voice};
use super::table::ColumnArguments;
use crate::files;
use crate::normalize::{Method, Normalization, advise};
use crate::tables::{NormalizedCells, ObservationTable};
use crate::tokens::Observation;

/// Takes the size of each speaker out of a table of vowels.
///
/// Gives the table back with f1_norm, f2_norm, f3_norm and norm_method added; every other cell stays
/// as it was. Without a method, the one that fits the survey is taken, and its reason said.
#[derive(Debug, clap::Args)]
pub(super) struct NormalizeArguments {
    /// Table with a row per vowel token.
    #[arg(required_unless_present = "methods")]
    table: Option<PathBuf>,

    /// The method, with its choices after colons: `lobanov`, `lobanov:n:vowel-means`.
    #[arg(long)]
    method: Option<String>,

    /// Says which method fits this table, and why, and does nothing else.
    #[arg(long, conflicts_with_all = ["method", "out"])]
    advise: bool,

    /// Lists the methods, each with formula, needs, pitfalls and source.
    #[arg(long, exclusive = true)]
    methods: bool,

    /// Writes the table here instead of to stdout.
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,

    #[command(flatten)]
    columns: ColumnArguments,
}

/// Runs the verb.
pub(super) fn execute(arguments: &NormalizeArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let Some(path) = &arguments.table else {
        voice.give(accounts().as_bytes())?;
        return Ok(Outcome::AllDone);
    };
    let table = arguments.columns.read(path)?;
    let observations: Vec<Observation> = table.observations.iter().flatten().cloned().collect();
    if observations.is_empty() {
        return Err(Failure::new(format!(
            "`{}`: no row has a formant",
            path.display()
        )));
    }
    if arguments.advise {
        let advice = advise(&observations);
        voice.give(
            format!(
                "{}\n    because {}\n    ({})\n",
                advice.method, advice.reason, advice.coverage
            )
            .as_bytes(),
        )?;
        return Ok(Outcome::AllDone);
    }
    let method: Method = match &arguments.method {
        Some(name) => name.parse().map_err(|error| {
            Failure::new(error).hint("`isophone normalize --methods` lists them")
        })?,
        None => {
            let advice = advise(&observations);
            voice.say(format!("method {}: {}", advice.method, advice.reason));
            advice.method
        }
    };
    let normalization = Normalization::fit(&method, &observations);
    let outcome = report(&normalization, voice);
    let bytes = normalized(&table, &normalization);
    match &arguments.out {
        Some(path) => files::write(path, &bytes)?,
        None => voice.give(&bytes)?,
    }
    Ok(outcome)
}

/// The table with the normalized columns.
fn normalized(table: &ObservationTable, normalization: &Normalization) -> Vec<u8> {
    let cells: Vec<Vec<String>> = table
        .observations
        .iter()
        .map(|observation| match observation {
            None => Vec::new(),
            Some(observation) => NormalizedCells::of(normalization, observation).cells(),
        })
        .collect();
    table.bytes_with(&NormalizedCells::columns(), &cells)
}

/// Says who was left out and why, and who lacks vowels.
fn report(normalization: &Normalization, voice: &Voice) -> Outcome {
    let mut outcome = Outcome::AllDone;
    let reasons: BTreeSet<String> = normalization
        .scales
        .values()
        .filter_map(|scale| scale.as_ref().err().map(ToString::to_string))
        .collect();
    for reason in reasons {
        let speakers: Vec<&str> = normalization
            .scales
            .iter()
            .filter(|(_, scale)| scale.as_ref().is_err_and(|lack| lack.to_string() == reason))
            .map(|(speaker, _)| speaker.as_str())
            .collect();
        voice.warning(
            format!("{} not normalized: {reason}", some_of(&speakers)),
            Some("`isophone normalize TABLE --advise` says which method fits"),
        );
        outcome = Outcome::SomethingLeftOut;
    }
    if !normalization.missing_vowels.is_empty() {
        let speakers: Vec<&str> = normalization
            .missing_vowels
            .keys()
            .map(String::as_str)
            .collect();
        voice.warning(
            format!(
                "{} lack vowels that others have, which moves what {} takes out",
                some_of(&speakers),
                normalization.method
            ),
            Some("regression-log-mean is made for missing vowels"),
        );
    }
    outcome
}

/// The first few names, and how many more.
fn some_of(names: &[&str]) -> String {
    const SHOWN: usize = 5;
    let shown: Vec<String> = names.iter().take(SHOWN).map(|n| format!("`{n}`")).collect();
    match names.len().saturating_sub(SHOWN) {
        0 => format!("speakers {}", shown.join(", ")),
        more => format!("speakers {} and {more} more", shown.join(", ")),
    }
}

/// All methods with what is to be known of them.
fn accounts() -> String {
    Method::ALL
        .iter()
        .map(|method| {
            let account = method.account();
            format!(
                "{method}\n    {}\n    result in: {}\n    needs: {}\n    pitfalls: {}\n    source: {}\n",
                account.formula, account.unit, account.needs, account.pitfalls, account.source
            )
        })
        .collect()
}
