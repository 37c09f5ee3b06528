//! How long crests are, those that leave the patch counted for what they are.

use crate::ground::LengthUnit;
use crate::study::CrestsFinding;

use super::super::sketch::Sketch;
use super::super::words::{length_ruler, verdict_words, words_only};
use super::super::{Figure, Theme, numbers};
use super::survival::{self, Reading, Sign};

/// The curve of crest lengths (Kaplan–Meier) with its quarters; the mean as far as seen, the mean were lengths
/// exponential, and the plain one.
pub fn crest_lengths(crests: &CrestsFinding, unit: LengthUnit, width_mm: f64, theme: &Theme) -> Figure {
    let lengths = &crests.numbers.lengths;
    if lengths.whole + lengths.cut == 0 {
        return words_only("No crest lengths: there is no crest.", width_mm, theme);
    }
    // Where every crest is cut the curve tells no mean.
    let seen = lengths.restricted_mean().filter(|_| lengths.whole > 0);
    let exponential = lengths.exponential_mean();
    let reading = |name, value: Option<f64>, sign| {
        let value = value.filter(|v| v.is_finite())?;
        Some(Reading { name, value, interval: None, sign })
    };
    let readings: Vec<Reading> = [
        reading("restricted mean", seen, Sign::Own),
        reading("if exponential", exponential, Sign::Diamond),
        reading("mean inside", crests.numbers.plain_mean_length, Sign::Faint),
    ]
    .into_iter()
    .flatten()
    .collect();
    let mut sketch = Sketch::default();
    let quarters = [0.25, 0.5, 0.75].map(|p| lengths.quantile(p));
    let titles = ["crest length", "longer, %"];
    let mut y = survival::draw(&mut sketch, lengths, quarters, &readings, titles, unit, width_mm, theme);
    // All in one unit.
    let most = [seen, exponential, Some(lengths.longest)].into_iter().flatten().fold(0.0, f64::max);
    let (per, symbol) = length_ruler(most, unit);
    let told = |v: Option<f64>| {
        v.map_or("–".to_owned(), |v| format!("{} {symbol}", numbers::significant(v / per, 3)))
    };
    let headline = seen.map_or("every crest is cut: no mean".to_owned(), |_| format!("mean {}", told(seen)));
    let caption = format!(
        "{} crests seen whole, {} cut by border or gap (ticks) · median {} · if exponential {} · plain mean of what lies inside {}",
        numbers::count(lengths.whole),
        numbers::count(lengths.cut),
        told(quarters[1]),
        told(exponential),
        told(crests.numbers.plain_mean_length),
    );
    y += verdict_words(&mut sketch, &headline, &caption, y, width_mm, theme);
    sketch.finish(width_mm, y)
}
