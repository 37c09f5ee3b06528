//! The trend as a flow texture: noise drawn out along it, in ink on a veil of paper over the raster, plain where it
//! stands clear of the noise and fading to nothing where it does not. Tone alone tells the way; no colour does.

use rayon::prelude::*;

use crate::ground::{Bounds, Grid, LocalFrame, Place, Point, Polygon, Seed, Stopped, Work};
use crate::numeric::streaks::{AxisCell, StreakSettings, Streaks, streaks};
use crate::study::{Node, TrendFinding};

use super::Picture;
use crate::plate::{Rgba, Theme};

/// Half the length of a streak, texels.
const HALF_LENGTH: usize = 16;
/// Texels a cell of the field, at least.
const FINEST_CELL: f64 = 4.0;
/// Width of the kernel that spreads a node, over the distance of nodes, and its reach over its width.
const SPREAD: f64 = 0.55;
const REACH: f64 = 2.2;
/// A cell with this share of the nodes that a full lattice puts round it is fully covered.
const COVERED: f64 = 0.5;
/// Texels between places where the ground's own directions are worked out.
const FRAME_STEP: usize = 32;
/// A veil of paper that calms the raster under the streaks; ink of the darkest and further paper of the lightest.
const VEIL: f32 = 0.45;
const INK: f32 = 0.85;
const PAPER: f32 = 0.3;
/// The noise of every flow texture: it means nothing.
const SEED: Seed = Seed(0x5eed_f10e);

/// A trend field and the ground it belongs to.
#[derive(Clone, Copy, Debug)]
pub struct FlowField<'a> {
    pub nodes: &'a [Node],
    /// The coherence that noise reaches, and the distance of nodes in full-resolution pixels.
    pub coherence_floor: f64,
    pub node_step_px: f64,
    /// Nothing shows outside, full-resolution pixels.
    pub outline: &'a Polygon,
    pub place: &'a Place,
}

impl<'a> FlowField<'a> {
    pub fn of(trend: &'a TrendFinding, outline: &'a Polygon, place: &'a Place) -> Self {
        let (coherence_floor, node_step_px) = (trend.coherence_floor, trend.node_step_px);
        Self { nodes: &trend.nodes, coherence_floor, node_step_px, outline, place }
    }

    /// The nodes that bear on a part of the raster.
    pub fn near(&self, covers: Bounds) -> impl Iterator<Item = &'a Node> {
        let rim = 3.0 * self.node_step_px.max(1.0);
        let within = move |p: Point| {
            (covers.min.x - rim..=covers.max.x + rim).contains(&p.x)
                && (covers.min.y - rim..=covers.max.y + rim).contains(&p.y)
        };
        self.nodes.iter().filter(move |node| within(node.at))
    }
}

/// The texture over `covers` (full-resolution pixels) as `size` texels, clear where nothing shows.
///
/// # Errors
/// [`Stopped`].
pub fn flow(
    field: &FlowField,
    covers: Bounds,
    size: [usize; 2],
    theme: &Theme,
    work: &Work,
) -> Result<Picture, Stopped> {
    let view = View::new(covers, size);
    let step = (0.5 * field.node_step_px * view.scale()).max(FINEST_CELL);
    let cells = cells(field, &view, step, work)?;
    let settings = StreakSettings { size, step, half_length: HALF_LENGTH, origin: view.origin(), seed: SEED };
    let drawn = streaks(&cells, &settings, work)?;
    let outline = field.outline.map(|p| view.texel(p));
    Ok(inked(&drawn, &outline, [theme.over_image, theme.halo]))
}

/// Full-resolution pixels to texels.
struct View {
    covers: Bounds,
    size: [usize; 2],
    /// Texels a pixel, along columns and rows.
    per_pixel: [f64; 2],
}

impl View {
    fn new(covers: Bounds, size: [usize; 2]) -> Self {
        let sides = [covers.width(), covers.height()];
        let per_pixel = [0, 1].map(|i| size[i] as f64 / sides[i].max(f64::MIN_POSITIVE));
        Self { covers, size, per_pixel }
    }

    /// Texels a pixel, the same area.
    fn scale(&self) -> f64 {
        (self.per_pixel[0] * self.per_pixel[1]).sqrt()
    }

    fn texel(&self, pixel: Point) -> Point {
        let (x, y) = (pixel.x - self.covers.min.x, pixel.y - self.covers.min.y);
        Point::new(x * self.per_pixel[0], y * self.per_pixel[1])
    }

    fn pixel(&self, texel: Point) -> Point {
        Point::new(
            self.covers.min.x + texel.x / self.per_pixel[0],
            self.covers.min.y + texel.y / self.per_pixel[1],
        )
    }

    /// The noise lies still on the ground while a picture of one scale moves over it.
    fn origin(&self) -> [i64; 2] {
        let [x, y] = [self.covers.min.x, self.covers.min.y];
        [(x * self.per_pixel[0]).round() as i64, (y * self.per_pixel[1]).round() as i64]
    }
}

/// What nodes add up to at a cell: doubled axes by strength, strength, and number.
#[derive(Clone, Copy, Default)]
struct Heap {
    cos2: f64,
    sin2: f64,
    strength: f64,
    nodes: f64,
}

/// The field on a coarse lattice of the picture.
fn cells(field: &FlowField, view: &View, step: f64, work: &Work) -> Result<Grid<AxisCell>, Stopped> {
    let [cols, rows] = view.size.map(|side| ((side as f64 / step).ceil() as usize).max(1));
    let apart = (field.node_step_px * view.scale()).max(1e-6);
    let width = SPREAD * apart.max(step);
    let heaps = heaped(field, view, [cols, rows], step, width, work)?;
    // Nodes of a full lattice under the kernel: 2πσ² over the area of each.
    let full = std::f64::consts::TAU * (width / apart).powi(2);
    let frames = Frames::new(field.place, view);
    let mut cells = Grid::filled(cols, rows, AxisCell::default());
    cells.values_mut().par_chunks_mut(cols).enumerate().try_for_each(|(row, cells)| {
        work.advance(1)?;
        for (col, cell) in cells.iter_mut().enumerate() {
            let heap = heaps[row * cols + col];
            let middle = Point::new((col as f64 + 0.5) * step, (row as f64 + 0.5) * step);
            *cell = heap.cell(full, frames.at(middle), view.per_pixel).unwrap_or_default();
        }
        Ok(())
    })?;
    Ok(cells)
}

/// Each node spread over the cells about it.
fn heaped(
    field: &FlowField,
    view: &View,
    [cols, rows]: [usize; 2],
    step: f64,
    width: f64,
    work: &Work,
) -> Result<Vec<Heap>, Stopped> {
    let mut heaps = vec![Heap::default(); cols * rows];
    let floor = field.coherence_floor.clamp(0.0, 0.99);
    let reach = REACH * width;
    for (count, node) in field.near(view.covers).enumerate() {
        if count % 4096 == 0 {
            work.advance(0)?;
        }
        let beyond = if node.significant { (node.coherence - floor) / (1.0 - floor) } else { 0.0 };
        // Rises fast past the floor: what passed it is to be seen.
        let strength = if beyond.is_finite() { beyond.clamp(0.0, 1.0).sqrt() } else { 0.0 };
        let (sin2, cos2) = node.axis.doubled().sin_cos();
        let at = view.texel(node.at);
        let range = |at: f64, count: usize| {
            let cell = |v: f64| (v / step - 0.5).clamp(-1.0, count as f64);
            (cell(at - reach).ceil() as usize)
                ..((cell(at + reach).floor() + 1.0).max(0.0) as usize).min(count)
        };
        for row in range(at.y, rows) {
            for col in range(at.x, cols) {
                let (dx, dy) = ((col as f64 + 0.5) * step - at.x, (row as f64 + 0.5) * step - at.y);
                let k = (-0.5 * (dx * dx + dy * dy) / (width * width)).exp();
                let heap = &mut heaps[row * cols + col];
                heap.cos2 += k * strength * cos2;
                heap.sin2 += k * strength * sin2;
                heap.strength += k * strength;
                heap.nodes += k;
            }
        }
    }
    Ok(heaps)
}

impl Heap {
    /// The cell it makes, its axis turned from the ground into the picture; `None` without any.
    fn cell(self, full: f64, frame: Option<LocalFrame>, per_pixel: [f64; 2]) -> Option<AxisCell> {
        if self.strength.is_nan() || self.strength <= 0.0 {
            return None;
        }
        // Axes that contradict each other show less.
        let agreement = self.cos2.hypot(self.sin2) / self.strength;
        let covered = (self.nodes / (COVERED * full)).min(1.0);
        let fade = agreement * covered * self.strength / self.nodes;
        let azimuth = 0.5 * self.sin2.atan2(self.cos2);
        let (dcol, drow) = frame?.pixel(azimuth.sin(), azimuth.cos());
        let (x, y) = (dcol * per_pixel[0], drow * per_pixel[1]);
        let (sin2, cos2) = (2.0 * y.atan2(x)).sin_cos();
        let cell = AxisCell {
            cos2: (agreement * cos2) as f32,
            sin2: (agreement * sin2) as f32,
            fade: fade.min(1.0) as f32,
        };
        (cell.cos2.is_finite() && cell.sin2.is_finite()).then_some(cell)
    }
}

/// Local frames at every so many texels; a projection is dear.
struct Frames {
    cols: usize,
    frames: Vec<Option<LocalFrame>>,
}

impl Frames {
    fn new(place: &Place, view: &View) -> Self {
        let [cols, rows] = view.size.map(|side| side / FRAME_STEP + 2);
        let at = |i: usize| {
            let (col, row) = (i % cols, i / cols);
            place.local_frame(view.pixel(Point::new((col * FRAME_STEP) as f64, (row * FRAME_STEP) as f64)))
        };
        Self { cols, frames: (0..cols * rows).into_par_iter().map(at).collect() }
    }

    /// Between the four about a texel; `None` where one of them has no north.
    fn at(&self, texel: Point) -> Option<LocalFrame> {
        let (x, y) = (texel.x / FRAME_STEP as f64, texel.y / FRAME_STEP as f64);
        let (col, row) = ((x as usize).min(self.cols - 2), y as usize);
        let row = row.min(self.frames.len() / self.cols - 2);
        let corner = |dcol: usize, drow: usize| self.frames[(row + drow) * self.cols + col + dcol];
        let upper = mixed(corner(0, 0)?, corner(1, 0)?, x - col as f64);
        let lower = mixed(corner(0, 1)?, corner(1, 1)?, x - col as f64);
        Some(mixed(upper, lower, y - row as f64))
    }
}

fn mixed(a: LocalFrame, b: LocalFrame, share: f64) -> LocalFrame {
    let mix = |a: f64, b: f64| a + share * (b - a);
    LocalFrame {
        east_per_col: mix(a.east_per_col, b.east_per_col),
        east_per_row: mix(a.east_per_row, b.east_per_row),
        north_per_col: mix(a.north_per_col, b.north_per_col),
        north_per_row: mix(a.north_per_row, b.north_per_row),
    }
}

/// Dark streaks in ink on a veil of paper, nothing outside the outline.
fn inked(drawn: &Streaks, outline: &Polygon, colors: [Rgba; 2]) -> Picture {
    let (width, height) = (drawn.texture.width(), drawn.texture.height());
    let mut rgba = vec![0u8; 4 * width * height];
    if width > 0 {
        rgba.par_chunks_mut(4 * width).enumerate().for_each(|(row, texels)| {
            for (from, to) in outline.row_spans(row, width) {
                for col in from..to {
                    let texel = texel(drawn.texture.at(col, row), drawn.fade.at(col, row), colors);
                    texels[4 * col..4 * col + 4].copy_from_slice(&texel);
                }
            }
        });
    }
    Picture { width, height, rgba: rgba.into() }
}

/// Ink over the veil as one colour, not multiplied by its alpha.
fn texel(texture: f32, fade: f32, [ink, paper]: [Rgba; 2]) -> [u8; 4] {
    let tone = 2.0 * texture - 1.0;
    let veil = fade * (VEIL + PAPER * tone.max(0.0));
    let dark = fade * INK * (-tone).max(0.0);
    let alpha = 1.0 - (1.0 - veil) * (1.0 - dark);
    if alpha < 0.5 / 255.0 {
        return [0; 4];
    }
    let mix = |k: usize| (f32::from(ink.0[k]) * dark + f32::from(paper.0[k]) * veil * (1.0 - dark)) / alpha;
    [mix(0) as u8, mix(1) as u8, mix(2) as u8, (255.0 * alpha) as u8]
}

/// A raster's picture with the texture laid over it, as fine as the texture.
pub fn overlaid(picture: &Picture, flow: &Picture) -> Picture {
    let mut rgba = Vec::with_capacity(4 * flow.width * flow.height);
    for row in 0..flow.height {
        for col in 0..flow.width {
            let (x, y) = (col * picture.width / flow.width, row * picture.height / flow.height);
            let below = &picture.rgba[4 * (y * picture.width + x)..][..4];
            let above = &flow.rgba[4 * (row * flow.width + col)..][..4];
            let share = f32::from(above[3]) / 255.0;
            let mix = |k: usize| {
                (f32::from(below[k]) + share * (f32::from(above[k]) - f32::from(below[k]))).round() as u8
            };
            // Over missing pixels the texture is alone.
            let clear = below[3] == 0;
            let color = |k: usize| if clear { above[k] } else { mix(k) };
            rgba.extend([color(0), color(1), color(2), if clear { above[3] } else { 255 }]);
        }
    }
    Picture { width: flow.width, height: flow.height, rgba: rgba.into() }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::{Axis, Body};

    fn nodes(axis: f64, significant: impl Fn(f64) -> bool) -> Vec<Node> {
        let at = |i: usize| Point::new(4.0 + 8.0 * (i % 50) as f64, 4.0 + 8.0 * (i / 50) as f64);
        let node = |at: Point| Node {
            at,
            axis: Axis::from_deg(axis),
            coherence: 0.7,
            significant: significant(at.x),
        };
        (0..2000).map(|i| node(at(i))).collect()
    }

    fn field<'a>(nodes: &'a [Node], outline: &'a Polygon, place: &'a Place) -> FlowField<'a> {
        FlowField { nodes, coherence_floor: 0.2, node_step_px: 8.0, outline, place }
    }

    fn whole() -> Bounds {
        Bounds { min: Point::new(0.0, 0.0), max: Point::new(400.0, 320.0) }
    }

    /// The axis of a cell in the picture, degrees from the columns' way toward the rows'.
    fn turn(cell: AxisCell) -> f64 {
        0.5 * f64::from(cell.sin2).atan2(f64::from(cell.cos2)).to_degrees()
    }

    #[test]
    fn axes_turn_with_the_map_and_with_tall_pixels() {
        let outline = Polygon::rectangle(400.0, 320.0);
        let nodes = nodes(30.0, |_| true);
        let middle = |place: &Place, size: [usize; 2]| {
            let field = field(&nodes, &outline, place);
            let view = View::new(whole(), size);
            let cells = cells(&field, &view, 8.0, &Work::quiet()).expect("not stopped");
            (cells.at(cells.width() / 2, cells.height() / 2), cells.at(0, 0))
        };
        for north in [0.0, 40.0, 215.0] {
            let place = Place::plane([5.0, 5.0], north, Body::earth()).expect("a place");
            // Up in the picture is the azimuth `north`: an axis of 30° runs 30° − north to the right of up.
            let (cell, _) = middle(&place, [400, 320]);
            let want = Axis::from_deg(30.0 - north - 90.0);
            assert_close!(Axis::from_deg(turn(cell)).separation(want), 0.0, 1e-3, "north {north}");
        }
        // Rows twice as tall on the ground, drawn twice as tall: the shape is the ground's.
        let tall = Place::plane([5.0, 10.0], 0.0, Body::earth()).expect("a place");
        let (cell, corner) = middle(&tall, [400, 640]);
        assert_close!(Axis::from_deg(turn(cell)).separation(Axis::from_deg(-60.0)), 0.0, 1e-3, "tall pixels");
        // √((0.7 − 0.2)/0.8), also where the lattice ends.
        assert_close!(f64::from(cell.fade), 0.625f64.sqrt(), 1e-3, "strength");
        assert_close!(f64::from(corner.fade), 0.625f64.sqrt(), 1e-3, "strength in the corner");
    }

    #[test]
    fn it_fades_where_noise_begins_and_ends_at_the_outline() {
        let place = Place::pixels(0.0);
        let outline = Polygon::rectangle(400.0, 200.0);
        let nodes = nodes(75.0, |x| x < 200.0);
        let picture =
            flow(&field(&nodes, &outline, &place), whole(), [400, 320], &Theme::print(), &Work::quiet())
                .expect("not stopped");
        let alphas = |cols: std::ops::Range<usize>, rows: std::ops::Range<usize>| {
            let of = |row: usize| cols.clone().map(move |col| (row, col));
            rows.flat_map(of).map(|(row, col)| picture.rgba[4 * (400 * row + col) + 3]).max()
        };
        assert!(alphas(20..180, 20..180) > Some(120), "plain where the trend passed");
        assert_eq!(alphas(230..400, 0..200), Some(0), "nothing where it did not");
        assert_eq!(alphas(0..400, 200..320), Some(0), "nothing outside the patch");
    }

    #[test]
    fn nothing_to_draw_is_no_fault() {
        let (place, empty) = (Place::pixels(0.0), Polygon::default());
        let none = field(&[], &empty, &place);
        let draw = |covers, size| flow(&none, covers, size, &Theme::print(), &Work::quiet()).expect("drawn");
        assert!(draw(whole(), [8, 8]).rgba.chunks(4).all(|p| p[3] == 0));
        assert!(draw(whole(), [0, 8]).rgba.is_empty());
        let point = Bounds { min: Point::default(), max: Point::default() };
        assert_eq!(draw(point, [3, 3]).rgba.len(), 36);
    }

    #[test]
    fn over_gaps_the_texture_is_alone() {
        let raster = Picture { width: 2, height: 1, rgba: [100, 100, 100, 255, 0, 0, 0, 0].into() };
        let flow = Picture { width: 2, height: 1, rgba: [0, 0, 0, 51, 10, 20, 30, 77].into() };
        assert_eq!(overlaid(&raster, &flow).rgba[..], [80, 80, 80, 255, 10, 20, 30, 77]);
    }
}
