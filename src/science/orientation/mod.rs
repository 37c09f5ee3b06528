//! Trend and spacing of a texture: the structure tensor, windowed spectra, and what speckle and
//! illumination do to both.

mod contrast;
pub mod crossing;
mod gradient;
pub mod look;
pub mod noise;
pub mod scale;
pub mod speckle;
pub mod spectrum;
mod tensor;

pub use gradient::Tone;
pub use spectrum::{Peak, Spectrum, SpectrumSettings, spectrum};
pub use tensor::{NodeField, TensorSettings, TrendNode, trend_nodes};

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] =
    &[&tensor::METHOD, &noise::METHOD, &spectrum::METHOD, &scale::METHOD, &speckle::METHOD, &look::METHOD];
