//! From elevation to channels. The routed ground is kept, so that another threshold costs only the channels.

use std::sync::{Arc, Mutex, PoisonError};

use crate::ground::{Caution, Grid, Point, Stopped, Work};
use crate::science::drainage::accumulate::{Areas, area};
use crate::science::drainage::basins::{Basin, basins};
use crate::science::drainage::cells::Cells;
use crate::science::drainage::condition::{BreachLimits, Conditioned, condition};
use crate::science::drainage::d8::receivers;
use crate::science::drainage::extract::{ChannelAsk, Channels, channels as extract};
use crate::science::drainage::routing::Receivers;
use crate::science::drainage::smoothness::smoothness;
use crate::science::network::density::inflation_of;
use crate::study::{DrainageFinding, FromElevation, NetworkEntry, Sheet, fingerprint};

use super::{Found, Ground, masked};

/// Basins listed.
const MOST_BASINS: usize = 12;
/// Cells a side of the map of changes.
const MAP_CELLS: usize = 512;
/// Share of changed cells, or of channel length on them, from which conditioning is a caution.
const MUCH_CHANGED: f64 = 0.05;

/// Elevation that was made to drain, and where the water goes.
#[derive(Debug)]
struct Terrain {
    cells: Cells,
    conditioned: Conditioned,
    receivers: Receivers,
    area: Areas,
}

/// The routed grounds of the last networks, by what made them.
#[derive(Debug, Default)]
pub struct Terrains(Mutex<Vec<(String, Arc<Terrain>)>>);

impl Terrains {
    /// Each holds about ten bytes a cell, or fourteen where cells differ in size.
    const MOST: usize = 2;

    fn recall(&self, key: &str) -> Option<Arc<Terrain>> {
        let shelf = self.0.lock().unwrap_or_else(PoisonError::into_inner);
        shelf.iter().find(|(known, _)| known == key).map(|(_, terrain)| Arc::clone(terrain))
    }

    fn keep(&self, key: String, terrain: Arc<Terrain>) {
        let mut shelf = self.0.lock().unwrap_or_else(PoisonError::into_inner);
        shelf.push((key, terrain));
        let behind = shelf.len().saturating_sub(Self::MOST);
        shelf.drain(..behind);
    }
}

pub fn channels(
    sheet: &Sheet,
    entry: &NetworkEntry,
    ask: &FromElevation,
    ground: &Ground,
    terrains: &Terrains,
    work: &Work,
) -> Result<Result<Found, String>, Stopped> {
    let s = &sheet.settings.drainage;
    let key = fingerprint::of_terrain(sheet, entry);
    let terrain = match terrains.recall(&key) {
        Some(terrain) => terrain,
        None => match route(sheet, entry, ask, ground, work)? {
            Ok(terrain) => {
                let terrain = Arc::new(terrain);
                terrains.keep(key, Arc::clone(&terrain));
                terrain
            }
            Err(why) => return Ok(Err(why)),
        },
    };
    let Terrain { cells, conditioned, receivers, area } = &*terrain;
    let surface = &conditioned.surface;
    let outlets: Vec<Point> = ask.outlets.iter().map(|p| ground.of_full(*p)).collect();
    let snap_cells = s.snap_cells as usize;
    let channel_ask = ChannelAsk {
        rule: s.heads,
        threshold_m2: ask.threshold_m2.or(s.threshold_m2),
        outlets: outlets.clone(),
        snap_cells,
        curvature_scale_cells: s.curvature_scale_cells,
    };
    work.phase(&format!("channels of {}", entry.name), 0);
    let found = match extract(surface, cells, receivers, area, &ground.place, &channel_ask, work)? {
        Ok(found) => found,
        Err(why) => return Ok(Err(why)),
    };
    let mut all =
        basins(surface, cells, receivers, area, &found.network, &outlets, snap_cells, MOST_BASINS, work)?;
    let summit = all.first().and_then(|b| summit(surface, b)).map(|p| ground.to_full(p));
    let (_, mut cautions) = smoothness(&ground.image, surface, &found.network, work)?;
    cautions.extend(changed_much(&found, ground, conditioned));
    if !found.is_proposed && channel_ask.threshold_m2.is_none() {
        cautions.push(Caution::new(
            "threshold-assumed",
            "No threshold passes the constant-drop test: a hundredth of the greatest basin is taken, for want of better.",
        ));
    }
    for basin in &mut all {
        basin.outlet = ground.to_full(basin.outlet);
        basin.outline = basin.outline.map(|p| ground.to_full(p));
    }
    let placed = |network: crate::ground::Network| {
        network.on_ground(&ground.open.place, ground.factor, |p| ground.to_full(p)).ordered()
    };
    let found = Channels {
        network: placed(found.network),
        half: placed(found.half),
        twice: placed(found.twice),
        ..found
    };
    let (change_map, change_map_px) = change_map(ground, conditioned);
    let cells_area_m2 = cells_area(surface, cells);
    let inflation = inflation_of(&found.network, &ground.open.place);
    Ok(Ok(Found {
        network: found.network.clone(),
        drainage: Some(DrainageFinding {
            conditioning: s.conditioning,
            changed: conditioned.changed,
            change_map,
            change_map_px,
            change_map_at: ground.origin,
            router: s.router,
            channels: found,
            basins: all,
            cells_area_m2,
        }),
        tracing: None,
        inflation,
        summit,
        cautions,
    }))
}

fn route(
    sheet: &Sheet,
    entry: &NetworkEntry,
    ask: &FromElevation,
    ground: &Ground,
    work: &Work,
) -> Result<Result<Terrain, String>, Stopped> {
    let s = &sheet.settings.drainage;
    let elevation = masked(ground);
    let Some(cells) = Cells::of(&ground.place, elevation.width(), elevation.height()) else {
        return Ok(Err("the raster's cells have no ground size, so slopes and areas are unknown".into()));
    };
    let closed: Vec<_> = ask.closed.iter().map(|lake| lake.map(|p| ground.of_full(p))).collect();
    let limits = BreachLimits { depth_m: s.breach_depth_m, cells: s.breach_cells };
    work.phase(&format!("making {} drain", entry.name), 0);
    let conditioned = condition(&elevation, &cells, s.conditioning, limits, &closed, work)?;
    let receivers = receivers(&conditioned, &cells, work)?;
    let area = area(&conditioned, &cells, s.router, &receivers, work)?;
    Ok(Ok(Terrain { cells, conditioned, receivers, area }))
}

fn cells_area(surface: &Grid<f32>, cells: &Cells) -> f64 {
    (0..surface.height())
        .map(|row| {
            cells.area[row] * (0..surface.width()).filter(|col| surface.is_valid(*col, row)).count() as f64
        })
        .sum()
}

/// Where the basin is highest, in pixels of the surface.
fn summit(surface: &Grid<f32>, basin: &Basin) -> Option<Point> {
    let mut best: Option<(f32, Point)> = None;
    for row in 0..surface.height() {
        for (from, to) in basin.outline.row_spans(row, surface.width()) {
            for col in from..to {
                if let Some(z) = surface.get(col, row)
                    && best.is_none_or(|(most, _)| z > most)
                {
                    best = Some((z, Point::new(col as f64 + 0.5, row as f64 + 0.5)));
                }
            }
        }
    }
    best.map(|(_, p)| p)
}

/// A caution when conditioning made much of the ground, or of the channels.
fn changed_much(found: &Channels, ground: &Ground, conditioned: &Conditioned) -> Option<Caution> {
    let c = &conditioned.changed;
    let share = (c.raised_cells + c.cut_cells) as f64 / c.valid_cells.max(1) as f64;
    let (mut on, mut all) = (0usize, 0usize);
    for p in found.network.reaches.iter().flat_map(|r| &r.line.0) {
        let (col, row) = (p.x as usize, p.y as usize);
        if let (Some(before), Some(after)) = (ground.image.get(col, row), conditioned.surface.get(col, row)) {
            all += 1;
            on += usize::from(before != after);
        }
    }
    let channels = on as f64 / all.max(1) as f64;
    (share > MUCH_CHANGED || channels > MUCH_CHANGED).then(|| {
        Caution::new(
            "much-conditioned",
            format!(
                "Conditioning changed {:.1} % of the cells and made {:.0} % of the channel length: there the network follows the repair, not the ground.",
                100.0 * share,
                100.0 * channels
            ),
        )
    })
}

/// Surface minus elevation, reduced for show: the change of greatest size in each block, and full-resolution
/// pixels a cell.
fn change_map(ground: &Ground, conditioned: &Conditioned) -> (Grid<f32>, f64) {
    let (surface, image) = (&conditioned.surface, &ground.image);
    let step = surface.width().max(surface.height()).div_ceil(MAP_CELLS).max(1);
    let (width, height) = (surface.width().div_ceil(step), surface.height().div_ceil(step));
    let map = Grid::from_fn(width, height, |x, y| {
        let mut greatest = 0.0f32;
        for row in y * step..((y + 1) * step).min(surface.height()) {
            for col in x * step..((x + 1) * step).min(surface.width()) {
                if let (Some(before), Some(after)) = (image.get(col, row), surface.get(col, row))
                    && (after - before).abs() > greatest.abs()
                {
                    greatest = after - before;
                }
            }
        }
        greatest
    });
    (map, step as f64 * ground.factor)
}
