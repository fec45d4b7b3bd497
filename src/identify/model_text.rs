//! The text of a model: TOML with the training record first, closed by a checksum.
//!
//! Numbers are written so that they read back to the same bits. The last line holds the SHA-256 of
//! everything before it: a truncated or edited file is refused, and a model is changed by training
//! it again.

use std::fmt::Write;

use serde::Deserialize;
use sha2::{Digest, Sha256};

use crate::vowel::Vowel;

use super::classifier::{Classifier, Kind};
use super::discriminant::Discriminant;
use super::evaluate::Accuracy;
use super::logistic::Logistic;
use super::model::{Model, TrainingRecord};
use super::newton::Weights;
use super::standard::Standard;

/// Version of the format written here, and the only one read.
pub const FORMAT: u64 = 1;

/// What the last line begins with.
const CHECKSUM: &str = "# sha256 of all above: ";

/// Why a text is no model.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum ModelError {
    /// Not a model at all.
    #[error("not a model file: no line `isophone_model = {FORMAT}`")]
    NoModel,
    /// Another version of the format.
    #[error("the model has format `{found}`; this program reads format {FORMAT}")]
    Format {
        /// What the file says.
        found: String,
    },
    /// The checksum is missing or does not fit.
    #[error("the model file is damaged: {0}")]
    Damaged(&'static str),
    /// Whole, and yet not what a model must be.
    #[error("the model file is not consistent: {0}")]
    Inconsistent(String),
}

impl ModelError {
    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self {
            Self::NoModel => "give a file written by `isophone train`",
            Self::Format { .. } => {
                "train it again with this version; the command is in the file's training record"
            }
            Self::Damaged(_) | Self::Inconsistent(_) => {
                "fetch the file again, or train it again; models are not edited by hand"
            }
        }
    }
}

impl Model {
    /// The text of the model.
    pub fn to_text(&self) -> String {
        let mut text = String::new();
        let record = &self.record;
        let accuracy = &record.accuracy;
        let kind = match self.kind {
            Kind::Logistic { penalty } => format!("\"logistic\"\npenalty = {penalty:?}"),
            other => quoted(&other.to_string()),
        };
        let _ = write!(
            text,
            "isophone_model = {FORMAT}\nname = {name}\nclassifier = {kind}\nfeatures = {features}\n\
             normalization = {normalization}\nvowels = {vowels}\n\n[training]\nprogram = {program}\n\
             data = {data}\ncommand = {command}\ntokens = {tokens}\nleft_out = {left_out}\n\
             speakers = {speakers}\nseed = {seed}\n\n[held_out]\nwhat = {what}\naccuracy = {share:?}\n\
             low = {low:?}\nhigh = {high:?}\ncorrect = {correct}\ntokens = {tested}\n\
             speakers = {tested_speakers}\n# rows: labels, columns: answers, in the order of `vowels`\n\
             confusion = {confusion}\n\n",
            name = quoted(&self.name),
            features = list(self.features.iter().map(|f| quoted(&f.to_string()))),
            normalization = quoted(&self.normalization.to_string()),
            vowels = list(self.vowels.iter().map(|v| quoted(v.ipa()))),
            program = quoted(&record.program),
            data = lines(record.data.iter().map(|d| quoted(d))),
            command = quoted(&record.command),
            tokens = record.tokens,
            left_out = record.left_out,
            speakers = record.speakers,
            seed = record.seed,
            what = quoted(&record.held_out),
            share = accuracy.share,
            low = accuracy.low,
            high = accuracy.high,
            correct = accuracy.correct,
            tested = accuracy.tokens,
            tested_speakers = accuracy.speakers,
            confusion = lines(
                record
                    .confusion
                    .iter()
                    .map(|row| list(row.iter().map(usize::to_string)))
            ),
        );
        match &self.classifier {
            Classifier::Logistic(logistic) => {
                let _ = write!(
                    text,
                    "[logistic]\nmean = {}\ndeviation = {}\nintercept = {}\nslope = {}\n",
                    numbers(&logistic.standard.mean),
                    numbers(&logistic.standard.deviation),
                    numbers(&logistic.weights.intercept),
                    lines(logistic.weights.slope.iter().map(|row| numbers(row))),
                );
            }
            Classifier::Discriminant(discriminant) => {
                let means = discriminant.mean.iter().map(|mean| match mean {
                    Some(mean) => numbers(mean),
                    None => "[]".to_owned(),
                });
                let matrices = discriminant
                    .covariance
                    .iter()
                    .map(|matrix| list(matrix.iter().map(|row| numbers(row))));
                let _ = write!(
                    text,
                    "[discriminant]\nmean = {}\ncovariance = {}\n",
                    lines(means),
                    lines(matrices),
                );
            }
        }
        let sum = checksum(&text);
        let _ = writeln!(text, "{CHECKSUM}{sum}");
        text
    }

    /// Reads a model.
    ///
    /// # Errors
    /// [`ModelError`] where the text is not a model, of another format, damaged or inconsistent.
    pub fn parse(text: &str) -> Result<Self, ModelError> {
        let first = text.lines().next().unwrap_or_default();
        let format = first
            .strip_prefix("isophone_model = ")
            .ok_or(ModelError::NoModel)?;
        if format != FORMAT.to_string() {
            // A word of the file in a message; a megabyte of nonsense is cut.
            let found = format.chars().take(40).collect();
            return Err(ModelError::Format { found });
        }
        let place = text
            .rfind(CHECKSUM)
            .ok_or(ModelError::Damaged("its last line is missing"))?;
        let (body, last) = text.split_at(place);
        if last.trim_end().strip_prefix(CHECKSUM) != Some(checksum(body).as_str()) {
            return Err(ModelError::Damaged("its checksum does not fit"));
        }
        let written: Written = toml::from_str(body)
            .map_err(|error| ModelError::Inconsistent(error.message().to_owned()))?;
        written.checked()
    }
}

/// What the file holds, before it is known to make sense.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Written {
    #[serde(rename = "isophone_model")]
    _format: u64,
    name: String,
    classifier: String,
    penalty: Option<f64>,
    features: Vec<String>,
    normalization: String,
    vowels: Vec<String>,
    training: WrittenTraining,
    held_out: WrittenHeldOut,
    logistic: Option<WrittenLogistic>,
    discriminant: Option<WrittenDiscriminant>,
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
    covariance: Vec<Vec<Vec<f64>>>,
}

impl Written {
    fn checked(self) -> Result<Model, ModelError> {
        let wrong = |what: &str| ModelError::Inconsistent(what.to_owned());
        let features = self
            .features
            .iter()
            .map(|name| {
                name.parse()
                    .map_err(|e| ModelError::Inconsistent(format!("{e}")))
            })
            .collect::<Result<Vec<_>, _>>()?;
        let normalization = self
            .normalization
            .parse()
            .map_err(|e| ModelError::Inconsistent(format!("{e}")))?;
        let vowels: Vec<Vowel> = self.vowels.iter().map(|v| Vowel::from_ipa(v)).collect();
        let kind = match (
            self.classifier
                .parse()
                .map_err(|e| ModelError::Inconsistent(format!("{e}")))?,
            self.penalty,
        ) {
            (Kind::Logistic { .. }, Some(penalty)) => Kind::Logistic { penalty },
            (Kind::Logistic { .. }, None) => return Err(wrong("a logistic model has a penalty")),
            (kind, _) => kind,
        };
        let (width, classes) = (features.len(), vowels.len());
        if width == 0 || classes < 2 {
            return Err(wrong("it has no features or fewer than two vowels"));
        }
        if !vowels.windows(2).all(|pair| pair[0] < pair[1]) {
            return Err(wrong("its vowels are not sorted, each once"));
        }
        let confusion = self.held_out.confusion;
        if confusion.len() != classes || confusion.iter().any(|row| row.len() != classes) {
            return Err(wrong(
                "its confusion table has another size than its vowels",
            ));
        }
        let classifier = match (kind, self.logistic, self.discriminant) {
            (Kind::Logistic { .. }, Some(logistic), None) => logistic.checked(width, classes)?,
            (Kind::Linear | Kind::Quadratic, None, Some(discriminant)) => {
                discriminant.checked(width, classes)?
            }
            _ => return Err(wrong("its numbers are not those of its classifier")),
        };
        Ok(Model {
            name: self.name,
            kind,
            features,
            normalization,
            vowels,
            classifier,
            record: TrainingRecord {
                program: self.training.program,
                data: self.training.data,
                command: self.training.command,
                tokens: self.training.tokens,
                left_out: self.training.left_out,
                speakers: self.training.speakers,
                seed: self.training.seed,
                held_out: self.held_out.what,
                accuracy: Accuracy {
                    share: self.held_out.accuracy,
                    low: self.held_out.low,
                    high: self.held_out.high,
                    correct: self.held_out.correct,
                    tokens: self.held_out.tokens,
                    speakers: self.held_out.speakers,
                },
                confusion,
            },
        })
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
            return Err(ModelError::Inconsistent(
                "its weights do not fit its features and vowels".to_owned(),
            ));
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
    fn checked(self, width: usize, classes: usize) -> Result<Classifier, ModelError> {
        let wrong =
            || ModelError::Inconsistent("its means and spreads do not fit its features".to_owned());
        let present = self.mean.iter().filter(|mean| !mean.is_empty()).count();
        let shape = self.mean.len() == classes
            && present >= 2
            && self.mean.iter().all(|m| m.is_empty() || m.len() == width)
            && (self.covariance.len() == 1 || self.covariance.len() == present)
            && self
                .covariance
                .iter()
                .all(|m| m.len() == width && m.iter().all(|row| row.len() == width));
        let finite = self
            .mean
            .iter()
            .flatten()
            .chain(self.covariance.iter().flatten().flatten())
            .all(|v| v.is_finite());
        if !(shape && finite) {
            return Err(wrong());
        }
        let mean = self
            .mean
            .into_iter()
            .map(|mean| (!mean.is_empty()).then_some(mean))
            .collect();
        Discriminant::of(mean, self.covariance)
            .map(Classifier::Discriminant)
            .map_err(|_| wrong())
    }
}

fn checksum(text: &str) -> String {
    Sha256::digest(text.as_bytes())
        .iter()
        .map(|byte| format!("{byte:02x}"))
        .collect()
}

/// A TOML string.
fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

fn list(items: impl Iterator<Item = String>) -> String {
    format!("[{}]", items.collect::<Vec<_>>().join(", "))
}

/// A list with an item to a line.
fn lines(items: impl Iterator<Item = String>) -> String {
    let items: String = items.map(|item| format!("    {item},\n")).collect();
    format!("[\n{items}]")
}

/// Numbers with as many digits as bring them back.
fn numbers(values: &[f64]) -> String {
    list(values.iter().map(|v| format!("{v:?}")))
}
