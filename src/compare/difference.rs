//! The difference of two groups, in one number per speaker or in the F1–F2 plane.
//!
//! The speaker is the unit of sampling: what enters is one mean per speaker, however many tokens
//! stand behind it.

use rand::Rng;
use rand_pcg::Pcg64;
use statrs::distribution::{ContinuousCDF, StudentsT};

use super::plane::{quadratic_form, scatter};
use super::resample::{Resampling, Test, permute, quantile};
use super::sample::{Column, Layout, Side, bootstrap, seconds};
use super::single;

/// Difference of two groups: the second less the first.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Difference {
    /// Speakers of each group that enter.
    pub speakers: [usize; 2],
    /// Mean of each group over its speakers' means, as weighted for the difference.
    pub means: [f64; 2],
    /// The second less the first.
    pub value: f64,
    /// 95 % interval of the difference; `None` where there are too few speakers for one.
    pub interval: Option<[f64; 2]>,
    /// Whether it could be chance.
    pub test: Test,
    /// Difference in standard deviations between speakers within groups, corrected for small
    /// numbers (Hedges 1981, J. Educ. Statist. 6, 107-128).
    pub hedges_g: Option<f64>,
}

/// Share of intervals that should hold the true difference.
pub const CONFIDENCE: f64 = 0.95;

/// Compares two groups in several numbers at once.
///
/// `sides` says where each speaker stands; `values` has, for each number, a value per speaker or
/// `None`. Only strata with speakers of both groups enter, each with the weight n₁n₂/(n₁+n₂) of the
/// most precise mean of differences. A result is `None` where there is no such stratum.
///
/// *Interval*: each group's speakers are drawn anew with replacement, as deviations from their
/// stratum's mean scaled by √(n/(n−1)), and the percentiles of the differences are widened by the
/// ratio of Student's to the normal quantile with Welch's degrees of freedom: bootstrap percentiles
/// of small samples are too narrow for these two reasons (Hesterberg 2015, Am. Statistician 69,
/// 371-386).
///
/// *Test*: permutation of speakers, of the difference over its standard error (Janssen 1997,
/// Statist. Probab. Letters 36, 9-21: so it holds also where one group varies more).
///
/// Where a side is one speaker, interval and test are those of a single case, see [`single`].
pub fn differences(
    sides: &[Side],
    values: &[Vec<Option<f64>>],
    resampling: &Resampling,
    random: &mut Pcg64,
) -> Vec<Option<Difference>> {
    let mut found: Vec<Option<Difference>> = vec![None; values.len()];
    let presence = |n: usize| -> Vec<bool> { values[n].iter().map(Option::is_some).collect() };
    for n in 0..values.len() {
        let present = presence(n);
        let alike: Vec<usize> = (0..values.len())
            .filter(|m| presence(*m) == present)
            .collect();
        // Numbers that the same speakers have share their arrangements; the first does the work.
        if alike.first() != Some(&n) {
            continue;
        }
        let Some(layout) = Layout::of(sides, |s| present[s]) else {
            continue;
        };
        let columns: Vec<Column> = alike
            .iter()
            .map(|m| {
                let own: Vec<f64> = layout.kept.iter().filter_map(|s| values[*m][*s]).collect();
                Column::of(&layout, &own)
            })
            .collect();
        let compared = match layout.speakers() {
            [1, _] | [_, 1] => columns
                .iter()
                .map(|c| single::difference(&layout, c))
                .collect(),
            _ => compare(&layout, &columns, resampling, random),
        };
        for (m, difference) in alike.into_iter().zip(compared) {
            found[m] = Some(difference);
        }
    }
    found
}

fn compare(
    layout: &Layout,
    columns: &[Column],
    resampling: &Resampling,
    random: &mut Pcg64,
) -> Vec<Difference> {
    let statistics = |groups: &[usize], sizes: &mut [f64]| {
        let second = seconds(groups);
        for (column, size) in columns.iter().zip(sizes) {
            let e = column.estimate(layout, &second);
            *size = match e.error() {
                Some(error) if error > 0.0 => e.difference().abs() / error,
                // No spread at all: any difference is infinitely many errors.
                _ => e.difference().abs() * 1e12,
            };
        }
    };
    let (groups, strata) = (&layout.groups, &layout.strata);
    let tests = permute(
        groups,
        strata,
        resampling.arrangements,
        random,
        columns.len(),
        statistics,
    );
    let second = seconds(groups);
    let draws = bootstrap(layout, columns, resampling.replicates, random);
    columns
        .iter()
        .zip(tests)
        .zip(draws)
        .map(|((column, test), mut draws)| {
            let found = column.estimate(layout, &second);
            let value = found.difference();
            let interval = found.error().map(|error| {
                if error == 0.0 {
                    return [value, value];
                }
                let stretch = found
                    .freedom()
                    .map_or(1.0, |freedom| student_quantile(freedom) / NORMAL_975);
                draws.sort_by(f64::total_cmp);
                let at = |share| value + stretch * quantile(&draws, share).unwrap_or(0.0);
                [at(0.5 - CONFIDENCE / 2.0), at(0.5 + CONFIDENCE / 2.0)]
            });
            Difference {
                speakers: layout.speakers(),
                means: found.means,
                value,
                interval,
                test,
                hedges_g: found.hedges_g(),
            }
        })
        .collect()
}

/// A mean over speakers and its 95 % interval, made as in [`differences`].
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
            let draws = 0..values.len();
            let sum: f64 = draws
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

/// 97.5 % quantile of Student's distribution.
pub(super) fn student_quantile(freedom: f64) -> f64 {
    // Below one degree of freedom the quantile explodes without telling more than `wide`.
    StudentsT::new(0.0, 1.0, freedom.max(1.0))
        .map_or(NORMAL_975, |t| t.inverse_cdf(0.5 + CONFIDENCE / 2.0))
}

/// Test whether two groups stand at the same place of the F1–F2 plane.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PlaceTest {
    /// Speakers of each group that enter.
    pub speakers: [usize; 2],
    /// The permutation test of d'T⁻¹d, d the difference and T the speakers' total scatter.
    pub test: Test,
}

/// Compares the places of two groups in the plane by permutation of speakers.
///
/// `None` where no stratum has speakers of both groups or the scatter has no inverse.
///
/// *Source*: for two groups the statistic grows with Hotelling's T² (Hotelling 1931, Ann. Math.
/// Statist. 2, 360-378). Where a side is one speaker, see [`single`].
pub fn place_test(
    sides: &[Side],
    places: &[Option<[f64; 2]>],
    resampling: &Resampling,
    random: &mut Pcg64,
) -> Option<PlaceTest> {
    let layout = Layout::of(sides, |s| places[s].is_some())?;
    let axis = |k: usize| {
        let own: Vec<f64> = layout
            .kept
            .iter()
            .filter_map(|s| Some(places[*s]?[k]))
            .collect();
        Column::of(&layout, &own)
    };
    let axes = [axis(0), axis(1)];
    let speakers = layout.speakers();
    if speakers.contains(&1) {
        return Some(PlaceTest {
            speakers,
            test: single::place(&layout, &axes)?,
        });
    }
    let centred: Vec<[f64; 2]> = axes[0]
        .centred
        .iter()
        .zip(&axes[1].centred)
        .map(|(a, b)| [*a, *b])
        .collect();
    let total = scatter(&centred, [0.0, 0.0]);
    quadratic_form(total, [1.0, 1.0])?;
    let statistic = |groups: &[usize], size: &mut [f64]| {
        let second = seconds(groups);
        let d = [0, 1].map(|k| axes[k].difference(&layout, &second));
        size[0] = quadratic_form(total, d).unwrap_or(0.0);
    };
    let (groups, strata) = (&layout.groups, &layout.strata);
    let tests = permute(
        groups,
        strata,
        resampling.arrangements,
        random,
        1,
        statistic,
    );
    Some(PlaceTest {
        speakers,
        test: *tests.first()?,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    const FIRST: [f64; 5] = [1.2, 0.7, 1.9, 2.4, 1.1];
    const SECOND: [f64; 6] = [2.2, 3.1, 1.8, 2.9, 3.4, 2.0];

    fn compared(sides: &[Side], values: &[f64]) -> Difference {
        let resampling = Resampling::default();
        let values = vec![values.iter().copied().map(Some).collect()];
        differences(sides, &values, &resampling, &mut resampling.stream(1))[0].unwrap()
    }

    fn two(first: &[f64], second: &[f64]) -> Difference {
        let sides: Vec<Side> = std::iter::repeat_n(0, first.len())
            .chain(std::iter::repeat_n(1, second.len()))
            .map(|group| Side { group, stratum: 0 })
            .collect();
        compared(&sides, &[first, second].concat())
    }

    #[test]
    fn permutation_of_fixed_values_agrees_with_a_general_library() {
        let found = two(&FIRST, &SECOND);
        // scipy 1.17.1: permutation_test((x, y), |Welch t|, n_resamples=inf, alternative='greater'),
        // 462 arrangements.
        assert!((found.test.p - 0.032467532467532464).abs() < 1e-12);
        assert_eq!(found.speakers, [5, 6]);
        assert!((found.value - (15.4 / 6.0 - 7.3 / 5.0)).abs() < 1e-12);
    }

    #[test]
    fn the_interval_is_near_welchs_where_values_are_near_normal() {
        let found = two(&FIRST, &SECOND);
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
        let found = two(&[0.0, 1.0, 2.0], &[2.0, 3.0, 4.0]);
        assert!((found.hedges_g.unwrap() - 1.6).abs() < 1e-12);
    }

    #[test]
    fn balancing_takes_out_what_the_groups_do_not_share() {
        // Women are 10 higher than men; the second group has more women, and no difference else.
        let (mut sides, mut values) = (Vec::new(), Vec::new());
        for (group, men, women) in [(0, 4, 2), (1, 2, 4)] {
            for (stratum, count) in [(0, men), (1, women)] {
                for k in 0..count {
                    sides.push(Side { group, stratum });
                    values.push(10.0 * stratum as f64 + [0.1, -0.1][k % 2]);
                }
            }
        }
        assert!(compared(&sides, &values).value.abs() < 1e-12);
        let blind: Vec<Side> = sides.iter().map(|s| Side { stratum: 0, ..*s }).collect();
        assert!((compared(&blind, &values).value - 10.0 / 3.0).abs() < 1e-12);
    }

    #[test]
    fn numbers_that_other_speakers_have_do_not_disturb_each_other() {
        let sides: Vec<Side> = (0..8)
            .map(|n| Side {
                group: n % 2,
                stratum: 0,
            })
            .collect();
        let full: Vec<Option<f64>> = (0..8).map(|n| Some(f64::from(n * n))).collect();
        let mut part = full.clone();
        part[0] = None;
        let resampling = Resampling::default();
        let both = [full.clone(), part.clone(), full];
        let found = differences(&sides, &both, &resampling, &mut resampling.stream(1));
        let alone = differences(&sides, &[part], &resampling, &mut resampling.stream(1));
        assert_eq!(found[0].unwrap().test, found[2].unwrap().test);
        assert_eq!(found[1].unwrap().speakers, [3, 4]);
        // Exact tests do not depend on the stream.
        assert_eq!(found[1].unwrap().test, alone[0].unwrap().test);
    }

    #[test]
    fn places_are_compared_in_both_dimensions() {
        // Apart only across the diagonal: neither axis alone shows it.
        let (mut sides, mut places) = (Vec::new(), Vec::new());
        for k in 0..8 {
            let x = f64::from(k);
            let wobble = [0.2, -0.1, 0.1, -0.2][k as usize % 4];
            sides.push(Side {
                group: 0,
                stratum: 0,
            });
            places.push(Some([x, x + wobble]));
            sides.push(Side {
                group: 1,
                stratum: 0,
            });
            places.push(Some([x, x + 1.0 - wobble]));
        }
        let resampling = Resampling::default();
        let found = place_test(&sides, &places, &resampling, &mut resampling.stream(2)).unwrap();
        assert!(found.test.p < 0.001);
        assert_eq!(found.speakers, [8, 8]);
    }
}
