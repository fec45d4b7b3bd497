//! What `measure` and `run` share: a survey's folder in, an output folder out.

use std::collections::BTreeMap;
use std::path::PathBuf;

use super::frame::{Failure, Outcome, Voice};
use crate::survey::{
    self, Finding, Goal, LabelUse, Overrides, Progress, RunSummary, Survey, Weight, count_findings,
};

/// How many findings of one kind are told on the terminal; `run.json` has all of them.
const TOLD_OF_A_KIND: usize = 5;

/// A survey to read and a folder to write.
#[derive(Debug, clap::Args)]
pub(super) struct SurveyArguments {
    /// Folder of the survey: `recordings/`, `labels.csv`, `speakers.csv`, and `survey.toml` where
    /// something is called otherwise.
    #[arg(value_name = "FOLDER")]
    folder: PathBuf,

    /// Folder to write into; it is made where it is not there.
    #[arg(long, value_name = "OUT")]
    out: PathBuf,

    /// Measure without knowing which vowel a label names: labels only say where.
    #[arg(long)]
    hide_labels: bool,

    /// Notation of the labels, where the program guesses wrong.
    #[arg(long, value_name = "NOTATION", help_heading = "Advanced")]
    notation: Option<String>,
}

impl SurveyArguments {
    /// What the options replace of the survey file.
    pub(super) fn overrides(&self) -> Overrides {
        Overrides {
            notation: self.notation.clone(),
            label_use: self.hide_labels.then_some(LabelUse::Hidden),
            ..Overrides::default()
        }
    }

    /// Opens the survey, runs it as far as `goal`, and tells what was found.
    pub(super) fn run(
        &self,
        overrides: &Overrides,
        goal: Goal,
        voice: &Voice,
    ) -> Result<Outcome, Failure> {
        let survey = Survey::open(&self.folder, overrides)
            .map_err(|error| Failure::new(&error).hint(error.hint()))?;
        tell_plan(&survey, voice);
        let summary = survey::run(&survey, &self.out, goal, |progress| {
            tell_progress(progress, voice);
        })
        .map_err(|error| Failure::new(&error).hint(error.hint()))?;
        tell_findings(&summary.findings, voice);
        tell_summary(&summary, voice);
        if let Some(path) = summary.written.first() {
            voice.give(format!("{}\n", path.display()).as_bytes())?;
        }
        let left_out = summary
            .findings
            .iter()
            .any(|finding| finding.kind.weight() == Weight::LeftOut);
        Ok(if left_out {
            Outcome::SomethingLeftOut
        } else {
            Outcome::AllDone
        })
    }
}

fn tell_plan(survey: &Survey, voice: &Voice) {
    let recordings: usize = survey
        .plan
        .speakers
        .iter()
        .map(|s| s.recordings.len())
        .sum();
    voice.say(format!(
        "{} vowels of {} speakers in {recordings} recordings; labels read as {}",
        survey.plan.label_counts.vowels,
        survey.plan.speakers.len(),
        survey.plan.notation.name(),
    ));
}

/// About ten lines a run, whatever its size.
fn tell_progress(progress: Progress, voice: &Voice) {
    let tenths = |done: usize| 10 * done / progress.of_speakers.max(1);
    if tenths(progress.speakers) > tenths(progress.speakers - 1) {
        voice.say(format!(
            "measured {} of {} speakers, {} vowels",
            progress.speakers, progress.of_speakers, progress.tokens
        ));
    }
}

fn tell_findings(findings: &[Finding], voice: &Voice) {
    let counts = count_findings(findings);
    let mut told = BTreeMap::new();
    for finding in findings {
        let told = told.entry(finding.kind).or_insert(0);
        *told += 1;
        if *told <= TOLD_OF_A_KIND {
            voice.finding(finding);
        } else if *told == counts[&finding.kind] {
            voice.warning(
                format!(
                    "{} more of this kind ({}); `run.json` lists all",
                    counts[&finding.kind] - TOLD_OF_A_KIND,
                    finding.kind.name()
                ),
                None,
            );
        }
    }
}

fn tell_summary(summary: &RunSummary, voice: &Voice) {
    let counts = &summary.counts;
    voice.say(format!(
        "{} of {} vowels measured, {} of them with a doubt",
        counts.measured, counts.tokens, counts.doubted
    ));
    for (reason, count) in &counts.unmeasured {
        voice.say(format!("  {count} unmeasured: {reason}"));
    }
    if let Some(agreement) = counts.identified {
        voice.say(format!(
            "{} vowels identified; of {} whose label the model knows, {} as labelled",
            agreement.answered, agreement.comparable, agreement.agreeing
        ));
    }
}
