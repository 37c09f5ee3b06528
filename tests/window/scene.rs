//! A desk with a raster in memory: Sorrel Reach without a file.

use std::sync::Arc;
use std::time::{Duration, Instant};

use ventifact::desk::{Laid, Model, Opened, TILE, TileKey, TileReader, TileShelf};
use ventifact::ground::{Affine, Body, BodyShape, Frame, Grid, Place, Projection, Seed, Work};
use ventifact::science::scene::reach;
use ventifact::study::{Id, ImageKind, Patch, RasterEntry};

/// Serves tiles of a grid, coarser ones by averaging the valid pixels.
pub struct InMemory(pub Grid<f32>);

impl TileReader for InMemory {
    fn size(&self) -> [usize; 2] {
        [self.0.width(), self.0.height()]
    }

    fn read(&self, key: TileKey, _: &Work) -> Result<Grid<f32>, String> {
        let factor = key.factor();
        let [col0, row0, col1, row1] = key.pixels(self.size());
        let (width, height) = ((col1 - col0).div_ceil(factor), (row1 - row0).div_ceil(factor));
        assert!(width <= TILE && height <= TILE, "{key:?}");
        let mean = |col: usize, row: usize| {
            let (mut sum, mut count) = (0.0, 0);
            for y in row0 + row * factor..(row0 + (row + 1) * factor).min(row1) {
                for x in col0 + col * factor..(col0 + (col + 1) * factor).min(col1) {
                    if let Some(value) = self.0.get(x, y) {
                        sum += value;
                        count += 1;
                    }
                }
            }
            (count > 0).then(|| sum / count as f32)
        };
        let means: Vec<Option<f32>> = (0..height)
            .flat_map(|row| (0..width).map(move |col| (col, row)))
            .map(|(c, r)| mean(c, r))
            .collect();
        let values = means.iter().map(|m| m.unwrap_or(0.0)).collect();
        let valid = means.iter().map(Option::is_some).collect();
        Ok(Grid::from_parts(width, height, values, Some(valid)))
    }
}

/// Halvane, the demo's world.
pub fn halvane() -> Body {
    Body { name: "Halvane".into(), shape: BodyShape::sphere(1.42e6), ..Body::earth() }
}

/// A model with one raster laid on the table.
pub fn desk(grid: Grid<f32>, place: Place, patches: Vec<Patch>) -> Model {
    let mut model = Model::new(Arc::new(|| ()));
    model.sheet.rasters.push(RasterEntry {
        id: Id(1),
        name: "Sorrel Reach mosaic".into(),
        path: "sorrel-reach.tif".into(),
        bands: Default::default(),
        kind: ImageKind::Radar,
        placement: Default::default(),
        tone: Default::default(),
        light_from: None,
    });
    model.sheet.patches = patches;
    let size = [grid.width(), grid.height()];
    let tiles = TileShelf::new(Arc::new(InMemory(grid)), Arc::new(|| ()));
    model.session.rasters.insert(Id(1), Opened::Open(Box::new(Laid { size, place, tiles })));
    model
}

/// Sorrel Reach with the demo's patches; the raster turned by `turn_deg` on the map.
pub fn sorrel_reach(turn_deg: f64) -> Model {
    let definition = format!("+proj=sinu +lon_0={} +R=1420000 +units=m +no_defs", reach::CENTRE_LON);
    let projection = Projection::new(&definition, halvane().shape).expect("the demo's projection");
    let (sin, cos) = turn_deg.to_radians().sin_cos();
    let Affine { a, c, e, f, .. } = reach::affine(1);
    let affine = Affine { a: a * cos, b: -e * sin, c, d: a * sin, e: e * cos, f };
    let frame = Frame::Projected { projection, unit_m: 1.0 };
    let place = Place::new(affine, frame, halvane()).expect("a place");
    let patches = reach::patches()
        .into_iter()
        .zip(2..)
        .map(|(truth, id)| Patch::new(Id(id), truth.name, Id(1), truth.outline))
        .collect();
    desk(reach::mosaic(Seed(1)), place, patches)
}

/// Waits until every tile asked for has come.
pub fn settle(model: &Model) {
    let end = Instant::now() + Duration::from_secs(30);
    let idle = || {
        let laid = model.session.rasters.values().filter_map(Opened::laid);
        laid.into_iter().all(|laid| laid.tiles.is_idle())
    };
    while !idle() {
        assert!(Instant::now() < end, "tiles never came");
        std::thread::sleep(Duration::from_millis(2));
    }
}
