//! Normalized tokens to ranked vowels, with probabilities that sum to one.

mod classifier;
mod discriminant;
mod evaluate;
mod feature;
mod logistic;
mod matrix;
mod model;
mod model_text;
mod newton;
mod samples;
mod shipped;
mod standard;

pub use classifier::{Classifier, Kind, USUAL_PENALTY, UnknownKind};
pub use evaluate::{Accuracy, Evaluation, HeldOut, answers, evaluate, leave_one_speaker_out};
pub use feature::{Feature, FeatureTable, Moment, NoFeatures, UnknownFeature};
pub use logistic::FitError;
pub use model::{Declined, FEWEST_TOKENS, Identification, Model, TrainingRecord, identify_with};
pub use model_text::{FORMAT, ModelError};
pub use samples::Samples;
pub use shipped::shipped;

#[cfg(test)]
mod model_tests;
#[cfg(test)]
mod oracle;
