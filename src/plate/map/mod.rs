//! The map: a raster inside a printed-map margin, with patches, trend strokes, small roses, a
//! true-north arrow and a scale bar.

mod crest_key;
mod crests;
mod flow;
mod furniture;
mod margin;
mod networks;
mod outlines;
mod strokes;
mod tone;
mod view;

pub use crest_key::crest_key;
pub use crests::MapCrests;
pub use flow::{FlowField, flow, overlaid};
pub use networks::{MapNetwork, network_key};
pub use tone::{Picture, toned};
pub use view::MapView;

use crate::ground::{Bounds, Point, Polygon};
use crate::study::{Node, TrendFinding};

use super::sketch::{Sketch, Type};
use super::{Figure, Item, TextAnchor, Theme, font, small_rose};
use view::Sheet;

/// A patch as a map shows it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MapPatch<'a> {
    pub name: &'a str,
    /// In full-resolution pixels.
    pub outline: &'a Polygon,
    /// Drawn as strokes; empty for none.
    pub nodes: &'a [Node],
    /// A small rose to lay on the patch.
    pub rose: Option<&'a TrendFinding>,
    /// What the map is about; the others are dashed neighbours.
    pub is_subject: bool,
}

/// What lies over the raster.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct MapLayers<'a> {
    pub patches: &'a [MapPatch<'a>],
    pub networks: &'a [MapNetwork<'a>],
    pub crests: &'a [MapCrests<'a>],
}

/// Distance between strokes, millimetres.
const STROKE_PITCH_MM: f64 = 3.4;
const ROSE_MM: f64 = 13.0;
const NORTH_RADIUS_MM: f64 = 4.2;
const SCALE_BAR_MM: f64 = 3.6;

/// The map, at most `size_mm` wide and high; the figure is as large as the map turns out. North is
/// that of the subject patch's centre, or of the map's centre.
pub fn map(
    view: &MapView,
    patches: &[MapPatch],
    networks: &[MapNetwork],
    size_mm: [f64; 2],
    theme: &Theme,
) -> Figure {
    map_of(view, &MapLayers { patches, networks, crests: &[] }, size_mm, theme)
}

/// The map with crests as well.
pub fn map_of(view: &MapView, layers: &MapLayers, size_mm: [f64; 2], theme: &Theme) -> Figure {
    let MapLayers { patches, networks, crests } = *layers;
    let [_, _, right, bottom] = margin::ROOM;
    let sheet = laid(view, size_mm);
    let mut inside = Sketch::default();
    ground(&mut inside, view, &sheet, theme);
    for network in networks {
        networks::draw_ground(&mut inside, network, &sheet, theme);
    }
    for patch in patches {
        outlines::draw(&mut inside, patch.outline, &sheet, patch.is_subject, theme);
    }
    for patch in patches {
        let drawn = strokes::strokes(patch.nodes, &sheet, view.place, STROKE_PITCH_MM);
        strokes::draw(&mut inside, &drawn, theme);
    }
    crests::draw(&mut inside, crests, &sheet, theme);
    for network in networks {
        networks::draw(&mut inside, network, &sheet, theme);
    }
    let disc = Point::new(sheet.max.x - NORTH_RADIUS_MM - 1.4, sheet.min.y + NORTH_RADIUS_MM + 1.4);
    let mut taken = vec![around(disc, NORTH_RADIUS_MM + 0.5, NORTH_RADIUS_MM + 0.5)];
    for patch in patches {
        match patch.rose {
            Some(trend) => rose_label(&mut inside, patch, trend, &sheet, &mut taken, theme),
            None => outlines::name(&mut inside, patch.name, patch.outline, &sheet, theme.text.body, theme),
        }
    }
    for network in networks {
        networks::draw_name(&mut inside, network, &sheet, &mut taken, theme);
    }
    if let Some(north) = furniture::north(&sheet, view.place, subject_centre(patches, view)) {
        furniture::draw_north(&mut inside, north, disc, NORTH_RADIUS_MM, theme);
    }
    let mut sketch = Sketch::default();
    sketch.items.push(Item::Clip { min: sheet.min, max: sheet.max, items: inside.items });
    margin::draw(&mut sketch, &sheet, view.place, theme);
    if let Some(bar) = furniture::scale_bar(&sheet, view.place) {
        let at = Point::new(sheet.min.x, sheet.max.y + bottom + 1.0);
        furniture::draw_scale_bar(&mut sketch, &bar, at, sheet.width() + right, theme);
    }
    sketch.finish(sheet.max.x + right, sheet.max.y + bottom + SCALE_BAR_MM)
}

/// Where the raster lies on a map of this size.
fn laid(view: &MapView, size_mm: [f64; 2]) -> Sheet {
    let [left, top, right, bottom] = margin::ROOM;
    let room = [size_mm[0] - left - right, size_mm[1] - top - bottom - SCALE_BAR_MM];
    Sheet::fit(view, Point::new(left, top), room.map(|v| v.max(1.0)))
}

/// The image over hatching where it has gaps.
fn ground(sketch: &mut Sketch, view: &MapView, sheet: &Sheet, theme: &Theme) {
    let picture = view.picture;
    if picture.rgba.chunks_exact(4).any(|p| p[3] < 255) {
        sketch.items.extend(furniture::hatching(sheet, theme));
    }
    sketch.items.push(Item::Image {
        min: sheet.min,
        max: sheet.max,
        width: picture.width,
        height: picture.height,
        rgba: picture.rgba.clone(),
    });
}

fn subject_centre(patches: &[MapPatch], view: &MapView) -> Point {
    let mut subjects = patches.iter().filter(|p| p.is_subject);
    match (subjects.next(), subjects.next()) {
        (Some(only), None) => only.outline.bounds().map_or(view.covers.centre(), Bounds::centre),
        _ => view.covers.centre(),
    }
}

/// A small rose on paper with the patch's name beneath it, where it covers nothing yet drawn.
fn rose_label(
    sketch: &mut Sketch,
    patch: &MapPatch,
    trend: &TrendFinding,
    sheet: &Sheet,
    taken: &mut Vec<Bounds>,
    theme: &Theme,
) {
    let Some(anchor) = outlines::inner_point(patch.outline).map(|p| sheet.at(p)) else { return };
    let size = theme.text.body;
    let name = font::shortened(patch.name, size, true, 0.5 * sheet.width());
    let half_width = (0.5 * font::text_width(&name, size, true)).max(0.5 * ROSE_MM) + 0.6;
    let half_height = 0.5 * (ROSE_MM + 1.5 * size) + 0.4;
    let inside = |p: Point| {
        Point::new(
            p.x.clamp(sheet.min.x + half_width, (sheet.max.x - half_width).max(sheet.min.x + half_width)),
            p.y.clamp(sheet.min.y + half_height, (sheet.max.y - half_height).max(sheet.min.y + half_height)),
        )
    };
    let offsets = [(0.0, 0.0), (0.0, -1.1), (0.0, 1.1), (1.1, 0.0), (-1.1, 0.0), (1.1, 1.1), (-1.1, -1.1)];
    let places = offsets
        .map(|(x, y)| inside(Point::new(anchor.x + x * 2.0 * half_width, anchor.y + y * 2.0 * half_height)));
    let free = |p: &&Point| {
        let label = around(**p, half_width, half_height);
        taken.iter().all(|t| !overlap(*t, label))
    };
    let centre = *places.iter().find(free).unwrap_or(&places[0]);
    taken.push(around(centre, half_width, half_height));
    let middle = Point::new(centre.x, centre.y - 0.75 * size);
    if centre.distance(anchor) > 0.5 * ROSE_MM {
        sketch.line(anchor, middle, theme.stroke(theme.halo, 3.0 * theme.widths.thin));
        sketch.line(anchor, middle, theme.stroke(theme.over_image, theme.widths.thin));
    }
    // Over an image the look is always ink on light paper.
    let light = Theme::light();
    sketch.circle(middle, 0.5 * ROSE_MM, Some(theme.halo.with_alpha(250)), None);
    let rose = small_rose(trend, ROSE_MM, &light);
    sketch.place(&rose, Point::new(middle.x - 0.5 * ROSE_MM, middle.y - 0.5 * ROSE_MM));
    let look = Type::new(size, theme.over_image).bold().anchored(TextAnchor::Middle).haloed(theme.halo);
    sketch.text(Point::new(centre.x, middle.y + 0.5 * ROSE_MM + 1.05 * size), name, look);
}

fn around(centre: Point, half_width: f64, half_height: f64) -> Bounds {
    Bounds {
        min: Point::new(centre.x - half_width, centre.y - half_height),
        max: Point::new(centre.x + half_width, centre.y + half_height),
    }
}

fn overlap(a: Bounds, b: Bounds) -> bool {
    a.min.x < b.max.x && b.min.x < a.max.x && a.min.y < b.max.y && b.min.y < a.max.y
}

/// The pixels of a patch and a twelfth more on every side, on the raster; the whole raster for an empty outline.
pub fn close_up(outline: &Polygon, raster_px: [f64; 2]) -> Bounds {
    let whole = Bounds { min: Point::default(), max: Point::new(raster_px[0], raster_px[1]) };
    let Some(bounds) = outline.bounds() else { return whole };
    let pad = bounds.width().max(bounds.height()) / 12.0;
    let min = Point::new((bounds.min.x - pad).max(0.0).floor(), (bounds.min.y - pad).max(0.0).floor());
    let max = Point::new(
        (bounds.max.x + pad).min(raster_px[0]).ceil(),
        (bounds.max.y + pad).min(raster_px[1]).ceil(),
    );
    if max.x > min.x && max.y > min.y { Bounds { min, max } } else { whole }
}

/// The pixels around a patch that its map shows: its bounds and a third more on every side, widened
/// to a landscape shape where the raster of `raster_px` (width, height) allows. The whole raster for
/// an empty outline.
pub fn surroundings(outline: &Polygon, raster_px: [f64; 2]) -> Bounds {
    let [width, height] = raster_px;
    let whole = Bounds { min: Point::new(0.0, 0.0), max: Point::new(width, height) };
    let Some(bounds) = outline.bounds() else { return whole };
    let pad = 0.33 * bounds.width().max(bounds.height());
    let (top, bottom) = ((bounds.min.y - pad).max(0.0).floor(), (bounds.max.y + pad).min(height).ceil());
    const LANDSCAPE: f64 = 1.25;
    let across = (bounds.width() + 2.0 * pad).max(LANDSCAPE * (bounds.height() + 2.0 * pad)).min(width);
    let left = (bounds.centre().x - 0.5 * across).clamp(0.0, width - across).floor();
    let right = (left + across).min(width).ceil();
    let (min, max) = (Point::new(left, top), Point::new(right, bottom));
    if max.x > min.x && max.y > min.y { Bounds { min, max } } else { whole }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Body, Place};

    #[test]
    fn the_map_keeps_within_its_room_and_shows_scale_and_north() {
        let place = Place::plane([25.0, 25.0], 30.0, Body::earth()).expect("a place");
        let picture = Picture { width: 2, height: 1, rgba: [90; 8].into() };
        let covers = Bounds { min: Point::new(0.0, 0.0), max: Point::new(800.0, 400.0) };
        let view = MapView { picture: &picture, covers, place: &place };
        let outline = Polygon::rectangle(300.0, 200.0);
        let patch =
            MapPatch { name: "Long dunes", outline: &outline, nodes: &[], rose: None, is_subject: true };
        let figure = map(&view, &[patch], &[], [100.0, 90.0], &Theme::print());
        assert!(figure.width_mm <= 100.0 + 1e-9 && figure.height_mm <= 90.0 + 1e-9);
        let mut texts = Vec::new();
        collect(&figure.items, &mut texts);
        assert!(texts.iter().any(|t| t == "N") && texts.iter().any(|t| t == "Long dunes"), "{texts:?}");
        assert!(texts.iter().any(|t| t.contains("centre")), "{texts:?}");
        // Half clear pixels call for hatching under the image.
        let clip = figure.items.iter().find_map(|i| match i {
            Item::Clip { items, .. } => Some(items),
            _ => None,
        });
        let first_image = clip.expect("a clip").iter().position(|i| matches!(i, Item::Image { .. }));
        assert!(first_image > Some(10));
    }

    fn collect(items: &[Item], texts: &mut Vec<String>) {
        for item in items {
            match item {
                Item::Text { text, .. } => texts.push(text.clone()),
                Item::Clip { items, .. } => collect(items, texts),
                _ => {}
            }
        }
    }

    #[test]
    fn surroundings_stay_on_the_raster() {
        let outline = Polygon::rectangle(30.0, 60.0).map(|p| Point::new(p.x + 80.0, p.y));
        let bounds = surroundings(&outline, [100.0, 500.0]);
        assert_eq!((bounds.min, bounds.max), (Point::new(0.0, 0.0), Point::new(100.0, 80.0)));
        let wide = surroundings(&outline, [1000.0, 500.0]);
        assert!(wide.width() >= 1.2 * wide.height() && wide.min.x >= 0.0, "{wide:?}");
        assert_eq!(surroundings(&Polygon::default(), [10.0, 20.0]).height(), 20.0);
    }
}
