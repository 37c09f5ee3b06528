//! The numbers of a set of crest lines on the ground: count, length, density, direction, sinuosity.

use crate::ground::{Axis, Method, Point, Polygon, Read, Source, Symbol};
use crate::science::axial::mean::Resultant;
use crate::science::axial::rose::rose;

use super::frames::OnGround;
use super::survival::{Survival, kaplan_meier};
use super::{CrestLine, End};

/// The record of the numbers of crest lines.
pub static METHOD: Method = Method {
    id: "crest.numbers",
    name: "Crest length, density, direction and sinuosity",
    question: "How many crests are there, how long, and which way do they run?",
    formula: "density = ΣL/A;  azimuth: doubled mean of segments, each weighted by its length;  sinuosity = ΣL/Σ(end to end);  mean length: Kaplan–Meier, lines that end on the border or a gap being cut",
    symbols: &[
        Symbol { symbol: "L", meaning: "length of a crest", unit: "m" },
        Symbol { symbol: "A", meaning: "area of the patch", unit: "m²" },
    ],
    assumptions: &[
        "a segment of a line is short against the body: its length and direction are those of the frame at its middle",
    ],
    limits: &["length depends on the tolerance lines are simplified to"],
    sources: &[Source {
        key: "ventifact-crest-numbers",
        authors: "this program",
        year: 2026,
        title: "Border-censored crest lengths",
        published: "definitions; censoring after Kaplan and Meier 1958",
        locator: "",
        read: Read::Derived,
    }],
};

/// Pieces an edge of the outline is followed in where the frame changes along it.
const PIECES: usize = 16;

/// Numbers of a set of crests. Lengths in the frame's unit.
#[derive(Clone, Debug, PartialEq)]
pub struct CrestNumbers {
    pub count: usize,
    /// Σ L.
    pub total_length: f64,
    pub area: f64,
    /// Σ L / area; 0 for no area.
    pub density: f64,
    /// Lengths with those cut by border or gap.
    pub lengths: Survival,
    /// Plain mean of the lengths inside, which a small patch makes too short; `None` without lines.
    pub plain_mean_length: Option<f64>,
    /// Length-weighted mean axis and its doubled resultant length; `None` without lines.
    pub azimuth: Option<(Axis, f64)>,
    /// Σ L over Σ distance of the ends, lines that close left out; `None` without any.
    pub sinuosity: Option<f64>,
}

/// Points in the plane of the patch: x east, y north.
pub(super) fn on_ground(points: &[Point], frame: &impl OnGround) -> Vec<Point> {
    points.iter().map(|p| frame.plane(*p)).collect()
}

/// Axis and ground length of each segment of a line by the frame at its middle; those without length left out.
fn segments(points: &[Point], frame: &impl OnGround) -> Vec<(Axis, f64)> {
    let segment = |w: &[Point]| {
        let middle = Point::new(0.5 * (w[0].x + w[1].x), 0.5 * (w[0].y + w[1].y));
        let (east, north) = frame.frame(middle).ground(w[1].x - w[0].x, w[1].y - w[0].y);
        let length = east.hypot(north);
        (length > 0.0).then(|| (Axis::from_east_north(east, north), length))
    };
    points.windows(2).filter_map(segment).collect()
}

/// A polygon in the plane of the patch. Its edges, straight in pixels, bend there: they are followed in pieces.
pub(super) fn region(outline: &Polygon, frame: &impl OnGround) -> Polygon {
    let ring = |ring: &[Point]| -> Vec<Point> {
        let mut out = Vec::with_capacity(PIECES * ring.len());
        for (i, a) in ring.iter().enumerate() {
            let b = ring[(i + 1) % ring.len()];
            let at = |k: usize| {
                let t = k as f64 / PIECES as f64;
                frame.plane(Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y)))
            };
            let pieces = if frame.frame(*a) == frame.frame(b) { 1 } else { PIECES };
            out.extend((0..pieces).map(at));
        }
        out
    };
    Polygon { outer: ring(&outline.outer), holes: outline.holes.iter().map(|hole| ring(hole)).collect() }
}

/// Whether neither border nor gap cuts a line.
pub(super) fn is_whole(line: &CrestLine) -> bool {
    !line.ends.iter().any(|end| matches!(end, End::Border | End::Gap))
}

/// Share of the length of crest by direction, in bins of `bin_deg` from 0°; empty sums for no lines.
pub fn length_rose(lines: &[CrestLine], frame: impl OnGround, bin_deg: f64) -> Vec<f64> {
    let all = lines.iter().flat_map(|line| segments(&line.line.0, &frame));
    let (axes, lengths): (Vec<Axis>, Vec<f64>) = all.unzip();
    rose(&axes, Some(&lengths), bin_deg)
}

/// Numbers of lines traced in `outline` (both in pixels), on the ground of `frame`.
pub fn numbers(lines: &[CrestLine], outline: &Polygon, frame: impl OnGround) -> CrestNumbers {
    let area = region(outline, &frame).area();
    let (mut phi, mut weights, mut lengths) = (Vec::new(), Vec::new(), Vec::new());
    let (mut open, mut straight) = (0.0, 0.0);
    for line in lines {
        let mut length = 0.0;
        for (axis, d) in segments(&line.line.0, &frame) {
            phi.push(axis.doubled());
            weights.push(d);
            length += d;
        }
        lengths.push((length, is_whole(line)));
        if let (Some(a), Some(b)) = (line.line.0.first(), line.line.0.last())
            && line.ends[0] != End::Closed
        {
            open += length;
            straight += frame.plane(*a).distance(frame.plane(*b));
        }
    }
    let total_length: f64 = lengths.iter().map(|(l, _)| l).sum();
    let resultant = (total_length > 0.0).then(|| Resultant::of(&phi, Some(&weights)));
    CrestNumbers {
        count: lines.len(),
        total_length,
        area,
        density: if area > 0.0 { total_length / area } else { 0.0 },
        lengths: kaplan_meier(&lengths),
        plain_mean_length: (!lines.is_empty()).then(|| total_length / lines.len() as f64),
        azimuth: resultant.map(|r| (r.axis(), r.mean_length())),
        sinuosity: (straight > 0.0).then(|| open / straight),
    }
}
