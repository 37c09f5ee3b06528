//! Cells that lie in hollows: never the highest of four.

use rayon::prelude::*;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};
use crate::numeric::separable::smooth_valid;

use super::paths::Paths;

pub static METHOD: Method = Method {
    id: "drainage.curved-area",
    name: "Channel heads by upwardly curved ground",
    question: "Where does ground that is shaped as a channel gather enough to be one?",
    formula: "Σ aᵢ cᵢ ≥ C over the cells above; cᵢ = 0 where the smoothed cell is the highest of any 2 × 2 cells, else 1",
    symbols: &[
        Symbol { symbol: "aᵢ", meaning: "ground area of a cell", unit: "m²" },
        Symbol { symbol: "cᵢ", meaning: "whether the cell is curved upwards", unit: "1" },
        Symbol {
            symbol: "C",
            meaning: "threshold, stated or proposed by the constant-drop test",
            unit: "m²",
        },
    ],
    assumptions: &["Channels lie in hollows that the cells resolve."],
    limits: &[
        "Noise makes hollows of its own: the smoothing before decides which count.",
        "Equal highest cells are all struck out, so that flats do not count as curved.",
    ],
    sources: &[
        Source {
            key: "peuker1975",
            authors: "Peucker, T. K.; Douglas, D. H.",
            year: 1975,
            title: "Detection of surface-specific points by local parallel processing of discrete terrain elevation data",
            published: "Computer Graphics and Image Processing 4, 375–387",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "tarboton2001",
            authors: "Tarboton, D. G.; Ames, D. P.",
            year: 2001,
            title: "Advances in the mapping of flow networks from digital elevation data",
            published: "World Water and Environmental Resources Congress, ASCE",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// Whether each cell is curved upwards, on the surface smoothed by `scale_cells` (standard deviation in cells of
/// mean size, alike along and across on the ground); 0 does not smooth.
pub(super) fn curved(
    surface: &Grid<f32>,
    paths: Paths,
    scale_cells: f64,
    work: &Work,
) -> Result<Vec<bool>, Stopped> {
    let smoothed = if scale_cells > 0.0 && scale_cells.is_finite() && !surface.is_empty() {
        let [across, down] = paths.mean_size();
        let size = (across * down).sqrt();
        let sigma =
            [across, down].map(|side| if side > 0.0 { scale_cells * size / side } else { scale_cells });
        Some(smooth_valid(&centred(surface), sigma, work)?)
    } else {
        None
    };
    let z = smoothed.as_ref().unwrap_or(surface).values();
    let mut curved = vec![false; paths.len()];
    curved.par_chunks_mut(paths.width.max(1)).enumerate().try_for_each(|(row, out)| {
        work.advance(0)?;
        for (col, out) in out.iter_mut().enumerate() {
            let cell = row * paths.width + col;
            *out = paths.is_ground(cell) && !is_highest_of_four(z, paths, cell);
        }
        Ok(())
    })?;
    Ok(curved)
}

/// Whether a cell is the highest, alone or not, of one of the four squares of 2 × 2 cells it belongs to. Squares
/// with missing cells or beyond the edge do not count; a cell without any whole square does as the highest.
fn is_highest_of_four(z: &[f32], paths: Paths, cell: usize) -> bool {
    let mut squares = 0;
    for (dx, dy) in [(1, 1), (-1, 1), (-1, -1), (1, -1)] {
        let others = [(dx, 0), (0, dy), (dx, dy)]
            .map(|(dx, dy)| paths.neighbour(cell, dx, dy).filter(|other| paths.is_ground(*other)));
        let [Some(a), Some(b), Some(c)] = others else { continue };
        squares += 1;
        if [a, b, c].iter().all(|other| z[cell] >= z[*other]) {
            return true;
        }
    }
    squares == 0
}

/// Elevations about their first value, so that smoothing in single precision keeps small differences.
fn centred(surface: &Grid<f32>) -> Grid<f32> {
    let base = surface.valid_values().next().unwrap_or(0.0);
    surface.map(|z| z - base)
}
