//! The fingering rule: the way a dune's end extends over bare ground.

use crate::ground::{Azimuth, Method, Read, SandFlow, Source};
use crate::numeric::root::brent;

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

/// Transport across and along a crest of azimuth `deg`.
fn crest_transport(flows: &[SandFlow], flux_up: f64, deg: f64) -> (f64, f64) {
    let alpha = deg.to_radians();
    flows.iter().fold((0.0, 0.0), |(across, along), flow| {
        let (s, c) = (flow.toward.rad() - alpha).sin_cos();
        let q = flow.weight * (1.0 + flux_up * s.abs());
        (across + q * s, along + q * c)
    })
}

/// All directions in which crests extend, the strongest first; empty without flow, or when nothing
/// is left along any balanced crest.
pub fn fingering(flows: &[SandFlow], flux_up: f64) -> Vec<Finger> {
    let total: f64 = flows.iter().map(|f| f.weight).sum();
    if total <= 0.0 {
        return Vec::new();
    }
    let across = |deg: f64| crest_transport(flows, flux_up, deg).0;
    // Q⊥ and Q∥ both change sign when the crest is turned end for end, so half a turn holds all
    // balances, and the sense follows from Q∥. Half-degree steps see every pair of balances that
    // lie farther apart; the grid stands off whole degrees, on which rounded winds balance exactly.
    let start = -0.123_456_789;
    let mut fingers: Vec<Finger> = Vec::new();
    let mut before = across(start);
    for k in 1..=360 {
        let (a, b) = (start + 0.5 * f64::from(k - 1), start + 0.5 * f64::from(k));
        let after = across(b);
        if before == 0.0 || (before > 0.0) != (after > 0.0) && after != 0.0 {
            let root = brent(across, a, b, 1e-11).unwrap_or(a);
            let along = crest_transport(flows, flux_up, root).1;
            if along.abs() > 1e-9 * total {
                let sense = Azimuth::from_deg(root);
                let toward = if along > 0.0 { sense } else { sense.reversed() };
                fingers.push(Finger { toward, along: along.abs() });
            }
        }
        before = after;
    }
    fingers.sort_by(|a, b| b.along.total_cmp(&a.along));
    fingers
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
                let (across, along) = crest_transport(&flows(&winds), 1.6, finger.toward.deg());
                prop_assert!(across.abs() < 1e-8 * total && along > 0.0);
            }
            if let (Some(p), Some(q)) = (a.first(), b.first()) && a.get(1).is_none_or(|s| s.along < 0.9 * p.along) {
                prop_assert!(q.toward.rotated(-turn).turn_from(p.toward).abs() < 1e-6);
            }
        }
    }
}
