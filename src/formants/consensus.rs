//! Many readings of one frame gathered into the few that differ.
//!
//! A true resonance is found wherever the band and order allow; a spurious one moves with them.
//! So readings that agree in F1, F2 and F3 at once are gathered, and how many agree is the first
//! part of how far a hypothesis is believed.

use super::grid::{GridReading, READINGS, RESONANCES};

/// How far two readings may differ and still support each other, as standard deviations of
/// ln F1, ln F2, ln F3. Half and one and a half times these values change no gross-error share on
/// `hvd-words` by more than 0.1 points.
const AGREEMENT_SD: [f64; 3] = [0.08, 0.06, 0.04];

/// Most hypotheses kept per frame.
const MOST: usize = 12;

/// Bandwidth at which one unit of disbelief is charged per formant, in hertz, and the most units
/// charged for one formant.
const BANDWIDTH_UNIT_HZ: f64 = 400.0;
const BANDWIDTH_MOST: f64 = 3.0;
/// Weight of the bandwidth charge against the logarithm of the share that agrees.
const BANDWIDTH_WEIGHT: f64 = 0.3;

/// One believable reading of one frame, held by several analyses.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Hypothesis {
    /// ln of F1, F2, F3 in hertz: medians over the analyses that agree.
    pub ln_hz: [f32; 3],
    /// F4 in hertz: median over those that have one; NaN if none.
    pub f4_hz: f32,
    /// Median bandwidths of F1 to F3 in hertz.
    pub bandwidth_hz: [f32; 3],
    /// Spread of the agreeing analyses around the median, in ln units (median absolute deviation).
    pub spread: [f32; 3],
    /// Share of the frame's analyses that are gathered here.
    pub share: f32,
    /// ln of F1, F2, F3 in hertz as the harmonics alone give them (discrete all-pole); NaN where the
    /// voice is too low for it to matter or the harmonics do not determine them.
    pub harmonic_ln_hz: [f32; 3],
    /// Belief before the speaker is known: log of the agreeing share less the bandwidth charge.
    pub belief: f32,
}

/// Gathers the readings of one frame, the most believed first, each with the indices of the
/// readings gathered in it, again the most believed first.
///
/// *Shape*: any number of readings; at most [`MOST`] hypotheses; none where there are no readings.
pub(super) fn gather(readings: &[GridReading]) -> Vec<(Hypothesis, Vec<usize>)> {
    let n = readings.len();
    let ln: Vec<[f64; 3]> = readings
        .iter()
        .map(|r| [0, 1, 2].map(|k| r.frequency_hz[k].ln()))
        .collect();
    let mut support = vec![1.0f64; n];
    for i in 0..n {
        for j in i + 1..n {
            let mut d = 0.0;
            for k in 0..3 {
                let x = (ln[i][k] - ln[j][k]) / AGREEMENT_SD[k];
                d += x * x;
            }
            if d < 40.0 {
                let w = (-0.5 * d).exp();
                support[i] += w;
                support[j] += w;
            }
        }
    }
    let belief: Vec<f64> = (0..n)
        .map(|i| {
            let charge: f64 = (0..3)
                .map(|k| (readings[i].bandwidth_hz[k] / BANDWIDTH_UNIT_HZ).min(BANDWIDTH_MOST))
                .sum();
            (support[i] / READINGS as f64).ln() - BANDWIDTH_WEIGHT * charge
        })
        .collect();
    let mut order: Vec<usize> = (0..n).collect();
    order.sort_by(|&a, &b| belief[b].total_cmp(&belief[a]).then(a.cmp(&b)));
    let mut taken = vec![false; n];
    let mut out = Vec::with_capacity(MOST);
    for &seed in &order {
        if taken[seed] {
            continue;
        }
        let near: Vec<usize> = (0..n)
            .filter(|&i| (0..3).all(|k| (ln[i][k] - ln[seed][k]).abs() < AGREEMENT_SD[k]))
            .collect();
        for &i in &near {
            taken[i] = true;
        }
        let mut members = near;
        let hypothesis = summarise(readings, &ln, &members, belief[seed]);
        members.sort_by(|&a, &b| belief[b].total_cmp(&belief[a]).then(a.cmp(&b)));
        out.push((hypothesis, members));
        if out.len() == MOST {
            break;
        }
    }
    out
}

fn summarise(
    readings: &[GridReading],
    ln: &[[f64; 3]],
    members: &[usize],
    belief: f64,
) -> Hypothesis {
    let mut column: Vec<f64> = Vec::with_capacity(members.len());
    let mut hypothesis = Hypothesis {
        ln_hz: [0.0; 3],
        f4_hz: f32::NAN,
        bandwidth_hz: [0.0; 3],
        spread: [0.0; 3],
        harmonic_ln_hz: [f32::NAN; 3],
        share: members.len() as f32 / READINGS as f32,
        belief: belief as f32,
    };
    for k in 0..3 {
        let centre = median_of(&mut column, members.iter().map(|&i| ln[i][k]));
        hypothesis.ln_hz[k] = centre as f32;
        hypothesis.spread[k] = median_of(
            &mut column,
            members.iter().map(|&i| (ln[i][k] - centre).abs()),
        ) as f32;
        hypothesis.bandwidth_hz[k] = median_of(
            &mut column,
            members.iter().map(|&i| readings[i].bandwidth_hz[k]),
        ) as f32;
    }
    let fourth = RESONANCES - 1;
    let with_fourth = members
        .iter()
        .map(|&i| readings[i].frequency_hz[fourth])
        .filter(|f| f.is_finite());
    hypothesis.f4_hz = median_of(&mut column, with_fourth) as f32;
    hypothesis
}

/// The median of `values` through `storage`; the lower one of an even number, NaN of none.
fn median_of(storage: &mut Vec<f64>, values: impl Iterator<Item = f64>) -> f64 {
    storage.clear();
    storage.extend(values);
    if storage.is_empty() {
        return f64::NAN;
    }
    let middle = (storage.len() - 1) / 2;
    *storage.select_nth_unstable_by(middle, f64::total_cmp).1
}

/// Readings made again from harmonics, gathered to one value per formant: the median over those
/// that stay within a quarter of the hypothesis.
pub(super) fn gather_harmonic(hypothesis: &mut Hypothesis, remade: &[GridReading]) {
    const NEAR: f64 = 0.25;
    let mut column = Vec::with_capacity(remade.len());
    for k in 0..3 {
        let here = f64::from(hypothesis.ln_hz[k]);
        let near = remade
            .iter()
            .map(|r| r.frequency_hz[k].ln())
            .filter(|ln| (ln - here).abs() < NEAR);
        hypothesis.harmonic_ln_hz[k] = median_of(&mut column, near) as f32;
    }
}
