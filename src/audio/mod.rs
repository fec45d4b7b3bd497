//! Bytes of a recording to a waveform: decoded, one channel, at the analysis rate.
//!
//! [`decode`] reads the bytes of a whole recording, [`Sound::waveform`] takes one channel out of it
//! and brings it to [`ANALYSIS_RATE_HZ`]. Time zero is the first sample of the recording before and
//! after; the resampler adds no delay.

mod error;
mod resample;
mod wav;

pub use error::AudioError;
pub use wav::decode;

/// The rate every waveform is analysed at, in hertz. Ceilings up to 8 kHz fit below half of it.
pub const ANALYSIS_RATE_HZ: f64 = 16_000.0;

/// The lowest rate a recording may be stored at, in hertz: that of a telephone channel, which still
/// leaves vowels recognisable (common practice).
pub const LOWEST_RATE_HZ: u32 = 8_000;

/// The highest rate a recording may be stored at, in hertz: twice the highest in use, so that a
/// damaged header is not taken for a rate.
pub const HIGHEST_RATE_HZ: u32 = 384_000;

/// One channel of sound at [`ANALYSIS_RATE_HZ`].
#[derive(Debug, Clone, PartialEq)]
pub struct Waveform {
    /// Samples, full scale at ±1.
    pub samples: Vec<f32>,
    /// Upper edge of what the recording can hold, in hertz: half the rate it was stored at, and
    /// at most half the analysis rate.
    pub band_edge_hz: f64,
}

impl Waveform {
    /// Duration in seconds.
    pub fn duration_s(&self) -> f64 {
        self.samples.len() as f64 / ANALYSIS_RATE_HZ
    }
}

/// A decoded recording: every channel, at the rate it was stored at.
#[derive(Debug, Clone, PartialEq)]
pub struct Sound {
    /// Rate of the samples in hertz.
    pub rate_hz: u32,
    /// Samples of each channel, full scale at ±1; all as long.
    pub channels: Vec<Vec<f32>>,
    /// Set where the file ends before its header says.
    pub cut_short: Option<CutShort>,
}

/// A file that ends before its header says it does.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct CutShort {
    /// Samples per channel that are there.
    pub found_frames: u64,
    /// Samples per channel the header announces.
    pub expected_frames: u64,
}

/// Which channel of a recording is meant.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Channel {
    /// The channel of this number, from 1.
    Numbered(u16),
    /// The channel with most energy; the first of several with as much. For a single channel this
    /// is that channel, for one microphone recorded on two tracks the track it is on. Mixing would
    /// comb-filter two microphones at different distances.
    Loudest,
}

impl Sound {
    /// Number of the channel meant, from 1.
    ///
    /// # Errors
    /// [`AudioError::NoSuchChannel`].
    pub fn resolve(&self, channel: Channel) -> Result<u16, AudioError> {
        let count = u16::try_from(self.channels.len()).unwrap_or(u16::MAX);
        match channel {
            Channel::Numbered(number) if (1..=count).contains(&number) => Ok(number),
            Channel::Numbered(number) => Err(AudioError::NoSuchChannel {
                expected: number,
                found: count,
            }),
            Channel::Loudest => {
                let mut loudest = (1, -1.0);
                for (number, samples) in (1..=count).zip(&self.channels) {
                    let energy: f64 = samples.iter().map(|&x| f64::from(x) * f64::from(x)).sum();
                    if energy > loudest.1 {
                        loudest = (number, energy);
                    }
                }
                Ok(loudest.0)
            }
        }
    }

    /// One channel at the analysis rate.
    ///
    /// # Errors
    /// [`AudioError::NoSuchChannel`], or a rate the resampler refuses.
    pub fn waveform(&self, channel: Channel) -> Result<Waveform, AudioError> {
        let number = self.resolve(channel)?;
        let samples = &self.channels[usize::from(number) - 1];
        Ok(Waveform {
            samples: resample::to_analysis_rate(samples, self.rate_hz)?,
            band_edge_hz: (f64::from(self.rate_hz) / 2.0).min(ANALYSIS_RATE_HZ / 2.0),
        })
    }

    /// Duration in seconds.
    pub fn duration_s(&self) -> f64 {
        let frames = self.channels.first().map_or(0, Vec::len);
        frames as f64 / f64::from(self.rate_hz)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn stereo() -> Sound {
        Sound {
            rate_hz: 16_000,
            channels: vec![vec![0.1, -0.1, 0.1], vec![0.5, 0.0, -0.5]],
            cut_short: None,
        }
    }

    #[test]
    fn the_channel_asked_for_is_taken() {
        let first = stereo().waveform(Channel::Numbered(1)).expect("there");
        assert_eq!(first.samples, [0.1, -0.1, 0.1]);
        assert_eq!(stereo().resolve(Channel::Loudest), Ok(2));
        assert_eq!(
            stereo().waveform(Channel::Numbered(3)),
            Err(AudioError::NoSuchChannel {
                expected: 3,
                found: 2
            })
        );
        assert!(stereo().waveform(Channel::Numbered(0)).is_err());
    }
}
