//! What a fit leaves behind: the rule that takes one speaker's values to normalized ones.

use crate::tokens::Observation;

use super::auditory;

/// F0 and F1 to F3 at one moment, in hertz.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Values {
    /// Fundamental frequency.
    pub f0_hz: Option<f64>,
    /// F1 to F3.
    pub formant_hz: [Option<f64>; 3],
}

impl Values {
    /// The single value of an observation.
    pub fn of(observation: &Observation) -> Self {
        Self {
            f0_hz: observation.f0_hz,
            formant_hz: observation.formant_hz,
        }
    }
}

/// A scale of frequency that is the same for every speaker.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum AuditoryScale {
    /// Hertz, unchanged.
    Hertz,
    /// Natural logarithm of hertz.
    Ln,
    /// Critical-band rate.
    Bark,
    /// Number of equivalent rectangular bandwidths.
    ErbRate,
    /// Pitch.
    Mel,
}

/// The rule that takes one speaker's hertz to normalized values.
#[derive(Debug, Clone, PartialEq)]
pub enum SpeakerScale {
    /// `(F - centre) / width`, per formant.
    Affine {
        /// In hertz; `None` where the formant is outside the method or was never measured.
        centre_hz: [Option<f64>; 3],
        /// Hertz per unit.
        width_hz: [Option<f64>; 3],
    },
    /// `ln F - offset`, per formant.
    Log {
        /// In ln hertz.
        offset: [Option<f64>; 3],
    },
    /// The same for every speaker.
    Auditory(AuditoryScale),
    /// Differences of neighbouring critical-band rates, F0 to F3.
    BarkDifferences,
    /// Logarithms (base 10) of `F1 / reference`, `F2 / F1` and `F3 / F2`.
    Ratios {
        /// The speaker's reference, in hertz.
        reference_hz: f64,
    },
}

impl SpeakerScale {
    /// Normalizes the formants of one moment.
    ///
    /// *Shape and units*: three values for F1 to F3 in the unit of the method; `None` where a value
    /// that enters is missing.
    pub fn apply(&self, values: &Values) -> [Option<f64>; 3] {
        match self {
            Self::BarkDifferences => auditory::bark_differences(values),
            Self::Ratios { reference_hz } => auditory::ratios(values, *reference_hz),
            _ => [0, 1, 2].map(|n| values.formant_hz[n].and_then(|hz| self.apply_formant(n, hz))),
        }
    }

    /// Normalizes one value of one formant (`index` 0 for F1); `None` where the method needs other
    /// values of the same moment too, or has no place for this formant.
    pub fn apply_formant(&self, index: usize, hz: f64) -> Option<f64> {
        match self {
            Self::Affine {
                centre_hz,
                width_hz,
            } => Some((hz - centre_hz[index]?) / width_hz[index]?),
            Self::Log { offset } => Some(hz.ln() - offset[index]?),
            Self::Auditory(scale) => Some(scale.of_hz(hz)),
            Self::BarkDifferences | Self::Ratios { .. } => None,
        }
    }

    /// The hertz value of one formant that this scale would take to `value`; the inverse of
    /// [`Self::apply_formant`].
    pub fn invert_formant(&self, index: usize, value: f64) -> Option<f64> {
        match self {
            Self::Affine {
                centre_hz,
                width_hz,
            } => Some(value * width_hz[index]? + centre_hz[index]?),
            Self::Log { offset } => Some((value + offset[index]?).exp()),
            Self::Auditory(scale) => Some(scale.to_hz(value)),
            Self::BarkDifferences | Self::Ratios { .. } => None,
        }
    }

    /// Standard errors of the normalized values, to first order from those of the hertz values.
    ///
    /// The error of the speaker's scale itself and of F0 is not in it, and errors of neighbouring
    /// formants are taken as independent.
    pub fn apply_sd(&self, values: &Values, sd_hz: &[Option<f64>; 3]) -> [Option<f64>; 3] {
        let base = self.apply(values);
        let mut variance = [Some(0.0), Some(0.0), Some(0.0)];
        for formant in 0..3 {
            let (Some(hz), Some(sd)) = (values.formant_hz[formant], sd_hz[formant]) else {
                // Unknown error of a formant: every output that depends on it is unknown.
                for (n, total) in variance.iter_mut().enumerate() {
                    if self.depends(n, formant) {
                        *total = None;
                    }
                }
                continue;
            };
            let step = 1e-4 * hz;
            let mut moved = *values;
            moved.formant_hz[formant] = Some(hz + step);
            let after = self.apply(&moved);
            for n in 0..3 {
                let (Some(a), Some(b), Some(total)) = (after[n], base[n], variance[n]) else {
                    variance[n] = None;
                    continue;
                };
                let slope = (a - b) / step;
                variance[n] = Some(total + (slope * sd).powi(2));
            }
        }
        variance.map(|v| v.map(f64::sqrt))
    }

    /// Whether normalized value `output` depends on formant `input` (both 0 for the first).
    fn depends(&self, output: usize, input: usize) -> bool {
        match self {
            Self::BarkDifferences | Self::Ratios { .. } => output == input || output == input + 1,
            _ => output == input,
        }
    }

    /// The scale in the middle of several of one kind, as a reference at which normalized values can
    /// be shown in hertz; `None` where there is none or the kinds differ.
    pub fn middle<'a>(scales: impl IntoIterator<Item = &'a Self>) -> Option<Self> {
        let scales: Vec<&Self> = scales.into_iter().collect();
        let mean = |pick: &dyn Fn(&Self) -> Option<[Option<f64>; 3]>| -> Option<[Option<f64>; 3]> {
            let all: Vec<[Option<f64>; 3]> =
                scales.iter().map(|s| pick(s)).collect::<Option<_>>()?;
            Some([0, 1, 2].map(|n| {
                let known: Vec<f64> = all.iter().filter_map(|v| v[n]).collect();
                (!known.is_empty()).then(|| known.iter().sum::<f64>() / known.len() as f64)
            }))
        };
        match scales.first()? {
            Self::Affine { .. } => Some(Self::Affine {
                centre_hz: mean(&|s| match s {
                    Self::Affine { centre_hz, .. } => Some(*centre_hz),
                    _ => None,
                })?,
                width_hz: mean(&|s| match s {
                    Self::Affine { width_hz, .. } => Some(*width_hz),
                    _ => None,
                })?,
            }),
            Self::Log { .. } => Some(Self::Log {
                offset: mean(&|s| match s {
                    Self::Log { offset } => Some(*offset),
                    _ => None,
                })?,
            }),
            first => scales.iter().all(|s| s == first).then(|| (*first).clone()),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn standard_errors_follow_the_slope() {
        let values = Values {
            f0_hz: Some(120.0),
            formant_hz: [Some(500.0), Some(1500.0), None],
        };
        let sd_hz = [Some(10.0), Some(30.0), None];
        let affine = SpeakerScale::Affine {
            centre_hz: [Some(400.0), Some(1400.0), Some(2500.0)],
            width_hz: [Some(100.0), Some(300.0), Some(200.0)],
        };
        let sd = affine.apply_sd(&values, &sd_hz);
        assert!((sd[0].unwrap() - 0.1).abs() < 1e-6);
        assert!((sd[1].unwrap() - 0.1).abs() < 1e-6);
        assert_eq!(sd[2], None);
        // ln: sd / F. The ratio F2/F1 carries both, in quadrature, divided by ln 10.
        let log = SpeakerScale::Auditory(AuditoryScale::Ln).apply_sd(&values, &sd_hz);
        assert!((log[0].unwrap() - 0.02).abs() < 1e-5);
        let ratio = SpeakerScale::Ratios {
            reference_hz: 150.0,
        }
        .apply_sd(&values, &sd_hz);
        let expected = 0.02 * 2f64.sqrt() / 10f64.ln();
        assert!((ratio[1].unwrap() - expected).abs() < 1e-5);
        assert_eq!(ratio[2], None);
    }

    #[test]
    fn inverse_gives_the_hertz_back() {
        let scales = [
            SpeakerScale::Affine {
                centre_hz: [Some(400.0); 3],
                width_hz: [Some(123.0); 3],
            },
            SpeakerScale::Log {
                offset: [Some(7.0); 3],
            },
            SpeakerScale::Auditory(AuditoryScale::Bark),
            SpeakerScale::Auditory(AuditoryScale::ErbRate),
            SpeakerScale::Auditory(AuditoryScale::Mel),
        ];
        for scale in scales {
            for hz in [120.0, 650.0, 2400.0, 7900.0] {
                let there = scale.apply_formant(0, hz).unwrap();
                let back = scale.invert_formant(0, there).unwrap();
                assert!((back - hz).abs() < 1e-6, "{scale:?} {hz}: {back}");
            }
        }
    }

    #[test]
    fn the_middle_of_two_scales_lies_between() {
        let at = |c: f64| SpeakerScale::Log {
            offset: [Some(c), Some(c), None],
        };
        assert_eq!(SpeakerScale::middle([&at(6.0), &at(7.0)]), Some(at(6.5)));
        let other = SpeakerScale::BarkDifferences;
        assert_eq!(SpeakerScale::middle([&at(6.0), &other]), None);
        assert_eq!(SpeakerScale::middle([]), None);
    }
}
