//! Where water goes on ground without any slope: a gradient in whole numbers, so that no surface has to be
//! raised by steps that single precision cannot hold.

use multiversion::multiversion;
use rayon::prelude::*;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::cells::Cells;
use super::d8::{Rows, weights};
use super::routing::{OUT, STEPS, VOID};
use super::walk::listed;

/// The record of the gradient on flats.
pub const METHOD: Method = Method {
    id: "drainage.flats",
    name: "Drainage gradient on flats",
    question: "Which way does water go where the ground is level?",
    formula: "g = 2 t − a;  a cell beside a draining one of its height drains there, any other to the neighbour of its flat with the steepest fall of g",
    symbols: &[
        Symbol {
            symbol: "t",
            meaning: "steps to the nearest cell of the same height that drains",
            unit: "1",
        },
        Symbol { symbol: "a", meaning: "steps to the nearest cell beside higher ground", unit: "1" },
        Symbol { symbol: "g", meaning: "gradient, in whole numbers", unit: "1" },
    ],
    assumptions: &[
        "a flat has lost its relief in filling or in rounding; water would gather along its middle",
    ],
    limits: &[
        "where the relief is lost, the way of the channel across the flat is a guess",
        "when flats are to stay flat, water takes the shortest way out, t falling by 1 a step",
    ],
    sources: &[
        Source {
            key: "garbrecht1997",
            authors: "Garbrecht, J.; Martz, L. W.",
            year: 1997,
            title: "The assignment of drainage direction over flat surfaces in raster digital elevation models",
            published: "Journal of Hydrology 193, 204",
            locator: "",
            read: Read::Memory,
        },
        Source {
            key: "barnes2014b",
            authors: "Barnes, R.; Lehman, C.; Mulla, D.",
            year: 2014,
            title: "An efficient assignment of drainage direction over flat surfaces in raster digital elevation models",
            published: "Computers & Geosciences 62, 128",
            locator: "",
            read: Read::Memory,
        },
    ],
};

/// Rows worked on at once.
const BLOCK: usize = 64;
/// A neighbour is lower: not a matter of flats.
pub(super) const LOWER: u8 = 10;
/// Level and not yet drained.
const FLAT: u8 = 11;
/// Cells between two looks at Stop.
const PAUSE: usize = 1 << 14;

/// The receiver of every cell without a lower neighbour, row by row; other cells hold [`LOWER`] or [`VOID`].
/// `room` may hold anything. `outlets` drain out whatever lies beside them. With `sloped`, water gathers along the middle of a flat.
///
/// # Errors
/// [`Stopped`].
pub(super) fn drain(
    surface: &Grid<f32>,
    room: (Vec<u8>, Vec<u32>),
    cells: &Cells,
    outlets: &[usize],
    sloped: bool,
    work: &Work,
) -> Result<Vec<u8>, Stopped> {
    work.phase("flats", 3 * surface.height() as u64);
    let (mut codes, mut steps) = room;
    level(surface, &mut codes, work)?;
    outlets.iter().for_each(|i| codes[*i] = OUT);
    if sloped {
        steps.clear();
        steps.resize(surface.len(), 0);
    }
    let mut flats = Flats::new(surface, codes, sloped.then_some(steps));
    let rims = flats.find_ways_out(sloped, work)?;
    flats.close_the_rest(work)?;
    if sloped {
        flats.lean(rims, cells, work)?;
    }
    Ok(flats.codes)
}

/// Sorts cells into [`LOWER`], [`VOID`], [`OUT`] (level, beside missing ground or the edge) and [`FLAT`].
fn level(surface: &Grid<f32>, codes: &mut Vec<u8>, work: &Work) -> Result<(), Stopped> {
    let width = surface.width();
    codes.resize(surface.len(), VOID);
    codes.par_chunks_mut((BLOCK * width).max(1)).enumerate().try_for_each(|(block, out)| {
        let mut rows = Rows::new(surface, block * BLOCK);
        for out in out.chunks_mut(width) {
            sort_row(&rows, out);
            rows.advance(surface);
            work.advance(1)?;
        }
        Ok(())
    })
}

#[multiversion(targets("x86_64+avx512f+avx512bw+avx512vl+avx512dq", "x86_64+avx2"))]
fn sort_row(rows: &Rows, out: &mut [u8]) {
    let n = out.len();
    let [above, own, below] = rows.three();
    let (z, east, west) = (&own[1..=n], &own[2..n + 2], &own[..n]);
    let (s, se, sw) = (&below[1..=n], &below[2..n + 2], &below[..n]);
    let (nn, ne, nw) = (&above[1..=n], &above[2..n + 2], &above[..n]);
    for i in 0..n {
        let around = [east[i], se[i], s[i], sw[i], west[i], nw[i], nn[i], ne[i]];
        let (mut least, mut most) = (f32::INFINITY, f32::NEG_INFINITY);
        for z in around {
            least = if z < least { z } else { least };
            most = if z > most { z } else { most };
        }
        let code = if most == f32::INFINITY { OUT } else { FLAT };
        let code = if least < z[i] { LOWER } else { code };
        out[i] = if z[i] == f32::INFINITY { VOID } else { code };
    }
}

/// The cells of flats with a neighbour that belongs to none, in the middle of three rows of codes.
#[multiversion(targets("x86_64+avx512f+avx512bw+avx512vl+avx512dq", "x86_64+avx2"))]
fn find_borders(codes: &[u8], out: &mut [bool]) {
    let width = out.len();
    if width < 3 {
        return;
    }
    let (above, own, below) = (&codes[..width], &codes[width..2 * width], &codes[2 * width..3 * width]);
    let n = width - 2;
    let out = &mut out[1..=n];
    let (w, own, e) = (&own[..n], &own[1..=n], &own[2..n + 2]);
    let (nw, nn, ne) = (&above[..n], &above[1..=n], &above[2..n + 2]);
    let (sw, ss, se) = (&below[..n], &below[1..=n], &below[2..n + 2]);
    for i in 0..n {
        let sides = (w[i] == FLAT) & (e[i] == FLAT) & (nn[i] == FLAT) & (ss[i] == FLAT);
        let corners = (nw[i] == FLAT) & (ne[i] == FLAT) & (sw[i] == FLAT) & (se[i] == FLAT);
        out[i] = (own[i] == FLAT) & !(sides & corners);
    }
}

/// Flats on their way to being drained. Cells that are [`FLAT`] lie neither on the raster's edge nor beside missing
/// ground, so that all their neighbours exist; those that touch have one height.
struct Flats<'a> {
    z: &'a [f32],
    width: usize,
    offsets: [isize; 8],
    codes: Vec<u8>,
    /// t of a cell of a flat, 0 before it is reached; later the gradient. Empty where no gradient is wanted.
    steps: Vec<u32>,
    done: usize,
}

/// Added to a gradient, which may be negative; marks that it is complete.
const COMPLETE: u32 = 1 << 31;

impl<'a> Flats<'a> {
    fn new(surface: &'a Grid<f32>, codes: Vec<u8>, steps: Option<Vec<u32>>) -> Self {
        let width = surface.width();
        let offsets = STEPS.map(|(dx, dy)| dy * width as isize + dx);
        Self { z: surface.values(), width, offsets, codes, steps: steps.unwrap_or_default(), done: 0 }
    }

    /// Looks at Stop now and then.
    fn pause(&mut self, work: &Work) -> Result<(), Stopped> {
        self.done += 1;
        if self.done.is_multiple_of(PAUSE) { work.advance(0) } else { Ok(()) }
    }

    /// Drains every flat that touches a cell of its height that drains, by the shortest way. With `rims`, the
    /// cells beside higher ground are returned.
    fn find_ways_out(&mut self, rims: bool, work: &Work) -> Result<Vec<usize>, Stopped> {
        let (mut exits, mut beside_higher) = (Vec::new(), Vec::new());
        let mut borders = vec![false; self.width];
        let mut room = vec![0; self.width + 1];
        for row in 1..(self.z.len() / self.width.max(1)).saturating_sub(1) {
            find_borders(&self.codes[(row - 1) * self.width..][..3 * self.width], &mut borders);
            for col in listed(&borders, &mut room).iter().copied() {
                let i = row * self.width + col;
                let (mut exit, mut higher) = (OUT, false);
                for (k, offset) in self.offsets.iter().enumerate() {
                    let j = i.wrapping_add_signed(*offset);
                    if self.codes[j] != FLAT {
                        if self.z[j] > self.z[i] {
                            higher = true;
                        } else if exit == OUT {
                            exit = k as u8;
                        }
                    }
                }
                if exit != OUT {
                    exits.push((i, exit));
                }
                if higher && rims {
                    beside_higher.push(i);
                }
            }
            work.advance(1)?;
        }
        let mut front = Vec::with_capacity(exits.len());
        for (i, exit) in exits {
            self.codes[i] = exit;
            if let Some(t) = self.steps.get_mut(i) {
                *t = 1;
            }
            front.push(i);
        }
        self.spread(front, work)?;
        Ok(beside_higher)
    }

    /// Steps on from drained cells of flats, ring by ring.
    fn spread(&mut self, mut front: Vec<usize>, work: &Work) -> Result<(), Stopped> {
        let (mut next, mut steps) = (Vec::new(), 2);
        while !front.is_empty() {
            for i in front.drain(..) {
                self.pause(work)?;
                for (k, offset) in self.offsets.iter().enumerate() {
                    let j = i.wrapping_add_signed(*offset);
                    if self.codes[j] == FLAT {
                        self.codes[j] = (k as u8 + 4) % 8;
                        if let Some(t) = self.steps.get_mut(j) {
                            *t = steps;
                        }
                        next.push(j);
                    }
                }
            }
            steps += 1;
            std::mem::swap(&mut front, &mut next);
        }
        Ok(())
    }

    /// Flats without a way out drain to their first cell, which stays closed.
    fn close_the_rest(&mut self, work: &Work) -> Result<(), Stopped> {
        for row in 0..self.z.len() / self.width.max(1) {
            let span = row * self.width..(row + 1) * self.width;
            if !self.codes[span.clone()].contains(&FLAT) {
                continue;
            }
            for i in span {
                if self.codes[i] == FLAT {
                    self.codes[i] = OUT;
                    // Its neighbours of the flat are exits; itself it is none and takes no part in the gradient.
                    let mut front = Vec::new();
                    for (k, offset) in self.offsets.iter().enumerate() {
                        let j = i.wrapping_add_signed(*offset);
                        if self.codes[j] == FLAT {
                            self.codes[j] = (k as u8 + 4) % 8;
                            if let Some(t) = self.steps.get_mut(j) {
                                *t = 1;
                            }
                            front.push(j);
                        }
                    }
                    self.spread(front, work)?;
                }
            }
            work.advance(1)?;
        }
        Ok(())
    }

    /// Turns drained cells of flats along the gradient, but for those beside their exit.
    fn lean(&mut self, rims: Vec<usize>, cells: &Cells, work: &Work) -> Result<(), Stopped> {
        // g = 2t − a within each flat; max a is the same for all of its cells.
        let gradient = |t: u32, a: u32| (COMPLETE + 2 * t).wrapping_sub(a);
        let mut front: Vec<usize> = rims;
        front.retain(|i| self.steps[*i] > 0);
        front.iter().for_each(|i| self.steps[*i] = gradient(self.steps[*i], 1));
        let (mut next, mut away) = (Vec::new(), 1);
        while !front.is_empty() {
            away += 1;
            for i in front.drain(..) {
                self.pause(work)?;
                for offset in self.offsets {
                    let j = i.wrapping_add_signed(offset);
                    if (1..COMPLETE / 4).contains(&self.steps[j]) {
                        self.steps[j] = gradient(self.steps[j], away);
                        next.push(j);
                    }
                }
            }
            std::mem::swap(&mut front, &mut next);
        }
        let Self { steps, offsets, codes, width, .. } = self;
        let block = (BLOCK * *width).max(1);
        codes.par_chunks_mut(block).enumerate().try_for_each(|(number, codes)| {
            for (row, codes) in codes.chunks_mut(*width).enumerate() {
                let row = number * BLOCK + row;
                let weights = weights(cells, row);
                for (col, code) in codes.iter_mut().enumerate().filter(|(_, code)| **code < OUT) {
                    let i = row * *width + col;
                    let is_exit = steps[i.wrapping_add_signed(offsets[usize::from(*code)])] == 0;
                    if !is_exit && steps[i] >= COMPLETE / 2 {
                        *code = steepest(steps, i, offsets, &weights);
                    }
                }
                work.advance(1)?;
            }
            Ok(())
        })
    }
}

/// The step of steepest fall of the gradient within the flat. There is one: t falls by 1 toward the exit, and a
/// changes by 1 at most.
fn steepest(steps: &[u32], i: usize, offsets: &[isize; 8], weights: &[f32; 8]) -> u8 {
    let mut best = (0.0, OUT);
    for (k, offset) in offsets.iter().enumerate() {
        let at = steps[i.wrapping_add_signed(*offset)];
        let fall = (i64::from(steps[i]) - i64::from(at)) as f32 * weights[k];
        if at > 0 && fall > best.0 {
            best = (fall, k as u8);
        }
    }
    best.1
}
