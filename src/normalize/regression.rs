//! Regression log-mean: the speaker's size with the vowels held constant.
//!
//! *Formula*: `ln F_svf = g_s + b_vf + e`, least squares over all tokens, the `g` of the survey's
//! speakers summing to zero; normalized `ln F - g_s`.
//!
//! *Needs* vowel labels, and each speaker at least one vowel in common with the others (through
//! any chain of speakers). Vowels may be missing and unbalanced: that is what it is for.
//!
//! *Pitfalls*: only the shift common to all formants is taken out. Values depend on the other
//! speakers of the survey through the vowels' estimated positions. Where two accents speak a vowel
//! differently, speakers who have mostly that vowel get part of the difference as size.
//!
//! *Source*: Barreda & Nearey 2018, J. Acoust. Soc. Am. 144, 500-520.

use std::collections::BTreeMap;

use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::{Lacks, SpeakerScale, SpeakerTokens};

/// Sizes of speakers and positions of vowels that fit a survey best.
#[derive(Debug, Clone, PartialEq)]
pub struct RegressionFit {
    /// `g_s`, in ln hertz around 0; speakers without connection to the largest connected set of
    /// speakers are left out.
    pub size: BTreeMap<String, f64>,
    /// `b_vf`, in ln hertz; `None` where a vowel never had that formant.
    pub position: BTreeMap<Vowel, [Option<f64>; 3]>,
}

/// A formant (0 for F1) of a vowel.
type Cell<'a> = (&'a Vowel, usize);

/// What one speaker has: number of a cell, count of tokens and sum of their ln F.
struct Row<'a> {
    speaker: &'a str,
    sums: Vec<(usize, f64, f64)>,
}

/// Fits sizes and positions to all labelled observations.
pub fn fit_regression(observations: &[Observation]) -> RegressionFit {
    // The cells' numbers and, per speaker, count and sum of ln F in each cell.
    let mut cells: BTreeMap<Cell<'_>, usize> = BTreeMap::new();
    let mut speakers: BTreeMap<&str, BTreeMap<Cell<'_>, (f64, f64)>> = BTreeMap::new();
    for observation in observations {
        let Some(vowel) = &observation.vowel else {
            continue;
        };
        for (n, hz) in observation.formant_hz.iter().enumerate() {
            let Some(hz) = hz else { continue };
            cells.entry((vowel, n)).or_insert(0);
            let sums = speakers.entry(&observation.speaker).or_default();
            let sum = sums.entry((vowel, n)).or_insert((0.0, 0.0));
            sum.0 += 1.0;
            sum.1 += hz.ln();
        }
    }
    for (index, cell) in cells.values_mut().enumerate() {
        *cell = index;
    }
    let rows: Vec<Row<'_>> = speakers
        .iter()
        .map(|(name, sums)| Row {
            speaker: name,
            sums: sums
                .iter()
                .map(|(cell, (n, sum))| (cells[cell], *n, *sum))
                .collect(),
        })
        .collect();
    let kept = largest_connected(&rows, cells.len());
    let position = positions(&rows, &kept, cells.len());
    let mut size: BTreeMap<String, f64> = rows
        .iter()
        .zip(&kept)
        .filter(|(_, kept)| **kept)
        .map(|(row, _)| (row.speaker.to_owned(), row.size_given(&position)))
        .collect();
    let mean = size.values().sum::<f64>() / size.len().max(1) as f64;
    size.values_mut().for_each(|g| *g -= mean);
    let mut by_vowel: BTreeMap<Vowel, [Option<f64>; 3]> = BTreeMap::new();
    for ((vowel, n), index) in &cells {
        let entry = by_vowel.entry((*vowel).clone()).or_default();
        entry[*n] = position[*index].map(|b| b + mean);
    }
    RegressionFit {
        size,
        position: by_vowel,
    }
}

impl Row<'_> {
    /// The best size of the speaker when the positions are given.
    fn size_given(&self, position: &[Option<f64>]) -> f64 {
        let mut weight = 0.0;
        let mut total = 0.0;
        for (cell, n, sum) in &self.sums {
            if let Some(b) = position[*cell] {
                weight += n;
                total += sum - n * b;
            }
        }
        total / weight
    }
}

/// Marks the speakers of the largest set connected through common cells.
fn largest_connected(rows: &[Row<'_>], cells: usize) -> Vec<bool> {
    // Component of each cell, by union of the cells each speaker has.
    let mut parent: Vec<usize> = (0..cells).collect();
    fn root(parent: &mut [usize], mut cell: usize) -> usize {
        while parent[cell] != cell {
            parent[cell] = parent[parent[cell]];
            cell = parent[cell];
        }
        cell
    }
    for row in rows {
        for pair in row.sums.windows(2) {
            let (a, b) = (root(&mut parent, pair[0].0), root(&mut parent, pair[1].0));
            parent[a.max(b)] = a.min(b);
        }
    }
    let of_row: Vec<Option<usize>> = rows
        .iter()
        .map(|row| row.sums.first().map(|(cell, ..)| root(&mut parent, *cell)))
        .collect();
    let mut sizes: BTreeMap<usize, usize> = BTreeMap::new();
    for component in of_row.iter().flatten() {
        *sizes.entry(*component).or_insert(0) += 1;
    }
    let largest = sizes
        .iter()
        .rev()
        .max_by_key(|(_, size)| **size)
        .map(|(component, _)| *component);
    of_row
        .iter()
        .map(|component| component.is_some() && *component == largest)
        .collect()
}

/// Least-squares positions of the cells: the normal equations with the sizes eliminated.
fn positions(rows: &[Row<'_>], kept: &[bool], cells: usize) -> Vec<Option<f64>> {
    let mut matrix = vec![vec![0.0; cells]; cells];
    let mut right = vec![0.0; cells];
    let mut used = vec![false; cells];
    for (Row { sums: row, .. }, _) in rows.iter().zip(kept).filter(|(_, kept)| **kept) {
        let count: f64 = row.iter().map(|(_, n, _)| n).sum();
        let total: f64 = row.iter().map(|(.., sum)| sum).sum();
        for (a, n, sum) in row {
            used[*a] = true;
            matrix[*a][*a] += n;
            right[*a] += sum - n * total / count;
            for (b, m, _) in row {
                matrix[*a][*b] -= n * m / count;
            }
        }
    }
    // The equations fix the positions up to a common constant: adding the same amount to every
    // element of the matrix picks the solution whose positions sum to zero.
    let used_cells: Vec<usize> = (0..cells).filter(|c| used[*c]).collect();
    let mut system: Vec<Vec<f64>> = used_cells
        .iter()
        .map(|a| used_cells.iter().map(|b| matrix[*a][*b] + 1.0).collect())
        .collect();
    let mut values: Vec<f64> = used_cells.iter().map(|a| right[*a]).collect();
    solve_in_place(&mut system, &mut values);
    let mut position = vec![None; cells];
    for (cell, value) in used_cells.into_iter().zip(values) {
        position[cell] = Some(value);
    }
    position
}

/// Gaussian elimination with row exchanges; the system is regular by construction.
fn solve_in_place(matrix: &mut [Vec<f64>], right: &mut [f64]) {
    let n = right.len();
    for column in 0..n {
        let pivot = (column..n)
            .max_by(|a, b| {
                matrix[*a][column]
                    .abs()
                    .total_cmp(&matrix[*b][column].abs())
            })
            .unwrap_or(column);
        matrix.swap(column, pivot);
        right.swap(column, pivot);
        let (above, below) = matrix.split_at_mut(column + 1);
        let pivot_row = &above[column];
        for (offset, row) in below.iter_mut().enumerate() {
            let factor = row[column] / pivot_row[column];
            if factor != 0.0 {
                for k in column..n {
                    row[k] -= factor * pivot_row[k];
                }
                right[column + 1 + offset] -= factor * right[column];
            }
        }
    }
    for row in (0..n).rev() {
        let known: f64 = (row + 1..n).map(|k| matrix[row][k] * right[k]).sum();
        right[row] = (right[row] - known) / matrix[row][row];
    }
}

/// Every speaker's scale.
pub(super) fn scales(
    observations: &[Observation],
) -> BTreeMap<String, Result<SpeakerScale, Lacks>> {
    let fit = fit_regression(observations);
    SpeakerTokens::of(observations)
        .into_iter()
        .map(|(name, tokens)| {
            let scale = match fit.size.get(&name) {
                Some(g) => Ok(SpeakerScale::Log {
                    offset: [Some(*g); 3],
                }),
                None if tokens.vowels().next().is_none() => Err(Lacks::Labels),
                None => Err(Lacks::Connection),
            };
            (name, scale)
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn token(speaker: &str, vowel: &str, formant_hz: [Option<f64>; 3]) -> Observation {
        Observation {
            token: format!("{speaker}-{vowel}"),
            speaker: speaker.to_owned(),
            vowel: Some(Vowel::from_ipa(vowel)),
            duration_s: None,
            f0_hz: None,
            formant_hz,
            sd_hz: [None; 3],
            track: Vec::new(),
        }
    }

    /// Positions of an invented three-vowel system, in hertz.
    const SYSTEM: [(&str, [f64; 3]); 3] = [
        ("i", [300.0, 2300.0, 3000.0]),
        ("a", [800.0, 1300.0, 2600.0]),
        ("u", [320.0, 900.0, 2400.0]),
    ];

    #[test]
    fn sizes_are_found_though_vowels_are_missing() {
        // Without error the least-squares fit is exact, whoever lacks what.
        let sizes = [("a", 0.9, 0b111), ("b", 1.0, 0b011), ("c", 1.2, 0b110)];
        let mut observations = Vec::new();
        for (name, factor, has) in sizes {
            for (n, (vowel, hz)) in SYSTEM.iter().enumerate() {
                if has >> n & 1 == 1 {
                    observations.push(token(name, vowel, hz.map(|f| Some(f * factor))));
                }
            }
        }
        let fit = fit_regression(&observations);
        let mean = sizes.iter().map(|(_, f, _)| f64::ln(*f)).sum::<f64>() / 3.0;
        for (name, factor, _) in sizes {
            assert!((fit.size[name] - (f64::ln(factor) - mean)).abs() < 1e-10);
        }
        let b = fit.position[&Vowel::from_ipa("a")][1].unwrap();
        assert!((b - (1300f64.ln() + mean)).abs() < 1e-10);
    }

    #[test]
    fn a_speaker_with_nothing_in_common_is_named() {
        let observations = [
            token("a", "i", [Some(300.0), Some(2300.0), None]),
            token("b", "i", [Some(330.0), Some(2500.0), None]),
            token("c", "y", [Some(300.0), Some(1900.0), None]),
        ];
        let scales = scales(&observations);
        assert!(scales["a"].is_ok() && scales["b"].is_ok());
        assert_eq!(scales["c"], Err(Lacks::Connection));
    }

    #[test]
    fn least_squares_agrees_with_alternating_means() {
        // A slow definition of the same minimum: set positions and sizes in turn to their means.
        let mut observations = Vec::new();
        let mut state = 7u64;
        for speaker in 0..5 {
            for (n, (vowel, hz)) in SYSTEM.iter().enumerate() {
                for repetition in 0..(1 + (speaker + n) % 3) {
                    state = state
                        .wrapping_mul(6364136223846793005)
                        .wrapping_add(1442695040888963407);
                    let noise = (state >> 40) as f64 / (1u64 << 24) as f64 - 0.5;
                    let factor = 1.0 + 0.1 * speaker as f64 + 0.2 * noise;
                    let mut values = hz.map(|f| Some(f * factor));
                    if repetition == 1 {
                        values[2] = None;
                    }
                    observations.push(token(&format!("s{speaker}"), vowel, values));
                }
            }
        }
        let fit = fit_regression(&observations);
        let mut sizes: BTreeMap<String, f64> = BTreeMap::new();
        let mut cells: BTreeMap<(Vowel, usize), f64> = BTreeMap::new();
        let each = || {
            observations.iter().flat_map(|o| {
                let vowel = o.vowel.clone().unwrap();
                o.formant_hz.iter().enumerate().filter_map(move |(n, hz)| {
                    hz.map(|hz| (o.speaker.clone(), (vowel.clone(), n), hz.ln()))
                })
            })
        };
        for _ in 0..3000 {
            let mut sums: BTreeMap<(Vowel, usize), (f64, f64)> = BTreeMap::new();
            for (s, cell, ln) in each() {
                let sum = sums.entry(cell).or_default();
                sum.0 += ln - sizes.get(&s).unwrap_or(&0.0);
                sum.1 += 1.0;
            }
            cells = sums.into_iter().map(|(k, (t, n))| (k, t / n)).collect();
            let mut sums: BTreeMap<String, (f64, f64)> = BTreeMap::new();
            for (s, cell, ln) in each() {
                let sum = sums.entry(s).or_default();
                sum.0 += ln - cells[&cell];
                sum.1 += 1.0;
            }
            sizes = sums.into_iter().map(|(k, (t, n))| (k, t / n)).collect();
        }
        let mean = sizes.values().sum::<f64>() / sizes.len() as f64;
        for (name, g) in &sizes {
            assert!((fit.size[name] - (g - mean)).abs() < 1e-9, "{name}");
        }
        for ((vowel, n), b) in &cells {
            let ours = fit.position[vowel][*n].unwrap();
            assert!((ours - (b + mean)).abs() < 1e-9);
        }
    }
}
