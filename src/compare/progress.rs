//! The same speaker at two times, against the same norm.

use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::check::{NormCheck, VowelCheck};
use super::difference::student_quantile;

/// How one vowel changed.
#[derive(Debug, Clone, PartialEq)]
pub struct VowelProgress {
    /// The vowel.
    pub vowel: Vowel,
    /// Distance from the norm in its standard deviations, earlier and later.
    pub distance_sd: [f64; 2],
    /// Later less earlier offset of F1 and F2 in the same unit, with 95 % intervals over tokens
    /// (Welch 1947, Biometrika 34, 28-35); `None` where one time has a single token.
    pub change_sd: [(f64, Option<[f64; 2]>); 2],
}

/// What can be said of a change.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Way {
    /// Moved, and stands nearer to the norm.
    Nearer,
    /// Moved, and stands further from it.
    Further,
    /// No change that the scatter of tokens would not give.
    NoEvidence,
}

impl Way {
    /// In words.
    pub fn text(self) -> &'static str {
        match self {
            Self::Nearer => "nearer to the norm",
            Self::Further => "further from the norm",
            Self::NoEvidence => "no evidence of a change",
        }
    }
}

impl VowelProgress {
    /// What can be said: a change counts where the interval of a formant leaves out zero.
    pub fn way(&self) -> Way {
        let moved = self
            .change_sd
            .iter()
            .any(|(_, interval)| interval.is_some_and(|[low, high]| low > 0.0 || high < 0.0));
        match self.distance_sd {
            _ if !moved => Way::NoEvidence,
            [earlier, later] if later < earlier => Way::Nearer,
            _ => Way::Further,
        }
    }
}

/// Compares two checks of a speaker against one norm; `tokens` holds the tokens of both.
pub fn progress(
    earlier: &NormCheck,
    later: &NormCheck,
    tokens: &[Observation],
) -> Vec<VowelProgress> {
    later
        .vowels
        .iter()
        .filter_map(|now| {
            let then = earlier.vowels.iter().find(|v| v.vowel == now.vowel)?;
            let change_sd = [0, 1].map(|k| {
                let spread = spread(now, k);
                let of = |check: &NormCheck| -> Vec<f64> {
                    let own = tokens.iter().filter(|o| {
                        o.speaker == check.speaker && o.vowel.as_ref() == Some(&now.vowel)
                    });
                    own.filter_map(|o| Some((o.formant_hz[k]?.ln() - check.size.ln()) / spread))
                        .collect()
                };
                change(&of(earlier), &of(later))
            });
            Some(VowelProgress {
                vowel: now.vowel.clone(),
                distance_sd: [then.distance_sd(), now.distance_sd()],
                change_sd,
            })
        })
        .collect()
}

/// The norm's spread in ln hertz, from an offset and its standard deviations.
fn spread(v: &VowelCheck, k: usize) -> f64 {
    (v.place_hz[k] / v.norm_hz[k]).ln() / v.offsets[k].sd
}

fn change(earlier: &[f64], later: &[f64]) -> (f64, Option<[f64; 2]>) {
    let moments = |x: &[f64]| {
        let n = x.len() as f64;
        let mean = x.iter().sum::<f64>() / n;
        let squares = x.iter().map(|v| (v - mean).powi(2)).sum::<f64>();
        (mean, squares / (n - 1.0) / n, n - 1.0)
    };
    let ((a, va, fa), (b, vb, fb)) = (moments(earlier), moments(later));
    let interval = (fa >= 1.0 && fb >= 1.0 && va + vb > 0.0).then(|| {
        let freedom = (va + vb).powi(2) / (va * va / fa + vb * vb / fb);
        let reach = student_quantile(freedom) * (va + vb).sqrt();
        [b - a - reach, b - a + reach]
    });
    (b - a, interval)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_change_has_welchs_interval() {
        let (value, interval) = change(&[1.2, 0.7, 1.9, 2.4, 1.1], &[2.2, 3.1, 1.8, 2.9, 3.4, 2.0]);
        assert!((value - (15.4 / 6.0 - 7.3 / 5.0)).abs() < 1e-12);
        // scipy 1.17.1: ttest_ind(y, x, equal_var=False).confidence_interval().
        let [low, high] = interval.unwrap();
        assert!((low - 0.18300377975992355).abs() < 1e-9);
        assert!((high - 2.0303295535734107).abs() < 1e-9);
        assert_eq!(change(&[1.0], &[2.0, 3.0]).1, None);
    }

    #[test]
    fn a_way_needs_a_change_that_is_sure() {
        let vowel = |interval: [f64; 2], distance_sd: [f64; 2]| VowelProgress {
            vowel: Vowel::from_ipa("i"),
            distance_sd,
            change_sd: [(0.5, Some(interval)), (0.0, None)],
        };
        assert_eq!(vowel([0.1, 0.9], [2.0, 1.0]).way(), Way::Nearer);
        assert_eq!(vowel([0.1, 0.9], [1.0, 2.0]).way(), Way::Further);
        assert_eq!(vowel([-0.1, 0.9], [2.0, 1.0]).way(), Way::NoEvidence);
    }
}
