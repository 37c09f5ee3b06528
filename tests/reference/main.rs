//! Numbers from outside the project, each with its source and tolerance.

mod alignment;
mod axial;
mod axial_field;
mod axial_tests;
mod crest;
mod georef;
mod obstacle;
mod orientation;
mod place;
mod spectrum;
mod verdict;
mod wind;
