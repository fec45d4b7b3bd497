//! ARPABET labels.
//!
//! *Source*: the two-letter code of the ARPA speech project (Shoup 1980, in Lea, *Trends in Speech
//! Recognition*) with the additions usual in hand-aligned corpora of read American sentences; from
//! memory, and held against the labels of such a corpus in `.ci/run`. That unstressed `AH` and `ER`
//! are schwas is common practice in pronouncing dictionaries.

use super::{LabelKind, Stress, Vowel};

/// Code and IPA of every vowel.
const VOWELS: [(&str, &str); 19] = [
    ("iy", "i"),
    ("ih", "ɪ"),
    ("ey", "e"),
    ("eh", "ɛ"),
    ("ae", "æ"),
    ("aa", "ɑ"),
    ("ao", "ɔ"),
    ("ow", "o"),
    ("uh", "ʊ"),
    ("uw", "u"),
    ("ux", "ʉ"),
    ("ah", "ʌ"),
    ("er", "ɝ"),
    ("ay", "aɪ"),
    ("aw", "aʊ"),
    ("oy", "ɔɪ"),
    ("ax", "ə"),
    ("ix", "ɨ"),
    ("axr", "ɚ"),
];

/// Codes only used in unstressed syllables.
const REDUCED: [&str; 4] = ["ax", "ix", "axr", "ax-h"];

/// Consonants, closures, pauses and other marks.
const OTHERS: [&str; 57] = [
    "b", "d", "g", "p", "t", "k", "dx", "q", "jh", "ch", "s", "sh", "z", "zh", "f", "th", "v",
    "dh", "m", "n", "ng", "em", "en", "eng", "nx", "l", "r", "w", "wh", "y", "hh", "hv", "h", "el",
    "bcl", "dcl", "gcl", "pcl", "tcl", "kcl", "pau", "epi", "h#", "#h", "#", "sil", "sp", "spn",
    "nsn", "noise", "laugh", "lg", "br", "ns", "cg", "ls", "_",
];

/// Reads one label in either case, with or without a stress digit.
pub(super) fn read(label: &str) -> LabelKind {
    let lower = label.to_lowercase();
    let (code, digit) = match lower.strip_suffix(['0', '1', '2']) {
        Some(code) => (code, lower.chars().last()),
        None => (lower.as_str(), None),
    };
    let ipa = match (code, digit) {
        ("ah", Some('0')) => Some("ə"),
        ("er", Some('0')) => Some("ɚ"),
        ("ax-h", _) => Some("ə̥"),
        _ => VOWELS.iter().find(|(c, _)| *c == code).map(|(_, ipa)| *ipa),
    };
    if let Some(ipa) = ipa {
        let stress = match digit {
            Some('1') => Stress::Primary,
            Some('2') => Stress::Secondary,
            Some(_) => Stress::Unstressed,
            None if REDUCED.contains(&code) => Stress::Unstressed,
            None => Stress::Unsaid,
        };
        LabelKind::Vowel(Vowel::from_ipa(ipa), stress)
    } else if OTHERS.contains(&lower.as_str()) {
        LabelKind::NotVowel
    } else {
        LabelKind::Unknown
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn vowel(ipa: &str, stress: Stress) -> LabelKind {
        LabelKind::Vowel(Vowel::from_ipa(ipa), stress)
    }

    #[test]
    fn case_and_stress_digits_are_read() {
        assert_eq!(read("EH"), vowel("ɛ", Stress::Unsaid));
        assert_eq!(read("eh2"), vowel("ɛ", Stress::Secondary));
        assert_eq!(read("AH0"), vowel("ə", Stress::Unstressed));
        assert_eq!(read("AH1"), vowel("ʌ", Stress::Primary));
        assert_eq!(read("ER0"), vowel("ɚ", Stress::Unstressed));
    }

    #[test]
    fn corpus_additions_are_read() {
        assert_eq!(read("ux"), vowel("ʉ", Stress::Unsaid));
        assert_eq!(read("axr"), vowel("ɚ", Stress::Unstressed));
        assert_eq!(read("ax-h"), vowel("ə̥", Stress::Unstressed));
        for label in ["h#", "pcl", "q", "hv", "el", "epi", "nx", "SIL"] {
            assert_eq!(read(label), LabelKind::NotVowel, "{label}");
        }
    }

    #[test]
    fn other_labels_are_unknown() {
        for label in ["i", "iyy", "b1", "heed", "1", "ɛ"] {
            assert_eq!(read(label), LabelKind::Unknown, "{label}");
        }
    }
}
