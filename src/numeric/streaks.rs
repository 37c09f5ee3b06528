//! Streaks along a field of axes: noise drawn out along the field, so that the eye sees it whole.
//!
//! Line integral convolution (Cabral and Leedom 1993, Computer Graphics Proceedings 263; cited from memory) of a
//! field without sense: from each pixel a walker goes both ways along the axes, a pixel a step, and of the two
//! senses of an axis takes the one it was going. What it meets of the noise is averaged under a bell, and a little
//! blur afterwards makes streaks a pixel or two wide and takes out what whole pixels do to slanted walks.
//!
//! F(x) = Σ_k h_k n(σ(k)), σ(0) = x, σ(k ± 1) = σ(k) ± a(σ(k)), h_k = ½(1 + cos(πk/(L + 1))), |k| ≤ L

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

/// A pixel of the picture and of a rim round it as wide as a streak is half long.
#[derive(Clone, Copy, Default)]
struct Texel {
    /// A step along the axis; (0, 0) where there is none.
    along: [f32; 2],
    noise: f32,
}

/// Noise is made by squares of so many pixels a side, each with a stream of its own.
const SQUARE: usize = 64;
/// Noise farther out than this is that of the edge.
const FARTHEST: i64 = 1 << 40;
/// Below this a pixel shows nothing and is not worked out.
const FAINTEST: f32 = 1.0 / 512.0;
/// Weights of the little blur.
const BLUR: [f32; 3] = [0.25, 0.5, 0.25];
/// Correlation of blurred noise by distance in pixels: of [1 2 1]/4 with itself. Drawing out blurred noise and
/// blurring drawn-out noise is the same where the axis is.
const BLURRED: [f64; 3] = [1.0, 2.0 / 3.0, 1.0 / 6.0];
/// Its variance: that of an even spread over [−1, 1), times (Σ w²)² of the blur.
const VARIANCE: f64 = (1.0 / 3.0) * (6.0 / 16.0) * (6.0 / 16.0);

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
    // The blur wants a pixel more on each side, and rounding may take a walker one further.
    let rim = s.half_length + 3;
    let walk = Walk {
        texels: &ground(field, s, rim, work)?,
        wide: width + 2 * rim,
        weights: weights(s.half_length),
    };
    let broad = width + 2;
    let mut drawn = vec![0.0f32; broad * (height + 2)];
    drawn.par_chunks_mut(broad).enumerate().try_for_each(|(row, drawn)| {
        work.advance(1)?;
        let line = Line::of(field, s.step, row as f64 - 0.5);
        for (col, drawn) in drawn.iter_mut().enumerate() {
            if line.at(col as f64 - 0.5).fade >= FAINTEST {
                *drawn = walk.along(col + rim - 1, row + rim - 1);
            }
        }
        Ok(())
    })?;
    let mut texture = vec![0.5f32; width * height];
    let mut fade = vec![0.0f32; width * height];
    let rows = texture.par_chunks_mut(width).zip(fade.par_chunks_mut(width)).enumerate();
    rows.try_for_each(|(row, (texture, fade))| {
        work.advance(1)?;
        let line = Line::of(field, s.step, row as f64 + 0.5);
        let near: [&[f32]; 3] = std::array::from_fn(|k| &drawn[(row + k) * broad..][..broad]);
        for (col, (texture, fade)) in texture.iter_mut().zip(fade).enumerate() {
            let shows = line.at(col as f64 + 0.5).fade;
            if shows >= FAINTEST {
                let across = |row: &[f32]| (0..3).map(|k| BLUR[k] * row[col + k]).sum::<f32>();
                let z = (0..3).map(|k| BLUR[k] * across(near[k])).sum::<f32>();
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

/// The bell h_0 … h_L, scaled so that a streak has unit variance.
fn weights(half_length: usize) -> Vec<f32> {
    let bell = |k: usize| 0.5 * (1.0 + (std::f64::consts::PI * k as f64 / (half_length + 1) as f64).cos());
    let signed = |k: isize| if k.unsigned_abs() > half_length { 0.0 } else { bell(k.unsigned_abs()) };
    let reach = half_length as isize;
    let pairs = |lag: isize| (-reach..=reach).map(|k| signed(k) * signed(k + lag)).sum::<f64>();
    let variance = VARIANCE
        * (0..3)
            .map(|lag| BLURRED[lag] * pairs(lag as isize) * if lag == 0 { 1.0 } else { 2.0 })
            .sum::<f64>();
    (0..=half_length).map(|k| (bell(k) / variance.sqrt()) as f32).collect()
}

/// Steps and noise of every pixel, the rim included.
fn ground(
    field: &Grid<AxisCell>,
    s: &StreakSettings,
    rim: usize,
    work: &Work,
) -> Result<Vec<Texel>, Stopped> {
    let [wide, high] = s.size.map(|side| side + 2 * rim);
    let noise = noise(s, rim, work)?;
    let mut texels = vec![Texel::default(); wide * high];
    texels.par_chunks_mut(wide).enumerate().try_for_each(|(row, texels)| {
        work.advance(1)?;
        let line = Line::of(field, s.step, row as f64 + 0.5 - rim as f64);
        let noise = &noise[row * wide..][..wide];
        for (col, (texel, noise)) in texels.iter_mut().zip(noise).enumerate() {
            let cell = line.at(col as f64 + 0.5 - rim as f64);
            *texel = Texel { along: cell.along(), noise: *noise };
        }
        Ok(())
    })?;
    Ok(texels)
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
    texels: &'a [Texel],
    wide: usize,
    weights: Vec<f32>,
}

impl Walk<'_> {
    /// The noise along the axis at this column and row, the rim counted.
    fn along(&self, col: usize, row: usize) -> f32 {
        let here = self.texels[row * self.wide + col];
        let [x, y] = here.along;
        self.weights[0] * here.noise + self.arm(col, row, [x, y]) + self.arm(col, row, [-x, -y])
    }

    /// What one walker meets.
    fn arm(&self, col: usize, row: usize, mut last: [f32; 2]) -> f32 {
        let (mut x, mut y) = (col as f32 + 0.5, row as f32 + 0.5);
        let mut sum = 0.0;
        for weight in &self.weights[1..] {
            x += last[0];
            y += last[1];
            let texel = self.texels[y as usize * self.wide + x as usize];
            sum += weight * texel.noise;
            let [dx, dy] = texel.along;
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
