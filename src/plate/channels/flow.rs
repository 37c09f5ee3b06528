//! Palaeo-flow as ranges on logarithmic rulers: one scale for all, so that lengths compare as factors.

use crate::ground::Point;
use crate::science::network::flow::{FlowAsk, PalaeoFlow, Range};
use crate::study::NetworkFinding;

use super::super::chart::{Ruler, Span};
use super::super::sketch::{Sketch, Type};
use super::super::{Figure, TextAnchor, Theme, font, numbers};
use super::{brief, table, words_only};

/// What every use of these numbers must know.
const CAUTION: &str = "Width is not depth, a valley is not its channel (a factor of 3 to 20 in discharge), no one saw \
     it bankfull, and a bed unknown leaves a factor of 2. These are ranges for comparison; floods and structures are \
     judged by licensed practice with local data.";

/// Rows that share a unit.
struct Group<'a> {
    title: &'static str,
    rows: Vec<(&'static str, &'a Range)>,
    per: f64,
}

/// Least, middle and greatest of each quantity as bars, what the spread comes from, and the caution.
pub fn flow_ranges(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let (ask, flow) = match &finding.flow {
        Ok(told) => told,
        Err(why) => return words_only(&format!("No palaeo-flow: {why}."), width_mm, theme),
    };
    let mut sketch = Sketch::default();
    let mut y = 0.0;
    let groups = groups(flow);
    let decades = groups.iter().filter_map(Group::span).map(|s| (s.max / s.min).log10()).fold(0.5, f64::max);
    for group in &groups {
        y += group.draw(&mut sketch, decades, y, width_mm, theme);
    }
    y += shares(&mut sketch, flow, y, width_mm, theme);
    y += table(&mut sketch, &asked(ask, flow), y + 0.8, width_mm, theme) + 1.6;
    y += sketch.paragraph(Point::new(0.0, y), CAUTION, Type::new(theme.text.small, theme.ink), width_mm);
    sketch.finish(width_mm, y)
}

fn groups(flow: &PalaeoFlow) -> Vec<Group<'_>> {
    vec![
        Group {
            title: "discharge, m³/s",
            rows: vec![
                ("by friction", &flow.discharge),
                ("by width alone", &flow.discharge_by_width),
                ("by Manning’s n", &flow.discharge_by_manning),
            ],
            per: 1.0,
        },
        Group { title: "velocity, m/s", rows: vec![("", &flow.velocity)], per: 1.0 },
        Group { title: "Froude number", rows: vec![("", &flow.froude)], per: 1.0 },
        Group { title: "depth, m", rows: vec![("", &flow.depth_m)], per: 1.0 },
        Group { title: "greatest grain, mm", rows: vec![("", &flow.grain_m)], per: 1e-3 },
    ]
}

impl Group<'_> {
    fn span(&self) -> Option<Span> {
        let ends = self.rows.iter().flat_map(|(_, r)| [r.least, r.greatest]);
        Span::logarithmic(ends).map(|s| s.per(self.per))
    }

    /// Returns the height used.
    fn draw(&self, sketch: &mut Sketch, decades: f64, top: f64, width_mm: f64, theme: &Theme) -> f64 {
        let Some(span) = self.span() else { return 0.0 };
        let size = theme.text.small;
        let (left, right) = (0.36 * width_mm, width_mm - 1.5);
        // The same length for a factor of ten in every group.
        let to = left + (right - left) * (span.max / span.min).log10() / decades;
        let ruler = Ruler { span, from_mm: left, to_mm: to };
        let soft = Type::new(size, theme.ink_soft);
        sketch.text(Point::new(0.0, top + 1.2 * size), self.title, Type::new(size, theme.ink).bold());
        let pitch = 2.0 * size;
        let mut y = top + if self.rows.len() > 1 { 1.6 * size } else { 0.0 };
        for (name, range) in &self.rows {
            let middle = y + 0.5 * pitch;
            let base = middle + 0.5 * font::CAP_HEIGHT * size;
            if self.rows.len() > 1 {
                sketch.text(Point::new(0.0, base), font::shortened(name, size, false, left - 1.0), soft);
            }
            bar(sketch, range, &ruler, middle, theme);
            y += pitch;
        }
        let rule = theme.stroke(theme.ink_soft, theme.widths.hair);
        sketch.line(Point::new(left, y), Point::new(to, y), rule);
        let mut free = f64::NEG_INFINITY;
        for (value, label) in ruler.ticks(6.0) {
            let x = ruler.at(value);
            sketch.line(Point::new(x, y), Point::new(x, y + 0.7), rule);
            let half = 0.5 * font::text_width(&label, 0.92 * size, false);
            if x - half > free && x + half < width_mm {
                let look = Type::new(0.92 * size, theme.ink_soft).anchored(TextAnchor::Middle);
                sketch.text(Point::new(x, y + 0.9 + size), label, look);
                free = x + half + 0.8;
            }
        }
        y + 1.9 * size - top
    }
}

/// Least to greatest with the middle across it and in figures at its end.
fn bar(sketch: &mut Sketch, range: &Range, ruler: &Ruler, middle: f64, theme: &Theme) {
    let usable = [range.least, range.middle, range.greatest].iter().all(|v| *v > 0.0 && v.is_finite());
    if !usable {
        let look = Type::new(theme.text.small, theme.ink_soft);
        let base = middle + 0.5 * font::CAP_HEIGHT * look.size_mm;
        return sketch.text(Point::new(ruler.from_mm, base), "not told", look);
    }
    let [a, m, b] = [range.least, range.middle, range.greatest].map(|v| ruler.at(v));
    let half = 0.55;
    let (min, max) = (Point::new(a, middle - half), Point::new(b.max(a + 0.3), middle + half));
    sketch.rectangle(min, max, Some(theme.tint(theme.water, 0.55)), None);
    let (from, to) = (Point::new(m, middle - 1.1), Point::new(m, middle + 1.1));
    sketch.line(from, to, theme.stroke(theme.paper, 3.0 * theme.widths.thin));
    sketch.line(from, to, theme.stroke(theme.ink, theme.widths.line));
}

/// What each unknown brings to the spread of discharge; returns the height used.
fn shares(sketch: &mut Sketch, flow: &PalaeoFlow, top: f64, width_mm: f64, theme: &Theme) -> f64 {
    if flow.shares.is_empty() {
        return 0.0;
    }
    let told: Vec<String> =
        flow.shares.iter().map(|(name, share)| format!("{name} {}", numbers::percent(*share))).collect();
    let text = format!("Spread of discharge from: {}.", told.join(", "));
    sketch.paragraph(Point::new(0.0, top + 0.6), &text, Type::new(theme.text.small, theme.ink_soft), width_mm)
        + 0.6
}

fn asked(ask: &FlowAsk, flow: &PalaeoFlow) -> Vec<(String, String)> {
    let range = |[low, high]: [f64; 2], unit: &str| {
        let text = brief;
        if low == high {
            format!("{}{unit}", text(low))
        } else {
            format!("{}–{}{unit}", text(low), text(high))
        }
    };
    let row = |name: &str, value: String| (name.to_owned(), value);
    vec![
        row("gravity", format!("{} m/s²", brief(ask.gravity))),
        row("width", range(ask.width_m, " m")),
        row("width over depth", range(ask.width_to_depth, "")),
        row("slope", range(ask.slope, "")),
        row("friction factor", range(ask.friction, "")),
        row("densities", format!("{} and {} kg/m³", brief(ask.liquid_density), brief(ask.grain_density))),
        row("critical Shields stress", range(ask.shields, "")),
        row("Manning’s n on Earth", range(ask.manning_earth, "")),
        row(
            "Manning’s n alike here",
            range([flow.equivalent_manning.least, flow.equivalent_manning.greatest], ""),
        ),
    ]
}
