//! A picked regime: its two winds as a sand rose, the trends they would make, and the trends measured.

use crate::ground::{Axis, Azimuth, Point};
use crate::science::alignment::backwards::{Implied, Observed};

use super::sketch::{Sketch, Type, arrow_head, sector, toward};
use super::{Figure, TextAnchor, Theme, numbers};

/// Half the width of a wind's petal, degrees.
const PETAL_HALF_DEG: f64 = 7.0;

/// The rose of a regime with its legend: `size_mm` wide, as high as the words need. `observed` are the
/// trends it is held against.
pub fn implied_rose(implied: &Implied, observed: &[Observed], size_mm: f64, theme: &Theme) -> Figure {
    let centre = Point::new(0.5 * size_mm, 0.5 * size_mm);
    let rim = 0.5 * size_mm - 8.0;
    let mut sketch = Sketch::default();
    face(&mut sketch, centre, rim, theme);
    let most = implied.flows.iter().map(|f| f.weight).fold(0.0, f64::max);
    for flow in &implied.flows {
        let (radius, deg) = (0.92 * rim * (flow.weight / most).sqrt(), flow.toward.deg());
        let petal = sector(centre, 0.0, radius, deg - PETAL_HALF_DEG, deg + PETAL_HALF_DEG);
        sketch.polygon(petal, Some(theme.tint(theme.predicted, 0.3)), None);
    }
    for one in observed {
        measured(&mut sketch, one, centre, rim, theme);
    }
    // Predicted things are dashed: gross transport thin, bed instability bold.
    for axis in &implied.gross {
        across(&mut sketch, *axis, centre, 0.72 * rim, theme.dashed(theme.predicted, theme.widths.thin));
    }
    for axis in &implied.bed {
        across(&mut sketch, *axis, centre, rim, theme.dashed(theme.predicted, 1.3 * theme.widths.line));
        letter(&mut sketch, "B", axis.azimuth(), centre, rim + 2.6, theme);
    }
    if let Some(finger) = implied.finger {
        let tip = toward(centre, rim, finger);
        let stroke = theme.stroke(theme.predicted, theme.widths.line);
        sketch.line(toward(centre, 0.55 * rim, finger), toward(centre, rim - 1.4, finger), stroke);
        sketch.polygon(arrow_head(tip, 2.2, finger), Some(theme.predicted), None);
        letter(&mut sketch, "F", finger, centre, 0.48 * rim, theme);
    }
    if let Some((azimuth, ratio)) = implied.resultant {
        let tip = toward(centre, ratio * rim, azimuth);
        let head = 2.0f64.min(0.6 * ratio * rim);
        let stroke = theme.stroke(theme.ink, 0.6 * theme.widths.bold);
        sketch.line(centre, toward(centre, ratio * rim - 0.75 * head, azimuth), stroke);
        sketch.polygon(arrow_head(tip, head, azimuth), Some(theme.ink), None);
    }
    let y = words(&mut sketch, implied, observed, size_mm, theme);
    sketch.finish(size_mm, y)
}

fn face(sketch: &mut Sketch, centre: Point, rim: f64, theme: &Theme) {
    sketch.circle(centre, rim, None, Some(theme.stroke(theme.ink_soft, theme.widths.thin)));
    let letters = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    for (name, deg) in [("N", 0.0), ("E", 90.0), ("S", 180.0), ("W", 270.0)] {
        let azimuth = Azimuth::from_deg(deg);
        sketch.line(centre, toward(centre, rim, azimuth), theme.stroke(theme.rule, theme.widths.hair));
        let p = toward(centre, rim + 6.2, azimuth);
        sketch.text(Point::new(p.x, p.y + 0.35 * theme.text.small), name, letters);
    }
}

/// A measured trend: solid, outside the rim on both sides.
fn measured(sketch: &mut Sketch, one: &Observed, centre: Point, rim: f64, theme: &Theme) {
    for azimuth in [one.axis.azimuth(), one.axis.azimuth().reversed()] {
        let stroke = theme.stroke(theme.measured, theme.widths.bold);
        sketch.line(toward(centre, rim - 1.6, azimuth), toward(centre, rim + 1.2, azimuth), stroke);
    }
    if let Some(sense) = one.sense {
        let tip = toward(centre, rim + 4.4, sense.toward);
        sketch.polygon(arrow_head(tip, 2.4, sense.toward), Some(theme.measured), None);
    }
}

fn across(sketch: &mut Sketch, axis: Axis, centre: Point, radius: f64, stroke: super::Stroke) {
    let azimuth = axis.azimuth();
    sketch.line(toward(centre, radius, azimuth.reversed()), toward(centre, radius, azimuth), stroke);
}

fn letter(sketch: &mut Sketch, name: &str, azimuth: Azimuth, centre: Point, radius: f64, theme: &Theme) {
    let p = toward(centre, radius, azimuth);
    let look =
        Type::new(theme.text.body, theme.predicted).bold().anchored(TextAnchor::Middle).haloed(theme.paper);
    sketch.text(Point::new(p.x, p.y + 0.35 * theme.text.body), name, look);
}

fn words(sketch: &mut Sketch, implied: &Implied, observed: &[Observed], size_mm: f64, theme: &Theme) -> f64 {
    let axes = |list: &[Axis]| {
        let each: Vec<String> = list.iter().map(|a| format!("{:.0}°", a.deg().round() % 180.0)).collect();
        each.join(" or ")
    };
    let azimuth = |a: Azimuth| numbers::azimuth_with_interval(a, None);
    let [first, second] = &implied.flows;
    let winds = format!(
        "two winds toward {} and {}, {} : 1",
        azimuth(first.toward),
        azimuth(second.toward),
        numbers::plain(first.weight / second.weight, 2)
    );
    let mut rows = vec![
        ("", winds, theme.ink_soft),
        ("B", format!("bed instability {}", axes(&implied.bed)), theme.predicted),
        ("", format!("gross transport {} (thin)", axes(&implied.gross)), theme.predicted),
    ];
    if let Some(finger) = implied.finger {
        rows.push(("F", format!("fingers toward {}", azimuth(finger)), theme.predicted));
    }
    rows.push(match implied.resultant {
        Some((toward, ratio)) => {
            ("→", format!("drift toward {}, RDP/DP {ratio:.2}", azimuth(toward)), theme.ink)
        }
        None => ("→", "the winds cancel: no drift".to_owned(), theme.ink),
    });
    let seen: Vec<Axis> = observed.iter().map(|o| o.axis).collect();
    if !seen.is_empty() {
        rows.push(("", format!("measured {} (bars)", axes(&seen)), theme.measured));
    }
    let mut y = size_mm + 0.6;
    for (mark, text, color) in rows {
        let look = Type::new(theme.text.body, color);
        sketch.text(Point::new(4.0, y + look.size_mm), mark, look.bold());
        y += sketch.paragraph(Point::new(8.0, y), &text, look, size_mm - 8.0);
    }
    y
}
