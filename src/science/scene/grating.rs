//! Straight and wavy gratings: the plainest bedforms, with exact answers.

use std::f64::consts::PI;

use crate::ground::{Axis, Grid, LocalFrame};

/// Straight crests: amplitude · cos(2π x / spacing + phase), x across the crests.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Grating {
    pub trend: Axis,
    /// Crest to crest, ground units.
    pub spacing: f64,
    pub amplitude: f64,
    /// Radians.
    pub phase: f64,
}

/// Crests that meander about their trend: cos(2π (x + swing · sin(2π y / length)) / spacing), x across
/// and y along the trend.
///
/// With m = 2π·swing/length the doubled resultant length of the crest directions is 2/√(1 + m²) − 1,
/// and (1 − m²/2)/(1 + m²/2) when each is weighted by the energy of its gradient.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WavyGrating {
    pub trend: Axis,
    pub spacing: f64,
    pub swing: f64,
    pub length: f64,
}

impl Grating {
    /// Amplitude 1, phase 0.
    pub fn new(trend: Axis, spacing: f64) -> Self {
        Self { trend, spacing, amplitude: 1.0, phase: 0.0 }
    }

    /// Tone at a ground point.
    pub fn tone(&self, east: f64, north: f64) -> f64 {
        let (x, _) = across_and_along(self.trend, east, north);
        self.amplitude * (2.0 * PI * x / self.spacing + self.phase).cos()
    }
}

impl WavyGrating {
    /// Tone at a ground point.
    pub fn tone(&self, east: f64, north: f64) -> f64 {
        let (x, y) = across_and_along(self.trend, east, north);
        (2.0 * PI * (x + self.swing * (2.0 * PI * y / self.length).sin()) / self.spacing).cos()
    }

    /// 2π·swing/length, the steepest slope of a crest against its trend.
    pub fn slope(&self) -> f64 {
        2.0 * PI * self.swing / self.length
    }

    /// Doubled resultant length of the crest directions, each length across the trend counted once.
    pub fn resultant(&self) -> f64 {
        2.0 / (1.0 + self.slope().powi(2)).sqrt() - 1.0
    }

    /// The same weighted by gradient energy.
    pub fn resultant_by_energy(&self) -> f64 {
        let half = 0.5 * self.slope().powi(2);
        (1.0 - half) / (1.0 + half)
    }
}

/// Distance across (toward trend + 90°) and along a trend.
fn across_and_along(trend: Axis, east: f64, north: f64) -> (f64, f64) {
    let (across_e, across_n) = trend.perpendicular().azimuth().east_north();
    let (along_e, along_n) = trend.azimuth().east_north();
    (east * across_e + north * across_n, east * along_e + north * along_n)
}

/// Pictures a ground pattern: the tone at each pixel's centre, the ground's origin at pixel (0, 0).
pub fn picture(width: usize, height: usize, frame: LocalFrame, tone: impl Fn(f64, f64) -> f64) -> Grid<f32> {
    Grid::from_fn(width, height, |col, row| {
        let (east, north) = frame.ground(col as f64 + 0.5, row as f64 + 0.5);
        tone(east, north) as f32
    })
}
