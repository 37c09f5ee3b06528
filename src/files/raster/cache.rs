//! Decoded strips and tiles, kept up to a number of bytes; the least recently used go first.

use std::collections::{BTreeMap, HashMap};
use std::sync::{Arc, Mutex, MutexGuard};

/// Image number and chunk number within one raster.
type Key = (usize, usize);

#[derive(Debug)]
pub(super) struct ChunkCache {
    budget: usize,
    inner: Mutex<Inner>,
}

#[derive(Debug, Default)]
struct Inner {
    chunks: HashMap<Key, (Arc<Vec<u8>>, u64)>,
    by_age: BTreeMap<u64, Key>,
    bytes: usize,
    clock: u64,
}

impl ChunkCache {
    pub(super) fn new(budget: usize) -> Self {
        Self { budget, inner: Mutex::default() }
    }

    pub(super) fn get(&self, key: Key) -> Option<Arc<Vec<u8>>> {
        let inner = &mut *self.lock();
        let (bytes, age) = inner.chunks.get_mut(&key)?;
        inner.clock += 1;
        inner.by_age.remove(age);
        *age = inner.clock;
        inner.by_age.insert(inner.clock, key);
        Some(bytes.clone())
    }

    /// Keeps a chunk, unless it alone passes half the budget.
    pub(super) fn put(&self, key: Key, bytes: &Arc<Vec<u8>>) {
        if bytes.len() > self.budget / 2 {
            return;
        }
        let inner = &mut *self.lock();
        inner.clock += 1;
        if let Some((old, age)) = inner.chunks.insert(key, (bytes.clone(), inner.clock)) {
            inner.by_age.remove(&age);
            inner.bytes -= old.len();
        }
        inner.by_age.insert(inner.clock, key);
        inner.bytes += bytes.len();
        while inner.bytes > self.budget
            && let Some((_, oldest)) = inner.by_age.pop_first()
        {
            if let Some((gone, _)) = inner.chunks.remove(&oldest) {
                inner.bytes -= gone.len();
            }
        }
    }

    fn lock(&self) -> MutexGuard<'_, Inner> {
        self.inner.lock().unwrap_or_else(|poisoned| poisoned.into_inner())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_least_recently_used_chunk_goes_first() {
        let cache = ChunkCache::new(100);
        let chunk = Arc::new(vec![0u8; 40]);
        cache.put((0, 1), &chunk);
        cache.put((0, 2), &chunk);
        assert!(cache.get((0, 1)).is_some());
        cache.put((0, 3), &chunk);
        assert!(cache.get((0, 2)).is_none() && cache.get((0, 1)).is_some() && cache.get((0, 3)).is_some());
        cache.put((0, 4), &Arc::new(vec![0u8; 60]));
        assert!(cache.get((0, 4)).is_none(), "a chunk past half the budget is not kept");
    }
}
