//! What can be wrong with a table, and what to do about it.

use thiserror::Error;

/// Why a table could not be read. Lines count from 1, the header's.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
pub enum TableError {
    /// The text ends before a header.
    #[error("the table is empty; expected a header line with `{expected}`")]
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
    /// A column is there twice.
    #[error("line 1: the column `{column}` stands there twice; expected it once")]
    RepeatedColumn {
        /// Its name.
        column: String,
    },
    /// A row has another number of cells than the header.
    #[error("line {line}: found {found} cells; expected {expected}, as in the header")]
    Ragged {
        /// Line of the row.
        line: u64,
        /// Cells in the row.
        found: usize,
        /// Cells in the header.
        expected: usize,
    },
    /// Bytes that are not UTF-8.
    #[error("line {line}: bytes that are not UTF-8 text")]
    NotUtf8 {
        /// Line of the row.
        line: u64,
    },
    /// A cell does not hold what its column holds.
    #[error("line {line}, column `{column}`: found `{found}`; expected {expected}")]
    Cell {
        /// Line of the row.
        line: u64,
        /// Name of the column.
        column: String,
        /// The cell as it stands.
        found: String,
        /// What the column holds.
        expected: &'static str,
    },
    /// A token is there twice.
    #[error("line {line}: the token `{token}` was already there; expected each once")]
    RepeatedToken {
        /// Line of the second.
        line: u64,
        /// Its name.
        token: String,
    },
    /// A track row names a token the token table does not have.
    #[error("line {line}: the track names the token `{token}`, which is not in the token table")]
    UnknownToken {
        /// Line of the row.
        line: u64,
        /// The name.
        token: String,
    },
}

impl TableError {
    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self {
            Self::Empty { .. } => "is this the right file, and is it complete?",
            Self::MissingColumn { .. } => {
                "rename the column in the file, or say which column stands for it with \
                 `--column NAME=COLUMN`"
            }
            Self::RepeatedColumn { .. } => "rename or remove one of the two",
            Self::Ragged { .. } => {
                "look for a comma or a quotation mark too many, or a line cut short"
            }
            Self::NotUtf8 { .. } => "save the table again as UTF-8",
            Self::Cell { .. } => "mend the cell, or empty it where nothing is known",
            Self::RepeatedToken { .. } => "give every token a name of its own",
            Self::UnknownToken { .. } => "use the tracks of the same run as the tokens",
        }
    }
}
