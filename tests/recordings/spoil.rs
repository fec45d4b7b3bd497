//! What rooms, fans and telephones do to a recording.

use std::f64::consts::PI;

use rand_pcg::Pcg64;

use super::tract::{convolve, low_pass};
use super::voice::{RATE_HZ, Word, gaussian};

/// Adds pink noise `snr_db` under the vowel: root mean square against root mean square.
pub fn add_pink_noise(word: &mut Word, snr_db: f64, random: &mut Pcg64) {
    // Equal power in every octave: first-order sections an octave apart, each with the same
    // power, from 15 Hz to beyond the band (common practice).
    let mut states = [0.0; 10];
    let mut noise: Vec<f64> = Vec::with_capacity(word.sound.len());
    for _ in 0..word.sound.len() + 16_000 {
        let mut sum = 0.0;
        for (k, state) in states.iter_mut().enumerate() {
            let pole = (-2.0 * PI * 15.0 * f64::from(1u32 << k) / RATE_HZ).exp();
            *state = pole * *state + (1.0 - pole * pole).sqrt() * gaussian(random);
            sum += *state;
        }
        noise.push(sum);
    }
    let noise = &noise[16_000..];
    let gain = rms(vowel_of(word)) / rms(noise) * 10f64.powf(-snr_db / 20.0);
    for (s, n) in word.sound.iter_mut().zip(noise) {
        *s += gain * n;
    }
}

/// Adds a steady tone whose amplitude is `below_db` under the vowel's peak.
pub fn add_tone(word: &mut Word, tone_hz: f64, below_db: f64) {
    let peak = vowel_of(word).iter().fold(0.0f64, |m, s| m.max(s.abs()));
    let amplitude = peak * 10f64.powf(-below_db / 20.0);
    for (n, s) in word.sound.iter_mut().enumerate() {
        *s += amplitude * (2.0 * PI * tone_hz * n as f64 / RATE_HZ).sin();
    }
}

/// The sound behind a telephone channel of 300 to 3400 Hz, at 8 kHz.
pub fn telephone(sound: &[f64]) -> Vec<f64> {
    let (high, low) = (
        low_pass(3_400.0 / RATE_HZ, 200),
        low_pass(300.0 / RATE_HZ, 200),
    );
    let band: Vec<f64> = high.iter().zip(&low).map(|(h, l)| h - l).collect();
    convolve(sound, &band).into_iter().step_by(2).collect()
}

fn vowel_of(word: &Word) -> &[f64] {
    let at = |s: f64| (s * RATE_HZ) as usize;
    &word.sound[at(word.start_s)..at(word.end_s)]
}

/// Root mean square.
pub fn rms(sound: &[f64]) -> f64 {
    (sound.iter().map(|s| s * s).sum::<f64>() / sound.len() as f64).sqrt()
}
