//! Plates straight from a study: the pixels read, toned and set among the findings.

use crate::ground::{Bounds, Network, Point, Polygon, Work};
use crate::study::glance::{Glance, glance};
use crate::study::{
    Findings, Id, NetworkFinding, OpenRaster, PatchFinding, RasterEntry, Sheet, Sources, fingerprint, run,
};

use super::map::{FlowField, MapNetwork, MapPatch, MapView, Picture};
use super::map::{close_up, flow, overlaid, surroundings, toned};
use super::network_plate::bare;
use super::{CrestPlate, Figure, NetworkPlate, OverviewPlate, PatchPlate, PngSize, Recipe, Theme};
use super::{crest_plate, network_plate, overview_plate, patch_plate, pdf, png, svg};

/// Cells a side of the picture on a plate: 300 dpi over half a page and some.
const LONGEST: usize = 1400;

/// Two columns of a journal.
pub const WIDTH_MM: f64 = 180.0;
/// Resolution of the PNG beside SVG and PDF.
const PNG_DPI: f64 = 200.0;

/// The recipe printed on every plate of a sheet.
pub fn recipe(sheet: &Sheet) -> Recipe {
    Recipe {
        program: concat!("Ventifact ", env!("CARGO_PKG_VERSION")).into(),
        sheet_title: sheet.title.clone(),
        sheet_fingerprint: fingerprint::of_sheet(sheet),
        seed: sheet.seed.0,
    }
}

/// Texels a side of the picture under a flow texture: ten a millimetre over half a page and some.
const FLOW_TEXELS: usize = 1200;

/// How a patch plate is printed.
#[derive(Clone, Copy, Debug)]
pub struct Print<'a> {
    pub width_mm: f64,
    pub theme: &'a Theme,
    /// The trend as a flow texture in place of strokes.
    pub flow: bool,
}

/// The plate of one patch.
///
/// # Errors
/// Why it cannot be made, in words: the raster is not open, its pixels cannot be read.
pub fn of_patch(
    sheet: &Sheet,
    sources: &Sources,
    finding: &PatchFinding,
    findings: &Findings,
    print: &Print,
    work: &Work,
) -> Result<Figure, String> {
    let (entry, open) = raster_of(sheet, sources, finding.raster)?;
    let patch = sheet.patch(finding.id).ok_or("the sheet no longer has this patch")?;
    let info = open.raster.info();
    let bounds = surroundings(&patch.outline, [info.width as f64, info.height as f64]);
    let Glance { grid, covers } = glance(entry, open, bounds, LONGEST, work)?;
    let bare = toned(&grid, &entry.tone);
    let picture = if print.flow {
        let field = FlowField::of(&finding.trend, &patch.outline, &open.place);
        &with_flow(&bare, &field, covers, print.theme, work)?
    } else {
        &bare
    };
    let others = sheet.patches.iter().filter(|p| p.raster == finding.raster && p.id != finding.id);
    let plate = PatchPlate {
        patch: finding,
        outline: &patch.outline,
        neighbours: others.map(|p| (p.name.as_str(), &p.outline)).collect(),
        raster: &run::raster(entry, open),
        view: MapView { picture, covers, place: &open.place },
        bare: &bare,
        winds: &findings.winds,
        recipe: &recipe(sheet),
        masks: &patch.crests.masks,
        crests: &sheet.settings.crest,
        recovery: findings.recoveries.iter().find(|r| r.patch == finding.id),
        comparisons: &findings.comparisons,
        annulus: [sheet.settings.obstacle.inner_radii, sheet.settings.obstacle.outer_radii],
        flow: print.flow,
    };
    Ok(patch_plate(&plate, print.width_mm, print.theme))
}

/// The raster with the trend drawn over it as a flow texture, fine enough for print.
fn with_flow(
    picture: &Picture,
    field: &FlowField,
    covers: Bounds,
    theme: &Theme,
    work: &Work,
) -> Result<Picture, String> {
    let longer = covers.width().max(covers.height()).max(f64::MIN_POSITIVE);
    let texels = |side: f64| ((FLOW_TEXELS as f64 * side / longer).round() as usize).max(1);
    let size = [texels(covers.width()), texels(covers.height())];
    let texture = flow(field, covers, size, theme, work).map_err(|stopped| stopped.to_string())?;
    Ok(overlaid(picture, &texture))
}

/// The plate of the crests of one patch.
///
/// # Errors
/// As [`of_patch`].
pub fn of_crests(
    sheet: &Sheet,
    sources: &Sources,
    finding: &PatchFinding,
    width_mm: f64,
    theme: &Theme,
    work: &Work,
) -> Result<Figure, String> {
    let (entry, open) = raster_of(sheet, sources, finding.raster)?;
    let patch = sheet.patch(finding.id).ok_or("the sheet no longer has this patch")?;
    let info = open.raster.info();
    let bounds = close_up(&patch.outline, [info.width as f64, info.height as f64]);
    let Glance { grid, covers } = glance(entry, open, bounds, LONGEST, work)?;
    let picture = toned(&grid, &entry.tone);
    let plate = CrestPlate {
        patch: finding,
        outline: &patch.outline,
        masks: &patch.crests.masks,
        settings: &sheet.settings.crest,
        raster: &run::raster(entry, open),
        view: MapView { picture: &picture, covers, place: &open.place },
        recipe: &recipe(sheet),
    };
    Ok(crest_plate(&plate, width_mm, theme))
}

/// The plate of one channel network.
///
/// # Errors
/// As [`of_patch`].
pub fn of_network(
    sheet: &Sheet,
    sources: &Sources,
    finding: &NetworkFinding,
    findings: &Findings,
    width_mm: f64,
    theme: &Theme,
    work: &Work,
) -> Result<Figure, String> {
    let (entry, open) = raster_of(sheet, sources, finding.raster)?;
    let info = open.raster.info();
    let points = finding.network.reaches.iter().flat_map(|r| r.line.0.iter().copied());
    let ground = match Bounds::of(points) {
        Some(Bounds { min, max }) => Polygon {
            outer: vec![min, Point::new(max.x, min.y), max, Point::new(min.x, max.y)],
            holes: Vec::new(),
        },
        None => sheet.network(finding.id).and_then(|n| n.within.clone()).unwrap_or_default(),
    };
    let bounds = surroundings(&ground, [info.width as f64, info.height as f64]);
    let Glance { grid, covers } = glance(entry, open, bounds, LONGEST, work)?;
    let picture = toned(&grid, &entry.tone);
    let patches = findings.patches.iter().filter_map(|found| {
        let patch = sheet.patch(found.id).filter(|p| p.raster == finding.raster)?;
        let (name, outline, nodes) = (patch.name.as_str(), &patch.outline, found.trend.nodes.as_slice());
        Some(MapPatch { name, outline, nodes, rose: None, is_subject: false })
    });
    let plate = NetworkPlate {
        finding,
        patches: patches.collect(),
        raster: &run::raster(entry, open),
        view: MapView { picture: &picture, covers, place: &open.place },
        others: &beside(sheet, sources, findings, finding),
        recipe: &recipe(sheet),
    };
    Ok(network_plate(&plate, width_mm, theme))
}

/// The networks that a finding was compared with, in pixels of its raster, by the id of their finding.
pub fn beside(
    sheet: &Sheet,
    sources: &Sources,
    findings: &Findings,
    finding: &NetworkFinding,
) -> Vec<(Id, Network)> {
    let compared = |f: &&NetworkFinding| finding.agreements.iter().any(|(id, _, _)| *id == f.id);
    let others = findings.networks.iter().filter(compared);
    others.filter_map(|f| Some((f.id, seen_on(sheet, sources, f, finding.raster)?))).collect()
}

/// A network in pixels of another raster; `None` where no place joins the two or nothing of it lies there.
fn seen_on(sheet: &Sheet, sources: &Sources, finding: &NetworkFinding, raster: Id) -> Option<Network> {
    if finding.raster == raster {
        return Some(finding.network.clone());
    }
    let (_, own) = raster_of(sheet, sources, finding.raster).ok()?;
    let (_, there) = raster_of(sheet, sources, raster).ok()?;
    if own.place.body != there.place.body {
        return None;
    }
    let info = there.raster.info();
    let middle = Point::new(0.5 * info.width as f64, 0.5 * info.height as f64);
    let seen = |p: Point| there.place.pixel_of_lonlat(own.place.lonlat_of(p)?, middle);
    let mut network = finding.network.clone();
    for node in &mut network.nodes {
        node.at = seen(node.at)?;
    }
    for reach in &mut network.reaches {
        for point in &mut reach.line.0 {
            *point = seen(*point)?;
        }
    }
    let inside = |p: &Point| (0.0..=2.0 * middle.x).contains(&p.x) && (0.0..=2.0 * middle.y).contains(&p.y);
    network.reaches.iter().any(|r| r.line.0.iter().any(inside)).then_some(network)
}

/// The overview plate of one raster.
///
/// # Errors
/// As [`of_patch`].
pub fn overview(
    sheet: &Sheet,
    sources: &Sources,
    findings: &Findings,
    raster: Id,
    width_mm: f64,
    theme: &Theme,
    work: &Work,
) -> Result<Figure, String> {
    let (entry, open) = raster_of(sheet, sources, raster)?;
    let info = open.raster.info();
    let whole = Bounds { min: Point::default(), max: Point::new(info.width as f64, info.height as f64) };
    let Glance { grid, covers } = glance(entry, open, whole, LONGEST, work)?;
    let picture = toned(&grid, &entry.tone);
    let outlines: Vec<(Id, &Polygon)> = sheet.patches.iter().map(|p| (p.id, &p.outline)).collect();
    let drawn: Vec<(&NetworkFinding, Network)> =
        findings.networks.iter().filter_map(|f| Some((f, seen_on(sheet, sources, f, raster)?))).collect();
    let plate = OverviewPlate {
        findings,
        raster: &run::raster(entry, open),
        outlines,
        networks: drawn.iter().map(|(f, n)| MapNetwork { network: n, ..bare(f) }).collect(),
        view: MapView { picture: &picture, covers, place: &open.place },
        recipe: &recipe(sheet),
    };
    Ok(overview_plate(&plate, width_mm, theme))
}

/// Every plate of a study as files: name and bytes. One a patch and one of its crests, one a network and one a
/// raster that has either, each as SVG and as PDF.
///
/// # Errors
/// As [`of_patch`], and when a figure cannot be written, naming the plate.
pub fn all(
    sheet: &Sheet,
    sources: &Sources,
    findings: &Findings,
    work: &Work,
) -> Result<Vec<(String, Vec<u8>)>, String> {
    let theme = Theme::print();
    let print = Print { width_mm: WIDTH_MM, theme: &theme, flow: false };
    let mut figures = Vec::new();
    for patch in &findings.patches {
        let figure = of_patch(sheet, sources, patch, findings, &print, work)?;
        figures.push((format!("patch-{}-{}", patch.id.0, file_stem(&patch.name)), figure));
        if patch.crests.as_ref().is_ok_and(|c| !c.lines.is_empty()) {
            let figure = of_crests(sheet, sources, patch, WIDTH_MM, &theme, work)?;
            figures.push((format!("crests-{}-{}", patch.id.0, file_stem(&patch.name)), figure));
        }
    }
    for network in &findings.networks {
        let figure = of_network(sheet, sources, network, findings, WIDTH_MM, &theme, work)?;
        figures.push((format!("network-{}-{}", network.id.0, file_stem(&network.name)), figure));
    }
    for raster in &findings.rasters {
        let patches = findings.patches.iter().any(|p| p.raster == raster.id);
        if patches || findings.networks.iter().any(|n| n.raster == raster.id) {
            let figure = overview(sheet, sources, findings, raster.id, WIDTH_MM, &theme, work)?;
            figures.push((format!("overview-{}-{}", raster.id.0, file_stem(&raster.name)), figure));
        }
    }
    let mut files = Vec::new();
    for (name, figure) in figures {
        let page = pdf(&figure).map_err(|e| format!("the plate {name}: {e}"))?;
        let picture = png(&figure, PngSize::Dpi(PNG_DPI)).map_err(|e| format!("the plate {name}: {e}"))?;
        files.push((format!("{name}.svg"), svg(&figure).into_bytes()));
        files.push((format!("{name}.png"), picture));
        files.push((format!("{name}.pdf"), page));
    }
    Ok(files)
}

/// A name as a file name: letters, digits and dashes.
pub fn file_stem(name: &str) -> String {
    name.chars().map(|c| if c.is_alphanumeric() { c } else { '-' }).collect::<String>().to_lowercase()
}

fn raster_of<'a>(
    sheet: &'a Sheet,
    sources: &'a Sources,
    id: Id,
) -> Result<(&'a RasterEntry, &'a OpenRaster), String> {
    let entry = sheet.raster(id).ok_or("the sheet no longer has this raster")?;
    let open = sources.rasters.get(&id).ok_or_else(|| format!("the raster {} is not open", entry.name))?;
    Ok((entry, open))
}
