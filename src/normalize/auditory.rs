//! Auditory scales, and the two vowel-intrinsic methods built on them.
//!
//! *Bark differences* (Syrdal & Gopal 1986, J. Acoust. Soc. Am. 79, 1086-1100): `Z1-Z0`, `Z2-Z1`,
//! `Z3-Z2` in Bark. Needs F0 and F1 to F3 of the token itself and nothing else of the speaker.
//! Pitfalls: F0 moves with intonation and mood and carries into the first difference; a lost F3
//! costs the third.
//!
//! *Ratios* (Miller 1989, J. Acoust. Soc. Am. 85, 2114-2134): `log F1/SR`, `log F2/F1`,
//! `log F3/F2`, with the speaker's sensory reference `SR = 168 (GM F0 / 168)^(1/3)` hertz, `GM F0`
//! the geometric mean of the speaker's F0. Logarithms to base 10. Pitfalls as above.

use super::scale::{AuditoryScale, Values};
use super::{Lacks, SpeakerScale, SpeakerTokens};

/// A difference `Z1-Z0` below this, in Bark, marks a close vowel (Syrdal & Gopal 1986).
pub const HEIGHT_BARK: f64 = 3.0;

/// A difference `Z3-Z2` below this, in Bark, marks a front vowel (Syrdal & Gopal 1986).
pub const BACKNESS_BARK: f64 = 3.0;

/// The anchor of the sensory reference, in hertz (Miller 1989).
const SENSORY_ANCHOR_HZ: f64 = 168.0;

impl AuditoryScale {
    /// The value of a frequency on the scale.
    ///
    /// *Source*: Bark, Traunmueller 1990, J. Acoust. Soc. Am. 88, 97-100, with its corrections below 2
    /// and above 20.1 Bark; ERB-rate, Glasberg & Moore 1990, Hearing Research 47, 103-138; mel,
    /// O'Shaughnessy 1987, *Speech Communication*, p. 150.
    pub fn of_hz(self, hz: f64) -> f64 {
        match self {
            Self::Hertz => hz,
            Self::Ln => hz.ln(),
            Self::Bark => {
                let z = 26.81 * hz / (1960.0 + hz) - 0.53;
                if z < 2.0 {
                    z + 0.15 * (2.0 - z)
                } else if z > 20.1 {
                    z + 0.22 * (z - 20.1)
                } else {
                    z
                }
            }
            Self::ErbRate => 21.4 * (0.00437 * hz + 1.0).log10(),
            Self::Mel => 2595.0 * (1.0 + hz / 700.0).log10(),
        }
    }

    /// The frequency of a value on the scale, in hertz.
    pub fn to_hz(self, value: f64) -> f64 {
        match self {
            Self::Hertz => value,
            Self::Ln => value.exp(),
            Self::Bark => {
                let z = if value < 2.0 {
                    (value - 0.3) / 0.85
                } else if value > 20.1 {
                    (value + 4.422) / 1.22
                } else {
                    value
                };
                1960.0 * (z + 0.53) / (26.28 - z)
            }
            Self::ErbRate => (10f64.powf(value / 21.4) - 1.0) / 0.00437,
            Self::Mel => 700.0 * (10f64.powf(value / 2595.0) - 1.0),
        }
    }
}

/// `Z1-Z0`, `Z2-Z1`, `Z3-Z2` in Bark.
pub(super) fn bark_differences(values: &Values) -> [Option<f64>; 3] {
    let bark = |hz: Option<f64>| hz.map(|hz| AuditoryScale::Bark.of_hz(hz));
    let z0 = bark(values.f0_hz);
    let [z1, z2, z3] = values.formant_hz.map(bark);
    let difference = |high: Option<f64>, low: Option<f64>| Some(high? - low?);
    [difference(z1, z0), difference(z2, z1), difference(z3, z2)]
}

/// `log F1/SR`, `log F2/F1`, `log F3/F2`, to base 10.
pub(super) fn ratios(values: &Values, reference_hz: f64) -> [Option<f64>; 3] {
    let [f1, f2, f3] = values.formant_hz;
    let ratio = |high: Option<f64>, low: Option<f64>| Some((high? / low?).log10());
    [ratio(f1, Some(reference_hz)), ratio(f2, f1), ratio(f3, f2)]
}

/// The speaker's sensory reference.
pub(super) fn fit_ratios(tokens: &SpeakerTokens<'_>) -> Result<SpeakerScale, Lacks> {
    let ln_f0: Vec<f64> = tokens.iter().filter_map(|o| o.f0_hz).map(f64::ln).collect();
    if ln_f0.is_empty() {
        return Err(Lacks::F0);
    }
    let geometric_mean_hz = (ln_f0.iter().sum::<f64>() / ln_f0.len() as f64).exp();
    Ok(SpeakerScale::Ratios {
        reference_hz: SENSORY_ANCHOR_HZ * (geometric_mean_hz / SENSORY_ANCHOR_HZ).cbrt(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn scales_agree_with_their_formulas() {
        // Bark, ERB-rate and mel of six frequencies, computed from the published formulas in
        // double precision outside the program; digits as given there.
        let table = [
            (100.0, 0.9557, 3.3696, 150.489),
            (200.0, 1.9595, 5.8373, 283.230),
            (500.0, 4.9192, 10.7665, 607.446),
            (1000.0, 8.5274, 15.6214, 999.986),
            (2500.0, 14.4980, 23.0362, 1712.835),
            (3500.0, 16.6559, 25.9380, 2019.302),
        ];
        for (hz, bark, erb, mel) in table {
            assert!((AuditoryScale::Bark.of_hz(hz) - bark).abs() < 5e-5, "{hz}");
            assert!(
                (AuditoryScale::ErbRate.of_hz(hz) - erb).abs() < 5e-5,
                "{hz}"
            );
            assert!((AuditoryScale::Mel.of_hz(hz) - mel).abs() < 5e-4, "{hz}");
        }
    }

    #[test]
    fn ratios_are_anchored_by_the_cube_root_of_f0() {
        // F0 of 1344 Hz is 8 times the anchor; its cube root is 2.
        let observation = crate::tokens::Observation {
            token: "t".to_owned(),
            speaker: "s".to_owned(),
            vowel: None,
            duration_s: None,
            f0_hz: Some(1344.0),
            formant_hz: [Some(336.0), Some(3360.0), Some(6720.0)],
            sd_hz: [None; 3],
            track: Vec::new(),
        };
        let observations = [observation];
        let speakers = SpeakerTokens::of(&observations);
        let scale = fit_ratios(&speakers["s"]).unwrap();
        let value = scale.apply(&Values::of(&observations[0]));
        let expected = [0.0, 1.0, 2f64.log10()];
        for (value, expected) in value.iter().zip(expected) {
            assert!((value.unwrap() - expected).abs() < 1e-12);
        }
    }
}
