//! Which way forks open along the trend: a clue to the sense of transport.

use statrs::function::factorial::ln_binomial;

use crate::ground::{Azimuth, LocalFrame, Method, Point, Read, Source, Symbol};

use super::frames::OnGround;
use super::numbers::on_ground;
use super::{CrestLine, Junction};

/// The record of fork polarity.
pub static METHOD: Method = Method {
    id: "crest.fork-polarity",
    name: "Fork polarity",
    question: "Which way along the crests did the sand go?",
    formula: "p = Σ_{P(i) ≤ P(k)} P(i),  P(i) = C(n, i)/2ⁿ",
    symbols: &[
        Symbol { symbol: "n", meaning: "forks with a clear stem", unit: "1" },
        Symbol { symbol: "k", meaning: "those that open toward the stated direction", unit: "1" },
    ],
    assumptions: &["forks are independent", "in linear dunes forks open upwind, the stem lies downwind"],
    limits: &["a clue, not proof: drainage and wakes behind obstacles fork too"],
    sources: &[Source {
        key: "ventifact-forks",
        authors: "this program",
        year: 2026,
        title: "Two-sided binomial test of fork polarity",
        published: "common practice in fields of linear dunes; the test is standard",
        locator: "",
        read: Read::Memory,
    }],
};

/// Forks by the way they open.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Forks {
    /// Opening toward the stated direction, and away from it.
    pub toward: usize,
    pub away: usize,
    /// Junctions whose stem is not clear: no pair of arms within 75°, or square to the direction.
    pub unclear: usize,
    /// Two-sided binomial p; 1 without clear forks.
    pub p: f64,
}

/// Cosine of the widest opening of a fork.
const OPEN: f64 = 0.259;

/// Cosine to the direction below which a fork opens neither way.
const ALONG: f64 = 0.5;

/// Two-sided exact binomial p of k in n with chance ½.
pub fn binomial_p(k: usize, n: usize) -> f64 {
    if n == 0 {
        return 1.0;
    }
    let chance = |i: usize| (ln_binomial(n as u64, i as u64) - n as f64 * 2f64.ln()).exp();
    let own = chance(k.min(n));
    (0..=n).map(chance).filter(|c| *c <= own * (1.0 + 1e-7)).sum::<f64>().min(1.0)
}

/// Forks of `junctions` that open toward and away from `direction`. Arms are looked at over `reach` ground
/// units.
pub fn forks(
    lines: &[CrestLine],
    junctions: &[Junction],
    frame: impl OnGround,
    direction: Azimuth,
    reach: f64,
) -> Forks {
    let (mut toward, mut away, mut unclear) = (0, 0, 0);
    let (de, dn) = direction.east_north();
    for junction in junctions.iter().filter(|j| j.branches.len() == 1) {
        match opening(lines, junction, frame.frame(junction.at), reach) {
            Some([e, n]) if (e * de + n * dn).abs() >= ALONG => {
                if e * de + n * dn > 0.0 {
                    toward += 1;
                } else {
                    away += 1;
                }
            }
            _ => unclear += 1,
        }
    }
    Forks { toward, away, unclear, p: binomial_p(toward, toward + away) }
}

/// The unit vector from the stem into the fork: the two arms that lie closest open it.
fn opening(lines: &[CrestLine], junction: &Junction, frame: LocalFrame, reach: f64) -> Option<[f64; 2]> {
    let at = on_ground(&[junction.at], &frame)[0];
    let (branch, end) = *junction.branches.first()?;
    let mut arms = Vec::new();
    let branch = on_ground(&lines.get(branch)?.line.0, &frame);
    arms.push(match end {
        0 => arm(at, branch.iter().copied(), reach)?,
        _ => arm(at, branch.iter().rev().copied(), reach)?,
    });
    let through = on_ground(&lines.get(junction.through)?.line.0, &frame);
    let (near, _) = through
        .iter()
        .enumerate()
        .map(|(i, p)| (i, p.distance(at)))
        .fold((0, f64::INFINITY), |best, next| if next.1 < best.1 { next } else { best });
    arms.push(arm(at, through[near..].iter().copied(), reach)?);
    arms.push(arm(at, through[..=near].iter().rev().copied(), reach)?);
    let dot = |a: [f64; 2], b: [f64; 2]| a[0] * b[0] + a[1] * b[1];
    let pairs = [(0, 1), (0, 2), (1, 2)];
    let (i, j) = pairs.into_iter().fold((0, 1), |best, next| {
        if dot(arms[next.0], arms[next.1]) > dot(arms[best.0], arms[best.1]) { next } else { best }
    });
    if dot(arms[i], arms[j]) < OPEN {
        return None;
    }
    let sum = [arms[i][0] + arms[j][0], arms[i][1] + arms[j][1]];
    let length = sum[0].hypot(sum[1]);
    Some([sum[0] / length, sum[1] / length])
}

/// Unit vector from `at` to where a way is `reach` off, or to its end.
fn arm(at: Point, way: impl Iterator<Item = Point>, reach: f64) -> Option<[f64; 2]> {
    let mut last = at;
    for p in way {
        last = p;
        if at.distance(p) >= reach {
            break;
        }
    }
    let d = at.distance(last);
    (d > 0.0).then(|| [(last.x - at.x) / d, (last.y - at.y) / d])
}
