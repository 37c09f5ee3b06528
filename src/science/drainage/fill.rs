//! Sinks raised to their lowest rim.

use std::cmp::Reverse;
use std::collections::{BinaryHeap, VecDeque};

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::routing::STEPS;

/// The record of filling.
pub const METHOD: Method = Method {
    id: "drainage.fill",
    name: "Priority-flood filling",
    question: "Up to where must each sink be raised so that its water runs off?",
    formula: "z'(c) = min over all ways from c to an outlet of the highest z on the way",
    symbols: &[
        Symbol { symbol: "z", meaning: "elevation given", unit: "m" },
        Symbol { symbol: "z'", meaning: "elevation filled", unit: "m" },
    ],
    assumptions: &["a sink is an error of the elevation or its water overflows"],
    limits: &[
        "the raster's edge and missing ground are outlets",
        "filled ground is level: the way of water across it comes from the gradient on flats",
        "real lakes and closed basins are filled too unless they are marked as closed",
    ],
    sources: &[Source {
        key: "barnes2014",
        authors: "Barnes, R.; Lehman, C.; Mulla, D.",
        year: 2014,
        title: "Priority-flood: an optimal depression-filling and watershed-labeling algorithm for digital elevation models",
        published: "Computers & Geosciences 62, 117",
        locator: "",
        read: Read::Memory,
    }],
};

/// Cells between two looks at Stop.
const PAUSE: usize = 1 << 14;

/// The filled surface.
///
/// # Errors
/// [`Stopped`].
pub(super) fn fill(elevation: &Grid<f32>, outlets: &[usize], work: &Work) -> Result<Grid<f32>, Stopped> {
    let (width, height) = (elevation.width(), elevation.height());
    work.phase("filling", elevation.len() as u64);
    let mut filled = elevation.clone();
    let mut seen: Vec<bool> =
        elevation.mask().map_or_else(|| vec![false; filled.len()], |m| m.iter().map(|v| !v).collect());
    let mut heap = BinaryHeap::new();
    for row in 0..height {
        for col in 0..width {
            let missing = |(dx, dy): &(isize, isize)| {
                let at = (col.checked_add_signed(*dx), row.checked_add_signed(*dy));
                !matches!(at, (Some(col), Some(row)) if elevation.get(col, row).is_some())
            };
            let i = row * width + col;
            if elevation.is_valid(col, row) && (outlets.contains(&i) || STEPS.iter().any(missing)) {
                seen[i] = true;
                heap.push((Reverse(key(elevation.values()[i])), i));
            }
        }
        work.advance(0)?;
    }
    let mut pit = VecDeque::new();
    let mut done = 0;
    while let Some(i) = pit.pop_front().or_else(|| heap.pop().map(|(_, i)| i)) {
        done += 1;
        if done % PAUSE == 0 {
            work.advance(PAUSE as u64)?;
        }
        let level = filled.values()[i];
        for (dx, dy) in STEPS {
            let (Some(col), Some(row)) =
                ((i % width).checked_add_signed(dx), (i / width).checked_add_signed(dy))
            else {
                continue;
            };
            let j = row * width + col;
            if col >= width || row >= height || std::mem::replace(&mut seen[j], true) {
                continue;
            }
            let z = &mut filled.values_mut()[j];
            if *z <= level {
                *z = level;
                pit.push_back(j);
            } else {
                heap.push((Reverse(key(*z)), j));
            }
        }
    }
    Ok(filled)
}

/// A whole number that sorts as the elevation does.
fn key(z: f32) -> u32 {
    let bits = (z + 0.0).to_bits();
    if bits >> 31 == 1 { !bits } else { bits | 1 << 31 }
}
