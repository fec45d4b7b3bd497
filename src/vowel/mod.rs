//! Vowels as symbols: the inventory every stage shares, and the notations labels come in.

mod arpabet;
mod ipa;
mod lexical;
mod notation;
mod own;
mod xsampa;

use std::fmt;

pub use lexical::ReferenceAccent;
pub use notation::Notation;
pub use own::{OwnTable, OwnTableError};

/// A vowel quality, written in IPA in one canonical form.
///
/// Length, nasality and rhoticity are part of the quality (`iː`, `ɛ̃`, `ɝ`); stress is not, and is
/// kept beside it as [`Stress`].
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Vowel(String);

impl Vowel {
    /// Takes an IPA symbol as given, brought to the canonical form: Unicode composition, no
    /// surrounding space, look-alikes replaced (`:` for `ː`, `ə˞` for `ɚ`), tie bars left out.
    pub fn from_ipa(symbol: &str) -> Self {
        Self(ipa::canonical(symbol))
    }

    /// The IPA symbol.
    pub fn ipa(&self) -> &str {
        &self.0
    }

    /// Whether the vowel is r-coloured.
    pub fn rhoticity(&self) -> Rhoticity {
        if self.0.contains(['ɚ', 'ɝ', '˞', 'ɹ', 'ɻ']) {
            Rhoticity::RColoured
        } else {
            Rhoticity::Plain
        }
    }
}

impl fmt::Display for Vowel {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

/// Whether a vowel is r-coloured.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Rhoticity {
    /// Spoken with r-colour, as in American `bird`.
    RColoured,
    /// Without.
    Plain,
}

/// The stress a label states.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Stress {
    /// Main stress.
    Primary,
    /// Secondary stress.
    Secondary,
    /// Stated to be unstressed, by the mark or by a symbol that is only used without stress.
    Unstressed,
    /// The label says nothing about stress.
    Unsaid,
}

/// What a label turned out to be.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum LabelKind {
    /// A vowel, with the stress its label states.
    Vowel(Vowel, Stress),
    /// Known to the notation, and no vowel: a consonant, a closure, silence.
    NotVowel,
    /// Not known to the notation.
    Unknown,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_vowel_has_one_spelling() {
        assert_eq!(Vowel::from_ipa(" i: "), Vowel::from_ipa("iː"));
        assert_eq!(Vowel::from_ipa("ɜ˞"), Vowel::from_ipa("ɝ"));
        assert_eq!(Vowel::from_ipa("e\u{303}"), Vowel::from_ipa("\u{1ebd}"));
        assert_eq!(Vowel::from_ipa("e\u{361}ɪ"), Vowel::from_ipa("eɪ"));
    }

    #[test]
    fn rhoticity_is_kept() {
        assert_eq!(Vowel::from_ipa("ɝ").rhoticity(), Rhoticity::RColoured);
        assert_eq!(Vowel::from_ipa("ɑɹ").rhoticity(), Rhoticity::RColoured);
        assert_eq!(Vowel::from_ipa("ɜː").rhoticity(), Rhoticity::Plain);
    }
}
