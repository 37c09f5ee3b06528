//! Symmetric 2×2 matrices: eigenvalues and the direction of the larger one.

/// The matrix [xx, xy; xy, yy].
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Symmetric2 {
    pub xx: f64,
    pub xy: f64,
    pub yy: f64,
}

impl Symmetric2 {
    pub fn trace(self) -> f64 {
        self.xx + self.yy
    }

    pub fn determinant(self) -> f64 {
        self.xx * self.yy - self.xy * self.xy
    }

    /// λ₁ − λ₂ = √((xx − yy)² + 4 xy²), ≥ 0.
    pub fn gap(self) -> f64 {
        (self.xx - self.yy).hypot(2.0 * self.xy)
    }

    /// (larger, smaller) eigenvalue.
    pub fn eigenvalues(self) -> (f64, f64) {
        let (mean, half) = (0.5 * self.trace(), 0.5 * self.gap());
        (mean + half, mean - half)
    }

    /// Unit eigenvector of the larger eigenvalue, x ≥ 0; (1, 0) when the eigenvalues are equal.
    pub fn major(self) -> (f64, f64) {
        let angle = 0.5 * (2.0 * self.xy).atan2(self.xx - self.yy);
        (angle.cos(), angle.sin())
    }

    /// A J Aᵀ for the row-major 2×2 matrix A.
    pub fn congruent(self, a: [[f64; 2]; 2]) -> Self {
        let form = |p: [f64; 2], q: [f64; 2]| {
            p[0] * (self.xx * q[0] + self.xy * q[1]) + p[1] * (self.xy * q[0] + self.yy * q[1])
        };
        Self { xx: form(a[0], a[0]), xy: form(a[0], a[1]), yy: form(a[1], a[1]) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn the_major_vector_is_an_eigenvector(xx in -5.0..5.0f64, xy in -5.0..5.0f64, yy in -5.0..5.0f64) {
            let m = Symmetric2 { xx, xy, yy };
            let (large, small) = m.eigenvalues();
            let (x, y) = m.major();
            prop_assert!((xx * x + xy * y - large * x).abs() < 1e-9);
            prop_assert!((xy * x + yy * y - large * y).abs() < 1e-9);
            prop_assert!((large * small - m.determinant()).abs() < 1e-9);
        }

        #[test]
        fn turning_a_matrix_turns_its_major_vector(t in -1.5..1.5f64, gap in 0.1..3.0f64) {
            let (s, c) = t.sin_cos();
            let turned = Symmetric2 { xx: 1.0 + gap, xy: 0.0, yy: 1.0 }.congruent([[c, -s], [s, c]]);
            let (x, y) = turned.major();
            prop_assert!((x * s - y * c).abs() < 1e-9, "major ({x}, {y}) against turn {t}");
            prop_assert!((turned.gap() - gap).abs() < 1e-9);
        }
    }
}
