//! The classifiers by name, behind one face.

use std::fmt;
use std::str::FromStr;

use super::discriminant::{Discriminant, Spread};
use super::logistic::{FitError, Logistic};
use super::samples::Samples;
use super::template::Template;

/// A kind of classifier, with its settings.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Kind {
    /// Multinomial logistic regression with a penalty on its slopes.
    Logistic {
        /// Weight of half the sum of squared slopes.
        penalty: f64,
    },
    /// Linear discriminant.
    Linear,
    /// Quadratic discriminant.
    Quadratic,
    /// Sliding template.
    Template {
        /// Number of modes.
        modes: usize,
    },
}

/// The usual number of modes of a template; see `template_fit` for how little it matters.
pub const USUAL_MODES: usize = 8;

/// The usual penalty: 1/10, chosen beforehand and not tuned; leave-one-speaker-out accuracy on
/// published tokens changes by less than half a point from 0.01 to 1.
pub const USUAL_PENALTY: f64 = 0.1;

impl fmt::Display for Kind {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Logistic { .. } => "logistic",
            Self::Linear => "linear",
            Self::Quadratic => "quadratic",
            Self::Template { .. } => "template",
        })
    }
}

/// A name that is no classifier.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("`{0}` is no classifier; classifiers are logistic, linear, quadratic, template")]
pub struct UnknownKind(pub String);

impl FromStr for Kind {
    type Err = UnknownKind;

    fn from_str(text: &str) -> Result<Self, UnknownKind> {
        match text {
            "logistic" => Ok(Self::Logistic {
                penalty: USUAL_PENALTY,
            }),
            "linear" => Ok(Self::Linear),
            "quadratic" => Ok(Self::Quadratic),
            "template" => Ok(Self::Template { modes: USUAL_MODES }),
            _ => Err(UnknownKind(text.to_owned())),
        }
    }
}

/// A fitted classifier.
#[derive(Debug, Clone, PartialEq)]
pub enum Classifier {
    /// Multinomial logistic regression.
    Logistic(Logistic),
    /// Linear or quadratic discriminant.
    Discriminant(Discriminant),
    /// Sliding template.
    Template(Template),
}

impl Classifier {
    /// Fits to the rows of `samples`.
    ///
    /// # Errors
    /// [`FitError`] where the rows do not allow it.
    pub fn fit(kind: Kind, samples: &Samples) -> Result<Self, FitError> {
        Self::fit_from(kind, samples, None)
    }

    /// [`Self::fit`], started from another fit where that saves time; the result is the same.
    pub(super) fn fit_from(
        kind: Kind,
        samples: &Samples,
        start: Option<&Self>,
    ) -> Result<Self, FitError> {
        match kind {
            Kind::Logistic { penalty } => {
                let start = match start {
                    Some(Self::Logistic(logistic)) => Some(logistic),
                    _ => None,
                };
                Logistic::fit_from(samples, penalty, start).map(Self::Logistic)
            }
            Kind::Linear => Discriminant::fit(samples, Spread::Common).map(Self::Discriminant),
            Kind::Quadratic => Discriminant::fit(samples, Spread::Own).map(Self::Discriminant),
            Kind::Template { modes } => Template::fit(samples, modes).map(Self::Template),
        }
    }
}
