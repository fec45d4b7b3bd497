//! What a survey's folder holds, and which file a label means.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};

use unicode_normalization::UnicodeNormalization;

use crate::files::{self, FileError};

/// The recordings of a survey, by the names labels may call them.
#[derive(Debug, Clone, Default)]
pub(super) struct Recordings {
    folder: PathBuf,
    /// File names, sorted.
    names: BTreeSet<String>,
    /// File names by their canonical Unicode form.
    by_canonical: BTreeMap<String, String>,
    /// File names by their canonical form without the ending; `None` where several share it.
    by_stem: BTreeMap<String, Option<String>>,
}

impl Recordings {
    /// Looks what is there, in the folder and its folders.
    pub(super) fn find(folder: &Path) -> Result<Self, FileError> {
        let mut found = Self {
            folder: folder.to_owned(),
            ..Self::default()
        };
        for name in files::list_all(folder)? {
            found.add(name);
        }
        Ok(found)
    }

    fn add(&mut self, name: String) {
        let canonical = canonical(&name);
        self.by_stem
            .entry(stem(&canonical).to_owned())
            .and_modify(|only| *only = None)
            .or_insert_with(|| Some(name.clone()));
        self.by_canonical.insert(canonical, name.clone());
        self.names.insert(name);
    }

    /// The file a label means: the one of that name, else the one whose name is written the same
    /// in Unicode, else the only one that has it as its name without the ending.
    pub(super) fn resolve(&self, name: &str) -> Option<&str> {
        if let Some(name) = self.names.get(name) {
            return Some(name);
        }
        let canonical = canonical(name);
        let by_stem = || self.by_stem.get(&canonical).and_then(Option::as_ref);
        self.by_canonical
            .get(&canonical)
            .or_else(by_stem)
            .map(String::as_str)
    }

    /// Where a file is.
    pub(super) fn path(&self, file_name: &str) -> PathBuf {
        self.folder.join(file_name)
    }

    /// All files, sorted by name.
    pub(super) fn names(&self) -> impl Iterator<Item = &str> {
        self.names.iter().map(String::as_str)
    }
}

/// A name without its ending.
pub(super) fn stem(name: &str) -> &str {
    let last = name.rfind('/').map_or(0, |at| at + 1);
    match name[last..].rfind('.') {
        Some(at) if at > 0 => &name[..last + at],
        _ => name,
    }
}

fn canonical(name: &str) -> String {
    name.replace('\\', "/").nfc().collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_label_finds_its_file_by_name_by_letters_and_by_stem() {
        let mut recordings = Recordings::default();
        for name in ["a.wav", "day1/b.wav", "cafe\u{301}.wav", "d.wav", "d.txt"] {
            recordings.add(name.to_owned());
        }
        assert_eq!(recordings.resolve("a.wav"), Some("a.wav"));
        assert_eq!(recordings.resolve("a"), Some("a.wav"));
        assert_eq!(recordings.resolve("day1\\b.wav"), Some("day1/b.wav"));
        assert_eq!(recordings.resolve("caf\u{e9}.wav"), Some("cafe\u{301}.wav"));
        assert_eq!(recordings.resolve("d"), None);
        assert_eq!(recordings.resolve("b.wav"), None);
    }

    #[test]
    fn stems_lose_the_ending_only() {
        assert_eq!(stem("x.y/a.b.wav"), "x.y/a.b");
        assert_eq!(stem(".hidden"), ".hidden");
        assert_eq!(stem("x.y/z"), "x.y/z");
    }
}
