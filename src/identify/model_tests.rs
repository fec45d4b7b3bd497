//! A trained model, written, read, damaged, and asked.

use super::*;
use crate::normalize::Method;
use crate::tokens::Observation;
use crate::vowel::Vowel;

const VOWELS: [(&str, [f64; 3]); 3] = [
    ("a", [750.0, 1300.0, 2500.0]),
    ("i", [300.0, 2300.0, 3000.0]),
    ("u", [350.0, 900.0, 2400.0]),
];

/// Invented speakers of different sizes, four tokens of each of three vowels.
fn observations(speakers: usize) -> Vec<Observation> {
    let mut all = Vec::new();
    for s in 0..speakers {
        for (vowel, hz) in VOWELS {
            for t in 0..4 {
                let factor = 0.9 + 0.1 * s as f64 + 0.01 * t as f64;
                let wobble = [1.0, 1.02, 0.97, 1.01][(s + t) % 4];
                all.push(Observation {
                    token: format!("{s}-{vowel}-{t}"),
                    speaker: format!("s{s}"),
                    vowel: Some(Vowel::from_ipa(vowel)),
                    duration_s: Some(0.2),
                    f0_hz: Some(120.0),
                    formant_hz: [
                        Some(hz[0] * factor * wobble),
                        Some(hz[1] * factor),
                        Some(hz[2] * factor / wobble),
                    ],
                    sd_hz: [None; 3],
                    track: Vec::new(),
                });
            }
        }
    }
    all
}

fn model(kind: Kind) -> Model {
    let observations = observations(4);
    let features: Vec<Feature> = ["f1_norm", "f2_norm", "f3_norm"]
        .map(|f| f.parse().unwrap())
        .to_vec();
    let method: Method = match kind {
        Kind::Template { .. } => "ln".parse().unwrap(),
        _ => "lobanov".parse().unwrap(),
    };
    let samples = Samples::gather(&features, &method, &[&observations]);
    let evaluation = leave_one_speaker_out(kind, &samples).unwrap();
    let record = TrainingRecord {
        program: "0".to_owned(),
        data: vec!["invented \"speakers\"\nof this test".to_owned()],
        command: "isophone train".to_owned(),
        tokens: samples.rows.len(),
        left_out: 0,
        speakers: 4,
        seed: 7,
        held_out: "one speaker at a time".to_owned(),
        accuracy: evaluation.accuracy(7),
        confusion: evaluation.confusion(),
        reliability: evaluation.reliability(),
    };
    Model::train("invented", kind, &method, &samples, &evaluation, record).unwrap()
}

const KINDS: [Kind; 4] = [
    Kind::Logistic { penalty: 0.1 },
    Kind::Linear,
    Kind::Quadratic,
    Kind::Template { modes: 2 },
];

#[test]
fn a_model_is_read_back_to_the_bit() {
    for kind in KINDS {
        let model = model(kind);
        let text = model.to_text();
        assert_eq!(Model::parse(&text).as_ref(), Ok(&model), "{kind}");
        assert_eq!(Model::parse(&text).unwrap().to_text(), text);
    }
}

#[test]
fn damage_is_refused() {
    let text = model(KINDS[0]).to_text();
    for length in (0..text.len()).step_by(13) {
        if text.is_char_boundary(length) {
            assert!(Model::parse(&text[..length]).is_err(), "cut at {length}");
        }
    }
    let edited = text.replacen("penalty = 0.1", "penalty = 0.2", 1);
    assert_eq!(
        Model::parse(&edited),
        Err(ModelError::Damaged("its checksum does not fit"))
    );
    let newer = text.replacen("isophone_model = 2", "isophone_model = 99", 1);
    assert_eq!(
        Model::parse(&newer),
        Err(ModelError::Format {
            found: "99".to_owned()
        })
    );
    assert_eq!(Model::parse("token,speaker\n"), Err(ModelError::NoModel));
    assert!(Model::parse(&"isophone_model = 2\nx".repeat(100_000)).is_err());
}

/// The text with one part replaced and the checksum made to fit again.
fn tampered(from: &str, to: &str) -> Result<Model, ModelError> {
    use sha2::{Digest, Sha256};
    let text = model(KINDS[0]).to_text();
    let body = text[..text.rfind("# sha256").unwrap()].replacen(from, to, 1);
    let sum: String = Sha256::digest(body.as_bytes())
        .iter()
        .map(|b| format!("{b:02x}"))
        .collect();
    Model::parse(&format!("{body}# sha256 of all above: {sum}\n"))
}

#[test]
fn a_whole_file_must_also_make_sense() {
    assert!(tampered("isophone", "isophone").is_ok());
    for (from, to) in [
        ("\"f3_norm\"]", "\"f9_norm\"]"),
        (", \"f3_norm\"]", "]"),
        ("\"a\", \"i\"", "\"i\", \"a\""),
        ("\"lobanov:", "\"lobanow:"),
        ("mean = [", "mean = [nan, "),
        ("intercept = [", "intercept = [1.0, "),
        ("[logistic]", "[discriminant]"),
        ("penalty = 0.1\n", ""),
        ("seed = 7", "seed = 7\nsurprise = 1"),
    ] {
        let read = tampered(from, to);
        assert!(
            matches!(read, Err(ModelError::Inconsistent(_))),
            "{from}: {read:?}"
        );
    }
}

#[test]
fn unseen_speakers_are_identified_or_told_why_not() {
    for kind in KINDS {
        let mut model = model(kind);
        // The invented speakers hardly differ within a vowel, so any other speaker is strange.
        model.calibration.strangest = f64::INFINITY;
        let mut unseen = observations(6).split_off(60);
        unseen.push(Observation {
            token: "alone".to_owned(),
            speaker: "alone".to_owned(),
            ..unseen[0].clone()
        });
        unseen[1].formant_hz[2] = None;
        let answers = model.identify(&unseen);
        for (answer, observation) in answers.iter().zip(&unseen) {
            match &answer.ranked {
                Ok(ranked) => {
                    let total: f64 = ranked.iter().map(|(_, p)| p).sum();
                    assert!((total - 1.0).abs() < 1e-9);
                    assert!(ranked.windows(2).all(|pair| pair[0].1 >= pair[1].1));
                    assert_eq!(Some(&ranked[0].0), observation.vowel.as_ref(), "{kind}");
                }
                Err(Declined::FewTokens { found, .. }) => {
                    assert_eq!((answer.token.as_str(), *found), ("alone", 1));
                }
                Err(Declined::Missing(column)) => {
                    assert_eq!(answer.token, unseen[1].token);
                    assert_eq!(column, "f3_norm");
                }
                Err(reason) => panic!("{reason}"),
            }
        }
        let declined = answers.iter().filter(|a| a.ranked.is_err()).count();
        // A template does with what there is.
        let expected = if matches!(kind, Kind::Template { .. }) {
            0
        } else {
            2
        };
        assert_eq!(declined, expected, "{kind}");
    }
}

#[test]
fn what_is_like_no_vowel_is_said_to_be_so() {
    for kind in KINDS {
        let model = model(kind);
        let mut survey = observations(4);
        // As close as the /u/ and as front as the /i/ of nobody in training.
        survey[0].formant_hz = [Some(320.0), Some(1500.0), Some(2300.0)];
        let answers = model.identify(&survey);
        assert_eq!(answers[0].ranked, Err(Declined::UnlikeAny), "{kind}");
        let others = answers.iter().filter(|a| a.ranked.is_ok()).count();
        assert!(others > 24, "{kind}: {others}");
    }
}

#[test]
fn labels_the_model_does_not_know_are_counted() {
    let mut survey = observations(1);
    survey[0].vowel = Some(Vowel::from_ipa("y"));
    survey[3].vowel = Some(Vowel::from_ipa("y"));
    assert_eq!(
        model(KINDS[1]).unknown_labels(&survey),
        [(Vowel::from_ipa("y"), 2)]
    );
}
