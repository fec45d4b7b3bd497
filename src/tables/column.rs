//! What a column is, and the W3C description of a table made of them.

use std::borrow::Cow;

use serde_json::{Value, json};

/// What the cells of a column hold.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// Words.
    Text,
    /// A whole number.
    Count,
    /// Hertz.
    Hertz,
    /// Seconds.
    Seconds,
    /// A share of a duration, 0 to 1.
    Proportion,
    /// A probability, 0 to 1.
    Probability,
    /// A normalized value; its unit is the method's.
    Normalized,
}

/// One column of a table.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Column {
    /// Its name in the header.
    pub name: Cow<'static, str>,
    /// What it holds.
    pub kind: Kind,
    /// One sentence about it.
    pub description: Cow<'static, str>,
}

impl Column {
    /// A column known when the program was written.
    pub(super) const fn fixed(name: &'static str, kind: Kind, description: &'static str) -> Self {
        Self {
            name: Cow::Borrowed(name),
            kind,
            description: Cow::Borrowed(description),
        }
    }
}

/// The CSVW description of a table, as the bytes of its `-metadata.json`.
///
/// `key` names the columns that together identify a row.
///
/// *Source*: W3C Recommendation "Metadata Vocabulary for Tabular Data", 17 December 2015.
pub fn describe(file_name: &str, title: &str, columns: &[Column], key: &[&str]) -> Vec<u8> {
    let columns: Vec<Value> = columns.iter().map(describe_column).collect();
    let description = json!({
        "@context": "http://www.w3.org/ns/csvw",
        "url": file_name,
        "dc:title": title,
        "dialect": { "delimiter": ",", "header": true, "encoding": "utf-8" },
        "tableSchema": { "columns": columns, "primaryKey": key },
    });
    // Maps of serde_json are sorted by key, so the same table has the same bytes.
    format!("{description:#}\n").into_bytes()
}

fn describe_column(column: &Column) -> Value {
    let datatype = match column.kind {
        Kind::Text => json!("string"),
        Kind::Count => json!({ "base": "integer", "minimum": 0 }),
        Kind::Hertz | Kind::Seconds | Kind::Normalized => json!("decimal"),
        Kind::Proportion | Kind::Probability => {
            json!({ "base": "decimal", "minimum": 0, "maximum": 1 })
        }
    };
    let mut described = json!({
        "name": column_identifier(&column.name),
        "titles": column.name,
        "datatype": datatype,
        "null": "",
        "dc:description": column.description,
    });
    let unit = match column.kind {
        Kind::Hertz => Some("Hz"),
        Kind::Seconds => Some("s"),
        _ => None,
    };
    if let Some(unit) = unit {
        described["schema:unitText"] = json!(unit);
    }
    described
}

/// The name as the vocabulary allows it: letters, digits and percent-encoded bytes, no leading `_`.
fn column_identifier(name: &str) -> String {
    let mut identifier = String::new();
    for byte in name.bytes() {
        let plain = byte.is_ascii_alphanumeric() || (byte == b'_' && !identifier.is_empty());
        if plain {
            identifier.push(char::from(byte));
        } else {
            identifier.push_str(&format!("%{byte:02X}"));
        }
    }
    identifier
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_description_names_every_column_in_order() {
        let columns = [
            Column::fixed("token", Kind::Text, "Name."),
            Column::fixed("f1_hz", Kind::Hertz, "First formant."),
            Column {
                name: Cow::Borrowed("age group"),
                kind: Kind::Text,
                description: Cow::Borrowed("As given."),
            },
        ];
        let bytes = describe("t.csv", "Tokens", &columns, &["token"]);
        let read: Value = serde_json::from_slice(&bytes).expect("valid JSON");
        let named = &read["tableSchema"]["columns"];
        assert_eq!(named[0]["name"], "token");
        assert_eq!(named[1]["schema:unitText"], "Hz");
        assert_eq!(named[2]["name"], "age%20group");
        assert_eq!(named[2]["titles"], "age group");
        assert_eq!(read["tableSchema"]["primaryKey"][0], "token");
    }
}
