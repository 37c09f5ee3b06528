//! Whether two trends of one band hold ground of their own, or alternate as the limbs of winding crests do.

use crate::ground::{Bounds, Point};

/// Radius of the neighbourhood that tells ground held from ground alternating, in node spacings: three wavelengths
/// of the band.
const RADIUS: f64 = 6.0;
/// Cells of the lattice to a radius, and how far the Gaussian is carried.
const CELLS: f64 = 3.0;
const REACH: usize = 6;

/// V: share of the variance of d that is left when d is averaged over neighbourhoods of three wavelengths, where
/// d = (r₁ − r₂)/(r₁ + r₂) at each place; near 0 where the two alternate or mix, near 1 where each holds ground much
/// wider. `places` gives position, r₁ and r₂; 0 where there is nothing to tell.
pub(super) fn held_apart(places: &[(Point, f64, f64)], spacing: f64) -> f64 {
    let own: Vec<(Point, f64, f64)> = places
        .iter()
        .filter(|(_, a, b)| a + b > 0.0)
        .map(|(p, a, b)| (*p, a + b, (a - b) / (a + b)))
        .collect();
    let cell = spacing * RADIUS / CELLS;
    let Some(bounds) = Bounds::of(own.iter().map(|(p, ..)| *p)).filter(|_| cell > 0.0) else { return 0.0 };
    let size = |length: f64| (length / cell).floor() as usize + 1;
    let (cols, rows) = (size(bounds.width()), size(bounds.height()));
    let mut sums = vec![[0.0f64; 2]; cols * rows];
    let (mut all, mut first, mut second) = (0.0, 0.0, 0.0);
    for (p, w, d) in &own {
        let col = (((p.x - bounds.min.x) / cell) as usize).min(cols - 1);
        let row = (((p.y - bounds.min.y) / cell) as usize).min(rows - 1);
        sums[row * cols + col][0] += w * d;
        sums[row * cols + col][1] += w;
        all += w;
        first += w * d;
        second += w * d * d;
    }
    let whole = second / all - (first / all).powi(2);
    let smoothed = along(&along(&sums, cols, rows, true), cols, rows, false);
    let mean = |i: usize| smoothed[i][0] / smoothed[i][1].max(f64::MIN_POSITIVE);
    let (mut first, mut second) = (0.0, 0.0);
    for (i, [_, w]) in sums.iter().enumerate() {
        first += w * mean(i);
        second += w * mean(i).powi(2);
    }
    let left = second / all - (first / all).powi(2);
    if whole > 0.0 { left / whole } else { 0.0 }
}

/// Sums under a Gaussian along rows or columns.
fn along(sums: &[[f64; 2]], cols: usize, rows: usize, row_wise: bool) -> Vec<[f64; 2]> {
    let (length, step) = if row_wise { (cols, 1) } else { (rows, cols) };
    let mut out = vec![[0.0; 2]; sums.len()];
    for (i, out) in out.iter_mut().enumerate() {
        let at = if row_wise { i % cols } else { i / cols };
        for near in at.saturating_sub(REACH)..(at + REACH + 1).min(length) {
            let w = (-0.5 * (near.abs_diff(at) as f64 / CELLS).powi(2)).exp();
            let from = sums[i + near * step - at * step];
            out[0] += w * from[0];
            out[1] += w * from[1];
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    fn places(first: impl Fn(Point) -> bool) -> Vec<(Point, f64, f64)> {
        let at = |i: usize| Point::new((i % 60) as f64, (i / 60) as f64);
        let one = |p: Point| if first(p) { (p, 0.9, 0.1) } else { (p, 0.1, 0.9) };
        (0..3600).map(|i| one(at(i))).collect()
    }

    #[test]
    fn areas_hold_ground_and_limbs_alternate() {
        let areas = held_apart(&places(|p| p.x < 39.0), 1.0);
        let limbs = held_apart(&places(|p| (p.x / 8.0).floor() % 2.0 == 0.0), 1.0);
        assert!(areas > 0.6, "areas {areas}");
        assert!(limbs < 0.1, "limbs {limbs}");
        assert_eq!(held_apart(&[], 1.0), 0.0);
    }
}
