//! Which method fits a survey, and why.

use std::collections::{BTreeMap, BTreeSet};
use std::fmt;

use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::SpeakerTokens;
use super::lobanov::Deviation;
use super::method::{Formants, Method, Over};

/// What a survey's speakers offer a normalization.
#[derive(Debug, Clone, PartialEq)]
pub struct Coverage {
    /// Speakers.
    pub speakers: usize,
    /// Tokens with at least F1 and F2.
    pub tokens: usize,
    /// Of these, the ones without a vowel label.
    pub unlabelled: usize,
    /// Vowels that at least a tenth of the speakers have.
    pub vowels: usize,
    /// Speakers who have all of these.
    pub complete_speakers: usize,
    /// Over speakers, the middle value of the number of tokens of the commonest vowel over that of
    /// the rarest, among vowels the speaker has.
    pub imbalance: f64,
    /// Over speakers, the smallest number of tokens.
    pub fewest_tokens: usize,
}

/// A recommended method.
#[derive(Debug, Clone, PartialEq)]
pub struct Advice {
    /// The method.
    pub method: Method,
    /// What it was chosen on.
    pub coverage: Coverage,
    /// The reason, as a sentence.
    pub reason: String,
}

/// From this share of complete speakers on, the whole-set methods are advised: the odd incomplete
/// speaker is named by the program and can be looked at. Our choice.
const COMPLETE_SHARE: f64 = 0.95;

/// From this imbalance on, means over tokens lean toward the commonest vowels. Our choice; over
/// vowel means costs little where it is not needed.
const BALANCED: f64 = 2.0;

/// Without labels, fewer tokens than this give a speaker no mean to speak of. Our choice: about two
/// of each of ten vowels.
const ENOUGH_UNLABELLED: usize = 20;

impl Coverage {
    /// Counts a survey.
    pub fn of(observations: &[Observation]) -> Self {
        let speakers = SpeakerTokens::of(observations);
        let usable = |o: &&Observation| o.formant_hz[0].is_some() && o.formant_hz[1].is_some();
        let mut having: BTreeMap<&Vowel, usize> = BTreeMap::new();
        let mut counts: Vec<BTreeMap<&Vowel, usize>> = Vec::new();
        let mut tokens = 0;
        let mut unlabelled = 0;
        let mut fewest_tokens = usize::MAX;
        for speaker in speakers.values() {
            let mut own: BTreeMap<&Vowel, usize> = BTreeMap::new();
            let mut number = 0;
            for observation in speaker.iter().filter(usable) {
                number += 1;
                match &observation.vowel {
                    Some(vowel) => *own.entry(vowel).or_insert(0) += 1,
                    None => unlabelled += 1,
                }
            }
            tokens += number;
            fewest_tokens = fewest_tokens.min(number);
            for vowel in own.keys() {
                *having.entry(vowel).or_insert(0) += 1;
            }
            counts.push(own);
        }
        let common: BTreeSet<&Vowel> = having
            .iter()
            .filter(|(_, n)| **n * 10 >= speakers.len())
            .map(|(vowel, _)| *vowel)
            .collect();
        let complete_speakers = counts
            .iter()
            .filter(|own| !common.is_empty() && common.iter().all(|v| own.contains_key(v)))
            .count();
        let mut ratios: Vec<f64> = counts
            .iter()
            .filter_map(|own| {
                let most = own.values().max()?;
                let least = own.values().min()?;
                Some(*most as f64 / *least as f64)
            })
            .collect();
        ratios.sort_by(f64::total_cmp);
        Self {
            speakers: speakers.len(),
            tokens,
            unlabelled,
            vowels: common.len(),
            complete_speakers,
            imbalance: ratios.get(ratios.len() / 2).copied().unwrap_or(1.0),
            fewest_tokens: if speakers.is_empty() {
                0
            } else {
                fewest_tokens
            },
        }
    }
}

impl fmt::Display for Coverage {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "{} speakers, {} tokens ({} without a vowel label), {} vowels; {} speakers have every \
             vowel, the fewest tokens of a speaker are {}",
            self.speakers,
            self.tokens,
            self.unlabelled,
            self.vowels,
            self.complete_speakers,
            self.fewest_tokens,
        )
    }
}

/// Recommends the method that fits a survey.
///
/// *Source* of the ranking: Adank, Smits & van Hout 2004, J. Acoust. Soc. Am. 116, 3099-3107, and
/// Flynn & Foulkes 2011 (Proc. ICPhS XVII) for complete sets; Barreda & Nearey 2018 for missing and
/// unbalanced vowels. The thresholds are ours.
pub fn advise(observations: &[Observation]) -> Advice {
    let coverage = Coverage::of(observations);
    let labelled_share = 1.0 - coverage.unlabelled as f64 / coverage.tokens.max(1) as f64;
    let complete_share = coverage.complete_speakers as f64 / coverage.speakers.max(1) as f64;
    let (method, reason) = if labelled_share < 0.5 {
        if coverage.fewest_tokens >= ENOUGH_UNLABELLED {
            (
                Method::Lobanov(Deviation::NMinus1, Over::Tokens),
                "most tokens have no vowel label, and every speaker has enough tokens to stand for \
                 the whole vowel set"
                    .to_owned(),
            )
        } else {
            (
                Method::NeareyShared(Formants::F1F2F3, Over::Tokens),
                format!(
                    "most tokens have no vowel label, and one speaker has only {}: a single shift \
                     per speaker is the least that few tokens must carry",
                    coverage.fewest_tokens
                ),
            )
        }
    } else if complete_share < COMPLETE_SHARE {
        (
            Method::RegressionLogMean,
            format!(
                "{} of {} speakers lack at least one of the {} vowels, which moves their means; the \
                 regression holds the vowels constant",
                coverage.speakers - coverage.complete_speakers,
                coverage.speakers,
                coverage.vowels
            ),
        )
    } else if coverage.imbalance >= BALANCED {
        (
            Method::Lobanov(Deviation::NMinus1, Over::VowelMeans),
            format!(
                "the speakers have every vowel, but in unequal numbers (commonest to rarest {:.1} in \
                 the middle speaker), so each vowel is to count once",
                coverage.imbalance
            ),
        )
    } else {
        (
            Method::Lobanov(Deviation::NMinus1, Over::Tokens),
            "the speakers have every vowel in about equal numbers".to_owned(),
        )
    };
    Advice {
        method,
        coverage,
        reason,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn survey(speakers: usize, count: impl Fn(usize, usize) -> usize) -> Vec<Observation> {
        let mut observations = Vec::new();
        for speaker in 0..speakers {
            for (n, vowel) in ["i", "a", "u", "ɛ"].iter().enumerate() {
                for repetition in 0..count(speaker, n) {
                    observations.push(Observation {
                        token: format!("{speaker}-{vowel}-{repetition}"),
                        speaker: format!("s{speaker}"),
                        vowel: Some(Vowel::from_ipa(vowel)),
                        duration_s: None,
                        f0_hz: None,
                        formant_hz: [Some(500.0), Some(1500.0), Some(2500.0)],
                        sd_hz: [None; 3],
                        track: Vec::new(),
                    });
                }
            }
        }
        observations
    }

    #[test]
    fn the_survey_decides() {
        let complete = advise(&survey(10, |_, _| 5));
        assert_eq!(
            complete.method,
            Method::Lobanov(Deviation::NMinus1, Over::Tokens)
        );
        assert_eq!(complete.coverage.complete_speakers, 10);
        let unbalanced = advise(&survey(10, |_, n| 1 + 4 * n));
        assert_eq!(
            unbalanced.method,
            Method::Lobanov(Deviation::NMinus1, Over::VowelMeans)
        );
        let missing = advise(&survey(10, |s, n| usize::from(s % 2 == 0 || n > 1)));
        assert_eq!(missing.method, Method::RegressionLogMean);
        let mut hidden = survey(10, |_, _| 2);
        hidden.iter_mut().for_each(|o| o.vowel = None);
        let advice = advise(&hidden);
        assert_eq!(
            advice.method,
            Method::NeareyShared(Formants::F1F2F3, Over::Tokens)
        );
        assert_eq!(advice.coverage.unlabelled, 80);
        assert_eq!(advise(&[]).coverage.speakers, 0);
    }
}
