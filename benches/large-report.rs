//! A report of a large invented survey: how long it takes and how large it is.
//! `cargo bench --bench large-report -- [SPEAKERS TOKENS_EACH PAGE]`
//!
//! The tables are made up here (twelve vowels, three villages, doubts at random), so that the page
//! alone is measured.

use std::time::Instant;

use isophone::compare::{Resampling, gaussian};
use isophone::report::{Frame, Nature, Subject, render};
use isophone::tables::{
    ColumnGroups, IdentifiedCells, ReadingCells, TokenRow, TokenTable, TrackRow, TrackTable,
};
use isophone::vowel::Vowel;
use rand::Rng;

const VOWELS: [(&str, f64, f64); 12] = [
    ("i", 340.0, 2_320.0),
    ("ɪ", 430.0, 2_030.0),
    ("e", 480.0, 2_090.0),
    ("ɛ", 580.0, 1_800.0),
    ("æ", 590.0, 1_950.0),
    ("ɑ", 770.0, 1_330.0),
    ("ɔ", 650.0, 1_000.0),
    ("o", 500.0, 910.0),
    ("ʊ", 470.0, 1_120.0),
    ("u", 380.0, 1_000.0),
    ("ʌ", 620.0, 1_200.0),
    ("ɝ", 470.0, 1_380.0),
];

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let given: Vec<String> = std::env::args()
        .skip(1)
        .filter(|a| a != "--bench")
        .collect();
    let number =
        |k: usize, usual: usize| given.get(k).and_then(|n| n.parse().ok()).unwrap_or(usual);
    let (speakers, each) = (number(0, 400), number(1, 60));
    let (table, tracks) = tables(speakers, each);
    let rows = table.rows.len();
    let start = Instant::now();
    let subject = Subject::gather(table, &tracks, Some("village"), Resampling::default());
    let worked_out = start.elapsed();
    let frame = Frame {
        title: format!("{speakers} invented speakers"),
        nature: Nature::Invented,
        provenance: Vec::new(),
    };
    let page = render(&subject, &frame)?;
    println!(
        "{speakers} speakers, {rows} tokens: worked out in {:.2} s, page after {:.2} s, {:.2} MB",
        worked_out.as_secs_f64(),
        start.elapsed().as_secs_f64(),
        page.len() as f64 / 1e6
    );
    if let Some(path) = given.get(2) {
        std::fs::write(path, page)?;
    }
    Ok(())
}

fn tables(speakers: usize, each: usize) -> (TokenTable, TrackTable) {
    let mut random = Resampling::default().stream(0);
    let mut table = TokenTable {
        speaker_columns: vec!["village".to_owned(), "sex".to_owned()],
        groups: ColumnGroups {
            normalized: false,
            identified: true,
        },
        rows: Vec::new(),
    };
    let mut tracks = TrackTable::default();
    for s in 0..speakers {
        let speaker = format!("speaker {s:03}");
        let village = ["Ulmarsh", "Vennock", "Wythorn"][s % 3];
        let sex = ["f", "m"][s / 3 % 2];
        let size = (0.1 * gaussian(&mut random)).exp();
        for n in 0..each {
            let (symbol, f1, f2) = VOWELS[n % 12];
            let token = format!("{speaker} {n}");
            let moved = if symbol == "u" && village == "Wythorn" {
                1.2
            } else {
                1.0
            };
            let mut around = |hz: f64| hz * size * (0.04 * gaussian(&mut random)).exp();
            let formant_hz = [around(f1), around(f2 * moved), around(2_500.0)];
            let vowel = Vowel::from_ipa(symbol);
            let doubts = if random.random::<f64>() < 0.08 {
                vec!["F2 uncertain".to_owned()]
            } else {
                Vec::new()
            };
            let recording = format!("{speaker}.wav");
            for k in 1..=9 {
                let proportion = f64::from(k) / 10.0;
                let drift = 1.0 + 0.1 * (proportion - 0.5);
                tracks.rows.push(TrackRow {
                    token: token.clone(),
                    recording: recording.clone(),
                    proportion,
                    time_s: 0.1 + 0.2 * proportion,
                    f0_hz: Some(150.0),
                    formant_hz: formant_hz.map(|f| Some(f * drift)),
                    bandwidth_hz: [None; 3],
                    sd_hz: [Some(15.0); 3],
                });
            }
            let [f1, f2, f3] = formant_hz.map(Some);
            table.rows.push(TokenRow {
                token,
                recording,
                channel: 1,
                speaker: speaker.clone(),
                given: vec![village.to_owned(), sex.to_owned()],
                word: None,
                label: symbol.to_owned(),
                vowel: Some(vowel.clone()),
                start_s: 0.1,
                end_s: 0.3,
                duration_s: 0.2,
                reading: Ok(ReadingCells {
                    f0_hz: Some(150.0),
                    formant_hz: [f1, f2, f3, None],
                    bandwidth_hz: [None; 3],
                    sd_hz: [Some(15.0), Some(30.0), Some(40.0)],
                    at_s: Some(0.2),
                    doubts,
                }),
                normalized: None,
                identified: Some(IdentifiedCells {
                    identified: Some(vowel),
                    probability: Some(0.9),
                    second: None,
                    second_probability: None,
                    model: "invented".to_owned(),
                }),
            });
        }
    }
    (table, tracks)
}
