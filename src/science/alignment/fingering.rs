//! The fingering rule: the way a dune's end extends over bare ground.

use std::f64::consts::PI;

use crate::ground::{Azimuth, Method, Read, SandFlow, Source};
use crate::numeric::harmonics::Harmonics;

use super::bed_instability::{COURRECH, SYMBOLS};

/// The fingering rule.
pub const METHOD: Method = Method {
    id: "alignment.fingering",
    name: "Fingering",
    question: "Which way do dunes extend where there is little sand?",
    formula: "Q⊥(α) = Σ qᵢ (1 + Γ |sin(θᵢ − α)|) sin(θᵢ − α) = 0  with  Q∥(α) = Σ qᵢ (1 + Γ |sin(θᵢ − α)|) cos(θᵢ − α) > 0",
    symbols: SYMBOLS,
    assumptions: &[
        "Starved ground that does not erode",
        "The crest's sand moves along it when both sides balance",
    ],
    limits: &["With three or more winds several directions may balance; all are kept, the strongest first"],
    sources: &[
        COURRECH,
        Source {
            key: "parteli2009",
            authors: "Parteli, E. J. R.; Durán, O.; Tsoar, H.; Schwämmle, V.; Herrmann, H. J.",
            year: 2009,
            title: "Dune formation under bimodal winds",
            published: "Proceedings of the National Academy of Sciences 106, 22085–22089",
            locator: "",
            read: Read::Abstract,
        },
    ],
};

/// A direction of extension: unlike the other rules it has a sense.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Finger {
    pub toward: Azimuth,
    /// Q∥, in the unit of the flows.
    pub along: f64,
}

/// Net transport across (positive toward the right of a crest seen along its azimuth) and along a
/// crest of azimuth `crest`: Q⊥ and Q∥, in the unit of the flows.
pub fn crest_transport(flows: &[SandFlow], flux_up: f64, crest: Azimuth) -> (f64, f64) {
    let alpha = crest.rad();
    flows.iter().fold((0.0, 0.0), |(across, along), flow| {
        let (s, c) = (flow.toward.rad() - alpha).sin_cos();
        let q = flow.weight * (1.0 + flux_up * s.abs());
        (across + q * s, along + q * c)
    })
}

/// Fingers closer than this, degrees, are one.
const SAME_DEG: f64 = 1e-6;

/// All directions in which crests extend, the strongest first; empty without flow, or when nothing
/// is left along any balanced crest. Takes n log n steps for n flows.
pub fn fingering(flows: &[SandFlow], flux_up: f64) -> Vec<Finger> {
    // A flow folded into [0°, 180°) pulls the other way when it came from the far half.
    let mut folded: Vec<Folded> = flows.iter().filter(|f| f.weight > 0.0).map(Folded::of).collect();
    if folded.is_empty() {
        return Vec::new();
    }
    folded.sort_by(|a, b| a.theta.total_cmp(&b.theta).then(a.pull.total_cmp(&b.pull)));
    let total: f64 = folded.iter().map(|f| f.pull.abs()).sum();
    let (x, y) = folded.iter().fold((0.0, 0.0), |(x, y), f| (x + f.one.0, y + f.one.1));
    let mut rest = folded.iter().fold(Lifted::default(), |sum, f| sum.plus(f, 1.0));

    // Q⊥ and Q∥ both change sign when the crest is turned end for end, so half a turn holds all
    // balances, and the sense follows from Q∥. Sector by sector, from the last flow's azimuth less
    // 180° to the first, then on; in each Q⊥ is a wave with one overtone.
    let nothing = 1e-13 * total * (1.0 + flux_up);
    let mut from = folded[folded.len() - 1].theta - PI;
    let (mut fingers, mut roots): (Vec<Finger>, Vec<f64>) = (Vec::new(), Vec::new());
    for flow in &folded {
        let across = Harmonics {
            mean: 0.5 * flux_up * rest.sum,
            one: (y, -x),
            two: (-0.5 * flux_up * rest.cos, -0.5 * flux_up * rest.sin),
        };
        roots.clear();
        across.roots(from, flow.theta, nothing, &mut roots);
        for root in &roots {
            let ((s, c), (s2, c2)) = (root.sin_cos(), (2.0 * root).sin_cos());
            let along = x * c + y * s + 0.5 * flux_up * (rest.sin * c2 - rest.cos * s2);
            let sense = Azimuth::from_deg(root.to_degrees());
            let toward = if along > 0.0 { sense } else { sense.reversed() };
            let known = fingers.iter().any(|f| f.toward.turn_from(toward).abs() < SAME_DEG);
            if along.abs() > 1e-9 * total && !known {
                fingers.push(Finger { toward, along: along.abs() });
            }
        }
        rest = rest.plus(flow, -2.0);
        from = flow.theta;
    }
    fingers
        .sort_by(|a, b| b.along.total_cmp(&a.along).then_with(|| a.toward.deg().total_cmp(&b.toward.deg())));
    fingers
}

/// A flow turned into [0, π): its pull is negative when it was turned.
struct Folded {
    theta: f64,
    pull: f64,
    /// Pull times (cos θ, sin θ): the flow itself, turned or not.
    one: (f64, f64),
    /// Pull times (cos 2θ, sin 2θ).
    two: (f64, f64),
}

impl Folded {
    fn of(flow: &SandFlow) -> Self {
        let theta = flow.toward.axis().rad();
        let pull = if flow.toward.deg() < 180.0 { flow.weight } else { -flow.weight };
        let ((s, c), (s2, c2)) = (theta.sin_cos(), (2.0 * theta).sin_cos());
        Self { theta, pull, one: (pull * c, pull * s), two: (pull * c2, pull * s2) }
    }
}

/// Σ s q and Σ s q e^{2iθ} with the signs s of sin(θ − α): what the flux-up ratio multiplies.
#[derive(Clone, Copy, Default)]
struct Lifted {
    sum: f64,
    cos: f64,
    sin: f64,
}

impl Lifted {
    fn plus(self, flow: &Folded, times: f64) -> Self {
        Self {
            sum: self.sum + times * flow.pull,
            cos: self.cos + times * flow.two.0,
            sin: self.sin + times * flow.two.1,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn flows(winds: &[(f64, f64)]) -> Vec<SandFlow> {
        winds.iter().map(|&(deg, weight)| SandFlow { toward: Azimuth::from_deg(deg), weight }).collect()
    }

    #[test]
    fn one_wind_extends_its_own_way() {
        let found = fingering(&flows(&[(250.0, 3.0)]), 1.6);
        assert_eq!(found.len(), 1);
        crate::assert_close!(found[0].toward.deg(), 250.0, 1e-8, "toward");
        crate::assert_close!(found[0].along, 3.0, 1e-9, "along");
    }

    #[test]
    fn no_flow_has_no_finger() {
        assert!(fingering(&[], 1.6).is_empty());
    }

    proptest! {
        #[test]
        fn balances_are_real_and_turn_with_the_winds(turn in 0.0..360.0f64, winds in prop::collection::vec((0.0..360.0f64, 0.1..5.0f64), 1..6)) {
            let turned: Vec<(f64, f64)> = winds.iter().map(|(d, q)| (d + turn, *q)).collect();
            let (a, b) = (fingering(&flows(&winds), 1.6), fingering(&flows(&turned), 1.6));
            let total: f64 = winds.iter().map(|w| w.1).sum();
            for finger in &a {
                let (across, along) = crest_transport(&flows(&winds), 1.6, finger.toward);
                prop_assert!(across.abs() < 1e-8 * total && along > 0.0);
            }
            if let (Some(p), Some(q)) = (a.first(), b.first()) && a.get(1).is_none_or(|s| s.along < 0.9 * p.along) {
                prop_assert!(q.toward.rotated(-turn).turn_from(p.toward).abs() < 1e-6);
            }
        }
    }
}
