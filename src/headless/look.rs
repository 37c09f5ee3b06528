//! `look`: what a raster file is, and what is wrong with it.

use std::path::Path;

use serde_json::json;

use crate::files::raster::{Light, Limits, Raster};
use crate::ground::Point;
use crate::study::Placement;
use crate::study::sources::{OpenRaster, place_raster};

use super::{Outcome, Trouble};

pub fn look(path: &Path, as_json: bool) -> Result<Outcome, Trouble> {
    let trouble = |why: String| {
        Trouble::new(
            format!("{} cannot be read", path.display()),
            why,
            "TIFF, PNG and JPEG rasters are read; docs/formats.md lists layouts and codecs.",
        )
    };
    let raster = Raster::open(path, &Limits::default()).map_err(|e| trouble(e.to_string()))?;
    let open = place_raster(raster, &Placement::default()).map_err(trouble)?;
    if as_json {
        print_json(&open)
    } else {
        print_words(&open)
    }
    Ok(Outcome::Done)
}

fn centre(open: &OpenRaster) -> Point {
    let info = open.raster.info();
    Point::new(0.5 * info.width as f64, 0.5 * info.height as f64)
}

fn print_words(open: &OpenRaster) {
    let info = open.raster.info();
    let line = |key: &str, value: String| println!("{key:<12}{value}");
    line("file", info.path.display().to_string());
    line("format", format!("{}, {}, {}", info.format, info.layout, info.compression));
    line("size", format!("{} × {} pixels", info.width, info.height));
    let labels: Vec<_> = info.bands.iter().map(|b| b.label.as_str()).collect();
    line("samples", format!("{} ({} stored bits)", info.sample.name(), info.stored_bits));
    line("bands", format!("{}: {}", info.bands.len(), labels.join(", ")));
    for (i, band) in info.bands.iter().enumerate().filter(|(_, b)| b.scale != 1.0 || b.offset != 0.0) {
        line("", format!("band {}: value = {} · sample + {}", i + 1, band.scale, band.offset));
    }
    let levels: Vec<_> = info.levels.iter().map(|l| format!("{} × {}", l.width, l.height)).collect();
    line("levels", levels.join(", "));
    let mut missing: Vec<String> = info.nodata.iter().map(|v| format!("nodata {v}")).collect();
    missing.extend(info.alpha.then(|| "opacity band".into()));
    missing.extend(info.mask.then(|| "mask".into()));
    if let Some(from) = info.light.and_then(Light::from) {
        line(
            "light",
            format!("from {:.1}° by a tag; measure takes it unless --light-from says otherwise", from.deg()),
        );
    }
    line("missing", if missing.is_empty() { "nothing marked".into() } else { missing.join(", ") });
    line("place", open.label.clone());
    for (i, text) in open.place.description(centre(open)).lines().enumerate() {
        line(if i == 0 { "at centre" } else { "" }, text.trim().to_owned());
    }
    if let Some(c) = open.place.lonlat_of(centre(open)) {
        line("", format!("longitude {:.5}°, latitude {:.5}°", c.lon, c.lat));
    }
    for caution in &open.cautions {
        line("caution", format!("{} [{}]", caution.text, caution.code));
    }
}

fn print_json(open: &OpenRaster) {
    let centre = centre(open);
    let frame = open.place.local_frame(centre);
    let document = json!({
        "file": open.raster.info(),
        "place": {
            "label": open.label,
            "body": open.place.body,
            "georeferenced": open.place.is_georeferenced(),
            "pixel_to_map": {
                "x": [open.place.affine.a, open.place.affine.b, open.place.affine.c],
                "y": [open.place.affine.d, open.place.affine.e, open.place.affine.f],
            },
            "length_unit": open.place.unit(),
            "pixel_size_at_centre": frame.map(|f| f.pixel_size()),
            "image_up_azimuth_deg": frame.map(|f| f.azimuth(0.0, -1.0).deg()),
            "centre_lonlat_deg": open.place.lonlat_of(centre).map(|c| [c.lon, c.lat]),
        },
        "cautions": open.cautions,
    });
    println!("{}", serde_json::to_string_pretty(&document).unwrap_or_default());
}
