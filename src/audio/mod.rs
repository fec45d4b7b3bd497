//! Bytes of a recording to a waveform: decoded, one channel, at the analysis rate.

/// The rate every waveform is analysed at, in hertz. Ceilings up to 8 kHz fit below half of it.
pub const ANALYSIS_RATE_HZ: f64 = 16_000.0;

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
