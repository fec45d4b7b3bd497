//! Labelled observations as rows of numbers, sorted so that the same table gives the same fit.

use std::collections::{BTreeMap, BTreeSet};

use crate::normalize::Method;
use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::feature::{Feature, FeatureTable};

/// Rows a classifier is trained on or tested with.
#[derive(Debug, Clone, PartialEq)]
pub struct Samples {
    /// The columns.
    pub features: Vec<Feature>,
    /// The vowels, sorted; classes are places in this list.
    pub vowels: Vec<Vowel>,
    /// The speakers, sorted.
    pub speakers: Vec<String>,
    /// One row per observation that has every column.
    pub rows: Vec<Vec<f64>>,
    /// Class of each row.
    pub class: Vec<usize>,
    /// Speaker of each row, as a place in `speakers`.
    pub speaker: Vec<usize>,
    /// Labelled observations that lack a column, by the reason.
    pub left_out: BTreeMap<String, usize>,
    /// Labelled observations of each speaker that lack a column, by class.
    pub incomplete: Vec<(usize, usize)>,
}

impl Samples {
    /// Gathers the labelled observations of one or several tables. The normalization is fitted to
    /// each table by itself, and speakers of different tables are kept apart by the table's place,
    /// so that two tables may name their speakers alike.
    pub fn gather(features: &[Feature], method: &Method, tables: &[&[Observation]]) -> Self {
        let name = |table: usize, speaker: &str| {
            if tables.len() == 1 {
                speaker.to_owned()
            } else {
                format!("{} {speaker}", table + 1)
            }
        };
        let labelled = || {
            tables.iter().enumerate().flat_map(|(table, observations)| {
                observations
                    .iter()
                    .filter_map(move |o| Some((table, o, o.vowel.as_ref()?)))
            })
        };
        let vowels: BTreeSet<&Vowel> = labelled().map(|(.., vowel)| vowel).collect();
        let vowels: Vec<Vowel> = vowels.into_iter().cloned().collect();
        let speakers: BTreeSet<String> = labelled()
            .map(|(table, o, _)| name(table, &o.speaker))
            .collect();
        let speakers: Vec<String> = speakers.into_iter().collect();
        let fitted: Vec<FeatureTable> = tables
            .iter()
            .map(|observations| FeatureTable::fit(features, method, observations))
            .collect();
        let mut samples = Self {
            features: features.to_vec(),
            rows: Vec::new(),
            class: Vec::new(),
            speaker: Vec::new(),
            left_out: BTreeMap::new(),
            incomplete: Vec::new(),
            vowels,
            speakers,
        };
        for (table, observation, vowel) in labelled() {
            // Both lists hold every labelled vowel and speaker.
            let class = samples.vowels.binary_search(vowel).unwrap_or_default();
            let speaker = samples
                .speakers
                .binary_search(&name(table, &observation.speaker))
                .unwrap_or_default();
            match fitted[table].row(observation) {
                Ok(row) => {
                    samples.rows.push(row);
                    samples.class.push(class);
                    samples.speaker.push(speaker);
                }
                Err(reason) => {
                    *samples.left_out.entry(reason.to_string()).or_insert(0) += 1;
                    samples.incomplete.push((speaker, class));
                }
            }
        }
        samples
    }

    /// The rows of some speakers only; lists of vowels and speakers stay as they are.
    pub fn only(&self, keep: impl Fn(usize) -> bool) -> Self {
        let kept: Vec<usize> = (0..self.rows.len())
            .filter(|row| keep(self.speaker[*row]))
            .collect();
        Self {
            features: self.features.clone(),
            vowels: self.vowels.clone(),
            speakers: self.speakers.clone(),
            rows: kept.iter().map(|row| self.rows[*row].clone()).collect(),
            class: kept.iter().map(|row| self.class[*row]).collect(),
            speaker: kept.iter().map(|row| self.speaker[*row]).collect(),
            left_out: BTreeMap::new(),
            incomplete: Vec::new(),
        }
    }
}
