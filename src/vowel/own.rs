//! A survey's own labels, through a small table.

use std::collections::BTreeMap;

use super::{LabelKind, Notation, ipa};

/// A survey's own labels with what they mean, and a notation for the labels it does not list.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct OwnTable {
    labels: BTreeMap<String, LabelKind>,
    others: Option<Box<Notation>>,
}

/// A meaning that is no vowel.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error(
    "the label `{label}` is said to mean `{meaning}`; expected an IPA vowel, or nothing for a label that is no vowel"
)]
pub struct OwnTableError {
    /// The label.
    pub label: String,
    /// What it is said to mean.
    pub meaning: String,
}

impl OwnTable {
    /// Takes label and meaning in pairs: an IPA vowel, or empty for a label that is no vowel. Labels
    /// the table does not list are read in the notation `others`, or unknown without one.
    ///
    /// # Errors
    /// [`OwnTableError`] where a meaning is not an IPA vowel.
    pub fn new<'a>(
        pairs: impl IntoIterator<Item = (&'a str, &'a str)>,
        others: Option<Notation>,
    ) -> Result<Self, OwnTableError> {
        let mut labels = BTreeMap::new();
        for (label, meaning) in pairs {
            let kind = if meaning.trim().is_empty() {
                LabelKind::NotVowel
            } else {
                match ipa::read(meaning.trim()) {
                    LabelKind::NotVowel | LabelKind::Unknown => {
                        return Err(OwnTableError {
                            label: label.to_owned(),
                            meaning: meaning.to_owned(),
                        });
                    }
                    vowel => vowel,
                }
            };
            labels.insert(label.trim().to_owned(), kind);
        }
        Ok(Self {
            labels,
            others: others.map(Box::new),
        })
    }

    /// Reads one label.
    pub(super) fn read(&self, label: &str) -> LabelKind {
        match (self.labels.get(label), &self.others) {
            (Some(kind), _) => kind.clone(),
            (None, Some(others)) => others.read(label),
            (None, None) => LabelKind::Unknown,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::{Stress, Vowel};
    use super::*;

    #[test]
    fn the_table_comes_first_and_others_after_it() {
        let table = OwnTable::new([("short-a", "æ"), ("V4", "ˈɔ"), ("tap", "")], None);
        let alone = Notation::Own(table.expect("a table"));
        let vowel = |ipa: &str, stress| LabelKind::Vowel(Vowel::from_ipa(ipa), stress);
        assert_eq!(alone.read(" short-a "), vowel("æ", Stress::Unsaid));
        assert_eq!(alone.read("V4"), vowel("ɔ", Stress::Primary));
        assert_eq!(alone.read("tap"), LabelKind::NotVowel);
        assert_eq!(alone.read("iy"), LabelKind::Unknown);
        let table = OwnTable::new([("short-a", "æ")], Some(Notation::Arpabet));
        let both = Notation::Own(table.expect("a table"));
        assert_eq!(both.read("iy"), vowel("i", Stress::Unsaid));
    }

    #[test]
    fn a_meaning_that_is_no_vowel_is_refused() {
        let error = OwnTable::new([("x", "t")], None).expect_err("a consonant");
        assert_eq!((error.label.as_str(), error.meaning.as_str()), ("x", "t"));
        assert!(OwnTable::new([("x", "heed")], None).is_err());
    }
}
