//! What `isophone train` says about its tests.

use std::collections::BTreeMap;
use std::fmt::Write;

use super::train::{Candidate, Tested};
use crate::identify::{Accuracy, Evaluation, calibration_error};

/// What is held out, in words.
pub(super) fn held_out(leave_out: &str) -> String {
    match leave_out {
        "speaker" => "one speaker at a time".to_owned(),
        "token" => "one token at a time".to_owned(),
        column => format!("all speakers of one `{column}` at a time"),
    }
}

/// The test of one combination: accuracy, groups, confusion, reliability, what was lacking.
pub(super) fn one(tested: &Tested, leave_out: &str, seed: u64) -> String {
    let evaluation = &tested.evaluation;
    let mut text = format!(
        "held out: {}\n{}",
        held_out(leave_out),
        told(&evaluation.accuracy(seed))
    );
    if let Some((names, of_speaker)) = &tested.groups {
        text.push_str(&by_group(evaluation, names, of_speaker));
    }
    text.push('\n');
    text.push_str(&confusion(evaluation));
    text.push('\n');
    text.push_str(&reliability(evaluation));
    if !tested.samples.lacking.is_empty() {
        let answered = evaluation.rows.len();
        let _ = writeln!(
            text,
            "\nincomplete tokens ({} without an answer, which count as wrong; {answered} answered):",
            evaluation.incomplete.len()
        );
        for (reason, count) in &tested.samples.lacking {
            let _ = writeln!(text, "    {count}: {reason}");
        }
    }
    text
}

/// Several combinations side by side.
pub(super) fn comparison(
    candidates: &[Candidate],
    tested: &[Tested],
    leave_out: &str,
    seed: u64,
) -> String {
    let mut text = format!(
        "held out: {}; correct, % and 95 % interval over speakers, calibration error\n",
        held_out(leave_out)
    );
    for (candidate, tested) in candidates.iter().zip(tested) {
        let accuracy = tested.evaluation.accuracy(seed);
        let features: Vec<String> = candidate.features.iter().map(ToString::to_string).collect();
        let _ = writeln!(
            text,
            "{:<10} {:<28} {:>5}/{:<5} {:>5.1} {:>5.1}-{:<5.1} {:>6.3}  {}",
            candidate.kind.to_string(),
            candidate.method.to_string(),
            accuracy.correct,
            accuracy.tokens,
            100.0 * accuracy.share,
            100.0 * accuracy.low,
            100.0 * accuracy.high,
            calibration_error(&tested.evaluation.reliability()),
            features.join(" "),
        );
    }
    text
}

/// The accuracy in words.
fn told(accuracy: &Accuracy) -> String {
    format!(
        "{:.1} % identified as labelled ({} of {} tokens, {} speakers; 95 % interval over speakers \
         {:.1} to {:.1} %)\n",
        100.0 * accuracy.share,
        accuracy.correct,
        accuracy.tokens,
        accuracy.speakers,
        100.0 * accuracy.low,
        100.0 * accuracy.high,
    )
}

/// Each group's own accuracy when it was left out.
fn by_group(evaluation: &Evaluation, names: &[String], of_speaker: &[usize]) -> String {
    let mut counts: BTreeMap<usize, (usize, usize)> = BTreeMap::new();
    for row in &evaluation.rows {
        let group = counts.entry(of_speaker[row.speaker]).or_default();
        group.0 += usize::from(row.answer() == row.class);
        group.1 += 1;
    }
    for (speaker, _) in &evaluation.incomplete {
        counts.entry(of_speaker[*speaker]).or_default().1 += 1;
    }
    counts
        .into_iter()
        .map(|(group, (correct, tokens))| {
            format!(
                "    {}: {:.1} % ({correct} of {tokens})\n",
                names[group],
                100.0 * correct as f64 / tokens as f64
            )
        })
        .collect()
}

/// The confusion table, with recall.
fn confusion(evaluation: &Evaluation) -> String {
    let table = evaluation.confusion();
    let mut missing: BTreeMap<usize, usize> = BTreeMap::new();
    for (_, class) in &evaluation.incomplete {
        *missing.entry(*class).or_insert(0) += 1;
    }
    let mut text = String::from("label\\answer");
    for vowel in &evaluation.vowels {
        let _ = write!(text, "{:>6}", vowel.ipa());
    }
    text.push_str("  none  recall %\n");
    for (class, (vowel, row)) in evaluation.vowels.iter().zip(&table).enumerate() {
        let none = missing.get(&class).copied().unwrap_or(0);
        let all = row.iter().sum::<usize>() + none;
        let _ = write!(text, "{:<12}", vowel.ipa());
        for count in row {
            let _ = write!(text, "{count:>6}");
        }
        let recall = 100.0 * row[class] as f64 / all.max(1) as f64;
        let _ = writeln!(text, "{none:>6}{recall:>10.1}");
    }
    text
}

/// How often stated probabilities came true.
fn reliability(evaluation: &Evaluation) -> String {
    let table = evaluation.reliability();
    let mut text = format!(
        "stated probability (calibrated on other speakers) and share identified as labelled; \
         expected calibration error {:.3}\n",
        calibration_error(&table)
    );
    for bin in table.iter().filter(|bin| bin.tokens > 0) {
        let _ = writeln!(
            text,
            "    {:.3} stated, {:.3} found, {} tokens",
            bin.stated, bin.found, bin.tokens
        );
    }
    text
}
