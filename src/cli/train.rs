//! `isophone train`.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use sha2::{Digest, Sha256};

use super::frame::{Failure, Outcome, Voice};
use super::table::{ColumnArguments, add_tracks};
use super::train_text;
use crate::files;
use crate::identify::{
    Evaluation, Feature, Kind, Model, Samples, TrainingRecord, USUAL_MODES, USUAL_PENALTY, evaluate,
};
use crate::normalize::Method;
use crate::tables::ObservationTable;
use crate::tokens::Observation;
use crate::vowel::Vowel;

/// Trains a model on tables of labelled vowels and tests it on speakers it has not seen.
///
/// Accuracy, interval, confusion and reliability are always those of speakers left out of the
/// training. Without `--out` nothing is written: the test alone is made. With several classifiers,
/// normalizations or sets of features, all combinations are tested and set side by side.
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

    /// What the classifier sees, separated by commas: f0_norm, f1_norm, f2_norm, f3_norm,
    /// f1_norm@0.2 and the like, ln_duration (less the speaker's mean), ln_seconds. May be given
    /// several times, to compare. F1 to F3 otherwise, and F0 with a template.
    #[arg(long, value_name = "LIST")]
    features: Vec<String>,

    /// How the size of speakers is taken out; several to compare. `lobanov` otherwise, and `ln`
    /// with a template, which finds the size itself.
    #[arg(long, value_delimiter = ',', value_name = "METHOD")]
    normalization: Vec<String>,

    /// logistic, linear, quadratic or template; several to compare.
    #[arg(long, default_value = "logistic", value_delimiter = ',')]
    classifier: Vec<String>,

    /// Takes these vowels only.
    #[arg(long, value_delimiter = ',', value_name = "VOWEL")]
    vowels: Vec<String>,

    /// Penalty on the slopes of a logistic classifier.
    #[arg(long, default_value_t = USUAL_PENALTY)]
    penalty: f64,

    /// Number of modes of a template.
    #[arg(long, default_value_t = USUAL_MODES)]
    modes: usize,

    /// What is left out at a time: one `speaker`, one `token`, or all speakers with the same value
    /// of a column.
    #[arg(long, default_value = "speaker", value_name = "speaker|token|COLUMN")]
    leave_out: String,

    /// Seed of the interval over speakers.
    #[arg(long, default_value_t = 1)]
    seed: u64,

    #[command(flatten)]
    columns: ColumnArguments,
}

/// One combination to be tested.
pub(super) struct Candidate {
    /// The classifier.
    pub(super) kind: Kind,
    /// The normalization.
    pub(super) method: Method,
    /// The features.
    pub(super) features: Vec<Feature>,
}

/// Runs the verb.
pub(super) fn execute(arguments: &TrainArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let candidates = candidates(arguments)?;
    if arguments.tracks.len() > arguments.tables.len() {
        return Err(Failure::new("more tracks than tables").hint("give one for each table"));
    }
    let mut read = arguments.columns.read_all(&arguments.tables)?;
    for ((table, _), tracks) in read.iter_mut().zip(&arguments.tracks) {
        add_tracks(table, tracks)?;
    }
    let wanted: Vec<Vowel> = arguments
        .vowels
        .iter()
        .map(|v| Vowel::from_ipa(v))
        .collect();
    let observations: Vec<Vec<Observation>> = read
        .iter()
        .map(|(table, _)| {
            let all = table.observations.iter().flatten();
            let taken = |o: &&Observation| {
                wanted.is_empty() || o.vowel.as_ref().is_some_and(|v| wanted.contains(v))
            };
            all.filter(taken).cloned().collect()
        })
        .collect();
    let slices: Vec<&[Observation]> = observations.iter().map(Vec::as_slice).collect();
    let tested = candidates
        .iter()
        .map(|candidate| test(candidate, arguments, &read, &slices))
        .collect::<Result<Vec<_>, _>>()?;
    if let ([candidate], [tested]) = (candidates.as_slice(), tested.as_slice()) {
        voice.give(train_text::one(tested, &arguments.leave_out, arguments.seed).as_bytes())?;
        if let Some(out) = &arguments.out {
            write_model(arguments, candidate, tested, &read, out)?;
            voice.say(format!("wrote `{}`", out.display()));
        }
        return Ok(if tested.samples.lacking.is_empty() {
            Outcome::AllDone
        } else {
            Outcome::SomethingLeftOut
        });
    }
    if arguments.out.is_some() {
        return Err(Failure::new("several combinations cannot be one model")
            .hint("give `--out` with one classifier, one normalization and one set of features"));
    }
    let text = train_text::comparison(&candidates, &tested, &arguments.leave_out, arguments.seed);
    voice.give(text.as_bytes())?;
    Ok(Outcome::AllDone)
}

/// A combination with what came of its test.
pub(super) struct Tested {
    /// What it was tested on.
    pub(super) samples: Samples,
    /// What it said.
    pub(super) evaluation: Evaluation,
    /// Names of the groups, where groups were left out, and each speaker's place among them.
    pub(super) groups: Option<(Vec<String>, Vec<usize>)>,
}

/// All combinations asked for.
fn candidates(arguments: &TrainArguments) -> Result<Vec<Candidate>, Failure> {
    let mut candidates = Vec::new();
    for name in &arguments.classifier {
        let kind = match name.trim().parse().map_err(Failure::new)? {
            Kind::Logistic { .. } => Kind::Logistic {
                penalty: arguments.penalty,
            },
            Kind::Template { .. } => Kind::Template {
                modes: arguments.modes,
            },
            other => other,
        };
        let (usual_method, usual_features) = match kind {
            Kind::Template { .. } => ("ln", "f1_norm,f2_norm,f3_norm,f0_norm"),
            _ => ("lobanov", "f1_norm,f2_norm,f3_norm"),
        };
        let or_usual = |given: &[String], usual: &str| {
            if given.is_empty() {
                vec![usual.to_owned()]
            } else {
                given.to_vec()
            }
        };
        for method in or_usual(&arguments.normalization, usual_method) {
            let method: Method = method.parse().map_err(|error| {
                Failure::new(error).hint("`isophone normalize --methods` lists them")
            })?;
            for list in or_usual(&arguments.features, usual_features) {
                let features = list
                    .split(',')
                    .map(|name| name.trim().parse().map_err(Failure::new))
                    .collect::<Result<_, _>>()?;
                candidates.push(Candidate {
                    kind,
                    method: method.clone(),
                    features,
                });
            }
        }
    }
    Ok(candidates)
}

/// Tests one combination on what is left out.
fn test(
    candidate: &Candidate,
    arguments: &TrainArguments,
    read: &[(ObservationTable, Vec<u8>)],
    observations: &[&[Observation]],
) -> Result<Tested, Failure> {
    let samples = Samples::gather(&candidate.features, &candidate.method, observations);
    if samples.complete().rows.is_empty() {
        let reasons: Vec<&str> = samples.lacking.keys().map(String::as_str).collect();
        return Err(Failure::new("no labelled token has all the features")
            .hint(format!("lacking: {}", reasons.join("; "))));
    }
    let groups = match arguments.leave_out.as_str() {
        "speaker" | "token" => None,
        column => Some(speaker_groups(read, &arguments.tables, column, &samples)?),
    };
    let fold = |row: usize| match (&groups, arguments.leave_out.as_str()) {
        (Some((_, of_speaker)), _) => of_speaker[samples.speaker[row]],
        (None, "token") => row,
        (None, _) => samples.speaker[row],
    };
    let evaluation = evaluate(candidate.kind, &samples, &fold).map_err(Failure::new)?;
    Ok(Tested {
        samples,
        evaluation,
        groups,
    })
}

/// Trains on everything and writes the model.
fn write_model(
    arguments: &TrainArguments,
    candidate: &Candidate,
    tested: &Tested,
    read: &[(ObservationTable, Vec<u8>)],
    out: &Path,
) -> Result<(), Failure> {
    let Tested {
        samples,
        evaluation,
        ..
    } = tested;
    let record = TrainingRecord {
        program: env!("CARGO_PKG_VERSION").to_owned(),
        data: arguments
            .tables
            .iter()
            .zip(read)
            .map(|(path, (table, bytes))| data_line(path, table.len(), bytes))
            .collect(),
        command: command(arguments),
        tokens: samples.complete().rows.len(),
        left_out: evaluation.incomplete.len(),
        speakers: samples.speakers.len(),
        seed: arguments.seed,
        held_out: train_text::held_out(&arguments.leave_out),
        accuracy: evaluation.accuracy(arguments.seed),
        confusion: evaluation.confusion(),
        reliability: evaluation.reliability(),
    };
    let name = match &arguments.name {
        Some(name) => name.clone(),
        None => out
            .file_stem()
            .map(|stem| stem.to_string_lossy().into_owned())
            .unwrap_or_default(),
    };
    let Candidate { kind, method, .. } = candidate;
    let model =
        Model::train(&name, *kind, method, samples, evaluation, record).map_err(Failure::new)?;
    files::write(out, model.to_text().as_bytes())?;
    Ok(())
}

/// Names of the groups, sorted, and each speaker's group as a place in that list.
fn speaker_groups(
    read: &[(ObservationTable, Vec<u8>)],
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
    let each: Vec<String> = samples.speakers.iter().map(group).collect();
    let mut names = each.clone();
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
    let option = |words: &mut Vec<String>, name: &str, values: &[String]| {
        words.extend(values.iter().map(|value| format!("--{name} {value}")));
    };
    let paths = |paths: &[PathBuf]| paths.iter().map(|p| p.display().to_string()).collect();
    let tracks: Vec<String> = paths(&arguments.tracks);
    let tables: Vec<String> = paths(&arguments.tables);
    words.extend(tables);
    option(&mut words, "tracks", &tracks);
    option(&mut words, "column", arguments.columns.renamed());
    option(&mut words, "features", &arguments.features);
    option(&mut words, "normalization", &arguments.normalization);
    option(&mut words, "classifier", &arguments.classifier);
    option(&mut words, "vowels", &arguments.vowels);
    option(&mut words, "penalty", &[arguments.penalty.to_string()]);
    option(&mut words, "modes", &[arguments.modes.to_string()]);
    option(
        &mut words,
        "leave-out",
        std::slice::from_ref(&arguments.leave_out),
    );
    option(&mut words, "seed", &[arguments.seed.to_string()]);
    option(&mut words, "name", arguments.name.as_slice());
    if let Some(out) = &arguments.out {
        option(&mut words, "out", &[out.display().to_string()]);
    }
    words.join(" ")
}
