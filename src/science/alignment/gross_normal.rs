//! Gross bedform-normal transport: the trend across which most sand passes, both ways counted.

use crate::ground::{Axis, Method, Read, SandFlow, Source, Symbol};

/// The gross bedform-normal rule.
pub const METHOD: Method = Method {
    id: "alignment.gross-normal",
    name: "Maximum gross bedform-normal transport",
    question: "Which trend makes most sand cross the crests, whatever side it comes from?",
    formula: "T(α) = Σ qᵢ |sin(θᵢ − α)|,  α = argmax T;  exact: between neighbouring θᵢ mod 180° the signs sᵢ stand still, \
              so T = Im(z e^{−iα}) with z = Σ sᵢ qᵢ e^{iθᵢ}, and α = arg z − 90° for the longest z",
    symbols: &[
        Symbol { symbol: "T", meaning: "gross transport across a trend", unit: "unit of q" },
        Symbol { symbol: "α", meaning: "trend", unit: "deg" },
        Symbol { symbol: "qᵢ, θᵢ", meaning: "flow and its azimuth toward", unit: "any, deg" },
    ],
    assumptions: &["Full sand cover", "Crest-normal transport builds bedforms, whichever way it goes"],
    limits: &[
        "Two winds at 90° give two trends that tie",
        "Two winds less than 90° apart always give the trend across their resultant",
        "Flat maxima (low alignment strength) give a trend without meaning",
    ],
    sources: &[
        RUBIN,
        Source {
            key: "ventifact-sectors",
            authors: "Ventifact",
            year: 2026,
            title: "Exact search by sectors of constant sign",
            published: "derived here; equals brute force",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// The source of the rule.
pub(super) const RUBIN: Source = Source {
    key: "rubin1987",
    authors: "Rubin, D. M.; Hunter, R. E.",
    year: 1987,
    title: "Bedform alignment in directionally varying flows",
    published: "Science 237, 276–278",
    locator: "",
    read: Read::Memory,
};

/// The maximum of gross transport.
#[derive(Clone, Debug, PartialEq)]
pub struct GrossNormal {
    /// The trend; of several that tie, the one with the smallest azimuth.
    pub axis: Axis,
    /// Other trends with the same transport.
    pub ties: Vec<Axis>,
    /// T at the trend, in the unit of the flows.
    pub greatest: f64,
    /// Least T over all trends.
    pub least: f64,
}

impl GrossNormal {
    /// Alignment strength (T_max − T_min)/(T_max + T_min): 1 for one wind, 0 when no trend is better
    /// than another.
    pub fn strength(&self) -> f64 {
        (self.greatest - self.least) / (self.greatest + self.least)
    }
}

/// Values of T closer than this share tie.
const TIE: f64 = 1e-9;
/// Trends closer than this, degrees, are one.
const SAME_DEG: f64 = 1e-6;

/// Gross transport across the trend `axis`.
pub fn transport_across(flows: &[SandFlow], axis: Axis) -> f64 {
    flows.iter().map(|f| f.weight * (f.toward.rad() - axis.rad()).sin().abs()).sum()
}

/// The trend of greatest gross transport; `None` without flow. Takes n log n steps for n flows.
pub fn gross_normal(flows: &[SandFlow]) -> Option<GrossNormal> {
    // |sin(θ − α)| is the same for θ and θ + 180°, so all flows go into [0°, 180°).
    let mut folded: Vec<(f64, f64)> =
        flows.iter().filter(|f| f.weight > 0.0).map(|f| (f.toward.axis().rad(), f.weight)).collect();
    if folded.is_empty() {
        return None;
    }
    folded.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1)));
    // α between flow k−1 and flow k: sin(θ − α) > 0 for flows from k on, < 0 for those before.
    // Here "x" is cos θ and "y" is sin θ of the azimuth itself.
    let vector = |&(theta, q): &(f64, f64)| (q * theta.cos(), q * theta.sin());
    let (mut x, mut y) = folded.iter().map(vector).fold((0.0, 0.0), |(x, y), (a, b)| (x + a, y + b));
    let mut candidates = Vec::with_capacity(folded.len());
    let mut least = f64::INFINITY;
    for flow in &folded {
        candidates.push((f64::hypot(x, y), y.atan2(x)));
        // T is concave between the flows' own azimuths, so its least value stands on one of them.
        let theta = flow.0;
        least = least.min((y * theta.cos() - x * theta.sin()).max(0.0));
        let (a, b) = vector(flow);
        x -= 2.0 * a;
        y -= 2.0 * b;
    }
    let greatest = candidates.iter().map(|c| c.0).fold(0.0, f64::max);
    let mut axes: Vec<Axis> = Vec::new();
    for (_, argument) in candidates.iter().filter(|c| c.0 >= greatest * (1.0 - TIE)) {
        let axis = Axis::from_deg(argument.to_degrees() - 90.0);
        if axes.iter().all(|a| a.separation(axis) > SAME_DEG) {
            axes.push(axis);
        }
    }
    axes.sort_by(|a, b| a.deg().total_cmp(&b.deg()));
    let axis = axes.remove(0);
    Some(GrossNormal { axis, ties: axes, greatest, least })
}

/// The obliquity of the trend to the resultant for two winds of strength ratio `n` ≥ 1 that
/// diverge by `divergence` degrees in (0, 180): 90° below 90°, and tan φ = (N² − 1)/(2 N sin γ) above.
pub fn two_wind_obliquity(n: f64, divergence: f64) -> f64 {
    if divergence < 90.0 {
        return 90.0;
    }
    (n * n - 1.0).atan2(2.0 * n * divergence.to_radians().sin()).to_degrees()
}

/// The strength ratio of two winds that diverge by `divergence` ≥ 90° and give the obliquity
/// `obliquity`, both in degrees: N = t + √(t² + 1), t = sin γ tan φ.
pub fn two_wind_ratio(obliquity: f64, divergence: f64) -> f64 {
    let t = divergence.to_radians().sin() * obliquity.to_radians().tan();
    t + (t * t + 1.0).sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Azimuth;
    use proptest::prelude::*;

    fn flows(winds: &[(f64, f64)]) -> Vec<SandFlow> {
        winds.iter().map(|&(deg, weight)| SandFlow { toward: Azimuth::from_deg(deg), weight }).collect()
    }

    #[test]
    fn no_flow_gives_no_trend() {
        assert_eq!(gross_normal(&[]), None);
        assert_eq!(gross_normal(&flows(&[(20.0, 0.0)])), None);
    }

    #[test]
    fn one_wind_gives_the_trend_across_it_with_full_strength() {
        let found = gross_normal(&flows(&[(30.0, 2.0)])).expect("a trend");
        crate::assert_close!(found.axis.deg(), 120.0, 1e-9, "trend");
        crate::assert_close!(found.strength(), 1.0, 1e-12, "strength");
    }

    #[test]
    fn equal_winds_at_right_angles_tie() {
        let found = gross_normal(&flows(&[(0.0, 2.0), (90.0, 1.0)])).expect("a trend");
        assert_eq!(found.ties.len(), 1);
        crate::assert_close!(found.axis.deg(), 63.434_948_82, 1e-6, "first");
        crate::assert_close!(found.ties[0].deg(), 116.565_051_18, 1e-6, "second");
    }

    proptest! {
        #[test]
        fn it_equals_brute_force(winds in prop::collection::vec((0.0..360.0f64, 0.01..5.0f64), 1..12)) {
            let list = flows(&winds);
            let found = gross_normal(&list).expect("flow");
            let on_grid = (0..1800).map(|k| transport_across(&list, Axis::from_deg(0.1 * f64::from(k))));
            let (low, high) = on_grid.fold((f64::INFINITY, 0.0f64), |(l, h), t| (l.min(t), h.max(t)));
            prop_assert!(found.greatest >= high * (1.0 - 1e-12) && found.greatest <= high * (1.0 + 1e-5));
            prop_assert!(found.least <= low * (1.0 + 1e-9) + 1e-12);
            let total: f64 = winds.iter().map(|w| w.1).sum();
            prop_assert!(found.least >= low - 0.002 * total);
            prop_assert!((transport_across(&list, found.axis) - found.greatest).abs() < 1e-9 * total);
            for tie in &found.ties {
                prop_assert!((transport_across(&list, *tie) - found.greatest).abs() < 1e-8 * total);
            }
        }

        #[test]
        fn turning_the_winds_turns_the_trend(turn in 0.0..360.0f64, winds in prop::collection::vec((0.0..360.0f64, 0.01..5.0f64), 1..12)) {
            let turned: Vec<(f64, f64)> = winds.iter().map(|(d, q)| (d + turn, *q)).collect();
            let (a, b) = (gross_normal(&flows(&winds)).expect("flow"), gross_normal(&flows(&turned)).expect("flow"));
            prop_assert!((a.strength() - b.strength()).abs() < 1e-9);
            let near = b.ties.iter().chain([&b.axis]).any(|x| x.separation(a.axis.rotated(turn)) < 1e-4);
            prop_assert!(near);
        }

        #[test]
        fn weights_are_repeated_flows(winds in prop::collection::vec((0.0..360.0f64, 1usize..4), 1..8)) {
            let weighted: Vec<(f64, f64)> = winds.iter().map(|(d, k)| (*d, *k as f64)).collect();
            let repeated: Vec<(f64, f64)> = winds.iter().flat_map(|(d, k)| std::iter::repeat_n((*d, 1.0), *k)).collect();
            let (a, b) = (gross_normal(&flows(&weighted)).expect("flow"), gross_normal(&flows(&repeated)).expect("flow"));
            prop_assert!((a.greatest - b.greatest).abs() < 1e-9 && (a.least - b.least).abs() < 1e-9);
        }
    }
}
