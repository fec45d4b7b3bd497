//! Probabilities that mean what they say, and the bound beyond which a token is like no vowel.
//!
//! Logarithms of probabilities are divided by one number, the temperature, chosen to make the
//! held-out answers most probable (Guo, Pleiss, Sun & Weinberger 2017, ICML 34). One number keeps
//! every ranking. The bound on strangeness is taken from held-out tokens too.

use super::evaluate::{Evaluation, HeldOut, most_probable};
use super::newton::ln_sum_exp;

/// What turns raw answers into stated ones.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Calibration {
    /// Divisor of the logarithms of probabilities.
    pub temperature: f64,
    /// Tokens stranger than this are said to be like none of the vowels.
    pub strangest: f64,
}

/// One bin of a reliability table.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reliability {
    /// Tokens whose stated probability falls into the bin.
    pub tokens: usize,
    /// Their mean stated probability.
    pub stated: f64,
    /// Share of them identified as labelled.
    pub found: f64,
}

/// Bins of a reliability table, of equal width.
pub const BINS: usize = 10;

/// Share of held-out tokens that the bound may call like none of the vowels.
const FALSE_ALARMS: f64 = 0.03;

impl Calibration {
    /// Nothing changed, nothing refused.
    pub const NONE: Self = Self {
        temperature: 1.0,
        strangest: f64::INFINITY,
    };

    /// Chosen on held-out answers.
    pub fn fit<'a>(rows: impl Iterator<Item = &'a HeldOut> + Clone) -> Self {
        let mut strangeness: Vec<f64> = rows.clone().map(|row| row.strangeness).collect();
        if strangeness.is_empty() {
            return Self::NONE;
        }
        strangeness.sort_by(f64::total_cmp);
        let place = ((1.0 - FALSE_ALARMS) * strangeness.len() as f64) as usize;
        Self {
            temperature: temperature(rows),
            strangest: strangeness[place.min(strangeness.len() - 1)],
        }
    }

    /// Stated probabilities, as natural logarithms.
    pub fn apply(&self, ln_probability: &[f64]) -> Vec<f64> {
        let mut ln_p: Vec<f64> = ln_probability
            .iter()
            .map(|v| v / self.temperature)
            .collect();
        let total = ln_sum_exp(&ln_p);
        ln_p.iter_mut().for_each(|v| *v -= total);
        ln_p
    }
}

/// The temperature that makes the labels most probable, by golden-section search on its logarithm.
fn temperature<'a>(rows: impl Iterator<Item = &'a HeldOut> + Clone) -> f64 {
    let loss = |ln_temperature: f64| -> f64 {
        let calibration = Calibration {
            temperature: ln_temperature.exp(),
            strangest: f64::INFINITY,
        };
        rows.clone()
            // A class of probability 0 stays so at any temperature.
            .map(|row| -calibration.apply(&row.ln_probability)[row.class].max(-1e3))
            .sum()
    };
    let ratio = (5f64.sqrt() - 1.0) / 2.0;
    let (mut low, mut high) = (0.2f64.ln(), 20f64.ln());
    let (mut a, mut b) = (high - ratio * (high - low), low + ratio * (high - low));
    let (mut loss_a, mut loss_b) = (loss(a), loss(b));
    while high - low > 1e-4 {
        if loss_a < loss_b {
            (high, b, loss_b) = (b, a, loss_a);
            a = high - ratio * (high - low);
            loss_a = loss(a);
        } else {
            (low, a, loss_a) = (a, b, loss_b);
            b = low + ratio * (high - low);
            loss_b = loss(b);
        }
    }
    (0.5 * (low + high)).exp()
}

impl Evaluation {
    /// The reliability table of the held-out answers, calibrated on speakers other than those they
    /// are shown for: the speakers are parted in two, each half calibrates the other.
    pub fn reliability(&self) -> Vec<Reliability> {
        let mut bins = [(0usize, 0.0, 0usize); BINS];
        for half in [0, 1] {
            let others = self.rows.iter().filter(|row| row.speaker % 2 != half);
            let calibration = Calibration::fit(others);
            for row in self.rows.iter().filter(|row| row.speaker % 2 == half) {
                let ln_p = calibration.apply(&row.ln_probability);
                let answer = most_probable(&ln_p);
                let stated = ln_p[answer].exp();
                let bin = &mut bins[((stated * BINS as f64) as usize).min(BINS - 1)];
                bin.0 += 1;
                bin.1 += stated;
                bin.2 += usize::from(answer == row.class);
            }
        }
        bins.iter()
            .map(|(tokens, stated, right)| {
                let n = (*tokens).max(1) as f64;
                Reliability {
                    tokens: *tokens,
                    stated: stated / n,
                    found: *right as f64 / n,
                }
            })
            .collect()
    }
}

/// Mean distance between stated and found, by tokens: the expected calibration error.
pub fn calibration_error(table: &[Reliability]) -> f64 {
    let all: usize = table.iter().map(|bin| bin.tokens).sum();
    table
        .iter()
        .map(|bin| bin.tokens as f64 * (bin.stated - bin.found).abs())
        .sum::<f64>()
        / all.max(1) as f64
}

#[cfg(test)]
mod tests {
    use super::*;

    fn row(speaker: usize, class: usize, p: f64, strangeness: f64) -> HeldOut {
        HeldOut {
            speaker,
            class,
            ln_probability: vec![p.ln(), (1.0 - p).ln()],
            strangeness,
        }
    }

    #[test]
    fn overconfident_answers_are_cooled_to_their_share() {
        // Right in 3 of 4 while 0.99 is said: the best one number brings 0.99 to 0.75, so that
        // ln(0.99/0.01) / T = ln 3.
        let rows: Vec<HeldOut> = (0..400)
            .map(|n| row(n / 10, usize::from(n % 4 == 0), 0.99, 0.0))
            .collect();
        let calibration = Calibration::fit(rows.iter());
        let expected = 99f64.ln() / 3f64.ln();
        assert!((calibration.temperature - expected).abs() < 1e-3);
        let stated = calibration.apply(&rows[0].ln_probability)[0].exp();
        assert!((stated - 0.75).abs() < 1e-3);
    }

    #[test]
    fn the_bound_lets_most_held_out_tokens_through() {
        let rows: Vec<HeldOut> = (0..1000).map(|n| row(n, 0, 0.9, n as f64)).collect();
        let calibration = Calibration::fit(rows.iter());
        let above = rows
            .iter()
            .filter(|r| r.strangeness > calibration.strangest);
        assert_eq!(above.count(), 29);
        assert_eq!(Calibration::fit([].iter()), Calibration::NONE);
    }

    #[test]
    fn the_error_is_the_mean_gap() {
        let bin = |tokens, stated, found| Reliability {
            tokens,
            stated,
            found,
        };
        let error = calibration_error(&[bin(30, 0.6, 0.5), bin(10, 0.9, 1.0)]);
        assert!((error - 0.1).abs() < 1e-12);
    }
}
