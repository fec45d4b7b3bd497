//! The page put together.

use std::collections::BTreeMap;

use minijinja::value::Serde;
use minijinja::{Environment, Value, context};
use serde::Serialize;
use thiserror::Error;

use super::chart::{Chart, EVERYBODY, Outlines, chart, shared_plane};
use super::confusion::{self, ConfusionView};
use super::contrasts::{self, ContrastView};
use super::numbers::{or_dash, plain};
use super::order::shown;
use super::pairs::{self, PairsView};
use super::picture::PictureView;
use super::sentences;
use super::speakers::{self, SpeakersView};
use super::subject::Subject;
use crate::compare::{Findings, GroupVowel, Resampling};

/// Where the recordings come from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Nature {
    /// People were recorded.
    Recorded,
    /// The program invented it.
    Invented,
}

/// What stands around the findings.
#[derive(Debug, Clone, PartialEq)]
pub struct Frame {
    /// Title of the page.
    pub title: String,
    /// Where the recordings come from.
    pub nature: Nature,
    /// What the run was made of: a name and a value each, shown as given.
    pub provenance: Vec<(String, String)>,
}

/// Why a page could not be made.
#[derive(Debug, Error)]
pub enum ReportError {
    /// The template refused.
    #[error("the page's template failed: {0:#}")]
    Template(#[from] minijinja::Error),
}

/// Doubtful tokens listed at most; the table has them all.
const MOST_DOUBTS: usize = 200;

/// Groups laid over each other in one chart; more stand side by side.
const MOST_OVERLAID: usize = 3;

/// Makes the page.
///
/// # Errors
/// [`ReportError`] where the template cannot be filled, a defect of the program.
pub fn render(subject: &Subject, frame: &Frame) -> Result<String, ReportError> {
    let mut environment = Environment::new();
    // The name's ending switches the escaping of every text on.
    environment.add_template("page.html", include_str!("page.html"))?;
    let template = environment.get_template("page.html")?;
    let view = view(subject, frame);
    Ok(template.render(context! {
        css => Value::from_safe_string(include_str!("page.css").to_owned()),
        ..Value::from(Serde(&view))
    })?)
}

/// Everything the template shows.
#[derive(Debug, Serialize)]
struct PageView<'a> {
    title: &'a str,
    invented: bool,
    provenance: &'a [(String, String)],
    version: &'static str,
    tokens: usize,
    speaker_count: usize,
    found: Vec<String>,
    sure: Vec<String>,
    person: Vec<String>,
    groups: Vec<GroupView>,
    group_column: Option<&'a str>,
    overview: Option<Chart>,
    overlaid: bool,
    side_by_side: Vec<Chart>,
    vowels: Vec<VowelRow>,
    contrasts: Vec<ContrastView>,
    pairs: Option<PairsView>,
    confusion: Option<ConfusionView>,
    doubts: &'a BTreeMap<String, usize>,
    reasons: &'a BTreeMap<String, usize>,
    doubtful: Vec<Doubtful>,
    doubtful_count: usize,
    pictured: usize,
    most_doubts: usize,
    speakers: SpeakersView,
    left_out: &'a BTreeMap<String, String>,
    method: MethodView,
    resampling: ResamplingView,
}

#[derive(Debug, Serialize)]
struct ResamplingView {
    replicates: usize,
    arrangements: usize,
    seed: u64,
}

fn view<'a>(subject: &'a Subject, frame: &'a Frame) -> PageView<'a> {
    let findings = &subject.findings;
    let Resampling {
        replicates,
        arrangements,
        seed,
    } = findings.resampling;
    PageView {
        title: &frame.title,
        invented: frame.nature == Nature::Invented,
        provenance: &frame.provenance,
        version: env!("CARGO_PKG_VERSION"),
        tokens: findings.tally.tokens,
        speaker_count: findings.tally.speakers.len(),
        found: sentences::found(findings),
        sure: sentences::sure(findings),
        person: sentences::person(findings),
        groups: group_views(findings),
        group_column: subject.group_column.as_deref(),
        overview: overview(findings),
        overlaid: overlaid(findings),
        side_by_side: side_by_side(findings),
        vowels: vowel_rows(findings),
        contrasts: contrasts::views(findings),
        pairs: pairs::view(findings),
        confusion: confusion::view(&findings.tally, model(subject)),
        doubts: &findings.tally.doubts,
        reasons: &findings.tally.reasons,
        doubtful: doubtful(subject),
        doubtful_count: findings.tally.doubtful,
        pictured: subject.pictures.len(),
        most_doubts: MOST_DOUBTS,
        speakers: speakers::view(subject),
        left_out: &findings.panel.left_out,
        method: method_view(findings),
        resampling: ResamplingView {
            replicates,
            arrangements,
            seed,
        },
    }
}

#[derive(Debug, Serialize)]
struct GroupView {
    name: String,
    class: usize,
    speakers: usize,
}

fn group_views(findings: &Findings) -> Vec<GroupView> {
    findings
        .panel
        .groups
        .iter()
        .enumerate()
        .map(|(class, name)| GroupView {
            name: name.clone(),
            class,
            speakers: findings.panel.members(Some(class)).len(),
        })
        .collect()
}

/// The first chart: the groups over each other where they are few, everybody otherwise.
fn overview(findings: &Findings) -> Option<Chart> {
    let plane = shared_plane(findings)?;
    let overlaid: Vec<(usize, &[GroupVowel])> = if overlaid(findings) {
        findings
            .groups
            .iter()
            .enumerate()
            .map(|(g, v)| (g, v.as_slice()))
            .collect()
    } else {
        vec![(EVERYBODY, findings.everybody.as_slice())]
    };
    let name = match overlaid.len() {
        1 => "all speakers".to_owned(),
        _ => findings.panel.groups.join(" and "),
    };
    Some(chart(findings, plane, name, &overlaid, Outlines::Means))
}

fn overlaid(findings: &Findings) -> bool {
    (2..=MOST_OVERLAID).contains(&findings.groups.len())
}

/// One chart a group: tokens and movement.
fn side_by_side(findings: &Findings) -> Vec<Chart> {
    let Some(plane) = shared_plane(findings) else {
        return Vec::new();
    };
    if findings.groups.is_empty() {
        let name = "all speakers".to_owned();
        return vec![chart(
            findings,
            plane,
            name,
            &[(EVERYBODY, &findings.everybody)],
            Outlines::Tokens,
        )];
    }
    findings
        .groups
        .iter()
        .zip(&findings.panel.groups)
        .enumerate()
        .map(|(g, (vowels, name))| {
            chart(
                findings,
                plane,
                name.clone(),
                &[(g, vowels)],
                Outlines::Tokens,
            )
        })
        .collect()
}

/// A vowel of a group in figures.
#[derive(Debug, Serialize)]
struct VowelRow {
    vowel: String,
    group: String,
    speakers: usize,
    tokens: usize,
    f1: String,
    f2: String,
    f1_sd: String,
    f2_sd: String,
    duration: String,
}

fn vowel_rows(findings: &Findings) -> Vec<VowelRow> {
    let sets: Vec<&Vec<GroupVowel>> = if findings.groups.is_empty() {
        vec![&findings.everybody]
    } else {
        findings.groups.iter().collect()
    };
    let mut rows = Vec::new();
    for vowel in shown(&findings.panel.vowels) {
        for v in sets
            .iter()
            .filter_map(|set| set.iter().find(|v| v.vowel == vowel))
        {
            let [f1, _, f2] = v.speakers.covariance.map(f64::sqrt);
            let several = v.speakers.n > 1;
            rows.push(VowelRow {
                vowel: findings.panel.vowels[vowel].to_string(),
                group: v
                    .group
                    .map_or_else(|| "all".to_owned(), |g| findings.panel.groups[g].clone()),
                speakers: v.speakers.n,
                tokens: v.tokens.n,
                f1: plain(v.speakers.mean[0], 0),
                f2: plain(v.speakers.mean[1], 0),
                f1_sd: or_dash(several.then_some(f1), 0),
                f2_sd: or_dash(several.then_some(f2), 0),
                duration: or_dash(v.duration_s.map(|d| 1_000.0 * d), 0),
            });
        }
    }
    rows
}

fn model(subject: &Subject) -> String {
    let named = subject
        .table
        .rows
        .iter()
        .filter_map(|r| r.identified.as_ref())
        .map(|i| &i.model);
    named
        .into_iter()
        .find(|m| !m.is_empty())
        .cloned()
        .unwrap_or_default()
}

/// A token a person should look at.
#[derive(Debug, Serialize)]
struct Doubtful {
    token: String,
    speaker: String,
    word: String,
    vowel: String,
    formants: [String; 3],
    doubts: String,
    picture: Option<PictureView>,
}

fn doubtful(subject: &Subject) -> Vec<Doubtful> {
    let rows = subject.table.rows.iter().filter_map(|row| {
        let reading = row.reading.as_ref().ok()?;
        (!reading.doubts.is_empty()).then_some((row, reading))
    });
    let mut rows: Vec<_> = rows.collect();
    // Those with a picture and those with more doubts come first.
    rows.sort_by_key(|(row, reading)| {
        (
            !subject.pictures.contains_key(&row.token),
            usize::MAX - reading.doubts.len(),
        )
    });
    rows.into_iter()
        .take(MOST_DOUBTS)
        .map(|(row, reading)| Doubtful {
            token: row.token.clone(),
            speaker: row.speaker.clone(),
            word: row.word.clone().unwrap_or_default(),
            vowel: row
                .vowel
                .as_ref()
                .map_or_else(|| row.label.clone(), ToString::to_string),
            formants: [0, 1, 2].map(|k| match (reading.formant_hz[k], reading.sd_hz[k]) {
                (Some(f), Some(sd)) => format!("{} ± {}", plain(f, 0), plain(sd, 0)),
                (f, _) => or_dash(f, 0),
            }),
            doubts: reading.doubts.join("; "),
            picture: subject.pictures.get(&row.token).map(PictureView::of),
        })
        .collect()
}

#[derive(Debug, Serialize)]
struct MethodView {
    name: String,
    formula: &'static str,
    unit: &'static str,
    pitfalls: &'static str,
    source: &'static str,
}

fn method_view(findings: &Findings) -> MethodView {
    let method = &findings.panel.method;
    let account = method.account();
    MethodView {
        name: method.to_string(),
        formula: account.formula,
        unit: account.unit,
        pitfalls: account.pitfalls,
        source: account.source,
    }
}
