//! What the verbs share: how to speak, what an end is, what a failure is.

use std::fmt;
use std::io::{self, IsTerminal, Write};
use std::path::Path;

use crate::files::FileError;
use crate::survey::{Finding, Weight};
use crate::tables::TableError;

/// How a verb ended that could do its work.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Outcome {
    /// Everything asked for was done.
    AllDone,
    /// Something was left out, and said.
    SomethingLeftOut,
}

/// Why a verb could not do its work, in words for a person.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Failure {
    message: String,
    hint: Option<String>,
}

impl Failure {
    /// A failure without a hint.
    pub(super) fn new(message: impl fmt::Display) -> Self {
        Self {
            message: message.to_string(),
            hint: None,
        }
    }

    /// The same failure with what a person can do about it.
    pub(super) fn hint(mut self, hint: impl fmt::Display) -> Self {
        self.hint = Some(hint.to_string());
        self
    }

    /// A table that could not be read: the path is added here, once.
    pub(super) fn of_table(path: &Path, error: &TableError) -> Self {
        Self::new(format!("`{}`: {error}", path.display())).hint(error.hint())
    }
}

impl From<FileError> for Failure {
    fn from(error: FileError) -> Self {
        let hint = error.hint();
        Self::new(error).hint(hint)
    }
}

/// Talks to the person at the terminal: results to stdout, talk to stderr.
#[derive(Debug, Clone, Copy)]
pub(super) struct Voice {
    talk: Talk,
    ink: Ink,
}

/// How much is said on the way.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Talk {
    /// How things go, warnings and errors.
    Full,
    /// Warnings and errors.
    WarningsOnly,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Ink {
    Coloured,
    Plain,
}

impl Voice {
    /// As the options, the terminal and `NO_COLOR` ask for.
    pub(super) fn from_environment(talk: Talk) -> Self {
        let no_color = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
        Self {
            talk,
            ink: if io::stderr().is_terminal() && !no_color {
                Ink::Coloured
            } else {
                Ink::Plain
            },
        }
    }

    /// Says how things go.
    pub(super) fn say(&self, text: impl fmt::Display) {
        if self.talk == Talk::Full {
            to_stderr(&format!("{text}\n"));
        }
    }

    /// Says what was left out or is doubtful, with a hint where there is one.
    pub(super) fn warning(&self, text: impl fmt::Display, hint: Option<&str>) {
        self.marked("warning", "33", &text.to_string(), hint);
    }

    /// Says what was found in a survey.
    pub(super) fn finding(&self, finding: &Finding) {
        let (mark, colour) = match finding.kind.weight() {
            Weight::LeftOut => ("left out", "33"),
            Weight::Notice => ("note", "36"),
        };
        self.marked(mark, colour, &finding.to_string(), Some(&finding.hint));
    }

    /// Says why the work could not be done.
    pub(super) fn failure(&self, failure: &Failure) {
        self.marked("error", "31", &failure.message, failure.hint.as_deref());
    }

    /// Gives a result: data, to stdout. A reader that has gone away ends the output quietly.
    ///
    /// # Errors
    /// A failure where stdout cannot be written.
    pub(super) fn give(&self, bytes: &[u8]) -> Result<(), Failure> {
        let mut out = io::stdout().lock();
        match out.write_all(bytes).and_then(|()| out.flush()) {
            Err(error) if error.kind() != io::ErrorKind::BrokenPipe => {
                Err(Failure::new(format!("could not write to stdout: {error}")))
            }
            _ => Ok(()),
        }
    }

    fn marked(&self, mark: &str, colour: &str, text: &str, hint: Option<&str>) {
        let mut told = match self.ink {
            Ink::Coloured => format!("\u{1b}[1;{colour}m{mark}:\u{1b}[0m {text}\n"),
            Ink::Plain => format!("{mark}: {text}\n"),
        };
        if let Some(hint) = hint {
            told.push_str(&format!("  hint: {hint}\n"));
        }
        to_stderr(&told);
    }
}

/// Where stderr is closed there is nobody left to tell.
fn to_stderr(text: &str) {
    let _ = io::stderr().lock().write_all(text.as_bytes());
}
