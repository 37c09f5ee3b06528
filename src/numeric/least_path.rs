//! The cheapest way between two places of a picture whose pixels cost: the course over squares of pixels, then
//! the way pixel by pixel near it (Cohen & Kimmel 1997).

use std::sync::Arc;

use rayon::prelude::*;

use crate::ground::{Point, Polyline, Stopped, Work};

use super::fast_march::{Front, Terrain};

/// The cost of every pixel of a picture, ready for ways. Points are pixels of that picture.
#[derive(Debug)]
pub struct CostField {
    fine: Terrain,
    /// Squares of `factor` pixels a side, costs per pixel.
    coarse: Terrain,
    factor: usize,
}

/// Cheapest ways from one pick to anywhere.
#[derive(Clone, Debug)]
pub struct Ways {
    field: Arc<CostField>,
    from: Point,
    front: Front,
}

/// The cheapest way between two picks.
#[derive(Clone, Debug, PartialEq)]
pub struct Way {
    /// From the first pick to the second, about a point a pixel.
    pub line: Polyline,
    pub length_px: f64,
    /// ∫ cost along the line.
    pub cost: f64,
    /// cost / length.
    pub cost_per_px: f64,
}

/// Squares among which a course is chosen: as many as a front crosses in some thirty milliseconds.
const MOST_SQUARES: usize = 240_000;
/// Step of the back-tracking, pixels.
const STEP: f64 = 0.5;
/// Half the length of the lines whose mean cost makes that of a square, pixels.
const LINE: isize = 2;

impl CostField {
    /// Of stated costs, row by row; what is not a positive number is impassable.
    ///
    /// # Panics
    /// When the number of costs is not `width * height`: a bug in the caller.
    pub fn new(width: usize, height: usize, costs: &[f32]) -> Self {
        Self::finer(width, height, costs, usize::MAX)
    }

    /// The same with squares of at most `side` pixels, where cheap lines lie so close together that larger squares
    /// would hold two of them; slower on large ground.
    ///
    /// # Panics
    /// As [`CostField::new`].
    pub fn finer(width: usize, height: usize, costs: &[f32], side: usize) -> Self {
        let fine = Terrain::new(width, height, costs.iter().copied());
        let factor = (1..).find(|k| width.div_ceil(*k) * height.div_ceil(*k) <= MOST_SQUARES).unwrap_or(1);
        let factor = factor.min(side.max(1));
        let coarse = if factor > 1 { squares(&fine, factor) } else { fine.clone() };
        Self { fine, coarse, factor }
    }

    pub fn width(&self) -> usize {
        self.fine.width()
    }

    pub fn height(&self) -> usize {
        self.fine.height()
    }

    /// Cost of a step in the pixel that holds the point; `None` outside and where it is impassable.
    pub fn cost(&self, p: Point) -> Option<f64> {
        let (col, row) = self.fine.cell(p)?;
        Some(f64::from(self.fine.cost(col, row)))
    }

    /// Ways from a pick to anywhere; `None` when the pick is outside or impassable.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn ways_from(self: &Arc<Self>, pick: Point, work: &Work) -> Result<Option<Ways>, Stopped> {
        if self.fine.cell(pick).is_none() {
            return Ok(None);
        }
        let front = self.coarse.march(self.to_square(pick), &[], work)?;
        Ok(front.map(|front| Ways { field: Arc::clone(self), from: pick, front }))
    }

    /// The cheapest way between two picks; `None` when there is none.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn way(&self, from: Point, to: Point, work: &Work) -> Result<Option<Way>, Stopped> {
        if self.fine.cell(from).is_none() || self.fine.cell(to).is_none() {
            return Ok(None);
        }
        match self.coarse.march(self.to_square(from), &[self.to_square(to)], work)? {
            Some(front) => self.refined(&front, from, to, work),
            None => Ok(None),
        }
    }

    fn to_square(&self, p: Point) -> Point {
        Point::new(p.x / self.factor as f64, p.y / self.factor as f64)
    }

    /// The way pixel by pixel near the course that the front over squares takes.
    fn refined(&self, front: &Front, from: Point, to: Point, work: &Work) -> Result<Option<Way>, Stopped> {
        let Some(course) = front.way_to(self.to_square(to), STEP) else { return Ok(None) };
        if self.factor == 1 {
            return Ok(Some(self.along(course)));
        }
        let near = Corridor::around(&course, self.factor, &self.fine);
        let there = |p: Point| Point::new(p.x - near.col as f64, p.y - near.row as f64);
        let back = |p: Point| Point::new(p.x + near.col as f64, p.y + near.row as f64);
        let way = near
            .terrain
            .march(there(from), &[there(to)], work)?
            .and_then(|front| front.way_to(there(to), STEP))
            .map(|way| way.into_iter().map(back).collect());
        let way = match way {
            Some(way) => Some(way),
            // Squares touch where their pixels do not: then pixel by pixel over the whole ground.
            None => self.fine.march(from, &[to], work)?.and_then(|front| front.way_to(to, STEP)),
        };
        Ok(way.map(|way| self.along(way)))
    }

    /// Length and cost of a back-tracked way, smoothed over a pixel or two.
    fn along(&self, way: Vec<Point>) -> Way {
        let line = Polyline(self.smoothed(&way));
        let (mut length, mut cost) = (0.0, 0.0);
        let mut last = 1.0;
        for pair in line.0.windows(2) {
            let middle = Point::new(0.5 * (pair[0].x + pair[1].x), 0.5 * (pair[0].y + pair[1].y));
            last = self.cost(middle).unwrap_or(last);
            length += pair[0].distance(pair[1]);
            cost += last * pair[0].distance(pair[1]);
        }
        let cost_per_px = if length > 0.0 { cost / length } else { last };
        Way { line, length_px: length, cost, cost_per_px }
    }

    /// Binomial smoothing, ends kept, then every second point; points never leave passable ground.
    fn smoothed(&self, way: &[Point]) -> Vec<Point> {
        const PASSES: usize = 8;
        let mut line = way.to_vec();
        let mut next = line.clone();
        for _ in 0..PASSES {
            for i in 1..line.len().saturating_sub(1) {
                let mean = |a: f64, b: f64, c: f64| 0.25 * (a + 2.0 * b + c);
                let p = Point::new(
                    mean(line[i - 1].x, line[i].x, line[i + 1].x),
                    mean(line[i - 1].y, line[i].y, line[i + 1].y),
                );
                next[i] = if self.fine.cell(p).is_some() { p } else { line[i] };
            }
            line.copy_from_slice(&next);
        }
        let last = line.len() - 1;
        (0..line.len()).filter(|i| i % 2 == 0 || *i == last).map(|i| line[i]).collect()
    }
}

impl Ways {
    /// The pick they start from.
    pub fn from(&self) -> Point {
        self.from
    }

    /// The cheapest way to a point; `None` when there is none.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn to(&self, p: Point, work: &Work) -> Result<Option<Way>, Stopped> {
        if self.field.fine.cell(p).is_none() {
            return Ok(None);
        }
        self.field.refined(&self.front, self.from, p, work)
    }
}

/// The pixels near a course, as a terrain of their own.
struct Corridor {
    col: usize,
    row: usize,
    terrain: Terrain,
}

impl Corridor {
    fn around(course: &[Point], factor: usize, fine: &Terrain) -> Self {
        let reach = 4 * factor + 4;
        let pixels: Vec<(usize, usize)> =
            course.iter().map(|p| ((p.x * factor as f64) as usize, (p.y * factor as f64) as usize)).collect();
        let low = |pick: fn(&(usize, usize)) -> usize| {
            pixels.iter().map(pick).min().unwrap_or(0).saturating_sub(reach)
        };
        let high = |pick: fn(&(usize, usize)) -> usize, most: usize| {
            (pixels.iter().map(pick).max().unwrap_or(0) + reach + 1).min(most)
        };
        let (col, row) = (low(|p| p.0), low(|p| p.1));
        let (right, lower) = (high(|p| p.0, fine.width()), high(|p| p.1, fine.height()));
        let (width, height) = (right - col, lower - row);
        let mut near = vec![false; width * height];
        let mut before = None;
        for &(x, y) in &pixels {
            if before == Some((x, y)) {
                continue;
            }
            before = Some((x, y));
            let (from, to) = (x.saturating_sub(reach).max(col) - col, (x + reach + 1).min(right) - col);
            for r in y.saturating_sub(reach).max(row)..(y + reach + 1).min(lower) {
                near[(r - row) * width + from..(r - row) * width + to].fill(true);
            }
        }
        let costs = (0..width * height)
            .map(|i| if near[i] { fine.cost(col + i % width, row + i / width) } else { f32::INFINITY });
        Self { col, row, terrain: Terrain::new(width, height, costs) }
    }
}

/// The cost of squares: of each pixel the least mean along a short line in four directions, so that a line
/// keeps its cost whatever its bearing and single cheap pixels of noise do not; of each square its cheapest.
fn squares(fine: &Terrain, factor: usize) -> Terrain {
    let (width, height) = (fine.width().div_ceil(factor), fine.height().div_ceil(factor));
    let rows: Vec<Vec<f32>> = (0..height)
        .into_par_iter()
        .map(|row| {
            let mut least = vec![f32::INFINITY; width];
            for r in row * factor..((row + 1) * factor).min(fine.height()) {
                for c in 0..fine.width() {
                    let mean = line_mean(fine, c, r);
                    least[c / factor] = least[c / factor].min(mean);
                }
            }
            least
        })
        .collect();
    let costs: Vec<f32> = rows.concat();
    Terrain::new(width, height, costs.into_iter())
}

/// The least mean cost along lines through a pixel; its own where every line meets impassable ground.
fn line_mean(fine: &Terrain, col: usize, row: usize) -> f32 {
    let own = fine.cost(col, row);
    if own == f32::INFINITY {
        return own;
    }
    let mean = |dc: isize, dr: isize| {
        let step = |n: isize| fine.cost(col.wrapping_add_signed(n * dc), row.wrapping_add_signed(n * dr));
        (-LINE..=LINE).map(step).sum::<f32>() / (2 * LINE + 1) as f32
    };
    let least = mean(1, 0).min(mean(0, 1)).min(mean(1, 1)).min(mean(1, -1));
    if least < f32::INFINITY { least } else { own }
}
