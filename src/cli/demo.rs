//! `isophone demo`.

use std::path::{Path, PathBuf};

use super::frame::{Failure, Outcome, Voice};
use super::report::read_run;
use crate::compare::{Findings, GroupPair, Measure, VowelContrast};
use crate::demo::{self, DemoSurvey, PutIn};
use crate::files;
use crate::report::Subject;
use crate::survey::{self, Goal, Overrides, Survey};
use crate::vowel::Vowel;

/// Invents a survey, synthesises it, runs it, and says what was found beside what was put in.
///
/// Two villages that are on no map, sixteen people who do not exist: one vowel is said differently
/// in the two villages, and one of them has one vowel where the other has two.
#[derive(Debug, clap::Args)]
pub(super) struct DemoArguments {
    /// Folder to write into; it is made where it is not there.
    #[arg(long, value_name = "OUT", default_value = "out/demo")]
    out: PathBuf,

    /// Seed of everything that is drawn; another seed is another survey.
    #[arg(long, value_name = "N", default_value_t = demo::SEED, help_heading = "Advanced")]
    seed: u64,
}

/// Runs the verb.
pub(super) fn execute(arguments: &DemoArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let made = demo::survey(arguments.seed).map_err(Failure::new)?;
    let folder = arguments.out.join("survey");
    write(&made, &folder)?;
    voice.say(format!(
        "invented {} recordings of people who do not exist, in `{}`",
        made.recordings.len(),
        folder.display()
    ));
    let survey = Survey::open(&folder, &Overrides::default())
        .map_err(|error| Failure::new(&error).hint(error.hint()))?;
    let result = arguments.out.join("result");
    survey::run(&survey, &result, Goal::Report, |_| {})
        .map_err(|error| Failure::new(&error).hint(error.hint()))?;
    let (subject, _) = read_run(&result, None, None)?;
    let mut told = accuracy(&made, &subject);
    told.push_str(&villages(&made.put_in, &subject.findings));
    told.push_str(&format!(
        "\nreport: {}\n",
        result.join("report.html").display()
    ));
    voice.give(told.as_bytes())?;
    Ok(Outcome::AllDone)
}

fn write(made: &DemoSurvey, folder: &Path) -> Result<(), Failure> {
    let recordings = folder.join("recordings");
    files::create_folder(&recordings)?;
    for (name, bytes) in &made.recordings {
        files::write_remakeable(&recordings.join(name), bytes)?;
    }
    files::write(&folder.join("labels.csv"), made.labels_csv.as_bytes())?;
    files::write(&folder.join("speakers.csv"), made.speakers_csv.as_bytes())?;
    files::write(&folder.join("survey.toml"), made.survey_toml.as_bytes())?;
    Ok(())
}

/// How far the measured formants are from those that were put in.
fn accuracy(made: &DemoSurvey, subject: &Subject) -> String {
    let mut errors: [Vec<f64>; 3] = Default::default();
    let mut missing = 0;
    for truth in &made.truths {
        let row = subject
            .table
            .rows
            .iter()
            .find(|r| r.recording == truth.recording);
        let Some((row, reading)) = row.and_then(|r| Some((r, r.reading.as_ref().ok()?))) else {
            missing += 1;
            continue;
        };
        let at_s = reading.at_s.unwrap_or(0.5 * (row.start_s + row.end_s));
        let there = truth.formant_hz((at_s - row.start_s) / row.duration_s);
        for k in 0..3 {
            if let Some(hz) = reading.formant_hz[k] {
                errors[k].push((hz - there[k]) / there[k]);
            }
        }
    }
    let mut text = format!(
        "\nThis survey is invented. What was found, beside what was put in:\n\n\
         formants ({} tokens{})\n",
        made.truths.len(),
        if missing > 0 {
            format!(", {missing} unmeasured")
        } else {
            String::new()
        }
    );
    for (k, errors) in errors.iter_mut().enumerate() {
        let over = errors.iter().filter(|e| e.abs() > 0.1).count();
        let mean = errors.iter().sum::<f64>() / errors.len().max(1) as f64;
        let mut sizes: Vec<f64> = errors.iter().map(|e| e.abs()).collect();
        sizes.sort_by(f64::total_cmp);
        let median = sizes.get(sizes.len() / 2).copied().unwrap_or(f64::NAN);
        text.push_str(&format!(
            "  F{}   median error {:.1} %, mean {:+.1} %, off by over 10 % in {over} of {}\n",
            k + 1,
            100.0 * median,
            100.0 * mean,
            errors.len()
        ));
    }
    text
}

/// The moved vowel and the merged pair, as found and as put in.
fn villages(put_in: &PutIn, findings: &Findings) -> String {
    let mut text = String::new();
    let place = |vowel: &Vowel| findings.panel.vowels.iter().position(|v| v == vowel);
    let contrast = findings.contrasts.first();
    let moved = contrast.and_then(|c| {
        let moved = place(&put_in.moved)?;
        Some((c, c.vowels.iter().find(|v| v.vowel == moved)?))
    });
    if let Some((contrast, vowel)) = moved {
        text.push_str(&format!(
            "\n/{}/ in {} against {}\n",
            put_in.moved, contrast.names[1], contrast.names[0]
        ));
        text.push_str(&moved_lines(put_in, &contrast.names, vowel));
        let others: Vec<String> = contrast
            .vowels
            .iter()
            .filter(|v| v.verdict() == crate::compare::PlaceVerdict::Different)
            .map(|v| format!("/{}/", findings.panel.vowels[v.vowel]))
            .collect();
        text.push_str(&format!(
            "  vowels said to differ: {} (the merged pair should be among them: its one vowel stands \
             between the two)\n",
            if others.is_empty() {
                "none".to_owned()
            } else {
                others.join(" ")
            }
        ));
    }
    let mut pair = put_in.merged.each_ref().map(place);
    pair.sort();
    text.push_str(&format!(
        "\n/{}/ and /{}/\n",
        put_in.merged[0], put_in.merged[1]
    ));
    for (village, was) in [
        (put_in.merged_in, "one vowel"),
        (put_in.apart_in, "two vowels"),
    ] {
        let group = findings.panel.groups.iter().position(|g| g == village);
        let found = findings
            .pairs
            .iter()
            .find(|p| p.group == group && group.is_some() && p.vowels.map(Some) == pair);
        text.push_str(&format!(
            "  {village:10} put in: {was}; found: {}\n",
            found.map_or_else(|| "nothing".to_owned(), pair_words,)
        ));
    }
    text
}

fn moved_lines(put_in: &PutIn, names: &[String; 2], vowel: &VowelContrast) -> String {
    let Some(f2) = vowel.measure(Measure::F2AtReference) else {
        return "  not measured in both villages\n".to_owned();
    };
    // The factor is of the village that moved it; the contrast may stand the other way round.
    let straight = names[1] == put_in.moved_in;
    let [from, to] = if straight {
        f2.means
    } else {
        [f2.means[1], f2.means[0]]
    };
    let interval = f2.interval.map_or_else(String::new, |[low, high]| {
        let [low, high] = if straight { [low, high] } else { [-high, -low] };
        format!(", 95 % interval over speakers {low:+.0} to {high:+.0} Hz")
    });
    format!(
        "  put in: F2 {:+.0} % in {}\n  found:  F2 {:+.0} % ({:+.0} Hz at the middle speaker's size{interval}; p {:.4})\n",
        100.0 * (put_in.moved_f2_factor - 1.0),
        put_in.moved_in,
        100.0 * (to / from - 1.0),
        to - from,
        vowel.place_p_holm.unwrap_or(1.0)
    )
}

fn pair_words(pair: &GroupPair) -> String {
    format!(
        "{} (mean Pillai trace {:.2}; one vowel gives {:.2}, under {:.2} in 95 of 100 surveys)",
        pair.verdict.text(),
        pair.pillai,
        pair.pillai_if_merged,
        pair.pillai_if_merged_95
    )
}
