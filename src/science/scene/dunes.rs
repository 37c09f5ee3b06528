//! A random dune texture with stated trend, spacing and spread: many plane waves of random phase.

use std::f64::consts::PI;

use rand::Rng;

use crate::ground::{Axis, Grid, LocalFrame};
use crate::numeric::tail::normal_quantile;

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

/// Steps of the golden section spread evenly whatever their number.
const GOLDEN: f64 = 0.618_033_988_749_894_9;

/// Waves; enough for a nearly Gaussian field.
const WAVES: usize = 300;

impl DuneTexture {
    /// One field of zero mean and unit variance on average.
    pub fn draw(&self, width: usize, height: usize, frame: LocalFrame, rng: &mut impl Rng) -> Grid<f32> {
        let mut field = vec![0.0f64; width * height];
        let amplitude = (2.0 / WAVES as f64).sqrt();
        for wave in 0..WAVES {
            // Even shares of both distributions, so that every field has the stated trend and spacing; only
            // the phases are left to chance.
            let share = (wave as f64 + 0.5) / WAVES as f64;
            let turn = normal_quantile(share);
            let stretch = normal_quantile((share * WAVES as f64 * GOLDEN).fract().clamp(1e-4, 1.0 - 1e-4));
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
