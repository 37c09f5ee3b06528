//! Tone across a channel, and the banks in it.

use crate::ground::{Grid, Point, Stopped, Work};

use super::detect::ChannelTone;

/// Tone across a line at one of its places, averaged along it.
pub(super) struct Profile {
    pub at: Point,
    /// Distance from the beginning of the line.
    pub along: f64,
    /// Unit vector to the right of the way.
    pub normal: (f64, f64),
    /// Left to right, the middle one on the line; NaN where nothing is known.
    pub values: Vec<f64>,
    /// Distance between values, pixels.
    pub step: f64,
}

/// Banks as distances to the right of the line, pixels.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Banks {
    pub left: f64,
    pub right: f64,
}

/// A profile reaches so many widths, and so many pixels more, to either side.
const REACH: f64 = 1.0;
const REACH_PX: f64 = 3.0;
/// Below this width the blur of the pixels is part of the model.
const NARROW: f64 = 5.0;
/// Banks lie within this share of the width around where they are expected.
const SEARCH: f64 = 0.45;

/// Profiles about every `spacing` along a line, for a channel about `width` wide; each is the mean over ±`half`
/// along the line.
pub(super) fn profiles(
    image: &Grid<f32>,
    line: &[Point],
    spacing: f64,
    width: f64,
    half: f64,
    work: &Work,
) -> Result<Vec<Profile>, Stopped> {
    let step = (width / 32.0).clamp(0.5, 4.0);
    let count = ((REACH * width + REACH_PX) / step).ceil() as usize;
    let fine = (0.5 * spacing).clamp(0.5, 2.0_f64.max(0.125 * width));
    let points = super::refine::spaced(line, fine);
    if points.len() < 2 {
        return Ok(Vec::new());
    }
    let fine = points.windows(2).map(|w| w[0].distance(w[1])).sum::<f64>() / (points.len() - 1) as f64;
    if fine <= 0.0 {
        return Ok(Vec::new());
    }
    let normal = |i: usize| {
        // Over about a width, so that the steps of the line do not turn it.
        let over = ((0.5 * width).max(2.0) / fine).ceil() as usize;
        let (a, b) = (points[i.saturating_sub(over)], points[(i + over).min(points.len() - 1)]);
        let length = a.distance(b).max(1e-9);
        (-(b.y - a.y) / length, (b.x - a.x) / length)
    };
    let mut rows = Vec::with_capacity(points.len());
    for (i, p) in points.iter().enumerate() {
        if i % 256 == 0 {
            work.advance(0)?;
        }
        let (nx, ny) = normal(i);
        let value = |k: isize| {
            let d = k as f64 * step;
            tone_at(image, p.x + d * nx, p.y + d * ny)
        };
        rows.push((-(count as isize)..=count as isize).map(value).collect::<Vec<f64>>());
    }
    let every = (spacing / fine).round().max(1.0) as usize;
    let over = (half / fine).round() as usize;
    let mut found = Vec::new();
    for i in (0..points.len()).step_by(every) {
        work.advance(0)?;
        let rows = &rows[i.saturating_sub(over)..(i + over + 1).min(rows.len())];
        let mean = |k: usize| {
            let (sum, n) = rows
                .iter()
                .map(|r| r[k])
                .filter(|v| v.is_finite())
                .fold((0.0, 0usize), |(s, n), v| (s + v, n + 1));
            if n > 0 { sum / n as f64 } else { f64::NAN }
        };
        let values = (0..2 * count + 1).map(mean).collect();
        found.push(Profile { at: points[i], along: i as f64 * fine, normal: normal(i), values, step });
    }
    Ok(found)
}

/// Linear between the four nearest cell centres; NaN when one of them is missing.
fn tone_at(image: &Grid<f32>, x: f64, y: f64) -> f64 {
    let (x, y) = (x - 0.5, y - 0.5);
    let (c, r) = (x.floor(), y.floor());
    if c < 0.0 || r < 0.0 {
        return f64::NAN;
    }
    let (u, v) = (x - c, y - r);
    let at = |dc: usize, dr: usize| image.get(c as usize + dc, r as usize + dr).map_or(f64::NAN, f64::from);
    (at(0, 0) * (1.0 - u) + at(1, 0) * u) * (1.0 - v) + (at(0, 1) * (1.0 - u) + at(1, 1) * u) * v
}

impl Banks {
    pub fn width(self) -> f64 {
        self.right - self.left
    }

    pub fn middle(self) -> f64 {
        0.5 * (self.left + self.right)
    }

    /// The banks of a channel about `width` wide in a profile with values `step` apart, the line in its middle.
    /// `None` when something is missing across it or nothing fits the tone.
    pub fn of(values: &[f64], step: f64, width: f64, tone: ChannelTone) -> Option<Self> {
        let known = values.iter().all(|v| v.is_finite());
        let found = match (known, width < NARROW) {
            (false, _) => None,
            (true, true) => narrow(values, step, width, tone),
            (true, false) => parted(values, step, width, tone),
        };
        found.filter(|b| b.width() > 0.0)
    }
}

fn fits(tone: ChannelTone, inside: f64, left: f64, right: f64) -> bool {
    match tone {
        ChannelTone::Dark => inside < left && inside < right,
        ChannelTone::Bright => inside > left && inside > right,
        ChannelTone::EdgePair => (inside < left) == (inside < right),
    }
}

/// Three levels parted at two places by least squares; then each bank by the area under the profile between the
/// levels beside it.
fn parted(values: &[f64], step: f64, width: f64, tone: ChannelTone) -> Option<Banks> {
    let middle = values.len() / 2;
    let mut sums = vec![0.0];
    values.iter().for_each(|v| sums.push(sums[sums.len() - 1] + v));
    let mean = |from: usize, to: usize| (sums[to] - sums[from]) / (to - from) as f64;
    // −Σ (p − m)² up to a constant: Σ n m² over the three parts.
    let gain = |from: usize, to: usize| (sums[to] - sums[from]).powi(2) / (to - from) as f64;
    let (half, search) = (0.5 * width / step, SEARCH * width / step);
    let range = |centre: f64| {
        let clamp = |x: f64| x.round().clamp(2.0, values.len() as f64 - 2.0) as usize;
        clamp(centre - search)..=clamp(centre + search)
    };
    let mut best: Option<(f64, usize, usize)> = None;
    for l in range(middle as f64 - half) {
        for r in range(middle as f64 + half).filter(|r| *r > l + 1) {
            let value = gain(0, l) + gain(l, r) + gain(r, values.len());
            let (inside, left, right) = (mean(l, r), mean(0, l), mean(r, values.len()));
            if best.is_none_or(|b| value > b.0) && fits(tone, inside, left, right) {
                best = Some((value, l, r));
            }
        }
    }
    let (_, l, r) = best?;
    let reach = (((r - l) as f64 / 4.0).floor() as usize).clamp(1, ((3.0 / step).round() as usize).max(1));
    // Values stand for the cells around them: value i covers (i − ½, i + ½) steps.
    let inside = mean((l + reach).min(r - 1), (r.saturating_sub(reach)).max(l + reach + 1).min(values.len()));
    let bank = |at: usize, outside: f64, rises: bool| {
        let (from, to) = (at.saturating_sub(reach), (at + reach).min(values.len()));
        let share = ((mean(from, to) - inside) / (outside - inside)).clamp(0.0, 1.0) * (to - from) as f64;
        let edge = if rises { to as f64 - share } else { from as f64 + share };
        (edge - 0.5 - middle as f64) * step
    };
    let outer = |from: usize, to: usize| if to > from { mean(from, to) } else { f64::NAN };
    let left = outer(0, l.saturating_sub(reach).max(1));
    let right = outer((r + reach).min(values.len() - 1), values.len());
    if !fits(tone, inside, left, right) {
        return None;
    }
    Some(Banks { left: bank(l, left, false), right: bank(r, right, true) })
}

/// Two levels and a box between, blurred as pixels and the interpolation blur it, by least squares over its place
/// and width.
fn narrow(values: &[f64], step: f64, width: f64, tone: ChannelTone) -> Option<Banks> {
    const STEP: f64 = 0.125;
    let middle = (values.len() / 2) as f64;
    let n = values.len() as f64;
    let mean = values.iter().sum::<f64>() / n;
    let mut best: Option<(f64, f64, f64)> = None;
    let widths = (4..).map(|k| k as f64 * STEP).take_while(|w| *w <= 1.6 * width + 1.0);
    for wide in widths.filter(|w| *w >= 0.4 * width) {
        let most = (0.5 * width / STEP).ceil() as i32;
        for centre in (-most..=most).map(|k| f64::from(k) * STEP) {
            let (mut m, mut mm, mut mv) = (0.0, 0.0, 0.0);
            for (i, v) in values.iter().enumerate() {
                let x = (i as f64 - middle) * step - centre;
                let share = blurred_box(x, wide);
                m += share;
                mm += share * share;
                mv += share * (v - mean);
            }
            let variance = mm - m * m / n;
            let gain = mv * mv / variance.max(1e-12);
            if best.is_none_or(|b| gain > b.0) && fits(tone, mv, 0.0, 0.0) {
                best = Some((gain, centre, wide));
            }
        }
    }
    let (_, centre, wide) = best?;
    Some(Banks { left: centre - 0.5 * wide, right: centre + 0.5 * wide })
}

/// A box of height 1 and width `wide` about 0, blurred by a bell of the variance of a pixel (1/12) and of linear
/// interpolation (1/6 in the mean over positions).
fn blurred_box(x: f64, wide: f64) -> f64 {
    // A smooth step with the variance ¼: the logistic curve of scale √3/(2π), close to the normal one.
    let step = |d: f64| 1.0 / (1.0 + (-d / 0.2757).exp());
    step(x + 0.5 * wide) - step(x - 0.5 * wide)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn across(width: f64, shift: f64) -> Grid<f32> {
        // Exact share of each pixel column.
        Grid::from_fn(121, 60, |c, _| {
            let (l, r) = (60.0 + shift - 0.5 * width, 60.0 + shift + 0.5 * width);
            let share = ((c as f64 + 1.0).min(r) - (c as f64).max(l)).clamp(0.0, 1.0);
            (100.0 - 62.0 * share) as f32
        })
    }

    #[test]
    fn banks_of_straight_channels_are_found_to_a_tenth_of_a_pixel() {
        let line = [Point::new(60.0, 2.0), Point::new(60.0, 58.0)];
        for width in [2.0, 3.0, 4.4, 8.0, 16.3, 21.0, 40.0] {
            for shift in [0.0, 0.3, -0.7] {
                let image = across(width, shift);
                let found = profiles(&image, &line, 4.0, width * 1.1, 2.0, &Work::quiet()).unwrap();
                let profile = &found[found.len() / 2];
                let banks = Banks::of(&profile.values, profile.step, width * 1.1, ChannelTone::Dark).unwrap();
                crate::assert_close!(banks.width(), width, 0.2, "width {width} shifted by {shift}");
                // The way leads down the image, so its right is to the west.
                crate::assert_close!(banks.middle(), -shift, 0.15, "middle of {width} shifted by {shift}");
            }
        }
    }
}
