//! All spans of one speaker, read together, to measured tokens.

mod doubts;
mod error;
mod path;
mod reading;
mod size;
mod value;

pub use doubts::Doubt;
pub use reading::read_speaker;

use crate::formants::Unmeasured;
use crate::segments::VowelSpan;
use crate::vowel::Vowel;

/// The proportions of a vowel's duration at which every token's track is reported.
pub const PROPORTIONS: [f64; 9] = [0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9];

/// One vowel token: where it is and what was read there.
#[derive(Debug, Clone, PartialEq)]
pub struct Token {
    /// Where it is and what its label says.
    pub span: VowelSpan,
    /// The reading, or why there is none.
    pub reading: Result<Reading, Unmeasured>,
}

/// What was read in one token.
#[derive(Debug, Clone, PartialEq)]
pub struct Reading {
    /// The moment the single value stands for, in seconds from the start of the recording.
    pub at_s: f64,
    /// The single value of the token.
    pub value: FormantPoint,
    /// The track at [`PROPORTIONS`], in that order.
    pub track: Vec<TrackPoint>,
    /// What a person should know before trusting the value.
    pub doubts: Vec<Doubt>,
}

/// Formants at one moment; `None` where no value is believed.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct FormantPoint {
    /// Fundamental frequency in hertz; `None` where unvoiced.
    pub f0_hz: Option<f64>,
    /// F1 to F4 in hertz.
    pub formant_hz: [Option<f64>; 4],
    /// Bandwidths of F1 to F3 in hertz.
    pub bandwidth_hz: [Option<f64>; 3],
    /// Standard errors of F1 to F3 in hertz: two thirds of the true errors are inside.
    pub sd_hz: [Option<f64>; 3],
}

/// Formants at one proportion of the vowel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TrackPoint {
    /// Proportion of the vowel's duration, 0 to 1.
    pub proportion: f64,
    /// Seconds from the start of the recording.
    pub time_s: f64,
    /// What was read there.
    pub point: FormantPoint,
}

/// What later stages need of one vowel token, whether this program measured it or a table gives it.
#[derive(Debug, Clone, PartialEq)]
pub struct Observation {
    /// Name of the token, unique within its table.
    pub token: String,
    /// Who speaks.
    pub speaker: String,
    /// The vowel its label names, where it has one.
    pub vowel: Option<Vowel>,
    /// Duration in seconds, where known.
    pub duration_s: Option<f64>,
    /// Fundamental frequency in hertz at the single value.
    pub f0_hz: Option<f64>,
    /// F1 to F3 in hertz, the single value.
    pub formant_hz: [Option<f64>; 3],
    /// Standard errors of F1 to F3 in hertz, where known.
    pub sd_hz: [Option<f64>; 3],
    /// Formants along the token: proportion of the duration, then F1 to F3 in hertz; empty where
    /// only a single value is known.
    pub track: Vec<(f64, [Option<f64>; 3])>,
}

impl Observation {
    /// The observation a token gives; `None` where it could not be measured.
    pub fn of(token: &Token) -> Option<Self> {
        let reading = token.reading.as_ref().ok()?;
        let first_three = |point: &FormantPoint| {
            let [f1, f2, f3, _] = point.formant_hz;
            [f1, f2, f3]
        };
        Some(Self {
            token: token.span.token.clone(),
            speaker: token.span.speaker.clone(),
            vowel: token.span.vowel.clone(),
            duration_s: Some(token.span.duration_s()),
            f0_hz: reading.value.f0_hz,
            formant_hz: first_three(&reading.value),
            sd_hz: reading.value.sd_hz,
            track: reading
                .track
                .iter()
                .map(|t| (t.proportion, first_three(&t.point)))
                .collect(),
        })
    }
}
