//! Invented speakers and the words they say.

use std::f64::consts::PI;

use rand::Rng;
use rand_pcg::Pcg64;

use super::flow::Flow;
use super::tract::{self, SYNTHESIS_RATE_HZ};

/// The rate words are kept at, in hertz.
pub const RATE_HZ: f64 = SYNTHESIS_RATE_HZ / 2.0;

/// Length of the tract of a speaker of size 1, in cm (gives F4 of about 3.5 kHz, as the men of
/// Hillenbrand et al. 1995, Table V).
const TRACT_CM: f64 = 17.3;

/// A vowel of the inventory: its resonances at 20, 50 and 80 % for a speaker of size 1.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Target {
    /// Short name in plain letters, for file names.
    pub name: &'static str,
    /// The vowel in IPA.
    pub ipa: &'static str,
    /// The word it is said in.
    pub word: &'static str,
    /// Usual duration in milliseconds.
    pub duration_ms: f64,
    /// F1 to F3 in hertz at 20, 50 and 80 % of the duration.
    pub formant_hz: [[f64; 3]; 3],
}

/// Twelve vowels: averages of the 45 men of Hillenbrand, Getty, Clark & Wheeler 1995, JASA 97,
/// 3099-3111 (durations: Table V; movement: means over all of their tokens), rounded to 5 Hz.
pub const AMERICAN: [Target; 12] = [
    vowel(
        "iy",
        "i",
        "heed",
        243.0,
        [
            [345., 2310., 3010.],
            [340., 2340., 2995.],
            [345., 2315., 2945.],
        ],
    ),
    vowel(
        "ih",
        "ɪ",
        "hid",
        192.0,
        [
            [435., 2030., 2685.],
            [460., 1940., 2640.],
            [465., 1840., 2660.],
        ],
    ),
    vowel(
        "ei",
        "e",
        "hayed",
        267.0,
        [
            [480., 2090., 2700.],
            [435., 2180., 2725.],
            [400., 2230., 2740.],
        ],
    ),
    vowel(
        "eh",
        "ɛ",
        "head",
        189.0,
        [
            [585., 1815., 2605.],
            [590., 1775., 2600.],
            [560., 1745., 2645.],
        ],
    ),
    vowel(
        "ae",
        "æ",
        "had",
        278.0,
        [
            [590., 1925., 2595.],
            [615., 1865., 2565.],
            [630., 1720., 2600.],
        ],
    ),
    vowel(
        "ah",
        "ɑ",
        "hod",
        267.0,
        [
            [755., 1305., 2530.],
            [755., 1325., 2525.],
            [705., 1460., 2535.],
        ],
    ),
    vowel(
        "aw",
        "ɔ",
        "hawed",
        283.0,
        [
            [655., 1020., 2515.],
            [670., 1045., 2510.],
            [660., 1265., 2490.],
        ],
    ),
    vowel(
        "oa",
        "o",
        "hoed",
        265.0,
        [
            [510., 935., 2455.],
            [465., 865., 2480.],
            [435., 900., 2450.],
        ],
    ),
    vowel(
        "oo",
        "ʊ",
        "hood",
        192.0,
        [
            [470., 1120., 2440.],
            [485., 1210., 2440.],
            [485., 1490., 2445.],
        ],
    ),
    vowel(
        "uw",
        "u",
        "who'd",
        237.0,
        [
            [385., 1015., 2345.],
            [375., 970., 2360.],
            [370., 1030., 2340.],
        ],
    ),
    vowel(
        "uh",
        "ʌ",
        "hud",
        188.0,
        [
            [620., 1180., 2550.],
            [620., 1245., 2550.],
            [575., 1495., 2550.],
        ],
    ),
    vowel(
        "er",
        "ɝ",
        "heard",
        263.0,
        [
            [485., 1370., 1720.],
            [460., 1405., 1705.],
            [440., 1485., 1750.],
        ],
    ),
];

const fn vowel(
    name: &'static str,
    ipa: &'static str,
    word: &'static str,
    duration_ms: f64,
    formant_hz: [[f64; 3]; 3],
) -> Target {
    Target {
        name,
        ipa,
        word,
        duration_ms,
        formant_hz,
    }
}

/// The same inventory with three vowels unlike the average: /u/ as front as [y], /æ/ as close as
/// [ɛ], /ɑ/ and /ɔ/ one vowel.
pub fn shifted() -> [Target; 12] {
    let mut vowels = AMERICAN;
    for v in &mut vowels {
        v.formant_hz = match v.ipa {
            "u" => [
                [320., 1900., 2280.],
                [310., 1910., 2270.],
                [310., 1890., 2280.],
            ],
            "æ" => [
                [580., 1815., 2600.],
                [585., 1790., 2590.],
                [575., 1740., 2610.],
            ],
            "ɑ" | "ɔ" => [
                [705., 1160., 2520.],
                [715., 1185., 2515.],
                [685., 1340., 2510.],
            ],
            _ => v.formant_hz,
        };
    }
    vowels
}

/// An invented speaker.
#[derive(Debug, Clone)]
pub struct Speaker {
    /// Name, unique in its survey.
    pub name: String,
    /// `man`, `woman` or `child`, by size.
    pub group: &'static str,
    /// Resonances relative to those of an average man; 0.9 is a large man, 1.55 a small child.
    pub size: f64,
    /// Usual pitch in hertz.
    pub f0_hz: f64,
    /// Factors of the speaker's own on F1 to F3 beside the size.
    own: [f64; 3],
    rd: f64,
    jitter: f64,
    shimmer: f64,
    breath: f64,
}

impl Speaker {
    /// A speaker of the given size and pitch with a voice drawn from `random`.
    pub fn drawn(name: String, size: f64, f0_hz: f64, random: &mut Pcg64) -> Self {
        let group = match size {
            s if s < 1.09 => "man",
            s if s < 1.22 => "woman",
            _ => "child",
        };
        let mut own = [1.0; 3];
        for o in &mut own {
            *o = (0.015 * gaussian(random)).exp();
        }
        let soft = if size < 1.09 { 0.0 } else { 0.4 };
        Self {
            name,
            group,
            size,
            f0_hz,
            own,
            rd: 0.8 + soft + random.random_range(0.0..0.7),
            jitter: random.random_range(0.004..0.012),
            shimmer: random.random_range(0.02..0.06),
            breath: 10f64.powf(random.random_range(-2.2..-1.5)),
        }
    }
}

/// One word as said once: the sound and the truth about it.
#[derive(Debug, Clone)]
pub struct Word {
    /// Sound at [`RATE_HZ`], peak near 0.5.
    pub sound: Vec<f64>,
    /// Start of the vowel in seconds.
    pub start_s: f64,
    /// End of the vowel in seconds.
    pub end_s: f64,
    f0_hz: [f64; 3],
    formant_hz: [[f64; 3]; 3],
}

impl Word {
    /// F1 to F3 in hertz at a proportion of the vowel.
    pub fn formant_hz(&self, proportion: f64) -> [f64; 3] {
        path(&self.formant_hz, proportion)
    }

    /// F0 in hertz at a proportion of the vowel, without its jitter.
    pub fn f0_hz(&self, proportion: f64) -> f64 {
        contour(&self.f0_hz, proportion)
    }
}

/// The parabola through the values at 20, 50 and 80 %, held beyond 2 and 98 %.
fn path(points: &[[f64; 3]; 3], proportion: f64) -> [f64; 3] {
    std::array::from_fn(|k| contour(&points.map(|p| p[k]), proportion))
}

fn contour(points: &[f64; 3], proportion: f64) -> f64 {
    let x = (proportion.clamp(0.02, 0.98) - 0.5) / 0.3;
    let [a, b, c] = *points;
    b + 0.5 * (c - a) * x + 0.5 * (a + c - 2.0 * b) * x * x
}

/// A draw from the standard normal distribution (Box & Muller 1958).
pub fn gaussian(random: &mut Pcg64) -> f64 {
    let u: f64 = 1.0 - random.random::<f64>();
    let v: f64 = random.random();
    (-2.0 * u.ln()).sqrt() * (2.0 * PI * v).cos()
}

/// Says `target` once.
pub fn say(speaker: &Speaker, target: &Target, random: &mut Pcg64) -> Word {
    let token: [f64; 3] = std::array::from_fn(|_| (0.02 * gaussian(random)).exp());
    let formant_hz = target
        .formant_hz
        .map(|point| std::array::from_fn(|k| point[k] * speaker.size * speaker.own[k] * token[k]));
    let base_hz = speaker.f0_hz * (0.04 * gaussian(random)).exp();
    let f0_hz = [
        base_hz * 1.04,
        base_hz,
        base_hz * random.random_range(0.86..0.97),
    ];
    let duration_s = target.duration_ms / 1_000.0 * (0.08 * gaussian(random)).exp();

    let silence_s = 0.05;
    let breath_s = random.random_range(0.04..0.08);
    let closure_s = 0.07;
    let start_s = silence_s + breath_s;
    let total_s = start_s + duration_s + closure_s + silence_s;
    let samples = (total_s * SYNTHESIS_RATE_HZ) as usize;
    let proportion_at = |n: usize| (n as f64 / SYNTHESIS_RATE_HZ - start_s) / duration_s;

    let mut source = voiced(speaker, samples, start_s, duration_s, &f0_hz, random);
    for (n, value) in source.iter_mut().enumerate() {
        let t = n as f64 / SYNTHESIS_RATE_HZ;
        if t > silence_s && t < start_s + 0.01 {
            let rise = ((t - silence_s) / 0.02).min(1.0) * ((start_s + 0.01 - t) / 0.02).min(1.0);
            *value += 0.06 * rise * gaussian(random);
        }
    }
    let length_cm = TRACT_CM / speaker.size;
    let moving = |n: usize| path(&formant_hz, proportion_at(n));
    tract::resonate(&mut source, length_cm, base_hz, moving);
    let mut sound = tract::halve_rate(&source);
    let peak = sound.iter().fold(0.0f64, |m, s| m.max(s.abs()));
    for s in &mut sound {
        // A quiet room: noise 66 dB under the peak.
        *s = *s * 0.5 / peak + 2.5e-4 * gaussian(random);
    }
    Word {
        sound,
        start_s,
        end_s: start_s + duration_s,
        f0_hz,
        formant_hz,
    }
}

/// Voice source from a little before the vowel into the closure, breath noise in its open phases.
fn voiced(
    speaker: &Speaker,
    samples: usize,
    start_s: f64,
    duration_s: f64,
    f0_hz: &[f64; 3],
    random: &mut Pcg64,
) -> Vec<f64> {
    let flow = Flow::shaped(speaker.rd);
    let end_s = start_s + duration_s;
    let mut source = vec![0.0; samples];
    let mut period_start_s = start_s - 0.005;
    while period_start_s < end_s + 0.05 {
        let f0 = contour(f0_hz, (period_start_s - start_s) / duration_s);
        let period_s = (1.0 + speaker.jitter * gaussian(random)) / f0;
        let onset = ((period_start_s - start_s + 0.01) / 0.025).clamp(0.05, 1.0);
        // Behind the closed tongue tip only a murmur of the voice is left.
        let closing = if period_start_s < end_s - 0.015 {
            1.0
        } else {
            0.08
        };
        let loud = onset * closing * (1.0 + speaker.shimmer * gaussian(random));
        let first = (period_start_s * SYNTHESIS_RATE_HZ).ceil().max(0.0) as usize;
        let past = ((period_start_s + period_s) * SYNTHESIS_RATE_HZ).ceil() as usize;
        for n in first..past.min(samples) {
            let phase = (n as f64 / SYNTHESIS_RATE_HZ - period_start_s) / period_s;
            let breath = speaker.breath * flow.openness(phase) * gaussian(random);
            source[n] = loud * (flow.derivative(phase) + breath);
        }
        period_start_s += period_s;
    }
    source
}
