//! The window, driven by role and label, and pictured by the CPU painter.

mod desk;
mod docs;
mod harness;
mod pictures;
mod scene;
mod table;
