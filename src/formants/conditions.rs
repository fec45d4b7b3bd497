//! What holds for a whole recording: its channel, steady tones, the noise floor.

use crate::audio::{ANALYSIS_RATE_HZ, Waveform};
use crate::formants::grid::{BIN_HZ, BINS, Spectrograph};

/// The channel a recording came through.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Channel {
    /// Nothing is missing below half the rate it was stored at.
    Full,
    /// What lies above an edge within the stored band is missing.
    LowPass,
    /// The telephone band: about 300 to 3400 Hz.
    Telephone,
}

/// What holds for a whole recording and bears on every reading in it.
#[derive(Debug, Clone, PartialEq)]
pub struct Conditions {
    /// The channel it came through.
    pub channel: Channel,
    /// Lower edge of what can be measured, in hertz.
    pub lower_edge_hz: f64,
    /// Upper edge of what can be measured, in hertz.
    pub upper_edge_hz: f64,
    /// Steady tones, as from a fan or the mains, in hertz, rising.
    pub tones_hz: Vec<f64>,
    /// Power of the noise floor in every bin of the analysis spectrum; empty where there was no
    /// pause to hear it in.
    pub(super) noise: Vec<f32>,
    /// Signal against noise floor in decibels: mean power of the loud frames over the quiet ones;
    /// `None` where there was no pause.
    pub snr_db: Option<f64>,
    /// Share of samples at the recording's own extreme values in runs of three or more.
    pub clipped_share: f64,
}

/// Most frames looked at, spread evenly over the recording.
const MOST_FRAMES: usize = 400;

/// Distance of frames in seconds where the recording is short.
const HOP_S: f64 = 0.010;

/// The quietest share of the frames is taken for pauses; the loudest share for speech.
const QUIET_SHARE: f64 = 0.15;
const LOUD_SHARE: f64 = 0.5;

/// Pauses are pauses where they lie this far under the speech, in decibels.
const PAUSE_DB: f64 = 9.0;

impl Conditions {
    /// Finds the conditions of one waveform.
    pub fn find(waveform: &Waveform) -> Self {
        let samples = &waveform.samples;
        let hop = ((HOP_S * ANALYSIS_RATE_HZ) as usize)
            .max(samples.len() / MOST_FRAMES)
            .max(1);
        let mut spectrograph = Spectrograph::new();
        let half = spectrograph.frame_length() / 2;
        let mut frames: Vec<(f64, Vec<f32>)> = (half..samples.len().saturating_sub(half))
            .step_by(hop)
            .map(|centre| {
                let power = spectrograph.power(samples, centre).to_vec();
                (power.iter().map(|&p| f64::from(p)).sum::<f64>(), power)
            })
            // Digital silence is no pause: nothing of the room is in it.
            .filter(|(energy, _)| *energy > 0.0)
            .collect();
        frames.sort_by(|a, b| a.0.total_cmp(&b.0));
        let count = frames.len();
        let quiet = &frames[..((QUIET_SHARE * count as f64).ceil() as usize).min(count)];
        let loud = &frames[count - ((LOUD_SHARE * count as f64).ceil() as usize).min(count)..];
        let mut out = Self {
            channel: Channel::Full,
            lower_edge_hz: 0.0,
            upper_edge_hz: waveform.band_edge_hz,
            tones_hz: Vec::new(),
            noise: Vec::new(),
            snr_db: None,
            clipped_share: clipped_share(samples),
        };
        if count < FEWEST_FRAMES {
            return out;
        }
        let loud_mean = mean(loud);
        out.find_channel(&loud_mean, &mean(quiet));
        let energy = |set: &[(f64, Vec<f32>)]| {
            set.iter().map(|(e, _)| e).sum::<f64>() / set.len().max(1) as f64
        };
        let snr_db = 10.0 * (energy(loud) / energy(quiet)).log10();
        if snr_db >= PAUSE_DB {
            out.snr_db = Some(snr_db);
            out.noise = mean(quiet);
            out.tones_hz = tones(quiet, &out.noise);
        }
        out
    }

    /// The conditions less the spectrum of the noise, which only the analysis needs.
    pub fn without_noise(&self) -> Self {
        Self {
            noise: Vec::new(),
            tones_hz: self.tones_hz.clone(),
            ..*self
        }
    }

    /// Takes the noise floor and steady tones out of the power spectrum of a frame, and fills what
    /// the channel cut off below.
    pub(super) fn clean(&self, power: &mut [f32]) {
        if self.snr_db.is_some_and(|snr| snr < NOISY_DB) {
            for (p, n) in power.iter_mut().zip(&self.noise) {
                *p = (*p - NOISE_TAKEN * n).max(NOISE_LEFT * *p);
            }
        }
        for &tone_hz in &self.tones_hz {
            let k = (tone_hz / BIN_HZ).round() as usize;
            let (a, b) = (k.saturating_sub(TONE_BINS), (k + TONE_BINS).min(BINS - 1));
            let ln = |i: usize| power[i].max(1e-30).ln();
            let (from, to) = (ln(a), ln(b));
            for i in a + 1..b {
                let share = (i - a) as f32 / (b - a) as f32;
                power[i] = (from + share * (to - from)).exp();
            }
        }
        if self.lower_edge_hz > 0.0 {
            let edge = (self.lower_edge_hz / BIN_HZ).ceil() as usize;
            let fill = power[edge..edge + FILL_BINS].iter().sum::<f32>() / FILL_BINS as f32;
            power[..edge].fill(fill);
        }
    }

    /// Reads the edges of the channel off the mean spectra of the loud and the quiet frames.
    ///
    /// Speech alone can end as steeply as a channel, above the formants of a close back vowel for
    /// example; the noise of the pauses does so only behind a channel.
    fn find_channel(&mut self, loud: &[f32], quiet: &[f32]) {
        let fall_of = |mean: &[f32], at: f64| {
            let before = level_db(mean, at - 4.0 * EDGE_HZ, at);
            let after = level_db(mean, at + EDGE_HZ, at + 3.0 * EDGE_HZ);
            let rest = level_db(mean, at + EDGE_HZ, self.upper_edge_hz);
            before - after.max(rest)
        };
        // The lowest place where the level falls steeply and stays down.
        let mut at = LOWEST_EDGE_HZ;
        let mut fall_db = 0.0;
        while at + 3.0 * EDGE_HZ <= self.upper_edge_hz {
            fall_db = fall_of(loud, at);
            if fall_db > TELEPHONE_EDGE_DB && fall_of(quiet, at) > PAUSE_EDGE_DB {
                break;
            }
            fall_db = 0.0;
            at += 50.0;
        }
        let edge_hz = at + 0.5 * EDGE_HZ;
        let low_db = level_db(loud, 320.0, 520.0) - level_db(loud, 60.0, 220.0);
        if fall_db == 0.0 {
            return;
        }
        // A file stored at more than 8 kHz has been through a telephone only if the fall is as steep
        // as any channel's; one stored at 8 kHz most likely has.
        let steep = fall_db > EDGE_DB || self.upper_edge_hz <= TELEPHONE_STORED_HZ;
        if steep && edge_hz < HIGHEST_TELEPHONE_HZ && low_db > TELEPHONE_LOW_DB {
            self.channel = Channel::Telephone;
            self.upper_edge_hz = edge_hz;
            self.lower_edge_hz = TELEPHONE_LOWER_HZ;
        } else if fall_db > EDGE_DB {
            self.channel = Channel::LowPass;
            self.upper_edge_hz = edge_hz;
        }
    }
}

/// Recordings with less signal above the noise than this have the noise taken out, in decibels: in
/// quieter ones the pauses hold more breath and echo than room.
const NOISY_DB: f64 = 18.0;

/// Noise power taken out of every bin, and the share of a bin's power that always stays.
const NOISE_TAKEN: f32 = 1.0;
const NOISE_LEFT: f32 = 0.1;

/// Bins above the channel's lower edge whose mean stands in for what lies below.
const FILL_BINS: usize = 12;

/// Fewer frames than this tell nothing about a recording.
const FEWEST_FRAMES: usize = 8;

/// A channel's edge: this many decibels lost within [`EDGE_HZ`]; fewer do behind a telephone, whose
/// lower edge speaks for it too. Voices fall by 6 to 12 dB per octave, that is by less than 3 dB
/// within 200 Hz at 3 kHz, but the dip above a formant can be as steep as a telephone's edge.
const EDGE_DB: f64 = 28.0;
const TELEPHONE_EDGE_DB: f64 = 16.0;
const PAUSE_EDGE_DB: f64 = 14.0;
const EDGE_HZ: f64 = 100.0;
const LOWEST_EDGE_HZ: f64 = 3100.0;
const HIGHEST_TELEPHONE_HZ: f64 = 3700.0;
const TELEPHONE_STORED_HZ: f64 = 4100.0;

/// Decibels by which the level below 220 Hz lies under that of 320 to 520 Hz behind a telephone.
const TELEPHONE_LOW_DB: f64 = 12.0;

/// Lower edge of the telephone band in hertz (ITU-T G.712, common practice).
const TELEPHONE_LOWER_HZ: f64 = 300.0;

/// Mean level of a band of a spectrum in decibels.
fn level_db(power: &[f32], from_hz: f64, to_hz: f64) -> f64 {
    let (a, b) = (
        (from_hz / BIN_HZ) as usize,
        ((to_hz / BIN_HZ) as usize).min(BINS),
    );
    let sum: f64 = power[a..b].iter().map(|&p| f64::from(p)).sum();
    10.0 * (sum / (b - a).max(1) as f64 + 1e-30).log10()
}

fn mean(frames: &[(f64, Vec<f32>)]) -> Vec<f32> {
    let mut sum = vec![0.0f64; BINS];
    for (_, power) in frames {
        for (s, p) in sum.iter_mut().zip(power) {
            *s += f64::from(*p);
        }
    }
    let scale = 1.0 / frames.len().max(1) as f64;
    sum.into_iter().map(|s| (s * scale) as f32).collect()
}

/// Lowest tone looked for, in hertz: below it a voice's own harmonics stand as still, and no
/// formant is taken for a tone.
const LOWEST_TONE_HZ: f64 = 250.0;

/// A tone stands this far above its surroundings, in decibels, in this share of the pauses.
const TONE_DB: f64 = 13.0;
const TONE_SHARE: f64 = 0.9;

/// Tones within this distance of each other are one, in bins; the surroundings reach from there to
/// [`AROUND_BINS`].
pub(super) const TONE_BINS: usize = 4;
const AROUND_BINS: usize = 12;

/// Steady tones in the pauses: peaks of the noise floor that stand in nearly every one of them.
fn tones(quiet: &[(f64, Vec<f32>)], floor: &[f32]) -> Vec<f64> {
    let ratio = 10f64.powf(TONE_DB / 10.0);
    let stands = |power: &[f32], k: usize| {
        let around = power[k - AROUND_BINS..=k - TONE_BINS]
            .iter()
            .chain(&power[k + TONE_BINS..=k + AROUND_BINS])
            .map(|&p| f64::from(p))
            .sum::<f64>()
            / (2 * (AROUND_BINS - TONE_BINS + 1)) as f64;
        f64::from(power[k]) > ratio * around
    };
    let first = (LOWEST_TONE_HZ / BIN_HZ) as usize;
    let mut out = Vec::new();
    for k in first..BINS - AROUND_BINS - 1 {
        let peak = (k - TONE_BINS + 1..k + TONE_BINS).all(|j| floor[j] <= floor[k]);
        if !peak || !stands(floor, k) {
            continue;
        }
        let standing = quiet.iter().filter(|(_, power)| stands(power, k)).count();
        if standing as f64 >= TONE_SHARE * quiet.len() as f64 {
            let ln = |i: usize| f64::from(floor[i]).max(1e-30).ln();
            let (left, here, right) = (ln(k - 1), ln(k), ln(k + 1));
            let shift = 0.5 * (left - right) / (left - 2.0 * here + right).min(-1e-12);
            out.push((k as f64 + shift) * BIN_HZ);
        }
    }
    out
}

/// Share of samples that stand at the extreme value of their sign, three or more in a row.
fn clipped_share(samples: &[f32]) -> f64 {
    let (low, high) = samples
        .iter()
        .fold((0.0f32, 0.0f32), |(l, h), &s| (l.min(s), h.max(s)));
    if high - low < 0.05 {
        return 0.0;
    }
    let (mut clipped, mut run) = (0usize, 0usize);
    let mut last = 0.0f32;
    for &s in samples {
        // Resampling ripples a flat top by a percent.
        let at_edge = s >= 0.985 * high || s <= 0.985 * low;
        if at_edge && (run == 0 || (s > 0.0) == (last > 0.0)) {
            run += 1;
        } else {
            run = usize::from(at_edge);
        }
        last = s;
        match run {
            6 => clipped += 6,
            7.. => clipped += 1,
            _ => {}
        }
    }
    clipped as f64 / samples.len().max(1) as f64
}
