//! Who said which vowel how: the tokens of a survey, sorted by speaker and vowel.

use std::collections::{BTreeMap, BTreeSet};

use crate::normalize::{Method, Normalization, SpeakerScale};
use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::movement::Movement;

/// How many measures there are.
pub const MEASURES: usize = 10;

/// What is compared, one number a token.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Measure {
    /// Normalized F1, in the unit of the method.
    F1,
    /// Normalized F2.
    F2,
    /// F1 in hertz at the size of the survey's middle speaker: only sizes are taken out, see
    /// [`Panel::gather`].
    F1AtReference,
    /// F2 in hertz at that size.
    F2AtReference,
    /// Straight distance moved from 20 to 80 % of the vowel, in hertz at that size.
    Vector,
    /// Length of the path from 20 to 80 %, in hertz at that size.
    Trajectory,
    /// Length of the path over the time it takes, in hertz a second.
    Rate,
    /// F1 at 80 % less F1 at 20 %, in hertz at that size.
    F1Change,
    /// F2 at 80 % less F2 at 20 %; with [`Measure::F1Change`] the direction of the movement.
    F2Change,
    /// Duration in seconds.
    Duration,
}

impl Measure {
    /// Every measure.
    pub const ALL: [Self; MEASURES] = [
        Self::F1,
        Self::F2,
        Self::F1AtReference,
        Self::F2AtReference,
        Self::Vector,
        Self::Trajectory,
        Self::Rate,
        Self::F1Change,
        Self::F2Change,
        Self::Duration,
    ];

    /// The column the measure has in tables, unit included.
    pub fn column(self) -> &'static str {
        match self {
            Self::F1 => "f1_norm",
            Self::F2 => "f2_norm",
            Self::F1AtReference => "f1_hz",
            Self::F2AtReference => "f2_hz",
            Self::Vector => "vector_hz",
            Self::Trajectory => "trajectory_hz",
            Self::Rate => "rate_hz_per_s",
            Self::F1Change => "f1_change_hz",
            Self::F2Change => "f2_change_hz",
            Self::Duration => "duration_s",
        }
    }

    /// Its place among [`Self::ALL`].
    pub fn index(self) -> usize {
        self as usize
    }
}

/// One token as comparisons see it.
#[derive(Debug, Clone, PartialEq)]
pub struct PanelToken {
    /// Name of the token.
    pub token: String,
    /// Place of its speaker in [`Panel::speakers`].
    pub speaker: usize,
    /// Place of its vowel in [`Panel::vowels`].
    pub vowel: usize,
    /// Its values, in the order of [`Measure::ALL`].
    pub values: [Option<f64>; MEASURES],
    /// F1, F2 in hertz at the reference size along the vowel, with the proportion.
    pub path: Vec<(f64, [f64; 2])>,
}

impl PanelToken {
    /// A measure of the token.
    pub fn value(&self, measure: Measure) -> Option<f64> {
        self.values[measure.index()]
    }

    /// Normalized F1 and F2, where both are known.
    pub fn place(&self) -> Option<[f64; 2]> {
        Some([self.value(Measure::F1)?, self.value(Measure::F2)?])
    }

    /// F1 and F2 in hertz at the reference size, where both are known.
    pub fn place_at_reference(&self) -> Option<[f64; 2]> {
        Some([
            self.value(Measure::F1AtReference)?,
            self.value(Measure::F2AtReference)?,
        ])
    }
}

/// A speaker and where the speaker belongs.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PanelSpeaker {
    /// Name.
    pub name: String,
    /// Place of the speaker's group in [`Panel::groups`], where the survey is grouped.
    pub group: Option<usize>,
    /// What the speaker is balanced by, as a number; all the same where nothing is balanced.
    pub stratum: usize,
}

/// The labelled, measured tokens of a survey.
#[derive(Debug, Clone, PartialEq)]
pub struct Panel {
    /// Vowels, in the order of their symbols.
    pub vowels: Vec<Vowel>,
    /// Groups, in the order of their names.
    pub groups: Vec<String>,
    /// Speakers, in the order of their names.
    pub speakers: Vec<PanelSpeaker>,
    /// Tokens, in the order given.
    pub tokens: Vec<PanelToken>,
    /// Speakers whose size could not be taken out; their tokens are not here.
    pub left_out: BTreeMap<String, String>,
    /// How the size was taken out, as the method names itself.
    pub method: Method,
}

/// Where each speaker belongs.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Belonging {
    /// The group of each speaker; speakers without one are in no comparison of groups.
    pub group: BTreeMap<String, String>,
    /// What each speaker is balanced by; speakers not named here are all of one kind.
    pub stratum: BTreeMap<String, String>,
}

impl Panel {
    /// Sorts the labelled observations of a survey that has been normalized.
    ///
    /// Hertz at the reference size are formants less the speaker's size by the regression log-mean,
    /// whatever the normalization (Barreda & Nearey 2018, JASA 144, 500-520).
    pub fn gather(
        observations: &[Observation],
        normalization: &Normalization,
        belonging: &Belonging,
    ) -> Self {
        let used = |o: &&Observation| o.vowel.is_some() && scale_of(normalization, o).is_some();
        let names: BTreeSet<&String> = observations
            .iter()
            .filter(used)
            .map(|o| &o.speaker)
            .collect();
        let vowels: BTreeSet<&Vowel> = observations
            .iter()
            .filter(used)
            .filter_map(|o| o.vowel.as_ref())
            .collect();
        let vowels: Vec<Vowel> = vowels.into_iter().cloned().collect();
        let groups: BTreeSet<&String> = names
            .iter()
            .filter_map(|n| belonging.group.get(*n))
            .collect();
        let groups: Vec<String> = groups.into_iter().cloned().collect();
        let strata: BTreeSet<Option<&String>> =
            names.iter().map(|n| belonging.stratum.get(*n)).collect();
        let strata: Vec<Option<&String>> = strata.into_iter().collect();
        let speakers: Vec<PanelSpeaker> = names
            .iter()
            .map(|name| PanelSpeaker {
                name: (*name).clone(),
                group: belonging
                    .group
                    .get(*name)
                    .and_then(|g| groups.iter().position(|k| k == g)),
                stratum: strata
                    .iter()
                    .position(|s| *s == belonging.stratum.get(*name))
                    .unwrap_or(0),
            })
            .collect();
        let reference = Reference::of(observations, normalization);
        let speaker_of: BTreeMap<&String, usize> = names.iter().copied().zip(0..).collect();
        let vowel_of: BTreeMap<&Vowel, usize> = vowels.iter().zip(0..).collect();
        let tokens = observations
            .iter()
            .filter(used)
            .filter_map(|o| {
                let path = reference.path(o);
                Some(PanelToken {
                    token: o.token.clone(),
                    speaker: *speaker_of.get(&o.speaker)?,
                    vowel: *vowel_of.get(o.vowel.as_ref()?)?,
                    values: values(o, &path, normalization, &reference),
                    path,
                })
            })
            .collect();
        let left_out = normalization
            .scales
            .iter()
            .filter_map(|(name, scale)| Some((name.clone(), scale.as_ref().err()?.to_string())))
            .collect();
        Self {
            vowels,
            groups,
            speakers,
            tokens,
            left_out,
            method: normalization.method.clone(),
        }
    }

    /// The mean of a measure for every vowel (outer) and speaker (inner); `None` where a speaker
    /// has no value.
    pub fn means(&self, measure: Measure) -> Vec<Vec<Option<f64>>> {
        let mut sums = vec![vec![(0.0, 0u32); self.speakers.len()]; self.vowels.len()];
        for t in &self.tokens {
            if let Some(value) = t.value(measure) {
                let sum = &mut sums[t.vowel][t.speaker];
                sum.0 += value;
                sum.1 += 1;
            }
        }
        sums.into_iter()
            .map(|row| {
                row.into_iter()
                    .map(|(sum, n)| (n > 0).then(|| sum / f64::from(n)))
                    .collect()
            })
            .collect()
    }

    /// The tokens of every vowel (outer) and speaker (inner).
    pub fn cells(&self) -> Vec<Vec<Vec<&PanelToken>>> {
        let mut cells = vec![vec![Vec::new(); self.speakers.len()]; self.vowels.len()];
        for t in &self.tokens {
            cells[t.vowel][t.speaker].push(t);
        }
        cells
    }

    /// The speakers of a group; everybody for `None`.
    pub fn members(&self, group: Option<usize>) -> Vec<usize> {
        (0..self.speakers.len())
            .filter(|s| group.is_none() || self.speakers[*s].group == group)
            .collect()
    }
}

fn scale_of<'a>(normalization: &'a Normalization, o: &Observation) -> Option<&'a SpeakerScale> {
    normalization.scales.get(&o.speaker)?.as_ref().ok()
}

/// How hertz of one speaker become hertz at the reference size.
struct Reference {
    scales: BTreeMap<String, SpeakerScale>,
    middle: Option<SpeakerScale>,
}

impl Reference {
    /// Through the regression log-mean, which takes one factor a speaker out and nothing else: a
    /// method that also sets each speaker's spread to one, as Lobanov's does, makes a difference of
    /// one vowel smaller and gives the rest of it to the others, the more so the fewer the vowels
    /// (Disner 1980, JASA 67, 253-261). Only where a speaker has no vowel in common with the others
    /// is it the run's own normalization.
    fn of(observations: &[Observation], normalization: &Normalization) -> Self {
        let sizes = Normalization::fit(&Method::RegressionLogMean, observations);
        let unplaced = |(name, scale): (&String, &Result<SpeakerScale, _>)| {
            scale.is_ok() && !sizes.scales.get(name).is_some_and(Result::is_ok)
        };
        if normalization.scales.iter().any(unplaced) {
            Self::through(normalization)
        } else {
            Self::through(&sizes)
        }
    }

    fn through(normalization: &Normalization) -> Self {
        let scales: BTreeMap<String, SpeakerScale> = normalization
            .scales
            .iter()
            .filter_map(|(name, scale)| Some((name.clone(), scale.as_ref().ok()?.clone())))
            .collect();
        let middle = SpeakerScale::middle(scales.values());
        Self { scales, middle }
    }

    fn hz(&self, speaker: &str, formant: usize, hz: f64) -> Option<f64> {
        let normalized = self.scales.get(speaker)?.apply_formant(formant, hz)?;
        self.middle.as_ref()?.invert_formant(formant, normalized)
    }

    /// The token's path through the plane, where both formants are known.
    fn path(&self, o: &Observation) -> Vec<(f64, [f64; 2])> {
        let point = |f1: Option<f64>, f2: Option<f64>| {
            Some([self.hz(&o.speaker, 0, f1?)?, self.hz(&o.speaker, 1, f2?)?])
        };
        o.track
            .iter()
            .filter_map(|(p, [f1, f2, _])| Some((*p, point(*f1, *f2)?)))
            .collect()
    }
}

/// The values of one token, in the order of [`Measure::ALL`].
fn values(
    o: &Observation,
    path: &[(f64, [f64; 2])],
    normalization: &Normalization,
    reference: &Reference,
) -> [Option<f64>; MEASURES] {
    let [f1, f2, _] = normalization.normalize(o).value;
    let [hz1, hz2, _] = o.formant_hz;
    let movement = o
        .duration_s
        .and_then(|duration_s| Movement::of(path, duration_s));
    [
        f1,
        f2,
        hz1.and_then(|hz| reference.hz(&o.speaker, 0, hz)),
        hz2.and_then(|hz| reference.hz(&o.speaker, 1, hz)),
        movement.map(|m| m.vector_hz),
        movement.map(|m| m.trajectory_hz),
        movement.map(|m| m.rate_hz_per_s),
        movement.map(|m| m.change_hz[0]),
        movement.map(|m| m.change_hz[1]),
        o.duration_s,
    ]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::normalize::Over;

    fn observation(speaker: &str, vowel: &str, formant_hz: [f64; 2]) -> Observation {
        let [f1, f2] = formant_hz;
        Observation {
            token: format!("{speaker} {vowel}"),
            speaker: speaker.to_owned(),
            vowel: Some(Vowel::from_ipa(vowel)),
            duration_s: Some(0.2),
            f0_hz: None,
            formant_hz: [Some(f1), Some(f2), None],
            sd_hz: [None; 3],
            track: vec![
                (0.2, [Some(f1), Some(f2), None]),
                (0.8, [Some(f1), Some(2.0 * f2), None]),
            ],
        }
    }

    #[test]
    fn sizes_meet_at_the_reference() {
        // One speaker is 1.21 times the other; the middle of the two is 1.1 times the first.
        let mut all = Vec::new();
        for (vowel, f1, f2) in [
            ("i", 300.0, 2_200.0),
            ("ɑ", 700.0, 1_200.0),
            ("u", 350.0, 900.0),
        ] {
            all.push(observation("large", vowel, [f1, f2]));
            all.push(observation("small", vowel, [1.21 * f1, 1.21 * f2]));
        }
        let method = Method::NeareyShared(crate::normalize::Formants::F1F2, Over::Tokens);
        let normalization = Normalization::fit(&method, &all);
        let mut belonging = Belonging::default();
        belonging
            .group
            .insert("large".to_owned(), "hill".to_owned());
        let panel = Panel::gather(&all, &normalization, &belonging);
        assert_eq!(panel.speakers.len(), 2);
        assert_eq!(panel.members(Some(0)), [0]);
        for t in &panel.tokens {
            let expected = all
                .iter()
                .find(|o| o.speaker == "large" && o.vowel.as_ref() == Some(&panel.vowels[t.vowel]));
            let [f1, f2, _] = expected.unwrap().formant_hz.map(|f| 1.1 * f.unwrap_or(0.0));
            let place = t.place_at_reference().unwrap();
            assert!((place[0] - f1).abs() < 1e-6 && (place[1] - f2).abs() < 1e-6);
            // F2 doubles along every vowel.
            assert!((t.value(Measure::Vector).unwrap() - f2).abs() < 1e-6);
        }
        let means = panel.means(Measure::F1);
        assert!(
            means
                .iter()
                .all(|row| (row[0].unwrap() - row[1].unwrap()).abs() < 1e-12)
        );
    }

    #[test]
    fn speakers_without_a_scale_are_named() {
        let mut all = vec![
            observation("a", "i", [300.0, 2_200.0]),
            observation("a", "u", [350.0, 900.0]),
        ];
        let mut lonely = observation("b", "i", [310.0, 2_100.0]);
        lonely.vowel = None;
        all.push(lonely);
        let normalization = Normalization::fit(&Method::RegressionLogMean, &all);
        let panel = Panel::gather(&all, &normalization, &Belonging::default());
        assert_eq!(panel.speakers.len(), 1);
        assert!(panel.left_out.contains_key("b"));
    }
}
