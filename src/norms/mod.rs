//! Published vowel tables: what the vowels of a group of speakers were found to be.
//!
//! Nothing here ever touches a measurement. A table is for holding speakers against, after their
//! size has been taken out.

mod own;
mod parse;
mod shipped;

use std::collections::BTreeSet;

use crate::tokens::Observation;
use crate::vowel::Vowel;

pub use own::Origin;
pub use parse::NormsError;
pub use shipped::{NAMES, shipped};

/// A table of vowel means, with where it comes from.
#[derive(Debug, Clone, PartialEq)]
pub struct ReferenceTable {
    /// Its name here.
    pub name: String,
    /// Author, year, journal, pages.
    pub source: String,
    /// What was measured and how.
    pub table: String,
    /// The accent or vowel system.
    pub accent: String,
    /// Who spoke.
    pub speakers: String,
    /// What the standard deviations are over, or that there are none.
    pub spread: String,
    /// How the digits were checked.
    pub confirmed: String,
    /// The means.
    pub rows: Vec<ReferenceRow>,
}

/// The mean of one vowel in one group.
#[derive(Debug, Clone, PartialEq)]
pub struct ReferenceRow {
    /// The group of speakers.
    pub group: String,
    /// The vowel.
    pub vowel: Vowel,
    /// A word it stood in, or its keyword.
    pub word: Option<String>,
    /// The moment as a proportion of the vowel's duration; `None` for the steady state.
    pub proportion: Option<f64>,
    /// Number of tokens behind the mean, where published.
    pub tokens: Option<u32>,
    /// Mean duration in seconds.
    pub duration_s: Option<f64>,
    /// Mean fundamental frequency in hertz.
    pub f0_hz: Option<f64>,
    /// Mean F1 to F3 in hertz.
    pub formant_hz: [Option<f64>; 3],
    /// Standard deviation of F0 in hertz.
    pub f0_sd_hz: Option<f64>,
    /// Standard deviations of F1 to F3 in hertz.
    pub sd_hz: [Option<f64>; 3],
}

impl ReferenceTable {
    /// The groups, in the order of the table.
    pub fn groups(&self) -> Vec<&str> {
        let mut seen = BTreeSet::new();
        self.rows
            .iter()
            .map(|row| row.group.as_str())
            .filter(|group| seen.insert(*group))
            .collect()
    }

    /// The vowels, in the order of the table.
    pub fn vowels(&self) -> Vec<&Vowel> {
        let mut seen = BTreeSet::new();
        self.rows
            .iter()
            .map(|row| &row.vowel)
            .filter(|vowel| seen.insert(*vowel))
            .collect()
    }

    /// The means as observations, each group as one speaker: for normalizing a group like a person.
    ///
    /// The single value is the steady state's, or where the table follows the vowel, that of the
    /// moment nearest its middle; the track has all moments. The standard deviations are those of
    /// people, not errors of measurement, and are left out.
    pub fn observations(&self) -> Vec<Observation> {
        let mut observations: Vec<Observation> = Vec::new();
        let mut distance = Vec::new();
        for row in &self.rows {
            let token = format!("{} {}", row.group, row.vowel);
            let from_middle = row.proportion.map_or(0.0, |p| (p - 0.5).abs());
            let known = observations.iter().position(|o| o.token == token);
            let index = known.unwrap_or_else(|| {
                distance.push(f64::INFINITY);
                observations.push(Observation {
                    token,
                    speaker: row.group.clone(),
                    vowel: Some(row.vowel.clone()),
                    duration_s: row.duration_s,
                    f0_hz: row.f0_hz,
                    formant_hz: row.formant_hz,
                    sd_hz: [None; 3],
                    track: Vec::new(),
                });
                observations.len() - 1
            });
            if from_middle < distance[index] {
                distance[index] = from_middle;
                observations[index].formant_hz = row.formant_hz;
            }
            if let Some(proportion) = row.proportion {
                observations[index].track.push((proportion, row.formant_hz));
            }
        }
        observations
    }
}
