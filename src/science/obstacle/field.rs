//! The trend field about outcrops, and what of it a test looks at.

use crate::ground::{Axis, Point};
use crate::science::axial::mean::Resultant;

use super::correlation::Correlation;
use super::flow::Flow;
use super::outline::Ellipse;

/// A place where the trend was measured.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Node {
    /// Ground plane, x east and y north.
    pub at: Point,
    /// In that plane: clockwise from its y axis.
    pub axis: Axis,
    /// Passed the noise floor; only then its axis counts.
    pub significant: bool,
    /// How much bedform stands here, ≥ 0; 0 where none was found.
    pub presence: f64,
}

/// The nodes of a patch outside every outcrop, and the regional trend away from all of them.
#[derive(Clone, Debug)]
pub struct Field {
    pub nodes: Vec<Node>,
    /// Mean axis of the significant nodes beyond every annulus.
    pub crest: Axis,
    /// R̄ of their doubled angles.
    pub strength: f64,
    /// Standard error of `crest`, degrees; from the correlation of the residuals.
    pub crest_se_deg: f64,
    pub correlation: Correlation,
    /// Nodes `crest` and `correlation` rest on.
    pub regional: usize,
    /// The annuli left too little ground: `crest` and `correlation` are of all nodes.
    pub crowded: bool,
}

/// The least number of regional nodes a crest axis is taken from.
const LEAST_REGIONAL: usize = 30;

impl Field {
    /// `outcrops` are all that stand on the ground, `outer` the annulus' outer radius in radii. Nodes
    /// inside an outcrop are dropped by the caller. `None` without a significant node or without any
    /// preferred axis.
    pub fn of(nodes: Vec<Node>, outcrops: &[Ellipse], outer: f64) -> Option<Self> {
        let flows: Vec<Flow> = outcrops.iter().map(|o| Flow::round(*o)).collect();
        let beyond = |n: &&Node| flows.iter().all(|f| f.radii(n.at) > outer);
        let passed = || nodes.iter().filter(|n| n.significant);
        let mut regional: Vec<&Node> = passed().filter(beyond).collect();
        let crowded = regional.len() < LEAST_REGIONAL;
        if crowded {
            regional = passed().collect();
        }
        let doubled: Vec<f64> = regional.iter().map(|n| n.axis.doubled()).collect();
        let resultant = Resultant::of(&doubled, None);
        let strength = resultant.mean_length();
        if regional.is_empty() || strength.is_nan() || strength <= 0.0 {
            return None;
        }
        let crest = Axis::from_doubled(resultant.direction());
        let places: Vec<Point> = regional.iter().map(|n| n.at).collect();
        let residuals: Vec<f64> = regional.iter().map(|n| residual(n.axis, crest)).collect();
        let widest = outcrops.iter().map(|o| 2.0 * outer * o.radius()).fold(0.0, f64::max);
        let (correlation, mean) = Correlation::fit(&residuals, &places, widest);
        let variance = residuals.iter().map(|e| e * e).sum::<f64>() / residuals.len() as f64;
        let crest_se_deg = (variance * mean).sqrt().to_degrees();
        let regional = regional.len();
        Some(Self { nodes, crest, strength, crest_se_deg, correlation, regional, crowded })
    }

    /// The crest axis as an angle counter-clockwise from east, radians.
    pub fn crest_turn(&self) -> f64 {
        std::f64::consts::FRAC_PI_2 - self.crest.rad()
    }
}

/// How far an axis lies from the crest axis, COUNTER-clockwise, radians in (−π/2, π/2]: the doubled angle is
/// wrapped and halved.
pub fn residual(axis: Axis, crest: Axis) -> f64 {
    -axis.turn_from(crest).to_radians()
}
