//! The difference of two groups in one number per speaker.
//!
//! The speaker is the unit of sampling: what enters is one mean per speaker, however many tokens
//! stand behind it.

use rand::Rng;
use rand_pcg::Pcg64;
use statrs::distribution::{ContinuousCDF, StudentsT};

use super::plane::{quadratic_form, scatter};
use super::resample::{Permutation, Resampling, permute, quantile};

/// One speaker's mean, the group the speaker is in, and the stratum the speaker is compared within.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpeakerMean<V> {
    /// The mean.
    pub value: V,
    /// 0 for the first group, 1 for the second.
    pub group: usize,
    /// Speakers of one stratum are compared with each other; all the same where nothing is
    /// balanced.
    pub stratum: usize,
}

/// Difference of two groups: the second less the first.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Difference {
    /// Speakers of each group that enter.
    pub speakers: [usize; 2],
    /// Mean of each group over its speakers' means, as weighted for the difference.
    pub means: [f64; 2],
    /// The second less the first.
    pub value: f64,
    /// 95 % interval of the difference; `None` where a group has fewer than two speakers that vary.
    pub interval: Option<[f64; 2]>,
    /// The permutation test.
    pub permutation: Permutation,
    /// Difference in standard deviations between speakers within groups, corrected for small
    /// numbers (Hedges 1981, J. Educ. Statist. 6, 107-128).
    pub hedges_g: Option<f64>,
}

/// Share of intervals that should hold the true difference.
pub const CONFIDENCE: f64 = 0.95;

/// Compares two groups in one number.
///
/// Only strata with speakers of both groups enter, each with the weight n₁n₂/(n₁+n₂) of the most
/// precise mean of differences. `None` where there is no such stratum.
///
/// *Interval*: each group's speakers are drawn anew with replacement, as deviations from their
/// stratum's mean scaled by √(n/(n−1)), and the percentiles of the differences are widened by the
/// ratio of Student's to the normal quantile with Welch's degrees of freedom: bootstrap percentiles
/// of small samples are too narrow for these two reasons (Hesterberg 2015, Am. Statistician 69,
/// 371-386).
///
/// *Test*: permutation of speakers, of the difference over its standard error (Janssen 1997,
/// Statist. Probab. Letters 36, 9-21: so it holds also where one group varies more).
pub fn difference(
    speakers: &[SpeakerMean<f64>],
    resampling: &Resampling,
    random: &mut Pcg64,
) -> Option<Difference> {
    let sample = Sample::of(speakers)?;
    let found = sample.estimate(&sample.groups);
    let error = found.error();
    let permutation = permute(
        &sample.groups,
        &sample.strata,
        resampling.arrangements,
        random,
        |groups| {
            let e = sample.estimate(groups);
            match e.error() {
                Some(error) if error > 0.0 => (e.means[1] - e.means[0]).abs() / error,
                // No spread at all: any difference is infinitely many errors.
                _ => (e.means[1] - e.means[0]).abs() * 1e12,
            }
        },
    );
    let value = found.means[1] - found.means[0];
    let interval = error.map(|error| {
        let stretch = match found.freedom() {
            Some(freedom) => student_quantile(freedom) / NORMAL_975,
            None => 1.0,
        };
        if error == 0.0 {
            return [value, value];
        }
        let mut draws = sample.bootstrap(resampling.replicates, random);
        draws.sort_by(f64::total_cmp);
        let at = |share| value + stretch * quantile(&draws, share).unwrap_or(0.0);
        [at(0.5 - CONFIDENCE / 2.0), at(0.5 + CONFIDENCE / 2.0)]
    });
    Some(Difference {
        speakers: found.counts,
        means: found.means,
        value,
        interval,
        permutation,
        hedges_g: found.hedges_g(),
    })
}

/// A mean over speakers and its 95 % interval, made as in [`difference`].
///
/// `None` for fewer than two speakers.
pub fn mean_interval(
    values: &[f64],
    resampling: &Resampling,
    random: &mut Pcg64,
) -> Option<(f64, [f64; 2])> {
    let n = values.len() as f64;
    if values.len() < 2 {
        return None;
    }
    let mean = values.iter().sum::<f64>() / n;
    let scale = (n / (n - 1.0)).sqrt() * student_quantile(n - 1.0) / NORMAL_975;
    let mut draws: Vec<f64> = (0..resampling.replicates)
        .map(|_| {
            let sum: f64 = (0..values.len())
                .map(|_| values[random.random_range(0..values.len())])
                .sum();
            scale * (sum / n - mean)
        })
        .collect();
    draws.sort_by(f64::total_cmp);
    let at = |share| mean + quantile(&draws, share).unwrap_or(0.0);
    Some((
        mean,
        [at(0.5 - CONFIDENCE / 2.0), at(0.5 + CONFIDENCE / 2.0)],
    ))
}

/// 97.5 % quantile of the standard normal distribution.
const NORMAL_975: f64 = 1.959_963_984_540_054;

fn student_quantile(freedom: f64) -> f64 {
    // Below two degrees of freedom the quantile explodes without telling more than `wide`.
    StudentsT::new(0.0, 1.0, freedom.max(1.0))
        .map_or(NORMAL_975, |t| t.inverse_cdf(0.5 + CONFIDENCE / 2.0))
}

/// Test whether two groups stand at the same place of the F1–F2 plane.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PlaceTest {
    /// Speakers of each group that enter.
    pub speakers: [usize; 2],
    /// The permutation test of d'T⁻¹d, d the difference and T the speakers' total scatter.
    pub permutation: Permutation,
}

/// Compares the places of two groups in the plane by permutation of speakers.
///
/// `None` where no stratum has speakers of both groups or the scatter has no inverse.
///
/// *Source*: for two groups the statistic grows with Hotelling's T² (Hotelling 1931).
pub fn place_test(
    speakers: &[SpeakerMean<[f64; 2]>],
    resampling: &Resampling,
    random: &mut Pcg64,
) -> Option<PlaceTest> {
    let axis = |k: usize| -> Vec<SpeakerMean<f64>> {
        speakers
            .iter()
            .map(|s| SpeakerMean {
                value: s.value[k],
                group: s.group,
                stratum: s.stratum,
            })
            .collect()
    };
    let (one, two) = (Sample::of(&axis(0))?, Sample::of(&axis(1))?);
    let centred: Vec<[f64; 2]> = one
        .centred()
        .into_iter()
        .zip(two.centred())
        .map(|(a, b)| [a, b])
        .collect();
    let total = scatter(&centred, [0.0, 0.0]);
    quadratic_form(total, [1.0, 1.0])?;
    let statistic = |groups: &[usize]| {
        let d = [&one, &two].map(|s| {
            let [a, b] = s.means(groups);
            b - a
        });
        quadratic_form(total, d).unwrap_or(0.0)
    };
    let permutation = permute(
        &one.groups,
        &one.strata,
        resampling.arrangements,
        random,
        statistic,
    );
    let second = one.groups.iter().sum::<usize>();
    Some(PlaceTest {
        speakers: [one.groups.len() - second, second],
        permutation,
    })
}

/// The speakers of strata in which both groups are present.
struct Sample {
    values: Vec<f64>,
    groups: Vec<usize>,
    /// Stratum of each speaker, numbered from 0 without gaps.
    strata: Vec<usize>,
    weights: Vec<f64>,
}

/// Group means and spreads for one arrangement.
struct Estimate {
    counts: [usize; 2],
    means: [f64; 2],
    /// Variance within strata of each group, and its degrees of freedom.
    variance: [f64; 2],
    freedom: [f64; 2],
    /// What each variance is multiplied with for the error of the weighted mean.
    leverage: [f64; 2],
}

impl Sample {
    fn of(speakers: &[SpeakerMean<f64>]) -> Option<Self> {
        let mut names: Vec<usize> = speakers.iter().map(|s| s.stratum).collect();
        names.sort_unstable();
        names.dedup();
        let count = |name: usize, group: usize| {
            speakers
                .iter()
                .filter(|s| s.stratum == name && s.group == group)
                .count() as f64
        };
        names.retain(|name| count(*name, 0) > 0.0 && count(*name, 1) > 0.0);
        if names.is_empty() {
            return None;
        }
        let weights: Vec<f64> = names
            .iter()
            .map(|n| count(*n, 0) * count(*n, 1) / (count(*n, 0) + count(*n, 1)))
            .collect();
        let whole: f64 = weights.iter().sum();
        let mut sample = Self {
            values: Vec::new(),
            groups: Vec::new(),
            strata: Vec::new(),
            weights: weights.into_iter().map(|w| w / whole).collect(),
        };
        for s in speakers {
            if let Some(stratum) = names.iter().position(|n| *n == s.stratum) {
                sample.values.push(s.value);
                sample.groups.push(s.group);
                sample.strata.push(stratum);
            }
        }
        Some(sample)
    }

    /// Sum and count of every stratum and group.
    fn cells(&self, groups: &[usize]) -> Vec<[(f64, f64); 2]> {
        let mut cells = vec![[(0.0, 0.0); 2]; self.weights.len()];
        for ((v, g), s) in self.values.iter().zip(groups).zip(&self.strata) {
            let cell = &mut cells[*s][*g];
            cell.0 += v;
            cell.1 += 1.0;
        }
        cells
    }

    fn means(&self, groups: &[usize]) -> [f64; 2] {
        let mut means = [0.0; 2];
        for (cell, weight) in self.cells(groups).iter().zip(&self.weights) {
            for g in 0..2 {
                means[g] += weight * cell[g].0 / cell[g].1;
            }
        }
        means
    }

    fn estimate(&self, groups: &[usize]) -> Estimate {
        let cells = self.cells(groups);
        let mut e = Estimate {
            counts: [0; 2],
            means: [0.0; 2],
            variance: [0.0; 2],
            freedom: [0.0; 2],
            leverage: [0.0; 2],
        };
        for (cell, weight) in cells.iter().zip(&self.weights) {
            for g in 0..2 {
                let (sum, n) = cell[g];
                e.counts[g] += n as usize;
                e.means[g] += weight * sum / n;
                e.freedom[g] += n - 1.0;
                e.leverage[g] += weight * weight / n;
            }
        }
        for ((v, g), s) in self.values.iter().zip(groups).zip(&self.strata) {
            let (sum, n) = cells[*s][*g];
            e.variance[*g] += (v - sum / n).powi(2);
        }
        for g in 0..2 {
            e.variance[g] /= e.freedom[g].max(1.0);
        }
        e
    }

    /// Deviations from the stratum means.
    fn centred(&self) -> Vec<f64> {
        let cells = self.cells(&self.groups);
        let means: Vec<f64> = cells
            .iter()
            .map(|[a, b]| (a.0 + b.0) / (a.1 + b.1))
            .collect();
        self.values
            .iter()
            .zip(&self.strata)
            .map(|(v, s)| v - means[*s])
            .collect()
    }

    /// Errors of the difference in surveys drawn from this one.
    fn bootstrap(&self, replicates: usize, random: &mut Pcg64) -> Vec<f64> {
        let cells = self.cells(&self.groups);
        let mut residuals: [Vec<f64>; 2] = [Vec::new(), Vec::new()];
        for ((v, g), s) in self.values.iter().zip(&self.groups).zip(&self.strata) {
            let (sum, n) = cells[*s][*g];
            if n > 1.0 {
                residuals[*g].push((v - sum / n) * (n / (n - 1.0)).sqrt());
            }
        }
        (0..replicates)
            .map(|_| {
                let mut error = 0.0;
                for (cell, weight) in cells.iter().zip(&self.weights) {
                    for (g, sign) in [(0, -1.0), (1, 1.0)] {
                        let n = cell[g].1;
                        let pool = &residuals[g];
                        let sum: f64 = (0..n as usize)
                            .map(|_| pool[random.random_range(0..pool.len())])
                            .sum();
                        error += sign * weight * sum / n;
                    }
                }
                error
            })
            .collect()
    }
}

impl Estimate {
    /// Standard error of the difference; `None` where a group has no degree of freedom.
    fn error(&self) -> Option<f64> {
        (self.freedom[0] > 0.0 && self.freedom[1] > 0.0).then(|| {
            (self.variance[0] * self.leverage[0] + self.variance[1] * self.leverage[1]).sqrt()
        })
    }

    /// Welch's degrees of freedom (Welch 1947, Biometrika 34, 28-35).
    fn freedom(&self) -> Option<f64> {
        let parts = [0, 1].map(|g| self.variance[g] * self.leverage[g]);
        let below: f64 = (0..2).map(|g| parts[g] * parts[g] / self.freedom[g]).sum();
        (below > 0.0).then(|| (parts[0] + parts[1]).powi(2) / below)
    }

    fn hedges_g(&self) -> Option<f64> {
        let freedom = self.freedom[0] + self.freedom[1];
        if freedom < 2.0 {
            return None;
        }
        let pooled =
            (self.variance[0] * self.freedom[0] + self.variance[1] * self.freedom[1]) / freedom;
        let small = 1.0 - 3.0 / (4.0 * freedom - 1.0);
        (pooled > 0.0).then(|| small * (self.means[1] - self.means[0]) / pooled.sqrt())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn speakers(first: &[f64], second: &[f64]) -> Vec<SpeakerMean<f64>> {
        let of = |values: &[f64], group: usize| -> Vec<SpeakerMean<f64>> {
            values
                .iter()
                .map(|v| SpeakerMean {
                    value: *v,
                    group,
                    stratum: 0,
                })
                .collect()
        };
        [of(first, 0), of(second, 1)].concat()
    }

    const FIRST: [f64; 5] = [1.2, 0.7, 1.9, 2.4, 1.1];
    const SECOND: [f64; 6] = [2.2, 3.1, 1.8, 2.9, 3.4, 2.0];

    fn compared(speakers: &[SpeakerMean<f64>]) -> Difference {
        let resampling = Resampling::default();
        difference(speakers, &resampling, &mut resampling.stream(1)).unwrap()
    }

    #[test]
    fn permutation_of_fixed_values_agrees_with_a_general_library() {
        let found = compared(&speakers(&FIRST, &SECOND));
        // scipy 1.17.1: permutation_test((x, y), |Welch t|, n_resamples=inf, alternative='greater'),
        // 462 arrangements.
        assert!((found.permutation.p - 0.032467532467532464).abs() < 1e-12);
        assert_eq!(found.speakers, [5, 6]);
        assert!((found.value - (15.4 / 6.0 - 7.3 / 5.0)).abs() < 1e-12);
    }

    #[test]
    fn the_interval_is_near_welchs_where_values_are_near_normal() {
        let found = compared(&speakers(&FIRST, &SECOND));
        // scipy 1.17.1: ttest_ind(y, x, equal_var=False).confidence_interval().
        let welch = [0.18300377975992355, 2.0303295535734107];
        let interval = found.interval.unwrap();
        for (ours, theirs) in interval.iter().zip(welch) {
            // A tenth of the length: bootstrap and Student are not the same thing.
            assert!((ours - theirs).abs() < 0.18, "{interval:?}");
        }
    }

    #[test]
    fn the_interval_of_a_mean_is_near_students() {
        let resampling = Resampling::default();
        let (mean, interval) =
            mean_interval(&SECOND, &resampling, &mut resampling.stream(4)).unwrap();
        assert!((mean - 15.4 / 6.0).abs() < 1e-12);
        // scipy 1.17.1: ttest_1samp(y, 0).confidence_interval().
        for (ours, theirs) in interval.iter().zip([1.8811781771636498, 3.252155156169684]) {
            assert!((ours - theirs).abs() < 0.13, "{interval:?}");
        }
    }

    #[test]
    fn hedges_g_by_hand() {
        // Means 1 and 3, variances 1 and 1, pooled sd 1; correction 1 − 3/(4·4 − 1) = 0.8.
        let found = compared(&speakers(&[0.0, 1.0, 2.0], &[2.0, 3.0, 4.0]));
        assert!((found.hedges_g.unwrap() - 1.6).abs() < 1e-12);
    }

    #[test]
    fn balancing_takes_out_what_the_groups_do_not_share() {
        // Women are 10 higher than men; the second group has more women, and no difference else.
        let mut all = Vec::new();
        for (group, men, women) in [(0, 4, 2), (1, 2, 4)] {
            for (stratum, count) in [(0, men), (1, women)] {
                for k in 0..count {
                    let value = 10.0 * stratum as f64 + [0.1, -0.1][k % 2];
                    all.push(SpeakerMean {
                        value,
                        group,
                        stratum,
                    });
                }
            }
        }
        assert!(compared(&all).value.abs() < 1e-12);
        let blind: Vec<_> = all
            .iter()
            .map(|s| SpeakerMean { stratum: 0, ..*s })
            .collect();
        assert!((compared(&blind).value - 10.0 / 3.0).abs() < 1e-12);
    }

    #[test]
    fn one_speaker_in_a_group_gives_no_interval() {
        let found = compared(&speakers(&[1.0], &[2.0, 3.0, 4.0]));
        assert_eq!(found.interval, None);
        assert_eq!(found.permutation.smallest_p, 0.25);
    }

    #[test]
    fn places_are_compared_in_both_dimensions() {
        // Apart only across the diagonal: neither axis alone shows it.
        let mut all = Vec::new();
        for k in 0..8 {
            let x = f64::from(k);
            let wobble = [0.2, -0.1, 0.1, -0.2][k as usize % 4];
            all.push(SpeakerMean {
                value: [x, x + wobble],
                group: 0,
                stratum: 0,
            });
            all.push(SpeakerMean {
                value: [x, x + 1.0 - wobble],
                group: 1,
                stratum: 0,
            });
        }
        let resampling = Resampling::default();
        let found = place_test(&all, &resampling, &mut resampling.stream(2)).unwrap();
        assert!(found.permutation.p < 0.001);
        assert_eq!(found.speakers, [8, 8]);
    }
}
