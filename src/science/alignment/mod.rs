//! Alignment theories, and the weighing of a measured trend against them.

pub mod backwards;
pub mod bed_instability;
pub mod discriminator;
pub mod equivalence;
pub mod fingering;
pub mod gross_normal;
mod judge;
pub mod likelihood;
pub mod migration;
pub mod obliquity;
pub mod resultant;
mod theory;

pub use judge::{Judgement, Refusal, TheoryJudgement, TrendEvidence, VerdictSettings, judge};
pub use theory::Theory;

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &resultant::TRANSVERSE,
    &resultant::ALONG,
    &gross_normal::METHOD,
    &bed_instability::METHOD,
    &fingering::METHOD,
    &discriminator::METHOD,
    &migration::METHOD,
    &backwards::METHOD,
    &backwards::FORKS,
    &obliquity::METHOD,
    &likelihood::METHOD,
    &equivalence::METHOD,
    &equivalence::FALSE_DISCOVERY,
];
