//! A network against the others of the sheet on the same ground.

use crate::ground::{Network, NetworkNode, Place, Point, Polygon, Polyline, ground_distance};
use crate::science::network::compare::{Agreement, compare};
use crate::study::{Id, NetworkFinding, Sheet, Sources};

/// What `this` and each of `others` have in common; those on other ground are left out.
pub fn agreements(
    sheet: &Sheet,
    sources: &Sources,
    this: &NetworkFinding,
    others: &[&NetworkFinding],
) -> Vec<(Id, String, Agreement)> {
    others
        .iter()
        .filter(|other| other.id != this.id)
        .filter_map(|other| Some((other.id, other.name.clone(), agreement(sheet, sources, this, other)?)))
        .collect()
}

fn agreement(
    sheet: &Sheet,
    sources: &Sources,
    this: &NetworkFinding,
    other: &NetworkFinding,
) -> Option<Agreement> {
    let place = &sources.rasters.get(&this.raster)?.place;
    let theirs = &sources.rasters.get(&other.raster)?.place;
    let to_here = |p: Point| crossing(theirs, place, this.raster == other.raster, p);
    let to_there = |p: Point| crossing(place, theirs, this.raster == other.raster, p);
    let moved = moved(&other.network, to_here)?;
    let (mine, yours) = (ground(sheet, sources, this)?, ground(sheet, sources, other)?);
    let inside = |p: Point| mine.contains(p) && to_there(p).is_some_and(|q| yours.contains(q));
    let (a, b) = (this.network.clipped(inside), moved.clipped(inside));
    if a.reaches.is_empty() && b.reaches.is_empty() {
        return None;
    }
    let middle = mine.bounds()?.centre();
    let size = |place: &Place, p: Point, factor: usize| {
        place.local_frame(p).map_or(0.0, |f| f.pixel_area().sqrt() * factor as f64)
    };
    let coarser =
        size(place, middle, this.factor).max(to_there(middle).map_or(0.0, |p| size(theirs, p, other.factor)));
    let tolerance = sheet.settings.network.same_channel_px * coarser;
    Some(compare(&a, &b, tolerance, |p, q| ground_distance(place, p, q)))
}

/// A pixel of one raster on another of the same body.
fn crossing(from: &Place, to: &Place, is_same: bool, p: Point) -> Option<Point> {
    if is_same {
        return Some(p);
    }
    if from.body.shape != to.body.shape {
        return None;
    }
    to.pixel_of_lonlat(from.lonlat_of(p)?, p)
}

/// The ground a network was sought on, in its own pixels.
fn ground(sheet: &Sheet, sources: &Sources, finding: &NetworkFinding) -> Option<Polygon> {
    let entry = sheet.network(finding.id)?;
    let info = sources.rasters.get(&finding.raster)?.raster.info();
    Some(entry.within.clone().unwrap_or_else(|| Polygon::rectangle(info.width as f64, info.height as f64)))
}

/// A network on another raster's pixels; `None` where a point has no place there.
fn moved(network: &Network, to: impl Fn(Point) -> Option<Point>) -> Option<Network> {
    let mut moved = network.clone();
    for node in &mut moved.nodes {
        *node = NetworkNode { at: to(node.at)?, ..*node };
    }
    for reach in &mut moved.reaches {
        reach.line = Polyline(reach.line.0.iter().map(|p| to(*p)).collect::<Option<_>>()?);
        for station in &mut reach.stations {
            station.at = to(station.at)?;
        }
    }
    Some(moved)
}
