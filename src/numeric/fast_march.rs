//! First arrival over ground of uneven cost: |∇T| = c, marched outward from one point (Sethian 1996), and
//! the cheapest way back.
//!
//! Cells wait in a ring of buckets instead of a heap and leave each bucket in order of entry (Yatziv,
//! Bartesaghi & Sapiro 2006). A time is wrong by at most one bucket's width, half the least cost of a step or
//! a 4000th of the greatest, whichever is larger, beside the scheme's own first-order error.

use crate::ground::{Point, Stopped, Work};

/// Cost of a step of one cell, > 0, everywhere on a rectangle; infinite where nobody may walk.
#[derive(Clone, Debug)]
pub struct Terrain {
    width: usize,
    height: usize,
    /// With a rim of infinite cells, so that every cell has four neighbours.
    cost: Vec<f32>,
    least: f32,
    greatest: f32,
}

/// Arrival times on a terrain, complete where `done`.
#[derive(Clone, Debug)]
pub struct Front {
    width: usize,
    height: usize,
    start: Point,
    time: Vec<f32>,
    done: Vec<bool>,
}

/// Cells marched between two looks at Stop.
const STRIDE: usize = 1 << 13;
/// Most buckets of the ring.
const MOST_BUCKETS: f32 = 4096.0;

impl Terrain {
    /// From rows of costs. What is not a positive number is impassable.
    ///
    /// # Panics
    /// When the number of costs is not `width * height`: a bug in the caller.
    pub fn new(width: usize, height: usize, costs: impl ExactSizeIterator<Item = f32>) -> Self {
        assert_eq!(costs.len(), width * height, "one cost a cell");
        let stride = width + 2;
        let mut cost = vec![f32::INFINITY; stride * (height + 2)];
        let (mut least, mut greatest) = (f32::INFINITY, 0.0f32);
        for (i, c) in costs.enumerate() {
            if c > 0.0 && c.is_finite() {
                cost[(i / width + 1) * stride + i % width + 1] = c;
                least = least.min(c);
                greatest = greatest.max(c);
            }
        }
        Self { width, height, cost, least, greatest }
    }

    pub fn width(&self) -> usize {
        self.width
    }

    pub fn height(&self) -> usize {
        self.height
    }

    /// The cost of a cell; infinite outside.
    pub fn cost(&self, col: usize, row: usize) -> f32 {
        if col < self.width && row < self.height {
            self.cost[(row + 1) * (self.width + 2) + col + 1]
        } else {
            f32::INFINITY
        }
    }

    /// The passable cell that holds the point (cell units, corner at (0, 0)).
    pub fn cell(&self, p: Point) -> Option<(usize, usize)> {
        let inside = p.x >= 0.0 && p.y >= 0.0 && p.x < self.width as f64 && p.y < self.height as f64;
        let (col, row) = (p.x as usize, p.y as usize);
        (inside && self.cost(col, row).is_finite()).then_some((col, row))
    }

    /// Marches from `start` until the cells around every point of `until` have their time, or over all that
    /// can be reached when `until` is empty. `None` when the start is impassable.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn march(&self, start: Point, until: &[Point], work: &Work) -> Result<Option<Front>, Stopped> {
        let Some((col, row)) = self.cell(start) else { return Ok(None) };
        let stride = self.width + 2;
        let index = |col: usize, row: usize| (row + 1) * stride + col + 1;
        let mut time = vec![f32::INFINITY; self.cost.len()];
        let mut done = vec![false; self.cost.len()];
        let width = (0.5 * self.least).max(2.0 * self.greatest / MOST_BUCKETS);
        let mut ring: Vec<Vec<u32>> = vec![Vec::new(); (4.0 * self.greatest / width) as usize + 4];
        let bucket = |t: f32| (t / width) as usize;
        let mut waiting = 0usize;
        // Straight from the point itself to the cells around it.
        for (c, r) in around(col, row) {
            let i = if c < self.width && r < self.height { index(c, r) } else { continue };
            let far = start.distance(Point::new(c as f64 + 0.5, r as f64 + 0.5)) as f32;
            let t = far * 0.5 * (self.cost[i] + self.cost[index(col, row)]);
            if t.is_finite() {
                time[i] = t;
                ring[bucket(t)].push(i as u32);
                waiting += 1;
            }
        }
        // The back-tracking looks at the neighbours of the last cell, so they count too.
        let cells: Vec<_> = until.iter().filter_map(|p| self.cell(*p)).collect();
        let ends: Vec<usize> = cells.iter().map(|(c, r)| index(*c, *r)).collect();
        let mut wanted: Vec<usize> = cells
            .iter()
            .flat_map(|(c, r)| around(*c, *r))
            .filter(|(c, r)| self.cost(*c, *r).is_finite())
            .map(|(c, r)| index(c, r))
            .collect();
        let patience = 1.5 * self.greatest;
        let mut reached: Option<f32> = None;
        let (mut at, mut popped) = (0usize, 0usize);
        while waiting > 0 {
            let slot = at % ring.len();
            let mut k = 0;
            while k < ring[slot].len() {
                let i = ring[slot][k] as usize;
                k += 1;
                waiting -= 1;
                if done[i] {
                    continue;
                }
                done[i] = true;
                popped += 1;
                if popped.is_multiple_of(STRIDE) {
                    work.advance(0)?;
                }
                for j in [i - 1, i + 1, i - stride, i + stride] {
                    let c = self.cost[j];
                    if done[j] || c == f32::INFINITY {
                        continue;
                    }
                    let t = arrival(time[j - 1].min(time[j + 1]), time[j - stride].min(time[j + stride]), c);
                    if t < time[j] {
                        let known = time[j] < f32::INFINITY && bucket(time[j]) == bucket(t);
                        time[j] = t;
                        if !known {
                            let slot = bucket(t).max(at) % ring.len();
                            ring[slot].push(j as u32);
                            waiting += 1;
                        }
                    }
                }
            }
            ring[slot].clear();
            at += 1;
            if !until.is_empty() {
                wanted.retain(|i| !done[*i]);
                let now = at as f32 * width;
                if reached.is_none() && ends.iter().all(|i| done[*i]) {
                    reached = Some(now);
                }
                // A costly neighbour is not waited for longer than any step takes.
                if reached.is_some_and(|then| wanted.is_empty() || now > then + patience) {
                    break;
                }
            }
        }
        Ok(Some(Front { width: self.width, height: self.height, start, time, done }))
    }
}

/// The cell and its eight neighbours; those beyond the left or upper rim wrap to numbers past any grid.
fn around(col: usize, row: usize) -> impl Iterator<Item = (usize, usize)> {
    let by = |v: usize, d: usize| v.wrapping_add(d).wrapping_sub(1);
    (0..9).map(move |n| (by(col, n % 3), by(row, n / 3)))
}

/// Godunov's upwind solution of |∇T| = c from the earlier neighbours along a row and down a column.
#[inline]
fn arrival(a: f32, b: f32, c: f32) -> f32 {
    let (low, gap) = (a.min(b), (a - b).abs());
    if gap >= c { low + c } else { 0.5 * (a + b + (2.0 * c * c - gap * gap).sqrt()) }
}

impl Front {
    fn index(&self, col: usize, row: usize) -> usize {
        (row + 1) * (self.width + 2) + col + 1
    }

    /// The arrival time at the cell that holds the point; `None` where the front has not come.
    pub fn time(&self, p: Point) -> Option<f64> {
        let inside = p.x >= 0.0 && p.y >= 0.0 && p.x < self.width as f64 && p.y < self.height as f64;
        let i = self.index(p.x as usize, p.y as usize);
        (inside && self.done[i]).then(|| f64::from(self.time[i]))
    }

    /// The cheapest way from the front's start to `end`: downhill on T in steps of `step` cells. `None`
    /// where the front has not come.
    pub fn way_to(&self, end: Point, step: f64) -> Option<Vec<Point>> {
        self.time(end)?;
        let mut way = vec![end];
        let mut at = end;
        // A way crosses each cell a few times at most.
        let most = ((self.width * self.height) as f64 / step) as usize + 16;
        let mut best = f64::INFINITY;
        let mut idle = 0;
        while at.distance(self.start) > 1.0 {
            if way.len() > most {
                return None;
            }
            let next = self.downhill(at).map(|(x, y)| Point::new(at.x - step * x, at.y - step * y));
            let next = next.filter(|p| self.time(*p).is_some());
            let own = self.time(at)?;
            idle = if own < best - 1e-6 { 0 } else { idle + 1 };
            best = best.min(own);
            at = match next {
                // Downhill within the limits of first-order gradients: several steps without gain mean a
                // place where they point in a circle.
                Some(p) if (idle as f64) * step < 4.0 => p,
                _ => {
                    idle = 0;
                    self.lower_neighbour(at)?
                }
            };
            way.push(at);
        }
        way.push(self.start);
        way.reverse();
        Some(way)
    }

    /// Unit gradient of T between the four cells around a point; `None` where no cell has one.
    fn downhill(&self, p: Point) -> Option<(f64, f64)> {
        let (x, y) = (p.x - 0.5, p.y - 0.5);
        let (col, row) = (x.floor(), y.floor());
        let (fx, fy) = (x - col, y - row);
        let (mut gx, mut gy) = (0.0, 0.0);
        for (dc, dr, weight) in [
            (0.0, 0.0, (1.0 - fx) * (1.0 - fy)),
            (1.0, 0.0, fx * (1.0 - fy)),
            (0.0, 1.0, (1.0 - fx) * fy),
            (1.0, 1.0, fx * fy),
        ] {
            let (c, r) = (col + dc, row + dr);
            if c < 0.0 || r < 0.0 || c >= self.width as f64 || r >= self.height as f64 {
                continue;
            }
            let i = self.index(c as usize, r as usize);
            if self.done[i] {
                let (x, y) = self.gradient(i);
                gx += weight * x;
                gy += weight * y;
            }
        }
        let size = gx.hypot(gy);
        (size > 0.0).then(|| (gx / size, gy / size))
    }

    /// Upwind differences, as the scheme saw them.
    fn gradient(&self, i: usize) -> (f64, f64) {
        let t = self.time[i];
        let one = |before: f32, after: f32| {
            let low = before.min(after);
            if low >= t {
                0.0
            } else if before <= after {
                f64::from(t - before)
            } else {
                -f64::from(t - after)
            }
        };
        let stride = self.width + 2;
        (one(self.time[i - 1], self.time[i + 1]), one(self.time[i - stride], self.time[i + stride]))
    }

    /// The centre of the earliest cell around, when it is earlier than the own.
    fn lower_neighbour(&self, p: Point) -> Option<Point> {
        let (col, row) = (p.x as usize, p.y as usize);
        let own = self.time[self.index(col, row)];
        let earliest = around(col, row)
            .filter(|(c, r)| *c < self.width && *r < self.height && self.done[self.index(*c, *r)])
            .min_by(|a, b| self.time[self.index(a.0, a.1)].total_cmp(&self.time[self.index(b.0, b.1)]))?;
        (self.time[self.index(earliest.0, earliest.1)] < own)
            .then(|| Point::new(earliest.0 as f64 + 0.5, earliest.1 as f64 + 0.5))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numeric::maximum::golden;
    use proptest::prelude::*;

    fn marched(terrain: &Terrain, start: Point) -> Front {
        terrain.march(start, &[], &Work::quiet()).unwrap().unwrap()
    }

    /// Every cell again and again from its neighbours until nothing changes.
    fn swept(terrain: &Terrain, first: &Front) -> Vec<f32> {
        let stride = terrain.width + 2;
        let mut time = vec![f32::INFINITY; terrain.cost.len()];
        let start = (first.start.x as usize, first.start.y as usize);
        // The cells around the start keep what the march began with.
        let kept: Vec<usize> = around(start.0, start.1)
            .filter(|(c, r)| *c < terrain.width && *r < terrain.height)
            .map(|(c, r)| (r + 1) * stride + c + 1)
            .collect();
        kept.iter().for_each(|i| time[*i] = first.time[*i]);
        loop {
            let mut changed = false;
            for i in stride + 1..time.len() - stride - 1 {
                if terrain.cost[i] < f32::INFINITY {
                    let t = arrival(
                        time[i - 1].min(time[i + 1]),
                        time[i - stride].min(time[i + stride]),
                        terrain.cost[i],
                    );
                    changed |= t < time[i];
                    time[i] = time[i].min(t);
                }
            }
            if !changed {
                return time;
            }
        }
    }

    proptest! {
        #[test]
        fn buckets_agree_with_sweeping_to_rest(
            costs in prop::collection::vec(0.5..20.0f32, 24 * 17),
            holes in prop::collection::vec(0usize..24 * 17, 0..60),
        ) {
            let mut costs = costs;
            holes.iter().filter(|i| **i != 5 * 24 + 7).for_each(|i| costs[*i] = f32::NAN);
            let terrain = Terrain::new(24, 17, costs.iter().copied());
            let front = marched(&terrain, Point::new(7.5, 5.5));
            let truth = swept(&terrain, &front);
            let width = 0.5 * terrain.least;
            for (got, want) in front.time.iter().zip(&truth) {
                prop_assert!(got == want || (got - want).abs() <= 2.0 * width, "{got} for {want}");
            }
        }
    }

    /// On even ground T is the distance, but for the scheme's first-order error.
    #[test]
    fn even_ground_is_crossed_at_even_speed() {
        let terrain = Terrain::new(201, 201, vec![3.0f32; 201 * 201].into_iter());
        let start = Point::new(100.5, 100.5);
        let front = marched(&terrain, start);
        for deg in (0..360).step_by(15) {
            let (sin, cos) = f64::from(deg).to_radians().sin_cos();
            let p = Point::new((100.0 + 90.0 * cos).round() + 0.5, (100.0 + 90.0 * sin).round() + 0.5);
            let far = 3.0 * start.distance(p);
            crate::assert_close!(front.time(p).unwrap() / far, 1.0, 0.02, "toward {deg}°");
        }
    }

    /// Fermat: across the border of two costs the way bends as light does.
    #[test]
    fn ways_are_refracted() {
        let (slow, quick) = (4.0, 1.0);
        let cost = |i: usize| if i % 300 < 150 { slow } else { quick };
        let terrain = Terrain::new(300, 300, (0..300 * 300).map(cost).collect::<Vec<f32>>().into_iter());
        let (from, to) = (Point::new(70.5, 40.5), Point::new(260.5, 250.5));
        let border = |y: f64| Point::new(150.0, y);
        let price =
            |y: f64| f64::from(slow) * from.distance(border(y)) + f64::from(quick) * border(y).distance(to);
        let y = golden(|y| -price(y), 0.0, 300.0, 1e-9);
        let front = marched(&terrain, from);
        crate::assert_close!(front.time(to).unwrap() / price(y), 1.0, 0.02, "time");
        let way = front.way_to(to, 0.5).unwrap();
        let crossing = way.iter().find(|p| p.x >= 150.0).unwrap();
        crate::assert_close!(crossing.y, y, 1.5, "where the border is crossed");
    }

    /// Stopping at a wanted point changes nothing of the way to it.
    #[test]
    fn an_early_end_keeps_the_way() {
        let cost = |i: usize| 1.0 + ((i * 7919) % 101) as f32 / 10.0;
        let terrain = Terrain::new(120, 90, (0..120 * 90).map(cost).collect::<Vec<f32>>().into_iter());
        let (from, to) = (Point::new(11.2, 70.9), Point::new(93.4, 20.3));
        let whole = marched(&terrain, from).way_to(to, 0.5);
        let early = terrain.march(from, &[to], &Work::quiet()).unwrap().unwrap();
        assert!(early.done.iter().filter(|d| **d).count() < 120 * 90);
        assert_eq!(early.way_to(to, 0.5), whole);
    }
}
