//! The whole way, and the same way step by step: the tables must not differ.

mod recordings;

use std::fs;
use std::path::Path;
use std::process::Command;

use recordings::folder::{self, Condition};

fn isophone(arguments: &[&str]) {
    let output = Command::new(assert_cmd::cargo::cargo_bin!("isophone"))
        .args(arguments)
        .output()
        .expect("the program starts");
    let talk = String::from_utf8_lossy(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{arguments:?}: {talk}");
}

fn text(path: &Path) -> String {
    fs::read_to_string(path).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
}

#[test]
fn the_steps_by_themselves_give_what_the_whole_run_gives() {
    let home = tempfile::tempdir().expect("a folder");
    let at = |name: &str| home.path().join(name).display().to_string();
    folder::write(
        &folder::survey(Condition::Clean, 4, 1, 11),
        &home.path().join("survey"),
    )
    .expect("written");

    isophone(&["run", &at("survey"), "--out", &at("whole")]);
    isophone(&["measure", &at("survey"), "--out", &at("steps")]);
    let (tokens, tracks) = (at("steps/tokens.csv"), at("steps/tracks.csv"));
    isophone(&["normalize", &tokens, "--out", &at("normalized.csv")]);
    let identified = at("identified.csv");
    isophone(&[
        "identify",
        &at("normalized.csv"),
        "--tracks",
        &tracks,
        "--out",
        &identified,
    ]);

    let whole = home.path().join("whole");
    assert_eq!(text(Path::new(&tracks)), text(&whole.join("tracks.csv")));
    assert_eq!(
        text(Path::new(&identified)),
        text(&whole.join("tokens.csv"))
    );
    for name in ["run.json", "report.html", "tokens.csv-metadata.json"] {
        assert!(!text(&whole.join(name)).is_empty(), "{name}");
    }

    // The page by itself is the page of the run.
    let page = text(&whole.join("report.html"));
    fs::remove_file(whole.join("report.html")).expect("removed");
    isophone(&["report", &whole.display().to_string()]);
    assert_eq!(text(&whole.join("report.html")), page);
}
