//! A random dune texture with stated trend, spacing and spread: many plane waves of random phase.

use std::f64::consts::PI;

use rand::Rng;
use rand_distr::{Distribution as _, StandardNormal};

use crate::ground::{Axis, Grid, LocalFrame};

/// What the texture is like on average.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DuneTexture {
    pub trend: Axis,
    /// Ground units.
    pub spacing: f64,
    /// Standard deviation of the waves' trends, degrees.
    pub spread_deg: f64,
    /// Standard deviation of the waves' ln spacing.
    pub bandwidth: f64,
}

/// Waves; enough for a nearly Gaussian field.
const WAVES: usize = 300;

impl DuneTexture {
    /// One field of zero mean and unit variance on average.
    pub fn draw(&self, width: usize, height: usize, frame: LocalFrame, rng: &mut impl Rng) -> Grid<f32> {
        let mut field = vec![0.0f64; width * height];
        let amplitude = (2.0 / WAVES as f64).sqrt();
        for _ in 0..WAVES {
            let turn: f64 = StandardNormal.sample(rng);
            let stretch: f64 = StandardNormal.sample(rng);
            let normal = self.trend.perpendicular().rotated(self.spread_deg * turn).azimuth();
            let wavenumber = 2.0 * PI / (self.spacing * (self.bandwidth * stretch).exp());
            let (east, north) = normal.east_north();
            // Phase gained by one column and by one row.
            let step = |dcol: f64, drow: f64| {
                let (e, n) = frame.ground(dcol, drow);
                wavenumber * (e * east + n * north)
            };
            let (per_col, per_row) = (step(1.0, 0.0), step(0.0, 1.0));
            let phase = rng.random_range(0.0..2.0 * PI);
            let (turn_sin, turn_cos) = per_col.sin_cos();
            for (row, line) in field.chunks_exact_mut(width).enumerate() {
                let (sin, cos) = (phase + per_row * row as f64).sin_cos();
                let (mut re, mut im) = (amplitude * cos, amplitude * sin);
                for v in line {
                    *v += re;
                    (re, im) = (re * turn_cos - im * turn_sin, re * turn_sin + im * turn_cos);
                }
            }
        }
        Grid::from_parts(width, height, field.iter().map(|v| *v as f32).collect(), None)
    }
}
