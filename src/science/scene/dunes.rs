//! A random dune texture with stated trend, spacing and spread: many plane waves of random phase.

use std::f64::consts::PI;

use rand::Rng;
use rand_distr::{Distribution as _, StandardNormal};

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

/// Waves of a sampled field: so many that their number adds nothing to its chance.
const MANY_WAVES: usize = 1500;

impl DuneTexture {
    /// A field with exactly the stated trend, spacing and spread: even shares of both distributions, only the
    /// phases are left to chance. `frame` turns pixels into ground.
    pub fn draw(&self, width: usize, height: usize, frame: LocalFrame, rng: &mut impl Rng) -> Grid<f32> {
        let amplitude = (2.0 / WAVES as f64).sqrt();
        let waves: Vec<Wave> = (0..WAVES)
            .map(|wave| {
                let share = (wave as f64 + 0.5) / WAVES as f64;
                let other = (share * WAVES as f64 * GOLDEN).fract().clamp(1e-4, 1.0 - 1e-4);
                Wave {
                    turn: normal_quantile(share),
                    stretch: normal_quantile(other),
                    amplitude,
                    phase: rng.random_range(0.0..2.0 * PI),
                }
            })
            .collect();
        self.superpose(&waves, width, height, frame)
    }

    /// A field drawn from the population of such fields: directions, spacings, amplitudes and phases are all
    /// left to chance, so that a finite field strays from the stated trend as nature's would. The
    /// truth an interval is held to is then the population's.
    pub fn sample(&self, width: usize, height: usize, frame: LocalFrame, rng: &mut impl Rng) -> Grid<f32> {
        let scale = (1.0 / MANY_WAVES as f64).sqrt();
        let waves: Vec<Wave> = (0..MANY_WAVES)
            .map(|_| {
                let mut normal = || -> f64 { StandardNormal.sample(rng) };
                let (turn, stretch, re, im) = (normal(), normal(), normal(), normal());
                Wave { turn, stretch, amplitude: scale * re.hypot(im), phase: im.atan2(re) }
            })
            .collect();
        self.superpose(&waves, width, height, frame)
    }

    fn superpose(&self, waves: &[Wave], width: usize, height: usize, frame: LocalFrame) -> Grid<f32> {
        let mut field = vec![0.0f64; width * height];
        for wave in waves {
            let normal = self.trend.perpendicular().rotated(self.spread_deg * wave.turn).azimuth();
            let wavenumber = 2.0 * PI / (self.spacing * (self.bandwidth * wave.stretch).exp());
            let (east, north) = normal.east_north();
            // Phase gained by one column and by one row.
            let step = |dcol: f64, drow: f64| {
                let (e, n) = frame.ground(dcol, drow);
                wavenumber * (e * east + n * north)
            };
            let (per_col, per_row) = (step(1.0, 0.0), step(0.0, 1.0));
            let (turn_sin, turn_cos) = per_col.sin_cos();
            for (row, line) in field.chunks_exact_mut(width).enumerate() {
                let (sin, cos) = (wave.phase + per_row * row as f64).sin_cos();
                let (mut re, mut im) = (wave.amplitude * cos, wave.amplitude * sin);
                for v in line {
                    *v += re;
                    (re, im) = (re * turn_cos - im * turn_sin, re * turn_sin + im * turn_cos);
                }
            }
        }
        Grid::from_parts(width, height, field.iter().map(|v| *v as f32).collect(), None)
    }
}

/// One plane wave: direction and ln spacing in standard deviations from the stated ones.
struct Wave {
    turn: f64,
    stretch: f64,
    amplitude: f64,
    phase: f64,
}
