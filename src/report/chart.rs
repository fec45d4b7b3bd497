//! The vowel chart: F2 falling to the right, F1 falling upward, in places of a drawing.

use serde::Serialize;

use crate::compare::{Cloud, Ellipse, Findings, GroupVowel, PlaceVerdict};

use super::order::shown;

/// Size of a chart's drawing, in its own units.
pub(super) const WIDTH: f64 = 640.0;
const HEIGHT: f64 = 500.0;
/// Room left of and below the plane for the scales.
const LEFT: f64 = 76.0;
const BELOW: f64 = 46.0;
const EDGE: f64 = 14.0;
/// Room around the plane of a drawing without scales: half a symbol.
const MARGIN: f64 = 10.0;

/// Share of the population a region or an ellipse stands for.
const SHARE: f64 = 0.95;

/// Corners an ellipse is drawn with.
const CORNERS: usize = 36;

/// Steps of the scales, in hertz.
const STEPS_HZ: [f64; 22] = [
    150., 200., 250., 300., 400., 500., 600., 700., 800., 900., 1_000., 1_200., 1_400., 1_600.,
    1_800., 2_000., 2_250., 2_500., 2_750., 3_000., 3_500., 4_000.,
];

/// A line of a scale.
#[derive(Debug, Clone, Serialize)]
pub(super) struct Line {
    at: String,
    text: String,
}

/// What is drawn for one vowel of one group.
#[derive(Debug, Clone, Serialize)]
pub(super) struct Mark {
    /// Number of the group's colour and shape; beyond all of them for everybody.
    group: usize,
    x: String,
    y: String,
    /// Corners of the region of the mean.
    region: String,
    /// Corners of the ellipse of the tokens.
    spread: String,
    /// Outline of the movement, thin at its beginning.
    taper: String,
    title: String,
}

/// A vowel's symbol, and the lines between the groups' means.
#[derive(Debug, Clone, Serialize)]
pub(super) struct Symbol {
    text: String,
    x: String,
    y: String,
    different: bool,
    lines: Vec<[String; 4]>,
}

/// A chart.
#[derive(Debug, Clone, Serialize)]
pub(super) struct Chart {
    width: f64,
    height: f64,
    left: f64,
    bottom: f64,
    right: f64,
    top: f64,
    name: String,
    f1: Vec<Line>,
    f2: Vec<Line>,
    pub(super) marks: Vec<Mark>,
    symbols: Vec<Symbol>,
    alt: String,
}

/// The number everybody together is drawn with: none of the groups'.
pub(super) const EVERYBODY: usize = usize::MAX;

/// Which outlines a chart has room for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Outlines {
    /// Regions of the means.
    Means,
    /// Ellipses of the tokens, and movement.
    Tokens,
}

/// A plane of F1 and F2 on logarithmic scales.
#[derive(Debug, Clone, Copy)]
pub(super) struct Plane {
    low: [f64; 2],
    high: [f64; 2],
    width: f64,
    height: f64,
    left: f64,
    below: f64,
}

impl Plane {
    /// The plane that holds all `points` (F1, F2 in hertz) with a margin.
    fn around(points: impl Iterator<Item = [f64; 2]>) -> Option<Self> {
        let mut low = [f64::INFINITY; 2];
        let mut high = [0.0f64; 2];
        for p in points.filter(|p| p.iter().all(|v| v.is_finite() && *v > 0.0)) {
            for k in 0..2 {
                low[k] = low[k].min(p[k]);
                high[k] = high[k].max(p[k]);
            }
        }
        (high[0] > 0.0).then(|| Self {
            low: low.map(|v| v / 1.05),
            high: high.map(|v| v * 1.05),
            width: WIDTH,
            height: HEIGHT,
            left: LEFT,
            below: BELOW,
        })
    }

    fn place(&self, [f1, f2]: [f64; 2]) -> (f64, f64) {
        let share = |k: usize, v: f64| {
            (v.max(1.0).ln() - self.low[k].ln()) / (self.high[k].ln() - self.low[k].ln())
        };
        let edge = if self.left > MARGIN { EDGE } else { MARGIN };
        let x = self.left + (1.0 - share(1, f2)) * (self.width - self.left - edge);
        let y = edge + share(0, f1) * (self.height - self.below - edge);
        (x, y)
    }

    /// A point as text, for small drawings.
    pub(super) fn text(&self, point: [f64; 2]) -> (String, String) {
        let (x, y) = self.place(point);
        (short(x), short(y))
    }

    fn corners(&self, ellipse: Option<Ellipse>) -> String {
        let Some(ellipse) = ellipse else {
            return String::new();
        };
        joined(ellipse.outline(CORNERS).into_iter().map(|p| self.place(p)))
    }

    /// The outline of a path that widens from its beginning to its end.
    fn taper(&self, path: &[[f64; 2]]) -> String {
        let points: Vec<(f64, f64)> = path.iter().map(|p| self.place(*p)).collect();
        if points.len() < 2 {
            return String::new();
        }
        let last = points.len() - 1;
        let side = |sign: f64| {
            points.iter().enumerate().map({
                let points = &points;
                move |(n, (x, y))| {
                    let (a, b) = (points[n.saturating_sub(1)], points[(n + 1).min(last)]);
                    let (dx, dy) = (b.0 - a.0, b.1 - a.1);
                    let length = dx.hypot(dy).max(1e-6);
                    let half = sign * (0.5 + 2.5 * n as f64 / last as f64);
                    (x - dy / length * half, y + dx / length * half)
                }
            })
        };
        let back: Vec<(f64, f64)> = side(-1.0).collect();
        joined(side(1.0).chain(back.into_iter().rev()))
    }
}

fn short(value: f64) -> String {
    format!("{value:.1}")
}

fn joined(points: impl Iterator<Item = (f64, f64)>) -> String {
    points
        .map(|(x, y)| format!("{x:.1},{y:.1}"))
        .collect::<Vec<_>>()
        .join(" ")
}

/// The plane every chart of a report shares, so that charts can be laid over each other: around
/// the groups' means, their regions and movement. Ellipses of tokens that one mistracked token
/// blows up are cut off at its edge.
pub(super) fn shared_plane(findings: &Findings) -> Option<Plane> {
    let all = findings.groups.iter().flatten().chain(&findings.everybody);
    let outlines = all.flat_map(|v| {
        let inner = v.tokens.spread_ellipse(SHARE);
        let regions = v
            .speakers
            .mean_ellipse(SHARE)
            .map(|e| e.outline(8))
            .unwrap_or_default();
        let typical = v.tokens.n >= 3 && inner.is_some_and(|e| e.along < 0.25 * e.centre[1]);
        let inner = inner
            .filter(|_| typical)
            .map(|e| e.outline(8))
            .unwrap_or_default();
        regions
            .into_iter()
            .chain(inner)
            .chain(v.path.iter().copied())
            .chain([v.speakers.mean])
            .collect::<Vec<_>>()
    });
    Plane::around(outlines.filter(speech))
}

/// A small plane around the speakers' own means.
pub(super) fn speakers_plane(findings: &Findings, width: f64, height: f64) -> Option<Plane> {
    let plane = Plane::around(
        findings
            .speakers
            .iter()
            .map(|v| v.tokens.mean)
            .filter(speech),
    )?;
    Some(Plane {
        width,
        height,
        left: MARGIN,
        below: MARGIN,
        ..plane
    })
}

/// Far outliers would squeeze all others: a plane ends where speech does.
fn speech(p: &[f64; 2]) -> bool {
    (120.0..=1_600.0).contains(&p[0]) && (400.0..=4_000.0).contains(&p[1])
}

/// A chart of one or more groups' vowels.
pub(super) fn chart(
    findings: &Findings,
    plane: Plane,
    name: String,
    groups: &[(usize, &[GroupVowel])],
    outlines: Outlines,
) -> Chart {
    let mut marks = Vec::new();
    let mut symbols = Vec::new();
    let mut taken: Vec<(f64, f64)> = groups
        .iter()
        .flat_map(|(_, vowels)| vowels.iter().map(|v| plane.place(v.speakers.mean)))
        .collect();
    for vowel in shown(&findings.panel.vowels) {
        let symbol = findings.panel.vowels[vowel].ipa();
        let own: Vec<(usize, &GroupVowel)> = groups
            .iter()
            .filter_map(|(g, vowels)| Some((*g, vowels.iter().find(|v| v.vowel == vowel)?)))
            .collect();
        if own.is_empty() {
            continue;
        }
        for (group, v) in &own {
            marks.push(mark(&plane, *group, symbol, v, outlines));
        }
        let places: Vec<(f64, f64)> = own
            .iter()
            .map(|(_, v)| plane.place(v.speakers.mean))
            .collect();
        let (x, y) = beside(&places, &taken);
        taken.push((x, y));
        let lines = places
            .windows(2)
            .map(|w| [short(w[0].0), short(w[0].1), short(w[1].0), short(w[1].1)])
            .collect();
        let different = own.len() > 1
            && findings.contrasts.iter().any(|c| {
                c.vowels
                    .iter()
                    .any(|v| v.vowel == vowel && v.verdict() == PlaceVerdict::Different)
            });
        symbols.push(Symbol {
            text: symbol.to_owned(),
            x: short(x),
            y: short(y),
            different,
            lines,
        });
    }
    let inside = |k: usize| {
        STEPS_HZ
            .into_iter()
            .filter(move |s| (plane.low[k]..=plane.high[k]).contains(s))
    };
    let alt = format!(
        "Vowel chart of {name}: F2 falls to the right, F1 falls upward; {} vowels; the numbers are \
         in the table below.",
        symbols.len()
    );
    let line = |at: f64, hz: f64| Line {
        at: short(at),
        text: format!("{hz:.0}"),
    };
    Chart {
        width: WIDTH,
        height: HEIGHT,
        left: LEFT,
        bottom: HEIGHT - BELOW,
        right: WIDTH - EDGE,
        top: EDGE,
        f1: spaced(
            inside(0)
                .map(|s| line(plane.place([s, plane.low[1]]).1, s))
                .collect(),
            21.0,
        ),
        f2: spaced(
            inside(1)
                .map(|s| line(plane.place([plane.low[0], s]).0, s))
                .collect(),
            50.0,
        ),
        name,
        marks,
        symbols,
        alt,
    }
}

/// Leaves out steps whose figures would touch, also where they are drawn larger on a small screen.
fn spaced(lines: Vec<Line>, apart: f64) -> Vec<Line> {
    let mut kept: Vec<Line> = Vec::new();
    for line in lines {
        let at = |l: &Line| l.at.parse::<f64>().unwrap_or(0.0);
        if kept
            .last()
            .is_none_or(|l| (at(l) - at(&line)).abs() > apart)
        {
            kept.push(line);
        }
    }
    kept
}

fn mark(plane: &Plane, group: usize, symbol: &str, v: &GroupVowel, outlines: Outlines) -> Mark {
    let (x, y) = plane.text(v.speakers.mean);
    let Cloud { n, mean, .. } = v.speakers;
    let (region, spread, taper) = match outlines {
        Outlines::Means => (
            plane.corners(v.speakers.mean_ellipse(SHARE)),
            String::new(),
            String::new(),
        ),
        Outlines::Tokens => (
            String::new(),
            plane.corners(v.tokens.spread_ellipse(SHARE)),
            plane.taper(&v.path),
        ),
    };
    let title = format!(
        "{symbol}: F1 {:.0} Hz, F2 {:.0} Hz, {n} speakers, {} tokens",
        mean[0], mean[1], v.tokens.n
    );
    Mark {
        group,
        x,
        y,
        region,
        spread,
        taper,
        title,
    }
}

/// A place for a symbol beside its marks, away from what stands there already.
fn beside(places: &[(f64, f64)], taken: &[(f64, f64)]) -> (f64, f64) {
    const AWAY: f64 = 19.0;
    let n = places.len() as f64;
    let centre = (
        places.iter().map(|p| p.0).sum::<f64>() / n,
        places.iter().map(|p| p.1).sum::<f64>() / n,
    );
    let mut best = (f64::NEG_INFINITY, centre);
    for from in places.iter().chain([&centre]) {
        for step in 0..12 {
            let turn = std::f64::consts::TAU * f64::from(step) / 12.0;
            let at = (from.0 + AWAY * turn.cos(), from.1 + AWAY * turn.sin());
            let inside = (LEFT + 12.0..WIDTH - EDGE - 8.0).contains(&at.0)
                && (EDGE + 12.0..HEIGHT - BELOW - 8.0).contains(&at.1);
            let room = taken
                .iter()
                .map(|t| (t.0 - at.0).hypot(t.1 - at.1))
                .fold(f64::INFINITY, f64::min);
            // Beyond twice the distance more room is no better; nearer to the middle is.
            let score = room.min(2.0 * AWAY)
                - 0.05 * (at.0 - centre.0).hypot(at.1 - centre.1)
                - if inside { 0.0 } else { 1_000.0 };
            if score > best.0 {
                best = (score, at);
            }
        }
    }
    best.1
}

#[cfg(test)]
mod tests {
    use super::*;

    fn plane() -> Plane {
        Plane::around([[300.0, 800.0], [800.0, 2_400.0]].into_iter()).unwrap()
    }

    #[test]
    fn f2_falls_to_the_right_and_f1_falls_upward() {
        let plane = plane();
        let (front, back) = (plane.place([500.0, 2_200.0]), plane.place([500.0, 900.0]));
        assert!(front.0 < back.0 && front.1 == back.1);
        let (close, open) = (plane.place([320.0, 1_500.0]), plane.place([780.0, 1_500.0]));
        assert!(close.1 < open.1 && close.0 == open.0);
    }

    #[test]
    fn a_taper_is_thin_first_and_wide_last() {
        let outline = plane().taper(&[[400.0, 1_000.0], [400.0, 1_200.0], [400.0, 1_400.0]]);
        let points: Vec<Vec<f64>> = outline
            .split(' ')
            .map(|p| p.split(',').map(|v| v.parse().unwrap()).collect())
            .collect();
        let width = |a: &[f64], b: &[f64]| (a[0] - b[0]).hypot(a[1] - b[1]);
        assert_eq!(points.len(), 6);
        assert!((width(&points[0], &points[5]) - 1.0).abs() < 0.2);
        assert!((width(&points[2], &points[3]) - 6.0).abs() < 0.2);
    }
}
