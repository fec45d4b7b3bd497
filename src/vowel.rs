//! Vowels as symbols: the inventory every stage shares, and the notations labels come in.

use std::fmt;

use unicode_normalization::UnicodeNormalization;

/// A vowel quality, written in IPA in one canonical form.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Vowel(String);

impl Vowel {
    /// Takes an IPA symbol as given, brought to canonical Unicode composition and trimmed.
    pub fn from_ipa(symbol: &str) -> Self {
        Self(symbol.trim().nfc().collect())
    }

    /// The IPA symbol.
    pub fn ipa(&self) -> &str {
        &self.0
    }
}

impl fmt::Display for Vowel {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

/// How a survey writes its labels.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Notation {
    /// IPA symbols.
    Ipa,
    /// ARPABET, upper or lower case, stress digits allowed; also the lower-case phone set of
    /// hand-aligned read sentences (`ux`, `ax-h`, `pcl`, `h#` …).
    Arpabet,
}

/// What a label turned out to be.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum LabelKind {
    /// A vowel.
    Vowel(Vowel),
    /// Known to the notation, and no vowel: a consonant, a closure, silence.
    NotVowel,
    /// Not known to the notation.
    Unknown,
}
