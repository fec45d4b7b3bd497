//! Everything a report says about a survey, worked out once.

use crate::normalize::{Method, Normalization};
use crate::tokens::Observation;

use super::chart::{GroupVowel, Space, SpeakerVowel, group_vowels, spaces, speaker_vowels};
use super::contrast::{Contrast, contrasts};
use super::pairs::{GroupPair, pairs};
use super::panel::{Belonging, Panel};
use super::resample::Resampling;
use super::tally::{Fate, Tally};

/// What was found in a survey.
#[derive(Debug, Clone, PartialEq)]
pub struct Findings {
    /// Counts.
    pub tally: Tally,
    /// The tokens that enter comparisons.
    pub panel: Panel,
    /// Vowels of all speakers together.
    pub everybody: Vec<GroupVowel>,
    /// Vowels of each group, in the order of the panel's groups.
    pub groups: Vec<Vec<GroupVowel>>,
    /// Vowels of each speaker.
    pub speakers: Vec<SpeakerVowel>,
    /// Vowel spaces.
    pub spaces: Vec<Space>,
    /// Groups against each other.
    pub contrasts: Vec<Contrast>,
    /// Pairs of vowels.
    pub pairs: Vec<GroupPair>,
    /// How it was resampled.
    pub resampling: Resampling,
}

impl Findings {
    /// Works out everything.
    pub fn of(
        fates: &[Fate],
        observations: &[Observation],
        method: &Method,
        belonging: &Belonging,
        resampling: Resampling,
    ) -> Self {
        let normalization = Normalization::fit(method, observations);
        let panel = Panel::gather(observations, &normalization, belonging);
        Self {
            tally: Tally::of(fates),
            everybody: group_vowels(&panel, None),
            groups: (0..panel.groups.len())
                .map(|g| group_vowels(&panel, Some(g)))
                .collect(),
            speakers: speaker_vowels(&panel),
            spaces: spaces(&panel),
            contrasts: contrasts(&panel, &resampling),
            pairs: pairs(&panel, &resampling),
            resampling,
            panel,
        }
    }
}
