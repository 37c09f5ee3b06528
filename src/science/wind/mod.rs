//! Winds to sand: quality control, profile, threshold, transport laws, drift, and its bootstrap.

pub mod air;
mod assess;
mod bootstrap;
pub mod calendar;
mod coverage;
pub mod drift_potential;
pub mod gusts;
pub mod law;
pub mod log_law;
mod mill;
mod movers;
pub mod quality;
pub mod regime;
pub mod rounding;
pub mod saturation;
mod settings;
mod site_cautions;
pub mod thinning;
pub mod threshold;

pub use assess::{Replay, Sensitivity, WindAssessment, assess};
pub use law::Law;
pub use mill::Mill;
pub use quality::SetAside;
pub use regime::{Drift, Season};
pub use settings::{Assumption, Doubt, Site, Transport, WindError, WindSettings};
pub use threshold::{Bed, Threshold};

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &quality::METHOD,
    &air::METHOD,
    &log_law::METHOD,
    &threshold::BAGNOLD,
    &threshold::IVERSEN_WHITE,
    &threshold::SHAO_LU,
    &law::METHOD,
    &drift_potential::METHOD,
    &regime::METHOD,
    &bootstrap::METHOD,
    &calendar::METHOD,
    &gusts::METHOD,
    &rounding::METHOD,
    &thinning::METHOD,
    &saturation::SETTLING,
    &saturation::WAVELENGTH,
];
