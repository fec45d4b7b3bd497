//! One word said once: breath, vowel, closure.

use rand::Rng;
use rand_pcg::Pcg64;

use super::targets::{Path, Spoken, Targets, VOWELS};
use super::tract::{self, SYNTHESIS_RATE_HZ};
use super::village::Person;
use super::voice::gaussian;

/// The sound of a word at [`super::RATE_HZ`] and what is true of its vowel.
#[derive(Debug, Clone)]
pub(super) struct Word {
    pub(super) sound: Vec<f64>,
    pub(super) start_s: f64,
    pub(super) end_s: f64,
    path: Path,
    f0_hz: [f64; 3],
}

impl Word {
    /// F1 to F3 in hertz at a proportion of the vowel.
    pub(super) fn formant_hz(&self, proportion: f64) -> [f64; 3] {
        std::array::from_fn(|k| through(self.path.map(|p| p[k]), proportion))
    }

    /// F0 in hertz at a proportion of the vowel, without its jitter.
    pub(super) fn f0_hz(&self, proportion: f64) -> f64 {
        through(self.f0_hz, proportion)
    }
}

/// A parabola through three values at 20, 50 and 80 %, held still outside 3 to 97 %.
fn through([a, b, c]: [f64; 3], proportion: f64) -> f64 {
    let x = (proportion.clamp(0.03, 0.97) - 0.5) / 0.3;
    b + x * (c - a) / 2.0 + x * x * (a - 2.0 * b + c) / 2.0
}

/// Says `vowel` once.
pub(super) fn say(person: &Person, targets: &Targets, vowel: Spoken, random: &mut Pcg64) -> Word {
    let index = VOWELS.iter().position(|v| v.ipa == vowel.ipa).unwrap_or(0);
    // No two tokens are alike: 2.5 % in F1, 2 % in F2, 1.5 % in F3.
    let slip: [f64; 3] =
        std::array::from_fn(|k| ([0.025, 0.02, 0.015][k] * gaussian(random)).exp());
    let path = person
        .path(targets, index)
        .map(|p| std::array::from_fn(|k| p[k] * slip[k]));
    let middle_hz = person.f0_hz * (0.04 * gaussian(random)).exp();
    let fall = random.random_range(0.88..0.97);
    let f0_hz = [middle_hz * 1.03, middle_hz, middle_hz * fall];
    let duration_s = vowel.duration_s * person.pace * (0.07 * gaussian(random)).exp();

    let quiet_s = random.random_range(0.05..0.09);
    let breath_s = random.random_range(0.05..0.09);
    let start_s = quiet_s + breath_s;
    let end_s = start_s + duration_s;
    let samples = ((end_s + 0.13) * SYNTHESIS_RATE_HZ) as usize;

    let ramp = |t: f64, from: f64, length: f64| ((t - from) / length).clamp(0.0, 1.0);
    let loudness = |t: f64| {
        let rise = ramp(t, start_s - 0.010, 0.030);
        let fall = 1.0 - 0.92 * ramp(t, end_s - 0.018, 0.020);
        let fade = 1.0 - ramp(t, end_s + 0.02, 0.03);
        (0.04 + rise) * fall * fade * (1.0 - 0.25 * ramp(t, start_s, duration_s))
    };
    let proportion = |t: f64| (t - start_s) / duration_s;
    let pitch = |t: f64| through(f0_hz, proportion(t));
    let mut sound = person.voice.speak(
        samples,
        start_s - 0.004,
        end_s + 0.05,
        pitch,
        loudness,
        random,
    );
    for (n, x) in sound.iter_mut().enumerate() {
        let t = n as f64 / SYNTHESIS_RATE_HZ;
        // /h/: breath through the tract of the coming vowel, under the first periods too.
        let breath = ramp(t, quiet_s, 0.025) * (1.0 - ramp(t, start_s - 0.005, 0.02));
        if breath > 0.0 {
            *x += 0.12 * breath * gaussian(random);
        }
    }
    let made = Word {
        sound: Vec::new(),
        start_s,
        end_s,
        path,
        f0_hz,
    };
    tract::pass(&mut sound, person.tract_cm, middle_hz, |t| {
        made.formant_hz(proportion(t))
    });
    let mut sound = tract::halve(&sound);
    let peak = sound.iter().fold(1e-9f64, |top, x| top.max(x.abs()));
    let level = random.random_range(0.25..0.6);
    for x in &mut sound {
        // A quiet room: noise 62 dB under full scale.
        *x = *x * level / peak + 8e-4 * gaussian(random);
    }
    Word { sound, ..made }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::demo::{targets, village};

    #[test]
    fn a_parabola_goes_through_its_points() {
        for (p, v) in [(0.2, 3.0), (0.5, 5.0), (0.8, 4.0)] {
            assert!((through([3.0, 5.0, 4.0], p) - v).abs() < 1e-12);
        }
    }

    #[test]
    fn the_vowel_is_where_the_label_says_and_loud() {
        let targets = targets::targets().unwrap();
        let person = &village::people(1)[0];
        let word = say(person, &targets, VOWELS[0], &mut person.stream(1));
        let at = |s: f64| (s * 16_000.0) as usize;
        let power = |x: &[f64]| x.iter().map(|v| v * v).sum::<f64>() / x.len() as f64;
        let vowel = power(&word.sound[at(word.start_s)..at(word.end_s)]);
        let before = power(&word.sound[..at(0.04)]);
        assert!(10.0 * (vowel / before).log10() > 35.0);
    }
}
