//! Sinks raised to their lowest rim.

use multiversion::multiversion;
use rayon::prelude::*;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::d8::{LEVEL, Rows, steepest};
use super::routing::{STEPS, VOID};
use super::walk::{TILE, listed, tiles};

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
    sources: &[BARNES, CORDONNIER],
};

const BARNES: Source = Source {
    key: "barnes2014",
    authors: "Barnes, R.; Lehman, C.; Mulla, D.",
    year: 2014,
    title: "Priority-flood: an optimal depression-filling and watershed-labeling algorithm for digital elevation models",
    published: "Computers & Geosciences 62, 117",
    locator: "",
    read: Read::Memory,
};

const CORDONNIER: Source = Source {
    key: "cordonnier2019",
    authors: "Cordonnier, G.; Bovy, B.; Braun, J.",
    year: 2019,
    title: "A versatile, linear complexity algorithm for flow routing in topographies with depressions",
    published: "Earth Surface Dynamics 7, 549",
    locator: "",
    read: Read::Memory,
};

/// Rows worked on at once.
const BLOCK: usize = 64;
/// Cells between two looks at Stop.
const PAUSE: usize = 1 << 14;
/// Label of missing ground and of all outside the raster.
const OUTSIDE: u32 = 0;

/// Ground divided into basins, each the cells that descend to one local minimum, and the lowest passes between
/// them. Flooding then is a matter of passes instead of cells.
pub(super) struct Basins {
    /// Basin of every cell.
    labels: Vec<u32>,
    /// A cell of the minimum of each basin; the first stands for the outside.
    minima: Vec<usize>,
    passes: Passes,
    /// Step to the steepest neighbour, as found on the way; room to be used again.
    codes: Vec<u8>,
}

/// A filled surface and the room that filling took: a byte and a word a cell, of no meaning.
pub(super) struct Filled {
    pub(super) surface: Grid<f32>,
    pub(super) bytes: Vec<u8>,
    pub(super) words: Vec<u32>,
}

impl Basins {
    /// `outlets` are cells that drain out where they are.
    ///
    /// # Errors
    /// [`Stopped`].
    pub(super) fn of(elevation: &Grid<f32>, outlets: &[usize], work: &Work) -> Result<Self, Stopped> {
        work.phase("basins", 3 * elevation.height() as u64);
        let (codes, labels, minima) = label(elevation, work)?;
        let mut passes = Passes::new(minima.len());
        find_passes(elevation, &labels, &mut passes, work)?;
        for i in outlets {
            passes.lower(OUTSIDE, labels[*i], elevation.values()[*i]);
        }
        Ok(Self { labels, minima, passes, codes })
    }

    /// A cell of the floor of every sink: every minimum below its lowest pass.
    pub(super) fn sinks(&self, elevation: &Grid<f32>) -> Vec<usize> {
        let mut lowest = vec![f32::INFINITY; self.minima.len()];
        for (a, b, z) in self.passes.iter() {
            for basin in [a, b] {
                let least = &mut lowest[basin as usize];
                *least = least.min(z);
            }
        }
        let floors = self.minima.iter().zip(&lowest).skip(1);
        floors.filter(|(i, pass)| elevation.values()[**i] < **pass).map(|(i, _)| *i).collect()
    }

    /// The filled surface: z' = max(z, level of the basin).
    ///
    /// # Errors
    /// [`Stopped`].
    pub(super) fn fill(self, elevation: &Grid<f32>, work: &Work) -> Result<Filled, Stopped> {
        let Self { labels, minima, passes, codes } = self;
        let levels = passes.levels(minima.len(), work)?;
        let width = elevation.width();
        work.phase("filling", elevation.height() as u64);
        let mut filled = vec![0.0f32; elevation.len()];
        let block = (BLOCK * width).max(1);
        let given = elevation.values().par_chunks(block).zip(labels.par_chunks(block));
        filled.par_chunks_mut(block).zip(given).try_for_each(|(out, (z, labels))| {
            for ((out, z), label) in out.iter_mut().zip(z).zip(labels) {
                let level = levels[*label as usize];
                *out = if level > *z { level } else { *z };
            }
            work.advance((out.len() / width) as u64)
        })?;
        let mask = elevation.mask().map(<[bool]>::to_vec);
        let surface = Grid::from_parts(width, elevation.height(), filled, mask);
        Ok(Filled { surface, bytes: codes, words: labels })
    }
}

/// Steps, basins, and a cell of each minimum.
type Labels = (Vec<u8>, Vec<u32>, Vec<usize>);

/// Follows every cell down to its minimum: steps, basins and a cell of each minimum. Minima of one height that touch
/// are one.
fn label(elevation: &Grid<f32>, work: &Work) -> Result<Labels, Stopped> {
    let width = elevation.width();
    let mut codes = vec![VOID; elevation.len()];
    codes.par_chunks_mut((BLOCK * width).max(1)).enumerate().try_for_each(|(block, out)| {
        let mut rows = Rows::new(elevation, block * BLOCK);
        for out in out.chunks_mut(width) {
            steepest(&rows, &[1.0; 8], out);
            rows.advance(elevation);
            work.advance(1)?;
        }
        Ok(())
    })?;
    let offsets = STEPS.map(|(dx, dy)| dy * width as isize + dx);
    let mut labels = vec![OUTSIDE; codes.len()];
    let mut minima = vec![usize::MAX];
    let mut flat = Vec::new();
    // Tile by tile, so that what a walk touches is at hand.
    let height = elevation.height();
    let tiled = tiles(width, height).flat_map(|(top, left)| {
        let rows = top..height.min(top + TILE[0]);
        rows.flat_map(move |row| row * width + left..row * width + width.min(left + TILE[1]))
    });
    let mut done = 0;
    for first in tiled {
        done += 1;
        if done % PAUSE == 0 {
            work.advance((PAUSE / width.max(1)) as u64)?;
        }
        if labels[first] != OUTSIDE || codes[first] == VOID {
            continue;
        }
        let mut at = first;
        let mut found = OUTSIDE;
        while found == OUTSIDE {
            match offsets.get(usize::from(codes[at])) {
                Some(offset) => {
                    at = at.wrapping_add_signed(*offset);
                    found = labels[at];
                }
                None => {
                    found = minima.len() as u32;
                    minima.push(at);
                    labels[at] = found;
                    flat.push(at);
                }
            }
        }
        while let Some(at) = flat.pop() {
            let (col, row) = (at % width, at / width);
            for (k, (dx, dy)) in STEPS.iter().enumerate() {
                let (col, row) = (col.wrapping_add_signed(*dx), row.wrapping_add_signed(*dy));
                if col >= width || row >= height {
                    continue;
                }
                let j = at.wrapping_add_signed(offsets[k]);
                // A neighbour of a minimum that is a minimum too has the same height.
                if codes[j] == LEVEL && labels[j] == OUTSIDE {
                    labels[j] = found;
                    flat.push(j);
                }
            }
        }
        let mut at = first;
        while labels[at] == OUTSIDE {
            labels[at] = found;
            at = at.wrapping_add_signed(offsets[usize::from(codes[at])]);
        }
    }
    Ok((codes, labels, minima))
}

/// The lowest pass of each pair of basins that touch, and of each basin to the outside.
fn find_passes(
    elevation: &Grid<f32>,
    labels: &[u32],
    passes: &mut Passes,
    work: &Work,
) -> Result<(), Stopped> {
    let (width, height) = (elevation.width(), elevation.height());
    // Two rows with a margin of the outside; cell i of the raster at i + 1.
    let mut above = vec![OUTSIDE; width + 2];
    let mut own = above.clone();
    let mut differs = vec![false; width + 1];
    let mut room = vec![0; width + 2];
    for row in 0..=height {
        match labels.get(row * width..(row + 1) * width) {
            Some(labels) if row < height => own[1..=width].copy_from_slice(labels),
            _ => own.fill(OUTSIDE),
        }
        find_corners(&above, &own, &mut differs);
        let cell = |labels: &[u32], col: usize, row: usize| match labels[col] {
            OUTSIDE => (OUTSIDE, f32::NEG_INFINITY),
            label => (label, elevation.values()[row * width + col - 1]),
        };
        for west in listed(&differs, &mut room).iter().copied() {
            // The four cells around a corner of cells, and their pairs; the upper two were a pair a row ago.
            let (sw, se) = (cell(&own, west, row), cell(&own, west + 1, row));
            let up = row.wrapping_sub(1);
            let (nw, ne) = (cell(&above, west, up), cell(&above, west + 1, up));
            for ((a, z), (b, height)) in [(se, sw), (se, nw), (se, ne), (sw, ne)] {
                if a != b {
                    passes.lower(a, b, if height > z { height } else { z });
                }
            }
        }
        std::mem::swap(&mut above, &mut own);
        work.advance(1)?;
    }
    Ok(())
}

/// The corners of cells where basins meet, between two rows of labels.
#[multiversion(targets("x86_64+avx512f+avx512bw+avx512vl+avx512dq", "x86_64+avx2"))]
fn find_corners(above: &[u32], own: &[u32], out: &mut [bool]) {
    let n = out.len();
    let (nw, ne, sw, se) = (&above[..n], &above[1..=n], &own[..n], &own[1..=n]);
    for i in 0..n {
        out[i] = (se[i] != sw[i]) | (se[i] != nw[i]) | (se[i] != ne[i]);
    }
}

/// Lowest passes by pair of basins. Those of a basin to the first few that came before it stand beside it, close
/// to those of the basins around; the others in a hash table with open addresses.
struct Passes {
    near: Vec<[(u32, f32); NEAR]>,
    far: Vec<(u64, f32)>,
    far_used: usize,
}

const NEAR: usize = 4;
const FREE: u32 = u32::MAX;
const FREE_PAIR: u64 = u64::MAX;

impl Passes {
    fn new(basins: usize) -> Self {
        Self { near: vec![[(FREE, 0.0); NEAR]; basins], far: vec![(FREE_PAIR, 0.0); 64], far_used: 0 }
    }

    /// Lowers the pass between two basins to `z`.
    fn lower(&mut self, a: u32, b: u32, z: f32) {
        let (first, second) = (a.min(b), a.max(b));
        for slot in &mut self.near[second as usize] {
            if slot.0 == first {
                slot.1 = if z < slot.1 { z } else { slot.1 };
                return;
            }
            if slot.0 == FREE {
                *slot = (first, z);
                return;
            }
        }
        let pair = u64::from(first) << 32 | u64::from(second);
        let at = place(&self.far, pair);
        let slot = &mut self.far[at];
        if slot.0 == pair {
            slot.1 = if z < slot.1 { z } else { slot.1 };
            return;
        }
        *slot = (pair, z);
        self.far_used += 1;
        if 2 * self.far_used > self.far.len() {
            let mut grown = vec![(FREE_PAIR, 0.0); 2 * self.far.len()];
            for (pair, z) in self.far.iter().filter(|(pair, _)| *pair != FREE_PAIR) {
                let at = place(&grown, *pair);
                grown[at] = (*pair, *z);
            }
            self.far = grown;
        }
    }

    fn iter(&self) -> impl Iterator<Item = (u32, u32, f32)> + '_ {
        let near = self.near.iter().enumerate().flat_map(|(second, slots)| {
            let used = slots.iter().take_while(|(first, _)| *first != FREE);
            used.map(move |(first, z)| (*first, second as u32, *z))
        });
        let far = self.far.iter().filter(|(pair, _)| *pair != FREE_PAIR);
        near.chain(far.map(|(pair, z)| ((pair >> 32) as u32, *pair as u32, *z)))
    }

    /// The level to which each basin fills: the highest pass on its best way outside. The best ways are those of
    /// the tree of lowest passes (Kruskal), walked from the outside in.
    fn levels(self, basins: usize, work: &Work) -> Result<Vec<f32>, Stopped> {
        // Whole numbers that sort by height, then by basins.
        let packed = |(a, b, z): (u32, u32, f32)| {
            let bits = z.to_bits();
            let height = if bits >> 31 == 1 { !bits } else { bits | 1 << 31 };
            u128::from(height) << 64 | u128::from(a) << 32 | u128::from(b)
        };
        let mut passes: Vec<u128> = self.iter().map(packed).collect();
        drop(self);
        work.advance(0)?;
        passes.par_sort_unstable();
        work.advance(0)?;
        let mut parents: Vec<u32> = (0..basins as u32).collect();
        let mut done = 0;
        let mut stopped = false;
        passes.retain(|pass| {
            done += 1;
            stopped = stopped || (done % PAUSE == 0 && work.advance(0).is_err());
            let (a, b) = (root(&mut parents, (pass >> 32) as u32), root(&mut parents, *pass as u32));
            parents[a.max(b) as usize] = a.min(b);
            a != b
        });
        if stopped {
            return Err(Stopped);
        }
        let tree = passes.into_iter().map(|pass| {
            let height = (pass >> 64) as u32;
            let bits = if height >> 31 == 1 { height ^ 1 << 31 } else { !height };
            ((pass >> 32) as u32, pass as u32, f32::from_bits(bits))
        });
        Ok(walk(&tree.collect::<Vec<_>>(), basins))
    }
}

/// Where a pair stands in the table, or would.
fn place(table: &[(u64, f32)], pair: u64) -> usize {
    let mask = table.len() - 1;
    // Multiplication by 2⁶⁴ over the golden ratio spreads neighbouring pairs.
    let mut at = (pair.wrapping_mul(0x9E37_79B9_7F4A_7C15) >> 32) as usize & mask;
    while table[at].0 != FREE_PAIR && table[at].0 != pair {
        at = (at + 1) & mask;
    }
    at
}

/// The basin that stands for all those joined with `a`.
fn root(parents: &mut [u32], mut a: u32) -> u32 {
    while parents[a as usize] != a {
        let above = parents[parents[a as usize] as usize];
        parents[a as usize] = above;
        a = above;
    }
    a
}

/// Levels along the branches of a tree of passes, from the outside in.
fn walk(tree: &[(u32, u32, f32)], basins: usize) -> Vec<f32> {
    let mut ends = vec![0usize; basins + 1];
    for (a, b, _) in tree {
        ends[*a as usize + 1] += 1;
        ends[*b as usize + 1] += 1;
    }
    for basin in 0..basins {
        ends[basin + 1] += ends[basin];
    }
    let mut next = ends.clone();
    let mut branches = vec![(OUTSIDE, 0.0f32); 2 * tree.len()];
    for (a, b, z) in tree {
        for (from, to) in [(*a, *b), (*b, *a)] {
            branches[next[from as usize]] = (to, *z);
            next[from as usize] += 1;
        }
    }
    let mut levels = vec![f32::NEG_INFINITY; basins];
    let mut waiting = vec![(OUTSIDE, OUTSIDE)];
    while let Some((basin, from)) = waiting.pop() {
        let level = levels[basin as usize];
        for (to, z) in &branches[ends[basin as usize]..ends[basin as usize + 1]] {
            if *to != from {
                levels[*to as usize] = level.max(*z);
                waiting.push((*to, basin));
            }
        }
    }
    levels
}
