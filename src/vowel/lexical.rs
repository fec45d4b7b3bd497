//! Lexical sets: vowels named by a keyword.
//!
//! A keyword names a set of words, and what vowel they have depends on the accent: the values are
//! those of one of two reference accents. Sets that the accent does not tell apart (TRAP and BATH in
//! General American) become one vowel; a survey that wants them apart gives its own table.
//!
//! *Source*: Wells 1982, *Accents of English*, volume 1, 2.2; keywords and the two accents' values
//! from memory. FACE and GOAT of General American are written `e` and `o`, as in Hillenbrand et al.
//! 1995; DRESS and NURSE of the British accent as in Deterding 1997.

use super::{LabelKind, Stress, Vowel};

/// The accent whose values the keywords stand for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum ReferenceAccent {
    /// General American.
    GeneralAmerican,
    /// Southern British.
    SouthernBritish,
}

/// Keyword, American value, British value.
const SETS: [(&str, &str, &str); 27] = [
    ("KIT", "ɪ", "ɪ"),
    ("DRESS", "ɛ", "e"),
    ("TRAP", "æ", "æ"),
    ("LOT", "ɑ", "ɒ"),
    ("STRUT", "ʌ", "ʌ"),
    ("FOOT", "ʊ", "ʊ"),
    ("BATH", "æ", "ɑː"),
    ("CLOTH", "ɔ", "ɒ"),
    ("NURSE", "ɝ", "ɜː"),
    ("FLEECE", "i", "iː"),
    ("FACE", "e", "eɪ"),
    ("PALM", "ɑ", "ɑː"),
    ("THOUGHT", "ɔ", "ɔː"),
    ("GOAT", "o", "əʊ"),
    ("GOOSE", "u", "uː"),
    ("PRICE", "aɪ", "aɪ"),
    ("CHOICE", "ɔɪ", "ɔɪ"),
    ("MOUTH", "aʊ", "aʊ"),
    ("NEAR", "ɪɹ", "ɪə"),
    ("SQUARE", "ɛɹ", "ɛə"),
    ("START", "ɑɹ", "ɑː"),
    ("NORTH", "ɔɹ", "ɔː"),
    ("FORCE", "oɹ", "ɔː"),
    ("CURE", "ʊɹ", "ʊə"),
    ("HAPPY", "i", "i"),
    ("LETTER", "ɚ", "ə"),
    ("COMMA", "ə", "ə"),
];

/// The sets of unstressed syllables.
const UNSTRESSED: [&str; 3] = ["HAPPY", "LETTER", "COMMA"];

/// Marks of silence; common practice.
const SILENCE: [&str; 4] = ["#", "_", "SIL", "PAU"];

/// Reads one keyword, in any mixture of cases.
pub(super) fn read(label: &str, accent: ReferenceAccent) -> LabelKind {
    let keyword = label.to_uppercase();
    if SILENCE.contains(&keyword.as_str()) {
        return LabelKind::NotVowel;
    }
    let Some((_, american, british)) = SETS.iter().find(|(known, ..)| *known == keyword) else {
        return LabelKind::Unknown;
    };
    let value = match accent {
        ReferenceAccent::GeneralAmerican => american,
        ReferenceAccent::SouthernBritish => british,
    };
    let stress = if UNSTRESSED.contains(&keyword.as_str()) {
        Stress::Unstressed
    } else {
        Stress::Unsaid
    };
    LabelKind::Vowel(Vowel::from_ipa(value), stress)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn keywords_have_the_values_of_their_accent() {
        let vowel = |ipa: &str, stress| LabelKind::Vowel(Vowel::from_ipa(ipa), stress);
        let american = |label: &str| read(label, ReferenceAccent::GeneralAmerican);
        let british = |label: &str| read(label, ReferenceAccent::SouthernBritish);
        assert_eq!(american("FLEECE"), vowel("i", Stress::Unsaid));
        assert_eq!(british("fleece"), vowel("iː", Stress::Unsaid));
        assert_eq!(american("lettER"), vowel("ɚ", Stress::Unstressed));
        assert_eq!(british("BATH"), british("PALM"));
        assert_eq!(american("HEED"), LabelKind::Unknown);
        assert_eq!(american("sil"), LabelKind::NotVowel);
    }
}
