//! The spectrum of a patch, north up: how far each frequency stands above the background, rings
//! that name spacings, and the peak that stands for the crests.

use std::sync::Arc;

use crate::ground::{Axis, Grid, LengthUnit, Point};
use crate::study::{SpectrumFinding, SpectrumPicture};

use super::sketch::{Sketch, Type, toward};
use super::{Figure, Item, TextAnchor, Theme, numbers};

/// What a spectrum shows, free of any size.
#[derive(Debug, PartialEq)]
struct Model {
    /// Columns and rows of the picture that are shown: [from, to) in both directions.
    crop: [usize; 2],
    /// Frequency at the edge of what is shown, cycles per unit.
    edge: f64,
    /// Spacings named by rings.
    rings: Vec<f64>,
    /// Axis of the crests and spacing of the peak.
    peak: Option<(Axis, f64)>,
}

/// The words where no peak passed the test.
pub(super) const NO_PEAK: &str = "no spacing stands out";

/// The picture with its caption: `size_mm` wide, as high as the words need. Lengths of the finding
/// are in `unit`.
pub fn spectrum(finding: &SpectrumFinding, unit: LengthUnit, size_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let mut y = 0.0;
    if let Some(picture) = &finding.picture {
        let model = model(finding, picture);
        let margin = 3.6;
        let side = size_mm - 2.0 * margin;
        let min = Point::new(margin, margin);
        draw(&mut sketch, &model, picture, min, side, unit, theme);
        y = side + 2.0 * margin;
    }
    y += words(&mut sketch, finding, unit, y, size_mm, theme);
    sketch.finish(size_mm, y)
}

fn model(finding: &SpectrumFinding, picture: &SpectrumPicture) -> Model {
    let peak = finding
        .axis
        .zip(finding.spacing)
        .filter(|(_, spacing)| finding.defined && spacing.is_finite() && *spacing > 0.0);
    let size = picture.log_ratio.width().min(picture.log_ratio.height());
    // Three times the peak's frequency keeps its surroundings and drops the empty rest.
    let share = peak.map_or(1.0, |(_, spacing)| 3.0 / spacing / picture.edge_frequency);
    let half = 0.5 * size as f64;
    let kept = (share * half).ceil().clamp(half.min(8.0), half);
    let from = (half - kept).floor().max(0.0) as usize;
    let crop = [from, size - from];
    let edge = picture.edge_frequency * (half - from as f64) / half;
    Model { crop, edge, rings: rings(edge), peak }
}

/// Up to three round spacings whose rings lie well inside the edge, from the outermost in.
fn rings(edge_frequency: f64) -> Vec<f64> {
    if !(edge_frequency > 0.0 && edge_frequency.is_finite()) {
        return Vec::new();
    }
    let mut rings: Vec<f64> = Vec::new();
    for radius in [0.9, 0.5, 0.26] {
        let spacing = numbers::round_spacing(1.0 / (radius * edge_frequency));
        let at = 1.0 / (spacing * edge_frequency);
        let apart = rings.last().is_none_or(|last| 1.0 / (last * edge_frequency) - at > 0.14);
        if at <= 0.97 && apart {
            rings.push(spacing);
        }
    }
    rings
}

fn draw(
    sketch: &mut Sketch,
    model: &Model,
    picture: &SpectrumPicture,
    min: Point,
    side: f64,
    unit: LengthUnit,
    theme: &Theme,
) {
    let max = Point::new(min.x + side, min.y + side);
    let centre = Point::new(0.5 * (min.x + max.x), 0.5 * (min.y + max.y));
    let (rgba, cells) = shades(&picture.log_ratio, model.crop, theme);
    let mut inside = Sketch::default();
    inside.items.push(Item::Image { min, max, width: cells, height: cells, rgba });
    let radius = |spacing: f64| 0.5 * side / (spacing * model.edge);
    for spacing in &model.rings {
        inside.circle(centre, radius(*spacing), None, Some(theme.stroke(theme.ink_soft, theme.widths.hair)));
    }
    for spacing in &model.rings {
        // North-east, where no axis letter stands; below the ring's own line.
        let at = toward(centre, radius(*spacing), Axis::from_deg(45.0).azimuth());
        let look =
            Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle).haloed(theme.paper);
        inside.text(
            Point::new(at.x, at.y + 0.35 * theme.text.small),
            numbers::length(*spacing, unit, 2),
            look,
        );
    }
    if let Some((axis, spacing)) = model.peak {
        let normal = axis.perpendicular().azimuth();
        for azimuth in [normal, normal.reversed()] {
            let at = toward(centre, radius(spacing), azimuth);
            inside.circle(at, 1.9, None, Some(theme.stroke(theme.paper, 3.0 * theme.widths.thin)));
            inside.circle(at, 1.9, None, Some(theme.stroke(theme.measured, theme.widths.line)));
        }
    }
    sketch.items.push(Item::Clip { min, max, items: inside.items });
    sketch.rectangle(min, max, None, Some(theme.stroke(theme.ink_soft, theme.widths.thin)));
    let letters = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    sketch.text(Point::new(centre.x, min.y - 0.9), "N", letters);
    sketch.text(Point::new(max.x + 1.8, centre.y + 0.35 * theme.text.small), "E", letters);
}

/// Paper at the background, ink at the highest ratio; missing cells stay clear.
fn shades(ratio: &Grid<f32>, crop: [usize; 2], theme: &Theme) -> (Arc<[u8]>, usize) {
    let [from, to] = crop;
    let highest = ratio.valid_values().filter(|v| v.is_finite()).fold(0.3, f32::max);
    let mut rgba = Vec::with_capacity((to - from).pow(2) * 4);
    for row in from..to {
        for col in from..to {
            let share = ratio.get(col, row).filter(|v| v.is_finite()).map(|v| (v / highest).clamp(0.0, 1.0));
            match share {
                Some(share) => rgba.extend(theme.tint(theme.ink, f64::from(share).powf(1.3)).0),
                None => rgba.extend(theme.paper.with_alpha(0).0),
            }
        }
    }
    (rgba.into(), to - from)
}

fn words(
    sketch: &mut Sketch,
    finding: &SpectrumFinding,
    unit: LengthUnit,
    top: f64,
    size_mm: f64,
    theme: &Theme,
) -> f64 {
    let middle = |y: f64| Point::new(0.5 * size_mm, y);
    let mut y = top;
    let spacing = finding.spacing.filter(|_| finding.defined);
    let (headline, color) = match spacing {
        Some(s) => (numbers::length_with_interval(s, finding.spacing_ci95, unit), theme.measured),
        None => (NO_PEAK.to_owned(), theme.ink),
    };
    let look = Type::new(theme.text.heading, color).bold().anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &headline, look, size_mm);
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &caption(finding), look, size_mm);
    y - top
}

fn caption(finding: &SpectrumFinding) -> String {
    let mut parts = Vec::new();
    if let Some(axis) = finding.axis.filter(|_| finding.defined) {
        parts.push(format!("crests {}", numbers::axis_with_interval(axis, finding.axis_ci95_half_deg)));
    }
    parts.push(format!(
        "peak in {} of {} windows of {} px",
        finding.windows_with_peak, finding.windows, finding.window_px
    ));
    parts.extend(finding.cycles.map(|c| format!("{} wavelengths a window", numbers::significant(c, 2))));
    parts.extend(finding.p.map(numbers::p_value));
    parts.join(" · ")
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;
    use crate::assert_close;

    pub fn finding() -> SpectrumFinding {
        let log_ratio = Grid::from_fn(64, 64, |col, row| if (col, row) == (40, 32) { 1.2 } else { 0.1 });
        SpectrumFinding {
            defined: true,
            axis: Some(Axis::from_deg(0.0)),
            axis_ci95_half_deg: Some(2.1),
            spacing: Some(400.0),
            spacing_ci95: Some([380.0, 425.0]),
            p: Some(1e-6),
            windows: 14,
            windows_with_peak: 12,
            window_px: 128,
            cycles: Some(8.3),
            picture: Some(SpectrumPicture { log_ratio, edge_frequency: 0.01 }),
            ..SpectrumFinding::default()
        }
    }

    #[test]
    fn rings_carry_round_spacings_inside_the_edge() {
        for edge in [0.01, 0.5, 3e-5, 0.0073] {
            let rings = rings(edge);
            assert!(rings.len() >= 2, "{edge}: {rings:?}");
            assert!(rings.iter().all(|s| 1.0 / s < edge), "{edge}: {rings:?}");
            assert!(rings.windows(2).all(|w| w[0] < w[1]), "{edge}: {rings:?}");
        }
    }

    #[test]
    fn the_peak_stands_across_the_crests_at_its_frequency() {
        let theme = Theme::print();
        let figure = spectrum(&finding(), LengthUnit::Metre, 50.0, &theme);
        let inside = figure.items.iter().find_map(|item| match item {
            Item::Clip { items, .. } => Some(items),
            _ => None,
        });
        let marks: Vec<Point> = inside
            .expect("a clipped picture")
            .iter()
            .filter_map(|item| match item {
                Item::Circle { centre, stroke: Some(s), .. } if s.color == theme.measured => Some(*centre),
                _ => None,
            })
            .collect();
        // Crests north–south, so the peak lies east and west; 1/400 of an edge at 0.0075.
        let shown = model(&finding(), finding().picture.as_ref().expect("a picture"));
        let radius = 0.5 * (50.0 - 7.2) * (1.0 / 400.0) / shown.edge;
        assert_eq!(marks.len(), 2);
        for mark in marks {
            assert_close!(mark.y, 25.0, 1e-9);
            assert_close!((mark.x - 25.0).abs(), radius, 1e-9);
        }
    }

    #[test]
    fn without_a_peak_there_is_no_mark() {
        let none = SpectrumFinding { defined: false, ..finding() };
        assert_eq!(model(&none, none.picture.as_ref().expect("a picture")).peak, None);
        let figure = spectrum(&none, LengthUnit::Metre, 50.0, &Theme::light());
        assert!(figure.items.iter().any(|i| matches!(i, Item::Text { text, .. } if text == NO_PEAK)));
    }
}
