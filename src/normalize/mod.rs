//! Observations of one speaker to values without the speaker's size.
//!
//! A [`Method`] is fitted to the observations of a survey and gives each speaker a
//! [`SpeakerScale`], or says what the speaker [`Lacks`]. The scale applies to any value of that
//! speaker, also at other moments of the vowel. Each method's file gives formula, needs, pitfalls
//! and source; [`Method::account`] gives the same to people.

mod advise;
mod anae;
mod auditory;
mod corners;
mod gerstman;
mod lobanov;
mod method;
mod nearey;
mod regression;
mod scale;
mod speaker;
mod tube;

use std::collections::{BTreeMap, BTreeSet};

use crate::tokens::Observation;
use crate::vowel::Vowel;

pub use advise::{Advice, Coverage, advise};
pub use auditory::{BACKNESS_BARK, HEIGHT_BARK};
pub use corners::Version;
pub use lobanov::Deviation;
pub use method::{Account, Formants, Method, MethodError, Over};
pub use regression::{RegressionFit, fit_regression};
pub use scale::{AuditoryScale, SpeakerScale, Values};
pub use speaker::{MeanFormants, SpeakerTokens};
pub use tube::{TractSize, tract_size};

/// What a speaker lacks for a method.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum Lacks {
    /// Fewer values of a formant than the method needs.
    #[error("{found} values of F{formant}, where at least {needed} are needed")]
    Values {
        /// Which formant, 1 to 3.
        formant: u8,
        /// How many there are.
        found: usize,
        /// How many are needed.
        needed: usize,
    },
    /// All values of a formant are the same.
    #[error("all values of F{formant} are the same")]
    Spread {
        /// Which formant, 1 to 3.
        formant: u8,
    },
    /// No token of a vowel the method is anchored to.
    #[error("no token of the vowel `{0}`")]
    CornerVowel(String),
    /// No vowel labels.
    #[error("no vowel labels")]
    Labels,
    /// No fundamental frequency.
    #[error("no fundamental frequency")]
    F0,
    /// No vowel in common with the other speakers.
    #[error("no vowel in common with the other speakers")]
    Connection,
}

/// A token's formants with the speaker's size taken out.
#[derive(Debug, Clone, PartialEq)]
pub struct NormalizedToken {
    /// Name of the token.
    pub token: String,
    /// The normalized F1 to F3, in the unit of the method.
    pub value: [Option<f64>; 3],
    /// Standard errors of the normalized values, where those of the hertz values are known.
    pub sd: [Option<f64>; 3],
}

/// A method fitted to the speakers of a survey.
#[derive(Debug, Clone, PartialEq)]
pub struct Normalization {
    /// The method.
    pub method: Method,
    /// Every speaker's scale, or what the speaker lacks.
    pub scales: BTreeMap<String, Result<SpeakerScale, Lacks>>,
    /// For methods that need the whole vowel set: the vowels of the survey each speaker has no
    /// token of. Speakers who have all are not listed.
    pub missing_vowels: BTreeMap<String, Vec<Vowel>>,
}

impl Normalization {
    /// Fits a method to all observations of a survey; they may stand in any order.
    pub fn fit(method: &Method, observations: &[Observation]) -> Self {
        let speakers = SpeakerTokens::of(observations);
        let scales = match method {
            Method::RegressionLogMean => regression::scales(observations),
            Method::WattFabricius(version) => corners::scales(*version, &speakers),
            _ => speakers
                .iter()
                .map(|(name, tokens)| (name.clone(), method.fit_speaker(tokens)))
                .collect(),
        };
        let missing_vowels = if method.account().whole_vowel_set {
            missing_vowels(&speakers)
        } else {
            BTreeMap::new()
        };
        Self {
            method: method.clone(),
            scales,
            missing_vowels,
        }
    }

    /// Normalizes one observation; all `None` where its speaker has no scale.
    pub fn normalize(&self, observation: &Observation) -> NormalizedToken {
        let values = Values::of(observation);
        let (value, sd) = match self.scales.get(&observation.speaker) {
            Some(Ok(scale)) => (
                scale.apply(&values),
                scale.apply_sd(&values, &observation.sd_hz),
            ),
            _ => ([None; 3], [None; 3]),
        };
        NormalizedToken {
            token: observation.token.clone(),
            value,
            sd,
        }
    }
}

/// The vowels of the survey that each speaker has no token of.
fn missing_vowels(speakers: &BTreeMap<String, SpeakerTokens<'_>>) -> BTreeMap<String, Vec<Vowel>> {
    let all: BTreeSet<&Vowel> = speakers.values().flat_map(SpeakerTokens::vowels).collect();
    speakers
        .iter()
        .filter_map(|(name, tokens)| {
            let has: BTreeSet<&Vowel> = tokens.vowels().collect();
            let missing: Vec<Vowel> = all.difference(&has).map(|v| (*v).clone()).collect();
            (!missing.is_empty()).then(|| (name.clone(), missing))
        })
        .collect()
}

#[cfg(test)]
mod worked_speaker;
