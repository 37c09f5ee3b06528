//! The plate of one patch: its map, trend, spacing, winds and verdicts, the finding in words, the
//! cautions, and what it rests on.

use crate::ground::{LengthUnit, Polygon};
use crate::science;
use crate::study::{
    ComparisonFinding, CrestSettings, ObstacleFinding, PatchFinding, RasterFinding, RecoveryFinding,
    WindFinding,
};

use super::caption::{self, Recipe};
use super::crest_plate::{crest_map, crests_on_map, tracing_note};
use super::dial::{class_bars, dial_face};
use super::map::{MapPatch, MapView, Picture, map};
use super::page::{Block, GAP_MM, Page};
use super::sketch::Type;
use super::{
    Figure, Theme, bars, drift_calendar, flips, modes, numbers, obstacle, pattern, profile, regime_map, rose,
    sand_rose, spectrum,
};

/// All that a patch plate shows.
#[derive(Clone, Debug)]
pub struct PatchPlate<'a> {
    pub patch: &'a PatchFinding,
    /// In full-resolution pixels, like the outlines of the neighbours.
    pub outline: &'a Polygon,
    /// Other patches of the raster, by name.
    pub neighbours: Vec<(&'a str, &'a Polygon)>,
    pub raster: &'a RasterFinding,
    pub view: MapView<'a>,
    /// The raster alone where the view's picture carries a flow texture: what lies under the map of crests.
    pub bare: &'a Picture,
    /// The records its verdicts name; others are left out.
    pub winds: &'a [WindFinding],
    pub recipe: &'a Recipe,
    /// Ground of the patch that the user said is no bedform.
    pub masks: &'a [Polygon],
    /// How crests were looked for.
    pub crests: &'a CrestSettings,
    /// What synthetic bedforms laid into it say.
    pub recovery: Option<&'a RecoveryFinding>,
    /// Those that hold it against other pictures; others are left out.
    pub comparisons: &'a [ComparisonFinding],
    /// Inner and outer radii of the ground looked at round outcrops.
    pub annulus: [f64; 2],
    /// The trend is in the picture already, as a flow texture: no strokes.
    pub flow: bool,
}

/// Columns are about this wide, millimetres.
const COLUMN_MM: f64 = 54.0;

/// The plate, `width_mm` wide (180 suits two journal columns), as high as it needs.
pub fn patch_plate(plate: &PatchPlate, width_mm: f64, theme: &Theme) -> Figure {
    let patch = plate.patch;
    let mut page = Page::new(width_mm, theme);
    page.title(&patch.name, &format!("{} · {}", plate.raster.name, plate.raster.body));
    page.paragraph(&patch.sentence, Type::new(theme.text.heading, theme.ink));
    page.space(2.0);

    let columns = ((page.room() / COLUMN_MM).floor() as usize).max(3);
    let column = (page.room() - (columns - 1) as f64 * GAP_MM) / columns as f64;
    let wide = 2.0 * column + GAP_MM;
    let top = page.y;
    let figure = match plate.recovery {
        Some(recovery) => pattern::recovery_ring(recovery, &patch.trend, column, theme),
        None => rose(&patch.trend, column, theme),
    };
    let trend = Block { heading: "Trend".into(), figure };
    let picture = patch_map(plate, [wide, 1.05 * wide], theme);
    page.put(&picture, 0.5 * (wide - picture.width_mm), top + 0.6);
    let below = top + picture.height_mm + 0.7 * GAP_MM;
    let mut tops = vec![top; columns];
    tops[..2].fill(below);
    page.columns(&[trend], column, &mut tops);
    page.columns(&evidence(plate, column, theme), column, &mut tops);

    let mut cautions = caption::cautions(patch, plate.winds);
    let compared = plate.comparisons.iter().filter(|c| c.patch == patch.id).flat_map(|c| &c.cautions);
    for caution in plate.recovery.iter().flat_map(|r| &r.cautions).chain(compared) {
        if !cautions.iter().any(|c| c.text == caution.text) {
            cautions.push(caution.clone());
        }
    }
    if !cautions.is_empty() {
        let head = page.heading("Cautions", 0.0, page.y, page.room());
        page.space(head);
        page.cautions(&cautions);
    }
    page.finish(&notes(plate), plate.recipe, Some(&patch.fingerprint))
}

/// The patch alone, without strokes.
fn subject<'a>(plate: &'a PatchPlate) -> MapPatch<'a> {
    let name = &plate.patch.name;
    MapPatch { name, outline: plate.outline, nodes: &[], rose: None, is_subject: true }
}

fn patch_map(plate: &PatchPlate, size_mm: [f64; 2], theme: &Theme) -> Figure {
    let neighbours = plate.neighbours.iter().map(|(name, outline)| MapPatch {
        name,
        outline,
        nodes: &[],
        rose: None,
        is_subject: false,
    });
    let nodes: &[_] = if plate.flow { &[] } else { &plate.patch.trend.nodes };
    let subject = MapPatch { nodes, ..subject(plate) };
    let patches: Vec<MapPatch> = neighbours.chain([subject]).collect();
    map(&plate.view, &patches, &[], size_mm, theme)
}

/// What follows the rose, in the order of the reasoning.
fn evidence(plate: &PatchPlate, width_mm: f64, theme: &Theme) -> Vec<Block> {
    let patch = plate.patch;
    let block = |heading: String, figure: Figure| Block { heading, figure };
    let mut blocks = seen(plate, width_mm, theme);
    let pattern = &patch.pattern;
    if !pattern.scales.is_empty() {
        let figure = pattern::scale_sweep(pattern, patch.unit, width_mm, theme);
        blocks.push(block("Trend by scale".into(), figure));
    }
    if !pattern.populations.is_empty() {
        let figure = pattern::populations_figure(pattern, patch.unit, width_mm, theme);
        blocks.push(block("Populations".into(), figure));
    } else if patch.trend.modes.len() > 1 {
        blocks.push(block("Several trends".into(), modes(&patch.trend, width_mm, theme)));
    }
    if patch.spectrum.windows > 0 {
        blocks.push(block("Spacing".into(), spectrum(&patch.spectrum, patch.unit, width_mm, theme)));
        let figure = profile(&patch.spectrum, patch.unit, width_mm, theme);
        blocks.push(block("Power across the crests".into(), figure));
    }
    blocks.extend(crests(plate, width_mm, theme));
    for verdict in &patch.verdicts {
        let winds = plate.winds.iter().find(|w| w.id == verdict.winds);
        if let Some(winds) = winds {
            let figure = sand_rose(&winds.rose, &winds.flux, width_mm, theme);
            blocks.push(block(format!("Winds: {}", winds.name), figure));
            if let Some(calendar) = &winds.calendar {
                let figure = drift_calendar(calendar, width_mm, theme);
                blocks.push(block(format!("By the calendar: {}", winds.name), figure));
            }
        }
        let of = if patch.verdicts.len() > 1 || winds.is_none() {
            format!(": {}", verdict.winds_name)
        } else {
            String::new()
        };
        blocks.push(block(format!("Verdict{of}"), dial_face(verdict, width_mm, theme)));
        if verdict.refused.is_none() {
            blocks.push(block(format!("Classes of obliquity{of}"), class_bars(verdict, width_mm, theme)));
            let figure = bars::posterior_bars(verdict, width_mm, theme);
            blocks.push(block(format!("Theories weighed{of}"), figure));
            let figure = flips(&verdict.flips, width_mm, theme);
            blocks.push(block(format!("What would change it{of}"), figure));
        }
    }
    if let Some(found) = patch.backwards.as_ref().filter(|_| patch.verdicts.is_empty()) {
        let figure = regime_map(found, None, width_mm, theme);
        blocks.push(block("Two winds that would make it".into(), figure));
    }
    blocks.extend(outcrops(plate, width_mm, theme));
    for comparison in plate.comparisons.iter().filter(|c| c.patch == patch.id) {
        let trends = pattern::trends_compared(comparison, width_mm, theme);
        blocks.push(block(comparison.name.clone(), trends));
        let moved = pattern::crests_moved(comparison, width_mm, theme);
        blocks.push(block(format!("Movement: {}", comparison.name), moved));
    }
    blocks
}

/// What the light does to the trend, and which trends would have been seen.
fn seen(plate: &PatchPlate, width_mm: f64, theme: &Theme) -> Vec<Block> {
    let (patch, mut blocks) = (plate.patch, Vec::new());
    if let Some(recovery) = plate.recovery {
        let figure = pattern::recovery_curve(recovery, &patch.trend, width_mm, theme);
        blocks.push(Block { heading: "What would have been seen".into(), figure });
    }
    if let Some(light) = &patch.pattern.light {
        let figure = pattern::light_numbers(light, &patch.trend, width_mm, theme);
        blocks.push(Block { heading: "Light".into(), figure });
    }
    blocks
}

/// The crests on a small map, their direction, spacing and defects.
fn crests(plate: &PatchPlate, width_mm: f64, theme: &Theme) -> Vec<Block> {
    let (patch, unit) = (plate.patch, plate.patch.unit);
    let Some(found) = patch.crests.as_ref().ok().filter(|c| !c.lines.is_empty()) else { return Vec::new() };
    let block = |heading: &str, figure: Figure| Block { heading: heading.into(), figure };
    let on_map = [crests_on_map(patch, plate.masks)];
    let view = MapView { picture: plate.bare, ..plate.view };
    vec![
        block("Crests", crest_map(&view, subject(plate), &on_map, [width_mm, 1.4 * width_mm], theme)),
        block("Direction of crests", pattern::crest_rose(found, &patch.trend, unit, width_mm, theme)),
        block(
            "Spacing from crest to crest",
            pattern::spacing_survival(found, &patch.spectrum, unit, width_mm, theme),
        ),
        block("Ends and forks", pattern::defect_diagram(found, unit, width_mm, theme)),
    ]
}

/// Each outcrop, and all together when there are several.
fn outcrops(plate: &PatchPlate, width_mm: f64, theme: &Theme) -> Vec<Block> {
    let Some(found) = &plate.patch.obstacles else { return Vec::new() };
    let one = |o: &ObstacleFinding| Block {
        heading: format!("Outcrop: {}", o.name),
        figure: obstacle::obstacle(o, plate.annulus, width_mm, theme),
    };
    let mut blocks: Vec<Block> = found.outcrops.iter().map(one).collect();
    let together = obstacle::obstacles_together(found, width_mm, theme);
    blocks.push(Block { heading: "Outcrops together".into(), figure: together });
    blocks
}

fn notes(plate: &PatchPlate) -> Vec<String> {
    let patch = plate.patch;
    let mut notes = vec![map_note(plate)];
    let tracing = tracing_note(&patch.crests, plate.crests);
    notes.extend((!tracing.is_empty()).then_some(tracing));
    notes.push(caption::cited(&methods(plate), &science::methods()));
    if !patch.verdicts.is_empty() {
        notes.push(caption::SAFETY.into());
    }
    notes
}

/// The keys of all methods behind the plate.
fn methods(plate: &PatchPlate) -> Vec<&'static str> {
    let mut methods = caption::methods_of(plate.patch);
    if plate.recovery.is_some() {
        methods.extend(caption::RECOVERY);
    }
    for comparison in plate.comparisons.iter().filter(|c| c.patch == plate.patch.id) {
        let tests = comparison.axes.tests.iter().map(|t| t.method);
        for method in caption::COMPARISON.iter().copied().chain(tests) {
            if !methods.contains(&method) {
                methods.push(method);
            }
        }
    }
    methods
}

fn map_note(plate: &PatchPlate) -> String {
    let (patch, raster) = (plate.patch, plate.raster);
    let area = match patch.unit {
        LengthUnit::Metre => format!("{} km²", numbers::significant(patch.area / 1e6, 3)),
        LengthUnit::Pixel => format!("{} px²", numbers::significant(patch.area, 3)),
    };
    let pixel = raster.pixel_m.map_or("without ground size".to_owned(), |[x, y]| {
        format!("of {} × {} m", numbers::significant(x, 3), numbers::significant(y, 3))
    });
    let margin = if plate.view.place.is_georeferenced() {
        "longitude and latitude in degrees; angles from true north"
    } else {
        "distance from the raster’s upper left corner; angles from the north stated for it"
    };
    format!(
        "Map: {} ({} × {} pixels {pixel}; {}). Margin: {margin}; intervals are 95 %. Patch of {area}, \
         {} valid. {} scales {} and {}\u{a0}px.",
        raster.name,
        raster.width,
        raster.height,
        raster.projection,
        numbers::percent(patch.valid_fraction),
        trace_note(plate),
        numbers::plain(patch.trend.gradient_scale_px, 2),
        numbers::plain(patch.trend.integration_scale_px, 2),
    )
}

/// How the trend is drawn on the map.
fn trace_note(plate: &PatchPlate) -> String {
    let floor = numbers::significant(plate.patch.trend.coherence_floor, 2);
    if plate.flow {
        format!(
            "Streaks: noise drawn out along the trend (line integral convolution), fading out where the coherence \
             does not pass {floor};"
        )
    } else {
        format!(
            "Strokes: trend where the coherence passes {floor}, longer where it is higher, thinned for print;"
        )
    }
}
