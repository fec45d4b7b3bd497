//! A survey's speakers as a norm of one's own.

use std::collections::BTreeMap;

use crate::normalize::{Method, Normalization, SpeakerScale, Values};
use crate::tokens::Observation;
use crate::vowel::Vowel;

use super::{ReferenceRow, ReferenceTable};

/// What a table made from a survey says of itself.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Origin {
    /// Its name.
    pub name: String,
    /// Who measured it, when, where.
    pub source: String,
    /// The accent or vowel system.
    pub accent: String,
}

impl ReferenceTable {
    /// The table of a group of speakers: the mean of each vowel over speakers' means, and the
    /// standard deviation between speakers, after the speakers' sizes have been taken out by the
    /// regression log-mean and put back as that of the middle speaker.
    ///
    /// `None` where no speaker shares a labelled vowel with another, or there is no speaker.
    ///
    /// *Source*: Barreda & Nearey 2018, JASA 144, 500-520, for the sizes.
    pub fn of_speakers(origin: Origin, group: &str, observations: &[Observation]) -> Option<Self> {
        let normalization = Normalization::fit(&Method::RegressionLogMean, observations);
        let scales: Vec<&SpeakerScale> = normalization
            .scales
            .values()
            .filter_map(|s| s.as_ref().ok())
            .collect();
        let middle = SpeakerScale::middle(scales.iter().copied())?;
        let mut cells: BTreeMap<(&Vowel, &str), Cell> = BTreeMap::new();
        for o in observations {
            let (Some(vowel), Some(Ok(scale))) = (&o.vowel, normalization.scales.get(&o.speaker))
            else {
                continue;
            };
            let normalized = scale.apply(&Values::of(o));
            let cell = cells.entry((vowel, &o.speaker)).or_default();
            for k in 0..3 {
                cell.add(k, normalized[k].and_then(|v| middle.invert_formant(k, v)));
            }
            cell.add(3, o.f0_hz);
            cell.add(4, o.duration_s);
            cell.tokens += 1;
        }
        let mut vowels: Vec<&Vowel> = cells.keys().map(|(vowel, _)| *vowel).collect();
        vowels.dedup();
        let rows: Vec<ReferenceRow> = vowels
            .into_iter()
            .filter_map(|vowel| {
                let own: Vec<&Cell> = cells
                    .iter()
                    .filter(|((v, _), _)| *v == vowel)
                    .map(|(_, c)| c)
                    .collect();
                row(group, vowel, &own)
            })
            .collect();
        let speakers = scales.len();
        (!rows.is_empty()).then(|| Self {
            name: origin.name,
            source: origin.source,
            table: "means over speakers' means, made by isophone from a survey; hertz at the size \
                    of the middle speaker"
                .to_owned(),
            accent: origin.accent,
            speakers: format!("{speakers} speakers"),
            spread: "between speakers, their sizes taken out".to_owned(),
            confirmed: "made by isophone from its own tables".to_owned(),
            rows,
        })
    }
}

/// Sums over the tokens of one speaker's vowel: F1 to F3, F0, duration.
#[derive(Debug, Default)]
struct Cell {
    sums: [(f64, u32); 5],
    tokens: u32,
}

impl Cell {
    fn add(&mut self, place: usize, value: Option<f64>) {
        if let Some(value) = value {
            self.sums[place].0 += value;
            self.sums[place].1 += 1;
        }
    }

    fn mean(&self, place: usize) -> Option<f64> {
        let (sum, n) = self.sums[place];
        (n > 0).then(|| sum / f64::from(n))
    }
}

fn row(group: &str, vowel: &Vowel, cells: &[&Cell]) -> Option<ReferenceRow> {
    let over_speakers = |place: usize| -> (Option<f64>, Option<f64>) {
        let known: Vec<f64> = cells.iter().filter_map(|c| c.mean(place)).collect();
        let n = known.len() as f64;
        let mean = (!known.is_empty()).then(|| known.iter().sum::<f64>() / n);
        let deviation = mean
            .filter(|_| known.len() >= 3)
            .map(|m| (known.iter().map(|v| (v - m).powi(2)).sum::<f64>() / (n - 1.0)).sqrt());
        (mean.map(tenth), deviation.map(tenth))
    };
    let formants = [0, 1, 2].map(over_speakers);
    // A norm needs at least a place in the plane.
    formants[0].0.and(formants[1].0)?;
    let (f0_hz, f0_sd_hz) = over_speakers(3);
    Some(ReferenceRow {
        group: group.to_owned(),
        vowel: vowel.clone(),
        word: None,
        proportion: None,
        tokens: Some(cells.iter().map(|c| c.tokens).sum()),
        duration_s: {
            let known: Vec<f64> = cells.iter().filter_map(|c| c.mean(4)).collect();
            let mean = known.iter().sum::<f64>() / known.len() as f64;
            (!known.is_empty()).then(|| (mean * 1e4).round() / 1e4)
        },
        f0_hz,
        formant_hz: formants.map(|f| f.0),
        f0_sd_hz,
        sd_hz: formants.map(|f| f.1),
    })
}

/// Rounded to a tenth of a hertz, as tables are written.
fn tenth(value: f64) -> f64 {
    (value * 10.0).round() / 10.0
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sizes_do_not_become_spread() {
        let mut all = Vec::new();
        for (speaker, size, own) in [("a", 1.0, 1.02), ("b", 1.2, 1.0), ("c", 0.9, 0.98)] {
            for (vowel, f1, f2) in [
                ("i", 300.0, 2_300.0),
                ("a", 750.0, 1_300.0),
                ("u", 330.0, 800.0),
            ] {
                // One vowel differs between speakers beyond their size.
                let own = if vowel == "a" { own } else { 1.0 };
                all.push(Observation {
                    token: format!("{speaker}{vowel}"),
                    speaker: speaker.to_owned(),
                    vowel: Some(Vowel::from_ipa(vowel)),
                    duration_s: Some(0.1),
                    f0_hz: Some(150.0),
                    formant_hz: [Some(size * f1 * own), Some(size * f2), None],
                    sd_hz: [None; 3],
                    track: Vec::new(),
                });
            }
        }
        let origin = Origin {
            name: "x".to_owned(),
            source: "y".to_owned(),
            accent: "z".to_owned(),
        };
        let table = ReferenceTable::of_speakers(origin, "all", &all).unwrap();
        let of = |vowel: &str| {
            table
                .rows
                .iter()
                .find(|r| r.vowel == Vowel::from_ipa(vowel))
                .unwrap()
        };
        // The middle size is the cube root of 1.0 · 1.2 · 0.9.
        let middle = 1.08f64.cbrt();
        assert!((of("u").formant_hz[1].unwrap() - 800.0 * middle).abs() < 3.0);
        let relative = |vowel: &str| of(vowel).sd_hz[0].unwrap() / of(vowel).formant_hz[0].unwrap();
        // A sixth of the 2 % difference goes into the speakers' sizes (six values each).
        assert!(
            (relative("a") - 0.02 * 5.0 / 6.0).abs() < 0.002,
            "{}",
            relative("a")
        );
        assert!(relative("i") < 0.005);
    }
}
