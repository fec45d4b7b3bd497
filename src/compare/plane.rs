//! Points in the F1–F2 plane: means, covariances, and the ellipses drawn for them.

/// Mean and covariance of points in a plane.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Cloud {
    /// Number of points.
    pub n: usize,
    /// Mean: F1, F2.
    pub mean: [f64; 2],
    /// Covariance with divisor N-1: of F1, of F1 and F2, of F2; zeros for fewer than two points.
    pub covariance: [f64; 3],
}

impl Cloud {
    /// The cloud of `points`; `None` where there are none.
    pub fn of(points: &[[f64; 2]]) -> Option<Self> {
        if points.is_empty() {
            return None;
        }
        let n = points.len() as f64;
        let mean = [0, 1].map(|k| points.iter().map(|p| p[k]).sum::<f64>() / n);
        let scatter = scatter(points, mean);
        let divisor = (n - 1.0).max(1.0);
        Some(Self {
            n: points.len(),
            mean,
            covariance: scatter.map(|s| s / divisor),
        })
    }

    /// The ellipse that holds `share` of a normal population with this mean and covariance.
    ///
    /// *Source*: squared Mahalanobis distances are chi-squared with two degrees of freedom, whose
    /// quantile is −2 ln(1 − share).
    pub fn spread_ellipse(&self, share: f64) -> Option<Ellipse> {
        (self.n >= 3).then(|| self.ellipse((-2.0 * (1.0 - share).ln()).sqrt()))
    }

    /// The region that holds the population's mean with confidence `share`.
    ///
    /// *Source*: Hotelling 1931, Ann. Math. Statist. 2, 360-378: n d'S⁻¹d is 2(n−1)/(n−2) times F
    /// with 2 and n−2 degrees of freedom, whose quantile is m/2 ((1−share)^(−2/m) − 1), m = n−2.
    pub fn mean_ellipse(&self, share: f64) -> Option<Ellipse> {
        if self.n < 4 {
            return None;
        }
        let n = self.n as f64;
        let m = n - 2.0;
        let f = m / 2.0 * ((1.0 - share).powf(-2.0 / m) - 1.0);
        Some(self.ellipse((2.0 * (n - 1.0) / m * f / n).sqrt()))
    }

    fn ellipse(&self, radius: f64) -> Ellipse {
        let [a, b, c] = self.covariance;
        let middle = 0.5 * (a + c);
        let offset = (0.25 * (a - c).powi(2) + b * b).sqrt();
        let along = (middle + offset).max(0.0).sqrt() * radius;
        let across = (middle - offset).max(0.0).sqrt() * radius;
        // Direction of the larger axis, measured from the F1 axis towards the F2 axis.
        let angle = 0.5 * (2.0 * b).atan2(a - c);
        Ellipse {
            centre: self.mean,
            along,
            across,
            angle_rad: angle,
        }
    }
}

/// An ellipse in the plane.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Ellipse {
    /// Centre: F1, F2.
    pub centre: [f64; 2],
    /// Larger semi-axis.
    pub along: f64,
    /// Smaller semi-axis.
    pub across: f64,
    /// Direction of the larger axis, in radians from the F1 axis towards the F2 axis.
    pub angle_rad: f64,
}

impl Ellipse {
    /// `count` points around the ellipse: F1, F2.
    pub fn outline(&self, count: usize) -> Vec<[f64; 2]> {
        let (sin, cos) = self.angle_rad.sin_cos();
        (0..count)
            .map(|k| {
                let turn = std::f64::consts::TAU * k as f64 / count as f64;
                let (x, y) = (self.along * turn.cos(), self.across * turn.sin());
                [
                    self.centre[0] + x * cos - y * sin,
                    self.centre[1] + x * sin + y * cos,
                ]
            })
            .collect()
    }
}

/// Sums of squares and products about `mean`: of F1, of F1 and F2, of F2.
pub(super) fn scatter(points: &[[f64; 2]], mean: [f64; 2]) -> [f64; 3] {
    let mut sum = [0.0; 3];
    for p in points {
        let d = [p[0] - mean[0], p[1] - mean[1]];
        sum[0] += d[0] * d[0];
        sum[1] += d[0] * d[1];
        sum[2] += d[1] * d[1];
    }
    sum
}

/// Determinant of a symmetric matrix given as its three numbers.
pub(super) fn determinant([a, b, c]: [f64; 3]) -> f64 {
    a * c - b * b
}

/// d'M⁻¹d for a symmetric M; `None` where M has no inverse.
pub(super) fn quadratic_form(m: [f64; 3], d: [f64; 2]) -> Option<f64> {
    let det = determinant(m);
    // Relative to the product of the diagonal: 1 − r², with room for rounding.
    if det.is_nan() || det <= 1e-12 * m[0] * m[2] {
        return None;
    }
    Some((m[2] * d[0] * d[0] - 2.0 * m[1] * d[0] * d[1] + m[0] * d[1] * d[1]) / det)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Four points whose sums can be done by hand: mean (2, 3), squares 10, 8, products 6.
    const POINTS: [[f64; 2]; 4] = [[0.0, 1.0], [1.0, 4.0], [3.0, 2.0], [4.0, 5.0]];

    #[test]
    fn mean_and_covariance_by_hand() {
        let cloud = Cloud::of(&POINTS).unwrap();
        assert_eq!(cloud.mean, [2.0, 3.0]);
        // Deviations (−2,−2), (−1,1), (1,−1), (2,2).
        assert_eq!(cloud.covariance, [10.0 / 3.0, 6.0 / 3.0, 10.0 / 3.0]);
    }

    #[test]
    fn ellipses_of_a_diagonal_cloud_by_hand() {
        let cloud = Cloud::of(&POINTS).unwrap();
        // Equal variances 10/3 and covariance 2: axes along the diagonals, variances 16/3 and 4/3.
        let half = cloud.spread_ellipse(0.5).unwrap();
        let radius = (2.0 * 2.0f64.ln()).sqrt();
        assert!((half.along - radius * (16.0f64 / 3.0).sqrt()).abs() < 1e-12);
        assert!((half.across - radius * (4.0f64 / 3.0).sqrt()).abs() < 1e-12);
        assert!((half.angle_rad - std::f64::consts::FRAC_PI_4).abs() < 1e-12);
        // n 4, F(2,2) at 95 % is 19 (any table), radius² = 2·3/2·19/4.
        let mean = cloud.mean_ellipse(0.95).unwrap();
        assert!((mean.along - (14.25f64 * 16.0 / 3.0).sqrt()).abs() < 1e-9);
    }

    #[test]
    fn an_outline_lies_on_its_ellipse() {
        let cloud = Cloud::of(&POINTS).unwrap();
        let radius2 = -2.0 * 0.05f64.ln();
        for p in cloud.spread_ellipse(0.95).unwrap().outline(40) {
            let d = [p[0] - 2.0, p[1] - 3.0];
            let distance2 = quadratic_form(cloud.covariance, d).unwrap();
            assert!((distance2 - radius2).abs() < 1e-9);
        }
    }
}
