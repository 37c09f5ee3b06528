//! One channel network: pixels, channels, measures, agreement with others, sentence.

mod agree;
mod measures;
mod seen;
mod terrain;
mod words;

pub use agree::agreements;
pub use terrain::Terrains;

use crate::files::raster::RasterError;
use crate::ground::{Caution, Grid, Place, Point, Polygon, Stopped, Work};

use super::window::{self, Detail};
use super::{
    ImageKind, NetworkEntry, NetworkFinding, NetworkSource, OpenRaster, Patch, RasterEntry, Sheet, Sources,
};

/// The pixels a network is sought on.
struct Ground<'a> {
    entry: &'a RasterEntry,
    open: &'a OpenRaster,
    image: Grid<f32>,
    /// The place of `image`.
    place: Place,
    /// Full-resolution pixels per pixel of `image`, and the full-resolution pixel of its upper left corner.
    factor: f64,
    origin: Point,
    /// In the square of the place's unit.
    area: f64,
    /// The outline in full-resolution pixels.
    outline: Polygon,
    /// Whether the user drew it.
    is_outlined: bool,
}

impl Ground<'_> {
    fn to_full(&self, p: Point) -> Point {
        Point::new(self.origin.x + p.x * self.factor, self.origin.y + p.y * self.factor)
    }

    fn of_full(&self, p: Point) -> Point {
        Point::new((p.x - self.origin.x) / self.factor, (p.y - self.origin.y) / self.factor)
    }

    /// Ground size of a measured pixel at the middle, in the unit of the place.
    fn cell(&self) -> f64 {
        let middle = Point::new(0.5 * self.image.width() as f64, 0.5 * self.image.height() as f64);
        self.place.local_frame(middle).map_or(1.0, |frame| frame.pixel_area().sqrt())
    }
}

/// Measures a network, without comparing it with others; in words what stood against it.
///
/// # Errors
/// [`Stopped`].
pub fn network_finding(
    sheet: &Sheet,
    entry: &NetworkEntry,
    sources: &Sources,
    terrains: &Terrains,
    work: &Work,
) -> Result<Result<NetworkFinding, String>, Stopped> {
    work.phase(&format!("reading {}", entry.name), 0);
    let ground = match read(sheet, entry, sources, work)? {
        Ok(ground) => ground,
        Err(why) => return Ok(Err(why)),
    };
    let found = match &entry.source {
        NetworkSource::Elevation(ask) => terrain::channels(sheet, entry, ask, &ground, terrains, work)?,
        NetworkSource::Image(ask) => seen::channels(sheet, entry, ask, &ground, sources, work)?,
    };
    let found = match found {
        Ok(found) => found,
        Err(why) => return Ok(Err(why)),
    };
    let mut finding = measures::measure(sheet, entry, &ground, found, work)?;
    finding.cautions.extend(of_ground(entry, &ground));
    finding.sentence = words::sentence(&finding);
    Ok(Ok(finding))
}

/// What either source hands to the measures; points in full-resolution pixels, lengths on the ground.
struct Found {
    network: crate::ground::Network,
    drainage: Option<super::DrainageFinding>,
    tracing: Option<super::TracingFinding>,
    /// What the paths overstate their length by.
    inflation: f64,
    /// The highest ground of the greatest basin, for the radial pattern.
    summit: Option<Point>,
    cautions: Vec<Caution>,
}

fn read<'a>(
    sheet: &'a Sheet,
    entry: &NetworkEntry,
    sources: &'a Sources,
    work: &Work,
) -> Result<Result<Ground<'a>, String>, Stopped> {
    let Some(raster) = sheet.raster(entry.raster) else {
        return Ok(Err(format!("it lies on raster {}, which the sheet does not have", entry.raster.0)));
    };
    let Some(open) = sources.rasters.get(&entry.raster) else {
        return Ok(Err(format!("its raster “{}” is not open", raster.name)));
    };
    let info = open.raster.info();
    let whole = Polygon::rectangle(info.width as f64, info.height as f64);
    let outline = entry.within.clone().unwrap_or(whole);
    let patch = Patch::new(entry.id, entry.name.clone(), entry.raster, outline.clone());
    let pixels = match window::read(open, raster, &patch, Detail::Exact, work) {
        Ok(pixels) => pixels,
        Err(RasterError::Stopped(stopped)) => return Err(stopped),
        Err(error) => return Ok(Err(error.to_string())),
    };
    if pixels.image.is_empty() || pixels.valid_fraction == 0.0 {
        return Ok(Err("no valid pixel lies on its ground".into()));
    }
    Ok(Ok(Ground {
        entry: raster,
        open,
        factor: pixels.factor as f64,
        origin: pixels.origin,
        area: pixels.area * pixels.valid_fraction,
        image: pixels.image,
        place: pixels.place,
        outline,
        is_outlined: entry.within.is_some(),
    }))
}

/// The image with everything outside the outline missing.
fn masked(ground: &Ground) -> Grid<f32> {
    let mut image = ground.image.clone();
    if ground.is_outlined {
        let width = image.width();
        let outline = ground.outline.map(|p| ground.of_full(p));
        let rows: Vec<_> = (0..image.height()).map(|row| outline.row_spans(row, width)).collect();
        image.mask_where(|col, row| rows[row].iter().any(|(from, to)| (*from..*to).contains(&col)));
    }
    image
}

fn of_ground(entry: &NetworkEntry, ground: &Ground) -> Vec<Caution> {
    let mut found = Vec::new();
    let from_elevation = entry.elevation().is_some();
    if from_elevation != (ground.entry.kind == ImageKind::Elevation) {
        let text = if from_elevation {
            format!(
                "“{}” is not marked as elevation: its values are taken as metres of height.",
                ground.entry.name
            )
        } else {
            format!("“{}” is marked as elevation: its heights are taken as brightness.", ground.entry.name)
        };
        found.push(Caution::new("raster-kind", text));
    }
    if ground.factor > 1.0 {
        found.push(Caution::new(
            "reduced",
            format!("Measured on pixels averaged {0} × {0}, because the ground is large.", ground.factor),
        ));
    }
    if from_elevation && ground.is_outlined {
        found.push(Caution::new(
            "ground-cut",
            "Ground outside the outline is left out: contributing areas count from its edge, and channels that come in there are too small.",
        ));
    }
    found
}
