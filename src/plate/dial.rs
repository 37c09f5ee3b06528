//! The dial: a quarter circle of obliquity from 0° (along the sand flow) to 90° (across it). The
//! measured interval lies on the rim, each theory is a needle with the cloud of its bootstrap, and
//! bars beneath weigh the classes against their priors.

use crate::ground::{Azimuth, Point};
use crate::study::VerdictFinding;

use super::sketch::{Sketch, Type, arc, sector, toward};
use super::{Figure, TextAnchor, Theme, bars, font, numbers};

/// Class boundaries of obliquity, degrees (Hunter, Richmond & Alpha 1983).
pub const CLASS_LIMITS_DEG: [f64; 2] = [15.0, 75.0];
pub const CLASS_NAMES: [&str; 3] = ["longitudinal", "oblique", "transverse"];

/// What a dial shows, free of any size.
#[derive(Debug, PartialEq)]
struct Model {
    measured_deg: Option<f64>,
    interval_deg: Option<[f64; 2]>,
    needles: Vec<Needle>,
}

#[derive(Debug, PartialEq)]
struct Needle {
    /// Marks needle and legend alike.
    letter: char,
    name: &'static str,
    /// Obliquities: the prediction first, then axes that tie with it.
    at_deg: Vec<f64>,
    /// Share of the bootstrap draws in bins of [`CLOUD_BIN_DEG`].
    cloud: Vec<f64>,
}

/// Where the parts lie, millimetres.
struct Layout {
    centre: Point,
    rim: f64,
}

const CLOUD_BIN_DEG: f64 = 3.0;

/// The dial of one verdict with legend and bars: `size_mm` wide, as high as it needs. A refusal is
/// given in words over the empty dial.
pub fn dial(verdict: &VerdictFinding, size_mm: f64, theme: &Theme) -> Figure {
    let face = dial_face(verdict, size_mm, theme);
    let classes = class_bars(verdict, size_mm, theme);
    let mut sketch = Sketch::default();
    sketch.place(&face, Point::new(0.0, 0.0));
    let top = face.height_mm + if classes.height_mm > 0.0 { 1.6 } else { 0.0 };
    sketch.place(&classes, Point::new(0.0, top));
    sketch.finish(size_mm, top + classes.height_mm)
}

/// The classes of obliquity after the data, each with its prior; no height for a refused verdict.
pub(super) fn class_bars(verdict: &VerdictFinding, width_mm: f64, theme: &Theme) -> Figure {
    let Some(probabilities) = verdict.probabilities.filter(|_| verdict.refused.is_none()) else {
        return Sketch::default().finish(width_mm, 0.0);
    };
    let rows: Vec<bars::Row> = CLASS_NAMES
        .iter()
        .zip(probabilities.iter().zip(verdict.class_priors))
        .map(|(name, (value, prior))| bars::Row { label: (*name).to_owned(), value: *value, prior })
        .collect();
    bars::bars(&rows, width_mm, theme.measured, theme)
}

/// The dial with its legend and no bars.
pub(super) fn dial_face(verdict: &VerdictFinding, size_mm: f64, theme: &Theme) -> Figure {
    let margin_left = 3.2;
    let rim = size_mm - margin_left - 8.2;
    let layout = Layout { centre: Point::new(margin_left, rim + 7.0), rim };
    let mut sketch = Sketch::default();
    face(&mut sketch, &layout, theme);
    let mut y = layout.centre.y + 5.0;
    if let Some(reason) = &verdict.refused {
        refusal(&mut sketch, &layout, reason, theme);
        return sketch.finish(size_mm, y);
    }
    let model = model(verdict);
    needles(&mut sketch, &model, &layout, theme);
    measured(&mut sketch, &model, &layout, theme);
    y += 1.0;
    y += legend(&mut sketch, &model, verdict, Point::new(0.0, y), size_mm, theme);
    sketch.finish(size_mm, y)
}

fn model(verdict: &VerdictFinding) -> Model {
    let mut letters = 'A'..='Z';
    let needles = verdict
        .theories
        .iter()
        .filter_map(|theory| {
            let axis = theory.axis?;
            let flow = verdict.toward?.axis();
            let mut at_deg = vec![axis.separation(flow)];
            at_deg.extend(theory.ties.iter().map(|tie| tie.separation(flow)));
            Some(Needle {
                letter: letters.next()?,
                name: theory.name,
                at_deg,
                cloud: cloud(&theory.cloud_deg),
            })
        })
        .collect();
    Model { measured_deg: verdict.obliquity_deg, interval_deg: verdict.obliquity_ci95_deg, needles }
}

/// Shares of the draws per bin, signs and turns beyond 90° folded.
fn cloud(draws: &[f32]) -> Vec<f64> {
    let mut bins = vec![0.0; (90.0 / CLOUD_BIN_DEG) as usize];
    let last = bins.len() - 1;
    let mut count = 0.0;
    for draw in draws.iter().filter(|d| d.is_finite()) {
        let turn = f64::from(*draw).rem_euclid(180.0);
        let folded = turn.min(180.0 - turn);
        bins[((folded / CLOUD_BIN_DEG) as usize).min(last)] += 1.0;
        count += 1.0;
    }
    if count > 0.0 {
        bins.iter_mut().for_each(|b| *b /= count);
    }
    bins
}

/// Obliquity on the dial: 0° to the right, 90° up.
fn azimuth(obliquity_deg: f64) -> Azimuth {
    Azimuth::from_deg(90.0 - obliquity_deg)
}

fn ring(layout: &Layout, radius: f64, from_deg: f64, to_deg: f64) -> Vec<Point> {
    arc(layout.centre, radius, 90.0 - to_deg, 90.0 - from_deg)
}

/// Rim, ticks, class boundaries and names.
fn face(sketch: &mut Sketch, layout: &Layout, theme: &Theme) {
    let Layout { centre, rim } = *layout;
    let thin = theme.stroke(theme.ink_soft, theme.widths.thin);
    let oblique = sector(centre, 0.0, rim, 90.0 - CLASS_LIMITS_DEG[1], 90.0 - CLASS_LIMITS_DEG[0]);
    sketch.polygon(oblique, Some(theme.panel), None);
    sketch.polyline(ring(layout, rim, 0.0, 90.0), thin);
    for deg in [0.0, 90.0] {
        sketch.line(centre, toward(centre, rim, azimuth(deg)), theme.stroke(theme.rule, theme.widths.thin));
    }
    for step in 0..=18 {
        let deg = f64::from(step) * 5.0;
        let length = if step % 3 == 0 { 1.0 } else { 0.5 };
        let (from, to) = (toward(centre, rim - length, azimuth(deg)), toward(centre, rim, azimuth(deg)));
        sketch.line(from, to, theme.stroke(theme.ink_soft, theme.widths.hair));
    }
    let small = Type::new(theme.text.small, theme.ink_soft);
    for limit in CLASS_LIMITS_DEG {
        sketch.line(
            toward(centre, 0.0, azimuth(limit)),
            toward(centre, rim, azimuth(limit)),
            theme.stroke(theme.rule, theme.widths.hair),
        );
    }
    for deg in [0.0, 15.0, 30.0, 45.0, 60.0, 75.0, 90.0] {
        let p = toward(centre, rim + 3.0, azimuth(deg));
        let anchor = if deg > 80.0 { TextAnchor::Middle } else { TextAnchor::Start };
        let lift = if deg > 80.0 { 0.0 } else { 0.35 * theme.text.small };
        let look = if limits(deg) { small.bold() } else { small };
        sketch.text(Point::new(p.x, p.y + lift), format!("{deg:.0}°"), look.anchored(anchor));
    }
    let y = centre.y + 1.6 + theme.text.small;
    sketch.text(Point::new(centre.x + rim, y), "along the sand flow", small.anchored(TextAnchor::End));
    sketch.turned_text(
        Point::new(centre.x - 1.2, centre.y - rim),
        "across",
        small.anchored(TextAnchor::End),
        -90.0,
    );
}

fn limits(deg: f64) -> bool {
    CLASS_LIMITS_DEG.contains(&deg)
}

/// Needles of descending reach with their clouds as shaded bins on a ring of their own.
fn needles(sketch: &mut Sketch, model: &Model, layout: &Layout, theme: &Theme) {
    let Layout { centre, rim } = *layout;
    let count = model.needles.len().max(1) as f64;
    let band = 0.62 * rim / count;
    for (i, needle) in model.needles.iter().enumerate() {
        let outer = 0.93 * rim - i as f64 * band;
        let inner = outer - 0.55 * band;
        let most = needle.cloud.iter().copied().fold(0.0, f64::max);
        for (bin, share) in needle.cloud.iter().enumerate().filter(|(_, share)| **share > 0.0) {
            let from = bin as f64 * CLOUD_BIN_DEG;
            let fill = theme.predicted.with_alpha((30.0 + 110.0 * share / most) as u8);
            let outline = sector(centre, inner, outer, 90.0 - from - CLOUD_BIN_DEG, 90.0 - from);
            sketch.polygon(outline, Some(fill), None);
        }
        for (rank, deg) in needle.at_deg.iter().enumerate() {
            let tip = toward(centre, outer, azimuth(*deg));
            let width = if rank == 0 { theme.widths.line } else { theme.widths.thin };
            sketch.line(centre, tip, theme.dashed(theme.predicted, width));
            badge(sketch, toward(centre, outer - 0.275 * band, azimuth(*deg)), needle.letter, theme);
        }
    }
}

/// A letter in a disc: marks a needle and its line of the legend.
fn badge(sketch: &mut Sketch, at: Point, letter: char, theme: &Theme) {
    let size = theme.text.small;
    sketch.circle(at, 0.78 * size, Some(theme.predicted), Some(theme.stroke(theme.paper, theme.widths.thin)));
    let look = Type::new(size, theme.paper).bold().anchored(TextAnchor::Middle);
    sketch.text(Point::new(at.x, at.y + 0.5 * font::CAP_HEIGHT * size), letter.to_string(), look);
}

/// The measured obliquity on the rim: its interval as a thick arc, the value as a tick.
fn measured(sketch: &mut Sketch, model: &Model, layout: &Layout, theme: &Theme) {
    let Layout { centre, rim } = *layout;
    if let Some([low, high]) = model.interval_deg {
        let span = ring(layout, rim + 1.1, low, high);
        sketch.polyline(span, theme.stroke(theme.measured, 1.4 * theme.widths.bold));
    }
    if let Some(deg) = model.measured_deg {
        let (from, to) = (toward(centre, rim - 1.6, azimuth(deg)), toward(centre, rim + 2.0, azimuth(deg)));
        sketch.line(from, to, theme.stroke(theme.measured, theme.widths.bold));
    }
}

/// The measured value, then a line for each theory: badge, name, predicted obliquity, weight.
fn legend(
    sketch: &mut Sketch,
    model: &Model,
    verdict: &VerdictFinding,
    at: Point,
    width_mm: f64,
    theme: &Theme,
) -> f64 {
    let mut y = at.y;
    if let Some(deg) = model.measured_deg {
        let interval = model
            .interval_deg
            .map(|[low, high]| format!(" (95 %: {}–{}°)", numbers::fixed(low, 0), numbers::fixed(high, 0)));
        let text = format!("measured {}°{}", numbers::fixed(deg, 0), interval.unwrap_or_default());
        let look = Type::new(theme.text.body, theme.measured).bold();
        y += sketch.paragraph(Point::new(at.x, y), &text, look, width_mm);
    }
    let toward = verdict.toward.map(|t| format!("sand flow toward {:.0}°", t.deg()));
    let ratio = verdict.ratio.map(|r| format!("resultant/total {r:.2}"));
    let line = [toward, ratio].into_iter().flatten().collect::<Vec<_>>().join(" · ");
    y += sketch.paragraph(Point::new(at.x, y), &line, Type::new(theme.text.small, theme.ink_soft), width_mm);
    let pitch = 1.75 * theme.text.small;
    y += 0.6;
    for needle in &model.needles {
        let base = y + 0.5 * pitch + 0.5 * font::CAP_HEIGHT * theme.text.small;
        badge(sketch, Point::new(at.x + 1.7, y + 0.5 * pitch), needle.letter, theme);
        let degrees: Vec<String> = needle.at_deg.iter().map(|d| format!("{d:.0}°")).collect();
        let value = degrees.join(" or ");
        let look = Type::new(theme.text.small, theme.ink);
        let room = width_mm - 4.4 - font::text_width(&value, theme.text.small, false) - 1.5;
        let lines = font::wrap(needle.name, theme.text.small, false, room);
        for (i, line) in lines.iter().enumerate() {
            sketch.text(Point::new(at.x + 4.2, base + i as f64 * look.leading()), line.as_str(), look);
        }
        sketch.text(Point::new(at.x + width_mm, base), value, look.anchored(TextAnchor::End));
        y += pitch + (lines.len() - 1) as f64 * look.leading();
    }
    y - at.y
}

fn refusal(sketch: &mut Sketch, layout: &Layout, reason: &str, theme: &Theme) {
    let Layout { centre, rim } = *layout;
    let width = 0.62 * rim;
    let at = Point::new(centre.x + 0.06 * rim, centre.y - 0.62 * rim);
    let mut y = at.y;
    let look = Type::new(theme.text.heading, theme.caution).bold();
    y += sketch.paragraph(Point::new(at.x, y), "no verdict", look, width);
    sketch.paragraph(Point::new(at.x, y), reason, Type::new(theme.text.body, theme.ink), width);
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::Axis;
    use crate::plate::Item;
    use crate::study::{Id, TheoryFinding};

    fn theory(name: &'static str, axis: Option<f64>, posterior: f64) -> TheoryFinding {
        let cloud_deg = axis.map_or(Vec::new(), |a| vec![(a - 20.0) as f32; 30]);
        TheoryFinding {
            name,
            method: "alignment.test",
            extends: false,
            toward: None,
            strength: axis.map(|_| 0.5),
            equivalence: None,
            axis: axis.map(Axis::from_deg),
            ties: Vec::new(),
            spread_deg: Some(4.0),
            prior: 0.25,
            posterior,
            ln_bayes_factor: 1.0,
            cloud_deg,
        }
    }

    pub fn verdict() -> VerdictFinding {
        VerdictFinding {
            winds: Id(1),
            winds_name: "west mast".into(),
            refused: None,
            toward: Some(Azimuth::from_deg(20.0)),
            ratio: Some(0.61),
            obliquity_deg: Some(64.0),
            obliquity_ci95_deg: Some([58.0, 70.0]),
            probabilities: Some([0.0, 0.97, 0.03]),
            class_priors: [1.0 / 6.0, 2.0 / 3.0, 1.0 / 6.0],
            theories: vec![
                theory("transverse to resultant", Some(110.0), 0.1),
                theory("gross bedform-normal", Some(85.0), 0.8),
                theory("random axis", None, 0.1),
            ],
            elongation: None,
            building: crate::study::BuildingFinding { crossed: 0.9, random: 0.1, ..Default::default() },
            supply_ln: None,
            growth_ratio: None,
            migration: Vec::new(),
            flips: Vec::new(),
            alignment_strength: Some(0.4),
            cautions: Vec::new(),
        }
    }

    #[test]
    fn needles_stand_at_the_acute_angle_to_the_flow() {
        let model = model(&verdict());
        assert_eq!(model.needles.len(), 2, "a random axis has no needle");
        assert_close!(model.needles[0].at_deg[0], 90.0, 1e-12);
        assert_close!(model.needles[1].at_deg[0], 65.0, 1e-12);
    }

    #[test]
    fn clouds_fold_into_the_quarter() {
        let bins = cloud(&[100.0, -80.0, 80.0, f32::NAN]);
        assert_close!(bins[26], 1.0, 1e-12, "all at 80°");
    }

    #[test]
    fn the_interval_lies_on_the_rim_where_it_should() {
        let theme = Theme::print();
        let figure = dial(&verdict(), 60.0, &theme);
        let arcs: Vec<_> = figure
            .items
            .iter()
            .filter_map(|i| match i {
                Item::Path { points, stroke: Some(s), .. }
                    if s.color == theme.measured && points.len() > 2 =>
                {
                    Some(points)
                }
                _ => None,
            })
            .collect();
        assert_eq!(arcs.len(), 1);
        let centre = Point::new(3.2, 60.0 - 3.2 - 8.2 + 7.0);
        let obliquity = |p: Point| (centre.y - p.y).atan2(p.x - centre.x).to_degrees();
        let ends = [obliquity(arcs[0][arcs[0].len() - 1]), obliquity(arcs[0][0])];
        assert_close!(ends[0], 58.0, 1e-9);
        assert_close!(ends[1], 70.0, 1e-9);
    }

    #[test]
    fn a_refusal_is_words_without_needles() {
        let theme = Theme::print();
        let refused = VerdictFinding { refused: Some("no drift: the record is calm".into()), ..verdict() };
        let figure = dial(&refused, 60.0, &theme);
        let said = |what: &str| {
            figure.items.iter().any(|i| matches!(i, Item::Text { text, .. } if text.contains(what)))
        };
        assert!(said("no verdict") && said("no drift"));
        assert!(!figure.items.iter().any(|i| matches!(i, Item::Circle { .. })), "no badges");
        assert!(!said("measured"));
    }
}
