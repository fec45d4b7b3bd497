//! The speakers: a row each, and a small chart each.

use serde::Serialize;

use crate::compare::Findings;

use super::chart::{Plane, speakers_plane};
use super::numbers::{or_dash, percent, plain};
use super::order::shown;
use super::subject::Subject;

/// Small charts beyond this are not drawn: nobody reads them.
const MOST_DRAWN: usize = 48;

/// All speakers.
#[derive(Debug, Clone, Serialize)]
pub(super) struct SpeakersView {
    columns: Vec<String>,
    rows: Vec<Row>,
    vowels: Vec<String>,
    small: Vec<Small>,
    small_width: f64,
    small_height: f64,
    not_drawn: usize,
}

#[derive(Debug, Clone, Serialize)]
struct Row {
    name: String,
    given: Vec<String>,
    tokens: usize,
    measured: usize,
    doubtful: String,
    agreeing: String,
    vowels: String,
    hull: String,
}

#[derive(Debug, Clone, Serialize)]
struct Small {
    name: String,
    group: usize,
    group_name: String,
    symbols: Vec<[String; 3]>,
    /// F1 and F2 of every vowel, in the order of showing.
    means: Vec<String>,
    alt: String,
}

/// The table and the small charts.
pub(super) fn view(subject: &Subject) -> SpeakersView {
    let findings = &subject.findings;
    let given = subject.given();
    let rows = findings
        .tally
        .speakers
        .iter()
        .map(
            |(name, [tokens, measured, doubtful, identified, agreeing])| {
                let place = findings.panel.speakers.iter().position(|s| s.name == *name);
                let space = place.and_then(|p| findings.spaces.iter().find(|s| s.speaker == p));
                Row {
                    name: name.clone(),
                    given: given
                        .get(name.as_str())
                        .map(|g| g.to_vec())
                        .unwrap_or_default(),
                    tokens: *tokens,
                    measured: *measured,
                    doubtful: percent(*doubtful, *measured),
                    agreeing: percent(*agreeing, *identified),
                    vowels: space.map_or_else(|| "–".to_owned(), |s| s.vowels.to_string()),
                    hull: or_dash(space.and_then(|s| s.hull_hz2).map(|h| h / 1e6), 3),
                }
            },
        )
        .collect();
    let (width, height) = (150.0, 118.0);
    let speakers = findings.panel.speakers.len();
    let small = match speakers_plane(findings, width, height) {
        Some(plane) if speakers <= MOST_DRAWN => small_charts(findings, plane),
        _ => Vec::new(),
    };
    SpeakersView {
        columns: subject.table.speaker_columns.clone(),
        rows,
        vowels: shown(&findings.panel.vowels)
            .into_iter()
            .map(|v| findings.panel.vowels[v].to_string())
            .collect(),
        not_drawn: if small.is_empty() { speakers } else { 0 },
        small,
        small_width: width,
        small_height: height,
    }
}

fn small_charts(findings: &Findings, plane: Plane) -> Vec<Small> {
    let order = shown(&findings.panel.vowels);
    let mut speakers: Vec<usize> = (0..findings.panel.speakers.len()).collect();
    speakers.sort_by_key(|s| findings.panel.speakers[*s].group);
    speakers
        .into_iter()
        .map(|s| {
            let speaker = &findings.panel.speakers[s];
            let symbols = order
                .iter()
                .filter_map(|v| {
                    let own = findings
                        .speakers
                        .iter()
                        .find(|w| w.speaker == s && w.vowel == *v)?;
                    let (x, y) = plane.text(own.tokens.mean);
                    Some([x, y, findings.panel.vowels[*v].to_string()])
                })
                .collect();
            let means = order
                .iter()
                .map(|v| {
                    let own = findings
                        .speakers
                        .iter()
                        .find(|w| w.speaker == s && w.vowel == *v);
                    own.map_or_else(
                        || "–".to_owned(),
                        |w| {
                            format!(
                                "{} {}",
                                plain(w.tokens.mean[0], 0),
                                plain(w.tokens.mean[1], 0)
                            )
                        },
                    )
                })
                .collect();
            Small {
                means,
                name: speaker.name.clone(),
                group: speaker.group.unwrap_or(0),
                group_name: speaker
                    .group
                    .map_or_else(String::new, |g| findings.panel.groups[g].clone()),
                symbols,
                alt: format!(
                    "Vowel means of {}, same scales as the chart above",
                    speaker.name
                ),
            }
        })
        .collect()
}
