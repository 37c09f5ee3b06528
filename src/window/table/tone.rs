//! Values to colours: percentile stretch, gamma, inversion.

use egui::{Color32, ColorImage};

use crate::ground::Grid;
use crate::study::Tone;

/// Darkest and lightest tone of a raster: warm ink and warm paper.
const INK: [f32; 3] = [16.0, 14.0, 12.0];
const PAPER: [f32; 3] = [253.0, 250.0, 244.0];
/// Steps between them.
const STEPS: usize = 1024;

/// Sorted values the percentiles are read from.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ToneSample {
    sorted: Vec<f32>,
}

/// A tone made ready for one raster.
#[derive(Clone, Debug)]
pub struct ToneCurve {
    low: f32,
    per_value: f32,
    colors: Vec<Color32>,
}

impl ToneSample {
    /// Takes the finite valid values of `grids`, thinned to about `limit`.
    pub fn of<'a>(grids: impl Iterator<Item = &'a Grid<f32>> + Clone, limit: usize) -> Self {
        let total: usize = grids.clone().map(Grid::len).sum();
        let every = total.div_ceil(limit.max(1)).max(1);
        // Whole rows times an odd step would line up with the columns; a prime-ish walk does not.
        let mut sorted: Vec<f32> =
            grids.flat_map(|grid| grid.valid_values().filter(|v| v.is_finite()).step_by(every)).collect();
        sorted.sort_unstable_by(f32::total_cmp);
        Self { sorted }
    }

    pub fn is_empty(&self) -> bool {
        self.sorted.is_empty()
    }

    /// The value below which `percent` of the sample lies, between neighbours linearly.
    fn percentile(&self, percent: f64) -> Option<f32> {
        let last = self.sorted.len().checked_sub(1)?;
        let at = (percent / 100.0).clamp(0.0, 1.0) * last as f64;
        let (low, high) = (self.sorted[at.floor() as usize], self.sorted[at.ceil() as usize]);
        Some(low + (high - low) * at.fract() as f32)
    }
}

impl ToneCurve {
    pub fn new(tone: &Tone, sample: &ToneSample) -> Self {
        let low = sample.percentile(tone.low_percent).unwrap_or(0.0);
        let high = sample.percentile(tone.high_percent).unwrap_or(1.0);
        // A flat raster is shown in mid tone, not as noise.
        let (low, width) = if high > low { (low, high - low) } else { (low - 0.5, 1.0) };
        let colors = (0..=STEPS)
            .map(|i| {
                let t = (i as f64 / STEPS as f64).powf(1.0 / tone.gamma.max(0.01)) as f32;
                let t = if tone.inverted { 1.0 - t } else { t };
                let [r, g, b] = std::array::from_fn(|c| (INK[c] + (PAPER[c] - INK[c]) * t).round() as u8);
                Color32::from_rgb(r, g, b)
            })
            .collect();
        Self { low, per_value: STEPS as f32 / width, colors }
    }

    /// The colour of a value; transparent when it is not a number.
    pub fn color(&self, value: f32) -> Color32 {
        if value.is_nan() {
            return Color32::TRANSPARENT;
        }
        let step = ((value - self.low) * self.per_value).clamp(0.0, STEPS as f32);
        self.colors[(step + 0.5) as usize]
    }

    /// A tile in colours; missing values are transparent.
    pub fn image(&self, tile: &Grid<f32>) -> ColorImage {
        let mut pixels: Vec<Color32> = tile.values().iter().map(|v| self.color(*v)).collect();
        if let Some(mask) = tile.mask() {
            for (pixel, valid) in pixels.iter_mut().zip(mask) {
                if !valid {
                    *pixel = Color32::TRANSPARENT;
                }
            }
        }
        ColorImage::new([tile.width(), tile.height()], pixels)
    }
}

#[cfg(test)]
mod tests {
    use super::{ToneCurve, ToneSample};
    use crate::ground::Grid;
    use crate::study::Tone;
    use egui::Color32;

    fn sample() -> ToneSample {
        let grid = Grid::from_fn(101, 1, |col, _| col as f32);
        ToneSample::of([&grid].into_iter(), 1000)
    }

    fn tone(low: f64, high: f64, gamma: f64, inverted: bool) -> Tone {
        Tone { low_percent: low, high_percent: high, gamma, inverted }
    }

    #[test]
    fn percentiles_become_ink_and_paper() {
        let curve = ToneCurve::new(&tone(10.0, 90.0, 1.0, false), &sample());
        assert_eq!(curve.color(10.0), curve.color(-5.0), "below the low percentile all is ink");
        assert_eq!(curve.color(10.0), Color32::from_rgb(16, 14, 12));
        assert_eq!(curve.color(90.0), Color32::from_rgb(253, 250, 244));
        assert_eq!(curve.color(50.0).r(), 135, "half way");
    }

    #[test]
    fn inversion_and_gamma() {
        let plain = ToneCurve::new(&tone(0.0, 100.0, 1.0, false), &sample());
        let turned = ToneCurve::new(&tone(0.0, 100.0, 1.0, true), &sample());
        assert_eq!(turned.color(0.0), plain.color(100.0));
        let lifted = ToneCurve::new(&tone(0.0, 100.0, 2.0, false), &sample());
        // 25 % to the power ½ is 50 %.
        assert_eq!(lifted.color(25.0), plain.color(50.0));
    }

    #[test]
    fn missing_values_are_see_through() {
        let tile = Grid::from_parts(3, 1, vec![1.0, f32::NAN, 3.0], Some(vec![true, true, false]));
        let image = ToneCurve::new(&Tone::default(), &sample()).image(&tile);
        assert_eq!(image.pixels[0].a(), 255);
        assert_eq!((image.pixels[1], image.pixels[2]), (Color32::TRANSPARENT, Color32::TRANSPARENT));
    }

    #[test]
    fn a_flat_raster_is_mid_tone() {
        let flat = Grid::filled(4, 4, 7.0);
        let curve = ToneCurve::new(&Tone::default(), &ToneSample::of([&flat].into_iter(), 100));
        assert_eq!(curve.color(7.0).r(), 135);
    }
}
