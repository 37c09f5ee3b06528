//! Mathematics without meaning: special functions, tails of distributions, sums in a fixed order,
//! quantiles, roots and maxima.

pub mod bessel;
pub mod gamma;
pub mod lattice;
pub mod maximum;
pub mod quantile;
pub mod root;
pub mod sum;
pub mod tail;
