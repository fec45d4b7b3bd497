//! The shipped models against published averages.

use isophone::identify::{identify_with, shipped};
use isophone::norms;
use isophone::tokens::Observation;

/// How many group averages are identified as the vowel they are, each group normalized as one
/// speaker, and how many there are.
fn identified(observations: &[Observation]) -> (usize, usize) {
    let models = shipped().expect("whole models");
    let answers = identify_with(&models, observations);
    let right = observations
        .iter()
        .zip(&answers)
        .filter(|(observation, answer)| {
            let ranked = answer.ranked.as_ref().expect("an answer");
            let total: f64 = ranked.iter().map(|(_, p)| p).sum();
            assert!((total - 1.0).abs() < 1e-9, "probabilities sum to {total}");
            Some(&ranked[0].0) == observation.vowel.as_ref()
        })
        .count();
    (right, observations.len())
}

#[test]
fn models_identify_the_averages_of_peterson_and_barney() {
    // Peterson & Barney 1952, J. Acoust. Soc. Am. 24, 175-184, Table II: men, women and children.
    let table = norms::shipped("peterson-barney-1952").expect("a table");
    let (right, all) = identified(&table.observations());
    assert_eq!(all, 30);
    assert!(right >= 28, "{right} of {all}");
}

#[test]
fn models_identify_the_averages_of_michigan() {
    // Computed from the measurements of Hillenbrand et al. 1995 (J. Acoust. Soc. Am. 97, 3099-3111):
    // means at 20, 50 and 80 %, and mean durations. The models are trained on half of its speakers,
    // so this shows that they are whole, not how good they are.
    let steady = norms::shipped("hillenbrand-1995-all-tokens").expect("a table");
    let table = norms::shipped("hillenbrand-1995-movement").expect("a table");
    let mut observations = table.observations();
    for observation in &mut observations {
        let known = steady.observations();
        let same = known.iter().find(|o| o.token == observation.token);
        observation.duration_s = same.and_then(|o| o.duration_s);
    }
    let (right, all) = identified(&observations);
    assert_eq!(all, 36);
    assert!(right >= 34, "{right} of {all}");
}

#[test]
fn every_shipped_model_says_how_it_was_tested() {
    for model in shipped().expect("whole models") {
        let record = &model.record;
        assert!(record.accuracy.speakers >= 20, "{}", model.name);
        assert!(
            record.accuracy.low <= record.accuracy.share,
            "{}",
            model.name
        );
        assert!(
            record.command.starts_with("isophone train "),
            "{}",
            model.name
        );
        assert!(!record.data.is_empty(), "{}", model.name);
        let counted: usize = record.confusion.iter().flatten().sum();
        assert_eq!(
            counted + record.left_out,
            record.accuracy.tokens,
            "{}",
            model.name
        );
    }
}
