//! The verbs that compare: groups, one speaker, a speaker against a norm, a norm of one's own.
//!
//! The table is invented: two hamlets, seven speakers each, of different sizes; in one of them /u/ is
//! fronter by a quarter, and it has one vowel for /ɑ/ and /ɔ/.

use std::path::Path;

use assert_cmd::Command;
use isophone::compare::{Resampling, gaussian};

const SPEAKERS: usize = 7;
const HAMLETS: [&str; 2] = ["Ulmarsh", "Vennock"];

fn table(speakers: usize) -> String {
    let mut random = Resampling::default().stream(12);
    let mut text = String::from("who,hamlet,sex,sound,first,second,third\n");
    for (place, hamlet) in HAMLETS.iter().enumerate() {
        for s in 0..speakers {
            // In one hamlet most speakers are women, in the other most are men.
            let sex = if s < [5, 2][place] { "f" } else { "m" };
            let size = (0.1 * gaussian(&mut random)).exp();
            for (vowel, f1, f2) in [
                ("i", 320.0, 2_300.0),
                ("e", 450.0, 2_050.0),
                ("a", 730.0, 1_450.0),
                ("ɑ", 720.0, 1_200.0),
                ("ɔ", 600.0, 950.0),
                ("u", 350.0, 900.0),
            ] {
                let (f1, f2) = match (place, vowel) {
                    (1, "u") => (f1, f2 * 1.25),
                    (1, "ɑ" | "ɔ") => (660.0, 1_075.0),
                    _ => (f1, f2),
                };
                for _ in 0..6 {
                    let mut near = |hz: f64| hz * size * (0.03 * gaussian(&mut random)).exp();
                    let (f1, f2, f3) = (near(f1), near(f2), near(2_550.0));
                    text.push_str(&format!(
                        "{hamlet}{s},{hamlet},{sex},{vowel},{f1:.1},{f2:.1},{f3:.1}\n"
                    ));
                }
            }
        }
    }
    text
}

fn isophone(verb: &str, folder: &Path, arguments: &[&str]) -> (String, String, i32) {
    let output = Command::new(assert_cmd::cargo::cargo_bin!("isophone"))
        .current_dir(folder)
        .arg(verb)
        .args(arguments)
        .output()
        .expect("runs");
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("UTF-8");
    (
        text(output.stdout),
        text(output.stderr),
        output.status.code().unwrap_or(-1),
    )
}

const COLUMNS: [&str; 10] = [
    "--column",
    "speaker=who",
    "--column",
    "vowel=sound",
    "--column",
    "f1_hz=first",
    "--column",
    "f2_hz=second",
    "--column",
    "f3_hz=third",
];

fn folder(speakers: usize) -> tempfile::TempDir {
    let folder = tempfile::tempdir().expect("a folder");
    std::fs::write(folder.path().join("vowels.csv"), table(speakers)).expect("written");
    folder
}

fn rows(text: &str) -> Vec<std::collections::BTreeMap<String, String>> {
    csv::Reader::from_reader(text.as_bytes())
        .deserialize()
        .collect::<Result<_, _>>()
        .expect("a table")
}

#[test]
fn groups_are_compared_and_said_in_words() {
    let folder = folder(SPEAKERS);
    let arguments = [&["vowels.csv", "--by", "hamlet"][..], &COLUMNS].concat();
    let (figures, words, status) = isophone("compare", folder.path(), &arguments);
    assert_eq!(status, 0, "{words}");
    let rows = rows(&figures);
    let find = |vowel: &str, measure: &str| {
        rows.iter()
            .find(|r| r["vowel"] == vowel && r["measure"] == measure)
            .expect("a row")
    };
    assert_eq!(find("u", "place")["verdict"], "different");
    let f2: f64 = find("u", "f2_hz")["difference"].parse().expect("a number");
    // A quarter of about 900 Hz.
    assert!((150.0..300.0).contains(&f2), "{f2}");
    assert_eq!(find("i", "place")["verdict"], "no evidence of a difference");
    assert!(
        words.contains("/u/ in Vennock against Ulmarsh is fronter"),
        "{words}"
    );
    assert!(
        words.contains("the groups are not alike in `sex`"),
        "{words}"
    );
    assert!(words.contains("--balance sex"), "{words}");
}

#[test]
fn balancing_compares_like_with_like() {
    let folder = folder(SPEAKERS);
    let arguments = [
        &["vowels.csv", "--by", "hamlet", "--balance", "sex"][..],
        &COLUMNS,
    ]
    .concat();
    let (figures, words, status) = isophone("compare", folder.path(), &arguments);
    assert_eq!(status, 0, "{words}");
    assert!(!words.contains("not alike"), "{words}");
    assert!(rows(&figures).iter().any(|r| r["verdict"] == "different"));
}

#[test]
fn a_merger_is_told_by_the_speakers_of_each_group() {
    let folder = folder(SPEAKERS);
    let arguments = [
        &["vowels.csv", "--by", "hamlet", "--show", "pairs"][..],
        &COLUMNS,
    ]
    .concat();
    let (figures, _, status) = isophone("compare", folder.path(), &arguments);
    assert_eq!(status, 0);
    let verdict = |group: &str| {
        let rows = rows(&figures);
        let row = rows.iter().find(|r| {
            let pair = [r["first"].as_str(), r["second"].as_str()];
            pair == ["ɑ", "ɔ"] || pair == ["ɔ", "ɑ"]
        } && r["group"] == group && r["speaker"].is_empty());
        row.expect("a row")["verdict"].clone()
    };
    assert_eq!(verdict("Ulmarsh"), "apart");
    assert_eq!(verdict("Vennock"), "no evidence of a difference");
}

#[test]
fn too_few_speakers_are_said_to_be_too_few() {
    let folder = folder(3);
    let arguments = [&["vowels.csv", "--by", "hamlet"][..], &COLUMNS].concat();
    let (figures, words, status) = isophone("compare", folder.path(), &arguments);
    assert_eq!(status, 0);
    assert!(words.contains("3 and 3 speakers are too few"), "{words}");
    assert!(rows(&figures).iter().all(|r| r["verdict"] != "different"));
}

#[test]
fn one_speaker_is_compared_with_a_group() {
    let folder = folder(SPEAKERS);
    let arguments = [
        &[
            "vowels.csv",
            "--by",
            "hamlet",
            "--speaker",
            "Vennock0",
            "--with",
            "Ulmarsh",
        ][..],
        &COLUMNS,
    ]
    .concat();
    let (figures, words, status) = isophone("compare", folder.path(), &arguments);
    assert_eq!(status, 0, "{words}");
    let rows = rows(&figures);
    let row = rows
        .iter()
        .find(|r| r["vowel"] == "u" && r["measure"] == "f2_norm")
        .expect("a row");
    assert_eq!(
        (
            row["first_speakers"].as_str(),
            row["second_speakers"].as_str()
        ),
        ("7", "1")
    );
    assert!(row["p"].parse::<f64>().expect("a number") < 0.01, "{row:?}");
}

#[test]
fn a_speaker_is_held_against_a_group_a_table_and_a_norm_of_ones_own() {
    let folder = folder(SPEAKERS);
    let who = ["vowels.csv", "--speaker", "Vennock0", "--against"];
    let arguments = [&who[..], &["hamlet=Ulmarsh"], &COLUMNS].concat();
    let (words, talk, status) = isophone("check", folder.path(), &arguments);
    assert_eq!(status, 0, "{talk}");
    assert!(
        words.contains("/u/  much fronter") || words.contains("/u/  fronter"),
        "{words}"
    );
    assert!(
        words.contains("Pairs the norm keeps apart and the speaker does not"),
        "{words}"
    );
    assert!(words.contains("/ɑ/ and /ɔ/"), "{words}");

    let making = [
        &[
            "own",
            "--from",
            "vowels.csv",
            "--by",
            "hamlet",
            "--out",
            "own.csv",
        ][..],
        &["--source", "invented", "--accent", "invented"],
        &COLUMNS,
    ]
    .concat();
    let (_, talk, status) = isophone("norms", folder.path(), &making);
    assert_eq!(status, 0, "{talk}");
    let arguments = [&who[..], &["own.csv", "--show", "figures"], &COLUMNS].concat();
    let (figures, talk, status) = isophone("check", folder.path(), &arguments);
    assert_eq!(status, 0, "{talk}");
    assert!(rows(&figures).iter().all(|r| r["spread"] == "stated"));

    // Spanish has five vowels: most of the speaker's are none of them.
    let arguments = [&who[..], &["peterson-barney-1952"], &COLUMNS].concat();
    let (words, talk, status) = isophone("check", folder.path(), &arguments);
    assert_eq!(status, 0, "{talk}");
    assert!(words.contains("was published without a spread"), "{words}");
}

#[test]
fn what_is_not_there_is_said_with_what_is() {
    let folder = folder(3);
    for (verb, arguments, said) in [
        ("compare", &["vowels.csv", "--by", "village"][..], "village"),
        (
            "compare",
            &["vowels.csv", "--by", "sound"],
            "has two values of `sound`",
        ),
        (
            "compare",
            &[
                "vowels.csv",
                "--by",
                "hamlet",
                "--groups",
                "Ulmarsh,Nowhere",
            ],
            "`Nowhere`",
        ),
        (
            "compare",
            &["vowels.csv", "--speaker", "nobody"],
            "`nobody`",
        ),
        ("compare", &["vowels.csv"], "no two groups"),
        (
            "check",
            &["vowels.csv", "--against", "nothing"],
            "no norm `nothing`",
        ),
        (
            "check",
            &["vowels.csv", "--against", "hamlet=Nowhere"],
            "Nowhere",
        ),
        (
            "check",
            &[
                "vowels.csv",
                "--speaker",
                "nobody",
                "--against",
                "bradlow-1995",
            ],
            "`nobody`",
        ),
    ] {
        let arguments = [arguments, &COLUMNS].concat();
        let (_, words, status) = isophone(verb, folder.path(), &arguments);
        assert_eq!(status, 2, "{arguments:?}: {words}");
        assert!(
            words.contains(said) && words.contains("error:"),
            "{arguments:?}: {words}"
        );
    }
}
