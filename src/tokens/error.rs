//! The standard error of a formant value, from what bears on it.
//!
//! The parts are independent as far as they go, so their squares add. How much each counts was
//! fitted (Student's t likelihood with three degrees of freedom, so that gross errors do not widen
//! the bars of all others) to half of the speakers of `hvd-words` together with half of the
//! synthetic ones, and read off on the other halves; both fits agree within a third on every weight
//! that matters, and the values below are their rounded means.

use super::value::Evidence;

/// What each part of the evidence counts.
struct Weights {
    spread: f64,
    rivals: f64,
    harmonic: f64,
    bend: f64,
    spacing: f64,
    bandwidth: f64,
    /// Hertz that stay when all else agrees.
    floor_hz: f64,
}

/// F1, F2, F3.
const WEIGHTS: [Weights; 3] = [
    Weights {
        spread: 0.42,
        rivals: 0.05,
        harmonic: 0.35,
        bend: 0.9,
        spacing: 0.038,
        bandwidth: 0.15,
        floor_hz: 4.8,
    },
    Weights {
        spread: 1.5,
        rivals: 0.027,
        harmonic: 0.32,
        bend: 0.65,
        spacing: 0.042,
        bandwidth: 0.13,
        floor_hz: 4.0,
    },
    Weights {
        spread: 1.5,
        rivals: 0.029,
        harmonic: 0.03,
        bend: 1.1,
        spacing: 0.016,
        bandwidth: 0.063,
        floor_hz: 2.0,
    },
];

/// Standard error in hertz of formant `k` (0 for F1): two thirds of the true errors are inside.
///
/// A bandwidth measured wide is half a warning: the peak it belongs to is flat, so its place is
/// known less well. The spacing term is the harmonic pull of Vallabha & Tuller (2002, Speech Comm.
/// 38, 141-160), who found a tenth of F0 on average; the readings gathered here need less.
pub(super) fn sd_hz(k: usize, e: &Evidence) -> f64 {
    let w = &WEIGHTS[k];
    [
        w.spread * e.spread_hz,
        w.rivals * e.rivals_hz,
        w.harmonic * e.harmonic_hz,
        w.bend * e.bend_hz,
        w.spacing * e.f0_hz,
        w.bandwidth * e.bandwidth_hz,
        w.floor_hz,
    ]
    .iter()
    .map(|part| part * part)
    .sum::<f64>()
    .sqrt()
}
