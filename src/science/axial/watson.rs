//! Watson's U²: do the angles follow a given distribution, uniform or a fitted von Mises?

use std::f64::consts::{PI, TAU};

use rayon::prelude::*;

use crate::ground::{Method, Seed, Stopped, Symbol, Work};

use super::kappa::piecewise;
use super::mean::Resultant;
use super::sources::{FISHER, MARDIA_JUPP};
use super::von_mises;

pub static METHOD: Method = Method {
    id: "axial.watson",
    name: "Watson's U²",
    question: "Are the axes uniform, or do they fit one von Mises mode?",
    formula: "U² = Σ(uᵢ − (2i − 1)/2n)² − n(ū − ½)² + 1/12n; modified (U² − 0.1/n + 0.1/n²)(1 + 0.8/n)",
    symbols: &[
        Symbol { symbol: "uᵢ", meaning: "distribution function at the sorted doubled angles", unit: "1" },
        Symbol { symbol: "n", meaning: "number of independent axes", unit: "1" },
    ],
    assumptions: &["Independent axes."],
    limits: &[
        "p for uniformity is asymptotic for the modified U².",
        "Against a fitted von Mises p comes from a parametric bootstrap, since tables depend on κ.",
    ],
    sources: &[FISHER, MARDIA_JUPP],
};

/// U² of probabilities u in [0, 1]; sorts them.
pub fn u_squared(u: &mut [f64]) -> f64 {
    u.sort_unstable_by(f64::total_cmp);
    let n = u.len() as f64;
    let mean = u.iter().sum::<f64>() / n;
    let squares: f64 = u.iter().enumerate().map(|(i, u)| (u - (i as f64 + 0.5) / n).powi(2)).sum();
    squares - n * (mean - 0.5).powi(2) + 1.0 / (12.0 * n)
}

/// The asymptotic tail 2 Σ (−1)^(m−1) exp(−2m²π²U²), in [0, 1].
pub fn tail(u2: f64) -> f64 {
    let mut sum = 0.0;
    for m in 1..=100 {
        let square = f64::from(m * m);
        let term = 2.0 * (-2.0 * square * PI * PI * u2).exp();
        sum += if m % 2 == 1 { term } else { -term };
        if term < 1e-16 {
            return sum.clamp(0.0, 1.0);
        }
    }
    // The series only fails to settle where U² is next to nothing.
    1.0
}

/// Watson's test of uniformity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Watson {
    pub raw: f64,
    pub modified: f64,
    pub p: f64,
}

/// Tests circle angles against the uniform distribution.
pub fn against_uniform(phi: &[f64]) -> Watson {
    let n = phi.len() as f64;
    let raw = u_squared(&mut phi.iter().map(|p| p.rem_euclid(TAU) / TAU).collect::<Vec<_>>());
    let modified = (raw - 0.1 / n + 0.1 / (n * n)) * (1.0 + 0.8 / n);
    Watson { raw, modified, p: tail(modified) }
}

/// U² of circle angles against the von Mises distribution fitted to them (Fisher's piecewise κ).
pub fn u_squared_von_mises(phi: &[f64]) -> f64 {
    let resultant = Resultant::of(phi, None);
    let (mean, kappa) = (resultant.direction(), piecewise(resultant.mean_length()).min(1e6));
    u_squared(&mut phi.iter().map(|p| von_mises::cdf(*p, mean, kappa)).collect::<Vec<_>>())
}

/// U² against the fitted von Mises, and its p from `resamples` samples drawn from that fit.
///
/// # Errors
/// [`Stopped`].
pub fn against_von_mises(
    phi: &[f64],
    resamples: u32,
    seed: Seed,
    work: &Work,
) -> Result<(f64, f64), Stopped> {
    let u2 = u_squared_von_mises(phi);
    let kappa = piecewise(Resultant::of(phi, None).mean_length()).min(1e6);
    let larger: Vec<bool> = (0..resamples)
        .into_par_iter()
        .map(|draw| {
            work.advance(0)?;
            let mut random = seed.stream("axial.watson", u64::from(draw));
            let sample: Vec<f64> = (0..phi.len()).map(|_| von_mises::draw(0.0, kappa, &mut random)).collect();
            Ok(u_squared_von_mises(&sample) >= u2)
        })
        .collect::<Result<_, Stopped>>()?;
    let count = larger.into_iter().filter(|l| *l).count() as f64;
    Ok((u2, (1.0 + count) / (1.0 + f64::from(resamples))))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_mode_fits_itself_and_two_do_not() {
        let mut random = Seed(5).stream("watson", 0);
        let one: Vec<f64> = (0..80).map(|_| von_mises::draw(1.0, 4.0, &mut random)).collect();
        let two: Vec<f64> =
            one.iter().enumerate().map(|(i, p)| if i % 2 == 0 { *p } else { p + PI }).collect();
        let p = |phi: &[f64]| against_von_mises(phi, 199, Seed(1), &Work::quiet()).expect("nobody stops").1;
        assert!(p(&one) > 0.05, "{}", p(&one));
        assert!(p(&two) < 0.02, "{}", p(&two));
        assert!(against_uniform(&one).p < 1e-4);
    }

    #[test]
    fn turning_the_circle_changes_nothing() {
        let phi: Vec<f64> = (0..30).map(|i| (f64::from(i) * 0.37).sin() * 2.0).collect();
        let turned: Vec<f64> = phi.iter().map(|p| p + 2.7).collect();
        assert!((against_uniform(&phi).raw - against_uniform(&turned).raw).abs() < 1e-12);
    }
}
