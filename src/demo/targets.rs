//! Where the vowels of an average man, woman and child are, along the vowel.

use thiserror::Error;

/// The published averages at 20, 50 and 80 %, compiled in.
const TABLE: &str = include_str!("../../reference-tables/hillenbrand-1995-dynamics-20-50-80.csv");

/// A vowel of the invented survey and the word it is said in.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Spoken {
    /// IPA.
    pub(super) ipa: &'static str,
    /// The word.
    pub(super) word: &'static str,
    /// Usual duration of an average man's vowel in seconds (Hillenbrand et al. 1995, Table V).
    pub(super) duration_s: f64,
}

/// The twelve vowels.
pub(super) const VOWELS: [Spoken; 12] = [
    Spoken {
        ipa: "i",
        word: "heed",
        duration_s: 0.243,
    },
    Spoken {
        ipa: "ɪ",
        word: "hid",
        duration_s: 0.192,
    },
    Spoken {
        ipa: "e",
        word: "hayed",
        duration_s: 0.267,
    },
    Spoken {
        ipa: "ɛ",
        word: "head",
        duration_s: 0.189,
    },
    Spoken {
        ipa: "æ",
        word: "had",
        duration_s: 0.278,
    },
    Spoken {
        ipa: "ɑ",
        word: "hod",
        duration_s: 0.267,
    },
    Spoken {
        ipa: "ɔ",
        word: "hawed",
        duration_s: 0.283,
    },
    Spoken {
        ipa: "o",
        word: "hoed",
        duration_s: 0.265,
    },
    Spoken {
        ipa: "ʊ",
        word: "hood",
        duration_s: 0.192,
    },
    Spoken {
        ipa: "u",
        word: "whod",
        duration_s: 0.237,
    },
    Spoken {
        ipa: "ʌ",
        word: "hud",
        duration_s: 0.188,
    },
    Spoken {
        ipa: "ɝ",
        word: "heard",
        duration_s: 0.263,
    },
];

/// Who an average stands for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Group {
    Men,
    Women,
    Children,
}

impl Group {
    const ALL: [Self; 3] = [Self::Men, Self::Women, Self::Children];

    fn in_table(self) -> &'static str {
        match self {
            Self::Men => "men",
            Self::Women => "women",
            Self::Children => "children",
        }
    }
}

/// F1 to F3 in hertz at 20, 50 and 80 % of a vowel.
pub(super) type Path = [[f64; 3]; 3];

/// The averages of every group and vowel.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Targets {
    paths: Vec<Path>,
}

/// Why the table compiled into the program cannot be used.
#[derive(Debug, Error)]
pub enum TargetsError {
    /// A row of the table is not what it should be.
    #[error("the built-in table of averages cannot be read")]
    Row(#[from] csv::Error),
    /// A value is missing.
    #[error("the built-in table of averages has no value for `{vowel}` of `{group}`")]
    Missing {
        /// The vowel.
        vowel: &'static str,
        /// The group.
        group: &'static str,
    },
}

impl Targets {
    /// Averages of `group` for the vowel at `index` of [`VOWELS`].
    pub(super) fn path(&self, group: Group, index: usize) -> Path {
        let row = Group::ALL.iter().position(|g| *g == group).unwrap_or(0);
        self.paths[row * VOWELS.len() + index]
    }
}

#[derive(serde::Deserialize)]
struct Row {
    group: String,
    vowel_ipa: String,
    point: String,
    #[serde(rename = "F1")]
    f1: f64,
    #[serde(rename = "F2")]
    f2: f64,
    #[serde(rename = "F3")]
    f3: f64,
}

/// Reads the built-in table.
///
/// # Errors
/// [`TargetsError`] where the table lacks a value.
pub(super) fn targets() -> Result<Targets, TargetsError> {
    let mut reader = csv::ReaderBuilder::new()
        .comment(Some(b'#'))
        .from_reader(TABLE.as_bytes());
    let rows: Vec<Row> = reader.deserialize().collect::<Result<_, _>>()?;
    let mut paths = Vec::new();
    for group in Group::ALL {
        for vowel in VOWELS {
            let mut path = [[0.0; 3]; 3];
            for (at, point) in path.iter_mut().zip(["20%", "50%", "80%"]) {
                let row = rows.iter().find(|r| {
                    r.group == group.in_table() && r.vowel_ipa == vowel.ipa && r.point == point
                });
                let missing = TargetsError::Missing {
                    vowel: vowel.ipa,
                    group: group.in_table(),
                };
                let row = row.ok_or(missing)?;
                *at = [row.f1, row.f2, row.f3];
            }
            paths.push(path);
        }
    }
    Ok(Targets { paths })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_table_gives_what_is_printed_in_it() {
        let targets = targets().unwrap();
        // Rows `men,i,heed,20%` and `children,ɝ,heard,80%` of the table.
        assert_eq!(targets.path(Group::Men, 0)[0], [346.4, 2311.6, 3009.7]);
        assert_eq!(
            targets.path(Group::Children, 11)[2],
            [542.6, 1814.1, 2181.6]
        );
    }
}
