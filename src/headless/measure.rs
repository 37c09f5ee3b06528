//! `measure`: a quick study of one raster, kept as a sheet.

use std::path::{Path, PathBuf};

use crate::files::layers::read_patches;
use crate::files::raster::{Bands, Light, Limits, Raster};
use crate::files::text;
use crate::files::wind_table::{self, WindImport};
use crate::ground::{Azimuth, Body, LonLat, Polygon};
use crate::study::crest_edits::{crest_lines, strokes_in};
use crate::study::sheet_file::SheetFile;
use crate::study::sources::{OpenRaster, place_raster};
use crate::study::{Id, ImageKind, Patch, Placement, RasterEntry, Sheet, Tone, WindChoice, WindEntry};
use crate::study::{bulk, judges};

use super::args::Measure;
use super::run::study;
use super::{Outcome, Trouble};

pub fn measure(options: &Measure) -> Result<Outcome, Trouble> {
    let path = absolute(&options.raster)?;
    let raster = Raster::open(&path, &Limits::default()).map_err(|e| {
        Trouble::new(
            format!("{} cannot be read", path.display()),
            e,
            "`ventifact look` says what a file is; docs/formats.md lists what is read.",
        )
    })?;
    let placement =
        Placement { pixel_m: options.pixel_size.map(|m| [m, m]), north_deg: options.north, body: None };
    let wrong =
        |why: String| Trouble::new("the options do not fit the raster", why, "See ventifact measure --help.");
    let band = options.band.unwrap_or(1);
    let open = place_raster(raster, &placement).map_err(wrong)?;
    let bands = open.raster.info().bands.len();
    if band == 0 || band > bands {
        return Err(wrong(format!("--band {band}: the file has bands 1 to {bands}")));
    }
    let by_tag = open.raster.info().light.and_then(Light::from);
    let name = path.file_stem().map_or("raster".into(), |n| n.to_string_lossy().into_owned());
    let mut sheet = Sheet::empty(name.clone());
    sheet.rasters.push(RasterEntry {
        id: Id(1),
        name: name.clone(),
        path: path.clone(),
        bands: Bands::One(band - 1),
        kind: if options.radar { ImageKind::Radar } else { ImageKind::Optical },
        placement,
        tone: Tone::default(),
        light_from: options.light_from.map(Azimuth::from_deg).or(by_tag),
    });
    for (name, outline, tags) in patches(options, &open)? {
        let id = sheet.fresh_id();
        sheet.patches.push(Patch { tags, ..Patch::new(id, name, Id(1), outline) });
    }
    if let Some(file) = &options.crests {
        crests(file, options.crests_only, &open, &mut sheet.patches)?;
    }
    if let Some(file) = &options.winds {
        let centres: Vec<LonLat> =
            sheet.patches.iter().filter_map(|p| judges::centre(p, Some(&open.place))).collect();
        sheet.winds = winds(file, sheet.fresh_id(), &open.place.body, &centres)?;
        if sheet.winds.len() > 1 {
            sheet.patches.iter_mut().for_each(|p| p.winds = WindChoice::Nearest);
        }
    }
    let out = absolute(&options.out)?;
    let sheet_path = out.join(format!("{name}.sheet.json"));
    let file = SheetFile::new(sheet.clone(), serde_json::Value::Null);
    text::write(&sheet_path, &file.render(&out), None)
        .map_err(|e| Trouble::new("the sheet cannot be written", e, "Give another folder with --out."))?;
    study(&sheet, &out)
}

fn absolute(path: &Path) -> Result<PathBuf, Trouble> {
    std::path::absolute(path).map_err(|e| Trouble::new(format!("{} is no path", path.display()), e, ""))
}

/// Name, outline and tags of every patch; the whole raster when no file is given.
fn patches(options: &Measure, open: &OpenRaster) -> Result<Vec<(String, Polygon, Vec<String>)>, Trouble> {
    let info = open.raster.info();
    let Some(file) = &options.patches else {
        let whole = Polygon::rectangle(info.width as f64, info.height as f64);
        return Ok(vec![("Whole raster".into(), whole, Vec::new())]);
    };
    let epsg = info.georeference.as_ref().and_then(|g| g.epsg);
    let read = read_patches(file, &open.place, epsg, [info.width, info.height]).map_err(|e| {
        Trouble::new(
            format!("{} gives no patches", file.display()),
            e,
            "Patches are GeoPackage or GeoJSON polygons; \"frame\" says whether numbers are lonlat, map or pixel.",
        )
    })?;
    for note in &read.notes {
        eprintln!("patches: {note}");
    }
    Ok(read.shapes.into_iter().map(|s| (s.name, s.outline, s.tags)).collect())
}

/// Lines of a file laid into every patch they touch; what they gave is told.
fn crests(file: &Path, only: bool, open: &OpenRaster, patches: &mut [Patch]) -> Result<(), Trouble> {
    let read = crest_lines(file, open).map_err(|e| {
        Trouble::new(
            format!("{} gives no crests", file.display()),
            e,
            "Crests are GeoPackage or GeoJSON line strings; \"frame\" says whether numbers are lonlat, map or pixel.",
        )
    })?;
    for note in &read.notes {
        eprintln!("crests: {note}");
    }
    for patch in patches {
        let (strokes, _) = strokes_in(&read, patch);
        eprintln!("crests: {} laid into {}", strokes.len(), patch.name);
        patch.crests.strokes = strokes;
        patch.crests.drawn_only = only;
    }
    Ok(())
}

/// Wind records read as guessed, of many stations or cells the nearest to each patch; the guess is told, so
/// that a wrong one is seen.
fn winds(file: &Path, id: Id, body: &Body, centres: &[LonLat]) -> Result<Vec<WindEntry>, Trouble> {
    let guess = wind_table::guess(file).map_err(|e| {
        Trouble::new(
            format!("{} is not a wind table that can be guessed", file.display()),
            e,
            "Import it in the window, where every guess can be changed, or edit the sheet.",
        )
    })?;
    for reason in &guess.reasons {
        eprintln!("winds: {reason}");
    }
    for caution in &guess.cautions {
        eprintln!("winds: caution: {} [{}]", caution.text, caution.code);
    }
    let name = file.file_stem().map_or("winds".into(), |n| n.to_string_lossy().into_owned());
    let path = absolute(file)?;
    let entry = |id: Id, name: String, at: Option<LonLat>, import: WindImport| WindEntry {
        id,
        name,
        path: path.clone(),
        import,
        height_m: 10.0,
        roughness_m: 1e-3,
        body: Some(body.clone()),
        at,
    };
    if guess.stands.is_empty() {
        return Ok(vec![entry(id, name, None, guess.import)]);
    }
    let taken = bulk::nearest(&guess.stands, centres, body.shape, 1);
    let stands = taken.into_iter().map(|at| &guess.stands[at]).enumerate();
    let entries: Vec<WindEntry> =
        stands.map(|(k, s)| entry(Id(id.0 + k as u32), s.name.clone(), s.at, s.import.clone())).collect();
    for entry in &entries {
        eprintln!("winds: took {}", entry.name);
    }
    Ok(entries)
}
