//! Numbers from outside the project, each with its source and tolerance.

mod alignment;
mod axial;
mod georef;
mod axial_field;
mod place;
mod verdict;
mod wind;
