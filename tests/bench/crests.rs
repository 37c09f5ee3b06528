//! Traced crests against hand-digitised ones: precision, recall and F1 by length within 0.3 m, defaults only,
//! inside the hull of the digitised lines. `cargo bench --bench crests`; the bar is F1 ≥ 0.70 on both frames.
//!
//! What the digitiser did that no detector can. The lines were drawn on another rectification of the photographs:
//! in frame 5892 they run beyond the raster's lower edge (row 2596.9 of 2592 at full resolution), and against the
//! steps of the picture they lie stretched by 2 to 5 % about a point in the upper left, 5 px off in the middle of
//! 5892 and 9 px in that of 5908, where the tolerance is 7.6 px. The displacement is no matter of brink or foot: its
//! median across the crests is +0.1 px (5892) and +0.5 px (5908) toward the bright side, and moving all lines to
//! either side only lowers F1. The map's place is read right: the table's own map coordinates and pixels agree with
//! the raster's transform to a millimetre. So a second row of figures takes out the one affine map that fits best,
//! which shows the tracing alone, and a third gives what the digitised lines themselves score once they are moved to
//! where the picture shows their steps: no tracing can be expected above it. The bar counts for the first.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use ventifact::files::raster::{Bands, Limits, Raster, Window};
use ventifact::ground::{Point, Polygon, Polyline, Work};
use ventifact::science::crest::{CrestSettings, Crests, detect};

/// Metres.
const TOLERANCE: f64 = 0.3;

/// Rounds of the affine fit, and the distance in tolerances within which a piece takes part.
const ROUNDS: usize = 12;
const PART: f64 = 2.5;

fn main() {
    let root = std::env::var_os("FIELD_DATA")
        .map_or_else(|| PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("../shared/data"), PathBuf::from)
        .join("crest-truth");
    if !root.is_dir() {
        println!("skipped: no digitised crests at {}", root.display());
        return;
    }
    for frame in ["5892", "5908"] {
        let raster = root.join(format!("riverbed_{frame}_gray_rotated.tif"));
        let raster = Raster::open(&raster, &Limits::default()).expect("the frame opens");
        let level = &raster.info().levels[0];
        let window = Window::whole(level.width, level.height);
        let image = raster.read(0, window, &Bands::default(), &Work::quiet()).expect("the frame reads");
        let truth = digitised(&root.join(format!("riverbed_{frame}_crests.csv")));
        let hull = hull(truth.iter().flat_map(|l| l.0.iter().copied()).collect());
        let start = std::time::Instant::now();
        let crests = detect(&image, &hull, &CrestSettings::default(), &Work::quiet()).expect("not stopped");
        println!(
            "{frame}: {} (skewness {:.2}), scale {:.1} px, {} lines, {:.1} s",
            crests.model.name(),
            crests.fits[0].skewness,
            crests.scales_px[0],
            crests.lines.len(),
            start.elapsed().as_secs_f64()
        );
        // About 40 mm a pixel.
        let within = TOLERANCE / 0.0397;
        let (found, truth) = (pieces(&lines(&crests)), pieces(&truth));
        let inside: Vec<Piece> = found.into_iter().filter(|p| hull.contains(p.at)).collect();
        print("as given", score(&inside, &truth, within));
        let (moved, map) = registered(&inside, &truth, within);
        print("placed anew (affine)", score(&moved, &truth, within));
        let shown: Vec<Piece> = truth.iter().map(|p| Piece { at: map.back(p.at), ..*p }).collect();
        print("the digitised lines where the picture shows them", score(&shown, &truth, within));
        let far = shown.iter().zip(&truth).filter(|(a, b)| a.at.distance(b.at) > within).count();
        println!(
            "  {:.0} % of their length lies farther off than the tolerance",
            100.0 * far as f64 / truth.len() as f64
        );
    }
}

fn print(what: &str, [precision, recall]: [f64; 2]) {
    let f1 = 2.0 * precision * recall / (precision + recall);
    println!("  {what}: precision {precision:.3}, recall {recall:.3}, F1 {f1:.3}");
}

/// The digitised lines in pixels of the frame, which is a quarter of the full resolution.
fn digitised(path: &Path) -> Vec<Polyline> {
    let text = std::fs::read_to_string(path).expect("the digitised crests read");
    let mut lines: BTreeMap<(String, String), Polyline> = BTreeMap::new();
    for row in text.lines().skip(1) {
        let cells: Vec<&str> = row.split(',').collect();
        let number = |i: usize| cells[i].parse::<f64>().expect("a number") / 4.0;
        let line = lines.entry((cells[0].to_owned(), cells[1].to_owned())).or_default();
        line.0.push(Point::new(number(2), number(3)));
    }
    lines.into_values().collect()
}

fn lines(crests: &Crests) -> Vec<Polyline> {
    crests.lines.iter().map(|l| l.line.clone()).collect()
}

/// About a pixel of a line.
#[derive(Clone, Copy)]
struct Piece {
    at: Point,
    normal: [f64; 2],
    length: f64,
}

fn pieces(lines: &[Polyline]) -> Vec<Piece> {
    let mut out = Vec::new();
    for w in lines.iter().flat_map(|l| l.0.windows(2)) {
        let length = w[0].distance(w[1]);
        let (dx, dy) = (w[1].x - w[0].x, w[1].y - w[0].y);
        let count = length.ceil().max(1.0);
        for i in 0..count as usize {
            let t = (i as f64 + 0.5) / count;
            let at = Point::new(w[0].x + t * dx, w[0].y + t * dy);
            out.push(Piece { at, normal: [-dy / length, dx / length], length: length / count });
        }
    }
    out.retain(|p| p.length > 0.0);
    out
}

fn nearest(p: Point, others: &[Piece]) -> (f64, Point) {
    others
        .iter()
        .map(|q| (p.distance(q.at), q.at))
        .fold((f64::INFINITY, p), |best, next| if next.0 < best.0 { next } else { best })
}

/// Precision and recall by length.
fn score(found: &[Piece], truth: &[Piece], within: f64) -> [f64; 2] {
    let share = |a: &[Piece], b: &[Piece]| {
        let all: f64 = a.iter().map(|p| p.length).sum();
        let near: f64 = a.iter().filter(|p| nearest(p.at, b).0 <= within).map(|p| p.length).sum();
        if all > 0.0 { near / all } else { 0.0 }
    };
    [share(found, truth), share(truth, found)]
}

/// A displacement u = a + B x, x in half frames from the middle.
#[derive(Clone, Copy, Default)]
struct Map([f64; 6]);

impl Map {
    fn at(p: Point) -> [f64; 2] {
        [(p.x - 484.0) / 484.0, (p.y - 324.0) / 484.0]
    }

    fn moved(&self, p: Point) -> Point {
        let ([x, y], m) = (Self::at(p), self.0);
        Point::new(p.x + m[0] + m[2] * x + m[4] * y, p.y + m[1] + m[3] * x + m[5] * y)
    }

    /// The point that is moved onto `p`.
    fn back(&self, p: Point) -> Point {
        (0..20).fold(p, |from, _| {
            let to = self.moved(from);
            Point::new(from.x + p.x - to.x, from.y + p.y - to.y)
        })
    }
}

/// The found pieces moved by the affine map that brings them closest to the digitised ones, measured square to
/// the crests, least squares over pieces that lie near, repeated; and the map.
fn registered(found: &[Piece], truth: &[Piece], within: f64) -> (Vec<Piece>, Map) {
    let mut moved = found.to_vec();
    let mut map = Map::default();
    for _ in 0..ROUNDS {
        let (mut rows, mut offs) = (Vec::new(), Vec::new());
        for (p, now) in found.iter().zip(&moved) {
            let (d, at) = nearest(now.at, truth);
            if d > PART * within {
                continue;
            }
            let ([nx, ny], [x, y]) = (p.normal, Map::at(p.at));
            rows.push([nx, ny, nx * x, ny * x, nx * y, ny * y]);
            offs.push((at.x - p.at.x) * nx + (at.y - p.at.y) * ny);
        }
        let Some(fit) = ventifact::numeric::huber::huber(&rows, &offs) else { break };
        map = Map(fit.coefficients);
        for (p, now) in found.iter().zip(&mut moved) {
            now.at = map.moved(p.at);
        }
    }
    let mut sizes: Vec<f64> = found.iter().zip(&moved).map(|(p, q)| p.at.distance(q.at)).collect();
    let [middle, most] = ventifact::numeric::quantile::of(&mut sizes, [0.5, 0.95]);
    println!(
        "  lines lie {middle:.1} px off by the placement in the middle, {most:.1} px in 5 %: {:.1?}",
        map.0
    );
    (moved, map)
}

/// The convex hull, by a monotone chain.
fn hull(mut points: Vec<Point>) -> Polygon {
    points.sort_by(|a, b| a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y)));
    let turn = |o: Point, a: Point, b: Point| (a.x - o.x) * (b.y - o.y) - (a.y - o.y) * (b.x - o.x);
    let chain = |points: &mut dyn Iterator<Item = Point>| {
        let mut out: Vec<Point> = Vec::new();
        for p in points {
            while out.len() >= 2 && turn(out[out.len() - 2], out[out.len() - 1], p) <= 0.0 {
                out.pop();
            }
            out.push(p);
        }
        out.pop();
        out
    };
    let mut outer = chain(&mut points.iter().copied());
    outer.extend(chain(&mut points.iter().rev().copied()));
    Polygon { outer, holes: Vec::new() }
}
