//! A classifier with everything needed to use it again, and what it says about a survey.

use crate::normalize::{Method, SpeakerTokens};
use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::classifier::{Classifier, Kind};
use super::evaluate::Accuracy;
use super::feature::{Feature, FeatureTable, NoFeatures};
use super::logistic::FitError;
use super::samples::Samples;

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
    pub classifier: Classifier,
    /// How it came to be.
    pub record: TrainingRecord,
}

/// How a model came to be.
#[derive(Debug, Clone, PartialEq)]
pub struct TrainingRecord {
    /// Version of the program that trained it.
    pub program: String,
    /// One line for each table: its name, what it holds, a hash of its bytes.
    pub data: Vec<String>,
    /// The command, so that anyone with the data can repeat it.
    pub command: String,
    /// Tokens it was fitted to.
    pub tokens: usize,
    /// Labelled tokens that lacked a column.
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
    /// A value is missing, or the speaker has too little for the normalization.
    #[error("{0}")]
    Features(NoFeatures),
    /// The speaker has too few tokens to stand for the vowel set.
    #[error("the speaker has {found} tokens, where the normalization needs at least {needed}")]
    FewTokens {
        /// Tokens of the speaker.
        found: usize,
        /// Fewest that are taken.
        needed: usize,
    },
}

/// Fewest tokens of a speaker from which mean and deviation are taken, for the normalizations that
/// need the whole vowel set.
pub const FEWEST_TOKENS: usize = 8;

impl Model {
    /// Trains a model on labelled observations; the record starts empty of what only the caller
    /// knows.
    ///
    /// # Errors
    /// [`FitError`] where the samples do not allow it.
    pub fn train(
        name: &str,
        kind: Kind,
        normalization: &Method,
        samples: &Samples,
        record: TrainingRecord,
    ) -> Result<Self, FitError> {
        Ok(Self {
            name: name.to_owned(),
            kind,
            features: samples.features.clone(),
            normalization: normalization.clone(),
            vowels: samples.vowels.clone(),
            classifier: Classifier::fit(kind, samples)?,
            record,
        })
    }

    /// Says what the tokens of a survey are; the order is that of the observations.
    ///
    /// The normalization is fitted to all observations given, so all tokens of a speaker should be
    /// given together.
    pub fn identify(&self, observations: &[Observation]) -> Vec<Identification> {
        let table = FeatureTable::fit(&self.features, &self.normalization, observations);
        let speakers = SpeakerTokens::of(observations);
        let whole_set = self.normalization.account().whole_vowel_set;
        observations
            .iter()
            .map(|observation| {
                let found = speakers[&observation.speaker].iter().count();
                let ranked = if whole_set && found < FEWEST_TOKENS {
                    Err(Declined::FewTokens {
                        found,
                        needed: FEWEST_TOKENS,
                    })
                } else {
                    table
                        .row(observation)
                        .map(|row| self.ranked(&row))
                        .map_err(Declined::Features)
                };
                Identification {
                    token: observation.token.clone(),
                    ranked,
                    model: self.name.clone(),
                }
            })
            .collect()
    }

    /// The vowels with their probabilities for one row, the most probable first.
    fn ranked(&self, row: &[f64]) -> Vec<(Vowel, f64)> {
        let mut ranked: Vec<(Vowel, f64)> = self
            .vowels
            .iter()
            .cloned()
            .zip(
                self.classifier
                    .ln_probabilities(row)
                    .into_iter()
                    .map(f64::exp),
            )
            .collect();
        ranked.sort_by(|a, b| b.1.total_cmp(&a.1).then_with(|| a.0.cmp(&b.0)));
        ranked
    }

    /// The labels of a survey that this model does not know, with the number of their tokens.
    pub fn unknown_labels(&self, observations: &[Observation]) -> Vec<(Vowel, usize)> {
        let mut counts = std::collections::BTreeMap::new();
        for vowel in observations.iter().filter_map(|o| o.vowel.as_ref()) {
            if self.vowels.binary_search(vowel).is_err() {
                *counts.entry(vowel.clone()).or_insert(0) += 1;
            }
        }
        counts.into_iter().collect()
    }
}

/// Asks several models about a survey, best first: each token gets the answer of the first model
/// that has one, or the last model's reason for declining.
pub fn identify_with(models: &[Model], observations: &[Observation]) -> Vec<Identification> {
    let mut answers: Vec<Identification> = Vec::new();
    for model in models {
        let next = model.identify(observations);
        if answers.is_empty() {
            answers = next;
            continue;
        }
        for (answer, next) in answers.iter_mut().zip(next) {
            if answer.ranked.is_err() {
                *answer = next;
            }
        }
    }
    answers
}
