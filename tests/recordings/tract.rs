//! The vocal tract: a cascade of resonances, the lower three moving, the rest from its length.

use std::f64::consts::PI;

/// The rate the sound is made at, in hertz; twice the rate it is kept at, so that what folds back
/// at the closing of the glottis stays low.
pub const SYNTHESIS_RATE_HZ: f64 = 32_000.0;

/// Speed of sound in warm moist air, cm/s (Johnson 2020, Lab. Phonology 11, 10, uses this value).
const SOUND_CM_S: f64 = 35_000.0;

/// Samples between two changes of the moving resonances (a quarter of a millisecond).
const UPDATE_SAMPLES: usize = 8;

/// Bandwidth of a resonance, in hertz, of a voice of pitch `f0_hz`.
///
/// *Source*: Hawks & Miller 1995, JASA 97, 1343-1344 (coefficients from memory; the test beside
/// this generator holds them against five values noted from the paper). Above 4 kHz, where the
/// polynomial is not meant to be used, 6 % of the frequency (common practice).
pub fn bandwidth_hz(frequency_hz: f64, f0_hz: f64) -> f64 {
    const LOW: [f64; 6] = [
        165.327516,
        -6.73636734e-1,
        1.80874446e-3,
        -4.52201682e-6,
        7.49514000e-9,
        -4.70219241e-12,
    ];
    const HIGH: [f64; 6] = [
        15.8146139,
        8.10159009e-2,
        -9.79728215e-5,
        5.28725064e-8,
        -1.07099364e-11,
        7.91528509e-16,
    ];
    let voice = 1.0 + 0.25 * (f0_hz - 132.0) / 88.0;
    let polynomial = |c: &[f64; 6]| c.iter().rev().fold(0.0, |sum, k| sum * frequency_hz + k);
    let at_132 = if frequency_hz < 500.0 {
        polynomial(&LOW)
    } else if frequency_hz < 4_000.0 {
        polynomial(&HIGH)
    } else {
        0.06 * frequency_hz
    };
    voice * at_132
}

/// Resonances above F3, in hertz, of a tract of `length_cm`: those of a tube open at one end.
pub fn upper_resonances_hz(length_cm: f64) -> Vec<f64> {
    (4..)
        .map(|n| f64::from(2 * n - 1) * SOUND_CM_S / (4.0 * length_cm))
        .take_while(|f| *f < 0.48 * SYNTHESIS_RATE_HZ)
        .collect()
}

#[derive(Debug, Clone, Copy, Default)]
struct Resonator {
    gain: f64,
    back_one: f64,
    back_two: f64,
    last: f64,
    before: f64,
}

impl Resonator {
    fn tune(&mut self, frequency_hz: f64, bandwidth_hz: f64) {
        let radius = (-PI * bandwidth_hz / SYNTHESIS_RATE_HZ).exp();
        self.back_one = 2.0 * radius * (2.0 * PI * frequency_hz / SYNTHESIS_RATE_HZ).cos();
        self.back_two = -radius * radius;
        self.gain = 1.0 - self.back_one - self.back_two;
    }

    fn step(&mut self, input: f64) -> f64 {
        let output = self.gain * input + self.back_one * self.last + self.back_two * self.before;
        self.before = self.last;
        self.last = output;
        output
    }
}

/// Filters `source` (at [`SYNTHESIS_RATE_HZ`]) in place.
///
/// `moving_hz` gives F1 to F3 at a sample, `f0_hz` the pitch the bandwidths are for.
pub fn resonate(
    source: &mut [f64],
    length_cm: f64,
    f0_hz: f64,
    moving_hz: impl Fn(usize) -> [f64; 3],
) {
    let mut lower = [Resonator::default(); 3];
    let mut upper: Vec<Resonator> = upper_resonances_hz(length_cm)
        .into_iter()
        .map(|f| {
            let mut r = Resonator::default();
            r.tune(f, bandwidth_hz(f, f0_hz));
            r
        })
        .collect();
    for (n, sample) in source.iter_mut().enumerate() {
        if n % UPDATE_SAMPLES == 0 {
            for (r, f) in lower.iter_mut().zip(moving_hz(n)) {
                r.tune(f, bandwidth_hz(f, f0_hz));
            }
        }
        let mut value = *sample;
        for r in lower.iter_mut().chain(&mut upper) {
            value = r.step(value);
        }
        *sample = value;
    }
}

/// Every second sample after a low-pass: from [`SYNTHESIS_RATE_HZ`] to half of it.
pub fn halve_rate(sound: &[f64]) -> Vec<f64> {
    let filter = low_pass(0.235, 64);
    convolve(sound, &filter).into_iter().step_by(2).collect()
}

/// Coefficients of a Hann-windowed sinc; `cutoff` in cycles a sample, `reach` samples to each side.
pub fn low_pass(cutoff: f64, reach: usize) -> Vec<f64> {
    let reach = reach as f64;
    let mut taps = Vec::new();
    let mut k = -reach;
    while k <= reach {
        let sinc = if k == 0.0 {
            2.0 * cutoff
        } else {
            (2.0 * PI * cutoff * k).sin() / (PI * k)
        };
        taps.push(sinc * 0.5 * (1.0 + (PI * k / (reach + 1.0)).cos()));
        k += 1.0;
    }
    taps
}

/// Convolution with a symmetric filter, of the length of `sound` and without delay.
pub fn convolve(sound: &[f64], filter: &[f64]) -> Vec<f64> {
    let reach = filter.len() / 2;
    (0..sound.len())
        .map(|n| {
            let first = n.saturating_sub(reach);
            let last = (n + reach).min(sound.len() - 1);
            (first..=last)
                .map(|m| sound[m] * filter[m + reach - n])
                .sum()
        })
        .collect()
}
