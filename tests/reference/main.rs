//! Numbers from outside the project, each with its source and tolerance.

mod axial;
mod georef;
mod place;
