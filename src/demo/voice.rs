//! The voice: pulses of air, a little irregular, with breath between.
//!
//! *Source*: Rosenberg 1971, JASA 49, 583-590, pulse shape B (a cubic opening, a quadratic closing).

use std::f64::consts::PI;

use rand::Rng;
use rand_pcg::Pcg64;

use super::tract::SYNTHESIS_RATE_HZ;

/// How a person's voice is made.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Voice {
    /// Part of the period in which the glottis opens.
    pub(super) opening: f64,
    /// Part of the period in which it closes again.
    pub(super) closing: f64,
    /// Standard deviation of a period's length, relative.
    pub(super) jitter: f64,
    /// Standard deviation of a period's strength, relative.
    pub(super) shimmer: f64,
    /// Level of breath noise against the pulses.
    pub(super) breath: f64,
    /// Corner of the softening low-pass, in hertz.
    pub(super) soft_hz: f64,
}

impl Voice {
    /// Air flow at a phase of the period, 0 to 1.
    pub(super) fn flow(&self, phase: f64) -> f64 {
        if phase < self.opening {
            let x = phase / self.opening;
            x * x * (3.0 - 2.0 * x)
        } else if phase < self.opening + self.closing {
            let x = (phase - self.opening) / self.closing;
            1.0 - x * x
        } else {
            0.0
        }
    }

    /// The voice at [`SYNTHESIS_RATE_HZ`], as it radiates from the lips (the change of flow).
    ///
    /// `f0_hz` and `loudness` are asked once a period, with the time in seconds.
    pub(super) fn speak(
        &self,
        samples: usize,
        from_s: f64,
        to_s: f64,
        f0_hz: impl Fn(f64) -> f64,
        loudness: impl Fn(f64) -> f64,
        random: &mut Pcg64,
    ) -> Vec<f64> {
        let mut source = vec![0.0; samples];
        let mut start_s = from_s;
        while start_s < to_s {
            let period_s = (1.0 + self.jitter * gaussian(random)) / f0_hz(start_s);
            let loud = loudness(start_s) * (1.0 + self.shimmer * gaussian(random));
            let first = (start_s * SYNTHESIS_RATE_HZ).ceil().max(0.0) as usize;
            let past = ((start_s + period_s) * SYNTHESIS_RATE_HZ).ceil() as usize;
            for (n, value) in source.iter_mut().enumerate().take(past).skip(first) {
                let phase = (n as f64 / SYNTHESIS_RATE_HZ - start_s) / period_s;
                // The difference of the flow over one sample, not its derivative at a point: the
                // average over the sample keeps the sharp closing from folding back.
                let before = (phase - 1.0 / (SYNTHESIS_RATE_HZ * period_s)).max(0.0);
                let change = (self.flow(phase) - self.flow(before)) * SYNTHESIS_RATE_HZ * period_s;
                let breath = self.breath * self.flow(phase) * gaussian(random);
                *value = loud * (change + breath);
            }
            start_s += period_s;
        }
        let pole = (-2.0 * PI * self.soft_hz / SYNTHESIS_RATE_HZ).exp();
        let mut last = 0.0;
        for value in &mut source {
            last = (1.0 - pole) * *value + pole * last;
            *value = last;
        }
        source
    }
}

/// A draw from the standard normal distribution (Box & Muller 1958, Ann. Math. Statist. 29, 610).
pub(super) fn gaussian(random: &mut Pcg64) -> f64 {
    let radius = (-2.0 * (1.0 - random.random::<f64>()).ln()).sqrt();
    radius * (2.0 * PI * random.random::<f64>()).cos()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn flow_opens_smoothly_and_closes_at_the_stated_phases() {
        let voice = Voice {
            opening: 0.4,
            closing: 0.2,
            jitter: 0.0,
            shimmer: 0.0,
            breath: 0.0,
            soft_hz: 4_000.0,
        };
        // Hand values of 3x² - 2x³ and 1 - x².
        assert!((voice.flow(0.1) - 0.15625).abs() < 1e-12);
        assert!((voice.flow(0.2) - 0.5).abs() < 1e-12);
        assert!((voice.flow(0.4) - 1.0).abs() < 1e-12);
        assert!((voice.flow(0.5) - 0.75).abs() < 1e-12);
        assert_eq!(voice.flow(0.7), 0.0);
    }

    #[test]
    fn gaussian_draws_have_mean_zero_and_variance_one() {
        use rand::SeedableRng;
        let mut random = Pcg64::seed_from_u64(1);
        let draws: Vec<f64> = (0..100_000).map(|_| gaussian(&mut random)).collect();
        let mean = draws.iter().sum::<f64>() / draws.len() as f64;
        let variance = draws.iter().map(|d| (d - mean).powi(2)).sum::<f64>() / draws.len() as f64;
        // Five standard errors: 5/sqrt(n) and 5*sqrt(2/n).
        assert!(
            mean.abs() < 0.016 && (variance - 1.0).abs() < 0.023,
            "{mean} {variance}"
        );
    }
}
