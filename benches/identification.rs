//! How identification holds up on speakers as surveys have them: one token, a few vowels, unequal
//! numbers, a vowel nobody trained. Prints a table; asserts nothing.
//!
//!     cargo bench --bench identification -- TOKENS.csv TRACKS.csv PETERSON-BARNEY.csv
//!
//! The first two are a run's own measurements of `hvd-words`, the third the published tokens. Every
//! figure is of speakers left out of the training: one at a time, or a tenth of them where a line
//! says so.

use std::collections::BTreeMap;
use std::path::Path;

use isophone::identify::{
    Calibration, Feature, Identification, Kind, Model, Samples, Trained, TrainingRecord,
    USUAL_MODES, USUAL_PENALTY, identify_with, leave_one_speaker_out,
};
use isophone::normalize::Method;
use isophone::tables::{ObservationColumns, ObservationTable, TrackTable};
use isophone::tokens::Observation;
use isophone::vowel::Vowel;
use rand::seq::SliceRandom;
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64Mcg;
use rayon::prelude::*;

/// A model to be trained: its name, classifier, normalization and columns.
#[derive(Clone, Copy)]
struct Recipe {
    name: &'static str,
    kind: Kind,
    method: &'static str,
    features: &'static str,
}

const MOVEMENT: Recipe = Recipe {
    name: "Lobanov, logistic",
    kind: Kind::Logistic {
        penalty: USUAL_PENALTY,
    },
    method: "lobanov",
    features: "f1_norm@0.2,f2_norm@0.2,f3_norm@0.2,f1_norm@0.8,f2_norm@0.8,f3_norm@0.8,ln_duration",
};

const SPARSE: Recipe = Recipe {
    name: "template",
    kind: Kind::Template { modes: USUAL_MODES },
    method: "ln",
    features: "f1_norm@0.2,f2_norm@0.2,f3_norm@0.2,f1_norm@0.8,f2_norm@0.8,f3_norm@0.8,ln_seconds,f0_norm",
};

const STEADY: Recipe = Recipe {
    name: "Lobanov, logistic",
    kind: Kind::Logistic {
        penalty: USUAL_PENALTY,
    },
    method: "lobanov",
    features: "f1_norm,f2_norm,f3_norm",
};

const SPARSE_STEADY: Recipe = Recipe {
    name: "template",
    kind: Kind::Template { modes: USUAL_MODES },
    method: "ln",
    features: "f1_norm,f2_norm,f3_norm,f0_norm",
};

impl Recipe {
    fn features(&self) -> Vec<Feature> {
        self.features
            .split(',')
            .map(|name| name.parse().expect("a feature"))
            .collect()
    }

    fn train(&self, observations: &[Observation]) -> Model {
        let method: Method = self.method.parse().expect("a method");
        let samples = Samples::gather(&self.features(), &method, &[observations]);
        Model {
            name: self.name.to_owned(),
            kind: self.kind,
            features: self.features(),
            normalization: method,
            vowels: samples.vowels.clone(),
            trained: Trained::fit(self.kind, &samples).expect("a fit"),
            calibration: Calibration::NONE,
            record: TrainingRecord::default(),
        }
    }
}

fn main() {
    let paths: Vec<String> = std::env::args()
        .skip(1)
        .filter(|word| !word.starts_with("--"))
        .collect();
    let [tokens, tracks, published] = paths.as_slice() else {
        println!("needs TOKENS.csv TRACKS.csv PETERSON-BARNEY.csv, see the head of the file");
        return;
    };
    let own = read(tokens, Some(tracks), &[]);
    let published = read(
        published,
        None,
        &[
            ("speaker", "talker"),
            ("vowel", "ipa"),
            ("f0_hz", "f0"),
            ("f1_hz", "f1"),
            ("f2_hz", "f2"),
            ("f3_hz", "f3"),
        ],
    );
    for (name, observations, whole, sparse) in [
        ("own measurements", &own, MOVEMENT, SPARSE),
        ("published tokens", &published, STEADY, SPARSE_STEADY),
    ] {
        println!("\n{name}: {} tokens", observations.len());
        cuts(observations, whole, sparse);
    }
    let without_bars: Vec<Observation> = own
        .iter()
        .map(|o| Observation {
            sd_hz: [None; 3],
            ..o.clone()
        })
        .collect();
    println!("\nown measurements without their error bars");
    cuts(&without_bars, MOVEMENT, SPARSE);
    println!("\nown measurements: a vowel left out of training (speakers left out by tenths)");
    for recipe in [SPARSE, MOVEMENT] {
        strangers(&own, recipe);
    }
    println!("the same without error bars");
    for recipe in [SPARSE, MOVEMENT] {
        strangers(&without_bars, recipe);
    }
}

/// What a held-out speaker is cut down to; the draw is repeated.
type Cut = fn(&[Observation], &mut Pcg64Mcg) -> Vec<Observation>;

fn cuts(observations: &[Observation], whole: Recipe, sparse: Recipe) {
    let speakers = by_speaker(observations);
    let trained: Vec<(&str, Model, Model)> = speakers
        .par_iter()
        .map(|(speaker, _)| {
            let others: Vec<Observation> = observations
                .iter()
                .filter(|o| o.speaker != *speaker)
                .cloned()
                .collect();
            (*speaker, whole.train(&others), sparse.train(&others))
        })
        .collect();
    let rows: [(&str, usize, Cut); 8] = [
        ("all tokens", 1, |all, _| all.to_vec()),
        ("one token", 1, |all, _| all.to_vec()),
        ("2 vowels, one token each", 4, |all, random| {
            few(all, 2, random)
        }),
        ("4 vowels, one token each", 4, |all, random| {
            few(all, 4, random)
        }),
        ("6 vowels, one token each", 4, |all, random| {
            few(all, 6, random)
        }),
        ("8 vowels, one token each", 4, |all, random| {
            few(all, 8, random)
        }),
        ("10 vowels, one token each", 4, |all, random| {
            few(all, 10, random)
        }),
        ("1 to 12 tokens a vowel", 4, unequal),
    ];
    println!(
        "    {:<28}{:>20}{:>12}{:>24}",
        "held-out speaker has", "Lobanov, logistic %", "template %", "as the program picks %"
    );
    for (name, draws, cut) in rows {
        let mut right = [Share::default(); 3];
        for (speaker, whole, sparse) in &trained {
            let mut random = Pcg64Mcg::seed_from_u64(1);
            for _ in 0..draws {
                let tokens = cut(&speakers[speaker], &mut random);
                let sets: Vec<Vec<Observation>> = if name == "one token" {
                    tokens.into_iter().map(|token| vec![token]).collect()
                } else {
                    vec![tokens]
                };
                for set in sets {
                    let both = [whole.clone(), sparse.clone()];
                    right[0].count(&set, &forced(whole, &set));
                    right[1].count(&set, &sparse.identify(&set));
                    right[2].count(&set, &identify_with(&both, &set));
                }
            }
        }
        let [a, b, c] = right.map(|share| share.percent());
        println!("    {name:<28}{a:>20.1}{b:>12.1}{c:>24.1}");
    }
}

/// The answers of a model that is not asked whether the speaker has enough: as if nobody looked.
fn forced(model: &Model, set: &[Observation]) -> Vec<Identification> {
    let samples = Samples::gather(&model.features, &model.normalization, &[set]);
    let rows: Vec<&[f64]> = samples.rows.iter().map(Vec::as_slice).collect();
    let variance: Vec<&[f64]> = samples.variance.iter().map(Vec::as_slice).collect();
    if rows.len() != set.len() {
        return model.identify(set);
    }
    // Rows stand in the order of the observations.
    model
        .trained
        .answers(&rows, &variance)
        .into_iter()
        .zip(set)
        .map(|(answer, observation)| {
            let best = answer.and_then(|answer| {
                let ln_p = answer.ln_probability.into_iter().enumerate();
                ln_p.max_by(|a, b| a.1.total_cmp(&b.1))
                    .map(|(class, _)| class)
            });
            Identification {
                token: observation.token.clone(),
                ranked: Ok(best
                    .map(|class| (model.vowels[class].clone(), 1.0))
                    .into_iter()
                    .collect()),
                model: model.name.clone(),
            }
        })
        .collect()
}

/// Tokens identified as labelled, each vowel of a set counting once.
#[derive(Clone, Copy, Default)]
struct Share {
    right: f64,
    all: f64,
}

impl Share {
    fn count(&mut self, set: &[Observation], answers: &[Identification]) {
        let mut vowels: BTreeMap<&Vowel, (f64, f64)> = BTreeMap::new();
        for (observation, answer) in set.iter().zip(answers) {
            let label = observation.vowel.as_ref().expect("a label");
            let ranked = answer.ranked.as_deref().unwrap_or_default();
            let counts = vowels.entry(label).or_default();
            counts.0 += f64::from(u8::from(ranked.first().is_some_and(|(v, _)| v == label)));
            counts.1 += 1.0;
        }
        for (right, all) in vowels.into_values() {
            self.right += right / all;
            self.all += 1.0;
        }
    }

    fn percent(self) -> f64 {
        100.0 * self.right / self.all
    }
}

/// One token of each of so many vowels drawn at random.
fn few(all: &[Observation], vowels: usize, random: &mut Pcg64Mcg) -> Vec<Observation> {
    let mut shuffled: Vec<&Observation> = all.iter().collect();
    shuffled.shuffle(random);
    let mut seen = std::collections::BTreeSet::new();
    let one_each = shuffled
        .into_iter()
        .filter(|o| seen.insert(o.vowel.clone()));
    renamed(one_each.take(vowels))
}

/// One to twelve tokens of each vowel, drawn with replacement.
fn unequal(all: &[Observation], random: &mut Pcg64Mcg) -> Vec<Observation> {
    let mut of_vowel: BTreeMap<&Vowel, Vec<&Observation>> = BTreeMap::new();
    for observation in all {
        let vowel = observation.vowel.as_ref().expect("a label");
        of_vowel.entry(vowel).or_default().push(observation);
    }
    let mut drawn = Vec::new();
    for tokens in of_vowel.values() {
        for _ in 0..random.random_range(1..=12) {
            drawn.push(tokens[random.random_range(0..tokens.len())]);
        }
    }
    renamed(drawn.into_iter())
}

/// Copies with names of their own.
fn renamed<'a>(tokens: impl Iterator<Item = &'a Observation>) -> Vec<Observation> {
    tokens
        .enumerate()
        .map(|(n, token)| Observation {
            token: n.to_string(),
            ..token.clone()
        })
        .collect()
}

/// How many tokens of a vowel nobody trained are called unlike any, and how many of the others, the
/// bound being that of the training speakers' own held-out tokens.
fn strangers(observations: &[Observation], recipe: Recipe) {
    const TENTHS: usize = 10;
    let vowels: std::collections::BTreeSet<Vowel> = observations
        .iter()
        .filter_map(|o| o.vowel.clone())
        .collect();
    let method: Method = recipe.method.parse().expect("a method");
    let speakers: Vec<&str> = by_speaker(observations).into_keys().collect();
    let tenth = |o: &Observation| {
        speakers
            .iter()
            .position(|s| *s == o.speaker)
            .unwrap_or_default()
            % TENTHS
    };
    let found: Vec<(Vowel, [usize; 4])> = vowels
        .into_iter()
        .collect::<Vec<_>>()
        .into_par_iter()
        .map(|vowel| {
            let mut counts = [0; 4];
            for part in 0..TENTHS {
                let training: Vec<Observation> = observations
                    .iter()
                    .filter(|o| tenth(o) != part && o.vowel.as_ref() != Some(&vowel))
                    .cloned()
                    .collect();
                let samples = Samples::gather(&recipe.features(), &method, &[&training]);
                let held_out = leave_one_speaker_out(recipe.kind, &samples).expect("a fit");
                let mut model = recipe.train(&training);
                model.calibration = Calibration::fit(held_out.rows.iter());
                let test: Vec<Observation> = observations
                    .iter()
                    .filter(|o| tenth(o) == part)
                    .cloned()
                    .collect();
                for (o, answer) in test.iter().zip(model.identify(&test)) {
                    let strange = usize::from(answer.ranked.is_err());
                    let place = if o.vowel.as_ref() == Some(&vowel) {
                        0
                    } else {
                        2
                    };
                    counts[place] += strange;
                    counts[place + 1] += 1;
                }
            }
            (vowel, counts)
        })
        .collect();
    let percent = |part: usize, all: usize| 100.0 * part as f64 / all as f64;
    print!("    {}:", recipe.name);
    for (vowel, [strange, all, ..]) in &found {
        print!(" {vowel} {:.0}", percent(*strange, *all));
    }
    let total = found
        .iter()
        .fold([0; 4], |sum, (_, c)| [0, 1, 2, 3].map(|n| sum[n] + c[n]));
    println!(
        "\n        unlike any: {:.1} % of the left-out vowels' tokens, {:.1} % of the others",
        percent(total[0], total[1]),
        percent(total[2], total[3])
    );
}

fn by_speaker(observations: &[Observation]) -> BTreeMap<&str, Vec<Observation>> {
    let mut speakers: BTreeMap<&str, Vec<Observation>> = BTreeMap::new();
    for observation in observations {
        let own = speakers.entry(&observation.speaker).or_default();
        own.push(observation.clone());
    }
    speakers
}

fn read(path: &str, tracks: Option<&str>, renamed: &[(&str, &str)]) -> Vec<Observation> {
    let bytes = |path: &str| std::fs::read(Path::new(path)).expect("a file");
    let mut columns = ObservationColumns::as_named();
    for (name, column) in renamed {
        columns.rename(name, column).expect("a column");
    }
    let mut table = ObservationTable::parse(&bytes(path), &columns).expect("a table");
    if let Some(tracks) = tracks {
        let tracks = TrackTable::parse(&bytes(tracks)).expect("tracks");
        table.add_tracks(&tracks).expect("the table's tracks");
    }
    table.observations.into_iter().flatten().collect()
}
