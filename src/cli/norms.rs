//! `isophone norms`.

use std::collections::BTreeSet;
use std::fmt::Write;
use std::path::{Path, PathBuf};

use super::frame::{Failure, Outcome, Voice};
use super::table::{ColumnArguments, of_speakers, read_table_or_run};
use crate::files;
use crate::norms::{self, Origin, ReferenceRow, ReferenceTable};
use crate::tokens::Observation;

/// Lists and shows the published vowel tables, or makes one of your own.
///
/// Without a name, lists them. With a name, shows that table as CSV, where it comes from first.
/// With `--from`, makes a table from a survey, which `check --against` takes as a norm.
#[derive(Debug, clap::Args)]
pub(super) struct NormsArguments {
    /// The table to show, or the name of the one to make.
    name: Option<String>,

    /// Makes a norm of the speakers of this table, or of this folder a run has written.
    #[arg(long, value_name = "TABLE", requires = "source", requires = "accent")]
    from: Option<PathBuf>,

    /// Who measured it, when and where, and where it can be read of.
    #[arg(long, value_name = "TEXT")]
    source: Option<String>,

    /// The accent or vowel system.
    #[arg(long, value_name = "TEXT")]
    accent: Option<String>,

    /// Column of the table whose values are the groups of the norm; all speakers are one otherwise.
    #[arg(long, value_name = "COLUMN", requires = "from")]
    by: Option<String>,

    /// Writes here instead of to stdout.
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,

    #[command(flatten)]
    columns: ColumnArguments,
}

/// Runs the verb.
pub(super) fn execute(arguments: &NormsArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let text = match (&arguments.name, &arguments.from) {
        (name, Some(from)) => whole(&made(
            arguments,
            name.as_deref().unwrap_or("own"),
            from,
            voice,
        )?),
        (None, None) => norms::NAMES
            .iter()
            .filter_map(|name| norms::shipped(name))
            .map(|table| line(&table))
            .collect(),
        (Some(name), None) => {
            let table = norms::shipped(name).ok_or_else(|| {
                Failure::new(format!("there is no table called `{name}`"))
                    .hint(format!("the tables are `{}`", norms::NAMES.join("`, `")))
            })?;
            whole(&table)
        }
    };
    match &arguments.out {
        Some(path) => files::write(path, text.as_bytes())?,
        None => voice.give(text.as_bytes())?,
    }
    Ok(Outcome::AllDone)
}

/// A norm of the speakers of a table, each group by itself.
fn made(
    arguments: &NormsArguments,
    name: &str,
    from: &Path,
    voice: &Voice,
) -> Result<ReferenceTable, Failure> {
    let table = read_table_or_run(&arguments.columns, from, None)?;
    let observations: Vec<Observation> = table.observations.iter().flatten().cloned().collect();
    let groups = match &arguments.by {
        Some(by) => of_speakers(&table, by)?,
        None => observations
            .iter()
            .map(|o| (o.speaker.clone(), "all".to_owned()))
            .collect(),
    };
    let names: BTreeSet<&String> = groups.values().collect();
    let mut norm: Option<ReferenceTable> = None;
    let mut speakers = Vec::new();
    for group in names {
        let members: Vec<Observation> = observations
            .iter()
            .filter(|o| groups.get(&o.speaker) == Some(group))
            .cloned()
            .collect();
        // A line break would end the header's line.
        let line =
            |text: &Option<String>| text.clone().unwrap_or_default().replace(['\n', '\r'], " ");
        let origin = Origin {
            name: name.to_owned(),
            source: line(&arguments.source),
            accent: line(&arguments.accent),
        };
        let Some(one) = ReferenceTable::of_speakers(origin, group, &members) else {
            voice.warning(
                format!("group `{group}` gives no norm: no labelled vowels in common"),
                None,
            );
            continue;
        };
        speakers.push(format!("{} in {group}", one.speakers));
        match &mut norm {
            None => norm = Some(one),
            Some(norm) => norm.rows.extend(one.rows),
        }
    }
    let mut norm = norm.ok_or_else(|| {
        Failure::new(format!(
            "`{}`: no labelled vowels to make a norm of",
            from.display()
        ))
    })?;
    norm.speakers = speakers.join(", ");
    Ok(norm)
}

/// One table in the list.
fn line(table: &ReferenceTable) -> String {
    format!(
        "{name}\n    {accent}; {vowels} vowels; {speakers}\n    {source}\n",
        name = table.name,
        accent = table.accent,
        vowels = table.vowels().len(),
        speakers = table.speakers,
        source = table.source,
    )
}

/// A table as it could be saved and read again.
fn whole(table: &ReferenceTable) -> String {
    let mut text = String::new();
    for (key, value) in [
        ("source", table.source.as_str()),
        ("table", &table.table),
        ("accent", &table.accent),
        ("unit", "hertz, seconds"),
        ("speakers", &table.speakers),
        ("spread", &table.spread),
        ("confirmed", &table.confirmed),
    ] {
        let _ = writeln!(text, "# {key}: {value}");
    }
    text.push_str(
        "group,vowel,word,proportion,tokens,duration_s,f0_hz,f1_hz,f2_hz,f3_hz,\
         f0_sd_hz,f1_sd_hz,f2_sd_hz,f3_sd_hz\n",
    );
    for row in &table.rows {
        text.push_str(&cells(row).join(","));
        text.push('\n');
    }
    text
}

fn cells(row: &ReferenceRow) -> Vec<String> {
    let number = |value: Option<f64>| value.map_or_else(String::new, |v| v.to_string());
    let [f1, f2, f3] = row.formant_hz.map(number);
    let [sd1, sd2, sd3] = row.sd_hz.map(number);
    vec![
        row.group.clone(),
        row.vowel.to_string(),
        row.word.clone().unwrap_or_default(),
        number(row.proportion),
        row.tokens.map_or_else(String::new, |n| n.to_string()),
        number(row.duration_s),
        number(row.f0_hz),
        f1,
        f2,
        f3,
        number(row.f0_sd_hz),
        sd1,
        sd2,
        sd3,
    ]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_is_shown_can_be_read_again() {
        for name in norms::NAMES {
            let table = norms::shipped(name).expect("a shipped table");
            assert_eq!(ReferenceTable::parse(name, &whole(&table)), Ok(table));
        }
    }
}
