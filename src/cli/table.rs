//! What the verbs on tables share: which columns stand for what, and the reading.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use super::frame::Failure;
use crate::files;
use crate::tables::{ObservationColumns, ObservationTable, TrackTable};

/// How the columns of foreign tables are named.
#[derive(Debug, clap::Args)]
pub(super) struct ColumnArguments {
    /// Takes COLUMN of the table for NAME (token, speaker, vowel, f0_hz, f1_hz, f2_hz, f3_hz,
    /// f1_sd_hz, f2_sd_hz, f3_sd_hz, duration_s); `NAME=` says that the table has none. With several tables it applies to those that have
    /// COLUMN.
    #[arg(long = "column", value_name = "NAME=COLUMN")]
    renamed: Vec<String>,
}

impl ColumnArguments {
    /// The renamings, as given.
    pub(super) fn renamed(&self) -> &[String] {
        &self.renamed
    }

    /// Reads a table of observations.
    ///
    /// # Errors
    /// A failure where the file cannot be read or is no such table.
    pub(super) fn read(&self, path: &Path) -> Result<ObservationTable, Failure> {
        let bytes = files::read(path)?;
        self.parse(path, &bytes)
    }

    /// Reads several tables; each with its bytes, for hashing.
    ///
    /// # Errors
    /// Also where a renaming fits none of the tables.
    pub(super) fn read_all(
        &self,
        paths: &[PathBuf],
    ) -> Result<Vec<(ObservationTable, Vec<u8>)>, Failure> {
        let all: Vec<Vec<u8>> = paths
            .iter()
            .map(|path| files::read(path))
            .collect::<Result<_, _>>()?;
        for renaming in &self.renamed {
            let (_, column) = split(renaming)?;
            if !column.is_empty() && !all.iter().any(|bytes| has_column(bytes, column)) {
                return Err(Failure::new(format!("no table has a column `{column}`"))
                    .hint(format!("it was asked for by `--column {renaming}`")));
            }
        }
        paths
            .iter()
            .zip(all)
            .map(|(path, bytes)| Ok((self.parse_fitting(path, &bytes)?, bytes)))
            .collect()
    }

    fn parse(&self, path: &Path, bytes: &[u8]) -> Result<ObservationTable, Failure> {
        self.parse_with(path, bytes, self.renamed.iter())
    }

    fn parse_fitting(&self, path: &Path, bytes: &[u8]) -> Result<ObservationTable, Failure> {
        let fitting = self.renamed.iter().filter(|renaming| {
            split(renaming).is_ok_and(|(_, column)| column.is_empty() || has_column(bytes, column))
        });
        self.parse_with(path, bytes, fitting)
    }

    fn parse_with<'a>(
        &self,
        path: &Path,
        bytes: &[u8],
        renamed: impl Iterator<Item = &'a String>,
    ) -> Result<ObservationTable, Failure> {
        let mut columns = ObservationColumns::as_named();
        for renaming in renamed {
            let (name, column) = split(renaming)?;
            columns.rename(name, column).map_err(Failure::new)?;
        }
        ObservationTable::parse(bytes, &columns).map_err(|error| Failure::of_table(path, &error))
    }
}

/// `NAME=COLUMN` taken apart.
fn split(renaming: &str) -> Result<(&str, &str), Failure> {
    renaming.split_once('=').ok_or_else(|| {
        Failure::new(format!(
            "`--column {renaming}` is not of the form NAME=COLUMN"
        ))
        .hint("for example `--column speaker=talker`")
    })
}

/// Whether the header line names a column. Headers with quoted commas are none of the tables this
/// is asked about: the renaming is then not found, and that is said.
fn has_column(bytes: &[u8], column: &str) -> bool {
    let bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
    let header = bytes.split(|b| *b == b'\n').next().unwrap_or_default();
    String::from_utf8_lossy(header)
        .split(',')
        .any(|name| name.trim().trim_matches('"') == column)
}

/// Reads tracks and gives them to the observations of a table.
///
/// # Errors
/// A failure where the file cannot be read, is no track table, or is another run's.
pub(super) fn add_tracks(table: &mut ObservationTable, path: &Path) -> Result<(), Failure> {
    let bytes = files::read(path)?;
    let tracks = TrackTable::parse(&bytes).map_err(|error| Failure::of_table(path, &error))?;
    table
        .add_tracks(&tracks)
        .map_err(|error| Failure::of_table(path, &error))
}

/// Reads a table of observations with its tracks, or `tokens.csv` and `tracks.csv` of a run's
/// folder.
///
/// # Errors
/// A failure where a file cannot be read or is no such table.
pub(super) fn read_table_or_run(
    columns: &ColumnArguments,
    path: &Path,
    tracks: Option<&Path>,
) -> Result<ObservationTable, Failure> {
    let folder = path.is_dir();
    let tokens = if folder {
        path.join("tokens.csv")
    } else {
        path.to_owned()
    };
    let mut table = columns.read(&tokens)?;
    let tracks = tracks
        .map(Path::to_owned)
        .or_else(|| folder.then(|| path.join("tracks.csv")));
    if let Some(tracks) = tracks {
        add_tracks(&mut table, &tracks)?;
    }
    Ok(table)
}

/// One value of each speaker in a column; a speaker with several values is an error, since groups
/// are of speakers.
pub(super) fn of_speakers(
    table: &ObservationTable,
    column: &str,
) -> Result<BTreeMap<String, String>, Failure> {
    let cells = table.column(column).map_err(|error| {
        Failure::new(error.to_string())
            .hint(format!("the columns are `{}`", table.header().join("`, `")))
    })?;
    let mut values: BTreeMap<String, String> = BTreeMap::new();
    for (observation, cell) in table.observations.iter().zip(cells) {
        let Some(observation) = observation else {
            continue;
        };
        if cell.is_empty() {
            continue;
        }
        let known = values
            .entry(observation.speaker.clone())
            .or_insert_with(|| cell.to_owned());
        if known != cell {
            return Err(Failure::new(format!(
                "speaker `{}` has two values of `{column}`: `{known}` and `{cell}`",
                observation.speaker
            ))
            .hint(
                "groups are groups of speakers; use a column that each speaker has one value of",
            ));
        }
    }
    Ok(values)
}
