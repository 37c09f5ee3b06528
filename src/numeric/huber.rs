//! Straight-line models of a few coefficients by least squares, made robust after Huber: residuals
//! beyond a few standard deviations count only in part.

use super::quantile::median;

/// Residuals beyond this many standard deviations are held there; 95 % efficient for normal noise.
pub const CLIP: f64 = 1.345;

/// Rounds of reweighting; each is a contraction, so more add nothing in print.
const ROUNDS: usize = 20;

/// A robust fit of `y` by rows · coefficients.
#[derive(Clone, Debug, PartialEq)]
pub struct Fit<const P: usize> {
    pub coefficients: [f64; P],
    /// Robust standard deviation of the residuals: 1.4826 × their median size.
    pub scale: f64,
    /// y − rows · coefficients.
    pub residuals: Vec<f64>,
}

/// Huber's estimate, the scale taken anew in each round; `None` when the rows do not tell the
/// coefficients apart.
pub fn huber<const P: usize>(rows: &[[f64; P]], y: &[f64]) -> Option<Fit<P>> {
    let mut coefficients = solve(rows, y, |_| 1.0)?;
    for _ in 0..ROUNDS {
        let residuals = residuals(rows, y, &coefficients);
        let scale = scale_of(&residuals);
        let next = solve(rows, y, |i| weight(residuals[i], scale))?;
        let moved = next.iter().zip(&coefficients).map(|(a, b)| (a - b).abs()).fold(0.0, f64::max);
        coefficients = next;
        if moved < 1e-10 {
            break;
        }
    }
    let residuals = residuals(rows, y, &coefficients);
    Some(Fit { coefficients, scale: scale_of(&residuals), residuals })
}

/// Huber's weight of a residual: 1 within [`CLIP`] scales, falling as 1/|e| beyond.
pub fn weight(residual: f64, scale: f64) -> f64 {
    let limit = CLIP * scale;
    if limit <= 0.0 || residual.abs() <= limit { 1.0 } else { limit / residual.abs() }
}

/// 1.4826 × the median size: the standard deviation of normal noise.
pub fn scale_of(residuals: &[f64]) -> f64 {
    let mut sizes: Vec<f64> = residuals.iter().map(|e| e.abs()).collect();
    if sizes.is_empty() { 0.0 } else { 1.4826 * median(&mut sizes) }
}

/// Weighted least squares; `None` when the rows do not tell the coefficients apart.
pub fn solve<const P: usize>(
    rows: &[[f64; P]],
    y: &[f64],
    weight: impl Fn(usize) -> f64,
) -> Option<[f64; P]> {
    let mut right = [0.0; P];
    let mut gram = [[0.0; P]; P];
    for (i, (row, y)) in rows.iter().zip(y).enumerate() {
        let w = weight(i);
        for a in 0..P {
            right[a] += w * row[a] * y;
            for b in 0..P {
                gram[a][b] += w * row[a] * row[b];
            }
        }
    }
    let inverse = inverse(gram)?;
    Some(times(&inverse, &right))
}

/// The inverse of a symmetric positive matrix by elimination with the largest pivot; `None` when it
/// is singular to rounding.
pub fn inverse<const P: usize>(mut m: [[f64; P]; P]) -> Option<[[f64; P]; P]> {
    let size = (0..P).map(|i| m[i][i].abs()).fold(0.0, f64::max);
    let mut out = [[0.0; P]; P];
    (0..P).for_each(|i| out[i][i] = 1.0);
    for col in 0..P {
        let pivot = (col..P).max_by(|a, b| m[*a][col].abs().total_cmp(&m[*b][col].abs()))?;
        if m[pivot][col].is_nan() || m[pivot][col].abs() <= 1e-12 * size {
            return None;
        }
        m.swap(col, pivot);
        out.swap(col, pivot);
        let by = 1.0 / m[col][col];
        for k in 0..P {
            m[col][k] *= by;
            out[col][k] *= by;
        }
        let (pivot_row, pivot_out) = (m[col], out[col]);
        for row in (0..P).filter(|row| *row != col) {
            let factor = m[row][col];
            for k in 0..P {
                m[row][k] -= factor * pivot_row[k];
                out[row][k] -= factor * pivot_out[k];
            }
        }
    }
    Some(out)
}

/// matrix · vector.
pub fn times<const P: usize>(matrix: &[[f64; P]; P], vector: &[f64; P]) -> [f64; P] {
    std::array::from_fn(|i| (0..P).map(|k| matrix[i][k] * vector[k]).sum())
}

/// a · b.
pub fn product<const P: usize>(a: &[[f64; P]; P], b: &[[f64; P]; P]) -> [[f64; P]; P] {
    std::array::from_fn(|i| std::array::from_fn(|j| (0..P).map(|k| a[i][k] * b[k][j]).sum()))
}

fn residuals<const P: usize>(rows: &[[f64; P]], y: &[f64], coefficients: &[f64; P]) -> Vec<f64> {
    let model = |row: &[f64; P]| row.iter().zip(coefficients).map(|(x, c)| x * c).sum::<f64>();
    rows.iter().zip(y).map(|(row, y)| y - model(row)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn a_wild_value_hardly_moves_the_line() {
        let rows: Vec<[f64; 2]> = (0..40).map(|i| [1.0, f64::from(i) / 10.0]).collect();
        let mut y: Vec<f64> = rows
            .iter()
            .enumerate()
            .map(|(i, r)| 2.0 - 0.5 * r[1] + 0.01 * ((i * 7 % 5) as f64 - 2.0))
            .collect();
        y[3] += 50.0;
        let plain = solve(&rows, &y, |_| 1.0).unwrap();
        let fit = huber(&rows, &y).unwrap();
        assert!((plain[0] - 2.0).abs() > 1.0, "least squares is pulled: {plain:?}");
        assert_close!(fit.coefficients[0], 2.0, 0.01, "intercept");
        assert_close!(fit.coefficients[1], -0.5, 0.01, "slope");
    }

    #[test]
    fn an_inverse_times_its_matrix_is_one() {
        let m = [[4.0, 1.0, 0.5], [1.0, 3.0, -0.2], [0.5, -0.2, 1.0]];
        let one = product(&m, &inverse(m).unwrap());
        for (i, row) in one.iter().enumerate() {
            for (j, x) in row.iter().enumerate() {
                assert_close!(*x, if i == j { 1.0 } else { 0.0 }, 1e-12, "({i}, {j})");
            }
        }
        assert!(inverse([[1.0, 2.0], [2.0, 4.0]]).is_none());
    }
}
