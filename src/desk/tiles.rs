//! Tiles of a raster for the table: asked for in one frame, collected in a later one, read on
//! background threads, kept within a bound.
//!
//! A tile holds values, not colours: a change of tone needs no reading.

use std::collections::{HashMap, HashSet, VecDeque};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::atomic::{AtomicU64, Ordering};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread;

use crate::ground::{Grid, Work};

/// Side of a tile, texels.
pub const TILE: usize = 256;

/// Tiles kept: about 130 MB of values and masks.
const KEPT: usize = 400;
/// Background threads of one shelf.
const READERS: usize = 2;

static NEXT_SERIAL: AtomicU64 = AtomicU64::new(1);

/// A tile: texels of 2^level × 2^level pixels, `TILE` a side, counted from the upper left corner.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct TileKey {
    pub level: u8,
    pub col: u32,
    pub row: u32,
}

/// Where the values come from.
pub trait TileReader: Send + Sync {
    /// Full-resolution width and height, pixels.
    fn size(&self) -> [usize; 2];

    /// The values of one tile, smaller than `TILE` a side at the right and lower edge.
    ///
    /// # Errors
    /// Why it could not be read, for the user.
    fn read(&self, key: TileKey, work: &Work) -> Result<Grid<f32>, String>;
}

/// Tiles at hand, tiles under way, and the threads that read them. Dropping it stops them.
pub struct TileShelf {
    serial: u64,
    size: [usize; 2],
    shared: Arc<Shared>,
}

struct Shared {
    state: Mutex<State>,
    news: Condvar,
    work: Work,
}

#[derive(Default)]
struct State {
    tiles: HashMap<TileKey, (Arc<Grid<f32>>, u64)>,
    wanted: VecDeque<TileKey>,
    under_way: HashSet<TileKey>,
    /// Not asked for again.
    failed: HashSet<TileKey>,
    failure: Option<String>,
    clock: u64,
    closed: bool,
}

impl TileKey {
    /// Pixels a texel.
    pub fn factor(self) -> usize {
        1 << self.level
    }

    /// Full-resolution box [col0, row0, col1, row1), cut at the raster's edge.
    pub fn pixels(self, [width, height]: [usize; 2]) -> [usize; 4] {
        let side = TILE << self.level;
        let (col, row) = (self.col as usize * side, self.row as usize * side);
        [col.min(width), row.min(height), (col + side).min(width), (row + side).min(height)]
    }

    /// The tile one level coarser that covers this one.
    pub fn parent(self) -> Self {
        Self { level: self.level + 1, col: self.col / 2, row: self.row / 2 }
    }

    /// The first level whose longer side has at most `texels` texels.
    pub fn level_within(size: [usize; 2], texels: usize) -> u8 {
        let longer = size[0].max(size[1]);
        (0..63).find(|level| longer.div_ceil(1 << level) <= texels).unwrap_or(63)
    }

    /// Tile columns and rows of a level.
    pub fn counts(size: [usize; 2], level: u8) -> [u32; 2] {
        size.map(|side| side.div_ceil(TILE << level) as u32)
    }

    /// All tiles of a level, row by row.
    pub fn all(size: [usize; 2], level: u8) -> impl Iterator<Item = Self> {
        let [cols, rows] = Self::counts(size, level);
        (0..rows).flat_map(move |row| (0..cols).map(move |col| Self { level, col, row }))
    }
}

impl TileShelf {
    /// Starts the reading threads; `wake` is called from them when a tile has come.
    pub fn new(reader: Arc<dyn TileReader>, wake: Arc<dyn Fn() + Send + Sync>) -> Self {
        let shared =
            Arc::new(Shared { state: Mutex::default(), news: Condvar::new(), work: Work::default() });
        let size = reader.size();
        for _ in 0..READERS {
            let (shared, reader, wake) = (Arc::clone(&shared), Arc::clone(&reader), Arc::clone(&wake));
            thread::spawn(move || {
                while let Some(key) = shared.next() {
                    // A reader that panics costs one tile, not the window.
                    let read = catch_unwind(AssertUnwindSafe(|| reader.read(key, &shared.work)));
                    shared.put(key, read.unwrap_or_else(|_| Err("the reader broke down".into())));
                    wake();
                }
            });
        }
        Self { serial: NEXT_SERIAL.fetch_add(1, Ordering::Relaxed), size, shared }
    }

    /// Tells this shelf from every other of this run, so that what was made of its tiles is not
    /// taken for another's.
    pub fn serial(&self) -> u64 {
        self.serial
    }

    /// Full-resolution width and height, pixels.
    pub fn size(&self) -> [usize; 2] {
        self.size
    }

    /// The tile if it is at hand.
    pub fn get(&self, key: TileKey) -> Option<Arc<Grid<f32>>> {
        let mut state = self.shared.lock();
        state.clock += 1;
        let now = state.clock;
        let (tile, used) = state.tiles.get_mut(&key)?;
        *used = now;
        Some(Arc::clone(tile))
    }

    /// The value of the pixel at full-resolution (col, row), from the finest tile at hand, and the
    /// pixels a texel of that tile. `None` where nothing is at hand or the pixel is missing.
    pub fn value_at(&self, col: usize, row: usize) -> Option<(f32, usize)> {
        if col >= self.size[0] || row >= self.size[1] {
            return None;
        }
        let state = self.shared.lock();
        let (key, tile) = (0..=TileKey::level_within(self.size, TILE)).find_map(|level| {
            let side = TILE << level;
            let key = TileKey { level, col: (col / side) as u32, row: (row / side) as u32 };
            Some((key, &state.tiles.get(&key)?.0))
        })?;
        let side = TILE << key.level;
        Some((tile.get((col % side) >> key.level, (row % side) >> key.level)?, key.factor()))
    }

    /// Replaces what is waiting to be read by `keys`, the most urgent first. Tiles at hand, under
    /// way or known to fail are passed over.
    pub fn want(&self, keys: impl IntoIterator<Item = TileKey>) {
        let mut state = self.shared.lock();
        state.wanted = keys.into_iter().filter(|key| state.is_missing(*key)).collect();
        if !state.wanted.is_empty() {
            self.shared.news.notify_all();
        }
    }

    /// Whether nothing is waiting or under way.
    pub fn is_idle(&self) -> bool {
        let state = self.shared.lock();
        state.wanted.is_empty() && state.under_way.is_empty()
    }

    /// Why a tile could not be read, told once.
    pub fn take_failure(&self) -> Option<String> {
        self.shared.lock().failure.take()
    }
}

impl Drop for TileShelf {
    fn drop(&mut self) {
        self.shared.lock().closed = true;
        self.shared.work.stop();
        self.shared.news.notify_all();
    }
}

impl std::fmt::Debug for TileShelf {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("TileShelf").field("size", &self.size).finish_non_exhaustive()
    }
}

impl Shared {
    /// No code panics while holding the lock, so a poisoned one still guards a sound state.
    fn lock(&self) -> MutexGuard<'_, State> {
        self.state.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Waits for the next tile to read; `None` when the shelf is gone.
    fn next(&self) -> Option<TileKey> {
        let mut state = self.lock();
        loop {
            if state.closed {
                return None;
            }
            if let Some(key) = state.wanted.pop_front() {
                state.under_way.insert(key);
                return Some(key);
            }
            state = self.news.wait(state).unwrap_or_else(PoisonError::into_inner);
        }
    }

    fn put(&self, key: TileKey, read: Result<Grid<f32>, String>) {
        let mut state = self.lock();
        state.under_way.remove(&key);
        match read {
            Ok(tile) => {
                state.clock += 1;
                let now = state.clock;
                state.tiles.insert(key, (Arc::new(tile), now));
                state.shed();
            }
            Err(why) if !state.closed => {
                state.failed.insert(key);
                state.failure.get_or_insert(why);
            }
            Err(_) => {}
        }
    }
}

impl State {
    fn is_missing(&self, key: TileKey) -> bool {
        !self.tiles.contains_key(&key) && !self.under_way.contains(&key) && !self.failed.contains(&key)
    }

    /// Drops the tiles not looked at for longest.
    fn shed(&mut self) {
        while self.tiles.len() > KEPT {
            let oldest = self.tiles.iter().min_by_key(|(_, (_, used))| *used).map(|(key, _)| *key);
            oldest.map(|key| self.tiles.remove(&key));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{KEPT, TILE, TileKey, TileReader, TileShelf};
    use crate::ground::{Grid, Work};
    use std::sync::Arc;
    use std::time::{Duration, Instant};

    struct Ramp([usize; 2]);

    impl TileReader for Ramp {
        fn size(&self) -> [usize; 2] {
            self.0
        }

        fn read(&self, key: TileKey, _: &Work) -> Result<Grid<f32>, String> {
            if key.row == 7 {
                std::panic::resume_unwind(Box::new("row 7 is cursed"));
            }
            if key.row == 6 {
                return Err(format!("row {} is torn", key.row));
            }
            Ok(Grid::filled(1, 1, key.col as f32))
        }
    }

    fn settled(shelf: &TileShelf) {
        let end = Instant::now() + Duration::from_secs(20);
        while !shelf.is_idle() {
            assert!(Instant::now() < end, "the shelf never came to rest");
            std::thread::sleep(Duration::from_millis(1));
        }
    }

    #[test]
    fn tiles_come_later_and_stay() {
        let shelf = TileShelf::new(Arc::new(Ramp([5000, 3000])), Arc::new(|| ()));
        let key = TileKey { level: 0, col: 3, row: 0 };
        assert!(shelf.get(key).is_none());
        shelf.want([key]);
        settled(&shelf);
        assert_eq!(shelf.get(key).unwrap().at(0, 0), 3.0);
    }

    #[test]
    fn a_torn_tile_is_told_once_and_not_asked_for_again() {
        let shelf = TileShelf::new(Arc::new(Ramp([5000, 3000])), Arc::new(|| ()));
        let torn = TileKey { level: 0, col: 0, row: 6 };
        shelf.want([torn]);
        settled(&shelf);
        assert_eq!(shelf.take_failure().as_deref(), Some("row 6 is torn"));
        shelf.want([torn, TileKey { row: 7, ..torn }]);
        settled(&shelf);
        assert_eq!(shelf.take_failure().as_deref(), Some("the reader broke down"));
    }

    #[test]
    fn the_shelf_is_bounded_and_keeps_what_is_looked_at() {
        let shelf = TileShelf::new(Arc::new(Ramp([1 << 20, 256])), Arc::new(|| ()));
        let key = |col| TileKey { level: 0, col, row: 0 };
        shelf.want([key(0)]);
        settled(&shelf);
        for start in 0..3 {
            assert!(shelf.get(key(0)).is_some(), "the tile on the table was dropped");
            let from = 1 + start * (KEPT as u32 - 10);
            shelf.want((from..from + KEPT as u32 - 10).map(key));
            settled(&shelf);
        }
        let kept = (0..2000).filter(|col| shelf.get(key(*col)).is_some()).count();
        assert_eq!(kept, KEPT);
    }

    #[test]
    fn keys_cover_the_raster() {
        let size = [1000, 300];
        assert_eq!(TileKey::level_within(size, TILE), 2);
        assert_eq!(TileKey::counts(size, 0), [4, 2]);
        let area: usize = TileKey::all(size, 0)
            .map(|key| key.pixels(size))
            .map(|[col0, row0, col1, row1]| (col1 - col0) * (row1 - row0))
            .sum();
        assert_eq!(area, 300_000);
        let key = TileKey { level: 1, col: 5, row: 3 };
        assert_eq!(key.parent(), TileKey { level: 2, col: 2, row: 1 });
    }
}
