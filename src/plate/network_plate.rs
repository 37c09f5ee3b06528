//! The plate of one channel network: its map, the finding in words, the figures its source allows, the numbers,
//! the cautions, and what it rests on.

use crate::ground::{LengthUnit, Network, Polygon};
use crate::science;
use crate::study::{Id, NetworkFinding, RasterFinding};

use super::caption::{self, Recipe};
use super::channels;
use super::map::{MapNetwork, MapPatch, MapView, map, network_key};
use super::page::{Block, GAP_MM, Page};
use super::sketch::Type;
use super::{Figure, Theme, numbers};

/// All that a network plate shows.
#[derive(Clone, Debug)]
pub struct NetworkPlate<'a> {
    pub finding: &'a NetworkFinding,
    /// Patches of the raster: dunes and drainage on one plate.
    pub patches: Vec<MapPatch<'a>>,
    pub raster: &'a RasterFinding,
    pub view: MapView<'a>,
    /// Other networks of the same ground by the id of their finding, in pixels of this raster.
    pub others: &'a [(Id, Network)],
    pub recipe: &'a Recipe,
}

/// Columns are about this wide, millimetres.
const COLUMN_MM: f64 = 54.0;

/// The network as its map shows it, with divides and changed ground where it came from elevation.
pub fn on_map(finding: &NetworkFinding) -> MapNetwork<'_> {
    let drainage = finding.drainage.as_ref();
    let divides: Vec<&Polygon> =
        drainage.iter().flat_map(|d| &d.basins).map(|b| &b.outline).take(MOST_DIVIDES).collect();
    MapNetwork {
        name: &finding.name,
        network: &finding.network,
        divides,
        change: drainage.map(|d| (&d.change_map, d.change_map_at, d.change_map_px)),
    }
}

/// The lines alone, for maps of several things.
pub(super) fn bare(finding: &NetworkFinding) -> MapNetwork<'_> {
    MapNetwork { name: &finding.name, network: &finding.network, divides: Vec::new(), change: None }
}

/// Divides of the greatest basins only: small ones would crowd the edge.
const MOST_DIVIDES: usize = 12;

/// The plate, `width_mm` wide (180 suits two journal columns), as high as it needs.
pub fn network_plate(plate: &NetworkPlate, width_mm: f64, theme: &Theme) -> Figure {
    let finding = plate.finding;
    let mut page = Page::new(width_mm, theme);
    page.title(&finding.name, &format!("{} · {}", plate.raster.name, plate.raster.body));
    page.paragraph(&finding.sentence, Type::new(theme.text.heading, theme.ink));
    page.space(2.0);

    let columns = ((page.room() / COLUMN_MM).floor() as usize).max(3);
    let column = (page.room() - (columns - 1) as f64 * GAP_MM) / columns as f64;
    let wide = 2.0 * column + GAP_MM;
    let top = page.y;
    let network = on_map(finding);
    let (room, one) = ([wide, 1.05 * wide], [network]);
    let picture = map(&plate.view, &plate.patches, &one, room, theme);
    page.put(&picture, 0.5 * (wide - picture.width_mm), top + 0.6);
    let key = network_key(&plate.view, &one, room, theme);
    page.put(&key, 0.0, top + picture.height_mm + 2.0);
    let below = top + picture.height_mm + key.height_mm + 2.0 + 0.6 * GAP_MM;
    let mut tops = vec![top; columns];
    tops[..2].fill(below);
    let numbers = channels::network_numbers(finding, column, theme);
    page.columns(&[Block { heading: "Numbers".into(), figure: numbers }], column, &mut tops);
    page.columns(&evidence(plate, column, theme), column, &mut tops);

    if !finding.cautions.is_empty() {
        let head = page.heading("Cautions", 0.0, page.y, page.room());
        page.space(head);
        page.cautions(&finding.cautions);
    }
    page.finish(&notes(plate), plate.recipe, Some(&finding.fingerprint))
}

/// The figures in the order of the reasoning; what only the other source could tell is left out.
fn evidence(plate: &NetworkPlate, width: f64, theme: &Theme) -> Vec<Block> {
    let finding = plate.finding;
    let mut blocks = Vec::new();
    let mut add = |heading: &str, figure: Figure| blocks.push(Block { heading: heading.into(), figure });
    if finding.drainage.is_some() {
        add("Where channels begin", channels::drop_test(finding, width, theme));
        add("Half, once, twice the threshold", channels::threshold_maps(finding, width, theme));
    }
    if !finding.profiles.is_empty() {
        add("Long profiles", channels::long_profile(finding, width, theme));
    }
    if finding.drainage.is_some() {
        add("Concavity", channels::chi_plot(finding, width, theme));
        add("Slope and area", channels::slope_area(finding, width, theme));
        add("Length and area", channels::hack_plot(finding, width, theme));
    }
    add("Orders", channels::order_plot(finding, width, theme));
    add("Junction angles", channels::junction_rose(finding, width, theme));
    add("Pattern", channels::pattern_bars(finding, width, theme));
    add("Azimuths of links", channels::link_rose(finding, width, theme));
    if finding.drainage.is_some() {
        add("Hypsometry", channels::hypsometric_curve(finding, width, theme));
    }
    add("Planform", channels::planform_sketch(finding, width, theme));
    if finding.planforms.iter().any(|p| p.width.is_some()) {
        add("Width", channels::width_plot(finding, width, theme));
    }
    add("Palaeo-flow", channels::flow_ranges(finding, width, theme));
    if !finding.agreements.is_empty() {
        add("Against other networks", channels::network_compare(finding, plate.others, width, theme));
    }
    blocks
}

fn notes(plate: &NetworkPlate) -> Vec<String> {
    let mut notes = vec![map_note(plate)];
    let cited = caption::cited(&caption::methods_of_network(plate.finding), &science::methods());
    notes.extend((!cited.is_empty()).then_some(cited));
    notes
}

fn map_note(plate: &NetworkPlate) -> String {
    let (finding, raster) = (plate.finding, plate.raster);
    let pixel = raster.pixel_m.map_or("without ground size".to_owned(), |[x, y]| {
        format!("of {} × {} m", numbers::significant(x, 3), numbers::significant(y, 3))
    });
    let margin = if plate.view.place.is_georeferenced() {
        "longitude and latitude in degrees"
    } else {
        "distance from the raster’s upper left corner"
    };
    let source = if finding.drainage.is_some() {
        "routed over elevation: without channels seen on an image it shows where water would run, not that it did"
    } else {
        "seen on the image or drawn by hand"
    };
    let unit = match finding.unit {
        LengthUnit::Metre => "lengths along the ground",
        LengthUnit::Pixel => "lengths in pixels",
    };
    let factor = if finding.factor > 1 {
        format!(", measured at {} pixels a cell", finding.factor)
    } else {
        String::new()
    };
    format!(
        "Map: {} ({} × {} pixels {pixel}; {}){factor}. Margin: {margin}; intervals are 95 %; {unit}. Channels {source}.",
        raster.name, raster.width, raster.height, raster.projection,
    )
}
