//! The overview plate: a whole raster with every patch and its small rose, and a table of what was
//! found in each.

use crate::ground::{LengthUnit, Point, Polygon};
use crate::science;
use crate::study::{Findings, Id, PatchFinding, RasterFinding};

use super::caption::{self, Recipe};
use super::dial::CLASS_NAMES;
use super::map::{MapNetwork, MapPatch, MapView, map, network_key};
use super::page::Page;
use super::rose::NO_TREND;
use super::sketch::{Sketch, Type};
use super::{Figure, TextAnchor, Theme, numbers};

/// All that an overview shows.
#[derive(Clone, Debug)]
pub struct OverviewPlate<'a> {
    pub findings: &'a Findings,
    pub raster: &'a RasterFinding,
    /// Outlines by patch, full-resolution pixels.
    pub outlines: Vec<(Id, &'a Polygon)>,
    /// In pixels of this raster.
    pub networks: Vec<MapNetwork<'a>>,
    pub view: MapView<'a>,
    pub recipe: &'a Recipe,
}

/// The plate, `width_mm` wide, as high as it needs.
pub fn overview_plate(plate: &OverviewPlate, width_mm: f64, theme: &Theme) -> Figure {
    let patches: Vec<&PatchFinding> =
        plate.findings.patches.iter().filter(|p| p.raster == plate.raster.id).collect();
    let mut page = Page::new(width_mm, theme);
    page.title(&plate.raster.name, &plate.raster.body);
    let marks: Vec<MapPatch> = patches
        .iter()
        .filter_map(|patch| {
            let (_, outline) = plate.outlines.iter().find(|(id, _)| *id == patch.id)?;
            let (name, rose) = (patch.name.as_str(), Some(&patch.trend));
            Some(MapPatch { name, outline, nodes: &[], rose, is_subject: true })
        })
        .collect();
    let picture = map(&plate.view, &marks, &plate.networks, [page.room(), 0.85 * page.room()], theme);
    let inset = 0.5 * (page.room() - picture.width_mm);
    page.put(&picture, inset, page.y);
    page.space(picture.height_mm + 3.0);
    if !plate.networks.is_empty() {
        let key = network_key(&plate.view, &plate.networks, [page.room(), 0.85 * page.room()], theme);
        page.put(&key, 0.0, page.y - 1.0);
        page.space(key.height_mm + 2.0);
    }

    let table = table(&patches, page.room(), theme);
    page.put(&table, 0.0, page.y);
    page.space(table.height_mm + 2.0);
    for failure in &plate.findings.failures {
        let text = format!("Failed: {}: {}", failure.what, failure.why);
        page.paragraph(&text, Type::new(theme.text.body, theme.caution).bold());
    }
    page.finish(&notes(&patches), plate.recipe, None)
}

fn notes(patches: &[&PatchFinding]) -> Vec<String> {
    let mut keys: Vec<&str> = Vec::new();
    for patch in patches {
        for key in caption::methods_of(patch) {
            if !keys.contains(&key) {
                keys.push(key);
            }
        }
    }
    let mut notes = vec![
        "Small roses: petal area = share of nodes, drawn both ways; the line is the mean axis, the arc its 95 % \
         interval; no line where no trend is claimed. Angles from true north. Intervals are 95 %."
            .to_owned(),
        caption::cited(&keys, &science::methods()),
    ];
    if patches.iter().any(|p| !p.verdicts.is_empty()) {
        notes.push(caption::SAFETY.into());
    }
    notes
}

/// One cell: lines of text, each with its look.
type Cell = Vec<(String, Type)>;

/// Heading, share of the width, whether numbers stand at the right.
const COLUMNS: [(&str, f64, bool); 6] = [
    ("patch", 0.20, false),
    ("area", 0.10, true),
    ("trend", 0.15, true),
    ("spacing", 0.18, true),
    ("effective n", 0.09, true),
    ("verdict", 0.28, false),
];
const COLUMN_GAP: f64 = 3.0;

fn table(patches: &[&PatchFinding], width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let mut y = 0.0;
    let heads = Type::new(theme.text.small, theme.ink_soft);
    let head: Vec<Cell> = COLUMNS.iter().map(|c| vec![(c.0.to_owned(), heads)]).collect();
    y += row(&mut sketch, &head, y, width_mm);
    for patch in patches {
        let rule = theme.stroke(theme.rule, theme.widths.hair);
        sketch.line(Point::new(0.0, y), Point::new(width_mm, y), rule);
        y += 0.9 + row(&mut sketch, &cells(patch, theme), y + 0.6, width_mm);
    }
    sketch.finish(width_mm, y)
}

/// Sets one row; returns its height.
fn row(sketch: &mut Sketch, cells: &[Cell], y: f64, width_mm: f64) -> f64 {
    let mut x = 0.0;
    let mut height: f64 = 0.0;
    for ((_, share, at_right), lines) in COLUMNS.into_iter().zip(cells) {
        let room = share * width_mm - COLUMN_GAP;
        let mut used = 0.0;
        for (text, look) in lines {
            let (at, look) = if at_right { (x + room, look.anchored(TextAnchor::End)) } else { (x, *look) };
            used += sketch.paragraph(Point::new(at, y + used), text, look, room);
        }
        height = height.max(used);
        x += share * width_mm;
    }
    height
}

fn cells(patch: &PatchFinding, theme: &Theme) -> Vec<Cell> {
    let look = Type::new(theme.text.body, theme.ink);
    let plain = |text: String| vec![(text, look)];
    let area = match patch.unit {
        LengthUnit::Metre => format!("{} km²", numbers::significant(patch.area / 1e6, 3)),
        LengthUnit::Pixel => format!("{} px²", numbers::significant(patch.area, 3)),
    };
    let trend = match patch.trend.axis.filter(|_| patch.trend.defined) {
        Some(axis) => numbers::axis_with_interval(axis, patch.trend.ci95_half_deg),
        None => NO_TREND.to_owned(),
    };
    let spectrum = &patch.spectrum;
    let spacing = match spectrum.spacing.filter(|_| spectrum.defined) {
        Some(spacing) => numbers::length_with_interval(spacing, spectrum.spacing_ci95, patch.unit),
        None => "–".to_owned(),
    };
    let several = patch.verdicts.len() > 1;
    let verdicts: Cell = patch
        .verdicts
        .iter()
        .map(|v| {
            let by = if several { format!("{}: ", v.winds_name) } else { String::new() };
            let text = match (&v.refused, v.probabilities) {
                (Some(_), _) => format!("{by}no verdict"),
                (None, Some(p)) => {
                    let likely = (0..3).max_by(|a, b| p[*a].total_cmp(&p[*b])).unwrap_or(0);
                    format!("{by}{} {}", CLASS_NAMES[likely], numbers::percent(p[likely]))
                }
                (None, None) => format!("{by}–"),
            };
            (text, look)
        })
        .collect();
    let verdicts = if verdicts.is_empty() { plain("–".into()) } else { verdicts };
    let mut name = vec![(patch.name.clone(), look.bold())];
    if !patch.cautions.is_empty() {
        let codes: Vec<&str> = patch.cautions.iter().map(|c| c.code).collect();
        let small = Type::new(theme.text.small, theme.caution);
        name.push((format!("cautions: {}", codes.join(", ")), small));
    }
    let n_eff = numbers::significant(patch.trend.n_eff, 2);
    vec![name, plain(area), plain(trend), plain(spacing), plain(n_eff), verdicts]
}
