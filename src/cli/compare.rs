//! `isophone compare`.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};

use super::frame::{Failure, Outcome, Voice};
use super::table::{ColumnArguments, of_speakers, read_table_or_run};
use crate::compare::{Belonging, Findings, PlaceVerdict, Resampling, contrast};
use crate::files;
use crate::normalize::{Method, advise};
use crate::report;
use crate::tables::{ObservationTable, differences_table, pairs_table, spaces_table, vowels_table};
use crate::tokens::Observation;

/// Compares groups of speakers, vowel by vowel, with the speaker as the unit of sampling.
///
/// Takes a table with a row per vowel token, or the folder of a run. The figures go to stdout as a
/// table, what they say goes to stderr in words. Two groups are compared with each other, more than
/// two each with all the others.
#[derive(Debug, clap::Args)]
pub(super) struct CompareArguments {
    /// Table with a row per vowel token, or a folder a run has written.
    #[arg(value_name = "TABLE")]
    table: PathBuf,

    /// Column of the table whose values are the groups.
    #[arg(long, value_name = "COLUMN")]
    by: Option<String>,

    /// Compares only these two groups, the second less the first.
    #[arg(long, value_name = "FIRST,SECOND", requires = "by")]
    groups: Option<String>,

    /// Compares this speaker with the others, or with one group of them (`--by`, `--with`).
    #[arg(long, value_name = "NAME", conflicts_with = "groups")]
    speaker: Option<String>,

    /// The group the speaker is compared with.
    #[arg(long, value_name = "GROUP", requires = "speaker")]
    with: Option<String>,

    /// Compares only speakers who are alike in this column with each other; may be given again.
    #[arg(long, value_name = "COLUMN")]
    balance: Vec<String>,

    /// Which figures to give.
    #[arg(long, value_enum, default_value_t = Show::Differences)]
    show: Show,

    /// Tracks of the table, for movement.
    #[arg(long, value_name = "FILE")]
    tracks: Option<PathBuf>,

    /// Writes the figures here instead of to stdout.
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,

    #[command(flatten)]
    columns: ColumnArguments,

    /// Normalization to use instead of the program's choice.
    #[arg(long, value_name = "METHOD", help_heading = "Advanced")]
    method: Option<String>,

    /// Seed of the resampling.
    #[arg(long, value_name = "N", default_value_t = Resampling::default().seed, help_heading = "Advanced")]
    seed: u64,
}

/// The tables there are.
#[derive(Debug, Clone, Copy, PartialEq, Eq, clap::ValueEnum)]
enum Show {
    /// Differences of groups, with intervals.
    Differences,
    /// Pairs of vowels: overlap, and what one vowel would give.
    Pairs,
    /// Vowels of every group, with their movement.
    Vowels,
    /// Areas of the speakers' vowel spaces.
    Spaces,
}

/// Runs the verb.
pub(super) fn execute(arguments: &CompareArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let table = read_table_or_run(
        &arguments.columns,
        &arguments.table,
        arguments.tracks.as_deref(),
    )?;
    let observations: Vec<Observation> = table.observations.iter().flatten().cloned().collect();
    if observations.is_empty() {
        return Err(Failure::new(format!(
            "`{}`: no row has a formant",
            arguments.table.display()
        )));
    }
    let by = arguments
        .by
        .clone()
        .or_else(|| recorded_group(&arguments.table));
    let belonging = belonging(arguments, &table, by.as_deref())?;
    let method: Method = match &arguments.method {
        Some(name) => name.parse().map_err(|error| {
            Failure::new(error).hint("`isophone normalize --methods` lists them")
        })?,
        None => {
            let advice = advise(&observations);
            voice.say(format!(
                "sizes taken out by {}: {}",
                advice.method, advice.reason
            ));
            advice.method
        }
    };
    let resampling = Resampling {
        seed: arguments.seed,
        ..Resampling::default()
    };
    let mut findings = Findings::of(&[], &observations, &method, &belonging, resampling);
    for (speaker, why) in &findings.panel.left_out {
        voice.warning(
            format!("speaker `{speaker}` is in no comparison: {why}"),
            None,
        );
    }
    choose_sides(arguments, &mut findings)?;
    if arguments.balance.is_empty() {
        tell_unbalanced(&table, &findings, by.as_deref(), voice)?;
    }
    if !findings.contrasts.is_empty() || arguments.show == Show::Pairs {
        report::found(&findings)
            .iter()
            .for_each(|sentence| voice.say(sentence));
    }
    let vowels: Vec<String> = findings
        .panel
        .vowels
        .iter()
        .map(ToString::to_string)
        .collect();
    let bytes = match arguments.show {
        Show::Differences if findings.contrasts.is_empty() => {
            return Err(Failure::new("there are no two groups to compare")
                .hint("name a column with `--by`, or a speaker with `--speaker`"));
        }
        Show::Differences => differences_table(&vowels, &findings.contrasts),
        Show::Pairs => pairs_table(&findings),
        Show::Vowels => vowels_table(&findings),
        Show::Spaces => spaces_table(&findings),
    };
    match &arguments.out {
        Some(path) => files::write(path, &bytes)?,
        None => voice.give(&bytes)?,
    }
    Ok(if findings.panel.left_out.is_empty() {
        Outcome::AllDone
    } else {
        Outcome::SomethingLeftOut
    })
}

/// The column a run was grouped by, where the table is a run's folder.
fn recorded_group(folder: &Path) -> Option<String> {
    let record = files::read(&folder.join("run.json")).ok()?;
    let record: serde_json::Value = serde_json::from_slice(&record).ok()?;
    crate::survey::recorded_group(&record).map(str::to_owned)
}

fn belonging(
    arguments: &CompareArguments,
    table: &ObservationTable,
    by: Option<&str>,
) -> Result<Belonging, Failure> {
    let mut belonging = Belonging::default();
    if let Some(by) = by {
        belonging.group = of_speakers(table, by)?;
    }
    for column in &arguments.balance {
        for (speaker, value) in of_speakers(table, column)? {
            let stratum = belonging.stratum.entry(speaker).or_default();
            stratum.push('\u{1f}');
            stratum.push_str(&value);
        }
    }
    Ok(belonging)
}

/// Puts the comparison asked for in the place of the usual one.
fn choose_sides(arguments: &CompareArguments, findings: &mut Findings) -> Result<(), Failure> {
    let panel = &findings.panel;
    let place = |name: &str| {
        panel.groups.iter().position(|g| g == name).ok_or_else(|| {
            Failure::new(format!("there is no group `{name}`"))
                .hint(format!("the groups are `{}`", panel.groups.join("`, `")))
        })
    };
    let (names, sides) = if let Some(groups) = &arguments.groups {
        let Some((first, second)) = groups.split_once(',') else {
            return Err(Failure::new(format!(
                "`--groups {groups}` is not of the form FIRST,SECOND"
            )));
        };
        let sides = [
            panel.members(Some(place(first)?)),
            panel.members(Some(place(second)?)),
        ];
        ([first.to_owned(), second.to_owned()], sides)
    } else if let Some(speaker) = &arguments.speaker {
        let Some(alone) = panel.speakers.iter().position(|s| s.name == *speaker) else {
            return Err(Failure::new(format!(
                "there is no speaker `{speaker}` in the comparison"
            )));
        };
        let group = arguments.with.as_deref().map(place).transpose()?;
        let others: Vec<usize> = panel
            .members(group)
            .into_iter()
            .filter(|s| *s != alone)
            .collect();
        let name = arguments
            .with
            .clone()
            .unwrap_or_else(|| "the other speakers".to_owned());
        ([name, speaker.clone()], [others, vec![alone]])
    } else {
        return Ok(());
    };
    let sides = [sides[0].as_slice(), sides[1].as_slice()];
    findings.contrasts = vec![contrast(panel, names, sides, 0, &findings.resampling)];
    Ok(())
}

/// Says in which other columns the groups are not alike.
fn tell_unbalanced(
    table: &ObservationTable,
    findings: &Findings,
    by: Option<&str>,
    voice: &Voice,
) -> Result<(), Failure> {
    let different = findings
        .contrasts
        .iter()
        .flat_map(|c| &c.vowels)
        .any(|v| v.verdict() == PlaceVerdict::Different);
    if findings.panel.groups.len() < 2 || !different {
        return Ok(());
    }
    for column in table.header() {
        if Some(column.as_str()) == by {
            continue;
        }
        // Columns of tokens are no columns of speakers.
        let Ok(values) = of_speakers(table, column) else {
            continue;
        };
        let kinds: BTreeSet<&String> = values.values().collect();
        if !(2..=6).contains(&kinds.len()) || 2 * kinds.len() > values.len() {
            continue;
        }
        if let Some(unlike) = least_alike(findings, &values, &kinds) {
            voice.warning(
                format!("the groups are not alike in `{column}`: {unlike}"),
                Some(&format!("`--balance {column}` compares like with like")),
            );
        }
    }
    Ok(())
}

/// The value whose share differs by more than a fifth between two groups, in words.
fn least_alike(
    findings: &Findings,
    values: &BTreeMap<String, String>,
    kinds: &BTreeSet<&String>,
) -> Option<String> {
    let panel = &findings.panel;
    let share = |group: usize, kind: &String| {
        let members = panel.members(Some(group));
        let of_kind = members
            .iter()
            .filter(|s| values.get(&panel.speakers[**s].name) == Some(kind));
        of_kind.count() as f64 / members.len() as f64
    };
    for kind in kinds {
        let shares: Vec<(f64, usize)> = (0..panel.groups.len())
            .map(|g| (share(g, kind), g))
            .collect();
        let low = shares.iter().min_by(|a, b| a.0.total_cmp(&b.0))?;
        let high = shares.iter().max_by(|a, b| a.0.total_cmp(&b.0))?;
        if high.0 - low.0 > 0.2 {
            return Some(format!(
                "`{kind}` is {:.0} % of {} and {:.0} % of {}",
                100.0 * high.0,
                panel.groups[high.1],
                100.0 * low.0,
                panel.groups[low.1]
            ));
        }
    }
    None
}
