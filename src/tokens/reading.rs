//! All tokens of one speaker read together: size and pitch range from all of them, then every
//! token again in their light, until nothing changes.

use super::path::most_believable;
use super::size::Size;
use super::{FormantPoint, PROPORTIONS, Reading, Token, TrackPoint};
use super::{doubts, error, value};
use crate::formants::consensus::Hypothesis;
use crate::formants::voice::contour;
use crate::formants::{SpanAnalysis, Unmeasured, proportion};
use crate::segments::VowelSpan;

/// Weight of the vowel-blind cloud against the agreement of the analyses.
const SIZE_WEIGHT: f64 = 0.15;

/// Rounds of reading; the size moves by less than 0.001 after the second on `hvd-words`.
const ROUNDS: usize = 3;

/// Reads all spans of one speaker together; the result keeps the order of the input.
///
/// The label only groups the speaker's tokens; no published norm for any vowel enters.
pub fn read_speaker(spans: Vec<(VowelSpan, Result<SpanAnalysis, Unmeasured>)>) -> Vec<Token> {
    let analyses: Vec<&SpanAnalysis> = spans.iter().filter_map(|(_, a)| a.as_ref().ok()).collect();
    let median_hz = median_pitch(&analyses);
    let mut size = Size::default();
    let mut paths = Vec::new();
    for _ in 0..ROUNDS {
        paths = analyses
            .iter()
            .map(|a| most_believable(a, |h| belief(h, size)))
            .collect::<Vec<_>>();
        size = Size::of(analyses.iter().zip(&paths).flat_map(|(analysis, path)| {
            analysis
                .points
                .iter()
                .zip(path)
                .filter_map(|(point, chosen)| {
                    chosen.map(|c| point.hypotheses[c].ln_hz.map(f64::from))
                })
        }));
    }
    let mut paths = paths.into_iter();
    spans
        .into_iter()
        .map(|(span, analysis)| {
            let reading = analysis.and_then(|analysis| {
                let path = paths.next().ok_or(Unmeasured::NoResonances)?;
                read_token(&span, &analysis, &path, size, median_hz)
            });
            Token { span, reading }
        })
        .collect()
}

fn belief(h: &Hypothesis, size: Size) -> f64 {
    f64::from(h.belief) + SIZE_WEIGHT * size.belief(h.ln_hz.map(f64::from))
}

/// The median over tokens of each token's median F0, read without knowing the speaker.
fn median_pitch(analyses: &[&SpanAnalysis]) -> Option<f64> {
    let mut medians: Vec<f64> = analyses
        .iter()
        .filter_map(|a| {
            let mut values: Vec<f64> = contour(&a.pitch(), None).into_iter().flatten().collect();
            median(&mut values)
        })
        .collect();
    median(&mut medians)
}

fn median(values: &mut [f64]) -> Option<f64> {
    if values.is_empty() {
        return None;
    }
    values.sort_by(f64::total_cmp);
    let n = values.len();
    Some(0.5 * (values[(n - 1) / 2] + values[n / 2]))
}

fn read_token(
    span: &VowelSpan,
    analysis: &SpanAnalysis,
    path: &[Option<usize>],
    size: Size,
    median_hz: Option<f64>,
) -> Result<Reading, Unmeasured> {
    let f0 = contour(&analysis.pitch(), median_hz);
    let measured = value::along(&analysis.points, path, &f0, |h| belief(h, size));
    let mut points: Vec<FormantPoint> = measured
        .into_iter()
        .map(|(mut point, evidence)| {
            for k in 0..3 {
                point.sd_hz[k] = point.formant_hz[k].map(|_| error::sd_hz(k, &evidence[k]));
            }
            point
        })
        .collect();
    let steady = steadiest(&points).ok_or(Unmeasured::NoResonances)?;
    // What lies outside the channel was not heard.
    let heard = analysis.conditions.lower_edge_hz..=analysis.conditions.upper_edge_hz;
    for point in &mut points {
        for k in 0..3 {
            point.formant_hz[k] = point.formant_hz[k].filter(|hz| heard.contains(hz));
            point.sd_hz[k] = point.sd_hz[k].filter(|_| point.formant_hz[k].is_some());
        }
    }
    let track: Vec<TrackPoint> = PROPORTIONS
        .iter()
        .map(|&p| {
            let index = (0..points.len())
                .min_by(|&a, &b| {
                    (proportion(a) - p)
                        .abs()
                        .total_cmp(&(proportion(b) - p).abs())
                })
                .unwrap_or(0);
            TrackPoint {
                proportion: p,
                time_s: analysis.points[index].time_s,
                point: points[index],
            }
        })
        .collect();
    let value = points[steady];
    let doubts = doubts::about(&analysis.conditions, span.duration_s(), &points, &value);
    Ok(Reading {
        at_s: analysis.points[steady].time_s,
        value,
        track,
        doubts,
    })
}

/// The point between 20 and 80 % around which ln F1 and ln F2 move least over a fifth of the
/// duration, the one nearer the middle of two alike.
fn steadiest(points: &[FormantPoint]) -> Option<usize> {
    let ln = |i: usize, k: usize| points[i].formant_hz[k].map(f64::ln);
    let movement = |i: usize| -> Option<f64> {
        let mut sum = 0.0;
        for j in i - 2..i + 2 {
            for k in 0..2 {
                sum += (ln(j + 1, k)? - ln(j, k)?).abs();
            }
        }
        Some(sum)
    };
    let middle = points.len() / 2;
    (2..points.len() - 2)
        .filter_map(|i| movement(i).map(|m| (i, m + 0.002 * i.abs_diff(middle) as f64)))
        .min_by(|a, b| a.1.total_cmp(&b.1))
        .map(|(i, _)| i)
        .or_else(|| points.iter().position(|p| p.formant_hz[0].is_some()))
}
