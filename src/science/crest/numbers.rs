//! The numbers of a set of crest lines on the ground: count, length, density, direction, sinuosity.

use crate::ground::{Axis, LocalFrame, Method, Point, Polygon, Read, Source, Symbol};
use crate::science::axial::mean::Resultant;
use crate::science::axial::rose::rose;

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
    assumptions: &["the patch is small against the body, so one linear frame holds for all of it"],
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

/// Lines and outline in the plane of a linear frame: x east, y north.
pub(super) fn on_ground(points: &[Point], frame: LocalFrame) -> Vec<Point> {
    points
        .iter()
        .map(|p| {
            let (east, north) = frame.ground(p.x, p.y);
            Point::new(east, north)
        })
        .collect()
}

/// Whether neither border nor gap cuts a line.
pub(super) fn is_whole(line: &CrestLine) -> bool {
    !line.ends.iter().any(|end| matches!(end, End::Border | End::Gap))
}

/// Share of the length of crest by direction, in bins of `bin_deg` from 0°; empty sums for no lines.
pub fn length_rose(lines: &[CrestLine], frame: LocalFrame, bin_deg: f64) -> Vec<f64> {
    let (mut axes, mut lengths) = (Vec::new(), Vec::new());
    for line in lines {
        for w in on_ground(&line.line.0, frame).windows(2).filter(|w| w[0] != w[1]) {
            axes.push(Axis::from_east_north(w[1].x - w[0].x, w[1].y - w[0].y));
            lengths.push(w[0].distance(w[1]));
        }
    }
    rose(&axes, Some(&lengths), bin_deg)
}

/// Numbers of lines traced in `outline` (both in pixels), on the ground of `frame`.
pub fn numbers(lines: &[CrestLine], outline: &Polygon, frame: LocalFrame) -> CrestNumbers {
    let area = outline.area() * frame.pixel_area();
    let (mut phi, mut weights, mut lengths) = (Vec::new(), Vec::new(), Vec::new());
    let (mut open, mut straight) = (0.0, 0.0);
    for line in lines {
        let ground = on_ground(&line.line.0, frame);
        let mut length = 0.0;
        for w in ground.windows(2) {
            let d = w[0].distance(w[1]);
            if d > 0.0 {
                phi.push(Axis::from_east_north(w[1].x - w[0].x, w[1].y - w[0].y).doubled());
                weights.push(d);
                length += d;
            }
        }
        lengths.push((length, is_whole(line)));
        if let (Some(a), Some(b)) = (ground.first(), ground.last())
            && line.ends[0] != End::Closed
        {
            open += length;
            straight += a.distance(*b);
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
