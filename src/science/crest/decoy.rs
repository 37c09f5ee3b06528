//! How sure a line is: lines of the wrong sense, traced in the same picture by the same rules, show what its
//! texture makes of nothing.

use std::collections::HashMap;

use crate::ground::{Method, Point, Read, Source, Symbol};

/// The record of a line's confidence.
pub static METHOD: Method = Method {
    id: "crest.confidence",
    name: "Confidence of a crest line by lines of the wrong sense",
    question: "How likely is a line of this evidence to be a crest and no texture?",
    formula: "x = ln(∫ s dl/(high σ));  π(x) = 1/(1 + e^(−a−bx)), b ≥ 0, the share of right lines among right and wrong ones;  confidence = 1 − (1 − π)/π, at least 0",
    symbols: &[
        Symbol {
            symbol: "s", meaning: "response along the line, 0 on bridges", unit: "tone/px or tone/px²"
        },
        Symbol { symbol: "high", meaning: "the starting threshold", unit: "as s" },
        Symbol { symbol: "σ", meaning: "scale of the derivatives", unit: "px" },
        Symbol { symbol: "a, b", meaning: "coefficients of a logistic regression on x", unit: "1" },
    ],
    assumptions: &[
        "texture makes lines of the right and of the wrong sense alike (slopes that face away, ridges of the other sign)",
        "crests make lines of the right sense only",
    ],
    limits: &[
        "where no model stands out, both senses belong to the pattern: then only pixel noise counts as the alternative, and texture may be taken for crests",
        "streaks, roads and shores of the right sense count as crests",
        "a line part crest and part texture counts as what most of it is",
        "wrong lines within 4σ (slip faces 6σ) of right ones are their shoulders and troughs, and do not count; the others count more by the ground so left out",
        "one line of the wrong sense is always added at the weakest line, so that few lines are never certain",
    ],
    sources: &[Source {
        key: "elias2007",
        authors: "Elias, J. E.; Gygi, S. P.",
        year: 2007,
        title: "Target-decoy search strategy for increased confidence in large-scale protein identifications by mass spectrometry",
        published: "Nature Methods 4, 207",
        locator: "counting false finds by a search that can find only false ones",
        read: Read::Memory,
    }],
};

/// Wrong lines within so many scales of right ones are their shoulders: of ridges the troughs beside them, of slip
/// faces the slopes that rise to them.
const SHOULDER: [f64; 2] = [4.0, 6.0];

/// Most times a wrong line counts for ground where none was sought.
const MOST_WEIGHT: f64 = 10.0;

/// Prior variance of the slope b: keeps it finite where right and wrong lines do not overlap.
const SLOPE_VARIANCE: f64 = 9.0;

/// Rounds of the fit; it converges in far fewer.
const ROUNDS: usize = 50;

/// Points near lines, by square cells.
pub(super) struct Shoulders {
    cells: HashMap<(i64, i64), Vec<Point>>,
    reach: f64,
    /// Times a wrong line counts.
    pub weight: f64,
}

impl Shoulders {
    /// Around the points of right lines of a total length, traced at a scale in so many cells.
    pub fn of(
        points: impl Iterator<Item = Point>,
        length: f64,
        sigma: f64,
        slip_face: bool,
        searched: usize,
    ) -> Self {
        let reach = SHOULDER[usize::from(slip_face)] * sigma;
        let mut cells: HashMap<(i64, i64), Vec<Point>> = HashMap::new();
        for p in points {
            cells.entry(Self::cell(p, reach)).or_default().push(p);
        }
        let left = 1.0 - 2.0 * reach * length / (searched as f64).max(1.0);
        Self { cells, reach, weight: 1.0 / left.max(1.0 / MOST_WEIGHT) }
    }

    fn cell(p: Point, side: f64) -> (i64, i64) {
        ((p.x / side).floor() as i64, (p.y / side).floor() as i64)
    }

    /// Whether a point lies on one.
    pub fn hold(&self, p: Point) -> bool {
        let (cx, cy) = Self::cell(p, self.reach);
        (-1..=1).flat_map(|dx| (-1..=1).map(move |dy| (cx + dx, cy + dy))).any(|key| {
            self.cells.get(&key).is_some_and(|points| points.iter().any(|q| q.distance(p) <= self.reach))
        })
    }
}

/// The chance of being a crest against the evidence of a line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Chance {
    a: f64,
    b: f64,
    /// Weakest evidence seen: weaker lines are no surer.
    least: f64,
}

impl Chance {
    /// From the evidence ∫ s dl/(high σ) of lines of the right sense and of the wrong one.
    /// Each of the wrong ones counts `weight` times, for the ground where none was sought.
    pub fn of(right: &[f64], wrong: &[f64], weight: f64) -> Self {
        let rights = right.iter().map(|e| (log(*e), 1.0, 1.0));
        let mut seen: Vec<(f64, f64, f64)> =
            rights.chain(wrong.iter().map(|e| (log(*e), 0.0, weight))).collect();
        let least = right.iter().map(|e| log(*e)).fold(f64::INFINITY, f64::min);
        if !least.is_finite() {
            return Self { a: 0.0, b: 0.0, least: 0.0 };
        }
        seen.push((least, 0.0, 1.0));
        let (mut a, mut b) = (0.0f64, 0.0f64);
        // Newton's steps for the logistic likelihood with a normal prior on b.
        for _ in 0..ROUNDS {
            let (mut ga, mut gb) = (0.0, -b / SLOPE_VARIANCE);
            let (mut haa, mut hab, mut hbb) = (1e-9, 0.0, 1.0 / SLOPE_VARIANCE);
            for (x, y, n) in &seen {
                let x = x - least;
                let p = 1.0 / (1.0 + (-a - b * x).exp());
                let w = n * p * (1.0 - p);
                ga += n * (y - p);
                gb += n * (y - p) * x;
                haa += w;
                hab += w * x;
                hbb += w * x * x;
            }
            let det = haa * hbb - hab * hab;
            if det.abs() < 1e-12 {
                break;
            }
            let (da, db) = ((hbb * ga - hab * gb) / det, (haa * gb - hab * ga) / det);
            // A long step overshoots where lines hardly overlap.
            let short = (4.0 / da.abs().max(db.abs()).max(4.0)).min(1.0);
            (a, b) = (a + short * da, b + short * db);
            if da.abs().max(db.abs()) < 1e-9 {
                break;
            }
        }
        if b < 0.0 {
            let (n, m) = (right.len() as f64, weight * wrong.len() as f64 + 1.0);
            (a, b) = ((n / m).ln(), 0.0);
        }
        Self { a, b, least }
    }

    /// Confidence of a line: 1 − (1 − π)/π = 1 − e^(−a−bx).
    pub fn at(&self, evidence: f64) -> f64 {
        let x = (log(evidence) - self.least).max(0.0);
        (1.0 - (-self.a - self.b * x).exp()).clamp(0.0, 1.0)
    }
}

fn log(evidence: f64) -> f64 {
    evidence.max(1e-6).ln()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Where right lines are twice as many as wrong ones at every evidence, half of them are texture.
    #[test]
    fn alike_in_evidence_leaves_the_share_by_number() {
        let right: Vec<f64> = (0..4000).map(|i| 8.0 + f64::from(i % 100)).collect();
        let wrong: Vec<f64> = (0..2000).map(|i| 8.0 + f64::from(i % 100)).collect();
        let chance = Chance::of(&right, &wrong, 1.0);
        for evidence in [10.0, 40.0, 100.0] {
            crate::assert_close!(chance.at(evidence), 0.5, 0.01, "confidence at {evidence}");
        }
    }

    #[test]
    fn more_evidence_is_never_less_sure_and_nothing_is_certain() {
        let chance = Chance::of(&[8.0, 9.0, 20.0, 60.0, 90.0], &[8.0, 10.0], 1.0);
        let all: Vec<f64> = (1..200).map(|e| chance.at(f64::from(e))).collect();
        assert!(all.windows(2).all(|w| w[1] >= w[0]));
        assert!(all[0] < 0.5 && all[150] > 0.9 && all[150] < 1.0, "{} {}", all[0], all[150]);
        assert_eq!(Chance::of(&[], &[3.0], 1.0).at(5.0), 0.0);
        // One line alone is no surer than the one that is always added against it.
        assert!(Chance::of(&[10.0], &[], 1.0).at(10.0) < 0.1);
    }
}
