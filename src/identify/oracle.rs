//! The classifiers against general libraries on fixed numbers.
//!
//! Logistic: scikit-learn 1.9.1, `LogisticRegression(C=10, tol=1e-12, solver='newton-cholesky')` on
//! columns standardised by N, `predict_proba`. Discriminants: scipy 1.17.1,
//! `multivariate_normal.logpdf(x, mean, covariance)` of each class, the covariance by numpy (common:
//! squares within classes over N - K; own: `numpy.cov`), exponentiated and divided by the sum.
//! (scikit-learn 1.9.1's own discriminants divide by N and N_k and are that much sharper.) Rows 0,
//! 17 and 40.

use super::logistic::Logistic;
use super::newton::{Problem, Weights};
use super::*;
use crate::vowel::Vowel;

/// Eighth decimal: the logistic reference was run to a tolerance of 1e-12.
const TOLERANCE: f64 = 1e-8;

/// Numbers in [0, 1) that any language can make.
struct Numbers(u64);

impl Numbers {
    fn next(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6364136223846793005)
            .wrapping_add(1442695040888963407);
        (self.0 >> 40) as f64 / (1u64 << 24) as f64
    }
}

fn samples(rows: Vec<Vec<f64>>, class: Vec<usize>, classes: usize) -> Samples {
    let width = rows[0].len();
    let features = [
        "f1_norm",
        "f2_norm",
        "f3_norm",
        "f0_norm",
        "ln_duration",
        "f1_norm@0.2",
    ];
    Samples {
        features: features[..width]
            .iter()
            .map(|f| f.parse().unwrap())
            .collect(),
        vowels: (0..classes)
            .map(|k| Vowel::from_ipa(&format!("v{k:02}")))
            .collect(),
        speakers: vec!["s".to_owned()],
        speaker: vec![0; rows.len()],
        variance: vec![vec![0.0; width]; rows.len()],
        rows,
        class,
        lacking: Default::default(),
        incomplete: Vec::new(),
    }
}

fn three_classes() -> Samples {
    let mut numbers = Numbers(11);
    let mut rows = Vec::new();
    let mut class = Vec::new();
    for i in 0..60 {
        let k = i % 3;
        let x = numbers.next() + 0.35 * k as f64;
        let second = 2.0 * numbers.next() - if k == 1 { 0.5 } else { 0.0 };
        rows.push(vec![x, second + 0.3 * numbers.next()]);
        class.push(k);
    }
    samples(rows, class, 3)
}

fn answer(trained: &Trained, row: &[f64]) -> Vec<f64> {
    let answers = trained.answers(&[row], &[&vec![0.0; row.len()]]);
    answers[0].as_ref().unwrap().ln_probability.clone()
}

fn check(kind: Kind, expected: [[f64; 3]; 3]) {
    let samples = three_classes();
    let trained = Trained::fit(kind, &samples).unwrap();
    for (row, expected) in [0, 17, 40].iter().zip(expected) {
        let ln_p = answer(&trained, &samples.rows[*row]);
        assert!((ln_p.iter().map(|v| v.exp()).sum::<f64>() - 1.0).abs() < 1e-12);
        let found: Vec<f64> = ln_p.iter().map(|v| v.exp()).collect();
        for (found, expected) in found.iter().zip(expected) {
            assert!(
                (found - expected).abs() < TOLERANCE,
                "{kind}: {found} {expected}"
            );
        }
    }
}

#[test]
fn probabilities_agree_with_general_libraries() {
    check(
        Kind::Logistic { penalty: 0.1 },
        [
            [0.3656773745039172, 0.2745852023655998, 0.35973742313048296],
            [0.2542904146909591, 0.36984693853158795, 0.3758626467774529],
            [0.03893665646099621, 0.2860482656447697, 0.6750150778942341],
        ],
    );
    check(
        Kind::Linear,
        [
            [0.3626301406981657, 0.29337688163159453, 0.3439929776702399],
            [0.24717866942980876, 0.3795750410878006, 0.37324628948239075],
            [0.03685487236031368, 0.28361152460908157, 0.6795336030306048],
        ],
    );
    check(
        Kind::Quadratic,
        [
            [
                0.37071301593085587,
                0.26583372486855983,
                0.36345325920058436,
            ],
            [
                0.21141168810916636,
                0.35168239996149714,
                0.43690591192933664,
            ],
            [0.030656776719935854, 0.4956940954017373, 0.4736491278783268],
        ],
    );
}

#[test]
fn the_minimum_does_not_depend_on_the_start() {
    // Twelve classes on six columns, one class far from the rest: the optimizer alone is known to
    // stop early on data like these.
    let mut numbers = Numbers(5);
    let mut rows = Vec::new();
    let mut class = Vec::new();
    for i in 0..600 {
        let k = i % 12;
        let far = if k == 0 { 40.0 } else { 0.0 };
        rows.push(
            (0..6)
                .map(|n| numbers.next() + 0.2 * ((k * (n + 1)) % 7) as f64 + far)
                .collect::<Vec<f64>>(),
        );
        class.push(k);
    }
    let samples = samples(rows, class, 12);
    let fitted = Logistic::fit(&samples, 0.01).unwrap();
    let standard: Vec<Vec<f64>> = samples
        .rows
        .iter()
        .map(|r| fitted.standard.apply(r))
        .collect();
    let problem = Problem {
        rows: &standard,
        class: &samples.class,
        penalty: 0.01,
    };
    // Every class has 50 rows, so equal priors only take a constant off.
    assert!(problem.is_minimum(&fitted.weights));
    let from_nothing = problem.finish(Weights::zero(12, 6)).unwrap();
    for row in &standard {
        let a = fitted.weights.ln_probabilities(row);
        let b = from_nothing.ln_probabilities(row);
        for (a, b) in a.iter().zip(&b) {
            assert!((a.exp() - b.exp()).abs() < TOLERANCE);
        }
    }
    // Started from a fit of other rows of the same kind, as the folds of an evaluation are.
    let mut fewer = samples.clone();
    for n in (0..100).rev() {
        fewer.rows.remove(n);
        fewer.class.remove(n);
    }
    fewer.speaker.truncate(fewer.rows.len());
    fewer.variance.truncate(fewer.rows.len());
    let cold = Logistic::fit(&fewer, 0.01).unwrap();
    let warm = Logistic::fit_from(&fewer, 0.01, Some(&fitted)).unwrap();
    for row in &samples.rows {
        let (a, b) = (cold.ln_probabilities(row), warm.ln_probabilities(row));
        for (a, b) in a.iter().zip(&b) {
            assert!((a.exp() - b.exp()).abs() < TOLERANCE);
        }
    }
}

#[test]
fn what_cannot_be_fitted_is_said() {
    let one = samples(vec![vec![1.0], vec![2.0]], vec![0, 0], 1);
    let kind = Kind::Logistic { penalty: 0.1 };
    assert_eq!(Classifier::fit(kind, &one), Err(FitError::Classes(1)));
    let flat = samples(vec![vec![1.0], vec![1.0]], vec![0, 1], 2);
    assert_eq!(
        Classifier::fit(kind, &flat),
        Err(FitError::Constant("f1_norm".to_owned()))
    );
    assert!(matches!(
        Classifier::fit(Kind::Quadratic, &flat),
        Err(FitError::Tokens { needed: 2, .. })
    ));
    let wrong = Kind::Logistic { penalty: 0.0 };
    assert!(matches!(
        Classifier::fit(wrong, &three_classes()),
        Err(FitError::Penalty(_))
    ));
}

#[test]
fn a_class_without_rows_is_never_chosen() {
    let mut with_empty = three_classes();
    with_empty.vowels.push(Vowel::from_ipa("v99"));
    for kind in [
        Kind::Logistic { penalty: 0.1 },
        Kind::Linear,
        Kind::Quadratic,
    ] {
        let trained = Trained::fit(kind, &with_empty).unwrap();
        let ln_p = answer(&trained, &with_empty.rows[0]);
        assert_eq!(ln_p[3].exp(), 0.0);
        assert!((ln_p.iter().map(|v| v.exp()).sum::<f64>() - 1.0).abs() < 1e-12);
    }
}

#[test]
fn held_out_speakers_are_counted_once_each() {
    let mut samples = three_classes();
    samples.speakers = (0..6).map(|n| format!("s{n}")).collect();
    samples.speaker = (0..60).map(|n| n / 10).collect();
    samples.incomplete = vec![(0, 1), (5, 2)];
    let evaluation = leave_one_speaker_out(Kind::Logistic { penalty: 0.1 }, &samples).unwrap();
    assert_eq!(evaluation.rows.len(), 60);
    let table = evaluation.confusion();
    assert_eq!(table.iter().flatten().sum::<usize>(), 60);
    let accuracy = evaluation.accuracy(1);
    let diagonal: usize = (0..3).map(|k| table[k][k]).sum();
    assert_eq!((accuracy.correct, accuracy.tokens), (diagonal, 62));
    assert!(accuracy.low <= accuracy.share && accuracy.share <= accuracy.high);
    assert_eq!(accuracy, evaluation.accuracy(1));
}
