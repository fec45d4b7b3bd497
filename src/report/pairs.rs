//! Pairs of vowels: each speaker's Pillai trace beside what one and the same vowel would give.

use serde::Serialize;

use crate::compare::{Findings, GroupPair, Verdict};

use super::numbers::{interval, or_dash, p_value, plain};
use super::order::shown;

/// Most pairs that are drawn; the closest ones.
const MOST: usize = 10;
/// Groups beyond this are not drawn one by one.
const MOST_GROUPS: usize = 6;

const WIDTH: f64 = 640.0;
const LEFT: f64 = 150.0;
const RIGHT: f64 = 622.0;
const ROW: f64 = 26.0;
/// Height of the line that names a pair.
const HEADING: f64 = 34.0;
const ABOVE: f64 = 6.0;

/// The closest pairs, drawn and in figures.
#[derive(Debug, Clone, Serialize)]
pub(super) struct PairsView {
    width: f64,
    height: f64,
    left: f64,
    right: f64,
    foot: f64,
    bottom: f64,
    alt: String,
    ticks: Vec<[String; 2]>,
    lines: Vec<Line>,
    rows: Vec<Row>,
    rule: &'static str,
    left_out: usize,
}

#[derive(Debug, Clone, Serialize)]
struct Line {
    y: String,
    pair: String,
    group: String,
    class: usize,
    merged: String,
    expected: String,
    mean: String,
    dots: Vec<String>,
    first: bool,
    /// Where the pair is named.
    heading: String,
}

#[derive(Debug, Clone, Serialize)]
struct Row {
    pair: String,
    group: String,
    speakers: usize,
    pillai: String,
    expected: String,
    point: String,
    affinity: String,
    distance: String,
    direction: String,
    verdicts: String,
    verdict: &'static str,
    class: &'static str,
}

/// The pairs worth looking at: in some group not plainly apart, or else the closest.
pub(super) fn close(findings: &Findings) -> Vec<Vec<&GroupPair>> {
    let grouped = !findings.panel.groups.is_empty() && findings.panel.groups.len() <= MOST_GROUPS;
    let wanted = |p: &&GroupPair| {
        if grouped {
            p.group.is_some()
        } else {
            p.group.is_none()
        }
    };
    let mut pairs: Vec<Vec<&GroupPair>> = Vec::new();
    for pair in findings.pairs.iter().filter(wanted) {
        match pairs.iter_mut().find(|p| p[0].vowels == pair.vowels) {
            Some(known) => known.push(pair),
            None => pairs.push(vec![pair]),
        }
    }
    let closeness = |p: &[&GroupPair]| {
        p.iter()
            .map(|g| g.affinity.unwrap_or(0.0) - g.pillai)
            .fold(f64::NEG_INFINITY, f64::max)
    };
    pairs.sort_by(|a, b| closeness(b).total_cmp(&closeness(a)));
    let open = |p: &Vec<&GroupPair>| p.iter().any(|g| g.verdict != Verdict::Apart);
    let keep = pairs.iter().filter(|p| open(p)).count().clamp(3, MOST);
    pairs.truncate(keep);
    pairs
}

/// A pair's name, its vowels in the order of showing.
pub(super) fn name(findings: &Findings, vowels: [usize; 2]) -> String {
    let order = shown(&findings.panel.vowels);
    let mut pair = vowels;
    pair.sort_by_key(|v| order.iter().position(|o| o == v));
    pair.map(|v| format!("/{}/", findings.panel.vowels[v]))
        .join(" – ")
}

/// The drawing and the table.
pub(super) fn view(findings: &Findings) -> Option<PairsView> {
    let pairs = close(findings);
    if pairs.is_empty() {
        return None;
    }
    let mut all: Vec<[usize; 2]> = findings.pairs.iter().map(|p| p.vowels).collect();
    all.sort_unstable();
    all.dedup();
    let x = |v: f64| format!("{:.1}", LEFT + v.clamp(0.0, 1.0) * (RIGHT - LEFT));
    let mut lines = Vec::new();
    let mut rows = Vec::new();
    let mut y = ABOVE;
    for pair in &pairs {
        y += HEADING;
        let heading = format!("{:.1}", y - HEADING / 2.0 + 2.0);
        for (n, p) in pair.iter().enumerate() {
            y += ROW;
            let group = p.group.map_or_else(
                || "all speakers".to_owned(),
                |g| findings.panel.groups[g].clone(),
            );
            lines.push(Line {
                y: format!("{:.1}", y - ROW / 2.0),
                pair: name(findings, p.vowels),
                group: group.clone(),
                class: p.group.unwrap_or(0),
                merged: format!("{:.1}", p.pillai_if_merged_95 * (RIGHT - LEFT)),
                expected: x(p.pillai_if_merged),
                mean: x(p.pillai),
                dots: p
                    .speakers
                    .iter()
                    .filter_map(|s| s.overlap)
                    .map(|o| x(o.pillai))
                    .collect(),
                first: n == 0,
                heading: heading.clone(),
            });
            rows.push(row(findings, p, group));
        }
    }
    let height = y + 34.0;
    Some(PairsView {
        width: WIDTH,
        height,
        left: LEFT,
        right: RIGHT,
        foot: height - 8.0,
        bottom: height - 26.0,
        alt: format!(
            "Pillai trace of {} pairs of vowels, a dot a speaker, beside what one and the same \
             vowel would give; the numbers are in the table below.",
            pairs.len()
        ),
        ticks: [0.0, 0.25, 0.5, 0.75, 1.0]
            .map(|v| [x(v), plain(v, 2)])
            .into(),
        lines,
        rows,
        rule: Verdict::rule(),
        left_out: all.len() - pairs.len(),
    })
}

fn row(findings: &Findings, p: &GroupPair, group: String) -> Row {
    let count = |v: Verdict| p.speakers.iter().filter(|s| s.verdict == v).count();
    let verdicts: Vec<String> = [
        Verdict::Apart,
        Verdict::Overlapping,
        Verdict::NoEvidence,
        Verdict::TooFew,
    ]
    .into_iter()
    .filter(|v| count(*v) > 0)
    .map(|v| format!("{} {}", count(v), v.text()))
    .collect();
    Row {
        pair: name(findings, p.vowels),
        group,
        speakers: p.speakers_told(),
        pillai: plain(p.pillai, 2),
        expected: plain(p.pillai_if_merged, 2),
        point: plain(p.pillai_if_merged_95, 2),
        affinity: or_dash(p.affinity, 2),
        distance: p.distance_hz.map_or_else(
            || "–".to_owned(),
            |(d, i)| format!("{} ({})", plain(d, 0), interval(i, 0)),
        ),
        direction: p_value(p.common_direction_p),
        verdicts: verdicts.join(", "),
        verdict: p.verdict.text(),
        class: match p.verdict {
            Verdict::Apart => "apart",
            Verdict::Overlapping => "overlapping",
            Verdict::NoEvidence => "merged",
            Verdict::TooFew => "few",
        },
    }
}
