//! Synthetic ground and wind with known truth: for the demo, for tests, and for injection and recovery.

pub mod reach;
pub mod smooth;
