//! The pen: the way along a crest between two picks.

use std::sync::Arc;

use rayon::prelude::*;

use crate::ground::{Grid, Method, Point, Polygon, Polyline, Read, Source, Stopped, Symbol, Work};
use crate::numeric::least_path::{CostField, Way};
use crate::numeric::quantile;

use super::candidates::{Crossing, crossings, hessian, main_curvature};
use super::fields::{Fields, HALO, Kernels};
use super::floor::{floor, thresholds};
use super::lines::{FACING, margin};
use super::link::Index;
use super::scale::MOST_PX;
use super::tone::Ground;
use super::{CrestModel, CrestSettings, lines, scale, simplify};

/// The record of the pen.
pub static METHOD: Method = Method {
    id: "crest.pen",
    name: "Minimal path along a crest",
    question: "Which way does the crest take between two picks?",
    formula: "c = 0.03 + (1 − min(1, s/q₉₀))², halved where a crest point lies;  |∇T| = c, T(from) = 0; the way runs from `to` down ∇T and is then moved along the normals of crest points within 1 px + σ/2",
    symbols: &[
        Symbol { symbol: "c", meaning: "cost of a pixel", unit: "1" },
        Symbol { symbol: "s", meaning: "response of the crest model there", unit: "tone/px or tone/px²" },
        Symbol {
            symbol: "q₉₀", meaning: "the 90 % quantile of the strengths of crest points", unit: "as s"
        },
        Symbol { symbol: "T", meaning: "least cost from the first pick", unit: "px" },
        Symbol { symbol: "σ", meaning: "scale of the derivatives", unit: "px" },
    ],
    assumptions: &[
        "The crest is the cheapest connection of its picks; where another is cheaper, a pick between settles it.",
    ],
    limits: &[
        "A way exists between any two picks, whether or not a crest does: what is drawn is the word of who drew it.",
        "Picks within two scales of a crest point are moved onto it.",
    ],
    sources: &[
        Source {
            key: "cohen1997",
            authors: "Cohen, L. D.; Kimmel, R.",
            year: 1997,
            title: "Global minimum for active contour models: a minimal path approach",
            published: "International Journal of Computer Vision 24, 57–78",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "ventifact-crest-pen",
            authors: "this program",
            year: 2026,
            title: "Cost of a crest model's response",
            published: "derived here",
            locator: "",
            read: Read::Derived,
        },
    ],
};

/// Cost along the strongest crests, that of ground without response being 1 more.
const LEAST: f64 = 0.03;
/// Picks are moved onto a crest point within so many scales, but at least so many pixels.
const SNAP: [f64; 2] = [2.0, 3.0];
/// Largest square on which a course is chosen, in scales, for ridges and for slip faces: a seventh of the spacing
/// these scales suit.
const SQUARE: [f64; 2] = [1.0, 3.0];
/// Greatest distance between a way and its simplified form, pixels.
const TOLERANCE: f64 = 0.2;
/// Side of the middle of a picture that tells its own scale, pixels.
const LOOKED_AT: usize = 512;
/// Rows a task handles; fixed, so that results do not depend on the number of threads.
const STRIP: usize = 64;

/// A picture on which crests are cheap. Points are its pixels.
#[derive(Debug)]
pub struct Pen {
    field: Arc<CostField>,
    /// Crest points of the model, row by row.
    points: Vec<Crossing>,
    model: CrestModel,
    scale_px: f64,
}

impl Pen {
    /// Lays the ground. `model`: what a crest looks like, what fits best when `None`; `scale_px`: scale of the
    /// derivatives in pixels (at least 1), that of a sweep over the middle of the picture when `None`;
    /// `logarithm`: whether the tone is radar intensity. Missing pixels are impassable.
    ///
    /// # Errors
    /// [`Stopped`].
    pub fn of(
        image: &Grid<f32>,
        model: Option<CrestModel>,
        scale_px: Option<f64>,
        logarithm: bool,
        work: &Work,
    ) -> Result<Self, Stopped> {
        let (width, height) = (image.width(), image.height());
        let settings = CrestSettings { model, logarithm, ..CrestSettings::default() };
        let sigma = match scale_px.filter(|sigma| sigma.is_finite()) {
            Some(sigma) => sigma.clamp(1.0, MOST_PX),
            None => own_scale(image, &settings, work)?,
        };
        let outline = Polygon::rectangle(width as f64, height as f64);
        let ground = Ground::new(image, &outline, &settings, work)?;
        let open = ground.open(margin(sigma));
        let tone = ground.prepared(sigma, true, work)?;
        let (steps, moments) = crossings(&tone, &open, true, sigma, work)?;
        let model = model.unwrap_or(moments.fits(sigma)[0].model);
        let slip_face = model == CrestModel::SlipFace;
        let (sense, skewness) = moments.slip_sense();
        let sense = (slip_face && skewness >= moments.clear(sigma)).then_some(sense);
        let (tone, found) = match slip_face {
            true => (tone, steps),
            false => {
                let tone = ground.prepared(sigma, false, work)?;
                let found = crossings(&tone, &open, false, sigma, work)?.0;
                (tone, found)
            }
        };
        let kind = Kind { model, sense };
        let (mut right, mut wrong): (Vec<Crossing>, Vec<Crossing>) =
            found.into_iter().partition(|p| kind.holds(p));
        let strengths = |points: &[Crossing]| points.iter().map(|p| p.strength).collect::<Vec<f64>>();
        let cells = open.iter().filter(|o| **o).count();
        let least = floor(ground.noise, cells, slip_face, sigma, settings.significance);
        let low = thresholds(least, &mut strengths(&right), &mut strengths(&wrong)).low;
        wrong.clear();
        let strong = if right.is_empty() { 0.0 } else { quantile::of(&mut strengths(&right), [0.9])[0] };
        right.retain(|p| p.strength >= low);
        let mut costs = kind.costs(&tone, &ground.valid, strong, sigma, work)?;
        for p in &right {
            costs[p.row as usize * width + p.col as usize] *= 0.5;
        }
        let side = sigma * if slip_face { SQUARE[1] } else { SQUARE[0] };
        let field = Arc::new(CostField::finer(width, height, &costs, side as usize));
        Ok(Self { field, points: right, model, scale_px: sigma })
    }

    /// What its ways cost, pixel by pixel.
    pub fn field(&self) -> &Arc<CostField> {
        &self.field
    }

    pub fn model(&self) -> CrestModel {
        self.model
    }

    /// Scale of the derivatives, pixels.
    pub fn scale_px(&self) -> f64 {
        self.scale_px
    }

    /// The crest point nearest to a pick within two scales; the pick itself where there is none.
    pub fn snapped(&self, pick: Point) -> Point {
        let reach = (SNAP[0] * self.scale_px).max(SNAP[1]);
        self.nearest(&Index::new(&self.points, self.field.height()), pick, reach).map_or(pick, |p| p.at)
    }

    /// The line of a way, moved square to the crest onto the crest points beside it, calmed, and with no more
    /// points than it needs. Its ends stay.
    pub fn line(&self, way: &Way) -> Polyline {
        let index = Index::new(&self.points, self.field.height());
        let reach = 1.0 + 0.5 * self.scale_px;
        let last = way.line.0.len().saturating_sub(1);
        let onto: Vec<Point> = way
            .line
            .0
            .iter()
            .enumerate()
            .map(|(i, p)| match self.nearest(&index, *p, reach).filter(|_| i > 0 && i < last) {
                Some(near) => {
                    let [x, y] = near.normal;
                    let off = (near.at.x - p.x) * x + (near.at.y - p.y) * y;
                    Point::new(p.x + off * x, p.y + off * y)
                }
                None => *p,
            })
            .collect();
        let calm = simplify::calmed(&onto, self.scale_px.round() as usize);
        Polyline(simplify::keep(&calm, TOLERANCE).into_iter().map(|i| calm[i]).collect())
    }

    fn nearest(&self, index: &Index<'_>, p: Point, reach: f64) -> Option<&Crossing> {
        if !(p.x >= 0.0 && p.y >= 0.0) {
            return None;
        }
        index
            .around(p.x as u32, p.y as u32, reach.ceil() as u32)
            .map(|i| (&self.points[i], self.points[i].at.distance(p)))
            .filter(|(_, d)| *d <= reach)
            .min_by(|a, b| a.1.total_cmp(&b.1))
            .map(|(p, _)| p)
    }
}

/// The scale of a sweep over the middle of a picture.
fn own_scale(image: &Grid<f32>, settings: &CrestSettings, work: &Work) -> Result<f64, Stopped> {
    let (width, height) = (image.width().min(LOOKED_AT), image.height().min(LOOKED_AT));
    let (col, row) = ((image.width() - width) / 2, (image.height() - height) / 2);
    let middle = Grid::from_fn(width, height, |c, r| image.get(col + c, row + r).unwrap_or(f32::NAN));
    let outline = Polygon::rectangle(width as f64, height as f64);
    let ground = Ground::new(&middle, &outline, settings, work)?;
    Ok(scale::choose(&ground, settings, work)?.sigma)
}

/// A model with the sense of its slip faces, where they have one.
struct Kind {
    model: CrestModel,
    sense: Option<f64>,
}

impl Kind {
    fn holds(&self, p: &Crossing) -> bool {
        lines::is_right(p, self.model, self.sense)
    }

    /// Size of the model's response at an index of the fields, 0 where it has the wrong sense.
    fn response(&self, fields: &Fields, i: usize) -> f64 {
        let (x, y) = (f64::from(fields.x[i]), f64::from(fields.y[i]));
        match (self.model, self.sense) {
            (CrestModel::SlipFace, Some(sense)) => {
                let facing = x * sense.cos() + y * sense.sin();
                if facing > FACING * x.hypot(y) { x.hypot(y) } else { 0.0 }
            }
            (CrestModel::SlipFace, None) => x.hypot(y),
            (CrestModel::BrightRidge, _) => (-main_curvature(hessian(fields, i))).max(0.0),
            (CrestModel::DarkRidge, _) => main_curvature(hessian(fields, i)).max(0.0),
            (CrestModel::BothRidges, _) => main_curvature(hessian(fields, i)).abs(),
        }
    }

    /// c = 0.03 + (1 − min(1, s/q₉₀))²; infinite on missing pixels.
    fn costs(
        &self,
        tone: &Grid<f32>,
        valid: &[bool],
        strong: f64,
        sigma: f64,
        work: &Work,
    ) -> Result<Vec<f32>, Stopped> {
        let (width, height) = (tone.width(), tone.height());
        let kernels = Kernels::new(sigma);
        let mut costs = vec![f32::INFINITY; width * height];
        costs.par_chunks_mut((STRIP * width).max(1)).enumerate().try_for_each(|(strip, costs)| {
            let first = strip * STRIP;
            let fields = Fields::of(tone, &kernels, first, costs.len() / width, work)?;
            for (i, cost) in costs.iter_mut().enumerate().filter(|(i, _)| valid[first * width + i]) {
                let share = if strong > 0.0 {
                    (self.response(&fields, HALO * width + i) / strong).min(1.0)
                } else {
                    0.0
                };
                *cost = (LEAST + (1.0 - share).powi(2)) as f32;
            }
            work.advance(0)
        })?;
        Ok(costs)
    }
}
