//! Pairs of vowels: kept apart, overlapping, or no evidence of a difference.

use rand::Rng;
use rand_pcg::Pcg64;
use rayon::prelude::*;

use super::contrast::SIGNIFICANCE;
use super::difference::mean_interval;
use super::overlap::Overlap;
use super::panel::Panel;
use super::plane::quadratic_form;
use super::resample::{Resampling, quantile};

/// What can be said of two vowels.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Verdict {
    /// Two vowels with less than half of their distribution in common.
    Apart,
    /// Two vowels that share half of their distribution or more.
    Overlapping,
    /// Nothing that one and the same vowel would not show too.
    NoEvidence,
    /// So few tokens that even vowels well apart could look like this.
    TooFew,
}

/// An affinity below this is called apart: two normal distributions of one spread whose means are
/// 2.35 standard deviations from each other. A rule of ours, not a law of nature.
pub const APART_AFFINITY: f64 = 0.5;

/// Where one vowel would reach this trace in one of twenty cases, a trace below the point says
/// nothing: there are too few tokens.
pub(super) const TELLING_POINT: f64 = 0.5;

/// Fewest tokens of each vowel for a speaker to be looked at: two leave no spread to compare with.
pub(super) const FEWEST_TOKENS: usize = 3;

/// Fewest speakers whose sign flips can give a p of 0.05: 2/2⁶ is 0.03.
const ABLE_TO_AGREE: usize = 6;

impl Verdict {
    /// In words.
    pub fn text(self) -> &'static str {
        match self {
            Self::Apart => "apart",
            Self::Overlapping => "overlapping",
            Self::NoEvidence => "no evidence of a difference",
            Self::TooFew => "too few tokens to tell",
        }
    }

    /// The rule that gives it.
    pub fn rule() -> &'static str {
        "apart: the Pillai trace is above the 95 % point of one and the same vowel at this number \
         of tokens, and the affinity is below 0.5; overlapping: the trace is above the point, the \
         affinity is not below 0.5; no evidence of a difference: the trace is not above the point; \
         too few tokens to tell: fewer than three tokens of one of the two, or the trace is not \
         above the point and the point itself is above 0.5; a group is called apart only if its \
         speakers also agree about the direction (p of sign flips at most 0.05, where there are \
         speakers enough to reach that), and overlapping otherwise"
    }

    pub(super) fn of(pillai: f64, point: f64, affinity: Option<f64>) -> Self {
        if pillai <= point {
            if point > TELLING_POINT {
                Self::TooFew
            } else {
                Self::NoEvidence
            }
        } else if affinity.is_some_and(|a| a < APART_AFFINITY) {
            Self::Apart
        } else {
            Self::Overlapping
        }
    }
}

/// A pair of vowels of one speaker, in normalized F1 and F2.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpeakerPair {
    /// Place of the speaker in the panel.
    pub speaker: usize,
    /// The overlap, where there are tokens enough.
    pub overlap: Option<Overlap>,
    /// What can be said.
    pub verdict: Verdict,
}

/// A pair of vowels of a group of speakers.
#[derive(Debug, Clone, PartialEq)]
pub struct GroupPair {
    /// Places of the vowels in the panel.
    pub vowels: [usize; 2],
    /// Place of the group, `None` for all speakers together.
    pub group: Option<usize>,
    /// Every speaker of the group who has both vowels.
    pub speakers: Vec<SpeakerPair>,
    /// Mean Pillai trace over the speakers who have tokens enough.
    pub pillai: f64,
    /// What that mean would be for one and the same vowel.
    pub pillai_if_merged: f64,
    /// What it would stay under in 95 of 100 such surveys.
    pub pillai_if_merged_95: f64,
    /// Mean affinity over the speakers.
    pub affinity: Option<f64>,
    /// Distance between the two vowels' means in hertz at the reference size, and its 95 %
    /// interval over speakers, along the line that joins the means: it reaches below zero where
    /// speakers disagree about the direction.
    pub distance_hz: Option<(f64, [f64; 2])>,
    /// The second vowel less the first in hertz at the reference size: F1, F2.
    pub difference_hz: [f64; 2],
    /// p of the sign-flip test that speakers have no common direction.
    pub common_direction_p: f64,
    /// What can be said of the group.
    pub verdict: Verdict,
}

impl GroupPair {
    /// Speakers who have tokens enough.
    pub fn speakers_told(&self) -> usize {
        self.speakers.iter().filter(|s| s.overlap.is_some()).count()
    }
}

/// All pairs of vowels in every group and, where there are groups, in all speakers together.
///
/// Pairs no speaker of a group has tokens enough for are left out.
pub fn pairs(panel: &Panel, resampling: &Resampling) -> Vec<GroupPair> {
    let places = Places::of(panel);
    let mut groups: Vec<Option<usize>> = vec![None];
    groups.extend((0..panel.groups.len()).map(Some));
    let count = panel.vowels.len();
    let mut asked = Vec::new();
    for a in 0..count {
        for b in a + 1..count {
            for group in &groups {
                asked.push(([a, b], *group));
            }
        }
    }
    asked
        .into_par_iter()
        .enumerate()
        .filter_map(|(piece, (vowels, group))| {
            // Streams of pairs start where those of the contrasts cannot reach.
            let mut random = resampling.stream((1 << 40) + piece as u64);
            group_pair(panel, &places, vowels, group, resampling, &mut random)
        })
        .collect()
}

/// Tokens of every vowel and speaker, as points.
struct Places {
    normalized: Vec<Vec<Vec<[f64; 2]>>>,
    at_reference: Vec<Vec<Vec<[f64; 2]>>>,
}

impl Places {
    fn of(panel: &Panel) -> Self {
        let empty = vec![vec![Vec::new(); panel.speakers.len()]; panel.vowels.len()];
        let mut places = Self {
            normalized: empty.clone(),
            at_reference: empty,
        };
        for t in &panel.tokens {
            if let (Some(place), Some(hz)) = (t.place(), t.place_at_reference()) {
                places.normalized[t.vowel][t.speaker].push(place);
                places.at_reference[t.vowel][t.speaker].push(hz);
            }
        }
        places
    }
}

fn mean(points: &[[f64; 2]]) -> [f64; 2] {
    [0, 1].map(|k| points.iter().map(|p| p[k]).sum::<f64>() / points.len() as f64)
}

fn group_pair(
    panel: &Panel,
    places: &Places,
    [a, b]: [usize; 2],
    group: Option<usize>,
    resampling: &Resampling,
    random: &mut Pcg64,
) -> Option<GroupPair> {
    let mut speakers = Vec::new();
    let mut differences = Vec::new();
    for s in panel.members(group) {
        let (first, second) = (&places.normalized[a][s], &places.normalized[b][s]);
        if first.is_empty() || second.is_empty() {
            continue;
        }
        let (from, to) = (
            mean(&places.at_reference[a][s]),
            mean(&places.at_reference[b][s]),
        );
        differences.push([to[0] - from[0], to[1] - from[1]]);
        let enough = first.len() >= FEWEST_TOKENS && second.len() >= FEWEST_TOKENS;
        let overlap = Overlap::of(first, second).filter(|_| enough);
        let verdict = overlap.map_or(Verdict::TooFew, |o| {
            Verdict::of(o.pillai, o.pillai_if_merged_95, o.affinity)
        });
        speakers.push(SpeakerPair {
            speaker: s,
            overlap,
            verdict,
        });
    }
    let overlaps: Vec<Overlap> = speakers.iter().filter_map(|s| s.overlap).collect();
    if overlaps.is_empty() {
        return None;
    }
    let told = overlaps.len() as f64;
    let pillai = overlaps.iter().map(|o| o.pillai).sum::<f64>() / told;
    let affinities: Vec<f64> = overlaps.iter().filter_map(|o| o.affinity).collect();
    let affinity =
        (!affinities.is_empty()).then(|| affinities.iter().sum::<f64>() / affinities.len() as f64);
    let point = mean_point_if_merged(&overlaps, resampling, random);
    let difference_hz = mean(&differences);
    let length = difference_hz[0].hypot(difference_hz[1]);
    let along: Vec<f64> = differences
        .iter()
        .map(|d| (d[0] * difference_hz[0] + d[1] * difference_hz[1]) / length)
        .collect();
    let common_direction_p = common_direction(&differences, resampling, random);
    let disagree = common_direction_p > SIGNIFICANCE && differences.len() >= ABLE_TO_AGREE;
    let verdict = match Verdict::of(pillai, point, affinity) {
        Verdict::Apart if disagree => Verdict::Overlapping,
        verdict => verdict,
    };
    Some(GroupPair {
        vowels: [a, b],
        group,
        pillai,
        pillai_if_merged: overlaps.iter().map(|o| o.pillai_if_merged).sum::<f64>() / told,
        pillai_if_merged_95: point,
        affinity,
        distance_hz: (length > 0.0)
            .then(|| mean_interval(&along, resampling, random))
            .flatten(),
        difference_hz,
        common_direction_p,
        verdict,
        speakers,
    })
}

/// The point that the mean trace of several speakers stays under in 95 % of surveys in which all
/// of them have one vowel; each trace is then Beta(1, (n−3)/2), drawn here by inversion.
fn mean_point_if_merged(overlaps: &[Overlap], resampling: &Resampling, random: &mut Pcg64) -> f64 {
    if let [one] = overlaps {
        return one.pillai_if_merged_95;
    }
    if overlaps.len() > MANY {
        return approximate_point(overlaps);
    }
    let mut means: Vec<f64> = (0..resampling.replicates)
        .map(|_| {
            let sum: f64 = overlaps
                .iter()
                .map(|o| {
                    let b = ((o.n[0] + o.n[1]) as f64 - 3.0) / 2.0;
                    1.0 - (1.0 - random.random::<f64>()).powf(1.0 / b)
                })
                .sum();
            sum / overlaps.len() as f64
        })
        .collect();
    means.sort_by(f64::total_cmp);
    quantile(&means, 0.95).unwrap_or(1.0)
}

/// Beyond this many speakers the mean of their traces is near enough to normal.
const MANY: usize = 30;

/// The same point for many speakers: normal quantile with a correction for skewness
/// (Cornish & Fisher 1938, Rev. Int. Statist. Inst. 5, 307-320, first term).
fn approximate_point(overlaps: &[Overlap]) -> f64 {
    const NORMAL_95: f64 = 1.644_853_626_951_472;
    let (mut mean, mut variance, mut third) = (0.0, 0.0, 0.0);
    for o in overlaps {
        let b = ((o.n[0] + o.n[1]) as f64 - 3.0) / 2.0;
        let v = b / ((1.0 + b).powi(2) * (2.0 + b));
        mean += 1.0 / (1.0 + b);
        variance += v;
        third += 2.0 * (b - 1.0) * (2.0 + b).sqrt() / ((3.0 + b) * b.sqrt()) * v.powf(1.5);
    }
    let skewness = third / variance.powf(1.5);
    let z = NORMAL_95 + (NORMAL_95 * NORMAL_95 - 1.0) / 6.0 * skewness;
    (mean + z * variance.sqrt()) / overlaps.len() as f64
}

/// Sign-flip test of the mean difference vector: if a pair has no common direction, each speaker's
/// difference could as well have the other sign.
///
/// *Source*: Fisher 1935, The Design of Experiments, section 21, in two dimensions with m'S⁻¹m, S
/// the sum of products, which no flip changes.
fn common_direction(differences: &[[f64; 2]], resampling: &Resampling, random: &mut Pcg64) -> f64 {
    let mut products = [0.0; 3];
    for d in differences {
        products[0] += d[0] * d[0];
        products[1] += d[0] * d[1];
        products[2] += d[1] * d[1];
    }
    let statistic = |sign: &dyn Fn(usize) -> f64| {
        let mut sum = [0.0; 2];
        for (n, d) in differences.iter().enumerate() {
            sum[0] += sign(n) * d[0];
            sum[1] += sign(n) * d[1];
        }
        // On a line the plane's form has no inverse; its length says the same.
        quadratic_form(products, sum).unwrap_or(sum[0] * sum[0] + sum[1] * sum[1])
    };
    let observed = statistic(&|_| 1.0) * (1.0 - 1e-9);
    let n = differences.len();
    let all = 2f64.powi(n as i32);
    if all <= resampling.arrangements as f64 {
        let arrangements = 1u64 << n;
        let extreme = (0..arrangements)
            .filter(|bits| statistic(&|k| if bits >> k & 1 == 1 { -1.0 } else { 1.0 }) >= observed)
            .count();
        return extreme as f64 / arrangements as f64;
    }
    // As many flips as bootstrap replicates: a p of 0.05 is then known to 0.005, enough for a
    // figure that decides nothing.
    let mut extreme = 1;
    for _ in 1..resampling.replicates {
        let signs: Vec<f64> = (0..n)
            .map(|_| if random.random::<bool>() { -1.0 } else { 1.0 })
            .collect();
        extreme += usize::from(statistic(&|k| signs[k]) >= observed);
    }
    extreme as f64 / resampling.replicates as f64
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::compare::panel::{MEASURES, PanelSpeaker, PanelToken};
    use crate::compare::resample::gaussian;
    use crate::normalize::Method;
    use crate::vowel::Vowel;

    /// Twelve speakers in two groups; two vowels `gap` spreads apart in the first group, one and
    /// the same in the second; `times` tokens each.
    fn survey(gap: f64, times: usize) -> Panel {
        let mut random = Resampling::default().stream(9);
        let mut tokens = Vec::new();
        for speaker in 0..12 {
            let own = gaussian(&mut random);
            for vowel in 0..2 {
                for _ in 0..times {
                    let shift = if speaker < 6 { gap * vowel as f64 } else { 0.0 };
                    let f1 = own + shift + gaussian(&mut random);
                    let f2 = own + gaussian(&mut random);
                    let mut values = [None; MEASURES];
                    values[..4].copy_from_slice(&[
                        Some(f1),
                        Some(f2),
                        Some(500.0 + 30.0 * f1),
                        Some(1_500.0 + 80.0 * f2),
                    ]);
                    let token = String::new();
                    tokens.push(PanelToken {
                        token,
                        speaker,
                        vowel,
                        values,
                        path: Vec::new(),
                    });
                }
            }
        }
        Panel {
            vowels: vec![Vowel::from_ipa("ɑ"), Vowel::from_ipa("ɔ")],
            groups: vec!["a".to_owned(), "b".to_owned()],
            speakers: (0..12)
                .map(|n| PanelSpeaker {
                    name: format!("{n:02}"),
                    group: Some(n / 6),
                    stratum: 0,
                })
                .collect(),
            tokens,
            left_out: Default::default(),
            method: Method::RegressionLogMean,
        }
    }

    fn verdict(panel: &Panel, group: usize) -> GroupPair {
        let found = pairs(panel, &Resampling::default());
        found.into_iter().find(|p| p.group == Some(group)).unwrap()
    }

    #[test]
    fn each_verdict_where_it_belongs() {
        let apart = verdict(&survey(5.0, 8), 0);
        assert_eq!(apart.verdict, Verdict::Apart);
        // Six speakers agree about a direction: two of 2^6 sign patterns.
        assert_eq!(apart.common_direction_p, 2.0 / 64.0);
        let (distance, [low, high]) = apart.distance_hz.unwrap();
        assert!(
            low < 150.0 && 150.0 < high && low > 100.0,
            "{distance} {low} {high}"
        );
        assert_eq!(verdict(&survey(1.2, 12), 0).verdict, Verdict::Overlapping);
        assert_eq!(verdict(&survey(5.0, 8), 1).verdict, Verdict::NoEvidence);
    }

    #[test]
    fn the_point_of_one_speaker_is_the_closed_form_and_of_many_is_lower() {
        let pair = verdict(&survey(0.0, 8), 1);
        let single = pair.speakers[0].overlap.unwrap().pillai_if_merged_95;
        assert!((pair.pillai_if_merged - 2.0 / 15.0).abs() < 1e-12);
        assert!(pair.pillai_if_merged_95 < single);
        // Mean of six Beta(1, 6.5): mean 0.133, sd 0.117/√6; the point by the normal
        // approximation 0.133 + 1.645 · 0.048 = 0.212.
        assert!(
            (pair.pillai_if_merged_95 - 0.212).abs() < 0.01,
            "{}",
            pair.pillai_if_merged_95
        );
    }

    #[test]
    fn the_approximate_point_meets_the_simulated_one() {
        let pair = verdict(&survey(0.0, 8), 1);
        let overlaps: Vec<Overlap> = pair.speakers.iter().filter_map(|s| s.overlap).collect();
        let many: Vec<Overlap> = overlaps.iter().cycle().take(MANY).copied().collect();
        let resampling = Resampling {
            replicates: 40_000,
            ..Resampling::default()
        };
        let simulated = mean_point_if_merged(&many, &resampling, &mut resampling.stream(1));
        // The simulated 95 % point has a standard error of 0.0002.
        assert!((approximate_point(&many) - simulated).abs() < 0.001);
    }

    #[test]
    fn two_tokens_are_too_few() {
        assert!(pairs(&survey(5.0, 2), &Resampling::default()).is_empty());
        let three = verdict(&survey(0.0, 3), 1);
        // Six tokens: the point of one speaker is 1 − 0.05^(2/3) = 0.864.
        assert!(three.speakers.iter().all(|s| s.verdict == Verdict::TooFew));
    }
}
