//! `speakers.csv`: one row per speaker, with whatever columns the survey has.

use std::collections::BTreeMap;

use super::error::TableError;
use super::record::Records;
use super::token_row::is_own_column;

/// The speakers of a survey and what is known of them.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct SpeakerTable {
    /// Names of the columns beyond the speaker's, in the order of the file.
    pub columns: Vec<String>,
    /// Values of each speaker, in the order of the columns.
    pub speakers: BTreeMap<String, Vec<String>>,
    /// Speakers that stand there more than once: name and line of each further row. The first row
    /// counts.
    pub repeated: Vec<(String, u64)>,
    /// Columns that were left out because the token table has one of that name.
    pub clashing: Vec<String>,
}

impl SpeakerTable {
    /// Reads a table of speakers; `column` names the speaker.
    ///
    /// # Errors
    /// [`TableError`], with the line.
    pub fn parse(bytes: &[u8], column: &str) -> Result<Self, TableError> {
        let records = Records::parse(bytes, column)?;
        let key = records.required(column)?;
        let mut kept = Vec::new();
        let mut table = Self::default();
        for (at, name) in records.header.iter().enumerate() {
            if at == key || name.is_empty() {
                continue;
            }
            if is_own_column(name) {
                table.clashing.push(name.clone());
            } else {
                kept.push(at);
                table.columns.push(name.clone());
            }
        }
        for row in 0..records.rows.len() {
            let Some(speaker) = records.cell(row, key).optional_text() else {
                continue;
            };
            let speaker = speaker.trim().to_owned();
            if table.speakers.contains_key(&speaker) {
                table.repeated.push((speaker, records.lines[row]));
                continue;
            }
            let values = kept
                .iter()
                .map(|&at| records.cell(row, at).optional_text().unwrap_or_default())
                .collect();
            table.speakers.insert(speaker, values);
        }
        Ok(table)
    }

    /// The speaker's values, empty ones where the speaker is not in the table.
    pub fn values(&self, speaker: &str) -> Vec<String> {
        match self.speakers.get(speaker) {
            Some(values) => values.clone(),
            None => vec![String::new(); self.columns.len()],
        }
    }

    /// The column to group speakers by when none is asked for: the first whose values put at least
    /// two speakers on average into each of at least two groups.
    pub fn natural_group(&self) -> Option<&str> {
        let at = (0..self.columns.len()).find(|&at| {
            let mut groups: BTreeMap<&str, usize> = BTreeMap::new();
            for values in self.speakers.values() {
                if !values[at].is_empty() {
                    *groups.entry(&values[at]).or_default() += 1;
                }
            }
            groups.len() >= 2 && groups.values().sum::<usize>() >= 2 * groups.len()
        })?;
        Some(&self.columns[at])
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn speakers_keep_their_columns_and_the_first_row_counts() {
        let text = "name,age,village,label\ns1,40,Upper,x\ns2,,Upper,y\ns1,41,Lower,z\n";
        let table = SpeakerTable::parse(text.as_bytes(), "name").expect("a table");
        assert_eq!(table.columns, ["age", "village"]);
        assert_eq!(table.clashing, ["label"]);
        assert_eq!(table.values("s1"), ["40", "Upper"]);
        assert_eq!(table.values("s9"), ["", ""]);
        assert_eq!(table.repeated, [("s1".to_owned(), 4)]);
    }

    #[test]
    fn a_column_of_its_own_for_everybody_groups_nobody() {
        let text = "speaker,age,place\na,1,x\nb,2,x\nc,3,y\nd,4,y\n";
        let table = SpeakerTable::parse(text.as_bytes(), "speaker").expect("a table");
        assert_eq!(table.natural_group(), Some("place"));
        let text = "speaker,place\na,x\nb,x\n";
        let table = SpeakerTable::parse(text.as_bytes(), "speaker").expect("a table");
        assert_eq!(table.natural_group(), None);
    }
}
