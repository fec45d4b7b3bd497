//! Groups against each other: one line a vowel, differences with their intervals.

use serde::Serialize;

use crate::compare::{Contrast, Difference, Findings, Measure, PlaceVerdict, VowelContrast};

use super::numbers::{interval, or_dash, p_value, plain, signed};
use super::order::shown;

/// Height of a line of the drawing.
const ROW: f64 = 28.0;
/// Room above the first line.
const ABOVE: f64 = 34.0;
/// Width of the drawing; the symbols stand left of the first panel.
const WIDTH: f64 = 640.0;
const SYMBOL_ROOM: f64 = 44.0;
const GAP: f64 = 22.0;

/// One contrast, drawn and in figures.
#[derive(Debug, Clone, Serialize)]
pub(super) struct ContrastView {
    title: String,
    note: String,
    alt: String,
    width: f64,
    height: f64,
    panels: Vec<Panel>,
    symbols: Vec<Placed>,
    rows: Vec<Row>,
}

/// The differences in one formant.
#[derive(Debug, Clone, Serialize)]
struct Panel {
    /// What stands left of zero, the formant, what stands right of it.
    heading: [&'static str; 3],
    middle: String,
    zero: String,
    left: String,
    right: String,
    foot: String,
    ends: [String; 2],
    bars: Vec<Bar>,
}

#[derive(Debug, Clone, Serialize)]
struct Bar {
    y: String,
    low: String,
    high: String,
    at: String,
    told: bool,
    has_interval: bool,
}

#[derive(Debug, Clone, Serialize)]
struct Placed {
    y: String,
    text: String,
    told: bool,
}

/// A vowel in figures, ready to be read.
#[derive(Debug, Clone, Serialize)]
struct Row {
    vowel: String,
    speakers: String,
    f1_hz: [String; 2],
    f2_hz: [String; 2],
    f1: [String; 2],
    f2: [String; 2],
    g: [String; 2],
    distance: String,
    p: String,
    p_holm: String,
    movement: [String; 2],
    duration: [String; 2],
    verdict: &'static str,
    told: bool,
}

/// Every contrast of a survey.
pub(super) fn views(findings: &Findings) -> Vec<ContrastView> {
    let told = findings.contrasts.iter().filter(|c| !c.vowels.is_empty());
    told.map(|c| view(findings, c)).collect()
}

fn view(findings: &Findings, contrast: &Contrast) -> ContrastView {
    let [first, second] = &contrast.names;
    let rows: Vec<&VowelContrast> = shown(&findings.panel.vowels)
        .into_iter()
        .filter_map(|v| contrast.vowels.iter().find(|c| c.vowel == v))
        .collect();
    let height = ABOVE + ROW * rows.len() as f64 + 30.0;
    let width = (WIDTH - SYMBOL_ROOM - GAP) / 2.0;
    let panels = vec![
        panel(
            &rows,
            Measure::F1AtReference,
            SYMBOL_ROOM,
            width,
            height,
            ["◂ closer", "F1", "opener ▸"],
        ),
        panel(
            &rows,
            Measure::F2AtReference,
            SYMBOL_ROOM + width + GAP,
            width,
            height,
            ["◂ backer", "F2", "fronter ▸"],
        ),
    ];
    let told = |v: &VowelContrast| v.verdict() == PlaceVerdict::Different;
    ContrastView {
        title: format!("{second} against {first}"),
        note: format!(
            "{} and {} speakers. Hertz at the size of the survey's middle speaker, {second} less \
             {first} (closer, opener, backer and fronter are said of {second}); the line is the 95 % interval over speakers. Filled: the place of the vowel \
             differs (permutation of speakers, corrected for {} vowels).",
            contrast.speakers[1],
            contrast.speakers[0],
            rows.len()
        ),
        alt: format!(
            "Differences in F1 and F2 between {second} and {first} for {} vowels with intervals; \
             the numbers are in the table below.",
            rows.len()
        ),
        width: WIDTH,
        height,
        panels,
        symbols: rows
            .iter()
            .enumerate()
            .map(|(n, v)| Placed {
                y: format!("{:.1}", line(n)),
                text: findings.panel.vowels[v.vowel].to_string(),
                told: told(v),
            })
            .collect(),
        rows: rows.iter().map(|v| row(findings, v)).collect(),
    }
}

fn line(n: usize) -> f64 {
    ABOVE + ROW * (n as f64 + 0.5)
}

fn panel(
    rows: &[&VowelContrast],
    measure: Measure,
    left: f64,
    width: f64,
    height: f64,
    heading: [&'static str; 3],
) -> Panel {
    let found: Vec<Option<&Difference>> = rows.iter().map(|v| v.measure(measure)).collect();
    let reach = found
        .iter()
        .flatten()
        .flat_map(|d| {
            d.interval
                .unwrap_or([d.value; 2])
                .into_iter()
                .chain([d.value])
        })
        .fold(10.0f64, |reach, v| reach.max(v.abs()));
    let step = step(reach);
    let reach = (reach / step).ceil() * step;
    let x = |value: f64| format!("{:.1}", left + width * (0.5 + 0.5 * value / reach * 0.96));
    let bars = found
        .iter()
        .zip(rows)
        .enumerate()
        .filter_map(|(n, (d, v))| {
            let d = (*d)?;
            let [low, high] = d.interval.unwrap_or([d.value; 2]);
            Some(Bar {
                y: format!("{:.1}", line(n)),
                low: x(low),
                high: x(high),
                at: x(d.value),
                told: v.verdict() == PlaceVerdict::Different,
                has_interval: d.interval.is_some(),
            })
        })
        .collect();
    Panel {
        heading,
        middle: format!("{:.1}", left + width / 2.0),
        zero: x(0.0),
        left: x(-reach),
        right: x(reach),
        foot: format!("{:.1}", height - 8.0),
        ends: [signed(-reach, 0), signed(reach, 0)],
        bars,
    }
}

/// A round number of hertz that a scale of this reach can be divided by.
fn step(reach: f64) -> f64 {
    [10.0, 20.0, 50.0, 100.0, 200.0, 500.0, 1_000.0]
        .into_iter()
        .find(|s| reach / s <= 6.0)
        .unwrap_or(2_000.0)
}

fn row(findings: &Findings, v: &VowelContrast) -> Row {
    let with_interval = |measure: Measure, digits: usize, scale: f64| match v.measure(measure) {
        Some(d) => [
            signed(scale * d.value, digits),
            d.interval
                .map_or_else(String::new, |i| interval(i.map(|e| scale * e), digits)),
        ],
        None => ["–".to_owned(), String::new()],
    };
    let g = |measure: Measure| match v.measure(measure).and_then(|d| d.hedges_g) {
        Some(g) => signed(g, 2),
        None => "–".to_owned(),
    };
    let verdict = v.verdict();
    let speakers = v.place.as_ref().map(|p| p.speakers);
    Row {
        vowel: findings.panel.vowels[v.vowel].to_string(),
        speakers: speakers.map_or_else(|| "–".to_owned(), |[a, b]| format!("{b} : {a}")),
        f1_hz: with_interval(Measure::F1AtReference, 0, 1.0),
        f2_hz: with_interval(Measure::F2AtReference, 0, 1.0),
        f1: with_interval(Measure::F1, 2, 1.0),
        f2: with_interval(Measure::F2, 2, 1.0),
        g: [g(Measure::F1), g(Measure::F2)],
        distance: or_dash(v.distance_hz, 0),
        p: v.place
            .as_ref()
            .map_or_else(|| "–".to_owned(), |t| p_value(t.test.p)),
        p_holm: v.place_p_holm.map_or_else(|| "–".to_owned(), p_value),
        movement: with_interval(Measure::Vector, 0, 1.0),
        duration: with_interval(Measure::Duration, 0, 1_000.0),
        verdict: verdict.text(),
        told: verdict == PlaceVerdict::Different,
    }
}

/// The differences of one contrast that can be said in a sentence, strongest first.
pub(super) fn told<'a>(
    findings: &Findings,
    contrast: &'a Contrast,
) -> Vec<(String, &'a VowelContrast)> {
    let mut told: Vec<&VowelContrast> = contrast
        .vowels
        .iter()
        .filter(|v| v.verdict() == PlaceVerdict::Different)
        .collect();
    told.sort_by(|a, b| {
        b.distance_hz
            .unwrap_or(0.0)
            .total_cmp(&a.distance_hz.unwrap_or(0.0))
    });
    told.into_iter()
        .map(|v| (findings.panel.vowels[v.vowel].to_string(), v))
        .collect()
}

/// A difference in words: `fronter: F2 higher by 398 Hz (95 % interval 330 to 470)`.
pub(super) fn words(v: &VowelContrast) -> String {
    let part = |measure: Measure, up: &str, down: &str, name: &str| {
        let d = v.measure(measure)?;
        let interval = d.interval?;
        // What the interval lets stand on both sides of zero is not said in words.
        if interval[0] * interval[1] <= 0.0 {
            return None;
        }
        let (word, way) = if d.value > 0.0 {
            (up, "higher")
        } else {
            (down, "lower")
        };
        let size = [interval[0].abs(), interval[1].abs()];
        let size = [size[0].min(size[1]), size[0].max(size[1])];
        let by = plain(d.value.abs(), 0);
        let text = format!(
            "{name} {way} by {by} Hz (95 % interval {})",
            super::numbers::interval(size, 0)
        );
        Some((word.to_owned(), text))
    };
    let parts: Vec<(String, String)> = [
        part(Measure::F2AtReference, "fronter", "backer", "F2"),
        part(Measure::F1AtReference, "opener", "closer", "F1"),
    ]
    .into_iter()
    .flatten()
    .collect();
    if parts.is_empty() {
        return "at another place, though neither formant alone shows in which direction"
            .to_owned();
    }
    let (words, texts): (Vec<String>, Vec<String>) = parts.into_iter().unzip();
    format!("{}: {}", words.join(" and "), texts.join(", "))
}
