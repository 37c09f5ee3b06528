//! Numbers from outside the project, each with its source and tolerance.

mod alignment;
mod axial;
mod axial_field;
mod axial_tests;
mod georef;
mod place;
mod verdict;
mod wind;
