//! What a model file holds, and whether it makes sense.

use serde::Deserialize;

use crate::vowel::Vowel;

use super::calibration::{BINS, Calibration, Reliability};
use super::classifier::{Classifier, Kind};
use super::discriminant::Discriminant;
use super::evaluate::Accuracy;
use super::logistic::Logistic;
use super::matrix::Cholesky;
use super::model::{Model, TrainingRecord};
use super::model_text::ModelError;
use super::newton::Weights;
use super::standard::Standard;
use super::template::{Matrix, Template};
use super::trained::Trained;

/// What the file holds, before it is known to make sense.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct Written {
    #[serde(rename = "isophone_model")]
    _format: u64,
    name: String,
    classifier: String,
    penalty: Option<f64>,
    modes: Option<usize>,
    features: Vec<String>,
    normalization: String,
    vowels: Vec<String>,
    training: WrittenTraining,
    held_out: WrittenHeldOut,
    calibration: WrittenCalibration,
    logistic: Option<WrittenLogistic>,
    discriminant: Option<WrittenDiscriminant>,
    template: Option<WrittenTemplate>,
    typical: Option<WrittenDiscriminant>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenTraining {
    program: String,
    data: Vec<String>,
    command: String,
    tokens: usize,
    left_out: usize,
    speakers: usize,
    seed: u64,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenHeldOut {
    what: String,
    accuracy: f64,
    low: f64,
    high: f64,
    correct: usize,
    tokens: usize,
    speakers: usize,
    confusion: Vec<Vec<usize>>,
    reliability_tokens: Vec<usize>,
    reliability_stated: Vec<f64>,
    reliability_found: Vec<f64>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenCalibration {
    temperature: f64,
    strangest: f64,
    usual_variance: Vec<f64>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenLogistic {
    mean: Vec<f64>,
    deviation: Vec<f64>,
    intercept: Vec<f64>,
    slope: Vec<Vec<f64>>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenDiscriminant {
    mean: Vec<Vec<f64>>,
    covariance: Vec<Matrix>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenTemplate {
    mean: Vec<Vec<f64>>,
    modes: Vec<Matrix>,
    within: Vec<Matrix>,
}

fn wrong(what: impl ToString) -> ModelError {
    ModelError::Inconsistent(what.to_string())
}

impl Written {
    /// The model, once everything in the file fits together.
    pub(super) fn checked(self) -> Result<Model, ModelError> {
        let features = self
            .features
            .iter()
            .map(|name| name.parse().map_err(wrong))
            .collect::<Result<Vec<_>, _>>()?;
        let vowels: Vec<Vowel> = self.vowels.iter().map(|v| Vowel::from_ipa(v)).collect();
        let kind: Kind = self.classifier.parse().map_err(wrong)?;
        let kind = match (kind, self.penalty, self.modes) {
            (Kind::Logistic { .. }, Some(penalty), None) => Kind::Logistic { penalty },
            (Kind::Template { .. }, None, Some(modes)) => Kind::Template { modes },
            (Kind::Linear | Kind::Quadratic, None, None) => kind,
            _ => return Err(wrong("its settings are not those of its classifier")),
        };
        let (width, classes) = (features.len(), vowels.len());
        if width == 0 || classes < 2 {
            return Err(wrong("it has no features or fewer than two vowels"));
        }
        if !vowels.windows(2).all(|pair| pair[0] < pair[1]) {
            return Err(wrong("its vowels are not sorted, each once"));
        }
        let classifier = match (kind, self.logistic, self.discriminant, self.template) {
            (Kind::Logistic { .. }, Some(logistic), None, None) => {
                logistic.checked(width, classes)?
            }
            (Kind::Linear | Kind::Quadratic, None, Some(discriminant), None) => {
                Classifier::Discriminant(discriminant.checked(width, classes)?)
            }
            (Kind::Template { .. }, None, None, Some(template)) => {
                template.checked(width, classes)?
            }
            _ => return Err(wrong("its numbers are not those of its classifier")),
        };
        let typical = match (kind, self.typical) {
            (Kind::Template { .. }, None) => None,
            (Kind::Template { .. }, Some(_)) => {
                return Err(wrong("a template knows by itself what is typical"));
            }
            (_, Some(typical)) => Some(typical.checked(width, classes)?),
            (_, None) => return Err(wrong("it does not say what is typical")),
        };
        let (calibration, usual_variance) = self.calibration.checked(width)?;
        Ok(Model {
            name: self.name,
            kind,
            features,
            normalization: self.normalization.parse().map_err(wrong)?,
            vowels,
            trained: Trained {
                classifier,
                typical,
                usual_variance,
            },
            calibration,
            record: record(self.training, self.held_out, classes)?,
        })
    }
}

/// The training record.
fn record(
    training: WrittenTraining,
    held_out: WrittenHeldOut,
    classes: usize,
) -> Result<TrainingRecord, ModelError> {
    let confusion = held_out.confusion;
    if confusion.len() != classes || confusion.iter().any(|row| row.len() != classes) {
        return Err(wrong(
            "its confusion table has another size than its vowels",
        ));
    }
    let bins = [
        held_out.reliability_tokens.len(),
        held_out.reliability_stated.len(),
        held_out.reliability_found.len(),
    ];
    if bins != [BINS; 3] {
        return Err(wrong("its reliability table has another size"));
    }
    let reliability = (0..BINS)
        .map(|n| Reliability {
            tokens: held_out.reliability_tokens[n],
            stated: held_out.reliability_stated[n],
            found: held_out.reliability_found[n],
        })
        .collect();
    Ok(TrainingRecord {
        program: training.program,
        data: training.data,
        command: training.command,
        tokens: training.tokens,
        left_out: training.left_out,
        speakers: training.speakers,
        seed: training.seed,
        held_out: held_out.what,
        accuracy: Accuracy {
            share: held_out.accuracy,
            low: held_out.low,
            high: held_out.high,
            correct: held_out.correct,
            tokens: held_out.tokens,
            speakers: held_out.speakers,
        },
        confusion,
        reliability,
    })
}

impl WrittenCalibration {
    fn checked(self, width: usize) -> Result<(Calibration, Vec<f64>), ModelError> {
        let temperature = self.temperature.is_finite() && self.temperature > 0.0;
        // The bound may be infinite: nothing is refused then.
        let bound = !self.strangest.is_nan() && self.strangest >= 0.0;
        let variance = self.usual_variance.len() == width
            && self
                .usual_variance
                .iter()
                .all(|v| v.is_finite() && *v >= 0.0);
        if !(temperature && bound && variance) {
            return Err(wrong("its calibration is not made of usable numbers"));
        }
        let calibration = Calibration {
            temperature: self.temperature,
            strangest: self.strangest,
        };
        Ok((calibration, self.usual_variance))
    }
}

impl WrittenLogistic {
    fn checked(self, width: usize, classes: usize) -> Result<Classifier, ModelError> {
        let shape = self.mean.len() == width
            && self.deviation.len() == width
            && self.intercept.len() == classes
            && self.slope.len() == classes
            && self.slope.iter().all(|row| row.len() == width);
        let finite = self
            .mean
            .iter()
            .chain(&self.intercept)
            .chain(self.slope.iter().flatten())
            .all(|v| v.is_finite())
            && self.deviation.iter().all(|d| d.is_finite() && *d > 0.0);
        if !(shape && finite) {
            return Err(wrong("its weights do not fit its features and vowels"));
        }
        Ok(Classifier::Logistic(Logistic {
            standard: Standard {
                mean: self.mean,
                deviation: self.deviation,
            },
            weights: Weights {
                intercept: self.intercept,
                slope: self.slope,
            },
        }))
    }
}

impl WrittenDiscriminant {
    fn checked(self, width: usize, classes: usize) -> Result<Discriminant, ModelError> {
        let misfit = || wrong("its means and spreads do not fit its features");
        let mean = checked_means(self.mean, width, classes)?;
        let present = mean.iter().flatten().count();
        let number = self.covariance.len() == 1 || self.covariance.len() == present;
        if !(number && self.covariance.iter().all(|m| is_square(m, width))) {
            return Err(misfit());
        }
        Discriminant::of(mean, self.covariance).map_err(|_| misfit())
    }
}

impl WrittenTemplate {
    fn checked(self, width: usize, classes: usize) -> Result<Classifier, ModelError> {
        let mean = checked_means(self.mean, width, classes)?;
        let present = mean.iter().flatten().count();
        let modes = self
            .modes
            .first()
            .and_then(|m| m.first())
            .map_or(0, Vec::len);
        let usable = modes > 0
            && self.modes.len() == present
            && self.modes.iter().all(|m| {
                m.len() == width
                    && m.iter().all(|row| row.len() == modes)
                    && m.iter().flatten().all(|v| v.is_finite())
            })
            && self.within.len() == present
            && self
                .within
                .iter()
                .all(|m| is_square(m, width) && Cholesky::of(m).is_some());
        if !usable {
            return Err(wrong("its modes and spreads do not fit its features"));
        }
        Ok(Classifier::Template(Template {
            mean,
            modes: self.modes,
            within: self.within,
        }))
    }
}

/// Means with the empty ones, of classes without rows, as `None`.
fn checked_means(
    mean: Vec<Vec<f64>>,
    width: usize,
    classes: usize,
) -> Result<Vec<Option<Vec<f64>>>, ModelError> {
    let shape = mean.len() == classes
        && mean.iter().filter(|m| !m.is_empty()).count() >= 2
        && mean.iter().all(|m| m.is_empty() || m.len() == width);
    if !(shape && mean.iter().flatten().all(|v| v.is_finite())) {
        return Err(wrong("its means do not fit its features and vowels"));
    }
    Ok(mean
        .into_iter()
        .map(|m| (!m.is_empty()).then_some(m))
        .collect())
}

fn is_square(matrix: &Matrix, width: usize) -> bool {
    matrix.len() == width
        && matrix.iter().all(|row| row.len() == width)
        && matrix.iter().flatten().all(|v| v.is_finite())
}
