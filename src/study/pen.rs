//! The pen on a raster: the ground of a window, kept between clicks.

use std::sync::{Arc, OnceLock};

use crate::files::raster::Window;
use crate::ground::{Bounds, Grid, Point, Polyline, Seed, Stopped, Work};
use crate::numeric::least_path::{CostField, Way, Ways};
use crate::science::channel::chance::{chance, null_costs};
use crate::science::channel::pen;
use crate::science::crest::{self, CrestModel};

use super::{ChannelSettings, ImageKind, OpenRaster, RasterEntry};

/// Most pixels of a window as it is read; a larger one is averaged first.
const MOST_PIXELS: f64 = 3e6;
/// Ways between random places a traced one is compared with, at each distance.
const NULL_WAYS: usize = 39;
/// Shortest distance of such places, pixels; each of the others is twice the one before.
const SHORTEST_NULL: f64 = 50.0;

/// A window of a raster that the pen can walk. Clones share everything; all points are full-resolution pixels.
#[derive(Clone, Debug)]
pub struct Pen {
    inner: Arc<Inner>,
}

#[derive(Debug)]
struct Inner {
    field: Arc<CostField>,
    /// The pen of crests, whose picks are moved onto crest points; `None` for channels.
    crests: Option<crest::Pen>,
    /// Full-resolution pixels per pixel walked, and the corner of the window.
    factor: f64,
    origin: Point,
    /// Distances of random places, pixels walked, and the costs of their ways once they are known.
    null: OnceLock<Vec<(f64, Vec<f64>)>>,
}

/// Cheapest ways from one pick.
#[derive(Clone, Debug)]
pub struct PenWays {
    pen: Pen,
    from: Point,
    ways: Ways,
}

/// The way the pen takes.
#[derive(Clone, Debug, PartialEq)]
pub struct PenWay {
    /// From the first pick to the second.
    pub line: Polyline,
    /// Cost per length over the median of ways between random places as far apart; well below 1 on a
    /// channel. `None` until [`Pen::learn_chance`] has run.
    pub cost_ratio: Option<f64>,
    /// Share of such ways that are as cheap, this one counted; `None` until they are known or where there is
    /// no room for them.
    pub p: Option<f64>,
}

impl Pen {
    /// The pen of channels: reads a window of a raster, the whole of it where the window is larger, and lays the
    /// ground.
    ///
    /// # Errors
    /// Why the pixels could not be read, in words; "stopped".
    pub fn lay(
        open: &OpenRaster,
        entry: &RasterEntry,
        window: Bounds,
        settings: &ChannelSettings,
        work: &Work,
    ) -> Result<Self, String> {
        let Pixels { image, factor, origin } = read(open, entry, window, work)?;
        let image = if entry.kind == ImageKind::Radar { logarithm(&image) } else { image };
        let widths = [settings.narrowest_px / factor, settings.widest_px / factor];
        let field =
            pen::ground(&image, settings.tone, widths, work).map_err(|stopped| stopped.to_string())?;
        let inner = Inner { field: Arc::new(field), crests: None, factor, origin, null: OnceLock::new() };
        Ok(Self { inner: Arc::new(inner) })
    }

    /// The pen of crests, on a window as [`Pen::lay`] reads it. `model`: what a crest looks like, what fits the
    /// window best when `None`; `scale_px`: scale of the crests in full-resolution pixels, as a patch's finding
    /// has it ([`super::CrestsFinding::full_scale_px`]), that of a sweep when `None`. Picks within two scales of a
    /// crest point are moved onto it. Its ways have no `cost_ratio` and no `p`.
    ///
    /// # Errors
    /// Why the pixels could not be read, in words; "stopped".
    pub fn lay_crests(
        open: &OpenRaster,
        entry: &RasterEntry,
        window: Bounds,
        model: Option<CrestModel>,
        scale_px: Option<f64>,
        work: &Work,
    ) -> Result<Self, String> {
        let Pixels { image, factor, origin } = read(open, entry, window, work)?;
        let scale_px = scale_px.map(|px| px / factor);
        let radar = entry.kind == ImageKind::Radar;
        let crests = crest::Pen::of(&image, model, scale_px, radar, work).map_err(|s| s.to_string())?;
        let field = Arc::clone(crests.field());
        // Crests are many, and ways by chance run along them too: nothing is learnt from those.
        let null = OnceLock::from(Vec::new());
        let inner = Inner { field, crests: Some(crests), factor, origin, null };
        Ok(Self { inner: Arc::new(inner) })
    }

    /// Whether the window holds the point.
    pub fn covers(&self, p: Point) -> bool {
        let p = self.inward(p);
        let ground = &self.inner.field;
        p.x >= 0.0 && p.y >= 0.0 && p.x < ground.width() as f64 && p.y < ground.height() as f64
    }

    /// Full-resolution pixels per pixel walked.
    pub fn factor(&self) -> f64 {
        self.inner.factor
    }

    /// Learns what ways between random places cost, so that ways get their `cost_ratio` and `p`: a second or
    /// two, once, on a thread that nobody waits for.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn learn_chance(&self, seed: Seed, work: &Work) -> Result<(), Stopped> {
        let ground = &self.inner.field;
        if self.inner.null.get().is_some() {
            return Ok(());
        }
        let longest = 0.7 * ground.width().max(ground.height()) as f64;
        let mut null = Vec::new();
        let mut length = SHORTEST_NULL.min(longest);
        while length <= longest && length > 0.0 {
            let costs = null_costs(ground, length, NULL_WAYS, seed, work)?;
            if !costs.is_empty() {
                null.push((length, costs));
            }
            length *= 2.0;
        }
        // Another thread may have been quicker, with the same numbers.
        let _ = self.inner.null.set(null);
        Ok(())
    }

    /// Ways from a pick, for a pointer that moves; `None` outside the window and on missing pixels.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn ways_from(&self, pick: Point, work: &Work) -> Result<Option<PenWays>, Stopped> {
        let ways = self.inner.field.ways_from(self.picked(pick), work)?;
        Ok(ways.map(|ways| PenWays { pen: self.clone(), from: pick, ways }))
    }

    /// The way between two picks; `None` where there is none.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn way(&self, from: Point, to: Point, work: &Work) -> Result<Option<PenWay>, Stopped> {
        let way = self.inner.field.way(self.picked(from), self.picked(to), work)?;
        Ok(way.map(|way| self.outward(way)))
    }

    /// The pixel walked from or to for a pick: on the crest beside it.
    fn picked(&self, pick: Point) -> Point {
        let p = self.inward(pick);
        self.inner.crests.as_ref().map_or(p, |crests| crests.snapped(p))
    }

    fn inward(&self, p: Point) -> Point {
        let Inner { factor, origin, .. } = *self.inner;
        Point::new((p.x - origin.x) / factor, (p.y - origin.y) / factor)
    }

    fn outward(&self, way: Way) -> PenWay {
        let Inner { factor, origin, .. } = *self.inner;
        let (cost_ratio, p) = self.judged(&way).unzip();
        let full = |p: &Point| Point::new(origin.x + factor * p.x, origin.y + factor * p.y);
        let line = self.inner.crests.as_ref().map_or_else(|| way.line.clone(), |crests| crests.line(&way));
        PenWay { line: Polyline(line.0.iter().map(full).collect()), cost_ratio, p: p.flatten() }
    }

    /// (cost over the median, p) against the random ways nearest in length.
    fn judged(&self, way: &Way) -> Option<(f64, Option<f64>)> {
        let (first, last) = (way.line.0.first()?, way.line.0.last()?);
        let apart = first.distance(*last).max(1.0);
        let null = self.inner.null.get()?;
        let unlike = |length: f64| (length / apart).ln().abs();
        let (_, costs) = null.iter().min_by(|a, b| unlike(a.0).total_cmp(&unlike(b.0)))?;
        let median = costs[costs.len() / 2];
        Some((way.cost_per_px / median, chance(costs, way.cost_per_px)))
    }
}

impl PenWays {
    /// The pick they start from.
    pub fn from(&self) -> Point {
        self.from
    }

    /// The way to a point; `None` where there is none.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn to(&self, p: Point, work: &Work) -> Result<Option<PenWay>, Stopped> {
        let way = self.ways.to(self.pen.picked(p), work)?;
        Ok(way.map(|way| self.pen.outward(way)))
    }
}

/// Pixels of a window.
struct Pixels {
    image: Grid<f32>,
    factor: f64,
    origin: Point,
}

/// A window of a raster, averaged where it is large; in words why it could not be read.
fn read(open: &OpenRaster, entry: &RasterEntry, window: Bounds, work: &Work) -> Result<Pixels, String> {
    let info = open.raster.info();
    let clamp = |x: f64, most: usize| if x.is_finite() { x.clamp(0.0, most as f64) as usize } else { 0 };
    let (col, row) = (clamp(window.min.x.floor(), info.width), clamp(window.min.y.floor(), info.height));
    let right = clamp(window.max.x.ceil(), info.width);
    let lower = clamp(window.max.y.ceil(), info.height);
    let read = Window { col, row, width: right.saturating_sub(col), height: lower.saturating_sub(row) };
    if read.width == 0 || read.height == 0 {
        return Err("the window lies outside the raster".into());
    }
    let factor = (read.width as f64 * read.height as f64 / MOST_PIXELS).sqrt().ceil().max(1.0);
    let image = open
        .raster
        .read_reduced(read, factor as usize, &entry.bands, work)
        .map_err(|error| error.to_string())?;
    Ok(Pixels { image, factor, origin: Point::new(col as f64, row as f64) })
}

/// ln of the tone, so that speckle is of one strength everywhere; cut at a thousandth of the mean.
fn logarithm(image: &Grid<f32>) -> Grid<f32> {
    let (sum, n) = image
        .valid_values()
        .filter(|v| *v > 0.0 && v.is_finite())
        .fold((0.0f64, 0usize), |(sum, n), v| (sum + f64::from(v), n + 1));
    let floor = (1e-3 * sum / n.max(1) as f64).max(f64::from(f32::MIN_POSITIVE)) as f32;
    image.map(|v| if v.is_nan() { v } else { v.max(floor).ln() })
}
