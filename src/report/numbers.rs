//! Numbers as text for people.

/// A true minus sign, as wide as a plus.
const MINUS: &str = "\u{2212}";

/// With `digits` decimals, and a true minus sign.
pub(super) fn plain(value: f64, digits: usize) -> String {
    let text = format!("{value:.digits$}");
    match text.strip_prefix('-') {
        // Rounded to nothing, a sign would be noise.
        Some(rest) if rest.chars().all(|c| c == '0' || c == '.') => rest.to_owned(),
        Some(rest) => format!("{MINUS}{rest}"),
        None => text,
    }
}

/// As [`plain`], with a plus sign above zero.
pub(super) fn signed(value: f64, digits: usize) -> String {
    let text = plain(value, digits);
    let zero = text.chars().all(|c| c == '0' || c == '.');
    if value > 0.0 && !zero {
        format!("+{text}")
    } else {
        text
    }
}

/// As [`plain`], a dash where there is nothing.
pub(super) fn or_dash(value: Option<f64>, digits: usize) -> String {
    value.map_or_else(|| "–".to_owned(), |v| plain(v, digits))
}

/// An interval: `a to b`.
pub(super) fn interval([low, high]: [f64; 2], digits: usize) -> String {
    format!("{} to {}", plain(low, digits), plain(high, digits))
}

/// A probability of a test.
pub(super) fn p_value(p: f64) -> String {
    match p {
        p if p < 0.0001 => "< 0.0001".to_owned(),
        p if p < 0.001 => format!("{p:.4}"),
        p => format!("{p:.3}"),
    }
}

/// `part` of `whole` in percent; a dash for nothing of nothing.
pub(super) fn percent(part: usize, whole: usize) -> String {
    if whole == 0 {
        return "–".to_owned();
    }
    let share = 100.0 * part as f64 / whole as f64;
    // 100 is said only of all, 0 only of none.
    match share {
        s if part < whole && s > 99.9 => "over 99.9 %".to_owned(),
        s if part > 0 && s < 0.1 => "under 0.1 %".to_owned(),
        s if part == whole || part == 0 => format!("{s:.0} %"),
        s => format!("{s:.1} %"),
    }
}

/// `1 token`, `2 tokens`.
pub(super) fn counted(count: usize, one: &str, many: &str) -> String {
    format!("{count} {}", if count == 1 { one } else { many })
}

/// `a`, `a and b`, `a, b and c`.
pub(super) fn listed(items: &[String]) -> String {
    match items {
        [] => String::new(),
        [one] => one.clone(),
        [first @ .., last] => format!("{} and {last}", first.join(", ")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn signs_and_rounding() {
        assert_eq!(plain(-12.4, 0), "−12");
        assert_eq!(plain(-0.2, 0), "0");
        assert_eq!(signed(0.2, 0), "0");
        assert_eq!(signed(12.0, 1), "+12.0");
        assert_eq!(interval([-3.2, 40.0], 0), "−3 to 40");
    }

    #[test]
    fn shares_never_claim_all_or_none() {
        assert_eq!(percent(9_999, 10_000), "over 99.9 %");
        assert_eq!(percent(1, 10_000), "under 0.1 %");
        assert_eq!(percent(3, 3), "100 %");
        assert_eq!(percent(0, 3), "0 %");
        assert_eq!(percent(1, 3), "33.3 %");
        assert_eq!(percent(0, 0), "–");
    }

    #[test]
    fn lists() {
        let items: Vec<String> = ["a", "b", "c"].map(str::to_owned).into();
        assert_eq!(listed(&items), "a, b and c");
        assert_eq!(listed(&items[..1]), "a");
    }
}
