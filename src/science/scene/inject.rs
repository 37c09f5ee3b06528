//! Bedforms of known trend, spacing, height and defects, as a relief and as the tone it has under a light.

use std::f64::consts::{PI, TAU};

use multiversion::multiversion;
use rand::Rng;
use rustfft::num_complex::Complex64;

use crate::ground::{Axis, Azimuth, Grid, LocalFrame, Method, Read, Source, Stopped, Symbol, Work};
use crate::numeric::tail::normal_quantile;

/// The record of the bedforms.
pub static METHOD: Method = Method {
    id: "scene.bedforms",
    name: "Bedforms laid in",
    question: "What would bedforms of a known trend look like here?",
    formula: "Z = Σ e^{i(k·x + phase)},  k = 2π/λ ((1 + b X) across + s Y along the trend);  u = Z/√(|Z|² + q²);  h = H Re Σ 2cₙuⁿ;  d = 2π b s;  tone = t (−∇h · toward light)",
    symbols: &[
        Symbol { symbol: "λ, H", meaning: "crest to crest, and height", unit: "m" },
        Symbol { symbol: "s", meaning: "spread of the crests' trends, as a slope", unit: "1" },
        Symbol { symbol: "b", meaning: "relative spread of their wave numbers", unit: "1" },
        Symbol { symbol: "X, Y", meaning: "even shares of a normal distribution", unit: "1" },
        Symbol { symbol: "d", meaning: "free ends times spacing over crest length", unit: "1" },
        Symbol {
            symbol: "cₙ",
            meaning: "Fourier series of a profile that rises over seven tenths and falls over three, first four terms",
            unit: "1",
        },
        Symbol { symbol: "q", meaning: "0.15: height fades where a crest ends", unit: "1" },
        Symbol { symbol: "t", meaning: "tone, or ln of intensity, that a slope of one adds", unit: "1" },
    ],
    assumptions: &[
        "crests end where the phase of a random wave field has a singularity: √(⟨δk²⟩ ⟨δk′²⟩)/2π of them per area",
        "tone is proportional to the slope toward the light, to first order",
    ],
    limits: &[
        "no shadow, no layover, no saturation: steep faces of real bedforms show brighter or not at all",
        "more ends than the spacing's own spread of 0.3 holds come from a wider spread of trends",
        "spacings below five pixels keep one term of the profile only",
    ],
    sources: &[
        Source {
            key: "berry2000",
            authors: "Berry, M. V.; Dennis, M. R.",
            year: 2000,
            title: "Phase singularities in isotropic random waves",
            published: "Proceedings of the Royal Society A 456, 2059",
            locator: "density of singularities",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-bedforms",
            authors: "this program",
            year: 2026,
            title: "Defect density of a narrow band of waves",
            published: "derived from the density of phase singularities, checked by counting them",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Waves of a field; enough for phases that stray like those of a Gaussian one.
const WAVES: usize = 48;
/// Steps of the golden section spread evenly whatever their number.
const GOLDEN: f64 = 0.618_033_988_749_894_9;
/// Share of a spacing over which the gentle side rises.
const STOSS: f64 = 0.7;
/// Terms of the profile's series, and the highest frequency drawn, cycles per pixel.
const TERMS: usize = 4;
const HIGHEST: f64 = 0.45;
/// |Z| at which height has begun to fade.
const FADE: f64 = 0.15;
/// Greatest relative spread of wave numbers.
const WIDEST: f64 = 0.3;

/// What the bedforms are like. Lengths in one unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bedforms {
    pub trend: Axis,
    /// Crest to crest.
    pub spacing: f64,
    /// Trough to crest.
    pub height: f64,
    /// Standard deviation of the crests' trends at least, degrees.
    pub spread_deg: f64,
    /// Free ends times spacing over crest length.
    pub defects: f64,
    /// The steep side faces trend + 90°, not − 90°.
    pub lee_clockwise: bool,
}

/// Bedforms on a grid.
#[derive(Clone, Debug, PartialEq)]
pub struct Laid {
    /// Height about its mean, in the unit of lengths.
    pub relief: Grid<f32>,
    /// Slope toward the light, 1 at 45°; without a light 2π·relief/spacing, the same for every trend.
    pub slope: Grid<f32>,
}

/// One wave: steps of its phase, and its wave number toward the light.
struct Wave {
    start: f64,
    per_col: f64,
    per_row: f64,
    toward_light: f64,
}

impl Wave {
    /// cos and sin of the phase gained along a row.
    fn along(&self, width: usize) -> [Vec<f32>; 2] {
        let phase = |col: usize| self.per_col * col as f64;
        [
            (0..width).map(|c| phase(c).cos() as f32).collect(),
            (0..width).map(|c| phase(c).sin() as f32).collect(),
        ]
    }
}

/// Adds e^{i (along + down)}, and k times it, column by column.
#[multiversion(targets("x86_64+avx2", "x86_64+avx"))]
fn add_wave(
    re: &mut [f32],
    im: &mut [f32],
    k_re: &mut [f32],
    k_im: &mut [f32],
    cos: &[f32],
    sin: &[f32],
    down: [f32; 3],
) {
    let [down_cos, down_sin, k] = down;
    let n = re.len();
    let (im, k_re, k_im) = (&mut im[..n], &mut k_re[..n], &mut k_im[..n]);
    let (cos, sin) = (&cos[..n], &sin[..n]);
    for c in 0..n {
        let x = cos[c] * down_cos - sin[c] * down_sin;
        let y = cos[c] * down_sin + sin[c] * down_cos;
        re[c] += x;
        im[c] += y;
        k_re[c] += k * x;
        k_im[c] += k * y;
    }
}

impl Bedforms {
    /// (s, b): spread of wave numbers along the trend and across it, over 2π/λ, that gives the stated defects:
    /// d = 2π b s.
    fn spreads(&self) -> (f64, f64) {
        let s = self.spread_deg.clamp(0.1, 60.0).to_radians().tan();
        let b = self.defects.max(0.0) / (TAU * s);
        if b <= WIDEST { (s, b) } else { (self.defects / (TAU * WIDEST), WIDEST) }
    }

    /// Standard deviation of the crests' trends as laid in, degrees.
    pub fn spread_laid_deg(&self) -> f64 {
        self.spreads().0.atan().to_degrees()
    }

    fn waves(
        &self,
        size: [usize; 2],
        frame: LocalFrame,
        light: Option<Azimuth>,
        rng: &mut impl Rng,
    ) -> Vec<Wave> {
        let (spread, bandwidth) = self.spreads();
        let sense = if self.lee_clockwise { 90.0 } else { -90.0 };
        let along = self.trend.azimuth().east_north();
        let across = self.trend.azimuth().rotated(sense).east_north();
        let from = light.map(Azimuth::east_north);
        (0..WAVES)
            .map(|i| {
                let share = (i as f64 + 0.5) / WAVES as f64;
                let other = (share * WAVES as f64 * GOLDEN).fract().clamp(1e-4, 1.0 - 1e-4);
                let [x, y] = [1.0 + bandwidth * normal_quantile(other), spread * normal_quantile(share)];
                let k = TAU / self.spacing;
                let (east, north) = (k * (x * across.0 + y * along.0), k * (x * across.1 + y * along.1));
                let step = |dcol: f64, drow: f64| {
                    let (e, n) = frame.ground(dcol, drow);
                    e * east + n * north
                };
                let (per_col, per_row) = (step(1.0, 0.0), step(0.0, 1.0));
                // Phases belong to the middle, so that a turned grid shows the turned field.
                let middle = size.map(|n| 0.5 * (n as f64 - 1.0));
                Wave {
                    start: rng.random_range(0.0..TAU) - per_col * middle[0] - per_row * middle[1],
                    per_col,
                    per_row,
                    toward_light: from.map_or(0.0, |(e, n)| e * east + n * north),
                }
            })
            .collect()
    }

    /// The bedforms on a grid whose pixel steps `frame` turns into ground.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn lay(
        &self,
        size: [usize; 2],
        frame: LocalFrame,
        light: Option<Azimuth>,
        rng: &mut impl Rng,
        work: &Work,
    ) -> Result<Laid, Stopped> {
        let [width, height] = size;
        let waves = self.waves(size, frame, light, rng);
        let profile = self.profile(frame);
        let (mut relief, mut slope) =
            (Vec::with_capacity(width * height), Vec::with_capacity(width * height));
        // e^{i phase} is a product of a part along the row and one down the columns.
        let along: Vec<[Vec<f32>; 2]> = waves.iter().map(|wave| wave.along(width)).collect();
        let mut sums = [const { Vec::new() }; 4];
        for row in 0..height {
            sums.iter_mut().for_each(|sum| {
                sum.clear();
                sum.resize(width, 0.0f32);
            });
            let [re, im, k_re, k_im] = &mut sums;
            for (wave, [cos, sin]) in waves.iter().zip(&along) {
                let (down_sin, down_cos) = (wave.start + wave.per_row * row as f64).sin_cos();
                let down = [down_cos as f32, down_sin as f32, wave.toward_light as f32];
                add_wave(re, im, k_re, k_im, cos, sin, down);
            }
            let scale = 1.0 / (WAVES as f64).sqrt();
            for col in 0..width {
                let [re, im, k_re, k_im] = sums.each_ref().map(|sum| scale * f64::from(sum[col]));
                // dZ = i Σ (k · toward light) e^{i…}.
                let (h, rise) = self.height_at(Complex64::new(re, im), Complex64::new(-k_im, k_re), &profile);
                relief.push(h as f32);
                slope.push(if light.is_some() { -rise } else { TAU * h / self.spacing } as f32);
            }
            work.advance(0)?;
        }
        let grid = |values| Grid::from_parts(width, height, values, None);
        Ok(Laid { relief: grid(relief), slope: grid(slope) })
    }

    /// Height and its rise toward the light: u = Z/√(|Z|² + q²), h = H Re Σ 2cₙuⁿ.
    fn height_at(&self, z: Complex64, dz: Complex64, profile: &[Complex64]) -> (f64, f64) {
        let fade = 1.0 / (z.norm_sqr() + FADE * FADE).sqrt();
        let u = z * fade;
        let du = dz * fade - z * ((z.conj() * dz).re * fade.powi(3));
        let (mut power, mut h, mut rise) = (Complex64::new(1.0, 0.0), 0.0, 0.0);
        for (n, c) in (1..).zip(profile) {
            rise += 2.0 * (f64::from(n) * c * power * du).re;
            power *= u;
            h += 2.0 * (c * power).re;
        }
        (self.height * h, self.height * rise)
    }

    /// cₙ of the profile: (1 − e^{−2πina})/((2πin)² a (1 − a)), smoothed so that the cut series does not ring.
    fn profile(&self, frame: LocalFrame) -> Vec<Complex64> {
        let coarse = frame.pixel_size().into_iter().fold(0.0, f64::max);
        let terms = ((HIGHEST * self.spacing / coarse).floor() as usize).clamp(1, TERMS);
        let series: Vec<Complex64> = (1..=terms)
            .map(|n| {
                let n = n as f64;
                let turn = Complex64::new(0.0, TAU * n);
                let x = PI * n / (TERMS + 1) as f64;
                (1.0 - (-turn * STOSS).exp()) / (turn * turn * STOSS * (1.0 - STOSS)) * (x.sin() / x)
            })
            .collect();
        // What smoothing took from the height is given back.
        let at = |share: f64| -> f64 {
            let terms = (1..).zip(&series);
            terms.map(|(n, c)| 2.0 * (c * Complex64::from_polar(1.0, TAU * f64::from(n) * share)).re).sum()
        };
        let heights = || (0..64).map(|i| at(f64::from(i) / 64.0));
        let range = heights().fold(f64::MIN, f64::max) - heights().fold(f64::MAX, f64::min);
        series.into_iter().map(|c| c / range).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;
    use crate::ground::Seed;

    const FRAME: LocalFrame =
        LocalFrame { east_per_col: 1.0, east_per_row: 0.0, north_per_col: 0.0, north_per_row: -1.0 };

    fn bedforms(defects: f64) -> Bedforms {
        Bedforms {
            trend: Axis::from_deg(30.0),
            spacing: 12.0,
            height: 0.6,
            spread_deg: 10.0,
            defects,
            lee_clockwise: true,
        }
    }

    fn lay(bedforms: Bedforms, light: Option<f64>) -> Laid {
        let light = light.map(Azimuth::from_deg);
        bedforms.lay([240, 200], FRAME, light, &mut Seed(3).stream("test", 0), &Work::quiet()).unwrap()
    }

    #[test]
    fn straight_bedforms_have_their_height_and_their_steep_side_where_stated() {
        let straight =
            Bedforms { spread_deg: 0.1, defects: 0.0, trend: Axis::from_deg(0.0), ..bedforms(0.0) };
        let laid = lay(Bedforms { spacing: 60.0, ..straight }, Some(90.0));
        let (low, high) = laid
            .relief
            .values()
            .iter()
            .fold((f32::MAX, f32::MIN), |(low, high), v| (low.min(*v), high.max(*v)));
        assert_close!(f64::from(high - low), 0.6, 0.06, "height");
        // Steep toward 90°: light from there finds steeper slopes than the gentle side has.
        let steepest = laid.slope.values().iter().fold(f32::MIN, |m, v| m.max(*v));
        let gentlest = laid.slope.values().iter().fold(f32::MAX, |m, v| m.min(*v));
        assert!(steepest > -1.5 * gentlest, "{steepest} and {gentlest}");
    }

    #[test]
    fn the_slope_is_that_of_the_relief() {
        // So wide that differences follow every term of the profile.
        let laid = lay(Bedforms { spacing: 36.0, ..bedforms(0.3) }, Some(200.0));
        let (e, n) = Azimuth::from_deg(200.0).east_north();
        let at = |c: usize, r: usize| f64::from(laid.relief.at(c, r));
        let (mut error, mut size) = (0.0, 0.0);
        for row in 2..198usize {
            for col in 2..238usize {
                // Fourth-order differences.
                let d = |f: &dyn Fn(isize) -> f64| (8.0 * (f(1) - f(-1)) - (f(2) - f(-2))) / 12.0;
                let per_col = d(&|i| at(col.wrapping_add_signed(i), row));
                let per_row = d(&|i| at(col, row.wrapping_add_signed(i)));
                let (east, north) = FRAME.gradient(per_col, per_row);
                let want = -(east * e + north * n);
                error += (f64::from(laid.slope.at(col, row)) - want).powi(2);
                size += want * want;
            }
        }
        assert!((error / size).sqrt() < 0.08, "{}", (error / size).sqrt());
    }

    #[test]
    fn free_ends_are_as_many_as_stated() {
        // Singularities of the phase counted by its winding round every pixel, the mean wave taken out so that no
        // step between pixels wraps of itself.
        for defects in [0.05, 0.1, 0.4] {
            let (mut ends, mut area) = (0.0, 0.0);
            for index in 0..6 {
                let b = bedforms(defects);
                let size = [300, 300];
                let waves = b.waves(size, FRAME, None, &mut Seed(9).stream("test", index));
                let mean = |step: fn(&Wave) -> f64| waves.iter().map(step).sum::<f64>() / WAVES as f64;
                let (per_col, per_row) = (mean(|w| w.per_col), mean(|w| w.per_row));
                let phase = |c: usize, r: usize| {
                    let z = waves.iter().fold(Complex64::default(), |z, w| {
                        z + Complex64::from_polar(
                            1.0,
                            w.start + (w.per_col - per_col) * c as f64 + (w.per_row - per_row) * r as f64,
                        )
                    });
                    z.arg()
                };
                let phases = Grid::from_fn(300, 300, phase);
                for r in 0..299 {
                    for c in 0..299 {
                        let ring = [(c, r), (c + 1, r), (c + 1, r + 1), (c, r + 1), (c, r)];
                        let turn: f64 = ring
                            .windows(2)
                            .map(|w| {
                                let d = phases.at(w[1].0, w[1].1) - phases.at(w[0].0, w[0].1);
                                d - TAU * (d / TAU).round()
                            })
                            .sum();
                        ends += f64::from(turn.abs() > 1.0);
                    }
                }
                area += 299.0 * 299.0;
            }
            // Crest length is area over spacing.
            let found = ends * 12.0 * 12.0 / area;
            println!("free ends: got {found:.3}, want {defects}");
            assert_close!(found / defects, 1.0, 0.15, "defects");
        }
    }

    #[test]
    fn without_a_light_tone_is_alike_for_all_trends() {
        let rms = |deg: f64| {
            let laid = lay(Bedforms { trend: Axis::from_deg(deg), ..bedforms(0.1) }, None);
            let n = laid.slope.len() as f64;
            (laid.slope.values().iter().map(|v| f64::from(*v).powi(2)).sum::<f64>() / n).sqrt()
        };
        assert_close!(rms(10.0) / rms(100.0), 1.0, 0.05, "tone");
    }
}
