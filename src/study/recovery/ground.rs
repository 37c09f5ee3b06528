//! The ground bedforms are laid into: a window of the patch's own tone, its pattern taken out.

use crate::ground::{Grid, LocalFrame, Point, Stopped, Work};
use crate::science::orientation::Tone;
use crate::science::scene::texture::without_pattern;
use crate::study::ImageKind;
use crate::study::window::PatchPixels;

/// A window is made to hold so many spacings where the patch has room for them.
const SPACINGS: f64 = 12.0;
/// Gradient scale, in averaged pixels, down to which wide windows are averaged.
const LEAST_SCALE: f64 = 1.5;
/// Cells along a side in which the cover of a window is counted.
const CELLS: usize = 16;

/// What is asked of a window; lengths in pixels of the measured image.
pub(super) struct Wanted {
    pub window: f64,
    /// Of the bedforms laid in.
    pub spacing: f64,
    /// Gradient scale.
    pub scale: f64,
}

/// A window of tone: additive, since radar is taken as ln of intensity.
pub(super) struct Ground {
    /// The window as pixels of a patch; its `image` is tone.
    pub pixels: PatchPixels,
    pub frame: LocalFrame,
    /// Side, full-resolution pixels.
    pub side: usize,
    /// Whether that is only a part of the patch.
    pub part: bool,
    /// Image pixels averaged to one.
    pub averaged: usize,
    /// Mean square of the pattern taken out.
    pub removed: f64,
}

/// Cuts the best covered window out of a patch; `None` where nothing of it is valid or has a place.
///
/// # Errors
/// [`Stopped`].
pub(super) fn cut(
    pixels: &PatchPixels,
    kind: ImageKind,
    wanted: &Wanted,
    work: &Work,
) -> Result<Option<Ground>, Stopped> {
    let image = &pixels.image;
    let side = wanted.window.max(SPACINGS * wanted.spacing).ceil().max(1.0) as usize;
    let size = [side.min(image.width()), side.min(image.height())];
    let Some(at) = best_covered(pixels, size, work)? else { return Ok(None) };
    let tone = if kind == ImageKind::Radar { Tone::logarithm(image) } else { Tone::Linear };
    // Wide windows are averaged, as the gradient scale would do anyway: the time stays that of the one asked for.
    let averaged =
        (side as f64 / wanted.window.max(1.0)).ceil().min((wanted.scale / LEAST_SCALE).floor()).max(1.0)
            as usize;
    let image = average(image, tone, at, size.map(|n| n / averaged), averaged);
    let part =
        pixels.outline.bounds().is_some_and(|b| b.width() > size[0] as f64 || b.height() > size[1] as f64);
    let scale = averaged as f64;
    let (left, upper) = (at[0] as f64, at[1] as f64);
    let place = pixels.place.window(left, upper, [scale, scale]);
    let outline = pixels.outline.map(|p| Point::new((p.x - left) / scale, (p.y - upper) / scale));
    let middle = Point::new(0.5 * image.width() as f64, 0.5 * image.height() as f64);
    let Some(frame) = place.local_frame(middle) else { return Ok(None) };
    let factor = pixels.factor as f64;
    Ok(Some(Ground {
        frame,
        side: size[0].max(size[1]) * pixels.factor,
        part,
        averaged,
        removed: 0.0,
        pixels: PatchPixels {
            valid_fraction: image.valid_count() as f64 / image.len().max(1) as f64,
            area: image.len() as f64 * frame.pixel_area(),
            image,
            outline,
            place,
            factor: pixels.factor * averaged,
            origin: Point::new(pixels.origin.x + factor * left, pixels.origin.y + factor * upper),
        },
    }))
}

impl Ground {
    /// Takes the pattern of `spacing` (ground unit) out.
    pub fn empty(&mut self, spacing: f64, work: &Work) -> Result<(), Stopped> {
        let emptied = without_pattern(&self.pixels.image, self.frame, spacing, work)?;
        self.pixels.image = emptied.tone;
        self.removed = emptied.removed;
        Ok(())
    }
}

/// Upper left corner of the window of `size` that holds most valid pixels of the patch; the one nearest the
/// middle among equals.
fn best_covered(pixels: &PatchPixels, size: [usize; 2], work: &Work) -> Result<Option<[usize; 2]>, Stopped> {
    let image = &pixels.image;
    let cell = size.map(|n| (n / CELLS).max(1));
    let cells = [image.width() / cell[0], image.height() / cell[1]];
    let mut counts = vec![0u64; (cells[0] + 1) * (cells[1] + 1)];
    for row in 0..cells[1] * cell[1] {
        for (from, to) in pixels.outline.row_spans(row, image.width()) {
            for col in (from..to.min(cells[0] * cell[0])).filter(|col| image.is_valid(*col, row)) {
                counts[(row / cell[1] + 1) * (cells[0] + 1) + col / cell[0] + 1] += 1;
            }
        }
        work.advance(0)?;
    }
    // Sums over all cells above and to the left.
    for row in 1..=cells[1] {
        let mut along = 0;
        for col in 1..=cells[0] {
            along += counts[row * (cells[0] + 1) + col];
            counts[row * (cells[0] + 1) + col] = along + counts[(row - 1) * (cells[0] + 1) + col];
        }
    }
    let span = [0, 1].map(|i| (size[i] / cell[i]).min(cells[i]));
    let spare = [0, 1].map(|i| cells[i] - span[i]);
    let sum = |col: usize, row: usize| counts[row * (cells[0] + 1) + col];
    let mut best: Option<(u64, usize, [usize; 2])> = None;
    for row in 0..=spare[1] {
        for col in 0..=spare[0] {
            let (right, lower) = (col + span[0], row + span[1]);
            let held = sum(right, lower) + sum(col, row) - sum(right, row) - sum(col, lower);
            let off = (2 * col).abs_diff(spare[0]).pow(2) + (2 * row).abs_diff(spare[1]).pow(2);
            if held > 0 && best.is_none_or(|(most, least, _)| held > most || held == most && off < least) {
                best = Some((held, off, [col, row]));
            }
        }
    }
    Ok(best.map(|(.., [col, row])| {
        [(col * cell[0]).min(image.width() - size[0]), (row * cell[1]).min(image.height() - size[1])]
    }))
}

/// Tone of a part of the image, averaged over squares of `by` pixels of which half at least are valid.
fn average(image: &Grid<f32>, tone: Tone, at: [usize; 2], size: [usize; 2], by: usize) -> Grid<f32> {
    let cell = |col: usize, row: usize| {
        let (mut sum, mut n) = (0.0f64, 0usize);
        for r in 0..by {
            for c in 0..by {
                if let Some(v) =
                    image.get(at[0] + col * by + c, at[1] + row * by + r).filter(|v| v.is_finite())
                {
                    sum += f64::from(tone.of(v));
                    n += 1;
                }
            }
        }
        (2 * n >= by * by).then(|| (sum / n as f64) as f32)
    };
    let cells = Grid::from_fn(size[0], size[1], cell);
    let mask = cells.values().iter().map(Option::is_some).collect();
    Grid::from_parts(size[0], size[1], cells.values().iter().map(|v| v.unwrap_or(0.0)).collect(), Some(mask))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::ground::{Place, Polygon};

    fn patch(width: usize, height: usize, outline: Polygon) -> PatchPixels {
        PatchPixels {
            image: Grid::from_fn(width, height, |c, r| (c + r) as f32),
            outline,
            place: Place::pixels(0.0),
            factor: 1,
            origin: Point::new(0.0, 0.0),
            valid_fraction: 1.0,
            area: 0.0,
        }
    }

    #[test]
    fn the_window_lies_where_the_patch_has_most_valid_ground() {
        let mut pixels = patch(200, 120, Polygon::rectangle(200.0, 120.0));
        pixels.image.mask_where(|c, _| c < 110);
        let wanted = Wanted { window: 64.0, spacing: 5.0, scale: 1.0 };
        let ground = cut(&pixels, ImageKind::Optical, &wanted, &Work::quiet()).unwrap().expect("ground");
        assert_eq!((ground.side, ground.pixels.image.valid_count()), (64, 64 * 64));
        assert!(ground.pixels.origin.x <= 46.0, "{:?}", ground.pixels.origin);
        let mut none = patch(20, 20, Polygon::rectangle(20.0, 20.0));
        none.image.mask_where(|_, _| false);
        assert!(cut(&none, ImageKind::Optical, &wanted, &Work::quiet()).unwrap().is_none());
        assert!(
            cut(&patch(1, 1, Polygon::rectangle(1.0, 1.0)), ImageKind::Radar, &wanted, &Work::quiet())
                .unwrap()
                .is_some()
        );
    }

    #[test]
    fn a_wide_window_is_averaged() {
        let pixels = patch(1000, 1000, Polygon::rectangle(1000.0, 1000.0));
        let wanted = Wanted { window: 256.0, spacing: 60.0, scale: 10.0 };
        let ground = cut(&pixels, ImageKind::Optical, &wanted, &Work::quiet()).unwrap().expect("ground");
        assert_eq!((ground.side, ground.averaged, ground.pixels.image.width()), (720, 3, 240));
        let (left, upper) = (ground.pixels.origin.x as f32, ground.pixels.origin.y as f32);
        assert_eq!(ground.pixels.image.at(0, 0), left + upper + 2.0);
    }
}
