//! The constant-drop test: the threshold from which streams of the first order fall as far as others.

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};
use crate::numeric::sum::total;

use super::heads::DropRow;
use super::paths::Paths;
use super::tree::{Choice, Stream, Tree};

pub static METHOD: Method = Method {
    id: "drainage.constant-drop",
    name: "Constant-drop test",
    question: "From which threshold on is what is drawn a network of channels, not a pattern on hillslopes?",
    formula: "t = (d̄₁ − d̄₂) / √(s² (1/n₁ + 1/n₂)), s² = ((n₁ − 1) s₁² + (n₂ − 1) s₂²)/(n₁ + n₂ − 2); the least C for which |t| < 2",
    symbols: &[
        Symbol {
            symbol: "d̄₁, s₁, n₁",
            meaning: "drops of streams of Strahler order 1: mean, standard deviation, number",
            unit: "m",
        },
        Symbol { symbol: "d̄₂, s₂, n₂", meaning: "the same of all higher orders", unit: "m" },
        Symbol { symbol: "C", meaning: "threshold, in steps of √2 from a few cells upwards", unit: "m²" },
    ],
    assumptions: &[
        "In a network that water carved, the mean drop of a stream does not depend on its order (Broscoe 1959).",
    ],
    limits: &[
        "Streams that leave the ground or end at an outlet are cut off there and are not counted.",
        "Where both groups are few, any threshold passes: the numbers stand beside it.",
        "The threshold after it must pass too, when it can be tested: one pass among failures is chance.",
    ],
    sources: &[
        Source {
            key: "tarboton1991",
            authors: "Tarboton, D. G.; Bras, R. L.; Rodríguez-Iturbe, I.",
            year: 1991,
            title: "On the extraction of channel networks from digital elevation data",
            published: "Hydrological Processes 5, 81–100",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "broscoe1959",
            authors: "Broscoe, A. J.",
            year: 1959,
            title: "Quantitative analysis of longitudinal stream profiles of small watersheds",
            published: "Columbia University, Office of Naval Research project NR 389-042, technical report 18",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// A path from cell to cell is so much longer than the line it follows, in the mean over all directions:
/// 8 (√2 − 1)/π (H10 of the checks).
const INFLATION: f64 = 1.054_785_6;
/// Thresholds at most: √2 to this power spans any raster.
const MOST_ROWS: usize = 80;
/// |t| from which the drops differ.
const T_LIMIT: f64 = 2.0;

/// The test from threshold `least` upwards, until fewer than two streams of higher order are left.
pub(super) fn rows(
    surface: &Grid<f32>,
    paths: Paths,
    choice: Choice,
    least: f64,
    ground_m2: f64,
    work: &Work,
) -> Result<Vec<DropRow>, Stopped> {
    let mut rows = Vec::new();
    if !(least > 0.0 && least.is_finite()) {
        return Ok(rows);
    }
    for k in 0..MOST_ROWS {
        let threshold = least * std::f64::consts::SQRT_2.powi(k as i32);
        let tree = Tree::new(paths, Choice { threshold, ..choice }, work)?;
        let row = row(surface, &tree, threshold, ground_m2, work)?;
        let is_last = row.higher.0 < 2;
        rows.push(row);
        if is_last {
            break;
        }
    }
    Ok(rows)
}

/// The threshold the rows propose: the least with |t| < 2 whose follower, if it has a t, passes too.
pub(super) fn proposed(rows: &[DropRow]) -> Option<f64> {
    let passes = |row: &DropRow| row.t.map(|t| t.abs() < T_LIMIT);
    let found = |i: &usize| {
        let next = rows.get(i + 1).and_then(passes);
        passes(&rows[*i]) == Some(true) && next != Some(false)
    };
    (0..rows.len()).find(found).map(|i| rows[i].threshold_m2)
}

fn row(
    surface: &Grid<f32>,
    tree: &Tree,
    threshold_m2: f64,
    ground_m2: f64,
    work: &Work,
) -> Result<DropRow, Stopped> {
    let z = |cell: usize| f64::from(surface.values()[cell]);
    let (first, higher): (Vec<Stream>, Vec<Stream>) =
        tree.streams(work)?.into_iter().filter(|s| s.joins).partition(|s| s.order == 1);
    let drops =
        |streams: &[Stream]| spread(&streams.iter().map(|s| z(s.top) - z(s.foot)).collect::<Vec<_>>());
    let (first, higher) = (drops(&first), drops(&higher));
    let density = if ground_m2 > 0.0 { tree.length() / INFLATION / ground_m2 } else { 0.0 };
    Ok(DropRow { threshold_m2, first, higher, t: student(first, higher), density })
}

/// Number, mean and standard deviation; 0 where there are too few.
fn spread(x: &[f64]) -> (usize, f64, f64) {
    let n = x.len();
    let mean = total(x.iter().copied()) / n.max(1) as f64;
    let squares = total(x.iter().map(|x| (x - mean).powi(2)));
    (n, mean, if n > 1 { (squares / (n - 1) as f64).sqrt() } else { 0.0 })
}

fn student((n1, d1, s1): (usize, f64, f64), (n2, d2, s2): (usize, f64, f64)) -> Option<f64> {
    if n1 < 2 || n2 < 2 {
        return None;
    }
    let (f1, f2) = (n1 as f64, n2 as f64);
    let pooled = ((f1 - 1.0) * s1 * s1 + (f2 - 1.0) * s2 * s2) / (f1 + f2 - 2.0);
    (pooled > 0.0).then(|| (d1 - d2) / (pooled * (1.0 / f1 + 1.0 / f2)).sqrt())
}
