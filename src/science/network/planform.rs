//! Planform of a channel: sinuosity, meanders, curvature, width.

use crate::ground::Polyline;

/// One channel path, outlet last.
#[derive(Clone, Debug, PartialEq)]
pub struct Planform {
    /// Reaches it is made of, downstream.
    pub reaches: Vec<usize>,
    /// In the unit of the raster's place, as all lengths here.
    pub length: f64,
    /// The line the valley takes, smoothed over `valley_scale`, in pixels.
    pub valley: Polyline,
    pub valley_scale: f64,
    pub valley_length: f64,
    pub sinuosity: f64,
    /// Sinuosity for other valley scales: (scale, sinuosity).
    pub sinuosity_by_scale: Vec<[f64; 2]>,
    /// From the spectrum of direction along the channel.
    pub wavelength_spectrum: Option<Meander>,
    /// Twice the spacing of inflections.
    pub wavelength_inflections: Option<Meander>,
    /// Radius of curvature at bends: median and quartiles.
    pub radius: Option<[f64; 3]>,
    pub bends: usize,
    pub width: Option<WidthStatistics>,
    /// Wavelength over width; near 11 in free meanders.
    pub wavelength_widths: Option<f64>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Meander {
    /// Along the valley.
    pub wavelength: f64,
    /// Along the channel.
    pub arc_wavelength: f64,
    pub ci95: Option<[f64; 2]>,
    /// Half the distance from side to side, across the valley.
    pub amplitude: f64,
}

#[derive(Clone, Debug, PartialEq)]
pub struct WidthStatistics {
    pub n: usize,
    pub n_eff: f64,
    pub mean: f64,
    pub mean_ci95: Option<[f64; 2]>,
    pub quartiles: [f64; 3],
    /// (distance from the head, width) along the path.
    pub along: Vec<[f64; 2]>,
}
