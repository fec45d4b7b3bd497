//! `isophone check`.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};

use super::frame::{Failure, Outcome, Voice};
use super::table::{ColumnArguments, of_speakers, read_table_or_run};
use crate::compare::{check, progress};
use crate::files;
use crate::norms::{NAMES, Origin, ReferenceTable, shipped};
use crate::report::handout;
use crate::tables::{ObservationTable, checks_table};
use crate::tokens::Observation;

/// Holds a learner, or anybody, against a norm: a published table, one of your own, or a group.
///
/// The speaker's size is taken out first. Gives a text to hand over, or the figures as a table.
#[derive(Debug, clap::Args)]
pub(super) struct CheckArguments {
    /// Table with a row per vowel token, or a folder a run has written.
    #[arg(value_name = "TABLE")]
    table: PathBuf,

    /// Who is checked; everybody in the table otherwise. May be given again.
    #[arg(long, value_name = "NAME")]
    speaker: Vec<String>,

    /// The norm: the name of a table (`isophone norms` lists them), a file of that form, or
    /// `COLUMN=VALUE` for a group of speakers of the same table. May be given again.
    #[arg(long, value_name = "NORM", required = true)]
    against: Vec<String>,

    /// The same speaker at an earlier time, under this name in the table.
    #[arg(long, value_name = "NAME", requires = "speaker")]
    earlier: Option<String>,

    /// Which form to give.
    #[arg(long, value_enum, default_value_t = Form::Words)]
    show: Form,

    /// Writes here instead of to stdout.
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,

    #[command(flatten)]
    columns: ColumnArguments,
}

/// The forms there are.
#[derive(Debug, Clone, Copy, PartialEq, Eq, clap::ValueEnum)]
enum Form {
    /// A text to hand over.
    Words,
    /// A table, one row a vowel.
    Figures,
}

/// Runs the verb.
pub(super) fn execute(arguments: &CheckArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let table = read_table_or_run(&arguments.columns, &arguments.table, None)?;
    let observations: Vec<Observation> = table.observations.iter().flatten().cloned().collect();
    let there: BTreeSet<&str> = observations.iter().map(|o| o.speaker.as_str()).collect();
    for name in arguments.speaker.iter().chain(&arguments.earlier) {
        if !there.contains(name.as_str()) {
            return Err(Failure::new(format!(
                "there is no speaker `{name}` with a measured vowel"
            ))
            .hint("is the name as in the table?"));
        }
    }
    let speakers: Vec<&str> = if arguments.speaker.is_empty() {
        there.into_iter().collect()
    } else {
        arguments.speaker.iter().map(String::as_str).collect()
    };
    let mut texts = Vec::new();
    let mut checks = Vec::new();
    let mut outcome = Outcome::AllDone;
    for name in &arguments.against {
        for speaker in &speakers {
            // A speaker is no part of the group it is held against.
            let norm = norm(name, &table, &observations, speaker)?;
            let Some(found) = check(speaker, &observations, &norm) else {
                voice.warning(
                    format!("`{speaker}` has no vowel in common with `{name}`"),
                    Some("are the vowels of both written in the same notation?"),
                );
                outcome = Outcome::SomethingLeftOut;
                continue;
            };
            if found.systems_differ() {
                voice.warning(
                    format!("`{name}` lacks many of the vowels of `{speaker}`"),
                    Some("different vowel systems cannot be compared vowel by vowel"),
                );
            }
            let before = arguments.earlier.as_deref();
            let changes = before
                .and_then(|earlier| check(earlier, &observations, &norm))
                .map(|earlier| progress(&earlier, &found, &observations));
            texts.push(handout(&found, &norm, changes.as_deref()));
            checks.push(found);
        }
    }
    let bytes = match arguments.show {
        Form::Words => texts.join("\n\n").into_bytes(),
        Form::Figures => checks_table(&checks),
    };
    match &arguments.out {
        Some(path) => files::write(path, &bytes)?,
        None => voice.give(&bytes)?,
    }
    Ok(outcome)
}

/// The norm of a name, a file or a group.
fn norm(
    name: &str,
    table: &ObservationTable,
    observations: &[Observation],
    without: &str,
) -> Result<ReferenceTable, Failure> {
    if let Some(norm) = shipped(name) {
        return Ok(norm);
    }
    let path = Path::new(name);
    if path.is_file() {
        let bytes = files::read(path)?;
        return ReferenceTable::parse(name, &String::from_utf8_lossy(&bytes))
            .map_err(|error| Failure::new(format!("`{name}`: {error}")));
    }
    let Some((column, value)) = name.split_once('=') else {
        return Err(
            Failure::new(format!("there is no norm `{name}`")).hint(format!(
                "the tables are `{}`; a file or COLUMN=VALUE can be given too",
                NAMES.join("`, `")
            )),
        );
    };
    let groups = of_speakers(table, column)?;
    let members: Vec<Observation> = observations
        .iter()
        .filter(|o| o.speaker != without && groups.get(&o.speaker).is_some_and(|g| g == value))
        .cloned()
        .collect();
    let origin = Origin {
        name: name.to_owned(),
        source: "speakers of the same table".to_owned(),
        accent: format!("{column} {value}"),
    };
    ReferenceTable::of_speakers(origin, value, &members).ok_or_else(|| {
        Failure::new(format!(
            "no speakers with `{column}` = `{value}` that could be a norm"
        ))
        .hint("the norm needs speakers with vowels in common")
    })
}
