//! Delta-F: the spacing of formants in a uniform tube as long as the speaker's tract.
//!
//! *Formula*: `F / dF`, with `dF` the mean of `F_i / (i - 0.5)` over the speaker's F1 to F3. A
//! uniform tube closed at one end has `F_i = (i - 0.5) dF` and is `c / (2 dF)` long.
//!
//! *Needs* tokens with all three formants, balanced over the vowels.
//!
//! *Pitfalls*: the mean of a few vowels stands where those vowels are; a mistracked F3 goes in with
//! full weight. The length is that of the tube and only roughly that of the tract.
//!
//! *Source*: Johnson 2020, Laboratory Phonology 11, 10.

use super::method::Over;
use super::{Lacks, SpeakerScale, SpeakerTokens};

/// Speed of sound in warm moist air, cm/s, as in Johnson 2020.
const SOUND_CM_PER_S: f64 = 35_000.0;

/// The size of a speaker's vocal tract, as a uniform tube.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TractSize {
    /// Spacing of its resonances, in hertz.
    pub spacing_hz: f64,
    /// Its length, in centimetres.
    pub length_cm: f64,
    /// Tokens it was found from: those with F1, F2 and F3.
    pub tokens: usize,
}

/// The size of a speaker's tract from all tokens with F1, F2 and F3.
///
/// # Errors
/// [`Lacks`] where there is no such token.
pub fn tract_size(tokens: &SpeakerTokens<'_>) -> Result<TractSize, Lacks> {
    let complete = Over::Tokens.complete(tokens, 3)?;
    if complete.is_empty() {
        return Err(Lacks::Values {
            formant: 3,
            found: 0,
            needed: 1,
        });
    }
    let total: f64 = complete
        .iter()
        .flat_map(|values| (0..3).map(|n| values[n] / (n as f64 + 0.5)))
        .sum();
    let spacing_hz = total / (3 * complete.len()) as f64;
    Ok(TractSize {
        spacing_hz,
        length_cm: SOUND_CM_PER_S / (2.0 * spacing_hz),
        tokens: complete.len(),
    })
}

/// One factor for all formants.
pub(super) fn fit(tokens: &SpeakerTokens<'_>) -> Result<SpeakerScale, Lacks> {
    let size = tract_size(tokens)?;
    Ok(SpeakerScale::Affine {
        centre_hz: [Some(0.0); 3],
        width_hz: [Some(size.spacing_hz); 3],
    })
}
