//! X-SAMPA labels.
//!
//! *Source*: Wells 1995, *Computer-coding the IPA: a proposed extension of SAMPA*, University College
//! London. Symbols are brought to IPA, longest first, and read as such.

use super::{LabelKind, ipa};

/// Symbols that are not their own IPA letter. Longer ones are found first, whatever their order.
const SYMBOLS: [(&str, &str); 92] = [
    // Vowels.
    ("1", "ɨ"),
    ("}", "ʉ"),
    ("M", "ɯ"),
    ("I\\", "ᵻ"),
    ("U\\", "ᵿ"),
    ("I", "ɪ"),
    ("Y", "ʏ"),
    ("U", "ʊ"),
    ("2", "ø"),
    ("@\\", "ɘ"),
    ("8", "ɵ"),
    ("7", "ɤ"),
    ("@`", "ɚ"),
    ("@", "ə"),
    ("E", "ɛ"),
    ("9", "œ"),
    ("3\\", "ɞ"),
    ("3`", "ɝ"),
    ("3", "ɜ"),
    ("V", "ʌ"),
    ("O", "ɔ"),
    ("{", "æ"),
    ("6", "ɐ"),
    ("&", "ɶ"),
    ("A", "ɑ"),
    ("Q", "ɒ"),
    // Consonants.
    ("t`", "ʈ"),
    ("d`", "ɖ"),
    ("J\\", "ɟ"),
    ("G\\", "ɢ"),
    ("?\\", "ʕ"),
    ("?", "ʔ"),
    ("F", "ɱ"),
    ("n`", "ɳ"),
    ("J", "ɲ"),
    ("N\\", "ɴ"),
    ("N", "ŋ"),
    ("B\\", "ʙ"),
    ("R\\", "ʀ"),
    ("4", "ɾ"),
    ("r`", "ɽ"),
    ("p\\", "ɸ"),
    ("B", "β"),
    ("T", "θ"),
    ("D", "ð"),
    ("S", "ʃ"),
    ("Z", "ʒ"),
    ("s`", "ʂ"),
    ("z`", "ʐ"),
    ("C", "ç"),
    ("j\\", "ʝ"),
    ("G", "ɣ"),
    ("X\\", "ħ"),
    ("X", "χ"),
    ("R", "ʁ"),
    ("h\\", "ɦ"),
    ("K\\", "ɮ"),
    ("K", "ɬ"),
    ("P", "ʋ"),
    ("v\\", "ʋ"),
    ("r\\`", "ɻ"),
    ("r\\", "ɹ"),
    ("M\\", "ɰ"),
    ("l`", "ɭ"),
    ("L\\", "ʟ"),
    ("L", "ʎ"),
    ("5", "ɫ"),
    ("W", "ʍ"),
    ("H\\", "ʜ"),
    ("H", "ɥ"),
    ("<\\", "ʢ"),
    (">\\", "ʡ"),
    ("s\\", "ɕ"),
    ("z\\", "ʑ"),
    ("l\\", "ɺ"),
    ("x\\", "ɧ"),
    // Marks.
    ("\"", "ˈ"),
    ("%", "ˌ"),
    (":\\", "ˑ"),
    (":", "ː"),
    ("`", "˞"),
    ("~", "\u{303}"),
    ("_~", "\u{303}"),
    ("_^", "\u{32f}"),
    ("_0", "\u{325}"),
    ("_=", "\u{329}"),
    ("=", "\u{329}"),
    ("_h", "ʰ"),
    ("_j", "ʲ"),
    ("_w", "ʷ"),
    ("_x", "\u{33d}"),
    ("_\"", "\u{308}"),
];

/// Letters that mean the same in both.
const SAME: &str = "abcdefghijklmnopqrstuvwxyz";

/// Marks of silence and pause; common practice.
const SILENCE: [&str; 5] = ["#", "_", "...", "sil", "pau"];

/// Reads one label.
pub(super) fn read(label: &str) -> LabelKind {
    if SILENCE.contains(&label) {
        return LabelKind::NotVowel;
    }
    match to_ipa(label) {
        Some(symbol) => ipa::read(&symbol),
        None => LabelKind::Unknown,
    }
}

/// The label in IPA; `None` where it holds something that is no symbol.
fn to_ipa(label: &str) -> Option<String> {
    let mut rest = label;
    let mut symbol = String::new();
    while let Some(first) = rest.chars().next() {
        let longest = SYMBOLS
            .iter()
            .filter(|(written, _)| rest.starts_with(written))
            .max_by_key(|(written, _)| written.len());
        let taken = match longest {
            Some((written, meant)) => {
                symbol.push_str(meant);
                written.len()
            }
            None if SAME.contains(first) => {
                symbol.push(first);
                first.len_utf8()
            }
            None => return None,
        };
        rest = &rest[taken..];
    }
    Some(symbol)
}

#[cfg(test)]
mod tests {
    use super::super::{Stress, Vowel};
    use super::*;

    #[test]
    fn vowels_are_read_with_their_marks() {
        for (label, ipa, stress) in [
            ("{", "æ", Stress::Unsaid),
            ("\"i:", "iː", Stress::Primary),
            ("%aI", "aɪ", Stress::Secondary),
            ("3`", "ɝ", Stress::Unsaid),
            ("A~", "ɑ̃", Stress::Unsaid),
            ("@U_^", "əʊ̯", Stress::Unsaid),
            ("}:", "ʉː", Stress::Unsaid),
            ("Q", "ɒ", Stress::Unsaid),
        ] {
            let expected = LabelKind::Vowel(Vowel::from_ipa(ipa), stress);
            assert_eq!(read(label), expected, "{label}");
        }
    }

    #[test]
    fn other_symbols_are_no_vowels_and_the_rest_is_unknown() {
        for label in ["p", "tS", "r\\", "s\\", "?", "n`", "#", "d_h"] {
            assert_eq!(read(label), LabelKind::NotVowel, "{label}");
        }
        for label in ["hi:d", "É", "(", "iy1x", "\\"] {
            assert_eq!(read(label), LabelKind::Unknown, "{label}");
        }
    }
}
