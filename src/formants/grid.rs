//! The grid of analyses: one power spectrum per frame, linear prediction of many bands and orders.
//!
//! Every frame is transformed once. For each ceiling the band below it is predicted alone
//! (selective linear prediction, Makhoul 1975, Proc. IEEE 63, 561-580, section V-B), and
//! Levinson's recursion gives every order on the way to the highest; so forty readings of a frame
//! cost one Fourier transform, ten short recursions and forty polynomials.

use std::f64::consts::PI;
use std::sync::LazyLock;

use crate::audio::ANALYSIS_RATE_HZ;
use crate::signal::prediction::{BandAutocorrelation, levinson};
use crate::signal::roots::RootFinder;
use crate::signal::spectrum::PowerSpectrum;
use crate::signal::window;

/// Upper edges of the predicted bands, in hertz: from the three-formant band of a large man to
/// the five-formant band of a small child, about 8 % apart.
pub(super) const CEILINGS_HZ: [f64; 10] = [
    3500.0, 3900.0, 4300.0, 4700.0, 5100.0, 5500.0, 5900.0, 6400.0, 7000.0, 7600.0,
];

/// Prediction orders: from two resonances with a sloping rest to seven.
const LOWEST_ORDER: usize = 8;
/// See [`LOWEST_ORDER`].
const HIGHEST_ORDER: usize = 14;

/// Readings of one frame.
pub(super) const READINGS: usize = CEILINGS_HZ.len() * (HIGHEST_ORDER - LOWEST_ORDER + 1);

/// Frame length in seconds, Hann-windowed, so effectively half as long: two periods of a low
/// voice. 40 and 50 ms were equal on `hvd-words`, 25 ms worse by a tenth.
pub(super) const FRAME_S: f64 = 0.050;

/// Points of the Fourier transform.
const FFT_LENGTH: usize = 1024;

/// The knee of the spectral emphasis, in hertz: 6 dB per octave above, flat below.
///
/// Voiced sound falls by about 6 dB per octave at the lips, but only above the glottal flow's own
/// broad maximum near the first harmonics; emphasis that goes on falling below it tilts F1 of close
/// vowels upward. On `hvd-words` the share of F1 errors over 10 % was 2.9, 2.2, 2.1, 2.3, 3.1 %
/// with knees at 100, 200, 300, 400, 600 Hz (F2: 3.1, 3.1, 3.6, 3.9, 5.1 %).
const EMPHASIS_KNEE_HZ: f64 = 230.0;

/// Resonances kept per reading.
pub(super) const RESONANCES: usize = 4;

/// Wider than this, in hertz, is a slope of the spectrum, not a resonance.
const WIDEST_HZ: f64 = 1000.0;

/// Resonances nearer than this to 0 Hz or to the ceiling are the band's edge, in hertz.
const EDGE_HZ: f64 = 60.0;

/// The first resonances of one frame as one analysis of the grid reads them.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct GridReading {
    /// Frequencies in hertz, rising; the fourth is NaN where the band holds only three.
    pub(super) frequency_hz: [f64; RESONANCES],
    /// Bandwidths in hertz.
    pub(super) bandwidth_hz: [f64; RESONANCES],
}

struct Tables {
    spectrum: PowerSpectrum,
    bands: Vec<BandAutocorrelation>,
    emphasis: Vec<f32>,
}

static TABLES: LazyLock<Tables> = LazyLock::new(|| {
    let bin_hz = ANALYSIS_RATE_HZ / FFT_LENGTH as f64;
    let frame = (FRAME_S * ANALYSIS_RATE_HZ).round() as usize;
    Tables {
        spectrum: PowerSpectrum::new(&window::hann(frame), FFT_LENGTH),
        bands: CEILINGS_HZ
            .iter()
            .map(|&ceiling| BandAutocorrelation::new(bin_hz, ceiling, HIGHEST_ORDER))
            .collect(),
        emphasis: (0..=FFT_LENGTH / 2)
            .map(|k| {
                let f = k as f64 * bin_hz / EMPHASIS_KNEE_HZ;
                (1.0 + f * f) as f32
            })
            .collect(),
    }
});

/// Reads frames of one waveform through the whole grid.
#[derive(Debug)]
pub(super) struct Grid {
    spectrum: PowerSpectrum,
    emphasised: Vec<f32>,
    roots: RootFinder,
}

impl Grid {
    /// Makes a grid with its own working storage.
    pub(super) fn new() -> Self {
        Self {
            spectrum: TABLES.spectrum.clone(),
            emphasised: Vec::new(),
            roots: RootFinder::default(),
        }
    }

    /// Adds to `out` every reading with at least three resonances of the frame centred on sample
    /// `centre`, from bands that end at or below `band_edge_hz`.
    ///
    /// *Shape*: `samples` at the analysis rate; `out` gets at most [`READINGS`] readings.
    pub(super) fn read(
        &mut self,
        samples: &[f32],
        centre: usize,
        band_edge_hz: f64,
        out: &mut Vec<GridReading>,
    ) {
        let power = self.spectrum.at(samples, centre);
        self.emphasised.clear();
        self.emphasised
            .extend(power.iter().zip(&TABLES.emphasis).map(|(p, w)| p * w));
        for band in &TABLES.bands {
            if band.ceiling_hz() > band_edge_hz {
                continue;
            }
            let mut lags = [0.0; HIGHEST_ORDER + 1];
            band.lags(&self.emphasised, &mut lags);
            let roots = &mut self.roots;
            // A degenerate band (silence, a pure tone) simply adds no reading.
            let _ = levinson(&lags, HIGHEST_ORDER, |order, a, _| {
                if order >= LOWEST_ORDER
                    && let Some(reading) = resonances(a, band.ceiling_hz(), roots)
                {
                    out.push(reading);
                }
            });
        }
    }
}

impl Default for Grid {
    fn default() -> Self {
        Self::new()
    }
}

/// The lowest resonances of a prediction polynomial of the band below `ceiling_hz`.
fn resonances(a: &[f64], ceiling_hz: f64, roots: &mut RootFinder) -> Option<GridReading> {
    let mut found = [(f64::NAN, f64::NAN); 16];
    let mut count = 0;
    for z in roots.upper_half(a).ok()? {
        if z.im <= 0.0 {
            continue;
        }
        let frequency_hz = z.im.atan2(z.re) * ceiling_hz / PI;
        let bandwidth_hz = -(z.re * z.re + z.im * z.im).ln() * ceiling_hz / PI;
        if bandwidth_hz < WIDEST_HZ && frequency_hz > EDGE_HZ && frequency_hz < ceiling_hz - EDGE_HZ
        {
            found[count] = (frequency_hz, bandwidth_hz);
            count += 1;
        }
    }
    if count < 3 {
        return None;
    }
    found[..count].sort_by(|x, y| x.0.total_cmp(&y.0));
    let mut reading = GridReading {
        frequency_hz: [f64::NAN; RESONANCES],
        bandwidth_hz: [f64::NAN; RESONANCES],
    };
    for k in 0..count.min(RESONANCES) {
        (reading.frequency_hz[k], reading.bandwidth_hz[k]) = found[k];
    }
    Some(reading)
}
