//! The methods by name, with what is to be known of each.

use std::fmt;
use std::str::FromStr;

use super::corners::Version;
use super::lobanov::Deviation;
use super::scale::AuditoryScale;
use super::{Lacks, SpeakerScale, SpeakerTokens};
use super::{anae, auditory, gerstman, lobanov, nearey, tube};

/// A way to take a speaker's size out.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Method {
    /// Mean 0 and deviation 1 per formant.
    Lobanov(Deviation, Over),
    /// `ln F` less the speaker's mean of that formant.
    NeareyIndividual(Over),
    /// `ln F` less the speaker's mean over the formants used.
    NeareyShared(Formants, Over),
    /// `ln F` less the speaker's size, the vowels held constant.
    RegressionLogMean,
    /// Scaled to the log-mean of the *Atlas of North American English*.
    AnaeLogMean,
    /// Range 0 to 999 per formant.
    Gerstman,
    /// Multiples of the centre of the speaker's vowel triangle.
    WattFabricius(Version),
    /// Multiples of the speaker's formant spacing.
    DeltaF,
    /// An auditory scale, the same for every speaker.
    Auditory(AuditoryScale),
    /// Differences of neighbouring critical-band rates.
    BarkDifferences,
    /// Logarithms of ratios of neighbouring formants.
    MillerRatios,
}

/// What a mean over a speaker's values runs over.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Over {
    /// Every token, labelled or not.
    Tokens,
    /// The speaker's mean of each labelled vowel, so that each vowel counts once.
    VowelMeans,
}

/// Which formants enter a shared mean.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Formants {
    /// F1 and F2.
    F1F2,
    /// F1, F2 and F3.
    F1F2F3,
}

impl Formants {
    /// How many they are.
    pub fn count(self) -> usize {
        match self {
            Self::F1F2 => 2,
            Self::F1F2F3 => 3,
        }
    }
}

impl Over {
    /// The values of each formant, in hertz.
    pub(super) fn values(self, tokens: &SpeakerTokens<'_>) -> Result<[Vec<f64>; 3], Lacks> {
        let points: Vec<[Option<f64>; 3]> = match self {
            Self::Tokens => tokens.iter().map(|o| o.formant_hz).collect(),
            Self::VowelMeans => {
                let means = tokens.vowel_means();
                if means.is_empty() {
                    return Err(Lacks::Labels);
                }
                means.into_values().collect()
            }
        };
        Ok([0, 1, 2].map(|n| points.iter().filter_map(|p| p[n]).collect()))
    }

    /// The natural logarithms of [`Self::values`].
    pub(super) fn ln_values(self, tokens: &SpeakerTokens<'_>) -> Result<[Vec<f64>; 3], Lacks> {
        Ok(self
            .values(tokens)?
            .map(|values| values.into_iter().map(f64::ln).collect()))
    }

    /// The points that have the first `used` formants, in hertz; the others are 0 in them.
    pub(super) fn complete(
        self,
        tokens: &SpeakerTokens<'_>,
        used: usize,
    ) -> Result<Vec<[f64; 3]>, Lacks> {
        let points: Vec<[Option<f64>; 3]> = match self {
            Self::Tokens => tokens.iter().map(|o| o.formant_hz).collect(),
            Self::VowelMeans => {
                let means = tokens.vowel_means();
                if means.is_empty() {
                    return Err(Lacks::Labels);
                }
                means.into_values().collect()
            }
        };
        Ok(points
            .into_iter()
            .filter(|p| p[..used].iter().all(Option::is_some))
            .map(|p| p.map(|hz| hz.unwrap_or(0.0)))
            .collect())
    }
}

/// What is to be known of a method before using it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Account {
    /// The formula.
    pub formula: &'static str,
    /// Unit of the result.
    pub unit: &'static str,
    /// What it needs of a speaker.
    pub needs: &'static str,
    /// Where it misleads.
    pub pitfalls: &'static str,
    /// Where it was published.
    pub source: &'static str,
    /// Whether a speaker who lacks vowels that others have is placed wrongly by it.
    pub whole_vowel_set: bool,
}

impl Method {
    /// Every method, each in its usual form.
    pub const ALL: [Self; 16] = [
        Self::Lobanov(Deviation::NMinus1, Over::Tokens),
        Self::NeareyIndividual(Over::Tokens),
        Self::NeareyShared(Formants::F1F2F3, Over::Tokens),
        Self::RegressionLogMean,
        Self::AnaeLogMean,
        Self::Gerstman,
        Self::WattFabricius(Version::Original),
        Self::WattFabricius(Version::Modified),
        Self::DeltaF,
        Self::Auditory(AuditoryScale::Hertz),
        Self::Auditory(AuditoryScale::Ln),
        Self::Auditory(AuditoryScale::Bark),
        Self::Auditory(AuditoryScale::ErbRate),
        Self::Auditory(AuditoryScale::Mel),
        Self::BarkDifferences,
        Self::MillerRatios,
    ];

    /// Fits the methods that look at one speaker at a time.
    pub(super) fn fit_speaker(&self, tokens: &SpeakerTokens<'_>) -> Result<SpeakerScale, Lacks> {
        match self {
            Self::Lobanov(deviation, over) => lobanov::fit(*deviation, *over, tokens),
            Self::NeareyIndividual(over) => nearey::fit_individual(*over, tokens),
            Self::NeareyShared(formants, over) => nearey::fit_shared(*formants, *over, tokens),
            Self::AnaeLogMean => anae::fit(tokens),
            Self::Gerstman => gerstman::fit(tokens),
            Self::DeltaF => tube::fit(tokens),
            Self::Auditory(scale) => Ok(SpeakerScale::Auditory(*scale)),
            Self::BarkDifferences => Ok(SpeakerScale::BarkDifferences),
            Self::MillerRatios => auditory::fit_ratios(tokens),
            // These two look at all speakers together; see `Normalization::fit`.
            Self::RegressionLogMean | Self::WattFabricius(_) => Err(Lacks::Connection),
        }
    }

    /// What is to be known of it.
    pub fn account(&self) -> Account {
        match self {
            Self::Lobanov(..) => Account {
                formula: "(F - mean) / deviation, per speaker and formant",
                unit: "deviations",
                needs: "the whole vowel set, in about equal numbers or over vowel means",
                pitfalls: "a missing vowel moves mean and deviation; real differences in the size of \
                           the vowel space are taken out too",
                source: "Lobanov 1971, J. Acoust. Soc. Am. 49, 606-608",
                whole_vowel_set: true,
            },
            Self::NeareyIndividual(_) => Account {
                formula: "ln F - mean of ln F, per speaker and formant",
                unit: "ln hertz",
                needs: "the whole vowel set, in about equal numbers or over vowel means",
                pitfalls: "a missing vowel moves the means",
                source: "Nearey 1978, Phonetic feature systems for vowels",
                whole_vowel_set: true,
            },
            Self::NeareyShared(..) => Account {
                formula: "ln F - mean of ln F over the formants used, per speaker",
                unit: "ln hertz",
                needs: "the whole vowel set, in about equal numbers or over vowel means",
                pitfalls: "which formants enter changes the constant; a missing vowel moves the mean",
                source: "Nearey 1978, Phonetic feature systems for vowels",
                whole_vowel_set: true,
            },
            Self::RegressionLogMean => Account {
                formula: "ln F - g, with ln F = g + b + e by least squares over speakers (g) and \
                          vowels and formants (b)",
                unit: "ln hertz",
                needs: "vowel labels, and a vowel in common with other speakers",
                pitfalls: "values depend on the survey's other speakers; between accents, a speaker \
                           with few vowels gets part of the difference as size",
                source: "Barreda & Nearey 2018, J. Acoust. Soc. Am. 144, 500-520",
                whole_vowel_set: false,
            },
            Self::AnaeLogMean => Account {
                formula: "F exp(6.896874 - S), S = mean of ln F over F1 and F2, per speaker",
                unit: "hertz of a middle speaker",
                needs: "the whole vowel set, in about equal numbers",
                pitfalls: "the constant is another survey's; a missing vowel moves the mean",
                source: "Labov, Ash & Boberg 2006, The Atlas of North American English",
                whole_vowel_set: true,
            },
            Self::Gerstman => Account {
                formula: "999 (F - min) / (max - min) over vowel means, per speaker and formant",
                unit: "0 to 999",
                needs: "vowel labels and the vowels with the extreme values",
                pitfalls: "two values carry the scale: one mistracked vowel spoils a speaker",
                source: "Gerstman 1968, IEEE Trans. Audio Electroacoust. AU-16, 78-80",
                whole_vowel_set: true,
            },
            Self::WattFabricius(version) => Account {
                formula: match version {
                    Version::Original => {
                        "F / S, S = mean over i, the open vowel and u' with F1(u') = F2(u') = F1(i)"
                    }
                    Version::Modified => {
                        "F / S; for F1, S = mean over i, the open vowel and u' with F1(u') = F1(i); \
                         for F2, S = (F2(i) + F1(i)) / 2"
                    }
                },
                unit: "multiples of the centre",
                needs: "vowel labels, /i/ and one open vowel common to all speakers",
                pitfalls: "two vowels carry the scale; no F3; not robust to channels that move F1",
                source: match version {
                    Version::Original => {
                        "Watt & Fabricius 2002, Leeds Working Papers in Linguistics 9, 159-173"
                    }
                    Version::Modified => {
                        "Fabricius, Watt & Johnson 2009, Language Variation and Change 21, 413-435"
                    }
                },
                whole_vowel_set: false,
            },
            Self::DeltaF => Account {
                formula: "F / dF, dF = mean of F_i / (i - 0.5) over F1 to F3, per speaker",
                unit: "formant spacings",
                needs: "F1 to F3, in about equal numbers over the vowels",
                pitfalls: "F3 enters with full weight; a missing vowel moves the mean",
                source: "Johnson 2020, Laboratory Phonology 11, 10",
                whole_vowel_set: true,
            },
            Self::Auditory(scale) => {
                let (formula, unit, source) = match scale {
                    AuditoryScale::Hertz => ("F", "hertz", "none needed"),
                    AuditoryScale::Ln => ("ln F", "ln hertz", "none needed"),
                    AuditoryScale::Bark => (
                        "z = 26.81 F / (1960 + F) - 0.53, corrected below 2 and above 20.1",
                        "Bark",
                        "Traunmueller 1990, J. Acoust. Soc. Am. 88, 97-100",
                    ),
                    AuditoryScale::ErbRate => (
                        "21.4 log10(0.00437 F + 1)",
                        "ERB",
                        "Glasberg & Moore 1990, Hearing Research 47, 103-138",
                    ),
                    AuditoryScale::Mel => (
                        "2595 log10(1 + F / 700)",
                        "mel",
                        "O'Shaughnessy 1987, Speech Communication",
                    ),
                };
                Account {
                    formula,
                    unit,
                    needs: "nothing",
                    pitfalls: "takes no size out: speakers of different size stay apart",
                    source,
                    whole_vowel_set: false,
                }
            }
            Self::BarkDifferences => Account {
                formula: "Z1 - Z0, Z2 - Z1, Z3 - Z2 in Bark, per token",
                unit: "Bark",
                needs: "F0 to F3 of each token; nothing of the speaker",
                pitfalls: "F0 moves with intonation and goes into the first; takes out less size \
                           than methods that look at the speaker",
                source: "Syrdal & Gopal 1986, J. Acoust. Soc. Am. 79, 1086-1100",
                whole_vowel_set: false,
            },
            Self::MillerRatios => Account {
                formula: "log10 of F1/SR, F2/F1, F3/F2, SR = 168 (GM F0 / 168)^(1/3)",
                unit: "log10",
                needs: "F0 of the speaker, F1 to F3 of each token",
                pitfalls: "as with Bark differences; size only through F0",
                source: "Miller 1989, J. Acoust. Soc. Am. 85, 2114-2134",
                whole_vowel_set: false,
            },
        }
    }
}

/// What goes after a method's name for each choice within it.
fn over_text(over: Over) -> &'static str {
    match over {
        Over::Tokens => "tokens",
        Over::VowelMeans => "vowel-means",
    }
}

impl fmt::Display for Method {
    /// The full name, with every choice said; [`Method::from_str`] reads it back.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Lobanov(deviation, over) => {
                let deviation = match deviation {
                    Deviation::N => "n",
                    Deviation::NMinus1 => "n-1",
                };
                write!(f, "lobanov:{deviation}:{}", over_text(*over))
            }
            Self::NeareyIndividual(over) => write!(f, "nearey-individual:{}", over_text(*over)),
            Self::NeareyShared(formants, over) => {
                let formants = match formants {
                    Formants::F1F2 => "f1-f2",
                    Formants::F1F2F3 => "f1-f3",
                };
                write!(f, "nearey-shared:{formants}:{}", over_text(*over))
            }
            Self::RegressionLogMean => f.write_str("regression-log-mean"),
            Self::AnaeLogMean => f.write_str("anae-log-mean"),
            Self::Gerstman => f.write_str("gerstman"),
            Self::WattFabricius(Version::Original) => f.write_str("watt-fabricius"),
            Self::WattFabricius(Version::Modified) => f.write_str("watt-fabricius-modified"),
            Self::DeltaF => f.write_str("delta-f"),
            Self::Auditory(scale) => f.write_str(match scale {
                AuditoryScale::Hertz => "hertz",
                AuditoryScale::Ln => "ln",
                AuditoryScale::Bark => "bark",
                AuditoryScale::ErbRate => "erb-rate",
                AuditoryScale::Mel => "mel",
            }),
            Self::BarkDifferences => f.write_str("bark-differences"),
            Self::MillerRatios => f.write_str("miller-ratios"),
        }
    }
}

/// Why a name is no method.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum MethodError {
    /// Unknown name.
    #[error("`{0}` is no normalization method")]
    Name(String),
    /// A choice the method does not have.
    #[error("`{name}` has no choice `{choice}`")]
    Choice {
        /// The method.
        name: String,
        /// What was asked for.
        choice: String,
    },
}

impl FromStr for Method {
    type Err = MethodError;

    /// Reads a name, with choices after colons in any order; choices left out take the usual form
    /// (`n-1`, `tokens`, `f1-f3`).
    fn from_str(text: &str) -> Result<Self, MethodError> {
        let lower = text.trim().to_lowercase();
        let mut parts = lower.split(':').map(str::trim);
        let name = parts.next().unwrap_or_default();
        let usual = Self::ALL.into_iter().find(|method| {
            let full = method.to_string();
            full.split(':').next() == Some(name)
        });
        let mut method = usual.ok_or_else(|| MethodError::Name(text.trim().to_owned()))?;
        for choice in parts {
            match (&mut method, choice) {
                (Self::Lobanov(deviation, _), "n") => *deviation = Deviation::N,
                (Self::Lobanov(deviation, _), "n-1") => *deviation = Deviation::NMinus1,
                (Self::NeareyShared(formants, _), "f1-f2") => *formants = Formants::F1F2,
                (Self::NeareyShared(formants, _), "f1-f3") => *formants = Formants::F1F2F3,
                (
                    Self::Lobanov(_, over)
                    | Self::NeareyIndividual(over)
                    | Self::NeareyShared(_, over),
                    "tokens" | "vowel-means",
                ) => {
                    *over = if choice == "tokens" {
                        Over::Tokens
                    } else {
                        Over::VowelMeans
                    };
                }
                _ => {
                    return Err(MethodError::Choice {
                        name: name.to_owned(),
                        choice: choice.to_owned(),
                    });
                }
            }
        }
        Ok(method)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_read_back() {
        for method in Method::ALL {
            assert_eq!(method.to_string().parse(), Ok(method.clone()));
        }
        assert_eq!(
            "Lobanov:vowel-means:n".parse(),
            Ok(Method::Lobanov(Deviation::N, Over::VowelMeans))
        );
        assert_eq!(
            "nearey-shared:f1-f2".parse(),
            Ok(Method::NeareyShared(Formants::F1F2, Over::Tokens))
        );
    }

    #[test]
    fn other_names_and_choices_are_refused() {
        assert!(matches!("".parse::<Method>(), Err(MethodError::Name(_))));
        assert!(matches!(
            "nearey".parse::<Method>(),
            Err(MethodError::Name(_))
        ));
        assert!(matches!(
            "gerstman:n".parse::<Method>(),
            Err(MethodError::Choice { .. })
        ));
    }
}
