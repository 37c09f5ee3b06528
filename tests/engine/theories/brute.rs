//! The rules of alignment by brute force: a dense grid, then each candidate narrowed down.

use std::f64::consts::PI;

use ventifact::ground::{Axis, Azimuth, SandFlow};

/// Cells of the grid over half a turn.
const CELLS: usize = 1800;

/// A regime laid out for plain evaluation.
pub struct Brute {
    /// (sin θ, cos θ, q).
    winds: Vec<(f64, f64, f64)>,
    /// Trends to look at, radians ascending: the grid, and each wind's own axis, where slopes jump.
    grid: Vec<f64>,
    flux_up: f64,
}

impl Brute {
    pub fn new(flows: &[SandFlow], flux_up: f64) -> Self {
        let winds = flows.iter().map(|f| (f.toward.rad().sin(), f.toward.rad().cos(), f.weight)).collect();
        // A few cells past half a turn at either end, so that nothing falls into the seam.
        let mut grid: Vec<f64> = (0..=CELLS + 4).map(|k| (k as f64 - 2.3) * PI / CELLS as f64).collect();
        grid.extend(flows.iter().map(|f| f.toward.axis().rad()));
        grid.sort_by(f64::total_cmp);
        grid.dedup();
        Self { winds, grid, flux_up }
    }

    /// Σ over the winds of `of(sin(θ − α), cos(θ − α), q)`.
    fn sum(&self, alpha: f64, of: impl Fn(f64, f64, f64) -> f64) -> f64 {
        let (s, c) = alpha.sin_cos();
        self.winds.iter().map(|w| of(w.0 * c - w.1 * s, w.1 * c + w.0 * s, w.2)).sum()
    }

    /// σ(α), which is T(α) when the flux-up ratio is 0.
    pub fn growth(&self, alpha: f64) -> f64 {
        self.sum(alpha, |s, _, q| q * (1.0 + self.flux_up * s.abs()) * s.abs())
    }

    pub fn across(&self, alpha: f64) -> f64 {
        self.sum(alpha, |s, _, q| q * (1.0 + self.flux_up * s.abs()) * s)
    }

    pub fn along(&self, alpha: f64) -> f64 {
        self.sum(alpha, |s, c, q| q * (1.0 + self.flux_up * s.abs()) * c)
    }

    /// More than a sum can rise or fall within a cell beyond the values at its ends.
    fn bend(&self) -> f64 {
        let cell = PI / CELLS as f64;
        let total: f64 = self.winds.iter().map(|w| w.2).sum();
        total * (1.0 + 4.0 * self.flux_up) * cell * cell
    }

    /// Every trend whose growth comes within `share` of the greatest, and that growth.
    pub fn fastest(&self, share: f64) -> (Vec<Axis>, f64) {
        let values: Vec<f64> = self.grid.iter().map(|a| self.growth(*a)).collect();
        let high = values.iter().copied().fold(0.0, f64::max);
        let rise = self.bend();
        let mut tops = Vec::new();
        for k in 1..self.grid.len() {
            if values[k].max(values[k - 1]) + rise >= high {
                let top = golden(self.grid[k - 1], self.grid[k], |a| -self.growth(a));
                tops.push((self.growth(top), top));
            }
        }
        tops.sort_by(|a, b| b.0.total_cmp(&a.0));
        let best = tops[0].0;
        let mut axes: Vec<Axis> = Vec::new();
        for top in tops.iter().filter(|t| t.0 >= best * (1.0 - share)) {
            // The next cell's end lies on the flank of the same maximum, just below it.
            let axis = Axis::from_deg(top.1.to_degrees());
            if axes.iter().all(|a| a.separation(axis) > 0.01) {
                axes.push(axis);
            }
        }
        (axes, best)
    }

    /// Every balanced crest along which sand is left, as the azimuth toward which it goes.
    pub fn fingers(&self) -> Vec<Azimuth> {
        let mut roots = Vec::new();
        for pair in self.grid.windows(2) {
            let (a, b) = (pair[0], pair[1]);
            let (fa, fb) = (self.across(a), self.across(b));
            if (fa > 0.0) != (fb > 0.0) {
                roots.push(self.halve(a, b));
            } else if fa.abs().min(fb.abs()) < self.bend() {
                // A pair of roots inside the cell shows as a dip through zero.
                let sign = if fa > 0.0 { 1.0 } else { -1.0 };
                let dip = golden(a, b, |x| sign * self.across(x));
                if sign * self.across(dip) < 0.0 {
                    roots.extend([self.halve(a, dip), self.halve(dip, b)]);
                }
            }
        }
        let toward = |root: &f64| {
            let sense = Azimuth::from_deg(root.to_degrees());
            if self.along(*root) > 0.0 { sense } else { sense.reversed() }
        };
        let mut found: Vec<Azimuth> = Vec::new();
        for azimuth in roots.iter().map(toward) {
            if found.iter().all(|f| f.turn_from(azimuth).abs() > 1e-6) {
                found.push(azimuth);
            }
        }
        found
    }

    fn halve(&self, mut a: f64, mut b: f64) -> f64 {
        let low = self.across(a) > 0.0;
        for _ in 0..60 {
            let middle = 0.5 * (a + b);
            if (self.across(middle) > 0.0) == low { a = middle } else { b = middle }
        }
        0.5 * (a + b)
    }
}

/// Where `f` is least in [a, b], by the golden section.
fn golden(mut a: f64, mut b: f64, f: impl Fn(f64) -> f64) -> f64 {
    let ratio = 0.5 * (5f64.sqrt() - 1.0);
    let (mut p, mut q) = (b - ratio * (b - a), a + ratio * (b - a));
    let (mut fp, mut fq) = (f(p), f(q));
    while b - a > 1e-9 {
        if fp < fq {
            (b, q, fq) = (q, p, fp);
            p = b - ratio * (b - a);
            fp = f(p);
        } else {
            (a, p, fp) = (p, q, fq);
            q = a + ratio * (b - a);
            fq = f(q);
        }
    }
    0.5 * (a + b)
}
