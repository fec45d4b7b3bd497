//! Where each group has each vowel: what a vowel chart shows.

use super::movement::{MOVEMENT_POINTS, between, convex_hull, polygon_area};
use super::panel::{Measure, Panel};
use super::plane::Cloud;

/// A vowel of a group, in hertz at the reference size (F1, F2).
#[derive(Debug, Clone, PartialEq)]
pub struct GroupVowel {
    /// Place of the group; `None` for all speakers.
    pub group: Option<usize>,
    /// Place of the vowel.
    pub vowel: usize,
    /// The speakers' means.
    pub speakers: Cloud,
    /// All tokens.
    pub tokens: Cloud,
    /// The vowel from 20 to 80 %, averaged over speakers; empty where tracks are missing.
    pub path: Vec<[f64; 2]>,
    /// Mean duration over speakers, in seconds.
    pub duration_s: Option<f64>,
}

/// A vowel of a speaker, in hertz at the reference size.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpeakerVowel {
    /// Place of the speaker.
    pub speaker: usize,
    /// Place of the vowel.
    pub vowel: usize,
    /// The tokens.
    pub tokens: Cloud,
}

/// How much room a speaker's vowels take.
#[derive(Debug, Clone, PartialEq)]
pub struct Space {
    /// Place of the speaker.
    pub speaker: usize,
    /// Number of vowels.
    pub vowels: usize,
    /// Area of the convex hull of the vowel means, in square hertz at the reference size; `None`
    /// for fewer than three vowels.
    pub hull_hz2: Option<f64>,
    /// The same over the vowels that every speaker has, which can be compared between speakers.
    pub shared_hull_hz2: Option<f64>,
    /// Area of the polygon over corner vowels in order, and these vowels.
    pub polygon_hz2: Option<(&'static [&'static str], f64)>,
}

/// Corner vowels of polygons, the first set that a speaker has: four corners in accents with an
/// open front vowel, three where there is one open vowel.
const CORNERS: [&[&str]; 4] = [
    &["i", "æ", "ɑ", "u"],
    &["i", "a", "ɑ", "u"],
    &["iː", "æ", "ɑː", "uː"],
    &["i", "a", "u"],
];

/// The vowels of one group, or of all speakers for `None`.
pub fn group_vowels(panel: &Panel, group: Option<usize>) -> Vec<GroupVowel> {
    let members = panel.members(group);
    let durations = panel.means(Measure::Duration);
    let cells = panel.cells();
    (0..panel.vowels.len())
        .filter_map(|vowel| {
            let mut means = Vec::new();
            let mut tokens = Vec::new();
            let mut paths = Vec::new();
            for s in &members {
                let own = &cells[vowel][*s];
                let points: Vec<[f64; 2]> =
                    own.iter().filter_map(|t| t.place_at_reference()).collect();
                means.extend(Cloud::of(&points).map(|c| c.mean));
                tokens.extend(points);
                let tracks: Vec<_> = own.iter().filter_map(|t| path(&t.path)).collect();
                paths.extend(mean_path(&tracks));
            }
            let known: Vec<f64> = members
                .iter()
                .filter_map(|s| durations[vowel][*s])
                .collect();
            Some(GroupVowel {
                group,
                vowel,
                speakers: Cloud::of(&means)?,
                tokens: Cloud::of(&tokens)?,
                path: mean_path(&paths).map(Vec::from).unwrap_or_default(),
                duration_s: (!known.is_empty())
                    .then(|| known.iter().sum::<f64>() / known.len() as f64),
            })
        })
        .collect()
}

/// The vowels of every speaker.
pub fn speaker_vowels(panel: &Panel) -> Vec<SpeakerVowel> {
    let mut points = vec![vec![Vec::new(); panel.vowels.len()]; panel.speakers.len()];
    for t in &panel.tokens {
        points[t.speaker][t.vowel].extend(t.place_at_reference());
    }
    let mut found = Vec::new();
    for (speaker, row) in points.iter().enumerate() {
        for (vowel, points) in row.iter().enumerate() {
            found.extend(Cloud::of(points).map(|tokens| SpeakerVowel {
                speaker,
                vowel,
                tokens,
            }));
        }
    }
    found
}

/// The vowel space of every speaker, in the order of the panel.
pub fn spaces(panel: &Panel) -> Vec<Space> {
    let mut means = vec![vec![None; panel.vowels.len()]; panel.speakers.len()];
    for v in speaker_vowels(panel) {
        means[v.speaker][v.vowel] = Some(v.tokens.mean);
    }
    let shared: Vec<usize> = (0..panel.vowels.len())
        .filter(|v| means.iter().all(|own| own[*v].is_some()))
        .collect();
    means
        .iter()
        .enumerate()
        .map(|(speaker, own)| {
            let all: Vec<[f64; 2]> = own.iter().flatten().copied().collect();
            let common: Vec<[f64; 2]> = shared.iter().filter_map(|v| own[*v]).collect();
            let corners = CORNERS.into_iter().find_map(|names| {
                let points: Option<Vec<[f64; 2]>> = names
                    .iter()
                    .map(|n| own[panel.vowels.iter().position(|v| v.ipa() == *n)?])
                    .collect();
                Some((names, polygon_area(&points?)))
            });
            Space {
                speaker,
                vowels: all.len(),
                hull_hz2: hull_area(&all),
                shared_hull_hz2: hull_area(&common),
                polygon_hz2: corners,
            }
        })
        .collect()
}

fn hull_area(points: &[[f64; 2]]) -> Option<f64> {
    let hull = convex_hull(points);
    (hull.len() >= 3).then(|| polygon_area(&hull))
}

fn path(track: &[(f64, [f64; 2])]) -> Option<[[f64; 2]; 5]> {
    let mut points = [[0.0; 2]; 5];
    for (point, at) in points.iter_mut().zip(MOVEMENT_POINTS) {
        *point = between(track, at)?;
    }
    Some(points)
}

fn mean_path(paths: &[[[f64; 2]; 5]]) -> Option<[[f64; 2]; 5]> {
    let n = paths.len() as f64;
    (!paths.is_empty()).then(|| {
        std::array::from_fn(|k| {
            std::array::from_fn(|f| paths.iter().map(|p| p[k][f]).sum::<f64>() / n)
        })
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn paths_are_averaged_point_by_point() {
        let rising: Vec<(f64, [f64; 2])> = (1..10)
            .map(|k| (f64::from(k) / 10.0, [f64::from(k), 2.0 * f64::from(k)]))
            .collect();
        let level: Vec<(f64, [f64; 2])> =
            (1..10).map(|k| (f64::from(k) / 10.0, [1.0, 2.0])).collect();
        let mean = mean_path(&[path(&rising).unwrap(), path(&level).unwrap()]).unwrap();
        // At 35 % the first stands at (3.5, 7), the second at (1, 2).
        assert!((mean[1][0] - 2.25).abs() < 1e-9 && (mean[1][1] - 4.5).abs() < 1e-9);
        assert_eq!(mean_path(&[]), None);
    }
}
