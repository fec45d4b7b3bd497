//! The code keeps to the map in `DEVELOPERS.md`: who may import whom, who may touch the disk, who
//! may print.
//!
//! The sources are read as text with comments, strings and characters blanked, so that only code
//! counts.

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::{Path, PathBuf};

/// Rooms that may touch disk, environment, processes and clocks.
const OUTWARD: [&str; 4] = ["files", "survey", "review", "cli"];

/// What only [`OUTWARD`] rooms may name.
const OUTWARD_PATHS: [&str; 11] = [
    "std::fs",
    "std::env",
    "std::net",
    "std::process",
    "std::time",
    "std::io::stdin",
    "File::open",
    "File::create",
    ".exists()",
    ".is_dir()",
    ".is_file()",
];

/// What only `cli` may name.
const PRINTING: [&str; 7] = [
    "println!",
    "print!",
    "eprintln!",
    "eprint!",
    "stdout()",
    "stderr()",
    "dbg!",
];

/// What no code that ships may hold.
const UNFINISHED: [&str; 4] = [".unwrap()", "todo!", "unimplemented!", "dbg!"];

/// One source file, ready to be searched.
struct Source {
    path: PathBuf,
    room: String,
    /// Code that ships: comments, strings, characters and test modules blanked.
    shipped: String,
    /// All code: comments, strings and characters blanked.
    code: String,
}

#[test]
fn rooms_import_only_what_stands_above_them() {
    let allowed = import_table();
    for source in sources() {
        if source.room == "lib" || source.room == "main" {
            continue;
        }
        let may = allowed.get(&source.room).unwrap_or_else(|| {
            panic!(
                "the room `{}` is not in the table of DEVELOPERS.md",
                source.room
            )
        });
        for imported in imported_rooms(&source.code) {
            assert!(
                imported == source.room || may.contains(&imported),
                "{}: `{}` may not import `{imported}`; the table of DEVELOPERS.md allows {may:?}",
                source.path.display(),
                source.room,
            );
        }
    }
}

#[test]
fn the_table_has_every_room_once_and_points_up_only() {
    let order = table_rows();
    let names: Vec<&String> = order.iter().map(|(room, _)| room).collect();
    let declared = declared_rooms();
    let mut listed: Vec<String> = names.iter().map(|name| (*name).clone()).collect();
    listed.sort();
    let mut sorted = declared.clone();
    sorted.sort();
    assert_eq!(listed, sorted, "the table and `lib.rs` name the same rooms");
    for (at, (room, imports)) in order.iter().enumerate() {
        for imported in imports {
            let place = names.iter().position(|name| *name == imported);
            assert!(
                place.is_some_and(|place| place < at),
                "`{room}` imports `{imported}`, which does not stand above it in the table"
            );
        }
    }
}

#[test]
fn only_outward_rooms_reach_outside() {
    for source in sources() {
        if OUTWARD.contains(&source.room.as_str()) || source.room == "main" {
            continue;
        }
        let flat = expand_groups(&source.shipped);
        for path in OUTWARD_PATHS {
            assert!(
                !flat.contains(path),
                "{}: `{path}` outside of {OUTWARD:?}",
                source.path.display()
            );
        }
    }
}

#[test]
fn only_the_command_line_prints() {
    for source in sources() {
        if source.room == "cli" {
            continue;
        }
        for word in PRINTING {
            assert!(
                !contains_word(&source.shipped, word),
                "{}: `{word}` outside of `cli`",
                source.path.display()
            );
        }
    }
}

#[test]
fn nothing_unfinished_ships() {
    for source in sources() {
        for word in UNFINISHED {
            assert!(
                !contains_word(&source.shipped, word),
                "{}: `{word}` in code that ships",
                source.path.display()
            );
        }
    }
}

/// Rows of the table in `DEVELOPERS.md`, in order: room, rooms it may import. A row may say
/// "everything above".
fn table_rows() -> Vec<(String, BTreeSet<String>)> {
    let text = fs::read_to_string(root().join("DEVELOPERS.md")).expect("DEVELOPERS.md is there");
    let mut rows: Vec<(String, BTreeSet<String>)> = Vec::new();
    let table = text
        .lines()
        .skip_while(|line| !line.starts_with("| room | may import |"))
        .skip(2)
        .take_while(|line| line.starts_with('|'));
    for line in table {
        let cells: Vec<&str> = line.trim_matches('|').split('|').map(str::trim).collect();
        let room = cells[0].trim_matches('`').to_owned();
        let above: BTreeSet<String> = rows.iter().map(|(room, _)| room.clone()).collect();
        let imports = if cells[1] == "everything above" {
            above
        } else {
            cells[1]
                .split_whitespace()
                .map(|name| name.trim_matches('`').to_owned())
                .filter(|name| name != "–")
                .collect()
        };
        rows.push((room, imports));
    }
    assert!(rows.len() > 10, "the table of DEVELOPERS.md was not found");
    rows
}

fn import_table() -> BTreeMap<String, BTreeSet<String>> {
    table_rows().into_iter().collect()
}

fn declared_rooms() -> Vec<String> {
    let text = fs::read_to_string(root().join("src/lib.rs")).expect("lib.rs is there");
    text.lines()
        .filter_map(|line| line.strip_prefix("pub mod ")?.strip_suffix(';'))
        .map(str::to_owned)
        .collect()
}

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn sources() -> Vec<Source> {
    let src = root().join("src");
    let mut paths = Vec::new();
    collect(&src, &mut paths);
    paths.sort();
    // Files that are test modules as a whole: `#[cfg(test)] mod name;` in the file beside them.
    let mut test_files = BTreeSet::new();
    let mut read = Vec::new();
    for path in paths {
        let text = fs::read_to_string(&path).expect("a source file");
        let code = blank_text(&text);
        for name in test_module_files(&code) {
            let folder = path.parent().expect("a folder");
            test_files.insert(folder.join(format!("{name}.rs")));
        }
        read.push((path, code));
    }
    read.into_iter()
        .map(|(path, code)| {
            let inside = path.strip_prefix(&src).expect("below src");
            let first = inside.components().next().expect("a part");
            let first = Path::new(first.as_os_str());
            let shipped = if test_files.contains(&path) {
                String::new()
            } else {
                blank_test_modules(&code)
            };
            Source {
                room: first
                    .file_stem()
                    .expect("a name")
                    .to_string_lossy()
                    .into_owned(),
                path: path.clone(),
                shipped,
                code,
            }
        })
        .collect()
}

fn collect(folder: &Path, paths: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(folder).expect("a folder") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            collect(&path, paths);
        } else if path.extension().is_some_and(|ending| ending == "rs") {
            paths.push(path);
        }
    }
}

/// The rooms named after `crate::`, also in groups (`crate::{a, b::c}`).
fn imported_rooms(code: &str) -> BTreeSet<String> {
    let mut rooms = BTreeSet::new();
    for (at, _) in code.match_indices("crate::") {
        if code[..at].ends_with(|c: char| c.is_alphanumeric() || c == '_' || c == '$') {
            continue;
        }
        let rest = code[at + "crate::".len()..].trim_start();
        if let Some(group) = rest.strip_prefix('{') {
            let mut depth = 0;
            let mut item = String::new();
            for c in group.chars() {
                match c {
                    '{' => depth += 1,
                    '}' if depth == 0 => break,
                    '}' => depth -= 1,
                    ',' if depth == 0 => rooms.extend(first_name(&std::mem::take(&mut item))),
                    _ if depth == 0 => item.push(c),
                    _ => {}
                }
            }
            rooms.extend(first_name(&item));
        } else {
            rooms.extend(first_name(rest));
        }
    }
    rooms
}

fn first_name(path: &str) -> Option<String> {
    let name: String = path
        .trim_start()
        .chars()
        .take_while(|c| c.is_alphanumeric() || *c == '_')
        .collect();
    (!name.is_empty() && name != "self").then_some(name)
}

/// The code with `use std::{a, b};` written as `std::a std::b`, one level deep, after the code
/// itself.
fn expand_groups(code: &str) -> String {
    let mut flat = code.to_owned();
    for (at, _) in code.match_indices("std::{") {
        let group = &code[at + "std::{".len()..];
        let group = group.split("};").next().unwrap_or_default();
        for item in group.split(',') {
            flat.push_str(&format!(" std::{}", item.trim()));
        }
    }
    flat
}

/// Whether `word` stands in the code, not as the tail of a longer name.
fn contains_word(code: &str, word: &str) -> bool {
    code.match_indices(word).any(|(at, _)| {
        word.starts_with('.') || !code[..at].ends_with(|c: char| c.is_alphanumeric() || c == '_')
    })
}

/// Names in `#[cfg(test)] mod name;`.
fn test_module_files(code: &str) -> Vec<String> {
    let mut names = Vec::new();
    for (at, mark) in code.match_indices("#[cfg(test)]") {
        let rest = code[at + mark.len()..].trim_start();
        let rest = rest.strip_prefix("pub(super) ").unwrap_or(rest);
        if let Some(rest) = rest.strip_prefix("mod ")
            && let Some(name) = first_name(rest)
            && rest[name.len()..].trim_start().starts_with(';')
        {
            names.push(name);
        }
    }
    names
}

/// The code without the items that `#[cfg(test)]` stands before.
fn blank_test_modules(code: &str) -> String {
    let mut out = String::new();
    let mut rest = code;
    while let Some(at) = rest.find("#[cfg(test)]") {
        out.push_str(&rest[..at]);
        let item = &rest[at..];
        let end = match (item.find('{'), item.find(';')) {
            (Some(brace), semicolon) if semicolon.is_none_or(|s| brace < s) => {
                brace + matching_brace(&item[brace..])
            }
            (_, Some(semicolon)) => semicolon + 1,
            _ => item.len(),
        };
        rest = &item[end..];
    }
    out.push_str(rest);
    out
}

/// Length of the text up to and with the brace that closes the one it begins with.
fn matching_brace(text: &str) -> usize {
    let mut depth = 0;
    for (at, c) in text.char_indices() {
        match c {
            '{' => depth += 1,
            '}' => {
                depth -= 1;
                if depth == 0 {
                    return at + 1;
                }
            }
            _ => {}
        }
    }
    text.len()
}

/// The text with comments, strings and character literals replaced by spaces.
fn blank_text(text: &str) -> String {
    let chars: Vec<char> = text.chars().collect();
    let mut out = String::with_capacity(text.len());
    let mut at = 0;
    let starts = |at: usize, what: &str| {
        what.chars()
            .enumerate()
            .all(|(n, c)| chars.get(at + n) == Some(&c))
    };
    while at < chars.len() {
        let end = if starts(at, "//") {
            (at..chars.len())
                .find(|&n| chars[n] == '\n')
                .unwrap_or(chars.len())
        } else if starts(at, "/*") {
            let mut n = at + 2;
            while n < chars.len() && !starts(n, "*/") {
                n += 1;
            }
            n + 2
        } else if chars[at] == '"' {
            let mut n = at + 1;
            while n < chars.len() && chars[n] != '"' {
                n += if chars[n] == '\\' { 2 } else { 1 };
            }
            n + 1
        } else if let Some(end) = raw_string_end(&chars, at) {
            end
        } else if let Some(end) = character_end(&chars, at) {
            end
        } else {
            out.push(chars[at]);
            at += 1;
            continue;
        };
        let end = end.min(chars.len());
        for &c in &chars[at..end] {
            out.push(if c == '\n' { '\n' } else { ' ' });
        }
        at = end;
    }
    out
}

fn raw_string_end(chars: &[char], at: usize) -> Option<usize> {
    let before = at.checked_sub(1).map(|n| chars[n]);
    if chars[at] != 'r' || before.is_some_and(|c| (c.is_alphanumeric() && c != 'b') || c == '_') {
        return None;
    }
    let hashes = chars[at + 1..].iter().take_while(|&&c| c == '#').count();
    if chars.get(at + 1 + hashes) != Some(&'"') {
        return None;
    }
    let mut n = at + 2 + hashes;
    while n < chars.len() {
        let closes =
            chars[n] == '"' && chars[n + 1..].iter().take_while(|&&c| c == '#').count() >= hashes;
        if closes {
            return Some(n + 1 + hashes);
        }
        n += 1;
    }
    Some(chars.len())
}

/// The end of a character literal; `None` for a lifetime.
fn character_end(chars: &[char], at: usize) -> Option<usize> {
    if chars[at] != '\'' {
        return None;
    }
    if chars.get(at + 1) == Some(&'\\') {
        let close = (at + 3..chars.len()).find(|&n| chars[n] == '\'')?;
        return Some(close + 1);
    }
    (chars.get(at + 2) == Some(&'\'')).then_some(at + 3)
}

/// The searching itself, held against code made for it: a test that cannot fail is none.
#[test]
fn the_searching_finds_what_it_should() {
    let text = r##"
        // crate::comment
        use crate::{alpha, beta::{self, Inner}, gamma as g};
        const S: &str = "crate::string println!";
        const R: &str = r#"crate::raw "quoted" "#;
        const C: char = '"';
        fn f<'a>(x: &'a str) { crate::delta::call(); eprintln!("x"); }
        #[cfg(test)]
        mod tests { use crate::epsilon; fn g() { x.unwrap() } }
        #[cfg(test)]
        mod oracle;
    "##;
    let code = blank_text(text);
    let rooms: Vec<String> = imported_rooms(&code).into_iter().collect();
    assert_eq!(rooms, ["alpha", "beta", "delta", "epsilon", "gamma"]);
    assert_eq!(test_module_files(&code), ["oracle"]);
    let shipped = blank_test_modules(&code);
    assert!(!shipped.contains("epsilon") && !shipped.contains("unwrap"));
    assert!(contains_word(&shipped, "eprintln!"));
    assert!(!contains_word(&shipped, "println!"));
    assert!(expand_groups("use std::{fs, io};").contains("std::fs"));
}
