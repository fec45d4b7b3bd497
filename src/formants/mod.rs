//! Waveform and span to every believable reading of the resonances.
//!
//! [`analyse`] weighs many hypotheses for one span; choosing between them takes all tokens of a
//! speaker and is the work of [`crate::tokens`]. Nothing here is told who speaks or which vowel.
//!
//! **The recording** is heard first ([`conditions`]): which band its channel left, which steady tones
//! stand in its pauses, how loud its noise is. Tones are cut out of every spectrum and bridged, noise
//! is subtracted where there is less than 18 dB above it, bands outside the channel are not read.
//!
//! **Every point** of a vowel (seventeen, from 10 to 90 % of its duration) is read by seventy
//! analyses: ten bands from 3.5 to 7.6 kHz, linear prediction of orders 8 to 14 in each (`grid`;
//! behind a telephone narrower bands and lower orders). One Fourier transform serves all.
//! Readings that agree in F1, F2 and F3 at once are gathered into hypotheses ([`consensus`]); how
//! many agree, and how narrow the resonances are, is how far each is believed.
//!
//! **Sparse harmonics** pull a predicted F1 toward the nearest of them. So for voices above 140 Hz
//! the leading hypotheses are read once more from the harmonics alone, by discrete all-pole
//! modelling, and above 300 Hz every reading is made so. F0 comes first, by normalized
//! cross-correlation ([`pitch`]) and dynamic programming ([`voice`]).
//!
//! **The path** through the hypotheses is [`crate::tokens`]'s: agreement, a broad cloud of all vowels
//! moved to the speaker's size, and continuity. Each constant's doc says which experiment chose it;
//! all of them are flat: halving or doubling a weight changes no share of gross errors on `hvd-words`
//! by more than half a point.
//!
//! **What did not earn its time** (tried on `hvd-words`, both halves of the speakers): a spectral
//! envelope through the harmonics by interpolation before prediction (F1 over 10 % off 2.5 instead
//! of 1.9 %, F2 1.5 instead of 1.7 %; discrete all-pole does the same better); the speaker's own
//! distribution of F3 as a belief (F2 2.1 instead of 1.7 %: F3 is where /i/ and the rhotic vowels
//! differ from the rest); a second and third emphasis in every band (no gain over two in turn, at
//! twice and three times the cost); orders 7, 15, 16; half of the readings in a chequered pattern (F2
//! 1.8 instead of 1.6 %); nine points instead of seventeen (F2 1.7 %). Not tried yet: prediction
//! weighted by the glottal phase.

pub mod conditions;
pub mod consensus;
mod grid;
pub mod pitch;
pub mod voice;

use crate::audio::{ANALYSIS_RATE_HZ, Waveform};
use crate::segments::VowelSpan;
pub use conditions::{Channel, Conditions};
use consensus::Hypothesis;
use pitch::{PitchCandidate, PitchSignal};

/// Points of a token at which it is analysed, as proportions of its duration: 0.1 to 0.9 in steps
/// of 0.05.
pub const POINTS: usize = 17;

/// The proportion of the duration of analysis point `index`.
pub fn proportion(index: usize) -> f64 {
    0.1 + 0.05 * index as f64
}

/// All that was found in one span before the speaker is known.
#[derive(Debug, Clone)]
pub struct SpanAnalysis {
    /// What holds for its recording.
    pub conditions: Conditions,
    /// One entry per analysis point.
    pub points: Vec<PointAnalysis>,
}

impl SpanAnalysis {
    /// The pitch candidates of every point.
    pub fn pitch(&self) -> Vec<&[PitchCandidate]> {
        self.points.iter().map(|p| p.pitch.as_slice()).collect()
    }
}

/// All that was found at one moment.
#[derive(Debug, Clone)]
pub struct PointAnalysis {
    /// Seconds from the start of the recording.
    pub time_s: f64,
    /// Readings of the resonances, the most believed first; may be empty.
    pub hypotheses: Vec<Hypothesis>,
    /// Candidates for the fundamental frequency, the strongest first; may be empty.
    pub pitch: Vec<PitchCandidate>,
}

/// Why a span could not be analysed at all.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Unmeasured {
    /// Shorter than [`SHORTEST_S`].
    TooShort,
    /// No energy.
    Silent,
    /// The span lies (partly) outside its recording.
    OutsideRecording,
    /// The recording, or the channel asked for, could not be read.
    NoRecording,
    /// No hypothesis gave a believable set of resonances.
    NoResonances,
}

impl Unmeasured {
    /// The reason as the tables write it.
    pub fn reason(self) -> &'static str {
        match self {
            Self::TooShort => "too short",
            Self::Silent => "silent",
            Self::OutsideRecording => "outside the recording",
            Self::NoRecording => "the recording could not be read",
            Self::NoResonances => "no resonances",
        }
    }
}

/// The shortest span that is measured, in seconds: two periods of a low voice.
pub const SHORTEST_S: f64 = 0.020;

/// Samples of a span below this root mean square (-90 dB of full scale) are silence.
const SILENCE_RMS: f64 = 3.2e-5;

/// Analyses one span of a recording.
///
/// # Errors
/// [`Unmeasured`] where the span cannot be analysed.
pub fn analyse(
    waveform: &Waveform,
    conditions: &Conditions,
    span: &VowelSpan,
) -> Result<SpanAnalysis, Unmeasured> {
    let samples = &waveform.samples;
    // Labels are rounded to the millisecond: half of one past the end is no error.
    if span.start_s < 0.0 || span.end_s > waveform.duration_s() + 0.0005 {
        return Err(Unmeasured::OutsideRecording);
    }
    if span.duration_s() < SHORTEST_S {
        return Err(Unmeasured::TooShort);
    }
    let first = (span.start_s * ANALYSIS_RATE_HZ).round() as usize;
    let last = ((span.end_s * ANALYSIS_RATE_HZ).round() as usize).min(samples.len());
    let energy: f64 = samples[first..last]
        .iter()
        .map(|&x| f64::from(x) * f64::from(x))
        .sum();
    if energy <= SILENCE_RMS * SILENCE_RMS * (last - first) as f64 {
        return Err(Unmeasured::Silent);
    }
    let mut grid = grid::Grid::new(conditions);
    let pitch = PitchSignal::new(samples, first, last);
    let mut readings = Vec::with_capacity(grid::READINGS);
    let times: Vec<f64> = (0..POINTS)
        .map(|i| span.start_s + proportion(i) * span.duration_s())
        .collect();
    let centre = |time_s: f64| (time_s * ANALYSIS_RATE_HZ).round() as usize;
    let candidates: Vec<_> = times.iter().map(|&t| pitch.candidates(centre(t))).collect();
    let f0 = voice::contour(
        &candidates.iter().map(Vec::as_slice).collect::<Vec<_>>(),
        None,
    );
    let points: Vec<PointAnalysis> = times
        .into_iter()
        .zip(candidates)
        .zip(f0)
        .map(|((time_s, pitch), f0_hz)| {
            readings.clear();
            grid.read(samples, centre(time_s), &mut readings);
            let hypotheses = hypotheses(&mut grid, &readings, f0_hz.unwrap_or(0.0));
            PointAnalysis {
                time_s,
                hypotheses,
                pitch,
            }
        })
        .collect();
    if points.iter().all(|p| p.hypotheses.is_empty()) {
        return Err(Unmeasured::NoResonances);
    }
    Ok(SpanAnalysis {
        conditions: conditions.without_noise(),
        points,
    })
}

/// F0 from which harmonics are far enough apart to pull a predicted F1, in hertz.
const SPARSE_HZ: f64 = 140.0;

/// Hypotheses of a frame that are read from harmonics too, and analyses remade for each.
const REMADE_HYPOTHESES: usize = 3;
const REMADE_READINGS: usize = 3;

/// F0 above which only readings from harmonics are made, in hertz: from here on a band of five
/// formants holds fewer than three harmonics per formant.
const HARMONICS_ONLY_HZ: f64 = 300.0;

/// Fewer readings from harmonics than this are no consensus; the band readings are used then.
const FEWEST_REMADE: usize = 8;

fn hypotheses(
    grid: &mut grid::Grid<'_>,
    readings: &[grid::GridReading],
    f0_hz: f64,
) -> Vec<Hypothesis> {
    if f0_hz > HARMONICS_ONLY_HZ {
        let lines = grid.lines(f0_hz);
        let remade: Vec<_> = readings
            .iter()
            .filter(|r| r.order % 2 == 0)
            .filter_map(|r| grid.remake(r, &lines))
            .collect();
        if remade.len() >= FEWEST_REMADE {
            return consensus::gather(&remade)
                .into_iter()
                .map(|(mut h, _)| {
                    h.harmonic_ln_hz = h.ln_hz;
                    h
                })
                .collect();
        }
    }
    let mut gathered = consensus::gather(readings);
    if f0_hz > SPARSE_HZ {
        let lines = grid.lines(f0_hz);
        for (hypothesis, members) in gathered.iter_mut().take(REMADE_HYPOTHESES) {
            let remade: Vec<_> = members
                .iter()
                .take(REMADE_READINGS)
                .filter_map(|&m| grid.remake(&readings[m], &lines))
                .collect();
            consensus::gather_harmonic(hypothesis, &remade);
        }
    }
    gathered
        .into_iter()
        .map(|(hypothesis, _)| hypothesis)
        .collect()
}
