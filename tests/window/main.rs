//! The window, driven by role and label, and pictured by the CPU painter.

mod channels;
mod crest_table;
mod crests;
mod desk;
mod docs;
mod harness;
mod light;
mod networks;
mod pictures;
mod scene;
mod table;
