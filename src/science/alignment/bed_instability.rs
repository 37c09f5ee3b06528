//! The bed-instability rule: the trend that grows fastest on a sand bed, with sand speeding up over crests.

use std::f64::consts::PI;

use crate::ground::{Axis, Method, Read, SandFlow, Source, Symbol};
use crate::numeric::harmonics::Harmonics;

/// The bed-instability rule.
pub const METHOD: Method = Method {
    id: "alignment.bed-instability",
    name: "Bed instability",
    question: "Which trend grows fastest where sand covers the ground?",
    formula: "σ(α) ∝ Σ qᵢ (1 + Γ |sin(θᵢ − α)|) |sin(θᵢ − α)|,  α = argmax σ;  between neighbouring θᵢ mod 180° \
              σ = Im(z e^{−iα}) + ½Γ (Q − Re(w e^{−2iα})), z = Σ sᵢ qᵢ e^{iθᵢ}, w = Σ qᵢ e^{2iθᵢ}",
    symbols: SYMBOLS,
    assumptions: &["Full sand cover", "Flux over a crest is 1 + Γ |sin| times that over flat ground"],
    limits: &[
        "Γ is 1.5 to 2 by source; with Γ = 0 the rule is that of gross bedform-normal transport",
        "Trends whose growth agrees to one part in 10⁹ tie, and all are given",
        "Linear stability in all directions (Gadal et al. 2019), by which the spacing changes too, is left out: its \
         coefficients could not be read",
    ],
    sources: &[
        COURRECH,
        Source {
            key: "gao2015",
            authors: "Gao, X.; Narteau, C.; Rozier, O.; Courrech du Pont, S.",
            year: 2015,
            title: "Phase diagrams of dune shape and orientation depending on sand availability",
            published: "Scientific Reports 5, 14677",
            locator: "",
            read: Read::Abstract,
        },
    ],
};

/// The source of both modes.
pub(super) const COURRECH: Source = Source {
    key: "courrechdupont2014",
    authors: "Courrech du Pont, S.; Narteau, C.; Gao, X.",
    year: 2014,
    title: "Two modes for dune orientation",
    published: "Geology 42, 743–746",
    locator: "",
    read: Read::Memory,
};

pub(super) const SYMBOLS: &[Symbol] = &[
    Symbol { symbol: "α", meaning: "trend", unit: "deg" },
    Symbol {
        symbol: "qᵢ, θᵢ", meaning: "flow over flat ground and its azimuth toward", unit: "any, deg"
    },
    Symbol { symbol: "Γ", meaning: "flux-up ratio: gain of flux over a crest", unit: "1" },
];

/// Flux-up ratio that fits numerical dunes best (Gao et al. 2015).
pub const FLUX_UP: f64 = 1.6;

/// The trend of fastest growth.
#[derive(Clone, Debug, PartialEq)]
pub struct BedInstability {
    /// Of several that tie, the one with the smallest azimuth.
    pub axis: Axis,
    pub ties: Vec<Axis>,
    /// σ at the trend, in the unit of the flows.
    pub growth: f64,
}

/// Growth σ of the trend `axis`.
pub fn growth(flows: &[SandFlow], flux_up: f64, axis: Axis) -> f64 {
    flows
        .iter()
        .map(|f| {
            let s = (f.toward.rad() - axis.rad()).sin().abs();
            f.weight * (1.0 + flux_up * s) * s
        })
        .sum()
}

/// Values of σ closer than this share tie.
const TIE: f64 = 1e-9;
/// Trends closer than this, degrees, are one.
const SAME_DEG: f64 = 1e-5;

/// The trend that grows fastest; `None` without flow.
pub fn bed_instability(flows: &[SandFlow], flux_up: f64) -> Option<BedInstability> {
    let mut folded: Vec<(f64, f64)> =
        flows.iter().filter(|f| f.weight > 0.0).map(|f| (f.toward.axis().rad(), f.weight)).collect();
    if folded.is_empty() {
        return None;
    }
    folded.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1)));
    let total: f64 = folded.iter().map(|f| f.1).sum();
    let double = |&(theta, q): &(f64, f64)| (q * (2.0 * theta).cos(), q * (2.0 * theta).sin());
    let (wx, wy) = folded.iter().map(double).fold((0.0, 0.0), |(x, y), (a, b)| (x + a, y + b));
    let single = |&(theta, q): &(f64, f64)| (q * theta.cos(), q * theta.sin());
    let (mut x, mut y) = folded.iter().map(single).fold((0.0, 0.0), |(x, y), (a, b)| (x + a, y + b));

    // Sector by sector, from the last flow's azimuth less 180° to the first, then on. A kink of |sin|
    // points down, so every maximum lies inside a sector, at a root of the slope.
    let nothing = 1e-14 * total * (1.0 + flux_up);
    let mut from = folded[folded.len() - 1].0 - PI;
    let (mut greatest, mut maxima, mut roots) = (0.0f64, Vec::new(), Vec::new());
    for flow in &folded {
        let to = flow.0;
        let growth = Harmonics {
            mean: 0.5 * flux_up * total,
            one: (y, -x),
            two: (-0.5 * flux_up * wx, -0.5 * flux_up * wy),
        };
        let slope = growth.derivative();
        let (middle, half) = (0.5 * (from + to), 0.5 * (to - from));
        let reach =
            growth.at(middle) + slope.at(middle).abs() * half + 0.5 * growth.curvature_bound() * half * half;
        if half > 0.0 && reach >= greatest * (1.0 - 2.0 * TIE) {
            roots.clear();
            slope.roots(from, to, nothing, &mut roots);
            for peak in &roots {
                let value = growth.at(*peak);
                greatest = greatest.max(value);
                maxima.push((value, *peak));
            }
        }
        let (a, b) = single(flow);
        x -= 2.0 * a;
        y -= 2.0 * b;
        from = to;
    }
    let mut axes: Vec<Axis> = Vec::new();
    for (_, peak) in maxima.iter().filter(|m| m.0 >= greatest * (1.0 - TIE)) {
        let axis = Axis::from_deg(peak.to_degrees());
        if axes.iter().all(|a| a.separation(axis) > SAME_DEG) {
            axes.push(axis);
        }
    }
    axes.sort_by(|a, b| a.deg().total_cmp(&b.deg()));
    let axis = *axes.first()?;
    Some(BedInstability { axis, ties: axes.split_off(1), growth: greatest })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Azimuth;
    use crate::science::alignment::gross_normal::gross_normal;
    use proptest::prelude::*;

    fn flows(winds: &[(f64, f64)]) -> Vec<SandFlow> {
        winds.iter().map(|&(deg, weight)| SandFlow { toward: Azimuth::from_deg(deg), weight }).collect()
    }

    proptest! {
        #[test]
        fn it_equals_brute_force(flux_up in 0.0..3.0f64, winds in prop::collection::vec((0.0..360.0f64, 0.01..5.0f64), 1..12)) {
            let list = flows(&winds);
            let found = bed_instability(&list, flux_up).expect("flow");
            let best = (0..1800).map(|k| growth(&list, flux_up, Axis::from_deg(0.1 * f64::from(k)))).fold(0.0, f64::max);
            prop_assert!(found.growth >= best * (1.0 - 1e-12) && found.growth <= best * (1.0 + 1e-4));
            prop_assert!((growth(&list, flux_up, found.axis) - found.growth).abs() < 1e-9 * best);
        }

        #[test]
        fn without_flux_up_it_is_gross_transport(winds in prop::collection::vec((0.0..360.0f64, 0.01..5.0f64), 1..12)) {
            let list = flows(&winds);
            let (a, b) = (bed_instability(&list, 0.0).expect("flow"), gross_normal(&list).expect("flow"));
            prop_assert!((a.growth - b.greatest).abs() < 1e-9 * b.greatest);
        }
    }
}
