//! `isophone norms`.

use std::fmt::Write;

use super::frame::{Failure, Outcome, Voice};
use crate::norms::{self, ReferenceRow, ReferenceTable};

/// Lists and shows the published vowel tables.
///
/// Without a name, lists them. With a name, shows that table as CSV, where it comes from first.
#[derive(Debug, clap::Args)]
pub(super) struct NormsArguments {
    /// The table to show.
    name: Option<String>,
}

/// Runs the verb.
pub(super) fn execute(arguments: &NormsArguments, voice: &Voice) -> Result<Outcome, Failure> {
    let text = match &arguments.name {
        None => norms::NAMES
            .iter()
            .filter_map(|name| norms::shipped(name))
            .map(|table| line(&table))
            .collect(),
        Some(name) => {
            let table = norms::shipped(name).ok_or_else(|| {
                Failure::new(format!("there is no table called `{name}`"))
                    .hint(format!("the tables are `{}`", norms::NAMES.join("`, `")))
            })?;
            whole(&table)
        }
    };
    voice.give(text.as_bytes())?;
    Ok(Outcome::AllDone)
}

/// One table in the list.
fn line(table: &ReferenceTable) -> String {
    format!(
        "{name}\n    {accent}; {vowels} vowels; {speakers}\n    {source}\n",
        name = table.name,
        accent = table.accent,
        vowels = table.vowels().len(),
        speakers = table.speakers,
        source = table.source,
    )
}

/// A table as it could be saved and read again.
fn whole(table: &ReferenceTable) -> String {
    let mut text = String::new();
    for (key, value) in [
        ("source", table.source.as_str()),
        ("table", &table.table),
        ("accent", &table.accent),
        ("unit", "hertz, seconds"),
        ("speakers", &table.speakers),
        ("spread", &table.spread),
        ("confirmed", &table.confirmed),
    ] {
        let _ = writeln!(text, "# {key}: {value}");
    }
    text.push_str(
        "group,vowel,word,proportion,tokens,duration_s,f0_hz,f1_hz,f2_hz,f3_hz,\
         f0_sd_hz,f1_sd_hz,f2_sd_hz,f3_sd_hz\n",
    );
    for row in &table.rows {
        text.push_str(&cells(row).join(","));
        text.push('\n');
    }
    text
}

fn cells(row: &ReferenceRow) -> Vec<String> {
    let number = |value: Option<f64>| value.map_or_else(String::new, |v| v.to_string());
    let [f1, f2, f3] = row.formant_hz.map(number);
    let [sd1, sd2, sd3] = row.sd_hz.map(number);
    vec![
        row.group.clone(),
        row.vowel.to_string(),
        row.word.clone().unwrap_or_default(),
        number(row.proportion),
        row.tokens.map_or_else(String::new, |n| n.to_string()),
        number(row.duration_s),
        number(row.f0_hz),
        f1,
        f2,
        f3,
        number(row.f0_sd_hz),
        sd1,
        sd2,
        sd3,
    ]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_is_shown_can_be_read_again() {
        for name in norms::NAMES {
            let table = norms::shipped(name).expect("a shipped table");
            assert_eq!(ReferenceTable::parse(name, &whole(&table)), Ok(table));
        }
    }
}
