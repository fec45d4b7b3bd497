//! Normalized tokens to ranked vowels, with probabilities that sum to one.

mod classifier;
mod discriminant;
mod evaluate;
mod feature;
mod logistic;
mod matrix;
mod newton;
mod samples;
mod standard;

pub use classifier::{Classifier, Kind, USUAL_PENALTY, UnknownKind};
pub use evaluate::{Accuracy, Evaluation, HeldOut, answers, evaluate, leave_one_speaker_out};
pub use feature::{Feature, FeatureTable, Moment, NoFeatures, UnknownFeature};
pub use logistic::FitError;
pub use samples::Samples;

#[cfg(test)]
mod oracle;
