//! Gerstman: every formant of a speaker to the range 0 to 999.
//!
//! *Formula*: `999 (F - min) / (max - min)`, with the extremes taken over the speaker's vowel means.
//!
//! *Needs* vowel labels and the vowels with the lowest and highest F1 and F2.
//!
//! *Pitfalls*: two values carry the whole scale, so one mistracked extreme spoils a speaker; taking
//! vowel means softens that, as here. Speakers without an extreme vowel are stretched.
//!
//! *Source*: Gerstman 1968, IEEE Trans. Audio Electroacoust. AU-16, 78-80.

use super::method::Over;
use super::{Lacks, SpeakerScale, SpeakerTokens};

/// The speaker's extremes.
///
/// # Errors
/// [`Lacks`] where F1 or F2 has fewer than two different vowel means; F3 is left out instead.
pub(super) fn fit(tokens: &SpeakerTokens<'_>) -> Result<SpeakerScale, Lacks> {
    let mut centre_hz = [None; 3];
    let mut width_hz = [None; 3];
    for (n, means) in Over::VowelMeans.values(tokens)?.into_iter().enumerate() {
        let low = means.iter().copied().fold(f64::INFINITY, f64::min);
        let high = means.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        if high > low {
            centre_hz[n] = Some(low);
            width_hz[n] = Some((high - low) / 999.0);
        } else if n < 2 {
            let formant = n as u8 + 1;
            return Err(if means.len() < 2 {
                Lacks::Values {
                    formant,
                    found: means.len(),
                    needed: 2,
                }
            } else {
                Lacks::Spread { formant }
            });
        }
    }
    Ok(SpeakerScale::Affine {
        centre_hz,
        width_hz,
    })
}
