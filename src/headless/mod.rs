//! The headless floor.
