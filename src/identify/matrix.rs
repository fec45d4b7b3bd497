//! Small dense symmetric matrices: what the classifiers need and no more.

/// The lower triangle `L` of a symmetric positive definite matrix, `A = L L'`.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Cholesky {
    lower: Vec<Vec<f64>>,
}

impl Cholesky {
    /// Factors a matrix; `None` where it is not positive definite.
    pub(super) fn of(matrix: &[Vec<f64>]) -> Option<Self> {
        let n = matrix.len();
        let mut lower = vec![vec![0.0; n]; n];
        for row in 0..n {
            for column in 0..=row {
                let mut sum = matrix[row][column];
                for k in 0..column {
                    sum -= lower[row][k] * lower[column][k];
                }
                if row == column {
                    if !(sum > 0.0 && sum.is_finite()) {
                        return None;
                    }
                    lower[row][row] = sum.sqrt();
                } else {
                    lower[row][column] = sum / lower[column][column];
                }
            }
        }
        Some(Self { lower })
    }

    /// `L^-1 b`.
    pub(super) fn half_solve(&self, right: &[f64]) -> Vec<f64> {
        let n = right.len();
        let mut x = right.to_vec();
        for row in 0..n {
            for k in 0..row {
                x[row] -= self.lower[row][k] * x[k];
            }
            x[row] /= self.lower[row][row];
        }
        x
    }

    /// `A^-1 b`.
    pub(super) fn solve(&self, right: &[f64]) -> Vec<f64> {
        let mut x = self.half_solve(right);
        for row in (0..x.len()).rev() {
            for k in row + 1..x.len() {
                x[row] -= self.lower[k][row] * x[k];
            }
            x[row] /= self.lower[row][row];
        }
        x
    }

    /// `b' A^-1 b`.
    pub(super) fn squared_distance(&self, offset: &[f64]) -> f64 {
        self.half_solve(offset).iter().map(|v| v * v).sum()
    }

    /// `L^-1`, its lower triangle row by row.
    pub(super) fn packed_inverse(&self) -> Vec<f64> {
        let n = self.lower.len();
        let mut packed = vec![0.0; n * (n + 1) / 2];
        for column in 0..n {
            let mut unit = vec![0.0; n];
            unit[column] = 1.0;
            for (row, value) in self.half_solve(&unit).into_iter().enumerate().skip(column) {
                packed[row * (row + 1) / 2 + column] = value;
            }
        }
        packed
    }

    /// `A^-1`.
    pub(super) fn inverse(&self) -> Vec<Vec<f64>> {
        let n = self.lower.len();
        (0..n)
            .map(|column| {
                let mut unit = vec![0.0; n];
                unit[column] = 1.0;
                self.solve(&unit)
            })
            .collect()
    }

    /// `ln |A|`.
    pub(super) fn ln_determinant(&self) -> f64 {
        let half: f64 = (0..self.lower.len()).map(|n| self.lower[n][n].ln()).sum();
        2.0 * half
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_small_system_is_solved() {
        // By hand: [[4,2],[2,3]] has determinant 8 and inverse [[3,-2],[-2,4]]/8.
        let factor = Cholesky::of(&[vec![4.0, 2.0], vec![2.0, 3.0]]).unwrap();
        let x = factor.solve(&[1.0, 2.0]);
        assert!((x[0] + 0.125).abs() < 1e-12 && (x[1] - 0.75).abs() < 1e-12);
        assert!((factor.ln_determinant() - 8f64.ln()).abs() < 1e-12);
        assert!((factor.squared_distance(&[1.0, 2.0]) - 1.375).abs() < 1e-12);
        let inverse = factor.inverse();
        assert!((inverse[0][1] + 0.25).abs() < 1e-12 && (inverse[1][1] - 0.5).abs() < 1e-12);
        // L = [[2,0],[1,sqrt 2]], so its inverse is [[1/2,0],[-1/(2 sqrt 2),1/sqrt 2]].
        let packed = factor.packed_inverse();
        let expected = [0.5, -0.5 / 2f64.sqrt(), 1.0 / 2f64.sqrt()];
        assert!(
            packed
                .iter()
                .zip(expected)
                .all(|(a, b)| (a - b).abs() < 1e-12)
        );
        assert!(Cholesky::of(&[vec![1.0, 2.0], vec![2.0, 1.0]]).is_none());
        assert!(Cholesky::of(&[vec![f64::NAN]]).is_none());
    }
}
