//! Crest lines of known place, drawn as ridges of tone or as slip faces: straight, wavy, forked, ending.

use crate::ground::{Grid, Point, Polyline};

/// How a crest shows.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum CrestShading {
    /// A bright bar with a Gaussian profile of this standard deviation, pixels.
    Ridge { width: f64 },
    /// A step blurred by this standard deviation, pixels, dark below the crest (greater y), that fades back
    /// over the spacing on both sides.
    SlipFace { blur: f64 },
}

/// A field of crests that run from left to right, spaced evenly, about wavy axes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CrestScene {
    pub width: usize,
    pub height: usize,
    /// Crest to crest, pixels.
    pub spacing: f64,
    /// Swing of the crests about their axes and its wavelength, pixels.
    pub swing: f64,
    pub wavelength: f64,
    /// Every so many crests one ends inside; 0 for none.
    pub ending_every: usize,
    /// Every so many crests one forks, and the branch takes the place of the next crest; 0 for none.
    pub forking_every: usize,
    pub shading: CrestShading,
    /// Tone of plain ground, and what crests add to it at most.
    pub ground: f64,
    pub contrast: f64,
}

/// The truth of a scene.
#[derive(Clone, Debug, PartialEq)]
pub struct CrestTruth {
    pub lines: Vec<Polyline>,
    /// Free ends inside the picture.
    pub ends: Vec<Point>,
    pub forks: Vec<Point>,
}

/// Pixels from vertex to vertex of a true line.
const STEP: f64 = 1.0;

impl CrestScene {
    /// Where crest `n` runs at column `x`.
    fn axis(&self, n: usize, x: f64) -> f64 {
        let wave = std::f64::consts::TAU * x / self.wavelength.max(1.0);
        (n as f64 + 1.0) * self.spacing + self.swing * wave.sin()
    }

    /// The lines, ends and forks.
    pub fn truth(&self) -> CrestTruth {
        let count = ((self.height as f64 / self.spacing).floor() as usize).saturating_sub(1);
        let is = |n: usize, every: usize, phase: usize| every > 0 && n % every == phase % every;
        let width = self.width as f64;
        let mut truth = CrestTruth { lines: Vec::new(), ends: Vec::new(), forks: Vec::new() };
        let run = |from: f64, to: f64, y: &dyn Fn(f64) -> f64| {
            let steps = ((to - from) / STEP).ceil().max(1.0) as usize;
            let x = |i: usize| from + (to - from) * i as f64 / steps as f64;
            Polyline((0..=steps).map(|i| Point::new(x(i), y(x(i)))).collect())
        };
        for n in 0..count {
            let forks = is(n, self.forking_every, 2) && n + 1 < count;
            if n > 0 && is(n - 1, self.forking_every, 2) {
                continue;
            }
            if is(n, self.ending_every, 1) {
                // Two crests that miss each other: a pair of ends two spacings apart.
                let middle = width * (0.35 + 0.1 * (n % 4) as f64);
                let (left, right) = (middle - self.spacing, middle + self.spacing);
                truth.lines.push(run(0.0, left, &|x| self.axis(n, x)));
                truth.lines.push(run(right, width, &|x| self.axis(n, x)));
                truth.ends.push(Point::new(left, self.axis(n, left)));
                truth.ends.push(Point::new(right, self.axis(n, right)));
            } else {
                truth.lines.push(run(0.0, width, &|x| self.axis(n, x)));
            }
            if forks {
                let from = width * (0.3 + 0.1 * (n % 3) as f64);
                // Leaves its stem at 45° and bends to run beside it.
                let apart = |x: f64| self.spacing * (1.0 - (-(x - from) / self.spacing).exp());
                truth.lines.push(run(from, width, &|x| self.axis(n, x) + apart(x)));
                truth.forks.push(Point::new(from, self.axis(n, from)));
            }
        }
        truth
    }

    /// The picture without noise. A slip face belongs to the nearest crest.
    pub fn draw(&self, truth: &CrestTruth) -> Grid<f32> {
        let reach = self.spacing;
        let (mut nearest, mut below) =
            (vec![f64::INFINITY; self.width * self.height], vec![0.0f64; self.width * self.height]);
        for w in truth.lines.iter().flat_map(|line| line.0.windows(2)) {
            let rows = |y: f64| (y.clamp(0.0, self.height as f64)) as usize;
            let cols = |x: f64| (x.clamp(0.0, self.width as f64)) as usize;
            for row in rows(w[0].y.min(w[1].y) - reach)..rows(w[0].y.max(w[1].y) + reach + 1.0) {
                for col in cols(w[0].x.min(w[1].x) - reach)..cols(w[0].x.max(w[1].x) + reach + 1.0) {
                    let p = Point::new(col as f64 + 0.5, row as f64 + 0.5);
                    let (dx, dy) = (w[1].x - w[0].x, w[1].y - w[0].y);
                    let (x, y) = (p.x - w[0].x, p.y - w[0].y);
                    let t = ((x * dx + y * dy) / (dx * dx + dy * dy)).clamp(0.0, 1.0);
                    let distance = (x - t * dx).hypot(y - t * dy);
                    let i = row * self.width + col;
                    if distance < nearest[i] {
                        nearest[i] = distance;
                        // Sine of the angle past an end, so that no step goes on there; ±1 beside the line.
                        below[i] = (dx * y - dy * x) / dx.hypot(dy) / distance.max(1e-9);
                    }
                }
            }
        }
        let tone = |i: usize| match self.shading {
            CrestShading::Ridge { width } => (-0.5 * (nearest[i] / width).powi(2)).exp(),
            CrestShading::SlipFace { blur } => {
                let away = (-nearest[i] / (0.4 * self.spacing)).exp();
                let step = (nearest[i] / blur).tanh();
                -below[i] * step * away
            }
        };
        Grid::from_fn(self.width, self.height, |col, row| {
            let i = row * self.width + col;
            let shape = if nearest[i].is_finite() { tone(i) } else { 0.0 };
            (self.ground + self.contrast * shape) as f32
        })
    }
}
