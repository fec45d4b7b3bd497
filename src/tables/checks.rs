//! What `check` gives as figures: speakers against norms.

use super::cell::{guard, optional};
use super::column::{Column, Kind};
use super::comparison::{append, begin};
use crate::compare::{NormCheck, Spread, VowelCheck};
use crate::vowel::Vowel;

use Column as C;

const CHECKS: [Column; 24] = [
    C::fixed("speaker", Kind::Text, "Who is checked."),
    C::fixed("norm", Kind::Text, "The norm."),
    C::fixed(
        "norm_group",
        Kind::Text,
        "The group of the norm nearest in size.",
    ),
    C::fixed(
        "size",
        Kind::Normalized,
        "The speaker's formants over the norm's.",
    ),
    C::fixed("vowel", Kind::Text, "The vowel, in IPA."),
    C::fixed("tokens", Kind::Count, "Tokens of it."),
    C::fixed("f1_hz", Kind::Hertz, "F1 at the norm's size."),
    C::fixed("f2_hz", Kind::Hertz, "F2 at the norm's size."),
    C::fixed("norm_f1_hz", Kind::Hertz, "F1 of the norm."),
    C::fixed("norm_f2_hz", Kind::Hertz, "F2 of the norm."),
    C::fixed(
        "f1_offset_sd",
        Kind::Normalized,
        "Offset of F1 in deviations of the norm.",
    ),
    C::fixed(
        "f1_low_sd",
        Kind::Normalized,
        "Lower end of its 95 % interval over tokens.",
    ),
    C::fixed("f1_high_sd", Kind::Normalized, "Upper end of it."),
    C::fixed(
        "f2_offset_sd",
        Kind::Normalized,
        "Offset of F2 in deviations of the norm.",
    ),
    C::fixed(
        "f2_low_sd",
        Kind::Normalized,
        "Lower end of its 95 % interval over tokens.",
    ),
    C::fixed("f2_high_sd", Kind::Normalized, "Upper end of it."),
    C::fixed(
        "duration_ratio",
        Kind::Normalized,
        "Duration over the norm's, pace taken out.",
    ),
    C::fixed(
        "duration_low",
        Kind::Normalized,
        "Lower end of its 95 % interval over tokens.",
    ),
    C::fixed("duration_high", Kind::Normalized, "Upper end of it."),
    C::fixed("remarks", Kind::Text, "In trade words, `;` between."),
    C::fixed(
        "taken_for",
        Kind::Text,
        "The norm's vowel most tokens are nearest to.",
    ),
    C::fixed("taken_for_tokens", Kind::Count, "How many these are."),
    C::fixed(
        "not_apart_from",
        Kind::Text,
        "Vowels the norm keeps apart from it and the speaker does not.",
    ),
    C::fixed(
        "spread",
        Kind::Text,
        "Whether the norm's spread is `stated` or `pooled`.",
    ),
];

/// Speakers against norms, a row for every speaker, norm and vowel.
pub fn checks_table(checks: &[NormCheck]) -> Vec<u8> {
    let mut out = begin(&CHECKS);
    for check in checks {
        for v in &check.vowels {
            append(&mut out, &check_cells(check, v));
        }
    }
    out
}

fn check_cells(check: &NormCheck, v: &VowelCheck) -> Vec<String> {
    let hertz = |value: f64| optional(Kind::Hertz, Some(value));
    let number = |value: Option<f64>| optional(Kind::Normalized, value);
    let mut cells = vec![
        guard(&check.speaker),
        guard(&check.norm),
        guard(&check.group),
        number(Some(check.size)),
        guard(v.vowel.ipa()),
        v.tokens.to_string(),
    ];
    cells.extend(v.place_hz.iter().chain(&v.norm_hz).map(|f| hertz(*f)));
    for offset in &v.offsets {
        cells.push(number(Some(offset.sd)));
        cells.extend([0, 1].map(|end| number(offset.interval.map(|i| i[end]))));
    }
    cells.push(number(v.duration.map(|d| d.0)));
    cells.extend([0, 1].map(|end| number(v.duration.and_then(|d| d.1).map(|i| i[end]))));
    let remarks: Vec<&str> = v.remarks().iter().map(|r| r.word).collect();
    cells.push(remarks.join(";"));
    let taken = v.taken_for.first();
    cells.push(taken.map_or_else(String::new, |(vowel, _)| guard(vowel.ipa())));
    cells.push(taken.map_or_else(String::new, |(_, n)| n.to_string()));
    let merged: Vec<&str> = check
        .not_apart
        .iter()
        .filter(|p| p.vowels.contains(&v.vowel))
        .flat_map(|p| &p.vowels)
        .filter(|other| **other != v.vowel)
        .map(Vowel::ipa)
        .collect();
    cells.push(guard(&merged.join(";")));
    cells.push(match check.spread {
        Spread::Stated => "stated".to_owned(),
        Spread::Pooled => "pooled".to_owned(),
    });
    cells
}
