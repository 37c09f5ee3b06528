//! Junction angles by chords of stated length.

use crate::ground::{Azimuth, Method, Network, Place, Point, Read, Seed, Source, Stopped, Symbol, Work};
use crate::numeric::quantile;
use crate::numeric::resample::resampled_sums;
use crate::numeric::tail::student_two_sided;

use super::branch::{Branch, Graph};
use super::sources::{DERIVED, at, memory};

pub const METHOD: Method = Method {
    id: "network.junctions",
    name: "Junction angles by chords",
    question: "At what angle do channels join, and how far does the answer depend on the length looked at?",
    formula: "γ = ∠(d₁, d₂), d the least-squares direction of a branch between c/5 and c from the junction; cos ε = tan S_main / tan S_trib",
    symbols: &[
        Symbol { symbol: "γ", meaning: "angle between the two branches above", unit: "deg" },
        Symbol { symbol: "c", meaning: "chord, straight along the ground", unit: "m" },
        Symbol { symbol: "ε", meaning: "Howard's angle of entry", unit: "deg" },
        Symbol { symbol: "S", meaning: "slope of a branch within its chord", unit: "deg" },
    ],
    assumptions: &["The senses of the three channels are known."],
    limits: &[
        "Never from the directions of single cells: they know 45° and 90° only. Near the junction a grid lays two channels side by side, so the nearest fifth of the chord is left out.",
        "Longer chords see bends and further junctions, shorter ones the grid: the mean is given for half to twice the chord.",
        "A branch that ends within the chord is followed up the one with the greatest area, order or length; without channel over the chord the junction does not count.",
        "The interval is a bootstrap over junctions (t below 25), as if they were independent.",
        "Where the sense was inferred from junction angles the angles are no evidence.",
        "Near 72° (2π/5) seepage is one explanation, but slope, tectonics and the shape of the ground alone make such angles too: no climate or process follows from an angle.",
    ],
    sources: &[
        memory(
            "horton1932",
            "Horton, R. E.",
            1932,
            "Drainage-basin characteristics",
            "Transactions of the American Geophysical Union 13, 350–361",
        ),
        memory(
            "howard1971",
            "Howard, A. D.",
            1971,
            "Optimal angles of stream junction: geometric, stability to capture, and minimum power criteria",
            "Water Resources Research 7, 863–873",
        ),
        Source {
            key: "devauchelle2012",
            authors: "Devauchelle, O.; Petroff, A. P.; Seybold, H. F.; Rothman, D. H.",
            year: 2012,
            title: "Ramification of stream networks",
            published: "Proceedings of the National Academy of Sciences 109, 20832–20836",
            locator: "",
            read: Read::Abstract,
        },
        at(DERIVED, "bias of the directions checked on stepped forks at random azimuths"),
    ],
};

/// Chords tried, over the one asked for.
const RATIOS: [f64; 5] = [0.5, 0.75, 1.0, 1.5, 2.0];
/// Share of the chord next to the junction that is left out.
const SKIPPED: f64 = 0.2;
/// Fewer junctions have an interval by Student's t.
const LEAST_FOR_BOOTSTRAP: usize = 25;
const RESAMPLES: u32 = 2000;

/// Two channels that join, by chords of one length.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct JunctionAngle {
    pub at: Point,
    /// Node of the network.
    pub node: usize,
    /// Between the two upstream branches, degrees in (0, 180].
    pub angle_deg: f64,
    /// Between each branch and the channel below, as turned; left then right of the way down. Negative where both
    /// come from one side.
    pub turns_deg: [f64; 2],
    /// Where the two branches lead, left then right: azimuth of each chord, pointing downstream.
    pub toward: [Azimuth; 2],
    /// Strahler orders of the branches, when both are defined.
    pub orders: Option<[u32; 2]>,
    /// tan(slope of the stronger) / tan(slope of the weaker), and Howard's (1971) angle from it, degrees.
    pub howard_deg: Option<f64>,
}

/// The mean angle for one chord length.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AtChord {
    /// In the unit of the raster's place.
    pub chord: f64,
    pub n: usize,
    pub mean_deg: f64,
    pub ci95_deg: Option<[f64; 2]>,
    pub median_deg: f64,
}

#[derive(Clone, Debug, Default, PartialEq)]
pub struct Junctions {
    /// Chord of the angles listed.
    pub chord: f64,
    pub angles: Vec<JunctionAngle>,
    /// The same for shorter and longer chords: how far the answer depends on it.
    pub by_chord: Vec<AtChord>,
    /// Junctions where a chord found too little channel.
    pub too_short: usize,
}

/// The angles of all junctions where two channels or more flow together into one, each weaker branch against the
/// strongest. `chord` in the unit of the place.
///
/// # Errors
/// [`Stopped`].
pub fn junctions(
    network: &Network,
    place: &Place,
    chord: f64,
    seed: Seed,
    work: &Work,
) -> Result<Junctions, Stopped> {
    if !(chord > 0.0 && chord.is_finite()) {
        return Ok(Junctions::default());
    }
    let graph = Graph::of(network);
    let mut result = Junctions { chord, ..Junctions::default() };
    for ratio in RATIOS {
        let (angles, too_short) = angles(&graph, place, ratio * chord, work)?;
        let degrees: Vec<f64> = angles.iter().map(|a| a.angle_deg).collect();
        if let Some(row) = at_chord(ratio * chord, &degrees, seed, work)? {
            result.by_chord.push(row);
        }
        if ratio == 1.0 {
            (result.angles, result.too_short) = (angles, too_short);
        }
    }
    Ok(result)
}

/// Howard's angle of entry, degrees in [0, 90], of a tributary of slope tan `tributary` into a channel of slope
/// tan `main`; `None` where the tributary is not the steeper or one of them does not fall.
pub fn howard_deg(main: f64, tributary: f64) -> Option<f64> {
    (main > 0.0 && tributary >= main).then(|| (main / tributary).acos().to_degrees())
}

fn angles(
    graph: &Graph,
    place: &Place,
    chord: f64,
    work: &Work,
) -> Result<(Vec<JunctionAngle>, usize), Stopped> {
    let mut found = Vec::new();
    let mut too_short = 0;
    for node in 0..graph.network.nodes.len() {
        work.advance(0)?;
        let [below] = graph.out[node][..] else { continue };
        let mut above = graph.into[node].clone();
        let known = |r: &usize| graph.network.reaches[*r].sense.probability() > 0.5;
        if above.len() < 2 || !known(&below) || !above.iter().all(known) {
            continue;
        }
        let Some(frame) = place.local_frame(graph.network.nodes[node].at) else { continue };
        above.sort_by(|a, b| graph.stronger(*a, *b));
        let down = toward(&graph.down(node, below, chord, &frame)).map(Azimuth::reversed);
        let main = graph.up(node, above[0], chord, &frame);
        for weaker in &above[1..] {
            let branch = graph.up(node, *weaker, chord, &frame);
            match (toward(&main), toward(&branch), down) {
                (Some(a), Some(b), Some(down)) => {
                    found.extend(joined(graph, node, [above[0], *weaker], [&main, &branch], [a, b], down));
                }
                _ => too_short += 1,
            }
        }
    }
    Ok((found, too_short))
}

/// The junction of two branches that lead `toward` into a channel that leads `down`, the stronger first.
fn joined(
    graph: &Graph,
    node: usize,
    reaches: [usize; 2],
    branches: [&Branch; 2],
    toward: [Azimuth; 2],
    down: Azimuth,
) -> Option<JunctionAngle> {
    let angle_deg = toward[0].turn_from(toward[1]).abs();
    let turns = toward.map(|t| t.turn_from(down));
    // A branch that must turn left, against the clock, comes from the left.
    let [left, right] = if turns[0] >= turns[1] { [0, 1] } else { [1, 0] };
    let order = |i: usize| graph.network.reaches[reaches[i]].order.map(|o| o.strahler);
    let slopes = [branches[0].slope, branches[1].slope];
    (angle_deg > 0.0).then(|| JunctionAngle {
        at: graph.network.nodes[node].at,
        node,
        angle_deg,
        turns_deg: [turns[left], -turns[right]],
        toward: [toward[left], toward[right]],
        orders: order(left).zip(order(right)).map(|(l, r)| [l, r]),
        howard_deg: slopes[0].zip(slopes[1]).and_then(|(main, tributary)| howard_deg(main, tributary)),
    })
}

/// Azimuth of a branch towards its junction: the least-squares line through the channel, without the part next
/// to the junction. `None` when the branch is too short.
fn toward(branch: &Branch) -> Option<Azimuth> {
    let (east, north) = branch.direction(SKIPPED)?;
    Some(Azimuth::from_east_north(-east, -north))
}

fn at_chord(chord: f64, degrees: &[f64], seed: Seed, work: &Work) -> Result<Option<AtChord>, Stopped> {
    let n = degrees.len();
    if n == 0 {
        return Ok(None);
    }
    let count = n as f64;
    let mean = degrees.iter().sum::<f64>() / count;
    let off: Vec<f64> = degrees.iter().map(|d| d - mean).collect();
    let half = if n >= LEAST_FOR_BOOTSTRAP {
        let zeros = vec![0.0; n];
        let sums = resampled_sums(&off, &zeros, RESAMPLES, seed, "network.junctions", work)?;
        let mut sizes: Vec<f64> = sums.iter().map(|s| (s[0] / count).abs()).collect();
        let [half] = quantile::of(&mut sizes, [0.95]);
        Some(half * (count / (count - 1.0)).sqrt())
    } else if n > 1 {
        let variance = off.iter().map(|d| d * d).sum::<f64>() / (count - 1.0);
        Some(student_two_sided(0.95, count - 1.0) * (variance / count).sqrt())
    } else {
        None
    };
    let ci95_deg = half.map(|half| [mean - half, mean + half]);
    let median_deg = quantile::median(&mut degrees.to_vec());
    Ok(Some(AtChord { chord, n, mean_deg: mean, ci95_deg, median_deg }))
}
