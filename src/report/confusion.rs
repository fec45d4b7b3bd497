//! What was identified as what.

use serde::Serialize;

use crate::compare::Tally;
use crate::vowel::Vowel;

use super::numbers::{percent, plain};
use super::order::shown;

/// The table of identification.
#[derive(Debug, Clone, Serialize)]
pub(super) struct ConfusionView {
    heads: Vec<String>,
    rows: Vec<Row>,
    agreeing: String,
    of: usize,
    model: String,
    reliability: Vec<[String; 4]>,
}

#[derive(Debug, Clone, Serialize)]
struct Row {
    vowel: String,
    cells: Vec<Cell>,
    tokens: usize,
    agreeing: String,
}

#[derive(Debug, Clone, Serialize)]
struct Cell {
    text: String,
    /// Shade, 0 to 5, by its share of the row.
    shade: usize,
    agrees: bool,
    title: String,
}

/// The table; `None` where nothing was identified.
pub(super) fn view(tally: &Tally, model: String) -> Option<ConfusionView> {
    if tally.identified == 0 {
        return None;
    }
    let mut symbols: Vec<Vowel> = tally
        .confusions
        .keys()
        .flat_map(|(a, b)| [a.clone(), b.clone()])
        .collect();
    symbols.sort();
    symbols.dedup();
    let order: Vec<&Vowel> = shown(&symbols).into_iter().map(|v| &symbols[v]).collect();
    let count = |a: &Vowel, b: &Vowel| {
        tally
            .confusions
            .get(&(a.clone(), b.clone()))
            .copied()
            .unwrap_or(0)
    };
    let rows = order
        .iter()
        .filter_map(|label| {
            let tokens: usize = order.iter().map(|b| count(label, b)).sum();
            (tokens > 0).then(|| Row {
                vowel: label.to_string(),
                cells: order
                    .iter()
                    .map(|taken| cell(label, taken, count(label, taken), tokens))
                    .collect(),
                tokens,
                agreeing: percent(count(label, label), tokens),
            })
        })
        .collect();
    let reliability = tally
        .reliability
        .iter()
        .enumerate()
        .filter(|(_, r)| r.tokens > 0)
        .map(|(n, r)| {
            [
                format!("{}–{} %", 10 * n, 10 * (n + 1)),
                r.tokens.to_string(),
                format!("{} %", plain(100.0 * r.stated, 0)),
                format!("{} %", plain(100.0 * r.agreeing, 0)),
            ]
        })
        .collect();
    Some(ConfusionView {
        heads: order.iter().map(|v| v.to_string()).collect(),
        rows,
        agreeing: percent(tally.agreeing, tally.identified),
        of: tally.identified,
        model,
        reliability,
    })
}

fn cell(label: &Vowel, taken: &Vowel, count: usize, tokens: usize) -> Cell {
    let share = count as f64 / tokens as f64;
    let shade = match share {
        0.0 => 0,
        s if s < 0.05 => 1,
        s if s < 0.20 => 2,
        s if s < 0.50 => 3,
        s if s < 0.80 => 4,
        _ => 5,
    };
    Cell {
        text: if count > 0 {
            count.to_string()
        } else {
            String::new()
        },
        shade,
        agrees: label == taken,
        title: format!(
            "labelled {label}, identified as {taken}: {}",
            percent(count, tokens)
        ),
    }
}
