//! The text of a model: TOML with the training record first, closed by a checksum.
//!
//! Numbers are written so that they read back to the same bits. The last line holds the SHA-256 of
//! everything before it: a truncated or edited file is refused, and a model is changed by training
//! it again.

use std::fmt::Write;

use sha2::{Digest, Sha256};

use super::classifier::{Classifier, Kind};
use super::discriminant::Discriminant;
use super::model::Model;
use super::model_parse::Written;

/// Version of the format written here, and the only one read.
pub const FORMAT: u64 = 2;

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
        // Writing to a string does not fail.
        let _ = self.write_head(&mut text);
        let _ = self.write_record(&mut text);
        let _ = self.write_numbers(&mut text);
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

    fn write_head(&self, text: &mut String) -> std::fmt::Result {
        writeln!(text, "isophone_model = {FORMAT}")?;
        writeln!(text, "name = {}", quoted(&self.name))?;
        writeln!(text, "classifier = {}", quoted(&self.kind.to_string()))?;
        match self.kind {
            Kind::Logistic { penalty } => writeln!(text, "penalty = {penalty:?}")?,
            Kind::Template { modes } => writeln!(text, "modes = {modes}")?,
            Kind::Linear | Kind::Quadratic => {}
        }
        let features = self.features.iter().map(|f| quoted(&f.to_string()));
        writeln!(text, "features = {}", list(features))?;
        let normalization = quoted(&self.normalization.to_string());
        writeln!(text, "normalization = {normalization}")?;
        let vowels = self.vowels.iter().map(|v| quoted(v.ipa()));
        writeln!(text, "vowels = {}", list(vowels))
    }

    fn write_record(&self, text: &mut String) -> std::fmt::Result {
        let record = &self.record;
        let accuracy = &record.accuracy;
        writeln!(text, "\n[training]")?;
        writeln!(text, "program = {}", quoted(&record.program))?;
        writeln!(
            text,
            "data = {}",
            lines(record.data.iter().map(|d| quoted(d)))
        )?;
        writeln!(text, "command = {}", quoted(&record.command))?;
        writeln!(text, "tokens = {}", record.tokens)?;
        writeln!(text, "left_out = {}", record.left_out)?;
        writeln!(text, "speakers = {}", record.speakers)?;
        writeln!(text, "seed = {}", record.seed)?;
        writeln!(text, "\n[held_out]")?;
        writeln!(text, "what = {}", quoted(&record.held_out))?;
        writeln!(text, "accuracy = {:?}", accuracy.share)?;
        writeln!(text, "low = {:?}", accuracy.low)?;
        writeln!(text, "high = {:?}", accuracy.high)?;
        writeln!(text, "correct = {}", accuracy.correct)?;
        writeln!(text, "tokens = {}", accuracy.tokens)?;
        writeln!(text, "speakers = {}", accuracy.speakers)?;
        writeln!(
            text,
            "# rows: labels, columns: answers, in the order of `vowels`"
        )?;
        let confusion = record.confusion.iter();
        let confusion = confusion.map(|row| list(row.iter().map(usize::to_string)));
        writeln!(text, "confusion = {}", lines(confusion))?;
        writeln!(
            text,
            "# by tenths of the stated probability: tokens, mean stated, share identified as labelled"
        )?;
        let bins = &record.reliability;
        let tokens = bins.iter().map(|bin| bin.tokens.to_string());
        writeln!(text, "reliability_tokens = {}", list(tokens))?;
        let stated: Vec<f64> = bins.iter().map(|bin| bin.stated).collect();
        writeln!(text, "reliability_stated = {}", numbers(&stated))?;
        let found: Vec<f64> = bins.iter().map(|bin| bin.found).collect();
        writeln!(text, "reliability_found = {}", numbers(&found))
    }

    fn write_numbers(&self, text: &mut String) -> std::fmt::Result {
        writeln!(text, "\n[calibration]")?;
        writeln!(text, "temperature = {:?}", self.calibration.temperature)?;
        writeln!(text, "strangest = {:?}", self.calibration.strangest)?;
        let usual = numbers(&self.trained.usual_variance);
        writeln!(text, "usual_variance = {usual}")?;
        match &self.trained.classifier {
            Classifier::Logistic(logistic) => {
                writeln!(text, "\n[logistic]")?;
                writeln!(text, "mean = {}", numbers(&logistic.standard.mean))?;
                writeln!(
                    text,
                    "deviation = {}",
                    numbers(&logistic.standard.deviation)
                )?;
                writeln!(text, "intercept = {}", numbers(&logistic.weights.intercept))?;
                let slope = logistic.weights.slope.iter().map(|row| numbers(row));
                writeln!(text, "slope = {}", lines(slope))?;
            }
            Classifier::Discriminant(discriminant) => {
                write_discriminant(text, "discriminant", discriminant)?;
            }
            Classifier::Template(template) => {
                writeln!(text, "\n[template]")?;
                writeln!(text, "mean = {}", lines(means(&template.mean)))?;
                let modes = template.modes.iter().map(|m| matrix(m));
                writeln!(text, "modes = {}", lines(modes))?;
                let within = template.within.iter().map(|m| matrix(m));
                writeln!(text, "within = {}", lines(within))?;
            }
        }
        if let Some(typical) = &self.trained.typical {
            write_discriminant(text, "typical", typical)?;
        }
        Ok(())
    }
}

fn write_discriminant(
    text: &mut String,
    name: &str,
    discriminant: &Discriminant,
) -> std::fmt::Result {
    writeln!(text, "\n[{name}]")?;
    writeln!(text, "mean = {}", lines(means(&discriminant.mean)))?;
    let covariance = discriminant.covariance.iter().map(|m| matrix(m));
    writeln!(text, "covariance = {}", lines(covariance))
}

fn means(mean: &[Option<Vec<f64>>]) -> impl Iterator<Item = String> {
    mean.iter()
        .map(|mean| mean.as_deref().map_or_else(|| "[]".to_owned(), numbers))
}

fn matrix(matrix: &[Vec<f64>]) -> String {
    list(matrix.iter().map(|row| numbers(row)))
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
