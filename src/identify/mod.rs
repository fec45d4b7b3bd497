//! Normalized tokens to ranked vowels, with probabilities that sum to one.

mod calibration;
mod choose;
mod classifier;
mod discriminant;
mod evaluate;
mod feature;
mod gaussian;
mod logistic;
mod matrix;
mod model;
mod model_parse;
mod model_text;
mod newton;
mod samples;
mod shipped;
mod standard;
mod template;
mod template_fit;
mod trained;

pub use calibration::{BINS, Calibration, Reliability, calibration_error};
pub use choose::identify_with;
pub use classifier::{Classifier, Kind, USUAL_MODES, USUAL_PENALTY, UnknownKind};
pub use evaluate::{Accuracy, Evaluation, HeldOut, ask, evaluate, leave_one_speaker_out};
pub use feature::{Feature, FeatureTable, Moment, UnknownFeature};
pub use logistic::FitError;
pub use model::{Declined, FEWEST_TOKENS, Identification, Model, TrainingRecord};
pub use model_text::{FORMAT, ModelError};
pub use samples::Samples;
pub use shipped::shipped;
pub use template::{Position, Template};
pub use trained::{Answer, Trained};

#[cfg(test)]
mod model_tests;
#[cfg(test)]
mod oracle;
