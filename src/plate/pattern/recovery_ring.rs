//! The rose of a patch in a ring of what would have been seen: each trend's chance of being found, at its own azimuth.

use crate::ground::{Azimuth, Point};
use crate::study::{RecoveryFinding, TrendFinding};

use super::super::rose::{self, Face, NO_TREND, faces};
use super::super::sketch::{Sketch, Type, arc, arrow_head, sector, toward};
use super::super::{Figure, TextAnchor, Theme, numbers};

/// From the rose's rim to the ring, the ring's width, and room outside it, millimetres.
const GAP_MM: f64 = 4.3;
const RING_MM: f64 = 4.6;
const OUTSIDE_MM: f64 = 3.0;
/// Share of a bin that its bar fills.
const BAR: f64 = 0.82;

/// The rose with a ring round it, `size_mm` wide: bars as high as the share of tries found, arcs that would have been
/// missed marked outside, an arrow head where the light comes from.
pub fn recovery_ring(
    recovery: &RecoveryFinding,
    trend: &TrendFinding,
    size_mm: f64,
    theme: &Theme,
) -> Figure {
    let centre = Point::new(0.5 * size_mm, 0.5 * size_mm);
    let rim = (0.5 * size_mm - GAP_MM - RING_MM - OUTSIDE_MM).max(2.0);
    let (inner, outer) = (rim + GAP_MM, rim + GAP_MM + RING_MM);
    let mut sketch = Sketch::default();
    sketch.circle(centre, outer, Some(theme.panel), None);
    sketch.circle(centre, inner, Some(theme.paper), None);
    for [from, to] in recovery.missed.iter().filter(|[from, to]| to > from) {
        // Half a turn is all there is.
        let to = to.min(from + 180.0);
        for turn in [0.0, 180.0] {
            let ground = sector(centre, inner, outer, from + turn, to + turn);
            sketch.polygon(ground, Some(theme.tint(theme.caution, 0.22)), None);
            let mark = arc(centre, outer + 0.7, from + turn, to + turn);
            sketch.polyline(mark, theme.stroke(theme.caution, theme.widths.bold));
        }
    }
    let width = 180.0 / recovery.trends.len().max(1) as f64;
    for laid in recovery.trends.iter().filter(|t| t.tries > 0 && t.found > 0) {
        let share = f64::from(laid.found) / f64::from(laid.tries);
        let half = 0.5 * BAR * width;
        for turn in [0.0, 180.0] {
            let at = laid.trend.deg() + turn;
            let bar = sector(centre, inner, inner + share * RING_MM, at - half, at + half);
            sketch.polygon(bar, Some(theme.tint(theme.predicted, 0.7)), None);
        }
    }
    let hair = theme.stroke(theme.ink_soft, theme.widths.hair);
    for radius in [inner, inner + 0.5 * RING_MM, outer] {
        sketch.circle(centre, radius, None, Some(hair));
    }
    if let Some(from) = recovery.light_from {
        let tip = toward(centre, outer + 0.4, from);
        sketch.polygon(arrow_head(tip, 2.4, from.reversed()), Some(theme.ink), None);
    }
    let modes: Vec<_> = trend.modes.iter().map(|m| m.axis).filter(|_| trend.modes.len() > 1).collect();
    let face = Face {
        shares: &trend.rose,
        bin_deg: trend.rose_bin_deg,
        mean: trend.axis.filter(|_| trend.defined).map(|axis| (axis, trend.ci95_half_deg)),
        other: recovery.corrected.map(|c| c.axis),
        modes: &modes,
    };
    faces(&mut sketch, &[(face, centre)], rim, theme);
    let told = face.mean.map_or(NO_TREND.to_owned(), |(axis, half)| numbers::axis_with_interval(axis, half));
    let middle = |y: f64| Point::new(0.5 * size_mm, y);
    let look = Type::new(theme.text.heading, if face.mean.is_some() { theme.measured } else { theme.ink });
    let mut y = size_mm;
    y += sketch.paragraph(middle(y), &told, look.bold().anchored(TextAnchor::Middle), size_mm);
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(
        middle(y),
        &format!("{}\n{}", rose::caption(trend), caption(recovery)),
        look,
        size_mm,
    );
    sketch.finish(size_mm, y)
}

fn caption(recovery: &RecoveryFinding) -> String {
    let light = |from: Azimuth| format!("; arrow: light from {}°", numbers::angle(from.deg(), 0, 360.0));
    let dashed = if recovery.corrected.is_some() { "; dashed: the trend less its bias" } else { "" };
    format!(
        "ring: how often bedforms of each trend were found, full for always; bold outside: missed{}{dashed}",
        recovery.light_from.map_or(String::new(), light)
    )
}
