//! How far crests moved between two pictures of one ground.

use std::collections::BTreeMap;

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{
    Axis, Azimuth, Bounds, LocalFrame, Method, Point, Read, Seed, Source, Stopped, Symbol, Work,
};
use crate::numeric::huber;
use crate::numeric::quantile::{median, of_sorted};
use crate::numeric::tail::{normal_quantile, student_two_sided};

use super::CrestLine;
use super::meet::{Curve, Segments, Start, starts};

pub static METHOD: Method = Method {
    id: "crest.shift",
    name: "Crest movement by normal matching",
    question: "How far, and which way, did crests move from one picture to the next?",
    formula: "from points evenly spaced along the first crests, along the normal n, to the crest of the second picture nearest to m₀ that runs within 30° of the first: dᵢ;  m = median d;  interval: whole crests redrawn, widened by Student's t for their number;  v: Σ ψ(nᵢ·v − dᵢ) nᵢ = 0",
    symbols: &[
        Symbol {
            symbol: "dᵢ",
            meaning: "movement of a point along its own normal, positive forward",
            unit: "m",
        },
        Symbol {
            symbol: "m₀",
            meaning: "the movement at which most crests meet, within half a spacing of none",
            unit: "m",
        },
        Symbol { symbol: "v", meaning: "one movement of all crests, toward east and north", unit: "m" },
        Symbol { symbol: "ψ", meaning: "Huber's, clipped at 1.345 robust standard deviations", unit: "m" },
    ],
    assumptions: &[
        "Crests are rigid over the time: each keeps its shape near a point.",
        "Crests move less than half a spacing; else the next crest is taken for the same.",
    ],
    limits: &[
        "A crest shows no movement along itself: one vector can be told only where normals differ.",
        "Whatever the two pictures are off against each other adds to the movement.",
        "Under another light a crest line lies elsewhere on its dune, which looks like movement.",
    ],
    sources: &[Source {
        key: "ventifact-crest-shift",
        authors: "Ventifact",
        year: 2026,
        title: "Derived for this program",
        published: "normal matching; checked on drawn crests of known movement",
        locator: "",
        read: Read::Derived,
    }],
};

/// Movement of crests square to themselves; lengths in the unit of the ground.
#[derive(Clone, Debug, PartialEq)]
pub struct Shift {
    /// Points of the first crests that met a crest of the second, and their share of all points.
    pub matched: usize,
    pub share: f64,
    /// The way that counts as forward: across the mean crest.
    pub toward: Azimuth,
    /// Median movement toward it with its 95 % interval by crests redrawn.
    pub median: f64,
    pub ci95: [f64; 2],
    /// The quarter and three-quarter points of single movements.
    pub quartiles: [f64; 2],
    /// Crests that take part: the number of samples.
    pub crests: usize,
    /// Movement of each point, thinned for show.
    pub moves: Vec<f32>,
    /// Where those points stood on the first crests, in its pixels, and where they went.
    pub arrows: Vec<[Point; 2]>,
    /// All crests moved by one vector; `None` where they are too parallel to tell.
    pub vector: Option<ShiftVector>,
    /// Movements that explain the second picture nearly as well: the next crest taken for the same.
    pub alternatives: Vec<f64>,
    /// What chance makes of it; `None` without rearrangements.
    pub chance: Option<ShiftChance>,
}

/// One movement for crests of all directions.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ShiftVector {
    /// Toward east and north, with 95 % intervals by crests redrawn.
    pub east_north: [f64; 2],
    pub ci95: [[f64; 2]; 2],
}

/// The second crests laid elsewhere at random.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ShiftChance {
    /// Mean share of points that then met a crest.
    pub share: f64,
    /// Share of rearrangements whose movements agreed as closely (quartile distance) as those found.
    pub p: f64,
}

/// How crests are matched. Lengths in ground units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ShiftSettings {
    /// Crest to crest.
    pub spacing: f64,
    /// Farthest a crest is sought from where it was.
    pub reach: f64,
    /// From point to point along the first crests.
    pub step: f64,
    /// Redrawings of crests for the interval.
    pub resamples: u32,
    /// Rearrangements of the second crests for what chance makes.
    pub permutations: u32,
}

/// Fewer points than this tell nothing.
const LEAST_POINTS: usize = 8;
/// Rearrangements at the most: each is a whole matching.
const MOST_PERMUTATIONS: u32 = 199;
/// Movements kept for show.
const MOST_SHOWN: usize = 2000;
/// Cosine to the mean normal below which a crest has no forward side.
const SIDEWAYS: f64 = 0.5;
/// A lag with this share of the crossings at the best one explains the pictures nearly as well.
const NEARLY: f64 = 0.8;
/// Smaller eigenvalue of ⟨n nᵀ⟩ from which a vector can be told: normals spread over some ± 13°.
const LEAST_SPREAD: f64 = 0.05;

/// Matches the crests of two pictures, both in pixels of the first, on the ground of `frame`; in words why not.
///
/// # Errors
/// [`Stopped`].
pub fn shift(
    first: &[CrestLine],
    second: &[CrestLine],
    frame: LocalFrame,
    settings: ShiftSettings,
    seed: Seed,
    work: &Work,
) -> Result<Result<Shift, String>, Stopped> {
    let ShiftSettings { spacing, reach, step, .. } = settings;
    let sound = [spacing, reach, step].iter().all(|x| x.is_finite() && *x > 0.0);
    if first.is_empty() || second.is_empty() || !sound {
        let why = match (first.is_empty(), second.is_empty()) {
            (true, _) => "no crest was traced in the first picture",
            (_, true) => "no crest was traced in the second picture",
            _ => "without a spacing there is no telling which crest became which",
        };
        return Ok(Err(why.into()));
    }
    let lines: Vec<Curve> = first.iter().map(|l| Curve::new(l, frame)).collect();
    let others: Vec<Curve> = second.iter().map(|l| Curve::new(l, frame)).collect();
    let from = starts(&lines, step);
    let Some(toward) = forward(&from).filter(|_| from.len() >= LEAST_POINTS) else {
        return Ok(Err("the first crests are too short to be followed".into()));
    };
    let matching = Matching { from: &from, toward: toward.east_north(), spacing, reach };
    let Some(found) = matching.run(&others, work)? else {
        let why = "too few crests of the second picture lie within reach of the first";
        return Ok(Err(why.into()));
    };
    let forward: Vec<(usize, f64)> =
        found.moves.iter().filter_map(|m| Some((m.cluster, m.forward?))).collect();
    let mut distances: Vec<f64> = forward.iter().map(|(_, d)| *d).collect();
    distances.sort_unstable_by(f64::total_cmp);
    let [low, middle, high] = [0.25, 0.5, 0.75].map(|p| of_sorted(&distances, p));
    let clusters = clusters(&found.moves);
    let Some(wider) = widening(&clusters) else {
        return Ok(Err("one crest alone does not say how sure its movement is".into()));
    };
    // A median of fewer draws has no tails.
    let redrawn = redraw(&clusters, settings.resamples.max(40), seed, work)?;
    let interval = |value: f64, mut draws: Vec<f64>| {
        draws.sort_unstable_by(f64::total_cmp);
        [0.025, 0.975].map(|p| value + wider * (of_sorted(&draws, p) - value))
    };
    let vector = vector(&found.moves).map(|v| {
        let draws = |i: usize| redrawn.iter().filter_map(|r| Some(r.vector?[i])).collect::<Vec<_>>();
        ShiftVector { east_north: v, ci95: [0, 1].map(|i| interval(v[i], draws(i))) }
    });
    let chance = match settings.permutations.min(MOST_PERMUTATIONS) {
        0 => None,
        count => Some(by_chance(&matching, &others, high - low, count, seed, work)?),
    };
    let stride = found.moves.len().div_ceil(MOST_SHOWN).max(1);
    let to_pixel = |p: Point| {
        let (x, y) = frame.pixel(p.x, p.y);
        Point::new(x, y)
    };
    let shown = found.moves.iter().step_by(stride).filter(|m| m.forward.is_some());
    Ok(Ok(Shift {
        matched: found.moves.len(),
        share: found.moves.len() as f64 / from.len() as f64,
        toward,
        median: middle,
        ci95: interval(middle, redrawn.iter().map(|r| r.median).collect()),
        quartiles: [low, high],
        crests: clusters.len(),
        moves: shown.clone().filter_map(|m| Some(m.forward? as f32)).collect(),
        arrows: shown.map(|m| [to_pixel(m.at), to_pixel(m.to())]).collect(),
        vector,
        alternatives: found.alternatives,
        chance,
    }))
}

/// The direction across the mean crest, in the eastern half; `None` without any length.
fn forward(from: &[Start]) -> Option<Azimuth> {
    let phi: Vec<f64> =
        from.iter().map(|s| Axis::from_east_north(s.normal[0], s.normal[1]).doubled()).collect();
    (!phi.is_empty()).then(|| crate::science::axial::mean::Resultant::of(&phi, None).axis().azimuth())
}

/// One point that met a crest.
#[derive(Clone, Copy)]
struct Move {
    at: Point,
    normal: [f64; 2],
    /// Along the normal.
    distance: f64,
    /// Positive toward the forward side; `None` for a crest that faces sideways.
    forward: Option<f64>,
    cluster: usize,
}

impl Move {
    fn to(self) -> Point {
        Point::new(self.at.x + self.distance * self.normal[0], self.at.y + self.distance * self.normal[1])
    }
}

struct Found {
    moves: Vec<Move>,
    alternatives: Vec<f64>,
}

/// What stays the same wherever the second crests are laid.
struct Matching<'a> {
    from: &'a [Start],
    toward: (f64, f64),
    spacing: f64,
    reach: f64,
}

impl Matching<'_> {
    /// Matches every point with the crest nearest to the common movement; `None` with too few matches.
    fn run(&self, others: &[Curve], work: &Work) -> Result<Option<Found>, Stopped> {
        let segments = Segments::new(others, self.spacing);
        // So far that the crests beside the right one are seen too.
        let far = self.reach + 1.5 * self.spacing;
        let seen: Vec<Vec<f64>> = self
            .from
            .par_chunks(256)
            .map(|part| {
                work.advance(0)?;
                Ok(part.iter().map(|s| segments.along(s, far)).collect::<Vec<_>>())
            })
            .collect::<Result<Vec<_>, Stopped>>()?
            .concat();
        let across: Vec<f64> =
            self.from.iter().map(|s| s.normal[0] * self.toward.0 + s.normal[1] * self.toward.1).collect();
        let faces = |i: usize| (across[i].abs() >= SIDEWAYS).then_some(across[i].signum());
        let mut lags: Vec<f64> = Vec::new();
        for (i, crossings) in seen.iter().enumerate() {
            lags.extend(faces(i).into_iter().flat_map(|side| crossings.iter().map(move |d| side * d)));
        }
        lags.sort_unstable_by(f64::total_cmp);
        let Some((mut middle, alternatives)) = self.common(&lags) else { return Ok(None) };
        // Once more about the median of the first matching, which the steps of the lags do not bind.
        let mut moves = Vec::new();
        for _ in 0..2 {
            moves.clear();
            for (i, (start, crossings)) in self.from.iter().zip(&seen).enumerate() {
                let expected = middle * faces(i).unwrap_or(across[i]);
                let nearest = crossings
                    .iter()
                    .copied()
                    .min_by(|a, b| (a - expected).abs().total_cmp(&(b - expected).abs()))
                    .filter(|d| (d - expected).abs() <= 0.5 * self.spacing);
                moves.extend(nearest.map(|distance| Move {
                    at: start.at,
                    normal: start.normal,
                    distance,
                    forward: faces(i).map(|side| side * distance),
                    cluster: start.cluster,
                }));
            }
            let mut forward: Vec<f64> = moves.iter().filter_map(|m: &Move| m.forward).collect();
            if forward.len() < LEAST_POINTS {
                return Ok(None);
            }
            middle = median(&mut forward);
        }
        Ok(Some(Found { moves, alternatives }))
    }

    /// The lag within reach at which most crossings lie, and others farther than half a spacing from it that are
    /// nearly as good. `lags` rise.
    fn common(&self, lags: &[f64]) -> Option<(f64, Vec<f64>)> {
        let (width, step) = (0.12 * self.spacing, 0.02 * self.spacing);
        let height = |lag: f64| -> f64 {
            let begin = lags.partition_point(|d| *d < lag - width);
            lags[begin..]
                .iter()
                .take_while(|d| **d <= lag + width)
                .map(|d| 1.0 - (d - lag).abs() / width)
                .sum()
        };
        let last = ((self.reach + self.spacing) / step).floor() as i64;
        let heights: Vec<(f64, f64)> =
            (-last..=last).map(|k| k as f64 * step).map(|lag| (lag, height(lag))).collect();
        let within = heights.iter().filter(|(lag, _)| lag.abs() <= self.reach);
        // Of equal heights the least movement.
        let best = within.max_by(|a, b| a.1.total_cmp(&b.1).then(b.0.abs().total_cmp(&a.0.abs())))?;
        if best.1 <= 0.0 {
            return None;
        }
        let is_peak = |k: usize| {
            let (lag, h) = heights[k];
            heights.iter().all(|(other, o)| (other - lag).abs() > 0.5 * self.spacing || *o <= h)
        };
        let alternatives = (0..heights.len())
            .filter(|k| (heights[*k].0 - best.0).abs() > 0.5 * self.spacing)
            .filter(|k| heights[*k].1 >= NEARLY * best.1 && is_peak(*k))
            .map(|k| heights[k].0)
            .collect();
        Some((best.0, alternatives))
    }
}

/// The points of each crest together, crests in order.
fn clusters(moves: &[Move]) -> Vec<Vec<Move>> {
    let mut all: BTreeMap<usize, Vec<Move>> = BTreeMap::new();
    for m in moves {
        all.entry(m.cluster).or_default().push(*m);
    }
    all.into_values().collect()
}

/// One redrawing of the crests.
struct Redrawn {
    median: f64,
    vector: Option<[f64; 2]>,
}

fn redraw(clusters: &[Vec<Move>], resamples: u32, seed: Seed, work: &Work) -> Result<Vec<Redrawn>, Stopped> {
    let draws: Vec<Option<Redrawn>> = (0..resamples)
        .into_par_iter()
        .map(|draw| {
            work.advance(0)?;
            let mut random = seed.stream("crest.shift", u64::from(draw));
            let moves: Vec<Move> = (0..clusters.len())
                .flat_map(|_| clusters[random.random_range(0..clusters.len())].iter().copied())
                .collect();
            let mut forward: Vec<f64> = moves.iter().filter_map(|m| m.forward).collect();
            Ok((!forward.is_empty())
                .then(|| Redrawn { median: median(&mut forward), vector: vector(&moves) }))
        })
        .collect::<Result<_, Stopped>>()?;
    Ok(draws.into_iter().flatten().collect())
}

/// By how much few crests make the interval of redrawings too narrow: t/z · √(k/(k − 1)) for k crests of equal
/// length that would scatter alike.
fn widening(clusters: &[Vec<Move>]) -> Option<f64> {
    let (sum, square) = clusters.iter().fold((0.0, 0.0), |(s, q), c| {
        let n = c.len() as f64;
        (s + n, q + n * n)
    });
    let k = sum * sum / square;
    (k >= 1.5).then(|| student_two_sided(0.95, k - 1.0) / normal_quantile(0.975) * (k / (k - 1.0)).sqrt())
}

/// The one vector that moves every point along its normal as found; `None` where normals are too much alike.
fn vector(moves: &[Move]) -> Option<[f64; 2]> {
    let n = moves.len() as f64;
    let [ee, en, nn] = moves.iter().fold([0.0; 3], |[ee, en, nn], m| {
        let [e, north] = m.normal;
        [ee + e * e / n, en + e * north / n, nn + north * north / n]
    });
    // Smaller eigenvalue of ⟨n nᵀ⟩, whose trace is 1.
    let least = 0.5 * (ee + nn) - (0.25 * (ee - nn).powi(2) + en * en).sqrt();
    if least.is_nan() || least < LEAST_SPREAD {
        return None;
    }
    let rows: Vec<[f64; 2]> = moves.iter().map(|m| m.normal).collect();
    let y: Vec<f64> = moves.iter().map(|m| m.distance).collect();
    huber::huber(&rows, &y).map(|fit| fit.coefficients)
}

/// The second crests turned about the middle by 180° and laid off at random, again and again: their trend and
/// spacing stay, their bends and ends no longer belong to the first.
fn by_chance(
    matching: &Matching,
    others: &[Curve],
    found: f64,
    count: u32,
    seed: Seed,
    work: &Work,
) -> Result<ShiftChance, Stopped> {
    let all = others.iter().flat_map(|c| c.points.iter().copied());
    let middle = Bounds::of(all).map_or(Point::default(), Bounds::centre);
    let (mut shares, mut as_close) = (0.0, 0u32);
    for draw in 0..count {
        let mut random = seed.stream("crest.shift.chance", u64::from(draw));
        let mut off = |spacings: f64| spacings * matching.spacing * random.random_range(-1.0..1.0);
        let (across, along) = (off(1.0), off(4.0));
        let (e, n) = matching.toward;
        let laid: Vec<Curve> = others
            .iter()
            .map(|c| {
                c.moved(|p| {
                    Point::new(
                        2.0 * middle.x - p.x + across * e + along * n,
                        2.0 * middle.y - p.y + across * n - along * e,
                    )
                })
            })
            .collect();
        let Some(got) = matching.run(&laid, work)? else { continue };
        shares += got.moves.len() as f64 / matching.from.len() as f64;
        let mut forward: Vec<f64> = got.moves.iter().filter_map(|m| m.forward).collect();
        let [low, high] = crate::numeric::quantile::of(&mut forward, [0.25, 0.75]);
        as_close += u32::from(high - low <= found);
    }
    let all = f64::from(count);
    Ok(ShiftChance { share: shares / all, p: (1.0 + f64::from(as_close)) / (1.0 + all) })
}
