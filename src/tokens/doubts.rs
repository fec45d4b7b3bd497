//! Reasons to look at a token before trusting it.

use super::FormantPoint;
use crate::formants::{Channel, Conditions};

/// A reason to look at a token before trusting it.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Doubt {
    /// The error bar of the formant of this number (1 to 3) is wide for its value.
    Uncertain(u8),
    /// F0 stands above 0.8 of F1: the first harmonic and the first formant cannot be told apart.
    HighPitch,
    /// F0 over 300 Hz: the harmonics are too far apart to show every formant.
    SparseHarmonics,
    /// Fewer than half of the points are voiced.
    Unvoiced,
    /// The pitch is below 70 Hz or jumps: creak.
    Creak,
    /// Shorter than 50 ms.
    Short,
    /// The recording came through a telephone: F1 below 400 Hz is read at the channel's edge.
    TelephoneBand,
    /// A steady tone of this frequency, in whole hertz, near the formant of this number.
    SteadyTone(u8, u16),
    /// Less than 10 dB of signal above the noise floor.
    Noise,
    /// The recording is clipped.
    Clipped,
}

impl Doubt {
    /// The doubt as the tables write it.
    pub fn text(self) -> String {
        match self {
            Self::Uncertain(number) => format!("F{number} uncertain"),
            Self::HighPitch => "F0 near F1".to_owned(),
            Self::SparseHarmonics => "F0 over 300 Hz".to_owned(),
            Self::Unvoiced => "mostly unvoiced".to_owned(),
            Self::Creak => "creak".to_owned(),
            Self::Short => "under 50 ms".to_owned(),
            Self::TelephoneBand => "telephone band".to_owned(),
            Self::SteadyTone(number, hz) => format!("steady tone at {hz} Hz near F{number}"),
            Self::Noise => "noise".to_owned(),
            Self::Clipped => "clipped".to_owned(),
        }
    }
}

/// An error bar wider than this share of the value is a doubt, for F1, F2, F3.
///
/// A tenth is the gross error of the field's comparisons; the shares are those at which about a
/// tenth of the tokens of `hvd-words` carry one of the three doubts.
const WIDE: [f64; 3] = [0.075, 0.05, 0.055];

/// Points whose bar is wide before it is a doubt.
const FEWEST_WIDE: usize = 2;

/// F0 above this share of F1 is a doubt (common practice: the first harmonic is then all that shows
/// of F1).
const HIGH_PITCH: f64 = 0.8;
const SPARSE_HZ: f64 = 300.0;
/// Modal voices stay above this, in hertz (common practice).
const CREAK_HZ: f64 = 70.0;
const SHORT_S: f64 = 0.050;
const TELEPHONE_F1_HZ: f64 = 400.0;
/// A tone nearer than this to a formant may have moved it, in hertz: two bandwidths.
const TONE_NEAR_HZ: f64 = 150.0;
const NOISE_DB: f64 = 10.0;
const CLIPPED_SHARE: f64 = 0.001;

/// All doubts about a token, in a fixed order.
///
/// `points` are its analysis points, those that are reported among them; `value` is the single one.
pub(super) fn about(
    conditions: &Conditions,
    duration_s: f64,
    points: &[FormantPoint],
    value: &FormantPoint,
) -> Vec<Doubt> {
    let mut doubts = Vec::new();
    let inner = &points[INNER..points.len() - INNER];
    for k in 0..3 {
        let wide = |p: &FormantPoint| match (p.sd_hz[k], p.formant_hz[k]) {
            (Some(sd), Some(hz)) => sd > WIDE[k] * hz,
            _ => false,
        };
        let count = inner.iter().filter(|p| wide(p)).count();
        if count >= FEWEST_WIDE {
            doubts.push(Doubt::Uncertain(k as u8 + 1));
        }
    }
    if let (Some(f0), Some(f1)) = (value.f0_hz, value.formant_hz[0])
        && f0 > HIGH_PITCH * f1
    {
        doubts.push(Doubt::HighPitch);
    }
    if value.f0_hz.is_some_and(|f0| f0 > SPARSE_HZ) {
        doubts.push(Doubt::SparseHarmonics);
    }
    let voiced: Vec<f64> = points.iter().filter_map(|p| p.f0_hz).collect();
    if 2 * voiced.len() < points.len() {
        doubts.push(Doubt::Unvoiced);
    }
    if 3 * voiced.iter().filter(|f0| **f0 < CREAK_HZ).count() > points.len() {
        doubts.push(Doubt::Creak);
    }
    if duration_s < SHORT_S {
        doubts.push(Doubt::Short);
    }
    if conditions.channel == Channel::Telephone
        && value.formant_hz[0].is_none_or(|f1| f1 < TELEPHONE_F1_HZ)
    {
        doubts.push(Doubt::TelephoneBand);
    }
    for (k, hz) in value.formant_hz.iter().take(3).enumerate() {
        let near = |tone: &&f64| hz.is_some_and(|hz| (hz - **tone).abs() < TONE_NEAR_HZ);
        if let Some(tone) = conditions.tones_hz.iter().find(near) {
            doubts.push(Doubt::SteadyTone(k as u8 + 1, tone.round() as u16));
        }
    }
    if conditions.snr_db.is_some_and(|snr| snr < NOISE_DB) {
        doubts.push(Doubt::Noise);
    }
    if conditions.clipped_share > CLIPPED_SHARE {
        doubts.push(Doubt::Clipped);
    }
    doubts
}

/// Points left out at either end: transitions are wide in every token.
const INNER: usize = 2;
