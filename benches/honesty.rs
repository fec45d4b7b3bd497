//! Do the statistics keep their word? `cargo bench --bench honesty -- [SURVEYS]`
//!
//! Invents surveys of two groups of eight speakers, ten vowels, five tokens each, in which nothing
//! differs, and counts how often the program says that something does, and how often its 95 %
//! intervals hold the true difference, zero. Then moves one vowel by half a standard deviation
//! between speakers, and by more, and counts how often that is found. Beside it, to say why the
//! speaker is the unit: the same with tokens taken for independent.

use isophone::compare::{
    Measure, Panel, PanelSpeaker, PanelToken, Resampling, contrasts, gaussian,
};
use isophone::normalize::Method;
use isophone::vowel::Vowel;
use rayon::prelude::*;
use statrs::distribution::{ContinuousCDF, StudentsT};

const SPEAKERS: usize = 8;
const VOWELS: usize = 10;
const TOKENS: usize = 5;

/// Spread between speakers, and within a speaker's tokens, in the unit the vowel is moved by.
const BETWEEN: f64 = 1.0;
const WITHIN: f64 = 1.0;

fn main() -> std::process::ExitCode {
    let surveys: u64 = std::env::args()
        .skip(1)
        .find_map(|a| a.parse().ok())
        .unwrap_or(1_000);
    println!(
        "{surveys} surveys, {SPEAKERS} + {SPEAKERS} speakers, {VOWELS} vowels, {TOKENS} tokens each"
    );
    let mut kept = true;
    for shift in [0.0, 0.5, 1.0, 1.5, 2.0] {
        let counts: Vec<Counts> = (0..surveys)
            .into_par_iter()
            .map(|seed| count(seed, shift))
            .collect();
        let total = counts.iter().fold(Counts::default(), |a, b| a.plus(b));
        total.print(surveys, shift);
        kept &= total.keeps_its_word();
    }
    if kept {
        println!("\ntests reject 3.5 to 6.5 % and intervals hold 92 to 97 %: kept");
        std::process::ExitCode::SUCCESS
    } else {
        println!("\ntests reject 3.5 to 6.5 % and intervals hold 92 to 97 %: NOT kept");
        std::process::ExitCode::FAILURE
    }
}

/// How often what happened; the moved vowel is the first.
#[derive(Debug, Default, Clone, Copy)]
struct Counts {
    null_tests: u64,
    null_rejected: u64,
    null_rejected_place: u64,
    null_rejected_by_tokens: u64,
    surveys_with_a_false_find: u64,
    covered: u64,
    moved_rejected: u64,
    moved_rejected_place: u64,
    moved_found_after_holm: u64,
    moved_covered: u64,
}

impl Counts {
    fn plus(mut self, other: &Self) -> Self {
        self.null_tests += other.null_tests;
        self.null_rejected += other.null_rejected;
        self.null_rejected_place += other.null_rejected_place;
        self.null_rejected_by_tokens += other.null_rejected_by_tokens;
        self.surveys_with_a_false_find += other.surveys_with_a_false_find;
        self.covered += other.covered;
        self.moved_rejected += other.moved_rejected;
        self.moved_rejected_place += other.moved_rejected_place;
        self.moved_found_after_holm += other.moved_found_after_holm;
        self.moved_covered += other.moved_covered;
        self
    }

    /// Whether what is said at 5 % and at 95 % happens about as often.
    fn keeps_its_word(&self) -> bool {
        let share = |part: u64| 100.0 * part as f64 / self.null_tests as f64;
        (3.5..=6.5).contains(&share(self.null_rejected))
            && (3.5..=6.5).contains(&share(self.null_rejected_place))
            && (92.0..=97.0).contains(&share(self.covered))
    }

    fn print(&self, surveys: u64, shift: f64) {
        let percent = |part: u64, whole: u64| 100.0 * part as f64 / whole as f64;
        println!("\none vowel moved by {shift} standard deviations between speakers in F2");
        println!(
            "  vowels not moved: rejected at 5 % {:.2} % (F2), {:.2} % (place); by tokens as if \
             independent {:.2} %",
            percent(self.null_rejected, self.null_tests),
            percent(self.null_rejected_place, self.null_tests),
            percent(self.null_rejected_by_tokens, self.null_tests)
        );
        println!(
            "  vowels not moved: interval holds zero {:.2} %; surveys with any false find after \
             Holm {:.2} %",
            percent(self.covered, self.null_tests),
            percent(self.surveys_with_a_false_find, surveys)
        );
        if shift > 0.0 {
            println!(
                "  the moved vowel: rejected at 5 % {:.1} % (F2), {:.1} % (place), found after Holm \
                 {:.1} %; interval holds the shift {:.1} %",
                percent(self.moved_rejected, surveys),
                percent(self.moved_rejected_place, surveys),
                percent(self.moved_found_after_holm, surveys),
                percent(self.moved_covered, surveys)
            );
        }
    }
}

fn count(seed: u64, shift: f64) -> Counts {
    let panel = survey(seed, shift);
    // A thousand arrangements: the p of 0.05 is then known to 0.007 in each survey, which adds
    // nothing to the error of a share over ten thousand tests.
    let resampling = Resampling {
        replicates: 1_000,
        arrangements: 1_000,
        seed,
    };
    let contrast = contrasts(&panel, &resampling).remove(0);
    let mut counts = Counts::default();
    let mut false_find = false;
    for v in &contrast.vowels {
        let f2 = v
            .measure(Measure::F2)
            .expect("both groups have every vowel");
        let place = v.place.as_ref().expect("both groups have every vowel");
        let moved = v.vowel == 0 && shift > 0.0;
        let truth = if moved { shift } else { 0.0 };
        let [low, high] = f2.interval.expect("eight speakers");
        let covered = u64::from((low..=high).contains(&truth));
        let rejected = u64::from(f2.test.p <= 0.05);
        let rejected_place = u64::from(place.test.p <= 0.05);
        let found = v.place_p_holm.is_some_and(|p| p <= 0.05);
        if moved {
            counts.moved_rejected += rejected;
            counts.moved_rejected_place += rejected_place;
            counts.moved_found_after_holm += u64::from(found);
            counts.moved_covered += covered;
        } else {
            counts.null_tests += 1;
            counts.null_rejected += rejected;
            counts.null_rejected_place += rejected_place;
            counts.covered += covered;
            counts.null_rejected_by_tokens += u64::from(by_tokens(&panel, v.vowel) <= 0.05);
            false_find |= found;
        }
    }
    counts.surveys_with_a_false_find = u64::from(false_find);
    counts
}

/// A survey as it would stand after normalization: speakers differ, tokens differ within them.
fn survey(seed: u64, shift: f64) -> Panel {
    let mut random = Resampling {
        seed: seed ^ 0x5eed,
        ..Resampling::default()
    }
    .stream(1 << 50);
    let mut tokens = Vec::new();
    for speaker in 0..2 * SPEAKERS {
        for vowel in 0..VOWELS {
            let own = [0, 1].map(|_| BETWEEN * gaussian(&mut random));
            let moved = if vowel == 0 && speaker >= SPEAKERS {
                shift
            } else {
                0.0
            };
            for _ in 0..TOKENS {
                let f1 = own[0] + WITHIN * gaussian(&mut random);
                let f2 = own[1] + moved + WITHIN * gaussian(&mut random);
                let mut values = [None; isophone::compare::MEASURES];
                values[Measure::F1.index()] = Some(f1);
                values[Measure::F2.index()] = Some(f2);
                let token = String::new();
                tokens.push(PanelToken {
                    token,
                    speaker,
                    vowel,
                    values,
                    path: Vec::new(),
                });
            }
        }
    }
    Panel {
        vowels: (0..VOWELS)
            .map(|v| Vowel::from_ipa(&v.to_string()))
            .collect(),
        groups: vec!["one".to_owned(), "two".to_owned()],
        speakers: (0..2 * SPEAKERS)
            .map(|s| PanelSpeaker {
                name: s.to_string(),
                group: Some(s / SPEAKERS),
                stratum: 0,
            })
            .collect(),
        tokens,
        left_out: Default::default(),
        method: Method::RegressionLogMean,
    }
}

/// Student's test of F2 over all tokens, as if each were a sample of its own.
fn by_tokens(panel: &Panel, vowel: usize) -> f64 {
    let of = |group: usize| -> Vec<f64> {
        let own = panel.tokens.iter().filter(|t| t.vowel == vowel);
        own.filter(|t| panel.speakers[t.speaker].group == Some(group))
            .filter_map(|t| t.value(Measure::F2))
            .collect()
    };
    let (a, b) = (of(0), of(1));
    let mean = |x: &[f64]| x.iter().sum::<f64>() / x.len() as f64;
    let squares = |x: &[f64]| x.iter().map(|v| (v - mean(x)).powi(2)).sum::<f64>();
    let freedom = (a.len() + b.len() - 2) as f64;
    let variance = (squares(&a) + squares(&b)) / freedom;
    let error = (variance * (1.0 / a.len() as f64 + 1.0 / b.len() as f64)).sqrt();
    let t = (mean(&b) - mean(&a)).abs() / error;
    2.0 * StudentsT::new(0.0, 1.0, freedom)
        .expect("degrees of freedom")
        .sf(t)
}
