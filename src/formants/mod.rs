//! Waveform and span to every believable reading of the resonances.
//!
//! [`analyse`] weighs many hypotheses for one span; choosing between them takes all tokens of a
//! speaker and is the work of [`crate::tokens`].

use crate::audio::Waveform;
use crate::segments::VowelSpan;

/// All that was found in one span before the speaker is known.
#[derive(Debug, Clone)]
pub struct SpanAnalysis {}

/// Why a span could not be analysed at all.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Unmeasured {
    /// Shorter than the shortest analysis frame.
    TooShort,
    /// No energy.
    Silent,
    /// No voicing found anywhere in the span.
    Unvoiced,
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
            Self::Unvoiced => "unvoiced",
            Self::OutsideRecording => "outside the recording",
            Self::NoRecording => "the recording could not be read",
            Self::NoResonances => "no resonances",
        }
    }
}

/// Analyses one span of a recording.
///
/// # Errors
/// [`Unmeasured`] where the span cannot be analysed.
pub fn analyse(_waveform: &Waveform, _span: &VowelSpan) -> Result<SpanAnalysis, Unmeasured> {
    Err(Unmeasured::NoResonances)
}
