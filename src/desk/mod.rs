//! The desk floor.
