//! On which side of an outcrop bedforms are missing: the only trace of the sense of the wind.

use crate::ground::{Axis, Azimuth, Method, Read, Source, Symbol};

use super::field::{Field, Node};
use super::flow::Flow;
use super::obliquity::Annulus;
use super::outline::Ellipse;
use super::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "obstacle.dipole",
    name: "Dipole of presence round an outcrop",
    question: "On which side of the outcrop are bedforms missing, and so from where may the wind have come?",
    formula: "m₁ = Σ wₖ e^{iϕₖ} / Σ wₖ over four sectors of ± 30° about ϕₖ = 0, 90, 180, 270° from the crest axis; wₖ mean presence of the nodes in a sector",
    symbols: &[
        Symbol { symbol: "ϕₖ", meaning: "bearing of a sector from the crest axis", unit: "rad" },
        Symbol {
            symbol: "wₖ",
            meaning: "mean over all nodes of a sector: coherence where the noise floor is passed, else 0",
            unit: "1",
        },
    ],
    assumptions: &["Without the outcrop bedforms would be as many on every side."],
    limits: &[
        "Sand piles up before an outcrop and is kept out of its lee, but echo dunes and gaps in cover do the like: a dipole along the crest axis hints at a wind along the crests, across it at one across them.",
        "Its p comes from the same outcrop set down elsewhere; without that it is a picture only.",
    ],
    sources: &[
        Source {
            key: "tsoar1983",
            authors: "Tsoar, H.",
            year: 1983,
            title: "Wind tunnel modeling of echo and climbing dunes",
            published: "Eolian Sediments and Processes, Elsevier, 247–259",
            locator: "",
            read: Read::Memory,
        },
        at(DERIVED, "sector means, so that uneven cover does not count"),
    ],
};

/// The dipole of presence.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dipole {
    /// Mean presence along the crest axis, to its left, against it, to its right (counter-clockwise).
    pub sectors: [f64; 4],
    /// |m₁|, in [0, 1].
    pub size: f64,
    /// The side with more bedforms, in the plane of the nodes.
    pub toward: Azimuth,
}

const HALF_WIDTH: f64 = std::f64::consts::PI / 6.0;
/// A sector needs this many nodes.
const LEAST_IN_SECTOR: usize = 3;

impl Dipole {
    /// Angle of the dipole from the crest axis, degrees in [0, 90].
    pub fn from_crest_deg(&self, crest: Axis) -> f64 {
        self.toward.axis().separation(crest)
    }
}

/// The dipole in an outcrop's annulus; `None` where a sector has too few nodes or no bedform stands in
/// any.
pub fn dipole(field: &Field, outcrop: &Ellipse, annulus: &Annulus) -> Option<Dipole> {
    let flow = Flow::round(*outcrop);
    let mut sums = [(0.0, 0usize); 4];
    for node in &field.nodes {
        let r = flow.radii(node.at);
        if r < annulus.inner || r > annulus.outer {
            continue;
        }
        if let Some(sector) = sector(node, outcrop, field.crest_turn()) {
            sums[sector].0 += node.presence;
            sums[sector].1 += 1;
        }
    }
    if sums.iter().any(|(_, count)| *count < LEAST_IN_SECTOR) {
        return None;
    }
    let w = sums.map(|(sum, count)| sum / count as f64);
    let all: f64 = w.iter().sum();
    if all.is_nan() || all <= 0.0 {
        return None;
    }
    let (along, left) = ((w[0] - w[2]) / all, (w[1] - w[3]) / all);
    let bearing = field.crest_turn() + left.atan2(along);
    let (sin, cos) = bearing.sin_cos();
    Some(Dipole { sectors: w, size: along.hypot(left), toward: Azimuth::from_east_north(cos, sin) })
}

/// Which of the four sectors a node stands in; `None` between them.
fn sector(node: &Node, outcrop: &Ellipse, crest_turn: f64) -> Option<usize> {
    const QUARTER: f64 = std::f64::consts::FRAC_PI_2;
    let bearing = (node.at.y - outcrop.centre.y).atan2(node.at.x - outcrop.centre.x) - crest_turn;
    let nearest = (bearing / QUARTER).round();
    ((bearing - nearest * QUARTER).abs() <= HALF_WIDTH).then(|| nearest.rem_euclid(4.0) as usize % 4)
}
