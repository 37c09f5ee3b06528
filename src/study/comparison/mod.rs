//! One ground on two rasters: both measured alike, trends held against each other, crests followed.

mod crests;
mod ground;
mod trends;
mod words;

use crate::files::raster::RasterError;
use crate::ground::{Azimuth, Caution, LocalFrame, Point, Stopped, Work};

use super::window::{self, Detail, PatchPixels};
use super::{
    Comparison, ComparisonFinding, Id, ImageKind, OpenRaster, Patch, RasterEntry, Sheet, Sources, fingerprint,
};
pub(super) use ground::Crossing;

/// Lights whose axes stand further apart than this, degrees, show different trends.
const OTHER_LOOK_DEG: f64 = 30.0;

/// One of the two pictures.
struct Picture<'a> {
    entry: &'a RasterEntry,
    pixels: PatchPixels,
    /// Ground size of the finer pixel direction of the image.
    fine: f64,
}

/// What both pictures share.
struct Scene<'a> {
    sheet: &'a Sheet,
    patch: &'a Patch,
    crossing: Crossing<'a>,
    pictures: [Picture<'a>; 2],
    /// At the middle of the patch, for full-resolution pixels of the first raster.
    frame: LocalFrame,
    middle: Point,
}

/// Measures a comparison; in words what stood against it.
///
/// # Errors
/// [`Stopped`].
pub fn comparison(
    sheet: &Sheet,
    entry: &Comparison,
    sources: &Sources,
    work: &Work,
) -> Result<Result<ComparisonFinding, String>, Stopped> {
    work.phase(&format!("reading {}", entry.name), 0);
    let (scene, overlap) = match scene(sheet, entry, sources, work)? {
        Ok(found) => found,
        Err(why) => return Ok(Err(why)),
    };
    let seed = sheet.seed.child(&format!("comparison {}", entry.id.0));
    let mut cautions = Vec::new();
    let compared = trends::compare(&scene, seed, &mut cautions, work)?;
    let followed = crests::follow(&scene, &compared, seed, &mut cautions, work)?;
    let [a, b] = &scene.pictures;
    of_ground(&scene, overlap, &mut cautions);
    let unit = a.pixels.place.unit();
    let mut finding = ComparisonFinding {
        id: entry.id,
        name: entry.name.clone(),
        fingerprint: fingerprint::of_comparison(sheet, entry),
        patch: scene.patch.id,
        patch_name: scene.patch.name.clone(),
        rasters: [a.entry.id, b.entry.id],
        raster_names: [a.entry.name.clone(), b.entry.name.clone()],
        unit,
        overlap,
        light_from: [a.entry.light_from, b.entry.light_from],
        years: entry.years.filter(|y| y.is_finite() && *y != 0.0),
        trends: compared.trends,
        axes: compared.axes,
        looks: compared.looks,
        crests: followed.lines,
        shift: followed.shift,
        sentence: String::new(),
        cautions,
    };
    finding.sentence = words::sentence(&finding);
    Ok(Ok(finding))
}

fn scene<'a>(
    sheet: &'a Sheet,
    entry: &Comparison,
    sources: &'a Sources,
    work: &Work,
) -> Result<Result<(Scene<'a>, f64), String>, Stopped> {
    let Some(patch) = sheet.patch(entry.patch) else {
        return Ok(Err(format!("it holds patch {}, which the sheet does not have", entry.patch.0)));
    };
    if patch.raster == entry.raster {
        return Ok(Err("it holds a patch against its own raster".into()));
    }
    let open = |id: Id| -> Result<(&'a RasterEntry, &'a OpenRaster), String> {
        let entry =
            sheet.raster(id).ok_or(format!("it names raster {}, which the sheet does not have", id.0))?;
        let open = sources.rasters.get(&id).ok_or(format!("its raster “{}” is not open", entry.name))?;
        Ok((entry, open))
    };
    let ((first, on_first), (second, on_second)) = match (open(patch.raster), open(entry.raster)) {
        (Ok(first), Ok(second)) => (first, second),
        (Err(why), _) | (_, Err(why)) => return Ok(Err(why)),
    };
    if [first, second].iter().any(|r| r.kind == ImageKind::Elevation) && first.kind != second.kind {
        return Ok(Err(
            "one of the rasters holds heights, the other a picture: they show other things".into()
        ));
    }
    let crossing = match Crossing::new(on_first, on_second) {
        Ok(crossing) => crossing,
        Err(why) => return Ok(Err(why)),
    };
    let outline = crossing.outline(&patch.outline);
    let elsewhere = || Err(format!("“{}” does not show the ground of {}", second.name, patch.name));
    if outline.outer.len() < 3 {
        return Ok(elsewhere());
    }
    let there = Patch::new(patch.id, patch.name.clone(), second.id, outline);
    let mut read = Vec::new();
    for (open, entry, patch) in [(on_first, first, patch), (on_second, second, &there)] {
        match window::read(open, entry, patch, Detail::Exact, work) {
            Ok(pixels) if pixels.image.is_empty() => return Ok(elsewhere()),
            Ok(pixels) => read.push(pixels),
            Err(RasterError::Stopped(stopped)) => return Err(stopped),
            Err(error) => return Ok(Err(format!("“{}”: {error}", entry.name))),
        }
    }
    let [mut a, mut b]: [PatchPixels; 2] = match read.try_into() {
        Ok(both) => both,
        Err(_) => return Ok(elsewhere()),
    };
    if crossing.is_by_pixel() {
        b.place = a.place.clone();
    }
    let overlap = ground::keep_common(&mut a, &mut b, &crossing, work)?;
    let middle = patch.outline.bounds().map_or(Point::default(), |bounds| bounds.centre());
    let frame = on_first.place.local_frame(middle);
    let Some(frame) = frame.filter(|_| overlap > 0.0) else { return Ok(elsewhere()) };
    let picture = |entry, pixels: PatchPixels| {
        let frame = pixels.outline.bounds().and_then(|b| pixels.place.local_frame(b.centre()));
        let fine = frame.map_or(1.0, |f| f.pixel_size().into_iter().fold(f64::INFINITY, f64::min));
        Picture { entry, pixels, fine }
    };
    let pictures = [picture(first, a), picture(second, b)];
    Ok(Ok((Scene { sheet, patch, crossing, pictures, frame, middle }, overlap)))
}

impl Scene<'_> {
    /// A place of the second image in full-resolution pixels of the first raster.
    fn on_first(&self, at: Point) -> Option<Point> {
        let pixels = &self.pictures[1].pixels;
        let by = pixels.factor as f64;
        self.crossing.to_first(Point::new(pixels.origin.x + by * at.x, pixels.origin.y + by * at.y))
    }

    /// A full-resolution pixel of the first raster on the plane about the middle of the patch, ground units.
    fn on_plane(&self, p: Point) -> Point {
        let (east, north) = self.frame.ground(p.x - self.middle.x, p.y - self.middle.y);
        Point::new(east, north)
    }

    /// Degrees between the axes of the two lights; `None` while one is not known.
    fn lights_apart(&self) -> Option<f64> {
        let [a, b] = &self.pictures;
        Some(axes_apart(a.entry.light_from?, b.entry.light_from?))
    }
}

fn axes_apart(a: Azimuth, b: Azimuth) -> f64 {
    a.axis().separation(b.axis())
}

/// What stands against any comparison of the two.
fn of_ground(scene: &Scene<'_>, overlap: f64, cautions: &mut Vec<Caution>) {
    let [a, b] = &scene.pictures;
    let mut say = |code, text: String| cautions.push(Caution::new(code, text));
    if overlap < 0.9 {
        say(
            "overlap",
            format!(
                "Only {:.0} % of the patch is shown by both rasters; all else is left out.",
                100.0 * overlap
            ),
        );
    }
    if scene.crossing.is_by_pixel() {
        let text = "Neither raster says where it lies: pixel is held against pixel, as if both were one map.";
        say("pixel-for-pixel", text.into());
    }
    if [a, b].iter().any(|p| p.entry.light_from.is_none()) {
        say(
            "light-unsaid",
            "Where the light or the look of both comes from is not said: whether a difference is theirs cannot be told.".into(),
        );
    }
    if a.entry.kind != b.entry.kind {
        say(
            "other-kind",
            "One is a radar image, the other optical: the same dune shows in other tones.".into(),
        );
    }
    let (fine, coarse) = (a.fine.min(b.fine), a.fine.max(b.fine));
    if coarse > 1.5 * fine {
        say(
            "other-resolution",
            format!(
                "The pixels of one are {:.1} times as large: both are measured at a scale the coarser can show.",
                coarse / fine
            ),
        );
    }
}
