//! Pictures whose pixels are not square, or too many: traced on square pixels of one size.

use rayon::prelude::*;

use crate::ground::{Grid, Point, Polygon, Polyline, Stopped, Work};

use super::{CrestLine, CrestSettings, Crests, Junction, detect};

/// Pixels whose sides differ by less than this share are square.
const SQUARE: f64 = 0.02;

/// Share of a new pixel that must have data.
const COVERED: f64 = 0.5;

/// As [`detect`], for pixels of the ground size `pixel` (column step, row step) and with at most about `most`
/// cells held: the picture is first brought to square pixels, of its finer side or, where that makes too many,
/// of as coarse a side as it takes (their tone averaged before any logarithm). Pixels in `settings` and in what
/// comes back are the picture's own, lengths being counted in its finer side.
///
/// # Errors
/// [`Stopped`].
pub fn detect_on_ground(
    image: &Grid<f32>,
    outline: &Polygon,
    pixel: [f64; 2],
    settings: &CrestSettings,
    most: usize,
    work: &Work,
) -> Result<Crests, Stopped> {
    let fine = pixel[0].min(pixel[1]);
    let sound = fine > 0.0 && pixel.iter().all(|side| side.is_finite());
    let [wide, high] = if sound { pixel.map(|side| side / fine) } else { [1.0; 2] };
    let cells = image.len() as f64 * wide * high;
    let side = (cells / most.max(1) as f64).sqrt().max(1.0);
    if side == 1.0 && (wide - 1.0).max(high - 1.0) < SQUARE {
        return detect(image, outline, settings, work);
    }
    // New pixels per old one.
    let ratio = [wide / side, high / side];
    let limits = settings.tone_limits.unwrap_or([f64::NEG_INFINITY, f64::INFINITY]);
    let squared = resampled(image, ratio, limits, work)?;
    let there = |p: Point| Point::new(p.x * ratio[0], p.y * ratio[1]);
    let back = |p: &Point| Point::new(p.x / ratio[0], p.y / ratio[1]);
    let own = CrestSettings {
        scale_px: settings.scale_px.map(|sigma| sigma / side),
        spacing_px: settings.spacing_px.map(|spacing| spacing / side),
        excluded: settings.excluded.iter().map(|polygon| polygon.map(there)).collect(),
        tone_limits: None,
        tolerance_px: settings.tolerance_px / side,
        ..settings.clone()
    };
    let found = detect(&squared, &outline.map(there), &own, work)?;
    let line = |line: CrestLine| CrestLine {
        line: Polyline(line.line.0.iter().map(back).collect()),
        bridged_px: line.bridged_px * side,
        ..line
    };
    Ok(Crests {
        lines: found.lines.into_iter().map(line).collect(),
        junctions: found.junctions.iter().map(|j| Junction { at: back(&j.at), ..j.clone() }).collect(),
        scales_px: found.scales_px.iter().map(|sigma| sigma * side).collect(),
        side_px: side,
        ..found
    })
}

/// Weights of old pixels in a new one: from the first index on.
struct Mix {
    first: usize,
    weights: Vec<f32>,
}

/// For each new pixel along one direction: means over its extent where it is wider than the old ones, linear
/// between their centres where it is not.
fn mixes(count: usize, ratio: f64) -> Vec<Mix> {
    let new = ((count as f64 * ratio).round() as usize).max(1);
    (0..new)
        .map(|i| {
            if ratio >= 1.0 {
                let at = ((i as f64 + 0.5) / ratio - 0.5).clamp(0.0, (count - 1) as f64);
                let first = (at as usize).min(count.saturating_sub(2));
                let share = (at - first as f64) as f32;
                let weights = if count > 1 { vec![1.0 - share, share] } else { vec![1.0] };
                return Mix { first, weights };
            }
            let (from, to) = (i as f64 / ratio, ((i + 1) as f64 / ratio).min(count as f64));
            let first = (from as usize).min(count - 1);
            let last = (to.ceil() as usize).clamp(first + 1, count);
            let over = |k: usize| (to.min((k + 1) as f64) - from.max(k as f64)).max(0.0);
            let sum = (first..last).map(over).sum::<f64>().max(1e-12);
            Mix { first, weights: (first..last).map(|k| (over(k) / sum) as f32).collect() }
        })
        .collect()
}

/// The picture on new pixels, `ratio` of them per old one; old pixels without data, or with tones outside the
/// limits, count nothing, and a new one more than half of which is such has no data.
fn resampled(
    image: &Grid<f32>,
    ratio: [f64; 2],
    limits: [f64; 2],
    work: &Work,
) -> Result<Grid<f32>, Stopped> {
    let (width, height) = (image.width(), image.height());
    if width == 0 || height == 0 {
        return Ok(image.clone());
    }
    let (across, down) = (mixes(width, ratio[0]), mixes(height, ratio[1]));
    let cols = across.len();
    let mut values = vec![0.0f32; cols * down.len()];
    let mut valid = vec![false; values.len()];
    values.par_chunks_mut(cols).zip(valid.par_chunks_mut(cols)).zip(&down).try_for_each(
        |((values, valid), down)| {
            let mut covered = vec![0.0f32; cols];
            for (k, by_row) in down.weights.iter().enumerate() {
                let row = down.first + k;
                for ((value, covered), mix) in values.iter_mut().zip(&mut covered).zip(&across) {
                    for (j, by_col) in mix.weights.iter().enumerate() {
                        let tone = image.get(mix.first + j, row).filter(|v| v.is_finite());
                        if let Some(v) = tone.filter(|v| (limits[0]..=limits[1]).contains(&f64::from(*v))) {
                            *value += by_row * by_col * v;
                            *covered += by_row * by_col;
                        }
                    }
                }
            }
            for ((value, valid), covered) in values.iter_mut().zip(valid).zip(covered) {
                *valid = f64::from(covered) >= COVERED;
                *value = if *valid { *value / covered } else { 0.0 };
            }
            work.advance(0)
        },
    )?;
    Ok(Grid::from_parts(cols, down.len(), values, Some(valid)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_ramp_stays_a_ramp_and_gaps_stay_gaps() {
        let mut image = Grid::from_fn(40, 30, |col, row| (2 * col + 3 * row) as f32);
        image.mask_where(|col, row| !(10..20).contains(&col) || row > 15);
        for ratio in [[1.0, 2.0], [0.5, 1.0], [0.4, 0.3], [1.7, 1.0]] {
            let limits = [f64::NEG_INFINITY, f64::INFINITY];
            let new = resampled(&image, ratio, limits, &Work::quiet()).unwrap();
            for row in 0..new.height() {
                for col in 0..new.width() {
                    let at = [(col as f64 + 0.5) / ratio[0], (row as f64 + 0.5) / ratio[1]];
                    let inner = at[0] > 2.0 && at[0] < 37.0 && at[1] > 2.0 && at[1] < 27.0;
                    let far = at[0] < 8.0 || at[0] > 22.0 || at[1] > 19.0;
                    if inner && far {
                        let want = 2.0 * (at[0] - 0.5) + 3.0 * (at[1] - 0.5);
                        let got = f64::from(new.get(col, row).expect("data"));
                        crate::assert_close!(got, want, 0.01 * want.max(1.0) + 0.26, "{ratio:?} at {at:?}");
                    }
                    if at[0] > 12.0 && at[0] < 18.0 && at[1] < 13.0 {
                        assert_eq!(new.get(col, row), None, "{ratio:?} at {at:?}");
                    }
                }
            }
        }
    }
}
