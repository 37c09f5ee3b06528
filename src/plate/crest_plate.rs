//! The plate of the crests of one patch: a large map of them, the numbers, the figures, the cautions, and what they
//! rest on.

use crate::ground::{LengthUnit, Point, Polygon};
use crate::science;
use crate::study::{CrestSettings, CrestsFinding, PatchFinding, PopulationFinding, RasterFinding};

use super::caption::{self, Recipe};
use super::map::{MapCrests, MapLayers, MapPatch, MapView, close_up, crest_key, map_of};
use super::page::{Block, GAP_MM, Page};
use super::sketch::Type;
use super::{Figure, Theme, numbers, pattern};

/// All that a crest plate shows.
#[derive(Clone, Debug)]
pub struct CrestPlate<'a> {
    pub patch: &'a PatchFinding,
    /// In full-resolution pixels, like the masks.
    pub outline: &'a Polygon,
    /// Ground that the user said is no bedform.
    pub masks: &'a [Polygon],
    /// How crests were looked for.
    pub settings: &'a CrestSettings,
    pub raster: &'a RasterFinding,
    pub view: MapView<'a>,
    pub recipe: &'a Recipe,
}

/// Columns are about this wide, millimetres.
const COLUMN_MM: f64 = 54.0;

/// The crests of a patch as its maps show them; none where none were traced.
pub fn crests_on_map<'a>(patch: &'a PatchFinding, masks: &'a [Polygon]) -> MapCrests<'a> {
    let (lines, junctions) = match &patch.crests {
        Ok(found) => (found.lines.as_slice(), found.junctions.as_slice()),
        Err(_) => Default::default(),
    };
    MapCrests { lines, junctions, masks, population: None, name: &patch.name }
}

/// The crests of each population that has some, in a style of its own.
pub(super) fn of_populations(populations: &[PopulationFinding]) -> Vec<MapCrests<'_>> {
    populations
        .iter()
        .enumerate()
        .filter_map(|(n, p)| {
            let found = p.crests.as_ref().ok().filter(|c| !c.lines.is_empty())?;
            let (lines, junctions) = (found.lines.as_slice(), found.junctions.as_slice());
            Some(MapCrests { lines, junctions, masks: &[], population: Some(n), name: &p.name })
        })
        .collect()
}

/// A map of crests close about their patch with its key beneath, as wide as `size_mm` says.
pub(super) fn crest_map(
    view: &MapView,
    patch: MapPatch,
    crests: &[MapCrests],
    size_mm: [f64; 2],
    theme: &Theme,
) -> Figure {
    let layers = MapLayers { patches: &[patch], crests, ..MapLayers::default() };
    let whole = view.covers;
    let near = view.cropped(close_up(patch.outline, [whole.max.x, whole.max.y]));
    let view = match &near {
        Some((picture, covers)) => &MapView { picture, covers: *covers, place: view.place },
        None => view,
    };
    let picture = map_of(view, &layers, size_mm, theme);
    let key = crest_key(view, crests, size_mm, theme);
    let mut figure = Figure {
        width_mm: size_mm[0],
        height_mm: picture.height_mm + 2.0 + key.height_mm,
        items: Vec::new(),
    };
    figure.place(&picture, Point::new(0.5 * (size_mm[0] - picture.width_mm), 0.0));
    figure.place(&key, Point::new(0.0, picture.height_mm + 2.0));
    figure
}

/// The plate, `width_mm` wide (180 suits two journal columns), as high as it needs.
pub fn crest_plate(plate: &CrestPlate, width_mm: f64, theme: &Theme) -> Figure {
    let patch = plate.patch;
    let mut page = Page::new(width_mm, theme);
    page.title(&format!("{}: crests", patch.name), &format!("{} · {}", plate.raster.name, plate.raster.body));
    page.paragraph(&crest_sentence(patch), Type::new(theme.text.heading, theme.ink));
    page.space(2.0);
    let subject =
        MapPatch { name: &patch.name, outline: plate.outline, nodes: &[], rose: None, is_subject: true };
    let crests = [crests_on_map(patch, plate.masks)];
    let picture = crest_map(&plate.view, subject, &crests, [page.room(), 0.92 * page.room()], theme);
    page.put(&picture, 0.0, page.y);
    page.space(picture.height_mm + 0.7 * GAP_MM);

    let columns = ((page.room() / COLUMN_MM).floor() as usize).max(3);
    let column = (page.room() - (columns - 1) as f64 * GAP_MM) / columns as f64;
    let mut tops = vec![page.y; columns];
    if let Ok(found) = &patch.crests {
        page.columns(&evidence(plate, found, subject, column, theme), column, &mut tops);
    }
    let cautions = caption::cautions(patch, &[]);
    if !cautions.is_empty() {
        let head = page.heading("Cautions", 0.0, page.y, page.room());
        page.space(head);
        page.cautions(&cautions);
    }
    page.finish(&notes(plate), plate.recipe, Some(&patch.fingerprint))
}

/// What was found, in one or two sentences.
pub fn crest_sentence(patch: &PatchFinding) -> String {
    let found = match &patch.crests {
        Ok(found) if !found.lines.is_empty() => found,
        Ok(_) => return format!("No crest of {} passes the noise floor.", patch.name),
        Err(why) => return format!("No crests of {}: {why}.", patch.name),
    };
    let n = &found.numbers;
    let length = |v: f64| numbers::length(v, patch.unit, 3);
    let azimuth = n.azimuth.map_or(String::new(), |(axis, _)| {
        format!(", running along {}°", numbers::angle(axis.deg(), 0, 180.0))
    });
    let apart = found.spacing.quartiles[1]
        .map_or(String::new(), |median| format!(", {} apart at the median", length(median)));
    let d = &found.defects;
    format!(
        "{} of {}, {} in all{azimuth}{apart}. {} and {}.",
        of(n.count, "crest", "crests"),
        patch.name,
        length(n.total_length),
        of(d.ends, "free end", "free ends"),
        of(d.forks, "fork", "forks"),
    )
}

fn of(n: usize, one: &str, many: &str) -> String {
    format!("{} {}", numbers::count(n), if n == 1 { one } else { many })
}

fn evidence(
    plate: &CrestPlate,
    found: &CrestsFinding,
    subject: MapPatch,
    width: f64,
    theme: &Theme,
) -> Vec<Block> {
    let (patch, unit) = (plate.patch, plate.patch.unit);
    let block = |heading: &str, figure: Figure| Block { heading: heading.into(), figure };
    let mut blocks = vec![
        block("Numbers", pattern::crest_numbers(found, unit, width, theme)),
        block("Direction", pattern::crest_rose(found, &patch.trend, unit, width, theme)),
        block(
            "Spacing from crest to crest",
            pattern::spacing_survival(found, &patch.spectrum, unit, width, theme),
        ),
        block("Ends and forks", pattern::defect_diagram(found, unit, width, theme)),
        block("Length of crests", pattern::crest_lengths(found, unit, width, theme)),
    ];
    let populations = of_populations(&patch.pattern.populations);
    if !populations.is_empty() {
        let figure = crest_map(&plate.view, subject, &populations, [width, 1.4 * width], theme);
        blocks.push(block("Crests by population", figure));
    }
    blocks
}

fn notes(plate: &CrestPlate) -> Vec<String> {
    let mut notes = vec![map_note(plate)];
    let cited = caption::cited(&caption::methods_of_crests(plate.patch), &science::methods());
    notes.extend((!cited.is_empty()).then_some(cited));
    notes
}

fn map_note(plate: &CrestPlate) -> String {
    let raster = plate.raster;
    let pixel = raster.pixel_m.map_or("without ground size".to_owned(), |[x, y]| {
        format!("of {} × {} m", numbers::significant(x, 3), numbers::significant(y, 3))
    });
    let margin = if plate.view.place.is_georeferenced() {
        "longitude and latitude in degrees; angles from true north"
    } else {
        "distance from the raster’s upper left corner; angles from the north stated for it"
    };
    let unit = match plate.patch.unit {
        LengthUnit::Metre => "lengths along the ground",
        LengthUnit::Pixel => "lengths in pixels",
    };
    format!(
        "Map: {} ({} × {} pixels {pixel}; {}). Margin: {margin}; {unit}. {}",
        raster.name,
        raster.width,
        raster.height,
        raster.projection,
        tracing_note(&plate.patch.crests, plate.settings)
    )
}

/// How crests were traced and how a line's width is to be read.
pub(super) fn tracing_note(crests: &Result<CrestsFinding, String>, settings: &CrestSettings) -> String {
    let Ok(found) = crests else { return String::new() };
    format!(
        "Crests: {} at a scale of {} px; lines start where noise alone would start one in {} of such patches, gaps up \
         to {} scales are bridged, lines below {} scales are left out, simplified within {} px. Width: the \
         chance that a line is a crest and no texture, by lines of the wrong sense traced alike. Ends at border, gap \
         or mask are not defects.",
        found.model.name(),
        numbers::plain(found.full_scale_px(), 1),
        numbers::percent(settings.significance),
        numbers::plain(settings.bridge_scales, 1),
        numbers::plain(settings.least_length_scales, 1),
        numbers::plain(settings.tolerance_px * found.factor, 2),
    )
}
