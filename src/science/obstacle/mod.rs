//! Outcrops as wind vanes: how crests turn round an obstacle tells their obliquity to the wind that
//! parted there, without a wind record.

mod combine;
mod correlation;
mod dipole;
mod field;
pub mod flow;
mod null;
mod obliquity;
mod outline;
mod sources;
mod test;

pub use combine::{Combined, combine};
pub use dipole::{Dipole, dipole};
pub use field::{Field, Node, residual};
pub use flow::{Flow, abeam};
pub use null::{Null, Placing};
pub use obliquity::{
    Annulus, AtRadius, Estimate, LEAST_NODES, Obliquity, Quadrupole, WIDEST_HALF_DEG, estimate, quadrupole,
};
pub use outline::Ellipse;
pub use test::{Outcome, TestSettings, test, undecided};

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &outline::METHOD,
    &flow::METHOD,
    &obliquity::METHOD,
    &correlation::METHOD,
    &dipole::METHOD,
    &null::METHOD,
    &combine::METHOD,
];
