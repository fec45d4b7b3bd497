//! Why bytes are no usable recording.

use thiserror::Error;

use super::{HIGHEST_RATE_HZ, LOWEST_RATE_HZ};

/// Why a recording could not be decoded. Positions are bytes from the start of the file.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
pub enum AudioError {
    /// The file does not begin as a WAV file does.
    #[error("not a WAV recording: it begins with {found}; expected `RIFF` and `WAVE`")]
    NotWav {
        /// The first bytes, readable.
        found: String,
    },
    /// A part of the file that must be there is not.
    #[error("damaged WAV: the file ends at byte {at} before any `{missing}` part; expected one")]
    MissingPart {
        /// Name of the part.
        missing: &'static str,
        /// Where the search ended.
        at: usize,
    },
    /// The description of the samples makes no sense.
    #[error("damaged WAV: at byte {at} {found}; expected {expected}")]
    Damaged {
        /// Where.
        at: usize,
        /// What stands there.
        found: String,
        /// What should.
        expected: &'static str,
    },
    /// Samples in a coding this program does not read.
    #[error("samples in {found}; expected 8, 16, 24 or 32-bit whole numbers or 32-bit floats")]
    UnknownCoding {
        /// The coding.
        found: String,
    },
    /// A rate outside the range in use.
    #[error("{found_hz} samples a second; expected {LOWEST_RATE_HZ} to {HIGHEST_RATE_HZ}")]
    RateOutOfRange {
        /// The rate in hertz.
        found_hz: u32,
    },
    /// A sample that is no number.
    #[error("sample {frame} of channel {channel} is not a number")]
    NotANumber {
        /// Its place, from 0.
        frame: usize,
        /// Its channel, from 1.
        channel: usize,
    },
    /// A channel the recording does not have.
    #[error("no channel {expected}; the recording has {found}")]
    NoSuchChannel {
        /// The one asked for.
        expected: u16,
        /// How many there are.
        found: u16,
    },
    /// No sample at all.
    #[error("no sound in it: the header is followed by no sample")]
    Empty,
    /// The resampler refused.
    #[error("could not be brought from {from_hz} to 16000 samples a second: {reason}")]
    Resampling {
        /// The stored rate.
        from_hz: u32,
        /// What the resampler said.
        reason: String,
    },
}

impl AudioError {
    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self {
            Self::NotWav { .. } | Self::UnknownCoding { .. } => {
                "save the recording as a WAV file with 16-bit samples"
            }
            Self::MissingPart { .. } | Self::Damaged { .. } | Self::Empty => {
                "copy the recording again from where it came; it may have been cut off"
            }
            Self::RateOutOfRange { .. } => {
                "was the rate written wrongly into the header? recordings below 8000 samples a \
                 second hold too little of a vowel"
            }
            Self::NotANumber { .. } => "save the recording again with 16-bit or 24-bit samples",
            Self::NoSuchChannel { .. } => "mend the `channel` column of the labels",
            Self::Resampling { .. } => "save the recording at 16000, 44100 or 48000",
        }
    }
}
