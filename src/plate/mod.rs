//! Plates: findings as figures in millimetres, written as SVG, PNG and PDF. The window paints the
//! same figures, so that a rose looks the same on screen and in print.

mod figure;

pub use figure::{Figure, Fill, HALO, Item, Rgba, Stroke, TextAnchor};
