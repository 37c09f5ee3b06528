//! Junction angles as a half rose, with their mean and how far it depends on the chord.

use crate::ground::{Azimuth, LengthUnit, Point};
use crate::science::network::junctions::{AtChord, Junctions};
use crate::study::NetworkFinding;

use super::super::sketch::{Sketch, Type, arc, sector, toward};
use super::super::{Figure, TextAnchor, Theme, numbers};
use super::{verdict_words, with_interval, words_only};

const BIN_DEG: f64 = 10.0;
/// Angles that are drawn lightly for comparison: 72° = 2π/5 of channels cut by seepage into level ground, and a
/// right angle.
const COMPARED: [f64; 2] = [72.0, 90.0];

/// Angles between branches from 0° (right) over 90° (up) to 180° (left); petal area is the share of junctions.
pub fn junction_rose(finding: &NetworkFinding, width_mm: f64, theme: &Theme) -> Figure {
    let found = &finding.junctions;
    if found.angles.is_empty() {
        let short = match (found.too_short, finding.network.junctions().len()) {
            (0, 0) => "No junction angle: no two channels join.".to_owned(),
            (0, n) => format!(
                "No junction angle: at none of the {n} junctions is it known which two channels come in."
            ),
            (n, _) => format!("No junction angle: at all {n} junctions the chords found too little channel."),
        };
        return words_only(&short, width_mm, theme);
    }
    let mut sketch = Sketch::default();
    let rim = 0.5 * width_mm - 6.0;
    let centre = Point::new(0.5 * width_mm, rim + 5.0);
    let shares = shares(found);
    let rim_share = numbers::round_up(shares.iter().copied().fold(0.0, f64::max));
    frame(&mut sketch, centre, rim, theme);
    for (i, share) in shares.iter().enumerate().filter(|(_, s)| **s > 0.0) {
        let from = i as f64 * BIN_DEG;
        let radius = (share / rim_share).sqrt() * rim;
        // Azimuths run clockwise from up: angle a lies at azimuth 90° − a.
        let outline = sector(centre, 0.0, radius, 90.0 - from, 90.0 - from - BIN_DEG);
        let edge = theme.stroke(theme.paper, theme.widths.hair);
        sketch.polygon(outline, Some(theme.tint(theme.water, 0.45)), Some(edge));
    }
    let used = at_chord(found);
    mean(&mut sketch, &used, centre, rim, theme);
    ring_labels(&mut sketch, rim_share, centre, rim, &used, theme);
    let mut y = centre.y + 4.2;
    let headline = format!("mean {}", degrees(used.mean_deg, used.ci95_deg));
    y +=
        verdict_words(&mut sketch, &headline, &caption(found, &used, finding.unit), y, width_mm, theme) + 0.8;
    y += by_chord(&mut sketch, found, finding.unit, y, width_mm, theme);
    sketch.finish(width_mm, y)
}

/// Share of junctions in each bin.
fn shares(found: &Junctions) -> Vec<f64> {
    let bins = (180.0 / BIN_DEG) as usize;
    let mut shares = vec![0.0; bins];
    for angle in found.angles.iter().filter(|a| a.angle_deg.is_finite()) {
        let bin = ((angle.angle_deg / BIN_DEG).ceil() as usize).clamp(1, bins) - 1;
        shares[bin] += 1.0 / found.angles.len() as f64;
    }
    shares
}

/// The statistics at the chord of the angles listed; straight from the angles where the table lacks it.
fn at_chord(found: &Junctions) -> AtChord {
    let near = |a: &&AtChord| (a.chord - found.chord).abs() <= 1e-6 * found.chord.abs();
    found.by_chord.iter().find(near).copied().unwrap_or_else(|| {
        let mut angles: Vec<f64> = found.angles.iter().map(|a| a.angle_deg).collect();
        angles.sort_by(f64::total_cmp);
        let n = angles.len();
        let mean_deg = angles.iter().sum::<f64>() / n.max(1) as f64;
        let median_deg = angles.get(n / 2).copied().unwrap_or(mean_deg);
        AtChord { chord: found.chord, n, mean_deg, ci95_deg: None, median_deg }
    })
}

fn degrees(value: f64, interval: Option<[f64; 2]>) -> String {
    match interval {
        Some([low, high]) => {
            let decimals = if high - low < 4.0 { 1 } else { 0 };
            let text = |v| numbers::fixed(v, decimals);
            format!("{}° ({}°–{}°)", text(value), text(low), text(high))
        }
        None => with_interval(value, None, 0) + "°",
    }
}

fn frame(sketch: &mut Sketch, centre: Point, rim: f64, theme: &Theme) {
    let hair = theme.stroke(theme.rule, theme.widths.hair);
    let thin = theme.stroke(theme.ink_soft, theme.widths.thin);
    sketch.polyline(arc(centre, rim, -90.0, 90.0), thin);
    sketch.polyline(arc(centre, 0.5 * rim, -90.0, 90.0), hair);
    sketch.line(Point::new(centre.x - rim, centre.y), Point::new(centre.x + rim, centre.y), thin);
    let place = |deg: f64, r: f64| toward(centre, r, Azimuth::from_deg(90.0 - deg));
    for step in 0..=18 {
        let deg = 10.0 * f64::from(step);
        let length = if step % 3 == 0 { 0.8 } else { 0.45 };
        sketch.line(
            place(deg, rim - length),
            place(deg, rim),
            theme.stroke(theme.ink_soft, theme.widths.hair),
        );
    }
    for deg in COMPARED {
        sketch.line(place(deg, 0.0), place(deg, rim), theme.dashed(theme.ink_soft, theme.widths.hair));
    }
    let size = theme.text.small;
    let look = Type::new(size, theme.ink_soft);
    for deg in [0.0f64, 30.0, 72.0, 90.0, 120.0, 150.0, 180.0] {
        let p = place(deg, rim + 3.4);
        let text = format!("{deg:.0}°");
        let (at, anchor) = match deg {
            0.0 => (Point::new(centre.x + rim, centre.y + 1.2 * size), TextAnchor::End),
            180.0 => (Point::new(centre.x - rim, centre.y + 1.2 * size), TextAnchor::Start),
            _ => (Point::new(p.x, p.y + 0.35 * size), TextAnchor::Middle),
        };
        sketch.text(at, text, look.anchored(anchor));
    }
}

/// The mean as a line, its interval outside the rim.
fn mean(sketch: &mut Sketch, used: &AtChord, centre: Point, rim: f64, theme: &Theme) {
    let azimuth = Azimuth::from_deg(90.0 - used.mean_deg);
    let outer = rim + 1.2;
    let stroke = theme.stroke(theme.measured, 0.5 * theme.widths.bold);
    sketch.line(centre, toward(centre, outer, azimuth), stroke);
    if let Some([low, high]) = used.ci95_deg {
        let span = arc(centre, outer, 90.0 - low, 90.0 - high);
        sketch.polyline(span, theme.stroke(theme.measured, theme.widths.bold));
    }
}

/// Shares of the two rings along the flatter side, where petals are short.
fn ring_labels(sketch: &mut Sketch, rim_share: f64, centre: Point, rim: f64, used: &AtChord, theme: &Theme) {
    let size = 0.85 * theme.text.small;
    let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::Middle).haloed(theme.paper);
    let side = if used.mean_deg > 90.0 { 1.0 } else { -1.0 };
    for (radius, share) in [(0.5, 0.25 * rim_share), (1.0, rim_share)] {
        let p = Point::new(centre.x + side * (radius * rim - 2.8), centre.y - 1.0);
        sketch.text(p, format!("{} %", numbers::plain(100.0 * share, 2)), look);
    }
}

fn caption(found: &Junctions, used: &AtChord, unit: LengthUnit) -> String {
    let mut text = format!(
        "{} junctions · median {}° · chords of {}",
        used.n,
        numbers::fixed(used.median_deg, 0),
        numbers::length(found.chord, unit, 3)
    );
    if found.too_short > 0 {
        text += &format!("\n{} more left out: too little channel for a chord", found.too_short);
    }
    text + "\npetal area = share; dashed: 72° (seepage into level ground) and 90°"
}

/// Chord, n, mean, median for each chord, the one used bold; returns the height used.
fn by_chord(
    sketch: &mut Sketch,
    found: &Junctions,
    unit: LengthUnit,
    top: f64,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    if found.by_chord.is_empty() {
        return 0.0;
    }
    let size = theme.text.small;
    let row = 1.75 * size;
    let columns = [0.22, 0.36, 0.78, 1.0].map(|share| share * width_mm);
    let mut y = top;
    let set = |sketch: &mut Sketch, y: f64, cells: [String; 4], look: Type| {
        for (x, text) in columns.into_iter().zip(cells) {
            sketch.text(Point::new(x, y + 1.2 * size), text, look.anchored(TextAnchor::End));
        }
    };
    let heads = ["chord", "n", "mean (95 %)", "median"].map(str::to_owned);
    set(sketch, y, heads, Type::new(size, theme.ink_soft));
    y += row;
    for at in &found.by_chord {
        let rule = theme.stroke(theme.rule, theme.widths.hair);
        sketch.line(Point::new(0.0, y), Point::new(width_mm, y), rule);
        let used = (at.chord - found.chord).abs() <= 1e-6 * found.chord.abs();
        let look = Type::new(size, theme.ink);
        let cells = [
            numbers::length(at.chord, unit, 3),
            at.n.to_string(),
            degrees(at.mean_deg, at.ci95_deg),
            format!("{}°", numbers::fixed(at.median_deg, 0)),
        ];
        set(sketch, y, cells, if used { look.bold() } else { look });
        y += row;
    }
    y - top
}
