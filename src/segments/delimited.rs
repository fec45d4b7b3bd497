//! Labels as delimited text: a header, then one line per label.

use std::collections::BTreeMap;

use super::VowelSpan;
use super::lines::{LineCounter, guess_delimiter};
use super::problem::{LabelError, LabelProblem, LineProblem};
use crate::vowel::Vowel;

/// Names of the columns of a label file.
///
/// The first four must be there. The others may be missing under their own name, but not under a
/// name that was asked for.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct LabelColumns {
    /// File name of the recording.
    pub recording: String,
    /// Start in seconds.
    pub start_s: String,
    /// End in seconds.
    pub end_s: String,
    /// The label.
    pub label: String,
    /// The word.
    pub word: String,
    /// Who speaks.
    pub speaker: String,
    /// Channel, from 1.
    pub channel: String,
}

impl Default for LabelColumns {
    fn default() -> Self {
        let own = str::to_owned;
        Self {
            recording: own("recording"),
            start_s: own("start_s"),
            end_s: own("end_s"),
            label: own("label"),
            word: own("word"),
            speaker: own("speaker"),
            channel: own("channel"),
        }
    }
}

/// One label, as written.
#[derive(Debug, Clone, PartialEq)]
pub struct LabelRow {
    /// Line in the label file, from 1.
    pub line: u64,
    /// File name of the recording.
    pub recording: String,
    /// Channel, where stated.
    pub channel: Option<u16>,
    /// Who speaks, where the file has such a column.
    pub speaker: Option<String>,
    /// The word, where stated.
    pub word: Option<String>,
    /// The label, without surrounding space.
    pub label: String,
    /// Start in seconds.
    pub start_s: f64,
    /// End in seconds.
    pub end_s: f64,
}

impl LabelRow {
    /// The span of a label that is to be measured.
    pub fn span(
        &self,
        token: String,
        speaker: String,
        channel: u16,
        vowel: Option<Vowel>,
    ) -> VowelSpan {
        VowelSpan {
            token,
            recording: self.recording.clone(),
            channel,
            speaker,
            word: self.word.clone(),
            label: self.label.clone(),
            vowel,
            start_s: self.start_s,
            end_s: self.end_s,
        }
    }
}

/// What label text held: the lines that can be used, and what is wrong with the others.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Labels {
    /// The usable labels, in the order of the file.
    pub rows: Vec<LabelRow>,
    /// What is wrong with lines that were left out, in the order of the file.
    pub problems: Vec<LineProblem>,
    /// Whether the file names speakers.
    pub names_speakers: bool,
}

/// Reads labels from delimited text: comma, semicolon or tab, a byte order mark or none, any line
/// ends.
///
/// # Errors
/// [`LabelError`] where no line can be understood. What is wrong with a single line is among
/// [`Labels::problems`].
pub fn parse_delimited(bytes: &[u8], columns: &LabelColumns) -> Result<Labels, LabelError> {
    let bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .delimiter(guess_delimiter(bytes))
        .from_reader(bytes);
    let mut lines = LineCounter::new(bytes);
    let mut records = reader.records();
    let header: Vec<String> = match records.next() {
        None => {
            return Err(LabelError::Empty {
                expected: [
                    columns.recording.as_str(),
                    &columns.start_s,
                    &columns.end_s,
                    &columns.label,
                ]
                .join(","),
            });
        }
        Some(Err(_)) => return Err(LabelError::NotUtf8),
        Some(Ok(record)) => record.iter().map(|cell| cell.trim().to_owned()).collect(),
    };
    let places = Places::find(&header, columns)?;
    let mut labels = Labels {
        names_speakers: places.speaker.is_some(),
        ..Labels::default()
    };
    let mut seen: BTreeMap<(String, Option<u16>, u64, u64), u64> = BTreeMap::new();
    for record in records {
        let (line, read) = match record {
            Err(error) => (lines.line_of(error.position()), Err(LabelProblem::NotUtf8)),
            Ok(record) => (
                lines.line_of(record.position()),
                if record.iter().all(|cell| cell.trim().is_empty()) {
                    continue;
                } else if record.len() == header.len() {
                    places.read(&record, columns)
                } else {
                    Err(LabelProblem::Ragged {
                        found: record.len(),
                        expected: header.len(),
                    })
                },
            ),
        };
        let read = read.and_then(|row| {
            let span = (
                row.recording.clone(),
                row.channel,
                row.start_s.to_bits(),
                row.end_s.to_bits(),
            );
            match seen.get(&span) {
                Some(&first) => Err(LabelProblem::Duplicate { first }),
                None => {
                    seen.insert(span, line);
                    Ok(row)
                }
            }
        });
        match read {
            Ok(row) => labels.rows.push(LabelRow { line, ..row }),
            Err(problem) => labels.problems.push(LineProblem { line, problem }),
        }
    }
    Ok(labels)
}

/// Where the columns stand.
struct Places {
    recording: usize,
    start_s: usize,
    end_s: usize,
    label: usize,
    word: Option<usize>,
    speaker: Option<usize>,
    channel: Option<usize>,
}

impl Places {
    fn find(header: &[String], columns: &LabelColumns) -> Result<Self, LabelError> {
        let own = LabelColumns::default();
        let place = |name: &str| header.iter().position(|column| column == name);
        let missing = |name: &str| LabelError::MissingColumn {
            column: name.to_owned(),
            found: header.join(","),
        };
        let needed = |name: &str| place(name).ok_or_else(|| missing(name));
        let optional = |name: &str, own: &str| match place(name) {
            None if name != own => Err(missing(name)),
            place => Ok(place),
        };
        Ok(Self {
            recording: needed(&columns.recording)?,
            start_s: needed(&columns.start_s)?,
            end_s: needed(&columns.end_s)?,
            label: needed(&columns.label)?,
            word: optional(&columns.word, &own.word)?,
            speaker: optional(&columns.speaker, &own.speaker)?,
            channel: optional(&columns.channel, &own.channel)?,
        })
    }

    /// One line; its number is filled in by the caller.
    fn read(
        &self,
        record: &csv::StringRecord,
        columns: &LabelColumns,
    ) -> Result<LabelRow, LabelProblem> {
        let cell = |at: usize| record.get(at).unwrap_or_default().trim();
        let optional = |at: Option<usize>| at.map(cell).filter(|text| !text.is_empty());
        let recording = cell(self.recording);
        if recording.is_empty() {
            return Err(LabelProblem::NoRecording);
        }
        if self.speaker.is_some() && optional(self.speaker).is_none() {
            return Err(LabelProblem::NoSpeaker);
        }
        let start_s = seconds(&columns.start_s, cell(self.start_s))?;
        let end_s = seconds(&columns.end_s, cell(self.end_s))?;
        if end_s < start_s {
            return Err(LabelProblem::Reversed { start_s, end_s });
        }
        if end_s == start_s {
            return Err(LabelProblem::NoLength { at_s: start_s });
        }
        let channel = match optional(self.channel) {
            None => None,
            Some(text) => match text.parse::<u16>() {
                Ok(number) if number > 0 => Some(number),
                _ => {
                    return Err(LabelProblem::NoChannel {
                        column: columns.channel.clone(),
                        found: text.to_owned(),
                    });
                }
            },
        };
        Ok(LabelRow {
            line: 0,
            recording: recording.to_owned(),
            channel,
            speaker: optional(self.speaker).map(str::to_owned),
            word: optional(self.word).map(str::to_owned),
            label: cell(self.label).to_owned(),
            start_s,
            end_s,
        })
    }
}

fn seconds(column: &str, text: &str) -> Result<f64, LabelProblem> {
    match text.parse::<f64>() {
        Ok(found_s) if found_s.is_finite() && found_s < 0.0 => Err(LabelProblem::Negative {
            column: column.to_owned(),
            found_s,
        }),
        // Positive zero for the negative one, so that equal times are equal bits.
        Ok(found_s) if found_s.is_finite() => Ok(found_s + 0.0),
        _ => {
            let (column, found) = (column.to_owned(), text.to_owned());
            let with_point = text.replacen(',', ".", 1);
            Err(if text.contains(',') && with_point.parse::<f64>().is_ok() {
                LabelProblem::DecimalComma { column, found }
            } else {
                LabelProblem::NotANumber { column, found }
            })
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn parse(text: &str) -> Labels {
        parse_delimited(text.as_bytes(), &LabelColumns::default()).expect("a header")
    }

    #[test]
    fn labels_come_in_whole() {
        let labels = parse(
            "\u{feff}recording;start_s;end_s;label;word;speaker;channel\r\n\
             a.wav;0.25;0.5;iy;\"see; here\";s1;2\r\n\
             a.wav;0.5;0.75;h#;;s1;\r\n",
        );
        assert_eq!(labels.problems, []);
        assert!(labels.names_speakers);
        assert_eq!(
            labels.rows[0],
            LabelRow {
                line: 2,
                recording: "a.wav".to_owned(),
                channel: Some(2),
                speaker: Some("s1".to_owned()),
                word: Some("see; here".to_owned()),
                label: "iy".to_owned(),
                start_s: 0.25,
                end_s: 0.5,
            }
        );
        assert_eq!(labels.rows[1].word, None);
        assert_eq!(labels.rows[1].channel, None);
    }

    #[test]
    fn every_bad_line_is_told_with_its_number_and_stops_nothing() {
        let labels = parse(
            "recording,start_s,end_s,label,channel\n\
             a.wav,0.1,0.2,i,\n\
             a.wav,0.3,0.2,i,\n\
             a.wav,0.3,0.3,i,\n\
             a.wav,-0.1,0.3,i,\n\
             a.wav,x,0.3,i,\n\
             a.wav,\"0,25\",0.3,i,\n\
             a.wav,0.1,0.2,u,\n\
             ,0.1,0.2,u,\n\
             a.wav,0.1,0.2\n\
             a.wav,0.1,0.2,u,0\n\
             a.wav,nan,0.2,u,\n\
             \n\
             a.wav,0.4,0.5,u,\n",
        );
        let found: Vec<(u64, String)> = labels
            .problems
            .iter()
            .map(|at| (at.line, at.problem.to_string()))
            .collect();
        let found: Vec<(u64, &str)> = found.iter().map(|(line, text)| (*line, &**text)).collect();
        assert_eq!(
            found,
            [
                (3, "the span ends at 0.2 s before it begins at 0.3 s"),
                (
                    4,
                    "the span begins and ends at 0.3 s; expected a length above 0"
                ),
                (5, "`start_s` is -0.1; expected 0 or later"),
                (6, "`start_s` is `x`; expected seconds, as in `1.25`"),
                (
                    7,
                    "`start_s` is `0,25`; expected a decimal point, not a comma"
                ),
                (8, "the same recording and span as in line 2"),
                (9, "no recording named; expected a file name"),
                (10, "found 3 cells; expected 5, as in the header"),
                (11, "`channel` is `0`; expected a channel number, from 1"),
                (12, "`start_s` is `nan`; expected seconds, as in `1.25`"),
            ]
        );
        assert_eq!(labels.rows.len(), 2);
        assert_eq!(labels.rows[1].line, 14);
    }

    #[test]
    fn columns_can_have_other_names_and_must_then_be_there() {
        let columns = LabelColumns {
            recording: "file".to_owned(),
            speaker: "who".to_owned(),
            ..LabelColumns::default()
        };
        let text = "file,start_s,end_s,label,who\na.wav,0,1,i,s\n";
        let labels = parse_delimited(text.as_bytes(), &columns).expect("labels");
        assert_eq!(labels.rows[0].speaker.as_deref(), Some("s"));
        assert_eq!(
            parse_delimited(b"file,start_s,end_s,label\n", &columns),
            Err(LabelError::MissingColumn {
                column: "who".to_owned(),
                found: "file,start_s,end_s,label".to_owned(),
            })
        );
        assert!(matches!(
            parse_delimited(b"", &columns),
            Err(LabelError::Empty { .. })
        ));
    }

    #[test]
    fn bytes_that_are_no_text_have_a_line() {
        let text = b"recording,start_s,end_s,label\na.wav,0,1,i\na.wav,1,2,\xE9\na.wav,2,3,u\n";
        let labels = parse_delimited(text, &LabelColumns::default()).expect("labels");
        assert_eq!(labels.rows.len(), 2);
        assert_eq!(
            labels.problems,
            [LineProblem {
                line: 3,
                problem: LabelProblem::NotUtf8
            }]
        );
    }
}
