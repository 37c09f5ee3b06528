//! Trend and spacing of a texture: the structure tensor, windowed spectra, and what speckle and
//! illumination do to both.

pub mod band;
mod contrast;
pub mod crossing;
mod gradient;
mod ground_shares;
pub mod look;
pub mod noise;
pub mod plateau;
pub mod populations;
pub mod scale;
mod separate;
pub mod speckle;
pub mod spectrum;
mod tensor;

pub use gradient::Tone;
pub use spectrum::{Peak, Spectrum, SpectrumSettings, spectrum, spectrum_along};
pub use tensor::{NodeField, TensorSettings, TrendNode, trend_nodes};

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &tensor::METHOD,
    &noise::METHOD,
    &spectrum::METHOD,
    &scale::METHOD,
    &band::METHOD,
    &plateau::METHOD,
    &populations::METHOD,
    &speckle::METHOD,
    &look::METHOD,
];
