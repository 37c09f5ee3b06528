//! Laying rasters on the table: opening the files of the sheet in the background, and again when
//! the path, the bands or the stated place change.

use std::path::PathBuf;
use std::sync::Arc;

use crate::files::raster::{Bands, Raster, Window};
use crate::ground::{Grid, Work};
use crate::study::sources::open_raster;
use crate::study::{OpenRaster, Placement, RasterEntry};

use super::{Answer, Laid, Model, Opened, Slot, TileKey, TileReader, TileShelf, Wake};

/// What an open raster depends on.
#[derive(Clone, Debug, PartialEq)]
pub struct OpenedAs {
    path: PathBuf,
    bands: Bands,
    placement: Placement,
}

impl OpenedAs {
    fn of(entry: &RasterEntry) -> Self {
        Self { path: entry.path.clone(), bands: entry.bands.clone(), placement: entry.placement.clone() }
    }
}

/// Opens every raster of the sheet that is not open as the sheet has it.
pub fn follow(model: &mut Model) {
    let session = &mut model.session;
    let mut any = false;
    for entry in &model.sheet.rasters {
        let now = OpenedAs::of(entry);
        let known = session.opened_as.get(&entry.id);
        let stale = known.is_some_and(|known| *known != now) || !session.rasters.contains_key(&entry.id);
        if stale {
            session.opened_as.insert(entry.id, now);
            session.rasters.insert(entry.id, Opened::Opening);
            session.sources.remove(&entry.id);
            any = true;
        }
    }
    if any {
        // The job that ran is stopped, so whatever it had not opened yet is opened by this one.
        let opening = |entry: &&RasterEntry| matches!(session.rasters.get(&entry.id), Some(Opened::Opening));
        let entries: Vec<RasterEntry> = model.sheet.rasters.iter().filter(opening).cloned().collect();
        let label = match entries.as_slice() {
            [one] => format!("Opening {}", one.name),
            many => format!("Opening {} rasters", many.len()),
        };
        let wake = session.jobs.wake();
        session.jobs.start(Slot::OpenRaster, label, move |work, post| {
            for entry in entries {
                if work.is_stopped() {
                    return;
                }
                post.answer(open(&entry, &wake, work));
            }
        });
    }
}

/// Opens one file and, for a large one without coarse levels, makes them. Stop lays it without.
fn open(entry: &RasterEntry, wake: &Wake, work: &Work) -> Answer {
    let open = match open_raster(entry) {
        Ok(open) => open,
        Err(why) => return Answer::Raster(entry.id, None, Opened::Failed(why)),
    };
    work.phase(&format!("Coarse levels of {}", entry.name), 0);
    // What coarse levels cannot be made of cannot be shown either; the tiles will say why.
    let _ = open.raster.build_coarse(&entry.bands, work);
    let laid = lay(&open, &entry.bands, wake);
    Answer::Raster(entry.id, Some(Box::new(open)), Opened::Open(Box::new(laid)))
}

fn lay(open: &OpenRaster, bands: &Bands, wake: &Wake) -> Laid {
    let info = open.raster.info();
    let tiles = RasterTiles { raster: open.raster.clone(), bands: bands.clone() };
    Laid {
        size: [info.width, info.height],
        place: open.place.clone(),
        tiles: TileShelf::new(Arc::new(tiles), Arc::clone(wake)),
    }
}

/// Serves the table's tiles from a file.
struct RasterTiles {
    raster: Raster,
    bands: Bands,
}

impl TileReader for RasterTiles {
    fn size(&self) -> [usize; 2] {
        [self.raster.info().width, self.raster.info().height]
    }

    fn read(&self, key: TileKey, work: &Work) -> Result<Grid<f32>, String> {
        let [col0, row0, col1, row1] = key.pixels(self.size());
        let window = Window { col: col0, row: row0, width: col1 - col0, height: row1 - row0 };
        self.raster.read_reduced(window, key.factor(), &self.bands, work).map_err(|e| e.to_string())
    }
}
