//! Mathematics without meaning: special functions, tails of distributions, sums in a fixed order,
//! quantiles, roots and maxima, kernels, transforms, small matrices, distances and thinning of masks, streaks
//! along axes.

pub mod bessel;
pub mod distance;
pub mod eigen;
pub mod fast_march;
pub mod fft;
pub mod gamma;
pub mod gauss;
pub mod harmonics;
pub mod huber;
pub mod lattice;
pub mod least_path;
pub mod maximum;
pub mod quantile;
pub mod resample;
pub mod root;
pub mod separable;
pub mod shift;
pub mod streaks;
pub mod sum;
pub mod tail;
pub mod taper;
pub mod thin;
pub mod transform;
