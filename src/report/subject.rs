//! What a page is about: a survey's tables and what was found in them.

use std::collections::BTreeMap;

use super::picture::Picture;
use crate::compare::{Belonging, Fate, Findings, Resampling};
use crate::normalize::{Method, advise};
use crate::tables::{TokenRow, TokenTable, TrackTable};
use crate::tokens::Observation;

/// A survey and its findings.
#[derive(Debug, Clone)]
pub struct Subject {
    /// The rows.
    pub table: TokenTable,
    /// The speaker column the speakers are grouped by.
    pub group_column: Option<String>,
    /// What was found.
    pub findings: Findings,
    /// Pictures of tokens, by their names.
    pub pictures: BTreeMap<String, Picture>,
}

impl Subject {
    /// Gathers what a page needs from the tables of a run; see [`Self::of`].
    pub fn gather(
        table: TokenTable,
        tracks: &TrackTable,
        by: Option<&str>,
        resampling: Resampling,
    ) -> Self {
        let tracks = tracks.by_token();
        let observations: Vec<Observation> = table
            .rows
            .iter()
            .filter_map(|row| {
                let track = tracks.get(row.token.as_str());
                row.observation(track.into_iter().flatten().map(|t| t.point()).collect())
            })
            .collect();
        Self::of(table, &observations, by, resampling)
    }

    /// Works out what a page shows of a table and the observations of its measured rows.
    ///
    /// Speakers are grouped by the speaker column `by`; a column that is not there groups nobody.
    /// The normalization is the one the table names; a table that names none is normalized by the
    /// method that fits it.
    pub fn of(
        table: TokenTable,
        observations: &[Observation],
        by: Option<&str>,
        resampling: Resampling,
    ) -> Self {
        let fates: Vec<Fate> = table.rows.iter().map(fate).collect();
        let column = by.and_then(|by| table.speaker_columns.iter().position(|c| c == by));
        let mut belonging = Belonging::default();
        if let Some(column) = column {
            for row in &table.rows {
                if let Some(value) = row.given.get(column).filter(|v| !v.is_empty()) {
                    belonging.group.insert(row.speaker.clone(), value.clone());
                }
            }
        }
        let method = named_method(&table).unwrap_or_else(|| advise(observations).method);
        let findings = Findings::of(&fates, observations, &method, &belonging, resampling);
        Self {
            group_column: column.map(|c| table.speaker_columns[c].clone()),
            table,
            findings,
            pictures: BTreeMap::new(),
        }
    }

    /// The first value of a speaker column for every speaker.
    pub(super) fn given(&self) -> BTreeMap<&str, &[String]> {
        let mut given = BTreeMap::new();
        for row in &self.table.rows {
            given
                .entry(row.speaker.as_str())
                .or_insert(row.given.as_slice());
        }
        given
    }
}

fn named_method(table: &TokenTable) -> Option<Method> {
    let mut named = table
        .rows
        .iter()
        .filter_map(|r| r.normalized.as_ref())
        .map(|n| &n.method);
    named.find(|m| !m.is_empty())?.parse().ok()
}

fn fate(row: &TokenRow) -> Fate {
    let identified = row.identified.as_ref();
    Fate {
        speaker: row.speaker.clone(),
        vowel: row.vowel.clone(),
        reading: match &row.reading {
            Ok(reading) => Ok(reading.doubts.clone()),
            Err(reason) => Err(reason.clone()),
        },
        sd_hz: row.reading.as_ref().map_or([None; 3], |r| r.sd_hz),
        identified: identified
            .and_then(|i| Some((i.identified.clone()?, i.probability.unwrap_or(0.0)))),
    }
}
