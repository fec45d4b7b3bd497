//! The observations of one speaker, and their means per vowel.

use std::collections::BTreeMap;

use crate::tokens::Observation;
use crate::vowel::Vowel;

/// All observations of one speaker.
#[derive(Debug, Clone)]
pub struct SpeakerTokens<'a>(Vec<&'a Observation>);

/// Mean F1 to F3 of one vowel of one speaker, in hertz.
pub type MeanFormants = [Option<f64>; 3];

impl<'a> SpeakerTokens<'a> {
    /// Sorts observations by speaker, keeping their order within each.
    pub fn of(observations: &'a [Observation]) -> BTreeMap<String, Self> {
        let mut speakers: BTreeMap<String, Self> = BTreeMap::new();
        for observation in observations {
            match speakers.get_mut(&observation.speaker) {
                Some(tokens) => tokens.0.push(observation),
                None => {
                    speakers.insert(observation.speaker.clone(), Self(vec![observation]));
                }
            }
        }
        speakers
    }

    /// The observations, in the order given.
    pub fn iter(&self) -> impl Iterator<Item = &'a Observation> + '_ {
        self.0.iter().copied()
    }

    /// The vowel of every labelled token, with repetitions.
    pub fn vowels(&self) -> impl Iterator<Item = &'a Vowel> + '_ {
        self.iter().filter_map(|o| o.vowel.as_ref())
    }

    /// The mean of each formant over the tokens of each labelled vowel that have it.
    pub fn vowel_means(&self) -> BTreeMap<&'a Vowel, MeanFormants> {
        let mut sums: BTreeMap<&Vowel, [(f64, usize); 3]> = BTreeMap::new();
        for observation in self.iter() {
            let Some(vowel) = &observation.vowel else {
                continue;
            };
            let sum = sums.entry(vowel).or_default();
            for (cell, hz) in sum.iter_mut().zip(observation.formant_hz) {
                if let Some(hz) = hz {
                    cell.0 += hz;
                    cell.1 += 1;
                }
            }
        }
        sums.into_iter()
            .map(|(vowel, sum)| {
                let mean = sum.map(|(total, n)| (n > 0).then(|| total / n as f64));
                (vowel, mean)
            })
            .collect()
    }
}
