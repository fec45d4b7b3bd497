//! The rows and columns of the tables the program reads and writes.
//!
//! Four views of a CSV table live here:
//!
//! - [`TokenTable`] and [`TrackTable`] are the program's own tables, typed; `tokens.csv` and
//!   `tracks.csv` are written from them and read back to exactly the same rows.
//! - [`ObservationTable`] is any table with a row per vowel token, ours or somebody else's, whose
//!   columns can be named. Its cells are kept as they came, so that the verbs that add columns
//!   (`normalize`, `identify`) give every other column back untouched.
//!
//! - [`SpeakerTable`] is a survey's own table of its speakers, with whatever columns it has.
//!
//! Everything is UTF-8, comma-separated, RFC 4180 quoting, one header line, `\n` at line ends on
//! writing; an empty cell is a missing value. [`describe`] gives the W3C CSVW description that is
//! written beside each table. Text cells a spreadsheet would run as a formula are defused, see
//! [`guard`].
//!
//! Readers take bytes and give positions; the path is added where the file is opened.

mod cell;
mod checks;
mod column;
mod comparison;
mod error;
mod observations;
mod record;
mod speakers;
mod token_row;
mod tokens;
mod tracks;

pub use cell::{decimals, format_number, guard, round_to, unguard};
pub use checks::checks_table;
pub use column::{Column, Kind, describe};
pub use comparison::{differences_table, pairs_table, spaces_table, vowels_table};
pub use error::TableError;
pub use observations::{ObservationColumns, ObservationTable, UnknownName};
pub use speakers::SpeakerTable;
pub use token_row::{
    ColumnGroups, IdentifiedCells, NormalizedCells, ReadingCells, TokenRow, token_columns,
};
pub use tokens::{TokenTable, TokenWriter};
pub use tracks::{TrackRow, TrackTable, TrackWriter, track_columns};
