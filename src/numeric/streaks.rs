//! Streaks along a field of axes: noise drawn out along the field, so that the eye sees it whole.
//!
//! Line integral convolution (Cabral and Leedom 1993, Computer Graphics Proceedings 263; cited from memory) of a
//! field without sense: from each pixel a walker goes both ways along the axes and of the two senses of an axis
//! takes the one it was going. What it meets of the noise, read between pixels, is averaged under a bell.
//!
//! F(x) = Σ_k h(2k) n(σ(k)), σ(0) = x, σ(k ± 1) = σ(k) ± 2a(σ(k)), h(d) = ½(1 + cos(πd/(L + 1))), d ≤ L

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Grid, Seed, Stopped, Work};

/// An axis of the coarse field; all zero where nothing is known.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct AxisCell {
    /// Cosine and sine of the doubled angle from the columns' way toward the rows', times how much the cell counts
    /// among its neighbours.
    pub cos2: f32,
    pub sin2: f32,
    /// How plainly the streaks show here, 0 to 1.
    pub fade: f32,
}

/// How streaks are drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StreakSettings {
    /// Width and height of the picture, pixels.
    pub size: [usize; 2],
    /// Pixels a cell of the field; the field begins at the picture's upper left corner.
    pub step: f64,
    /// Half the length of a streak, pixels.
    pub half_length: usize,
    /// Column and row of the noise under the picture's upper left pixel: pictures that lie side by side, or are
    /// shifted against each other, show the same noise.
    pub origin: [i64; 2],
    pub seed: Seed,
}

/// Streaks, pixel by pixel.
#[derive(Clone, Debug, PartialEq)]
pub struct Streaks {
    /// From 0 to 1 about ½.
    pub texture: Grid<f32>,
    /// How plainly it shows, 0 to 1.
    pub fade: Grid<f32>,
}

/// Noise is made by squares of so many pixels a side, each with a stream of its own.
const SQUARE: usize = 64;
/// Noise farther out than this is that of the edge.
const FARTHEST: i64 = 1 << 40;
/// Below this a pixel shows nothing and is not worked out.
const FAINTEST: f32 = 1.0 / 512.0;
/// Pixels a step: the noise is blurred so far that none of it is stepped over.
const STRIDE: usize = 2;
/// Weights of that blur, in either direction.
const BLUR: [f32; 3] = [0.25, 0.5, 0.25];
/// Correlation of noise so blurred and read between pixels over one step: the blur with itself, and with the cubic
/// B-spline that linear reading at any phase amounts to. Two steps apart there is none left.
const STRIDE_CORRELATION: f64 = 1.0 / 4.0;
/// Its variance: that of an even spread over [−1, 1), times that of the two together in either direction.
const VARIANCE: f64 = (1.0 / 3.0) * (1.0 / 3.0) * (1.0 / 3.0);

/// Draws the noise out along the field.
///
/// # Errors
/// [`Stopped`].
pub fn streaks(field: &Grid<AxisCell>, s: &StreakSettings, work: &Work) -> Result<Streaks, Stopped> {
    let [width, height] = s.size;
    if width == 0 || height == 0 {
        let nothing = || Grid::from_parts(width, height, Vec::new(), None);
        return Ok(Streaks { texture: nothing(), fade: nothing() });
    }
    // Reading between pixels and rounding may take a walker a little further.
    let rim = s.half_length + 3;
    let walk = Walk {
        steps: &steps(field, s, rim, work)?,
        noise: &blurred(s, rim, work)?,
        wide: width + 2 * rim,
        weights: weights(s.half_length),
        back: rim - 1,
    };
    let mut texture = vec![0.5f32; width * height];
    let mut fade = vec![0.0f32; width * height];
    let rows = texture.par_chunks_mut(width).zip(fade.par_chunks_mut(width)).enumerate();
    rows.try_for_each(|(row, (texture, fade))| {
        work.advance(1)?;
        let line = Line::of(field, s.step, row as f64 + 0.5);
        for (col, (texture, fade)) in texture.iter_mut().zip(fade).enumerate() {
            let shows = line.at(col as f64 + 0.5).fade;
            if shows >= FAINTEST {
                let z = walk.along(col + rim, row + rim);
                // Softly bounded: z = ±1 gives 0.85 and 0.15.
                *texture = 0.5 + 0.5 * z / (1.0 + z * z).sqrt();
                *fade = shows.min(1.0);
            }
        }
        Ok(())
    })?;
    Ok(Streaks {
        texture: Grid::from_parts(width, height, texture, None),
        fade: Grid::from_parts(width, height, fade, None),
    })
}

/// The bell at every step, scaled so that a streak has unit variance.
fn weights(half_length: usize) -> Vec<f32> {
    let last = half_length / STRIDE;
    let bell = |k: usize| {
        0.5 * (1.0 + (std::f64::consts::PI * (STRIDE * k) as f64 / (half_length + 1) as f64).cos())
    };
    let both = |k: isize| if k.unsigned_abs() > last { 0.0 } else { bell(k.unsigned_abs()) };
    let reach = last as isize;
    let pairs = |lag: isize| (-reach..=reach).map(|k| both(k) * both(k + lag)).sum::<f64>();
    let variance = VARIANCE * (pairs(0) + 2.0 * STRIDE_CORRELATION * pairs(1));
    (0..=last).map(|k| (bell(k) / variance.sqrt()) as f32).collect()
}

/// A step along the axis at every pixel, the rim included; (0, 0) where there is none.
fn steps(
    field: &Grid<AxisCell>,
    s: &StreakSettings,
    rim: usize,
    work: &Work,
) -> Result<Vec<[f32; 2]>, Stopped> {
    let [wide, high] = s.size.map(|side| side + 2 * rim);
    let mut steps = vec![[0.0; 2]; wide * high];
    steps.par_chunks_mut(wide).enumerate().try_for_each(|(row, steps)| {
        work.advance(1)?;
        let line = Line::of(field, s.step, row as f64 + 0.5 - rim as f64);
        for (col, step) in steps.iter_mut().enumerate() {
            *step = line.at(col as f64 + 0.5 - rim as f64).along();
        }
        Ok(())
    })?;
    Ok(steps)
}

/// The noise of the picture and its rim, blurred.
fn blurred(s: &StreakSettings, rim: usize, work: &Work) -> Result<Vec<f32>, Stopped> {
    let [wide, high] = s.size.map(|side| side + 2 * rim);
    let raw = noise(s, rim + 1, work)?;
    let broad = wide + 2;
    let mut blurred = vec![0.0f32; wide * high];
    blurred.par_chunks_mut(wide).enumerate().try_for_each(|(row, out)| {
        work.advance(1)?;
        let near: [&[f32]; 3] = std::array::from_fn(|k| &raw[(row + k) * broad..][..broad]);
        let down: Vec<f32> = (0..broad).map(|col| (0..3).map(|k| BLUR[k] * near[k][col]).sum()).collect();
        for (out, three) in out.iter_mut().zip(down.windows(3)) {
            *out = (0..3).map(|k| BLUR[k] * three[k]).sum();
        }
        Ok(())
    })?;
    Ok(blurred)
}

/// Even noise in [−1, 1) over the picture and its rim.
fn noise(s: &StreakSettings, rim: usize, work: &Work) -> Result<Vec<f32>, Stopped> {
    let [wide, high] = s.size.map(|side| side + 2 * rim);
    let [left, top] = s.origin.map(|at| at.clamp(-FARTHEST, FARTHEST) - rim as i64);
    let square = SQUARE as i64;
    let mut noise = vec![0.0f32; wide * high];
    // A band of squares is a task; the first one may be cut.
    let first = (square - top.rem_euclid(square)) as usize;
    let (head, rest) = noise.split_at_mut(first.min(high) * wide);
    let bands = [head].into_par_iter().chain(rest.par_chunks_mut(SQUARE * wide));
    bands.enumerate().try_for_each(|(band, rows)| {
        work.advance(1)?;
        let down = top.div_euclid(square) + band as i64;
        let skipped = if band == 0 { SQUARE - first } else { 0 };
        let across = left.div_euclid(square)..=(left + wide as i64 - 1).div_euclid(square);
        for across in across {
            let key = (across as u64) << 32 | (down as u64 & 0xFFFF_FFFF);
            let mut stream = s.seed.stream("numeric.streaks", key);
            let from = across * square - left;
            let values: Vec<f32> = (0..SQUARE * SQUARE).map(|_| stream.random_range(-1.0..1.0)).collect();
            for (row, line) in rows.chunks_mut(wide).zip(values.chunks(SQUARE).skip(skipped)) {
                let (to, cut) = (from.max(0) as usize, (-from).max(0) as usize);
                for (out, value) in row.iter_mut().skip(to).zip(&line[cut..]) {
                    *out = *value;
                }
            }
        }
        Ok(())
    })?;
    Ok(noise)
}

/// The field between two rows of its cells.
struct Line<'a> {
    rows: [&'a [AxisCell]; 2],
    share: f32,
    step: f64,
}

impl<'a> Line<'a> {
    /// At `y` pixels below the upper edge; beyond the cells the outermost goes on.
    fn of(field: &'a Grid<AxisCell>, step: f64, y: f64) -> Self {
        let (width, height) = (field.width(), field.height());
        let (low, share) = between(y / step, height);
        let row = |row: usize| &field.values()[row * width..][..width];
        let rows = if height == 0 { [&[][..]; 2] } else { [row(low), row((low + 1).min(height - 1))] };
        Self { rows, share, step }
    }

    fn at(&self, x: f64) -> AxisCell {
        let width = self.rows[0].len();
        if width == 0 {
            return AxisCell::default();
        }
        let (low, across) = between(x / self.step, width);
        let high = (low + 1).min(width - 1);
        let [upper, lower] = self.rows.map(|row| row[low].toward(row[high], across));
        upper.toward(lower, self.share)
    }
}

/// The cell before `x` (in cells, whose values stand at their middles) and the share of the next one.
fn between(x: f64, cells: usize) -> (usize, f32) {
    let at = (x - 0.5).clamp(0.0, cells.saturating_sub(1) as f64);
    (at as usize, (at - at.floor()) as f32)
}

impl AxisCell {
    /// Linear in the doubled angle, so that 179° and 1° meet at 0°.
    fn toward(self, other: Self, share: f32) -> Self {
        let mix = |a: f32, b: f32| a + share * (b - a);
        Self {
            cos2: mix(self.cos2, other.cos2),
            sin2: mix(self.sin2, other.sin2),
            fade: mix(self.fade, other.fade),
        }
    }

    /// One of the two unit steps along the axis; none where axes cancel or are unknown.
    fn along(self) -> [f32; 2] {
        let length = self.cos2.hypot(self.sin2);
        if !(length > 1e-6 && length.is_finite()) {
            return [0.0; 2];
        }
        let cos = self.cos2 / length;
        let x = (0.5 * (1.0 + cos)).max(0.0).sqrt();
        let y = (0.5 * (1.0 - cos)).max(0.0).sqrt();
        [x, if self.sin2 < 0.0 { -y } else { y }]
    }
}

/// Walkers over the ground.
struct Walk<'a> {
    steps: &'a [[f32; 2]],
    noise: &'a [f32],
    wide: usize,
    weights: Vec<f32>,
    /// Pixels to the corner that walks are counted from: farther than any walk goes.
    back: usize,
}

impl Walk<'_> {
    /// The noise along the axis at this column and row, the rim counted.
    fn along(&self, col: usize, row: usize) -> f32 {
        let here = row * self.wide + col;
        let [x, y] = self.steps[here];
        self.weights[0] * self.noise[here] + self.arm(here, [x, y]) + self.arm(here, [-x, -y])
    }

    /// What one walker meets.
    fn arm(&self, here: usize, mut last: [f32; 2]) -> f32 {
        // Counted from the start, so that the walk does not depend on where in the picture it begins.
        let (mut x, mut y) = (self.back as f32, self.back as f32);
        let start = here - self.back * (self.wide + 1);
        let mut sum = 0.0;
        for weight in &self.weights[1..] {
            x += STRIDE as f32 * last[0];
            y += STRIDE as f32 * last[1];
            // Between four middles of pixels, else an axis near the rows' would be taken for theirs.
            let (left, top) = (x as usize, y as usize);
            let (across, down) = (x - left as f32, y - top as f32);
            let at = start + top * self.wide + left;
            let (upper, lower) = (&self.noise[at..at + 2], &self.noise[at + self.wide..at + self.wide + 2]);
            let mix = |pair: &[f32]| pair[0] + across * (pair[1] - pair[0]);
            let (upper, lower) = (mix(upper), mix(lower));
            sum += weight * (upper + down * (lower - upper));
            let near = at + usize::from(across >= 0.5) + if down >= 0.5 { self.wide } else { 0 };
            let [dx, dy] = self.steps[near];
            if dx == 0.0 && dy == 0.0 {
                break;
            }
            let ahead = dx * last[0] + dy * last[1];
            last = if ahead < 0.0 { [-dx, -dy] } else { [dx, dy] };
        }
        sum
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn settings(size: [usize; 2]) -> StreakSettings {
        StreakSettings { size, step: 8.0, half_length: 12, origin: [0, 0], seed: Seed(5) }
    }

    fn field(cols: usize, rows: usize, axis: f64) -> Grid<AxisCell> {
        let (sin2, cos2) = (2.0 * axis.to_radians()).sin_cos();
        Grid::filled(cols, rows, AxisCell { cos2: cos2 as f32, sin2: sin2 as f32, fade: 1.0 })
    }

    fn drawn(field: &Grid<AxisCell>, s: &StreakSettings) -> Streaks {
        streaks(field, s, &Work::quiet()).expect("not stopped")
    }

    #[test]
    fn the_two_arms_of_a_bell_have_unit_variance_and_even_tones() {
        for axis in [0.0, 30.0, 45.0, 71.0] {
            let got = drawn(&field(50, 40, axis), &settings([400, 320]));
            let n = got.texture.len() as f64;
            let mean = got.texture.values().iter().map(|v| f64::from(*v)).sum::<f64>() / n;
            // z, before it was bounded.
            let z = |t: &f32| {
                let t = 2.0 * f64::from(*t) - 1.0;
                t / (1.0 - t * t).sqrt()
            };
            let sd = (got.texture.values().iter().map(|t| z(t).powi(2)).sum::<f64>() / n).sqrt();
            crate::assert_close!(mean, 0.5, 0.02, "mean at {axis}°");
            // The blur is not quite round, and a pixel met twice counts twice.
            crate::assert_close!(sd, 1.0, 0.15, "contrast at {axis}°");
        }
    }

    #[test]
    fn a_shifted_picture_shows_the_same_ground() {
        let s = settings([90, 70]);
        let axes = field(40, 40, 25.0);
        let (a, b) = (drawn(&axes, &s), drawn(&axes, &StreakSettings { origin: [-37, 19], ..s }));
        for (col, row) in [(0, 30), (20, 40), (44, 69)] {
            assert_eq!(a.texture.at(col, row), b.texture.at(col + 37, row - 19), "pixel {col}, {row}");
        }
    }

    #[test]
    fn where_nothing_is_known_nothing_shows() {
        let mut axes = field(10, 10, 60.0);
        for (i, cell) in axes.values_mut().iter_mut().enumerate() {
            if i % 10 >= 5 {
                *cell = AxisCell::default();
            }
        }
        let got = drawn(&axes, &settings([80, 80]));
        assert_eq!((got.fade.at(20, 40), got.fade.at(60, 40)), (1.0, 0.0));
        assert_eq!(got.texture.at(60, 40), 0.5);
        let half = got.fade.at(40, 40);
        assert!(half > 0.3 && half < 0.7, "halfway between the cells: {half}");
    }

    #[test]
    fn nothing_gives_nothing() {
        let empty = Grid::from_parts(0, 0, Vec::new(), None);
        assert!(drawn(&empty, &settings([0, 12])).texture.is_empty());
        assert!(drawn(&empty, &settings([12, 0])).fade.is_empty());
        let got = drawn(&empty, &settings([9, 7]));
        assert!(
            got.texture.values().iter().all(|v| *v == 0.5) && got.fade.values().iter().all(|v| *v == 0.0)
        );
        let broken = Grid::filled(1, 1, AxisCell { cos2: f32::NAN, sin2: 1.0, fade: 1.0 });
        assert!(drawn(&broken, &settings([9, 7])).texture.values().iter().all(|v| (0.0..=1.0).contains(v)));
        let dot = drawn(&field(1, 1, 12.0), &StreakSettings { half_length: 0, ..settings([1, 1]) });
        assert_eq!(dot.fade.at(0, 0), 1.0);
    }

    #[test]
    fn stop_is_heard() {
        let work = Work::quiet();
        work.stop();
        assert_eq!(streaks(&field(4, 4, 0.0), &settings([32, 32]), &work), Err(Stopped));
    }
}
