//! The arrangement of a network as probabilities.

use crate::ground::{Axis, Azimuth, Method, Network, Place, Point, Symbol};
use crate::science::axial::density::density_by_degree;
use crate::science::axial::mean::Resultant;
use crate::science::axial::rose::rose;

use super::hierarchy::streams;
use super::junctions::Junctions;
use super::kinds;
use super::sources::{DERIVED, at, memory};

pub const METHOD: Method = Method {
    id: "network.pattern",
    name: "Pattern of a network as probabilities",
    question: "Is the network dendritic, parallel, trellis, rectangular or radial?",
    formula: "P(kind | f) = L_kind(f)^τ / Σ L^τ; L normal in the features f with the moments of simulated networks",
    symbols: &[
        Symbol {
            symbol: "f",
            meaning: "R̄ of doubled and fourfold link azimuths, mean junction angle, share of right angles, short tributaries across, and fit to a centre",
            unit: "1",
        },
        Symbol {
            symbol: "L_kind",
            meaning: "density of the features of simulated networks of one kind",
            unit: "1",
        },
        Symbol { symbol: "τ", meaning: "½: real networks differ more than simulated ones", unit: "1" },
    ],
    assumptions: &["The network is one of the five kinds, each as likely beforehand."],
    limits: &[
        "Probabilities are relative to five simulated kinds: a network like none of them still gets five numbers that sum to 1. See the features.",
        "Fewer than 30 links: too few, no probabilities.",
        "Directions of short links on a grid crowd at 45° and 90°; links are weighted by length.",
        "Without a stated summit the centre is where the links' lines meet best within the network's bounds.",
    ],
    sources: &[
        memory(
            "zernitz1932",
            "Zernitz, E. R.",
            1932,
            "Drainage patterns and their significance",
            "Journal of Geology 40, 498–521",
        ),
        at(DERIVED, "least-cost networks over simulated ground of each kind; moments in `kinds`"),
    ],
};

/// Names in the order of `Pattern::probabilities`.
pub const PATTERN_NAMES: [&str; 5] = ["dendritic", "parallel", "trellis", "rectangular", "radial"];

/// Links that a pattern needs.
pub const LEAST_LINKS: usize = 30;
/// Kernel concentration of the density whose peaks are modes: about ± 10° of axis.
const MODE_KERNEL: f64 = 15.0;
/// A mode stands so far above an even spread.
const MODE_HEIGHT: f64 = 1.3;
const ROSE_BIN_DEG: f64 = 10.0;
/// A junction within so many degrees of 90° is a right angle.
const RIGHT_WITHIN_DEG: f64 = 15.0;

#[derive(Clone, Debug, Default, PartialEq)]
pub struct Pattern {
    pub links: usize,
    /// Fewer than 30 links: probabilities are not given.
    pub too_few: bool,
    pub probabilities: Option<[f64; 5]>,
    pub features: PatternFeatures,
    /// Length-weighted share of link azimuths by bins of `rose_bin_deg`, from axis 0°.
    pub rose: Vec<f64>,
    pub rose_bin_deg: f64,
    /// Modes of link azimuths.
    pub modes: Vec<Axis>,
}

/// What the probabilities rest on.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct PatternFeatures {
    /// R̄ of the doubled link azimuths, weighted by length.
    pub alignment: f64,
    /// R̄ of the fourfold link azimuths: two trends at a right angle.
    pub crossing: f64,
    pub mean_junction_deg: Option<f64>,
    /// Share of junctions within 15° of a right angle.
    pub right_angles: Option<f64>,
    /// Mean length of the order 1 streams across the dominant trend (at more than 45°) over the mean length of all
    /// streams along it: short tributaries across.
    pub short_across: Option<f64>,
    /// Mean cos(azimuth − away from the summit).
    pub radial: Option<f64>,
}

/// The features as the coordinates in which kinds are told apart: R̄, R̄, mean angle over 90°, share, ln of the
/// ratio, mean cos; `None` where one is not known.
pub fn coordinates(features: &PatternFeatures) -> [Option<f64>; 6] {
    [
        Some(features.alignment),
        Some(features.crossing),
        features.mean_junction_deg.map(|a| a / 90.0),
        features.right_angles,
        features.short_across.filter(|r| *r > 0.0).map(f64::ln),
        features.radial,
    ]
}

/// A straight piece of a link on the ground.
struct Piece {
    at: Point,
    azimuth: Azimuth,
    length: f64,
}

/// The pattern of a network. Links are cut into pieces of the junctions' chord; `summit` in pixels, when the user
/// knows one.
pub fn pattern(network: &Network, junctions: &Junctions, place: &Place, summit: Option<Point>) -> Pattern {
    let pieces: Vec<Piece> =
        network.reaches.iter().flat_map(|r| pieces(&r.line.0, junctions.chord, place)).collect();
    let axes: Vec<Axis> = pieces.iter().map(|p| p.azimuth.axis()).collect();
    let weights: Vec<f64> = pieces.iter().map(|p| p.length).collect();
    let times = |m: f64| {
        let phi: Vec<f64> = axes.iter().map(|a| m * a.rad()).collect();
        Resultant::of(&phi, Some(&weights))
    };
    let trend = times(2.0);
    let angles: Vec<f64> = junctions.angles.iter().map(|a| a.angle_deg).collect();
    let of_junctions = |f: &dyn Fn(f64) -> f64| {
        (!angles.is_empty()).then(|| angles.iter().map(|a| f(*a)).sum::<f64>() / angles.len() as f64)
    };
    let features = PatternFeatures {
        alignment: trend.mean_length(),
        crossing: times(4.0).mean_length(),
        mean_junction_deg: of_junctions(&|a| a),
        right_angles: of_junctions(&|a| f64::from(u8::from((a - 90.0).abs() <= RIGHT_WITHIN_DEG))),
        short_across: short_across(network, place, trend.axis()),
        radial: radial(&pieces, place, summit),
    };
    let links = network.reaches.len();
    let too_few = links < LEAST_LINKS;
    let probabilities = if too_few { None } else { Some(kinds::probabilities(&coordinates(&features))) };
    Pattern {
        links,
        too_few,
        probabilities,
        features,
        rose: rose(&axes, Some(&weights), ROSE_BIN_DEG),
        rose_bin_deg: ROSE_BIN_DEG,
        modes: if axes.is_empty() { Vec::new() } else { modes(&axes, &weights) },
    }
}

/// Chords of about `chord` along a line, the whole line where it is shorter or `chord` is 0.
fn pieces(line: &[Point], chord: f64, place: &Place) -> Vec<Piece> {
    let mut found = Vec::new();
    let (Some(first), Some(last)) = (line.first(), line.last()) else { return found };
    let piece = |from: &Point, to: &Point| {
        let frame = place.local_frame(*from)?;
        let (dx, dy) = (to.x - from.x, to.y - from.y);
        let length = frame.length(dx, dy);
        (length > 0.0).then(|| Piece { at: *from, azimuth: frame.azimuth(dx, dy), length })
    };
    let mut from = first;
    for p in &line[1..] {
        let Some(next) = piece(from, p) else { continue };
        if chord > 0.0 && next.length >= chord * (1.0 - 1e-9) {
            found.push(next);
            from = p;
        }
    }
    found.extend(piece(from, last));
    found
}

/// Peaks of the density of axes, the highest first.
fn modes(axes: &[Axis], weights: &[f64]) -> Vec<Axis> {
    let f = density_by_degree(axes, Some(weights), MODE_KERNEL);
    let n = f.len();
    let is_peak = |i: &usize| {
        let (before, after) = (f[(i + n - 1) % n], f[(i + 1) % n]);
        f[*i] > before && f[*i] >= after && f[*i] * n as f64 > MODE_HEIGHT
    };
    let mut peaks: Vec<usize> = (0..n).filter(is_peak).collect();
    peaks.sort_by(|a, b| f[*b].total_cmp(&f[*a]));
    peaks.into_iter().map(|deg| Axis::from_deg(deg as f64)).collect()
}

/// Mean length of streams of order 1 across the trend over that of streams along it.
fn short_across(network: &Network, place: &Place, trend: Axis) -> Option<f64> {
    let (mut across, mut along) = ((0.0, 0.0), (0.0, 0.0));
    for stream in streams(network) {
        let (first, last) = (&network.reaches[stream[0]], &network.reaches[*stream.last()?]);
        let (Some(from), Some(to)) = (first.line.0.first(), last.line.0.last()) else { continue };
        let Some(frame) = place.local_frame(*from) else { continue };
        let axis = frame.azimuth(to.x - from.x, to.y - from.y).axis();
        let length: f64 = stream.iter().map(|r| network.reaches[*r].length).sum();
        if axis.separation(trend) <= 45.0 {
            along = (along.0 + length, along.1 + 1.0);
        } else if first.order.is_some_and(|o| o.strahler == 1) {
            across = (across.0 + length, across.1 + 1.0);
        }
    }
    let ratio = (across.0 / across.1) / (along.0 / along.1);
    ratio.is_finite().then_some(ratio)
}

/// Mean cos between the pieces' senses and the way from the summit, by length.
fn radial(pieces: &[Piece], place: &Place, summit: Option<Point>) -> Option<f64> {
    let centre = summit.or_else(|| centre(pieces, place))?;
    let (mut sum, mut weight) = (0.0, 0.0);
    for piece in pieces {
        let Some(frame) = place.local_frame(piece.at) else { continue };
        let (east, north) = frame.ground(piece.at.x - centre.x, piece.at.y - centre.y);
        if east != 0.0 || north != 0.0 {
            let away = Azimuth::from_east_north(east, north);
            sum += piece.length * piece.azimuth.turn_from(away).to_radians().cos();
            weight += piece.length;
        }
    }
    (weight > 0.0).then(|| sum / weight)
}

/// Where the lines along the pieces meet best (least squares of distances), held within the pieces' bounds.
fn centre(pieces: &[Piece], place: &Place) -> Option<Point> {
    let bounds = crate::ground::Bounds::of(pieces.iter().map(|p| p.at))?;
    let frame = place.local_frame(bounds.centre())?;
    let middle = bounds.centre();
    let (mut m, mut v) = ([[0.0; 2]; 2], [0.0; 2]);
    for piece in pieces {
        let p = frame.ground(piece.at.x - middle.x, piece.at.y - middle.y);
        let (east, north) = piece.azimuth.east_north();
        // n·(c − p) = 0 for the normal n of the piece.
        let n = [-north, east];
        let off = n[0] * p.0 + n[1] * p.1;
        for i in 0..2 {
            v[i] += piece.length * n[i] * off;
            for j in 0..2 {
                m[i][j] += piece.length * n[i] * n[j];
            }
        }
    }
    let inverse = crate::numeric::huber::inverse(m)?;
    let [east, north] = crate::numeric::huber::times(&inverse, &v);
    let (dx, dy) = frame.pixel(east, north);
    let (x, y) = (middle.x + dx, middle.y + dy);
    (x.is_finite() && y.is_finite())
        .then(|| Point::new(x.clamp(bounds.min.x, bounds.max.x), y.clamp(bounds.min.y, bounds.max.y)))
}
