//! Linear and quadratic discriminants with equal priors.
//!
//! *Model*: rows of a class are Gaussian about the class mean; linear, with one spread common to all
//! classes (sum of squares within classes over N - K); quadratic, with each class's own (over
//! N_k - 1). Probabilities follow by Bayes' rule, every vowel as likely as any other before.
//!
//! *Source*: Fisher 1936, Annals of Eugenics 7, 179-188; Hillenbrand et al. 1995 (J. Acoust. Soc.
//! Am. 97, 3099-3111) for the quadratic form on vowels.

use super::logistic::{FitError, present};
use super::matrix::Cholesky;
use super::newton::ln_sum_exp;
use super::samples::Samples;

/// Whether classes share their spread.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Spread {
    /// One for all.
    Common,
    /// Each its own.
    Own,
    /// Each its own, drawn toward the common one so far that few rows suffice.
    Drawn,
}

/// Share of the common spread in each class's own, where it is drawn.
const TOWARD_COMMON: f64 = 0.3;

/// A fitted discriminant.
#[derive(Debug, Clone, PartialEq)]
pub struct Discriminant {
    /// Mean row of each class; `None` for classes without rows.
    pub(super) mean: Vec<Option<Vec<f64>>>,
    /// Covariance matrices: one, or one per class that has rows.
    pub(super) covariance: Vec<Vec<Vec<f64>>>,
    factors: Vec<Cholesky>,
}

impl Discriminant {
    /// Fits to the rows of `samples`.
    ///
    /// # Errors
    /// [`FitError`] where a class has too few rows for its spread, or a spread is flat.
    pub fn fit(samples: &Samples, spread: Spread) -> Result<Self, FitError> {
        let present = present(samples);
        if present.len() < 2 {
            return Err(FitError::Classes(present.len()));
        }
        let width = samples.features.len();
        let mut mean: Vec<Option<Vec<f64>>> = vec![None; samples.vowels.len()];
        let mut scatter = Vec::new();
        let mut counts = Vec::new();
        for class in &present {
            let rows: Vec<&Vec<f64>> = samples
                .rows
                .iter()
                .zip(&samples.class)
                .filter(|(_, c)| *c == class)
                .map(|(row, _)| row)
                .collect();
            let n = rows.len() as f64;
            let centre: Vec<f64> = (0..width)
                .map(|k| rows.iter().map(|r| r[k]).sum::<f64>() / n)
                .collect();
            let mut sum = vec![vec![0.0; width]; width];
            for row in &rows {
                for a in 0..width {
                    for b in 0..width {
                        sum[a][b] += (row[a] - centre[a]) * (row[b] - centre[b]);
                    }
                }
            }
            let needed = match spread {
                Spread::Common | Spread::Drawn => 1,
                Spread::Own => width + 1,
            };
            if rows.len() < needed {
                return Err(FitError::Tokens {
                    vowel: samples.vowels[*class].to_string(),
                    found: rows.len(),
                    needed,
                });
            }
            mean[*class] = Some(centre);
            scatter.push(sum);
            counts.push(n);
        }
        let divided = |sum: &Vec<Vec<f64>>, by: f64| -> Vec<Vec<f64>> {
            sum.iter()
                .map(|row| row.iter().map(|v| v / by).collect())
                .collect()
        };
        let common = || {
            let mut total = vec![vec![0.0; width]; width];
            for sum in &scatter {
                for a in 0..width {
                    for b in 0..width {
                        total[a][b] += sum[a][b];
                    }
                }
            }
            let degrees = samples.rows.len() as f64 - present.len() as f64;
            divided(&total, degrees)
        };
        let covariance = match spread {
            Spread::Common => vec![common()],
            Spread::Own => scatter
                .iter()
                .zip(&counts)
                .map(|(sum, n)| divided(sum, n - 1.0))
                .collect(),
            Spread::Drawn => {
                let common = common();
                let drawn = |sum: &Vec<Vec<f64>>, n: f64| {
                    let mut matrix = divided(sum, n);
                    for a in 0..width {
                        for b in 0..width {
                            matrix[a][b] += TOWARD_COMMON * (common[a][b] - matrix[a][b]);
                        }
                    }
                    matrix
                };
                scatter
                    .iter()
                    .zip(&counts)
                    .map(|(s, n)| drawn(s, *n))
                    .collect()
            }
        };
        Self::of(mean, covariance).map_err(|place| {
            FitError::Degenerate(match spread {
                Spread::Common => "all vowels".to_owned(),
                Spread::Own | Spread::Drawn => samples.vowels[present[place]].to_string(),
            })
        })
    }

    /// A discriminant from its numbers.
    ///
    /// # Errors
    /// The place of the first covariance matrix that is not positive definite.
    pub(super) fn of(
        mean: Vec<Option<Vec<f64>>>,
        covariance: Vec<Vec<Vec<f64>>>,
    ) -> Result<Self, usize> {
        let factors = covariance
            .iter()
            .enumerate()
            .map(|(place, matrix)| Cholesky::of(matrix).ok_or(place))
            .collect::<Result<_, _>>()?;
        Ok(Self {
            mean,
            covariance,
            factors,
        })
    }

    /// Natural logarithms of the probabilities of the classes for one row.
    pub fn ln_probabilities(&self, row: &[f64]) -> Vec<f64> {
        let mut score: Vec<f64> = self
            .distances(row)
            .map(|known| match known {
                None => f64::NEG_INFINITY,
                Some((distance, ln_determinant)) => -0.5 * (distance + ln_determinant),
            })
            .collect();
        let ln_total = ln_sum_exp(&score);
        score.iter_mut().for_each(|s| *s -= ln_total);
        score
    }

    /// Squared distance of a row from the nearest class, in units of the spread there.
    pub fn squared_distance(&self, row: &[f64]) -> f64 {
        self.distances(row)
            .flatten()
            .fold(f64::INFINITY, |nearest, (distance, _)| {
                nearest.min(distance)
            })
    }

    /// Squared distance and logarithm of the determinant for each class; `None` for classes without
    /// rows.
    fn distances(&self, row: &[f64]) -> impl Iterator<Item = Option<(f64, f64)>> {
        let mut place = 0;
        self.mean.iter().map(move |mean| {
            let mean = mean.as_ref()?;
            let factor = &self.factors[place.min(self.factors.len() - 1)];
            place += 1;
            let offset: Vec<f64> = row.iter().zip(mean).map(|(x, m)| x - m).collect();
            Some((factor.squared_distance(&offset), factor.ln_determinant()))
        })
    }
}
