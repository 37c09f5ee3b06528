//! Windows over a patch: where they lie, and the tapered power of each.

use rayon::prelude::*;

use crate::ground::{Bounds, Grid, LocalFrame, Place, Point, Polygon, Stopped, Work};
use crate::numeric::fft::{PowerPlan, PowerScratch};
use crate::numeric::taper::{Plane, hann, hann_overlap};

use super::super::gradient::Tone;

/// Share of a window's taper that must fall on valid pixels inside the patch.
const LEAST_SHARE: f64 = 0.9;

/// Windows handled together; their results are taken in order, so that sums are the same for any
/// number of threads.
const BATCH: usize = 32;

/// The patch as a picture: tone, and which pixels count.
pub(super) struct Scene<'a> {
    pub tone: Tone,
    pub place: &'a Place,
    /// The patch's box: first column and row, columns and rows.
    first: [usize; 2],
    size: [usize; 2],
    /// Tone and whether it counts (inside the patch and valid), row by row within the box.
    tones: Vec<f32>,
    inside: Vec<bool>,
}

/// Upper left corner of each window within the patch's box.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Windows {
    pub size: [usize; 2],
    pub origins: Vec<[usize; 2]>,
}

/// What is left of a window for its transform.
pub(super) struct Tapered {
    pub level: f64,
    /// Σ taper² over what counts.
    pub square: f64,
    pub frame: LocalFrame,
}

impl<'a> Scene<'a> {
    /// `None` when the patch does not touch the raster.
    pub fn new(image: &'a Grid<f32>, patch: &Polygon, tone: Tone, place: &'a Place) -> Option<Self> {
        let Bounds { min, max } = patch.bounds()?;
        let clamp = |v: f64, limit: usize| v.clamp(0.0, limit as f64) as usize;
        let first = [clamp(min.x.floor(), image.width()), clamp(min.y.floor(), image.height())];
        let end = [clamp(max.x.ceil(), image.width()), clamp(max.y.ceil(), image.height())];
        let size = [0, 1].map(|i| end[i].saturating_sub(first[i]));
        let mut inside = vec![false; size[0] * size[1]];
        let mut tones = vec![0.0f32; size[0] * size[1]];
        for row in 0..size[1] {
            for (from, to) in patch.row_spans(first[1] + row, image.width()) {
                for col in from.max(first[0])..to.min(end[0]) {
                    let at = row * size[0] + col - first[0];
                    if let Some(value) = image.get(col, first[1] + row) {
                        inside[at] = true;
                        tones[at] = tone.of(value);
                    }
                }
            }
        }
        inside.contains(&true).then_some(Self { tone, place, first, size, tones, inside })
    }

    /// Columns and rows of the patch's box on the raster.
    pub fn extent(&self) -> [usize; 2] {
        self.size
    }

    /// Upper left corner of a window of the box, in pixel coordinates of the raster.
    pub fn corner(&self, origin: [usize; 2]) -> Point {
        self.middle(origin, [0, 0])
    }

    pub fn centre(&self) -> Point {
        self.middle([0, 0], self.size)
    }

    /// The middle of a window of the box, in pixel coordinates of the raster.
    fn middle(&self, origin: [usize; 2], size: [usize; 2]) -> Point {
        let along = |i: usize| (self.first[i] + origin[i]) as f64 + 0.5 * size[i] as f64;
        Point::new(along(0), along(1))
    }

    /// Windows half overlapping that lie on the raster and nine tenths in the patch; set further apart
    /// where there would be many more than `most`.
    pub fn windows(&self, size: [usize; 2], most: usize, work: &Work) -> Result<Windows, Stopped> {
        if (0..2).any(|i| size[i] > self.size[i] || size[i] < 2) {
            return Ok(Windows { size, origins: Vec::new() });
        }
        let spare = [0, 1].map(|i| self.size[i] - size[i]);
        let steps = [0, 1].map(|i| spare[i].div_ceil(size[i] / 2));
        let surplus = (((steps[0] + 1) * (steps[1] + 1)) as f64 / most as f64).max(1.0).sqrt();
        let starts = |i: usize| -> Vec<usize> {
            let steps = (steps[i] as f64 / surplus).ceil() as usize;
            (0..=steps).map(|k| (spare[i] * k).checked_div(steps).unwrap_or(spare[i] / 2)).collect()
        };
        let tapers = size.map(hann);
        let (cols, rows) = (starts(0), starts(1));
        let corners: Vec<[usize; 2]> = rows.iter().flat_map(|r| cols.iter().map(|c| [*c, *r])).collect();
        let keep: Result<Vec<bool>, Stopped> = corners
            .par_iter()
            .map(|origin| {
                work.advance(0)?;
                let has_frame = self.place.local_frame(self.middle(*origin, size)).is_some();
                Ok(has_frame && self.share(*origin, &tapers) >= LEAST_SHARE)
            })
            .collect();
        let origins = corners.into_iter().zip(keep?).filter(|(_, keep)| *keep).map(|(o, _)| o).collect();
        Ok(Windows { size, origins })
    }

    /// Share of the taper on pixels that count.
    fn share(&self, origin: [usize; 2], tapers: &[Vec<f64>; 2]) -> f64 {
        let (mut sum, mut all) = (0.0, 0.0);
        let whole: f64 = tapers[0].iter().sum();
        for (r, wr) in tapers[1].iter().enumerate() {
            let line = &self.inside[(origin[1] + r) * self.size[0] + origin[0]..][..tapers[0].len()];
            let part: f64 = tapers[0].iter().zip(line).filter(|(_, inside)| **inside).map(|(w, _)| w).sum();
            sum += wr * part;
            all += wr * whole;
        }
        sum / all
    }

    /// Takes the plane out of a window, fills what is missing with it, and tapers the rest into `out`.
    fn taper(
        &self,
        origin: [usize; 2],
        size: [usize; 2],
        tapers: &[Vec<f64>; 2],
        out: &mut [f32],
    ) -> Option<Tapered> {
        let value = |col: usize, row: usize| {
            let at = (origin[1] + row) * self.size[0] + origin[0] + col;
            self.inside[at].then(|| f64::from(self.tones[at]))
        };
        let plane = Plane::fit([&tapers[0], &tapers[1]], value)?;
        let mut square = 0.0;
        for (row, (line, wr)) in out.chunks_exact_mut(size[0]).zip(&tapers[1]).enumerate() {
            for (col, (v, wc)) in line.iter_mut().zip(&tapers[0]).enumerate() {
                let w = wr * wc;
                *v = 0.0;
                if let Some(tone) = value(col, row) {
                    *v = (w * (tone - plane.at(col, row, size))) as f32;
                    square += w * w;
                }
            }
        }
        let centre = self.middle(origin, size);
        Some(Tapered { level: plane.level, square, frame: self.place.local_frame(centre)? })
    }

    /// Hands each window's number and power to `read` (in parallel) and what that returns to `take` (in
    /// order).
    pub fn powers<T: Send>(
        &self,
        windows: &Windows,
        plan: &PowerPlan,
        work: &Work,
        read: impl Fn(usize, &Tapered, &[f32]) -> T + Sync,
        mut take: impl FnMut(T),
    ) -> Result<(), Stopped> {
        struct Buffers {
            window: Vec<f32>,
            power: Vec<f32>,
            scratch: PowerScratch,
        }
        let size = windows.size;
        let tapers = size.map(hann);
        let numbered: Vec<(usize, [usize; 2])> = windows.origins.iter().copied().enumerate().collect();
        for batch in numbered.chunks(BATCH) {
            let results: Result<Vec<Option<T>>, Stopped> = batch
                .par_iter()
                .map_init(
                    || Buffers {
                        window: vec![0.0; size[0] * size[1]],
                        power: vec![0.0; plan.len()],
                        scratch: plan.scratch(),
                    },
                    |buffers, (number, origin)| {
                        work.advance(1)?;
                        let Some(tapered) = self.taper(*origin, size, &tapers, &mut buffers.window) else {
                            return Ok(None);
                        };
                        plan.power(&buffers.window, size[0], &mut buffers.scratch, &mut buffers.power);
                        work.advance(0)?;
                        Ok(Some(read(*number, &tapered, &buffers.power)))
                    },
                )
                .collect();
            results?.into_iter().flatten().for_each(&mut take);
        }
        Ok(())
    }
}

impl Windows {
    /// The number of independent windows: K² / ΣΣ ρ, ρ the correlation of the power of two overlapping
    /// Hann windows over white noise.
    pub fn independent(&self) -> f64 {
        let overlap = self.size.map(|n| (0..=n).map(|shift| hann_overlap(n, shift)).collect::<Vec<f64>>());
        let k = self.origins.len() as f64;
        let mut sum = 0.0;
        for (i, a) in self.origins.iter().enumerate() {
            sum += 1.0;
            for b in &self.origins[i + 1..] {
                let rho = |d: usize| overlap[d][a[d].abs_diff(b[d]).min(self.size[d])];
                sum += 2.0 * rho(0) * rho(1);
                // Rows come in order: nothing further down overlaps.
                if b[1] >= a[1] + self.size[1] {
                    break;
                }
            }
        }
        if k > 0.0 { k * k / sum } else { 0.0 }
    }
}
