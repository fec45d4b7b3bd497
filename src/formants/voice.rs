//! The fundamental frequency along a token, by dynamic programming over the candidates of its
//! points, within the speaker's own range once that is known.

use super::pitch::PitchCandidate;

/// A point whose best candidate repeats less well than this is unvoiced. Common practice puts the
/// bound for cross-correlation between 0.3 and 0.5.
const VOICED: f64 = 0.45;

/// Belief lost per octave of lag: a period twice as long repeats as well, and is not the period.
const OCTAVE_CHARGE: f64 = 0.06;

/// Weight of a change of pitch between neighbouring points, per octave.
const CHANGE_CHARGE: f64 = 0.8;

/// Weight of the distance from the speaker's median, per octave squared.
const RANGE_CHARGE: f64 = 0.35;

/// Charge for a change between voiced and unvoiced.
const VOICING_CHARGE: f64 = 0.2;

/// F0 in hertz at every analysis point, `None` where unvoiced; `median_hz` is the speaker's, where
/// it is known.
///
/// *Shape*: `points` holds the candidates of every point, the strongest first; as many values.
pub fn contour(points: &[&[PitchCandidate]], median_hz: Option<f64>) -> Vec<Option<f64>> {
    let local = |c: &PitchCandidate| {
        let hz = f64::from(c.hz);
        let mut score = f64::from(c.strength) + OCTAVE_CHARGE * (hz / 100.0).log2();
        if let Some(m) = median_hz {
            let octaves = (hz / m).log2();
            score -= RANGE_CHARGE * octaves * octaves;
        }
        score
    };
    // State 0 is unvoiced, state i + 1 is candidate i.
    let mut scores: Vec<f64> = Vec::new();
    let mut back: Vec<Vec<usize>> = Vec::with_capacity(points.len());
    for (t, point) in points.iter().enumerate() {
        let states = point.len() + 1;
        let mut next = Vec::with_capacity(states);
        let mut from = Vec::with_capacity(states);
        for s in 0..states {
            let own = if s == 0 { VOICED } else { local(&point[s - 1]) };
            let (mut best, mut at) = (0.0, 0);
            if t > 0 {
                best = f64::NEG_INFINITY;
                for (r, score) in scores.iter().enumerate() {
                    let change = match (r, s) {
                        (0, 0) => 0.0,
                        (0, _) | (_, 0) => VOICING_CHARGE,
                        _ => {
                            let from_hz = f64::from(points[t - 1][r - 1].hz);
                            let to_hz = f64::from(point[s - 1].hz);
                            CHANGE_CHARGE * (to_hz / from_hz).log2().abs()
                        }
                    };
                    if score - change > best {
                        (best, at) = (score - change, r);
                    }
                }
            }
            next.push(best + own);
            from.push(at);
        }
        scores = next;
        back.push(from);
    }
    let mut contour = vec![None; points.len()];
    let mut state = (0..scores.len())
        .max_by(|&a, &b| scores[a].total_cmp(&scores[b]).then(b.cmp(&a)))
        .unwrap_or(0);
    for t in (0..points.len()).rev() {
        if state > 0 {
            contour[t] = Some(f64::from(points[t][state - 1].hz));
        }
        state = back[t][state];
    }
    contour
}
