//! Discrete all-pole modelling: an all-pole spectrum through the harmonics alone.
//!
//! Ordinary linear prediction fits the whole spectrum of a voiced frame, dips between the harmonics
//! included, and where harmonics are sparse its poles lean toward the strongest of them. The
//! discrete Itakura-Saito error looks at the harmonics only and has no such pull.
//!
//! *Source*: A. El-Jaroudi & J. Makhoul (1991), Discrete all-pole modeling, IEEE Trans. Signal
//! Process. 39, 411-423: the fixed-point iteration of section IV, with half steps.

use std::f64::consts::PI;

use super::prediction::{Degenerate, MAX_ORDER, levinson};

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
    let used = || lines.iter().filter(|l| l.hz < ceiling_hz);
    let n = used().count();
    if !(2..=SIZE).contains(&size) || n < size.div_ceil(2) + 1 {
        return Err(Degenerate);
    }
    let mean = used().map(|l| l.power).sum::<f64>() / n as f64;
    if !(mean > 0.0 && mean.is_finite()) {
        return Err(Degenerate);
    }
    let mut groups = vec![Group::EMPTY; n.div_ceil(LANES)];
    for (k, line) in used().enumerate() {
        groups[k / LANES].set(k % LANES, line, ceiling_hz, mean, n as f64);
    }
    let mut lags = Sums::new();
    for group in &groups {
        group.add_waves(&group.power, &[0.0; LANES], &mut lags, size);
    }
    let mut lags = lags.total();
    lags[0] *= 1.0 + RIDGE;
    let inverse = Inverse::of_toeplitz(&lags[..size])?;

    // Scale the start so that the mean of power times |A|^2 is one.
    let mut gain = 0.0;
    for group in &groups {
        let (re, im) = group.response(a);
        for lane in 0..LANES {
            gain += group.power[lane] * (re[lane] * re[lane] + im[lane] * im[lane]);
        }
    }
    let gain = gain.sqrt();
    let mut model = [0.0; SIZE];
    for (m, c) in model.iter_mut().zip(a.iter()) {
        *m = c / gain;
    }
    for _ in 0..ITERATIONS {
        // The impulse response of the model, sampled at the lines only.
        let mut h = Sums::new();
        for group in &groups {
            let (mut re, mut im) = group.response(&model[..size]);
            for lane in 0..LANES {
                let scale = group.share[lane] / (re[lane] * re[lane] + im[lane] * im[lane]);
                re[lane] *= scale;
                im[lane] *= scale;
            }
            group.add_waves(&re, &im, &mut h, size);
        }
        let new = inverse.times(&h.total());
        for (m, new) in model[..size].iter_mut().zip(&new) {
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

/// Lines worked on side by side.
const LANES: usize = 8;

type Lanes = [f64; LANES];

/// Some of the lines, at angles `w` on the unit circle.
#[derive(Debug, Clone, Copy)]
struct Group {
    cos: Lanes,
    sin: Lanes,
    /// Share of each line in the mean over all; zero where there is no line.
    share: Lanes,
    /// Power relative to the mean power, times the share.
    power: Lanes,
}

impl Group {
    const EMPTY: Self = Self {
        cos: [0.0; LANES],
        sin: [1.0; LANES],
        share: [0.0; LANES],
        power: [0.0; LANES],
    };

    fn set(&mut self, lane: usize, line: &Line, ceiling_hz: f64, mean: f64, n: f64) {
        let (sin, cos) = (PI * line.hz / ceiling_hz).sin_cos();
        self.cos[lane] = cos;
        self.sin[lane] = sin;
        self.share[lane] = 1.0 / n;
        self.power[lane] = line.power / mean / n;
    }

    /// The complex conjugate of `A(e^jw)` at every line: the polynomial with `e^jw` in place of
    /// `z^-1`, by division by `z^2 - 2 cos(w) z + 1`.
    #[inline(always)]
    fn response(&self, a: &[f64]) -> (Lanes, Lanes) {
        let (mut u, mut v) = ([0.0; LANES], [0.0; LANES]);
        for &c in a.iter().rev() {
            for lane in 0..LANES {
                let before = u[lane];
                u[lane] = 2.0 * self.cos[lane] * before + v[lane];
                v[lane] = c - before;
            }
        }
        for lane in 0..LANES {
            v[lane] += u[lane] * self.cos[lane];
            u[lane] *= self.sin[lane];
        }
        (v, u)
    }

    /// Adds `re cos(l w) + im sin(l w)` of every line to sum `l`, by the recursion of the cosine:
    /// the value at `l + 1` is `2 cos(w)` times that at `l`, less that at `l - 1`.
    #[inline(always)]
    fn add_waves(&self, re: &Lanes, im: &Lanes, sums: &mut Sums, size: usize) {
        let mut here = *re;
        let mut before: Lanes =
            std::array::from_fn(|lane| re[lane] * self.cos[lane] - im[lane] * self.sin[lane]);
        for sum in &mut sums.0[..size] {
            for lane in 0..LANES {
                sum[lane] += here[lane];
                let next = 2.0 * self.cos[lane] * here[lane] - before[lane];
                before[lane] = here[lane];
                here[lane] = next;
            }
        }
    }
}

/// One sum per lag, the lines of each lane still apart.
struct Sums([Lanes; SIZE]);

impl Sums {
    fn new() -> Self {
        Self([[0.0; LANES]; SIZE])
    }

    fn total(&self) -> [f64; SIZE] {
        self.0.map(|lanes| lanes.iter().sum())
    }
}

/// The inverse of a symmetric positive definite Toeplitz matrix.
struct Inverse {
    size: usize,
    rows: [[f64; SIZE]; SIZE],
}

impl Inverse {
    /// *Source*: W. F. Trench (1964), An algorithm for the inversion of finite Toeplitz matrices,
    /// J. SIAM 12, 515-522, in the form with the prediction polynomial and its residual (from
    /// memory; tested by multiplying back).
    fn of_toeplitz(lags: &[f64]) -> Result<Self, Degenerate> {
        let size = lags.len();
        let order = size - 1;
        let mut a = [0.0; SIZE];
        let mut residual = 0.0;
        levinson(lags, order, |n, c, error| {
            if n == order {
                a[..size].copy_from_slice(c);
                residual = error;
            }
        })?;
        let mut rows = [[0.0; SIZE]; SIZE];
        for j in 0..size {
            rows[0][j] = a[j] / residual;
            rows[j][0] = rows[0][j];
        }
        for i in 1..size {
            for j in i..size {
                let change = a[i] * a[j] - a[size - i] * a[size - j];
                rows[i][j] = rows[i - 1][j - 1] + change / residual;
                rows[j][i] = rows[i][j];
            }
        }
        Ok(Self { size, rows })
    }

    fn times(&self, x: &[f64; SIZE]) -> [f64; SIZE] {
        let mut out = [0.0; SIZE];
        for (row, x) in self.rows[..self.size].iter().zip(x) {
            for (out, r) in out.iter_mut().zip(row) {
                *out += r * x;
            }
        }
        out
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
    fn an_inverse_times_its_matrix_is_the_identity() {
        let lags = [2.0, 1.1, 0.3, -0.6, -0.4, 0.1];
        let inverse = Inverse::of_toeplitz(&lags).expect("positive definite");
        for column in 0..lags.len() {
            let mut x = [0.0; SIZE];
            for (row, x) in x[..lags.len()].iter_mut().enumerate() {
                *x = lags[row.abs_diff(column)];
            }
            for (row, y) in inverse.times(&x)[..lags.len()].iter().enumerate() {
                let expected = f64::from(u8::from(row == column));
                assert!((y - expected).abs() < 1e-12, "{row} {column}: {y}");
            }
        }
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
