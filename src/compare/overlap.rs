//! How far two vowels overlap: Pillai trace and Bhattacharyya affinity.

use super::plane::{Cloud, determinant, quadratic_form, scatter};

/// Number of dimensions: F1 and F2.
const DIMENSIONS: f64 = 2.0;

/// Overlap of two sets of tokens.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Overlap {
    /// Tokens of each.
    pub n: [usize; 2],
    /// Pillai trace of (F1, F2) on vowel: 0 the same place, 1 wholly apart.
    pub pillai: f64,
    /// What the trace would be on average for one and the same vowel at this number of tokens.
    pub pillai_if_merged: f64,
    /// What it would stay under in 95 of 100 cases for one and the same vowel.
    pub pillai_if_merged_95: f64,
    /// Bhattacharyya affinity: 1 the same distribution, 0 no overlap; `None` where a covariance
    /// cannot be had.
    pub affinity: Option<f64>,
    /// Mean of the second less mean of the first: F1, F2.
    pub difference: [f64; 2],
}

impl Overlap {
    /// The overlap of two sets of points (F1, F2).
    ///
    /// `None` for fewer than two tokens in one of them, fewer than five in both, or where all
    /// points lie on a line.
    ///
    /// *Source*: Pillai 1955, Ann. Math. Statist. 26, 117-121; its use for mergers: Hay, Warren &
    /// Drager 2006, J. Phonetics 34, 458-484. Affinity: Bhattacharyya 1943, Bull. Calcutta Math.
    /// Soc. 35, 99-109, for two normal distributions.
    pub fn of(first: &[[f64; 2]], second: &[[f64; 2]]) -> Option<Self> {
        let n = first.len() + second.len();
        if first.len() < 2 || second.len() < 2 || n < 5 {
            return None;
        }
        let (a, b) = (Cloud::of(first)?, Cloud::of(second)?);
        let all: Vec<[f64; 2]> = first.iter().chain(second).copied().collect();
        let total = scatter(&all, Cloud::of(&all)?.mean);
        let difference = [b.mean[0] - a.mean[0], b.mean[1] - a.mean[1]];
        // With two groups the between matrix is k dd', so tr[H(H+E)⁻¹] is k d'(H+E)⁻¹d.
        let weight = first.len() as f64 * second.len() as f64 / n as f64;
        let pillai = weight * quadratic_form(total, difference)?;
        Some(Self {
            n: [first.len(), second.len()],
            pillai: pillai.clamp(0.0, 1.0),
            pillai_if_merged: expected_pillai_if_merged(n),
            pillai_if_merged_95: pillai_point_if_merged(n, 0.95),
            affinity: affinity(&a, &b),
            difference,
        })
    }
}

/// Mean of the Pillai trace over `n` tokens of one and the same vowel in two labels.
///
/// *Source*: two groups make H of rank one, so that the trace is Beta(p/2, (n−1−p)/2) with p = 2
/// (Pillai 1955); the same figures by simulation in Stanley & Sneller 2023, JASA 153, 54-67.
pub fn expected_pillai_if_merged(n: usize) -> f64 {
    (DIMENSIONS / (n as f64 - 1.0)).min(1.0)
}

/// The value the Pillai trace of a merged pair stays under with probability `share`.
///
/// *Source*: as [`expected_pillai_if_merged`]; for Beta(1, b) the quantile is 1 − (1−share)^(1/b).
pub fn pillai_point_if_merged(n: usize, share: f64) -> f64 {
    let b = (n as f64 - 1.0 - DIMENSIONS) / 2.0;
    if b <= 0.0 {
        1.0
    } else {
        1.0 - (1.0 - share).powf(1.0 / b)
    }
}

/// Affinity of two normal distributions: exp(−D), D = d'S⁻¹d/8 + ½ ln(|S|/√(|S₁||S₂|)).
fn affinity(a: &Cloud, b: &Cloud) -> Option<f64> {
    if a.n < 3 || b.n < 3 {
        return None;
    }
    let pooled: [f64; 3] = std::array::from_fn(|k| 0.5 * (a.covariance[k] + b.covariance[k]));
    let d = [b.mean[0] - a.mean[0], b.mean[1] - a.mean[1]];
    let (one, two) = (determinant(a.covariance), determinant(b.covariance));
    let flat = |cloud: &Cloud| quadratic_form(cloud.covariance, [1.0, 1.0]).is_none();
    if flat(a) || flat(b) {
        return None;
    }
    let distance =
        quadratic_form(pooled, d)? / 8.0 + 0.5 * (determinant(pooled) / (one * two).sqrt()).ln();
    Some((-distance).exp())
}

#[cfg(test)]
mod tests {
    use rand::SeedableRng;
    use rand_pcg::Pcg64;

    use super::*;
    use crate::compare::resample::gaussian;

    const FIRST: [[f64; 2]; 6] = [
        [742.0, 1301.0],
        [768.0, 1344.0],
        [731.0, 1280.0],
        [790.0, 1325.0],
        [755.0, 1290.0],
        [748.0, 1362.0],
    ];
    const SECOND: [[f64; 2]; 5] = [
        [652.0, 1010.0],
        [671.0, 1055.0],
        [640.0, 1102.0],
        [690.0, 1031.0],
        [703.0, 1180.0],
    ];

    /// `MANOVA.from_formula('f1 + f2 ~ vowel')…mv_test()`, Pillai's trace, statsmodels 0.15.0.
    const PILLAI_STATSMODELS: f64 = 0.8867421799838348;
    /// `cov`, `linalg.solve` and `linalg.det` put together as in the formula, numpy 2.4.6.
    const AFFINITY_NUMPY: f64 = 0.04116545046528746;

    #[test]
    fn pillai_and_affinity_of_fixed_tokens_agree_with_general_libraries() {
        let overlap = Overlap::of(&FIRST, &SECOND).unwrap();
        assert!(
            (overlap.pillai - PILLAI_STATSMODELS).abs() < 1e-9,
            "{}",
            overlap.pillai
        );
        assert!((overlap.affinity.unwrap() - AFFINITY_NUMPY).abs() < 1e-9);
    }

    #[test]
    fn merged_expectations_are_the_published_ones() {
        // Mean and 95 % point for N = 10 … 100 as simulated by Stanley & Sneller 2023.
        for (n, mean, point) in [
            (10, 0.222, 0.575),
            (20, 0.105, 0.297),
            (30, 0.069, 0.199),
            (60, 0.034, 0.100),
            (100, 0.020, 0.060),
        ] {
            assert!((expected_pillai_if_merged(n) - mean).abs() < 6e-4);
            assert!((pillai_point_if_merged(n, 0.95) - point).abs() < 6e-4);
        }
    }

    #[test]
    fn merged_expectations_agree_with_simulation() {
        let mut random = Pcg64::seed_from_u64(11);
        let mut draw = |n: usize| -> Vec<[f64; 2]> {
            // Correlated, differently scaled axes: the trace must not care.
            (0..n)
                .map(|_| {
                    let (x, y) = (gaussian(&mut random), gaussian(&mut random));
                    [600.0 + 40.0 * x, 1_500.0 + 120.0 * (0.6 * x + 0.8 * y)]
                })
                .collect()
        };
        let runs = 20_000;
        let traces: Vec<f64> = (0..runs)
            .map(|_| Overlap::of(&draw(8), &draw(12)).unwrap().pillai)
            .collect();
        let mean = traces.iter().sum::<f64>() / runs as f64;
        let over = traces
            .iter()
            .filter(|t| **t > pillai_point_if_merged(20, 0.95))
            .count();
        // Standard error of the mean 0.0007, of the share 0.0015: five of each.
        assert!(
            (mean - expected_pillai_if_merged(20)).abs() < 0.0035,
            "{mean}"
        );
        assert!((over as f64 / runs as f64 - 0.05).abs() < 0.0077, "{over}");
    }

    #[test]
    fn units_do_not_matter() {
        let scaled = |p: &[f64; 2]| [p[0] * 3.0 - 7.0, p[1] * 0.01];
        let first: Vec<_> = FIRST.iter().map(scaled).collect();
        let second: Vec<_> = SECOND.iter().map(scaled).collect();
        let (a, b) = (
            Overlap::of(&FIRST, &SECOND).unwrap(),
            Overlap::of(&first, &second).unwrap(),
        );
        assert!((a.pillai - b.pillai).abs() < 1e-12);
        assert!((a.affinity.unwrap() - b.affinity.unwrap()).abs() < 1e-9);
    }

    #[test]
    fn too_little_is_said_to_be_so() {
        assert_eq!(Overlap::of(&FIRST[..1], &SECOND), None);
        assert_eq!(Overlap::of(&FIRST[..2], &SECOND[..2]), None);
        assert_eq!(Overlap::of(&[[1.0, 1.0]; 4], &[[1.0, 1.0]; 4]), None);
    }
}
