//! The villages, their people, and what makes them speak differently.

use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;

use crate::vowel::Vowel;

use super::targets::{Group, Path, Targets, VOWELS};
use super::voice::{Voice, gaussian};

/// Two villages of our own invention.
pub const VILLAGES: [&str; 2] = ["Brackenoe", "Tarnholt"];

/// The village that has one vowel where the other has two.
const MERGED_IN: &str = VILLAGES[0];
/// The pair it has merged, as places in the inventory.
const MERGED: [usize; 2] = [5, 6];
/// The village that says one vowel elsewhere.
const MOVED_IN: &str = VILLAGES[1];
/// That vowel, as its place in the inventory.
const MOVED: usize = 9;
/// What its F2 is multiplied with: as far front as a central vowel.
const MOVED_F2: f64 = 1.40;

/// Given names of nobody in particular, and how each speaks; the same in both villages but for the
/// name and everything that is drawn.
const PEOPLE: [(&str, &str, Group); 8] = [
    ("Aldous", "Corvin", Group::Men),
    ("Bertil", "Edrik", Group::Men),
    ("Ivo", "Lambert", Group::Men),
    ("Maren", "Sunniva", Group::Women),
    ("Odile", "Tamsin", Group::Women),
    ("Petra", "Wilma", Group::Women),
    ("Little-Finn", "Little-Jory", Group::Children),
    ("Little-Nell", "Little-Una", Group::Children),
];

/// What was built into the villages, for setting beside what was found.
#[derive(Debug, Clone, PartialEq)]
pub struct PutIn {
    /// The vowel that is said differently.
    pub moved: Vowel,
    /// Where it is said unlike the averages.
    pub moved_in: &'static str,
    /// Its F2 there, relative to the other village.
    pub moved_f2_factor: f64,
    /// The pair that is one vowel.
    pub merged: [Vowel; 2],
    /// Where it is one.
    pub merged_in: &'static str,
    /// Where it is two.
    pub apart_in: &'static str,
    /// Distance between the two vowels where they are two, in hertz for an average man: F1, F2.
    pub apart_hz: [f64; 2],
}

/// An invented person.
#[derive(Debug, Clone, PartialEq)]
pub struct Person {
    /// Name, unique in the survey.
    pub name: String,
    /// Where the person lives.
    pub village: &'static str,
    pub(super) group: Group,
    pub(super) voice: Voice,
    pub(super) f0_hz: f64,
    /// Resonances relative to the average of the group.
    pub(super) size: f64,
    pub(super) tract_cm: f64,
    /// How fast the person speaks: durations relative to the average.
    pub(super) pace: f64,
    /// The person's own way with each vowel: factors on F1 to F3.
    own: Vec<[f64; 3]>,
    number: usize,
}

impl Person {
    /// `man`, `woman` or `child`.
    pub fn age_group(&self) -> &'static str {
        match self.group {
            Group::Men => "man",
            Group::Women => "woman",
            Group::Children => "child",
        }
    }

    /// The person's own stream of random numbers, whatever the order in which people speak.
    pub(super) fn stream(&self, seed: u64) -> Pcg64 {
        stream(seed, 1_000 + self.number)
    }

    /// Where the person usually has a vowel: F1 to F3 in hertz at 20, 50 and 80 %.
    pub(super) fn path(&self, targets: &Targets, index: usize) -> Path {
        let mut path = targets.path(self.group, index);
        let mut category = index;
        if self.village == MERGED_IN && MERGED.contains(&index) {
            let [a, b] = MERGED.map(|m| targets.path(self.group, m));
            path = std::array::from_fn(|p| std::array::from_fn(|k| 0.5 * (a[p][k] + b[p][k])));
            category = MERGED[0];
        }
        if self.village == MOVED_IN && index == MOVED {
            for point in &mut path {
                point[1] *= MOVED_F2;
            }
        }
        path.map(|point| std::array::from_fn(|k| point[k] * self.size * self.own[category][k]))
    }
}

fn stream(seed: u64, number: usize) -> Pcg64 {
    let mut random = Pcg64::seed_from_u64(seed);
    random.advance((number as u128) << 64);
    random
}

/// The people of both villages.
pub(super) fn people(seed: u64) -> Vec<Person> {
    let mut people = Vec::new();
    for (place, village) in VILLAGES.into_iter().enumerate() {
        for (names_a, names_b, group) in PEOPLE {
            let name = if place == 0 { names_a } else { names_b };
            people.push(person(name, village, group, people.len(), seed));
        }
    }
    people
}

fn person(name: &str, village: &'static str, group: Group, number: usize, seed: u64) -> Person {
    let mut random = stream(seed, number);
    // Mean F0: Hillenbrand et al. 1995, Table V, over vowels. Tract lengths give an F4 like theirs.
    let (f0_hz, tract_cm, softness) = match group {
        Group::Men => (130.0, 17.2, 0.0),
        Group::Women => (220.0, 14.4, 0.08),
        Group::Children => (236.0, 13.0, 0.06),
    };
    // Sizes within a group differ by some 4 % (spread of log-mean formants in the same data is of
    // that order; the exact figure does not matter here).
    let size = (0.04 * gaussian(&mut random)).exp();
    let own = VOWELS
        .iter()
        .map(|_| std::array::from_fn(|k| ([0.035, 0.03, 0.02][k] * gaussian(&mut random)).exp()))
        .collect();
    Person {
        name: name.to_owned(),
        village,
        group,
        voice: Voice {
            opening: 0.38 + softness + random.random_range(0.0..0.06),
            closing: 0.16 + softness + random.random_range(0.0..0.06),
            jitter: random.random_range(0.004..0.010),
            shimmer: random.random_range(0.02..0.05),
            breath: random.random_range(0.01..0.05),
            soft_hz: random.random_range(1_800.0..3_500.0),
        },
        f0_hz: f0_hz * (0.11 * gaussian(&mut random)).exp(),
        size,
        tract_cm: tract_cm / size,
        pace: (0.10 * gaussian(&mut random)).exp(),
        own,
        number,
    }
}

/// What the villages were given.
pub(super) fn put_in(targets: &Targets) -> PutIn {
    let [a, b] = MERGED.map(|m| targets.path(Group::Men, m)[1]);
    PutIn {
        moved: Vowel::from_ipa(VOWELS[MOVED].ipa),
        moved_in: MOVED_IN,
        moved_f2_factor: MOVED_F2,
        merged: MERGED.map(|m| Vowel::from_ipa(VOWELS[m].ipa)),
        merged_in: MERGED_IN,
        apart_in: VILLAGES[1],
        apart_hz: [(a[0] - b[0]).abs(), (a[1] - b[1]).abs()],
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::demo::targets::targets;

    #[test]
    fn the_merged_pair_is_one_vowel_there_and_two_elsewhere() {
        let targets = targets().unwrap();
        for person in people(1) {
            let [a, b] = MERGED.map(|m| person.path(&targets, m));
            assert_eq!(a == b, person.village == MERGED_IN, "{}", person.name);
        }
    }

    #[test]
    fn the_moved_vowel_is_fronter_by_its_factor() {
        let targets = targets().unwrap();
        let mut ratios = Vec::new();
        for person in people(1) {
            let ratio = person.path(&targets, MOVED)[1][1]
                / (targets.path(person.group, MOVED)[1][1] * person.size * person.own[MOVED][1]);
            ratios.push((person.village, ratio));
        }
        for (village, ratio) in ratios {
            let expected = if village == MOVED_IN { MOVED_F2 } else { 1.0 };
            assert!((ratio - expected).abs() < 1e-12);
        }
    }

    #[test]
    fn names_are_unique() {
        let mut names: Vec<_> = people(1).into_iter().map(|p| p.name).collect();
        let all = names.len();
        names.sort();
        names.dedup();
        assert_eq!(names.len(), all);
    }
}
