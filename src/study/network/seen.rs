//! From an image to channels: those proposed, less those struck out, with those drawn; their widths and their
//! sense of flow.

use crate::ground::{Grid, LonLat, Network, Point, Polyline, Stopped, Work};
use crate::science::channel::detect::{DetectSettings, Detected, detect};
use crate::science::channel::sense::sense;
use crate::science::channel::width;
use crate::study::glance::glance;
use crate::study::{FromImage, Id, ImageKind, NetworkEntry, OpenRaster, Sheet, Sources, TracingFinding};

use super::{Found, Ground};

/// Cells a side of the elevation read to tell which way channels fall.
const ELEVATION_CELLS: usize = 4096;

pub fn channels(
    sheet: &Sheet,
    entry: &NetworkEntry,
    ask: &FromImage,
    ground: &Ground,
    sources: &Sources,
    work: &Work,
) -> Result<Result<Found, String>, Stopped> {
    let settings = detect_settings(sheet);
    let is_radar = ground.entry.kind == ImageKind::Radar;
    // The noise is told by all ground in view; the outline only says which channels are wanted.
    let image = &ground.image;
    let mut cautions = Vec::new();
    let mut tracing = TracingFinding {
        floor: 0.0,
        widths_px: Vec::new(),
        proposed_reaches: 0,
        struck_reaches: 0,
        bridged_gaps: 0,
        loops: 0,
        lost_arrows: Vec::new(),
    };
    let mut network = Network::default();
    if ask.proposed {
        work.phase(&format!("channels of {}", entry.name), 0);
        match detect(image, is_radar, &settings, work)? {
            Err(why) => return Ok(Err(why)),
            Ok(Detected { network: found, floor, widths_px, bridged, cautions: said, .. }) => {
                (tracing.floor, tracing.widths_px, tracing.bridged_gaps) = (floor, widths_px, bridged);
                let outline = ground.outline.map(|p| ground.of_full(p));
                let found = if ground.is_outlined { found.clipped(|p| outline.contains(p)) } else { found };
                tracing.proposed_reaches = found.reaches.len();
                cautions.extend(said);
                let struck = struck(&found, ask, ground, settings.widest_px);
                tracing.struck_reaches = struck.len();
                network = found.without(&struck);
            }
        }
    }
    let drawn: Vec<Polyline> =
        ask.traced.iter().map(|t| Polyline(t.line.0.iter().map(|p| ground.of_full(*p)).collect())).collect();
    network = network.with_drawn(&drawn, settings.narrowest_px.max(2.0));
    width::measure(image, &mut network, settings.tone, settings.widest_px, work)?;
    let arrows: Vec<[Point; 2]> = ask.flows.iter().map(|arrow| arrow.map(|p| ground.of_full(p))).collect();
    let heights = ask.elevation.and_then(|id| Heights::of(sheet, sources, id, ground, work));
    let height = |p: Point| heights.as_ref().and_then(|h| h.at(ground.to_full(p)));
    let known: Option<&dyn Fn(Point) -> Option<f64>> = if heights.is_some() { Some(&height) } else { None };
    let (mut network, lost) = sense(network, known, &arrows);
    if heights.is_some() {
        for node in &mut network.nodes {
            node.elevation_m = height(node.at);
        }
        for station in network.reaches.iter_mut().flat_map(|r| &mut r.stations) {
            station.elevation_m = height(station.at);
        }
    }
    tracing.lost_arrows = lost.into_iter().map(|p| ground.to_full(p)).collect();
    let network = network.on_ground(&ground.open.place, ground.factor, |p| ground.to_full(p)).ordered();
    tracing.loops = network.loops();
    Ok(Ok(Found { network, drainage: None, tracing: Some(tracing), inflation: 1.0, summit: None, cautions }))
}

pub fn detect_settings(sheet: &Sheet) -> DetectSettings {
    let s = &sheet.settings.channel;
    DetectSettings {
        tone: s.tone,
        narrowest_px: s.narrowest_px,
        widest_px: s.widest_px,
        significance: s.significance,
        gap_widths: s.gap_widths,
        spur_half_widths: s.spur_half_widths,
        least_length_widths: s.least_length_widths,
    }
}

/// The reaches the user struck out, each the nearest to its mark.
fn struck(found: &Network, ask: &FromImage, ground: &Ground, widest_px: f64) -> Vec<usize> {
    let near = |p: &Point| {
        let (reach, distance) = found.nearest_reach(ground.of_full(*p))?;
        (distance <= widest_px).then_some(reach)
    };
    let mut struck: Vec<usize> = ask.struck.iter().filter_map(near).collect();
    struck.sort_unstable();
    struck.dedup();
    struck
}

/// An elevation raster of the same ground.
struct Heights<'a> {
    grid: Grid<f32>,
    /// Full-resolution pixel of its upper left corner, and full-resolution pixels a cell.
    origin: Point,
    step: f64,
    of: &'a OpenRaster,
    image: &'a OpenRaster,
    is_same_raster: bool,
}

impl<'a> Heights<'a> {
    fn of(sheet: &Sheet, sources: &'a Sources, id: Id, ground: &Ground<'a>, work: &Work) -> Option<Self> {
        let (entry, open) = (sheet.raster(id)?, sources.rasters.get(&id)?);
        let is_same_raster = id == ground.entry.id;
        let mut heights = Self {
            grid: Grid::filled(0, 0, 0.0),
            origin: Point::default(),
            step: 1.0,
            of: open,
            image: ground.open,
            is_same_raster,
        };
        let bounds =
            crate::ground::Bounds::of(ground.outline.outer.iter().filter_map(|p| heights.pixel(*p)))?;
        let read = glance(entry, open, bounds, ELEVATION_CELLS, work).ok()?;
        heights.step = read.covers.width() / read.grid.width().max(1) as f64;
        heights.origin = read.covers.min;
        heights.grid = read.grid;
        Some(heights)
    }

    /// The pixel of the elevation raster at a pixel of the image.
    fn pixel(&self, p: Point) -> Option<Point> {
        if self.is_same_raster {
            return Some(p);
        }
        let at: LonLat = self.image.place.lonlat_of(p)?;
        let info = self.of.raster.info();
        let middle = Point::new(0.5 * info.width as f64, 0.5 * info.height as f64);
        self.of.place.pixel_of_lonlat(at, middle)
    }

    /// Height at a pixel of the image, between the four cells round it.
    fn at(&self, p: Point) -> Option<f64> {
        let p = self.pixel(p)?;
        let (x, y) = ((p.x - self.origin.x) / self.step - 0.5, (p.y - self.origin.y) / self.step - 0.5);
        let (col, row) = (x.floor(), y.floor());
        let (tx, ty) = (x - col, y - row);
        let (mut sum, mut weight) = (0.0, 0.0);
        for (dx, dy, w) in [
            (0.0, 0.0, (1.0 - tx) * (1.0 - ty)),
            (1.0, 0.0, tx * (1.0 - ty)),
            (0.0, 1.0, (1.0 - tx) * ty),
            (1.0, 1.0, tx * ty),
        ] {
            let (c, r) = (col + dx, row + dy);
            if w > 0.0
                && c >= 0.0
                && r >= 0.0
                && let Some(z) = self.grid.get(c as usize, r as usize)
            {
                sum += w * f64::from(z);
                weight += w;
            }
        }
        (weight > 0.0).then(|| sum / weight)
    }
}
