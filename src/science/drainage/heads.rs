//! Where channels begin: what gathers downstream and must pass a threshold.

use std::borrow::Cow;

use serde::{Deserialize, Serialize};

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::accumulate::Areas;
use super::curvature;
use super::paths::{Paths, pause};
use super::sources::OCALLAGHAN;

pub static METHOD: Method = Method {
    id: "drainage.channel-heads",
    name: "Channel heads by area, or by area and slope",
    question: "Where does a channel begin?",
    formula: "A ≥ C, or A S² ≥ C at some cell above",
    symbols: &[
        Symbol { symbol: "A", meaning: "ground that drains through the cell", unit: "m²" },
        Symbol { symbol: "S", meaning: "slope to the cell's receiver, fall over ground distance", unit: "1" },
        Symbol {
            symbol: "C",
            meaning: "threshold, stated or proposed by the constant-drop test",
            unit: "m²",
        },
    ],
    assumptions: &[
        "The elevation shows the ground over which water ran.",
        "All cells below a channel cell are channels.",
    ],
    limits: &[
        "A threshold draws channels on any surface that slopes: look at the image before believing them.",
        "A cliff of one cell passes A S² with little area.",
    ],
    sources: &[
        OCALLAGHAN,
        Source {
            key: "montgomery1992",
            authors: "Montgomery, D. R.; Dietrich, W. E.",
            year: 1992,
            title: "Channel initiation and the problem of landscape scale",
            published: "Science 255, 826–830",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// What must pass a threshold for a channel to begin.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum HeadRule {
    /// Contributing area A, m².
    #[default]
    Area,
    /// A·S² (Montgomery & Dietrich 1992), m².
    SlopeArea,
    /// Area of upwardly curved cells above (Peuker & Douglas 1975), m².
    CurvedArea,
}

/// The constant-drop test at one threshold (Tarboton, Bras & Rodríguez-Iturbe 1991).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DropRow {
    pub threshold_m2: f64,
    /// Streams of order 1 that end at a junction, their mean drop and its standard deviation, m.
    pub first: (usize, f64, f64),
    /// The same of higher order.
    pub higher: (usize, f64, f64),
    /// Student's t of the difference; `None` when either side has fewer than two streams or none spreads.
    pub t: Option<f64>,
    /// Drainage density, m⁻¹; lengths without what a path from cell to cell overstates.
    pub density: f64,
}

/// What the rule compares with its threshold, cell by cell, m²; it never lessens downstream.
pub(super) fn support<'a>(
    rule: HeadRule,
    surface: &Grid<f32>,
    area: &'a Areas,
    paths: Paths,
    scale_cells: f64,
    work: &Work,
) -> Result<Cow<'a, [f64]>, Stopped> {
    match rule {
        HeadRule::Area => greatest_above(area.values(), paths, work),
        HeadRule::SlopeArea => {
            let mut own = vec![0.0; paths.len()];
            let mut steps = 0;
            for (cell, own) in own.iter_mut().enumerate() {
                let slope = slope(surface, paths, cell);
                // A·S²
                *own = area.of(cell) * slope * slope;
                pause(&mut steps, work)?;
            }
            greatest_above(Cow::Owned(own), paths, work)
        }
        HeadRule::CurvedArea => {
            let curved = curvature::curved(surface, paths, scale_cells, work)?;
            let own = |cell: usize| if curved[cell] { paths.area(cell) } else { 0.0 };
            let mut sum: Vec<f64> = (0..paths.len()).map(own).collect();
            paths.downstream(work, |from, to| sum[to] += sum[from])?;
            Ok(Cow::Owned(sum))
        }
    }
}

/// Fall over ground distance from a cell to its receiver, ≥ 0; 0 where water leaves the ground.
pub(super) fn slope(surface: &Grid<f32>, paths: Paths, cell: usize) -> f64 {
    let (Some(to), length) = (paths.next(cell), paths.step(cell)) else { return 0.0 };
    let fall = f64::from(surface.values()[cell]) - f64::from(surface.values()[to]);
    if fall > 0.0 && length > 0.0 { fall / length } else { 0.0 }
}

/// The greatest value among a cell and all that drain through it. Values that never lessen downstream, as areas
/// routed to one receiver, are left as they are.
fn greatest_above<'a>(values: Cow<'a, [f64]>, paths: Paths, work: &Work) -> Result<Cow<'a, [f64]>, Stopped> {
    let mut steps = 0;
    for cell in 0..paths.len() {
        pause(&mut steps, work)?;
        let lessens = |to: usize| paths.is_ground(cell) && values[to] < values[cell];
        if paths.next(cell).is_some_and(lessens) {
            let mut most = values.into_owned();
            paths.downstream(work, |from, to| most[to] = most[to].max(most[from]))?;
            return Ok(Cow::Owned(most));
        }
    }
    Ok(values)
}
