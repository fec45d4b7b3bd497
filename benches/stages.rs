//! How long the stages of an analysis take, and which share of the whole each is:
//! `cargo bench --bench stages`.
//!
//! First every stage by itself, then all of them by turns over the same recordings, as shares of
//! the whole analysis; shares of one run can be compared where times of two runs cannot. The sound
//! is invented, by the generator of the tests.

#[path = "../tests/recordings/mod.rs"]
mod recordings;

use std::hint::black_box;
use std::sync::LazyLock;
use std::time::{Duration, Instant};

use divan::Bencher;
use divan::counter::ItemsCount;
use isophone::audio::{Channel, Waveform, decode};
use isophone::formants::{self, Conditions};
use isophone::segments::VowelSpan;
use isophone::signal::discrete;
use isophone::signal::follow::FactorFinder;
use isophone::signal::harmonics;
use isophone::signal::prediction::{BandAutocorrelation, levinson};
use isophone::signal::roots::RootFinder;
use isophone::signal::spectrum::PowerSpectrum;
use isophone::signal::window;
use isophone::tokens::read_speaker;
use recordings::folder::{self, Condition, Recording};

/// What the analysis is made of, written down here apart from it: 17 frames of 50 ms a vowel, ten
/// bands, orders 8 to 14.
const RATE_HZ: f64 = 16_000.0;
const FRAME: usize = 800;
const POINTS: usize = 1_024;
const FRAMES: usize = 17;
const BANDS: usize = 10;
const ORDERS: std::ops::RangeInclusive<usize> = 8..=14;

fn bin_hz() -> f64 {
    RATE_HZ / POINTS as f64
}

fn ceiling_hz(band: usize) -> f64 {
    3_500.0 + 450.0 * band as f64
}

/// One vowel, at every stage.
struct Vowel {
    wav: Vec<u8>,
    waveform: Waveform,
    conditions: Conditions,
    span: VowelSpan,
    centres: Vec<usize>,
    f0_hz: f64,
    /// Emphasised power spectra, a frame each.
    powers: Vec<Vec<f32>>,
    /// Lags of every band, frame after frame.
    lags: Vec<[f64; 15]>,
    /// For every order the polynomials of all bands, frame after frame.
    polynomials: Vec<Vec<f64>>,
}

impl Vowel {
    fn of(recording: &Recording) -> Self {
        let wav = wav(recording);
        let waveform = decode(&wav)
            .and_then(|sound| sound.waveform(Channel::Loudest))
            .expect("a recording of our own");
        let word = &recording.word;
        let span = VowelSpan {
            token: recording.file.clone(),
            recording: recording.file.clone(),
            channel: 1,
            speaker: recording.speaker.name.clone(),
            word: None,
            label: recording.target.ipa.to_owned(),
            vowel: None,
            start_s: word.start_s,
            end_s: word.end_s,
        };
        let centres: Vec<usize> = (0..FRAMES)
            .map(|i| {
                let at_s = span.start_s + formants::proportion(i) * span.duration_s();
                (at_s * RATE_HZ).round() as usize
            })
            .collect();
        let mut vowel = Self {
            conditions: Conditions::find(&waveform),
            f0_hz: word.f0_hz(0.5),
            wav,
            waveform,
            span,
            centres,
            powers: Vec::new(),
            lags: Vec::new(),
            polynomials: Vec::new(),
        };
        vowel.powers = vowel.spectra();
        vowel.lags = vowel.autocorrelations();
        vowel.polynomials = vowel.predictions();
        vowel
    }

    fn spectra(&self) -> Vec<Vec<f32>> {
        let mut spectrum = SPECTRUM.clone();
        let samples = &self.waveform.samples;
        self.centres
            .iter()
            .map(|&centre| {
                let power = spectrum.at(samples, centre).iter().enumerate();
                let emphasised = power.map(|(k, p)| {
                    let octaves = k as f32 * (bin_hz() / 250.0) as f32;
                    p * (1.0 + octaves * octaves)
                });
                emphasised.collect()
            })
            .collect()
    }

    fn autocorrelations(&self) -> Vec<[f64; 15]> {
        let mut out = Vec::with_capacity(FRAMES * BANDS);
        for power in &self.powers {
            for table in TABLES.iter() {
                let mut lags = [0.0; 15];
                table.lags(power, &mut lags);
                out.push(lags);
            }
        }
        out
    }

    fn predictions(&self) -> Vec<Vec<f64>> {
        let mut out: Vec<Vec<f64>> = ORDERS
            .map(|order| vec![f64::NAN; self.lags.len() * (order + 1)])
            .collect();
        for (k, lags) in self.lags.iter().enumerate() {
            let _ = levinson(lags, *ORDERS.end(), |order, a, _| {
                if ORDERS.contains(&order) {
                    out[order - ORDERS.start()][k * a.len()..][..a.len()].copy_from_slice(a);
                }
            });
        }
        out
    }

    fn followed_roots(&self) -> usize {
        let mut finder = FactorFinder::default();
        let mut found = 0;
        for (order, polynomials) in ORDERS.zip(&self.polynomials) {
            let mut factors = vec![None; BANDS];
            for frame in polynomials.chunks_exact(BANDS * (order + 1)) {
                finder.follow(order, frame, &mut factors);
                found += factors.iter().flatten().count();
            }
        }
        found
    }

    fn roots_one_by_one(&self) -> usize {
        let mut finder = RootFinder::default();
        let mut found = 0;
        for (order, polynomials) in ORDERS.zip(&self.polynomials) {
            for a in polynomials.chunks_exact(order + 1) {
                found += usize::from(finder.upper_half(a).is_ok());
            }
        }
        found
    }

    /// Nine discrete models a frame.
    fn discrete_models(&self) -> usize {
        let mut fitted = 0;
        for (frame, power) in self.powers.iter().enumerate() {
            let lines = harmonics::lines(power, bin_hz(), self.f0_hz, 7_600.0);
            for band in 0..9 {
                let order = ORDERS.start() + band % 7;
                let k = frame * BANDS + band;
                let from = &self.polynomials[order - ORDERS.start()][k * (order + 1)..];
                let mut a = from[..order + 1].to_vec();
                fitted += usize::from(discrete::fit(&mut a, &lines, ceiling_hz(band)).is_ok());
            }
        }
        fitted
    }
}

fn wav(recording: &Recording) -> Vec<u8> {
    let spec = hound::WavSpec {
        channels: 1,
        sample_rate: recording.rate_hz,
        bits_per_sample: 16,
        sample_format: hound::SampleFormat::Int,
    };
    let mut bytes = std::io::Cursor::new(Vec::new());
    let mut writer = hound::WavWriter::new(&mut bytes, spec).expect("to memory");
    for s in &recording.word.sound {
        let whole = (s.clamp(-1.0, 1.0) * 32_767.0).round() as i16;
        writer.write_sample(whole).expect("to memory");
    }
    writer.finalize().expect("to memory");
    bytes.into_inner()
}

static SPECTRUM: LazyLock<PowerSpectrum> =
    LazyLock::new(|| PowerSpectrum::new(&window::hann(FRAME), POINTS));

static TABLES: LazyLock<Vec<BandAutocorrelation>> = LazyLock::new(|| {
    (0..BANDS)
        .map(|band| BandAutocorrelation::new(bin_hz(), ceiling_hz(band), *ORDERS.end()))
        .collect()
});

/// Six invented people, men, women and children, who say every vowel once.
static VOWELS: LazyLock<Vec<Vowel>> = LazyLock::new(|| {
    folder::survey(Condition::Clean, 6, 1, 7)
        .iter()
        .map(Vowel::of)
        .collect()
});

type Stage = (&'static str, fn(&Vowel));

/// Each as the analysis does it; the whole is the last.
const STAGES: [Stage; 7] = [
    ("decode", |v| {
        let sound = decode(&v.wav).and_then(|sound| sound.waveform(Channel::Loudest));
        black_box(sound.expect("a recording of our own"));
    }),
    ("spectra", |v| drop(black_box(v.spectra()))),
    ("autocorrelation", |v| drop(black_box(v.autocorrelations()))),
    ("prediction", |v| drop(black_box(v.predictions()))),
    ("roots, followed", |v| {
        black_box(v.followed_roots());
    }),
    ("discrete models", |v| {
        black_box(v.discrete_models());
    }),
    ("decode and analysis", |v| {
        let sound = decode(&v.wav).and_then(|sound| sound.waveform(Channel::Loudest));
        black_box(sound.expect("a recording of our own"));
        drop(black_box(formants::analyse(
            &v.waveform,
            &v.conditions,
            &v.span,
        )));
    }),
];

#[divan::bench(args = STAGES.map(|(name, _)| name))]
fn stage(bencher: Bencher<'_, '_>, name: &str) {
    let found = STAGES.iter().find(|(stage, _)| *stage == name);
    over_all(bencher, found.expect("one of them").1);
}

#[divan::bench]
fn roots_one_by_one(bencher: Bencher<'_, '_>) {
    over_all(bencher, |v| {
        black_box(v.roots_one_by_one());
    });
}

#[divan::bench]
fn choice_over_a_speaker(bencher: Bencher<'_, '_>) {
    let first = &VOWELS[0].span.speaker;
    let spans: Vec<_> = VOWELS
        .iter()
        .filter(|v| v.span.speaker == *first)
        .map(|v| {
            let analysis = formants::analyse(&v.waveform, &v.conditions, &v.span);
            (v.span.clone(), analysis)
        })
        .collect();
    bencher
        .counter(ItemsCount::new(spans.len()))
        .with_inputs(|| spans.clone())
        .bench_values(read_speaker);
}

/// Times one stage over all vowels, counted in vowels.
fn over_all(bencher: Bencher<'_, '_>, stage: fn(&Vowel)) {
    LazyLock::force(&VOWELS);
    bencher
        .counter(ItemsCount::new(VOWELS.len()))
        .bench(|| VOWELS.iter().for_each(stage));
}

/// The share of the whole every stage takes, by turns in one run: the median of the rounds.
fn print_shares() {
    const ROUNDS: usize = 15;
    let mut took = vec![[Duration::ZERO; STAGES.len()]; ROUNDS];
    for round in &mut took {
        for ((_, stage), took) in STAGES.iter().zip(round) {
            let start = Instant::now();
            VOWELS.iter().for_each(stage);
            *took = start.elapsed();
        }
    }
    println!("\nshare of decode and analysis, median of {ROUNDS} rounds by turns");
    for (k, (name, _)) in STAGES.iter().enumerate() {
        let mut shares: Vec<f64> = took
            .iter()
            .map(|round| round[k].as_secs_f64() / round[STAGES.len() - 1].as_secs_f64())
            .collect();
        shares.sort_by(f64::total_cmp);
        println!("{:5.1} %  {name}", 100.0 * shares[ROUNDS / 2]);
    }
}

fn main() {
    divan::main();
    print_shares();
}
