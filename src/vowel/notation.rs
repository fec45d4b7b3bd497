//! The notations labels come in, and which of them a set of labels is written in.

use super::{LabelKind, OwnTable, ReferenceAccent, arpabet, ipa, lexical, xsampa};

/// How a survey writes its labels.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Notation {
    /// IPA symbols.
    Ipa,
    /// ARPABET, upper or lower case, stress digits allowed; also the lower-case phone set of
    /// hand-aligned read sentences (`ux`, `ax-h`, `pcl`, `h#` …).
    Arpabet,
    /// X-SAMPA symbols.
    XSampa,
    /// Keywords of lexical sets, with the values of an accent.
    LexicalSets(ReferenceAccent),
    /// A survey's own labels.
    Own(OwnTable),
}

impl Notation {
    /// The notations by the names a survey file and the options know them by.
    pub const NAMED: [(&'static str, Self); 5] = [
        ("ipa", Self::Ipa),
        ("arpabet", Self::Arpabet),
        ("x-sampa", Self::XSampa),
        (
            "lexical-sets",
            Self::LexicalSets(ReferenceAccent::GeneralAmerican),
        ),
        (
            "lexical-sets-british",
            Self::LexicalSets(ReferenceAccent::SouthernBritish),
        ),
    ];

    /// The notation of this name.
    pub fn named(name: &str) -> Option<Self> {
        let (_, notation) = Self::NAMED.into_iter().find(|(known, _)| *known == name)?;
        Some(notation)
    }

    /// The name of the notation.
    pub fn name(&self) -> &'static str {
        match self {
            Self::Ipa => "ipa",
            Self::Arpabet => "arpabet",
            Self::XSampa => "x-sampa",
            Self::LexicalSets(ReferenceAccent::GeneralAmerican) => "lexical-sets",
            Self::LexicalSets(ReferenceAccent::SouthernBritish) => "lexical-sets-british",
            Self::Own(_) => "own",
        }
    }

    /// Reads one label.
    ///
    /// An empty label is no vowel. Nothing is guessed: a label the notation does not define is
    /// [`LabelKind::Unknown`], for the caller to count and report.
    ///
    /// ```
    /// use isophone::vowel::{LabelKind, Notation, Stress, Vowel};
    /// let read = Notation::Arpabet.read("IY1");
    /// assert_eq!(read, LabelKind::Vowel(Vowel::from_ipa("i"), Stress::Primary));
    /// assert_eq!(Notation::Arpabet.read("pcl"), LabelKind::NotVowel);
    /// ```
    pub fn read(&self, label: &str) -> LabelKind {
        let label = label.trim();
        if label.is_empty() {
            return LabelKind::NotVowel;
        }
        match self {
            Self::Ipa => ipa::read(label),
            Self::Arpabet => arpabet::read(label),
            Self::XSampa => xsampa::read(label),
            Self::LexicalSets(accent) => lexical::read(label, *accent),
            Self::Own(table) => table.read(label),
        }
    }

    /// The notation that knows most of these labels; the first of [`Self::NAMED`] where several know
    /// as many.
    ///
    /// For surveys that do not say how they write their labels. The labels are taken with their
    /// repetitions, so that common ones count for more.
    pub fn guess<'a>(labels: impl IntoIterator<Item = &'a str> + Clone) -> Self {
        let known = |notation: &Self| {
            labels
                .clone()
                .into_iter()
                .filter(|label| notation.read(label) != LabelKind::Unknown)
                .count()
        };
        let mut best = Self::Ipa;
        let mut most = known(&best);
        for (_, notation) in Self::NAMED {
            let count = known(&notation);
            if count > most {
                (best, most) = (notation, count);
            }
        }
        best
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_tell_their_notation() {
        assert_eq!(Notation::guess(["i", "ɛ", "ɝ", "u"]), Notation::Ipa);
        assert_eq!(Notation::guess(["h#", "sh", "iy", "k"]), Notation::Arpabet);
        assert_eq!(Notation::guess(["IY1", "ER0", "SIL"]), Notation::Arpabet);
        assert_eq!(Notation::guess(["I", "{", "tS", "@"]), Notation::XSampa);
        assert_eq!(
            Notation::guess(["FLEECE", "TRAP", "GOAT"]),
            Notation::LexicalSets(ReferenceAccent::GeneralAmerican)
        );
        assert_eq!(Notation::guess([]), Notation::Ipa);
    }
    #[test]
    fn names_lead_back_to_their_notation() {
        for (name, notation) in Notation::NAMED {
            assert_eq!(notation.name(), name);
            assert_eq!(Notation::named(name), Some(notation));
        }
        assert_eq!(Notation::named("runes"), None);
    }
}
