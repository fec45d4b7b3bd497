//! Counts of what was measured, doubted, left out and taken for what.

use std::collections::BTreeMap;

use crate::vowel::Vowel;

use super::resample::quantile;

/// What became of one token.
#[derive(Debug, Clone, PartialEq)]
pub struct Fate {
    /// Who speaks.
    pub speaker: String,
    /// The vowel its label names.
    pub vowel: Option<Vowel>,
    /// Its doubts, or why it was not measured.
    pub reading: Result<Vec<String>, String>,
    /// Standard errors of F1 to F3 in hertz, where stated.
    pub sd_hz: [Option<f64>; 3],
    /// What it was identified as, and how probably; `None` where it was not.
    pub identified: Option<(Vowel, f64)>,
}

/// Counts over a survey.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Tally {
    /// All tokens.
    pub tokens: usize,
    /// Tokens with a reading.
    pub measured: usize,
    /// Tokens with a reading and at least one doubt.
    pub doubtful: usize,
    /// How often each doubt stands.
    pub doubts: BTreeMap<String, usize>,
    /// Why tokens were not measured.
    pub reasons: BTreeMap<String, usize>,
    /// Tokens that have a label and were identified.
    pub identified: usize,
    /// Of those, tokens identified as their label.
    pub agreeing: usize,
    /// How often each labelled vowel was taken for which.
    pub confusions: BTreeMap<(Vowel, Vowel), usize>,
    /// How often identification agrees at which stated probability: for each tenth from 0, the
    /// tokens, their mean probability, and how many agree.
    pub reliability: Vec<Reliability>,
    /// Median of the stated standard errors of F1 to F3 in hertz.
    pub median_sd_hz: [Option<f64>; 3],
    /// Per speaker: tokens, measured, doubtful, identified, agreeing.
    pub speakers: BTreeMap<String, [usize; 5]>,
}

/// Identification at one tenth of stated probability.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Reliability {
    /// Tokens whose stated probability lies in the tenth.
    pub tokens: usize,
    /// Mean of their probabilities.
    pub stated: f64,
    /// Share identified as labelled.
    pub agreeing: f64,
}

impl Tally {
    /// Counts the fates of tokens.
    pub fn of(fates: &[Fate]) -> Self {
        let mut tally = Self::default();
        let mut sds: [Vec<f64>; 3] = Default::default();
        let mut tenths = [(0usize, 0.0, 0usize); 10];
        for fate in fates {
            let own = tally.speakers.entry(fate.speaker.clone()).or_default();
            tally.tokens += 1;
            own[0] += 1;
            for (known, sd) in sds.iter_mut().zip(fate.sd_hz) {
                known.extend(sd);
            }
            match &fate.reading {
                Err(reason) => *tally.reasons.entry(reason.clone()).or_default() += 1,
                Ok(doubts) => {
                    tally.measured += 1;
                    own[1] += 1;
                    if !doubts.is_empty() {
                        tally.doubtful += 1;
                        own[2] += 1;
                    }
                    for doubt in doubts {
                        *tally.doubts.entry(doubt.clone()).or_default() += 1;
                    }
                }
            }
            if let (Some(label), Some((taken, probability))) = (&fate.vowel, &fate.identified) {
                let agrees = label == taken;
                tally.identified += 1;
                own[3] += 1;
                tally.agreeing += usize::from(agrees);
                own[4] += usize::from(agrees);
                *tally
                    .confusions
                    .entry((label.clone(), taken.clone()))
                    .or_default() += 1;
                let tenth = &mut tenths[((probability * 10.0) as usize).min(9)];
                tenth.0 += 1;
                tenth.1 += probability;
                tenth.2 += usize::from(agrees);
            }
        }
        tally.median_sd_hz = sds.map(|mut known| {
            known.sort_by(f64::total_cmp);
            quantile(&known, 0.5)
        });
        tally.reliability = tenths
            .iter()
            .map(|(n, sum, agree)| {
                let count = (*n).max(1) as f64;
                Reliability {
                    tokens: *n,
                    stated: sum / count,
                    agreeing: *agree as f64 / count,
                }
            })
            .collect();
        tally
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn everything_is_counted_once() {
        let fate = |reading, taken: Option<(&str, f64)>| Fate {
            speaker: "a".to_owned(),
            vowel: Some(Vowel::from_ipa("i")),
            reading,
            sd_hz: [Some(12.0), None, Some(30.0)],
            identified: taken.map(|(v, p)| (Vowel::from_ipa(v), p)),
        };
        let tally = Tally::of(&[
            fate(Ok(vec![]), Some(("i", 0.92))),
            fate(
                Ok(vec!["F1 uncertain".to_owned(), "F0 near F1".to_owned()]),
                Some(("e", 0.58)),
            ),
            fate(Ok(vec![]), Some(("i", 0.98))),
            fate(Err("too short".to_owned()), None),
        ]);
        assert_eq!((tally.tokens, tally.measured, tally.doubtful), (4, 3, 1));
        assert_eq!((tally.identified, tally.agreeing), (3, 2));
        assert_eq!(tally.doubts.values().sum::<usize>(), 2);
        assert_eq!(tally.reasons["too short"], 1);
        assert_eq!(
            tally.confusions[&(Vowel::from_ipa("i"), Vowel::from_ipa("e"))],
            1
        );
        assert_eq!(tally.speakers["a"], [4, 3, 1, 3, 2]);
        assert_eq!(tally.median_sd_hz, [Some(12.0), None, Some(30.0)]);
        let last = tally.reliability[9];
        assert_eq!(last.tokens, 2);
        assert!((last.stated - 0.95).abs() < 1e-12 && last.agreeing == 1.0);
    }
}
