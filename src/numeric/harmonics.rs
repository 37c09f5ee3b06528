//! A constant, a wave and its first overtone: values, slopes, and every root in an interval.

use super::root::brent;

/// mean + c₁ cos x + s₁ sin x + c₂ cos 2x + s₂ sin 2x, with `one` = (c₁, s₁) and `two` = (c₂, s₂).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Harmonics {
    pub mean: f64,
    pub one: (f64, f64),
    pub two: (f64, f64),
}

/// Two roots closer than about this (radians) count as one.
const RESOLVED: f64 = 1e-9;

impl Harmonics {
    /// The value at `x` radians.
    pub fn at(&self, x: f64) -> f64 {
        let (s, c) = x.sin_cos();
        self.mean + self.one.0 * c + self.one.1 * s + self.two.0 * (c * c - s * s) + self.two.1 * 2.0 * s * c
    }

    /// The slope as a function of x.
    pub fn derivative(&self) -> Self {
        Self { mean: 0.0, one: (self.one.1, -self.one.0), two: (2.0 * self.two.1, -2.0 * self.two.0) }
    }

    /// A bound on the curvature anywhere.
    pub fn curvature_bound(&self) -> f64 {
        f64::hypot(self.one.0, self.one.1) + 4.0 * f64::hypot(self.two.0, self.two.1)
    }

    /// Adds every root in [from, to] to `roots`: values within `nothing` of zero at the ends of the
    /// interval are roots, and the function is nil where it never exceeds `nothing`.
    ///
    /// Taylor's theorem decides: an interval of half width h about m holds no root while
    /// |f(m)| > |f′(m)| h + ½ M h², at most one while |f′(m)| > M h, with M the bound on |f″|. What
    /// neither decides is halved, so no pair of roots slips through however close it lies.
    pub fn roots(&self, from: f64, to: f64, nothing: f64, roots: &mut Vec<f64>) {
        let size = self.mean.abs() + f64::hypot(self.one.0, self.one.1) + f64::hypot(self.two.0, self.two.1);
        if size <= nothing || to < from {
            return;
        }
        let slope = self.derivative();
        self.roots_within(&slope, from, to, nothing, roots);
    }

    fn roots_within(&self, slope: &Self, from: f64, to: f64, nothing: f64, roots: &mut Vec<f64>) {
        let (middle, half) = (0.5 * (from + to), 0.5 * (to - from));
        let (value, steep, bound) = (self.at(middle), slope.at(middle).abs(), self.curvature_bound());
        if value.abs() > steep * half + 0.5 * bound * half * half + nothing {
            return;
        }
        if steep > bound * half {
            let ends = (self.at(from), self.at(to));
            if ends.0.abs() <= nothing {
                roots.push(from);
            } else if ends.1.abs() <= nothing {
                roots.push(to);
            } else {
                roots.extend(brent(|x| self.at(x), from, to, 1e-15));
            }
        } else if half < RESOLVED {
            roots.push(middle);
        } else {
            self.roots_within(slope, from, middle, nothing, roots);
            self.roots_within(slope, middle, to, nothing, roots);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;
    use std::f64::consts::TAU;

    #[test]
    fn a_close_pair_and_a_double_root_are_found() {
        // cos 2x = 2 cos² x − 1, so this is 2 (cos x − a)(cos x − b).
        let product = |a: f64, b: f64| Harmonics {
            mean: 1.0 + 2.0 * a * b,
            one: (-2.0 * (a + b), 0.0),
            two: (1.0, 0.0),
        };
        let mut found = Vec::new();
        product(0.3, 0.300_001).roots(0.0, 3.0, 1e-14, &mut found);
        assert_eq!(found.len(), 2, "{found:?}");
        crate::assert_close!(found[0], 0.300_001f64.acos(), 1e-9, "first");
        crate::assert_close!(found[1], 0.3f64.acos(), 1e-9, "second");
        let mut touching = Vec::new();
        product(0.3, 0.3).roots(0.0, 3.0, 1e-14, &mut touching);
        assert!(touching.iter().all(|x| (x - 0.3f64.acos()).abs() < 1e-6) && !touching.is_empty());
    }

    #[test]
    fn nil_has_no_roots() {
        let mut found = Vec::new();
        Harmonics { mean: 0.0, one: (1e-17, 0.0), two: (0.0, 0.0) }.roots(0.0, 6.0, 1e-14, &mut found);
        assert!(found.is_empty());
    }

    proptest! {
        #[test]
        fn the_slope_is_the_slope_and_roots_alternate(mean in -2.0..2.0f64, a in -1.0..1.0f64, b in -1.0..1.0f64, c in -1.0..1.0f64, d in -1.0..1.0f64) {
            let f = Harmonics { mean, one: (a, b), two: (c, d) };
            for k in 0..12 {
                let x = 0.5 * f64::from(k);
                let slope = (f.at(x + 1e-6) - f.at(x - 1e-6)) / 2e-6;
                prop_assert!((f.derivative().at(x) - slope).abs() < 1e-8);
            }
            let mut found = Vec::new();
            f.roots(0.0, TAU, 1e-14, &mut found);
            for x in &found {
                prop_assert!(f.at(*x).abs() < 1e-12, "{} at {x}", f.at(*x));
            }
            // Round the circle the sign changes an even number of times, at most four.
            prop_assert!(found.len() <= 4);
            let changes = (0..7200)
                .filter(|k| (f.at(TAU * f64::from(*k) / 7200.0) > 0.0) != (f.at(TAU * f64::from(k + 1) / 7200.0) > 0.0))
                .count();
            prop_assert!(found.len() >= changes);
        }
    }
}
