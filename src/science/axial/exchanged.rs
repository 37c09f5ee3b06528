//! Two fields whose tiles change places: what differences chance alone makes between samples of correlated axes.

use std::collections::BTreeMap;
use std::f64::consts::TAU;

use rand::seq::SliceRandom as _;
use rayon::prelude::*;

use crate::ground::{Bounds, Point, Seed, Stopped, Work};

/// Classes of circular rank in which the distribution functions are held against each other.
const CLASSES: usize = 64;

/// What the tests sum over a tile.
#[derive(Clone, Copy)]
struct Tile {
    nodes: f64,
    cos: f64,
    sin: f64,
    distance: f64,
    classes: [f64; CLASSES],
}

impl Tile {
    const EMPTY: Self = Self { nodes: 0.0, cos: 0.0, sin: 0.0, distance: 0.0, classes: [0.0; CLASSES] };

    fn add(&mut self, other: &Self) {
        self.nodes += other.nodes;
        self.cos += other.cos;
        self.sin += other.sin;
        self.distance += other.distance;
        for (a, b) in self.classes.iter_mut().zip(&other.classes) {
            *a += b;
        }
    }
}

/// One of the two fields: circular ranks of its axes, ranks of distance from its mean, and where its nodes stand.
pub(super) struct Field<'a> {
    pub ranks: &'a [f64],
    pub distances: &'a [f64],
    pub at: &'a [Point],
}

/// p of U², of W and of H: the share of random exchanges of tiles of `side` between the fields that makes each as
/// great. Tiles hang together within, so that they, not nodes, are what may change places.
pub(super) fn p_values(
    fields: [Field<'_>; 2],
    side: f64,
    permutations: u32,
    seed: Seed,
    work: &Work,
) -> Result<[f64; 3], Stopped> {
    const CHUNK: u32 = 32;
    let [first, second] = fields.map(|f| tiles(&f, side));
    let (count, tiles) = (first.len(), [first, second].concat());
    let mut all = Tile::EMPTY;
    tiles.iter().for_each(|t| all.add(t));
    let observed = statistics(&tiles[..count], &all);
    let greater: Vec<[u32; 3]> = (0..permutations.div_ceil(CHUNK))
        .into_par_iter()
        .map(|chunk| {
            work.advance(0)?;
            let mut random = seed.stream("axial.exchanged", u64::from(chunk));
            let (mut order, mut greater) = (tiles.clone(), [0; 3]);
            for _ in 0..CHUNK.min(permutations - chunk * CHUNK) {
                order.shuffle(&mut random);
                let drawn = statistics(&order[..count], &all);
                for k in 0..3 {
                    greater[k] += u32::from(drawn[k] >= observed[k] * (1.0 - 1e-12));
                }
            }
            Ok(greater)
        })
        .collect::<Result<_, Stopped>>()?;
    let p = |k: usize| {
        let sum: u32 = greater.iter().map(|g| g[k]).sum();
        (1.0 + f64::from(sum)) / (1.0 + f64::from(permutations))
    };
    Ok([p(0), p(1), p(2)])
}

/// U², W and H but for constant factors, of the tiles that belong to the first field.
fn statistics(first: &[Tile], all: &Tile) -> [f64; 3] {
    let mut a = Tile::EMPTY;
    first.iter().for_each(|t| a.add(t));
    let (n1, n2) = (a.nodes, all.nodes - a.nodes);
    if n1 <= 0.0 || n2 <= 0.0 {
        return [0.0; 3];
    }
    let apart = |one: f64, both: f64| one / n1 - (both - one) / n2;
    let (mut f1, mut f2, mut sum, mut squares) = (0.0, 0.0, 0.0, 0.0);
    for (one, both) in a.classes.iter().zip(&all.classes) {
        f1 += one / n1;
        f2 += (both - one) / n2;
        let d = f1 - f2;
        sum += both * d;
        squares += both * d * d;
    }
    let share = n1 * n2 / all.nodes;
    [
        share * (squares - sum * sum / all.nodes) / all.nodes,
        share * (apart(a.cos, all.cos).powi(2) + apart(a.sin, all.sin).powi(2)),
        share * apart(a.distance, all.distance).powi(2),
    ]
}

/// Sums by square tiles, in order of row and column, centred as those of the block bootstrap.
fn tiles(field: &Field<'_>, side: f64) -> Vec<Tile> {
    let Some(bounds) = Bounds::of(field.at.iter().copied()) else { return Vec::new() };
    let shift = |extent: f64| 0.5 * ((extent / side).ceil().max(1.0) * side - extent);
    let (left, up) = (shift(bounds.width()), shift(bounds.height()));
    let mut sums: BTreeMap<(i64, i64), Tile> = BTreeMap::new();
    for (i, p) in field.at.iter().enumerate() {
        let row = ((p.y - bounds.min.y + up) / side).floor() as i64;
        let col = ((p.x - bounds.min.x + left) / side).floor() as i64;
        let tile = sums.entry((row, col)).or_insert(Tile::EMPTY);
        let (sin, cos) = field.ranks[i].sin_cos();
        tile.nodes += 1.0;
        tile.cos += cos;
        tile.sin += sin;
        tile.distance += field.distances[i];
        let class = (field.ranks[i] / TAU * CLASSES as f64).ceil() as usize;
        tile.classes[class.clamp(1, CLASSES) - 1] += 1.0;
    }
    sums.into_values().collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::science::axial::rank;

    /// Axes that turn by `by` from a checkered field of 4 × 4 nodes a square.
    fn run(by: f64, spread: f64) -> [f64; 3] {
        let at: Vec<Point> = (0..1024).map(|i| Point::new(f64::from(i % 32), f64::from(i / 32))).collect();
        let value = |p: &Point, k: f64| ((p.x / 4.0).floor() * 12.9 + (p.y / 4.0).floor() * 78.2 + k).sin();
        let first: Vec<f64> = at.iter().map(|p| value(p, 0.0)).collect();
        let second: Vec<f64> = at.iter().map(|p| by + spread * value(p, 2.0)).collect();
        let (ranks, distances) = (rank::circular([&first, &second]), rank::of_distance([&first, &second]));
        let field = |i: usize| Field { ranks: &ranks[i], distances: &distances[i], at: &at };
        p_values([field(0), field(1)], 4.0, 199, Seed(3), &Work::quiet()).expect("nobody stops")
    }

    #[test]
    fn a_turn_shows_in_two_tests_and_a_spread_in_the_third() {
        let [u2, w, h] = run(0.0, 1.0);
        assert!(u2 > 0.05 && w > 0.05 && h > 0.05, "{u2} {w} {h}");
        // So far that circular ranks of the two lie on separate halves of the circle.
        let [u2, w, h] = run(2.2, 1.0);
        assert!(u2 < 0.02 && w < 0.02 && h > 0.05, "{u2} {w} {h}");
        assert!(run(0.0, 0.3)[2] < 0.02);
    }
}
