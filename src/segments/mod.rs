//! Label text to the spans of vowels to be measured.

use crate::vowel::Vowel;

/// One labelled vowel in one recording.
#[derive(Debug, Clone, PartialEq)]
pub struct VowelSpan {
    /// Unique name of the token within its survey, from recording, channel and order.
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
