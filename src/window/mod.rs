//! The window floor.

pub mod painter;
