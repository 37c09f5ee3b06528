//! Numbers at the nodes of an incomplete square lattice, and the sums of their products at a lag.

/// The shape of a lattice: a box of cells, each row with the span of columns that hold anything.
#[derive(Clone, Debug)]
pub struct Lattice {
    width: usize,
    height: usize,
    spans: Vec<(usize, usize)>,
}

impl Lattice {
    /// The lattice of the cells (column, row) that hold something.
    pub fn of(cells: &[(usize, usize)]) -> Self {
        let width = cells.iter().map(|c| c.0 + 1).max().unwrap_or(0);
        let height = cells.iter().map(|c| c.1 + 1).max().unwrap_or(0);
        let mut spans = vec![(usize::MAX, 0); height];
        for (col, row) in cells {
            let span = &mut spans[*row];
            *span = (span.0.min(*col), span.1.max(col + 1));
        }
        Self { width, height, spans }
    }

    /// Adds each value into its cell.
    pub fn spread(&self, cells: &[(usize, usize)], values: impl Iterator<Item = f64>) -> Vec<f64> {
        let mut field = vec![0.0; self.width * self.height];
        for ((col, row), value) in cells.iter().zip(values) {
            field[row * self.width + col] += value;
        }
        field
    }

    /// Σ f(x, y) f(x + right, y + down) over the lattice, `down` ≥ 0.
    pub fn product(&self, field: &[f64], right: isize, down: usize) -> f64 {
        (0..self.height.saturating_sub(down)).map(|row| self.row_product(field, row, right, down)).sum()
    }

    fn row_product(&self, field: &[f64], row: usize, right: isize, down: usize) -> f64 {
        let (here, there) = (self.spans[row], self.spans[row + down]);
        if here.1 == 0 || there.1 == 0 {
            return 0.0;
        }
        let shifted = |col: usize| col as isize - right;
        let from = (here.0 as isize).max(shifted(there.0));
        let to = (here.1 as isize).min(shifted(there.1));
        if from >= to {
            return 0.0;
        }
        let start = row * self.width;
        let other = ((row + down) * self.width) as isize + right;
        let length = (to - from) as usize;
        let a = &field[start + from as usize..][..length];
        let b = &field[(other + from) as usize..][..length];
        dot(a, b)
    }
}

/// Σ ab in eight running sums: a fixed order the compiler can do in wide registers.
fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; 8];
    let (a8, a_rest) = a.as_chunks::<8>();
    let (b8, b_rest) = b.as_chunks::<8>();
    for (x, y) in a8.iter().zip(b8) {
        for k in 0..8 {
            sums[k] += x[k] * y[k];
        }
    }
    let rest: f64 = a_rest.iter().zip(b_rest).map(|(x, y)| x * y).sum();
    sums.iter().sum::<f64>() + rest
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn lag_products_are_the_sum_over_pairs(
            nodes in prop::collection::btree_map((0usize..25, 0usize..9), -1.0..1.0f64, 1..90),
            right in -8isize..9, down in 0usize..6,
        ) {
            let cells: Vec<_> = nodes.keys().copied().collect();
            let lattice = Lattice::of(&cells);
            let field = lattice.spread(&cells, nodes.values().copied());
            let mut want = 0.0;
            for ((col, row), value) in &nodes {
                let other = (*col as isize + right, row + down);
                if other.0 >= 0 && let Some(v) = nodes.get(&(other.0 as usize, other.1)) {
                    want += value * v;
                }
            }
            assert_close!(lattice.product(&field, right, down), want, 1e-12, "lag {right}, {down}");
        }
    }
}
