//! Any stored rate to the analysis rate. The only place that knows the resampler's crate.

use rubato::audioadapter_buffers::direct::InterleavedSlice;
use rubato::{Fft, FixedSync, Resampler};

use super::{ANALYSIS_RATE_HZ, AudioError};

/// Wanted length of one block of the conversion, in input samples. The filter is as long as a
/// block: at 44.1 kHz and 4096 its edge lies within 1 % of the lower half rate.
const BLOCK: usize = 4096;

/// Brings samples to [`ANALYSIS_RATE_HZ`], band-limited, without delay.
///
/// # Errors
/// [`AudioError::Resampling`] where the crate refuses the rates.
pub(super) fn to_analysis_rate(samples: &[f32], rate_hz: u32) -> Result<Vec<f32>, AudioError> {
    let rate_in = rate_hz as usize;
    let rate_out = ANALYSIS_RATE_HZ as usize;
    if rate_in == rate_out || samples.is_empty() {
        return Ok(samples.to_vec());
    }
    let refused = |reason: String| AudioError::Resampling {
        from_hz: rate_hz,
        reason,
    };
    // The filter is centred on a whole sample only where a block has an even number of them;
    // otherwise everything would come half an input sample late. So a block is an even multiple
    // of the smallest one.
    let smallest_pair = 2 * rate_in / greatest_common_divisor(rate_in, rate_out);
    let block = BLOCK.div_ceil(smallest_pair) * smallest_pair;
    let mut resampler = Fft::<f32>::new(rate_in, rate_out, block, 1, FixedSync::Both)
        .map_err(|error| refused(error.to_string()))?;
    let input = InterleavedSlice::new(samples, 1, samples.len())
        .map_err(|error| refused(error.to_string()))?;
    let output = resampler
        .process_all(&input, samples.len(), None)
        .map_err(|error| refused(error.to_string()))?;
    Ok(output.take_data())
}

fn greatest_common_divisor(a: usize, b: usize) -> usize {
    if b == 0 {
        a
    } else {
        greatest_common_divisor(b, a % b)
    }
}

#[cfg(test)]
mod tests {
    use std::f64::consts::TAU;

    use super::*;

    /// Rates in use, and one that shares almost no factor with the analysis rate.
    const RATES_HZ: [u32; 9] = [
        8_000, 11_025, 16_000, 22_050, 32_000, 44_100, 48_000, 96_000, 44_056,
    ];

    fn tone(frequency_hz: f64, rate_hz: u32, seconds: f64) -> Vec<f32> {
        let count = (seconds * f64::from(rate_hz)).round() as usize;
        (0..count)
            .map(|n| (0.5 * (TAU * frequency_hz * n as f64 / f64::from(rate_hz)).sin()) as f32)
            .collect()
    }

    /// Amplitude and delay in seconds of a tone of known frequency, by least squares over whole
    /// periods in the middle of the signal, against `0.5 sin(2 pi f t)`.
    fn amplitude_and_delay(samples: &[f32], frequency_hz: f64) -> (f64, f64) {
        let from = samples.len() / 4;
        let periods = (0.25 * samples.len() as f64 * frequency_hz / ANALYSIS_RATE_HZ).floor();
        let count = (periods * ANALYSIS_RATE_HZ / frequency_hz).round() as usize;
        let (mut sine, mut cosine) = (0.0, 0.0);
        for n in from..from + count {
            let angle = TAU * frequency_hz * n as f64 / ANALYSIS_RATE_HZ;
            sine += f64::from(samples[n]) * angle.sin();
            cosine += f64::from(samples[n]) * angle.cos();
        }
        let (sine, cosine) = (2.0 * sine / count as f64, 2.0 * cosine / count as f64);
        let delay_s = -cosine.atan2(sine) / (TAU * frequency_hz);
        (sine.hypot(cosine), delay_s)
    }

    #[test]
    fn tones_keep_frequency_amplitude_and_time_at_every_rate() {
        // A thousandth of full scale is far below what a 16-bit recording's room noise allows,
        // and a microsecond a sixteenth of a sample's tenth.
        const AMPLITUDE_TOLERANCE: f64 = 1e-3;
        const DELAY_TOLERANCE_S: f64 = 1e-6;
        for rate_hz in RATES_HZ {
            for frequency_hz in [200.0, 1000.0, 3500.0] {
                let converted = to_analysis_rate(&tone(frequency_hz, rate_hz, 1.0), rate_hz)
                    .expect("converted");
                assert_eq!(converted.len(), 16_000, "at {rate_hz}");
                let (amplitude, delay_s) = amplitude_and_delay(&converted, frequency_hz);
                assert!(
                    (amplitude - 0.5).abs() < AMPLITUDE_TOLERANCE
                        && delay_s.abs() < DELAY_TOLERANCE_S,
                    "{frequency_hz} Hz at {rate_hz}: amplitude {amplitude}, delay {delay_s}"
                );
            }
        }
    }

    #[test]
    fn what_lies_above_the_analysis_band_is_gone() {
        // 9 kHz would come back at 7 kHz.
        for rate_hz in [44_100, 48_000, 96_000] {
            let converted =
                to_analysis_rate(&tone(9_000.0, rate_hz, 1.0), rate_hz).expect("converted");
            let middle = &converted[4_000..12_000];
            let loudest = middle.iter().fold(0.0_f32, |most, x| most.max(x.abs()));
            assert!(loudest < 1e-4, "at {rate_hz}: {loudest}");
        }
    }

    #[test]
    fn an_onset_stays_where_it_is() {
        for rate_hz in RATES_HZ {
            let mut samples = vec![0.0; rate_hz as usize / 2];
            samples.extend(tone(1_000.0, rate_hz, 0.5));
            let converted = to_analysis_rate(&samples, rate_hz).expect("converted");
            // The first crossing of half the tone's height: a twelfth of a period (0.0833 ms)
            // after the onset.
            let crossing = converted.iter().position(|&x| x > 0.25).expect("a tone");
            let onset_s = crossing as f64 / ANALYSIS_RATE_HZ - 1.0 / 12_000.0;
            // The crossing is found to within one sample; a band limit of 4 kHz rounds the
            // corner by as much again.
            assert!(
                (onset_s - 0.5).abs() < 2.0 / ANALYSIS_RATE_HZ,
                "at {rate_hz}: {onset_s}"
            );
        }
    }

    #[test]
    fn shortest_sounds_convert() {
        for count in [1, 2, 10, 441] {
            let converted = to_analysis_rate(&vec![0.1; count], 44_100).expect("converted");
            assert_eq!(
                converted.len(),
                (count as f64 * 16_000.0 / 44_100.0).ceil() as usize
            );
        }
    }
}
