//! Linear prediction from autocorrelation, and autocorrelation of one band of a spectrum.
//!
//! *Source*: J. Makhoul (1975), Linear prediction: a tutorial review, Proc. IEEE 63, 561-580;
//! selective linear prediction is its section V-B.

use std::f64::consts::PI;

/// Largest prediction order handled anywhere in the program.
pub const MAX_ORDER: usize = 20;

/// Cosine table that turns the power spectrum from 0 Hz to a ceiling into autocorrelation lags at
/// a sampling rate of twice the ceiling: linear prediction of that band alone.
#[derive(Debug, Clone)]
pub struct BandAutocorrelation {
    ceiling_hz: f64,
    bins: usize,
    /// `lags` rows of `bins` weights.
    table: Vec<f32>,
    lags: usize,
}

impl BandAutocorrelation {
    /// Prepares for spectra with bins `bin_hz` apart, lags 0 to `max_order`.
    ///
    /// The band is integrated by the trapezoid rule over the bins below the ceiling, with the last
    /// bin weighted by the fraction of its cell that lies inside.
    pub fn new(bin_hz: f64, ceiling_hz: f64, max_order: usize) -> Self {
        let bins = (ceiling_hz / bin_hz).floor() as usize + 1;
        let lags = max_order + 1;
        let mut table = Vec::with_capacity(lags * bins);
        for lag in 0..lags {
            for k in 0..bins {
                let f = k as f64 * bin_hz;
                let upper = (f + bin_hz / 2.0).min(ceiling_hz);
                let lower = (f - bin_hz / 2.0).max(0.0);
                let cell = (upper - lower) / bin_hz;
                table.push(((PI * lag as f64 * f / ceiling_hz).cos() * cell) as f32);
            }
        }
        Self {
            ceiling_hz,
            bins,
            table,
            lags,
        }
    }

    /// The band's upper edge in hertz.
    pub fn ceiling_hz(&self) -> f64 {
        self.ceiling_hz
    }

    /// Lags 0 to the maximum order of the band of `power`.
    ///
    /// *Shape*: `power` holds at least the bins below the ceiling; `out` at least `max_order + 1`.
    pub fn lags(&self, power: &[f32], out: &mut [f64]) {
        let power = &power[..self.bins];
        for lag in 0..self.lags {
            let row = &self.table[lag * self.bins..(lag + 1) * self.bins];
            out[lag] = dot(row, power);
        }
    }
}

/// Dot product in eight lanes, so that it vectorises without reordering by the compiler.
fn dot(a: &[f32], b: &[f32]) -> f64 {
    const LANES: usize = 16;
    let mut sums = [0.0f32; LANES];
    let mut chunks_a = a.chunks_exact(LANES);
    let mut chunks_b = b.chunks_exact(LANES);
    for (x, y) in (&mut chunks_a).zip(&mut chunks_b) {
        for i in 0..LANES {
            sums[i] += x[i] * y[i];
        }
    }
    let mut total: f64 = sums.iter().map(|&s| f64::from(s)).sum();
    for (x, y) in chunks_a.remainder().iter().zip(chunks_b.remainder()) {
        total += f64::from(x * y);
    }
    total
}

/// Why prediction coefficients could not be computed.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Degenerate;

/// Levinson's recursion: prediction polynomials of every order from 1 to `max_order`.
///
/// `visit(order, coefficients, error)` is called for each order with the `order + 1` coefficients
/// of `A(z) = 1 + a1 z^-1 + ...` and the residual power.
///
/// *Errors*: [`Degenerate`] where lag 0 is not positive or the residual stops being positive
/// (an all-zero, NaN or perfectly predictable frame).
///
/// *Source*: Makhoul (1975), equations 38a-e.
pub fn levinson(
    lags: &[f64],
    max_order: usize,
    mut visit: impl FnMut(usize, &[f64], f64),
) -> Result<(), Degenerate> {
    let mut a = [0.0; MAX_ORDER + 1];
    a[0] = 1.0;
    let mut error = lags[0];
    if !(error > 0.0 && error.is_finite()) {
        return Err(Degenerate);
    }
    // A perfectly predictable frame leaves rounding noise: nothing below this share is believed.
    let floor = lags[0] * 1e-12;
    for order in 1..=max_order {
        let mut sum = lags[order];
        for j in 1..order {
            sum += a[j] * lags[order - j];
        }
        let reflection = -sum / error;
        for j in 1..=order / 2 {
            let (low, high) = (a[j], a[order - j]);
            a[j] = low + reflection * high;
            if j != order - j {
                a[order - j] = high + reflection * low;
            }
        }
        a[order] = reflection;
        error *= 1.0 - reflection * reflection;
        if !(error > floor && error.is_finite()) {
            return Err(Degenerate);
        }
        visit(order, &a[..=order], error);
    }
    Ok(())
}
