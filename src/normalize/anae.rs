//! Log-mean scaling of the *Atlas of North American English*.
//!
//! *Formula*: `F exp(G - S)`, with `S` the mean of ln F over the speaker's F1 and F2 and `G` =
//! 6.896874, the mean of `S` over the Atlas's own speakers; the result is in hertz of a middle
//! speaker.
//!
//! *Needs* and *pitfalls* are those of the shared log-mean, of which it is a rescaling. `G` is a
//! constant of another survey: it moves all speakers alike and changes no comparison within one.
//!
//! *Source*: Labov, Ash & Boberg 2006, *The Atlas of North American English*, chapter 5.

use super::method::{Formants, Over};
use super::{Lacks, SpeakerScale, SpeakerTokens, nearey};

/// `G`: mean over 345 speakers of the Atlas (Labov, Ash & Boberg 2006).
const ATLAS_LOG_MEAN: f64 = 6.896874;

/// One factor for all formants.
///
/// # Errors
/// [`Lacks`] where no token has both F1 and F2.
pub(super) fn fit(tokens: &SpeakerTokens<'_>) -> Result<SpeakerScale, Lacks> {
    let log_mean = nearey::shared_log_mean(Formants::F1F2, Over::Tokens, tokens)?;
    Ok(SpeakerScale::Affine {
        centre_hz: [Some(0.0); 3],
        width_hz: [Some((log_mean - ATLAS_LOG_MEAN).exp()); 3],
    })
}
