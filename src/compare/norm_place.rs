//! The vowels of a norm as places with a spread, in ln hertz.

use crate::norms::{ReferenceRow, ReferenceTable, shipped};
use crate::tokens::Observation;
use crate::vowel::Vowel;

/// Where the norm's spread comes from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Spread {
    /// The table has it.
    Stated,
    /// The mean relative spread of the men and women of `hillenbrand-1995-all-tokens`, in place of
    /// one that was not published.
    Pooled,
}

/// A vowel of a norm: F1 to F3 in ln hertz, spread in ln hertz, duration.
#[derive(Debug, Clone)]
pub(super) struct NormVowel {
    pub(super) vowel: Vowel,
    pub(super) ln_hz: [Option<f64>; 3],
    pub(super) sd: [f64; 3],
    pub(super) duration_s: Option<f64>,
}

/// The vowels of one group of a norm, each at its steady state or nearest the middle.
pub(super) fn norm_vowels(norm: &ReferenceTable, group: &str) -> (Vec<NormVowel>, Spread) {
    let mut chosen: Vec<&ReferenceRow> = Vec::new();
    let from_middle = |row: &ReferenceRow| row.proportion.map_or(0.0, |p| (p - 0.5).abs());
    for row in norm.rows.iter().filter(|r| r.group == group) {
        match chosen.iter_mut().find(|c| c.vowel == row.vowel) {
            Some(known) if from_middle(row) < from_middle(known) => *known = row,
            Some(_) => {}
            None => chosen.push(row),
        }
    }
    let stated = chosen
        .iter()
        .all(|r| r.sd_hz[0].is_some() && r.sd_hz[1].is_some());
    let pooled = pooled_spread();
    let vowels = chosen
        .into_iter()
        .map(|row| NormVowel {
            vowel: row.vowel.clone(),
            ln_hz: row.formant_hz.map(|f| f.map(f64::ln)),
            sd: std::array::from_fn(|k| match (row.sd_hz[k], row.formant_hz[k]) {
                (Some(sd), Some(mean)) if sd > 0.0 => sd / mean,
                _ => pooled[k],
            }),
            duration_s: row.duration_s,
        })
        .collect();
    (
        vowels,
        if stated {
            Spread::Stated
        } else {
            Spread::Pooled
        },
    )
}

/// Mean of sd over mean of F1 to F3, over the vowels of the men and women of Hillenbrand et al.
/// 1995, all tokens. It contains differences of size within each group, so that offsets in this
/// unit come out a little too small.
fn pooled_spread() -> [f64; 3] {
    let table = shipped("hillenbrand-1995-all-tokens");
    let rows: Vec<ReferenceRow> = table.map(|t| t.rows).unwrap_or_default();
    std::array::from_fn(|k| {
        let known: Vec<f64> = rows
            .iter()
            .filter(|r| r.group == "men" || r.group == "women")
            .filter_map(|r| Some(r.sd_hz[k]? / r.formant_hz[k]?))
            .collect();
        known.iter().sum::<f64>() / known.len().max(1) as f64
    })
}

/// The norm's vowel a token is most likely to be: normal distributions round the norm's means,
/// formants independent, all vowels as probable.
pub(super) fn nearest<'a>(o: &Observation, size: f64, all: &'a [NormVowel]) -> Option<&'a Vowel> {
    let likelihood = |v: &NormVowel| -> f64 {
        (0..3)
            .filter_map(|k| {
                let z = (o.formant_hz[k]?.ln() - size - v.ln_hz[k]?) / v.sd[k];
                Some(-0.5 * z * z - v.sd[k].ln())
            })
            .sum()
    };
    // A vowel whose norm lacks F3 would win by having less to explain: only formants all have.
    let third = all.iter().all(|v| v.ln_hz[2].is_some());
    let fair = |v: &NormVowel| {
        let mut v = v.clone();
        if !third {
            v.ln_hz[2] = None;
        }
        likelihood(&v)
    };
    all.iter()
        .max_by(|a, b| fair(a).total_cmp(&fair(b)))
        .map(|v| &v.vowel)
}

/// Affinity of two vowels of the norm, their formants independent.
pub(super) fn norm_affinity(a: &NormVowel, b: &NormVowel) -> f64 {
    let distance: f64 = (0..2)
        .filter_map(|k| {
            let variance = 0.5 * (a.sd[k] * a.sd[k] + b.sd[k] * b.sd[k]);
            let d = b.ln_hz[k]? - a.ln_hz[k]?;
            Some(d * d / variance / 8.0 + 0.5 * (variance / (a.sd[k] * b.sd[k])).ln())
        })
        .sum();
    (-distance).exp()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_published_table_without_spread_gets_the_pooled_one() {
        let spread = pooled_spread();
        // Means over 24 rows of sd/mean; the printed rows put F1 near 8 %, F2 near 8 %, F3 near 6 %.
        assert!(
            spread.iter().all(|s| (0.04..0.12).contains(s)),
            "{spread:?}"
        );
        let table = shipped("hagiwara-1997").unwrap();
        let (_, spread) = norm_vowels(&table, "women");
        assert_eq!(spread, Spread::Pooled);
    }
}
