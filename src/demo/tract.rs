//! The tract: resonances in a row, the lowest three moving, the others those of its length.

use std::f64::consts::PI;

/// Rate at which sound is made, in hertz: twice the rate of the recordings.
pub(super) const SYNTHESIS_RATE_HZ: f64 = 32_000.0;

/// Speed of sound in the tract in cm/s, as in Johnson 2020, Laboratory Phonology 11, 10.
const SOUND_CM_S: f64 = 35_000.0;

/// Samples between updates of the moving resonances: half a millisecond.
const UPDATE_SAMPLES: usize = 16;

/// Bandwidth in hertz of a resonance of a voice of pitch `f0_hz`.
///
/// Beyond the range of the published polynomial (4 kHz) the bandwidth is held at 6 % of the
/// frequency, which meets it there to a third (common practice).
///
/// *Source*: Hawks & Miller 1995, JASA 97, 1343-1344, coefficients from memory, held against five
/// noted values by the test.
pub(super) fn bandwidth_hz(frequency_hz: f64, f0_hz: f64) -> f64 {
    let f = frequency_hz;
    let at_132_hz = if f < 500.0 {
        let c = [
            165.327516,
            -6.73636734e-1,
            1.80874446e-3,
            -4.52201682e-6,
            7.49514000e-9,
            -4.70219241e-12,
        ];
        horner(&c, f)
    } else if f < 4_000.0 {
        let c = [
            15.8146139,
            8.10159009e-2,
            -9.79728215e-5,
            5.28725064e-8,
            -1.07099364e-11,
            7.91528509e-16,
        ];
        horner(&c, f)
    } else {
        0.06 * f
    };
    at_132_hz * (1.0 + 0.25 * (f0_hz - 132.0) / 88.0)
}

fn horner(coefficients: &[f64], x: f64) -> f64 {
    coefficients.iter().rev().fold(0.0, |sum, c| sum * x + c)
}

/// F4 and everything above it, in hertz, for a tract of `length_cm`: odd quarter waves.
pub(super) fn fixed_hz(length_cm: f64) -> Vec<f64> {
    (4..)
        .map(|n| f64::from(2 * n - 1) * SOUND_CM_S / (4.0 * length_cm))
        .take_while(|f| *f < 0.47 * SYNTHESIS_RATE_HZ)
        .collect()
}

/// Two poles, with a gain of one at 0 Hz.
#[derive(Debug, Clone, Copy)]
struct Resonance {
    gain: f64,
    first: f64,
    second: f64,
    y1: f64,
    y2: f64,
}

impl Resonance {
    fn at(frequency_hz: f64, bandwidth_hz: f64) -> Self {
        let mut made = Self {
            gain: 1.0,
            first: 0.0,
            second: 0.0,
            y1: 0.0,
            y2: 0.0,
        };
        made.move_to(frequency_hz, bandwidth_hz);
        made
    }

    fn move_to(&mut self, frequency_hz: f64, bandwidth_hz: f64) {
        let radius = (-PI * bandwidth_hz / SYNTHESIS_RATE_HZ).exp();
        self.first = 2.0 * radius * (2.0 * PI * frequency_hz / SYNTHESIS_RATE_HZ).cos();
        self.second = -radius * radius;
        self.gain = 1.0 - self.first - self.second;
    }

    fn pass(&mut self, x: f64) -> f64 {
        let y = self.gain * x + self.first * self.y1 + self.second * self.y2;
        self.y2 = self.y1;
        self.y1 = y;
        y
    }
}

/// Sends `sound` through the tract, in place; `moving_hz` gives F1 to F3 at a time in seconds.
pub(super) fn pass(
    sound: &mut [f64],
    length_cm: f64,
    f0_hz: f64,
    moving_hz: impl Fn(f64) -> [f64; 3],
) {
    let widths = |f: f64| bandwidth_hz(f, f0_hz);
    let mut moving = moving_hz(0.0).map(|f| Resonance::at(f, widths(f)));
    let mut fixed: Vec<_> = fixed_hz(length_cm)
        .into_iter()
        .map(|f| Resonance::at(f, widths(f)))
        .collect();
    for (n, x) in sound.iter_mut().enumerate() {
        if n % UPDATE_SAMPLES == 0 {
            for (r, f) in moving
                .iter_mut()
                .zip(moving_hz(n as f64 / SYNTHESIS_RATE_HZ))
            {
                r.move_to(f, widths(f));
            }
        }
        *x = moving
            .iter_mut()
            .chain(&mut fixed)
            .fold(*x, |x, r| r.pass(x));
    }
}

/// Halves the rate: a 101-point Blackman-windowed sinc at 7.6 kHz, then every second sample.
pub(super) fn halve(sound: &[f64]) -> Vec<f64> {
    const REACH: isize = 50;
    const CUTOFF: f64 = 7_600.0 / SYNTHESIS_RATE_HZ;
    let taps: Vec<f64> = (-REACH..=REACH)
        .map(|k| {
            let (k, whole) = (k as f64, REACH as f64 + 1.0);
            let sinc = if k == 0.0 {
                2.0 * CUTOFF
            } else {
                (2.0 * PI * CUTOFF * k).sin() / (PI * k)
            };
            sinc * (0.42 + 0.5 * (PI * k / whole).cos() + 0.08 * (2.0 * PI * k / whole).cos())
        })
        .collect();
    let at = |m: isize| {
        usize::try_from(m)
            .ok()
            .and_then(|m| sound.get(m))
            .copied()
            .unwrap_or(0.0)
    };
    (0..sound.len() as isize)
        .step_by(2)
        .map(|n| taps.iter().zip(-REACH..).map(|(t, k)| t * at(n + k)).sum())
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bandwidths_match_the_noted_values() {
        for (f, noted) in [
            (300.0, 53.2),
            (500.0, 37.8),
            (1_000.0, 41.8),
            (2_000.0, 62.9),
            (3_000.0, 129.5),
        ] {
            assert!((bandwidth_hz(f, 132.0) - noted).abs() < 0.1, "{f} Hz");
        }
    }

    #[test]
    fn a_resonance_rings_at_its_frequency_and_dies_at_its_bandwidth() {
        // The response of two poles is r^n sin((n+1)w)/sin(w): the closed form beside the recursion.
        let (f, b) = (700.0, 80.0);
        let mut resonance = Resonance::at(f, b);
        let gain = resonance.gain;
        let (w, r) = (
            2.0 * PI * f / SYNTHESIS_RATE_HZ,
            (-PI * b / SYNTHESIS_RATE_HZ).exp(),
        );
        for n in 0..200 {
            let made = resonance.pass(if n == 0 { 1.0 } else { 0.0 });
            let n = f64::from(n);
            let expected = gain * r.powf(n) * ((n + 1.0) * w).sin() / w.sin();
            assert!((made - expected).abs() < 1e-12);
        }
    }

    #[test]
    fn halving_keeps_a_low_tone_and_drops_a_high_one() {
        let tone = |hz: f64| -> Vec<f64> {
            (0..2_000)
                .map(|n| (2.0 * PI * hz * f64::from(n) / SYNTHESIS_RATE_HZ).sin())
                .collect()
        };
        let level = |x: &[f64]| {
            let inner = &x[100..900];
            (inner.iter().map(|v| v * v).sum::<f64>() / inner.len() as f64).sqrt()
        };
        assert!((level(&halve(&tone(1_000.0))) - 0.5f64.sqrt()).abs() < 1e-3);
        assert!(level(&halve(&tone(11_000.0))) < 1e-3);
    }
}
