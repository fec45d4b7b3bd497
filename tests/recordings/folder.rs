//! Whole invented surveys with the truth beside them, one folder a condition.

use std::fmt::Write as _;
use std::fs;
use std::io;
use std::path::Path;

use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;

use super::spoil;
use super::voice::{AMERICAN, RATE_HZ, Speaker, Target, Word, gaussian, say, shifted};

/// What the invented recordings are like.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Condition {
    /// Quiet room, F0 60 to 260 Hz.
    Clean,
    /// F0 280 to 420 Hz, sizes of women and children.
    High,
    /// Pink noise 15 dB under the vowel.
    Pink,
    /// 300 to 3400 Hz at 8 kHz.
    Telephone,
    /// A steady tone between 1.5 and 2.2 kHz, another one for each speaker, 18 dB under the
    /// vowel's peak.
    Tone,
    /// Quiet room, three vowels unlike any average ([`shifted`]).
    Accent,
}

impl Condition {
    /// Every condition.
    pub const ALL: [Self; 6] = [
        Self::Clean,
        Self::High,
        Self::Pink,
        Self::Telephone,
        Self::Tone,
        Self::Accent,
    ];

    /// Name of its folder.
    pub fn name(self) -> &'static str {
        match self {
            Self::Clean => "clean",
            Self::High => "high",
            Self::Pink => "pink",
            Self::Telephone => "telephone",
            Self::Tone => "tone",
            Self::Accent => "accent",
        }
    }
}

/// One recording of an invented survey.
#[derive(Debug, Clone)]
pub struct Recording {
    /// File name.
    pub file: String,
    /// Who speaks.
    pub speaker: Speaker,
    /// What is said.
    pub target: Target,
    /// The sound and its truth; the sound is at `rate_hz`.
    pub word: Word,
    /// Sampling rate in hertz.
    pub rate_hz: u32,
    /// The tone in it, in hertz.
    pub tone_hz: Option<f64>,
}

/// The recordings of `speakers` invented people who say every vowel `times` times.
pub fn survey(condition: Condition, speakers: usize, times: usize, seed: u64) -> Vec<Recording> {
    let vowels = if condition == Condition::Accent {
        shifted()
    } else {
        AMERICAN
    };
    let mut recordings = Vec::new();
    for s in 0..speakers {
        let mut random = Pcg64::seed_from_u64(seed);
        random.advance((s as u128) << 64);
        // Sizes spread evenly on a logarithmic scale, from a large man to a small child.
        let share = (s as f64 + 0.5) / speakers as f64;
        let smallest = if condition == Condition::High {
            1.08f64
        } else {
            0.90
        };
        let size = smallest * (1.55 / smallest).powf(share);
        let usual = 112.0 * size.powf(2.4) * (0.15 * gaussian(&mut random)).exp();
        let f0_hz = match condition {
            Condition::High => random.random_range(285.0..410.0),
            _ => usual.clamp(64.0, 250.0),
        };
        let speaker = Speaker::drawn(format!("s{:02}", s + 1), size, f0_hz, &mut random);
        let tone_hz = (condition == Condition::Tone).then(|| random.random_range(1_500.0..2_200.0));
        for target in vowels {
            for time in 1..=times {
                let mut word = say(&speaker, &target, &mut random);
                let mut rate_hz = RATE_HZ as u32;
                match condition {
                    Condition::Clean | Condition::High | Condition::Accent => {}
                    Condition::Pink => spoil::add_pink_noise(&mut word, 15.0, &mut random),
                    Condition::Tone => {
                        spoil::add_tone(&mut word, tone_hz.expect("drawn above"), 18.0);
                    }
                    Condition::Telephone => {
                        word.sound = spoil::telephone(&word.sound);
                        rate_hz /= 2;
                    }
                }
                let file = format!("{}-{}-{time}.wav", speaker.name, target.name);
                let speaker = speaker.clone();
                recordings.push(Recording {
                    file,
                    speaker,
                    target,
                    word,
                    rate_hz,
                    tone_hz,
                });
            }
        }
    }
    recordings
}

/// Writes a survey folder: `recordings/`, `labels.csv`, `speakers.csv`, and `truth.csv`.
pub fn write(recordings: &[Recording], folder: &Path) -> io::Result<()> {
    fs::create_dir_all(folder.join("recordings"))?;
    let mut labels = String::from("recording,start_s,end_s,label,word,speaker\n");
    let mut speakers = String::from("speaker,age_sex\n");
    let mut truth = String::from("recording,talker,group,vowel,ipa,word,dur_ms,f0,f1,f2,f3");
    for percent in (10..=80).step_by(10) {
        write!(truth, ",f1_{percent},f2_{percent},f3_{percent}").expect("to a string");
    }
    truth.push_str(",start_ms,end_ms,center1_ms,size,tone_hz\n");
    let mut last = "";
    for r in recordings {
        let (who, word) = (&r.speaker, &r.word);
        if who.name != last {
            writeln!(speakers, "{},{}", who.name, who.group).expect("to a string");
            last = &who.name;
        }
        let span = format!("{:.4},{:.4}", word.start_s, word.end_s);
        writeln!(
            labels,
            "{},{span},{},{},{}",
            r.file, r.target.ipa, r.target.word, who.name
        )
        .expect("to a string");
        truth.push_str(&truth_row(r));
        write_wav(r, &folder.join("recordings").join(&r.file))?;
    }
    fs::write(folder.join("labels.csv"), labels)?;
    fs::write(folder.join("speakers.csv"), speakers)?;
    fs::write(folder.join("truth.csv"), truth)
}

fn truth_row(r: &Recording) -> String {
    let (who, word) = (&r.speaker, &r.word);
    let duration_ms = 1_000.0 * (word.end_s - word.start_s);
    let [f1, f2, f3] = word.formant_hz(0.5);
    let mut row = format!(
        "{},{},{},{},{},{},{duration_ms:.1},{:.1},{f1:.1},{f2:.1},{f3:.1}",
        r.file,
        who.name,
        who.group,
        r.target.name,
        r.target.ipa,
        r.target.word,
        word.f0_hz(0.5)
    );
    for percent in (10..=80).step_by(10) {
        for f in word.formant_hz(f64::from(percent) / 100.0) {
            write!(row, ",{f:.1}").expect("to a string");
        }
    }
    let tone = r.tone_hz.map(|f| format!("{f:.1}")).unwrap_or_default();
    let (start_ms, end_ms) = (1_000.0 * word.start_s, 1_000.0 * word.end_s);
    let middle_ms = 0.5 * (start_ms + end_ms);
    writeln!(
        row,
        ",{start_ms:.1},{end_ms:.1},{middle_ms:.1},{:.3},{tone}",
        who.size
    )
    .expect("to a string");
    row
}

fn write_wav(r: &Recording, path: &Path) -> io::Result<()> {
    let spec = hound::WavSpec {
        channels: 1,
        sample_rate: r.rate_hz,
        bits_per_sample: 16,
        sample_format: hound::SampleFormat::Int,
    };
    let mut wav = hound::WavWriter::create(path, spec).map_err(io::Error::other)?;
    for s in &r.word.sound {
        wav.write_sample((s.clamp(-1.0, 1.0) * 32_767.0).round() as i16)
            .map_err(io::Error::other)?;
    }
    wav.finalize().map_err(io::Error::other)
}
