//! Can a traced way be told from chance? The cost of ways between random places.

use std::f64::consts::TAU;

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Method, Point, Seed, Stopped, Symbol, Work};
use crate::numeric::least_path::CostField;
use crate::science::axial::sources::{DERIVED, at};

pub static METHOD: Method = Method {
    id: "channel.pen-chance",
    name: "Cost per length against ways between random places",
    question: "Would a way between any two places here be as cheap?",
    formula: "p = (1 + #{k : q_k ≤ q}) / (n + 1)",
    symbols: &[
        Symbol { symbol: "q", meaning: "cost per pixel of the traced way", unit: "1" },
        Symbol {
            symbol: "q_k",
            meaning: "the same of the k-th of n ways between random places as far apart, each place moved to the cheapest pixel near it, as a user would click",
            unit: "1",
        },
    ],
    assumptions: &[
        "Most of the ground is no channel; where channels are dense random ways use them too and p is large.",
    ],
    limits: &["p is never below 1/(n + 1).", "It says that a line stands out, not that water made it."],
    sources: &[at(DERIVED, "")],
};

/// How far a random place is moved to the cheapest pixel, pixels.
const REACH: isize = 8;
/// Places tried for each way before the ground counts as too small.
const TRIES: usize = 60;

/// Costs per pixel, ascending, of up to `n` ways between random places about `length` pixels apart; fewer
/// where the ground is small or cut up.
///
/// # Errors
/// [`Stopped`].
pub fn null_costs(
    ground: &CostField,
    length: f64,
    n: usize,
    seed: Seed,
    work: &Work,
) -> Result<Vec<f64>, Stopped> {
    let ways: Vec<Option<f64>> = (0..n)
        .into_par_iter()
        .map(|k| {
            let mut rng = seed.stream("channel.pen-chance", k as u64);
            let within = |p: Point| {
                p.x >= 0.0 && p.y >= 0.0 && p.x < ground.width() as f64 && p.y < ground.height() as f64
            };
            for _ in 0..TRIES {
                let from = Point::new(
                    rng.random::<f64>() * ground.width() as f64,
                    rng.random::<f64>() * ground.height() as f64,
                );
                let (sin, cos) = (TAU * rng.random::<f64>()).sin_cos();
                let to = Point::new(from.x + length * cos, from.y + length * sin);
                if !within(to) {
                    continue;
                }
                let (Some(from), Some(to)) = (cheapest_near(ground, from), cheapest_near(ground, to)) else {
                    continue;
                };
                if let Some(way) = ground.way(from, to, work)? {
                    return Ok(Some(way.cost_per_px));
                }
            }
            Ok(None)
        })
        .collect::<Result<_, Stopped>>()?;
    let mut costs: Vec<f64> = ways.into_iter().flatten().collect();
    costs.sort_by(f64::total_cmp);
    Ok(costs)
}

/// p of a way whose cost per pixel is `cost`, against [`null_costs`]; `None` for fewer than 19 of them.
pub fn chance(null: &[f64], cost: f64) -> Option<f64> {
    let as_cheap = null.iter().filter(|q| **q <= cost).count();
    (null.len() >= 19).then(|| (1 + as_cheap) as f64 / (null.len() + 1) as f64)
}

/// The middle of the cheapest pixel within [`REACH`]; `None` where all are impassable.
fn cheapest_near(ground: &CostField, p: Point) -> Option<Point> {
    let middle = |v: f64, d: isize| v.floor() + d as f64 + 0.5;
    (-REACH..=REACH)
        .flat_map(|dr| (-REACH..=REACH).map(move |dc| Point::new(middle(p.x, dc), middle(p.y, dr))))
        .filter_map(|q| Some((ground.cost(q)?, q)))
        .min_by(|a, b| a.0.total_cmp(&b.0).then(a.1.distance(p).total_cmp(&b.1.distance(p))))
        .map(|(_, q)| q)
}
