//! The raster on the table: tiles in colours, coarse first, then sharp, within a bound.

use std::collections::HashMap;
use std::sync::Arc;

use egui::pos2;
use egui::{Color32, Painter, Rect, Shape, Stroke, TextureFilter, TextureHandle, TextureOptions};

use crate::desk::{TILE, TileKey, TileShelf};
use crate::ground::{Bounds, Grid, Point};
use crate::study::Tone;

use super::ink::Ink;
use super::lens::Lens;
use super::tone::{ToneCurve, ToneSample};

/// Textures kept, 256 kB each.
const KEPT: usize = 320;
/// Tiles turned into textures in one frame; the rest come in the next ones.
const PER_FRAME: usize = 24;
/// Tiles in sight and round it, up to which the ring round it is read ahead.
const MOST_AHEAD: usize = 200;
/// Texels of the level the tone is read from, longer side.
const TONE_TEXELS: usize = 1024;
/// Values the percentiles are read from.
const TONE_VALUES: usize = 200_000;
/// From this many points a pixel on, pixels are shown as squares.
const SQUARE_PIXELS: f64 = 3.0;
/// Points between hatch lines over missing pixels.
const HATCH: f32 = 7.0;

/// Textures of one raster; everything here can be rebuilt from the shelf.
#[derive(Default)]
pub struct TileTextures {
    /// Which shelf and tone the textures show.
    shelf: Option<u64>,
    tone: Option<Tone>,
    sample: ToneSample,
    /// Tiles the sample was taken from.
    sampled: usize,
    curve: Option<ToneCurve>,
    /// Counts the curves, so that textures of an older one can be told.
    curves: u64,
    textures: HashMap<TileKey, Entry>,
    frame: u64,
}

struct Entry {
    handle: TextureHandle,
    /// Side lengths, texels.
    size: [usize; 2],
    has_gaps: bool,
    square: bool,
    curve: u64,
    used: u64,
}

/// A piece of the picture: a box of pixels and the tile it is taken from.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Piece {
    key: TileKey,
    /// Full-resolution box to cover.
    cover: Bounds,
}

/// The level whose texels are nearest to screen points in size.
fn level_for(scale: f64, coarsest: u8) -> u8 {
    (-scale.log2()).round().clamp(0.0, f64::from(coarsest)) as u8
}

/// The tiles of a level that touch `part`, the nearest to its middle first.
fn tiles_within(part: Bounds, size: [usize; 2], level: u8) -> Vec<TileKey> {
    let side = (TILE << level) as f64;
    let [cols, rows] = TileKey::counts(size, level);
    let range = |min: f64, max: f64, count: u32| {
        ((min / side).floor().max(0.0) as u32)..((max / side).ceil().max(0.0) as u32).min(count)
    };
    let mut keys: Vec<TileKey> = range(part.min.y, part.max.y, rows)
        .flat_map(|row| range(part.min.x, part.max.x, cols).map(move |col| TileKey { level, col, row }))
        .collect();
    let middle = part.centre();
    let distance = |key: &TileKey| {
        Point::new((f64::from(key.col) + 0.5) * side, (f64::from(key.row) + 0.5) * side).distance(middle)
    };
    keys.sort_by(|a, b| distance(a).total_cmp(&distance(b)));
    keys
}

impl TileTextures {
    /// Draws what is at hand of the raster and asks the shelf for the rest. Returns whether more
    /// could be drawn at once in another frame.
    pub fn draw(
        &mut self,
        painter: &Painter,
        shelf: &TileShelf,
        tone: &Tone,
        lens: &Lens,
        ink: &Ink,
    ) -> bool {
        self.frame += 1;
        let size = shelf.size();
        let Some(part) = lens.visible_raster(size) else { return false };
        let coarsest = TileKey::level_within(size, TILE);
        let level = level_for(lens.per_col.min(lens.per_row), coarsest);
        let sharp = tiles_within(part, size, level);
        self.retune(shelf, tone, coarsest);
        self.order(shelf, &sharp, part, coarsest);

        painter.rect_filled(lens.rect(part), 0.0, ink.blank);
        let square = level == 0 && lens.per_col >= SQUARE_PIXELS;
        let mut budget = PER_FRAME;
        let pieces: Vec<Piece> = sharp
            .iter()
            .filter_map(|key| {
                let [col0, row0, col1, row1] = key.pixels(size).map(|v| v as f64);
                let cover = Bounds { min: Point::new(col0, row0), max: Point::new(col1, row1) };
                let lineage = std::iter::successors(Some(*key), |key| Some(key.parent()));
                lineage
                    .take(usize::from(coarsest - level) + 1)
                    .find(|key| self.prepare(painter, shelf, *key, square && key.level == 0, &mut budget))
                    .map(|key| Piece { key, cover })
            })
            .collect();
        for piece in pieces {
            self.paint(painter, piece, lens, ink);
        }
        self.shed();
        budget == 0
    }

    /// Brings tone sample and curve up to date. Textures of another raster are dropped; those of
    /// another tone stay until they are made anew, so that nothing flickers.
    fn retune(&mut self, shelf: &TileShelf, tone: &Tone, coarsest: u8) {
        if self.shelf != Some(shelf.serial()) {
            *self = Self { shelf: Some(shelf.serial()), frame: self.frame, ..Self::default() };
        }
        let level = TileKey::level_within(shelf.size(), TONE_TEXELS);
        let all: Vec<TileKey> = TileKey::all(shelf.size(), level).collect();
        if self.sampled < all.len() {
            let mut tiles: Vec<Arc<Grid<f32>>> = all.iter().filter_map(|key| shelf.get(*key)).collect();
            if tiles.len() < all.len() {
                // Until all have come, the coarsest tile stands for them.
                tiles = shelf.get(TileKey { level: coarsest, col: 0, row: 0 }).into_iter().collect();
            }
            if tiles.len() > self.sampled {
                self.sample = ToneSample::of(tiles.iter().map(Arc::as_ref), TONE_VALUES);
                self.sampled = tiles.len();
                self.tone = None;
            }
        }
        if self.tone != Some(*tone) && !self.sample.is_empty() {
            self.curve = Some(ToneCurve::new(tone, &self.sample));
            self.tone = Some(*tone);
            self.curves += 1;
        }
    }

    /// Tells the shelf what to read next: the coarsest tile, what is in sight, what the tone needs,
    /// and last the ring round what is in sight.
    fn order(&self, shelf: &TileShelf, sharp: &[TileKey], part: Bounds, coarsest: u8) {
        let size = shelf.size();
        let tone_level = TileKey::level_within(size, TONE_TEXELS);
        let toning = (self.sampled < TileKey::all(size, tone_level).count())
            .then(|| TileKey::all(size, tone_level))
            .into_iter()
            .flatten();
        let level = sharp.first().map_or(coarsest, |key| key.level);
        let reach = (TILE << level) as f64;
        let around = Bounds {
            min: Point::new(part.min.x - reach, part.min.y - reach),
            max: Point::new(part.max.x + reach, part.max.y + reach),
        };
        let coarse = TileKey { level: coarsest, col: 0, row: 0 };
        // What has its texture needs no values; a ring that would crowd the shelf is not read ahead.
        let is_current = |key: &TileKey| {
            self.textures.get(key).is_some_and(|entry| self.curve.is_none() || entry.curve == self.curves)
        };
        let seen = sharp.iter().copied().filter(|key| !is_current(key));
        let ring = tiles_within(around, size, level);
        let ring = if ring.len() <= MOST_AHEAD { ring } else { Vec::new() };
        let ahead = ring.into_iter().filter(|key| !sharp.contains(key) && !is_current(key));
        shelf.want(std::iter::once(coarse).chain(seen).chain(toning).chain(ahead));
    }

    /// Makes the tile's texture if it is not there or of another tone, and the frame's budget
    /// allows; whether it can be painted.
    fn prepare(
        &mut self,
        painter: &Painter,
        shelf: &TileShelf,
        key: TileKey,
        square: bool,
        budget: &mut usize,
    ) -> bool {
        let known = self.textures.get_mut(&key);
        let is_known = known.is_some();
        if let Some(entry) = known {
            entry.used = self.frame;
            if entry.square == square && entry.curve == self.curves {
                return true;
            }
        }
        if *budget == 0 {
            return is_known;
        }
        let (Some(curve), Some(tile)) = (&self.curve, shelf.get(key)) else { return is_known };
        *budget -= 1;
        let image = curve.image(&tile);
        let size = image.size;
        let has_gaps = image.pixels.contains(&Color32::TRANSPARENT);
        let magnification = if square { TextureFilter::Nearest } else { TextureFilter::Linear };
        let options = TextureOptions { magnification, ..TextureOptions::LINEAR };
        let handle = painter.ctx().load_texture("tile", image, options);
        let entry = Entry { handle, size, has_gaps, square, curve: self.curves, used: self.frame };
        self.textures.insert(key, entry);
        true
    }

    fn paint(&self, painter: &Painter, piece: Piece, lens: &Lens, ink: &Ink) {
        let Some(entry) = self.textures.get(&piece.key) else { return };
        let rect = lens.rect(piece.cover);
        if entry.has_gaps {
            hatch(painter, rect, ink);
        }
        let factor = piece.key.factor() as f64;
        let [left, top] = [piece.key.col, piece.key.row].map(|i| f64::from(i) * TILE as f64 * factor);
        let u = |col: f64| ((col - left) / (factor * entry.size[0] as f64)) as f32;
        let v = |row: f64| ((row - top) / (factor * entry.size[1] as f64)) as f32;
        let Bounds { min, max } = piece.cover;
        let uv = Rect::from_min_max(pos2(u(min.x), v(min.y)), pos2(u(max.x), v(max.y)));
        painter.image(entry.handle.id(), rect, uv, Color32::WHITE);
    }

    /// Drops the textures not shown for longest.
    fn shed(&mut self) {
        if self.textures.len() > KEPT {
            let mut used: Vec<u64> = self.textures.values().map(|entry| entry.used).collect();
            used.sort_unstable();
            let oldest_kept = used[used.len() - KEPT].min(self.frame);
            self.textures.retain(|_, entry| entry.used >= oldest_kept);
        }
    }
}

/// Fine slanted lines on paper: no pixels here. The lines run on from tile to tile.
fn hatch(painter: &Painter, rect: Rect, ink: &Ink) {
    let rect = rect.intersect(painter.clip_rect());
    if !rect.is_positive() {
        return;
    }
    let stroke = Stroke::new(1.0, ink.rule);
    let first = ((rect.min.x + rect.min.y) / HATCH).ceil() as i64;
    let last = ((rect.max.x + rect.max.y) / HATCH).floor() as i64;
    let lines = (first..=last).map(|i| {
        // x + y = sum, cut to the box.
        let sum = i as f32 * HATCH;
        let (x0, x1) = ((sum - rect.max.y).max(rect.min.x), (sum - rect.min.y).min(rect.max.x));
        Shape::LineSegment { points: [pos2(x0, sum - x0), pos2(x1, sum - x1)], stroke }
    });
    painter.extend(lines);
}

#[cfg(test)]
mod tests {
    use super::{level_for, tiles_within};
    use crate::desk::TileKey;
    use crate::ground::{Bounds, Point};

    #[test]
    fn texels_are_about_as_large_as_points() {
        assert_eq!(level_for(1.0, 7), 0);
        assert_eq!(level_for(8.0, 7), 0);
        assert_eq!(level_for(0.5, 7), 1);
        assert_eq!(level_for(0.3, 7), 2);
        assert_eq!(level_for(1e-9, 7), 7);
    }

    #[test]
    fn visible_tiles_come_from_the_middle_outwards() {
        let part = Bounds { min: Point::new(300.0, 10.0), max: Point::new(1000.0, 700.0) };
        let keys = tiles_within(part, [20_000, 600], 0);
        assert_eq!(keys.len(), 9);
        assert_eq!(keys[0], TileKey { level: 0, col: 2, row: 1 });
        assert!(keys.iter().all(|k| (1..4).contains(&k.col) && k.row < 3));
    }
}
