//! Raster values as a picture: stretched between percentiles, bent by gamma, inverted on demand.

use std::sync::Arc;

use crate::ground::Grid;
use crate::study::Tone;

/// RGBA pixels, row by row from the upper left; missing pixels are clear.
#[derive(Clone, Debug, PartialEq)]
pub struct Picture {
    pub width: usize,
    pub height: usize,
    pub rgba: Arc<[u8]>,
}

/// Greys of a raster window as `tone` says. A raster of one value is mid-grey.
pub fn toned(grid: &Grid<f32>, tone: &Tone) -> Picture {
    let limits = limits(grid, tone);
    let mut rgba = Vec::with_capacity(grid.len() * 4);
    for row in 0..grid.height() {
        for col in 0..grid.width() {
            match grid.get(col, row).filter(|v| v.is_finite()).zip(limits) {
                Some((value, limits)) => {
                    let grey = grey(value, limits, tone);
                    rgba.extend([grey, grey, grey, 255]);
                }
                None => rgba.extend([0; 4]),
            }
        }
    }
    Picture { width: grid.width(), height: grid.height(), rgba: rgba.into() }
}

/// The values shown black and white; `None` without a valid value.
fn limits(grid: &Grid<f32>, tone: &Tone) -> Option<[f32; 2]> {
    let mut values: Vec<f32> = grid.valid_values().filter(|v| v.is_finite()).collect();
    if values.is_empty() {
        return None;
    }
    let last = values.len() - 1;
    let mut at = |percent: f64| {
        let index = (percent.clamp(0.0, 100.0) / 100.0 * last as f64).round() as usize;
        *values.select_nth_unstable_by(index, f32::total_cmp).1
    };
    Some([at(tone.low_percent), at(tone.high_percent)])
}

fn grey(value: f32, [low, high]: [f32; 2], tone: &Tone) -> u8 {
    let share = if high > low { f64::from((value - low) / (high - low)).clamp(0.0, 1.0) } else { 0.5 };
    let bent = share.powf(1.0 / tone.gamma.clamp(0.05, 20.0));
    let shown = if tone.inverted { 1.0 - bent } else { bent };
    (255.0 * shown).round() as u8
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ramp() -> Grid<f32> {
        Grid::from_fn(101, 1, |col, _| col as f32)
    }

    fn greys(tone: &Tone) -> Vec<u8> {
        toned(&ramp(), tone).rgba.chunks_exact(4).map(|p| p[0]).collect()
    }

    #[test]
    fn percentiles_become_black_and_white() {
        let tone = Tone { low_percent: 10.0, high_percent: 90.0, gamma: 1.0, inverted: false };
        let greys = greys(&tone);
        assert_eq!((greys[0], greys[10], greys[50], greys[90], greys[100]), (0, 0, 128, 255, 255));
    }

    #[test]
    fn gamma_lifts_the_middle_and_inversion_mirrors() {
        let tone = Tone { low_percent: 0.0, high_percent: 100.0, gamma: 2.0, inverted: false };
        assert_eq!(greys(&tone)[25], 128, "√¼ of 255");
        let inverted = Tone { inverted: true, ..tone };
        assert_eq!(greys(&inverted)[25], 128);
        assert_eq!(greys(&inverted)[0], 255);
    }

    #[test]
    fn missing_pixels_are_clear_and_do_not_stretch() {
        let mut grid = ramp();
        grid.mask_where(|col, _| col < 50);
        let picture = toned(&grid, &Tone { low_percent: 0.0, high_percent: 100.0, ..Tone::default() });
        assert_eq!(picture.rgba[3], 255);
        assert_eq!(picture.rgba[49 * 4], 255);
        assert_eq!(picture.rgba[50 * 4..51 * 4], [0; 4]);
        let empty = toned(&Grid::from_parts(1, 1, vec![f32::NAN], None), &Tone::default());
        assert_eq!(empty.rgba[..], [0; 4]);
    }
}
