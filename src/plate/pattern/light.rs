//! A trend against the light: how near it lies to what light alone would favour, and what is left of it.

use crate::ground::Point;
use crate::study::{LightFinding, TrendFinding};

use super::super::numbers;
use super::super::sketch::{Sketch, Type};
use super::super::words::table;
use super::super::{Figure, Theme};

/// Where the light comes from, the angle to what it favours, R̄ beside that of light alone, and the refit.
pub fn light_numbers(light: &LightFinding, trend: &TrendFinding, width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let (word, color) = if light.suspect {
        ("The light alone could make such a trend.", theme.caution)
    } else {
        ("The light does not account for the trend.", theme.ink)
    };
    let mut y = 0.0;
    if trend.defined {
        let look = Type::new(theme.text.small, color).bold();
        y += sketch.paragraph(Point::new(0.0, y), word, look, width_mm) + 0.4;
    }
    let mut rows = vec![("light or look from", format!("{}°", numbers::angle(light.from.deg(), 0, 360.0)))];
    if let Some(off) = light.from_bias_deg {
        rows.push(("trend from light + 90°", format!("{}°", numbers::fixed(off, 1))));
    }
    let [contrast, energy] = light.by_light;
    rows.push((
        "R\u{304}",
        format!(
            "{:.2}; by light alone {contrast:.2} by contrast, {energy:.2} by energy",
            trend.resultant_length
        ),
    ));
    if let Some(refit) = light.refit {
        rows.push((
            "refit against the light",
            format!(
                "{}°, R\u{304} {:.2}, turned {}°",
                numbers::angle(refit.axis.deg(), 1, 180.0),
                refit.resultant_length,
                numbers::fixed(refit.turn_deg, 1)
            ),
        ));
    }
    let [near, expected] = light.near_light;
    rows.push((
        "nodes within 20° of the light",
        format!("{}, {} expected", numbers::percent(near), numbers::percent(expected)),
    ));
    let rows: Vec<(String, String)> = rows.into_iter().map(|(name, text)| (name.to_owned(), text)).collect();
    y += table(&mut sketch, &rows, y, width_mm, theme);
    sketch.finish(width_mm, y)
}
