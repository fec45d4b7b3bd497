//! Speakers of two groups, sorted by stratum: what a difference is estimated from.

use rand::Rng;
use rand_pcg::Pcg64;

/// Where a speaker stands in a comparison of two groups.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Side {
    /// 0 for the first group, 1 for the second.
    pub group: usize,
    /// Speakers of one stratum are compared with each other; all the same where nothing is
    /// balanced.
    pub stratum: usize,
}

/// The speakers of strata in which both groups are present.
#[derive(Debug, Clone)]
pub(super) struct Layout {
    /// Which of the speakers given enter.
    pub(super) kept: Vec<usize>,
    /// Group of each speaker.
    pub(super) groups: Vec<usize>,
    /// Stratum of each speaker, numbered from 0 without gaps.
    pub(super) strata: Vec<usize>,
    /// Speakers of each stratum and group.
    counts: Vec<[f64; 2]>,
    /// n₁n₂/(n₁+n₂) of each stratum, as a share of the whole.
    weights: Vec<f64>,
}

impl Layout {
    /// The layout of those `sides` that are `present`; `None` where no stratum has both groups.
    pub(super) fn of(sides: &[Side], present: impl Fn(usize) -> bool) -> Option<Self> {
        let given: Vec<usize> = (0..sides.len()).filter(|s| present(*s)).collect();
        let mut names: Vec<usize> = given.iter().map(|s| sides[*s].stratum).collect();
        names.sort_unstable();
        names.dedup();
        let count = |name: usize, group: usize| {
            let own = given.iter().filter(|s| {
                sides[**s]
                    == Side {
                        group,
                        stratum: name,
                    }
            });
            own.count() as f64
        };
        names.retain(|name| count(*name, 0) > 0.0 && count(*name, 1) > 0.0);
        if names.is_empty() {
            return None;
        }
        let counts: Vec<[f64; 2]> = names.iter().map(|n| [count(*n, 0), count(*n, 1)]).collect();
        let weights: Vec<f64> = counts.iter().map(|[a, b]| a * b / (a + b)).collect();
        let whole: f64 = weights.iter().sum();
        let mut layout = Self {
            kept: Vec::new(),
            groups: Vec::new(),
            strata: Vec::new(),
            counts,
            weights: weights.into_iter().map(|w| w / whole).collect(),
        };
        for s in given {
            if let Some(stratum) = names.iter().position(|n| *n == sides[s].stratum) {
                layout.kept.push(s);
                layout.groups.push(sides[s].group);
                layout.strata.push(stratum);
            }
        }
        Some(layout)
    }

    /// Speakers of each group.
    pub(super) fn speakers(&self) -> [usize; 2] {
        let second = self.groups.iter().sum::<usize>();
        [self.groups.len() - second, second]
    }
}

/// One number of every speaker of a layout.
#[derive(Debug, Clone)]
pub(super) struct Column {
    /// Deviations from the stratum means, which keeps sums of squares exact.
    pub(super) centred: Vec<f64>,
    /// Their squares.
    squared: Vec<f64>,
    /// Mean of each stratum.
    means: Vec<f64>,
    /// Sum of squares of the deviations in each stratum.
    squares: Vec<f64>,
}

impl Column {
    pub(super) fn of(layout: &Layout, values: &[f64]) -> Self {
        let strata = layout.counts.len();
        let mut means = vec![0.0; strata];
        for (v, s) in values.iter().zip(&layout.strata) {
            means[*s] += v / (layout.counts[*s][0] + layout.counts[*s][1]);
        }
        let centred: Vec<f64> = values
            .iter()
            .zip(&layout.strata)
            .map(|(v, s)| v - means[*s])
            .collect();
        let mut squares = vec![0.0; strata];
        for (v, s) in centred.iter().zip(&layout.strata) {
            squares[*s] += v * v;
        }
        Self {
            squared: centred.iter().map(|v| v * v).collect(),
            centred,
            means,
            squares,
        }
    }

    /// The second group's mean less the first's, for an arrangement of the groups.
    pub(super) fn difference(&self, layout: &Layout, second: &[f64]) -> f64 {
        // The deviations of a stratum sum to zero: what the second group has, the first lacks.
        let part = |sum: f64, s: usize| {
            let [a, b] = layout.counts[s];
            layout.weights[s] * sum * (1.0 / b + 1.0 / a)
        };
        if layout.counts.len() == 1 {
            return part(dot(&self.centred, second), 0);
        }
        let mut sums = vec![0.0; layout.counts.len()];
        for ((v, g), s) in self.centred.iter().zip(second).zip(&layout.strata) {
            sums[*s] += v * g;
        }
        sums.into_iter()
            .enumerate()
            .map(|(s, sum)| part(sum, s))
            .sum()
    }

    /// Means and spreads for an arrangement of the groups: 1 for each speaker of the second.
    pub(super) fn estimate(&self, layout: &Layout, second: &[f64]) -> Estimate {
        let mut e = Estimate::default();
        if layout.counts.len() == 1 {
            let (sum, squares) = (dot(&self.centred, second), dot(&self.squared, second));
            self.add_stratum(&mut e, layout, 0, sum, squares);
        } else {
            let mut sums = vec![(0.0, 0.0); layout.counts.len()];
            for ((v, g), s) in self.centred.iter().zip(second).zip(&layout.strata) {
                sums[*s].0 += v * g;
                sums[*s].1 += v * v * g;
            }
            for (s, (sum, squares)) in sums.into_iter().enumerate() {
                self.add_stratum(&mut e, layout, s, sum, squares);
            }
        }
        for g in 0..2 {
            e.variance[g] /= e.freedom[g].max(1.0);
        }
        e
    }

    /// Adds one stratum, given the second group's sum of deviations and of their squares there.
    fn add_stratum(&self, e: &mut Estimate, layout: &Layout, s: usize, sum: f64, squares: f64) {
        let weight = layout.weights[s];
        let cells = [(-sum, self.squares[s] - squares), (sum, squares)];
        for (g, (sum, squares)) in cells.into_iter().enumerate() {
            let n = layout.counts[s][g];
            e.means[g] += weight * (self.means[s] + sum / n);
            e.variance[g] += (squares - sum * sum / n).max(0.0);
            e.freedom[g] += n - 1.0;
            e.leverage[g] += weight * weight / n;
        }
    }

    /// Deviations from the mean of group and stratum times √(n/(n−1)), so that their spread is not
    /// too small; zero for speakers alone in theirs.
    fn residuals(&self, layout: &Layout) -> Vec<f64> {
        let mut sums = vec![[0.0; 2]; layout.counts.len()];
        for ((v, g), s) in self.centred.iter().zip(&layout.groups).zip(&layout.strata) {
            sums[*s][*g] += v;
        }
        let seats = self.centred.iter().zip(&layout.groups).zip(&layout.strata);
        seats
            .map(|((v, g), s)| {
                let n = layout.counts[*s][*g];
                if n > 1.0 {
                    (v - sums[*s][*g] / n) * (n / (n - 1.0)).sqrt()
                } else {
                    0.0
                }
            })
            .collect()
    }
}

/// Errors of the differences in surveys drawn from this one: each group's speakers drawn anew with
/// replacement. Every column is drawn with the same speakers.
///
/// *Shape and units*: an error for each column (outer) and replicate, in the column's unit; empty
/// where a group has no two speakers in any stratum.
pub(super) fn bootstrap(
    layout: &Layout,
    columns: &[Column],
    replicates: usize,
    random: &mut Pcg64,
) -> Vec<Vec<f64>> {
    // Only speakers with company in their group and stratum have a deviation to lend.
    let pools = [0, 1].map(|group| -> Vec<usize> {
        let seats = layout.groups.iter().zip(&layout.strata).enumerate();
        seats
            .filter(|(_, (g, s))| **g == group && layout.counts[**s][group] > 1.0)
            .map(|(n, _)| n)
            .collect()
    });
    if pools.iter().any(Vec::is_empty) {
        return vec![Vec::new(); columns.len()];
    }
    let residuals: Vec<Vec<f64>> = columns.iter().map(|c| c.residuals(layout)).collect();
    let mut errors = vec![Vec::with_capacity(replicates); columns.len()];
    let mut drawn = Vec::new();
    for _ in 0..replicates {
        let mut error = vec![0.0; columns.len()];
        for (counts, weight) in layout.counts.iter().zip(&layout.weights) {
            for (g, sign) in [(0, -1.0), (1, 1.0)] {
                drawn.clear();
                let pool = &pools[g];
                let draws = 0..counts[g] as usize;
                drawn.extend(draws.map(|_| pool[random.random_range(0..pool.len())]));
                for (error, residual) in error.iter_mut().zip(&residuals) {
                    let sum: f64 = drawn.iter().map(|n| residual[*n]).sum();
                    *error += sign * weight * sum / counts[g];
                }
            }
        }
        for (errors, error) in errors.iter_mut().zip(error) {
            errors.push(error);
        }
    }
    errors
}

/// Sum of products, in four strands that the processor can do at once.
fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut strands = [0.0; 4];
    let (fours_a, rest_a) = a.as_chunks::<4>();
    let (fours_b, rest_b) = b.as_chunks::<4>();
    for (x, y) in fours_a.iter().zip(fours_b) {
        for k in 0..4 {
            strands[k] += x[k] * y[k];
        }
    }
    let rest: f64 = rest_a.iter().zip(rest_b).map(|(x, y)| x * y).sum();
    strands.iter().sum::<f64>() + rest
}

/// An arrangement as numbers: 1 for each speaker of the second group.
pub(super) fn seconds(groups: &[usize]) -> Vec<f64> {
    groups.iter().map(|g| *g as f64).collect()
}

/// Group means and spreads.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Estimate {
    /// Mean of each group, weighted over strata.
    pub(super) means: [f64; 2],
    /// Variance within strata of each group, and its degrees of freedom.
    variance: [f64; 2],
    freedom: [f64; 2],
    /// What each variance is multiplied with for the error of the weighted mean.
    leverage: [f64; 2],
}

impl Estimate {
    pub(super) fn difference(&self) -> f64 {
        self.means[1] - self.means[0]
    }

    /// Standard error of the difference; `None` where a group has no degree of freedom.
    pub(super) fn error(&self) -> Option<f64> {
        (self.freedom[0] > 0.0 && self.freedom[1] > 0.0).then(|| {
            (self.variance[0] * self.leverage[0] + self.variance[1] * self.leverage[1]).sqrt()
        })
    }

    /// Welch's degrees of freedom (Welch 1947, Biometrika 34, 28-35).
    pub(super) fn freedom(&self) -> Option<f64> {
        let parts = [0, 1].map(|g| self.variance[g] * self.leverage[g]);
        let below: f64 = (0..2).map(|g| parts[g] * parts[g] / self.freedom[g]).sum();
        (below > 0.0).then(|| (parts[0] + parts[1]).powi(2) / below)
    }

    /// Difference in pooled standard deviations, corrected for small numbers.
    pub(super) fn hedges_g(&self) -> Option<f64> {
        let freedom = self.freedom[0] + self.freedom[1];
        if freedom < 2.0 {
            return None;
        }
        let pooled =
            (self.variance[0] * self.freedom[0] + self.variance[1] * self.freedom[1]) / freedom;
        let small = 1.0 - 3.0 / (4.0 * freedom - 1.0);
        (pooled > 0.0).then(|| small * self.difference() / pooled.sqrt())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn estimates_by_hand() {
        // Stratum 0: first 1, 3; second 5. Stratum 7: first 10; second 12, 16.
        let side = |group, stratum| Side { group, stratum };
        let sides = [
            side(0, 0),
            side(0, 0),
            side(1, 0),
            side(0, 7),
            side(1, 7),
            side(1, 7),
        ];
        let layout = Layout::of(&sides, |_| true).unwrap();
        let column = Column::of(&layout, &[1.0, 3.0, 5.0, 10.0, 12.0, 16.0]);
        let second = seconds(&layout.groups);
        let e = column.estimate(&layout, &second);
        // Equal weights 2/3 and 2/3: means (2 + 10)/2 and (5 + 14)/2.
        assert!((e.means[0] - 6.0).abs() < 1e-12 && (e.means[1] - 9.5).abs() < 1e-12);
        assert!((column.difference(&layout, &second) - 3.5).abs() < 1e-12);
        // Variances 2 (one degree) and 8 (one degree); leverages (1/4)(1/2 + 1) each.
        assert!((e.error().unwrap() - (10.0f64 * 0.375).sqrt()).abs() < 1e-12);
    }

    #[test]
    fn strata_without_one_of_the_groups_are_left_out() {
        let side = |group, stratum| Side { group, stratum };
        let sides = [side(0, 0), side(1, 0), side(1, 1)];
        assert_eq!(Layout::of(&sides, |_| true).unwrap().kept, [0, 1]);
        assert!(Layout::of(&sides, |s| s != 1).is_none());
    }
}
