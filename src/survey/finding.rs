//! What was left out of a run, or should be known of it.

use std::collections::BTreeMap;
use std::fmt;

/// What kind of thing was found.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum FindingKind {
    /// A line of the labels could not be used.
    LabelLine,
    /// A label its notation does not know.
    UnknownLabel,
    /// A labelled span ends after its recording.
    SpanPastEnd,
    /// A recording the labels name is not there.
    RecordingMissing,
    /// A recording could not be read.
    RecordingUnreadable,
    /// A recording lacks the channel the labels name.
    ChannelMissing,
    /// A recording ends before its header says.
    RecordingCutShort,
    /// A recording has no label.
    RecordingUnlabelled,
    /// There is no file of speakers.
    NoSpeakerTable,
    /// A speaker of the labels is not in the file of speakers.
    SpeakerInNoTable,
    /// A speaker stands more than once in the file of speakers.
    SpeakerRepeated,
    /// A column of the file of speakers has a name of the token table's.
    SpeakerColumnClash,
    /// A speaker could not be normalized.
    SpeakerNotNormalized,
    /// A speaker lacks vowels that others have, and the normalization needs the whole set.
    SpeakerLacksVowels,
    /// Tokens could not be identified.
    NotIdentified,
    /// Labels name a vowel that no model knows.
    VowelInNoModel,
}

/// Whether a finding means that something was not done.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Weight {
    /// Something was left out.
    LeftOut,
    /// Good to know; everything was done.
    Notice,
}

impl FindingKind {
    /// Its name in `run.json`.
    pub fn name(self) -> &'static str {
        match self {
            Self::LabelLine => "label line left out",
            Self::UnknownLabel => "label not known",
            Self::SpanPastEnd => "label past the end of its recording",
            Self::RecordingMissing => "recording missing",
            Self::RecordingUnreadable => "recording not readable",
            Self::ChannelMissing => "channel missing",
            Self::RecordingCutShort => "recording cut short",
            Self::RecordingUnlabelled => "recording without labels",
            Self::NoSpeakerTable => "no table of speakers",
            Self::SpeakerInNoTable => "speaker in no table",
            Self::SpeakerRepeated => "speaker repeated",
            Self::SpeakerColumnClash => "speaker column left out",
            Self::SpeakerNotNormalized => "speaker not normalized",
            Self::SpeakerLacksVowels => "speaker without the whole vowel set",
            Self::NotIdentified => "not identified",
            Self::VowelInNoModel => "vowel in no model",
        }
    }

    /// Whether something was left out.
    pub fn weight(self) -> Weight {
        match self {
            Self::RecordingCutShort
            | Self::RecordingUnlabelled
            | Self::NoSpeakerTable
            | Self::SpeakerLacksVowels
            | Self::NotIdentified
            | Self::VowelInNoModel => Weight::Notice,
            _ => Weight::LeftOut,
        }
    }
}

/// One thing found, in words for a person.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub struct Finding {
    /// What kind it is.
    pub kind: FindingKind,
    /// The file it is about, from the survey's folder, and the line where there is one.
    pub place: String,
    /// What was found, and what expected.
    pub text: String,
    /// What can be done about it.
    pub hint: String,
}

impl Finding {
    /// A finding in a file.
    pub(super) fn new(
        kind: FindingKind,
        place: impl Into<String>,
        text: impl fmt::Display,
        hint: impl Into<String>,
    ) -> Self {
        Self {
            kind,
            place: place.into(),
            text: text.to_string(),
            hint: hint.into(),
        }
    }
}

impl fmt::Display for Finding {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "`{}`: {}", self.place, self.text)
    }
}

/// How many findings of each kind there are.
pub fn count_findings(findings: &[Finding]) -> BTreeMap<FindingKind, usize> {
    let mut counts = BTreeMap::new();
    for finding in findings {
        *counts.entry(finding.kind).or_insert(0) += 1;
    }
    counts
}
