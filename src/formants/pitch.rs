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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::formants::voice;

    /// The grid of lags is interpolated by a parabola: below half a percent is common practice for
    /// F0, and an octave error is a hundred times that.
    const NEAR: f64 = 0.005;

    fn candidates(samples: &[f32], centre: usize) -> Vec<PitchCandidate> {
        PitchSignal::new(samples, 0, samples.len()).candidates(centre)
    }

    /// Pulses, band-limited by their closed form: all harmonics below 4 kHz with equal power.
    fn pulses(hz: f64) -> Vec<f32> {
        let harmonics = (4000.0 / hz) as u32;
        (0..8000)
            .map(|n| {
                let turn = 2.0 * PI * hz * f64::from(n) / ANALYSIS_RATE_HZ;
                let sum: f64 = (1..=harmonics).map(|k| (f64::from(k) * turn).cos()).sum();
                (sum / f64::from(harmonics)) as f32
            })
            .collect()
    }

    #[test]
    fn pulse_trains_repeat_at_their_period() {
        for hz in [70.0, 101.3, 150.0, 222.2, 310.0, 440.0] {
            let samples = pulses(hz);
            let found = candidates(&samples, 4000);
            let near = found
                .iter()
                .find(|c| (f64::from(c.hz) / hz - 1.0).abs() < NEAR)
                .unwrap_or_else(|| panic!("{hz} is not among {found:?}"));
            assert!(near.strength > 0.95, "{hz}: {near:?}");
            let points: Vec<_> = [3000, 3400, 3800, 4200]
                .map(|centre| candidates(&samples, centre))
                .into();
            let points: Vec<_> = points.iter().map(Vec::as_slice).collect();
            for f0 in voice::contour(&points, None) {
                let f0 = f0.expect("voiced");
                assert!((f0 / hz - 1.0).abs() < NEAR, "{f0} for {hz}");
            }
        }
    }

    #[test]
    fn agrees_with_the_definition_at_the_full_rate() {
        // The normalized cross-correlation of the unfiltered signal at every lag of 16 kHz, slowly:
        // its highest value between 60 % and 140 % of the candidate lies where the candidate is.
        let hz = 173.0;
        let samples = pulses(hz);
        let centre = 4000;
        let stretch = (STRETCH_S * ANALYSIS_RATE_HZ) as usize;
        let correlation = |lag: usize| {
            let begin = centre - (stretch + lag) / 2;
            let (mut ab, mut aa, mut bb) = (0.0, 0.0, 0.0);
            for n in begin..begin + stretch {
                let (a, b) = (f64::from(samples[n]), f64::from(samples[n + lag]));
                ab += a * b;
                aa += a * a;
                bb += b * b;
            }
            ab / (aa * bb).sqrt()
        };
        let found = candidates(&samples, centre);
        let candidate = f64::from(found[0].hz.max(found[1].hz));
        let period = ANALYSIS_RATE_HZ / candidate;
        let best = ((0.6 * period) as usize..(1.4 * period) as usize)
            .max_by(|&a, &b| correlation(a).total_cmp(&correlation(b)))
            .expect("lags");
        // Half a sample is the resolution of the definition.
        assert!((best as f64 - period).abs() <= 0.75, "{best} for {period}");
    }

    #[test]
    fn follows_a_glide_as_librosa_does() {
        // librosa 0.11.0, librosa.pyin(s, fmin=50, fmax=650, sr=16000, frame_length=1024,
        // hop_length=160) at these seconds of twelve harmonics of amplitude 0.1 / k and phase
        // 0.3 k^2 whose F0 goes from 110 Hz up by 60 Hz per second. Its own steps are 0.6 %.
        let librosa = [
            (0.25, 125.26644386241279),
            (0.35, 131.19081044374488),
            (0.45, 137.3953647458089),
            (0.55, 143.06459324352582),
            (0.65, 148.96774631227024),
            (0.75, 155.11447618337345),
        ];
        let samples: Vec<f32> = (0..16_000)
            .map(|n| {
                let t = f64::from(n) / ANALYSIS_RATE_HZ;
                let turn = 2.0 * PI * (110.0 * t + 30.0 * t * t);
                let sum: f64 = (1..=12)
                    .map(|k| {
                        let k = f64::from(k);
                        (k * turn + 0.3 * k * k).cos() / k
                    })
                    .sum();
                (0.1 * sum) as f32
            })
            .collect();
        let points = librosa.map(|(s, _)| candidates(&samples, (s * ANALYSIS_RATE_HZ) as usize));
        let points: Vec<_> = points.iter().map(Vec::as_slice).collect();
        for (f0, (at_s, hz)) in voice::contour(&points, None).into_iter().zip(librosa) {
            let f0 = f0.expect("voiced");
            assert!((f0 / hz - 1.0).abs() < 0.01, "{f0} for {hz} at {at_s} s");
            let truth = 110.0 + 60.0 * at_s;
            assert!((f0 / truth - 1.0).abs() < NEAR, "{f0} for {truth}");
        }
    }

    #[test]
    fn noise_and_silence_repeat_at_nothing() {
        let mut state = 1u32;
        let noise: Vec<f32> = (0..8000)
            .map(|_| {
                // Numerical Recipes' linear congruential generator: any noise will do.
                state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
                (state >> 8) as f32 / (1 << 24) as f32 - 0.5
            })
            .collect();
        for centre in [2000, 3000, 4000, 5000] {
            for c in candidates(&noise, centre) {
                assert!(c.strength < 0.9, "{c:?}");
            }
        }
        assert!(candidates(&[0.0; 8000], 4000).is_empty());
    }
}
