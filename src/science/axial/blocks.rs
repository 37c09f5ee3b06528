//! Block bootstrap of the mean axis: whole tiles of nodes are drawn, so that what hangs together stays
//! together.

use std::collections::BTreeMap;

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Bounds, Method, Point, Read, Seed, Source, Stopped, Symbol, Work};
use crate::numeric::quantile;

use super::mean::Resultant;
use super::sources::DERIVED;

pub static METHOD: Method = Method {
    id: "axial.block-bootstrap",
    name: "Block bootstrap of the mean axis",
    question: "How far would the mean axis move if the patch were sampled again?",
    formula: "C, S summed over tiles of side ℓ ≥ 4 e-folds drawn with replacement; half = 95 % quantile of |θ̄* − θ̄|",
    symbols: &[
        Symbol { symbol: "ℓ", meaning: "side of a tile", unit: "m" },
        Symbol { symbol: "θ̄*", meaning: "mean axis of one draw of tiles", unit: "deg" },
    ],
    assumptions: &["Tiles several correlation lengths wide are nearly independent."],
    limits: &[
        "Tiles of one or two e-folds give half the true scatter: at least 4 are used, and 16 tiles.",
        "With fewer than 10 tiles no bootstrap is made.",
        "With 16 tiles the scatter comes out some 13 % small.",
    ],
    sources: &[
        Source {
            key: "kunsch1989",
            authors: "Künsch, H. R.",
            year: 1989,
            title: "The jackknife and the bootstrap for general stationary observations",
            published: "Annals of Statistics 17, 1217–1241",
            locator: "",
            read: Read::Memory,
        },
        DERIVED,
    ],
};

/// Fewer tiles than this give no bootstrap.
pub const LEAST_TILES: f64 = 10.0;
/// Fewer tiles than this give one with a caution.
pub const GOOD_TILES: f64 = 16.0;

/// A block bootstrap's result.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BlockBootstrap {
    /// Side of a tile, unit of the positions.
    pub side: f64,
    /// Number of tiles of equal weight that would scatter alike, (Σw)²/Σw².
    pub tiles: f64,
    /// Quantile of |φ̄* − φ̄| on the circle, radians.
    pub half: f64,
}

/// Sums of the nodes by square tiles of `side`, in order of row and column.
pub fn tiles(phi: &[f64], weights: Option<&[f64]>, at: &[Point], side: f64) -> Vec<Resultant> {
    let Some(bounds) = Bounds::of(at.iter().copied()) else { return Vec::new() };
    // The tiling is centred, so that slivers are shared between opposite edges.
    let shift = |extent: f64| 0.5 * ((extent / side).ceil().max(1.0) * side - extent);
    let (left, up) = (shift(bounds.width()), shift(bounds.height()));
    let mut sums: BTreeMap<(i64, i64), Resultant> = BTreeMap::new();
    for (i, (p, phi)) in at.iter().zip(phi).enumerate() {
        let row = ((p.y - bounds.min.y + up) / side).floor() as i64;
        let col = ((p.x - bounds.min.x + left) / side).floor() as i64;
        let (w, (sin, cos)) = (weights.map_or(1.0, |w| w[i]), phi.sin_cos());
        let tile = sums.entry((row, col)).or_default();
        tile.cos += w * cos;
        tile.sin += w * sin;
        tile.weight += w;
    }
    sums.into_values().filter(|t| t.weight > 0.0).collect()
}

/// The number of tiles of equal weight that would scatter alike.
pub fn effective_tiles(tiles: &[Resultant]) -> f64 {
    let all: f64 = tiles.iter().map(|t| t.weight).sum();
    let square: f64 = tiles.iter().map(|t| t.weight * t.weight).sum();
    if square > 0.0 { all * all / square } else { 0.0 }
}

/// Draws `resamples` times as many tiles as there are, and takes the `level` quantile of the turn
/// of the mean. The same for any number of threads.
///
/// # Errors
/// [`Stopped`].
pub fn bootstrap(
    tiles: &[Resultant],
    side: f64,
    resamples: u32,
    level: f64,
    seed: Seed,
    work: &Work,
) -> Result<BlockBootstrap, Stopped> {
    const CHUNK: u32 = 64;
    let sum = |draw: &mut dyn FnMut() -> Resultant| {
        (0..tiles.len()).fold(Resultant::default(), |all, _| {
            let t = draw();
            Resultant { cos: all.cos + t.cos, sin: all.sin + t.sin, weight: all.weight + t.weight }
        })
    };
    let mut every = tiles.iter().copied().cycle();
    let mean = sum(&mut || every.next().unwrap_or_default()).direction();
    let turns: Vec<Vec<f64>> = (0..resamples.div_ceil(CHUNK))
        .into_par_iter()
        .map(|chunk| {
            work.advance(0)?;
            let mut random = seed.stream("axial.block-bootstrap", u64::from(chunk));
            let count = CHUNK.min(resamples - chunk * CHUNK);
            Ok((0..count)
                .map(|_| {
                    let drawn = sum(&mut || tiles[random.random_range(0..tiles.len())]);
                    (drawn.direction() - mean).sin().atan2((drawn.direction() - mean).cos()).abs()
                })
                .collect())
        })
        .collect::<Result<_, Stopped>>()?;
    let mut turns = turns.concat();
    let [half] = quantile::of(&mut turns, [level]);
    Ok(BlockBootstrap { side, tiles: effective_tiles(tiles), half })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    fn nodes(n: u32) -> (Vec<f64>, Vec<Point>) {
        let at = |i: u32| Point::new(f64::from(i % 20), f64::from(i / 20));
        let phi = |i: u32| 0.6 * (f64::from(i) * 2.4).sin();
        ((0..n).map(phi).collect(), (0..n).map(at).collect())
    }

    #[test]
    fn tiles_hold_every_node_once() {
        let (phi, at) = nodes(400);
        let tiles = tiles(&phi, None, &at, 7.0);
        assert_eq!(tiles.len(), 9);
        assert_eq!(tiles.iter().map(|t| t.weight).sum::<f64>(), 400.0);
    }

    #[test]
    fn single_nodes_as_tiles_give_the_plain_standard_error() {
        let (phi, at) = nodes(400);
        let tiles = tiles(&phi, None, &at, 1.0);
        assert_eq!(tiles.len(), 400);
        let half = bootstrap(&tiles, 1.0, 4000, 0.95, Seed(1), &Work::quiet()).expect("nobody stops").half;
        let delta = super::super::interval::dispersion(&phi, None);
        let plain = 1.96 * (delta / 400.0).sqrt();
        assert_close!(half / plain, 1.0, 0.05, "half width over theory");
    }

    #[test]
    fn a_stop_is_heard() {
        let (phi, at) = nodes(400);
        let work = Work::quiet();
        work.stop();
        assert!(bootstrap(&tiles(&phi, None, &at, 5.0), 5.0, 100, 0.95, Seed(1), &work).is_err());
    }
}
