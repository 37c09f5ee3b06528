//! Tapers for spectra, and the plane taken out beneath them.

/// The periodic Hann taper ½(1 − cos 2πi/n), i = 0 … n − 1.
pub fn hann(n: usize) -> Vec<f64> {
    (0..n).map(|i| 0.5 - 0.5 * (2.0 * std::f64::consts::PI * i as f64 / n as f64).cos()).collect()
}

/// Correlation of the power of two Hann-tapered windows of `n` samples shifted by `shift`, for white
/// noise: (Σ w(i) w(i + shift) / Σ w²)². 1 for no shift, 1/36 for half a window.
pub fn hann_overlap(n: usize, shift: usize) -> f64 {
    let w = hann(n);
    if shift >= n {
        return 0.0;
    }
    let cross: f64 = w[shift..].iter().zip(&w).map(|(a, b)| a * b).sum();
    let square: f64 = w.iter().map(|a| a * a).sum();
    (cross / square).powi(2)
}

/// v ≈ level + per_col·(col − centre) + per_row·(row − centre), centre = half the window.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Plane {
    pub level: f64,
    pub per_col: f64,
    pub per_row: f64,
}

impl Plane {
    /// Least squares over a window of `tapers[0].len()` columns, each cell weighted by the product of
    /// the tapers; `value` gives `None` for missing cells. With too few cells for a slope only
    /// the level is fitted; `None` without any.
    pub fn fit(tapers: [&[f64]; 2], value: impl Fn(usize, usize) -> Option<f64>) -> Option<Self> {
        let (half_c, half_r) = (0.5 * tapers[0].len() as f64, 0.5 * tapers[1].len() as f64);
        // Normal equations of (1, x, y), x and y scaled to about ±1.
        let mut m = [[0.0f64; 3]; 3];
        let mut b = [0.0f64; 3];
        for (row, wr) in tapers[1].iter().enumerate() {
            let y = (row as f64 - half_r) / half_r;
            let (mut s, mut sx, mut sxx, mut v0, mut v1) = (0.0, 0.0, 0.0, 0.0, 0.0);
            for (col, wc) in tapers[0].iter().enumerate() {
                if let Some(v) = value(col, row) {
                    let x = (col as f64 - half_c) / half_c;
                    let w = wc * wr;
                    s += w;
                    sx += w * x;
                    sxx += w * x * x;
                    v0 += w * v;
                    v1 += w * x * v;
                }
            }
            m[0][0] += s;
            m[0][1] += sx;
            m[0][2] += y * s;
            m[1][1] += sxx;
            m[1][2] += y * sx;
            m[2][2] += y * y * s;
            b[0] += v0;
            b[1] += v1;
            b[2] += y * v0;
        }
        if m[0][0] <= 0.0 {
            return None;
        }
        m[1][0] = m[0][1];
        m[2][0] = m[0][2];
        m[2][1] = m[1][2];
        let [level, x, y] = solve3(m, b).unwrap_or([b[0] / m[0][0], 0.0, 0.0]);
        Some(Self { level, per_col: x / half_c, per_row: y / half_r })
    }

    /// Height of the plane at a cell of a window of the given size.
    pub fn at(self, col: usize, row: usize, size: [usize; 2]) -> f64 {
        self.level
            + self.per_col * (col as f64 - 0.5 * size[0] as f64)
            + self.per_row * (row as f64 - 0.5 * size[1] as f64)
    }
}

/// Solves a symmetric positive 3×3 system by elimination; `None` when it is nearly singular.
fn solve3(mut m: [[f64; 3]; 3], mut b: [f64; 3]) -> Option<[f64; 3]> {
    let scale = m[0][0];
    for i in 0..3 {
        if m[i][i] <= 1e-9 * scale {
            return None;
        }
        for j in i + 1..3 {
            let f = m[j][i] / m[i][i];
            let pivot = m[i];
            for (cell, p) in m[j].iter_mut().zip(pivot).skip(i) {
                *cell -= f * p;
            }
            b[j] -= f * b[i];
        }
    }
    let z = b[2] / m[2][2];
    let y = (b[1] - m[1][2] * z) / m[1][1];
    Some([(b[0] - m[0][1] * y - m[0][2] * z) / m[0][0], y, z])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_plane_with_holes_is_recovered() {
        let taper = [hann(20), hann(14)];
        let truth = Plane { level: 7.0, per_col: 0.3, per_row: -1.1 };
        let got = Plane::fit([&taper[0], &taper[1]], |c, r| {
            ((c * 5 + r * 3) % 4 != 0).then(|| truth.at(c, r, [20, 14]))
        })
        .unwrap();
        crate::assert_close!(got.level, truth.level, 1e-9, "level");
        crate::assert_close!(got.per_col, truth.per_col, 1e-9, "column slope");
        crate::assert_close!(got.per_row, truth.per_row, 1e-9, "row slope");
    }

    #[test]
    fn half_overlapping_windows_share_a_thirty_sixth_of_their_power() {
        crate::assert_close!(hann_overlap(64, 32), 1.0 / 36.0, 1e-12, "half overlap");
        crate::assert_close!(hann_overlap(64, 0), 1.0, 1e-12, "same window");
    }

    #[test]
    fn one_column_of_cells_gives_a_level() {
        let taper = hann(8);
        let plane = Plane::fit([&taper, &taper], |c, _| (c == 3).then_some(2.0)).unwrap();
        crate::assert_close!(plane.level, 2.0, 1e-12, "level");
        assert_eq!(plane.per_col, 0.0);
    }
}
