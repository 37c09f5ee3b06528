//! The overview plate: a whole raster with every patch and its small rose, and a table of what was
//! found in each.

use crate::ground::{Caution, LengthUnit, Point, Polygon};
use crate::science;
use crate::science::network::pattern::PATTERN_NAMES;
use crate::study::{Findings, Id, NetworkFinding, PatchFinding, RasterFinding};

use super::caption::{self, Recipe};
use super::crest_plate::crests_on_map;
use super::dial::CLASS_NAMES;
use super::map::{MapCrests, MapLayers, MapNetwork, MapPatch, MapView, crest_key, map_of, network_key};
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
    let crests: Vec<MapCrests> = patches.iter().map(|patch| crests_on_map(patch, &[])).collect();
    let layers = MapLayers { patches: &marks, networks: &plate.networks, crests: &crests };
    let size = [page.room(), 0.85 * page.room()];
    let picture = map_of(&plate.view, &layers, size, theme);
    let inset = 0.5 * (page.room() - picture.width_mm);
    page.put(&picture, inset, page.y);
    page.space(picture.height_mm + 3.0);
    if !plate.networks.is_empty() {
        let key = network_key(&plate.view, &plate.networks, size, theme);
        page.put(&key, 0.0, page.y - 1.0);
        page.space(key.height_mm + 2.0);
    }
    let key = crest_key(&plate.view, &crests, size, theme);
    if key.height_mm > 0.0 {
        page.put(&key, 0.0, page.y - 1.0);
        page.space(key.height_mm + 2.0);
    }

    let networks: Vec<&NetworkFinding> =
        plate.findings.networks.iter().filter(|n| plate.networks.iter().any(|m| m.name == n.name)).collect();
    let of_patches: Vec<Vec<Cell>> = patches.iter().map(|p| cells(p, theme)).collect();
    let of_networks: Vec<Vec<Cell>> = networks.iter().map(|n| network_cells(n, theme)).collect();
    for (columns, rows) in [(&COLUMNS, of_patches), (&NETWORK_COLUMNS, of_networks)] {
        if !rows.is_empty() {
            let table = table(columns, &rows, page.room(), theme);
            page.put(&table, 0.0, page.y);
            page.space(table.height_mm + 3.0);
        }
    }
    for failure in &plate.findings.failures {
        let text = format!("Failed: {}: {}", failure.what, failure.why);
        page.paragraph(&text, Type::new(theme.text.body, theme.caution).bold());
    }
    page.finish(&notes(&patches, &networks), plate.recipe, None)
}

fn notes(patches: &[&PatchFinding], networks: &[&NetworkFinding]) -> Vec<String> {
    let mut keys: Vec<&str> = Vec::new();
    let of_patches = patches.iter().flat_map(|p| caption::methods_of(p));
    for key in of_patches.chain(networks.iter().flat_map(|n| caption::methods_of_network(n))) {
        if !keys.contains(&key) {
            keys.push(key);
        }
    }
    let mut notes = Vec::new();
    if !patches.is_empty() {
        notes.push(
            "Small roses: petal area = share of nodes, drawn both ways; the line is the mean axis, the arc its 95 % \
         interval; no line where no trend is claimed. Angles from true north. Intervals are 95 %."
                .to_owned(),
        );
    }
    let cited = caption::cited(&keys, &science::methods());
    notes.extend((!cited.is_empty()).then_some(cited));
    if patches.iter().any(|p| !p.verdicts.is_empty()) {
        notes.push(caption::SAFETY.into());
    }
    notes
}

/// One cell: lines of text, each with its look.
type Cell = Vec<(String, Type)>;

/// Heading, share of the width, whether numbers stand at the right.
type Column = (&'static str, f64, bool);

const COLUMNS: [Column; 6] = [
    ("patch", 0.20, false),
    ("area", 0.10, true),
    ("trend", 0.15, true),
    ("spacing", 0.18, true),
    ("effective n", 0.09, true),
    ("verdict", 0.28, false),
];
const NETWORK_COLUMNS: [Column; 6] = [
    ("network", 0.20, false),
    ("channels", 0.10, true),
    ("order", 0.15, true),
    ("density", 0.18, true),
    ("junctions", 0.09, true),
    ("pattern", 0.28, false),
];
const COLUMN_GAP: f64 = 3.0;

fn table(columns: &[Column; 6], rows: &[Vec<Cell>], width_mm: f64, theme: &Theme) -> Figure {
    let mut sketch = Sketch::default();
    let mut y = 0.0;
    let heads = Type::new(theme.text.small, theme.ink_soft);
    let head: Vec<Cell> = columns.iter().map(|c| vec![(c.0.to_owned(), heads)]).collect();
    y += row(&mut sketch, columns, &head, y, width_mm);
    for cells in rows {
        let rule = theme.stroke(theme.rule, theme.widths.hair);
        sketch.line(Point::new(0.0, y), Point::new(width_mm, y), rule);
        y += 0.9 + row(&mut sketch, columns, cells, y + 0.6, width_mm);
    }
    sketch.finish(width_mm, y)
}

/// Sets one row; returns its height.
fn row(sketch: &mut Sketch, columns: &[Column; 6], cells: &[Cell], y: f64, width_mm: f64) -> f64 {
    let mut x = 0.0;
    let mut height: f64 = 0.0;
    for ((_, share, at_right), lines) in columns.iter().zip(cells) {
        let room = share * width_mm - COLUMN_GAP;
        let mut used = 0.0;
        for (text, look) in lines {
            let (at, look) = if *at_right { (x + room, look.anchored(TextAnchor::End)) } else { (x, *look) };
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
    let n_eff = numbers::significant(patch.trend.n_eff, 2);
    vec![
        name_cell(&patch.name, &patch.cautions, theme),
        plain(area),
        plain(trend),
        plain(spacing),
        plain(n_eff),
        verdicts,
    ]
}

/// The name with the codes of its cautions beneath.
fn name_cell(name: &str, cautions: &[Caution], theme: &Theme) -> Cell {
    let mut cell = vec![(name.to_owned(), Type::new(theme.text.body, theme.ink).bold())];
    if !cautions.is_empty() {
        let codes: Vec<&str> = cautions.iter().map(|c| c.code).collect();
        let small = Type::new(theme.text.small, theme.caution);
        cell.push((format!("cautions: {}", codes.join(", ")), small));
    }
    cell
}

fn network_cells(finding: &NetworkFinding, theme: &Theme) -> Vec<Cell> {
    let look = Type::new(theme.text.body, theme.ink);
    let plain = |text: String| vec![(text, look)];
    let order = finding.network.greatest_order().map_or("undefined".to_owned(), |o| o.to_string());
    let density = finding.density.as_ref().map_or("–".to_owned(), |d| match finding.unit {
        LengthUnit::Metre => format!("{} km/km²", numbers::significant(1000.0 * d.density, 3)),
        LengthUnit::Pixel => format!("{} per px", numbers::significant(d.density, 3)),
    });
    let pattern = &finding.pattern;
    let likely = pattern.probabilities.filter(|_| !pattern.too_few).and_then(|p| {
        let best = (0..p.len()).max_by(|a, b| p[*a].total_cmp(&p[*b]))?;
        Some(format!("{} {}", PATTERN_NAMES[best], numbers::percent(p[best])))
    });
    vec![
        name_cell(&finding.name, &finding.cautions, theme),
        plain(numbers::length(finding.network.length(), finding.unit, 3)),
        plain(order),
        plain(density),
        plain(numbers::count(finding.network.junctions().len())),
        plain(likely.unwrap_or_else(|| "too few links".into())),
    ]
}
