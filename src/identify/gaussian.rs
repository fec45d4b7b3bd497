//! One Gaussian density over those columns of a row that have a value.

use super::matrix::Cholesky;

/// Columns with a value in a row; missing values are NaN.
pub(super) fn known_columns(row: &[f64]) -> Vec<usize> {
    (0..row.len()).filter(|n| row[*n].is_finite()).collect()
}

/// A Gaussian of some columns, ready for many rows.
#[derive(Debug, Clone)]
pub(super) struct Gaussian {
    /// The columns it looks at.
    columns: Vec<usize>,
    mean: Vec<f64>,
    /// Inverse of the lower factor, row by row, packed.
    inverse_lower: Vec<f64>,
    ln_determinant: f64,
}

impl Gaussian {
    /// The marginal of `columns`; `covariance` holds the matrix of all columns. `None` where it is
    /// not positive definite.
    pub(super) fn of(columns: &[usize], mean: &[f64], covariance: &[Vec<f64>]) -> Option<Self> {
        let part: Vec<Vec<f64>> = columns
            .iter()
            .map(|a| columns.iter().map(|b| covariance[*a][*b]).collect())
            .collect();
        let factor = Cholesky::of(&part)?;
        Some(Self {
            mean: columns.iter().map(|n| mean[*n]).collect(),
            inverse_lower: factor.packed_inverse(),
            ln_determinant: factor.ln_determinant(),
            columns: columns.to_vec(),
        })
    }

    /// Squared distance of a row from the mean, in units of the spread.
    pub(super) fn squared_distance(&self, row: &[f64]) -> f64 {
        let mut total = 0.0;
        let mut at = 0;
        for n in 0..self.columns.len() {
            let mut sum = 0.0;
            for k in 0..=n {
                sum += self.inverse_lower[at] * (row[self.columns[k]] - self.mean[k]);
                at += 1;
            }
            total += sum * sum;
        }
        total
    }

    /// Logarithm of the density, less the constant that is the same for every class.
    pub(super) fn ln_density(&self, squared_distance: f64) -> f64 {
        -0.5 * (squared_distance + self.ln_determinant)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn missing_columns_are_left_out() {
        // By hand: unit covariance plus 1 in the middle; the marginal of columns 0 and 2.
        let covariance = vec![
            vec![4.0, 1.0, 0.0],
            vec![1.0, 2.0, 0.0],
            vec![0.0, 0.0, 9.0],
        ];
        let row = [3.0, f64::NAN, 5.0];
        let columns = known_columns(&row);
        assert_eq!(columns, [0, 2]);
        let gaussian = Gaussian::of(&columns, &[1.0, 7.0, 2.0], &covariance).unwrap();
        let d = gaussian.squared_distance(&row);
        assert!((d - (4.0 / 4.0 + 9.0 / 9.0)).abs() < 1e-12);
        let expected = -0.5 * (2.0 + 36f64.ln());
        assert!((gaussian.ln_density(d) - expected).abs() < 1e-12);
    }
}
