//! Bootstrap interval of the mean direction of independent angles: for fewer than 25 of them.

use crate::ground::{Method, Seed, Stopped, Symbol, Work};
use crate::numeric::quantile;
use crate::numeric::resample::resampled_sums;

use super::mean::Resultant;
use super::sources::{FISHER, at};

pub static METHOD: Method = Method {
    id: "axial.bootstrap",
    name: "Bootstrap of the mean axis",
    question: "Within what angle is the mean of a few independent axes known?",
    formula: "half = ½ · 95 % quantile of |φ̄* − φ̄|",
    symbols: &[Symbol {
        symbol: "φ̄*",
        meaning: "mean doubled angle of n axes drawn with replacement",
        unit: "rad",
    }],
    assumptions: &["Independent axes."],
    limits: &["Below about 8 axes it is too narrow.", "Weights go with the rows they belong to."],
    sources: &[at(FISHER, "§4.4.4 and chapter 8")],
};

/// Half width (radians of the circle angle) of the symmetric bootstrap interval at `level`.
///
/// # Errors
/// [`Stopped`].
pub fn half_width(
    phi: &[f64],
    weights: Option<&[f64]>,
    resamples: u32,
    level: f64,
    seed: Seed,
    work: &Work,
) -> Result<f64, Stopped> {
    let mean = Resultant::of(phi, weights).direction();
    // Turned so that the mean is 0, the turn of a draw is its own direction.
    let (across, along): (Vec<f64>, Vec<f64>) = (0..phi.len())
        .map(|i| {
            let (sin, cos) = (phi[i] - mean).sin_cos();
            let w = weights.map_or(1.0, |w| w[i]);
            (w * sin, w * cos)
        })
        .unzip();
    let sums = resampled_sums(&along, &across, resamples, seed, "axial.bootstrap", work)?;
    let mut turns: Vec<f64> = sums.iter().map(|[cos, sin]| sin.atan2(*cos).abs()).collect();
    let [half] = quantile::of(&mut turns, [level]);
    Ok(half)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    #[test]
    fn agrees_with_the_dispersion_form_for_many_axes() {
        let phi: Vec<f64> = (0..500).map(|i| 2.0 + 0.7 * (f64::from(i) * 2.1).sin()).collect();
        let half = half_width(&phi, None, 4000, 0.95, Seed(2), &Work::quiet()).expect("nobody stops");
        let theory = 1.96 * (super::super::interval::dispersion(&phi, None) / 500.0).sqrt();
        assert_close!(half / theory, 1.0, 0.05, "bootstrap over theory");
    }
}
