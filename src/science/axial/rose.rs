//! Equal-area roses of axes.

use crate::ground::{Axis, Method, Symbol};

use super::sources::FISHER;

pub static METHOD: Method = Method {
    id: "axial.rose",
    name: "Equal-area rose",
    question: "How are the axes distributed, to the eye?",
    formula: "r ∝ √(Σw in bin); each petal drawn at θ and θ + 180°",
    symbols: &[
        Symbol { symbol: "r", meaning: "petal radius, so that its area is its share", unit: "1" },
        Symbol { symbol: "θ", meaning: "axis, bin edges at multiples of the bin width", unit: "deg" },
    ],
    assumptions: &[],
    limits: &["Every axis appears twice: a two-sided rose is symmetric by drawing, not by nature."],
    sources: &[FISHER],
};

/// The share of weight in each bin of `bin_deg` degrees from axis 0°, summing to 1 (all 0 for no
/// weight). The number of bins is 180/`bin_deg` rounded, so that they tile the half circle.
pub fn rose(axes: &[Axis], weights: Option<&[f64]>, bin_deg: f64) -> Vec<f64> {
    let bins = (180.0 / bin_deg).round().max(1.0) as usize;
    let mut shares = vec![0.0; bins];
    let mut all = 0.0;
    for (i, axis) in axes.iter().enumerate() {
        let w = weights.map_or(1.0, |w| w[i]);
        // A sliver of rounding must not move an axis that stands on an edge to the bin below.
        let bin = (axis.deg() / 180.0 * bins as f64 + 1e-9) as usize;
        shares[bin % bins] += w;
        all += w;
    }
    if all > 0.0 {
        shares.iter_mut().for_each(|s| *s /= all);
    }
    shares
}

/// Petal radii ∝ √share, the longest 1.
pub fn radii(shares: &[f64]) -> Vec<f64> {
    let most = shares.iter().copied().fold(0.0, f64::max);
    shares.iter().map(|s| if most > 0.0 { (s / most).sqrt() } else { 0.0 }).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn area_not_radius_carries_the_share() {
        let axes = [10.0, 11.0, 12.0, 13.0, 40.0].map(Axis::from_deg);
        let shares = rose(&axes, None, 10.0);
        assert_eq!((shares[1], shares[4], shares.len()), (0.8, 0.2, 18));
        let radii = radii(&shares);
        assert_eq!((radii[1], radii[4], radii[0]), (1.0, 0.5, 0.0));
    }

    #[test]
    fn an_axis_on_an_edge_belongs_to_the_bin_above() {
        for k in 0..18u8 {
            let shares = rose(&[Axis::from_deg(f64::from(k) * 10.0)], None, 10.0);
            assert_eq!(shares[usize::from(k)], 1.0, "edge {k}");
        }
    }
}
