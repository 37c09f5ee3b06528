//! Numbers from outside the project, each with its source and tolerance.

mod alignment;
mod axial;
mod axial_field;
mod axial_tests;
mod checks_abc;
mod crest;
mod crest_ground;
mod crest_trust;
mod drainage;
mod georef;
mod image_channels;
mod light;
mod network;
mod obstacle;
mod orientation;
mod place;
mod planform;
mod populations;
mod spectrum;
mod verdict;
mod wind;
