//! The populations of a patch side by side: name, trend, share, spacing, verdict.

use crate::ground::{LengthUnit, Point};
use crate::study::{PatternFinding, PopulationFinding, PopulationSource};

use super::super::bars::verdict_bar;
use super::super::dial::CLASS_NAMES;
use super::super::rose::NO_TREND;
use super::super::sketch::{Sketch, Type, arc, toward};
use super::super::words::words_only;
use super::super::{Figure, Theme, font, numbers};

/// Diameter of the drawing of an axis, millimetres.
const GLYPH_MM: f64 = 9.0;
const BAR_MM: f64 = 1.9;

/// One row a population, the heaviest first as found.
pub fn populations_figure(
    pattern: &PatternFinding,
    unit: LengthUnit,
    width_mm: f64,
    theme: &Theme,
) -> Figure {
    if pattern.populations.is_empty() {
        return words_only("One population: no second trend is told apart.", width_mm, theme);
    }
    let mut sketch = Sketch::default();
    let mut y = 0.0;
    for (i, population) in pattern.populations.iter().enumerate() {
        if i > 0 {
            let rule = theme.stroke(theme.rule, theme.widths.hair);
            sketch.line(Point::new(0.0, y), Point::new(width_mm, y), rule);
            y += 1.0;
        }
        y += row(&mut sketch, population, unit, y, width_mm, theme) + 1.0;
    }
    let look = Type::new(theme.text.small, theme.ink_soft);
    y += sketch.paragraph(Point::new(0.0, y), &caption(pattern), look, width_mm);
    sketch.finish(width_mm, y)
}

fn caption(pattern: &PatternFinding) -> String {
    let of = |source| pattern.populations.iter().any(|p| p.source == source);
    let shares = match (of(PopulationSource::Mixture), of(PopulationSource::Scale)) {
        (true, true) => "share: of the nodes, or of the texture of its scale",
        (_, true) => "superposed: share of the texture of its scale",
        _ => "side by side or crossing: share of the nodes",
    };
    let judged = pattern.populations.iter().any(|p| !p.verdicts.is_empty());
    let classes =
        if judged { format!("; verdict: {}, dark to pale", CLASS_NAMES.join(", ")) } else { String::new() };
    format!("{shares}; arcs: 95 % interval of the trend{classes}")
}

fn row(
    sketch: &mut Sketch,
    population: &PopulationFinding,
    unit: LengthUnit,
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let (small, body) = (theme.text.small, theme.text.body);
    let left = GLYPH_MM + 2.2;
    let room = width_mm - left;
    glyph(sketch, population, Point::new(0.5 * GLYPH_MM, top + 0.5 * GLYPH_MM + 0.4), theme);
    let mut y = top;
    let look = Type::new(body, theme.ink).bold();
    y += sketch.paragraph(Point::new(left, y), &population.name, look, room);
    let trend = &population.trend;
    let told = match trend.axis.filter(|_| trend.defined) {
        Some(axis) => numbers::axis_with_interval(axis, trend.ci95_half_deg),
        None => NO_TREND.to_owned(),
    };
    let spacing = population.spacing.map_or("spacing not told".to_owned(), |s| {
        numbers::length_with_interval(s, population.spacing_ci95, unit)
    });
    let look = Type::new(small, theme.measured).bold();
    y += sketch.paragraph(Point::new(left, y), &format!("{told} · {spacing}"), look, room);
    // The share as a bar with its figure.
    let figure = numbers::percent(population.weight);
    let end = width_mm - font::text_width(">99 %", small, true) - 1.2;
    let middle = y + 0.7 * small;
    let (min, max) = (Point::new(left, middle - 0.5 * BAR_MM), Point::new(end, middle + 0.5 * BAR_MM));
    sketch.rectangle(min, max, Some(theme.panel), None);
    let to = left + population.weight.clamp(0.0, 1.0) * (end - left);
    sketch.rectangle(min, Point::new(to, max.y), Some(theme.tint(theme.measured, 0.45)), None);
    let base = middle + 0.5 * font::CAP_HEIGHT * small;
    sketch.text(Point::new(end + 1.2, base), figure, Type::new(small, theme.ink).bold());
    y += 1.6 * small;
    for verdict in &population.verdicts {
        let bar = verdict_bar(Some(verdict), [0.38 * (end - left), BAR_MM], theme);
        sketch.place(&bar, Point::new(left, y + 0.7 * small - 0.5 * BAR_MM));
        let words = match (&verdict.refused, verdict.probabilities) {
            (None, Some(p)) => {
                let likely = (0..3).max_by(|a, b| p[*a].total_cmp(&p[*b])).unwrap_or(0);
                format!("{} {}", CLASS_NAMES[likely], numbers::percent(p[likely]))
            }
            _ => "no verdict".to_owned(),
        };
        let at = left + bar.width_mm + 1.4;
        let text = font::shortened(&words, small, false, width_mm - at);
        sketch.text(
            Point::new(at, y + 0.7 * small + 0.5 * font::CAP_HEIGHT * small),
            text,
            Type::new(small, theme.ink),
        );
        y += 1.6 * small;
    }
    let crests = match &population.crests {
        Ok(c) => format!(
            "{} crests, {}",
            numbers::count(c.numbers.count),
            numbers::length(c.numbers.total_length, unit, 3)
        ),
        Err(why) => format!("no crests: {why}"),
    };
    y += sketch.paragraph(Point::new(left, y), &crests, Type::new(small, theme.ink_soft), room);
    (y - top).max(GLYPH_MM + 0.8)
}

/// The axis in a ring, its interval as arcs outside it.
fn glyph(sketch: &mut Sketch, population: &PopulationFinding, centre: Point, theme: &Theme) {
    let rim = 0.5 * GLYPH_MM - 1.2;
    sketch.circle(centre, rim, None, Some(theme.stroke(theme.rule, theme.widths.thin)));
    let trend = &population.trend;
    let Some(axis) = trend.axis.filter(|_| trend.defined) else { return };
    for way in [axis.azimuth(), axis.azimuth().reversed()] {
        if let Some(half) = trend.ci95_half_deg {
            let outside = arc(centre, rim + 0.8, way.deg() - half, way.deg() + half);
            sketch.polyline(outside, theme.stroke(theme.measured, theme.widths.bold));
        }
        sketch.line(centre, toward(centre, rim, way), theme.stroke(theme.measured, theme.widths.line));
    }
}
