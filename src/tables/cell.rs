//! Single cells: numbers with a fixed number of decimals, text that no spreadsheet runs.

use super::column::Kind;
use super::error::TableError;
use crate::vowel::Vowel;

/// Decimals each kind of number is written with.
///
/// A tenth of a hertz is two orders below the best agreement of two experts (11.7 Hz for F1,
/// Hillenbrand et al. 1995); a microsecond is a twentieth of a sample at 48 kHz, so that given
/// times come back; normalized values carry the six decimals of published worked examples.
pub fn decimals(kind: Kind) -> usize {
    match kind {
        Kind::Text | Kind::Count => 0,
        Kind::Hertz => 1,
        Kind::Seconds => 6,
        Kind::Proportion => 2,
        Kind::Probability => 4,
        Kind::Normalized => 6,
    }
}

/// Rounds to what a cell of this kind can hold, so that a value kept in memory and the same value
/// read back from its table are equal.
pub fn round_to(kind: Kind, value: f64) -> f64 {
    format_number(kind, value).parse().unwrap_or(value)
}

/// Writes a number as its cell: fixed decimals, no exponent, no sign on zero.
///
/// ```
/// use isophone::tables::{Kind, format_number};
/// assert_eq!(format_number(Kind::Hertz, 1502.349), "1502.3");
/// assert_eq!(format_number(Kind::Normalized, -1.0 / 3.0), "-0.333333");
/// assert_eq!(format_number(Kind::Hertz, -0.01), "0.0");
/// ```
pub fn format_number(kind: Kind, value: f64) -> String {
    let text = format!("{value:.*}", decimals(kind));
    match text.strip_prefix('-') {
        Some(digits) if digits.bytes().all(|b| b == b'0' || b == b'.') => digits.to_owned(),
        _ => text,
    }
}

/// Writes a number, or nothing where there is none (or none that is finite).
pub(super) fn optional(kind: Kind, value: Option<f64>) -> String {
    value
        .filter(|v| v.is_finite())
        .map_or_else(String::new, |v| format_number(kind, v))
}

/// Defuses a text cell that a spreadsheet would take for a formula.
///
/// A text cell that begins with `=`, `+`, `-`, `@`, a tab or a carriage return gets an apostrophe
/// in front, unless it is a plain number. A cell that already begins with apostrophes and then one
/// of these gets one more, so that [`unguard`] gives back exactly what was there.
///
/// ```
/// use isophone::tables::{guard, unguard};
/// assert_eq!(guard("=1+2"), "'=1+2");
/// assert_eq!(guard("-7.5"), "-7.5");
/// assert_eq!(unguard(&guard("'@")), "'@");
/// ```
pub fn guard(text: &str) -> String {
    if is_hazard(text) {
        format!("'{text}")
    } else {
        text.to_owned()
    }
}

/// Takes back what [`guard`] did.
pub fn unguard(text: &str) -> &str {
    match text.strip_prefix('\'') {
        Some(rest) if is_hazard(rest) => rest,
        _ => text,
    }
}

fn is_hazard(text: &str) -> bool {
    let bare = text.trim_start_matches('\'');
    let plain_number = bare.len() == text.len() && is_plain_number(bare);
    bare.starts_with(['=', '+', '-', '@', '\t', '\r']) && !plain_number
}

fn is_plain_number(text: &str) -> bool {
    let digits = text.strip_prefix(['-', '+']).unwrap_or(text);
    digits.bytes().any(|b| b.is_ascii_digit())
        && digits.bytes().all(|b| b.is_ascii_digit() || b == b'.')
        && digits.bytes().filter(|&b| b == b'.').count() <= 1
}

/// A cell with its position, on its way to a value.
#[derive(Debug, Clone, Copy)]
pub(super) struct Cell<'a> {
    /// Line it stands in.
    pub(super) line: u64,
    /// Its column.
    pub(super) column: &'a str,
    /// What it holds.
    pub(super) text: &'a str,
}

impl Cell<'_> {
    /// The text without the guard; `None` where empty.
    pub(super) fn optional_text(self) -> Option<String> {
        let text = unguard(self.text);
        (!text.is_empty()).then(|| text.to_owned())
    }

    /// The text without the guard; an error where empty.
    pub(super) fn text(self) -> Result<String, TableError> {
        self.optional_text()
            .ok_or_else(|| self.wrong("a name that is not empty"))
    }

    /// A vowel in IPA; `None` where empty.
    pub(super) fn vowel(self) -> Option<Vowel> {
        self.optional_text().map(|symbol| Vowel::from_ipa(&symbol))
    }

    /// A finite number; `None` where empty or marked as missing (`NA`, `NaN`).
    pub(super) fn number(self) -> Result<Option<f64>, TableError> {
        match self.text.trim() {
            "" | "NA" | "NaN" | "nan" => Ok(None),
            text => match text.parse::<f64>() {
                Ok(value) if value.is_finite() => Ok(Some(value)),
                _ => Err(self.wrong("a number with a decimal point, or an empty cell")),
            },
        }
    }

    /// A number that must be there.
    pub(super) fn required_number(self) -> Result<f64, TableError> {
        self.number()?.ok_or_else(|| self.wrong("a number"))
    }

    /// A number above zero; `None` where empty.
    pub(super) fn positive(self) -> Result<Option<f64>, TableError> {
        match self.number()? {
            Some(value) if value <= 0.0 => {
                Err(self.wrong("a number above 0, or an empty cell where nothing is known"))
            }
            value => Ok(value),
        }
    }

    /// The error of this cell.
    pub(super) fn wrong(self, expected: &'static str) -> TableError {
        TableError::Cell {
            line: self.line,
            column: self.column.to_owned(),
            found: self.text.to_owned(),
            expected,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn guard_is_undone_exactly() {
        for text in [
            "", "a", "=1", "'=1", "''=1", "'", "''", "-", "-3", "'-3", "+4.5", "@", "'@x", "-a",
            "\tx", "1-2", "-1.2.3", "''-3",
        ] {
            let guarded = guard(text);
            assert_eq!(unguard(&guarded), text, "through `{guarded}`");
        }
    }

    #[test]
    fn no_guarded_text_starts_a_formula() {
        for text in ["=SUM(A1)", "+a", "-a", "@x", "\t=1", "\r=1"] {
            assert!(guard(text).starts_with('\''), "{text:?}");
        }
        // A plain number is a number to every spreadsheet.
        assert_eq!(guard("-12.5"), "-12.5");
    }

    #[test]
    fn missing_marks_are_missing_and_words_are_not() {
        let cell = |text| Cell {
            line: 2,
            column: "f1_hz",
            text,
        };
        assert_eq!(cell("").number(), Ok(None));
        assert_eq!(cell("NA").number(), Ok(None));
        assert_eq!(cell(" 512.5 ").number(), Ok(Some(512.5)));
        assert!(cell("512,5").number().is_err());
        assert!(cell("inf").number().is_err());
        assert!(cell("0").positive().is_err());
    }
}
