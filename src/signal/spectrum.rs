//! Power spectra of short frames.

use std::sync::Arc;

use realfft::{RealFftPlanner, RealToComplex};
use rustfft::num_complex::Complex;

/// Computes power spectra of windowed frames with one plan and reused storage.
#[derive(Clone)]
pub struct PowerSpectrum {
    plan: Arc<dyn RealToComplex<f32>>,
    window: Vec<f32>,
    input: Vec<f32>,
    output: Vec<Complex<f32>>,
    scratch: Vec<Complex<f32>>,
    power: Vec<f32>,
}

impl PowerSpectrum {
    /// Prepares for frames as long as `window`, zero-padded to `fft_length`.
    pub fn new(window: &[f64], fft_length: usize) -> Self {
        let plan = RealFftPlanner::<f32>::new().plan_fft_forward(fft_length);
        Self {
            window: window.iter().map(|&w| w as f32).collect(),
            input: plan.make_input_vec(),
            output: plan.make_output_vec(),
            scratch: plan.make_scratch_vec(),
            power: vec![0.0; fft_length / 2 + 1],
            plan,
        }
    }

    /// Samples in a frame.
    pub fn frame_length(&self) -> usize {
        self.window.len()
    }

    /// The power spectrum of the frame centred on sample `centre` of `samples`; what lies outside
    /// is taken as zero.
    pub fn at(&mut self, samples: &[f32], centre: usize) -> &[f32] {
        let length = self.window.len();
        let first = centre as isize - (length / 2) as isize;
        self.input.fill(0.0);
        for n in 0..length {
            let i = first + n as isize;
            if i >= 0 && (i as usize) < samples.len() {
                self.input[n] = samples[i as usize] * self.window[n];
            }
        }
        self.plan
            .process_with_scratch(&mut self.input, &mut self.output, &mut self.scratch)
            .expect("buffers were made by the plan");
        for (p, c) in self.power.iter_mut().zip(&self.output) {
            *p = c.norm_sqr();
        }
        &self.power
    }
}

impl std::fmt::Debug for PowerSpectrum {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("PowerSpectrum")
            .field("frame_length", &self.window.len())
            .finish()
    }
}
