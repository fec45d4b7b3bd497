//! Candidates for the fundamental frequency of one frame.
//!
//! *Source*: the normalized cross-correlation of B. S. Atal (1968, thesis, Brooklyn) in the form of
//! D. Talkin (1995), A robust algorithm for pitch tracking, in Kleijn & Paliwal (eds), Speech
//! Coding and Synthesis, 495-518, equation 2 (formula from memory): the product of a stretch of
//! signal with the stretch one lag later, over the root of the product of their energies. It needs
//! no window correction and keeps its height when the amplitude changes.

use std::f64::consts::PI;

use crate::audio::ANALYSIS_RATE_HZ;

/// Every fourth sample is kept after low-pass filtering: lags are then interpolated.
const DECIMATION: usize = 4;
const RATE_HZ: f64 = ANALYSIS_RATE_HZ / DECIMATION as f64;

/// Low-pass corner in hertz and half length of its kernel in input samples: the first harmonics of
/// every voice stay, most of F2 goes.
const CORNER_HZ: f64 = 900.0;
const KERNEL_HALF: usize = 32;

/// Search range in hertz: below the lowest modal voice, above a shouting child.
const LOWEST_HZ: f64 = 50.0;
/// See [`LOWEST_HZ`].
const HIGHEST_HZ: f64 = 650.0;

/// Length of the correlated stretch in seconds.
const STRETCH_S: f64 = 0.020;

/// Candidates kept per frame.
const CANDIDATES: usize = 5;

/// One candidate: frequency and how well the signal repeats at its period.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PitchCandidate {
    /// Frequency in hertz.
    pub hz: f32,
    /// Normalized cross-correlation at the period, at most 1.
    pub strength: f32,
}

/// One stretch of signal, low-passed and decimated for the search.
#[derive(Debug, Clone)]
pub(super) struct PitchSignal {
    samples: Vec<f64>,
    first: usize,
}

impl PitchSignal {
    /// Prepares the samples from `first` to `last` of a waveform, with what the search needs
    /// around them.
    pub(super) fn new(samples: &[f32], first: usize, last: usize) -> Self {
        let margin = ((STRETCH_S + 2.0 / LOWEST_HZ) * ANALYSIS_RATE_HZ) as usize;
        let first = first.saturating_sub(margin);
        let last = (last + margin).min(samples.len());
        let mut kernel: Vec<f64> = (0..=2 * KERNEL_HALF)
            .map(|i| {
                let t = i as f64 - KERNEL_HALF as f64;
                let x = 2.0 * CORNER_HZ / ANALYSIS_RATE_HZ * t;
                let sinc = if t == 0.0 {
                    1.0
                } else {
                    (PI * x).sin() / (PI * x)
                };
                sinc * (0.5 + 0.5 * (PI * t / (KERNEL_HALF as f64 + 1.0)).cos())
            })
            .collect();
        let sum: f64 = kernel.iter().sum();
        kernel.iter_mut().for_each(|k| *k /= sum);
        let mean = samples[first..last]
            .iter()
            .map(|&x| f64::from(x))
            .sum::<f64>()
            / (last - first).max(1) as f64;
        let decimated = (first..last)
            .step_by(DECIMATION)
            .map(|centre| {
                let mut y = 0.0;
                for (i, k) in kernel.iter().enumerate() {
                    let at = (centre + i).wrapping_sub(KERNEL_HALF);
                    if at >= first && at < last {
                        y += k * (f64::from(samples[at]) - mean);
                    }
                }
                y
            })
            .collect();
        Self {
            samples: decimated,
            first,
        }
    }

    /// The strongest candidates at sample `centre` of the waveform, strongest first.
    pub(super) fn candidates(&self, centre: usize) -> Vec<PitchCandidate> {
        let shortest = (RATE_HZ / HIGHEST_HZ).floor() as usize;
        let longest = (RATE_HZ / LOWEST_HZ).ceil() as usize;
        let stretch = (STRETCH_S * RATE_HZ) as usize;
        let centre = centre.saturating_sub(self.first) / DECIMATION;
        let mut correlation = vec![0.0; longest + 2];
        for (lag, value) in correlation.iter_mut().enumerate().skip(shortest - 1) {
            // Both stretches lie evenly around the centre, whatever the lag.
            let begin = centre as isize - ((stretch + lag) / 2) as isize;
            let end = begin + (stretch + lag) as isize;
            if begin < 0 || end as usize > self.samples.len() {
                continue;
            }
            let a = &self.samples[begin as usize..begin as usize + stretch];
            let b = &self.samples[begin as usize + lag..begin as usize + lag + stretch];
            let (mut ab, mut aa, mut bb) = (0.0, 0.0, 0.0);
            for (x, y) in a.iter().zip(b) {
                ab += x * y;
                aa += x * x;
                bb += y * y;
            }
            let energy = (aa * bb).sqrt();
            *value = if energy > 1e-12 { ab / energy } else { 0.0 };
        }
        let mut found: Vec<PitchCandidate> = (shortest..=longest)
            .filter_map(|lag| {
                let (left, here, right) =
                    (correlation[lag - 1], correlation[lag], correlation[lag + 1]);
                if here <= 0.2 || here < left || here <= right {
                    return None;
                }
                let curve = left - 2.0 * here + right;
                let shift = if curve < 0.0 {
                    0.5 * (left - right) / curve
                } else {
                    0.0
                };
                Some(PitchCandidate {
                    hz: (RATE_HZ / (lag as f64 + shift)) as f32,
                    strength: (here - 0.25 * (left - right) * shift).min(1.0) as f32,
                })
            })
            .collect();
        found.sort_by(|a, b| {
            b.strength
                .total_cmp(&a.strength)
                .then(b.hz.total_cmp(&a.hz))
        });
        found.truncate(CANDIDATES);
        found
    }
}
