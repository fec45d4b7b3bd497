//! `isophone report`.

use std::path::{Path, PathBuf};

use super::frame::{Failure, Outcome, Voice};
use crate::compare::Resampling;
use crate::files;
use crate::report::Subject;
use crate::survey::{self, Overrides, Survey};
use crate::tables::{TokenTable, TrackTable};

/// Makes the page to read from a run.
///
/// Reads `tokens.csv`, `tracks.csv` and `run.json` of a run's folder and writes `report.html`
/// beside them: one file that needs nothing else. The page goes to the place `--page` names where
/// another is wanted.
#[derive(Debug, clap::Args)]
pub(super) struct ReportArguments {
    /// Folder a run has written.
    #[arg(value_name = "OUT")]
    folder: PathBuf,

    /// Speaker column whose values are compared; the run's own otherwise.
    #[arg(long, value_name = "COLUMN")]
    by: Option<String>,

    /// Folder of the survey, for pictures of the doubtful tokens.
    #[arg(long, value_name = "FOLDER")]
    survey: Option<PathBuf>,

    /// Where to write the page.
    #[arg(long, value_name = "FILE")]
    page: Option<PathBuf>,
}

/// Runs the verb.
pub(super) fn execute(arguments: &ReportArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let survey = match &arguments.survey {
        None => None,
        Some(folder) => Some(
            Survey::open(folder, &Overrides::default())
                .map_err(|error| Failure::new(&error).hint(error.hint()))?,
        ),
    };
    let (subject, record) = read_run(&arguments.folder, arguments.by.as_deref(), survey.as_ref())?;
    let page = survey::page(&subject, &record).map_err(Failure::new)?;
    let path = arguments
        .page
        .clone()
        .unwrap_or_else(|| arguments.folder.join("report.html"));
    files::write(&path, page.as_bytes())?;
    voice.give(format!("{}\n", path.display()).as_bytes())?;
    Ok(Outcome::AllDone)
}

/// The tables of a run and its record, with pictures where the survey is given; `by` groups the speakers in place of the run's own column.
pub(super) fn read_run(
    folder: &Path,
    by: Option<&str>,
    survey: Option<&Survey>,
) -> Result<(Subject, serde_json::Value), Failure> {
    let tokens_path = folder.join("tokens.csv");
    let tokens = TokenTable::parse(&files::read(&tokens_path)?)
        .map_err(|error| Failure::of_table(&tokens_path, &error))?;
    let tracks_path = folder.join("tracks.csv");
    let tracks = TrackTable::parse(&files::read(&tracks_path)?)
        .map_err(|error| Failure::of_table(&tracks_path, &error))?;
    let record_path = folder.join("run.json");
    let record: serde_json::Value =
        serde_json::from_slice(&files::read(&record_path)?).map_err(|error| {
            Failure::new(format!("`{}`: {error}", record_path.display()))
                .hint("`isophone run` writes it; run the survey again")
        })?;
    let by = by
        .or_else(|| survey::recorded_group(&record))
        .map(str::to_owned);
    if let Some(by) = &by
        && !tokens.speaker_columns.contains(by)
    {
        return Err(Failure::new(format!(
            "no speaker column `{by}` to compare by; expected one of `{}`",
            tokens.speaker_columns.join("`, `")
        ))
        .hint("the columns of `speakers.csv` can be used"));
    }
    let pictures = survey.map(|survey| survey::pictures_of(survey, &tokens, &tracks));
    let mut subject = Subject::gather(tokens, &tracks, by.as_deref(), Resampling::default());
    subject.pictures = pictures.unwrap_or_default();
    Ok((subject, record))
}
