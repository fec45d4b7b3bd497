//! The program as a person meets it: what it says, where it writes, how it ends.

mod recordings;

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

use recordings::folder::{self, Condition};
use tempfile::TempDir;

/// What came of one call.
struct Ended {
    status: i32,
    talk: String,
    data: String,
}

impl Ended {
    /// Every one of `parts` stands in the talk, and a hint with it.
    fn says(&self, status: i32, parts: &[&str]) {
        assert_eq!(self.status, status, "{}", self.talk);
        for part in parts {
            assert!(self.talk.contains(part), "no {part:?} in:\n{}", self.talk);
        }
        assert!(self.talk.contains("hint: "), "no hint in:\n{}", self.talk);
        assert!(!self.talk.contains('\u{1b}'), "colour without a terminal");
    }
}

fn isophone<A: AsRef<std::ffi::OsStr>>(arguments: &[A]) -> Ended {
    let output = Command::new(assert_cmd::cargo::cargo_bin!("isophone"))
        .args(arguments)
        .output()
        .expect("the program starts");
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("UTF-8");
    Ended {
        status: output.status.code().expect("an exit status"),
        talk: text(output.stderr),
        data: text(output.stdout),
    }
}

/// An invented survey: two speakers, every vowel once.
struct Invented {
    home: TempDir,
}

impl Invented {
    fn new() -> Self {
        let home = tempfile::tempdir().expect("a folder");
        let words = folder::survey(Condition::Clean, 2, 1, 7);
        folder::write(&words, &home.path().join("survey")).expect("written");
        Self { home }
    }

    fn folder(&self) -> PathBuf {
        self.home.path().join("survey")
    }

    fn out(&self) -> PathBuf {
        self.home.path().join("out")
    }

    fn measure(&self) -> Ended {
        self.measure_with(&[])
    }

    fn measure_with(&self, options: &[&str]) -> Ended {
        let mut arguments = vec![
            "measure".to_owned(),
            self.folder().display().to_string(),
            "--out".to_owned(),
            self.out().display().to_string(),
        ];
        arguments.extend(options.iter().map(|&option| option.to_owned()));
        isophone(&arguments)
    }

    fn read(&self, name: &str) -> String {
        fs::read_to_string(self.folder().join(name)).expect(name)
    }

    fn write(&self, name: &str, text: &str) {
        fs::write(self.folder().join(name), text).expect(name);
    }

    /// One file of the output.
    fn written(&self, name: &str) -> String {
        fs::read_to_string(self.out().join(name)).expect(name)
    }

    /// Status and reason of every token, as the token table has them.
    fn statuses(&self) -> Vec<(String, String)> {
        let text = self.written("tokens.csv");
        let mut reader = csv::Reader::from_reader(text.as_bytes());
        let header = reader.headers().expect("a header").clone();
        let place = |name: &str| header.iter().position(|column| column == name).expect(name);
        let (status, reason) = (place("status"), place("reason"));
        reader
            .records()
            .map(|row| {
                let row = row.expect("a row");
                (row[status].to_owned(), row[reason].to_owned())
            })
            .collect()
    }

    fn unmeasured(&self) -> usize {
        self.statuses()
            .iter()
            .filter(|(status, _)| status == "unmeasured")
            .count()
    }
}

#[test]
fn a_whole_survey_ends_with_nothing_left_out() {
    let survey = Invented::new();
    let ended = survey.measure();
    assert_eq!(ended.status, 0, "{}", ended.talk);
    assert_eq!(
        ended.data.trim(),
        survey.out().join("tokens.csv").display().to_string()
    );
    let vowels = survey.read("labels.csv").lines().count() - 1;
    assert_eq!(survey.statuses().len(), vowels);
    assert_eq!(survey.unmeasured(), 0);
    // Nine points a token, and 0.2, 0.5 and 0.8 among them.
    let tracks = survey.written("tracks.csv");
    assert_eq!(tracks.lines().count() - 1, 9 * vowels);
    for proportion in [",0.20,", ",0.50,", ",0.80,"] {
        assert!(tracks.contains(proportion), "{proportion}");
    }
    for table in ["tokens.csv", "tracks.csv"] {
        let header = survey
            .written(table)
            .lines()
            .next()
            .expect("a header")
            .to_owned();
        let described: serde_json::Value =
            serde_json::from_str(&survey.written(&format!("{table}-metadata.json"))).expect("JSON");
        let columns = described["tableSchema"]["columns"]
            .as_array()
            .expect("columns");
        let titles: Vec<&str> = columns
            .iter()
            .filter_map(|c| c["titles"].as_str())
            .collect();
        assert_eq!(titles.join(","), header);
    }
}

#[test]
fn the_same_input_gives_the_same_bytes_for_any_number_of_threads() {
    let survey = Invented::new();
    let mut outputs = Vec::new();
    for threads in ["1", "2", "5"] {
        assert_eq!(survey.measure_with(&["--threads", threads]).status, 0);
        let files = ["tokens.csv", "tracks.csv", "run.json"];
        outputs.push(files.map(|name| survey.written(name)));
    }
    assert_eq!(outputs[0], outputs[1]);
    assert_eq!(outputs[0], outputs[2]);
}

#[test]
fn quiet_says_nothing_when_all_is_well() {
    let survey = Invented::new();
    assert_eq!(survey.measure_with(&["--quiet"]).talk, "");
}

#[test]
fn hidden_labels_are_in_no_table() {
    let survey = Invented::new();
    assert_eq!(survey.measure_with(&["--hide-labels"]).status, 0);
    let tokens = survey.written("tokens.csv");
    assert!(
        !tokens.contains("heed") && !tokens.contains(",i,"),
        "{tokens}"
    );
    assert_eq!(survey.unmeasured(), 0);
    assert!(
        survey
            .written("run.json")
            .contains("hidden from the measuring")
    );
}

#[test]
fn a_missing_column_is_named_beside_what_is_there() {
    let survey = Invented::new();
    let labels = survey.read("labels.csv").replacen("end_s", "until", 1);
    survey.write("labels.csv", &labels);
    survey.measure().says(
        2,
        &[
            "labels.csv`: line 1: no column `end_s`",
            "recording,start_s,until,label,word,speaker",
        ],
    );
    // The survey file can say what the column is called.
    survey.write("survey.toml", "[labels.columns]\nend_s = \"until\"\n");
    assert_eq!(survey.measure().status, 0);
}

#[test]
fn labels_without_speakers_say_what_can_be_done() {
    let survey = Invented::new();
    let labels = survey.read("labels.csv").replacen("speaker", "who", 1);
    survey.write("labels.csv", &labels);
    survey
        .measure()
        .says(2, &["no column `speaker`", "speaker_from = \"recording\""]);
    survey.write("survey.toml", "[labels]\nspeaker_from = \"recording\"\n");
    // Every recording is a speaker now, and none of them is in the table of speakers.
    survey.measure().says(1, &["no row for the speaker"]);
    assert_eq!(survey.unmeasured(), 0);
}

#[test]
fn a_label_past_the_end_costs_that_label_only() {
    let survey = Invented::new();
    let labels = survey.read("labels.csv");
    let second = labels.lines().nth(1).expect("a label");
    let recording = second.split(',').next().expect("a name");
    survey.write(
        "labels.csv",
        &format!("{labels}{recording},90.5,90.7,i,heed,s01\n"),
    );
    let line = labels.lines().count() + 1;
    survey.measure().says(
        1,
        &[
            &format!("labels.csv line {line}"),
            "the span ends at 90.7 s; the recording ends at",
        ],
    );
    assert_eq!(survey.unmeasured(), 1);
    let reasons: Vec<String> = survey
        .statuses()
        .into_iter()
        .map(|(_, reason)| reason)
        .collect();
    assert!(reasons.contains(&"outside the recording".to_owned()));
    assert!(
        survey
            .written("run.json")
            .contains("\"label past the end of its recording\": 1")
    );
}

#[test]
fn a_recording_that_is_no_sound_costs_that_recording_only() {
    let survey = Invented::new();
    let name = first_recording(&survey);
    fs::write(
        survey.folder().join("recordings").join(&name),
        "These are notes.",
    )
    .expect("written");
    survey.measure().says(
        1,
        &[
            &format!("recordings/{name}"),
            "not a WAV recording: it begins with `These are no`; expected `RIFF`",
        ],
    );
    assert_eq!(survey.unmeasured(), 1);
}

#[test]
fn a_recording_that_is_not_there_costs_that_recording_only() {
    let survey = Invented::new();
    let name = first_recording(&survey);
    fs::remove_file(survey.folder().join("recordings").join(&name)).expect("removed");
    survey.measure().says(
        1,
        &[
            &format!("recordings/{name}"),
            "no such recording; expected one",
        ],
    );
    assert_eq!(survey.unmeasured(), 1);
}

#[test]
fn a_recording_cut_short_is_measured_as_far_as_it_goes() {
    let survey = Invented::new();
    let name = first_recording(&survey);
    let path = survey.folder().join("recordings").join(&name);
    let bytes = fs::read(&path).expect("read");
    fs::write(&path, &bytes[..bytes.len() - 100]).expect("written");
    let ended = survey.measure();
    ended.says(0, &[&name, "samples per channel; expected"]);
    assert_eq!(survey.unmeasured(), 0);
}

#[test]
fn a_speaker_in_no_table_is_measured_with_empty_columns() {
    let survey = Invented::new();
    let speakers = survey.read("speakers.csv");
    let kept: Vec<&str> = speakers
        .lines()
        .filter(|line| !line.starts_with("s02"))
        .collect();
    survey.write("speakers.csv", &format!("{}\n", kept.join("\n")));
    survey
        .measure()
        .says(1, &["speakers.csv", "no row for the speaker `s02`"]);
    assert_eq!(survey.unmeasured(), 0);
    assert!(survey.written("tokens.csv").contains(",1,s02,,"));
}

#[test]
fn an_empty_folder_is_told_from_one_that_is_not_there() {
    let home = tempfile::tempdir().expect("a folder");
    let run = |folder: &Path| {
        let out = home.path().join("out");
        isophone(&[
            "run".as_ref(),
            folder.as_os_str(),
            "--out".as_ref(),
            out.as_os_str(),
        ])
    };
    let empty = home.path().join("empty");
    fs::create_dir(&empty).expect("made");
    run(&empty).says(
        2,
        &["no `recordings/` in it", "an empty folder", "`labels.csv`"],
    );
    run(&home.path().join("nowhere")).says(2, &["no such folder", "nowhere"]);
    fs::create_dir(empty.join("recordings")).expect("made");
    run(&empty).says(2, &["no `labels.csv` in it; found `recordings/`"]);
    assert!(
        !home.path().join("out").exists(),
        "nothing is written when nothing is done"
    );
}

#[test]
fn an_output_that_cannot_be_written_is_told_before_any_work() {
    let survey = Invented::new();
    fs::write(survey.out(), "a file in the way").expect("written");
    let ended = survey.measure();
    ended.says(2, &["out`: could not make the folder"]);
    assert!(!ended.talk.contains("measured "), "{}", ended.talk);
}

#[test]
fn bad_label_lines_are_told_and_passed_over() {
    let survey = Invented::new();
    let labels = survey.read("labels.csv");
    let name = first_recording(&survey);
    let bad = format!(
        "{name},0.4,0.3,i,heed,s01\n{name},\"0,1\",0.3,i,heed,s01\n{name},0.1,0.2,ʘ̟?,heed,s01\n"
    );
    survey.write("labels.csv", &format!("{labels}{bad}"));
    let line = labels.lines().count() + 1;
    survey.measure().says(
        1,
        &[
            &format!("labels.csv line {line}`: the span ends at 0.3 s before it begins at 0.4 s"),
            "expected a decimal point, not a comma",
            "the label `ʘ̟?` (1 of them",
        ],
    );
    assert_eq!(survey.unmeasured(), 0);
    assert_eq!(survey.statuses().len(), labels.lines().count() - 1);
}

#[test]
fn a_survey_file_that_is_wrong_has_a_place() {
    let survey = Invented::new();
    survey.write("survey.toml", "[labels]\ncolour = \"red\"\n");
    survey.measure().says(
        2,
        &["survey.toml`: line 2, column 1", "unknown field `colour`"],
    );
    survey.write("survey.toml", "[speakers]\ngroup = \"village\"\n");
    survey
        .measure()
        .says(2, &["no speaker column `village`", "`age_sex`"]);
    survey.write(
        "survey.toml",
        "[labels]\nnotation = \"arpabet\"\nvowels = [\"q\"]\n",
    );
    survey
        .measure()
        .says(2, &["none of", "is a vowel", "arpabet"]);
}

#[test]
fn a_model_that_is_none_is_told_before_any_work() {
    let survey = Invented::new();
    let model = survey.home.path().join("my.toml");
    fs::write(&model, "A recipe for plum cake.").expect("written");
    let ended = isophone(&[
        "run".as_ref(),
        survey.folder().as_os_str(),
        "--out".as_ref(),
        survey.out().as_os_str(),
        "--model".as_ref(),
        model.as_os_str(),
    ]);
    ended.says(2, &["my.toml`: not a model file", "`isophone train`"]);
    assert!(!survey.out().exists());
}

#[test]
fn names_that_spreadsheets_would_run_are_defused() {
    let survey = Invented::new();
    for file in ["labels.csv", "speakers.csv"] {
        let text = survey
            .read(file)
            .replace("s01", "=s01")
            .replace("=s01-", "s01-");
        survey.write(file, &text);
    }
    assert_eq!(survey.measure().status, 0);
    let tokens = survey.written("tokens.csv");
    assert!(tokens.contains(",'=s01,"), "{tokens}");
    assert!(!tokens.contains(",=s01"), "{tokens}");
}

fn first_recording(survey: &Invented) -> String {
    let labels = survey.read("labels.csv");
    let line = labels.lines().nth(1).expect("a label");
    line.split(',').next().expect("a name").to_owned()
}
