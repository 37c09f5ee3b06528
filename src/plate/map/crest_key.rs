//! What the lines and marks of crests on a map mean.

use crate::ground::Point;
use crate::science::crest::{CrestLine, CrestOrigin, End};

use super::crests::{MapCrests, dots, free_end, joint, mask_sample, shown, stroke};
use super::{MapView, laid};
use crate::plate::sketch::{Sketch, Type};
use crate::plate::{Figure, Theme, font, numbers};

/// A sample in the key.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Sign {
    /// Origin, population, confidence.
    Line(CrestOrigin, Option<usize>, f64),
    FreeEnd,
    /// Whether of more than three arms.
    Joint(bool),
    Mask,
    Nothing,
}

const SIGN_MM: f64 = 6.0;
const ROW_MM: f64 = 3.6;

/// What stands for what on a map of `size_mm` with these crests, in rows on paper as wide as the map.
pub fn crest_key(view: &MapView, crests: &[MapCrests], size_mm: [f64; 2], theme: &Theme) -> Figure {
    let entries = entries(view, crests, size_mm);
    let mut sketch = Sketch::default();
    let look = Type::new(theme.text.small, theme.ink);
    let (mut x, mut y) = (0.0, 0.5 * ROW_MM);
    let any = !entries.is_empty();
    for (sign, text) in entries {
        let lead = if sign == Sign::Nothing { 0.0 } else { SIGN_MM + 1.2 };
        let text = font::shortened(&text, look.size_mm, false, size_mm[0] - lead);
        let width = lead + font::text_width(&text, look.size_mm, false);
        if x > 0.0 && x + width > size_mm[0] {
            (x, y) = (0.0, y + ROW_MM);
        }
        sign.draw(&mut sketch, Point::new(x, y), theme);
        let base = y + 0.5 * font::CAP_HEIGHT * look.size_mm;
        sketch.text(Point::new(x + lead, base), text, look);
        x += width + 3.4;
    }
    sketch.finish(size_mm[0], if any { y + 0.5 * ROW_MM } else { 0.0 })
}

fn entries(view: &MapView, crests: &[MapCrests], size_mm: [f64; 2]) -> Vec<(Sign, String)> {
    let lines = || crests.iter().flat_map(|c| c.lines);
    let mut entries: Vec<(Sign, String)> = Vec::new();
    for of in crests.iter().filter(|c| !c.lines.is_empty()) {
        if let Some(n) = of.population {
            entries.push((Sign::Line(CrestOrigin::Traced, Some(n), 0.8), of.name.to_owned()));
        }
    }
    let of_patch = || crests.iter().filter(|c| c.population.is_none()).flat_map(|c| c.lines);
    let origins = [
        (CrestOrigin::Traced, "traced"),
        (CrestOrigin::Edited, "edited by hand"),
        (CrestOrigin::Drawn, "drawn by hand"),
        (CrestOrigin::Imported, "imported"),
    ];
    for (origin, name) in origins {
        if of_patch().any(|l| l.origin == origin) {
            entries.push((Sign::Line(origin, None, 0.8), name.to_owned()));
        }
    }
    let unsure = |l: &CrestLine| l.confidence < 0.5;
    if lines().any(unsure) && lines().any(|l| !unsure(l)) {
        entries.push((Sign::Line(CrestOrigin::Traced, None, 0.15), "thin: less sure".into()));
    }
    if lines().any(|l| l.ends.contains(&End::Free)) {
        entries.push((Sign::FreeEnd, "free end".into()));
    }
    let junctions = || crests.iter().flat_map(|c| c.junctions);
    if junctions().any(|j| j.branches.len() < 2) {
        entries.push((Sign::Joint(false), "fork".into()));
    }
    if junctions().any(|j| j.branches.len() > 1) {
        entries.push((Sign::Joint(true), "crossing".into()));
    }
    if crests.iter().any(|c| !c.masks.is_empty()) {
        entries.push((Sign::Mask, "no bedforms, by hand".into()));
    }
    let left_out: usize = shown(crests, &laid(view, size_mm)).iter().map(|s| s.left_out).sum();
    if left_out > 0 {
        let text = format!("{} shorter ones too dense to draw", numbers::count(left_out));
        entries.push((Sign::Nothing, text));
    }
    entries
}

impl Sign {
    fn draw(self, sketch: &mut Sketch, at: Point, theme: &Theme) {
        // On paper the ink is that of the look.
        let theme = Theme { over_image: theme.ink, halo: theme.paper, ..*theme };
        let (end, middle) = (Point::new(at.x + SIGN_MM, at.y), Point::new(at.x + 0.5 * SIGN_MM, at.y));
        match self {
            Self::Line(origin, population, confidence) => {
                let look = stroke(origin, population, confidence, 1.0, &theme);
                sketch.line(at, end, look);
                if population.is_none() {
                    dots(sketch, origin, &[at, end], 1.0, &theme);
                }
            }
            Self::FreeEnd => {
                let look = stroke(CrestOrigin::Traced, None, 0.8, 1.0, &theme);
                sketch.line(at, middle, look);
                free_end(sketch, middle, 1.0, &theme);
            }
            Self::Joint(is_crossing) => {
                let look = stroke(CrestOrigin::Traced, None, 0.8, 1.0, &theme);
                let arms: &[(f64, f64)] =
                    if is_crossing { &[(-1.0, -1.0), (-1.0, 1.0)] } else { &[(-1.0, 0.0)] };
                for (x, y) in arms.iter().chain(&[(1.0, -1.0), (1.0, 1.0)]) {
                    sketch.line(Point::new(middle.x + 2.4 * x, middle.y + 0.8 * y), middle, look);
                }
                joint(sketch, middle, is_crossing, 1.0, &theme);
            }
            Self::Mask => {
                let (min, max) = (Point::new(at.x, at.y - 1.2), Point::new(at.x + SIGN_MM, at.y + 1.2));
                mask_sample(sketch, min, max, &theme);
            }
            Self::Nothing => {}
        }
    }
}
