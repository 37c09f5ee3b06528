//! The demo on disk: Sorrel Reach made from its truth, with a sheet that asks for everything.

use std::io;
use std::path::{Path, PathBuf};

use crate::files::georef::GeoTags;
use crate::files::raster::{Bands, write_tiff};
use crate::files::text;
use crate::files::wind_table::{DirectionSense, SpeedUnit, WindImport, WindLayout, ZeroDirection};
use crate::ground::{Body, Point, Seed, WindRecord};
use crate::science::scene::reach;

use super::sheet_file::SheetFile;
use super::{
    FromElevation, FromImage, Id, ImageKind, NetworkEntry, NetworkSource, Obstacle, Patch, Placement,
    RasterEntry, Sheet, Tone, WindChoice, WindEntry,
};

/// Everything of the demo grows from this seed.
pub const SEED: Seed = Seed(1);
/// The file names within the demo's folder.
pub const SHEET: &str = "sorrel-reach.sheet.json";
pub const MOSAIC: &str = "sorrel-reach-mosaic.tif";
pub const ELEVATION: &str = "sorrel-reach-elevation.tif";
pub const REACH_MAST: &str = "reach-mast.csv";
pub const CORRIDOR_MAST: &str = "corridor-mast.csv";

/// A pixel of the mosaic on each dune trough that is proposed as a channel.
const DUNE_TROUGHS: [[f64; 2]; 5] =
    [[641.6, 504.2], [653.8, 524.0], [683.0, 541.0], [630.0, 554.5], [644.8, 571.4]];

const MOSAIC_ID: Id = Id(1);
const ELEVATION_ID: Id = Id(2);
const REACH_MAST_ID: Id = Id(3);
const CORRIDOR_MAST_ID: Id = Id(4);

/// Makes the rasters, records and sheet in `folder` and returns the sheet's path.
///
/// # Errors
/// The reason in words, when the folder cannot be written.
pub fn lay_out(folder: &Path) -> Result<PathBuf, String> {
    let words = |e: &dyn std::fmt::Display| e.to_string();
    let folder = std::path::absolute(folder).map_err(|e: io::Error| words(&e))?;
    // The text writer makes the folder; the rasters go into it.
    for (name, record) in records() {
        text::write(&folder.join(name), &csv(&record), None).map_err(|e| words(&e))?;
    }
    write_rasters(&folder)?;
    let path = folder.join(SHEET);
    let file = SheetFile::new(sheet(&folder), serde_json::Value::Null);
    text::write(&path, &file.render(&folder), None).map_err(|e| words(&e))?;
    Ok(path)
}

/// Makes the two rasters in `folder`.
///
/// # Errors
/// The reason in words.
pub fn write_rasters(folder: &Path) -> Result<(), String> {
    let rasters = [
        (MOSAIC, reach::mosaic(SEED), tags(1)),
        (ELEVATION, reach::elevation(SEED), tags(reach::ELEVATION_STEP)),
    ];
    for (name, grid, tags) in rasters {
        write_tiff(&folder.join(name), &grid, Some(&tags)).map_err(|e| e.to_string())?;
    }
    Ok(())
}

/// The two wind records with their file names.
pub fn records() -> [(&'static str, WindRecord); 2] {
    [(REACH_MAST, reach::reach_record(SEED)), (CORRIDOR_MAST, reach::corridor_record(SEED))]
}

/// A record as the table the demo ships: time, speed, direction from; calm hours have no direction.
pub fn csv(record: &WindRecord) -> String {
    let mut table = String::from("time,speed_m_per_s,from_deg\n");
    for s in &record.samples {
        let time = s
            .time
            .and_then(|t| chrono::DateTime::from_timestamp(t, 0))
            .map(|t| t.format("%Y-%m-%dT%H:%M").to_string());
        let from = s.from.map(|a| format!("{:.0}", a.deg()));
        table.push_str(&format!(
            "{},{:.1},{}\n",
            time.unwrap_or_default(),
            s.speed.unwrap_or_default(),
            from.unwrap_or_default()
        ));
    }
    table
}

/// The demo's sheet, its files in `folder`.
pub fn sheet(folder: &Path) -> Sheet {
    let mut sheet = Sheet::empty("Sorrel Reach, Halvane");
    sheet.seed = SEED;
    sheet.notes = "An invented sand sea on an invented world; every number can be checked against the truth it was made from.".into();
    let placement = Placement { body: Some(Body::halvane()), ..Placement::default() };
    let raster = |id, name: &str, file: &str, kind, light| RasterEntry {
        id,
        name: name.into(),
        path: folder.join(file),
        bands: Bands::default(),
        kind,
        placement: placement.clone(),
        tone: Tone::default(),
        light_from: light,
    };
    sheet.rasters.push(raster(MOSAIC_ID, "Radar mosaic", MOSAIC, ImageKind::Radar, Some(reach::look_from())));
    sheet.rasters.push(raster(ELEVATION_ID, "Elevation", ELEVATION, ImageKind::Elevation, None));
    for (id, name, file) in
        [(REACH_MAST_ID, "Reach mast", REACH_MAST), (CORRIDOR_MAST_ID, "Corridor mast", CORRIDOR_MAST)]
    {
        sheet.winds.push(WindEntry {
            id,
            name: name.into(),
            path: folder.join(file),
            import: import(),
            height_m: 10.0,
            roughness_m: 1e-3,
            body: Some(Body::halvane()),
            at: None,
        });
    }
    for (i, truth) in reach::patches().into_iter().enumerate() {
        let wind = if truth.name.starts_with("Corridor") { CORRIDOR_MAST_ID } else { REACH_MAST_ID };
        sheet.patches.push(Patch {
            winds: WindChoice::Chosen(vec![wind]),
            ..Patch::new(Id(5 + i as u32), truth.name, MOSAIC_ID, truth.outline)
        });
    }
    for truth in reach::outcrops() {
        let id = sheet.fresh_id();
        let (name, outline) = (truth.name.into(), truth.outline);
        sheet.obstacles.push(Obstacle { id, name, raster: MOSAIC_ID, outline });
    }
    add_networks(&mut sheet);
    sheet
}

/// The dry channels twice: from elevation, and on the mosaic with the elevation to tell which way they fell.
fn add_networks(sheet: &mut Sheet) {
    let step = reach::ELEVATION_STEP as f64;
    let ground = reach::channel_ground();
    let cells = ground.map(|p| Point::new(p.x / step, p.y / step));
    let from_elevation =
        NetworkEntry::from_elevation(sheet.fresh_id(), "Dry channels, elevation", ELEVATION_ID);
    // Valleys that were drawn and not carved have no constant drop: the threshold is stated.
    let routed =
        FromElevation { threshold_m2: Some(reach::CHANNEL_THRESHOLD_M2), ..FromElevation::default() };
    sheet.networks.push(NetworkEntry {
        within: Some(cells),
        source: NetworkSource::Elevation(routed),
        ..from_elevation
    });
    // Troughs of the long dunes are dark strips too: struck out by eye, as a user would.
    let struck = DUNE_TROUGHS.map(Point::from).to_vec();
    let seen = FromImage { elevation: Some(ELEVATION_ID), struck, ..FromImage::default() };
    let on_image = NetworkEntry::from_image(sheet.fresh_id(), "Dry channels, mosaic", MOSAIC_ID);
    sheet.networks.push(NetworkEntry {
        within: Some(ground),
        source: NetworkSource::Image(seen),
        ..on_image
    });
    // The channels in view are a few pixels wide; dune troughs are wider.
    sheet.settings.channel.widest_px = 12.0;
    sheet.settings.flow.liquid_density = reach::LIQUID_DENSITY;
    sheet.settings.flow.grain_density = reach::BED_GRAIN_DENSITY;
}

fn import() -> WindImport {
    WindImport {
        delimiter: ',',
        header_lines: 1,
        layout: WindLayout::Series { time: vec![0], speed: 1, direction: 2 },
        speed_unit: SpeedUnit::MetrePerSecond,
        direction: DirectionSense::From,
        missing: Vec::new(),
        zero_direction: ZeroDirection::North,
        day_first: false,
        only: None,
        gust: None,
    }
}

/// The georeferencing keys of a raster with `step` mosaic pixels a cell: a user-defined sinusoidal
/// projection on Halvane's sphere (GeoTIFF 1.1, keys 1024–3088).
fn tags(step: usize) -> GeoTags {
    let affine = reach::affine(step);
    let radius = Body::halvane().shape.equatorial_m;
    let citation = "Halvane sinusoidal, centre 64 E|";
    let doubles = [radius, radius, reach::CENTRE_LON, 0.0, 0.0];
    let (short, double, ascii) = (0, 34736, 34737);
    let keys: &[[u16; 4]] = &[
        [1024, short, 1, 1],
        [1025, short, 1, 1],
        [1026, ascii, citation.len() as u16, 0],
        [2048, short, 1, 32767],
        [2050, short, 1, 32767],
        [2054, short, 1, 9102],
        [2056, short, 1, 32767],
        [2057, double, 1, 0],
        [2058, double, 1, 1],
        [3072, short, 1, 32767],
        [3074, short, 1, 32767],
        [3075, short, 1, 24],
        [3076, short, 1, 9001],
        [3082, double, 1, 3],
        [3083, double, 1, 4],
        [3088, double, 1, 2],
    ];
    let header = [1, 1, 1, keys.len() as u16];
    GeoTags {
        pixel_scale: vec![affine.a, -affine.e, 0.0],
        tie_points: vec![0.0, 0.0, 0.0, affine.c, affine.f, 0.0],
        transformation: Vec::new(),
        key_directory: header.into_iter().chain(keys.iter().flatten().copied()).collect(),
        double_params: doubles.to_vec(),
        ascii_params: citation.into(),
    }
}
