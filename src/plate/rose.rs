//! Roses of trends: equal-area petals drawn both ways, because an axis has no sense; the mean axis
//! and its interval outside the rim; no line where no trend is claimed.

use crate::ground::{Axis, Point};
use crate::study::TrendFinding;

use super::sketch::{Sketch, Type, arc, sector, toward};
use super::{Figure, Rgba, Stroke, TextAnchor, Theme, numbers};

/// What a rose shows, free of any size.
#[derive(Debug, PartialEq)]
struct Model {
    /// (from, to, radius in [0, 1]); each is drawn at its axis and opposite.
    petals: Vec<(f64, f64, f64)>,
    /// Share of all weight at the rim.
    rim_share: f64,
    /// Mean axis and half width of its interval, degrees; only where a trend is claimed.
    mean: Option<(Axis, Option<f64>)>,
    /// Axes of the mixture, where it has more than one component.
    modes: Vec<Axis>,
}

/// Where the parts lie, millimetres.
struct Layout {
    centre: Point,
    rim: f64,
    interval: f64,
    letters: f64,
}

/// The words where no trend is claimed.
pub(super) const NO_TREND: &str = "no preferred trend";

/// The rose with its caption: `size_mm` wide, as high as the caption needs.
pub fn rose(trend: &TrendFinding, size_mm: f64, theme: &Theme) -> Figure {
    let model = model(trend);
    let rim = 0.5 * size_mm - 5.0;
    let layout = Layout {
        centre: Point::new(0.5 * size_mm, 0.5 * size_mm),
        rim,
        interval: rim + 1.5,
        letters: rim + 3.5,
    };
    let mut sketch = Sketch::default();
    frame(&mut sketch, &model, &layout, theme);
    let edge = theme.stroke(theme.paper, theme.widths.hair);
    petals(&mut sketch, &model, &layout, Some(edge), shade(&model, theme));
    labels(&mut sketch, &model, &layout, theme);
    mean(&mut sketch, &model, &layout, theme, theme.widths.bold);

    let middle = |y: f64| Point::new(0.5 * size_mm, y);
    let mut y = size_mm;
    let (headline, color) = match model.mean {
        Some((axis, half)) => (numbers::axis_with_interval(axis, half), theme.measured),
        None => (NO_TREND.to_owned(), theme.ink),
    };
    let look = Type::new(theme.text.heading, color).bold().anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &headline, look, size_mm);
    let look = Type::new(theme.text.small, theme.ink_soft).anchored(TextAnchor::Middle);
    y += sketch.paragraph(middle(y), &caption(trend), look, size_mm);
    sketch.finish(size_mm, y)
}

/// The rose without words, `size_mm` square, for rows of the ledger and for maps.
pub fn small_rose(trend: &TrendFinding, size_mm: f64, theme: &Theme) -> Figure {
    let model = model(trend);
    let fill = shade(&model, theme);
    small(model, fill, size_mm, theme)
}

/// The same with the axis of each population, the heaviest first, in place of a mean that none of them has.
pub fn small_rose_of_populations(trend: &TrendFinding, axes: &[Axis], size_mm: f64, theme: &Theme) -> Figure {
    let shown = Model { mean: None, modes: Vec::new(), ..model(trend) };
    let mut figure = small(shown, theme.tint(theme.measured, 0.38), size_mm, theme);
    let (centre, reach) = (Point::new(0.5 * size_mm, 0.5 * size_mm), 0.46 * size_mm);
    let mut sketch = Sketch::default();
    for (index, axis) in axes.iter().enumerate() {
        let ends = [axis.azimuth(), axis.azimuth().reversed()].map(|a| toward(centre, reach, a));
        let width = if index == 0 { 0.5 * theme.widths.bold } else { 0.3 * theme.widths.bold };
        sketch.line(ends[0], ends[1], theme.stroke(theme.measured, width));
    }
    figure.items.extend(sketch.items);
    figure
}

fn small(mut model: Model, fill: Rgba, size_mm: f64, theme: &Theme) -> Figure {
    // No scale is printed, so the longest petal may reach the rim.
    let longest = model.petals.iter().map(|p| p.2).fold(0.0, f64::max);
    model.petals.iter_mut().for_each(|p| p.2 /= longest);
    let rim = 0.5 * size_mm - 0.09 * size_mm;
    let layout = Layout {
        centre: Point::new(0.5 * size_mm, 0.5 * size_mm),
        rim,
        interval: rim + 0.05 * size_mm,
        letters: rim,
    };
    let mut sketch = Sketch::default();
    sketch.circle(layout.centre, rim, None, Some(theme.stroke(theme.rule, theme.widths.hair)));
    petals(&mut sketch, &model, &layout, None, fill);
    mean(&mut sketch, &model, &layout, theme, 0.5 * theme.widths.bold);
    sketch.finish(size_mm, size_mm)
}

/// Petals in a tint of `accent` with ticks at the modes, without words; `size_mm` square. `shares` are by bins of
/// `bin_deg` from axis 0°.
pub(super) fn bare_rose(
    shares: &[f64],
    bin_deg: f64,
    modes: &[Axis],
    accent: Rgba,
    size_mm: f64,
    theme: &Theme,
) -> Sketch {
    let model = Model { modes: modes.to_vec(), ..of_shares(shares, bin_deg, rim_share(shares)) };
    let rim = 0.5 * size_mm - 5.0;
    let centre = Point::new(0.5 * size_mm, 0.5 * size_mm);
    let layout = Layout { centre, rim, interval: rim + 1.5, letters: rim + 3.5 };
    let mut sketch = Sketch::default();
    frame(&mut sketch, &model, &layout, theme);
    let edge = theme.stroke(theme.paper, theme.widths.hair);
    petals(&mut sketch, &model, &layout, Some(edge), theme.tint(accent, 0.45));
    labels(&mut sketch, &model, &layout, theme);
    mean(&mut sketch, &model, &layout, theme, theme.widths.bold);
    sketch
}

/// One of several roses on one scale.
#[derive(Clone, Copy, Debug)]
pub(super) struct Face<'a> {
    /// By bins of `bin_deg` from axis 0°.
    pub shares: &'a [f64],
    pub bin_deg: f64,
    /// Drawn solid, with its interval.
    pub mean: Option<(Axis, Option<f64>)>,
    /// Another mean to compare with: a thin dashed line.
    pub other: Option<Axis>,
    pub modes: &'a [Axis],
}

/// Room a face takes beyond its rim, millimetres.
pub(super) const FACE_PAD_MM: f64 = 4.0;

/// Roses on one scale round their centres, without words.
pub(super) fn faces(sketch: &mut Sketch, faces: &[(Face, Point)], rim: f64, theme: &Theme) {
    let rim_share = rim_share(faces.iter().flat_map(|(face, _)| face.shares));
    for (face, centre) in faces {
        let of_petals = of_shares(face.shares, face.bin_deg, rim_share);
        let model = Model { mean: face.mean, modes: face.modes.to_vec(), ..of_petals };
        let layout = Layout { centre: *centre, rim, interval: rim + 1.2, letters: rim + 2.8 };
        frame(sketch, &model, &layout, theme);
        let edge = theme.stroke(theme.paper, theme.widths.hair);
        petals(sketch, &model, &layout, Some(edge), shade(&model, theme));
        if let Some(other) = face.other {
            let [a, b] = [other.azimuth(), other.azimuth().reversed()].map(|way| toward(*centre, rim, way));
            sketch.line(a, b, theme.dashed(theme.ink, 1.2 * theme.widths.thin));
        }
        labels(sketch, &model, &layout, theme);
        mean(sketch, &model, &layout, theme, 0.8 * theme.widths.bold);
    }
}

/// n, effective n, R̄, which interval (or the test that found no trend), bin width, and how to read the petals.
pub(super) fn caption(trend: &TrendFinding) -> String {
    let interval = match trend.ci95_half_deg {
        Some(_) if trend.defined => format!("95 % interval by {} · ", trend.ci95_source),
        _ => trend.rayleigh_p.map(|p| format!("Rayleigh {} · ", numbers::p_value(p))).unwrap_or_default(),
    };
    format!(
        "{} of {} nodes, effective n {} · R\u{304} {:.2}\n{interval}{}° bins\npetal area = share, drawn both ways",
        trend.n,
        trend.n_all,
        numbers::significant(trend.n_eff, 3),
        trend.resultant_length,
        numbers::plain(trend.rose_bin_deg, 1),
    )
}

fn model(trend: &TrendFinding) -> Model {
    let mean = trend.axis.filter(|_| trend.defined).map(|axis| (axis, trend.ci95_half_deg));
    let modes = if trend.modes.len() > 1 { trend.modes.iter().map(|m| m.axis).collect() } else { Vec::new() };
    Model { mean, modes, ..of_shares(&trend.rose, trend.rose_bin_deg, rim_share(&trend.rose)) }
}

/// The round share at the rim that the longest petal stays within.
fn rim_share<'a>(shares: impl IntoIterator<Item = &'a f64>) -> f64 {
    numbers::round_up(shares.into_iter().copied().filter(|s| s.is_finite()).fold(0.0, f64::max))
}

/// Petals alone, on a scale with `rim_share` at the rim.
fn of_shares(shares: &[f64], bin_deg: f64, rim_share: f64) -> Model {
    let petals = shares
        .iter()
        .enumerate()
        .filter(|(_, share)| share.is_finite() && **share > 0.0)
        .map(|(i, share)| {
            let from = i as f64 * bin_deg;
            // The last bin is narrower where the width does not divide 180°.
            (from, (from + bin_deg).min(180.0), (share / rim_share).sqrt())
        })
        .collect();
    Model { petals, rim_share, mean: None, modes: Vec::new() }
}

/// Rim, the ring at half the radius (a quarter of the share), ticks every 10°.
fn frame(sketch: &mut Sketch, model: &Model, at: &Layout, theme: &Theme) {
    let hair = theme.stroke(theme.rule, theme.widths.hair);
    sketch.circle(at.centre, at.rim, None, Some(theme.stroke(theme.ink_soft, theme.widths.thin)));
    if model.rim_share > 0.0 {
        sketch.circle(at.centre, 0.5 * at.rim, None, Some(hair));
    }
    for deg in (0..360).step_by(10) {
        let axis = Axis::from_deg(f64::from(deg)).azimuth();
        let azimuth = if deg >= 180 { axis.reversed() } else { axis };
        let length = if deg % 30 == 0 { 0.8 } else { 0.45 };
        let tick = theme.stroke(theme.ink_soft, theme.widths.hair);
        sketch.line(toward(at.centre, at.rim - length, azimuth), toward(at.centre, at.rim, azimuth), tick);
    }
}

/// Coloured where a trend is claimed, grey where none is.
fn shade(model: &Model, theme: &Theme) -> Rgba {
    match model.mean {
        Some(_) => theme.tint(theme.measured, 0.38),
        None => theme.tint(theme.ink_soft, 0.35),
    }
}

fn petals(sketch: &mut Sketch, model: &Model, at: &Layout, edge: Option<Stroke>, fill: Rgba) {
    for (from, to, radius) in &model.petals {
        for turn in [0.0, 180.0] {
            let outline = sector(at.centre, 0.0, radius * at.rim, from + turn, to + turn);
            sketch.polygon(outline, Some(fill), edge);
        }
    }
}

/// Letters of the compass and the shares of the two rings.
fn labels(sketch: &mut Sketch, model: &Model, at: &Layout, theme: &Theme) {
    let size = theme.text.small;
    let look = Type::new(size, theme.ink_soft).anchored(TextAnchor::Middle);
    for (letter, deg) in [("N", 0.0), ("E", 90.0), ("S", 180.0), ("W", 270.0)] {
        let p = toward(at.centre, at.letters, crate::ground::Azimuth::from_deg(deg));
        sketch.text(Point::new(p.x, p.y + 0.35 * size), letter, look);
    }
    if model.rim_share > 0.0 {
        // Along the azimuth farthest from the mean, where petals are short.
        let clear = model.mean.map_or(45.0, |(axis, _)| axis.perpendicular().deg());
        let look = Type::new(0.85 * size, theme.ink_soft).anchored(TextAnchor::Middle).haloed(theme.paper);
        for (radius, share) in [(0.5, 0.25 * model.rim_share), (1.0, model.rim_share)] {
            let p = toward(at.centre, radius * at.rim - 1.6, Axis::from_deg(clear).azimuth());
            let text = format!("{} %", numbers::plain(100.0 * share, 2));
            sketch.text(Point::new(p.x, p.y + 0.3 * size), text, look);
        }
    }
}

/// The mean axis across the rose, its interval outside the rim at both ends, ticks at the modes.
fn mean(sketch: &mut Sketch, model: &Model, at: &Layout, theme: &Theme, width: f64) {
    for mode in &model.modes {
        for azimuth in [mode.azimuth(), mode.azimuth().reversed()] {
            let tick = theme.stroke(theme.measured, theme.widths.thin);
            let outer = toward(at.centre, at.interval, azimuth);
            sketch.line(toward(at.centre, at.rim, azimuth), outer, tick);
        }
    }
    let Some((axis, half)) = model.mean else { return };
    let ends = [axis.azimuth(), axis.azimuth().reversed()];
    let [a, b] = ends.map(|azimuth| toward(at.centre, at.interval, azimuth));
    sketch.line(a, b, theme.stroke(theme.measured, 0.5 * width));
    if let Some(half) = half {
        for azimuth in ends {
            let points = arc(at.centre, at.interval, azimuth.deg() - half, azimuth.deg() + half);
            sketch.polyline(points, theme.stroke(theme.measured, width));
        }
    }
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;
    use crate::assert_close;
    use crate::plate::Item;

    pub fn trend() -> TrendFinding {
        let mut rose = vec![0.01; 18];
        rose[8] = 0.40;
        rose[9] = 0.10;
        TrendFinding {
            defined: true,
            axis: Some(Axis::from_deg(84.2)),
            ci95_half_deg: Some(3.4),
            resultant_length: 0.83,
            resultant_length_all: 0.79,
            n: 412,
            n_all: 520,
            n_eff: 38.2,
            rose,
            rose_bin_deg: 10.0,
            ..TrendFinding::default()
        }
    }

    fn texts(figure: &Figure) -> String {
        let text = |item: &Item| match item {
            Item::Text { text, .. } => Some(text.clone()),
            _ => None,
        };
        figure.items.iter().filter_map(text).collect::<Vec<_>>().join(" ")
    }

    #[test]
    fn a_quarter_of_the_share_has_half_the_radius() {
        let model = model(&trend());
        let radius = |bin: usize| model.petals[bin].2;
        assert_close!(radius(8) / radius(9), 2.0, 1e-12, "shares 4:1");
    }

    #[test]
    fn the_mean_line_runs_along_the_axis_and_its_interval_lies_outside_the_rim() {
        let theme = Theme::print();
        let figure = rose(&trend(), 60.0, &theme);
        let centre = Point::new(30.0, 30.0);
        let accent: Vec<_> = figure
            .items
            .iter()
            .filter_map(|item| match item {
                Item::Path { points, stroke: Some(s), .. } if s.color == theme.measured => Some(points),
                _ => None,
            })
            .collect();
        assert_eq!(accent.len(), 3, "one line, two arcs");
        let (a, b) = (accent[0][0], accent[0][1]);
        assert_close!(
            Axis::from_east_north(b.x - a.x, a.y - b.y).separation(Axis::from_deg(84.2)),
            0.0,
            1e-9
        );
        for points in &accent[1..] {
            assert!(points.iter().all(|p| p.distance(centre) > 25.0));
            let (first, last) = (points[0], points[points.len() - 1]);
            let chord = 2.0 * (first.distance(last) / (2.0 * 26.5)).asin().to_degrees();
            assert_close!(chord, 6.8, 1e-9, "width of the interval");
        }
    }

    #[test]
    fn an_undefined_trend_has_words_and_no_line() {
        let theme = Theme::print();
        let undefined = TrendFinding { defined: false, ..trend() };
        for figure in [rose(&undefined, 60.0, &theme), small_rose(&undefined, 12.0, &theme)] {
            assert!(
                !figure
                    .items
                    .iter()
                    .any(|i| matches!(i, Item::Path { stroke: Some(s), .. } if s.color == theme.measured))
            );
        }
        assert!(texts(&rose(&undefined, 60.0, &theme)).contains(NO_TREND));
        assert!(!texts(&rose(&undefined, 60.0, &theme)).contains("84"));
    }

    #[test]
    fn the_caption_states_the_counts() {
        let said = texts(&rose(&trend(), 60.0, &Theme::print()));
        for part in ["412", "520", "38.2", "0.83", "10° bins", "84.2° ± 3.4°"] {
            assert!(said.contains(part), "{part} in {said}");
        }
    }

    #[test]
    fn petals_are_drawn_both_ways() {
        let figure = small_rose(&trend(), 12.0, &Theme::print());
        let filled = figure.items.iter().filter(|i| matches!(i, Item::Path { fill: Some(_), .. })).count();
        assert_eq!(filled, 36);
    }

    #[test]
    fn an_empty_rose_is_still_a_figure() {
        let figure = rose(&TrendFinding::default(), 50.0, &Theme::light());
        assert!(texts(&figure).contains(NO_TREND));
    }
}
