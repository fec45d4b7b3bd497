//! The named columns a classifier sees, and how an observation fills them.

use std::collections::BTreeMap;
use std::fmt;
use std::str::FromStr;

use crate::normalize::{Lacks, Method, Normalization, SpeakerScale, SpeakerTokens, Values};
use crate::tokens::Observation;

/// One column.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Feature {
    /// A normalized formant.
    Formant {
        /// Which, 1 to 3.
        number: u8,
        /// When in the vowel.
        at: Moment,
    },
    /// The fundamental frequency, normalized by the same method.
    F0,
    /// Natural logarithm of the duration in seconds, less its mean over the speaker's tokens.
    Duration,
    /// Natural logarithm of the duration in seconds.
    Seconds,
}

/// A moment in a vowel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Moment {
    /// The one the token's single value stands for.
    Steady,
    /// A proportion of the duration, found on the track by straight lines between its points.
    Proportion(f64),
}

impl fmt::Display for Feature {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Formant { number, at } => match at {
                Moment::Steady => write!(f, "f{number}_norm"),
                Moment::Proportion(p) => write!(f, "f{number}_norm@{p}"),
            },
            Self::F0 => f.write_str("f0_norm"),
            Self::Duration => f.write_str("ln_duration"),
            Self::Seconds => f.write_str("ln_seconds"),
        }
    }
}

/// A name that is no feature.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error(
    "`{0}` is no feature; features are f0_norm, f1_norm to f3_norm, f1_norm@0.2 and the like, ln_duration"
)]
pub struct UnknownFeature(pub String);

impl FromStr for Feature {
    type Err = UnknownFeature;

    fn from_str(text: &str) -> Result<Self, UnknownFeature> {
        let unknown = || UnknownFeature(text.to_owned());
        match text {
            "ln_duration" => return Ok(Self::Duration),
            "ln_seconds" => return Ok(Self::Seconds),
            "f0_norm" => return Ok(Self::F0),
            _ => {}
        }
        let (name, at) = match text.split_once('@') {
            None => (text, Moment::Steady),
            Some((name, proportion)) => {
                let proportion: f64 = proportion.parse().map_err(|_| unknown())?;
                if !(0.0..=1.0).contains(&proportion) {
                    return Err(unknown());
                }
                (name, Moment::Proportion(proportion))
            }
        };
        let number = match name {
            "f1_norm" => 1,
            "f2_norm" => 2,
            "f3_norm" => 3,
            _ => return Err(unknown()),
        };
        Ok(Self::Formant { number, at })
    }
}

/// Everything needed to fill the columns for the speakers of one table.
#[derive(Debug, Clone)]
pub struct FeatureTable {
    features: Vec<Feature>,
    normalization: Normalization,
    /// F0's own scales, where it is a feature.
    f0: Option<Normalization>,
    mean_ln_duration: BTreeMap<String, f64>,
}

impl FeatureTable {
    /// Fits the normalization to all observations of a table.
    pub fn fit(features: &[Feature], method: &Method, observations: &[Observation]) -> Self {
        let f0 = features.contains(&Feature::F0).then(|| {
            // The method is fitted to F0 as if it were a formant; F2 only has to be there.
            let as_formant: Vec<Observation> = observations
                .iter()
                .map(|o| Observation {
                    formant_hz: [o.f0_hz, o.f0_hz, None],
                    ..o.clone()
                })
                .collect();
            Normalization::fit(method, &as_formant)
        });
        let mean_ln_duration = SpeakerTokens::of(observations)
            .into_iter()
            .filter_map(|(name, tokens)| {
                let known: Vec<f64> = tokens
                    .iter()
                    .filter_map(|o| o.duration_s)
                    .map(f64::ln)
                    .collect();
                let mean = known.iter().sum::<f64>() / known.len() as f64;
                (!known.is_empty()).then_some((name, mean))
            })
            .collect();
        Self {
            features: features.to_vec(),
            normalization: Normalization::fit(method, observations),
            f0,
            mean_ln_duration,
        }
    }

    /// The fitted normalization.
    pub fn normalization(&self) -> &Normalization {
        &self.normalization
    }

    /// The row of one observation; NaN stands where a value is missing.
    ///
    /// # Errors
    /// What the speaker lacks for the normalization.
    pub fn row(&self, observation: &Observation) -> Result<Vec<f64>, Lacks> {
        let scale = self.scale(observation)?;
        Ok(self
            .features
            .iter()
            .map(|feature| {
                let value = match feature {
                    Feature::Formant { number, at } => {
                        let index = usize::from(*number) - 1;
                        scale.apply(&values(observation, *at))[index]
                    }
                    Feature::F0 => self.f0_value(observation),
                    Feature::Duration => self.duration(observation),
                    Feature::Seconds => observation.duration_s.map(f64::ln),
                };
                value.filter(|v| v.is_finite()).unwrap_or(f64::NAN)
            })
            .collect())
    }

    /// The squared standard errors of the row's values; 0 where nothing is known of them.
    ///
    /// The track's values carry the error of the token's single value.
    pub fn variance(&self, observation: &Observation) -> Vec<f64> {
        let Ok(scale) = self.scale(observation) else {
            return vec![0.0; self.features.len()];
        };
        self.features
            .iter()
            .map(|feature| match feature {
                Feature::Formant { number, at } => {
                    let sd = scale.apply_sd(&values(observation, *at), &observation.sd_hz);
                    sd[usize::from(*number) - 1].map_or(0.0, |sd| sd * sd)
                }
                Feature::F0 | Feature::Duration | Feature::Seconds => 0.0,
            })
            .collect()
    }

    /// The name of the first column that has no value in a row.
    pub fn missing(&self, row: &[f64]) -> Option<String> {
        let place = row.iter().position(|v| !v.is_finite())?;
        Some(self.features[place].to_string())
    }

    fn scale(&self, observation: &Observation) -> Result<&SpeakerScale, Lacks> {
        match self.normalization.scales.get(&observation.speaker) {
            Some(Ok(scale)) => Ok(scale),
            Some(Err(lack)) => Err(lack.clone()),
            None => Err(Lacks::Values {
                formant: 1,
                found: 0,
                needed: 1,
            }),
        }
    }

    fn f0_value(&self, observation: &Observation) -> Option<f64> {
        let scales = &self.f0.as_ref()?.scales;
        let scale = scales.get(&observation.speaker)?.as_ref().ok()?;
        scale.apply_formant(0, observation.f0_hz?)
    }

    fn duration(&self, observation: &Observation) -> Option<f64> {
        let mean = self.mean_ln_duration.get(&observation.speaker)?;
        Some(observation.duration_s?.ln() - mean)
    }
}

/// F0 and the formants at a moment.
fn values(observation: &Observation, at: Moment) -> Values {
    match at {
        Moment::Steady => Values::of(observation),
        Moment::Proportion(proportion) => Values {
            f0_hz: observation.f0_hz,
            formant_hz: [0, 1, 2].map(|n| track_value(&observation.track, proportion, n)),
        },
    }
}

/// The value of formant `index` at a proportion, by a straight line between the nearest points that
/// have it; `None` outside them.
pub(super) fn track_value(
    track: &[(f64, [Option<f64>; 3])],
    proportion: f64,
    index: usize,
) -> Option<f64> {
    // Proportions read from a table are rounded; this is far below the distance of two points.
    const SAME: f64 = 1e-6;
    let known = track.iter().filter_map(|(p, hz)| Some((*p, hz[index]?)));
    let mut before: Option<(f64, f64)> = None;
    let mut after: Option<(f64, f64)> = None;
    for (p, hz) in known {
        if (p - proportion).abs() < SAME {
            return Some(hz);
        }
        if p < proportion && before.is_none_or(|(b, _)| p > b) {
            before = Some((p, hz));
        }
        if p > proportion && after.is_none_or(|(a, _)| p < a) {
            after = Some((p, hz));
        }
    }
    let ((p1, hz1), (p2, hz2)) = (before?, after?);
    Some(hz1 + (hz2 - hz1) * (proportion - p1) / (p2 - p1))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_read_back() {
        for name in [
            "f1_norm",
            "f3_norm@0.2",
            "f2_norm@0.85",
            "f0_norm",
            "ln_duration",
            "ln_seconds",
        ] {
            assert_eq!(name.parse::<Feature>().unwrap().to_string(), name);
        }
        for name in [
            "",
            "f4_norm",
            "f1_norm@",
            "f1_norm@1.5",
            "f1_norm@nan",
            "f1",
        ] {
            assert!(name.parse::<Feature>().is_err(), "{name}");
        }
    }

    #[test]
    fn tracks_are_read_between_their_points() {
        let at = |f1: Option<f64>| [f1, None, None];
        let track = [
            (0.1, at(Some(400.0))),
            (0.2, at(None)),
            (0.3, at(Some(600.0))),
        ];
        assert_eq!(track_value(&track, 0.1, 0), Some(400.0));
        assert_eq!(track_value(&track, 0.2, 0), Some(500.0));
        assert_eq!(track_value(&track, 0.5, 0), None);
        assert_eq!(track_value(&track, 0.2, 1), None);
    }

    #[test]
    fn rows_are_filled_or_say_what_is_missing() {
        let token = |n: usize, f1: f64, f2: f64| Observation {
            token: n.to_string(),
            speaker: "a".to_owned(),
            vowel: None,
            duration_s: Some(0.1 * (n + 1) as f64),
            f0_hz: None,
            formant_hz: [Some(f1), Some(f2), None],
            sd_hz: [None; 3],
            track: vec![(0.2, [Some(f1 + 50.0), Some(f2), None])],
        };
        let observations = [token(0, 400.0, 1000.0), token(1, 600.0, 2000.0)];
        let features: Vec<Feature> = ["f1_norm@0.2", "f2_norm", "ln_duration"]
            .map(|name| name.parse().unwrap())
            .to_vec();
        let method: Method = "lobanov:n".parse().unwrap();
        let table = FeatureTable::fit(&features, &method, &observations);
        // By hand: F1 mean 500, deviation 100; F2 mean 1500, deviation 500; durations 0.1 and 0.2.
        let row = table.row(&observations[0]).unwrap();
        let expected = [-0.5, -1.0, -0.5 * 2f64.ln()];
        for (found, expected) in row.iter().zip(expected) {
            assert!((found - expected).abs() < 1e-12);
        }
        let table = FeatureTable::fit(&["f3_norm".parse().unwrap()], &method, &observations);
        let row = table.row(&observations[0]).unwrap();
        assert_eq!(table.missing(&row), Some("f3_norm".to_owned()));
    }
}
