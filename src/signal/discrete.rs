//! Discrete all-pole modelling: an all-pole spectrum through the harmonics alone.
//!
//! Ordinary linear prediction fits the whole spectrum of a voiced frame, dips between the harmonics
//! included, and where harmonics are sparse its poles lean toward the strongest of them. The
//! discrete Itakura-Saito error looks at the harmonics only and has no such pull.
//!
//! *Source*: A. El-Jaroudi & J. Makhoul (1991), Discrete all-pole modeling, IEEE Trans. Signal
//! Process. 39, 411-423: the fixed-point iteration of section IV, with half steps.

use std::f64::consts::PI;

use super::prediction::{Degenerate, MAX_ORDER};

/// One spectral line.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Line {
    /// Frequency in hertz.
    pub hz: f64,
    /// Power, in any unit common to all lines.
    pub power: f64,
}

/// Iterations; twice as many move F1 by less than 0.1 % at F0 300 Hz.
const ITERATIONS: usize = 8;

/// Share of the new estimate taken at each iteration: whole steps can oscillate.
const STEP: f64 = 0.5;

/// White noise added to lag 0, relative: keeps the normal equations solvable for clean lines.
const RIDGE: f64 = 1e-7;

const SIZE: usize = MAX_ORDER + 1;

/// Moves the prediction polynomial `a` to the discrete all-pole model of the lines below
/// `ceiling_hz`.
///
/// *Shape*: `a` holds `order + 1` coefficients, the first 1, of a starting model (linear prediction
/// of the same band); it is replaced. *Errors*: [`Degenerate`], with `a` unchanged, where the lines
/// are fewer than the model's freedom needs (half the order and two) or do not determine it.
pub fn fit(a: &mut [f64], lines: &[Line], ceiling_hz: f64) -> Result<(), Degenerate> {
    let size = a.len();
    let used: Vec<Line> = lines
        .iter()
        .copied()
        .filter(|l| l.hz < ceiling_hz)
        .collect();
    let n = used.len();
    if !(2..=SIZE).contains(&size) || n < size.div_ceil(2) + 1 {
        return Err(Degenerate);
    }
    let mean = used.iter().map(|l| l.power).sum::<f64>() / n as f64;
    if !(mean > 0.0 && mean.is_finite()) {
        return Err(Degenerate);
    }
    // cos and sin of every line at every lag, line by line.
    let mut turns = vec![(0.0, 0.0); n * size];
    for (line, row) in used.iter().zip(turns.chunks_exact_mut(size)) {
        let (sin, cos) = (PI * line.hz / ceiling_hz).sin_cos();
        let (mut c, mut s) = (1.0, 0.0);
        for turn in row {
            *turn = (c, s);
            (c, s) = (c * cos - s * sin, s * cos + c * sin);
        }
    }
    let mut lags = [0.0; SIZE];
    for (line, row) in used.iter().zip(turns.chunks_exact(size)) {
        let weight = line.power / mean / n as f64;
        for (lag, &(c, _)) in lags.iter_mut().zip(row) {
            *lag += weight * c;
        }
    }
    lags[0] *= 1.0 + RIDGE;
    let factor = Cholesky::of_toeplitz(&lags[..size])?;

    // Scale the start so that the mean of power times |A|^2 is one.
    let gain = (used
        .iter()
        .zip(turns.chunks_exact(size))
        .map(|(line, row)| {
            let (re, im) = response(a, row);
            line.power / mean * (re * re + im * im)
        })
        .sum::<f64>()
        / n as f64)
        .sqrt();
    let mut model = [0.0; SIZE];
    for (m, c) in model.iter_mut().zip(a.iter()) {
        *m = c / gain;
    }
    for _ in 0..ITERATIONS {
        // The impulse response of the model, sampled at the lines only.
        let mut h = [0.0; SIZE];
        for row in turns.chunks_exact(size) {
            let (re, im) = response(&model[..size], row);
            let scale = 1.0 / ((re * re + im * im) * n as f64);
            let (re, im) = (re * scale, -im * scale);
            for (h, &(c, s)) in h.iter_mut().zip(row) {
                *h += re * c + im * s;
            }
        }
        factor.solve(&mut h[..size]);
        for (m, new) in model[..size].iter_mut().zip(&h) {
            *m += STEP * (new - *m);
        }
    }
    let first = model[0];
    if !(first.is_finite() && first != 0.0 && model[..size].iter().all(|m| m.is_finite())) {
        return Err(Degenerate);
    }
    for (out, m) in a.iter_mut().zip(&model) {
        *out = m / first;
    }
    Ok(())
}

/// `A(e^jw)` of one line.
fn response(a: &[f64], row: &[(f64, f64)]) -> (f64, f64) {
    let (mut re, mut im) = (0.0, 0.0);
    for (m, &(c, s)) in a.iter().zip(row) {
        re += m * c;
        im -= m * s;
    }
    (re, im)
}

/// Lower triangular factor of a symmetric positive definite matrix.
struct Cholesky {
    size: usize,
    rows: [[f64; SIZE]; SIZE],
}

impl Cholesky {
    fn of_toeplitz(lags: &[f64]) -> Result<Self, Degenerate> {
        let size = lags.len();
        let mut rows = [[0.0; SIZE]; SIZE];
        for i in 0..size {
            for j in 0..=i {
                let mut sum = lags[i - j];
                for k in 0..j {
                    sum -= rows[i][k] * rows[j][k];
                }
                if i == j {
                    if sum <= 0.0 || sum.is_nan() {
                        return Err(Degenerate);
                    }
                    rows[i][i] = sum.sqrt();
                } else {
                    rows[i][j] = sum / rows[j][j];
                }
            }
        }
        Ok(Self { size, rows })
    }

    fn solve(&self, x: &mut [f64]) {
        for i in 0..self.size {
            let mut sum = x[i];
            for k in 0..i {
                sum -= self.rows[i][k] * x[k];
            }
            x[i] = sum / self.rows[i][i];
        }
        for i in (0..self.size).rev() {
            let mut sum = x[i];
            for k in i + 1..self.size {
                sum -= self.rows[k][i] * x[k];
            }
            x[i] = sum / self.rows[i][i];
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::signal::prediction::levinson;

    /// Power of `1 / A` with two resonances at a normalized frequency, by the definition.
    fn power(hz: f64, ceiling: f64, poles: &[(f64, f64)]) -> f64 {
        let w = PI * hz / ceiling;
        let mut p = 1.0;
        for &(f, b) in poles {
            let r = (-PI * b / (2.0 * ceiling)).exp();
            let t = PI * f / ceiling;
            let (re, im) = (
                1.0 - 2.0 * r * t.cos() * w.cos() + r * r * (2.0 * w).cos(),
                2.0 * r * t.cos() * w.sin() - r * r * (2.0 * w).sin(),
            );
            p /= re * re + im * im;
        }
        p
    }

    #[test]
    fn finds_the_poles_behind_sparse_harmonics() {
        // Closed form: lines sampled from an all-pole spectrum of the same order are fitted without
        // error, whatever their spacing; ordinary prediction from the same lines is far off.
        let (ceiling, f0) = (5000.0, 320.0);
        let poles = [
            (450.0, 80.0),
            (1700.0, 110.0),
            (2700.0, 150.0),
            (3900.0, 200.0),
        ];
        let lines: Vec<Line> = (1..=15)
            .map(|k| Line {
                hz: k as f64 * f0,
                power: power(k as f64 * f0, ceiling, &poles),
            })
            .collect();
        let lags: Vec<f64> = (0..=8)
            .map(|i| {
                lines
                    .iter()
                    .map(|l| l.power * (PI * l.hz / ceiling * i as f64).cos())
                    .sum()
            })
            .collect();
        let mut a = vec![0.0; 9];
        levinson(&lags, 8, |order, c, _| {
            if order == 8 {
                a.copy_from_slice(c);
            }
        })
        .expect("the lines make a positive spectrum");
        let f1 = |a: &[f64]| {
            let mut roots = crate::signal::roots::RootFinder::default();
            let mut f: Vec<f64> = roots
                .upper_half(a)
                .expect("converges")
                .iter()
                .filter(|z| z.im > 0.0)
                .map(|z| z.im.atan2(z.re) * ceiling / PI)
                .collect();
            f.sort_by(f64::total_cmp);
            f[0]
        };
        let before = (f1(&a) - 450.0).abs();
        for _ in 0..25 {
            fit(&mut a, &lines, ceiling).expect("fits");
        }
        let after = (f1(&a) - 450.0).abs();
        assert!(before > 10.0, "ordinary prediction was off by {before}");
        assert!(after < 1.0, "discrete all-pole is off by {after}");
    }

    #[test]
    fn refuses_too_few_lines() {
        let mut a = vec![1.0, 0.1, 0.2, 0.0, 0.0];
        let lines = [Line {
            hz: 500.0,
            power: 1.0,
        }; 3];
        assert_eq!(fit(&mut a, &lines, 5000.0), Err(Degenerate));
    }
}
