//! Which population holds which ground: textures of several bands on one lattice.

use crate::ground::{Bounds, Point};

/// Texture of one population at its nodes, ground units.
pub(super) struct Layer {
    pub nodes: Vec<(Point, f64)>,
    pub step: f64,
}

/// All of them on the lattice of the coarsest, each in units of its own typical strength.
pub(super) struct Layers {
    /// By cell, then by layer; only cells every layer could be measured at.
    cells: Vec<Vec<f64>>,
    count: usize,
}

/// Strength, in units of the typical one, from which a population counts as present.
const PRESENT: f64 = 0.25;

impl Layers {
    pub fn of(layers: &[Layer]) -> Self {
        let count = layers.len();
        let bounds = Bounds::of(layers.iter().flat_map(|l| l.nodes.iter().map(|(p, _)| *p)));
        let cell = layers.iter().map(|l| l.step).fold(0.0, f64::max);
        let Some(bounds) = bounds.filter(|_| cell > 0.0) else { return Self { cells: Vec::new(), count } };
        let size = |length: f64| (length / cell).floor() as usize + 1;
        let (cols, rows) = (size(bounds.width()), size(bounds.height()));
        let mut sums = vec![vec![[0.0f64; 2]; cols * rows]; count];
        for (sum, layer) in sums.iter_mut().zip(layers) {
            for (p, texture) in &layer.nodes {
                let col = ((p.x - bounds.min.x) / cell) as usize;
                let row = ((p.y - bounds.min.y) / cell) as usize;
                let s = &mut sum[row.min(rows - 1) * cols + col.min(cols - 1)];
                s[0] += texture;
                s[1] += 1.0;
            }
        }
        // Finer layers are smoothed as the coarsest is by its own integration.
        let means: Vec<Vec<Option<f64>>> = sums
            .iter()
            .zip(layers)
            .map(|(sum, layer)| if layer.step < 0.75 * cell { smooth(sum, cols, rows) } else { plain(sum) })
            .collect();
        // The coarsest loses most at the edge: what it is there is taken from its nearest places, lest ground at the
        // edge count for the fine ones alone or for none.
        let held: Vec<bool> = (0..cols * rows).map(|i| means.iter().any(|m| m[i].is_some())).collect();
        let means: Vec<Vec<Option<f64>>> = means.into_iter().map(|m| extended(m, cols, rows)).collect();
        let mut cells: Vec<Vec<f64>> = (0..cols * rows)
            .filter(|i| held[*i])
            .filter_map(|i| means.iter().map(|m| m[i]).collect::<Option<Vec<f64>>>())
            .collect();
        for layer in 0..count {
            let (sum, square) =
                cells.iter().fold((0.0, 0.0), |(s, q), c| (s + c[layer], q + c[layer] * c[layer]));
            let typical = if sum > 0.0 { square / sum } else { 1.0 };
            cells.iter_mut().for_each(|c| c[layer] /= typical);
        }
        Self { cells, count }
    }

    /// Ground both hold over the ground of the lesser.
    pub fn overlap(&self, a: usize, b: usize) -> f64 {
        let held = |i: usize| self.cells.iter().filter(|c| c[i] >= PRESENT).count();
        let both = self.cells.iter().filter(|c| c[a] >= PRESENT && c[b] >= PRESENT).count();
        both as f64 / held(a).min(held(b)).max(1) as f64
    }

    /// Share of cells in which each is the stronger; all sum to 1.
    pub fn shares(&self) -> Vec<f64> {
        let mut counts = vec![0.0; self.count];
        for cell in self.cells.iter().filter(|c| c.iter().any(|v| *v >= PRESENT)) {
            let strongest = (0..self.count).max_by(|a, b| cell[*a].total_cmp(&cell[*b])).unwrap_or(0);
            counts[strongest] += 1.0;
        }
        let all: f64 = counts.iter().sum();
        counts.iter().map(|c| if all > 0.0 { c / all } else { 1.0 / self.count.max(1) as f64 }).collect()
    }
}

/// Cells filled from the edge of what was measured outward.
const FILLED: usize = 8;

/// Missing cells take the mean of their neighbours, ring by ring.
fn extended(mut cells: Vec<Option<f64>>, cols: usize, rows: usize) -> Vec<Option<f64>> {
    for _ in 0..FILLED {
        let before = cells.clone();
        for (i, cell) in cells.iter_mut().enumerate().filter(|(_, cell)| cell.is_none()) {
            let (col, row) = (i % cols, i / cols);
            let (mut sum, mut count) = (0.0, 0.0);
            for r in row.saturating_sub(1)..(row + 2).min(rows) {
                for value in before[r * cols..][col.saturating_sub(1)..(col + 2).min(cols)].iter().flatten() {
                    sum += value;
                    count += 1.0;
                }
            }
            if count > 0.0 {
                *cell = Some(sum / count);
            }
        }
    }
    cells
}

fn plain(sums: &[[f64; 2]]) -> Vec<Option<f64>> {
    sums.iter().map(|[s, n]| (*n > 0.0).then(|| s / n)).collect()
}

/// Means over the neighbourhood under a Gaussian of one cell.
fn smooth(sums: &[[f64; 2]], cols: usize, rows: usize) -> Vec<Option<f64>> {
    let mut out = Vec::with_capacity(sums.len());
    for row in 0..rows {
        for col in 0..cols {
            let (mut sum, mut weight) = (0.0, 0.0);
            for r in row.saturating_sub(2)..(row + 3).min(rows) {
                for c in col.saturating_sub(2)..(col + 3).min(cols) {
                    let square = (r as f64 - row as f64).powi(2) + (c as f64 - col as f64).powi(2);
                    let w = (-0.5 * square).exp();
                    sum += w * sums[r * cols + c][0];
                    weight += w * sums[r * cols + c][1];
                }
            }
            out.push((sums[row * cols + col][1] > 0.0 && weight > 0.0).then(|| sum / weight));
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    fn layer(step: f64, texture: impl Fn(Point) -> f64) -> Layer {
        let count = (60.0 / step) as usize;
        let at = |i: usize| Point::new(step * (i % count) as f64, step * (i / count) as f64);
        Layer { nodes: (0..count * count).map(|i| (at(i), texture(at(i)))).collect(), step }
    }

    #[test]
    fn halves_and_overlays_are_told_apart() {
        let left = layer(1.0, |p| if p.x < 39.0 { 3.0 } else { 0.0 });
        let right = layer(3.0, |p| if p.x < 39.0 { 0.0 } else { 0.1 });
        let beside = Layers::of(&[left, right]);
        assert!(beside.overlap(0, 1) < 0.2);
        crate::assert_close!(beside.shares()[0], 0.65, 0.05, "share of ground");
        let over = Layers::of(&[layer(1.0, |_| 3.0), layer(3.0, |p| if p.x < 39.0 { 0.0 } else { 0.1 })]);
        assert!(over.overlap(0, 1) > 0.9);
        assert_eq!(Layers::of(&[]).shares(), Vec::<f64>::new());
    }
}
