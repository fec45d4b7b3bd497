//! Groups of speakers against each other, vowel by vowel.

use rayon::prelude::*;

use super::chart::spaces;
use super::difference::{Difference, PlaceTest, differences, place_test};
use super::holm::holm;
use super::panel::{MEASURES, Measure, Panel};

use super::resample::Resampling;
use super::sample::Side;

/// A p of a permutation test that cannot go below this says nothing about a single vowel.
pub const SIGNIFICANCE: f64 = 0.05;

/// Two sides compared: the second less the first.
#[derive(Debug, Clone, PartialEq)]
pub struct Contrast {
    /// What the sides are called.
    pub names: [String; 2],
    /// Speakers of each side.
    pub speakers: [usize; 2],
    /// One row for every vowel that both sides have.
    pub vowels: Vec<VowelContrast>,
    /// Difference in the area of the vowel space over the vowels all speakers have, in square
    /// hertz at the reference size.
    pub space_hz2: Option<Difference>,
}

/// Two sides compared in one vowel.
#[derive(Debug, Clone, PartialEq)]
pub struct VowelContrast {
    /// Place of the vowel in the panel.
    pub vowel: usize,
    /// Whether the sides stand at the same place of the normalized plane.
    pub place: Option<PlaceTest>,
    /// Its p, corrected over the vowels of the contrast (Holm).
    pub place_p_holm: Option<f64>,
    /// Distance of the two sides' means in hertz at the reference size.
    pub distance_hz: Option<f64>,
    /// The differences, in the order of [`Measure::ALL`].
    pub measures: [Option<Difference>; MEASURES],
    /// Their p, each measure corrected over the vowels (Holm).
    pub measures_p_holm: [Option<f64>; MEASURES],
}

impl VowelContrast {
    /// A difference by its measure.
    pub fn measure(&self, measure: Measure) -> Option<&Difference> {
        self.measures[measure.index()].as_ref()
    }

    /// What can be said of the place of the vowel.
    pub fn verdict(&self) -> PlaceVerdict {
        match (&self.place, self.place_p_holm) {
            (Some(test), _) if test.test.smallest_p > SIGNIFICANCE => PlaceVerdict::TooFew,
            (Some(_), Some(p)) if p <= SIGNIFICANCE => PlaceVerdict::Different,
            (Some(_), Some(_)) => PlaceVerdict::NoEvidence,
            _ => PlaceVerdict::TooFew,
        }
    }
}

/// What can be said about one vowel of two groups.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum PlaceVerdict {
    /// The groups say it differently.
    Different,
    /// Nothing that chance would not do.
    NoEvidence,
    /// No arrangement of so few speakers could be called unusual.
    TooFew,
}

impl PlaceVerdict {
    /// In words.
    pub fn text(self) -> &'static str {
        match self {
            Self::Different => "different",
            Self::NoEvidence => "no evidence of a difference",
            Self::TooFew => "too few speakers to tell",
        }
    }
}

/// Compares the groups of a panel: two groups with each other, more than two each with all the
/// other speakers that have a group.
pub fn contrasts(panel: &Panel, resampling: &Resampling) -> Vec<Contrast> {
    let members = |g: usize| panel.members(Some(g));
    match panel.groups.len() {
        0 | 1 => Vec::new(),
        2 => vec![contrast(
            panel,
            [panel.groups[0].clone(), panel.groups[1].clone()],
            [&members(0), &members(1)],
            0,
            resampling,
        )],
        count => (0..count)
            .map(|g| {
                let others: Vec<usize> = (0..count).filter(|k| *k != g).flat_map(members).collect();
                let names = ["all others".to_owned(), panel.groups[g].clone()];
                contrast(panel, names, [&others, &members(g)], g, resampling)
            })
            .collect(),
    }
}

/// Compares two sets of speakers; `number` tells contrasts of one survey apart, so that each has
/// its own random numbers.
pub fn contrast(
    panel: &Panel,
    names: [String; 2],
    sides: [&[usize]; 2],
    number: usize,
    resampling: &Resampling,
) -> Contrast {
    let placed: Vec<usize> = sides.concat();
    let seats: Vec<Side> = placed
        .iter()
        .enumerate()
        .map(|(n, s)| Side {
            group: usize::from(n >= sides[0].len()),
            stratum: panel.speakers[*s].stratum,
        })
        .collect();
    let means = Measure::ALL.map(|m| panel.means(m));
    let mut vowels: Vec<VowelContrast> = (0..panel.vowels.len())
        .into_par_iter()
        .filter_map(|vowel| {
            let values: Vec<Vec<Option<f64>>> = means
                .iter()
                .map(|m| placed.iter().map(|s| m[vowel][*s]).collect())
                .collect();
            let piece = ((number * (panel.vowels.len() + 1) + vowel) * 2) as u64;
            vowel_contrast(vowel, &seats, &values, piece, resampling)
        })
        .collect();
    correct(&mut vowels);
    let areas = spaces(panel);
    let areas = placed
        .iter()
        .map(|s| areas.get(*s)?.shared_hull_hz2)
        .collect();
    let last = ((number * (panel.vowels.len() + 1) + panel.vowels.len()) * 2) as u64;
    let space = differences(&seats, &[areas], resampling, &mut resampling.stream(last))
        .pop()
        .flatten();
    Contrast {
        names,
        speakers: sides.map(<[usize]>::len),
        vowels,
        space_hz2: space,
    }
}

fn vowel_contrast(
    vowel: usize,
    seats: &[Side],
    values: &[Vec<Option<f64>>],
    piece: u64,
    resampling: &Resampling,
) -> Option<VowelContrast> {
    let found = differences(seats, values, resampling, &mut resampling.stream(piece));
    let measures: [Option<Difference>; MEASURES] = found.try_into().ok()?;
    if measures.iter().all(Option::is_none) {
        return None;
    }
    let (f1, f2) = (&values[Measure::F1.index()], &values[Measure::F2.index()]);
    let places: Vec<Option<[f64; 2]>> = f1
        .iter()
        .zip(f2)
        .map(|(a, b)| Some([(*a)?, (*b)?]))
        .collect();
    let place = place_test(
        seats,
        &places,
        resampling,
        &mut resampling.stream(piece + 1),
    );
    let gap = |m: Measure| measures[m.index()].as_ref().map(|d| d.value);
    let distance_hz = match (gap(Measure::F1AtReference), gap(Measure::F2AtReference)) {
        (Some(f1), Some(f2)) => Some(f1.hypot(f2)),
        _ => None,
    };
    Some(VowelContrast {
        vowel,
        place,
        place_p_holm: None,
        distance_hz,
        measures,
        measures_p_holm: [None; MEASURES],
    })
}

fn correct(vowels: &mut [VowelContrast]) {
    let mut apply = |read: &dyn Fn(&VowelContrast) -> Option<f64>,
                     write: &dyn Fn(&mut VowelContrast, f64)| {
        let known: Vec<(usize, f64)> = vowels
            .iter()
            .enumerate()
            .filter_map(|(n, v)| Some((n, read(v)?)))
            .collect();
        let p: Vec<f64> = known.iter().map(|(_, p)| *p).collect();
        for ((n, _), corrected) in known.iter().zip(holm(&p)) {
            write(&mut vowels[*n], corrected);
        }
    };
    apply(&|v| Some(v.place.as_ref()?.test.p), &|v, p| {
        v.place_p_holm = Some(p)
    });
    for m in Measure::ALL {
        apply(&|v| Some(v.measure(m)?.test.p), &|v, p| {
            v.measures_p_holm[m.index()] = Some(p)
        });
    }
}
