//! Where water goes on ground without any slope: a gradient in whole numbers, so that no surface has to be
//! raised by steps that single precision cannot hold.

use rayon::prelude::*;

use crate::ground::{Grid, Method, Read, Source, Stopped, Symbol, Work};

use super::cells::Cells;
use super::d8::{Rows, weights};
use super::routing::{OUT, STEPS, VOID};

/// The record of the gradient on flats.
pub const METHOD: Method = Method {
    id: "drainage.flats",
    name: "Drainage gradient on flats",
    question: "Which way does water go where the ground is level?",
    formula: "g = 2 t + (max a − a);  a cell drains to the neighbour of its flat with the steepest fall of g",
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
        "when flats are to stay flat, g = t: the shortest way out",
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
/// `outlets` drain out whatever lies beside them. With `sloped`, water gathers along the middle of a flat.
///
/// # Errors
/// [`Stopped`].
pub(super) fn drain(
    surface: &Grid<f32>,
    cells: &Cells,
    outlets: &[usize],
    sloped: bool,
    work: &Work,
) -> Result<Vec<u8>, Stopped> {
    work.phase("flats", 2 * surface.height() as u64);
    let mut codes = level(surface, work)?;
    outlets.iter().for_each(|i| codes[*i] = OUT);
    let width = surface.width();
    let mut flat = Flat::new(surface, cells, sloped);
    for row in 0..surface.height() {
        for i in row * width..(row + 1) * width {
            if codes[i] == FLAT {
                flat.resolve(i, &mut codes, work)?;
            }
        }
        work.advance(1)?;
    }
    Ok(codes)
}

/// Sorts cells into [`LOWER`], [`VOID`], [`OUT`] (level, beside missing ground or the edge) and [`FLAT`].
fn level(surface: &Grid<f32>, work: &Work) -> Result<Vec<u8>, Stopped> {
    let width = surface.width();
    let mut codes = vec![VOID; surface.len()];
    codes.par_chunks_mut((BLOCK * width).max(1)).enumerate().try_for_each(|(block, out)| {
        let mut rows = Rows::new(surface, block * BLOCK);
        for out in out.chunks_mut(width) {
            sort_row(&rows, out);
            rows.advance(surface);
            work.advance(1)?;
        }
        Ok(())
    })?;
    Ok(codes)
}

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

/// Room for one flat at a time. Its cells lie neither on the raster's edge nor beside missing ground, so that
/// all their neighbours exist.
struct Flat<'a> {
    z: &'a [f32],
    offsets: [isize; 8],
    width: usize,
    weights: Vec<[f32; 8]>,
    sloped: bool,
    /// Place of a cell in `cells`, counted from 1.
    place: Vec<u32>,
    cells: Vec<usize>,
    toward: Vec<u32>,
    away: Vec<u32>,
    queue: Vec<u32>,
    done: usize,
}

impl<'a> Flat<'a> {
    fn new(surface: &'a Grid<f32>, cells: &Cells, sloped: bool) -> Self {
        let width = surface.width();
        Self {
            z: surface.values(),
            offsets: STEPS.map(|(dx, dy)| dy * width as isize + dx),
            width,
            weights: (0..surface.height()).map(|row| weights(cells, row)).collect(),
            sloped,
            place: vec![0; surface.len()],
            cells: Vec::new(),
            toward: Vec::new(),
            away: Vec::new(),
            queue: Vec::new(),
            done: 0,
        }
    }

    fn neighbours(&self, i: usize) -> [usize; 8] {
        self.offsets.map(|d| i.wrapping_add_signed(d))
    }

    /// Looks at Stop now and then.
    fn pause(&mut self, work: &Work) -> Result<(), Stopped> {
        self.done += 1;
        if self.done % PAUSE == 0 { work.advance(0) } else { Ok(()) }
    }

    /// Drains the flat that holds cell `start`.
    fn resolve(&mut self, start: usize, codes: &mut [u8], work: &Work) -> Result<(), Stopped> {
        self.gather(start, codes, work)?;
        if self.toward.iter().all(|t| *t == 0) {
            // No way out: the basin stays closed at its first cell, and what is left drains there.
            codes[start] = OUT;
            let cells = std::mem::take(&mut self.cells);
            cells.iter().for_each(|i| self.place[*i] = 0);
            for i in cells {
                if codes[i] == FLAT {
                    self.resolve(i, codes, work)?;
                }
            }
            return Ok(());
        }
        let mut toward = std::mem::take(&mut self.toward);
        self.spread(&mut toward, work)?;
        if self.sloped {
            let mut away = std::mem::take(&mut self.away);
            self.spread(&mut away, work)?;
            let most = away.iter().copied().max().unwrap_or(0);
            toward.iter_mut().zip(&away).for_each(|(t, a)| *t = 2 * *t + (most - a));
            self.away = away;
        }
        self.toward = toward;
        for c in 0..self.cells.len() {
            self.pause(work)?;
            codes[self.cells[c]] = self.steepest(c);
        }
        Ok(())
    }

    /// Collects the flat, with 1 in `toward` beside cells that drain and 1 in `away` beside higher ground.
    fn gather(&mut self, start: usize, codes: &[u8], work: &Work) -> Result<(), Stopped> {
        self.cells.clear();
        self.toward.clear();
        self.away.clear();
        self.cells.push(start);
        self.place[start] = 1;
        let mut next = 0;
        while next < self.cells.len() {
            self.pause(work)?;
            let i = self.cells[next];
            next += 1;
            let (mut toward, mut away) = (0, 0);
            for j in self.neighbours(i) {
                if codes[j] == FLAT {
                    if self.place[j] == 0 {
                        self.cells.push(j);
                        self.place[j] = self.cells.len() as u32;
                    }
                } else if self.z[j] > self.z[i] {
                    away = 1;
                } else {
                    toward = 1;
                }
            }
            self.toward.push(toward);
            self.away.push(away);
        }
        Ok(())
    }

    /// Counts steps through the flat from the cells that hold 1; a flat without any stays 0.
    fn spread(&mut self, steps: &mut [u32], work: &Work) -> Result<(), Stopped> {
        self.queue.clear();
        self.queue.extend((0..steps.len() as u32).filter(|c| steps[*c as usize] == 1));
        let mut next = 0;
        while next < self.queue.len() {
            self.pause(work)?;
            let c = self.queue[next] as usize;
            next += 1;
            for j in self.neighbours(self.cells[c]) {
                let place = self.place[j];
                if place > 0 && steps[place as usize - 1] == 0 {
                    steps[place as usize - 1] = steps[c] + 1;
                    self.queue.push(place - 1);
                }
            }
        }
        Ok(())
    }

    /// The step of steepest fall of the gradient; cells that drain lie at 0, so that there always is one.
    fn steepest(&self, c: usize) -> u8 {
        let i = self.cells[c];
        let own = self.toward[c];
        let weights = &self.weights[i / self.width];
        let mut best = (0.0, OUT);
        for (k, j) in self.neighbours(i).into_iter().enumerate() {
            let at = match self.place[j] {
                0 if self.z[j] == self.z[i] => 0,
                0 => continue,
                place => self.toward[place as usize - 1],
            };
            let fall = (f64::from(own) - f64::from(at)) * f64::from(weights[k]);
            if fall > best.0 {
                best = (fall, k as u8);
            }
        }
        best.1
    }
}
