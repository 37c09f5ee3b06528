//! A window of one stored level as numbers: chunks decoded and converted side by side, each
//! straight into its part of the answer.

use half::f16;
use rayon::iter::{IntoParallelIterator, ParallelIterator};

use super::bands::Bands;
use super::cache::ChunkCache;
use super::image::Image;
use super::info::{BandInfo, SampleType};
use super::tiff::Level;
use super::window::Window;
use crate::files::error::FileError;
use crate::ground::{Grid, Work};

/// Floating-point samples of this size or more are fill values of some writer, never measurements.
const HUGE: f64 = 3.39e38;

/// What to read of every pixel.
pub(super) struct Pick<'a> {
    pub(super) bands: &'a Bands,
    pub(super) about: &'a [BandInfo],
    pub(super) nodata: Option<f64>,
}

/// One band to be read: its sample, and physical value times weight = `scale` · sample + `offset`.
struct Term {
    sample: usize,
    /// The palette channel.
    channel: usize,
    scale: f64,
    offset: f64,
}

/// The part of the window inside one chunk.
#[derive(Clone, Copy)]
struct Piece {
    /// Chunk number within a plane.
    chunk: usize,
    /// First column and row inside the chunk.
    col: usize,
    row: usize,
    /// The piece inside the clipped window.
    at_col: usize,
    at_row: usize,
    width: usize,
    height: usize,
}

/// Validity of a piece: `None` when all of it is valid.
type PieceMask = Option<Vec<bool>>;

/// Reads `window` of `level`. Cells outside the level are missing; missing cells hold 0.
pub(super) fn window(
    level: &Level,
    window: Window,
    pick: &Pick<'_>,
    cache: &ChunkCache,
    work: &Work,
) -> Result<Grid<f32>, FileError> {
    work.advance(0)?;
    let layout = &level.image.layout;
    let inside = window.clipped(layout.width, layout.height);
    let mut values = vec![0f32; inside.width * inside.height];
    let terms = terms(pick, level);
    let masks = pieces(&level.image, inside, &mut values, work, |piece, rows| {
        fill(&level.image, piece, rows, &terms, pick.nodata, cache)
    })?;
    let mut valid = joined(inside, masks);
    if let Some(mask) = &level.mask {
        let opaque = mask_window(mask, inside, cache, work)?;
        match &mut valid {
            Some(valid) => valid.iter_mut().zip(&opaque).for_each(|(v, o)| *v &= o),
            None => valid = Some(opaque),
        }
    }
    if let Some(valid) = &valid {
        // A fill value or NaN under the mask would spread through sums that weigh it by zero.
        values.iter_mut().zip(valid).filter(|(_, ok)| !**ok).for_each(|(v, _)| *v = 0.0);
    }
    if inside.width == window.width && inside.height == window.height {
        return Ok(Grid::from_parts(window.width, window.height, values, valid));
    }
    Ok(padded(window, inside, &values, valid.as_deref()))
}

/// Which pixels a mask image lets through.
fn mask_window(
    image: &Image,
    inside: Window,
    cache: &ChunkCache,
    work: &Work,
) -> Result<Vec<bool>, FileError> {
    let mut opaque = vec![false; inside.width * inside.height];
    let bytes = image.layout.sample.bytes();
    pieces(image, inside, &mut opaque, work, |piece, rows| {
        if let Some(chunk) = image.chunk(piece.chunk, cache)? {
            let row_bytes = image.layout.chunk_width * bytes;
            for (r, out) in rows.into_iter().enumerate() {
                let start = (piece.row + r) * row_bytes + piece.col * bytes;
                for (o, sample) in out.iter_mut().zip(chunk[start..].chunks_exact(bytes)) {
                    *o = sample.iter().any(|b| *b != 0);
                }
            }
        }
        Ok(None)
    })?;
    Ok(opaque)
}

fn terms(pick: &Pick<'_>, level: &Level) -> Vec<Term> {
    let layout = &level.image.layout;
    let term = |band: usize, weight: f64| {
        let sample = match layout.alpha {
            _ if layout.palette.is_some() => 0,
            Some(alpha) if band >= alpha => band + 1,
            _ => band,
        };
        let about = &pick.about[band];
        Term { sample, channel: band, scale: weight * about.scale, offset: weight * about.offset }
    };
    match pick.bands {
        Bands::One(band) => vec![term(*band, 1.0)],
        Bands::Mix(parts) => parts.iter().map(|(band, weight)| term(*band, *weight)).collect(),
    }
}

/// Cuts the window along the chunks and runs `task` on every piece in parallel, each with the rows of
/// the answer it owns. The first error in the order of the pieces is the one reported.
fn pieces<T: Send>(
    image: &Image,
    inside: Window,
    out: &mut [T],
    work: &Work,
    task: impl Fn(Piece, Vec<&mut [T]>) -> Result<PieceMask, FileError> + Sync,
) -> Result<Vec<(Piece, PieceMask)>, FileError> {
    if inside.width == 0 || inside.height == 0 {
        return Ok(Vec::new());
    }
    let layout = &image.layout;
    let (cw, ch) = (layout.chunk_width, layout.chunk_height);
    let mut jobs: Vec<(Piece, Vec<&mut [T]>)> = Vec::new();
    let mut rest = out;
    for down in inside.row / ch..=(inside.row + inside.height - 1) / ch {
        let top = (down * ch).max(inside.row);
        let height = ((down + 1) * ch).min(inside.row + inside.height) - top;
        let first = jobs.len();
        for across in inside.col / cw..=(inside.col + inside.width - 1) / cw {
            let left = (across * cw).max(inside.col);
            let width = ((across + 1) * cw).min(inside.col + inside.width) - left;
            let piece = Piece {
                chunk: down * layout.across() + across,
                col: left - across * cw,
                row: top - down * ch,
                at_col: left - inside.col,
                at_row: top - inside.row,
                width,
                height,
            };
            jobs.push((piece, Vec::with_capacity(height)));
        }
        let (band, below) = rest.split_at_mut(height * inside.width);
        rest = below;
        for mut row in band.chunks_exact_mut(inside.width) {
            for (piece, rows) in &mut jobs[first..] {
                let (mine, others) = row.split_at_mut(piece.width);
                rows.push(mine);
                row = others;
            }
        }
    }
    let done: Vec<Result<(Piece, PieceMask), FileError>> = jobs
        .into_par_iter()
        .map(|(piece, rows)| {
            work.advance(0)?;
            Ok((piece, task(piece, rows)?))
        })
        .collect();
    done.into_iter().collect()
}

/// One mask for the window from those of its pieces.
fn joined(inside: Window, masks: Vec<(Piece, PieceMask)>) -> Option<Vec<bool>> {
    if masks.iter().all(|(_, mask)| mask.is_none()) {
        return None;
    }
    let mut valid = vec![true; inside.width * inside.height];
    for (piece, mask) in masks {
        let Some(mask) = mask else { continue };
        for (r, row) in mask.chunks_exact(piece.width).enumerate() {
            let start = (piece.at_row + r) * inside.width + piece.at_col;
            valid[start..start + piece.width].copy_from_slice(row);
        }
    }
    Some(valid)
}

/// The clipped answer in a frame of missing cells.
fn padded(window: Window, inside: Window, values: &[f32], valid: Option<&[bool]>) -> Grid<f32> {
    let mut all = vec![0f32; window.width * window.height];
    let mut mask = vec![false; all.len()];
    for r in 0..inside.height {
        let (from, to) = (r * inside.width, r * window.width);
        all[to..to + inside.width].copy_from_slice(&values[from..from + inside.width]);
        match valid {
            Some(valid) => mask[to..to + inside.width].copy_from_slice(&valid[from..from + inside.width]),
            None => mask[to..to + inside.width].fill(true),
        }
    }
    Grid::from_parts(window.width, window.height, all, Some(mask))
}

/// Converts one piece into its rows.
fn fill(
    image: &Image,
    piece: Piece,
    mut rows: Vec<&mut [f32]>,
    terms: &[Term],
    nodata: Option<f64>,
    cache: &ChunkCache,
) -> Result<PieceMask, FileError> {
    let layout = &image.layout;
    let per_plane = layout.across() * layout.down();
    let mut valid: PieceMask = None;
    let mix = terms.len() != 1;
    let mut sums = if mix { vec![0f64; piece.width * piece.height] } else { Vec::new() };
    let alpha = layout.alpha.map(|sample| Term { sample, channel: 0, scale: 1.0, offset: 0.0 });
    for (term, opacity) in terms.iter().map(|t| (t, false)).chain(alpha.iter().map(|t| (t, true))) {
        let (plane, lane) = if layout.planar { (term.sample, 0) } else { (0, term.sample) };
        let Some(chunk) = image.chunk(plane * per_plane + piece.chunk, cache)? else {
            return Ok(Some(vec![false; piece.width * piece.height]));
        };
        let stride = layout.chunk_samples();
        let run = Run { chunk: &chunk, piece, lane, stride, chunk_width: layout.chunk_width };
        if opacity {
            each_type!(layout.sample, T => run.opaque::<T>(&mut valid));
            continue;
        }
        each_type!(layout.sample, T => {
            run.missing::<T>(nodata, &mut valid);
            if let Some(palette) = &layout.palette {
                let colours = &palette[term.channel];
                let colour = |v: T| f64::from(colours.get(v.wide() as usize).copied().unwrap_or(0));
                if mix {
                    run.add::<T>(&mut sums, |v| colour(v) * term.scale + term.offset);
                } else {
                    run.put::<T>(&mut rows, |v| (colour(v) * term.scale + term.offset) as f32);
                }
            } else if mix {
                run.add::<T>(&mut sums, |v| v.wide() * term.scale + term.offset);
            } else if term.scale == 1.0 && term.offset == 0.0 {
                run.put::<T>(&mut rows, T::narrow);
            } else {
                run.put::<T>(&mut rows, |v| (v.wide() * term.scale + term.offset) as f32);
            }
        });
    }
    if mix {
        for (row, sums) in rows.iter_mut().zip(sums.chunks_exact(piece.width)) {
            row.iter_mut().zip(sums).for_each(|(out, sum)| *out = *sum as f32);
        }
    }
    Ok(valid.filter(|mask| mask.contains(&false)))
}

/// Runs a block with `T` standing for the Rust type of the samples.
macro_rules! each_type {
    ($sample:expr, $T:ident => $body:expr) => {
        match $sample {
            SampleType::U8 => {
                type $T = u8;
                $body
            }
            SampleType::I8 => {
                type $T = i8;
                $body
            }
            SampleType::U16 => {
                type $T = u16;
                $body
            }
            SampleType::I16 => {
                type $T = i16;
                $body
            }
            SampleType::U32 => {
                type $T = u32;
                $body
            }
            SampleType::I32 => {
                type $T = i32;
                $body
            }
            SampleType::F16 => {
                type $T = f16;
                $body
            }
            SampleType::F32 => {
                type $T = f32;
                $body
            }
            SampleType::F64 => {
                type $T = f64;
                $body
            }
        }
    };
}
use each_type;

/// The samples of one lane of a piece of a decoded chunk.
struct Run<'a> {
    chunk: &'a [u8],
    piece: Piece,
    lane: usize,
    stride: usize,
    chunk_width: usize,
}

impl Run<'_> {
    fn row<T: Sample>(&self, r: usize) -> impl Iterator<Item = T> + '_ {
        let first = ((self.piece.row + r) * self.chunk_width + self.piece.col) * self.stride;
        let bytes = &self.chunk[first * T::BYTES..][..self.piece.width * self.stride * T::BYTES];
        let lane = self.lane * T::BYTES;
        bytes.chunks_exact(self.stride * T::BYTES).map(move |pixel| T::from_ne(&pixel[lane..lane + T::BYTES]))
    }

    fn put<T: Sample>(&self, rows: &mut [&mut [f32]], value: impl Fn(T) -> f32) {
        for (r, out) in rows.iter_mut().enumerate() {
            if self.stride == 1 {
                // The common case, with a constant step that the compiler turns into vector code.
                let first = (self.piece.row + r) * self.chunk_width + self.piece.col;
                let bytes = &self.chunk[first * T::BYTES..][..self.piece.width * T::BYTES];
                for (o, sample) in out.iter_mut().zip(bytes.chunks_exact(T::BYTES)) {
                    *o = value(T::from_ne(sample));
                }
            } else {
                out.iter_mut().zip(self.row::<T>(r)).for_each(|(o, v)| *o = value(v));
            }
        }
    }

    fn add<T: Sample>(&self, sums: &mut [f64], value: impl Fn(T) -> f64) {
        for (r, out) in sums.chunks_exact_mut(self.piece.width).enumerate() {
            out.iter_mut().zip(self.row::<T>(r)).for_each(|(o, v)| *o += value(v));
        }
    }

    /// Marks samples that are no measurements: equal to nodata, or not finite, or absurdly large.
    fn missing<T: Sample>(&self, nodata: Option<f64>, valid: &mut PieceMask) {
        let nodata = nodata.and_then(T::from_nodata);
        if nodata.is_none() && !T::FLOAT {
            return;
        }
        self.keep(valid, |v: T| v.is_number() && nodata.is_none_or(|n| v != n));
    }

    fn opaque<T: Sample>(&self, valid: &mut PieceMask) {
        self.keep(valid, |v: T| v.wide() != 0.0);
    }

    fn keep<T: Sample>(&self, valid: &mut PieceMask, keep: impl Fn(T) -> bool) {
        let valid = valid.get_or_insert_with(|| vec![true; self.piece.width * self.piece.height]);
        for (r, out) in valid.chunks_exact_mut(self.piece.width).enumerate() {
            out.iter_mut().zip(self.row::<T>(r)).for_each(|(o, v)| *o &= keep(v));
        }
    }
}

/// A sample type as the machine holds it.
trait Sample: Copy + PartialEq {
    const BYTES: usize;
    const FLOAT: bool;
    fn from_ne(bytes: &[u8]) -> Self;
    fn wide(self) -> f64;
    fn narrow(self) -> f32;
    /// Finite and below the fill values of writers.
    fn is_number(self) -> bool;
    /// The nodata value as this type holds it; `None` when every such sample is no number anyway.
    fn from_nodata(value: f64) -> Option<Self>;
}

macro_rules! whole_number {
    ($($type:ty),*) => {$(
        impl Sample for $type {
            const BYTES: usize = size_of::<$type>();
            const FLOAT: bool = false;
            fn from_ne(bytes: &[u8]) -> Self {
                let mut cell = [0; size_of::<$type>()];
                cell.copy_from_slice(bytes);
                Self::from_ne_bytes(cell)
            }
            fn wide(self) -> f64 {
                f64::from(self)
            }
            fn narrow(self) -> f32 {
                self as f32
            }
            fn is_number(self) -> bool {
                true
            }
            fn from_nodata(value: f64) -> Option<Self> {
                Some(value as $type)
            }
        }
    )*};
}
whole_number!(u8, i8, u16, i16, u32, i32);

macro_rules! real_number {
    ($($type:ty, $to_f32:expr, $from:expr);*) => {$(
        impl Sample for $type {
            const BYTES: usize = size_of::<$type>();
            const FLOAT: bool = true;
            fn from_ne(bytes: &[u8]) -> Self {
                let mut cell = [0; size_of::<$type>()];
                cell.copy_from_slice(bytes);
                Self::from_ne_bytes(cell)
            }
            fn wide(self) -> f64 {
                f64::from(self)
            }
            fn narrow(self) -> f32 {
                $to_f32(self)
            }
            fn is_number(self) -> bool {
                f64::from(self).abs() < HUGE
            }
            fn from_nodata(value: f64) -> Option<Self> {
                (value.abs() < HUGE).then(|| $from(value))
            }
        }
    )*};
}
real_number!(f16, f32::from, f16::from_f64; f32, |v| v, |v| v as f32; f64, |v| v as f32, |v| v);
