//! Opening: which format, and what the header and the files beside it say.

use std::path::{Path, PathBuf};

use super::Inner;
use super::cache::ChunkCache;
use super::image::Image;
use super::info::{LevelInfo, RasterInfo, WorldFile};
use super::layout::{Compression, Layout};
use super::limits::Limits;
use super::picture::{self, Kind};
use super::reduce::Coarse;
use super::source::Source;
use super::tiff::{self, Level};
use crate::files::error::{FileError, Spot};
use crate::files::georef;
use crate::ground::Caution;

pub(super) fn open(path: &Path, limits: &Limits) -> Result<Inner, FileError> {
    let source = Source::open(path)?;
    let head = source.read(0, usize::try_from(source.len()).unwrap_or(8).min(8))?;
    match head.as_slice() {
        [b'I', b'I', ..] | [b'M', b'M', ..] => open_tiff(source, limits),
        [0x89, b'P', b'N', b'G', ..] => open_picture(source, Kind::Png, limits),
        [0xFF, 0xD8, 0xFF, ..] => open_picture(source, Kind::Jpeg, limits),
        [] => Err(FileError::malformed(path, Spot::File, "the file is empty")),
        _ => {
            let feature = format!("a file that begins with the bytes {}", hex(&head));
            let advice = "rasters are read from TIFF (also BigTIFF and cloud-optimised), PNG and JPEG files";
            Err(FileError::unsupported(path, Spot::Offset(0), feature, advice))
        }
    }
}

fn hex(bytes: &[u8]) -> String {
    bytes.iter().map(|b| format!("{b:02X}")).collect::<Vec<_>>().join(" ")
}

fn open_tiff(source: Source, limits: &Limits) -> Result<Inner, FileError> {
    let path = source.path().to_owned();
    let opened = tiff::open(source, limits)?;
    let mut cautions = opened.cautions;
    let layout = &opened.levels[0].image.layout;
    let georeference = georef::from_tiff(&opened.geo, layout.width, layout.height).unwrap_or_else(|error| {
        cautions.push(Caution::new("georeference-unread", format!("The georeference is not used: {error}.")));
        None
    });
    let world_file =
        if georeference.is_none() { world_file(&path, &["tfw", "tifw", "wld"], &mut cautions) } else { None };
    let info = RasterInfo {
        path,
        format: if opened.big_tiff { "BigTIFF" } else { "TIFF" },
        width: layout.width,
        height: layout.height,
        bands: opened.bands,
        sample: layout.sample,
        stored_bits: layout.bits,
        compression: match layout.compression {
            Compression::None => "none",
            Compression::Lzw => "LZW",
            Compression::Deflate => "Deflate",
            Compression::PackBits => "PackBits",
            Compression::Jpeg => "JPEG",
            Compression::Zstd => "Zstandard",
            Compression::WebP => "WebP",
        },
        layout: arrangement(layout),
        levels: level_sizes(&opened.levels),
        nodata: opened.nodata,
        alpha: layout.alpha.is_some(),
        mask: opened.levels[0].mask.is_some(),
        georeference,
        world_file,
        light: opened.light,
        cautions,
    };
    Ok(inner(info, opened.levels, limits))
}

fn open_picture(source: Source, kind: Kind, limits: &Limits) -> Result<Inner, FileError> {
    let path = source.path().to_owned();
    let (layout, stored_bits) = picture::describe(&source, kind, limits)?;
    let mut cautions = Vec::new();
    let beside: &[&str] = match kind {
        Kind::Png => &["pgw", "pngw", "wld"],
        Kind::Jpeg => &["jgw", "jpgw", "jpegw", "wld"],
    };
    let world_file = world_file(&path, beside, &mut cautions);
    let info = RasterInfo {
        path,
        format: if kind == Kind::Png { "PNG" } else { "JPEG" },
        width: layout.width,
        height: layout.height,
        bands: tiff::band_names(&layout),
        sample: layout.sample,
        stored_bits,
        compression: if kind == Kind::Png { "Deflate" } else { "JPEG" },
        layout: "one piece".into(),
        levels: vec![LevelInfo { width: layout.width, height: layout.height }],
        nodata: None,
        alpha: layout.alpha.is_some(),
        mask: false,
        georeference: None,
        world_file,
        light: None,
        cautions,
    };
    let image = Image::whole(layout, std::sync::Arc::new(source), kind);
    Ok(inner(info, vec![Level { image, mask: None }], limits))
}

fn inner(info: RasterInfo, levels: Vec<Level>, limits: &Limits) -> Inner {
    let cache = ChunkCache::new(limits.cache_bytes);
    Inner { info, limits: limits.clone(), levels, cache, coarse: Coarse::default() }
}

fn arrangement(layout: &Layout) -> String {
    let shape = if layout.tiled {
        format!("tiles {} × {}", layout.chunk_width, layout.chunk_height)
    } else if layout.chunk_height >= layout.height {
        "one piece".into()
    } else {
        format!("strips of {} rows", layout.chunk_height)
    };
    if layout.planar { format!("{shape}, band after band") } else { shape }
}

fn level_sizes(levels: &[Level]) -> Vec<LevelInfo> {
    levels.iter().map(|l| LevelInfo { width: l.image.layout.width, height: l.image.layout.height }).collect()
}

/// The world file beside a raster, under the first of the usual endings that exists. It names neither
/// units nor projection, so it is no georeference; the caution says what the user has to state.
fn world_file(path: &Path, endings: &[&str], cautions: &mut Vec<Caution>) -> Option<WorldFile> {
    let found: PathBuf = endings
        .iter()
        .flat_map(|e| [path.with_extension(e), path.with_extension(e.to_uppercase())])
        .find(|p| p.is_file())?;
    let read = || -> Result<_, String> {
        let source = Source::open(&found).map_err(|e| e.to_string())?;
        let size = source.len().min(4096) as usize;
        let bytes = source.read(0, size).map_err(|e| e.to_string())?;
        georef::from_world_file(&String::from_utf8_lossy(&bytes)).map_err(|e| e.to_string())
    };
    match read() {
        Ok(affine) => {
            let text = "A world file places the pixels, but says neither in which units nor in which projection: \
                        state the pixel size in metres and the azimuth of image-up, or lengths stay in pixels.";
            cautions.push(Caution::new("world-file-only", text));
            Some(WorldFile { path: found, affine })
        }
        Err(reason) => {
            cautions
                .push(Caution::new("world-file-unread", format!("The world file is not used: {reason}.")));
            None
        }
    }
}
