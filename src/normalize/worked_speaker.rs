//! One speaker worked through every method.
//!
//! The formants are those of speaker m01 in the data of Hillenbrand, Getty, Clark & Wheeler 1995
//! (J. Acoust. Soc. Am. 97, 3099-3111), at the steady state. The expected values were computed from
//! the published formulas outside the program, to six decimals.

use super::corners::Version;
use super::*;

const SPEAKER: [(&str, [f64; 3]); 12] = [
    ("æ", [663.0, 2012.0, 2659.0]),
    ("ɑ", [813.0, 1283.0, 2687.0]),
    ("ɔ", [699.0, 996.0, 2548.0]),
    ("ɛ", [609.0, 1980.0, 2678.0]),
    ("e", [494.0, 2113.0, 2700.0]),
    ("ɝ", [506.0, 1418.0, 1849.0]),
    ("ɪ", [370.0, 2161.0, 2757.0]),
    ("i", [328.0, 2418.0, 2939.0]),
    ("o", [509.0, 989.0, 2561.0]),
    ("ʊ", [450.0, 995.0, 2519.0]),
    ("ʌ", [670.0, 1178.0, 2566.0]),
    ("u", [374.0, 931.0, 2433.0]),
];

const F0_HZ: f64 = 172.0;

/// Half a unit of the sixth decimal.
const SIXTH_DECIMAL: f64 = 5.1e-7;

fn observations(factor: f64) -> Vec<Observation> {
    SPEAKER
        .iter()
        .map(|(vowel, hz)| Observation {
            token: (*vowel).to_owned(),
            speaker: "m01".to_owned(),
            vowel: Some(Vowel::from_ipa(vowel)),
            duration_s: None,
            f0_hz: Some(F0_HZ),
            formant_hz: hz.map(|f| Some(f * factor)),
            sd_hz: [None; 3],
            track: Vec::new(),
        })
        .collect()
}

/// The normalized /i/ under a method.
fn close_front(name: &str) -> [Option<f64>; 3] {
    let observations = observations(1.0);
    let method: Method = name.parse().unwrap();
    let normalization = Normalization::fit(&method, &observations);
    let i = observations.iter().find(|o| o.token == "i").unwrap();
    normalization.normalize(i).value
}

fn check(name: &str, expected: &[f64], tolerance: f64) {
    let value = close_front(name);
    for (n, expected) in expected.iter().enumerate() {
        let found = value[n].unwrap();
        assert!(
            (found - expected).abs() < tolerance,
            "{name} F{}: {found} where {expected} is expected",
            n + 1
        );
    }
}

#[test]
fn every_method_gives_the_worked_values() {
    check("lobanov:n-1", &[-1.408081, 1.584666], SIXTH_DECIMAL);
    check("lobanov:n", &[-1.470693, 1.655129], SIXTH_DECIMAL);
    check("lobanov:vowel-means", &[-1.408081, 1.584666], SIXTH_DECIMAL);
    check("nearey-individual", &[-0.462636, 0.511729], SIXTH_DECIMAL);
    check("nearey-shared:f1-f2", &[-0.974294, 1.023388], SIXTH_DECIMAL);
    check(
        "nearey-shared",
        &[-1.334516, 0.663167, 0.858295],
        SIXTH_DECIMAL,
    );
    check("anae-log-mean", &[373.374, 2752.492], 5.1e-4);
    check("gerstman", &[0.0, 999.0], 1e-9);
    check("delta-f", &[0.313672, 2.312376, 2.810617], SIXTH_DECIMAL);
    let z = [1.687972, 3.313392, 14.277350, 15.553811];
    check("bark", &z[1..], SIXTH_DECIMAL);
    let differences = [z[1] - z[0], z[2] - z[1], z[3] - z[2]];
    check("bark-differences", &differences, 2.0 * SIXTH_DECIMAL);
    check(
        "watt-fabricius",
        &[328.0 / 489.666667, 2418.0 / 1343.0],
        1e-6,
    );
    check(
        "watt-fabricius-modified",
        &[328.0 / 489.666667, 2418.0 / 1373.0],
        1e-6,
    );
    // A speaker alone has size 0 in the regression, whose sizes sum to zero.
    check("regression-log-mean", &[328f64.ln(), 2418f64.ln()], 1e-9);
}

#[test]
fn the_scales_behind_them_agree() {
    let observations = observations(1.0);
    let speakers = SpeakerTokens::of(&observations);
    let size = tract_size(&speakers["m01"]).unwrap();
    assert!((size.spacing_hz - 1045.678).abs() < 5.1e-4);
    assert!((size.length_cm - 16.736).abs() < 5.1e-4);
    let fit = |method: Method| Normalization::fit(&method, &observations).scales["m01"].clone();
    let Ok(SpeakerScale::Affine {
        centre_hz,
        width_hz,
    }) = fit(Method::Lobanov(Deviation::NMinus1, Over::Tokens))
    else {
        panic!("no scale");
    };
    for (found, expected) in [
        (centre_hz[0], 540.4167),
        (centre_hz[1], 1539.5),
        (width_hz[0], 150.8554),
        (width_hz[1], 554.3756),
    ] {
        assert!((found.unwrap() - expected).abs() < 5.1e-5, "{expected}");
    }
    for (version, s2) in [(Version::Original, 1343.0), (Version::Modified, 1373.0)] {
        let Ok(SpeakerScale::Affine { width_hz, .. }) = fit(Method::WattFabricius(version)) else {
            panic!("no scale");
        };
        assert!((width_hz[0].unwrap() - 489.6667).abs() < 5.1e-5);
        assert!((width_hz[1].unwrap() - s2).abs() < 5.1e-5);
        assert_eq!(width_hz[2], None);
    }
}

#[test]
fn one_factor_on_all_formants_changes_nothing() {
    // Methods that claim to take a uniform change of size out, alone or beside other speakers.
    for name in [
        "lobanov",
        "nearey-individual",
        "nearey-shared",
        "nearey-shared:f1-f2",
        "anae-log-mean",
        "gerstman",
        "watt-fabricius",
        "watt-fabricius-modified",
        "delta-f",
        "regression-log-mean",
    ] {
        let method: Method = name.parse().unwrap();
        let survey = |factor: f64| {
            let mut all = observations(factor);
            all.extend(observations(1.0).into_iter().map(|mut o| {
                o.speaker = "other".to_owned();
                o
            }));
            let normalization = Normalization::fit(&method, &all);
            if method == Method::RegressionLogMean {
                // Its zero is the middle of the survey: what stays is the difference between them.
                all.iter()
                    .zip(&all[12..])
                    .map(|(a, b)| {
                        let (a, b) = (normalization.normalize(a), normalization.normalize(b));
                        [0, 1, 2].map(|n| Some(a.value[n]? - b.value[n]?))
                    })
                    .collect::<Vec<_>>()
            } else {
                all.iter()
                    .map(|o| normalization.normalize(o).value)
                    .collect()
            }
        };
        let (plain, scaled) = (survey(1.0), survey(1.27));
        for (a, b) in plain.iter().zip(&scaled) {
            for n in 0..3 {
                match (a[n], b[n]) {
                    (Some(a), Some(b)) => assert!((a - b).abs() < 1e-9, "{name}"),
                    (a, b) => assert_eq!(a, b, "{name}"),
                }
            }
        }
    }
}

#[test]
fn what_a_speaker_lacks_is_said() {
    let mut few = observations(1.0);
    few.retain(|o| o.token == "ɪ");
    let lacking = |name: &str, observations: &[Observation]| {
        let method: Method = name.parse().unwrap();
        Normalization::fit(&method, observations).scales["m01"]
            .clone()
            .unwrap_err()
            .to_string()
    };
    assert_eq!(
        lacking("lobanov", &few),
        "1 values of F1, where at least 2 are needed"
    );
    assert_eq!(lacking("watt-fabricius", &few), "no token of the vowel `i`");
    let mut hidden = observations(1.0);
    for o in &mut hidden {
        o.vowel = None;
        o.f0_hz = None;
        o.formant_hz[2] = None;
    }
    assert_eq!(lacking("gerstman", &hidden), "no vowel labels");
    assert_eq!(lacking("regression-log-mean", &hidden), "no vowel labels");
    assert_eq!(
        lacking("miller-ratios", &hidden),
        "no fundamental frequency"
    );
    assert_eq!(
        lacking("nearey-shared", &hidden),
        "0 values of F3, where at least 1 are needed"
    );
    let steady = vec![hidden[0].clone(), hidden[0].clone()];
    assert_eq!(lacking("lobanov", &steady), "all values of F1 are the same");
}

#[test]
fn speakers_without_the_whole_set_are_named() {
    let mut all = observations(1.0);
    all.extend(
        observations(1.1)
            .into_iter()
            .filter(|o| o.token != "u")
            .map(|mut o| {
                o.speaker = "other".to_owned();
                o
            }),
    );
    let fit = |name: &str| Normalization::fit(&name.parse().unwrap(), &all).missing_vowels;
    assert_eq!(fit("lobanov")["other"], vec![Vowel::from_ipa("u")]);
    assert_eq!(fit("lobanov").len(), 1);
    assert!(fit("regression-log-mean").is_empty());
}
