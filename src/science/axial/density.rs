//! Kernel density of axes with a von Mises kernel, and its two bandwidths.

use std::f64::consts::{PI, TAU};

use crate::ground::{Axis, Method, Read, Source, Symbol};
use crate::numeric::bessel::{i0_scaled, i2_scaled};
use crate::numeric::maximum::golden;

use super::sources::{MARDIA_JUPP, at};

pub static METHOD: Method = Method {
    id: "axial.density",
    name: "Kernel density of axes",
    question: "What is the distribution of axes without choosing bins?",
    formula: "f(φ) = Σ w exp(ν cos(φ − φᵢ))/(2π I₀(ν) Σw); ν = [3nκ²I₂(2κ)/(4√π I₀(κ)²)]^(2/5)",
    symbols: &[
        Symbol { symbol: "ν", meaning: "concentration of the kernel: larger is rougher", unit: "1" },
        Symbol { symbol: "n", meaning: "number of independent axes", unit: "1" },
        Symbol { symbol: "κ", meaning: "von Mises concentration of the doubled angle", unit: "1" },
    ],
    assumptions: &["The plug-in bandwidth supposes one von Mises mode."],
    limits: &[
        "The plug-in oversmooths several modes: compare with the cross-validated bandwidth.",
        "Above 2000 axes they are spread over cells of 0.125°: within 0.5 % of the peak for ν ≤ 1000.",
    ],
    sources: &[
        Source {
            key: "taylor2008",
            authors: "Taylor, C. C.",
            year: 2008,
            title: "Automatic bandwidth selection for circular density estimation",
            published: "Computational Statistics and Data Analysis 52, 3493–3500",
            locator: "",
            read: Read::Memory,
        },
        at(MARDIA_JUPP, "kernel density"),
    ],
};

/// Above this many angles they are spread over [`CELLS`] cells first.
const DIRECT: usize = 2000;
/// Cells around the circle: 0.125° of axis.
const CELLS: usize = 1440;
/// Kernel concentrations the cross-validation looks at.
const NU_RANGE: (f64, f64) = (0.05, 2000.0);

/// Taylor's plug-in bandwidth for `n` independent angles of concentration `kappa`.
pub fn plug_in(n: f64, kappa: f64) -> f64 {
    let i0 = i0_scaled(kappa);
    // The factors e^(2κ) of I₂(2κ) and of I₀(κ)² cancel.
    (3.0 * n * kappa * kappa * i2_scaled(2.0 * kappa) / (4.0 * PI.sqrt() * i0 * i0)).powf(0.4)
}

/// Density of circle angles at the angles `at` (radians), per radian.
pub fn density(phi: &[f64], weights: Option<&[f64]>, nu: f64, at: &[f64]) -> Vec<f64> {
    let Shares { angles, masses, .. } = shares(phi, weights);
    at.iter().map(|x| estimate(&angles, &masses, nu, *x)).collect()
}

/// Density of axes at 0°, 1°, … 179°, per degree of axis, with kernel concentration `nu` on the
/// doubled angle.
pub fn density_by_degree(axes: &[Axis], weights: Option<&[f64]>, nu: f64) -> Vec<f64> {
    let phi = super::mean::doubled(axes);
    let at: Vec<f64> = (0..180u8).map(|d| 2.0 * f64::from(d).to_radians()).collect();
    let per_degree = 2.0 * PI / 180.0;
    density(&phi, weights, nu, &at).into_iter().map(|f| f * per_degree).collect()
}

/// The bandwidth with the greatest leave-out likelihood. With `n_eff` independent angles among n,
/// each is left out together with the share 1/n_eff of all weight that repeats it.
pub fn likelihood_cv(phi: &[f64], weights: Option<&[f64]>, n_eff: f64) -> f64 {
    let n_eff = n_eff.max(2.0);
    let shares = shares(phi, weights);
    let score = |ln_nu: f64| {
        let nu = ln_nu.exp();
        let kernel_top = 1.0 / (TAU * i0_scaled(nu));
        shares.log_score(nu, |f| ((f - kernel_top / n_eff) / (1.0 - 1.0 / n_eff)).max(1e-300))
    };
    // The score may have several maxima: a coarse scan first.
    let (low, high) = (NU_RANGE.0.ln(), NU_RANGE.1.ln());
    let steps = 24;
    let step = (high - low) / f64::from(steps);
    let best = (0..=steps)
        .map(|i| low + f64::from(i) * step)
        .map(|x| (x, score(x)))
        .fold((low, f64::NEG_INFINITY), |best, point| if point.1 > best.1 { point } else { best });
    golden(score, (best.0 - step).max(low), (best.0 + step).min(high), 1e-5).exp()
}

fn estimate(angles: &[f64], masses: &[f64], nu: f64, x: f64) -> f64 {
    let sum: f64 = angles.iter().zip(masses).map(|(a, m)| m * (nu * ((x - a).cos() - 1.0)).exp()).sum();
    sum / (TAU * i0_scaled(nu))
}

/// Angles with their shares of all weight.
struct Shares {
    angles: Vec<f64>,
    masses: Vec<f64>,
    /// Whether the angles are the even cells instead of the data.
    cells: bool,
}

/// Few angles as they are; many spread linearly over cells.
fn shares(phi: &[f64], weights: Option<&[f64]>) -> Shares {
    let weight = |i: usize| weights.map_or(1.0, |w| w[i]);
    let all: f64 = (0..phi.len()).map(weight).sum();
    let unit = if all > 0.0 { 1.0 / all } else { 0.0 };
    if phi.len() <= DIRECT {
        let masses = (0..phi.len()).map(|i| weight(i) * unit).collect();
        return Shares { angles: phi.to_vec(), masses, cells: false };
    }
    let mut masses = vec![0.0; CELLS];
    for (i, p) in phi.iter().enumerate() {
        let at = p.rem_euclid(TAU) / TAU * CELLS as f64;
        let (cell, part) = (at.floor() as usize % CELLS, at.fract());
        masses[cell] += weight(i) * unit * (1.0 - part);
        masses[(cell + 1) % CELLS] += weight(i) * unit * part;
    }
    let angles = (0..CELLS).map(|c| c as f64 / CELLS as f64 * TAU).collect();
    Shares { angles, masses, cells: true }
}

impl Shares {
    /// Σ m ln g(f(φ)) over the angles.
    fn log_score(&self, nu: f64, leave_out: impl Fn(f64) -> f64) -> f64 {
        if !self.cells {
            let at = |i: usize| estimate(&self.angles, &self.masses, nu, self.angles[i]);
            return (0..self.angles.len()).map(|i| self.masses[i] * leave_out(at(i)).ln()).sum();
        }
        let norm = 1.0 / (TAU * i0_scaled(nu));
        let kernel: Vec<f64> = self.angles.iter().map(|a| norm * (nu * (a.cos() - 1.0)).exp()).collect();
        let doubled: Vec<f64> = kernel.iter().chain(&kernel).copied().collect();
        let occupied = (0..CELLS).filter(|c| self.masses[*c] > 0.0);
        occupied
            .map(|c| {
                // kernel[(j − c) mod CELLS] for j = 0.. is one run of the doubled table.
                let run = &doubled[CELLS - c..2 * CELLS - c];
                let f: f64 = run.iter().zip(&self.masses).map(|(k, m)| k * m).sum();
                self.masses[c] * leave_out(f).ln()
            })
            .sum()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    fn many(n: usize) -> Vec<f64> {
        (0..n)
            .map(|i| 1.0 + 0.8 * (i as f64 * 0.618_034).fract() + if i % 3 == 0 { 2.0 } else { 0.0 })
            .collect()
    }

    #[test]
    fn density_integrates_to_one_over_the_half_circle() {
        let axes: Vec<Axis> = many(50).iter().map(|p| Axis::from_doubled(*p)).collect();
        let total: f64 = density_by_degree(&axes, None, 20.0).iter().sum();
        assert_close!(total, 1.0, 1e-9, "mass");
    }

    #[test]
    fn cells_stay_within_their_stated_error() {
        let phi = many(3000);
        let at: Vec<f64> = (0..90).map(|i| f64::from(i) * TAU / 90.0).collect();
        for nu in [5.0, 100.0, 1000.0] {
            let binned = density(&phi, None, nu, &at);
            let masses = vec![1.0 / 3000.0; 3000];
            let exact: Vec<f64> = at.iter().map(|x| estimate(&phi, &masses, nu, *x)).collect();
            let peak = exact.iter().copied().fold(0.0, f64::max);
            for (b, e) in binned.iter().zip(&exact) {
                assert_close!(*b / peak, e / peak, 0.005, "ν = {nu}");
            }
        }
    }

    #[test]
    fn cross_validation_sees_two_narrow_modes() {
        let phi: Vec<f64> = many(200);
        let nu = likelihood_cv(&phi, None, 200.0);
        let kappa = 0.5;
        assert!(nu > 3.0 * plug_in(200.0, kappa), "ν = {nu}");
        // Cells and exact angles choose alike.
        let repeated: Vec<f64> = phi.iter().flat_map(|p| [*p; 11]).collect();
        assert_close!(likelihood_cv(&repeated, None, 200.0) / nu, 1.0, 0.02, "ν by cells");
    }
}
