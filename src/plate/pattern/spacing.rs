//! Crest spacing by transects with what the border cut, beside the spectrum's and that of area over length.

use crate::ground::LengthUnit;
use crate::study::{CrestsFinding, SpectrumFinding};

use super::super::sketch::Sketch;
use super::super::words::{table, verdict_words, words_only};
use super::super::{Figure, Theme, numbers};
use super::survival::{self, Reading, Sign};

/// The curve of spacings square to the crests (Kaplan–Meier) with its quarters, and on the same axis what the
/// spectrum, area over length, and the transects without regard to the border say.
pub fn spacing_survival(
    crests: &CrestsFinding,
    spectrum: &SpectrumFinding,
    unit: LengthUnit,
    width_mm: f64,
    theme: &Theme,
) -> Figure {
    let spacing = &crests.spacing;
    let transects = &spacing.transects;
    if transects.whole + transects.cut == 0 {
        return words_only("No spacing by transects: no crest is long enough to start one.", width_mm, theme);
    }
    let peak = spectrum.spacing.filter(|_| spectrum.defined);
    let [_, median, _] = spacing.quartiles;
    let reading = |name, value: Option<f64>, interval, sign| {
        let value = value.filter(|v| v.is_finite() && *v >= 0.0)?;
        Some(Reading { name, value, interval, sign })
    };
    let readings: Vec<Reading> = [
        reading("spectrum", peak, spectrum.spacing_ci95, Sign::Square),
        reading("transects", median, None, Sign::Own),
        reading("area over length", spacing.stereology, None, Sign::Diamond),
        reading("whole ones only", spacing.uncensored_median, None, Sign::Faint),
    ]
    .into_iter()
    .flatten()
    .collect();
    let mut sketch = Sketch::default();
    let titles = ["crest to crest", "longer, %"];
    let mut y =
        survival::draw(&mut sketch, transects, spacing.quartiles, &readings, titles, unit, width_mm, theme);
    let headline = match median {
        Some(median) => format!("median {}", numbers::length(median, unit, 3)),
        None => "no median: too many transects are cut".to_owned(),
    };
    y += verdict_words(&mut sketch, &headline, &caption(crests), y, width_mm, theme) + 0.8;
    y += table(&mut sketch, &rows(crests, spectrum, unit), y, width_mm, theme);
    sketch.finish(width_mm, y)
}

fn caption(crests: &CrestsFinding) -> String {
    let (spacing, transects) = (&crests.spacing, &crests.spacing.transects);
    let bias = match (spacing.quartiles[1], spacing.uncensored_median) {
        (Some(median), Some(plain)) if median > 0.0 => match signed(100.0 * (plain / median - 1.0)) {
            same if same == "0" => "; those seen whole have the same median".to_owned(),
            more => format!("; those seen whole have a median {more} % off"),
        },
        _ => String::new(),
    };
    format!(
        "{} transects met a crest, {} were cut by border or gap (ticks){bias}",
        numbers::count(transects.whole),
        numbers::count(transects.cut),
    )
}

fn signed(percent: f64) -> String {
    let text = numbers::fixed(percent, 0);
    if percent > 0.0 && text != "0" { format!("+{text}") } else { text }
}

fn rows(crests: &CrestsFinding, spectrum: &SpectrumFinding, unit: LengthUnit) -> Vec<(String, String)> {
    let spacing = &crests.spacing;
    let length = |v: f64| numbers::length(v, unit, 3);
    let mut rows = Vec::new();
    let mut row = |name: &str, value: Option<String>| {
        rows.push((name.to_owned(), value.unwrap_or_else(|| "–".into())));
    };
    let peak = spectrum.spacing.filter(|_| spectrum.defined);
    row("spectrum", peak.map(|s| numbers::length_with_interval(s, spectrum.spacing_ci95, unit)));
    let told = |v: Option<f64>| v.map_or("–".to_owned(), length);
    let [first, median, third] = spacing.quartiles;
    row(
        "transects, quarters",
        first.or(median).or(third).map(|_| format!("{} · {} · {}", told(first), told(median), told(third))),
    );
    row("restricted mean", spacing.restricted_mean.map(length));
    row("whole ones only", spacing.uncensored_median.map(length));
    row("area over length", spacing.stereology.map(length));
    rows
}
