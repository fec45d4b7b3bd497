//! How well a classifier does on speakers it has not seen.

use rand::Rng;
use rand::SeedableRng;
use rand_pcg::Pcg64Mcg;
use rayon::prelude::*;

use crate::vowel::Vowel;

use super::classifier::Kind;
use super::logistic::FitError;
use super::samples::Samples;
use super::trained::Trained;

/// What was said about one held-out row.
#[derive(Debug, Clone, PartialEq)]
pub struct HeldOut {
    /// The row's speaker, as a place in the samples' list.
    pub speaker: usize,
    /// Its class.
    pub class: usize,
    /// Natural logarithms of the probabilities, before calibration.
    pub ln_probability: Vec<f64>,
    /// How unlike the nearest vowel it is.
    pub strangeness: f64,
}

/// A classifier tried on speakers left out of its training, fold by fold.
#[derive(Debug, Clone, PartialEq)]
pub struct Evaluation {
    /// The vowels.
    pub vowels: Vec<Vowel>,
    /// Every row that was answered, once.
    pub rows: Vec<HeldOut>,
    /// Labelled observations without an answer, as (speaker, class): a column or the normalization
    /// was lacking, or their fold could not be fitted. They count as wrong.
    pub incomplete: Vec<(usize, usize)>,
}

/// A share with its interval.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Accuracy {
    /// Share of tokens identified as labelled, 0 to 1.
    pub share: f64,
    /// Lower end of the 95 % interval over speakers.
    pub low: f64,
    /// Upper end.
    pub high: f64,
    /// Tokens identified as labelled.
    pub correct: usize,
    /// All tokens.
    pub tokens: usize,
    /// Speakers.
    pub speakers: usize,
}

/// Times the speakers are drawn for an interval; its ends then move by about a tenth of its width
/// from one seed to another.
const DRAWS: usize = 2000;

/// Leaves out each fold of rows in turn: trains on the others, asks about those left out.
///
/// `fold` gives the fold of each row. Rows of one speaker in one fold are asked about together.
///
/// # Errors
/// [`FitError`] where not even all rows together can be fitted.
pub fn evaluate(
    kind: Kind,
    samples: &Samples,
    fold: &(dyn Fn(usize) -> usize + Sync),
) -> Result<Evaluation, FitError> {
    let whole = Trained::fit(kind, samples)?;
    let of_row: Vec<usize> = (0..samples.rows.len()).map(fold).collect();
    let mut folds = of_row.clone();
    folds.sort_unstable();
    folds.dedup();
    let parts: Vec<Evaluation> = folds
        .par_iter()
        .map(|left_out| {
            let (test, training): (Vec<usize>, Vec<usize>) =
                (0..of_row.len()).partition(|row| of_row[*row] == *left_out);
            let test = samples.subset(&test);
            match Trained::fit_from(kind, &samples.subset(&training), Some(&whole)) {
                Ok(trained) => ask(&trained, &test),
                Err(_) => Evaluation {
                    vowels: Vec::new(),
                    rows: Vec::new(),
                    incomplete: test.speaker.iter().copied().zip(test.class).collect(),
                },
            }
        })
        .collect();
    let mut evaluation = Evaluation {
        vowels: samples.vowels.clone(),
        rows: Vec::new(),
        incomplete: samples.incomplete.clone(),
    };
    for part in parts {
        evaluation.rows.extend(part.rows);
        evaluation.incomplete.extend(part.incomplete);
    }
    Ok(evaluation)
}

/// Leaves out one speaker at a time.
///
/// # Errors
/// As [`evaluate`].
pub fn leave_one_speaker_out(kind: Kind, samples: &Samples) -> Result<Evaluation, FitError> {
    evaluate(kind, samples, &|row| samples.speaker[row])
}

/// Asks about rows, those of one speaker together.
pub fn ask(trained: &Trained, test: &Samples) -> Evaluation {
    let mut evaluation = Evaluation {
        vowels: test.vowels.clone(),
        rows: Vec::new(),
        incomplete: Vec::new(),
    };
    for (speaker, places) in test.by_speaker() {
        let rows: Vec<&[f64]> = places.iter().map(|p| test.rows[*p].as_slice()).collect();
        let variance: Vec<&[f64]> = places
            .iter()
            .map(|p| test.variance[*p].as_slice())
            .collect();
        for (place, answer) in places.iter().zip(trained.answers(&rows, &variance)) {
            let class = test.class[*place];
            match answer {
                Some(answer) => evaluation.rows.push(HeldOut {
                    speaker,
                    class,
                    ln_probability: answer.ln_probability,
                    strangeness: answer.strangeness,
                }),
                None => evaluation.incomplete.push((speaker, class)),
            }
        }
    }
    evaluation
}

impl HeldOut {
    /// The most probable class.
    pub fn answer(&self) -> usize {
        most_probable(&self.ln_probability)
    }
}

/// Place of the largest value; the first of equals.
pub(super) fn most_probable(ln_probability: &[f64]) -> usize {
    let mut best = 0;
    for (place, value) in ln_probability.iter().enumerate() {
        if *value > ln_probability[best] {
            best = place;
        }
    }
    best
}

impl Evaluation {
    /// The confusion table: rows are labels, columns answers, in the order of `vowels`. Tokens
    /// without an answer are in no column.
    pub fn confusion(&self) -> Vec<Vec<usize>> {
        let mut table = vec![vec![0; self.vowels.len()]; self.vowels.len()];
        for row in &self.rows {
            table[row.class][row.answer()] += 1;
        }
        table
    }

    /// Accuracy with a 95 % interval over speakers: speakers are drawn with replacement and the
    /// share taken anew, 2000 times (percentile bootstrap; Efron & Tibshirani 1993).
    pub fn accuracy(&self, seed: u64) -> Accuracy {
        let mut by_speaker: std::collections::BTreeMap<usize, (usize, usize)> = Default::default();
        for row in &self.rows {
            let counts = by_speaker.entry(row.speaker).or_default();
            counts.0 += usize::from(row.answer() == row.class);
            counts.1 += 1;
        }
        for (speaker, _) in &self.incomplete {
            by_speaker.entry(*speaker).or_default().1 += 1;
        }
        let counts: Vec<(usize, usize)> = by_speaker.into_values().collect();
        let total = |counts: &mut dyn Iterator<Item = (usize, usize)>| {
            counts.fold((0, 0), |(c, n), (correct, tokens)| {
                (c + correct, n + tokens)
            })
        };
        let (correct, tokens) = total(&mut counts.iter().copied());
        let share = |correct: usize, tokens: usize| correct as f64 / tokens.max(1) as f64;
        let mut random = Pcg64Mcg::seed_from_u64(seed);
        let mut drawn: Vec<f64> = (0..DRAWS)
            .map(|_| {
                let mut draw =
                    (0..counts.len()).map(|_| counts[random.random_range(0..counts.len())]);
                let (correct, tokens) = total(&mut draw);
                share(correct, tokens)
            })
            .collect();
        drawn.sort_by(f64::total_cmp);
        Accuracy {
            share: share(correct, tokens),
            low: drawn[DRAWS / 40],
            high: drawn[DRAWS - 1 - DRAWS / 40],
            correct,
            tokens,
            speakers: counts.len(),
        }
    }
}
