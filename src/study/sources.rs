//! The files of a sheet, opened: rasters with the place they are used at, and wind records.

use std::collections::BTreeMap;

use crate::files::raster::{Limits, Raster};
use crate::files::wind_table;
use crate::ground::{Caution, Place, WindRecord};

use super::{Failure, Id, Placement, RasterEntry, Sheet, WindEntry};

/// What a run reads from. Opening never fails as a whole: what cannot be opened is named.
#[derive(Debug, Default)]
pub struct Sources {
    pub rasters: BTreeMap<Id, OpenRaster>,
    pub winds: BTreeMap<Id, WindRecord>,
    pub failures: Vec<Failure>,
}

/// An open raster and where it lies, after what the user said.
#[derive(Clone, Debug)]
pub struct OpenRaster {
    pub raster: Raster,
    pub place: Place,
    /// The reference system in words.
    pub label: String,
    pub cautions: Vec<Caution>,
}

impl Sources {
    /// Opens everything the sheet names.
    pub fn open(sheet: &Sheet) -> Self {
        let mut sources = Self::default();
        for entry in &sheet.rasters {
            match open_raster(entry) {
                Ok(open) => {
                    sources.rasters.insert(entry.id, open);
                }
                Err(why) => sources.failures.push(Failure { what: format!("raster {}", entry.name), why }),
            }
        }
        for entry in &sheet.winds {
            match read_wind(entry) {
                Ok(record) => {
                    sources.winds.insert(entry.id, record);
                }
                Err(why) => {
                    sources.failures.push(Failure { what: format!("wind record {}", entry.name), why })
                }
            }
        }
        sources
    }
}

/// Opens one raster at the place its entry says.
///
/// # Errors
/// The reason in words.
pub fn open_raster(entry: &RasterEntry) -> Result<OpenRaster, String> {
    let raster = Raster::open(&entry.path, &Limits::default()).map_err(|e| e.to_string())?;
    let bands = raster.info().bands.len();
    if let Some(bad) = entry.bands.indices().into_iter().find(|b| *b >= bands) {
        return Err(format!("band {} was chosen, but the file has {bands}", bad + 1));
    }
    place_raster(raster, &entry.placement)
}

/// An open file at the place the user settled.
///
/// # Errors
/// The reason in words.
pub fn place_raster(raster: Raster, placement: &Placement) -> Result<OpenRaster, String> {
    let info = raster.info();
    let file = info.georeference.as_ref();
    let Placement { pixel_m, north_deg, body } = placement;
    let place = Place::settled(file.map(|g| &g.place), *pixel_m, *north_deg, body.as_ref())
        .map_err(|e| e.to_string())?;
    let mut cautions = info.cautions.clone();
    cautions.extend(file.iter().flat_map(|g| g.cautions.clone()));
    if !place.is_georeferenced() && north_deg.is_none() {
        cautions.push(Caution::new(
            "north-assumed",
            "The file does not say where north is: image-up is taken as true north.",
        ));
    }
    let label = match (file, pixel_m) {
        (Some(g), None) => g.label.clone(),
        _ => place.frame_in_words(),
    };
    Ok(OpenRaster { raster, place, label, cautions })
}

/// Reads one wind record as its entry says.
///
/// # Errors
/// The reason in words.
pub fn read_wind(entry: &WindEntry) -> Result<WindRecord, String> {
    wind_table::read(&entry.path, &entry.import).map_err(|e| e.to_string())
}
