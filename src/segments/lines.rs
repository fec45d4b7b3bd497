//! Where the records of a delimited text stand, for messages, and what delimits them.

/// The delimiter of a table with a header: the one of comma, semicolon and tab that stands most
/// often in its first line, comma where there is none.
pub fn guess_delimiter(bytes: &[u8]) -> u8 {
    let header = bytes
        .split(|&b| matches!(b, b'\n' | b'\r'))
        .next()
        .unwrap_or_default();
    let count = |delimiter: u8| header.iter().filter(|&&b| b == delimiter).count();
    let mut best = b',';
    for delimiter in [b';', b'\t'] {
        if count(delimiter) > count(best) {
            best = delimiter;
        }
    }
    best
}

/// Counts lines up to the records of a text, as an editor would.
///
/// The positions the csv reader gives lie before the line end of the record before, and before
/// empty lines; their line numbers are too low there.
#[derive(Debug)]
pub struct LineCounter<'a> {
    bytes: &'a [u8],
    at: usize,
    line: u64,
}

impl<'a> LineCounter<'a> {
    /// Begins at the first line of a text.
    pub fn new(bytes: &'a [u8]) -> Self {
        Self {
            bytes,
            at: 0,
            line: 1,
        }
    }

    /// The line of the record whose position the csv reader gives. Positions must not go back.
    pub fn line_of(&mut self, position: Option<&csv::Position>) -> u64 {
        let target = position.map_or(0, |position| position.byte() as usize);
        while let Some(&byte) = self.bytes.get(self.at) {
            let ends_line = matches!(byte, b'\n' | b'\r');
            if self.at >= target && !ends_line {
                break;
            }
            self.at += 1;
            if byte == b'\r' && self.bytes.get(self.at) == Some(&b'\n') {
                self.at += 1;
            }
            if ends_line {
                self.line += 1;
            }
        }
        self.line
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_are_those_an_editor_shows() {
        for end in ["\n", "\r\n", "\r"] {
            let text = ["a,b", "1,2", "", "\"3", "4\",5", "", "6,7"].join(end);
            let mut lines = LineCounter::new(text.as_bytes());
            let mut reader = csv::ReaderBuilder::new()
                .has_headers(false)
                .from_reader(text.as_bytes());
            let found: Vec<u64> = reader
                .records()
                .map(|record| lines.line_of(record.expect("text").position()))
                .collect();
            assert_eq!(found, [1, 2, 4, 7], "with {end:?}");
        }
    }

    #[test]
    fn the_commonest_delimiter_of_the_header_counts() {
        assert_eq!(guess_delimiter(b"a,b,c;d\n1;2;3;4;5"), b',');
        assert_eq!(guess_delimiter(b"a;b;c,d\r\n"), b';');
        assert_eq!(guess_delimiter(b"a\tb"), b'\t');
        assert_eq!(guess_delimiter(b""), b',');
    }
}
