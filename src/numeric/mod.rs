//! The numeric floor.
