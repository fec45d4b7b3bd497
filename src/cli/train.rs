//! `isophone train`.

use std::collections::BTreeMap;
use std::fmt::Write;
use std::path::{Path, PathBuf};

use sha2::{Digest, Sha256};

use super::frame::{Failure, Outcome, Voice};
use super::table::{ColumnArguments, add_tracks};
use crate::files;
use crate::identify::{
    Accuracy, Evaluation, Feature, Kind, Model, Samples, TrainingRecord, USUAL_PENALTY, evaluate,
};
use crate::normalize::Method;
use crate::tokens::Observation;
use crate::vowel::Vowel;

/// Trains a model on tables of labelled vowels and tests it on speakers it has not seen.
///
/// The accuracy, its interval over speakers and the confusion table are always those of speakers
/// left out of the training. Without `--out`, nothing is written: the test alone is made.
#[derive(Debug, clap::Args)]
pub(super) struct TrainArguments {
    /// Tables with a row per labelled vowel token.
    #[arg(required = true)]
    tables: Vec<PathBuf>,

    /// Tracks of the tables, in the same order; needed for features at proportions.
    #[arg(long, value_name = "FILE")]
    tracks: Vec<PathBuf>,

    /// Writes the model here.
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,

    /// Name of the model; that of the file, otherwise.
    #[arg(long)]
    name: Option<String>,

    /// The columns the classifier sees, separated by commas: f0_norm, f1_norm, f2_norm, f3_norm,
    /// f1_norm@0.2 and the like, ln_duration.
    #[arg(long, default_value = "f1_norm,f2_norm,f3_norm", value_delimiter = ',')]
    features: Vec<String>,

    /// How the size of speakers is taken out.
    #[arg(long, default_value = "lobanov")]
    normalization: String,

    /// logistic, linear or quadratic.
    #[arg(long, default_value = "logistic")]
    classifier: String,

    /// Penalty on the slopes of a logistic classifier.
    #[arg(long, default_value_t = USUAL_PENALTY)]
    penalty: f64,

    /// Leaves out all speakers with the same value of this column at a time, instead of one speaker.
    #[arg(long, value_name = "COLUMN")]
    leave_out_by: Option<String>,

    /// Seed of the interval over speakers.
    #[arg(long, default_value_t = 1)]
    seed: u64,

    #[command(flatten)]
    columns: ColumnArguments,
}

/// Runs the verb.
pub(super) fn execute(arguments: &TrainArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let kind = match arguments.classifier.parse().map_err(Failure::new)? {
        Kind::Logistic { .. } => Kind::Logistic {
            penalty: arguments.penalty,
        },
        other => other,
    };
    let method: Method = arguments
        .normalization
        .parse()
        .map_err(|error| Failure::new(error).hint("`isophone normalize --methods` lists them"))?;
    let features: Vec<Feature> = arguments
        .features
        .iter()
        .map(|name| name.trim().parse().map_err(Failure::new))
        .collect::<Result<_, _>>()?;
    if arguments.tracks.len() > arguments.tables.len() {
        return Err(Failure::new("more tracks than tables").hint("give one for each table"));
    }
    let mut read = arguments.columns.read_all(&arguments.tables)?;
    for ((table, _), tracks) in read.iter_mut().zip(&arguments.tracks) {
        add_tracks(table, tracks)?;
    }
    let observations: Vec<Vec<Observation>> = read
        .iter()
        .map(|(table, _)| table.observations.iter().flatten().cloned().collect())
        .collect();
    let slices: Vec<&[Observation]> = observations.iter().map(Vec::as_slice).collect();
    let samples = Samples::gather(&features, &method, &slices);
    if samples.rows.is_empty() {
        let reasons: Vec<&String> = samples.left_out.keys().collect();
        return Err(Failure::new("no labelled token has all the features")
            .hint(format!("what is missing: {reasons:?}")));
    }

    let groups = match &arguments.leave_out_by {
        None => None,
        Some(column) => Some(speaker_groups(&read, &arguments.tables, column, &samples)?),
    };
    let evaluation = match &groups {
        None => evaluate(kind, &samples, &|speaker| speaker),
        Some((_, of_speaker)) => evaluate(kind, &samples, &|speaker| of_speaker[speaker]),
    }
    .map_err(Failure::new)?;
    let held_out = match &arguments.leave_out_by {
        None => "one speaker at a time".to_owned(),
        Some(column) => format!("all speakers of one `{column}` at a time"),
    };
    let accuracy = evaluation.accuracy(arguments.seed);
    let mut text = format!("held out: {held_out}\n{}", told(&accuracy));
    if let Some((names, of_speaker)) = &groups {
        text.push_str(&by_group(&evaluation, names, of_speaker));
    }
    text.push_str(&confusion_text(&evaluation));
    for (reason, count) in &samples.left_out {
        let _ = writeln!(
            text,
            "left out, and counted as wrong: {count} tokens ({reason})"
        );
    }
    voice.give(text.as_bytes())?;

    if let Some(out) = &arguments.out {
        let record = TrainingRecord {
            program: env!("CARGO_PKG_VERSION").to_owned(),
            data: arguments
                .tables
                .iter()
                .zip(&read)
                .map(|(path, (table, bytes))| data_line(path, table.len(), bytes))
                .collect(),
            command: command(arguments),
            tokens: samples.rows.len(),
            left_out: samples.left_out.values().sum(),
            speakers: samples.speakers.len(),
            seed: arguments.seed,
            held_out,
            accuracy,
            confusion: evaluation.confusion(),
        };
        let name = match &arguments.name {
            Some(name) => name.clone(),
            None => out
                .file_stem()
                .map(|stem| stem.to_string_lossy().into_owned())
                .unwrap_or_default(),
        };
        let model = Model::train(&name, kind, &method, &samples, record).map_err(Failure::new)?;
        files::write(out, model.to_text().as_bytes())?;
        voice.say(format!("wrote `{}`", out.display()));
    }
    Ok(if samples.left_out.is_empty() {
        Outcome::AllDone
    } else {
        Outcome::SomethingLeftOut
    })
}

/// The accuracy in words.
fn told(accuracy: &Accuracy) -> String {
    format!(
        "{:.1} % identified as labelled ({} of {} tokens, {} speakers; 95 % interval over speakers \
         {:.1} to {:.1} %)\n",
        100.0 * accuracy.share,
        accuracy.correct,
        accuracy.tokens,
        accuracy.speakers,
        100.0 * accuracy.low,
        100.0 * accuracy.high,
    )
}

/// Each group's own accuracy when it was left out.
fn by_group(evaluation: &Evaluation, names: &[String], of_speaker: &[usize]) -> String {
    let mut counts: BTreeMap<usize, (usize, usize)> = BTreeMap::new();
    for row in &evaluation.rows {
        let group = counts.entry(of_speaker[row.speaker]).or_default();
        group.0 += usize::from(row.answer() == row.class);
        group.1 += 1;
    }
    for (speaker, _) in &evaluation.incomplete {
        counts.entry(of_speaker[*speaker]).or_default().1 += 1;
    }
    counts
        .into_iter()
        .map(|(group, (correct, tokens))| {
            format!(
                "    {}: {:.1} % ({correct} of {tokens})\n",
                names[group],
                100.0 * correct as f64 / tokens as f64
            )
        })
        .collect()
}

/// The confusion table, with recall.
pub(super) fn confusion_text(evaluation: &Evaluation) -> String {
    let table = evaluation.confusion();
    let mut missing: BTreeMap<usize, usize> = BTreeMap::new();
    for (_, class) in &evaluation.incomplete {
        *missing.entry(*class).or_insert(0) += 1;
    }
    let cell = |text: String| format!("{text:>6}");
    let mut text = String::from("label\\answer");
    for vowel in &evaluation.vowels {
        text.push_str(&cell(vowel.to_string()));
    }
    text.push_str("  none  recall %\n");
    for (class, (vowel, row)) in evaluation.vowels.iter().zip(&table).enumerate() {
        let none = missing.get(&class).copied().unwrap_or(0);
        let all = row.iter().sum::<usize>() + none;
        let _ = write!(text, "{:<12}", Vowel::ipa(vowel));
        for count in row {
            text.push_str(&cell(count.to_string()));
        }
        let recall = 100.0 * row[class] as f64 / all.max(1) as f64;
        let _ = writeln!(text, "{none:>6}{recall:>10.1}");
    }
    text
}

/// Names of the groups, sorted, and each speaker's group as a place in that list.
fn speaker_groups(
    read: &[(crate::tables::ObservationTable, Vec<u8>)],
    paths: &[PathBuf],
    column: &str,
    samples: &Samples,
) -> Result<(Vec<String>, Vec<usize>), Failure> {
    let mut of_speaker: BTreeMap<String, String> = BTreeMap::new();
    for (place, (table, _)) in read.iter().enumerate() {
        let values = table
            .column(column)
            .map_err(|error| Failure::of_table(&paths[place], &error))?;
        for (observation, value) in table.observations.iter().zip(values) {
            let Some(observation) = observation else {
                continue;
            };
            let speaker = if read.len() == 1 {
                observation.speaker.clone()
            } else {
                format!("{} {}", place + 1, observation.speaker)
            };
            of_speaker.insert(speaker, value.to_owned());
        }
    }
    let group = |speaker: &String| of_speaker.get(speaker).cloned().unwrap_or_default();
    let mut names: Vec<String> = samples.speakers.iter().map(group).collect();
    let each = names.clone();
    names.sort();
    names.dedup();
    if names.len() < 2 {
        return Err(Failure::new(format!(
            "all speakers have the same `{column}`: nothing can be left out by it"
        )));
    }
    let places = each
        .iter()
        .map(|name| names.binary_search(name).unwrap_or_default())
        .collect();
    Ok((names, places))
}

/// A table in the training record: its file name, rows and hash.
fn data_line(path: &Path, rows: usize, bytes: &[u8]) -> String {
    let name = path
        .file_name()
        .unwrap_or(path.as_os_str())
        .to_string_lossy();
    let hash: String = Sha256::digest(bytes)
        .iter()
        .map(|b| format!("{b:02x}"))
        .collect();
    format!("{name}: {rows} rows, sha256 {hash}")
}

/// The command that repeats the training.
fn command(arguments: &TrainArguments) -> String {
    let mut words = vec!["isophone train".to_owned()];
    words.extend(arguments.tables.iter().map(|p| p.display().to_string()));
    words.extend(
        arguments
            .tracks
            .iter()
            .map(|p| format!("--tracks {}", p.display())),
    );
    words.extend(
        arguments
            .columns
            .renamed()
            .iter()
            .map(|r| format!("--column {r}")),
    );
    words.push(format!("--features {}", arguments.features.join(",")));
    words.push(format!("--normalization {}", arguments.normalization));
    words.push(format!("--classifier {}", arguments.classifier));
    if arguments.classifier == "logistic" {
        words.push(format!("--penalty {}", arguments.penalty));
    }
    if let Some(column) = &arguments.leave_out_by {
        words.push(format!("--leave-out-by {column}"));
    }
    words.push(format!("--seed {}", arguments.seed));
    if let Some(name) = &arguments.name {
        words.push(format!("--name {name}"));
    }
    if let Some(out) = &arguments.out {
        words.push(format!("--out {}", out.display()));
    }
    words.join(" ")
}
