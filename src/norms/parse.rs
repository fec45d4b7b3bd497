//! Text of a reference table to the table, refused where its header is not whole.

use std::collections::BTreeMap;

use crate::vowel::Vowel;

use super::{ReferenceRow, ReferenceTable};

/// The header's lines; a table without one of them is refused.
const HEADER: [&str; 7] = [
    "source",
    "table",
    "accent",
    "unit",
    "speakers",
    "spread",
    "confirmed",
];

/// The only unit the columns are named for.
const UNIT: &str = "hertz, seconds";

/// Why a text is no reference table.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum NormsError {
    /// A line of the header is missing or empty.
    #[error("no line `# {0}:`; a reference table says where it comes from")]
    Header(&'static str),
    /// A unit other than the one the columns are named for.
    #[error("the unit is `{found}`; expected `{UNIT}`")]
    Unit {
        /// What it says.
        found: String,
    },
    /// A column is missing.
    #[error("no column `{0}`")]
    Column(&'static str),
    /// A line that is no row.
    #[error("line {line}: {problem}")]
    Row {
        /// Its number, from 1.
        line: u64,
        /// What is wrong with it.
        problem: String,
    },
    /// No rows.
    #[error("the table has no rows")]
    Empty,
}

impl ReferenceTable {
    /// Reads a table from its text.
    ///
    /// # Errors
    /// [`NormsError`] where the header is not whole, a column is missing, or a row is not a vowel
    /// mean with at least F1 and F2.
    pub fn parse(name: &str, text: &str) -> Result<Self, NormsError> {
        let text = text.strip_prefix('\u{feff}').unwrap_or(text);
        let mut header: BTreeMap<&str, &str> = BTreeMap::new();
        for line in text.lines().take_while(|line| line.starts_with('#')) {
            if let Some((key, value)) = line[1..].split_once(':') {
                header.insert(key.trim(), value.trim());
            }
        }
        let mut said = BTreeMap::new();
        for key in HEADER {
            match header.get(key) {
                Some(value) if !value.is_empty() => said.insert(key, (*value).to_owned()),
                _ => return Err(NormsError::Header(key)),
            };
        }
        let unit = said.remove("unit").unwrap_or_default();
        if unit != UNIT {
            return Err(NormsError::Unit { found: unit });
        }
        let rows = rows(text)?;
        let mut take = |key: &str| said.remove(key).unwrap_or_default();
        Ok(Self {
            name: name.to_owned(),
            source: take("source"),
            table: take("table"),
            accent: take("accent"),
            speakers: take("speakers"),
            spread: take("spread"),
            confirmed: take("confirmed"),
            rows,
        })
    }
}

fn rows(text: &str) -> Result<Vec<ReferenceRow>, NormsError> {
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(text.as_bytes());
    let columns = reader
        .headers()
        .map_err(|error| unreadable(&error))?
        .clone();
    let place = |name: &str| columns.iter().position(|column| column.trim() == name);
    let required = |name: &'static str| place(name).ok_or(NormsError::Column(name));
    let (group, vowel) = (required("group")?, required("vowel")?);
    let formants = [required("f1_hz")?, required("f2_hz")?];
    let optional = [
        "f3_hz",
        "f0_hz",
        "duration_s",
        "proportion",
        "tokens",
        "f0_sd_hz",
        "f1_sd_hz",
        "f2_sd_hz",
        "f3_sd_hz",
    ]
    .map(place);
    let word = place("word");
    let mut rows: Vec<ReferenceRow> = Vec::new();
    for record in reader.records() {
        let record = record.map_err(|error| unreadable(&error))?;
        let line = record.position().map_or(0, csv::Position::line);
        let wrong = |problem: String| NormsError::Row { line, problem };
        let cell = |index: Option<usize>| {
            index
                .and_then(|index| record.get(index))
                .map(str::trim)
                .filter(|text| !text.is_empty())
        };
        let number = |index: Option<usize>| -> Result<Option<f64>, NormsError> {
            match cell(index) {
                None => Ok(None),
                Some(text) => match text.parse::<f64>() {
                    Ok(value) if value.is_finite() && value > 0.0 => Ok(Some(value)),
                    _ => Err(wrong(format!("`{text}` is no positive number"))),
                },
            }
        };
        let [f3, f0, duration, proportion, tokens, sd0, sd1, sd2, sd3] = optional;
        let (Some(group), Some(vowel)) = (cell(Some(group)), cell(Some(vowel))) else {
            return Err(wrong("no group or no vowel".to_owned()));
        };
        let (Some(f1_hz), Some(f2_hz)) = (number(Some(formants[0]))?, number(Some(formants[1]))?)
        else {
            return Err(wrong("no F1 or no F2".to_owned()));
        };
        let row = ReferenceRow {
            group: group.to_owned(),
            vowel: Vowel::from_ipa(vowel),
            word: cell(word).map(str::to_owned),
            proportion: number(proportion)?,
            tokens: number(tokens)?.map(|n| n as u32),
            duration_s: number(duration)?,
            f0_hz: number(f0)?,
            formant_hz: [Some(f1_hz), Some(f2_hz), number(f3)?],
            f0_sd_hz: number(sd0)?,
            sd_hz: [number(sd1)?, number(sd2)?, number(sd3)?],
        };
        let same = |other: &ReferenceRow| {
            (&other.group, &other.vowel, other.proportion)
                == (&row.group, &row.vowel, row.proportion)
        };
        if rows.iter().any(same) {
            return Err(wrong(format!(
                "`{}` stands twice for `{}`",
                row.vowel, row.group
            )));
        }
        rows.push(row);
    }
    if rows.is_empty() {
        return Err(NormsError::Empty);
    }
    Ok(rows)
}

fn unreadable(error: &csv::Error) -> NormsError {
    NormsError::Row {
        line: error.position().map_or(1, csv::Position::line),
        problem: "a row with another number of cells than the columns, or not UTF-8".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const GOOD: &str = "# source: nobody, invented\n# table: means\n# accent: none\n\
        # unit: hertz, seconds\n# speakers: two\n# spread: none\n# confirmed: invented\n\
        group,vowel,f1_hz,f2_hz\nall,i,300,2300\n";

    #[test]
    fn a_whole_table_is_read() {
        let table = ReferenceTable::parse("mine", GOOD).unwrap();
        assert_eq!(table.source, "nobody, invented");
        assert_eq!(table.rows[0].formant_hz, [Some(300.0), Some(2300.0), None]);
    }

    #[test]
    fn a_table_that_does_not_say_where_it_comes_from_is_refused() {
        for key in HEADER {
            let without: String = GOOD
                .lines()
                .filter(|line| !line.starts_with(&format!("# {key}:")))
                .map(|line| format!("{line}\n"))
                .collect();
            let refused = ReferenceTable::parse("mine", &without);
            assert_eq!(refused, Err(NormsError::Header(key)));
        }
    }

    #[test]
    fn damage_is_named_with_its_line() {
        let parse = |text: &str| ReferenceTable::parse("mine", text).unwrap_err().to_string();
        assert_eq!(
            parse(""),
            "no line `# source:`; a reference table says where it comes from"
        );
        assert_eq!(
            parse(&GOOD.replace("300", "NaN")),
            "line 9: `NaN` is no positive number"
        );
        assert_eq!(
            parse(&GOOD.replace("all,i,300,2300\n", "")),
            "the table has no rows"
        );
        assert_eq!(parse(&GOOD.replace(",f2_hz", ",f2")), "no column `f2_hz`");
        assert_eq!(
            parse(&GOOD.replace("hertz, seconds", "bark")),
            "the unit is `bark`; expected `hertz, seconds`"
        );
        assert_eq!(
            parse(&format!("{GOOD}all,i,310,2310\n")),
            "line 10: `i` stands twice for `all`"
        );
        assert!(parse(&format!("{GOOD}all,e\n")).starts_with("line 10"));
    }
}
