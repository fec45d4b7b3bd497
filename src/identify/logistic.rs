//! Multinomial logistic regression.
//!
//! The fit goes through `linfa-logistic`. Its optimizer can stop far from the minimum and still
//! report success: the sum over classes is taken with one maximum for the whole matrix and floored.
//! So columns are standardised here, the gradient of the stated objective is computed exactly after
//! every fit, and where it does not vanish the fit is finished by Newton steps.
//!
//! How often a vowel stands in the training tables says nothing about how often it stands in
//! somebody's survey, so every vowel is as likely as any other before its formants are seen: the
//! logarithm of its number of rows is taken off its intercept after the fit.

use linfa::prelude::*;
use linfa_logistic::MultiLogisticRegression;
use ndarray::{Array1, Array2};

use super::newton::{Problem, Weights};
use super::samples::Samples;
use super::standard::Standard;

/// A fitted model.
#[derive(Debug, Clone, PartialEq)]
pub struct Logistic {
    pub(super) standard: Standard,
    pub(super) weights: Weights,
}

/// Why nothing was fitted.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum FitError {
    /// Too few vowels.
    #[error("{0} vowels with complete tokens; at least two are needed")]
    Classes(usize),
    /// A vowel with too few tokens.
    #[error("the vowel `{vowel}` has {found} complete tokens; at least {needed} are needed")]
    Tokens {
        /// The vowel.
        vowel: String,
        /// How many there are.
        found: usize,
        /// How many are needed.
        needed: usize,
    },
    /// A column that does not vary.
    #[error("all values of `{0}` are the same")]
    Constant(String),
    /// The penalty is not a positive number.
    #[error("the penalty is {0}; expected a number above 0")]
    Penalty(String),
    /// No minimum was found.
    #[error("the fit did not reach a minimum")]
    NoMinimum,
    /// A spread that cannot be inverted.
    #[error("the tokens of `{0}` do not spread in every direction")]
    Degenerate(String),
}

/// Iterations given to the optimizer before Newton takes over.
const ITERATIONS: u64 = 100;

/// Below this the optimizer stops by itself. Looser than the final bound on purpose: it slows down
/// near the minimum, where Newton needs two or three steps.
const OPTIMIZER_GRADIENT: f64 = 1e-3;

impl Logistic {
    /// Fits to the rows of `samples`. `penalty` is the weight of half the sum of squared slopes,
    /// in standardised columns; the likelihood is a sum over rows, so it equals 1/C elsewhere.
    ///
    /// Classes without a row stay in the list and get a low, finite intercept: they are never
    /// chosen.
    ///
    /// # Errors
    /// [`FitError`] where there is nothing to tell apart, a column is constant, or no minimum is
    /// found.
    pub fn fit(samples: &Samples, penalty: f64) -> Result<Self, FitError> {
        Self::fit_from(samples, penalty, None)
    }

    /// [`Self::fit`], started from another fit of the same columns and classes. The minimum is
    /// unique, so the start only saves time.
    pub(super) fn fit_from(
        samples: &Samples,
        penalty: f64,
        start: Option<&Self>,
    ) -> Result<Self, FitError> {
        if !(penalty > 0.0 && penalty.is_finite()) {
            return Err(FitError::Penalty(penalty.to_string()));
        }
        let present = present(samples);
        if present.len() < 2 {
            return Err(FitError::Classes(present.len()));
        }
        let standard = Standard::fit(samples)?;
        let rows: Vec<Vec<f64>> = samples.rows.iter().map(|r| standard.apply(r)).collect();
        // Only classes that have rows are fitted.
        let class: Vec<usize> = samples
            .class
            .iter()
            .map(|c| present.binary_search(c).unwrap_or_default())
            .collect();
        let problem = Problem {
            rows: &rows,
            class: &class,
            penalty,
        };
        let begin = match start {
            Some(other) => other.restandardised(&standard, &present),
            None => optimize(&problem, present.len())
                .unwrap_or_else(|| Weights::zero(present.len(), samples.features.len())),
        };
        let fitted = problem.finish(begin).ok_or(FitError::NoMinimum)?;
        let mut weights = spread_out(&fitted, &present, samples.vowels.len());
        for (class, ln_count) in present.iter().zip(ln_counts(&class, present.len())) {
            weights.intercept[*class] -= ln_count;
        }
        Ok(Self { standard, weights })
    }

    /// Natural logarithms of the probabilities of the classes for one row.
    pub fn ln_probabilities(&self, row: &[f64]) -> Vec<f64> {
        self.weights.ln_probabilities(&self.standard.apply(row))
    }

    /// The weights of some classes as they would be in other standardised columns.
    fn restandardised(&self, to: &Standard, present: &[usize]) -> Weights {
        let mut weights = Weights::zero(present.len(), to.mean.len());
        for (place, class) in present.iter().enumerate() {
            let mut intercept = self.weights.intercept[*class];
            for n in 0..to.mean.len() {
                let slope = self.weights.slope[*class][n] / self.standard.deviation[n];
                intercept += slope * (to.mean[n] - self.standard.mean[n]);
                weights.slope[place][n] = slope * to.deviation[n];
            }
            weights.intercept[place] = intercept;
        }
        weights
    }
}

/// The classes that have rows.
pub(super) fn present(samples: &Samples) -> Vec<usize> {
    let mut present = samples.class.clone();
    present.sort_unstable();
    present.dedup();
    present
}

/// Logarithms of the numbers of rows of the classes.
fn ln_counts(class: &[usize], classes: usize) -> Vec<f64> {
    let mut counts = vec![0.0_f64; classes];
    for class in class {
        counts[*class] += 1.0;
    }
    counts.into_iter().map(f64::ln).collect()
}

/// Puts the weights of the fitted classes in their places; the others are out of the question.
fn spread_out(fitted: &Weights, present: &[usize], classes: usize) -> Weights {
    let mut weights = Weights::zero(classes, fitted.slope[0].len());
    weights.intercept = vec![ABSENT_INTERCEPT; classes];
    for (place, class) in present.iter().enumerate() {
        weights.intercept[*class] = fitted.intercept[place];
        weights.slope[*class].clone_from(&fitted.slope[place]);
    }
    weights
}

/// Intercept of a class without rows: far below any score, and still a number a file can hold.
const ABSENT_INTERCEPT: f64 = -1e6;

/// The optimizer's answer, whatever it is worth; `None` where it gives none.
fn optimize(problem: &Problem<'_>, classes: usize) -> Option<Weights> {
    let width = problem.rows[0].len();
    let flat: Vec<f64> = problem.rows.iter().flatten().copied().collect();
    let records = Array2::from_shape_vec((problem.rows.len(), width), flat).ok()?;
    let targets = Array1::from_vec(problem.class.to_vec());
    let model = MultiLogisticRegression::default()
        .alpha(problem.penalty)
        .max_iterations(ITERATIONS)
        .gradient_tolerance(OPTIMIZER_GRADIENT)
        .fit(&Dataset::new(records, targets))
        .ok()?;
    let (slope, intercept) = (model.params(), model.intercept());
    if slope.dim() != (width, classes) || !slope.iter().chain(intercept).all(|v| v.is_finite()) {
        return None;
    }
    Some(Weights {
        intercept: intercept.to_vec(),
        slope: (0..classes).map(|k| slope.column(k).to_vec()).collect(),
    })
}
