//! A classifier with everything needed to use it again, and what it says about a survey.

use std::collections::BTreeMap;

use crate::normalize::{Lacks, Method};
use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::calibration::{Calibration, Reliability};
use super::classifier::Kind;
use super::evaluate::{Accuracy, Evaluation};
use super::feature::{Feature, FeatureTable};
use super::logistic::FitError;
use super::samples::Samples;
use super::trained::{Answer, Trained};

/// A trained model.
#[derive(Debug, Clone, PartialEq)]
pub struct Model {
    /// Its name, as the tables give it.
    pub name: String,
    /// Kind of classifier and its settings.
    pub kind: Kind,
    /// The columns, in order.
    pub features: Vec<Feature>,
    /// How the speaker's size is taken out.
    pub normalization: Method,
    /// The vowels it knows, sorted.
    pub vowels: Vec<Vowel>,
    /// The fitted classifier.
    pub trained: Trained,
    /// What its raw answers are worth.
    pub calibration: Calibration,
    /// How it came to be.
    pub record: TrainingRecord,
}

/// How a model came to be.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct TrainingRecord {
    /// Version of the program that trained it.
    pub program: String,
    /// One line for each table: its name, what it holds, a hash of its bytes.
    pub data: Vec<String>,
    /// The command, so that anyone with the data can repeat it.
    pub command: String,
    /// Tokens it was fitted to.
    pub tokens: usize,
    /// Labelled tokens without an answer: a column or the normalization was lacking.
    pub left_out: usize,
    /// Speakers.
    pub speakers: usize,
    /// Seed of the interval.
    pub seed: u64,
    /// What was held out: `one speaker at a time`.
    pub held_out: String,
    /// Accuracy on the held out.
    pub accuracy: Accuracy,
    /// Confusion on the held out: rows labels, columns answers, in the order of the vowels.
    pub confusion: Vec<Vec<usize>>,
    /// How often stated probabilities came true on held-out speakers, calibrated on others.
    pub reliability: Vec<Reliability>,
}

/// What a model says about one token.
#[derive(Debug, Clone, PartialEq)]
pub struct Identification {
    /// Name of the token.
    pub token: String,
    /// Every vowel of the model with its probability, the most probable first; or why the model
    /// declined.
    pub ranked: Result<Vec<(Vowel, f64)>, Declined>,
    /// Name of the model that answered or declined.
    pub model: String,
}

/// Why a model says nothing about a token.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum Declined {
    /// A value is missing.
    #[error("no value for {0}")]
    Missing(String),
    /// The speaker has too little for the normalization.
    #[error("the speaker has {0}")]
    Speaker(Lacks),
    /// The speaker has too few tokens to stand for the vowel set.
    #[error("the speaker has {found} tokens, where the normalization needs at least {needed}")]
    FewTokens {
        /// Tokens of the speaker.
        found: usize,
        /// Fewest that are taken.
        needed: usize,
    },
    /// The speaker's tokens are not spread over the vowel set.
    #[error(
        "the speaker's tokens are not spread evenly over the vowel set, which the normalization needs"
    )]
    Uneven,
    /// The token is like none of the model's vowels.
    #[error("unlike any vowel of the model")]
    UnlikeAny,
}

/// Fewest tokens of a speaker from which mean and deviation are taken, for the normalizations that
/// need the whole vowel set.
pub const FEWEST_TOKENS: usize = 8;

impl Model {
    /// Trains a model on labelled observations, calibrated on what an evaluation held out.
    ///
    /// # Errors
    /// [`FitError`] where the samples do not allow it.
    pub fn train(
        name: &str,
        kind: Kind,
        normalization: &Method,
        samples: &Samples,
        evaluation: &Evaluation,
        record: TrainingRecord,
    ) -> Result<Self, FitError> {
        Ok(Self {
            name: name.to_owned(),
            kind,
            features: samples.features.clone(),
            normalization: normalization.clone(),
            vowels: samples.vowels.clone(),
            trained: Trained::fit(kind, samples)?,
            calibration: Calibration::fit(evaluation.rows.iter()),
            record,
        })
    }

    /// Whether the model takes the size out by a normalization that needs the whole vowel set.
    pub fn needs_whole_set(&self) -> bool {
        self.normalization.account().whole_vowel_set
    }

    /// Says what the tokens of a survey are; the order is that of the observations.
    ///
    /// Normalization and template look at all tokens of a speaker, so all should be given together.
    pub fn identify(&self, observations: &[Observation]) -> Vec<Identification> {
        self.outcomes(observations)
            .into_iter()
            .zip(observations)
            .map(|(outcome, observation)| Identification {
                token: observation.token.clone(),
                ranked: outcome.and_then(|answer| self.stated(&answer)),
                model: self.name.clone(),
            })
            .collect()
    }

    /// Raw answers to the tokens of a survey, in the order of the observations.
    pub(super) fn outcomes(&self, observations: &[Observation]) -> Vec<Result<Answer, Declined>> {
        let table = FeatureTable::fit(&self.features, &self.normalization, observations);
        let mut by_speaker: BTreeMap<&str, Vec<usize>> = BTreeMap::new();
        for (place, observation) in observations.iter().enumerate() {
            let places = by_speaker.entry(&observation.speaker).or_default();
            places.push(place);
        }
        let mut outcomes: Vec<Result<Answer, Declined>> =
            vec![Err(Declined::Uneven); observations.len()];
        for places in by_speaker.values() {
            let speaker: Vec<&Observation> = places.iter().map(|p| &observations[*p]).collect();
            for (place, outcome) in places.iter().zip(self.of_speaker(&table, &speaker)) {
                outcomes[*place] = outcome;
            }
        }
        outcomes
    }

    fn of_speaker(
        &self,
        table: &FeatureTable,
        speaker: &[&Observation],
    ) -> Vec<Result<Answer, Declined>> {
        let found = speaker.len();
        if self.needs_whole_set() && found < FEWEST_TOKENS {
            let few = Declined::FewTokens {
                found,
                needed: FEWEST_TOKENS,
            };
            return vec![Err(few); found];
        }
        let rows: Vec<Result<Vec<f64>, Lacks>> = speaker.iter().map(|o| table.row(o)).collect();
        let variance: Vec<Vec<f64>> = speaker.iter().map(|o| table.variance(o)).collect();
        let known: Vec<usize> = (0..found).filter(|n| rows[*n].is_ok()).collect();
        let known_rows: Vec<&[f64]> = rows.iter().flatten().map(Vec::as_slice).collect();
        let known_variance: Vec<&[f64]> = known.iter().map(|n| variance[*n].as_slice()).collect();
        let mut answers = self
            .trained
            .answers(&known_rows, &known_variance)
            .into_iter();
        rows.iter()
            .map(|row| match row {
                Err(lack) => Err(Declined::Speaker(lack.clone())),
                Ok(row) => answers
                    .next()
                    .flatten()
                    .ok_or_else(|| Declined::Missing(table.missing(row).unwrap_or_default())),
            })
            .collect()
    }

    /// The stated answer: vowels with calibrated probabilities, the most probable first.
    pub(super) fn stated(&self, answer: &Answer) -> Result<Vec<(Vowel, f64)>, Declined> {
        if answer.strangeness > self.calibration.strangest {
            return Err(Declined::UnlikeAny);
        }
        let ln_p = self.calibration.apply(&answer.ln_probability);
        let mut ranked: Vec<(Vowel, f64)> = self
            .vowels
            .iter()
            .cloned()
            .zip(ln_p.into_iter().map(f64::exp))
            .collect();
        ranked.sort_by(|a, b| b.1.total_cmp(&a.1).then_with(|| a.0.cmp(&b.0)));
        Ok(ranked)
    }

    /// The labels of a survey that this model does not know, with the number of their tokens.
    pub fn unknown_labels(&self, observations: &[Observation]) -> Vec<(Vowel, usize)> {
        let mut counts = BTreeMap::new();
        for vowel in observations.iter().filter_map(|o| o.vowel.as_ref()) {
            if self.vowels.binary_search(vowel).is_err() {
                *counts.entry(vowel.clone()).or_insert(0) += 1;
            }
        }
        counts.into_iter().collect()
    }
}
