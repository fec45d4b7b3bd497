//! What `compare` gives: differences of groups, pairs of vowels, vowels of groups, vowel spaces.
//!
//! These tables are written and not read back. One row is one statement, so that a table can be
//! filtered: the measure stands in a column of its own and carries its unit in its name.

use super::cell::{guard, optional};
use super::column::{Column, Kind};
use super::record::append_record;
use crate::compare::{
    Contrast, Difference, Findings, GroupPair, Measure, Overlap, SpeakerPair, VowelContrast,
};

use Column as C;

const DIFFERENCES: [Column; 16] = [
    C::fixed("first", Kind::Text, "The side that is subtracted."),
    C::fixed("second", Kind::Text, "The side it is subtracted from."),
    C::fixed(
        "vowel",
        Kind::Text,
        "The vowel, in IPA; empty for the vowel space.",
    ),
    C::fixed(
        "measure",
        Kind::Text,
        "What is compared; `place` is F1 and F2 together.",
    ),
    C::fixed(
        "first_speakers",
        Kind::Count,
        "Speakers of the first side that enter.",
    ),
    C::fixed(
        "second_speakers",
        Kind::Count,
        "Speakers of the second side that enter.",
    ),
    C::fixed(
        "first_mean",
        Kind::Normalized,
        "Mean of the first side over its speakers.",
    ),
    C::fixed(
        "second_mean",
        Kind::Normalized,
        "Mean of the second side over its speakers.",
    ),
    C::fixed(
        "difference",
        Kind::Normalized,
        "Second less first; the distance for `place`.",
    ),
    C::fixed(
        "low",
        Kind::Normalized,
        "Lower end of the 95 % interval over speakers.",
    ),
    C::fixed("high", Kind::Normalized, "Upper end of it."),
    C::fixed(
        "hedges_g",
        Kind::Normalized,
        "Difference in deviations between speakers.",
    ),
    C::fixed("p", Kind::Probability, "p of the test over speakers."),
    C::fixed(
        "p_holm",
        Kind::Probability,
        "The same, corrected over the vowels.",
    ),
    C::fixed(
        "smallest_p",
        Kind::Probability,
        "The smallest p so few speakers can give.",
    ),
    C::fixed("verdict", Kind::Text, "What can be said, for `place`."),
];

const PAIRS: [Column; 17] = [
    C::fixed("first", Kind::Text, "The first vowel, in IPA."),
    C::fixed("second", Kind::Text, "The second vowel, in IPA."),
    C::fixed("group", Kind::Text, "The group; empty for all speakers."),
    C::fixed(
        "speaker",
        Kind::Text,
        "The speaker; empty for the group as a whole.",
    ),
    C::fixed("first_tokens", Kind::Count, "Tokens of the first vowel."),
    C::fixed("second_tokens", Kind::Count, "Tokens of the second vowel."),
    C::fixed(
        "pillai",
        Kind::Normalized,
        "Pillai trace; a group's is the mean of its speakers'.",
    ),
    C::fixed(
        "pillai_if_merged",
        Kind::Normalized,
        "What it would be for one vowel, on average.",
    ),
    C::fixed(
        "pillai_if_merged_95",
        Kind::Normalized,
        "What it would stay under in 95 of 100.",
    ),
    C::fixed("affinity", Kind::Normalized, "Bhattacharyya affinity."),
    C::fixed(
        "f1_difference_hz",
        Kind::Hertz,
        "Second less first, F1 at the reference size.",
    ),
    C::fixed(
        "f2_difference_hz",
        Kind::Hertz,
        "Second less first, F2 at the reference size.",
    ),
    C::fixed(
        "distance_hz",
        Kind::Hertz,
        "Distance of the means at the reference size.",
    ),
    C::fixed(
        "low_hz",
        Kind::Hertz,
        "Lower end of its 95 % interval over speakers.",
    ),
    C::fixed("high_hz", Kind::Hertz, "Upper end of it."),
    C::fixed(
        "p_direction",
        Kind::Probability,
        "p that speakers have no common direction.",
    ),
    C::fixed("verdict", Kind::Text, "What can be said."),
];

const VOWELS: [Column; 13] = [
    C::fixed("group", Kind::Text, "The group; empty for all speakers."),
    C::fixed("vowel", Kind::Text, "The vowel, in IPA."),
    C::fixed("speakers", Kind::Count, "Speakers who have it."),
    C::fixed("tokens", Kind::Count, "Their tokens."),
    C::fixed(
        "f1_hz",
        Kind::Hertz,
        "Mean F1 over speakers at the reference size.",
    ),
    C::fixed(
        "f2_hz",
        Kind::Hertz,
        "Mean F2 over speakers at the reference size.",
    ),
    C::fixed(
        "f1_speaker_sd_hz",
        Kind::Hertz,
        "Standard deviation of F1 between speakers.",
    ),
    C::fixed(
        "f2_speaker_sd_hz",
        Kind::Hertz,
        "Standard deviation of F2 between speakers.",
    ),
    C::fixed("f1_20_hz", Kind::Hertz, "F1 at 20 % of the vowel."),
    C::fixed("f2_20_hz", Kind::Hertz, "F2 at 20 % of the vowel."),
    C::fixed("f1_80_hz", Kind::Hertz, "F1 at 80 % of the vowel."),
    C::fixed("f2_80_hz", Kind::Hertz, "F2 at 80 % of the vowel."),
    C::fixed("duration_s", Kind::Seconds, "Mean duration over speakers."),
];

const SPACES: [Column; 7] = [
    C::fixed("speaker", Kind::Text, "The speaker."),
    C::fixed("group", Kind::Text, "The speaker's group."),
    C::fixed("vowels", Kind::Count, "Vowels the speaker has."),
    C::fixed(
        "hull_hz2",
        Kind::Hertz,
        "Area of the convex hull of the vowel means, hertz squared.",
    ),
    C::fixed(
        "shared_hull_hz2",
        Kind::Hertz,
        "The same over the vowels that all speakers have.",
    ),
    C::fixed(
        "corners",
        Kind::Text,
        "Corner vowels of the polygon, in order.",
    ),
    C::fixed(
        "polygon_hz2",
        Kind::Hertz,
        "Area of the polygon over them, hertz squared.",
    ),
];

pub(super) fn begin(columns: &[Column]) -> Vec<u8> {
    let mut out = Vec::new();
    append_record(&mut out, columns.iter().map(|c| c.name.as_ref()));
    out
}

pub(super) fn append(out: &mut Vec<u8>, cells: &[String]) {
    append_record(out, cells.iter().map(String::as_str));
}

/// The unit a measure's numbers are written in.
fn kind(measure: Measure) -> Kind {
    match measure {
        Measure::F1 | Measure::F2 => Kind::Normalized,
        Measure::Duration => Kind::Seconds,
        _ => Kind::Hertz,
    }
}

/// Differences of groups, a row for every vowel and measure.
pub fn differences_table(vowels: &[String], contrasts: &[Contrast]) -> Vec<u8> {
    let mut out = begin(&DIFFERENCES);
    for contrast in contrasts {
        for v in &contrast.vowels {
            let vowel = &vowels[v.vowel];
            append(&mut out, &place_cells(contrast, vowel, v));
            for m in Measure::ALL {
                if let Some(d) = v.measure(m) {
                    let holm = v.measures_p_holm[m.index()];
                    let cells = difference_cells(contrast, vowel, m.column(), kind(m), d, holm);
                    append(&mut out, &cells);
                }
            }
        }
        if let Some(d) = &contrast.space_hz2 {
            append(
                &mut out,
                &difference_cells(contrast, "", "hull_hz2", Kind::Hertz, d, None),
            );
        }
    }
    out
}

fn place_cells(contrast: &Contrast, vowel: &str, v: &VowelContrast) -> Vec<String> {
    let place = v.place.as_ref();
    let speakers = place.map_or([0, 0], |p| p.speakers);
    let mut cells = vec![
        guard(&contrast.names[0]),
        guard(&contrast.names[1]),
        guard(vowel),
        "place".to_owned(),
        speakers[0].to_string(),
        speakers[1].to_string(),
    ];
    cells.extend([
        String::new(),
        String::new(),
        optional(Kind::Hertz, v.distance_hz),
    ]);
    cells.extend([String::new(), String::new(), String::new()]);
    cells.push(optional(Kind::Probability, place.map(|p| p.test.p)));
    cells.push(optional(Kind::Probability, v.place_p_holm));
    cells.push(optional(
        Kind::Probability,
        place.map(|p| p.test.smallest_p),
    ));
    cells.push(v.verdict().text().to_owned());
    cells
}

fn difference_cells(
    contrast: &Contrast,
    vowel: &str,
    measure: &str,
    kind: Kind,
    d: &Difference,
    holm: Option<f64>,
) -> Vec<String> {
    let number = |v: f64| optional(kind, Some(v));
    vec![
        guard(&contrast.names[0]),
        guard(&contrast.names[1]),
        guard(vowel),
        measure.to_owned(),
        d.speakers[0].to_string(),
        d.speakers[1].to_string(),
        number(d.means[0]),
        number(d.means[1]),
        number(d.value),
        optional(kind, d.interval.map(|i| i[0])),
        optional(kind, d.interval.map(|i| i[1])),
        optional(Kind::Normalized, d.hedges_g),
        optional(Kind::Probability, Some(d.test.p)),
        optional(Kind::Probability, holm),
        optional(Kind::Probability, Some(d.test.smallest_p)),
        String::new(),
    ]
}

/// Pairs of vowels, a row for every group and one for each of its speakers.
pub fn pairs_table(findings: &Findings) -> Vec<u8> {
    let mut out = begin(&PAIRS);
    for pair in &findings.pairs {
        append(&mut out, &group_pair_cells(findings, pair));
        for speaker in &pair.speakers {
            append(&mut out, &speaker_pair_cells(findings, pair, speaker));
        }
    }
    out
}

fn pair_names(findings: &Findings, pair: &GroupPair) -> [String; 3] {
    let [a, b] = pair.vowels.map(|v| guard(findings.panel.vowels[v].ipa()));
    let group = pair
        .group
        .map_or_else(String::new, |g| guard(&findings.panel.groups[g]));
    [a, b, group]
}

fn group_pair_cells(findings: &Findings, pair: &GroupPair) -> Vec<String> {
    let tokens = |k: usize| -> usize {
        pair.speakers
            .iter()
            .filter_map(|s| s.overlap)
            .map(|o| o.n[k])
            .sum()
    };
    let mut cells = Vec::from(pair_names(findings, pair));
    cells.extend([String::new(), tokens(0).to_string(), tokens(1).to_string()]);
    for value in [
        Some(pair.pillai),
        Some(pair.pillai_if_merged),
        Some(pair.pillai_if_merged_95),
    ] {
        cells.push(optional(Kind::Normalized, value));
    }
    cells.push(optional(Kind::Normalized, pair.affinity));
    cells.extend(pair.difference_hz.map(|d| optional(Kind::Hertz, Some(d))));
    cells.push(optional(Kind::Hertz, pair.distance_hz.map(|d| d.0)));
    cells.push(optional(Kind::Hertz, pair.distance_hz.map(|d| d.1[0])));
    cells.push(optional(Kind::Hertz, pair.distance_hz.map(|d| d.1[1])));
    cells.push(optional(Kind::Probability, Some(pair.common_direction_p)));
    cells.push(pair.verdict.text().to_owned());
    cells
}

fn speaker_pair_cells(findings: &Findings, pair: &GroupPair, speaker: &SpeakerPair) -> Vec<String> {
    let mut cells = Vec::from(pair_names(findings, pair));
    cells.push(guard(&findings.panel.speakers[speaker.speaker].name));
    let number = |pick: &dyn Fn(&Overlap) -> Option<f64>| {
        optional(Kind::Normalized, speaker.overlap.as_ref().and_then(pick))
    };
    let count = |k: usize| {
        speaker
            .overlap
            .map_or_else(String::new, |o| o.n[k].to_string())
    };
    cells.extend([count(0), count(1)]);
    cells.push(number(&|o| Some(o.pillai)));
    cells.push(number(&|o| Some(o.pillai_if_merged)));
    cells.push(number(&|o| Some(o.pillai_if_merged_95)));
    cells.push(number(&|o| o.affinity));
    cells.extend(vec![String::new(); 6]);
    cells.push(speaker.verdict.text().to_owned());
    cells
}

/// Vowels of all speakers together and of each group.
pub fn vowels_table(findings: &Findings) -> Vec<u8> {
    let mut out = begin(&VOWELS);
    for v in findings
        .everybody
        .iter()
        .chain(findings.groups.iter().flatten())
    {
        let several = v.speakers.n > 1;
        let [f1, _, f2] = v.speakers.covariance.map(|c| several.then(|| c.sqrt()));
        let hertz = |value: Option<f64>| optional(Kind::Hertz, value);
        let mut cells = vec![
            v.group
                .map_or_else(String::new, |g| guard(&findings.panel.groups[g])),
            guard(findings.panel.vowels[v.vowel].ipa()),
            v.speakers.n.to_string(),
            v.tokens.n.to_string(),
        ];
        cells.extend(v.speakers.mean.map(|m| hertz(Some(m))));
        cells.extend([hertz(f1), hertz(f2)]);
        for point in [v.path.first(), v.path.last()] {
            cells.extend([hertz(point.map(|p| p[0])), hertz(point.map(|p| p[1]))]);
        }
        cells.push(optional(Kind::Seconds, v.duration_s));
        append(&mut out, &cells);
    }
    out
}

/// Vowel spaces, a row a speaker.
pub fn spaces_table(findings: &Findings) -> Vec<u8> {
    let mut out = begin(&SPACES);
    for s in &findings.spaces {
        let speaker = &findings.panel.speakers[s.speaker];
        let group = speaker.group.map_or("", |g| &findings.panel.groups[g]);
        let cells = [
            guard(&speaker.name),
            guard(group),
            s.vowels.to_string(),
            optional(Kind::Hertz, s.hull_hz2),
            optional(Kind::Hertz, s.shared_hull_hz2),
            s.polygon_hz2
                .map_or_else(String::new, |(names, _)| names.join(" ")),
            optional(Kind::Hertz, s.polygon_hz2.map(|(_, area)| area)),
        ];
        append(&mut out, &cells);
    }
    out
}
