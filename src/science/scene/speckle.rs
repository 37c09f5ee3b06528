//! Radar speckle: multiplicative noise of Gamma-distributed intensity.

use rand::Rng;
use rand_distr::{Distribution as _, Gamma, StandardNormal};

use crate::ground::{Grid, Stopped, Work};
use crate::numeric::separable::smooth_valid;

/// Independent speckle of mean 1 and `looks` ≥ 1 looks: Gamma with variance 1/looks.
pub fn speckle(width: usize, height: usize, looks: f64, rng: &mut impl Rng) -> Grid<f32> {
    let Ok(gamma) = Gamma::new(looks, 1.0 / looks) else {
        return Grid::filled(width, height, 1.0);
    };
    Grid::from_fn(width, height, |_, _| gamma.sample(rng) as f32)
}

/// Speckle as a resampled product has it: `looks` averaged intensities of a complex field blurred by
/// `blur_px`. Neighbouring pixels are alike; the intensity itself is as if blurred by blur/√2.
///
/// # Errors
/// [`Stopped`].
pub fn correlated_speckle(
    width: usize,
    height: usize,
    looks: usize,
    blur_px: f64,
    rng: &mut impl Rng,
    work: &Work,
) -> Result<Grid<f32>, Stopped> {
    let mut intensity = vec![0.0f32; width * height];
    for _ in 0..2 * looks {
        let white = Grid::from_fn(width, height, |_, _| {
            let z: f64 = StandardNormal.sample(rng);
            z as f32
        });
        let part = smooth_valid(&white, [blur_px, blur_px], work)?;
        intensity.iter_mut().zip(part.values()).for_each(|(i, v)| *i += v * v);
    }
    let mean = intensity.iter().map(|v| f64::from(*v)).sum::<f64>() / intensity.len().max(1) as f64;
    let scaled = intensity.iter().map(|v| (f64::from(*v) / mean) as f32).collect();
    Ok(Grid::from_parts(width, height, scaled, None))
}

/// Ground seen through speckle: tone × speckle, cell by cell.
///
/// # Panics
/// When the sizes differ: a bug in the caller.
pub fn speckled(tone: &Grid<f32>, speckle: &Grid<f32>) -> Grid<f32> {
    assert_eq!((tone.width(), tone.height()), (speckle.width(), speckle.height()), "sizes");
    let values = tone.values().iter().zip(speckle.values()).map(|(t, s)| t * s).collect();
    Grid::from_parts(tone.width(), tone.height(), values, tone.mask().map(<[bool]>::to_vec))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::Seed;

    #[test]
    fn speckle_has_mean_one_and_variance_one_over_looks() {
        let mut rng = Seed(1).stream("speckle", 0);
        for looks in [1.0, 4.0] {
            let grid = speckle(300, 300, looks, &mut rng);
            let n = grid.len() as f64;
            let mean = grid.valid_values().map(f64::from).sum::<f64>() / n;
            let var = grid.valid_values().map(|v| (f64::from(v) - mean).powi(2)).sum::<f64>() / n;
            crate::assert_close!(mean, 1.0, 0.02, "mean");
            crate::assert_close!(var, 1.0 / looks, 0.04, "variance");
        }
    }
}
