//! The dry branching channel of Sorrel Reach: a trunk and its tributaries with known lines, widths
//! and bed heights.

use crate::ground::{
    self, Bounds, FlowSense, Network, NetworkNode, Point, Polygon, Polyline, ReachOrigin, SenseEvidence,
    SenseKind, Station, Width,
};

/// A stretch of channel between junctions, head first.
#[derive(Clone, Debug)]
pub struct Reach {
    pub line: Polyline,
    /// Width, mosaic pixels.
    pub width: f64,
    /// Strahler order.
    pub order: u32,
    /// Bed height at head and mouth, m.
    pub bed_m: (f64, f64),
}

/// The network's reaches, trunk last; each ends where its receiver begins or on the trunk.
pub fn channels() -> Vec<Reach> {
    let reach = |points: &[(f64, f64)], width: f64, order: u32, bed_m: (f64, f64)| Reach {
        line: bend(&points.iter().map(|(x, y)| Point::new(*x, *y)).collect::<Vec<_>>()),
        width,
        order,
        bed_m,
    };
    let (a, b, c) = ((790.0, 640.0), (900.0, 705.0), (1020.0, 772.0));
    vec![
        reach(&[(655.0, 545.0), (700.0, 600.0), a], 2.5, 1, (640.0, 590.0)),
        reach(&[(660.0, 690.0), (720.0, 650.0), a], 2.5, 1, (640.0, 590.0)),
        reach(&[(835.0, 560.0), (860.0, 620.0), b], 3.0, 1, (640.0, 566.0)),
        reach(&[(760.0, 800.0), (850.0, 765.0), (935.0, 768.0), c], 3.0, 1, (610.0, 536.0)),
        reach(&[(1000.0, 560.0), (1010.0, 640.0), (1075.0, 690.0), (1100.0, 800.0)], 3.0, 1, (620.0, 519.0)),
        reach(&[a, (845.0, 690.0), b], 4.0, 2, (590.0, 566.0)),
        reach(&[b, (960.0, 735.0), c], 4.5, 2, (566.0, 536.0)),
        reach(&[c, (1060.0, 805.0), (1100.0, 800.0)], 5.5, 2, (536.0, 519.0)),
        reach(&[(1100.0, 800.0), (1150.0, 815.0), (1199.0, 850.0)], 6.0, 2, (519.0, 500.0)),
    ]
}

/// Corners smoothed by cutting (Chaikin 1974), ends kept.
fn bend(points: &[Point]) -> Polyline {
    let mut line = points.to_vec();
    for _ in 0..3 {
        let mut cut = vec![line[0]];
        for pair in line.windows(2) {
            let mix = |t: f64| {
                Point::new(pair[0].x + t * (pair[1].x - pair[0].x), pair[0].y + t * (pair[1].y - pair[0].y))
            };
            cut.push(mix(0.25));
            cut.push(mix(0.75));
        }
        cut.push(line[line.len() - 1]);
        line = cut;
    }
    Polyline(line)
}

/// Share of channel at a mosaic pixel, 0 … 1, with a soft bank.
pub fn cover(reaches: &[Reach], p: Point) -> f64 {
    reaches
        .iter()
        .filter(|reach| is_near(reach, p, reach.width + 1.0))
        .map(|reach| {
            let (distance, _) = nearest(&reach.line, p);
            (0.5 * reach.width + 0.5 - distance).clamp(0.0, 1.0)
        })
        .fold(0.0, f64::max)
}

/// How far the valley sides reach beyond the channels, mosaic pixels.
const VALLEY_REACH: f64 = 110.0;
/// Rise of the valley sides and of the bed from its middle, m a mosaic pixel.
const SIDE_RISE: f64 = 1.2;
const BED_RISE: f64 = 0.5;

/// Height of the ground of the nearest valley at a mosaic pixel, m, and the distance to its channel; `None` beyond
/// the valleys. It rises from the middle of the bed to both sides, so that nothing runs beside a channel.
pub fn valley(reaches: &[Reach], p: Point) -> Option<(f64, f64)> {
    reaches
        .iter()
        .filter(|reach| is_near(reach, p, VALLEY_REACH))
        .filter_map(|reach| {
            let (distance, share) = nearest(&reach.line, p);
            let bed = reach.bed_m.0 + share * (reach.bed_m.1 - reach.bed_m.0);
            let bank = 0.5 * reach.width;
            let height = bed + BED_RISE * distance.min(bank) + SIDE_RISE * (distance - bank).max(0.0);
            (distance < VALLEY_REACH).then_some((height, distance))
        })
        .min_by(|a, b| a.0.total_cmp(&b.0))
}

/// The network as it is: mosaic pixels, bed heights, widths, and the way down.
pub fn network_truth() -> Network {
    let mut nodes: Vec<NetworkNode> = Vec::new();
    let mut node = |at: Point, bed_m: f64| {
        nodes.iter().position(|n| n.at == at).unwrap_or_else(|| {
            nodes.push(NetworkNode { at, elevation_m: Some(bed_m) });
            nodes.len() - 1
        })
    };
    let sense = SenseEvidence { kind: SenseKind::Stated, ln_odds: FlowSense::SURE };
    let reach = |reach: Reach| {
        let (line, length) = (&reach.line.0, reach.line.length());
        let mut along = 0.0;
        let station = |i: usize| {
            along += if i > 0 { line[i - 1].distance(line[i]) } else { 0.0 };
            let bed = reach.bed_m.0 + along / length * (reach.bed_m.1 - reach.bed_m.0);
            Station {
                at: line[i],
                along,
                elevation_m: Some(bed),
                width: Some(reach.width),
                ..Station::default()
            }
        };
        let stations = (0..line.len()).map(station).collect();
        ground::Reach {
            from: node(line[0], reach.bed_m.0),
            to: node(line[line.len() - 1], reach.bed_m.1),
            line: reach.line,
            length,
            sense: FlowSense { evidence: vec![sense] },
            order: None,
            width: Some(Width { mean: reach.width, se: 0.0 }),
            stations,
            origin: ReachOrigin::Traced,
            confidence: 1.0,
        }
    };
    let reaches = channels().into_iter().map(reach).collect();
    Network { nodes, reaches }.ordered()
}

/// Ground that holds the network and little else, mosaic pixels: all of it slopes to a channel.
pub fn channel_ground() -> Polygon {
    let ring = [
        (600.0, 545.0),
        (615.0, 505.0),
        (655.0, 490.0),
        (700.0, 510.0),
        (740.0, 555.0),
        (785.0, 580.0),
        (785.0, 535.0),
        (815.0, 505.0),
        (860.0, 510.0),
        (895.0, 550.0),
        (920.0, 620.0),
        (960.0, 640.0),
        (950.0, 545.0),
        (975.0, 507.0),
        (1020.0, 505.0),
        (1055.0, 545.0),
        (1065.0, 610.0),
        (1120.0, 660.0),
        (1150.0, 745.0),
        (1200.0, 775.0),
        (1200.0, 900.0),
        (1165.0, 885.0),
        (1130.0, 865.0),
        (1060.0, 860.0),
        (1010.0, 830.0),
        (940.0, 825.0),
        (860.0, 820.0),
        (770.0, 855.0),
        (725.0, 845.0),
        (705.0, 800.0),
        (725.0, 755.0),
        (815.0, 725.0),
        (780.0, 695.0),
        (740.0, 700.0),
        (680.0, 742.0),
        (635.0, 742.0),
        (605.0, 710.0),
        (610.0, 665.0),
        (655.0, 632.0),
    ];
    Polygon { outer: ring.iter().map(|(x, y)| Point::new(*x, *y)).collect(), holes: Vec::new() }
}

/// Whether `p` is within `margin` of the reach's box.
fn is_near(reach: &Reach, p: Point, margin: f64) -> bool {
    Bounds::of(reach.line.0.iter().copied()).is_some_and(|b| {
        p.x > b.min.x - margin && p.x < b.max.x + margin && p.y > b.min.y - margin && p.y < b.max.y + margin
    })
}

/// Distance to the line, and the share of its length from the head to the nearest point.
fn nearest(line: &Polyline, p: Point) -> (f64, f64) {
    let total = line.length();
    let (mut best, mut share, mut before) = (f64::INFINITY, 0.0, 0.0);
    for pair in line.0.windows(2) {
        let length = pair[0].distance(pair[1]);
        let (dx, dy) = (pair[1].x - pair[0].x, pair[1].y - pair[0].y);
        let t = (((p.x - pair[0].x) * dx + (p.y - pair[0].y) * dy) / (length * length)).clamp(0.0, 1.0);
        let distance = p.distance(Point::new(pair[0].x + t * dx, pair[0].y + t * dy));
        if distance < best {
            (best, share) = (distance, (before + t * length) / total);
        }
        before += length;
    }
    (best, share)
}
