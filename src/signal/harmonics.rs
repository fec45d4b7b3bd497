//! The lines of a voiced frame: frequency and power of its harmonics.

use super::discrete::Line;

/// Half width of the search around each multiple, as a share of F0: an F0 off by 1 % still finds
/// the tenth harmonic, and no search reaches a neighbour.
const SEARCH: f64 = 0.3;

/// The harmonics of `f0_hz` in a power spectrum whose bins are `bin_hz` apart, below `to_hz`.
///
/// Each is the highest bin near a multiple of F0, its peak interpolated by a parabola through the
/// logarithms of three bins (common practice; exact for a Gaussian main lobe). F0 is corrected as
/// the harmonics go up, so that a small error in it does not grow with their number.
pub fn lines(power: &[f32], bin_hz: f64, f0_hz: f64, to_hz: f64) -> Vec<Line> {
    let mut lines = Vec::new();
    let half = ((SEARCH * f0_hz / bin_hz) as usize).max(1);
    let mut spacing = f0_hz;
    for number in 1.. {
        let centre = (f64::from(number) * spacing / bin_hz).round() as usize;
        if centre as f64 * bin_hz >= to_hz || centre + half + 1 >= power.len() {
            break;
        }
        let first = centre.saturating_sub(half).max(1);
        let at = (first..=centre + half)
            .max_by(|&a, &b| power[a].total_cmp(&power[b]))
            .unwrap_or(centre);
        let ln = |i: usize| (f64::from(power[i]) + f64::MIN_POSITIVE).ln();
        let (left, here, right) = (ln(at - 1), ln(at), ln(at + 1));
        let curve = left - 2.0 * here + right;
        // At the edge of the search the highest bin need not be a peak.
        let shift = if curve < 0.0 {
            (0.5 * (left - right) / curve).clamp(-0.5, 0.5)
        } else {
            0.0
        };
        let hz = (at as f64 + shift) * bin_hz;
        lines.push(Line {
            hz,
            power: (here - 0.25 * (left - right) * shift).exp(),
        });
        // The strong low harmonics settle the spacing; the weak high ones would only disturb it.
        if number <= 8 {
            let measured = hz / f64::from(number);
            spacing += (measured - spacing) / f64::from(number + 1);
        }
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::signal::spectrum::PowerSpectrum;
    use crate::signal::window;

    #[test]
    fn finds_frequency_and_relative_power_of_known_lines() {
        // Closed form: a sum of cosines of known amplitude, powers in the ratio of their squares.
        let rate = 16_000.0;
        let f0 = 233.0;
        let samples: Vec<f32> = (0..1600)
            .map(|n| {
                let t = f64::from(n) / rate;
                (1..=10)
                    .map(|k| {
                        let k = f64::from(k);
                        (2.0 * std::f64::consts::PI * k * f0 * t + k).cos() / k
                    })
                    .sum::<f64>() as f32
            })
            .collect();
        let mut spectrum = PowerSpectrum::new(&window::hann(800), 1024);
        let power = spectrum.at(&samples, 800).to_vec();
        // Asked with an F0 that is 1 % off.
        let found = lines(&power, rate / 1024.0, f0 * 1.01, 10.5 * f0);
        assert_eq!(found.len(), 10);
        for (i, line) in found.iter().enumerate() {
            let k = (i + 1) as f64;
            assert!((line.hz - k * f0).abs() < 2.0, "line {k} at {}", line.hz);
            let ratio = line.power / found[0].power * k * k;
            // The parabola misses the top of a Hann lobe by at most 0.2 dB, leakage adds as much.
            assert!((ratio.ln()).abs() < 0.12, "line {k}: {ratio}");
        }
    }
}
