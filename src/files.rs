//! Reading and writing of files, whole and atomic.
//!
//! With `survey`, `review` and `cli` this is the only room that touches the disk. Errors name the
//! path, what was being done and what the system said.

use std::fs::{self, File};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

/// What the disk refused.
#[derive(Debug, thiserror::Error)]
#[error("`{}`: could not {action}: {source}", path.display())]
pub struct FileError {
    /// Where.
    pub path: PathBuf,
    /// What was being done there, as a verb.
    pub action: &'static str,
    /// What the system said.
    pub source: io::Error,
}

impl FileError {
    fn new(path: &Path, action: &'static str, source: io::Error) -> Self {
        Self {
            path: path.to_owned(),
            action,
            source,
        }
    }

    /// Whether the file is not there, rather than out of reach.
    pub fn is_not_found(&self) -> bool {
        self.source.kind() == io::ErrorKind::NotFound
    }

    /// What a person can do about it.
    pub fn hint(&self) -> &'static str {
        match self.source.kind() {
            io::ErrorKind::NotFound => "is the path right?",
            io::ErrorKind::PermissionDenied | io::ErrorKind::ReadOnlyFilesystem => {
                "who may read and write there? another place can be given"
            }
            io::ErrorKind::StorageFull | io::ErrorKind::QuotaExceeded => {
                "make room on the disk, then give the same command again"
            }
            io::ErrorKind::NotADirectory | io::ErrorKind::AlreadyExists => {
                "a file stands where a folder is needed; give another path"
            }
            io::ErrorKind::IsADirectory => "a folder stands where a file is needed",
            _ => "look at the disk and the path, then give the same command again",
        }
    }
}

/// Reads a whole file.
///
/// # Errors
/// [`FileError`] with the path.
pub fn read(path: &Path) -> Result<Vec<u8>, FileError> {
    fs::read(path).map_err(|source| FileError::new(path, "read it", source))
}

/// Makes a folder and those above it; one that is there is left as it is.
///
/// # Errors
/// [`FileError`] with the path.
pub fn create_folder(path: &Path) -> Result<(), FileError> {
    fs::create_dir_all(path).map_err(|source| FileError::new(path, "make the folder", source))
}

/// Names of the files in a folder and its folders, sorted, as paths from it with `/` between.
///
/// Hidden files and folders (their name begins with a dot) and names that are not UTF-8 are left
/// out.
///
/// # Errors
/// [`FileError`] with the path.
pub fn list_all(folder: &Path) -> Result<Vec<String>, FileError> {
    let mut names = Vec::new();
    list_into(folder, "", &mut names)?;
    names.sort();
    Ok(names)
}

/// Names of what stands directly in a folder, sorted, folders with a `/` at the end.
///
/// # Errors
/// [`FileError`] with the path.
pub fn list_top(folder: &Path) -> Result<Vec<String>, FileError> {
    let wrap = |source| FileError::new(folder, "list it", source);
    let mut names = Vec::new();
    for entry in fs::read_dir(folder).map_err(wrap)? {
        let entry = entry.map_err(wrap)?;
        let mark = if entry.path().is_dir() { "/" } else { "" };
        names.push(format!("{}{mark}", entry.file_name().to_string_lossy()));
    }
    names.sort();
    Ok(names)
}

fn list_into(folder: &Path, prefix: &str, names: &mut Vec<String>) -> Result<(), FileError> {
    let wrap = |source| FileError::new(folder, "list it", source);
    for entry in fs::read_dir(folder).map_err(wrap)? {
        let entry = entry.map_err(wrap)?;
        let Ok(name) = entry.file_name().into_string() else {
            continue;
        };
        if name.starts_with('.') {
            continue;
        }
        // A link to a folder is not followed: it could lead back here.
        if entry.file_type().map_err(wrap)?.is_dir() {
            list_into(&entry.path(), &format!("{prefix}{name}/"), names)?;
        } else if entry.path().is_file() {
            names.push(format!("{prefix}{name}"));
        }
    }
    Ok(())
}

/// Replaces a file whole: a reader sees the old bytes or the new ones, never a part.
///
/// # Errors
/// [`FileError`] with the path; the old file is then untouched.
pub fn write(path: &Path, bytes: &[u8]) -> Result<(), FileError> {
    let mut replacement = Replacement::begin(path)?;
    replacement.append(bytes)?;
    replacement.finish()
}

/// Writes a file that can be made again at any time, without waiting for the disk.
///
/// # Errors
/// [`FileError`] with the path.
pub fn write_remakeable(path: &Path, bytes: &[u8]) -> Result<(), FileError> {
    fs::write(path, bytes).map_err(|source| FileError::new(path, "write it", source))
}

/// A file being written beside the one it will replace.
///
/// Dropped without [`Replacement::finish`], it takes its unfinished file away and leaves the old
/// one untouched.
#[derive(Debug)]
pub struct Replacement {
    path: PathBuf,
    beside: PathBuf,
    /// `None` once finished.
    file: Option<io::BufWriter<File>>,
}

impl Replacement {
    /// Starts to write what will stand at `path`, in the same folder, so that the final renaming
    /// never crosses file systems.
    ///
    /// # Errors
    /// [`FileError`] with the path.
    pub fn begin(path: &Path) -> Result<Self, FileError> {
        let mut name = std::ffi::OsString::from(".");
        name.push(path.file_name().unwrap_or_default());
        name.push(".unfinished");
        let beside = path.with_file_name(name);
        let file =
            File::create(&beside).map_err(|source| FileError::new(path, "write it", source))?;
        Ok(Self {
            path: path.to_owned(),
            beside,
            file: Some(io::BufWriter::new(file)),
        })
    }

    /// Adds bytes at the end.
    ///
    /// # Errors
    /// [`FileError`] with the path.
    pub fn append(&mut self, bytes: &[u8]) -> Result<(), FileError> {
        match &mut self.file {
            Some(file) => file
                .write_all(bytes)
                .map_err(|source| FileError::new(&self.path, "write it", source)),
            None => Ok(()),
        }
    }

    /// Brings everything to the disk and puts it in the place of the old file.
    ///
    /// # Errors
    /// [`FileError`] with the path.
    pub fn finish(mut self) -> Result<(), FileError> {
        let wrap = |source| FileError::new(&self.path, "write it", source);
        if let Some(writer) = self.file.take() {
            let placed = writer
                .into_inner()
                .map_err(io::IntoInnerError::into_error)
                .and_then(|file| file.sync_all())
                .and_then(|()| fs::rename(&self.beside, &self.path));
            if placed.is_err() {
                let _ = fs::remove_file(&self.beside);
            }
            placed.map_err(wrap)?;
            // The renaming itself must survive a power cut; where a folder cannot be opened for
            // that, nothing more can be done.
            if let Some(folder) = self.path.parent()
                && let Ok(folder) = File::open(folder)
            {
                let _ = folder.sync_all();
            }
        }
        Ok(())
    }
}

impl Drop for Replacement {
    fn drop(&mut self) {
        if self.file.take().is_some() {
            let _ = fs::remove_file(&self.beside);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_replacement_is_whole_or_not_at_all() {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("t.csv");
        write(&path, b"old").expect("written");
        {
            let mut half = Replacement::begin(&path).expect("begun");
            half.append(b"new but unfinished").expect("appended");
        }
        assert_eq!(read(&path).expect("read"), b"old");
        write(&path, b"new").expect("written");
        assert_eq!(read(&path).expect("read"), b"new");
        let left = fs::read_dir(folder.path()).expect("listed").count();
        assert_eq!(left, 1, "nothing unfinished stays");
    }

    #[test]
    fn folders_are_listed_in_order_without_what_is_hidden() {
        let folder = tempfile::tempdir().expect("a folder");
        create_folder(&folder.path().join("b")).expect("made");
        create_folder(&folder.path().join(".git")).expect("made");
        for name in ["c.wav", "b/a.wav", "a.wav", ".x", ".git/y"] {
            write(&folder.path().join(name), b"").expect("written");
        }
        let names = list_all(folder.path()).expect("listed");
        assert_eq!(names, ["a.wav", "b/a.wav", "c.wav"]);
    }

    #[test]
    fn errors_name_the_path() {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("missing.wav");
        let error = read(&path).expect_err("not there");
        assert!(error.is_not_found());
        assert!(error.to_string().contains("missing.wav"), "{error}");
        let under_a_file = folder.path().join("f");
        write(&under_a_file, b"").expect("written");
        let error = create_folder(&under_a_file.join("out")).expect_err("a file is in the way");
        assert!(error.to_string().contains("make the folder"), "{error}");
    }
}
