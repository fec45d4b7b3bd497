//! The penalized multinomial likelihood, exactly, and damped Newton steps to its minimum.
//!
//! *Objective*: `- sum over rows of ln p(class) + penalty / 2 * sum of squared weights`, with
//! `p` the softmax of `intercept + weights . row`; intercepts are not penalized. It is convex, and
//! strictly so once the intercepts are made to sum to zero, so its minimum is the only one.

use super::matrix::Cholesky;

/// Weights of a multinomial logistic model.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Weights {
    /// One per class.
    pub(super) intercept: Vec<f64>,
    /// One row per class, one column per feature.
    pub(super) slope: Vec<Vec<f64>>,
}

/// A fitting problem: standardised rows, their classes, the penalty.
#[derive(Debug, Clone, Copy)]
pub(super) struct Problem<'a> {
    pub(super) rows: &'a [Vec<f64>],
    pub(super) class: &'a [usize],
    pub(super) penalty: f64,
}

/// The fit is finished when no derivative is larger than this for each row of data. The objective
/// is a sum, so a derivative is a sum over rows too; at this size the probabilities agree with the
/// exact ones to about the tenth decimal.
pub(super) const GRADIENT_PER_ROW: f64 = 1e-10;

/// Newton converges quadratically near the minimum and damping brings it there; on the data tried
/// here it took 4 to 9 steps from zero weights.
const MOST_STEPS: usize = 100;

impl Weights {
    /// No knowledge.
    pub(super) fn zero(classes: usize, features: usize) -> Self {
        Self {
            intercept: vec![0.0; classes],
            slope: vec![vec![0.0; features]; classes],
        }
    }

    /// Natural logarithms of the class probabilities of one row.
    pub(super) fn ln_probabilities(&self, row: &[f64]) -> Vec<f64> {
        let mut score: Vec<f64> = self
            .intercept
            .iter()
            .zip(&self.slope)
            .map(|(b, w)| b + w.iter().zip(row).map(|(w, x)| w * x).sum::<f64>())
            .collect();
        let ln_total = ln_sum_exp(&score);
        score.iter_mut().for_each(|s| *s -= ln_total);
        score
    }

    /// Moves the intercepts to sum zero, which changes no probability.
    pub(super) fn centre_intercepts(&mut self) {
        let mean = self.intercept.iter().sum::<f64>() / self.intercept.len() as f64;
        self.intercept.iter_mut().for_each(|b| *b -= mean);
    }
}

/// `ln sum exp`, with the row's own maximum taken out first, so that no row under- or overflows.
pub(super) fn ln_sum_exp(values: &[f64]) -> f64 {
    let max = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    if max == f64::NEG_INFINITY {
        return max;
    }
    max + values.iter().map(|v| (v - max).exp()).sum::<f64>().ln()
}

impl Problem<'_> {
    /// The objective.
    pub(super) fn loss(&self, weights: &Weights) -> f64 {
        let fit: f64 = self
            .rows
            .iter()
            .zip(self.class)
            .map(|(row, class)| -weights.ln_probabilities(row)[*class])
            .sum();
        let squares: f64 = weights.slope.iter().flatten().map(|w| w * w).sum();
        fit + 0.5 * self.penalty * squares
    }

    /// The gradient, laid out class by class: intercept, then slopes.
    pub(super) fn gradient(&self, weights: &Weights) -> Vec<f64> {
        let width = weights.slope[0].len() + 1;
        let mut gradient = vec![0.0; weights.intercept.len() * width];
        for (row, class) in self.rows.iter().zip(self.class) {
            let p = weights.ln_probabilities(row);
            for (k, ln_p) in p.iter().enumerate() {
                let residual = ln_p.exp() - f64::from(u8::from(k == *class));
                let part = &mut gradient[k * width..(k + 1) * width];
                part[0] += residual;
                for (g, x) in part[1..].iter_mut().zip(row) {
                    *g += residual * x;
                }
            }
        }
        for (k, slopes) in weights.slope.iter().enumerate() {
            for (n, w) in slopes.iter().enumerate() {
                gradient[k * width + 1 + n] += self.penalty * w;
            }
        }
        gradient
    }

    /// The matrix of second derivatives, in the gradient's layout.
    fn curvature(&self, weights: &Weights) -> Vec<Vec<f64>> {
        let classes = weights.intercept.len();
        let width = weights.slope[0].len() + 1;
        let mut matrix = vec![vec![0.0; classes * width]; classes * width];
        let mut extended = vec![1.0; width];
        for row in self.rows {
            extended[1..].copy_from_slice(row);
            let p: Vec<f64> = weights
                .ln_probabilities(row)
                .into_iter()
                .map(f64::exp)
                .collect();
            for a in 0..classes {
                for b in 0..=a {
                    let factor = p[a] * (f64::from(u8::from(a == b)) - p[b]);
                    // Pairs of classes that this row leaves out of the question.
                    if factor.abs() < 1e-18 {
                        continue;
                    }
                    for i in 0..width {
                        let scaled = factor * extended[i];
                        let target = &mut matrix[a * width + i][b * width..(b + 1) * width];
                        for (cell, x) in target.iter_mut().zip(&extended) {
                            *cell += scaled * x;
                        }
                    }
                }
            }
        }
        for k in 0..classes {
            for n in 1..width {
                matrix[k * width + n][k * width + n] += self.penalty;
            }
            // Adding the same to all pairs of intercepts fixes their sum without moving the
            // minimum: the gradient is orthogonal to a common shift.
            for other in 0..=k {
                matrix[k * width][other * width] += 1.0;
            }
        }
        matrix
    }

    /// Whether the gradient says that this is the minimum.
    pub(super) fn is_minimum(&self, weights: &Weights) -> bool {
        let bound = GRADIENT_PER_ROW * self.rows.len() as f64;
        self.gradient(weights).iter().all(|g| g.abs() <= bound)
    }

    /// Takes damped Newton steps until the gradient vanishes; `None` where it never does.
    pub(super) fn finish(&self, start: Weights) -> Option<Weights> {
        let mut weights = start;
        weights.centre_intercepts();
        let mut loss = self.loss(&weights);
        for _ in 0..MOST_STEPS {
            if self.is_minimum(&weights) {
                return Some(weights);
            }
            let gradient = self.gradient(&weights);
            let step = Cholesky::of(&self.curvature(&weights))?.solve(&gradient);
            let descent: f64 = step.iter().zip(&gradient).map(|(s, g)| s * g).sum();
            let mut length = 1.0;
            loop {
                let next = moved(&weights, &step, length);
                let next_loss = self.loss(&next);
                // Armijo's condition, with room for rounding where steps are tiny.
                let enough = loss - 1e-4 * length * descent + 1e-12 * loss.abs();
                if next_loss.is_finite() && next_loss <= enough {
                    weights = next;
                    loss = next_loss;
                    break;
                }
                length *= 0.5;
                if length < 1e-10 {
                    return None;
                }
            }
        }
        None
    }
}

fn moved(weights: &Weights, step: &[f64], length: f64) -> Weights {
    let width = weights.slope[0].len() + 1;
    let mut next = weights.clone();
    for k in 0..next.intercept.len() {
        next.intercept[k] -= length * step[k * width];
        for (n, w) in next.slope[k].iter_mut().enumerate() {
            *w -= length * step[k * width + 1 + n];
        }
    }
    next
}

#[cfg(test)]
mod tests {
    use super::*;

    fn data() -> (Vec<Vec<f64>>, Vec<usize>) {
        let rows = vec![
            vec![0.2, -1.0],
            vec![1.5, 0.3],
            vec![-0.7, 0.8],
            vec![0.9, 1.1],
            vec![-1.2, -0.4],
            vec![0.1, 0.6],
        ];
        (rows, vec![0, 1, 2, 1, 0, 2])
    }

    #[test]
    fn derivatives_agree_with_differences() {
        let (rows, class) = data();
        let problem = Problem {
            rows: &rows,
            class: &class,
            penalty: 0.7,
        };
        let weights = Weights {
            intercept: vec![0.3, -0.1, 0.4],
            slope: vec![vec![0.5, -0.2], vec![0.1, 0.9], vec![-0.6, 0.2]],
        };
        let gradient = problem.gradient(&weights);
        for index in 0..gradient.len() {
            let mut unit = vec![0.0; gradient.len()];
            unit[index] = -1e-5;
            let up = problem.loss(&moved(&weights, &unit, 1.0));
            let down = problem.loss(&moved(&weights, &unit, -1.0));
            assert!(((up - down) / 2e-5 - gradient[index]).abs() < 1e-8);
        }
    }

    #[test]
    fn two_classes_without_features_give_the_log_odds() {
        // Closed form: with three rows of one class and one of the other, the intercepts differ by
        // ln 3.
        let rows = vec![vec![0.0]; 4];
        let problem = Problem {
            rows: &rows,
            class: &[0, 0, 1, 0],
            penalty: 1.0,
        };
        let fitted = problem.finish(Weights::zero(2, 1)).unwrap();
        assert!((fitted.intercept[0] - fitted.intercept[1] - 3f64.ln()).abs() < 1e-8);
        assert!(fitted.slope[0][0].abs() < 1e-12);
    }

    #[test]
    fn scores_far_apart_keep_their_loss() {
        // Rows 700 below the largest score of the data: a single maximum for all rows would lose
        // them.
        let weights = Weights {
            intercept: vec![0.0, 0.0],
            slope: vec![vec![1.0], vec![0.0]],
        };
        let ln_p = weights.ln_probabilities(&[-700.0]);
        assert!((ln_p[0] + 700.0).abs() < 1e-9);
        assert!(weights.ln_probabilities(&[700.0])[0].abs() < 1e-12);
    }
}
