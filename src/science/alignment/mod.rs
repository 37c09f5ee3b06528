//! Alignment theories, and the weighing of a measured trend against them.

pub mod backwards;
pub mod bed_instability;
mod cautions;
pub mod discriminator;
pub mod equivalence;
pub mod fingering;
mod foresight;
pub mod gross_normal;
mod judge;
pub mod likelihood;
pub mod migration;
pub mod obliquity;
pub mod resultant;
mod stated;
mod subsets;
mod theory;
mod together;

pub use foresight::{FluxUp, Foresight, foresee};
pub use judge::{
    Building, Elongation, Judgement, RANDOM_AXIS, Refusal, TheoryJudgement, TrendEvidence, VerdictSettings,
    judge,
};
pub use theory::{Prediction, Theory, Way};
pub use together::{Joint, together};

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &resultant::TRANSVERSE,
    &resultant::ALONG,
    &gross_normal::METHOD,
    &bed_instability::METHOD,
    &fingering::METHOD,
    &subsets::STORMS,
    &subsets::SEASON,
    &stated::METHOD,
    &discriminator::METHOD,
    &migration::METHOD,
    &backwards::METHOD,
    &backwards::FORKS,
    &obliquity::METHOD,
    &likelihood::METHOD,
    &together::METHOD,
    &equivalence::METHOD,
    &equivalence::FALSE_DISCOVERY,
];
