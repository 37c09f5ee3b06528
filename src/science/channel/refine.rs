//! Lines to a fraction of a pixel: moved to the crest of the response, then smoothed along themselves.

use crate::ground::{Grid, Point, Stopped, Work};

use super::detect::ChannelTone;
use super::graph::Sketch;
use super::profile::{Banks, profiles};
use super::response::Response;

/// Least scale of the smoothing along a line, pixels: takes the steps of the cells out.
const LEAST_SMOOTHING: f64 = 1.5;
/// Scale of the smoothing over the width.
const SMOOTHING: f64 = 0.25;
/// Width from which the banks tell the middle better than the response does, pixels.
const RESOLVED: f64 = 5.0;
/// Free ends hook over so many widths.
const HOOK: f64 = 0.6;
/// How often lines are moved to the middle.
const ROUNDS: usize = 2;

impl Sketch {
    /// Moves the inner points of every stretch to the crest across it, and smooths. Ends stay.
    ///
    /// # Errors
    /// [`Stopped`].
    pub(super) fn refine(&mut self, response: &Response, work: &Work) -> Result<(), Stopped> {
        for stretch in &mut self.stretches {
            work.advance(0)?;
            let scale = (SMOOTHING * stretch.width).max(LEAST_SMOOTHING);
            let first = smoothed(&stretch.line, scale);
            let reach = (0.25 * stretch.width).max(1.0);
            let last = first.len() - 1;
            let moved: Vec<Point> = (0..first.len())
                .map(|i| {
                    let at = first[i];
                    if i == 0 || i == last {
                        return at;
                    }
                    let (dx, dy) = (first[i + 1].x - first[i - 1].x, first[i + 1].y - first[i - 1].y);
                    let length = dx.hypot(dy);
                    if length <= 0.0 {
                        return at;
                    }
                    let (nx, ny) = (-dy / length, dx / length);
                    let shift = crest(response, at, (nx, ny), reach);
                    Point::new(at.x + shift * nx, at.y + shift * ny)
                })
                .collect();
            stretch.line = spaced(&smoothed(&moved, scale), (0.125 * stretch.width).max(1.0));
        }
        Ok(())
    }
}

impl Sketch {
    /// Free ends of thinned lines hook into a corner of the band: their last bit is laid in the direction before it.
    pub(super) fn straighten_ends(&mut self, size: [usize; 2]) {
        let at = self.at_nodes();
        for s in 0..self.stretches.len() {
            for end in 0..2 {
                let node = self.stretches[s].ends[end];
                if at[node].len() != 1 {
                    continue;
                }
                let stretch = &mut self.stretches[s];
                if end == 0 {
                    stretch.line.reverse();
                }
                if let Some(to) = straightened(&mut stretch.line, stretch.width, size) {
                    self.nodes[node] = to;
                }
                if end == 0 {
                    stretch.line.reverse();
                }
            }
        }
    }
}

/// Lays the last bit of a line straight and tells where it ends; leaves short lines alone.
fn straightened(line: &mut Vec<Point>, width: f64, size: [usize; 2]) -> Option<Point> {
    let last = *line.last()?;
    let (trim, aim) = (HOOK * width + 1.0, (1.5 * width).max(6.0));
    let mut run = 0.0;
    let mut keep = None;
    let mut from = None;
    for i in (0..line.len() - 1).rev() {
        run += line[i].distance(line[i + 1]);
        if keep.is_none() && run >= trim {
            keep = Some(i);
        }
        if run >= trim + aim {
            from = Some(i);
            break;
        }
    }
    let (keep, from) = (keep?, from?);
    let (a, b) = (line[from], line[keep]);
    let length = a.distance(b);
    if length <= 0.0 {
        return None;
    }
    let (ux, uy) = ((b.x - a.x) / length, (b.y - a.y) / length);
    let ahead = ((last.x - b.x) * ux + (last.y - b.y) * uy).max(0.0);
    let to = Point::new(
        (b.x + ahead * ux).clamp(0.0, size[0] as f64),
        (b.y + ahead * uy).clamp(0.0, size[1] as f64),
    );
    line.truncate(keep + 1);
    if to.distance(b) > 0.0 {
        let count = to.distance(b).ceil() as usize;
        for i in 1..=count {
            let t = i as f64 / count as f64;
            line.push(Point::new(b.x + t * (to.x - b.x), b.y + t * (to.y - b.y)));
        }
    }
    line.last().copied()
}

impl Sketch {
    /// Moves lines of channels at least [`RESOLVED`] wide to the middle of their banks in `image`.
    pub(super) fn centre(
        &mut self,
        image: &Grid<f32>,
        tone: ChannelTone,
        work: &Work,
    ) -> Result<(), Stopped> {
        for stretch in self.stretches.iter_mut().filter(|s| s.bridge.is_none() && s.width >= RESOLVED) {
            for _ in 0..ROUNDS {
                let half = 0.5 * stretch.width;
                let found = profiles(
                    image,
                    &stretch.line,
                    (0.25 * stretch.width).max(1.0),
                    stretch.width,
                    half,
                    work,
                )?;
                let last = found.len().saturating_sub(1);
                let moved: Vec<Point> = found
                    .iter()
                    .enumerate()
                    .map(|(i, p)| {
                        let banks = Banks::of(&p.values, p.step, stretch.width, tone);
                        let shift = banks.filter(|_| i > 0 && i < last).map_or(0.0, Banks::middle);
                        Point::new(p.at.x + shift * p.normal.0, p.at.y + shift * p.normal.1)
                    })
                    .collect();
                let ends = [stretch.line.first().copied(), stretch.line.last().copied()];
                let mut line = smoothed(&moved, SMOOTHING * stretch.width);
                if let ([Some(first), Some(last)], true) = (ends, line.len() >= 2) {
                    let count = line.len();
                    (line[0], line[count - 1]) = (first, last);
                    stretch.line = spaced(&line, (0.125 * stretch.width).max(1.0));
                }
            }
        }
        Ok(())
    }
}

/// How far along `normal` the response is highest within `reach`, to a fraction of a step by a parabola.
fn crest(response: &Response, at: Point, normal: (f64, f64), reach: f64) -> f64 {
    const STEPS: isize = 3;
    let step = reach / STEPS as f64;
    let value = |i: isize| {
        let d = step * i as f64;
        linear(response, at.x + d * normal.0, at.y + d * normal.1)
    };
    let values: Vec<f64> = (-STEPS - 1..=STEPS + 1).map(value).collect();
    let best = (1..values.len() - 1)
        .max_by(|a, b| values[*a].total_cmp(&values[*b]).then(b.abs_diff(4).cmp(&a.abs_diff(4))));
    let Some(best) = best else { return 0.0 };
    let (before, here, after) = (values[best - 1], values[best], values[best + 1]);
    let bend = before - 2.0 * here + after;
    let part = if bend < 0.0 { (0.5 * (before - after) / bend).clamp(-0.5, 0.5) } else { 0.0 };
    step * (best as f64 - (STEPS + 1) as f64 + part)
}

/// The excess at a point, linear between cell centres.
fn linear(response: &Response, x: f64, y: f64) -> f64 {
    let (width, height) = (response.z.width(), response.z.height());
    let split = |v: f64, n: usize| {
        let v = (v - 0.5).clamp(0.0, (n - 1) as f64);
        (v as usize, (v as usize + 1).min(n - 1), v.fract())
    };
    let ((c0, c1, u), (r0, r1, v)) = (split(x, width), split(y, height));
    let at = |c: usize, r: usize| f64::from(response.excess[r * width + c]);
    (at(c0, r0) * (1.0 - u) + at(c1, r0) * u) * (1.0 - v) + (at(c0, r1) * (1.0 - u) + at(c1, r1) * u) * v
}

/// Gaussian mean of the points by their distance along the line, the window shrunk towards the ends so that these
/// stay. A closed line is treated as one that ends where it begins.
pub(super) fn smoothed(line: &[Point], scale: f64) -> Vec<Point> {
    let mut along = vec![0.0; line.len()];
    for i in 1..line.len() {
        along[i] = along[i - 1] + line[i].distance(line[i - 1]);
    }
    let total = along.last().copied().unwrap_or(0.0);
    (0..line.len())
        .map(|i| {
            let scale = scale.min(0.5 * along[i].min(total - along[i]));
            if scale <= 0.0 {
                return line[i];
            }
            let reach = 2.0 * scale;
            let from = along.partition_point(|a| *a < along[i] - reach);
            let to = along.partition_point(|a| *a <= along[i] + reach);
            let (mut x, mut y, mut sum) = (0.0, 0.0, 0.0);
            for j in from..to {
                let w = (-0.5 * ((along[j] - along[i]) / scale).powi(2)).exp();
                x += w * line[j].x;
                y += w * line[j].y;
                sum += w;
            }
            Point::new(x / sum, y / sum)
        })
        .collect()
}

/// Points about `step` apart along a line, ends included.
pub(super) fn spaced(line: &[Point], step: f64) -> Vec<Point> {
    let total: f64 = line.windows(2).map(|w| w[0].distance(w[1])).sum();
    let count = (total / step).round().max(1.0) as usize;
    let (Some(first), Some(last)) = (line.first(), line.last()) else { return Vec::new() };
    let mut out = vec![*first];
    let (mut segment, mut before) = (0, 0.0);
    for i in 1..count {
        let want = total * i as f64 / count as f64;
        while segment + 2 < line.len() && before + line[segment].distance(line[segment + 1]) < want {
            before += line[segment].distance(line[segment + 1]);
            segment += 1;
        }
        let (a, b) = (line[segment], line[segment + 1]);
        let length = a.distance(b);
        let t = if length > 0.0 { ((want - before) / length).clamp(0.0, 1.0) } else { 0.0 };
        out.push(Point::new(a.x + t * (b.x - a.x), a.y + t * (b.y - a.y)));
    }
    out.push(*last);
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_staircase_gets_the_length_of_its_line() {
        let steps: Vec<Point> =
            (0..200).map(|i| Point::new(f64::from(i), (0.4 * f64::from(i)).round())).collect();
        let length = |line: &[Point]| line.windows(2).map(|w| w[0].distance(w[1])).sum::<f64>();
        let want = steps[0].distance(steps[199]);
        assert!(length(&steps) > 1.06 * want);
        crate::assert_close!(length(&spaced(&smoothed(&steps, 1.5), 2.0)), want, 0.005 * want, "length");
    }

    #[test]
    fn spacing_is_even_and_ends_stay() {
        let line = [Point::new(0.0, 0.0), Point::new(3.0, 0.0), Point::new(3.0, 8.0)];
        let points = spaced(&line, 1.0);
        assert_eq!((points.len(), points[0], points[11]), (12, line[0], line[2]));
        assert_eq!(points[3], Point::new(3.0, 0.0));
    }
}
