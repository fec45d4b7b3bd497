//! A speaker against a norm, vowel by vowel: a learner, or anybody else.
//!
//! The speaker's size relative to the norm is taken out first, as the median of the log ratios over
//! all vowels and formants both have: a few vowels that are off do not move it. What is left are
//! offsets, told in standard deviations of the norm.

use std::collections::BTreeMap;

use crate::norms::ReferenceTable;
use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::difference::student_quantile;
use super::norm_place::{NormVowel, Spread, nearest, norm_affinity, norm_vowels};
use super::overlap::Overlap;
use super::pairs::{APART_AFFINITY, FEWEST_TOKENS, Verdict};
use super::resample::quantile;

/// An offset is said in words from this many standard deviations of the norm on.
pub const TELLING_OFFSET: f64 = 1.0;

/// And said strongly from this many on: 95 % of the norm's own speakers are nearer.
pub const STRONG_OFFSET: f64 = 2.0;

/// A vowel is called longer or shorter from this ratio on, about what listeners need to notice in
/// words (a fifth to a quarter, common practice).
const TELLING_DURATION: f64 = 1.25;

/// Share of the speaker's vowels that the norm must have too, below which comparison vowel by vowel
/// is warned of (Disner 1980, JASA 67, 253-261, on different vowel systems).
const COMMON_SYSTEM: f64 = 0.8;

/// A speaker held against a norm.
#[derive(Debug, Clone, PartialEq)]
pub struct NormCheck {
    /// Who.
    pub speaker: String,
    /// The norm's name.
    pub norm: String,
    /// The group of the norm that is nearest in size.
    pub group: String,
    /// The speaker's formants relative to the norm's, as a factor.
    pub size: f64,
    /// Where the spread comes from.
    pub spread: Spread,
    /// The vowels both have.
    pub vowels: Vec<VowelCheck>,
    /// Pairs the norm keeps apart and the speaker does not.
    pub not_apart: Vec<PairCheck>,
    /// Pairs the norm keeps apart of which the speaker has too few tokens to tell.
    pub too_few: Vec<[Vowel; 2]>,
    /// Vowels of the norm the speaker has no token of.
    pub missing: Vec<Vowel>,
    /// Vowels of the speaker the norm does not have, with their tokens.
    pub unknown: Vec<(Vowel, usize)>,
}

impl NormCheck {
    /// Whether the norm lacks so many of the speaker's vowels that the systems are not one.
    pub fn systems_differ(&self) -> bool {
        let common = self.vowels.len() as f64;
        let own = common + self.unknown.len() as f64;
        common < COMMON_SYSTEM * own
    }
}

/// An offset in standard deviations of the norm.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Offset {
    /// The offset.
    pub sd: f64,
    /// Its 95 % interval over the speaker's tokens; `None` for a single token. The error of the
    /// size is not in it.
    pub interval: Option<[f64; 2]>,
}

impl Offset {
    /// Whether it is large enough and sure enough to be said.
    fn tells(&self) -> bool {
        let sure = match self.interval {
            Some([low, high]) => low > 0.0 || high < 0.0,
            // One token can be a slip: only what no speaker of the norm does is said.
            None => self.sd.abs() >= STRONG_OFFSET,
        };
        sure && self.sd.abs() >= TELLING_OFFSET
    }
}

/// One vowel of the speaker.
#[derive(Debug, Clone, PartialEq)]
pub struct VowelCheck {
    /// The vowel.
    pub vowel: Vowel,
    /// Tokens of it.
    pub tokens: usize,
    /// F1 and F2 in hertz at the norm's size.
    pub place_hz: [f64; 2],
    /// The norm's F1 and F2.
    pub norm_hz: [f64; 2],
    /// Offsets of F1 and F2.
    pub offsets: [Offset; 2],
    /// Duration over the norm's, the speaker's general pace taken out; and its interval.
    pub duration: Option<(f64, Option<[f64; 2]>)>,
    /// What the norm's vowels are that the tokens are nearest to, with the number of tokens.
    pub taken_for: Vec<(Vowel, usize)>,
}

/// What is unlike the norm, in trade words.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Remark {
    /// `closer`, `opener`, `fronter`, `backer`, `longer` or `shorter`.
    pub word: &'static str,
    /// Whether it is beyond what almost all of the norm's speakers do.
    pub strong: bool,
}

impl VowelCheck {
    /// What is unlike the norm.
    pub fn remarks(&self) -> Vec<Remark> {
        let mut remarks = Vec::new();
        for (offset, [up, down]) in self
            .offsets
            .iter()
            .zip([["opener", "closer"], ["fronter", "backer"]])
        {
            if offset.tells() {
                let word = if offset.sd > 0.0 { up } else { down };
                remarks.push(Remark {
                    word,
                    strong: offset.sd.abs() >= STRONG_OFFSET,
                });
            }
        }
        if let Some((ratio, Some([low, high]))) = self.duration
            && (low > 1.0 || high < 1.0)
            && ratio.max(1.0 / ratio) >= TELLING_DURATION
        {
            let word = if ratio > 1.0 { "longer" } else { "shorter" };
            remarks.push(Remark {
                word,
                strong: false,
            });
        }
        remarks
    }

    /// Distance from the norm in standard deviations, over both formants.
    pub fn distance_sd(&self) -> f64 {
        self.offsets[0].sd.hypot(self.offsets[1].sd)
    }
}

/// A pair the norm keeps apart.
#[derive(Debug, Clone, PartialEq)]
pub struct PairCheck {
    /// The vowels.
    pub vowels: [Vowel; 2],
    /// The speaker's overlap.
    pub overlap: Overlap,
    /// What can be said of it.
    pub verdict: Verdict,
    /// Affinity of the two in the norm.
    pub norm_affinity: f64,
}

/// Holds one speaker's labelled tokens against a norm.
///
/// `None` where the speaker has no vowel in common with it.
pub fn check(speaker: &str, tokens: &[Observation], norm: &ReferenceTable) -> Option<NormCheck> {
    let mut by_vowel: BTreeMap<&Vowel, Vec<&Observation>> = BTreeMap::new();
    for o in tokens.iter().filter(|o| o.speaker == speaker) {
        if let (Some(vowel), [Some(_), Some(_), _]) = (&o.vowel, o.formant_hz) {
            by_vowel.entry(vowel).or_default().push(o);
        }
    }
    let closest = norm
        .groups()
        .into_iter()
        .filter_map(|group| {
            let (vowels, spread) = norm_vowels(norm, group);
            let size = size(&by_vowel, &vowels)?;
            Some((group, vowels, spread, size))
        })
        .min_by(|a, b| a.3.abs().total_cmp(&b.3.abs()))?;
    let (group, vowels, spread, size) = closest;
    let pace = pace(&by_vowel, &vowels);
    let known: Vec<&NormVowel> = vowels
        .iter()
        .filter(|v| by_vowel.contains_key(&v.vowel))
        .collect();
    let checks: Vec<VowelCheck> = known
        .iter()
        .map(|v| vowel_check(v, &by_vowel[&v.vowel], size, pace, &vowels))
        .collect();
    let (not_apart, too_few) = pair_checks(&known, &by_vowel);
    let unknown = by_vowel
        .iter()
        .filter(|(vowel, _)| vowels.iter().all(|v| v.vowel != ***vowel))
        .map(|(vowel, tokens)| ((*vowel).clone(), tokens.len()))
        .collect();
    Some(NormCheck {
        speaker: speaker.to_owned(),
        norm: norm.name.clone(),
        group: group.to_owned(),
        size: size.exp(),
        spread,
        vowels: checks,
        not_apart,
        too_few,
        missing: vowels
            .iter()
            .filter(|v| !by_vowel.contains_key(&v.vowel))
            .map(|v| v.vowel.clone())
            .collect(),
        unknown,
    })
}

fn ln_mean(tokens: &[&Observation], k: usize) -> Option<f64> {
    let known: Vec<f64> = tokens
        .iter()
        .filter_map(|o| o.formant_hz[k])
        .map(f64::ln)
        .collect();
    (!known.is_empty()).then(|| known.iter().sum::<f64>() / known.len() as f64)
}

fn median(mut values: Vec<f64>) -> Option<f64> {
    values.sort_by(f64::total_cmp);
    quantile(&values, 0.5)
}

/// Median log ratio of the speaker's formants to the norm's.
fn size(by_vowel: &BTreeMap<&Vowel, Vec<&Observation>>, vowels: &[NormVowel]) -> Option<f64> {
    let mut ratios = Vec::new();
    for v in vowels {
        if let Some(tokens) = by_vowel.get(&v.vowel) {
            for k in 0..3 {
                if let (Some(own), Some(norm)) = (ln_mean(tokens, k), v.ln_hz[k]) {
                    ratios.push(own - norm);
                }
            }
        }
    }
    median(ratios)
}

/// Median ratio of the speaker's durations to the norm's.
fn pace(by_vowel: &BTreeMap<&Vowel, Vec<&Observation>>, vowels: &[NormVowel]) -> Option<f64> {
    let ratios = vowels.iter().filter_map(|v| {
        let tokens = by_vowel.get(&v.vowel)?;
        let known: Vec<f64> = tokens.iter().filter_map(|o| o.duration_s).collect();
        let mean = known.iter().sum::<f64>() / known.len() as f64;
        (!known.is_empty()).then_some(mean / v.duration_s?)
    });
    median(ratios.collect())
}

/// Mean and 95 % interval over tokens (Student 1908, Biometrika 6, 1-25).
fn over_tokens(values: &[f64]) -> (f64, Option<[f64; 2]>) {
    let n = values.len() as f64;
    let mean = values.iter().sum::<f64>() / n;
    if values.len() < 2 {
        return (mean, None);
    }
    let variance = values.iter().map(|v| (v - mean).powi(2)).sum::<f64>() / (n - 1.0);
    let reach = student_quantile(n - 1.0) * (variance / n).sqrt();
    (mean, Some([mean - reach, mean + reach]))
}

fn vowel_check(
    v: &NormVowel,
    tokens: &[&Observation],
    size: f64,
    pace: Option<f64>,
    all: &[NormVowel],
) -> VowelCheck {
    let norm_ln = [0, 1].map(|k| v.ln_hz[k].unwrap_or(f64::NAN));
    let mut place_hz = [f64::NAN; 2];
    let offsets = [0, 1].map(|k| {
        let values: Vec<f64> = tokens
            .iter()
            .filter_map(|o| Some(o.formant_hz[k]?.ln() - size))
            .collect();
        let (mean, interval) = over_tokens(&values);
        place_hz[k] = mean.exp();
        let in_sd = |ln: f64| (ln - norm_ln[k]) / v.sd[k];
        Offset {
            sd: in_sd(mean),
            interval: interval.map(|i| i.map(in_sd)),
        }
    });
    let duration = pace.zip(v.duration_s).and_then(|(pace, norm_s)| {
        let ratios: Vec<f64> = tokens
            .iter()
            .filter_map(|o| Some((o.duration_s? / norm_s / pace).ln()))
            .collect();
        let (mean, interval) = over_tokens(&ratios);
        (!ratios.is_empty()).then(|| (mean.exp(), interval.map(|i| i.map(f64::exp))))
    });
    let mut taken: BTreeMap<&Vowel, usize> = BTreeMap::new();
    for o in tokens {
        if let Some(vowel) = nearest(o, size, all) {
            *taken.entry(vowel).or_default() += 1;
        }
    }
    let mut taken_for: Vec<(Vowel, usize)> = taken
        .into_iter()
        .map(|(vowel, n)| (vowel.clone(), n))
        .collect();
    taken_for.sort_by(|a, b| b.1.cmp(&a.1).then(a.0.cmp(&b.0)));
    VowelCheck {
        vowel: v.vowel.clone(),
        tokens: tokens.len(),
        place_hz,
        norm_hz: norm_ln.map(f64::exp),
        offsets,
        duration,
        taken_for,
    }
}

/// Pairs the norm keeps apart: those the speaker does not, and those that cannot be told.
fn pair_checks(
    known: &[&NormVowel],
    by_vowel: &BTreeMap<&Vowel, Vec<&Observation>>,
) -> (Vec<PairCheck>, Vec<[Vowel; 2]>) {
    let points = |v: &Vowel| -> Vec<[f64; 2]> {
        let tokens = by_vowel.get(v).into_iter().flatten();
        tokens
            .filter_map(|o| Some([o.formant_hz[0]?.ln(), o.formant_hz[1]?.ln()]))
            .collect()
    };
    let mut not_apart = Vec::new();
    let mut too_few = Vec::new();
    for (n, a) in known.iter().enumerate() {
        for b in &known[n + 1..] {
            let norm_affinity = norm_affinity(a, b);
            if norm_affinity >= APART_AFFINITY {
                continue;
            }
            let (first, second) = (points(&a.vowel), points(&b.vowel));
            let vowels = [a.vowel.clone(), b.vowel.clone()];
            let enough = first.len() >= FEWEST_TOKENS && second.len() >= FEWEST_TOKENS;
            let Some(overlap) = Overlap::of(&first, &second).filter(|_| enough) else {
                too_few.push(vowels);
                continue;
            };
            let verdict = Verdict::of(
                overlap.pillai,
                overlap.pillai_if_merged_95,
                overlap.affinity,
            );
            match verdict {
                Verdict::Apart => {}
                Verdict::TooFew => too_few.push(vowels),
                _ => not_apart.push(PairCheck {
                    vowels,
                    overlap,
                    verdict,
                    norm_affinity,
                }),
            }
        }
    }
    (not_apart, too_few)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::norms::ReferenceRow;

    /// A norm of four vowels with a spread of 8 % in F1 and 6 % in F2, no F3.
    fn norm() -> ReferenceTable {
        let row = |vowel: &str, f1: f64, f2: f64, duration_s: f64| ReferenceRow {
            group: "people".to_owned(),
            vowel: Vowel::from_ipa(vowel),
            word: None,
            proportion: None,
            tokens: None,
            duration_s: Some(duration_s),
            f0_hz: None,
            formant_hz: [Some(f1), Some(f2), None],
            f0_sd_hz: None,
            sd_hz: [Some(0.08 * f1), Some(0.06 * f2), None],
        };
        ReferenceTable {
            name: "invented".to_owned(),
            source: "invented".to_owned(),
            table: String::new(),
            accent: String::new(),
            speakers: String::new(),
            spread: String::new(),
            confirmed: String::new(),
            rows: vec![
                row("i", 300.0, 2_300.0, 0.24),
                row("ɪ", 430.0, 2_000.0, 0.18),
                row("ɑ", 750.0, 1_250.0, 0.26),
                row("u", 350.0, 950.0, 0.24),
                row("æ", 650.0, 1_850.0, 0.27),
            ],
        }
    }

    /// A learner 1.15 times the norm's size whose /ɪ/ is said as /i/.
    fn learner() -> Vec<Observation> {
        let mut tokens = Vec::new();
        let mut say = |vowel: &str, f1: f64, f2: f64, duration_s: f64| {
            for n in 0..6 {
                // Six tokens round the place, symmetric, 3 % apart.
                let wobble = [-0.02, -0.01, 0.0, 0.0, 0.01, 0.02][n];
                let other = [0.01, -0.02, 0.02, -0.01, 0.02, -0.02][n];
                tokens.push(Observation {
                    token: format!("{vowel}{n}"),
                    speaker: "learner".to_owned(),
                    vowel: Some(Vowel::from_ipa(vowel)),
                    duration_s: Some(1.3 * duration_s * (1.0 + other)),
                    f0_hz: None,
                    formant_hz: [
                        Some(1.15 * f1 * (1.0 + wobble)),
                        Some(1.15 * f2 * (1.0 + other)),
                        None,
                    ],
                    sd_hz: [None; 3],
                    track: Vec::new(),
                });
            }
        };
        say("i", 300.0, 2_300.0, 0.24);
        say("ɪ", 305.0, 2_290.0, 0.24);
        say("ɑ", 750.0, 1_250.0, 0.26);
        say("u", 350.0, 950.0, 0.24);
        say("ø", 400.0, 1_600.0, 0.24);
        tokens
    }

    fn found() -> NormCheck {
        check("learner", &learner(), &norm()).unwrap()
    }

    fn of<'a>(found: &'a NormCheck, vowel: &str) -> &'a VowelCheck {
        found
            .vowels
            .iter()
            .find(|v| v.vowel == Vowel::from_ipa(vowel))
            .unwrap()
    }

    #[test]
    fn size_is_taken_out_whatever_one_vowel_does() {
        let found = found();
        assert!((found.size - 1.15).abs() < 0.01, "{}", found.size);
        let i = of(&found, "i");
        assert!(i.remarks().is_empty() && i.distance_sd() < 0.2);
    }

    #[test]
    fn an_offset_is_told_in_trade_words_and_in_deviations() {
        let found = found();
        let short = of(&found, "ɪ");
        // ln(305/430)/0.08 and ln(2290/2000)/0.06.
        assert!(
            (short.offsets[0].sd - -4.29).abs() < 0.1,
            "{:?}",
            short.offsets
        );
        assert!(
            (short.offsets[1].sd - 2.26).abs() < 0.1,
            "{:?}",
            short.offsets
        );
        let words: Vec<&str> = short.remarks().iter().map(|r| r.word).collect();
        assert_eq!(words, ["closer", "fronter", "longer"]);
        assert_eq!(short.taken_for, [(Vowel::from_ipa("i"), 6)]);
    }

    #[test]
    fn a_pair_the_norm_keeps_apart_and_the_learner_does_not() {
        let found = found();
        let pairs: Vec<String> = found
            .not_apart
            .iter()
            .map(|p| p.vowels.each_ref().map(Vowel::ipa).join(" "))
            .collect();
        assert_eq!(pairs, ["i ɪ"]);
        assert_eq!(found.not_apart[0].verdict, Verdict::NoEvidence);
    }

    #[test]
    fn what_one_has_and_the_other_lacks_is_said() {
        let found = found();
        assert_eq!(found.missing, [Vowel::from_ipa("æ")]);
        assert_eq!(found.unknown, [(Vowel::from_ipa("ø"), 6)]);
        assert!(!found.systems_differ());
        assert_eq!(check("nobody", &learner(), &norm()), None);
    }
}
