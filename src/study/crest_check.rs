//! Problems of what the user says of crests and populations.

use crate::ground::{Point, Polygon};
use crate::science::crest::clip;

use super::{Patch, Sheet, Sources};

/// Masks and edits off the raster, strokes of no length or outside their patch, tone limits turned round,
/// populations without a name or with the name of another.
pub fn crests(sheet: &Sheet, sources: &Sources, say: &mut impl FnMut(String, String)) {
    for patch in &sheet.patches {
        let what = format!("patch {}", patch.name);
        if let Some([least, most]) = patch.crests.tone_limits
            && (least.is_nan() || most.is_nan() || least >= most)
        {
            say(
                what.clone(),
                format!(
                    "crests are looked for in tones from {least} to {most}; the first must be the lesser"
                ),
            );
        }
        shapes(patch, &what, say);
        if let Some(open) = sources.rasters.get(&patch.raster) {
            let info = open.raster.info();
            places(patch, [info.width as f64, info.height as f64], &what, say);
        }
        for (i, population) in patch.populations.iter().enumerate() {
            let deg = population.axis.deg();
            if population.name.trim().is_empty() {
                say(
                    what.clone(),
                    format!("its population of {deg:.0}° has no name; give it one or take it out"),
                );
            } else if patch.populations[..i].iter().any(|other| other.name == population.name) {
                say(what.clone(), format!("two of its populations are named “{}”", population.name));
            }
        }
    }
}

/// Masks without area, strokes that are no lines or lie outside the patch.
fn shapes(patch: &Patch, what: &str, say: &mut impl FnMut(String, String)) {
    if patch.crests.masks.iter().any(|mask| mask.outer.len() < 3 || mask.area() <= 0.0) {
        say(what.to_owned(), "a mask of its crests has no area; outline it again".into());
    }
    for stroke in &patch.crests.strokes {
        let points = &stroke.line.0;
        if points.is_empty() {
            say(what.to_owned(), "a crest drawn in it has no points".into());
        } else if clip(points, &patch.outline).is_empty() {
            let at = points[0];
            say(
                what.to_owned(),
                format!(
                    "a crest drawn from pixel ({:.1}, {:.1}) lies outside it and does not count",
                    at.x, at.y
                ),
            );
        }
    }
}

/// Masks, edits and strokes must lie on the raster.
fn places(patch: &Patch, [width, height]: [f64; 2], what: &str, say: &mut impl FnMut(String, String)) {
    let on = |p: &Point| p.x >= 0.0 && p.y >= 0.0 && p.x <= width && p.y <= height;
    let mut named = |kind: &str, points: Vec<Point>| {
        if let Some(p) = points.into_iter().find(|p| !on(p)) {
            say(
                what.to_owned(),
                format!(
                    "{kind} at pixel ({}, {}) lies off its raster of {width} × {height} pixels",
                    p.x, p.y
                ),
            );
        }
    };
    let c = &patch.crests;
    named("a crest taken out", c.rejected.clone());
    named("a crest let stand", c.accepted.clone());
    named("a cut", c.cuts.clone());
    named("a crest drawn in it", c.strokes.iter().flat_map(|s| s.line.0.clone()).collect());
    let off = |mask: &&Polygon| {
        mask.bounds()
            .is_some_and(|b| b.max.x <= 0.0 || b.max.y <= 0.0 || b.min.x >= width || b.min.y >= height)
    };
    if c.masks.iter().any(|mask| off(&mask)) {
        say(
            what.to_owned(),
            format!("a mask of its crests lies off its raster of {width} × {height} pixels"),
        );
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Axis, Polyline};
    use crate::study::{CrestStroke, Id, PopulationName, StrokeKind};

    fn said(patch: &Patch) -> Vec<String> {
        let mut sheet = Sheet::empty("t");
        sheet.patches.push(patch.clone());
        let mut said = Vec::new();
        crests(&sheet, &Sources::default(), &mut |_, why| said.push(why));
        places(patch, [100.0, 50.0], "patch a", &mut |_, why| said.push(why));
        said
    }

    #[test]
    fn what_cannot_be_is_named() {
        let mut patch = Patch::new(Id(1), "a", Id(2), Polygon::rectangle(10.0, 10.0));
        let name = |deg: f64, name: &str| PopulationName { axis: Axis::from_deg(deg), name: name.into() };
        let stroke = |points: &[[f64; 2]]| CrestStroke {
            kind: StrokeKind::Crest,
            picks: Vec::new(),
            line: Polyline(points.iter().copied().map(Point::from).collect()),
        };
        patch.crests.tone_limits = Some([1.0, 2.0]);
        patch.crests.masks = vec![Polygon::rectangle(5.0, 5.0)];
        patch.crests.cuts = vec![Point::new(100.0, 50.0)];
        patch.crests.strokes = vec![stroke(&[[1.0, 1.0], [30.0, 1.0]])];
        patch.populations = vec![name(10.0, "draa"), name(80.0, "megaripples")];
        assert_eq!(said(&patch), Vec::<String>::new());

        patch.crests.tone_limits = Some([2.0, 1.0]);
        patch.crests.masks.push(Polygon::default());
        patch.crests.masks.push(Polygon::rectangle(5.0, 5.0).map(|p| Point::new(p.x + 200.0, p.y)));
        patch.crests.cuts.push(Point::new(100.5, 3.0));
        patch.crests.rejected.push(Point::new(f64::NAN, 3.0));
        patch.crests.strokes.push(stroke(&[[40.0, 20.0], [90.0, 20.0]]));
        patch.crests.strokes.push(stroke(&[]));
        patch.populations = vec![name(10.0, " "), name(80.0, "draa"), name(20.0, "draa")];
        let said = said(&patch);
        for part in [
            "in tones from 2 to 1",
            "a mask of its crests has no area",
            "a crest drawn from pixel (40.0, 20.0) lies outside it",
            "a crest drawn in it has no points",
            "its population of 10° has no name",
            "two of its populations are named “draa”",
            "a crest taken out at pixel (NaN, 3)",
            "a cut at pixel (100.5, 3)",
            "a mask of its crests lies off its raster",
        ] {
            assert!(said.iter().any(|s| s.contains(part)), "{part}: {said:?}");
        }
        assert_eq!(said.len(), 9, "{said:?}");
    }
}
