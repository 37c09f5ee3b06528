//! Statistics of axes: everything runs on the doubled angle and is halved on the way out, except κ.
//!
//! The functions take circle angles φ in radians, so that they serve directions too. [`summarise`]
//! is the face for the executor.

pub mod blocks;
pub mod bootstrap;
pub mod density;
pub mod effective;
pub mod equal_kappa;
mod exchanged;
pub mod interval;
pub mod kappa;
pub mod known_correlation;
pub mod kuiper;
pub mod mardia_watson_wheeler;
pub mod mean;
pub mod mixture;
mod modes;
mod paired;
mod rank;
pub mod rayleigh;
pub mod rose;
pub(in crate::science) mod sources;
pub mod spread;
mod summary;
pub mod two_samples;
pub mod v_test;
pub mod von_mises;
pub mod wallraff;
pub mod watson;
pub mod watson_two;
pub mod watson_williams;

pub use modes::{Mode, modes};
pub use summary::{AxialSample, Interval, Nodes, Summary, SummarySettings, summarise};

use crate::ground::Method;

/// The methods of this family.
pub const METHODS: &[&Method] = &[
    &mean::METHOD,
    &spread::METHOD,
    &kappa::METHOD,
    &rayleigh::METHOD,
    &v_test::METHOD,
    &interval::METHOD,
    &effective::METHOD,
    &blocks::METHOD,
    &bootstrap::METHOD,
    &mixture::METHOD,
    &density::METHOD,
    &rose::METHOD,
    &watson::METHOD,
    &kuiper::METHOD,
    &watson_two::METHOD,
    &watson_williams::METHOD,
    &mardia_watson_wheeler::METHOD,
    &wallraff::METHOD,
    &equal_kappa::METHOD,
    &two_samples::METHOD,
    &paired::METHOD,
];
