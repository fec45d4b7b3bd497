//! What can be wrong with label text.

use thiserror::Error;

/// Why label text could not be read at all.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
pub enum LabelError {
    /// Nothing in it.
    #[error("the label file is empty; expected a header line with `{expected}`")]
    Empty {
        /// The columns that were looked for.
        expected: String,
    },
    /// A column is not there.
    #[error("line 1: no column `{column}`; found `{found}`")]
    MissingColumn {
        /// The column that was looked for.
        column: String,
        /// The header as it stands.
        found: String,
    },
    /// The header is not text.
    #[error("line 1: bytes that are not UTF-8 text")]
    NotUtf8,
}

impl LabelError {
    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self {
            Self::Empty { .. } => "is this the right file, and is it complete?",
            Self::MissingColumn { .. } => {
                "rename the column in the file, or name it in `survey.toml` under \
                 `[labels.columns]`"
            }
            Self::NotUtf8 => "save the labels again as UTF-8",
        }
    }
}

/// What is wrong with one line of labels; the line is left out.
#[derive(Debug, Clone, PartialEq, Error)]
pub enum LabelProblem {
    /// Another number of cells than the header has.
    #[error("found {found} cells; expected {expected}, as in the header")]
    Ragged {
        /// Cells in the line.
        found: usize,
        /// Cells in the header.
        expected: usize,
    },
    /// Bytes that are no text.
    #[error("bytes that are not UTF-8 text")]
    NotUtf8,
    /// No recording named.
    #[error("no recording named; expected a file name")]
    NoRecording,
    /// No speaker named, although labels name speakers.
    #[error("no speaker named; expected one")]
    NoSpeaker,
    /// A time that is no number.
    #[error("`{column}` is `{found}`; expected seconds, as in `1.25`")]
    NotANumber {
        /// Its column.
        column: String,
        /// The cell.
        found: String,
    },
    /// A time with a comma for its decimal point.
    #[error("`{column}` is `{found}`; expected a decimal point, not a comma")]
    DecimalComma {
        /// Its column.
        column: String,
        /// The cell.
        found: String,
    },
    /// A time before the recording begins.
    #[error("`{column}` is {found_s}; expected 0 or later")]
    Negative {
        /// Its column.
        column: String,
        /// The time in seconds.
        found_s: f64,
    },
    /// A span that ends before it begins.
    #[error("the span ends at {end_s} s before it begins at {start_s} s")]
    Reversed {
        /// Start in seconds.
        start_s: f64,
        /// End in seconds.
        end_s: f64,
    },
    /// A span of no length.
    #[error("the span begins and ends at {at_s} s; expected a length above 0")]
    NoLength {
        /// The moment in seconds.
        at_s: f64,
    },
    /// A channel that is no channel.
    #[error("`{column}` is `{found}`; expected a channel number, from 1")]
    NoChannel {
        /// Its column.
        column: String,
        /// The cell.
        found: String,
    },
    /// The same recording, channel and span as an earlier line.
    #[error("the same recording and span as in line {first}")]
    Duplicate {
        /// The earlier line.
        first: u64,
    },
    /// A span that lies, at least in part, after the end of its recording.
    #[error("the span ends at {end_s} s; the recording ends at {duration_s:.3} s")]
    PastEnd {
        /// End of the span in seconds.
        end_s: f64,
        /// Duration of the recording in seconds.
        duration_s: f64,
    },
}

impl LabelProblem {
    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self {
            Self::Ragged { .. } => "look for a delimiter or a quotation mark too many",
            Self::NotUtf8 => "save the labels again as UTF-8",
            Self::NoRecording | Self::NoSpeaker => "fill the cell, or remove the line",
            Self::NotANumber { .. } | Self::Negative { .. } => {
                "give seconds from the start of the recording"
            }
            Self::DecimalComma { .. } => "write `0.25` for `0,25`",
            Self::Reversed { .. } => "exchange start and end",
            Self::NoLength { .. } => "give the vowel its start and its end, or remove the line",
            Self::NoChannel { .. } => "the first channel is 1",
            Self::Duplicate { .. } => "remove one of the two",
            Self::PastEnd { .. } => {
                "do these labels belong to this recording, and is the recording complete?"
            }
        }
    }
}

/// A problem with its line.
#[derive(Debug, Clone, PartialEq, Error)]
#[error("line {line}: {problem}")]
pub struct LineProblem {
    /// Line in the label file, from 1.
    pub line: u64,
    /// What is wrong there.
    pub problem: LabelProblem,
}
