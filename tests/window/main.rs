//! The window, driven by role and label, and pictured by the CPU painter.

mod harness;
mod pictures;
mod scene;
mod table;
