//! The tables the program brings.

use super::ReferenceTable;

/// Name and text of every table in `reference-tables/`.
const TABLES: [(&str, &str); 9] = [
    (
        "peterson-barney-1952",
        include_str!("../../reference-tables/peterson-barney-1952.csv"),
    ),
    (
        "hillenbrand-1995",
        include_str!("../../reference-tables/hillenbrand-1995.csv"),
    ),
    (
        "hillenbrand-1995-all-tokens",
        include_str!("../../reference-tables/hillenbrand-1995-all-tokens.csv"),
    ),
    (
        "hillenbrand-1995-movement",
        include_str!("../../reference-tables/hillenbrand-1995-movement.csv"),
    ),
    (
        "hagiwara-1997",
        include_str!("../../reference-tables/hagiwara-1997.csv"),
    ),
    (
        "deterding-1997",
        include_str!("../../reference-tables/deterding-1997.csv"),
    ),
    (
        "dutch-1973",
        include_str!("../../reference-tables/dutch-1973.csv"),
    ),
    (
        "eklund-traunmuller-1997",
        include_str!("../../reference-tables/eklund-traunmuller-1997.csv"),
    ),
    (
        "bradlow-1995",
        include_str!("../../reference-tables/bradlow-1995.csv"),
    ),
];

/// Names of the tables, in the order they are listed.
pub const NAMES: [&str; TABLES.len()] = {
    let mut names = [""; TABLES.len()];
    let mut n = 0;
    while n < TABLES.len() {
        names[n] = TABLES[n].0;
        n += 1;
    }
    names
};

/// The table of a name, or `None` where there is none.
///
/// The texts are compiled in and the tests parse each, so a table that is named is there.
pub fn shipped(name: &str) -> Option<ReferenceTable> {
    let (name, text) = TABLES.iter().find(|(known, _)| *known == name)?;
    ReferenceTable::parse(name, text).ok()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_table_is_whole() {
        for (name, text) in TABLES {
            let table = ReferenceTable::parse(name, text);
            assert!(table.is_ok(), "{name}: {table:?}");
        }
    }

    /// Mean over a group's rows of one quantity.
    fn mean(table: &ReferenceTable, group: &str, n: usize) -> f64 {
        let values: Vec<f64> = table
            .rows
            .iter()
            .filter(|row| row.group == group)
            .filter_map(|row| row.formant_hz[n])
            .collect();
        values.iter().sum::<f64>() / values.len() as f64
    }

    /// Area of the quadrilateral of i, æ, ɑ and u, in Hz².
    fn area(table: &ReferenceTable, group: &str) -> f64 {
        let corner = |ipa: &str| {
            let row = table
                .rows
                .iter()
                .find(|row| row.group == group && row.vowel.ipa() == ipa)
                .unwrap();
            (row.formant_hz[0].unwrap(), row.formant_hz[1].unwrap())
        };
        let corners = ["i", "æ", "ɑ", "u"].map(corner);
        let twice: f64 = (0..4)
            .map(|n| {
                let ((x1, y1), (x2, y2)) = (corners[n], corners[(n + 1) % 4]);
                x1 * y2 - x2 * y1
            })
            .sum();
        twice.abs() / 2.0
    }

    #[test]
    fn tables_give_the_published_sums() {
        // Vowel-space areas of i, æ, ɑ, u by the shoelace formula, and group means, computed from
        // the publications outside the program.
        let table = shipped("hillenbrand-1995").unwrap();
        for (group, expected) in [
            ("men", 307_260.0),
            ("women", 436_806.0),
            ("children", 473_219.5),
        ] {
            assert!((area(&table, group) - expected).abs() < 0.05, "{group}");
        }
        let table = shipped("peterson-barney-1952").unwrap();
        for (group, expected) in [
            ("men", 411_500.0),
            ("women", 681_650.0),
            ("children", 910_200.0),
        ] {
            assert!((area(&table, group) - expected).abs() < 0.05, "{group}");
        }
        let table = shipped("hillenbrand-1995-all-tokens").unwrap();
        for (group, f1, f2, f3) in [
            ("men", 523.6, 1508.1, 2517.2),
            ("women", 616.9, 1763.2, 2866.0),
        ] {
            // Rows are means over nearly equal numbers of tokens: a few tenths apart at most, in F3
            // some hertz, where tokens without F3 are left out.
            assert!((mean(&table, group, 0) - f1).abs() < 0.5, "{group}");
            assert!((mean(&table, group, 1) - f2).abs() < 3.0, "{group}");
            assert!((mean(&table, group, 2) - f3).abs() < 15.0, "{group}");
        }
    }

    #[test]
    fn groups_become_speakers() {
        let table = shipped("hillenbrand-1995-movement").unwrap();
        let observations = table.observations();
        assert_eq!(observations.len(), 36);
        let first = &observations[0];
        assert_eq!((first.speaker.as_str(), first.track.len()), ("men", 3));
        assert_eq!(first.formant_hz, first.track[1].1);
        assert_eq!(table.groups(), ["men", "women", "children"]);
        assert_eq!(table.vowels().len(), 12);
        assert!(shipped("nobody-1900").is_none());
    }
}
