//! Channels on the map: one hue on a light halo, heavier with order; dashed across bridged gaps, paler where less
//! sure; sparse heads for the sense of flow, rings at channel heads, squares at outlets, divides as thin dashes.

use std::collections::BTreeSet;

use crate::ground::{Azimuth, Bounds, Grid, Network, Point, Polygon, Reach, ReachOrigin};

use super::view::Sheet;
use super::{MapView, around, laid, overlap};
use crate::plate::channels::{Printable, order_width, printable};
use crate::plate::chart::{FINEST_MM, simplified};
use crate::plate::sketch::{Sketch, Type, arrow_head};
use crate::plate::{Figure, Item, Rgba, Stroke, TextAnchor, Theme, font};

/// A network as a map shows it, all in full-resolution pixels of the map's raster.
#[derive(Clone, Debug, PartialEq)]
pub struct MapNetwork<'a> {
    /// Printed beside its lowest outlet; empty for none.
    pub name: &'a str,
    pub network: &'a Network,
    pub divides: Vec<&'a Polygon>,
    /// Depth raised (positive) or cut (negative) in metres, where its upper left corner lies, and full-resolution
    /// pixels a cell.
    pub change: Option<(&'a Grid<f32>, Point, f64)>,
}

/// Channel length on the map's area that print still holds apart, mm per mm².
const MOST_DENSE: f64 = 0.36;
/// Divides follow cells; steps smaller than this are smoothed away, millimetres.
const DIVIDE_MM: f64 = 0.25;
/// Outlets up to this many are all marked; of more, those of the two highest orders.
const MOST_OUTLETS: usize = 12;
/// Distance between marks of one kind, millimetres.
const MARK_PITCH_MM: f64 = 9.0;
/// Probability above which a sense is drawn.
const SURE: f64 = 0.95;

/// One reach on the page.
struct Drawn<'a> {
    reach: &'a Reach,
    line: Vec<Point>,
    width: f64,
}

/// What the map can hold of a network.
fn shown<'a>(network: &'a Network, sheet: &Sheet) -> Printable<'a> {
    printable(network, |p| sheet.at(p), Bounds { min: sheet.min, max: sheet.max }, MOST_DENSE)
}

fn drawn<'a>(shown: &Printable<'a>, sheet: &Sheet) -> Vec<Drawn<'a>> {
    let frame = Bounds { min: sheet.min, max: sheet.max };
    let one = |reach: &&'a Reach| {
        let line: Vec<Point> = reach.line.0.iter().map(|p| sheet.at(*p)).collect();
        let Bounds { min, max } = Bounds::of(line.iter().copied())?;
        let touches = overlap(Bounds { min, max: Point::new(max.x + 1e-9, max.y + 1e-9) }, frame);
        let width = order_width(reach.order.map(|o| o.strahler + 1 - shown.least_order));
        touches.then(|| Drawn { reach, line: simplified(&line, FINEST_MM), width })
    };
    let mut all: Vec<Drawn> = shown.reaches.iter().filter_map(one).collect();
    // Trunks over tributaries.
    all.sort_by(|a, b| a.width.total_cmp(&b.width));
    all
}

/// Water over an image, whatever the look; paler the less sure the channel is.
fn color(confidence: f64, theme: &Theme) -> Rgba {
    let water = Theme::light().water;
    let share = match confidence {
        c if c >= 0.9 => return water,
        c if c >= 0.5 => 0.68,
        _ => 0.42,
    };
    Theme { paper: theme.halo, ..*theme }.tint(water, share)
}

fn ink(drawn: &Drawn, theme: &Theme) -> Stroke {
    let color = color(drawn.reach.confidence, theme);
    match drawn.reach.origin {
        ReachOrigin::Bridged => Stroke { dash_mm: Some([0.9, 0.7]), ..theme.stroke(color, drawn.width) },
        _ => theme.stroke(color, drawn.width),
    }
}

/// What lies under everything else: changed ground and divides.
pub(super) fn draw_ground(sketch: &mut Sketch, network: &MapNetwork, sheet: &Sheet, theme: &Theme) {
    if let Some(changed) = network.change {
        change(sketch, changed, sheet, theme);
    }
    for divide in &network.divides {
        for ring in divide.rings() {
            let line: Vec<Point> = ring.iter().map(|p| sheet.at(*p)).collect();
            let line = simplified(&line, DIVIDE_MM);
            sketch.polygon(
                line.clone(),
                None,
                Some(theme.stroke(theme.halo.with_alpha(150), 3.0 * theme.widths.thin)),
            );
            let dash_mm = Some([1.2, 0.9]);
            let dashes = Stroke { dash_mm, ..theme.stroke(theme.over_image, theme.widths.thin) };
            sketch.polygon(line, None, Some(dashes));
        }
    }
}

/// The network: all halos first, then the lines from the thinnest to the heaviest, then the marks.
pub(super) fn draw(sketch: &mut Sketch, network: &MapNetwork, sheet: &Sheet, theme: &Theme) {
    let shown = shown(network.network, sheet);
    let lines = drawn(&shown, sheet);
    for d in &lines {
        let halo = theme.stroke(theme.halo.with_alpha(215), d.width + 2.6 * theme.widths.thin);
        sketch.polyline(d.line.clone(), halo);
    }
    for d in &lines {
        sketch.polyline(d.line.clone(), ink(d, theme));
        if d.reach.origin != ReachOrigin::Bridged {
            let ends = [d.line.first(), d.line.last()];
            for end in ends.into_iter().flatten() {
                sketch.circle(*end, 0.5 * d.width, Some(color(d.reach.confidence, theme)), None);
            }
        }
    }
    picks(sketch, &lines, theme);
    senses(sketch, &lines, theme);
    ends(sketch, network.network, shown.least_order, sheet, theme);
}

/// Small paper dots along what the user drew.
fn picks(sketch: &mut Sketch, lines: &[Drawn], theme: &Theme) {
    for d in lines.iter().filter(|d| d.reach.origin == ReachOrigin::Traced) {
        for at in [d.line.first(), d.line.last()].into_iter().flatten() {
            let edge = theme.stroke(Theme::light().water, theme.widths.thin);
            sketch.circle(*at, 0.42, Some(theme.halo), Some(edge));
        }
    }
}

/// One head in each cell of the page, on the heaviest and longest reach there.
fn senses(sketch: &mut Sketch, lines: &[Drawn], theme: &Theme) {
    let mut taken = BTreeSet::new();
    let mut candidates: Vec<(&Drawn, f64)> = lines.iter().map(|d| (d, length(&d.line))).collect();
    candidates.sort_by(|a, b| b.0.width.total_cmp(&a.0.width).then(b.1.total_cmp(&a.1)));
    for (d, length) in candidates {
        if !sure(d.reach) || length < 3.0 {
            continue;
        }
        let Some((at, (dx, dy))) = along(&d.line, 0.5 * length) else { continue };
        let cell = ((at.x / MARK_PITCH_MM).floor() as i64, (at.y / MARK_PITCH_MM).floor() as i64);
        if !taken.insert(cell) {
            continue;
        }
        let sign = if d.reach.sense.probability() < 0.5 { -1.0 } else { 1.0 };
        let azimuth = Azimuth::from_east_north(sign * dx, -sign * dy);
        let (size, (east, north)) = (1.5 + d.width, azimuth.east_north());
        let tip = Point::new(at.x + 0.5 * size * east, at.y - 0.5 * size * north);
        let head = arrow_head(tip, size, azimuth);
        let edge = theme.stroke(theme.halo, theme.widths.thin);
        sketch.polygon(head, Some(color(d.reach.confidence, theme)), Some(edge));
    }
}

/// Rings at heads, squares at outlets, no closer together than print wants.
fn ends(sketch: &mut Sketch, network: &Network, least: u32, sheet: &Sheet, theme: &Theme) {
    let mut taken = BTreeSet::new();
    let mut free = |at: Point, pitch: f64| {
        sheet.holds(at) && taken.insert(((at.x / pitch).floor() as i64, (at.y / pitch).floor() as i64))
    };
    let water = Theme::light().water;
    // An end of a reach whose sense is not known is neither head nor outlet.
    let out = network.outgoing();
    let known = |reaches: &[usize]| reaches.iter().all(|r| sure(&network.reaches[*r]));
    let outlets = network.outlets();
    let (few, incoming) = (outlets.len() <= MOST_OUTLETS, network.incoming());
    let high = network.greatest_order().unwrap_or(0).saturating_sub(1);
    let stands_out = |node: usize| {
        few || incoming[node].iter().any(|r| network.reaches[*r].order.is_none_or(|o| o.strahler >= high))
    };
    for node in outlets.into_iter().filter(|n| stands_out(*n) && known(&incoming[*n])) {
        let at = sheet.at(network.nodes[node].at);
        if free(at, 0.4 * MARK_PITCH_MM) {
            let (min, max) = (Point::new(at.x - 0.75, at.y - 0.75), Point::new(at.x + 0.75, at.y + 0.75));
            sketch.rectangle(min, max, Some(water), Some(theme.stroke(theme.halo, theme.widths.line)));
        }
    }
    if least > 1 {
        return;
    }
    for node in network.heads().into_iter().filter(|n| known(&out[*n])) {
        let at = sheet.at(network.nodes[node].at);
        if free(at, 0.25 * MARK_PITCH_MM) {
            sketch.circle(at, 0.45, Some(theme.halo), Some(theme.stroke(water, theme.widths.thin)));
        }
    }
}

/// Raised ground in the colour of caution, cut ground in ink, both deeper where more was changed.
fn change(sketch: &mut Sketch, (map, at, px): (&Grid<f32>, Point, f64), sheet: &Sheet, theme: &Theme) {
    let most = map.valid_values().filter(|v| v.is_finite()).map(f32::abs).fold(0.0, f32::max);
    if most <= 0.0 || map.is_empty() {
        return;
    }
    let tones = [Theme::dark().caution, theme.over_image];
    let mut rgba = Vec::with_capacity(4 * map.len());
    for row in 0..map.height() {
        for col in 0..map.width() {
            let depth = map.get(col, row).filter(|v| v.is_finite()).unwrap_or(0.0);
            let tone = tones[usize::from(depth < 0.0)];
            let share = f64::from(depth.abs() / most).sqrt();
            let alpha = if depth == 0.0 { 0 } else { (70.0 + 150.0 * share) as u8 };
            rgba.extend(tone.with_alpha(alpha).0);
        }
    }
    let max = Point::new(at.x + px * map.width() as f64, at.y + px * map.height() as f64);
    let (width, height) = (map.width(), map.height());
    let (min, max) = (sheet.at(at), sheet.at(max));
    sketch.items.push(Item::Image { min, max, width, height, rgba: rgba.into() });
}

/// The name beside the outlet of the trunk, where nothing else is named.
pub(super) fn draw_name(
    sketch: &mut Sketch,
    network: &MapNetwork,
    sheet: &Sheet,
    taken: &mut Vec<Bounds>,
    theme: &Theme,
) {
    let size = theme.text.body;
    let text = font::shortened(network.name, size, true, 0.4 * sheet.width());
    let (half_width, half_height) = (0.5 * font::text_width(&text, size, true) + 0.8, 0.7 * size);
    let trunk = network.network.trunk();
    let last = trunk.last().and_then(|r| network.network.reaches.get(*r));
    let longest = || network.network.reaches.iter().max_by(|a, b| a.length.total_cmp(&b.length));
    let Some(reach) = last.or_else(longest) else { return };
    let on_page: Vec<Point> = reach.line.0.iter().map(|p| sheet.at(*p)).filter(|p| sheet.holds(*p)).collect();
    let Some(anchor) = on_page.get(on_page.len() / 2) else { return };
    let inside = |x: f64, y: f64| {
        let (left, top) = (sheet.min.x + half_width, sheet.min.y + half_height + 0.6);
        let (right, foot) = (sheet.max.x - half_width, sheet.max.y - half_height - 0.6);
        Point::new(x.clamp(left, right.max(left)), y.clamp(top, foot.max(top)))
    };
    let offsets = [
        (0.0, -1.6),
        (0.0, 1.6),
        (-1.2, 0.0),
        (1.2, 0.0),
        (-1.1, -1.6),
        (1.1, 1.6),
        (1.1, -1.6),
        (-1.1, 1.6),
        (-1.1, 3.2),
        (1.1, -3.2),
    ];
    let places = offsets.map(|(x, y)| inside(anchor.x + x * half_width, anchor.y + y * (half_height + 1.0)));
    // Where the fewest channels run beneath, away from other names.
    let lines = drawn(&shown(network.network, sheet), sheet);
    let covered = |p: Point| -> (usize, f64) {
        let label = around(p, half_width, half_height);
        let within = |q: &Point| {
            (label.min.x..label.max.x).contains(&q.x) && (label.min.y..label.max.y).contains(&q.y)
        };
        let names = taken.iter().filter(|t| overlap(**t, label)).count();
        let beneath = lines.iter().flat_map(|d| d.line.windows(2)).map(|w| {
            let (dx, dy) = (w[1].x - w[0].x, w[1].y - w[0].y);
            let steps = (dx.hypot(dy) / 0.5).ceil().clamp(1.0, 400.0);
            let on = |k: usize| {
                within(&Point::new(w[0].x + k as f64 / steps * dx, w[0].y + k as f64 / steps * dy))
            };
            (0..steps as usize).filter(|k| on(*k)).count() as f64 / steps * dx.hypot(dy)
        });
        (names, beneath.sum())
    };
    let rated = places.map(|p| (covered(p), p));
    let best = rated.iter().min_by(|a, b| a.0.0.cmp(&b.0.0).then(a.0.1.total_cmp(&b.0.1)));
    let centre = best.map_or(places[0], |(_, p)| *p);
    taken.push(around(centre, half_width, half_height));
    let look = Type::new(size, Theme::light().water).bold().anchored(TextAnchor::Middle).haloed(theme.halo);
    sketch.text(Point::new(centre.x, centre.y + 0.35 * size), text, look);
}

/// Whether the sense of a reach is drawn.
fn sure(reach: &Reach) -> bool {
    !(1.0 - SURE..=SURE).contains(&reach.sense.probability())
}

fn length(line: &[Point]) -> f64 {
    line.windows(2).map(|w| w[0].distance(w[1])).sum()
}

/// The point after `distance` along a line and the step there.
fn along(line: &[Point], mut distance: f64) -> Option<(Point, (f64, f64))> {
    for w in line.windows(2) {
        let step = w[0].distance(w[1]);
        if step > 0.0 && distance <= step {
            let (dx, dy) = ((w[1].x - w[0].x) / step, (w[1].y - w[0].y) / step);
            return Some((Point::new(w[0].x + distance * dx, w[0].y + distance * dy), (dx, dy)));
        }
        distance -= step;
    }
    None
}

/// What the lines and marks of the networks on a map of `size_mm` mean, in rows on paper as wide as the map.
pub fn network_key(view: &MapView, networks: &[MapNetwork], size_mm: [f64; 2], theme: &Theme) -> Figure {
    let sheet = laid(view, size_mm);
    let width_mm = size_mm[0];
    let mut entries: Vec<(Sign, String)> = Vec::new();
    let reaches = || networks.iter().flat_map(|n| &n.network.reaches);
    let greatest = networks.iter().filter_map(|n| n.network.greatest_order()).max();
    match greatest {
        Some(most) => {
            let least = networks.iter().map(|n| shown(n.network, &sheet).least_order).max().unwrap_or(1);
            let few = most - least.min(most) < 4;
            let orders =
                (least..=most).filter(|o| few || [least, most, (least + most).div_ceil(2)].contains(o));
            entries.extend(
                orders.map(|o| (Sign::Line(order_width(Some(o + 1 - least)), 1.0), format!("order {o}"))),
            );
            if least > 1 {
                let left_out =
                    if least == 2 { "order 1".into() } else { format!("orders 1–{}", least - 1) };
                entries.push((Sign::Nothing, format!("{left_out} too dense to draw")));
            }
        }
        None => entries.push((Sign::Line(order_width(None), 1.0), "channel".into())),
    }
    if greatest.is_some() && reaches().any(|r| r.order.is_none()) {
        entries.push((Sign::Line(order_width(None), 1.0), "without order".into()));
    }
    let any = |test: &dyn Fn(&Reach) -> bool| reaches().any(test);
    let mut when = |is: bool, sign: Sign, text: &str| {
        if is {
            entries.push((sign, text.to_owned()));
        }
    };
    when(any(&|r| r.confidence < 0.9), Sign::Line(0.42, 0.6), "less sure");
    when(any(&|r| r.origin == ReachOrigin::Bridged), Sign::Dashes, "gap bridged");
    when(any(&|r| r.origin == ReachOrigin::Traced), Sign::Picks, "drawn by hand");
    when(any(&sure), Sign::Arrow, "flow, p > 0.95");
    let ends = |n: &MapNetwork, heads: bool| {
        let reaches = if heads { n.network.outgoing() } else { n.network.incoming() };
        let nodes = if heads { n.network.heads() } else { n.network.outlets() };
        nodes.into_iter().any(|k| reaches[k].iter().all(|r| sure(&n.network.reaches[*r])))
    };
    let headed = |n: &MapNetwork| shown(n.network, &sheet).least_order == 1 && ends(n, true);
    when(networks.iter().any(headed), Sign::Ring, "head");
    when(networks.iter().any(|n| ends(n, false)), Sign::Square, "outlet");
    when(networks.iter().any(|n| !n.divides.is_empty()), Sign::Divide, "divide");
    let changed = |sign: f32| {
        let values = networks.iter().filter_map(|n| n.change).flat_map(|(map, _, _)| map.valid_values());
        values.into_iter().any(|v| sign * v > 0.0)
    };
    when(changed(1.0), Sign::Raised, "raised");
    when(changed(-1.0), Sign::Cut, "cut");
    let mut sketch = Sketch::default();
    let look = Type::new(theme.text.small, theme.ink);
    let (sign_mm, row) = (5.0, 3.6);
    let (mut x, mut y) = (0.0, 0.5 * row);
    for (sign, text) in entries {
        let lead = if sign == Sign::Nothing { 0.0 } else { sign_mm + 1.2 };
        let width = lead + font::text_width(&text, look.size_mm, false);
        if x > 0.0 && x + width > width_mm {
            (x, y) = (0.0, y + row);
        }
        sign.draw(&mut sketch, Point::new(x, y), sign_mm, theme);
        let base = y + 0.5 * font::CAP_HEIGHT * look.size_mm;
        sketch.text(Point::new(x + lead, base), text, look);
        x += width + 3.4;
    }
    sketch.finish(width_mm, y + 0.5 * row)
}

/// A sample in the key.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Sign {
    Nothing,
    /// Width and confidence.
    Line(f64, f64),
    Dashes,
    Picks,
    Arrow,
    Ring,
    Square,
    Divide,
    Raised,
    Cut,
}

impl Sign {
    fn draw(self, sketch: &mut Sketch, at: Point, long: f64, theme: &Theme) {
        let water = if theme.is_dark { theme.water } else { Theme::light().water };
        let (end, middle) = (Point::new(at.x + long, at.y), Point::new(at.x + 0.5 * long, at.y));
        let box_of =
            |half: f64| (Point::new(middle.x - half, at.y - half), Point::new(middle.x + half, at.y + half));
        match self {
            Self::Nothing => {}
            Self::Line(width, confidence) => {
                let share = if confidence >= 0.9 { 1.0 } else { 0.55 };
                sketch.line(at, end, theme.stroke(theme.tint(water, share), width));
            }
            Self::Dashes => {
                sketch.line(at, end, Stroke { dash_mm: Some([0.9, 0.7]), ..theme.stroke(water, 0.42) });
            }
            Self::Picks => {
                sketch.line(at, end, theme.stroke(water, 0.42));
                for p in [at, end] {
                    sketch.circle(p, 0.42, Some(theme.paper), Some(theme.stroke(water, theme.widths.thin)));
                }
            }
            Self::Arrow => {
                sketch.line(at, end, theme.stroke(water, 0.42));
                let tip = Point::new(middle.x + 1.0, at.y);
                sketch.polygon(arrow_head(tip, 1.9, Azimuth::from_deg(90.0)), Some(water), None);
            }
            Self::Ring => {
                sketch.circle(middle, 0.5, Some(theme.paper), Some(theme.stroke(water, theme.widths.thin)));
            }
            Self::Square => {
                let (min, max) = box_of(0.75);
                sketch.rectangle(min, max, Some(water), None);
            }
            Self::Divide => {
                let dash_mm = Some([1.2, 0.9]);
                sketch.line(at, end, Stroke { dash_mm, ..theme.stroke(theme.ink, theme.widths.thin) });
            }
            Self::Raised | Self::Cut => {
                let fill = if self == Self::Raised { Theme::dark().caution } else { theme.ink };
                let (min, max) = box_of(0.9);
                sketch.rectangle(
                    min,
                    max,
                    Some(fill.with_alpha(200)),
                    Some(theme.stroke(theme.rule, theme.widths.hair)),
                );
            }
        }
    }
}
