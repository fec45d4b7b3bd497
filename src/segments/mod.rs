//! Label text to the spans of vowels to be measured.
//!
//! [`parse_delimited`] reads label text to [`LabelRow`]s, each with the line it stands in; what is
//! wrong with a line is a [`LabelProblem`] and never stops the rest. [`name_tokens`] gives every
//! vowel its name within the survey.

mod delimited;
mod lines;
mod problem;

pub use delimited::{LabelColumns, LabelRow, Labels, parse_delimited};
pub use lines::{LineCounter, guess_delimiter};
pub use problem::{LabelError, LabelProblem, LineProblem};

use std::collections::BTreeMap;

use crate::vowel::Vowel;

/// One labelled vowel in one recording.
#[derive(Debug, Clone, PartialEq)]
pub struct VowelSpan {
    /// Unique name of the token within its survey, from recording and order.
    pub token: String,
    /// File name of the recording, as the labels give it.
    pub recording: String,
    /// Channel of the recording, from 1.
    pub channel: u16,
    /// Who speaks.
    pub speaker: String,
    /// The word it stands in, where given.
    pub word: Option<String>,
    /// The label as written.
    pub label: String,
    /// The vowel the label names; `None` where the survey hides or lacks vowel labels.
    pub vowel: Option<Vowel>,
    /// Start in seconds from the beginning of the recording.
    pub start_s: f64,
    /// End in seconds.
    pub end_s: f64,
}

impl VowelSpan {
    /// Duration in seconds.
    pub fn duration_s(&self) -> f64 {
        self.end_s - self.start_s
    }
}

/// Names for the vowels of a survey, in the order of `rows`: the recording, `#`, and the vowel's
/// place in its recording by time, from 1, with at least three digits.
///
/// The order of the lines in the label file does not matter, so a file sorted anew gives the same
/// names. Equal names are impossible: the place is counted per recording.
pub fn name_tokens<'a>(rows: impl IntoIterator<Item = &'a LabelRow>) -> Vec<String> {
    let rows: Vec<&LabelRow> = rows.into_iter().collect();
    let mut by_recording: BTreeMap<&str, Vec<usize>> = BTreeMap::new();
    for (at, row) in rows.iter().enumerate() {
        by_recording.entry(&row.recording).or_default().push(at);
    }
    let mut names = vec![String::new(); rows.len()];
    for (recording, mut places) in by_recording {
        places.sort_by(|&a, &b| {
            let (a, b) = (rows[a], rows[b]);
            a.start_s
                .total_cmp(&b.start_s)
                .then(a.end_s.total_cmp(&b.end_s))
                .then(a.channel.cmp(&b.channel))
                .then(a.line.cmp(&b.line))
        });
        for (nth, at) in places.into_iter().enumerate() {
            names[at] = format!("{recording}#{:03}", nth + 1);
        }
    }
    names
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_follow_time_and_not_the_order_of_lines() {
        let text = "recording,start_s,end_s,label\n\
                    b.wav,0.5,0.6,i\na.wav,0.9,1.0,u\na.wav,0.1,0.2,i\n";
        let labels = parse_delimited(text.as_bytes(), &LabelColumns::default()).expect("labels");
        assert_eq!(
            name_tokens(&labels.rows),
            ["b.wav#001", "a.wav#002", "a.wav#001"]
        );
    }
}
