//! Where the vowels of an average man, woman and child are, along the vowel.

use thiserror::Error;

use crate::norms;

/// The published averages at 20, 50 and 80 %.
const TABLE: &str = "hillenbrand-1995-movement";

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
    /// The table is not there.
    #[error("the built-in table of averages cannot be read")]
    Table,
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

/// Reads the built-in table.
///
/// # Errors
/// [`TargetsError`] where the table lacks a value.
pub(super) fn targets() -> Result<Targets, TargetsError> {
    let table = norms::shipped(TABLE).ok_or(TargetsError::Table)?;
    let mut paths = Vec::new();
    for group in Group::ALL {
        for vowel in VOWELS {
            let mut path = [[0.0; 3]; 3];
            for (at, point) in path.iter_mut().zip([0.2, 0.5, 0.8]) {
                let row = table.rows.iter().find(|r| {
                    r.group == group.in_table()
                        && r.vowel.ipa() == vowel.ipa
                        && r.proportion == Some(point)
                });
                let missing = TargetsError::Missing {
                    vowel: vowel.ipa,
                    group: group.in_table(),
                };
                match row.map(|row| row.formant_hz) {
                    Some([Some(f1), Some(f2), Some(f3)]) => *at = [f1, f2, f3],
                    _ => return Err(missing),
                }
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
        // Rows `men,i,heed,0.2` and `children,ɝ,heard,0.8` of the table.
        assert_eq!(targets.path(Group::Men, 0)[0], [346.4, 2311.6, 3009.7]);
        assert_eq!(
            targets.path(Group::Children, 11)[2],
            [542.6, 1814.1, 2181.6]
        );
    }
}
