//! Smooth random fields: sums of plane waves of one typical length.

use std::f64::consts::TAU;

use rand::Rng as _;

use crate::ground::{Grid, Point, Seed};

/// A stationary random field with mean 0 and standard deviation 1, smooth over `length`.
pub struct SmoothField {
    waves: Vec<Wave>,
    amplitude: f64,
}

struct Wave {
    kx: f64,
    ky: f64,
    phase: f64,
}

const WAVES: usize = 24;

impl SmoothField {
    /// Waves of length between 0.7 and 1.8 times `length`, in the unit of the points asked for.
    pub fn new(length: f64, seed: Seed) -> Self {
        let mut random = seed.stream("scene.smooth-field", 0);
        let waves = (0..WAVES)
            .map(|_| {
                let k = TAU / (length * random.random_range(0.7..1.8));
                let (sin, cos) = random.random_range(0.0..TAU).sin_cos();
                Wave { kx: k * cos, ky: k * sin, phase: random.random_range(0.0..TAU) }
            })
            .collect();
        Self { waves, amplitude: (2.0 / WAVES as f64).sqrt() }
    }

    pub fn at(&self, p: Point) -> f64 {
        self.amplitude * self.waves.iter().map(|w| (w.kx * p.x + w.ky * p.y + w.phase).cos()).sum::<f64>()
    }

    /// The field sampled every `step` over `width` × `height`, for scenes with a million pixels; with
    /// `step` below a twentieth of the shortest wave, linear interpolation errs by under 2 %.
    pub fn sampled(&self, width: f64, height: f64, step: f64) -> SampledField {
        let count = |side: f64| (side / step).ceil() as usize + 2;
        let at = |col: usize, row: usize| self.at(Point::new(col as f64 * step, row as f64 * step));
        SampledField { values: Grid::from_fn(count(width), count(height), at), step }
    }
}

/// A smooth field on a lattice.
pub struct SampledField {
    values: Grid<f64>,
    step: f64,
}

impl SampledField {
    /// Linear between lattice points; points outside take the value of the edge.
    pub fn at(&self, p: Point) -> f64 {
        let split = |x: f64, n: usize| {
            let x = (x / self.step).clamp(0.0, (n - 1) as f64 - 1e-9);
            (x as usize, x.fract())
        };
        let (col, u) = split(p.x, self.values.width());
        let (row, v) = split(p.y, self.values.height());
        let mix = |row: usize| self.values.at(col, row) * (1.0 - u) + self.values.at(col + 1, row) * u;
        mix(row) * (1.0 - v) + mix(row + 1) * v
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_smooth_field_has_unit_variance_over_a_wide_area() {
        let field = SmoothField::new(5.0, Seed(3));
        let values: Vec<f64> = (0..40_000)
            .map(|i| field.at(Point::new((i % 200) as f64 * 2.0, (i / 200) as f64 * 2.0)))
            .collect();
        let variance = values.iter().map(|v| v * v).sum::<f64>() / values.len() as f64;
        crate::assert_close!(variance, 1.0, 0.1, "variance");
    }
}
