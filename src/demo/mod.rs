//! An invented survey, synthesised by a source–filter model, for a first run without data.
//!
//! Two villages that are on no map, [`village::VILLAGES`], with invented people who say twelve
//! words. One vowel is said differently in the two, one pair is one vowel in one of them; both are
//! written down in [`PutIn`], so that the end of a run can set what was found beside what was put in.
//!
//! The room shares no code with the analysis. Voice: polynomial pulses of Rosenberg 1971
//! ([`voice`]); tract: a cascade of moving resonances ([`tract`]) around the published averages of
//! Hillenbrand, Getty, Clark & Wheeler 1995 ([`targets`]).

mod targets;
mod tract;
mod village;
mod voice;
mod word;

use std::fmt::Write as _;
use std::io::Cursor;

use rayon::prelude::*;

use crate::vowel::Vowel;

pub use targets::TargetsError;
pub use village::{Person, PutIn, VILLAGES};

/// Rate of the recordings, in hertz.
pub const RATE_HZ: u32 = 16_000;

/// How often every person says every word.
pub const TIMES: usize = 6;

/// The seed `isophone demo` uses: any would do, this one is the year Rosenberg's pulses were printed.
pub const SEED: u64 = 1971;

/// The files of an invented survey and the truth about them.
#[derive(Debug, Clone)]
pub struct DemoSurvey {
    /// File name and WAV bytes of each recording.
    pub recordings: Vec<(String, Vec<u8>)>,
    /// `labels.csv`.
    pub labels_csv: String,
    /// `speakers.csv`.
    pub speakers_csv: String,
    /// `survey.toml`: the title, and that it is invented.
    pub survey_toml: String,
    /// What was said in each recording, in the order of `recordings`.
    pub truths: Vec<Truth>,
    /// What was built into the villages.
    pub put_in: PutIn,
}

/// What is true of one recording, by construction.
#[derive(Debug, Clone, PartialEq)]
pub struct Truth {
    /// File name.
    pub recording: String,
    /// Who speaks.
    pub speaker: String,
    /// Where the speaker lives.
    pub village: &'static str,
    /// The vowel the word is written with.
    pub vowel: Vowel,
    /// F0 in hertz in the middle of the vowel.
    pub f0_hz: f64,
    /// Proportion of the vowel's duration, and F1 to F3 in hertz there.
    pub track: Vec<(f64, [f64; 3])>,
}

impl Truth {
    /// F1 to F3 in hertz at a proportion of the vowel, linear between the points of the track.
    pub fn formant_hz(&self, proportion: f64) -> [f64; 3] {
        let after = self.track.iter().position(|(p, _)| *p >= proportion);
        match after {
            None => self.track.last().map_or([f64::NAN; 3], |(_, f)| *f),
            Some(0) => self.track[0].1,
            Some(n) => {
                let ((p, a), (q, b)) = (self.track[n - 1], self.track[n]);
                let share = (proportion - p) / (q - p);
                std::array::from_fn(|k| a[k] + share * (b[k] - a[k]))
            }
        }
    }
}

/// Makes the invented survey.
///
/// # Errors
/// [`TargetsError`] if the table of averages compiled into the program cannot be used.
pub fn survey(seed: u64) -> Result<DemoSurvey, TargetsError> {
    let targets = targets::targets()?;
    let people = village::people(seed);
    let put_in = village::put_in(&targets);
    let said: Vec<Vec<word::Word>> = people
        .par_iter()
        .map(|person| {
            let mut random = person.stream(seed);
            let mut words = Vec::new();
            for vowel in targets::VOWELS {
                for _ in 0..TIMES {
                    words.push(word::say(person, &targets, vowel, &mut random));
                }
            }
            words
        })
        .collect();
    let mut survey = DemoSurvey {
        recordings: Vec::new(),
        labels_csv: "recording,start_s,end_s,label,word,speaker\n".to_owned(),
        speakers_csv: "speaker,village,age_group,note\n".to_owned(),
        survey_toml: format!(
            "# Invented by `isophone demo`; the villages are on no map.\n[report]\n\
             title = \"{} and {}: two invented villages\"\ninvented = true\n",
            VILLAGES[0], VILLAGES[1]
        ),
        truths: Vec::new(),
        put_in,
    };
    for (person, words) in people.iter().zip(said) {
        let (name, place, age) = (&person.name, person.village, person.age_group());
        // Writing to a `String` cannot fail.
        let _ = writeln!(survey.speakers_csv, "{name},{place},{age},invented");
        for (n, word) in words.into_iter().enumerate() {
            let (vowel, time) = (targets::VOWELS[n / TIMES], n % TIMES + 1);
            let recording = format!("{name}-{}-{time}.wav", vowel.word);
            let _ = writeln!(
                survey.labels_csv,
                "{recording},{:.4},{:.4},{},{},{name}",
                word.start_s, word.end_s, vowel.ipa, vowel.word
            );
            survey.truths.push(Truth {
                recording: recording.clone(),
                speaker: name.clone(),
                village: place,
                vowel: Vowel::from_ipa(vowel.ipa),
                f0_hz: word.f0_hz(0.5),
                track: (1..=9)
                    .map(|p| f64::from(p) / 10.0)
                    .map(|p| (p, word.formant_hz(p)))
                    .collect(),
            });
            survey.recordings.push((recording, encode(&word.sound)));
        }
    }
    Ok(survey)
}

/// One channel of 16-bit WAV.
fn encode(sound: &[f64]) -> Vec<u8> {
    let spec = hound::WavSpec {
        channels: 1,
        sample_rate: RATE_HZ,
        bits_per_sample: 16,
        sample_format: hound::SampleFormat::Int,
    };
    let mut bytes = Cursor::new(Vec::new());
    {
        let mut wav = hound::WavWriter::new(&mut bytes, spec).expect("writing to memory");
        for s in sound {
            wav.write_sample((s.clamp(-1.0, 1.0) * 32_767.0).round() as i16)
                .expect("writing to memory");
        }
        wav.finalize().expect("writing to memory");
    }
    bytes.into_inner()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_person_says_every_word_and_the_same_seed_gives_the_same_bytes() {
        let made = survey(SEED).unwrap();
        let people = made.speakers_csv.lines().count() - 1;
        assert!(people >= 16);
        assert_eq!(made.recordings.len(), people * 12 * TIMES);
        assert_eq!(made.labels_csv.lines().count() - 1, made.recordings.len());
        assert!(
            made.speakers_csv
                .lines()
                .skip(1)
                .all(|l| l.ends_with(",invented"))
        );
        let again = survey(SEED).unwrap();
        assert_eq!(made.labels_csv, again.labels_csv);
        assert!(made.recordings == again.recordings);
    }
}
