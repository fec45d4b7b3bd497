//! Lobanov: every formant of a speaker to mean 0 and deviation 1.
//!
//! *Formula*: `(F - mean) / deviation`, per speaker and formant, in hertz.
//!
//! *Needs* at least two different values of each formant, and in fact the speaker's whole vowel
//! set: mean and deviation of half a set are those of another set.
//!
//! *Pitfalls*: the original's deviation is a root mean square (divides by N), most present use
//! divides by N-1; on 12 tokens they differ by 4 %. Over tokens, a speaker with many tokens of one
//! vowel is shifted toward it; over vowel means each vowel counts once. Real differences in the
//! size of the vowel space between speakers are taken out with the rest. Different vowel systems
//! must not be compared after it (Disner 1980, J. Acoust. Soc. Am. 67, 253-261).
//!
//! *Source*: Lobanov 1971, J. Acoust. Soc. Am. 49, 606-608.

use super::method::Over;
use super::{Lacks, SpeakerScale, SpeakerTokens};

/// What the sum of squares is divided by.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Deviation {
    /// N, as in the original.
    N,
    /// N-1, as in most present use.
    NMinus1,
}

/// The speaker's means and deviations.
///
/// # Errors
/// [`Lacks`] where F1 or F2 has fewer than two different values; F3 is left out instead, so that
/// tables without it can be normalized.
pub(super) fn fit(
    deviation: Deviation,
    over: Over,
    tokens: &SpeakerTokens<'_>,
) -> Result<SpeakerScale, Lacks> {
    let mut centre_hz = [None; 3];
    let mut width_hz = [None; 3];
    for (n, values) in over.values(tokens)?.into_iter().enumerate() {
        let formant = n as u8 + 1;
        match centre_and_width(deviation, formant, &values) {
            Ok((centre, width)) => {
                centre_hz[n] = Some(centre);
                width_hz[n] = Some(width);
            }
            Err(lack) if n < 2 => return Err(lack),
            Err(_) => {}
        }
    }
    Ok(SpeakerScale::Affine {
        centre_hz,
        width_hz,
    })
}

fn centre_and_width(
    deviation: Deviation,
    formant: u8,
    values_hz: &[f64],
) -> Result<(f64, f64), Lacks> {
    let n = values_hz.len();
    if n < 2 {
        return Err(Lacks::Values {
            formant,
            found: n,
            needed: 2,
        });
    }
    let mean = values_hz.iter().sum::<f64>() / n as f64;
    let squares: f64 = values_hz.iter().map(|v| (v - mean).powi(2)).sum();
    let divisor = match deviation {
        Deviation::N => n as f64,
        Deviation::NMinus1 => (n - 1) as f64,
    };
    let width = (squares / divisor).sqrt();
    // Equal values can leave a deviation of rounding errors only.
    if width <= 1e-9 * mean.abs() {
        return Err(Lacks::Spread { formant });
    }
    Ok((mean, width))
}
