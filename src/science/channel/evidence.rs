//! Lines held against the image: a channel has its tone along its whole line, and ground between its arms.

use crate::ground::{Grid, Stopped, Work};
use crate::numeric::quantile;
use crate::numeric::thin::{around, thin};

use super::detect::ChannelTone;
use super::graph::{Sketch, Stretch};
use super::profile::{Profile, profiles};
use super::response::Response;

/// Half of the width over which the tone of the middle is taken, over the width.
const CORE: f64 = 0.15;
/// A place of a line stands out from its sides by this share of the typical response of its stretch at least.
const LEAST_SHARE: f64 = 0.4;
/// Half of the length over which a place is averaged: widths, and pixels at least.
const AVERAGED: f64 = 0.75;
const LEAST_AVERAGED: f64 = 4.0;
/// Stretches are cut where the tone is missing over so many widths, and pixels at least.
const MISSING: f64 = 0.5;
const LEAST_MISSING: f64 = 4.0;
/// Ground between two arms differs from them by this share of their response at least.
const ISLAND_SHARE: f64 = 0.5;

impl Sketch {
    /// Cuts out of every stretch what is not of the tone sought against both of its sides.
    ///
    /// # Errors
    /// [`Stopped`].
    pub(super) fn cut_unseen(
        &mut self,
        image: &Grid<f32>,
        tone: ChannelTone,
        response: &Response,
        work: &Work,
    ) -> Result<(), Stopped> {
        let mut kept = Vec::with_capacity(self.stretches.len());
        for stretch in std::mem::take(&mut self.stretches) {
            work.advance(0)?;
            let seen = seen_along(image, tone, response, &stretch, work)?;
            if seen.iter().all(|s| *s) {
                kept.push(stretch);
                continue;
            }
            let last = seen.len() - 1;
            let mut from = 0;
            while from < seen.len() {
                let to = (from..seen.len()).find(|i| seen[*i] != seen[from]).unwrap_or(seen.len());
                if seen[from] && to - from > 1 {
                    let mut node = |i: usize, end: usize| {
                        if i == 0 || i == last {
                            return stretch.ends[end];
                        }
                        self.nodes.push(stretch.line[i]);
                        self.nodes.len() - 1
                    };
                    let ends = [node(from, 0), node(to - 1, 1)];
                    kept.push(Stretch { ends, line: stretch.line[from..to].to_vec(), ..stretch });
                }
                from = to;
            }
        }
        self.stretches = kept;
        Ok(())
    }

    /// Fills what the lines enclose where it is no ground of its own, thins again, and gives the lines anew.
    ///
    /// # Errors
    /// [`Stopped`].
    pub(super) fn fill_false_islands(
        &self,
        image: &Grid<f32>,
        response: &Response,
        width: impl Fn(&[usize]) -> f64,
        work: &Work,
    ) -> Result<Self, Stopped> {
        let columns = image.width();
        let mut mask = self.cells(columns, image.height());
        let mut stays = mask.clone();
        for hole in holes(&mask, columns, work)? {
            work.advance(0)?;
            if !is_island(&hole, &mask, image, response) {
                for c in hole {
                    mask[c] = true;
                    around(c, columns, stays.len()).into_iter().flatten().for_each(|n| stays[n] = false);
                }
            }
        }
        thin(&mut mask, columns, &response.excess, |c| stays[c], false, work)?;
        thin(&mut mask, columns, &response.excess, |_| false, true, work)?;
        Sketch::of_lines(&mask, columns, width, work)
    }

    /// The cells under the lines.
    fn cells(&self, columns: usize, rows: usize) -> Vec<bool> {
        let mut mask = vec![false; columns * rows];
        for pair in self.stretches.iter().flat_map(|s| s.line.windows(2)) {
            let steps = (2.0 * pair[0].distance(pair[1])).ceil().max(1.0);
            for i in 0..=steps as usize {
                let t = i as f64 / steps;
                let at = |a: f64, b: f64, n: usize| ((a + t * (b - a)).max(0.0) as usize).min(n - 1);
                let (c, r) = (at(pair[0].x, pair[1].x, columns), at(pair[0].y, pair[1].y, rows));
                mask[r * columns + c] = true;
            }
        }
        mask
    }
}

/// Whether the tone is there at each point of a stretch; short lapses are forgiven.
fn seen_along(
    image: &Grid<f32>,
    tone: ChannelTone,
    response: &Response,
    stretch: &Stretch,
    work: &Work,
) -> Result<Vec<bool>, Stopped> {
    let line = super::refine::smoothed(&stretch.line, (0.25 * stretch.width).max(1.5));
    let half = (AVERAGED * stretch.width).max(LEAST_AVERAGED);
    let spacing = (0.25 * stretch.width).max(1.0);
    let found = profiles(image, &line, spacing, stretch.width, half, work)?;
    let total = stretch.length();
    let mut seen = vec![true; stretch.line.len()];
    let (Some(last), true) = (found.last(), total > 0.0) else { return Ok(seen) };
    let mut steps: Vec<f64> =
        stretch.line.iter().map(|p| response.step_at(super::detect::cell_under(response, *p))).collect();
    let typical = quantile::median(&mut steps);
    let marks: Vec<bool> = found.iter().map(|p| stands_out(p, tone, stretch.width, typical)).collect();
    // Points of the stretch lie nearly evenly on the smoothed line.
    let scale = last.along.max(1e-9) / total;
    let mut along = 0.0;
    for i in 0..seen.len() {
        if i > 0 {
            along += stretch.line[i].distance(stretch.line[i - 1]);
        }
        let k = found.partition_point(|p| p.along < along * scale - 0.5 * spacing).min(marks.len() - 1);
        seen[i] = marks[k];
    }
    let least = (MISSING * stretch.width).max(LEAST_MISSING);
    let mut from = 0;
    while from < seen.len() {
        let to = (from..seen.len()).find(|i| seen[*i] != seen[from]).unwrap_or(seen.len());
        let length: f64 = stretch.line[from..to].windows(2).map(|w| w[0].distance(w[1])).sum();
        if !seen[from] && length < least {
            seen[from..to].fill(true);
        }
        from = to;
    }
    Ok(seen)
}

fn stands_out(profile: &Profile, tone: ChannelTone, width: f64, typical: f64) -> bool {
    let middle = profile.values.len() as f64 / 2.0 - 0.5;
    let mean = |from: f64, to: f64| {
        let inside = profile.values.iter().enumerate().filter(|(i, v)| {
            let x = (*i as f64 - middle) * profile.step;
            x >= from && x <= to && v.is_finite()
        });
        let (sum, n) = inside.fold((0.0, 0usize), |(s, n), (_, v)| (s + v, n + 1));
        (n > 0).then(|| sum / n as f64)
    };
    let reach = (CORE * width).max(0.5);
    let (near, far) = (0.6 * width + 0.5, width + 2.0);
    let (Some(inside), Some(left), Some(right)) = (mean(-reach, reach), mean(-far, -near), mean(near, far))
    else {
        return true;
    };
    let lift = inside - 0.5 * (left + right);
    let lift = match tone {
        ChannelTone::Dark => -lift,
        ChannelTone::Bright => lift,
        ChannelTone::EdgePair => lift.abs(),
    };
    lift >= LEAST_SHARE * typical
}

/// Patches of empty cells that lines enclose; the one around everything, and those at the rim, are left out.
fn holes(mask: &[bool], columns: usize, work: &Work) -> Result<Vec<Vec<usize>>, Stopped> {
    let rows = mask.len() / columns.max(1);
    let mut seen = mask.to_vec();
    let mut found = Vec::new();
    let rim =
        |c: usize| c % columns == 0 || c % columns + 1 == columns || c < columns || c / columns + 1 == rows;
    let starts = (0..mask.len()).filter(|c| rim(*c)).chain(0..mask.len());
    for (i, start) in starts.enumerate() {
        if i % 65_536 == 0 {
            work.advance(0)?;
        }
        if seen[start] {
            continue;
        }
        seen[start] = true;
        let mut patch = vec![start];
        let mut at = 0;
        while at < patch.len() {
            if at % 65_536 == 0 {
                work.advance(0)?;
            }
            for near in around(patch[at], columns, mask.len()).into_iter().step_by(2).flatten() {
                if !seen[near] {
                    seen[near] = true;
                    patch.push(near);
                }
            }
            at += 1;
        }
        if !rim(start) {
            found.push(patch);
        }
    }
    Ok(found)
}

/// Whether a hole has cells beyond the banks of the lines around it, and these differ from the lines.
fn is_island(hole: &[usize], mask: &[bool], image: &Grid<f32>, response: &Response) -> bool {
    let columns = image.width();
    let mut lines: Vec<usize> = hole
        .iter()
        .flat_map(|c| around(*c, columns, mask.len()).into_iter().flatten())
        .filter(|c| mask[*c])
        .collect();
    lines.sort_unstable();
    lines.dedup();
    let count = lines.len().max(1) as f64;
    let width = lines.iter().map(|c| response.strip_at(*c).width).sum::<f64>() / count;
    let step = lines.iter().map(|c| response.step_at(*c)).sum::<f64>() / count;
    // Peeled from the lines inwards, a cell at a time, by sides and corners in turn: about the true distance.
    let mut left: std::collections::HashSet<usize> = hole.iter().copied().collect();
    let mut front = lines.clone();
    for turn in 0..(0.5 * width).ceil() as usize {
        let stride = 1 + (turn + 1) % 2;
        let mut next: Vec<usize> = Vec::new();
        for c in &front {
            for n in around(*c, columns, mask.len()).into_iter().step_by(stride).flatten() {
                if left.remove(&n) {
                    next.push(n);
                }
            }
        }
        front = next;
    }
    let tone = |cells: &mut dyn Iterator<Item = usize>| {
        let seen = cells.filter_map(|c| image.get(c % columns, c / columns)).filter(|v| v.is_finite());
        let (sum, n) = seen.fold((0.0, 0usize), |(s, n), v| (s + f64::from(v), n + 1));
        (n > 3).then(|| sum / n as f64)
    };
    let mut inner: Vec<usize> = left.into_iter().collect();
    inner.sort_unstable();
    let (Some(inside), Some(along)) = (tone(&mut inner.into_iter()), tone(&mut lines.into_iter())) else {
        return false;
    };
    (inside - along).abs() >= ISLAND_SHARE * step
}
