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
    /// One row per labelled observation whose speaker could be normalized; NaN stands where a value
    /// is missing.
    pub rows: Vec<Vec<f64>>,
    /// Squared standard errors of the rows' values; 0 where nothing is known of them.
    pub variance: Vec<Vec<f64>>,
    /// Class of each row.
    pub class: Vec<usize>,
    /// Speaker of each row, as a place in `speakers`.
    pub speaker: Vec<usize>,
    /// Labelled observations whose speaker could not be normalized, as (speaker, class).
    pub incomplete: Vec<(usize, usize)>,
    /// Why rows are incomplete or missing, with their number.
    pub lacking: BTreeMap<String, usize>,
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
            variance: Vec::new(),
            class: Vec::new(),
            speaker: Vec::new(),
            lacking: BTreeMap::new(),
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
                    if let Some(missing) = fitted[table].missing(&row) {
                        let reason = format!("no value for {missing}");
                        *samples.lacking.entry(reason).or_insert(0) += 1;
                    }
                    samples.rows.push(row);
                    samples.variance.push(fitted[table].variance(observation));
                    samples.class.push(class);
                    samples.speaker.push(speaker);
                }
                Err(lack) => {
                    let reason = format!("the speaker has {lack}");
                    *samples.lacking.entry(reason).or_insert(0) += 1;
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
        self.subset(&kept)
    }

    /// Some rows only, in the order given; lists of vowels and speakers stay as they are.
    pub fn subset(&self, kept: &[usize]) -> Self {
        Self {
            features: self.features.clone(),
            vowels: self.vowels.clone(),
            speakers: self.speakers.clone(),
            rows: kept.iter().map(|row| self.rows[*row].clone()).collect(),
            variance: kept.iter().map(|row| self.variance[*row].clone()).collect(),
            class: kept.iter().map(|row| self.class[*row]).collect(),
            speaker: kept.iter().map(|row| self.speaker[*row]).collect(),
            lacking: BTreeMap::new(),
            incomplete: Vec::new(),
        }
    }

    /// The rows that have a value in every column.
    pub fn complete(&self) -> Self {
        let kept: Vec<usize> = (0..self.rows.len())
            .filter(|row| self.rows[*row].iter().all(|v| v.is_finite()))
            .collect();
        self.subset(&kept)
    }

    /// The rows of each speaker who has any, in the order of the speakers.
    pub fn by_speaker(&self) -> Vec<(usize, Vec<usize>)> {
        let mut rows: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
        for (row, speaker) in self.speaker.iter().enumerate() {
            rows.entry(*speaker).or_default().push(row);
        }
        rows.into_iter().collect()
    }
}
