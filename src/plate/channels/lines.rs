//! Networks as bare lines in a small frame, without the raster beneath.

use crate::ground::{Bounds, LengthUnit, Network, Point, Reach};

use super::super::chart::{FINEST_MM, simplified};
use super::super::sketch::{Sketch, Type};
use super::super::{Item, Rgba, Theme, font, numbers};

/// Line width of a reach of this Strahler order, millimetres; one width where the order is undefined (`None`).
pub(in super::super) fn order_width(order: Option<u32>) -> f64 {
    match order {
        Some(order) => (0.12 + 0.17 * f64::from(order)).min(1.3),
        None => 0.42,
    }
}

/// The reaches that a page can hold apart.
pub(in super::super) struct Printable<'a> {
    /// Those of lower order are left out; 1 for none.
    pub least_order: u32,
    pub reaches: Vec<&'a Reach>,
}

/// Reaches from the least order on for which their length within the frame stays below `most` mm per mm². Reaches
/// without order are kept longest first, to the same limit.
pub(in super::super) fn printable<'a>(
    network: &'a Network,
    at: impl Fn(Point) -> Point,
    frame: Bounds,
    most: f64,
) -> Printable<'a> {
    let greatest = network.greatest_order().unwrap_or(1);
    let mut by_order = vec![0.0; greatest as usize + 1];
    let mut without: Vec<(f64, &Reach)> = Vec::new();
    let mut ordered: Vec<(u32, &Reach)> = Vec::new();
    let holds =
        |p: Point| (frame.min.x..=frame.max.x).contains(&p.x) && (frame.min.y..=frame.max.y).contains(&p.y);
    for reach in &network.reaches {
        let line: Vec<Point> = reach.line.0.iter().map(|p| at(*p)).collect();
        let length: f64 =
            line.windows(2).filter(|w| holds(w[0]) || holds(w[1])).map(|w| w[0].distance(w[1])).sum();
        match reach.order {
            Some(order) => {
                by_order[order.strahler as usize] += length;
                ordered.push((order.strahler, reach));
            }
            None => without.push((length, reach)),
        }
    }
    let room = most * frame.width() * frame.height();
    let above = |from: u32| by_order[from as usize..].iter().sum::<f64>();
    let least_order = (1..=greatest).find(|from| above(*from) <= room).unwrap_or(greatest);
    if without.iter().map(|w| w.0).sum::<f64>() > room {
        without.sort_by(|a, b| b.0.total_cmp(&a.0));
        let mut left = room;
        without.retain(|(length, _)| {
            left -= length;
            left > 0.0
        });
    }
    let ordered = ordered.into_iter().filter(|(order, _)| *order >= least_order).map(|(_, reach)| reach);
    Printable { least_order, reaches: ordered.chain(without.into_iter().map(|(_, reach)| reach)).collect() }
}

/// Ground length of one column and one row, in the unit of the network's lengths, as its own lines tell:
/// least squares of L² = sx²·dx² + sy²·dy² over steps between stations, or over straight reaches.
pub(super) fn pixel_shape(network: &Network) -> [f64; 2] {
    // Normal equations of the two squares.
    let (mut xx, mut xy, mut yy, mut xl, mut yl) = (0.0, 0.0, 0.0, 0.0, 0.0);
    for reach in &network.reaches {
        let drawn = reach.line.length();
        let steps: Vec<(f64, f64)> =
            reach.line.0.windows(2).map(|w| ((w[1].x - w[0].x).powi(2), (w[1].y - w[0].y).powi(2))).collect();
        let (dx2, dy2) = steps.iter().fold((0.0, 0.0), |(a, b), (x, y)| {
            let d = (x + y).sqrt();
            if d > 0.0 { (a + x / d, b + y / d) } else { (a, b) }
        });
        if drawn > 0.0 && reach.length > 0.0 && reach.length.is_finite() {
            // To first order a reach's length is Σ (sx²·dx² + sy²·dy²) / d over its steps, over the mean scale.
            let (u, v, l) = (dx2 / drawn, dy2 / drawn, (reach.length / drawn).powi(2));
            (xx, xy, yy) = (xx + u * u, xy + u * v, yy + v * v);
            (xl, yl) = (xl + u * l, yl + v * l);
        }
    }
    let det = xx * yy - xy * xy;
    let all = if xx + 2.0 * xy + yy > 0.0 { (xl + yl) / (xx + 2.0 * xy + yy) } else { 1.0 };
    let even = [all, all].map(|v: f64| v.max(f64::MIN_POSITIVE).sqrt());
    if det <= 1e-6 * xx * yy {
        return even;
    }
    let (sx2, sy2) = ((xl * yy - yl * xy) / det, (yl * xx - xl * xy) / det);
    let ratio = sy2 / sx2;
    if (0.04..25.0).contains(&ratio) { [sx2.sqrt(), sy2.sqrt()] } else { even }
}

/// A frame that shows a box of pixels.
#[derive(Clone, Copy, Debug)]
pub(super) struct Panel {
    pub min: Point,
    pub max: Point,
    covers: Bounds,
    scale: [f64; 2],
}

impl Panel {
    /// As large as fits in `room`, its upper left corner at `at`, a little ground round `covers`.
    pub fn fit(covers: Bounds, shape: [f64; 2], at: Point, room: [f64; 2]) -> Self {
        let [sx, sy] = shape;
        let pad = 0.03 * covers.width().max(covers.height()).max(1e-9);
        let covers = Bounds {
            min: Point::new(covers.min.x - pad, covers.min.y - pad),
            max: Point::new(covers.max.x + pad, covers.max.y + pad),
        };
        let (w, h) = (sx * covers.width(), sy * covers.height());
        let per = (room[0] / w).min(room[1] / h);
        // The frame always fills the room's width; a narrow network stands in its middle.
        let left = at.x + 0.5 * (room[0] - per * w);
        let min = Point::new(left, at.y);
        Self { min, max: Point::new(left + per * w, at.y + per * h), covers, scale: [per * sx, per * sy] }
    }

    pub fn at(&self, pixel: Point) -> Point {
        let [sx, sy] = self.scale;
        Point::new(
            self.min.x + sx * (pixel.x - self.covers.min.x),
            self.min.y + sy * (pixel.y - self.covers.min.y),
        )
    }

    pub fn frame(&self, sketch: &mut Sketch, theme: &Theme) {
        let edge = theme.stroke(theme.rule, theme.widths.thin);
        sketch.rectangle(self.min, self.max, Some(theme.panel), Some(edge));
    }

    /// Reaches heavier with their order, `share` of the usual widths; returns the least order drawn.
    pub fn network(
        &self,
        sketch: &mut Sketch,
        network: &Network,
        color: Rgba,
        share: f64,
        theme: &Theme,
    ) -> u32 {
        let mut shown = self.printable(network, MOST_DENSE);
        shown.reaches.sort_by_key(|r| r.order.map_or(0, |o| o.strahler));
        let mut inside = Sketch::default();
        for reach in &shown.reaches {
            let line: Vec<Point> = reach.line.0.iter().map(|p| self.at(*p)).collect();
            let order = reach.order.map(|o| o.strahler + 1 - shown.least_order);
            inside.polyline(simplified(&line, FINEST_MM), theme.stroke(color, share * order_width(order)));
        }
        sketch.items.push(Item::Clip { min: self.min, max: self.max, items: inside.items });
        shown.least_order
    }

    /// What the panel can hold, `most` mm per mm².
    pub fn printable<'a>(&self, network: &'a Network, most: f64) -> Printable<'a> {
        printable(network, |p| self.at(p), Bounds { min: self.min, max: self.max }, most)
    }
}

/// Channel length in a small panel, mm per mm², that thin lines still hold apart.
const MOST_DENSE: f64 = 0.7;

/// A bar of round ground length with its name, from `at` to the right; at most `room_mm` long.
pub(super) fn length_bar(
    sketch: &mut Sketch,
    mm_per_unit: f64,
    unit: LengthUnit,
    at: Point,
    room_mm: f64,
    theme: &Theme,
) {
    let length = numbers::round_down(room_mm / mm_per_unit);
    if !(length > 0.0 && length.is_finite()) {
        return;
    }
    let mm = length * mm_per_unit;
    let stroke = theme.stroke(theme.ink, theme.widths.line);
    sketch.polyline(
        vec![
            Point::new(at.x, at.y - 0.8),
            at,
            Point::new(at.x + mm, at.y),
            Point::new(at.x + mm, at.y - 0.8),
        ],
        stroke,
    );
    let text = match unit {
        LengthUnit::Metre if length >= 1000.0 => format!("{} km", numbers::plain(length / 1000.0, 3)),
        unit => format!("{} {}", numbers::plain(length, 3), unit.symbol()),
    };
    let look = Type::new(theme.text.small, theme.ink_soft);
    sketch.text(Point::new(at.x + mm + 1.2, at.y + 0.5 * font::CAP_HEIGHT * look.size_mm - 0.3), text, look);
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::{FlowSense, NetworkNode, Polyline, Reach, ReachOrigin};

    #[test]
    fn lines_tell_the_shape_of_a_pixel() {
        let ends = [(10.0, 0.0), (7.0, 7.0), (0.0, 12.0), (3.0, -9.0)];
        let reach = |(x, y): (f64, f64)| Reach {
            from: 0,
            to: 0,
            line: Polyline(vec![Point::default(), Point::new(x, y)]),
            length: (70.0 * x).hypot(92.0 * y),
            sense: FlowSense::default(),
            order: None,
            width: None,
            stations: Vec::new(),
            origin: ReachOrigin::Elevation,
            confidence: 1.0,
        };
        let nodes = vec![NetworkNode { at: Point::default(), elevation_m: None }];
        let network = Network { nodes, reaches: ends.map(reach).to_vec() };
        let [sx, sy] = pixel_shape(&network);
        assert_close!(sx, 70.0, 1e-9, "columns");
        assert_close!(sy, 92.0, 1e-9, "rows");
        assert_close!(pixel_shape(&Network::default())[0], 1.0, 1e-12, "nothing told");
    }
}
