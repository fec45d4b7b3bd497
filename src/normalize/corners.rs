//! Watt & Fabricius: formants as multiples of the centre of the speaker's vowel triangle.
//!
//! *Formula*: `F / S`, with `S` the mean of that formant over three corners: i, a, and a derived u'
//! with `F1(u') = F2(u') = F1(i)`. Modified (2009): for F2, `S = (F2(i) + F1(i)) / 2`, which leaves
//! the open vowel out. F3 has no place in either.
//!
//! *Needs* vowel labels and tokens of /i/ and of one open vowel, the same one for all speakers. It
//! is the first of a list that most speakers have.
//!
//! *Pitfalls*: two vowels carry the scale. Where /i/ or the open vowel itself differs between the
//! groups compared, the difference is spread over all vowels. Not robust to channels that move F1
//! (Calder et al. 2022).
//!
//! *Source*: Watt & Fabricius 2002, Leeds Working Papers in Linguistics 9, 159-173; Fabricius, Watt
//! & Johnson 2009, Language Variation and Change 21, 413-435.

use std::collections::BTreeMap;

use crate::vowel::Vowel;

use super::{Lacks, MeanFormants, SpeakerScale, SpeakerTokens};

/// Which form of the method.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Version {
    /// As published in 2002.
    Original,
    /// With the second formant's centre as modified in 2009.
    Modified,
}

/// Spellings of the close front corner, in order of choice.
const CLOSE_FRONT: [&str; 2] = ["i", "iː"];

/// Spellings of the open corner, in order of choice.
const OPEN: [&str; 5] = ["a", "aː", "ɑ", "ɑː", "æ"];

/// The scales of all speakers, anchored to the same two vowels.
pub(super) fn scales(
    version: Version,
    speakers: &BTreeMap<String, SpeakerTokens<'_>>,
) -> BTreeMap<String, Result<SpeakerScale, Lacks>> {
    let means: BTreeMap<&String, BTreeMap<&Vowel, MeanFormants>> = speakers
        .iter()
        .map(|(name, tokens)| (name, tokens.vowel_means()))
        .collect();
    let corner = |spellings: &[&str]| -> Vowel {
        let choices = spellings.iter().map(|s| Vowel::from_ipa(s));
        let having = |vowel: &Vowel| means.values().filter(|m| m.contains_key(vowel)).count();
        // `max_by_key` takes the last of equals; the list is walked backwards to take the first.
        let best = choices.rev().max_by_key(having);
        best.unwrap_or_else(|| Vowel::from_ipa(spellings[0]))
    };
    let (close_front, open) = (corner(&CLOSE_FRONT), corner(&OPEN));
    means
        .iter()
        .map(|(name, means)| {
            let scale = fit(version, means, &close_front, &open);
            ((*name).clone(), scale)
        })
        .collect()
}

/// The scale of one speaker.
fn fit(
    version: Version,
    means: &BTreeMap<&Vowel, MeanFormants>,
    close_front: &Vowel,
    open: &Vowel,
) -> Result<SpeakerScale, Lacks> {
    if means.is_empty() {
        return Err(Lacks::Labels);
    }
    let corner = |vowel: &Vowel| -> Result<(f64, f64), Lacks> {
        let lacking = || Lacks::CornerVowel(vowel.ipa().to_owned());
        match means.get(vowel).ok_or_else(lacking)? {
            [Some(f1), Some(f2), _] => Ok((*f1, *f2)),
            _ => Err(lacking()),
        }
    };
    let (i1, i2) = corner(close_front)?;
    let (a1, a2) = corner(open)?;
    let s1 = (i1 + a1 + i1) / 3.0;
    let s2 = match version {
        Version::Original => (i2 + a2 + i1) / 3.0,
        Version::Modified => (i2 + i1) / 2.0,
    };
    Ok(SpeakerScale::Affine {
        centre_hz: [Some(0.0), Some(0.0), None],
        width_hz: [Some(s1), Some(s2), None],
    })
}
