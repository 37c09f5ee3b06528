//! Opening a TIFF: which directories are the image, its coarser levels and its masks, and what the
//! tags say about the bands.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use super::ifd::{self, Dialect, Directory};
use super::image::Image;
use super::info::{BandInfo, Light, SampleType};
use super::layout::{Colour, Layout};
use super::limits::Limits;
use super::metadata::{self, Item};
use super::source::Source;
use super::tag;
use crate::files::error::{FileError, Spot};
use crate::files::georef::GeoTags;
use crate::ground::{Azimuth, Caution};

/// One level of detail and its mask.
#[derive(Debug)]
pub(super) struct Level {
    pub(super) image: Image,
    pub(super) mask: Option<Image>,
}

/// An opened TIFF.
pub(super) struct Opened {
    pub(super) big_tiff: bool,
    /// Finest first.
    pub(super) levels: Vec<Level>,
    pub(super) bands: Vec<BandInfo>,
    pub(super) nodata: Option<f64>,
    pub(super) geo: GeoTags,
    pub(super) light: Option<Light>,
    pub(super) cautions: Vec<Caution>,
}

/// The part a directory plays, from its subfile type.
#[derive(Clone, Copy, PartialEq, Eq)]
struct Part {
    reduced: bool,
    mask: bool,
}

/// Layouts gathered from the file and from the overview file beside it.
#[derive(Default)]
struct Gathered {
    images: Vec<(Layout, Arc<Source>)>,
    masks: Vec<(Layout, Arc<Source>)>,
    cautions: Vec<Caution>,
}

pub(super) fn open(source: Source, limits: &Limits) -> Result<Opened, FileError> {
    let source = Arc::new(source);
    let (dialect, directories) = directories(&source, limits)?;
    let mut parts = Vec::with_capacity(directories.len());
    for dir in &directories {
        parts.push(part(&source, dir)?);
    }
    let main = parts.iter().position(|p| !p.reduced && !p.mask).unwrap_or(0);
    let Some(dir) = directories.get(main) else {
        let problem = "the file has no image directory";
        return Err(FileError::malformed(source.path(), Spot::File, problem));
    };
    let layout = Layout::read(&source, dir, dialect.big_endian, limits)?;

    let mut gathered = Gathered::default();
    let mut others = 0;
    for (dir, part) in directories.iter().zip(&parts) {
        if dir.index == main {
            continue;
        }
        if !part.reduced && !part.mask {
            others += 1;
            continue;
        }
        gathered.take(&source, dir, *part, dialect, limits);
    }
    if others > 0 {
        let text = format!("The file holds {} images of full resolution; the first is read.", others + 1);
        gathered.cautions.push(Caution::new("more-images", text));
    }
    if let Some(beside) = beside(source.path(), "ovr") {
        gathered.take_file(&beside, limits);
    }

    let xml = dir.text(&source, tag::METADATA_XML, limits.tag_bytes)?.unwrap_or_default();
    let items = metadata::items(&xml);
    let nodata = nodata(&source, dir, layout.sample, &mut gathered.cautions)?;
    let bands = bands(&layout, &items);
    let geo = geo_tags(&source, dir, limits)?;
    let levels = gathered.levels(layout, &source);
    let cautions = gathered.cautions;
    Ok(Opened { big_tiff: dialect.big_tiff, levels, bands, nodata, geo, light: light(&items), cautions })
}

/// `NAME.EXT.added` when that file exists.
fn beside(path: &Path, added: &str) -> Option<PathBuf> {
    let mut name = path.as_os_str().to_owned();
    name.push(".");
    name.push(added);
    Some(PathBuf::from(name)).filter(|p| p.is_file())
}

/// The main chain and the directories that hang below each of its members.
fn directories(source: &Source, limits: &Limits) -> Result<(Dialect, Vec<Directory>), FileError> {
    let (dialect, first) = ifd::header(source)?;
    let mut found = ifd::chain(source, dialect, first, 0, limits)?;
    for i in 0..found.len() {
        let below = found[i].unsigned(source, tag::SUB_IFDS, limits.directories)?.unwrap_or_default();
        for at in below.into_iter().filter(|at| *at != 0) {
            let start = found.len();
            found.extend(ifd::chain(source, dialect, at, start, limits)?);
        }
    }
    Ok((dialect, found))
}

fn part(source: &Source, dir: &Directory) -> Result<Part, FileError> {
    let flags = match dir.first(source, tag::NEW_SUBFILE_TYPE)? {
        Some(flags) => flags,
        // The older tag: 2 is a reduced image.
        None => u64::from(dir.first(source, tag::SUBFILE_TYPE)? == Some(2)),
    };
    Ok(Part { reduced: flags & 1 != 0, mask: flags & 4 != 0 })
}

impl Gathered {
    /// Adds a directory as an image or a mask; one that cannot be read is left out with a caution.
    fn take(&mut self, source: &Arc<Source>, dir: &Directory, part: Part, dialect: Dialect, limits: &Limits) {
        match Layout::read(source, dir, dialect.big_endian, limits) {
            Ok(layout) if part.mask => self.masks.push((layout, source.clone())),
            Ok(layout) => self.images.push((layout, source.clone())),
            Err(error) => {
                let what = if part.mask { "mask" } else { "coarser level" };
                self.cautions.push(Caution::new("level-unread", format!("A {what} is left out: {error}.")));
            }
        }
    }

    /// Adds every directory of an overview file.
    fn take_file(&mut self, path: &Path, limits: &Limits) {
        let opened = Source::open(path).and_then(|source| {
            let (dialect, directories) = directories(&source, limits)?;
            Ok((Arc::new(source), dialect, directories))
        });
        match opened {
            Ok((source, dialect, directories)) => {
                for dir in &directories {
                    if let Ok(part) = part(&source, dir) {
                        self.take(&source, dir, part, dialect, limits);
                    }
                }
            }
            Err(error) => {
                self.cautions
                    .push(Caution::new("level-unread", format!("The overview file is left out: {error}.")));
            }
        }
    }

    /// Sorts the levels by size and gives each its mask. A coarser level must be the same picture in
    /// shape and type, and masked when the full resolution is.
    fn levels(&mut self, main: Layout, source: &Arc<Source>) -> Vec<Level> {
        let mut ids = 0..;
        let mut image =
            |layout: Layout, source: Arc<Source>| Image::chunked(ids.next().unwrap_or(0), layout, source);
        let masks = &mut self.masks;
        let mut mask_for = |layout: &Layout| {
            let same =
                |(m, _): &(Layout, _)| (m.width, m.height, m.samples) == (layout.width, layout.height, 1);
            masks.iter().position(same).map(|i| masks.swap_remove(i))
        };
        let mut coarser: Vec<_> = self.images.drain(..).collect();
        coarser.sort_by_key(|(layout, _)| std::cmp::Reverse((layout.width, layout.height)));

        let main_mask = mask_for(&main).map(|(layout, source)| image(layout, source));
        let mut levels = vec![Level { image: image(main, source.clone()), mask: main_mask }];
        for (layout, source) in coarser {
            let (first, last) = (&levels[0], &levels[levels.len() - 1].image.layout);
            let smaller = layout.width < last.width || layout.height < last.height;
            if !(smaller && reduces(&layout, &first.image.layout)) {
                let text = format!(
                    "A stored picture of {} × {} pixels is not a coarser level of this raster.",
                    layout.width, layout.height
                );
                self.cautions.push(Caution::new("level-unread", text));
                continue;
            }
            let mask = mask_for(&layout);
            if first.mask.is_some() && mask.is_none() {
                let text = format!(
                    "The level of {} × {} pixels has no mask and is left out.",
                    layout.width, layout.height
                );
                self.cautions.push(Caution::new("level-unread", text));
                continue;
            }
            let mask = mask.map(|(layout, source)| image(layout, source));
            levels.push(Level { image: image(layout, source), mask });
        }
        levels
    }
}

/// Whether `small` has the samples of `full` and its shape to a pixel.
fn reduces(small: &Layout, full: &Layout) -> bool {
    let ratio = full.width as f64 / small.width as f64;
    let rows = full.height as f64 / ratio;
    (small.samples, small.sample, small.alpha) == (full.samples, full.sample, full.alpha)
        && small.palette.is_some() == full.palette.is_some()
        && (rows - small.height as f64).abs() <= 1.0 + rows / small.width as f64
}

/// Names, units and scaling of the bands that can be read.
fn bands(layout: &Layout, items: &[Item]) -> Vec<BandInfo> {
    let mut bands = band_names(layout);
    for item in items {
        let Some(band) = item.sample.and_then(|i| bands.get_mut(i)) else { continue };
        let number = item.text.parse::<f64>().ok().filter(|v| v.is_finite());
        match (item.role.as_deref(), number) {
            (Some("scale"), Some(scale)) if scale != 0.0 => band.scale = scale,
            (Some("offset"), Some(offset)) => band.offset = offset,
            (Some("description"), _) if !item.text.is_empty() => band.label = item.text.clone(),
            (Some("unittype"), _) if !item.text.is_empty() => band.unit = Some(item.text.clone()),
            _ => {}
        }
    }
    bands
}

/// Names that follow from the colour model alone.
pub(super) fn band_names(layout: &Layout) -> Vec<BandInfo> {
    if layout.palette.is_some() {
        return ["red", "green", "blue"].map(|c| BandInfo::plain(format!("{c} (palette)"))).into();
    }
    let named: &[&str] = match layout.colour {
        Colour::Rgb | Colour::YCbCr if layout.samples >= 3 => &["red", "green", "blue"],
        Colour::Cmyk if layout.samples >= 4 => &["cyan", "magenta", "yellow", "black"],
        Colour::Grey { white_is_zero: true } => &["grey (0 is white)"],
        Colour::Grey { .. } | Colour::Mask if layout.samples - usize::from(layout.alpha.is_some()) == 1 => {
            &["grey"]
        }
        _ => &[],
    };
    (0..layout.samples)
        .filter(|i| layout.alpha != Some(*i))
        .map(|i| {
            named.get(i).map_or_else(|| BandInfo::plain(format!("band {}", i + 1)), |n| BandInfo::plain(*n))
        })
        .collect()
}

/// The nodata value of tag 42113. One that a sample cannot hold is reported and not used.
fn nodata(
    source: &Source,
    dir: &Directory,
    sample: SampleType,
    cautions: &mut Vec<Caution>,
) -> Result<Option<f64>, FileError> {
    let Some(text) = dir.text(source, tag::NODATA, 1 << 16)? else { return Ok(None) };
    let text = text.trim();
    if text.is_empty() {
        return Ok(None);
    }
    let Some(value) = text.replace(',', ".").parse::<f64>().ok().or_else(|| nan(text)) else {
        let shown: String = text.chars().take(40).collect();
        cautions.push(Caution::new(
            "nodata-unreadable",
            format!("The no-data value “{shown}” is not a number and is not used."),
        ));
        return Ok(None);
    };
    let (low, high) = match sample {
        SampleType::U8 => (0.0, 255.0),
        SampleType::I8 => (-128.0, 127.0),
        SampleType::U16 => (0.0, 65_535.0),
        SampleType::I16 => (-32_768.0, 32_767.0),
        SampleType::U32 => (0.0, f64::from(u32::MAX)),
        SampleType::I32 => (f64::from(i32::MIN), f64::from(i32::MAX)),
        SampleType::F16 | SampleType::F32 | SampleType::F64 => return Ok(Some(value)),
    };
    if value.fract() == 0.0 && (low..=high).contains(&value) {
        return Ok(Some(value));
    }
    let text = format!(
        "The no-data value {value} cannot occur among {} samples; no pixel is taken for missing by it.",
        sample.name()
    );
    cautions.push(Caution::new("nodata-impossible", text));
    Ok(None)
}

/// Spellings of “not a number” that a plain parse does not know, such as `-1.#IND`.
fn nan(text: &str) -> Option<f64> {
    let lower = text.to_ascii_lowercase();
    (lower.contains("nan") || lower.contains("#ind") || lower.contains("#qnan")).then_some(f64::NAN)
}

fn geo_tags(source: &Source, dir: &Directory, limits: &Limits) -> Result<GeoTags, FileError> {
    let reals = |tag| dir.reals(source, tag, limits.tag_bytes / 8);
    let keys = dir.unsigned(source, tag::GEO_KEYS, 1 << 16)?.unwrap_or_default();
    Ok(GeoTags {
        pixel_scale: reals(tag::PIXEL_SCALE)?,
        tie_points: reals(tag::TIE_POINTS)?,
        transformation: reals(tag::TRANSFORMATION)?,
        key_directory: keys.into_iter().map(|k| k as u16).collect(),
        double_params: reals(tag::GEO_DOUBLES)?,
        ascii_params: dir.text(source, tag::GEO_ASCII, limits.tag_bytes)?.unwrap_or_default(),
    })
}

/// Sun and radar directions from items whose names say so, in whatever case and joining.
fn light(items: &[Item]) -> Option<Light> {
    let number = |names: &[&str]| {
        let plain = |name: &str| name.to_ascii_lowercase().replace(['_', '-', ' ', ':'], "");
        let item = items.iter().find(|i| i.sample.is_none() && names.contains(&plain(&i.name).as_str()))?;
        item.text.split_whitespace().next()?.parse::<f64>().ok().filter(|v| v.is_finite())
    };
    let light = Light {
        sun_azimuth: number(&["sunazimuth", "sunazimuthangle", "solarazimuth", "solarazimuthangle"])
            .map(Azimuth::from_deg),
        sun_elevation_deg: number(&[
            "sunelevation",
            "sunelevationangle",
            "solarelevation",
            "solarelevationangle",
        ]),
        radar_look: number(&["lookazimuth", "lookdirection", "radarlookazimuth"]).map(Azimuth::from_deg),
    };
    (light.sun_azimuth.is_some() || light.sun_elevation_deg.is_some() || light.radar_look.is_some())
        .then_some(light)
}
