//! Which of several models answers for a token.

use std::collections::BTreeMap;

use crate::tokens::Observation;

use super::classifier::Kind;
use super::model::{Declined, Identification, Model};
use super::trained::Answer;

/// A speaker's tokens count as spread over the vowel set when the vowels they are taken for are as
/// many, evenly counted, as this share of the model's (exponential of the entropy). Twelve vowels
/// once each give 1, or 0.89 with one of them mistaken for another; ten of twelve give 0.83, and
/// there the whole-set normalization loses four points on speakers left out.
const EVEN: f64 = 0.88;

/// And when the counts vary no more than this (variance over mean). Twelve vowels once each, two of
/// them mistaken, give 0.3; one to twelve tokens a vowel at random give about 1.8.
const UNEQUAL: f64 = 0.5;

/// Asks several models about a survey, best first: each token gets the answer of the first model
/// that has one, or the last model's reason for declining.
///
/// A model whose normalization needs the whole vowel set is only asked about speakers whose tokens
/// are spread over it, as far as the first template among the models can tell without looking at
/// labels. A token that a model finds unlike any of its vowels is not passed on to the next.
pub fn identify_with(models: &[Model], observations: &[Observation]) -> Vec<Identification> {
    let judges: Vec<(&Model, Vec<Result<Answer, Declined>>)> = models
        .iter()
        .filter(|model| matches!(model.kind, Kind::Template { .. }))
        .map(|model| (model, model.outcomes(observations)))
        .collect();
    let spread = spread(&judges, observations);
    let mut answers: Vec<Identification> = Vec::new();
    for model in models {
        let judged = judges.iter().find(|(judge, _)| judge.name == model.name);
        let outcomes = match judged {
            Some((_, outcomes)) => outcomes.clone(),
            None => model.outcomes(observations),
        };
        let next: Vec<Identification> = outcomes
            .into_iter()
            .zip(observations)
            .map(|(outcome, observation)| {
                let uneven = model.needs_whole_set()
                    && spread.get(observation.speaker.as_str()) == Some(&Spread::Uneven);
                Identification {
                    token: observation.token.clone(),
                    ranked: if uneven {
                        Err(Declined::Uneven)
                    } else {
                        outcome.and_then(|answer| model.stated(&answer))
                    },
                    model: model.name.clone(),
                }
            })
            .collect();
        if answers.is_empty() {
            answers = next;
            continue;
        }
        for (answer, next) in answers.iter_mut().zip(next) {
            let open = match &answer.ranked {
                Ok(_) | Err(Declined::UnlikeAny) => false,
                Err(_) => true,
            };
            if open {
                *answer = next;
            }
        }
    }
    answers
}

/// How a speaker's tokens lie over the vowels of a model.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Spread {
    /// All vowels, in about equal numbers.
    Even,
    /// Some missing, or some much more often than others.
    Uneven,
}

/// How each speaker's tokens are spread over a template's vowels; speakers no template has an answer
/// for are not listed.
fn spread<'a>(
    judges: &[(&Model, Vec<Result<Answer, Declined>>)],
    observations: &'a [Observation],
) -> BTreeMap<&'a str, Spread> {
    let mut expected: BTreeMap<&str, Vec<f64>> = BTreeMap::new();
    for (place, observation) in observations.iter().enumerate() {
        let judged = judges.iter().find_map(|(model, outcomes)| {
            let answer = outcomes[place].as_ref().ok()?;
            Some(model.calibration.apply(&answer.ln_probability))
        });
        if let Some(ln_p) = judged {
            let counts = expected
                .entry(&observation.speaker)
                .or_insert_with(|| vec![0.0; ln_p.len()]);
            // Templates of one survey's models know the same vowels, or the longer list is kept.
            counts.resize(counts.len().max(ln_p.len()), 0.0);
            for (count, ln_p) in counts.iter_mut().zip(ln_p) {
                *count += ln_p.exp();
            }
        }
    }
    expected
        .into_iter()
        .map(|(speaker, counts)| (speaker, Spread::of(&counts)))
        .collect()
}

impl Spread {
    /// From the expected number of tokens of each vowel.
    fn of(counts: &[f64]) -> Self {
        let (n, total) = (counts.len() as f64, counts.iter().sum::<f64>());
        let shares = counts.iter().map(|c| c / total);
        let entropy: f64 = shares.filter(|p| *p > 0.0).map(|p| -p * p.ln()).sum();
        let mean = total / n;
        let variance = counts.iter().map(|c| (c - mean).powi(2)).sum::<f64>() / n;
        if entropy.exp() / n >= EVEN && variance / mean <= UNEQUAL {
            Self::Even
        } else {
            Self::Uneven
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn whole_sets_are_even_and_others_are_not() {
        let mut counts = [1.0; 12];
        assert_eq!(Spread::of(&counts), Spread::Even);
        (counts[0], counts[1]) = (2.0, 0.0);
        assert_eq!(Spread::of(&counts), Spread::Even);
        (counts[0], counts[1]) = (0.0, 0.0);
        assert_eq!(Spread::of(&counts), Spread::Uneven);
        let unequal: Vec<f64> = (1..=12).map(f64::from).collect();
        assert_eq!(Spread::of(&unequal), Spread::Uneven);
        assert_eq!(Spread::of(&[5.0; 12]), Spread::Even);
    }
}
