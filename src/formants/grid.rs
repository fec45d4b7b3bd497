//! The grid of analyses: one power spectrum per frame, linear prediction of many bands and orders.
//!
//! Every frame is transformed once. For each ceiling the band below it is predicted alone
//! (selective linear prediction, Makhoul 1975, Proc. IEEE 63, 561-580, section V-B), and
//! Levinson's recursion gives every order on the way to the highest; so forty readings of a frame
//! cost one Fourier transform, ten short recursions and forty polynomials.

use std::f64::consts::PI;
use std::sync::LazyLock;

use super::conditions::Conditions;
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
const CEILINGS_HZ: [f64; 10] = [
    3500.0, 3900.0, 4300.0, 4700.0, 5100.0, 5500.0, 5900.0, 6400.0, 7000.0, 7600.0,
];

/// The same behind a channel that ends below [`NARROW_HZ`]: fewer resonances fit.
const NARROW_CEILINGS_HZ: [f64; 7] = [2700.0, 2900.0, 3050.0, 3200.0, 3400.0, 3650.0, 3900.0];

/// Channels that end below this are read with the narrow bands, in hertz.
const NARROW_HZ: f64 = 4600.0;

/// Prediction orders: from two resonances with a sloping rest to seven. Without 8 the shares over
/// 10 % of F1, F2, F3 on `hvd-words` rose from 2.0, 1.7, 1.2 to 2.1, 2.0, 1.5; without 14 to 2.1,
/// 1.8, 1.3; with 7 they were 2.1, 1.8, 1.4, with 15 2.0, 1.8, 1.3.
const ORDERS: [usize; 2] = [8, 14];
/// Orders of the narrow bands: two coefficients per kilohertz, and two more or less.
const NARROW_ORDERS: [usize; 2] = [5, 10];

/// Where a narrow band holds only two resonances, the third is taken to lie outside, here times the
/// band's ceiling, and as wide as this. It is not reported.
const OUTSIDE: f64 = 1.08;
const BAND_EDGE_WIDTH_HZ: f64 = 300.0;

/// The highest order of either.
const HIGHEST_ORDER: usize = ORDERS[1];

/// Readings of one frame.
pub(super) const READINGS: usize = CEILINGS_HZ.len() * (ORDERS[1] - ORDERS[0] + 1);

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
    /// Which band, as an index of the channel's bands.
    pub(super) band: usize,
    /// Prediction order.
    pub(super) order: usize,
    /// Frequencies in hertz, rising; the fourth is NaN where the band holds only three.
    pub(super) frequency_hz: [f64; RESONANCES],
    /// Bandwidths in hertz.
    pub(super) bandwidth_hz: [f64; RESONANCES],
}

/// Distance of the spectrum's bins in hertz.
pub(super) const BIN_HZ: f64 = ANALYSIS_RATE_HZ / FFT_LENGTH as f64;

/// Bins of the spectrum.
pub(super) const BINS: usize = FFT_LENGTH / 2 + 1;

/// The bands of one kind of channel and the orders they are read with.
#[derive(Debug)]
struct Bands {
    ceilings_hz: &'static [f64],
    autocorrelations: Vec<BandAutocorrelation>,
    orders: [usize; 2],
}

impl Bands {
    fn new(ceilings_hz: &'static [f64], orders: [usize; 2]) -> Self {
        let autocorrelations = ceilings_hz
            .iter()
            .map(|&ceiling| BandAutocorrelation::new(BIN_HZ, ceiling, HIGHEST_ORDER))
            .collect();
        Self {
            ceilings_hz,
            autocorrelations,
            orders,
        }
    }
}

static WIDE: LazyLock<Bands> = LazyLock::new(|| Bands::new(&CEILINGS_HZ, ORDERS));
static NARROW: LazyLock<Bands> = LazyLock::new(|| Bands::new(&NARROW_CEILINGS_HZ, NARROW_ORDERS));

static SPECTRUM: LazyLock<PowerSpectrum> = LazyLock::new(|| {
    let frame = (FRAME_S * ANALYSIS_RATE_HZ).round() as usize;
    PowerSpectrum::new(&window::hann(frame), FFT_LENGTH)
});

static EMPHASIS: LazyLock<[Vec<f32>; EMPHASIS_KNEES_HZ.len()]> = LazyLock::new(|| {
    EMPHASIS_KNEES_HZ.map(|knee| {
        (0..BINS)
            .map(|k| emphasis(k as f64 * BIN_HZ, knee) as f32)
            .collect()
    })
});

/// Power spectra of the frames of the analysis.
#[derive(Debug)]
pub(super) struct Spectrograph(PowerSpectrum);

impl Spectrograph {
    /// Makes one with its own working storage.
    pub(super) fn new() -> Self {
        Self(SPECTRUM.clone())
    }

    /// Samples in a frame.
    pub(super) fn frame_length(&self) -> usize {
        self.0.frame_length()
    }

    /// The power spectrum of the frame centred on sample `centre`.
    pub(super) fn power(&mut self, samples: &[f32], centre: usize) -> &[f32] {
        self.0.at(samples, centre)
    }
}

/// Power gain of the emphasis.
fn emphasis(hz: f64, knee_hz: f64) -> f64 {
    1.0 + (hz / knee_hz) * (hz / knee_hz)
}

/// Reads frames of one waveform through the whole grid.
#[derive(Debug)]
pub(super) struct Grid<'c> {
    conditions: &'c Conditions,
    bands: &'static Bands,
    spectrograph: Spectrograph,
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

impl<'c> Grid<'c> {
    /// Makes a grid for one recording with its own working storage.
    pub(super) fn new(conditions: &'c Conditions) -> Self {
        let narrow = conditions.upper_edge_hz < NARROW_HZ;
        let bands: &Bands = if narrow { &NARROW } else { &WIDE };
        Self {
            conditions,
            bands,
            spectrograph: Spectrograph::new(),
            power: Vec::new(),
            emphasised: Default::default(),
            lags: [[0.0; HIGHEST_ORDER + 1]; CEILINGS_HZ.len()],
            rows: (bands.orders[0]..=bands.orders[1])
                .map(|order| Row::new(order, bands.ceilings_hz.len()))
                .collect(),
            finder: FactorFinder::default(),
        }
    }

    /// Adds to `out` every reading with at least three resonances of the frame centred on sample
    /// `centre`, from bands inside the recording's channel.
    ///
    /// *Shape*: `samples` at the analysis rate; `out` gets at most [`READINGS`] readings.
    pub(super) fn read(&mut self, samples: &[f32], centre: usize, out: &mut Vec<GridReading>) {
        self.power.clear();
        self.power
            .extend_from_slice(self.spectrograph.power(samples, centre));
        self.conditions.clean(&mut self.power);
        for (emphasised, weights) in self.emphasised.iter_mut().zip(EMPHASIS.iter()) {
            emphasised.clear();
            emphasised.extend(self.power.iter().zip(weights).map(|(p, w)| p * w));
        }
        for row in &mut self.rows {
            row.polynomials.fill(f64::NAN);
        }
        let [lowest, highest] = self.bands.orders;
        for (index, band) in self.bands.autocorrelations.iter().enumerate() {
            if band.ceiling_hz() > self.conditions.upper_edge_hz {
                continue;
            }
            let lags = &mut self.lags[index];
            band.lags(&self.emphasised[index % EMPHASIS_KNEES_HZ.len()], lags);
            let rows = &mut self.rows;
            // A degenerate band (silence, a pure tone) simply adds no reading.
            let _ = levinson(lags, highest, |order, a, _| {
                if order >= lowest {
                    rows[order - lowest].polynomials[a.len() * index..][..a.len()]
                        .copy_from_slice(a);
                }
            });
        }
        // From the factors of the frame before: most have moved little.
        for row in &mut self.rows {
            self.finder
                .follow(row.order, &row.polynomials, &mut row.factors);
        }
        for (band, &ceiling_hz) in self.bands.ceilings_hz.iter().enumerate() {
            for row in &self.rows {
                if let Some(reading) =
                    row.factors[band].and_then(|f| resonances(&f, row.order, band, ceiling_hz))
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
            self.bands.ceilings_hz[self.bands.ceilings_hz.len() - 1],
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
        let ceiling_hz = self.bands.ceilings_hz[reading.band];
        discrete::fit(a, &emphasised, ceiling_hz).ok()?;
        let row = &self.rows[reading.order - self.bands.orders[0]];
        let mut factors = [row.factors[reading.band]];
        self.finder.follow(reading.order, a, &mut factors);
        resonances(&factors[0]?, reading.order, reading.band, ceiling_hz)
    }
}

/// The lowest resonances of a prediction polynomial of one band.
fn resonances(
    factors: &Factors,
    order: usize,
    band: usize,
    ceiling_hz: f64,
) -> Option<GridReading> {
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
    if count == 2 && ceiling_hz < NARROW_HZ {
        found[2] = (OUTSIDE * ceiling_hz, BAND_EDGE_WIDTH_HZ);
        count = 3;
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
