//! The generator of test recordings, held against closed forms and against itself.

mod recordings;

use std::f64::consts::PI;

use rand::SeedableRng;
use rand_pcg::Pcg64;
use recordings::flow::Flow;
use recordings::folder::{self, Condition};
use recordings::spoil;
use recordings::tract;
use recordings::voice::{AMERICAN, RATE_HZ, Speaker, say};

#[test]
fn flow_derivative_falls_to_minus_one_and_lets_no_air_stay() {
    for rd in [0.5, 0.8, 1.0, 1.5, 2.2] {
        let flow = Flow::shaped(rd);
        let steps = 200_000;
        let values: Vec<f64> = (0..steps)
            .map(|n| flow.derivative((f64::from(n) + 0.5) / f64::from(steps)))
            .collect();
        let lowest = values.iter().copied().fold(f64::INFINITY, f64::min);
        assert!(
            (lowest + 1.0).abs() < 1e-3,
            "rd {rd}: main excitation {lowest}"
        );
        let net = values.iter().sum::<f64>() / f64::from(steps);
        assert!(net.abs() < 1e-5, "rd {rd}: net flow {net}");
    }
}

#[test]
fn bandwidths_are_those_noted_from_hawks_and_miller_1995() {
    // Values at F0 132 Hz, noted from memory of the paper's figure.
    let noted = [
        (300.0, 53.2),
        (500.0, 37.8),
        (1_000.0, 41.8),
        (2_000.0, 62.9),
        (3_000.0, 129.5),
    ];
    for (frequency_hz, width_hz) in noted {
        let made = tract::bandwidth_hz(frequency_hz, 132.0);
        assert!(
            (made - width_hz).abs() < 0.1,
            "{frequency_hz} Hz: {made}, noted {width_hz}"
        );
    }
}

/// Level of the harmonics of a steady voice against flow times resonances, both slow definitions.
#[test]
fn a_steady_voice_has_the_spectrum_of_its_resonances() {
    let f0_hz = 100.0;
    let formant_hz = [500.0, 1_500.0, 2_500.0];
    let rate_hz = tract::SYNTHESIS_RATE_HZ;
    let flow = Flow::shaped(1.0);
    let samples = 32_000;
    let source: Vec<f64> = (0..samples)
        .map(|n| flow.derivative((f64::from(n) * f0_hz / rate_hz).fract()))
        .collect();
    let mut sound = source.clone();
    tract::resonate(&mut sound, 17.5, f0_hz, |_| formant_hz);
    let level = |x: &[f64], hz: f64| {
        let half = &x[x.len() / 2..];
        let (mut re, mut im) = (0.0, 0.0);
        for (n, v) in half.iter().enumerate() {
            let angle = 2.0 * PI * hz * n as f64 / rate_hz;
            re += v * angle.cos();
            im += v * angle.sin();
        }
        20.0 * re.hypot(im).log10()
    };
    // An analog resonance of centre f and width b at hz, in dB (closed form).
    let resonance = |hz: f64, f: f64| {
        let b = tract::bandwidth_hz(f, f0_hz) / 2.0;
        let top = f * f + b * b;
        10.0 * (top * top / (((hz - f).powi(2) + b * b) * ((hz + f).powi(2) + b * b))).log10()
    };
    for harmonic in [1.0, 4.0, 5.0, 6.0, 10.0, 15.0, 20.0, 25.0, 28.0] {
        let hz = harmonic * f0_hz;
        let gained = level(&sound, hz) - level(&source, hz);
        // A tube of 17.5 cm resonates at 500, 1500, 2500 … Hz without end. Sampled at 32 kHz the
        // mirror images of the first fifteen stand exactly there; 15.5 and 16.5 kHz are left out.
        let tube = (1..2_000).map(|n| 500.0 * f64::from(2 * n - 1));
        let kept = tube.filter(|f| *f != 15_500.0 && *f != 16_500.0);
        let expected: f64 = kept.map(|f| resonance(hz, f)).sum();
        assert!(
            (gained - expected).abs() < 0.2,
            "{hz} Hz: {gained:.2} dB, {expected:.2} expected"
        );
    }
}

#[test]
fn noise_stands_where_it_is_asked_to_stand() {
    let mut random = Pcg64::seed_from_u64(5);
    let speaker = Speaker::drawn("s01".to_owned(), 1.1, 190.0, &mut random);
    let word = say(&speaker, &AMERICAN[3], &mut random);
    let mut noisy = word.clone();
    spoil::add_pink_noise(&mut noisy, 15.0, &mut random);
    let noise: Vec<f64> = noisy
        .sound
        .iter()
        .zip(&word.sound)
        .map(|(a, b)| a - b)
        .collect();
    let at = |s: f64| (s * RATE_HZ) as usize;
    let vowel = &word.sound[at(word.start_s)..at(word.end_s)];
    let snr_db = 20.0 * (spoil::rms(vowel) / spoil::rms(&noise)).log10();
    assert!((snr_db - 15.0).abs() < 1e-9, "{snr_db} dB");
}

#[test]
fn the_same_seed_gives_the_same_survey_and_another_seed_another() {
    let once = folder::survey(Condition::Tone, 2, 1, 7);
    let again = folder::survey(Condition::Tone, 2, 1, 7);
    let other = folder::survey(Condition::Tone, 2, 1, 8);
    assert_eq!(once.len(), 24);
    assert!(
        once.iter()
            .zip(&again)
            .all(|(a, b)| a.word.sound == b.word.sound)
    );
    assert!(
        once.iter()
            .zip(&other)
            .all(|(a, b)| a.word.sound != b.word.sound)
    );
}

#[test]
fn a_folder_holds_what_a_survey_needs() {
    let place = tempfile::tempdir().expect("a temporary folder");
    let made = folder::survey(Condition::Telephone, 1, 1, 3);
    folder::write(&made, place.path()).expect("written");
    let labels = std::fs::read_to_string(place.path().join("labels.csv")).expect("labels");
    assert_eq!(labels.lines().count(), 1 + 12);
    let wav = hound::WavReader::open(place.path().join("recordings").join(&made[0].file))
        .expect("a recording");
    assert_eq!(wav.spec().sample_rate, 8_000);
    assert_eq!(wav.len() as usize, made[0].word.sound.len());
}
