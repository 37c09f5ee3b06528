//! Where crests end and fork, counted and per length, and which way forks open.

use crate::ground::{Axis, Azimuth, LengthUnit, Point};
use crate::science::crest::Forks;
use crate::study::CrestsFinding;

use super::super::sketch::{Sketch, Type};
use super::super::words::{brief, table, words_only};
use super::super::{Figure, TextAnchor, Theme, font, numbers};
use super::per_length;

/// Height of the small drawings, millimetres.
const GLYPH_MM: f64 = 7.0;

/// Counts with a drawing of each kind, the densities in both published conventions, and the polarity of forks.
pub fn defect_diagram(crests: &CrestsFinding, unit: LengthUnit, width_mm: f64, theme: &Theme) -> Figure {
    if crests.lines.is_empty() {
        return words_only("No defects to count: there is no crest.", width_mm, theme);
    }
    let d = &crests.defects;
    let mut sketch = Sketch::default();
    let kinds = [
        (Kind::End, d.ends, "free ends"),
        (Kind::Fork, d.forks, "forks"),
        (Kind::Crossing, d.crossings, "crossings"),
        (Kind::Cut, d.cut_ends, "cut ends"),
    ];
    let cell = width_mm / 4.0;
    let mut y: f64 = 0.0;
    for (i, (kind, count, name)) in kinds.into_iter().enumerate() {
        let middle = cell * (i as f64 + 0.5);
        let counted = kind != Kind::Cut;
        kind.draw(&mut sketch, Point::new(middle, 0.5 * GLYPH_MM), 0.42 * cell.min(16.0), theme);
        let ink = if counted { theme.measured } else { theme.ink_soft };
        let look = Type::new(theme.text.heading, ink).bold().anchored(TextAnchor::Middle);
        let base = GLYPH_MM + 0.6;
        let mut used = sketch.paragraph(Point::new(middle, base), &numbers::count(count), look, cell);
        let look = Type::new(theme.text.small, theme.ink).anchored(TextAnchor::Middle);
        used += sketch.paragraph(Point::new(middle, base + used), name, look, cell);
        y = y.max(base + used);
    }
    y += 0.8;
    y += table(&mut sketch, &rows(crests, unit), y, width_mm, theme) + 1.4;
    let look = Type::new(theme.text.small, theme.ink_soft);
    y += match (crests.forks, crests.forks_toward) {
        (Some(forks), Some(toward)) if forks.toward + forks.away > 0 => {
            polarity(&mut sketch, forks, toward, y, width_mm, theme)
        }
        (Some(forks), _) if forks.unclear > 0 => {
            let text = format!("None of {} forks has a clear stem: they tell no sense.", forks.unclear);
            sketch.paragraph(Point::new(0.0, y), &text, look, width_mm)
        }
        _ => sketch.paragraph(Point::new(0.0, y), "No forks that could tell a sense.", look, width_mm),
    };
    sketch.finish(width_mm, y)
}

fn rows(crests: &CrestsFinding, unit: LengthUnit) -> Vec<(String, String)> {
    let d = &crests.defects;
    let each = |pair: Option<[f64; 2]>| {
        pair.map_or("–".to_owned(), |[ends, pairs]| {
            let (ends, pairs) = (per_length(ends, unit), brief(1000.0 * pairs));
            format!("{ends}, pairs {pairs}")
        })
    };
    vec![
        ("crest length".into(), numbers::length(d.total_length, unit, 3)),
        ("ends over length".into(), each(d.ends_per_length)),
        ("with forks as ends".into(), each(d.with_forks_per_length)),
        ("ends × spacing over length".into(), d.dimensionless.map_or("–".into(), brief)),
    ]
}

/// What a drawing shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Kind {
    End,
    Fork,
    Crossing,
    Cut,
}

impl Kind {
    /// Three crests about a place, the middle one with the defect.
    fn draw(self, sketch: &mut Sketch, centre: Point, half: f64, theme: &Theme) {
        let at = |x: f64, y: f64| Point::new(centre.x + half * x, centre.y + 0.5 * GLYPH_MM * y);
        let crest = theme.stroke(theme.ink, theme.widths.line);
        let faint = theme.stroke(theme.rule, theme.widths.line);
        let mark = theme.stroke(theme.measured, theme.widths.line);
        for y in [-0.75, 0.75] {
            sketch.polyline(vec![at(-1.0, y), at(0.0, 0.94 * y), at(1.0, y)], faint);
        }
        match self {
            Self::End => {
                sketch.line(at(-1.0, 0.0), at(0.1, 0.0), crest);
                sketch.circle(at(0.1, 0.0), 0.75, Some(theme.measured), None);
            }
            Self::Fork => {
                sketch.polyline(vec![at(-1.0, 0.0), at(-0.1, 0.0), at(1.0, -0.36)], crest);
                sketch.line(at(-0.1, 0.0), at(1.0, 0.36), crest);
                sketch.circle(at(-0.1, 0.0), 0.75, Some(theme.paper), Some(mark));
            }
            Self::Crossing => {
                sketch.line(at(-1.0, -0.36), at(1.0, 0.36), crest);
                sketch.line(at(-1.0, 0.36), at(1.0, -0.36), crest);
                let (c, r) = (at(0.0, 0.0), 0.7);
                let (min, max) = (Point::new(c.x - r, c.y - r), Point::new(c.x + r, c.y + r));
                sketch.rectangle(min, max, Some(theme.paper), Some(mark));
            }
            Self::Cut => {
                sketch.line(at(-1.0, 0.0), at(0.55, 0.0), crest);
                let border = theme.stroke(theme.ink_soft, theme.widths.thin);
                sketch.line(at(0.55, -1.0), at(0.55, 1.0), border);
                for k in 0..4 {
                    let y = -0.8 + 0.5 * f64::from(k);
                    sketch.line(at(0.55, y), at(0.95, y - 0.2), border);
                }
            }
        }
    }
}

/// Forks that open either way as bars from the middle of the axis, with the test and what it is worth.
fn polarity(
    sketch: &mut Sketch,
    forks: Forks,
    toward: Azimuth,
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let size = theme.text.small;
    let heading = Type::new(size, theme.ink).bold();
    sketch.text(Point::new(0.0, top + size), "Forks open toward", heading);
    let ways = [(forks.away, toward.reversed()), (forks.toward, toward)];
    let most = forks.toward.max(forks.away).max(1) as f64;
    let middle = 0.5 * width_mm;
    let row = top + 1.5 * size + 2.6;
    let room = middle - font::text_width("360°: 9999", size, true) - 2.4;
    for (sign, (count, way)) in [-1.0, 1.0].into_iter().zip(ways) {
        let end = middle + sign * (0.6 + room * count as f64 / most);
        let (low, high) = (end.min(middle + sign * 0.6), end.max(middle + sign * 0.6));
        let more = count * 2 > forks.toward + forks.away;
        let fill = if more { theme.tint(theme.measured, 0.55) } else { theme.tint(theme.ink_soft, 0.35) };
        sketch.rectangle(Point::new(low, row - 1.3), Point::new(high, row + 1.3), Some(fill), None);
        let text = format!("{}°: {}", numbers::angle(way.deg(), 0, 360.0), numbers::count(count));
        let anchor = if sign > 0.0 { TextAnchor::Start } else { TextAnchor::End };
        let look = Type::new(size, theme.ink).bold().anchored(anchor);
        let base = row + 0.5 * font::CAP_HEIGHT * size;
        sketch.text(Point::new(end + sign * 1.2, base), text, look);
    }
    let stroke = theme.stroke(theme.ink_soft, theme.widths.thin);
    sketch.line(Point::new(middle, row - 2.0), Point::new(middle, row + 2.0), stroke);
    let clear = forks.toward + forks.away;
    let unclear = match forks.unclear {
        0 => String::new(),
        1 => "; 1 more has no clear stem".to_owned(),
        n => format!("; {} more have no clear stem", numbers::count(n)),
    };
    let (many, way) =
        if forks.toward >= forks.away { (forks.toward, toward) } else { (forks.away, toward.reversed()) };
    let axis: Axis = toward.axis();
    let text = format!(
        "{} of {} forks along {}° open toward {}°, two-sided {}{unclear}. A clue, not proof: forks of linear dunes open upwind, but drainage and wakes fork too.",
        numbers::count(many),
        numbers::count(clear),
        numbers::angle(axis.deg(), 0, 180.0),
        numbers::angle(way.deg(), 0, 360.0),
        numbers::p_value(forks.p),
    );
    let below = row + 2.4;
    let look = Type::new(size, theme.ink_soft);
    below - top + sketch.paragraph(Point::new(0.0, below), &text, look, width_mm)
}
