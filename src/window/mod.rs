//! The window floor.
