//! Quantiles of a sample.

/// The `p`-quantile (p in [0, 1]) of numbers sorted ascending: linear between order statistics at
/// (n − 1)p (type 7 of Hyndman and Fan). NaN for no numbers.
pub fn of_sorted(sorted: &[f64], p: f64) -> f64 {
    let Some(last) = sorted.len().checked_sub(1) else { return f64::NAN };
    let at = last as f64 * p.clamp(0.0, 1.0);
    let below = at.floor() as usize;
    let above = (below + 1).min(last);
    sorted[below] + (at - below as f64) * (sorted[above] - sorted[below])
}

/// The quantiles at `ps`, sorting `numbers` in place.
pub fn of<const N: usize>(numbers: &mut [f64], ps: [f64; N]) -> [f64; N] {
    numbers.sort_unstable_by(f64::total_cmp);
    ps.map(|p| of_sorted(numbers, p))
}

/// The median, sorting `numbers` in place.
pub fn median(numbers: &mut [f64]) -> f64 {
    of(numbers, [0.5])[0]
}

/// The smallest value whose cumulative weight reaches the share `p` of all weight. Repeating a value
/// and doubling its weight are the same. NaN for no weight.
pub fn weighted(numbers: &[f64], weights: &[f64], p: f64) -> f64 {
    let mut pairs: Vec<(f64, f64)> =
        numbers.iter().copied().zip(weights.iter().copied()).filter(|(_, w)| *w > 0.0).collect();
    pairs.sort_unstable_by(|a, b| a.0.total_cmp(&b.0));
    let all: f64 = pairs.iter().map(|(_, w)| w).sum();
    let mut below = 0.0;
    for (x, w) in &pairs {
        below += w;
        if below >= p * all * (1.0 - 1e-12) {
            return *x;
        }
    }
    pairs.last().map_or(f64::NAN, |(x, _)| *x)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn between_order_statistics() {
        assert_eq!(of(&mut [4.0, 1.0, 3.0, 2.0], [0.0, 0.5, 1.0, 0.25]), [1.0, 2.5, 4.0, 1.75]);
        assert!(median(&mut []).is_nan());
    }

    #[test]
    fn a_weight_of_two_is_a_row_repeated() {
        let once = weighted(&[3.0, 1.0, 2.0], &[1.0, 2.0, 2.0], 0.5);
        let rows = weighted(&[3.0, 1.0, 1.0, 2.0, 2.0], &[1.0; 5], 0.5);
        assert_eq!((once, rows), (2.0, 2.0));
    }
}
