//! The trends of a set of axes, by the mixture with the least BIC.

use crate::ground::{Axis, Seed, Stopped, Work};

use super::AxialSample;
use super::mean::doubled;
use super::mixture::{MixtureSettings, mixtures};

/// One trend.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mode {
    pub axis: Axis,
    /// Share of all weight; what the modes leave short of 1 is an even background.
    pub weight: f64,
    pub kappa_doubled: f64,
}

/// The trends of `sample`, the heaviest first: the model of 1 to `most_modes` modes, with or without
/// an even background, that has the least BIC for `n_eff` independent axes
/// ([`Summary::n_eff_test`](super::Summary::n_eff_test)). Empty for no axes.
///
/// # Errors
/// [`Stopped`].
pub fn modes(
    sample: &AxialSample,
    n_eff: f64,
    most_modes: u32,
    seed: Seed,
    work: &Work,
) -> Result<Vec<Mode>, Stopped> {
    let settings = MixtureSettings { most_modes, background: true, n_eff };
    let models = mixtures(&doubled(sample.axes), sample.weights, settings, seed, work)?;
    Ok(models.into_iter().next().map_or_else(Vec::new, |best| {
        best.components
            .into_iter()
            .map(|c| Mode { axis: Axis::from_doubled(c.mean), weight: c.weight, kappa_doubled: c.kappa })
            .collect()
    }))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::science::axial::von_mises;

    #[test]
    fn two_crossing_trends_come_back_as_axes() {
        let mut random = Seed(3).stream("modes", 0);
        let axes: Vec<Axis> = (0..900)
            .map(|i| if i % 4 == 0 { 100f64 } else { 20.0 })
            .map(|deg| Axis::from_doubled(von_mises::draw(2.0 * deg.to_radians(), 12.0, &mut random)))
            .collect();
        let sample = AxialSample { axes: &axes, weights: None, nodes: None };
        let found = modes(&sample, 900.0, 4, Seed(1), &Work::quiet()).expect("nobody stops");
        assert_eq!(found.len(), 2, "{found:?}");
        assert_close!(found[0].axis.separation(Axis::from_deg(20.0)), 0.0, 1.0, "first trend");
        assert_close!(found[1].axis.separation(Axis::from_deg(100.0)), 0.0, 2.0, "second trend");
        assert_close!(found[0].weight, 0.75, 0.03, "share");
    }
}
