//! Nearey: a speaker's size as a shift on the logarithmic scale.
//!
//! *Formula*: individual, `ln F - mean ln F` of that formant of that speaker; shared, `ln F - mean
//! of ln F over all formants used`, one shift for all (uniform scaling, as a longer tube would
//! have it).
//!
//! *Needs* the speaker's whole vowel set, in about equal numbers: the mean of a few vowels stands
//! where those vowels are.
//!
//! *Pitfalls*: for the shared form it must be said which formants enter; F1 and F2 only, or F3
//! too, give different constants. Tokens that lack one of the formants used do not enter its mean,
//! or a missing F3 would look like a longer tract. Missing or unbalanced vowels move the mean: the
//! regression log-mean is made for that case.
//!
//! *Source*: Nearey 1978, *Phonetic feature systems for vowels*, Indiana University Linguistics
//! Club.

use super::method::{Formants, Over};
use super::{Lacks, SpeakerScale, SpeakerTokens};

/// One shift for each formant.
///
/// # Errors
/// [`Lacks`] where F1 or F2 has no value; F3 is left out instead.
pub(super) fn fit_individual(
    over: Over,
    tokens: &SpeakerTokens<'_>,
) -> Result<SpeakerScale, Lacks> {
    let mut offset = [None; 3];
    for (n, values) in over.ln_values(tokens)?.into_iter().enumerate() {
        if values.is_empty() && n < 2 {
            return Err(Lacks::Values {
                formant: n as u8 + 1,
                found: 0,
                needed: 1,
            });
        }
        if !values.is_empty() {
            offset[n] = Some(values.iter().sum::<f64>() / values.len() as f64);
        }
    }
    Ok(SpeakerScale::Log { offset })
}

/// One shift for all formants used. It is applied to F1, F2 and F3 alike, whichever entered it.
///
/// # Errors
/// [`Lacks`] where no token has all formants used.
pub(super) fn fit_shared(
    formants: Formants,
    over: Over,
    tokens: &SpeakerTokens<'_>,
) -> Result<SpeakerScale, Lacks> {
    let mean = shared_log_mean(formants, over, tokens)?;
    Ok(SpeakerScale::Log {
        offset: [Some(mean); 3],
    })
}

/// The mean of ln F over the formants used.
pub(super) fn shared_log_mean(
    formants: Formants,
    over: Over,
    tokens: &SpeakerTokens<'_>,
) -> Result<f64, Lacks> {
    let used = formants.count();
    let complete = over.complete(tokens, used)?;
    if complete.is_empty() {
        return Err(Lacks::Values {
            formant: used as u8,
            found: 0,
            needed: 1,
        });
    }
    let total: f64 = complete
        .iter()
        .flat_map(|values| values[..used].iter().map(|hz| hz.ln()))
        .sum();
    Ok(total / (complete.len() * used) as f64)
}
