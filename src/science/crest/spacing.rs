//! Spacing from transects square to the crests, and the check by area over length.

use std::collections::HashMap;
use std::f64::consts::FRAC_PI_2;

use rayon::prelude::*;

use crate::ground::{Method, Point, Polygon, Read, Source, Stopped, Symbol, Work};

use super::CrestLine;
use super::frames::OnGround;
use super::numbers::{on_ground, region};
use super::survival::{Survival, kaplan_meier};

/// The record of crest spacing.
pub static METHOD: Method = Method {
    id: "crest.spacing",
    name: "Crest spacing by normal transects",
    question: "How far apart are the crests?",
    formula: "from points evenly spaced along every crest, to both sides along the normal, to the next crest; cut where the transect leaves the patch: Kaplan–Meier.  Check: λ = A/ΣL for parallel crests; transects of random direction give (π/2) λ",
    symbols: &[
        Symbol { symbol: "λ", meaning: "crest to crest", unit: "m" },
        Symbol { symbol: "A", meaning: "area of the patch", unit: "m²" },
        Symbol { symbol: "ΣL", meaning: "length of all crests in it", unit: "m" },
    ],
    assumptions: &["a transect's being cut says nothing about the spacing it would have met"],
    limits: &[
        "a crest's own bends count as neighbours where the normal meets them",
        "a crest that was missed doubles the spacing there",
        "neighbouring transects are alike: their number is not a number of samples",
    ],
    sources: &[Source {
        key: "buffon1777",
        authors: "Buffon, G. L. L. de",
        year: 1777,
        title: "Essai d'arithmétique morale",
        published: "Histoire naturelle, supplement 4",
        locator: "lines met by a needle; mean intercept (π/2) A/ΣL",
        read: Read::Memory,
    }],
};

/// How transects are laid.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SpacingSettings {
    /// From start to start along a crest, ground units.
    pub step: f64,
    /// Longest transect, ground units: longer ones are cut.
    pub longest: f64,
    /// The own line counts as a neighbour beyond this distance, ground units.
    pub own_beyond: f64,
}

/// Crest spacing, in the frame's unit.
#[derive(Clone, Debug, PartialEq)]
pub struct SpacingOnGround {
    pub transects: Survival,
    /// Kaplan–Meier quantiles 0.25, 0.5 and 0.75; `None` where too many transects are cut.
    pub quartiles: [Option<f64>; 3],
    /// Mean up to the longest transect; `None` without transects.
    pub restricted_mean: Option<f64>,
    /// Median of the transects seen whole, as if none had been cut: too short in a small patch.
    pub uncensored_median: Option<f64>,
    /// A/ΣL; `None` without crests.
    pub stereology: Option<f64>,
    /// Mean distance between crests met along lines of random direction: (π/2) A/ΣL.
    pub random_direction: Option<f64>,
}

/// Spacing of lines in `outline` (both in pixels) on the ground of `frame`.
///
/// # Errors
/// [`Stopped`].
pub fn spacing(
    lines: &[CrestLine],
    outline: &Polygon,
    frame: impl OnGround,
    settings: SpacingSettings,
    work: &Work,
) -> Result<SpacingOnGround, Stopped> {
    let ground: Vec<Vec<Point>> = lines.iter().map(|l| on_ground(&l.line.0, &frame)).collect();
    let region = region(outline, &frame);
    let total: f64 = ground.iter().flat_map(|l| l.windows(2)).map(|w| w[0].distance(w[1])).sum();
    let area = region.area();
    let stereology = (total > 0.0).then(|| area / total);
    let longest = settings.longest;
    let mut lengths = Vec::new();
    if settings.step > 0.0 && longest > 0.0 && longest.is_finite() && total > 0.0 {
        let cells = Cells::new(&ground, &region, stereology.unwrap_or(longest).min(longest));
        let starts: Vec<(usize, Point, [f64; 2])> =
            ground.iter().enumerate().flat_map(|(n, l)| starts(n, l, settings.step)).collect();
        let parts: Vec<Vec<(f64, bool)>> = starts
            .par_chunks(256)
            .map(|part| {
                let mut out = Vec::with_capacity(2 * part.len());
                for (line, from, normal) in part {
                    work.advance(0)?;
                    for side in [1.0, -1.0] {
                        let way = [side * normal[0], side * normal[1]];
                        out.push(cells.first(*line, *from, way, longest, settings.own_beyond));
                    }
                }
                Ok(out)
            })
            .collect::<Result<_, Stopped>>()?;
        lengths = parts.concat();
    }
    let transects = kaplan_meier(&lengths);
    let mut whole: Vec<f64> = lengths.iter().filter(|(_, whole)| *whole).map(|(t, _)| *t).collect();
    Ok(SpacingOnGround {
        quartiles: [0.25, 0.5, 0.75].map(|p| transects.quantile(p)),
        restricted_mean: transects.restricted_mean(),
        uncensored_median: (!whole.is_empty()).then(|| crate::numeric::quantile::median(&mut whole)),
        stereology,
        random_direction: stereology.map(|s| FRAC_PI_2 * s),
        transects,
    })
}

/// Points every `step` along a line, from half a step on, with the normal there.
fn starts(line: usize, points: &[Point], step: f64) -> Vec<(usize, Point, [f64; 2])> {
    let mut out = Vec::new();
    let mut ahead = 0.5 * step;
    for w in points.windows(2) {
        let d = w[0].distance(w[1]);
        if d == 0.0 {
            continue;
        }
        let way = [(w[1].x - w[0].x) / d, (w[1].y - w[0].y) / d];
        while ahead <= d {
            let at = Point::new(w[0].x + ahead * way[0], w[0].y + ahead * way[1]);
            out.push((line, at, [-way[1], way[0]]));
            ahead += step;
        }
        ahead -= d;
    }
    out
}

/// What a segment belongs to.
#[derive(Clone, Copy, PartialEq)]
enum Owner {
    Line(usize),
    Region,
}

/// Segments of lines and region by square cells.
struct Cells {
    segments: Vec<(Point, Point, Owner)>,
    cells: HashMap<(i64, i64), Vec<usize>>,
    side: f64,
}

impl Cells {
    fn new(lines: &[Vec<Point>], region: &Polygon, side: f64) -> Self {
        let mut segments = Vec::new();
        for (n, line) in lines.iter().enumerate() {
            segments.extend(line.windows(2).map(|w| (w[0], w[1], Owner::Line(n))));
        }
        for ring in region.rings() {
            segments.extend((0..ring.len()).map(|i| (ring[i], ring[(i + 1) % ring.len()], Owner::Region)));
        }
        let mut cells: HashMap<(i64, i64), Vec<usize>> = HashMap::new();
        for (i, (a, b, _)) in segments.iter().enumerate() {
            // Steps of half a cell; every cell around a step is told, so that none the segment cuts is missed.
            let count = (2.0 * a.distance(*b) / side).ceil().max(1.0) as usize;
            let mut told: Vec<(i64, i64)> = Vec::new();
            for k in 0..=count {
                let t = k as f64 / count as f64;
                let (x, y) = ((a.x + t * (b.x - a.x)) / side, (a.y + t * (b.y - a.y)) / side);
                for (dx, dy) in [(-0.26, -0.26), (-0.26, 0.26), (0.26, -0.26), (0.26, 0.26)] {
                    let key = ((x + dx).floor() as i64, (y + dy).floor() as i64);
                    if !told.contains(&key) {
                        told.push(key);
                    }
                }
            }
            for key in told {
                cells.entry(key).or_default().push(i);
            }
        }
        Self { segments, cells, side }
    }

    /// Distance to the first crest met on the way, with true; or to where the way leaves the region or
    /// has gone `longest`, with false.
    fn first(&self, own: usize, from: Point, way: [f64; 2], longest: f64, own_beyond: f64) -> (f64, bool) {
        let mut best = (longest, false);
        let steps = (2.0 * longest / self.side).ceil() as usize;
        let mut last = Vec::new();
        for k in 0..=steps {
            let t = 0.5 * self.side * k as f64;
            if t > best.0 + self.side {
                break;
            }
            let (x, y) = ((from.x + t * way[0]) / self.side, (from.y + t * way[1]) / self.side);
            let mut keys = Vec::with_capacity(4);
            for (dx, dy) in [(-0.26, -0.26), (-0.26, 0.26), (0.26, -0.26), (0.26, 0.26)] {
                let key = ((x + dx).floor() as i64, (y + dy).floor() as i64);
                if !keys.contains(&key) {
                    keys.push(key);
                }
            }
            for key in keys.iter().filter(|key| !last.contains(*key)) {
                for i in self.cells.get(key).into_iter().flatten() {
                    let (a, b, owner) = self.segments[*i];
                    let Some(d) = meeting(from, way, a, b) else { continue };
                    let least = if owner == Owner::Line(own) { own_beyond } else { 0.0 };
                    if d > least && d < best.0 {
                        best = (d, owner != Owner::Region);
                    }
                }
            }
            last = keys;
        }
        best
    }
}

/// Distance along a ray to where it meets a segment.
fn meeting(from: Point, way: [f64; 2], a: Point, b: Point) -> Option<f64> {
    let (ex, ey) = (b.x - a.x, b.y - a.y);
    let det = way[0] * ey - way[1] * ex;
    if det == 0.0 {
        return None;
    }
    let (rx, ry) = (a.x - from.x, a.y - from.y);
    let t = (rx * ey - ry * ex) / det;
    let u = (rx * way[1] - ry * way[0]) / det;
    (t > 0.0 && (0.0..=1.0).contains(&u)).then_some(t)
}
