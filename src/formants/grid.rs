//! The grid of analyses: one power spectrum per frame, linear prediction of many bands and orders.
//!
//! Every frame is transformed once. For each ceiling the band below it is predicted alone
//! (selective linear prediction, Makhoul 1975, Proc. IEEE 63, 561-580, section V-B), and
//! Levinson's recursion gives every order on the way to the highest; so forty readings of a frame
//! cost one Fourier transform, ten short recursions and forty polynomials.

use std::f64::consts::PI;
use std::sync::LazyLock;

use crate::audio::ANALYSIS_RATE_HZ;
use crate::signal::discrete::{self, Line};
use crate::signal::factors::Factors;
use crate::signal::follow::FactorFinder;
use crate::signal::harmonics;
use crate::signal::prediction::{BandAutocorrelation, levinson};
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

/// The knees of the spectral emphasis, in hertz: 6 dB per octave above, flat below; bands take the
/// two in turn, so that readings differ in this too.
///
/// Voiced sound falls by about 6 dB per octave at the lips, but only above the glottal flow's own
/// broad maximum near the first harmonics; emphasis that goes on falling below it tilts F1 of close
/// vowels upward. On `hvd-words`, with one band and order, the share of F1 errors over 10 % was
/// 2.9, 2.2, 2.1, 2.3, 3.1 % with the knee at 100, 200, 300, 400, 600 Hz (F2: 3.1, 3.1, 3.6, 3.9,
/// 5.1 %); with all of them a pair around 230 Hz missed 0.3 points less of F3 than 230 Hz alone.
const EMPHASIS_KNEES_HZ: [f64; 2] = [322.0, 164.0];

/// Resonances kept per reading.
pub(super) const RESONANCES: usize = 4;

/// Wider than this, in hertz, is a slope of the spectrum, not a resonance.
const WIDEST_HZ: f64 = 1400.0;

/// Resonances nearer than this to 0 Hz or to the ceiling are the band's edge, in hertz.
const EDGE_HZ: f64 = 60.0;

/// The first resonances of one frame as one analysis of the grid reads them.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct GridReading {
    /// Which band, as an index of [`CEILINGS_HZ`].
    pub(super) band: usize,
    /// Prediction order.
    pub(super) order: usize,
    /// Frequencies in hertz, rising; the fourth is NaN where the band holds only three.
    pub(super) frequency_hz: [f64; RESONANCES],
    /// Bandwidths in hertz.
    pub(super) bandwidth_hz: [f64; RESONANCES],
}

struct Tables {
    spectrum: PowerSpectrum,
    bands: Vec<BandAutocorrelation>,
    emphasis: [Vec<f32>; EMPHASIS_KNEES_HZ.len()],
}

/// Distance of the spectrum's bins in hertz.
const BIN_HZ: f64 = ANALYSIS_RATE_HZ / FFT_LENGTH as f64;

static TABLES: LazyLock<Tables> = LazyLock::new(|| {
    let frame = (FRAME_S * ANALYSIS_RATE_HZ).round() as usize;
    Tables {
        spectrum: PowerSpectrum::new(&window::hann(frame), FFT_LENGTH),
        bands: CEILINGS_HZ
            .iter()
            .map(|&ceiling| BandAutocorrelation::new(BIN_HZ, ceiling, HIGHEST_ORDER))
            .collect(),
        emphasis: EMPHASIS_KNEES_HZ.map(|knee| {
            (0..=FFT_LENGTH / 2)
                .map(|k| emphasis(k as f64 * BIN_HZ, knee) as f32)
                .collect()
        }),
    }
});

/// Power gain of the emphasis.
fn emphasis(hz: f64, knee_hz: f64) -> f64 {
    1.0 + (hz / knee_hz) * (hz / knee_hz)
}

/// Reads frames of one waveform through the whole grid.
#[derive(Debug)]
pub(super) struct Grid {
    spectrum: PowerSpectrum,
    /// Power of the frame read last.
    power: Vec<f32>,
    emphasised: [Vec<f32>; EMPHASIS_KNEES_HZ.len()],
    /// Lags of every band of the frame read last.
    lags: [[f64; HIGHEST_ORDER + 1]; CEILINGS_HZ.len()],
    /// The polynomials of every order of the frame read last, with their factors.
    rows: Vec<Row>,
    finder: FactorFinder,
}

/// The polynomials of one order in all bands.
#[derive(Debug)]
struct Row {
    order: usize,
    /// `order + 1` coefficients for each band, NaN where the band is degenerate or outside.
    polynomials: Vec<f64>,
    factors: Vec<Option<Factors>>,
}

impl Row {
    fn new(order: usize, bands: usize) -> Self {
        Self {
            order,
            polynomials: vec![f64::NAN; (order + 1) * bands],
            factors: vec![None; bands],
        }
    }
}

impl Grid {
    /// Makes a grid with its own working storage.
    pub(super) fn new() -> Self {
        Self {
            spectrum: TABLES.spectrum.clone(),
            power: Vec::new(),
            emphasised: Default::default(),
            lags: [[0.0; HIGHEST_ORDER + 1]; CEILINGS_HZ.len()],
            rows: (LOWEST_ORDER..=HIGHEST_ORDER)
                .map(|order| Row::new(order, CEILINGS_HZ.len()))
                .collect(),
            finder: FactorFinder::default(),
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
        self.power.clear();
        self.power
            .extend_from_slice(self.spectrum.at(samples, centre));
        for (emphasised, weights) in self.emphasised.iter_mut().zip(&TABLES.emphasis) {
            emphasised.clear();
            emphasised.extend(self.power.iter().zip(weights).map(|(p, w)| p * w));
        }
        for row in &mut self.rows {
            row.polynomials.fill(f64::NAN);
        }
        for (index, band) in TABLES.bands.iter().enumerate() {
            if band.ceiling_hz() > band_edge_hz {
                continue;
            }
            let lags = &mut self.lags[index];
            band.lags(&self.emphasised[index % EMPHASIS_KNEES_HZ.len()], lags);
            let rows = &mut self.rows;
            // A degenerate band (silence, a pure tone) simply adds no reading.
            let _ = levinson(lags, HIGHEST_ORDER, |order, a, _| {
                if order >= LOWEST_ORDER {
                    rows[order - LOWEST_ORDER].polynomials[a.len() * index..][..a.len()]
                        .copy_from_slice(a);
                }
            });
        }
        // From the factors of the frame before: most have moved little.
        for row in &mut self.rows {
            self.finder
                .follow(row.order, &row.polynomials, &mut row.factors);
        }
        for band in 0..CEILINGS_HZ.len() {
            for row in &self.rows {
                if let Some(reading) =
                    row.factors[band].and_then(|f| resonances(&f, row.order, band))
                {
                    out.push(reading);
                }
            }
        }
    }

    /// The harmonics of the frame read last.
    pub(super) fn lines(&self, f0_hz: f64) -> Vec<Line> {
        harmonics::lines(
            &self.power,
            BIN_HZ,
            f0_hz,
            CEILINGS_HZ[CEILINGS_HZ.len() - 1],
        )
    }

    /// One reading of the frame read last, made again from its harmonics alone by discrete all-pole
    /// modelling; `None` where they do not determine three resonances.
    pub(super) fn remake(&mut self, reading: &GridReading, lines: &[Line]) -> Option<GridReading> {
        let knee = EMPHASIS_KNEES_HZ[reading.band % EMPHASIS_KNEES_HZ.len()];
        let emphasised: Vec<Line> = lines
            .iter()
            .map(|l| Line {
                hz: l.hz,
                power: l.power * emphasis(l.hz, knee),
            })
            .collect();
        let mut a = [0.0; HIGHEST_ORDER + 1];
        levinson(&self.lags[reading.band], reading.order, |order, c, _| {
            a[..=order].copy_from_slice(c);
        })
        .ok()?;
        let a = &mut a[..=reading.order];
        discrete::fit(a, &emphasised, CEILINGS_HZ[reading.band]).ok()?;
        let mut factors = [self.rows[reading.order - LOWEST_ORDER].factors[reading.band]];
        self.finder.follow(reading.order, a, &mut factors);
        resonances(&factors[0]?, reading.order, reading.band)
    }
}

impl Default for Grid {
    fn default() -> Self {
        Self::new()
    }
}

/// The lowest resonances of a prediction polynomial of one band.
fn resonances(factors: &Factors, order: usize, band: usize) -> Option<GridReading> {
    let ceiling_hz = CEILINGS_HZ[band];
    let mut found = [(f64::NAN, f64::NAN); 16];
    let mut count = 0;
    for pair in factors.pairs() {
        let Some(angle) = pair.angle() else {
            continue;
        };
        let frequency_hz = angle * ceiling_hz / PI;
        let bandwidth_hz = pair.product.ln().abs() * ceiling_hz / PI;
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
        band,
        order,
        frequency_hz: [f64::NAN; RESONANCES],
        bandwidth_hz: [f64::NAN; RESONANCES],
    };
    for k in 0..count.min(RESONANCES) {
        (reading.frequency_hz[k], reading.bandwidth_hz[k]) = found[k];
    }
    Some(reading)
}
