//! The sliding template: what is particular to a speaker, and the vowels, found together.
//!
//! *Model*: a token's row is `vowel mean + vowel's modes · position + rest`. The position is the
//! speaker's: a few numbers, standard normal over speakers. Each mode says how all vowels move
//! together from speaker to speaker; the first is, in effect, size, and the others what goes with it
//! or is left beside it. The rest is Gaussian with the vowel's own spread. F0 is a column like the
//! others: what it tells of size stands in the modes.
//!
//! *Use*: one token is compared with each vowel over all positions at once. Several tokens of a
//! speaker share the position: it is found by expectation and maximization over the unknown vowels,
//! the template being slid along its first mode to find the start; each vowel is then compared
//! under its spread and what is still unknown of the position. Missing columns are left out.
//!
//! *Pitfalls*: it knows the speakers it was fitted to; a speaker of another accent is read as an
//! unusual one of theirs.
//!
//! *Source*: Nearey & Assmann 2007, in Solé, Beddor & Ohala (eds.), *Experimental Approaches to
//! Phonology*, 246-269, slide one number for size with a prior given F0: that is one mode with the
//! same number for all vowels and formants. Several modes, each with its own numbers, are our
//! generalization, after probabilistic principal components (Tipping & Bishop 1999, J. R. Stat. Soc.
//! B 61, 611-622).

use super::gaussian::{Gaussian, known_columns};
use super::logistic::FitError;
use super::matrix::Cholesky;
use super::newton::ln_sum_exp;
use super::samples::Samples;
use super::template_fit;

/// A matrix, row by row.
pub(super) type Matrix = Vec<Vec<f64>>;

/// A fitted template.
#[derive(Debug, Clone, PartialEq)]
pub struct Template {
    /// Mean row of each class; `None` for classes without rows.
    pub(super) mean: Vec<Option<Vec<f64>>>,
    /// For each class that has rows: a row per column, a number per mode.
    pub(super) modes: Vec<Matrix>,
    /// Covariance of the rest, for each class that has rows.
    pub(super) within: Vec<Matrix>,
}

/// What is known of a speaker's position along the modes.
#[derive(Debug, Clone, PartialEq)]
pub struct Position {
    /// Its most probable value, a number per mode.
    pub value: Vec<f64>,
    /// What is still unknown of it: a covariance matrix.
    pub covariance: Vec<Vec<f64>>,
}

impl Position {
    /// Before any token is seen.
    fn unknown(modes: usize) -> Self {
        Self {
            value: vec![0.0; modes],
            covariance: identity(modes),
        }
    }
}

/// What the template says about one row.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct TemplateAnswer {
    /// Logarithms of the probabilities of the classes.
    pub(super) ln_probability: Vec<f64>,
    /// Squared distance from the nearest vowel, in units of the spread there.
    pub(super) squared_distance: f64,
    /// Columns the row had.
    pub(super) columns: usize,
}

/// Starts along the first mode.
const STARTS: [f64; 5] = [0.0, -1.0, 1.0, -2.0, 2.0];

/// Steps from each start before the best is followed.
const FIRST_STEPS: usize = 3;

/// Steps at most; most speakers settle within ten.
const MOST_STEPS: usize = 60;

/// A position that moves by less than this (in deviations of speakers) has settled.
const SETTLED: f64 = 1e-3;

/// How alike a speaker's tokens of one vowel are beside what the modes say (a correlation): `n` of
/// them count for `n / (1 + (n - 1) of it)`, so that a vowel said often does not outweigh the others.
/// Tried at 0 and 0.7: with one to twelve tokens a vowel at random, 0.7 is half a point better on left
/// out speakers, and nowhere worse.
const ALIKE: f64 = 0.7;

/// Tokens used for the position at most, evenly over the speaker's: more sharpen nothing, as what is
/// then unknown of it is far below the spread of a vowel.
const TOKENS_FOR_POSITION: usize = 300;

impl Template {
    /// Fits to the complete rows of `samples`, with so many modes.
    ///
    /// # Errors
    /// [`FitError`] where there are too few rows, vowels or speakers.
    pub fn fit(samples: &Samples, modes: usize) -> Result<Self, FitError> {
        template_fit::fit(samples, modes)
    }

    /// Number of modes.
    pub(super) fn mode_count(&self) -> usize {
        self.modes
            .first()
            .and_then(|modes| modes.first())
            .map_or(0, Vec::len)
    }

    /// How far all vowels of a speaker lie above the mean speaker's in one column, on average.
    pub fn displacement(&self, position: &Position, column: usize) -> f64 {
        let total: f64 = self
            .modes
            .iter()
            .map(|modes| dot(&modes[column], &position.value))
            .sum();
        total / self.modes.len() as f64
    }

    /// The position of a speaker from all of the speaker's rows.
    ///
    /// `variance` gives what is to be added to the variance of each value (its error beyond the
    /// usual).
    pub fn position(&self, rows: &[&[f64]], variance: &[&[f64]]) -> Position {
        let step = rows.len().div_ceil(TOKENS_FOR_POSITION).max(1);
        let used = || (0..rows.len()).step_by(step);
        let rows: Vec<&[f64]> = used().map(|n| rows[n]).collect();
        let trust: Vec<f64> = used().map(|n| self.trust(variance[n])).collect();
        let unknown = Position::unknown(self.mode_count());
        let Some(search) = Search::new(self, &rows, trust) else {
            return unknown;
        };
        let mut best: Option<(f64, Position)> = None;
        for start in STARTS {
            let mut position = unknown.clone();
            if let Some(first) = position.value.first_mut() {
                *first = start;
            }
            for _ in 0..FIRST_STEPS {
                position = search.step(&position).unwrap_or(position);
            }
            let evidence = search.evidence(&position);
            if best.as_ref().is_none_or(|(most, _)| evidence > *most) {
                best = Some((evidence, position));
            }
        }
        let mut position = best.map_or(unknown, |(_, position)| position);
        for _ in 0..MOST_STEPS {
            let Some(next) = search.step(&position) else {
                break;
            };
            let moves = next.value.iter().zip(&position.value);
            let moved = moves.fold(0.0_f64, |most, (a, b)| most.max((a - b).abs()));
            position = next;
            if moved < SETTLED {
                break;
            }
        }
        position
    }

    /// How much a row counts for the position: 1 where its errors are the usual ones, a half where
    /// one is as large again as the spread of a vowel.
    fn trust(&self, variance: &[f64]) -> f64 {
        let worst = variance
            .iter()
            .enumerate()
            .map(|(n, v)| {
                let total: f64 = self.within.iter().map(|within| within[n][n]).sum();
                v * self.within.len() as f64 / total
            })
            .fold(0.0, f64::max);
        1.0 / (1.0 + worst)
    }

    /// What each row of one speaker is, all rows together.
    ///
    /// Errors beyond the usual widen the comparison; how strange a row is, is told without them.
    pub(super) fn answer(&self, rows: &[&[f64]], variance: &[&[f64]]) -> Vec<TemplateAnswer> {
        let position = if rows.len() == 1 {
            // One token: all positions at once is exact.
            Position::unknown(self.mode_count())
        } else {
            self.position(rows, variance)
        };
        let mut cached: Option<(Vec<usize>, Vec<Gaussian>)> = None;
        rows.iter()
            .zip(variance)
            .map(|(row, variance)| {
                let columns = known_columns(row);
                if cached.as_ref().is_none_or(|(known, _)| *known != columns) {
                    let gaussians = self.gaussians(&columns, &position, &[]);
                    cached = Some((columns.clone(), gaussians));
                }
                let gaussians = cached.as_ref().map_or(&[][..], |(_, g)| g);
                let mut answer = self.answer_one(row, &columns, gaussians);
                if variance.iter().any(|v| *v > 0.0) {
                    let wider = self.gaussians(&columns, &position, variance);
                    answer.ln_probability = self.answer_one(row, &columns, &wider).ln_probability;
                }
                answer
            })
            .collect()
    }

    /// The densities of the classes that have rows, for a speaker whose position is known so well;
    /// `diagonal` is added to the variances.
    fn gaussians(&self, columns: &[usize], position: &Position, diagonal: &[f64]) -> Vec<Gaussian> {
        self.mean
            .iter()
            .flatten()
            .zip(self.modes.iter().zip(&self.within))
            .filter_map(|(mean, (modes, within))| {
                let centre: Vec<f64> = mean
                    .iter()
                    .zip(modes)
                    .map(|(m, modes)| m + dot(modes, &position.value))
                    .collect();
                let mut covariance = within.clone();
                for a in 0..centre.len() {
                    let spread: Vec<f64> = position
                        .covariance
                        .iter()
                        .map(|row| dot(row, &modes[a]))
                        .collect();
                    for b in 0..centre.len() {
                        covariance[a][b] += dot(&spread, &modes[b]);
                    }
                }
                for (n, v) in diagonal.iter().enumerate() {
                    covariance[n][n] += v;
                }
                Gaussian::of(columns, &centre, &covariance)
            })
            .collect()
    }

    fn answer_one(&self, row: &[f64], columns: &[usize], gaussians: &[Gaussian]) -> TemplateAnswer {
        let mut ln_probability = vec![f64::NEG_INFINITY; self.mean.len()];
        let mut nearest = f64::INFINITY;
        let classes = (0..self.mean.len()).filter(|class| self.mean[*class].is_some());
        for (class, gaussian) in classes.zip(gaussians) {
            let distance = gaussian.squared_distance(row);
            nearest = nearest.min(distance);
            ln_probability[class] = gaussian.ln_density(distance);
        }
        let total = ln_sum_exp(&ln_probability);
        ln_probability.iter_mut().for_each(|v| *v -= total);
        TemplateAnswer {
            ln_probability,
            squared_distance: nearest,
            columns: columns.len(),
        }
    }
}

/// The search for one speaker's position.
struct Search<'a> {
    template: &'a Template,
    rows: &'a [&'a [f64]],
    /// Sets of known columns, and which of them each row has.
    patterns: Vec<Vec<usize>>,
    pattern: Vec<usize>,
    /// How much each row counts.
    trust: Vec<f64>,
    /// For each pattern and class: modes' · within^-1 (a row per mode) of the known columns.
    gain: Vec<Vec<Matrix>>,
    /// For each pattern and class: modes' · within^-1 · modes.
    precision: Vec<Vec<Matrix>>,
}

impl<'a> Search<'a> {
    fn new(template: &'a Template, rows: &'a [&'a [f64]], trust: Vec<f64>) -> Option<Self> {
        let mut search = Self {
            template,
            rows,
            patterns: Vec::new(),
            pattern: Vec::new(),
            trust,
            gain: Vec::new(),
            precision: Vec::new(),
        };
        for row in rows {
            let columns = known_columns(row);
            let place = search.patterns.iter().position(|known| *known == columns);
            search.pattern.push(place.unwrap_or(search.patterns.len()));
            if place.is_none() {
                search.patterns.push(columns);
            }
        }
        for columns in &search.patterns {
            let mut gains = Vec::new();
            let mut precisions = Vec::new();
            for (modes, within) in template.modes.iter().zip(&template.within) {
                let part: Matrix = columns
                    .iter()
                    .map(|a| columns.iter().map(|b| within[*a][*b]).collect())
                    .collect();
                let factor = Cholesky::of(&part)?;
                let of_mode = |k: usize| columns.iter().map(|c| modes[*c][k]).collect::<Vec<_>>();
                let gain: Matrix = (0..template.mode_count())
                    .map(|k| factor.solve(&of_mode(k)))
                    .collect();
                precisions.push(
                    gain.iter()
                        .map(|g| (0..gain.len()).map(|k| dot(g, &of_mode(k))).collect())
                        .collect(),
                );
                gains.push(gain);
            }
            search.gain.push(gains);
            search.precision.push(precisions);
        }
        Some(search)
    }

    /// Logarithms of the densities of every class that has rows, row by row.
    fn ln_densities(&self, position: &Position) -> Vec<Vec<f64>> {
        let gaussians: Vec<Vec<Gaussian>> = self
            .patterns
            .iter()
            .map(|columns| self.template.gaussians(columns, position, &[]))
            .collect();
        self.rows
            .iter()
            .zip(&self.pattern)
            .map(|(row, pattern)| {
                gaussians[*pattern]
                    .iter()
                    .map(|g| g.ln_density(g.squared_distance(row)))
                    .collect()
            })
            .collect()
    }

    /// One step: the vowels given the position, then the position given the vowels.
    fn step(&self, position: &Position) -> Option<Position> {
        let modes = position.value.len();
        let means: Vec<&Vec<f64>> = self.template.mean.iter().flatten().collect();
        let mut precision = identity(modes);
        let mut pull = vec![0.0; modes];
        let shares: Vec<Vec<f64>> = self
            .ln_densities(position)
            .into_iter()
            .zip(&self.trust)
            .map(|(ln_density, trust)| {
                let total = ln_sum_exp(&ln_density);
                let share = ln_density.iter().map(|ln_d| trust * (ln_d - total).exp());
                share.collect()
            })
            .collect();
        let weight: Vec<f64> = (0..means.len())
            .map(|place| {
                let count: f64 = shares.iter().map(|share| share[place]).sum();
                1.0 / (1.0 + ALIKE * (count - 1.0).max(0.0))
            })
            .collect();
        for ((row, pattern), shares) in self.rows.iter().zip(&self.pattern).zip(&shares) {
            let columns = &self.patterns[*pattern];
            for (place, share) in shares.iter().enumerate() {
                // Vowels this row cannot be.
                if *share < 1e-9 {
                    continue;
                }
                let share = share * weight[place];
                let gain = &self.gain[*pattern][place];
                for k in 0..modes {
                    for (l, p) in self.precision[*pattern][place][k].iter().enumerate() {
                        precision[k][l] += share * p;
                    }
                    for (g, column) in gain[k].iter().zip(columns) {
                        pull[k] += share * g * (row[*column] - means[place][*column]);
                    }
                }
            }
        }
        let factor = Cholesky::of(&precision)?;
        Some(Position {
            value: factor.solve(&pull),
            covariance: factor.inverse(),
        })
    }

    /// How well a position explains the rows, prior included.
    fn evidence(&self, position: &Position) -> f64 {
        let known = Position {
            covariance: vec![vec![0.0; position.value.len()]; position.value.len()],
            ..position.clone()
        };
        let densities = self.ln_densities(&known);
        let rows = densities.iter().zip(&self.trust);
        let fit: f64 = rows.map(|(d, trust)| trust * ln_sum_exp(d)).sum();
        fit - 0.5 * dot(&position.value, &position.value)
    }
}

pub(super) fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}

pub(super) fn identity(size: usize) -> Matrix {
    let mut matrix = vec![vec![0.0; size]; size];
    for n in 0..size {
        matrix[n][n] = 1.0;
    }
    matrix
}
