//! A fitted classifier at work: answers about all rows of one speaker.

use statrs::distribution::{ContinuousCDF, Normal};
use statrs::function::gamma::gamma_ur;

use super::classifier::{Classifier, Kind};
use super::discriminant::{Discriminant, Spread};
use super::logistic::FitError;
use super::newton::ln_sum_exp;
use super::samples::Samples;

/// A classifier with what it takes to weigh errors and to know a stranger.
#[derive(Debug, Clone, PartialEq)]
pub struct Trained {
    /// The classifier.
    pub classifier: Classifier,
    /// Where the vowels are, for classifiers that only know the borders between them.
    pub(super) typical: Option<Discriminant>,
    /// Mean squared standard error of each column over the training rows: errors up to it are in
    /// the fit already.
    pub(super) usual_variance: Vec<f64>,
}

/// What is said about one row.
#[derive(Debug, Clone, PartialEq)]
pub struct Answer {
    /// Natural logarithms of the probabilities of the classes, before calibration.
    pub ln_probability: Vec<f64>,
    /// How unlike the nearest vowel the row is: minus the logarithm of the share of that vowel's
    /// tokens that would be farther away, were they Gaussian.
    pub strangeness: f64,
}

/// Points over which an uncertain row is averaged.
const DRAWS: usize = 64;

/// One prime per column for the points.
const PRIMES: [usize; 24] = [
    2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53, 59, 61, 67, 71, 73, 79, 83, 89,
];

impl Trained {
    /// Fits to the rows of `samples`.
    ///
    /// # Errors
    /// [`FitError`] where the rows do not allow it.
    pub fn fit(kind: Kind, samples: &Samples) -> Result<Self, FitError> {
        Self::fit_from(kind, samples, None)
    }

    /// [`Self::fit`], started from another fit where that saves time; the result is the same.
    pub(super) fn fit_from(
        kind: Kind,
        samples: &Samples,
        start: Option<&Self>,
    ) -> Result<Self, FitError> {
        let complete = samples.complete();
        let classifier = Classifier::fit_from(kind, &complete, start.map(|s| &s.classifier))?;
        let typical = match classifier {
            Classifier::Template(_) => None,
            _ => Some(Discriminant::fit(&complete, Spread::Drawn)?),
        };
        let rows = complete.rows.len() as f64;
        let usual_variance = (0..samples.features.len())
            .map(|n| complete.variance.iter().map(|v| v[n]).sum::<f64>() / rows)
            .collect();
        Ok(Self {
            classifier,
            typical,
            usual_variance,
        })
    }

    /// What each row of one speaker is, all rows given together; `None` where a row lacks a column
    /// the classifier cannot do without: any, and for a template more than half of them.
    ///
    /// `variance` holds the squared standard errors of the values. What exceeds the usual error
    /// widens the answer: a template compares under a wider spread, the others are averaged over
    /// where the value may lie.
    pub fn answers(&self, rows: &[&[f64]], variance: &[&[f64]]) -> Vec<Option<Answer>> {
        let excess: Vec<Vec<f64>> = variance
            .iter()
            .map(|row| {
                row.iter()
                    .zip(&self.usual_variance)
                    .map(|(v, usual)| (v - usual).max(0.0))
                    .collect()
            })
            .collect();
        if let Classifier::Template(template) = &self.classifier {
            let excess: Vec<&[f64]> = excess.iter().map(Vec::as_slice).collect();
            return template
                .answer(rows, &excess)
                .into_iter()
                .map(|answer| {
                    (2 * answer.columns >= self.usual_variance.len()).then(|| Answer {
                        ln_probability: answer.ln_probability,
                        strangeness: strangeness(answer.squared_distance, answer.columns),
                    })
                })
                .collect();
        }
        rows.iter()
            .zip(&excess)
            .map(|(row, excess)| {
                row.iter().all(|v| v.is_finite()).then(|| Answer {
                    ln_probability: self.averaged(row, excess),
                    strangeness: self.typical.as_ref().map_or(0.0, |typical| {
                        strangeness(typical.squared_distance(row), row.len())
                    }),
                })
            })
            .collect()
    }

    /// The answer to one complete row, averaged over its excess error.
    fn averaged(&self, row: &[f64], excess: &[f64]) -> Vec<f64> {
        if excess.iter().all(|v| *v <= 0.0) || row.len() > PRIMES.len() {
            return self.of_row(row);
        }
        let mut total: Option<Vec<f64>> = None;
        let mut point = row.to_vec();
        for draw in 0..DRAWS {
            for (n, x) in point.iter_mut().enumerate() {
                *x = row[n] + excess[n].sqrt() * normal_point(draw + 1, PRIMES[n]);
            }
            let p: Vec<f64> = self.of_row(&point).into_iter().map(f64::exp).collect();
            match &mut total {
                None => total = Some(p),
                Some(total) => total.iter_mut().zip(p).for_each(|(t, p)| *t += p),
            }
        }
        let mut ln_p: Vec<f64> = total.unwrap_or_default().into_iter().map(f64::ln).collect();
        let all = ln_sum_exp(&ln_p);
        ln_p.iter_mut().for_each(|v| *v -= all);
        ln_p
    }

    fn of_row(&self, row: &[f64]) -> Vec<f64> {
        match &self.classifier {
            Classifier::Logistic(logistic) => logistic.ln_probabilities(row),
            Classifier::Discriminant(discriminant) => discriminant.ln_probabilities(row),
            // A template answers for a speaker; see `answers`.
            Classifier::Template(_) => Vec::new(),
        }
    }
}

/// Minus the logarithm of the chi-square tail; finite however far away.
fn strangeness(squared_distance: f64, columns: usize) -> f64 {
    if squared_distance <= 0.0 {
        return 0.0;
    }
    let tail = gamma_ur(columns as f64 / 2.0, squared_distance / 2.0);
    if tail > 1e-290 {
        -tail.ln()
    } else {
        // The leading term of the tail's expansion.
        squared_distance / 2.0
    }
}

/// The `index`-th normal quantile of a low-discrepancy sequence (Halton 1960, Numerische Mathematik
/// 2, 84-90): the same points on every machine.
fn normal_point(index: usize, base: usize) -> f64 {
    let mut fraction = 1.0;
    let mut value = 0.0;
    let mut rest = index;
    while rest > 0 {
        fraction /= base as f64;
        value += fraction * (rest % base) as f64;
        rest /= base;
    }
    Normal::standard().inverse_cdf(value)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn strangeness_is_the_tail_of_chi_square() {
        // scipy 1.17.1: -chi2.logsf(18.307038, 10) = 2.995732 (its 95 % point), and
        // -chi2.logsf(2000, 8) = 979.9905...: there only the order of size is kept.
        assert!((strangeness(18.307038053275146, 10) - 20f64.ln()).abs() < 1e-9);
        assert_eq!(strangeness(0.0, 3), 0.0);
        let far = strangeness(2000.0, 8);
        assert!(far.is_finite() && far > 900.0);
    }

    #[test]
    fn points_are_spread_like_a_normal() {
        let points: Vec<f64> = (1..=DRAWS).map(|n| normal_point(n, 3)).collect();
        let mean = points.iter().sum::<f64>() / DRAWS as f64;
        let squares = points.iter().map(|p| p * p).sum::<f64>() / DRAWS as f64;
        assert!(
            mean.abs() < 0.1 && (squares - 1.0).abs() < 0.15,
            "{mean} {squares}"
        );
    }
}
