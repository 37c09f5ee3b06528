//! Synthetic ground and wind with known truth: for the demo, for tests, and for injection and recovery.

mod crests;
mod dunes;
mod grating;
pub mod inject;
pub mod reach;
pub mod recover;
pub mod smooth;
mod speckle;
pub mod texture;
pub mod waterways;

pub use crests::{CrestScene, CrestShading, CrestTruth};
pub use dunes::DuneTexture;
pub use grating::{Grating, WavyGrating, picture};
pub use speckle::{correlated_speckle, speckle, speckled};

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[&inject::METHOD, &texture::METHOD, &recover::METHOD];
