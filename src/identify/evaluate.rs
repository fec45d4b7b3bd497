//! How well a classifier does on speakers it has not seen.

use rand::Rng;
use rand::SeedableRng;
use rand_pcg::Pcg64Mcg;
use rayon::prelude::*;

use crate::vowel::Vowel;

use super::classifier::{Classifier, Kind};
use super::logistic::FitError;
use super::samples::Samples;

/// What was said about one held-out row.
#[derive(Debug, Clone, PartialEq)]
pub struct HeldOut {
    /// The row's speaker, as a place in the samples' list.
    pub speaker: usize,
    /// Its class.
    pub class: usize,
    /// Natural logarithms of the probabilities.
    pub ln_probability: Vec<f64>,
}

/// A classifier tried on speakers left out of its training, fold by fold.
#[derive(Debug, Clone, PartialEq)]
pub struct Evaluation {
    /// The vowels.
    pub vowels: Vec<Vowel>,
    /// Every row, once.
    pub rows: Vec<HeldOut>,
    /// Labelled observations that lacked a column, as (speaker, class). They count as wrong.
    pub incomplete: Vec<(usize, usize)>,
    /// Rows of speakers whose fold could not be fitted, counted as wrong with the others.
    pub unfitted: usize,
}

/// A share with its interval.
#[derive(Debug, Clone, Copy, PartialEq)]
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

/// Leaves out each fold of speakers in turn: trains on the others, asks about those left out.
///
/// `fold` gives each speaker's fold; for leaving one speaker out, the speaker's own place.
///
/// # Errors
/// [`FitError`] where not even all rows together can be fitted.
pub fn evaluate(
    kind: Kind,
    samples: &Samples,
    fold: &(dyn Fn(usize) -> usize + Sync),
) -> Result<Evaluation, FitError> {
    let whole = Classifier::fit(kind, samples)?;
    let mut folds: Vec<usize> = (0..samples.speakers.len()).map(fold).collect();
    folds.sort_unstable();
    folds.dedup();
    let answers: Vec<(Vec<HeldOut>, usize)> = folds
        .par_iter()
        .map(|left_out| {
            let training = samples.only(|speaker| fold(speaker) != *left_out);
            let test = samples.only(|speaker| fold(speaker) == *left_out);
            match Classifier::fit_from(kind, &training, Some(&whole)) {
                Ok(classifier) => (answers(&classifier, &test), 0),
                Err(_) => (Vec::new(), test.rows.len()),
            }
        })
        .collect();
    Ok(Evaluation {
        vowels: samples.vowels.clone(),
        unfitted: answers.iter().map(|(_, unfitted)| unfitted).sum(),
        rows: answers.into_iter().flat_map(|(rows, _)| rows).collect(),
        incomplete: samples.incomplete.clone(),
    })
}

/// Leaves out one speaker at a time.
///
/// # Errors
/// As [`evaluate`].
pub fn leave_one_speaker_out(kind: Kind, samples: &Samples) -> Result<Evaluation, FitError> {
    evaluate(kind, samples, &|speaker| speaker)
}

/// What a classifier says about rows it was not trained on.
pub fn answers(classifier: &Classifier, test: &Samples) -> Vec<HeldOut> {
    (0..test.rows.len())
        .map(|row| HeldOut {
            speaker: test.speaker[row],
            class: test.class[row],
            ln_probability: classifier.ln_probabilities(&test.rows[row]),
        })
        .collect()
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
        let tokens = tokens + self.unfitted;
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
