//! The most believable path through the hypotheses of one token.
//!
//! *Source*: dynamic programming as R. Bellman (1957) and, for sequences of states, A. Viterbi
//! (1967, IEEE Trans. Inf. Theory 13, 260-269).

use crate::formants::SpanAnalysis;
use crate::formants::consensus::Hypothesis;

/// One unit of jump between neighbouring points, in ln F1, F2, F3.
const JUMP_UNIT: [f64; 3] = [0.08, 0.06, 0.05];

/// Units charged at most for one formant: a real jump is as likely as four units.
const JUMP_MOST: f64 = 4.0;

/// Weight of one unit of jump against one unit of log belief.
const JUMP_WEIGHT: f64 = 0.8;

/// A point without any hypothesis costs this much belief and breaks no path.
const GAP: f64 = -6.0;

/// The index of the hypothesis chosen at every point; `None` where there is none.
///
/// `belief` gives the log belief of a hypothesis once the speaker is known.
pub(super) fn most_believable(
    analysis: &SpanAnalysis,
    belief: impl Fn(&Hypothesis) -> f64,
) -> Vec<Option<usize>> {
    let points = &analysis.points;
    // The last point that had hypotheses: its scores, and for every point the chosen predecessor.
    let mut scores: Vec<f64> = Vec::new();
    let mut previous: Option<usize> = None;
    let mut back: Vec<Vec<usize>> = Vec::with_capacity(points.len());
    for (t, point) in points.iter().enumerate() {
        if point.hypotheses.is_empty() {
            scores.iter_mut().for_each(|s| *s += GAP);
            back.push(Vec::new());
            continue;
        }
        let mut next = Vec::with_capacity(point.hypotheses.len());
        let mut from = Vec::with_capacity(point.hypotheses.len());
        for h in &point.hypotheses {
            let (mut best, mut at) = (0.0, 0);
            if let Some(p) = previous {
                best = f64::NEG_INFINITY;
                for (j, g) in points[p].hypotheses.iter().enumerate() {
                    let score = scores[j] - JUMP_WEIGHT * jump(g, h);
                    if score > best {
                        (best, at) = (score, j);
                    }
                }
            }
            next.push(best + belief(h));
            from.push(at);
        }
        scores = next;
        back.push(from);
        previous = Some(t);
    }
    let mut path = vec![None; points.len()];
    let mut state =
        (0..scores.len()).max_by(|&a, &b| scores[a].total_cmp(&scores[b]).then(b.cmp(&a)));
    for t in (0..points.len()).rev() {
        if back[t].is_empty() {
            continue;
        }
        if let Some(s) = state {
            path[t] = Some(s);
            state = Some(back[t][s]);
        }
    }
    path
}

fn jump(a: &Hypothesis, b: &Hypothesis) -> f64 {
    (0..3)
        .map(|k| (f64::from((a.ln_hz[k] - b.ln_hz[k]).abs()) / JUMP_UNIT[k]).min(JUMP_MOST))
        .sum()
}
