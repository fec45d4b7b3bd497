//! The order vowels are shown in: round the chart, from close front by open to close back.

use crate::vowel::Vowel;

/// Front from close to open, central from close to open, back from open to close; the letters of
/// the IPA chart (2020) and the two r-coloured ones.
const ROUND: &str = "iyɪʏeøɛœæaɶɨᵻʉɘɵəɚɜɝɞɐʌɑɒɔɤoʊᵿɯu";

/// The places `0..vowels.len()`, in the order of showing.
pub(super) fn shown(vowels: &[Vowel]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..vowels.len()).collect();
    order.sort_by_key(|v| {
        let symbol = vowels[*v].ipa();
        let letter = symbol.chars().find(|c| ROUND.contains(*c));
        let place = letter.and_then(|c| ROUND.chars().position(|r| r == c));
        (place.unwrap_or(usize::MAX), symbol.to_owned())
    });
    order
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn round_the_chart() {
        let vowels: Vec<Vowel> = ["u", "æ", "i", "ɑ", "iː", "?"].map(Vowel::from_ipa).into();
        let shown: Vec<&str> = shown(&vowels)
            .into_iter()
            .map(|v| vowels[v].ipa())
            .collect();
        assert_eq!(shown, ["i", "iː", "æ", "ɑ", "u", "?"]);
    }
}
