//! Analysis windows.

use std::f64::consts::PI;

/// The periodic-symmetric Hann window of `length` samples, `0.5 - 0.5 cos(2 pi (n + 0.5) / N)`.
///
/// Sampled at half-integer points so that no sample is zero and the window is symmetric.
pub fn hann(length: usize) -> Vec<f64> {
    (0..length)
        .map(|n| 0.5 - 0.5 * (2.0 * PI * (n as f64 + 0.5) / length as f64).cos())
        .collect()
}

/// A Gaussian window of `length` samples whose standard deviation is `deviation` of half its length.
pub fn gaussian(length: usize, deviation: f64) -> Vec<f64> {
    let half = length as f64 / 2.0;
    (0..length)
        .map(|n| {
            let x = (n as f64 + 0.5 - half) / (deviation * half);
            (-0.5 * x * x).exp()
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hann_sums_to_half_its_length() {
        // Closed form: the cosine part sums to zero over one period.
        let sum: f64 = hann(800).iter().sum();
        assert!((sum - 400.0).abs() < 1e-9);
    }

    #[test]
    fn gaussian_is_symmetric_and_one_deviation_down_at_its_deviation() {
        let w = gaussian(1000, 0.4);
        assert!((w[0] - w[999]).abs() < 1e-12);
        // 200 samples from the centre is one deviation: exp(-1/2); half-sample offset allowed.
        assert!((w[700] - (-0.5f64).exp()).abs() < 2e-3);
    }
}
