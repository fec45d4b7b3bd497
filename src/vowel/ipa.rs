//! IPA labels.
//!
//! *Source*: the chart of the International Phonetic Association (revised to 2020): its vowel and
//! consonant letters, diacritics and suprasegmentals.

use unicode_normalization::UnicodeNormalization;
use unicode_normalization::char::is_combining_mark;

use super::{LabelKind, Stress, Vowel};

/// Vowel letters of the chart, the two r-coloured ones, and two reduced ones of dictionaries.
const VOWEL_LETTERS: &str = "iyɨʉɯuɪʏʊeøɘɵɤoəɛœɜɞʌɔæɐaɶɑɒɚɝᵻᵿ";

/// Consonant letters of the chart, with clicks and implosives.
const CONSONANT_LETTERS: &str = "pbtdʈɖcɟkɡqɢʔmɱnɳɲŋɴʙrʀⱱɾɽɸβfvθðszʃʒʂʐçʝxɣχʁħʕhɦɬɮʋɹɻjɰlɭʎʟ\
    ʍwɥʜʢʡɕʑɺɧɓɗʄɠʛʘǀǃǂǁɫʦʣʧʤʨʥ";

/// Letter-sized modifiers: length, rhoticity, release, secondary articulation, tone bars.
const MODIFIERS: &str = "ːˑ˞ʰʱʲʷˠˤⁿˡʼ\u{a71b}\u{a71c}˥˦˧˨˩̆";

/// Marks of silence, pause and word edge in hand-labelled IPA tiers; common practice.
const SILENCE: [&str; 9] = ["#", "##", "_", "-", "|", "‖", "sil", "pau", "sp"];

/// The syllabic r of the alveolar approximant and of its retroflex neighbour.
const SYLLABIC_R: [&str; 2] = ["ɹ\u{329}", "ɻ\u{329}"];

/// One spelling for one symbol.
pub(super) fn canonical(symbol: &str) -> String {
    let mut text: String = symbol
        .trim()
        .nfd()
        .filter(|c| !matches!(c, '\u{361}' | '\u{35c}' | '\u{200d}'))
        .map(|c| match c {
            ':' | '\u{a789}' => 'ː',
            'g' => 'ɡ',
            'ε' => 'ɛ',
            'ɩ' => 'ɪ',
            'ɷ' => 'ʊ',
            'ϴ' | 'Θ' => 'θ',
            '\u{2c8}' | '\'' | '’' => 'ˈ',
            c => c,
        })
        .collect();
    for r in SYLLABIC_R {
        text = text.replace(r, "ɝ");
    }
    text = text.replace("ɜ˞", "ɝ").replace("ə˞", "ɚ");
    text.nfc().collect()
}

/// Reads one label; slashes or square brackets around it are allowed.
pub(super) fn read(label: &str) -> LabelKind {
    let bare = label
        .trim_start_matches(['/', '['])
        .trim_end_matches(['/', ']']);
    if SILENCE.contains(&bare.to_lowercase().as_str()) || bare.is_empty() {
        return LabelKind::NotVowel;
    }
    let symbol = canonical(bare);
    let (stress, symbol) = match symbol.strip_prefix('ˈ') {
        Some(rest) => (Stress::Primary, rest),
        None => match symbol.strip_prefix('ˌ') {
            Some(rest) => (Stress::Secondary, rest),
            None => (Stress::Unsaid, symbol.as_str()),
        },
    };
    let mut vowels = 0;
    let mut consonants = 0;
    let mut r_after = false;
    for c in symbol.nfd() {
        if VOWEL_LETTERS.contains(c) && consonants == 0 {
            vowels += 1;
        } else if matches!(c, 'ɹ' | 'ɻ') && vowels > 0 && !r_after {
            r_after = true;
        } else if CONSONANT_LETTERS.contains(c) && vowels == 0 {
            consonants += 1;
        } else if !(MODIFIERS.contains(c) || is_combining_mark(c)) || vowels + consonants == 0 {
            return LabelKind::Unknown;
        }
    }
    match (vowels, consonants) {
        // A single vowel, diphthong or triphthong, with or without an r.
        (1..=3, 0) => LabelKind::Vowel(Vowel::from_ipa(symbol), stress),
        // A consonant, or the two letters of an affricate or a doubly articulated one.
        (0, 1..=2) => LabelKind::NotVowel,
        _ => LabelKind::Unknown,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn vowel(ipa: &str, stress: Stress) -> LabelKind {
        LabelKind::Vowel(Vowel::from_ipa(ipa), stress)
    }

    #[test]
    fn every_vowel_letter_is_a_vowel() {
        for letter in VOWEL_LETTERS.chars() {
            let label = letter.to_string();
            assert_eq!(read(&label), vowel(&label, Stress::Unsaid), "{label}");
        }
    }

    #[test]
    fn every_consonant_letter_is_no_vowel() {
        for letter in CONSONANT_LETTERS.chars() {
            assert_eq!(read(&letter.to_string()), LabelKind::NotVowel, "{letter}");
        }
        assert_eq!(read("t͡ʃ"), LabelKind::NotVowel);
        assert_eq!(read("pʰ"), LabelKind::NotVowel);
    }

    #[test]
    fn marks_around_and_on_a_vowel_are_read() {
        assert_eq!(read("/ˈiː/"), vowel("iː", Stress::Primary));
        assert_eq!(read("[ˌaɪ]"), vowel("aɪ", Stress::Secondary));
        assert_eq!(read("ɛ̃"), vowel("ɛ̃", Stress::Unsaid));
        assert_eq!(read("ɹ̩"), vowel("ɝ", Stress::Unsaid));
        assert_eq!(read("aɪ̯"), vowel("aɪ̯", Stress::Unsaid));
        assert_eq!(read("ɔɹ"), vowel("ɔɹ", Stress::Unsaid));
    }

    #[test]
    fn what_is_no_symbol_is_unknown() {
        for label in ["hid", "ih", "IY1", "ː", "7", "heed", "\u{0}", "i i"] {
            assert_eq!(read(label), LabelKind::Unknown, "{label}");
        }
        assert_eq!(read("_"), LabelKind::NotVowel);
    }
}
