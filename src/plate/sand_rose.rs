//! The sand rose: where a wind record carries sand, as equal-area petals pointing that way, with
//! the resultant as an arrow and its interval outside the rim.

use crate::ground::{Azimuth, Point, SandFlow};
use crate::study::DriftFinding;

use super::sketch::{Sketch, Type, arc, arrow_head, sector, toward};
use super::{Figure, TextAnchor, Theme, numbers};

/// Petals of a sand rose are this wide.
const BIN_DEG: f64 = 10.0;

/// What a sand rose shows, free of any size.
#[derive(Debug, PartialEq)]
struct Model {
    /// (middle of the bin, share of the total, radius in [0, 1]), TOWARD.
    petals: Vec<(f64, f64, f64)>,
    rim_share: f64,
    /// Resultant direction, ratio (arrow length; the rim is 1), half width of the interval.
    resultant: Option<(Azimuth, f64, Option<f64>)>,
}

/// The rose of a record's sand flow with its caption: `size_mm` wide, as high as the words need.
/// Flow directions are TOWARD; a record without drift is said to have none.
pub fn sand_rose(flow: &[SandFlow], drift: &DriftFinding, size_mm: f64, theme: &Theme) -> Figure {
    let model = model(flow, drift);
    let centre = Point::new(0.5 * size_mm, 0.5 * size_mm);
    let rim = 0.5 * size_mm - 5.0;
    let mut sketch = Sketch::default();
    sketch.circle(centre, rim, None, Some(theme.stroke(theme.ink_soft, theme.widths.thin)));
    let letters = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    for (letter, deg) in [("N", 0.0), ("E", 90.0), ("S", 180.0), ("W", 270.0)] {
        let azimuth = Azimuth::from_deg(deg);
        let hair = theme.stroke(theme.rule, theme.widths.hair);
        sketch.line(centre, toward(centre, rim, azimuth), hair);
        let p = toward(centre, rim + 3.5, azimuth);
        sketch.text(Point::new(p.x, p.y + 0.35 * theme.text.small), letter, letters);
    }
    if model.rim_share > 0.0 {
        sketch.circle(centre, 0.5 * rim, None, Some(theme.stroke(theme.rule, theme.widths.hair)));
    }
    for (middle, _, radius) in &model.petals {
        let outline = sector(centre, 0.0, radius * rim, middle - 0.5 * BIN_DEG, middle + 0.5 * BIN_DEG);
        let fill = theme.tint(theme.predicted, 0.32);
        sketch.polygon(outline, Some(fill), Some(theme.stroke(theme.paper, theme.widths.hair)));
    }
    rim_label(&mut sketch, &model, centre, rim, theme);
    if let Some((azimuth, ratio, half)) = model.resultant {
        arrow(&mut sketch, centre, azimuth, ratio * rim, theme);
        if let Some(half) = half.filter(|h| *h < 180.0) {
            let span = arc(centre, rim + 1.5, azimuth.deg() - half, azimuth.deg() + half);
            sketch.polyline(span, theme.stroke(theme.predicted, theme.widths.bold));
        }
    }
    let y = words(&mut sketch, &model, drift, size_mm, theme);
    sketch.finish(size_mm, y)
}

fn model(flow: &[SandFlow], drift: &DriftFinding) -> Model {
    let bins = (360.0 / BIN_DEG) as usize;
    let mut sums = vec![0.0; bins];
    for f in flow {
        // Bins are centred on north, east and so on; a sector that straddles two is halved by its
        // own middle, which is all that a list of sectors knows.
        let bin = ((f.toward.deg() + 0.5 * BIN_DEG) / BIN_DEG) as usize % bins;
        sums[bin] += f.weight;
    }
    let total: f64 = sums.iter().sum();
    let most = sums.iter().copied().fold(0.0, f64::max);
    let rim_share = if total > 0.0 { numbers::round_up(most / total) } else { 0.0 };
    let petals = sums
        .iter()
        .enumerate()
        .filter(|(_, sum)| **sum > 0.0)
        .map(|(i, sum)| (i as f64 * BIN_DEG, sum / total, (sum / total / rim_share).sqrt()))
        .collect();
    let resultant =
        drift.toward.zip(drift.ratio).map(|(azimuth, ratio)| (azimuth, ratio, drift.toward_ci95_half_deg));
    Model { petals, rim_share, resultant }
}

/// The share at the rim, where the rose has least to show.
fn rim_label(sketch: &mut Sketch, model: &Model, centre: Point, rim: f64, theme: &Theme) {
    if model.rim_share <= 0.0 {
        return;
    }
    let reach = |deg: f64| {
        let near =
            |p: &&(f64, f64, f64)| Azimuth::from_deg(p.0).turn_from(Azimuth::from_deg(deg)).abs() < 25.0;
        model.petals.iter().filter(near).map(|p| p.2).fold(0.0, f64::max)
    };
    let clear = [45.0, 135.0, 225.0, 315.0].into_iter().min_by(|a, b| reach(*a).total_cmp(&reach(*b)));
    let size = 0.85 * theme.text.small;
    let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::Middle).haloed(theme.paper);
    for (radius, share) in [(0.5, 0.25 * model.rim_share), (1.0, model.rim_share)] {
        let p = toward(centre, radius * rim - 1.6, Azimuth::from_deg(clear.unwrap_or(45.0)));
        let text = format!("{} %", numbers::plain(100.0 * share, 2));
        sketch.text(Point::new(p.x, p.y + 0.35 * size), text, look);
    }
}

/// The resultant from the centre: dashed as everything predicted, with a solid head.
fn arrow(sketch: &mut Sketch, centre: Point, azimuth: Azimuth, length: f64, theme: &Theme) {
    let tip = toward(centre, length, azimuth);
    let head = 2.2f64.min(0.6 * length);
    let width = 0.6 * theme.widths.bold;
    sketch.line(centre, toward(centre, length - 0.75 * head, azimuth), theme.stroke(theme.predicted, width));
    sketch.polygon(arrow_head(tip, head, azimuth), Some(theme.predicted), None);
}

fn words(sketch: &mut Sketch, model: &Model, drift: &DriftFinding, size_mm: f64, theme: &Theme) -> f64 {
    let middle = |y: f64| Point::new(0.5 * size_mm, y);
    let mut y = size_mm;
    let headline = match model.resultant {
        Some((azimuth, _, half)) => format!("toward {}", numbers::azimuth_with_interval(azimuth, half)),
        None => "no drift".to_owned(),
    };
    let look = Type::new(theme.text.heading, theme.predicted).bold().anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &headline, look, size_mm);
    let mut caption = format!("total {} {}", numbers::significant(drift.total, 3), drift.unit);
    if let Some(ratio) = drift.ratio {
        caption += &format!("\nresultant/total {ratio:.2}");
        if let Some([low, high]) = drift.ratio_ci95 {
            caption += &format!(" (95 %: {low:.2}–{high:.2})");
        }
        caption += "\npetals point where the sand goes, area = share\narrow: rim = ratio 1";
    }
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y + sketch.paragraph(middle(y), &caption, look, size_mm)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::plate::Item;

    fn flow() -> Vec<SandFlow> {
        [(90.0, 4.0), (94.0, 4.0), (180.0, 2.0)]
            .map(|(deg, weight)| SandFlow { toward: Azimuth::from_deg(deg), weight })
            .to_vec()
    }

    fn drift() -> DriftFinding {
        DriftFinding {
            unit: "kg/m/yr",
            total: 10.0,
            resultant: 8.2,
            ratio: Some(0.82),
            toward: Some(Azimuth::from_deg(104.0)),
            toward_ci95_half_deg: Some(6.0),
            ratio_ci95: Some([0.78, 0.86]),
        }
    }

    #[test]
    fn petals_point_toward_and_go_by_area() {
        let model = model(&flow(), &drift());
        assert_eq!(model.petals.len(), 2);
        let (east, south) = (model.petals[0], model.petals[1]);
        assert_eq!((east.0, south.0), (90.0, 180.0));
        assert_close!(east.2 / south.2, 2.0, 1e-12, "shares 8:2");
    }

    #[test]
    fn the_arrow_ends_at_the_ratio() {
        let theme = Theme::print();
        let figure = sand_rose(&flow(), &drift(), 50.0, &theme);
        let tip = figure.items.iter().find_map(|item| match item {
            Item::Path { points, fill: Some(f), .. } if *f == theme.predicted => Some(points[0]),
            _ => None,
        });
        let tip = tip.expect("an arrow head");
        assert_close!(tip.distance(Point::new(25.0, 25.0)), 0.82 * 20.0, 1e-9);
        assert_close!(Azimuth::from_east_north(tip.x - 25.0, 25.0 - tip.y).deg(), 104.0, 1e-9);
    }

    #[test]
    fn no_drift_is_said() {
        let none = DriftFinding { unit: "kg/m/yr", ..DriftFinding::default() };
        let figure = sand_rose(&[], &none, 50.0, &Theme::light());
        assert!(figure.items.iter().any(|i| matches!(i, Item::Text { text, .. } if text == "no drift")));
        assert!(!figure.items.iter().any(|i| matches!(i, Item::Path { fill: Some(_), .. })));
    }
}
