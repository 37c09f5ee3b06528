//! What a cell says: a number, nothing, or something else; and compass points.

/// A cell of a number column.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Cell {
    Number(f64),
    /// Blank, or a word for "no value".
    Absent,
    /// Text that is no number.
    Text,
}

/// Words people write where a value is absent (`VRB`: direction variable).
const ABSENT: &[&str] = &[
    "", "na", "n/a", "nan", "null", "none", "-", "--", "---", "m", "missing", "vrb", "var", "variable", "*",
    "**", "***", "****", "/", "//", "///", "////", ".", "..", "x", "t", "#n/a",
];

pub(super) fn cell(text: &str, decimal_comma: bool) -> Cell {
    let text = text.trim();
    if let Some(value) = parse(text, decimal_comma) {
        return Cell::Number(value);
    }
    if ABSENT.contains(&text.to_lowercase().as_str()) { Cell::Absent } else { Cell::Text }
}

/// A finite number, with a comma for the point where the delimiter allows it.
fn parse(text: &str, decimal_comma: bool) -> Option<f64> {
    let value = if decimal_comma && text.contains(',') {
        text.replacen(',', ".", 1).parse::<f64>()
    } else {
        text.parse::<f64>()
    };
    value.ok().filter(|v| v.is_finite())
}

/// The azimuth of a compass point or a number of degrees.
pub(super) fn sector(text: &str, decimal_comma: bool) -> Option<f64> {
    const POINTS: [&str; 16] =
        ["n", "nne", "ne", "ene", "e", "ese", "se", "sse", "s", "ssw", "sw", "wsw", "w", "wnw", "nw", "nnw"];
    let lower = text.trim().trim_end_matches('°').to_lowercase();
    if let Some(at) = POINTS.iter().position(|p| *p == lower) {
        return Some(22.5 * at as f64);
    }
    parse(lower.trim(), decimal_comma).filter(|deg| (0.0..=360.0).contains(deg))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words_for_nothing_are_absent_and_other_words_are_text() {
        assert_eq!(cell("NA", false), Cell::Absent);
        assert_eq!(cell(" ", false), Cell::Absent);
        assert_eq!(cell("-9999.9", false), Cell::Number(-9999.9));
        assert_eq!(cell("3,5", true), Cell::Number(3.5));
        assert_eq!(cell("3,5", false), Cell::Text);
        assert_eq!(cell("inf", false), Cell::Text);
    }

    #[test]
    fn compass_points_run_clockwise() {
        assert_eq!(sector("E", false), Some(90.0));
        assert_eq!(sector("nnw", false), Some(337.5));
        assert_eq!(sector("247.5°", false), Some(247.5));
        assert_eq!(sector("calm", false), None);
    }
}
