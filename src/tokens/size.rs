//! The speaker's size, found from all of the speaker's tokens at once, and the vowel-blind belief
//! it gives.
//!
//! One broad cloud stands for all vowels of all speakers; a speaker only moves it. It says nothing
//! about any one vowel: /u/ as front as `y` lies as well inside it as /u/ does.

/// Centre of the cloud of all vowels for a speaker of middle size: ln of F1, F2, F3 in hertz.
///
/// *Source*: means over vowels and over men, women and children of Peterson & Barney (1952, JASA
/// 24, 175-184, Table II: 6.310, 7.354, 7.925) and of Hillenbrand et al. (1995, JASA 97, 3099-3111,
/// Table V: 6.360, 7.401, 7.935), averaged.
const CENTRE: [f64; 3] = [6.335, 7.377, 7.930];

/// Spread of the cloud. The tables above have 0.22-0.33, 0.32-0.38 and 0.13-0.14 over their vowels.
const SPREAD: [f64; 3] = [0.35, 0.32, 0.13];

/// Largest size found, as a factor exp(0.4) = 1.5 either way: from the largest man to below an
/// infant.
const MOST: f64 = 0.4;

/// A speaker's size: how far ln F of all formants is moved from the middle speaker's.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub(super) struct Size(f64);

impl Size {
    /// The size that best centres the cloud on readings of ln F1, F2, F3: the mean offset, each
    /// formant weighted by the inverse of its variance.
    pub(super) fn of(readings: impl Iterator<Item = [f64; 3]>) -> Self {
        let (mut sum, mut weight) = (0.0, 0.0);
        for ln_hz in readings {
            for k in 0..3 {
                let w = 1.0 / (SPREAD[k] * SPREAD[k]);
                sum += w * (ln_hz[k] - CENTRE[k]);
                weight += w;
            }
        }
        if weight > 0.0 {
            Self((sum / weight).clamp(-MOST, MOST))
        } else {
            Self(0.0)
        }
    }

    /// Log belief in a reading of ln F1, F2, F3 by a speaker of this size, up to a constant.
    pub(super) fn belief(self, ln_hz: [f64; 3]) -> f64 {
        -0.5 * (0..3)
            .map(|k| {
                let x = (ln_hz[k] - CENTRE[k] - self.0) / SPREAD[k];
                x * x
            })
            .sum::<f64>()
    }
}
